"""A compass's deviation as a curve of its heading: coefficients A to E with their uncertainty, and the card.

    deviation = A + B sin z + C cos z + D sin 2z + E cos 2z,   z the compass heading, deviation east positive

(Archibald Smith's formula; Handbook of Magnetic Compass Adjustment, formerly Pub. 226, ch. V).
magnetic heading = compass heading + deviation.
"""

import dataclasses

import numpy as np

from ..errors import InputError

NAMES = ("A", "B", "C", "D", "E")
FEWEST = 6
# the worst-determined combination of coefficients may be this many times less certain than evenly spaced headings give
LARGEST_DILUTION = 5.0
ROUNDS = 50


def _columns(heading_deg):
    z = np.radians(np.asarray(heading_deg, dtype=np.float64))
    return np.stack([np.ones_like(z), np.sin(z), np.cos(z), np.sin(2 * z), np.cos(2 * z)], axis=-1)


@dataclasses.dataclass(frozen=True)
class DeviationCurve:
    """Coefficients A to E in degrees (5,), their covariance (5, 5) in degrees squared, the residuals of the headings
    they were fitted to (n,), and the standard deviation of one of these, `sigma_deg` (the degrees of freedom counted).
    """

    coefficients_deg: np.ndarray
    covariance: np.ndarray
    residual_deg: np.ndarray
    sigma_deg: float

    @property
    def named(self):
        """{"A": (value, standard uncertainty), ...} in degrees."""
        sigma = np.sqrt(np.diag(self.covariance))
        return {name: (float(v), float(s)) for name, v, s in zip(NAMES, self.coefficients_deg, sigma, strict=True)}

    def deviation_deg(self, compass_deg):
        """Deviation at compass headings, east positive."""
        return (_columns(compass_deg) @ self.coefficients_deg)[()]

    def deviation_sigma_deg(self, compass_deg):
        """Standard uncertainty of the curve at compass headings (that of one reading is not in it)."""
        columns = _columns(compass_deg)
        return np.sqrt(np.einsum("...i,ij,...j->...", columns, self.covariance, columns))[()]

    def magnetic_deg(self, compass_deg):
        """Magnetic heading of a compass heading, in [0, 360)."""
        return np.mod(compass_deg + self.deviation_deg(compass_deg), 360.0)[()]

    def compass_deg(self, magnetic_deg):
        """Compass heading to steer for a magnetic heading, in [0, 360).

        Raises InputError where the curve is so steep that a magnetic heading has more than one compass heading.
        """
        slope = np.radians(self.coefficients_deg[1:]) * [1, 1, 2, 2]
        if np.hypot(*slope[:2]) + np.hypot(*slope[2:]) >= 1.0:
            raise InputError("the deviation changes by more than a degree a degree: no compass heading can be told")
        magnetic = np.asarray(magnetic_deg, dtype=np.float64)
        compass = magnetic - self.deviation_deg(magnetic)
        for _ in range(ROUNDS):
            compass = magnetic - self.deviation_deg(compass)
        return np.mod(compass, 360.0)[()]

    def card(self, step_deg=15.0):
        """The deviation card: an array (k, 3) of magnetic heading, compass heading to steer, deviation there."""
        magnetic = np.arange(0.0, 360.0, step_deg)
        compass = self.compass_deg(magnetic)
        return np.column_stack([magnetic, compass, self.deviation_deg(compass)])


def fit_deviation(compass_deg, magnetic_deg):
    """Deviation curve from compass headings and the magnetic headings they should have been.

    compass_deg, magnetic_deg: (n,) degrees, n at least 6, in any order and at any spacing that covers the circle.
    Returns `DeviationCurve` by least squares on the Fourier form, the readings' variance estimated from the residuals.
    Raises InputError for shapes, values that are not finite, too few headings, or a part of the circle left out so that
    the coefficients cannot be told apart.
    """
    compass, magnetic = (np.asarray(v, dtype=np.float64) for v in (compass_deg, magnetic_deg))
    if compass.ndim != 1 or compass.shape != magnetic.shape:
        raise InputError(f"compass_deg and magnetic_deg must be (n,) each, not {compass.shape} and {magnetic.shape}")
    bad = np.flatnonzero(~(np.isfinite(compass) & np.isfinite(magnetic)))
    if bad.size:
        raise InputError(f"headings must be finite: row {bad[0]} is not")
    if len(compass) < FEWEST:
        raise InputError(f"{len(compass)} headings, where at least {FEWEST} are needed for five coefficients")
    columns = _columns(compass)
    information = columns.T @ columns
    even = np.diag([1.0, 0.5, 0.5, 0.5, 0.5]) * len(compass)
    dilution = np.sqrt(np.max(np.linalg.eigvalsh(even) / np.maximum(np.linalg.eigvalsh(information), 1e-12)))
    if dilution > LARGEST_DILUTION:
        gaps = np.diff(np.sort(np.append(np.mod(compass, 360), np.min(np.mod(compass, 360)) + 360)))
        raise InputError(f"the headings leave {gaps.max():.0f} degrees of the circle without a reading: the "
                         "coefficients cannot be told apart; spread the headings")
    deviation = np.mod(magnetic - compass + 180.0, 360.0) - 180.0
    # a large A must not wrap: take deviations about their mean direction
    middle = np.degrees(np.angle(np.mean(np.exp(1j * np.radians(deviation)))))
    deviation = middle + np.mod(deviation - middle + 180.0, 360.0) - 180.0
    inverse = np.linalg.inv(information)
    coefficients = inverse @ columns.T @ deviation
    residual = deviation - columns @ coefficients
    sigma = float(np.sqrt(residual @ residual / (len(compass) - len(NAMES))))
    return DeviationCurve(coefficients, inverse * sigma**2, residual, sigma)


def approximate_coefficients(deviation_deg):
    """A to E by the handbook's sums from deviations on the eight headings 000, 045, ..., 315 by compass.

    Handbook of Magnetic Compass Adjustment (formerly Pub. 226), ch. V. Returns {"A": degrees, ...}.
    """
    d = np.asarray(deviation_deg, dtype=np.float64)
    if d.shape != (8,) or not np.all(np.isfinite(d)):
        raise InputError("deviation_deg must be eight finite values, for the headings 000, 045, ... 315")
    north, northeast, east, southeast, south, southwest, west, northwest = d
    return {"A": float(d.mean()), "B": float((east - west) / 2), "C": float((north - south) / 2),
            "D": float((northeast - southeast + southwest - northwest) / 4),
            "E": float((north - east + south - west) / 4)}
