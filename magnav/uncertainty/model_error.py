"""One-sigma errors of a model's field: published figures within its validity, growing outside it.

The published figures (WMM technical report) hold what a core-field model leaves out, too: the crust and the ordinary
daily variation. They are one number per element; the declination's is sqrt(floor^2 + (k / H)^2).
"""

from dataclasses import dataclass, fields

import numpy as np

ELEMENTS = ("north_nT", "east_nT", "down_nT", "horizontal_nT", "total_nT", "declination_deg", "inclination_deg")

# Worldwide RMS growth per year of WMM2020's error, carried forward and held against IGRF-14, 2021 to 2025: the slope of
# the X, Y, Z columns (X 12.4 to 47.9 nT, Y 12.1 to 54.2, Z 20.3 to 86.9 in four years).
RATE_SIGMA_NT_PER_YR = (8.9, 10.5, 16.7)
# A forecast `age` years past its epoch errs by rate * age * (1 + (age - 5) / G): the growth itself grows once the five
# years of validity are over, as the field's rate changes. From IGRF-14's snapshots G is 18 to 31 years since 1980, 7 to
# 29 with the poorer slopes since 1950: tests/derive_extrapolation_growth.py.
FORECAST_YR = 5.0
GROWTH_DOUBLES_YR = 20.0


@dataclass(frozen=True)
class Sigma:
    """Standard uncertainty (one sigma) of each element of a field; floats, or arrays of the field's shape."""

    north_nT: object
    east_nT: object
    down_nT: object
    horizontal_nT: object
    total_nT: object
    declination_deg: object
    inclination_deg: object
    north_nT_per_yr: object
    east_nT_per_yr: object
    down_nT_per_yr: object
    horizontal_nT_per_yr: object
    total_nT_per_yr: object
    declination_deg_per_yr: object
    inclination_deg_per_yr: object


SIGMA_NAMES = tuple(f.name for f in fields(Sigma))


def model_sigma(error_model, years_outside, year, values):
    """Sigmas of a field, as a dict of arrays with the names of `Sigma`.

    error_model: the catalogue's table for the model: one number per element, or one per entry of its `year`.
    years_outside: how far the date lies outside the model's validity (0 inside), years.
    values: the field's structured array (magnav.core.FIELD_DTYPE); year, years_outside: of its shape.
    The rates' sigmas are the measured growth of a forecast's error, the same for every model.
    """
    def published(name):
        entry = error_model[name]
        return np.interp(year, error_model["year"], entry) if np.ndim(entry) else np.full(np.shape(year), float(entry))

    # the published figures hold the forecast's error within its five years: what is added is the rest of the square
    age = (FORECAST_YR + years_outside) * (1 + years_outside / GROWTH_DOUBLES_YR)
    grown = np.sqrt(age**2 - FORECAST_YR**2)
    rate = dict(zip(("north_nT", "east_nT", "down_nT"), (np.full(np.shape(year), r) for r in RATE_SIGMA_NT_PER_YR),
                    strict=True))
    rate = _of_elements(rate, values)
    sigma = {name: published(name) for name in ELEMENTS if name != "declination_deg"}
    with np.errstate(divide="ignore"):
        sigma["declination_deg"] = np.hypot(published("declination_floor_deg"),
                                            published("declination_nT_deg") / values["horizontal_nT"])
    return ({name: np.hypot(sigma[name], grown * rate[name]) for name in ELEMENTS}
            | {f"{name}_per_yr": rate[name] for name in ELEMENTS})


def _of_elements(vector_sigma, values):
    """First-order sigmas of H, F, D, I from independent sigmas of X, Y, Z."""
    sx, sy, sz = vector_sigma["north_nT"], vector_sigma["east_nT"], vector_sigma["down_nT"]
    x, y, z, h, f = (values[n] for n in ("north_nT", "east_nT", "down_nT", "horizontal_nT", "total_nT"))
    with np.errstate(divide="ignore", invalid="ignore"):
        sh = np.hypot(x * sx, y * sy) / h
        return vector_sigma | {
            "horizontal_nT": sh,
            "total_nT": np.sqrt((x * sx) ** 2 + (y * sy) ** 2 + (z * sz) ** 2) / f,
            "declination_deg": np.degrees(np.hypot(x * sy, y * sx) / h**2),
            "inclination_deg": np.degrees(np.hypot(z * sh, h * sz) / f**2),
        }
