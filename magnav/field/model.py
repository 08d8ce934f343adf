"""A loaded model and its field; `auto` takes the right model for each date."""

import numpy as np

from .. import core
from ..errors import InputError, OutOfValidityError
from ..uncertainty.model_error import SIGMA_NAMES, Sigma, model_sigma
from .dates import decimal_year, unmasked
from .result import Field

_VALUES = tuple(n for n in core.FIELD_DTYPE.names if n != "flags")


class Model:
    """One model: `name`, `title`, `source`, `degree`, `epoch_yr`, `valid_from_yr`, `valid_until_yr`.

    Made by `load_model`. Safe to use from several threads.
    """

    def __init__(self, coefficients, error_model, title=None):
        self.coefficients = coefficients
        self.error_model = error_model
        self.name, self.source = coefficients.name, coefficients.source
        self.title = title or coefficients.name
        self.degree, self.epoch_yr = coefficients.degree, coefficients.epoch_yr
        self.valid_from_yr, self.valid_until_yr = coefficients.valid_from_yr, coefficients.valid_until_yr
        self.core_model = core.Model(coefficients.breaks_yr, coefficients.polynomials, self.valid_from_yr,
                                     self.valid_until_yr, self.degree)

    def __repr__(self):
        return (f"<Model {self.name}: degree {self.degree}, valid {self.valid_from_yr:g} to {self.valid_until_yr:g}>")

    def models_for(self, year):
        """The models in use, and for each date the place of its own among them."""
        return [self], np.zeros(np.shape(year), dtype=np.intp)

    def field(self, lat_deg, lon_deg, height_m=0.0, when=None, *, extrapolate=False, bad="raise"):
        """The field and its yearly change at geodetic WGS84 points; arguments broadcast, scalars give scalars.

        lat_deg -90 to 90, lon_deg -360 to 360, height_m above the ellipsoid -10,000 to 10,000,000.
        when: needed; see `magnav.field.dates.decimal_year` for what is accepted; its shape broadcasts with the rest.
        extrapolate: compute outside the model's validity, with the flag OUTSIDE_VALIDITY and a growing sigma.
        bad: "raise" stops at the first bad point; "nan" gives NaN there and says why in `status`. A masked element
        counts as NaN. A date that cannot be read at all is an error either way.
        Raises InputError (bad value, its index named) and OutOfValidityError (date outside the validity).
        """
        return _field(self, lat_deg, lon_deg, height_m, when, extrapolate, bad)


class AutoModel:
    """For each date the model made for it: the newest whose automatic range holds it."""

    def __init__(self, models, until_yr):
        """models: oldest first; until_yr: where each one's range ends and the next one's begins, last one included."""
        self.name = "auto"
        self._models = list(models)
        self._until_yr = np.asarray(until_yr, dtype=np.float64)
        self.valid_from_yr = self._models[0].valid_from_yr
        self.valid_until_yr = self._models[-1].valid_until_yr

    def __repr__(self):
        return f"<AutoModel of {', '.join(m.name for m in self._models)}>"

    def models_for(self, year):
        """The models in use, and for each date the place of its own among them; outside all, the nearest."""
        return self._models, np.minimum(np.searchsorted(self._until_yr, year, side="right"), len(self._models) - 1)

    def field(self, lat_deg, lon_deg, height_m=0.0, when=None, *, extrapolate=False, bad="raise"):
        """As `Model.field`; `model` in the result names the model each point was computed with."""
        return _field(self, lat_deg, lon_deg, height_m, when, extrapolate, bad)


def _real(name, value):
    try:
        array = np.asarray(unmasked(value))
        # numpy would make numbers of text and of dates, and drop an imaginary part
        if array.dtype.kind in "fiuO":
            return array.astype(np.float64, copy=False)
    except (TypeError, ValueError):
        pass
    raise InputError(f"{name} must be a real number or an array of them, not {value!r}")


