"""Noise of a module at rest by the Allan deviation: what averaging gains, and where it stops to gain."""

import numpy as np

from ..errors import InputError


def allan_deviation(values, rate_hz, averages=None):
    """Overlapping Allan deviation of evenly sampled values (NIST SP 1065, W. J. Riley, 2008, eq. 11).

    values: (n,) in any unit; headings must be unwrapped. rate_hz: samples a second. averages: numbers of samples to
    average over; by default powers of two up to a third of the record.
    Returns (tau_s, deviation), both (k,). Raises InputError.
    """
    y = np.asarray(values, dtype=np.float64)
    if y.ndim != 1 or len(y) < 3 or not np.all(np.isfinite(y)):
        raise InputError("values must be at least three finite numbers of shape (n,)")
    if not rate_hz > 0:
        raise InputError("rate_hz must be positive")
    if averages is None:
        averages = 2 ** np.arange(int(np.log2(max(len(y) // 3, 1))) + 1)
    averages = np.asarray(averages, dtype=int)
    if np.any(averages < 1) or np.any(2 * averages > len(y)):
        raise InputError(f"averages must lie between 1 and half of the {len(y)} values")
    total = np.concatenate([[0.0], np.cumsum(y)])
    out = []
    for m in averages:
        mean = (total[m:] - total[:-m]) / m
        out.append(np.sqrt(0.5 * np.mean((mean[m:] - mean[:-m]) ** 2)))
    return averages / rate_hz, np.array(out)
