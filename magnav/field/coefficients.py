"""The one in-memory form of a model: Gauss coefficients as polynomials in time, piece by piece.

Every published time law (a constant, an epoch with a secular variation, snapshots joined by lines, B-splines)
is brought to this form by its reader, so that the evaluator needs one rule only.
"""

from dataclasses import dataclass

import numpy as np

from ..errors import InputError


def term_count(degree):
    """Number of Gauss coefficients of a model complete from degree 1 to `degree`."""
    return degree * (degree + 2)


def term_index(n, m, sine=False):
    """Place of g(n,m), or of h(n,m) with `sine`, in the order g10 g11 h11 g20 g21 h21 g22 h22 ..."""
    return n * n - 1 + (0 if m == 0 else 2 * m - 1 + bool(sine))


@dataclass(frozen=True, eq=False)
class Coefficients:
    """Schmidt semi-normalised Gauss coefficients, reference radius 6371.2 km.

    Within piece i, from ``breaks_yr[i]`` to ``breaks_yr[i + 1]``, each coefficient is
    ``sum_k polynomials[i, k] * (t - breaks_yr[i]) ** k`` with t in decimal years; the first and the last piece
    also serve for extrapolation. A model constant in time has one piece of order 1.

    breaks_yr: (pieces + 1,) increasing, decimal years.
    polynomials: (pieces, order, degree * (degree + 2)), nT, nT/yr, nT/yr^2 ..., in the order of `term_index`.
    epoch_yr: the date the published main coefficients refer to (the first one, for a series of them).
    valid_from_yr, valid_until_yr: both ends belong to the validity; infinite for a model constant in time.
    """

    name: str
    source: str
    degree: int
    epoch_yr: float
    valid_from_yr: float
    valid_until_yr: float
    breaks_yr: np.ndarray
    polynomials: np.ndarray

    def __post_init__(self):
        pieces, order, terms = self.polynomials.shape
        if self.breaks_yr.shape != (pieces + 1,) or terms != term_count(self.degree) or order < 1:
            raise InputError(f"model {self.name}: breaks {self.breaks_yr.shape} and polynomials "
                             f"{self.polynomials.shape} do not fit degree {self.degree}")
        for array in (self.breaks_yr, self.polynomials):
            array.setflags(write=False)
