"""Calibration of a magnetometer: hard and soft iron from a log, with a verdict."""

from .calibration import Calibration
from .from_log import calibrate

__all__ = ["Calibration", "calibrate"]