def _field(chooser, lat_deg, lon_deg, height_m, when, extrapolate, bad):
    if when is None:
        raise InputError("when is needed: the date for which the field is wanted")
    if bad not in ("raise", "nan"):
        raise InputError(f'bad={bad!r}: accepted are "raise" and "nan"')
    inputs = [_real("lat_deg", lat_deg), _real("lon_deg", lon_deg), _real("height_m", height_m),
              np.asarray(decimal_year(when, missing=bad), dtype=np.float64)]
    try:
        shape = np.broadcast_shapes(*(a.shape for a in inputs))
    except ValueError:
        raise InputError("lat_deg, lon_deg, height_m and when do not broadcast: shapes "
                         + ", ".join(str(a.shape) for a in inputs)) from None
    # copies, so that the result does not change with the caller's arrays
    lat, lon, height, year = flat = [np.broadcast_to(a, shape).flatten() for a in inputs]

    models, which = chooser.models_for(year)
    out = np.zeros(year.size, core.FIELD_DTYPE)
    status = np.zeros(year.size, np.int32)
    sigma = {name: np.full(year.size, np.nan) for name in SIGMA_NAMES}
    names = np.empty(year.size, dtype=object)
    for place in np.unique(which):
        model, here = models[place], np.flatnonzero(which == place)
        part, part_status = core.field_many(model.core_model, extrapolate, *(a[here] for a in flat))
        out[here], status[here], names[here] = part, part_status, model.name
        outside = np.maximum(0.0, np.maximum(model.valid_from_yr - year[here], year[here] - model.valid_until_yr))
        for name, values in model_sigma(model.error_model, outside, year[here], part).items():
            sigma[name][here] = values
    if bad == "raise":
        _raise_first(status, lat, lon, height, year, shape, models, which)
    return _result(flat, out, status, sigma, names, chooser.name, shape)


def _raise_first(status, lat, lon, height, year, shape, models, which):
    wrong = np.flatnonzero(status)
    if not wrong.size:
        return
    i = wrong[0]
    kind = core.EXCEPTION_OF[status[i]]
    where = f" at index {tuple(int(k) for k in np.unravel_index(i, shape))}" if shape else ""
    many = f" ({wrong.size} points are bad; this is the first)" if wrong.size > 1 else ""
    if kind is OutOfValidityError:
        model = models[which[i]]
        raise kind(f"date {year[i]:.4f}{where} is outside the validity of {model.name}, {model.valid_from_yr:g} to "
                   f"{model.valid_until_yr:g}; extrapolate=True computes it with a growing sigma{many}")
    raise kind(f"{core.status_text(status[i])}{where}: lat_deg {lat[i]:g}, lon_deg {lon[i]:g}, height_m {height[i]:g}, "
               f"date {year[i]:g}{many}")


def _result(flat, out, status, sigma, names, fallback, shape):
    failed = status != 0
    undefined = (out["flags"] & core.Flag.NO_DECLINATION) != 0
    values = {name: out[name] for name in _VALUES}
    if failed.any():
        values = {name: np.where(failed, np.nan, v) for name, v in values.items()}
        sigma = {name: np.where(failed, np.nan, v) for name, v in sigma.items()}
    for name in ("declination_deg", "declination_deg_per_yr"):
        values[name] = np.where(undefined, np.nan, values[name])
    no_grid = undefined | (np.abs(flat[0]) < core.GRID_VARIATION_LATITUDE_DEG)
    values["grid_variation_deg"] = np.where(no_grid, np.nan, values["grid_variation_deg"])

    def shaped(array):
        return array.reshape(shape) if shape else array[0].item()

    positions = dict(zip(("lat_deg", "lon_deg", "height_m", "year"), map(shaped, flat), strict=True))
    flags = out["flags"].astype(np.uint32)
    one_name = len(set(names.tolist())) <= 1
    return Field(**positions, **{name: shaped(v) for name, v in values.items()},
                 sigma=Sigma(**{name: shaped(sigma[name]) for name in SIGMA_NAMES}),
                 model=(names[0] if names.size else fallback) if one_name or not shape else names.reshape(shape),
                 flags=flags.reshape(shape) if shape else core.Flag(int(flags[0])), status=shaped(status))
