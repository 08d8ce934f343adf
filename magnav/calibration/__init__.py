"""Calibration of a magnetometer: hard and soft iron from a log, with a verdict."""

from .calibrate import calibrate
from .calibration import Calibration

__all__ = ["Calibration", "calibrate"]
