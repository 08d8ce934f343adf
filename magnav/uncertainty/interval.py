"""95 % intervals of a direction: wrapped on the circle, or none where the interval covers it."""

import numpy as np

# two-sided 95 % of a normal distribution
COVERAGE_95 = 1.959963984540054


def half_width_95_deg(sigma_deg):
    """Half width of the 95 % interval, degrees."""
    return COVERAGE_95 * np.asarray(sigma_deg)[()]


def covers_circle(sigma_deg):
    """Whether the 95 % interval covers the whole circle."""
    return half_width_95_deg(sigma_deg) >= 180.0


def interval_95(direction_deg, sigma_deg):
    """Ends of the 95 % interval in [0, 360), clockwise from low to high; NaN where it covers the circle."""
    half = np.where(covers_circle(sigma_deg), np.nan, half_width_95_deg(sigma_deg))
    low, high = np.mod(direction_deg - half, 360.0)[()], np.mod(direction_deg + half, 360.0)[()]
    return low, high
