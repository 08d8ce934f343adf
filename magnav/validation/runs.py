"""How a module repeats: the same headings again, and approached from the other side."""

import dataclasses

import numpy as np

from ..errors import InputError


@dataclasses.dataclass(frozen=True)
class Runs:
    """hysteresis_deg: mean of clockwise minus anticlockwise readings at the same reference heading, and its standard
    uncertainty `hysteresis_sigma_deg`; largest_hysteresis_deg, at largest_at_deg. repeatability_deg: pooled standard
    deviation of readings at the same heading in the same sense. NaN where the readings cannot tell."""

    hysteresis_deg: float
    hysteresis_sigma_deg: float
    largest_hysteresis_deg: float
    largest_at_deg: float
    repeatability_deg: float


def compare_runs(reference_deg, reading_deg, clockwise, same_deg=0.5):
    """Compare runs of readings over reference headings.

    reference_deg, reading_deg: (n,) degrees. clockwise: (n,) booleans, the sense in which each heading was approached.
    same_deg: references closer than this are the same mark. Raises InputError.
    """
    reference, reading = (np.asarray(v, dtype=np.float64) for v in (reference_deg, reading_deg))
    sense = np.asarray(clockwise, dtype=bool)
    if reference.ndim != 1 or not reference.shape == reading.shape == sense.shape:
        raise InputError("reference_deg, reading_deg and clockwise must be (n,) each")
    if not np.all(np.isfinite(reference) & np.isfinite(reading)):
        raise InputError("headings must be finite")
    error = np.mod(reading - reference + 180.0, 360.0) - 180.0
    mark = _marks(reference, same_deg)
    differences, places, squares, freedom = [], [], 0.0, 0
    for m in range(mark.max() + 1):
        here = mark == m
        means = []
        for way in (True, False):
            group = error[here & (sense == way)]
            if group.size:
                means.append(group.mean())
                squares += float(np.sum((group - group.mean()) ** 2))
                freedom += group.size - 1
        if len(means) == 2:
            differences.append(means[0] - means[1])
            places.append(reference[here][0])
    repeat = np.sqrt(squares / freedom) if freedom else np.nan
    if not differences:
        return Runs(np.nan, np.nan, np.nan, np.nan, float(repeat))
    differences = np.array(differences)
    spread = differences.std(ddof=1) / np.sqrt(len(differences)) if len(differences) > 1 else np.nan
    worst = int(np.argmax(np.abs(differences)))
    return Runs(float(differences.mean()), float(spread), float(differences[worst]), float(places[worst]),
                float(repeat))


def _marks(reference, same_deg):
    """A number for each reference heading, equal for those closer than same_deg on the circle."""
    order = np.argsort(np.mod(reference, 360.0), kind="stable")
    turned = np.mod(reference, 360.0)[order]
    mark = np.empty(len(reference), dtype=int)
    mark[order] = np.concatenate([[0], np.cumsum(np.diff(turned) > same_deg)])
    if mark.max() > 0 and turned[0] + 360.0 - turned[-1] <= same_deg:
        mark[mark == mark.max()] = 0
    return mark
