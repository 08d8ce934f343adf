"""Grid north: the convergence of any projected coordinate system at a point, through pyproj.

Convergence is the azimuth of grid north from true north, east positive: grid bearing = true bearing - convergence.
"""

import functools

import numpy as np

from .errors import InputError


def grid_convergence(crs, lat_deg, lon_deg, *, bad="raise"):
    """Convergence in degrees at geodetic WGS84 points, and the name of the system used (an array of names for "utm"
    and "ups" at many points).

    crs: an EPSG code (32633 or "EPSG:32633"), a PROJ string, WKT, a pyproj CRS, or "utm" (the zone of each point, with
    the exceptions of Norway and Svalbard) or "ups" (north or south). A system on another datum is entered through
    pyproj's transformation. At a pole the true north is that of the meridian of `lon_deg`.
    bad: "raise" stops at a point where the projection does not exist; "nan" gives NaN there.
    Raises InputError, always where the system is unknown or not projected.
    """
    if bad not in ("raise", "nan"):
        raise InputError(f'bad={bad!r}: accepted are "raise" and "nan"')
    lat, lon = np.broadcast_arrays(np.asarray(lat_deg, dtype=np.float64), np.asarray(lon_deg, dtype=np.float64))
    keyword = crs.lower() if isinstance(crs, str) and crs.lower() in ("utm", "ups") else None
    if keyword is None:
        names, out = _projection(crs)[0], _convergence(crs, lat, lon)
    else:
        codes = utm_epsg(lat, lon) if keyword == "utm" else np.where(lat >= 0, 32661, 32761)
        out = np.full(lat.shape, np.nan)
        names = np.full(lat.shape, "", dtype=object)
        for code in np.unique(codes[codes > 0]):
            here = codes == code
            out[here] = _convergence(int(code), lat[here], lon[here])
            names[here] = _projection(int(code))[0]
    undefined = np.flatnonzero(~np.isfinite(out))
    if undefined.size and bad == "raise":
        i = undefined[0]
        what = {"utm": "UTM (80 S to 84 N; use ups beyond)", "ups": "UPS", None: names}[keyword]
        raise InputError(f"{what} is not defined at lat {lat.ravel()[i]:g}, lon {lon.ravel()[i]:g}")
    out = np.where(np.isfinite(out), out, np.nan)
    return (out, names) if lat.shape else (float(out), names if keyword is None else names.item())


def utm_epsg(lat_deg, lon_deg):
    """EPSG code of the WGS84 UTM zone of each point, the wide zones of Norway (32V) and Svalbard included; 0 outside.

    Zones: The Universal Grids, DMA TM 8358.2 (1989), which also sets the limits 80 S and 84 N.
    """
    lat, lon = np.asarray(lat_deg, dtype=np.float64), np.asarray(lon_deg, dtype=np.float64)
    inside = (lat >= -80) & (lat <= 84) & np.isfinite(lon)
    lon = np.where(inside, lon, 0.0)
    lon = np.mod(lon + 180.0, 360.0) - 180.0
    zone = np.floor((lon + 180.0) / 6.0).astype(int) + 1
    zone = np.where((lat >= 56) & (lat < 64) & (lon >= 3) & (lon < 12), 32, zone)
    svalbard = np.select([lon < 9, lon < 21, lon < 33, lon < 42], [31, 33, 35, 37], zone)
    zone = np.where((lat >= 72) & (lon >= 0) & (lon < 42), svalbard, zone)
    return np.where(inside, np.where(lat >= 0, 32600, 32700) + zone, 0)


@functools.lru_cache(maxsize=256)
def _projection_of(key):
    import pyproj  # here, so that what needs no grid starts without it

    try:
        crs = pyproj.CRS.from_user_input(key)
    except pyproj.exceptions.CRSError as error:
        raise InputError(f"coordinate system {key!r} is not known: {error}") from None
    name = crs.srs if crs.name == "unknown" else crs.name
    if crs.is_compound:
        crs = crs.sub_crs_list[0]
    if not crs.is_projected:
        raise InputError(f"{name} is not a projected coordinate system and has no grid north; "
                         "accepted: an EPSG code, PROJ string or WKT of a projected one, utm, ups")
    geodetic = crs.geodetic_crs
    to_datum = None
    if geodetic.to_2d() != pyproj.CRS.from_epsg(4326):
        to_datum = pyproj.Transformer.from_crs("EPSG:4326", geodetic, always_xy=True)
    return name, (pyproj.Proj(crs), to_datum)


def _projection(crs):
    if not isinstance(crs, (str, int)) and not hasattr(crs, "to_wkt"):
        raise InputError(f"crs {crs!r} is of type {type(crs).__name__}; accepted: an EPSG code, PROJ string, WKT or "
                         "pyproj CRS of a projected system, utm, ups")
    return _projection_of(crs if isinstance(crs, (str, int)) else crs.to_wkt())


def _convergence(crs, lat, lon):
    _, (projection, to_datum) = _projection(crs)
    flat_lon, flat_lat = np.mod(lon.ravel() + 180.0, 360.0) - 180.0, lat.ravel()
    if to_datum is not None:
        flat_lon, flat_lat = to_datum.transform(flat_lon, flat_lat)
    factors = projection.get_factors(flat_lon, flat_lat, errcheck=False)
    return np.asarray(factors.meridian_convergence, dtype=np.float64).reshape(lat.shape)
