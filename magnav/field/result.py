"""The field at a place and a date, as the user holds it: named values with units, their sigmas and flags."""

import dataclasses

import numpy as np

from ..core import Flag, flag_text, flags_in
from ..frames import local_to_ned
from ..uncertainty.model_error import Sigma


@dataclasses.dataclass(frozen=True)
class Field:
    """Main field at one point (floats) or many (arrays of the broadcast shape).

    Local frame north, east, down of the geodetic vertical; nT and degrees, and the same per year. At a geographic pole
    the north axis is the limit along the meridian of the longitude given. `declination_deg` is east positive, from true
    north; NaN where the horizontal field is zero. `grid_variation_deg` is the declination from the north of the polar
    stereographic grid, NaN below 55 degrees of latitude. `sigma` holds one standard uncertainty of each; `flags` the
    warnings (a `Flag`, or an integer array of them); `model` the name of the model used, an array of names where
    `model="auto"` chose for many dates. `status` is 0, or for a point that could not be computed (values NaN) the C
    core's negative status.
    """

    lat_deg: object
    lon_deg: object
    height_m: object
    year: object
    model: object
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
    grid_variation_deg: object
    sigma: Sigma
    flags: object
    status: object

    @property
    def warnings(self):
        """One line of text for each flag that is up anywhere, in bit order."""
        return [flag_text(flag) for flag in flags_in(self.flags)]

    def vector_nT(self, local="NED"):
        """The field as vectors (..., 3) in the local frame named: "NED" or "ENU" (east, north, up)."""
        return local_to_ned(np.stack([self.north_nT, self.east_nT, self.down_nT], axis=-1), local)

    def as_dict(self):
        """Plain dict for JSON: attribute names as keys, arrays as lists, NaN as None, flags as lists of names."""
        out = {f.name: _plain(getattr(self, f.name)) for f in dataclasses.fields(self) if f.name not in _NOT_PLAIN}
        out["sigma"] = {name: _plain(value) for name, value in vars(self.sigma).items()}
        out["flags"] = _flag_names(self.flags)
        return out


_NOT_PLAIN = ("sigma", "flags", "status")


def _plain(value):
    if isinstance(value, np.ndarray):
        return [_plain(v) for v in value.tolist()] if value.ndim else _plain(value.item())
    if isinstance(value, list):
        return [_plain(v) for v in value]
    return None if isinstance(value, float) and not np.isfinite(value) else value


def _flag_names(flags):
    if np.ndim(flags):
        return [_flag_names(f) for f in flags]
    return [flag.name for flag in Flag if int(flags) & flag]
