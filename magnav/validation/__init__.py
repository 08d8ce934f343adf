"""Validation of a compass module: its deviation curve, how well it repeats, its noise."""

from .deviation import DeviationCurve, approximate_coefficients, fit_deviation
from .noise import allan_deviation
from .runs import Runs, compare_runs

__all__ = ["DeviationCurve", "Runs", "allan_deviation", "approximate_coefficients", "compare_runs", "fit_deviation"]
