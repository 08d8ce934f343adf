"""The C core for Python: contiguous arrays in, arrays of its structures out."""

import numpy as np

from ._core import ffi, lib
from .status import EXCEPTION_OF, Flag, flag_text, flags_in, status_text

__all__ = [
    "EXCEPTION_OF",
    "Flag",
    "Model",
    "atan2_deg",
    "field_many",
    "flag_text",
    "flags_in",
    "heading_log",
    "sincos_deg",
    "status_text",
]

_NUMPY_OF = {"double": np.float64, "int32_t": np.int32, "uint32_t": np.uint32}


def _dtype_of(ctype):
    """numpy's view of a C type: scalars, arrays of them, and structures with the compiler's own offsets."""
    if ctype.kind == "struct":
        names, fields = zip(*ctype.fields, strict=True)
        return np.dtype({"names": list(names), "formats": [_dtype_of(f.type) for f in fields],
                         "offsets": [f.offset for f in fields], "itemsize": ffi.sizeof(ctype)})
    if ctype.kind == "array":
        return np.dtype((_dtype_of(ctype.item), (ctype.length,)))
    return np.dtype(_NUMPY_OF[ctype.cname])


FIELD_DTYPE = _dtype_of(ffi.typeof("magnav_field_values"))
HEADING_DTYPE = _dtype_of(ffi.typeof("magnav_heading"))
CORE_VERSION = lib.magnav_core_version()
PARAMETER_STATUS = lib.MAGNAV_E_PARAMETER
GRID_VARIATION_LATITUDE_DEG = lib.MAGNAV_GRID_VARIATION_LATITUDE_DEG


def _pointer(array, ctype):
    return ffi.from_buffer(ctype, array, require_writable=False)


def _output(array, ctype):
    return ffi.from_buffer(ctype, array, require_writable=True)


class Model:
    """A model handed to the core: keeps the arrays that the C structure points to alive."""

    def __init__(self, breaks_yr, polynomials, valid_from_yr, valid_until_yr, degree):
        self._breaks = np.ascontiguousarray(breaks_yr, dtype=np.float64)
        self._polynomials = np.ascontiguousarray(polynomials, dtype=np.float64)
        pieces, order, _ = self._polynomials.shape
        self._keep = (_pointer(self._breaks, "double[]"), _pointer(self._polynomials, "double[]"))
        self.c = ffi.new("magnav_model *", {
            "breaks_yr": self._keep[0], "polynomials": self._keep[1], "valid_from_yr": valid_from_yr,
            "valid_until_yr": valid_until_yr, "degree": degree, "order": order, "pieces": pieces})
        self.snapshot_reals = lib.MAGNAV_SNAPSHOT_REALS(degree)


def _raise_for(status):
    if status:
        raise EXCEPTION_OF[status](f"C core: {status_text(status)}")


def field_many(model, extrapolate, lat_deg, lon_deg, height_m, year):
    """Fields at (n,) points, float64 each: an array of FIELD_DTYPE and an int32 array of statuses."""
    count = len(lat_deg)
    out = np.zeros(count, FIELD_DTYPE)
    status = np.zeros(count, np.int32)
    memory = np.empty(model.snapshot_reals)
    _raise_for(lib.magnav_field_many(
        model.c, int(extrapolate), _output(memory, "double[]"), memory.size, count, _pointer(lat_deg, "double[]"),
        _pointer(lon_deg, "double[]"), _pointer(height_m, "double[]"), _pointer(year, "double[]"),
        _output(out, "magnav_field_values[]"), _output(status, "int32_t[]")))
    return out, status


def heading_log(setup, t_s, mag_uT, acc_mps2=None, gyr_radps=None):
    """Headings of a log: `setup` is a dict with the names of magnav_heading_setup, arrays are (n,) and (n, 3) float64.

    Returns an array of HEADING_DTYPE and an int32 array of statuses.
    """
    count = len(t_s)
    out = np.zeros(count, HEADING_DTYPE)
    status = np.zeros(count, np.int32)
    optional = [ffi.NULL if a is None else _pointer(a, "double[]") for a in (acc_mps2, gyr_radps)]
    _raise_for(lib.magnav_heading_log(
        ffi.new("magnav_heading_setup *", setup), count, _pointer(t_s, "double[]"), _pointer(mag_uT, "double[]"),
        *optional, _output(out, "magnav_heading[]"), _output(status, "int32_t[]")))
    return out, status


def heading_of(setup, mag_uT, down, tilt_sigma_deg):
    """One heading from a reading and a vertical, (3,) each, FRD: a record of HEADING_DTYPE and its status."""
    out = np.zeros(1, HEADING_DTYPE)
    status = lib.magnav_heading_of(ffi.new("magnav_heading_setup *", setup), ffi.new("double[3]", list(mag_uT)),
                                   ffi.new("double[3]", list(down)), float(tilt_sigma_deg),
                                   _output(out, "magnav_heading[]"))
    return out[0], status


def patch_at(patch, lat_deg, lon_deg, height_m, year):
    """North, east, down (3,) of a `Patch`, nT, and the status."""
    coefficients = np.ascontiguousarray(patch.coefficients, dtype=np.float64)
    c = ffi.new("magnav_patch *", {
        "coefficients": _pointer(coefficients, "double[]"), "middle": patch.middle.tolist(),
        "inverse_half": (1 / patch.half).tolist(), "bound_nT": patch.bound_nT.tolist(),
        "declination_bound_deg": patch.declination_bound_deg, "degree": patch.degree})
    ned = ffi.new("double[3]")
    status = lib.magnav_patch_at(c, lat_deg, lon_deg, height_m, year, ned)
    return np.array(list(ned)), status


def calibrator_solution(mag_uT, field_uT):
    """What the target's calibrator makes of readings (n, 3): a dict with hard_iron_uT (3,), soft_iron (3, 3),
    covariance (9, 9), noise_uT, seen and refusal (a magnav_refusal of the core)."""
    calibrator, result = ffi.new("magnav_calibrator *"), ffi.new("magnav_calibrator_result *")
    _raise_for(lib.magnav_calibrator_start(calibrator, field_uT))
    for reading in np.ascontiguousarray(mag_uT, dtype=np.float64):
        _raise_for(lib.magnav_calibrator_add(calibrator, _pointer(reading, "double[]")))
    _raise_for(lib.magnav_calibrator_solve(calibrator, result))
    covariance = np.zeros((9, 9))
    covariance[np.tril_indices(9)] = list(result.calibration.covariance)
    covariance += np.tril(covariance, -1).T
    return {"hard_iron_uT": np.array(list(result.calibration.hard_iron_uT)),
            "soft_iron": np.array(list(result.calibration.soft_iron)).reshape(3, 3), "covariance": covariance,
            "noise_uT": result.noise_uT, "seen": result.seen, "refusal": result.refusal}


def image_is_sound(content):
    """Whether bytes are the undamaged binary image of a model that this build can evaluate."""
    status = lib.magnav_image_open(_pointer(content, "uint8_t[]"), len(content), ffi.new("magnav_image *"))
    return status == lib.MAGNAV_OK


def sincos_deg(x_deg):
    """The core's own sine and cosine of one angle in degrees."""
    both = ffi.new("double[2]")
    lib.magnav_sincos_deg(x_deg, both, both + 1)
    return both[0], both[1]


def atan2_deg(y, x):
    """The core's own arctangent, in degrees."""
    return lib.magnav_atan2_deg(y, x)
