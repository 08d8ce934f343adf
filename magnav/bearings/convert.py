"""A bearing turned from magnetic, true or grid north to another, with its uncertainty.

    true = magnetic + declination        grid = true - convergence
"""

import dataclasses

import numpy as np

from ..errors import InputError
from ..grid_north import grid_convergence
from ..uncertainty.interval import interval_95

NORTHS = ("magnetic", "true", "grid")


@dataclasses.dataclass(frozen=True)
class Bearing:
    """Directions clockwise from each north in [0, 360), floats or arrays; grid_deg NaN without a grid.

    `bearing_deg` is the one asked for, `sigma_deg` its standard uncertainty, `low_95_deg` and `high_95_deg` the ends of
    its 95 % interval (NaN where it covers the circle). `contribution_deg` holds the parts of `sigma_deg` by name
    (reading: the bearing's own; model: the declination's) and `dominant` the name of the larger.
    """

    bearing_deg: object
    sigma_deg: object
    low_95_deg: object
    high_95_deg: object
    magnetic_deg: object
    true_deg: object
    grid_deg: object
    declination_deg: object
    convergence_deg: object
    grid: object
    contribution_deg: dict
    dominant: object


def convert_bearing(bearing_deg, from_north, to_north, *, field, crs=None, sigma_deg=0.0, bad="raise"):
    """Turn bearings between norths; all arguments broadcast.

    bearing_deg: clockwise, -360 to 360. from_north, to_north: "magnetic", "true" or "grid". field: a `Field` at the
    place and date. crs: a projected coordinate system, see `magnav.grid_north.grid_convergence`; needed for grid.
    sigma_deg: standard uncertainty of the bearing itself; that of the declination is added where one of the two norths
    is magnetic and the other is not.
    bad: "raise" stops at a bearing out of range or a point outside the projection; "nan" gives NaN there.
    Raises InputError.
    """
    for name in (from_north, to_north):
        if name not in NORTHS:
            raise InputError(f"north {name!r} is not known; accepted: {', '.join(NORTHS)}")
    if "grid" in (from_north, to_north) and crs is None:
        raise InputError("grid north needs a projected coordinate system: give crs")
    bearing, own_sigma = (np.asarray(v, dtype=np.float64) for v in (bearing_deg, sigma_deg))
    out_of_range = ~(np.abs(bearing) <= 360)
    if np.any(out_of_range):
        if bad == "raise":
            raise InputError("bearing_deg must be finite and between -360 and 360")
        bearing = np.where(out_of_range, np.nan, bearing)
    if not np.all(own_sigma >= 0):
        raise InputError("sigma_deg must be 0 or more")
    convergence, grid = ((np.nan, None) if crs is None
                         else grid_convergence(crs, field.lat_deg, field.lon_deg, bad=bad))
    # angle of each north from true north
    azimuth = {"magnetic": field.declination_deg, "true": 0.0, "grid": convergence}
    true = bearing + azimuth[from_north]
    every = {name: np.mod(true - azimuth[name], 360.0)[()] for name in NORTHS}
    # a tiny negative angle rounds up to the full circle
    every = {name: np.where(value == 360.0, 0.0, value)[()] for name, value in every.items()}
    crosses = (from_north == "magnetic") != (to_north == "magnetic")
    shape = np.shape(every[to_north])
    parts = {"reading": own_sigma, "model": field.sigma.declination_deg if crosses else 0.0}
    parts = {name: np.broadcast_to(part, shape)[()] for name, part in parts.items()}
    sigma = np.hypot(parts["reading"], parts["model"])
    dominant = np.where(parts["model"] > parts["reading"], "model", "reading")
    low, high = interval_95(every[to_north], sigma)
    return Bearing(every[to_north], sigma, low, high, every["magnetic"], every["true"], every["grid"],
                   field.declination_deg, convergence, grid, parts, dominant if shape else str(dominant))
