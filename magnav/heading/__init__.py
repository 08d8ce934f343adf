"""Headings of a sensor's forward axis from magnetic, true and grid north, each with its uncertainty."""

from .compute import Headings, compute_heading

__all__ = ["Headings", "compute_heading"]
