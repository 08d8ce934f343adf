"""From samples to headings: prepares what the C heading chain needs and names what comes back."""

import dataclasses

import numpy as np

from .. import core
from ..errors import InputError
from ..frames import body_to_frd, calibration_to_frd, to_specific_force
from ..grid_north import grid_convergence
from ..uncertainty.interval import interval_95
from .gravity import normal_gravity_mps2

CONTRIBUTIONS = ("sensor", "calibration", "tilt", "model")

# Used where the caller gives no figure. Our estimates for an uncalibrated part of the consumer class.
MAG_NOISE_UT = 0.5
ACC_NOISE_MPS2 = 0.1
GYR_DRIFT_RADPS = 0.01
LEVEL_SIGMA_DEG = 3.0
# of a part whose iron nobody has measured: what a board with a battery and steel screws near the sensor may carry
HARD_IRON_SIGMA_UT = 20.0
SOFT_IRON_SIGMA = 0.05
# Where no times are given each sample stands alone: a step longer than any filter's memory.
LONE_STEP_S = 1e6


@dataclasses.dataclass(frozen=True)
class Headings:
    """Headings of the body's forward axis, floats or arrays (n,), degrees in [0, 360).

    `true_deg` and `grid_deg` (NaN without a grid) have the standard uncertainty `sigma_deg`; `magnetic_deg` has
    `sigma_magnetic_deg`, which leaves the model out. `low_95_deg` and `high_95_deg` bound the true heading's 95 %
    interval, clockwise from low to high; NaN where it covers the circle. `contribution_deg` holds the parts of
    `sigma_deg` by name (sensor, calibration, tilt, model) and `dominant` the name of the largest. `flags` are the
    warnings. A sample that could not be used has NaN and says why in `status` (0: computed).
    """

    t_s: object
    magnetic_deg: object
    true_deg: object
    grid_deg: object
    sigma_magnetic_deg: object
    sigma_deg: object
    low_95_deg: object
    high_95_deg: object
    contribution_deg: dict
    dominant: object
    roll_deg: object
    pitch_deg: object
    measured_total_uT: object
    measured_inclination_deg: object
    flags: object
    status: object
    declination_deg: float
    convergence_deg: float
    grid: str | None

    @property
    def warnings(self):
        """One line of text for each flag that is up anywhere, in bit order."""
        return [core.flag_text(flag) for flag in core.flags_in(self.flags)]


def compute_heading(mag_uT, acc_mps2=None, gyr_radps=None, t_s=None, *, field, calibration=None, body="FRD",
                    acceleration="specific-force", crs=None, mag_noise_uT=None, acc_noise_mps2=ACC_NOISE_MPS2,
                    gyr_drift_radps=GYR_DRIFT_RADPS, level_sigma_deg=LEVEL_SIGMA_DEG,
                    hard_iron_sigma_uT=HARD_IRON_SIGMA_UT):
    """Heading of the forward axis for one sample (3,) or a log (n, 3).

    mag_uT, acc_mps2, gyr_radps: in the body frame named by `body`, FRD or FLU. Without acc_mps2 the sensor is taken to
    be level within `level_sigma_deg`. With gyr_radps (needs t_s) the vertical is carried through motion.
    acceleration: "specific-force" (at rest it points up) or "gravity" (the device shows down).
    field: a scalar `Field` at the place and date. calibration: a `Calibration` in the same body frame, not refused.
    crs: a projected coordinate system for grid headings, see `magnav.grid_north.grid_convergence`.
    mag_noise_uT: one axis, one sample; by default the calibration's, else 0.5. acc_noise_mps2: one axis, bias included.
    hard_iron_sigma_uT: what to allow for where no calibration is given.
    Returns Headings. Raises InputError for shapes, frames, settings or a sample time that cannot be used;
    CalibrationRefused for a calibration that was refused.
    Method: cross products of the vertical and the calibrated field; first-order propagation (JCGM 100:2008, 5.1).
    """
    one = np.ndim(mag_uT) == 1
    mag = _samples("mag_uT", mag_uT, None, body)
    acc = None if acc_mps2 is None else _samples("acc_mps2", to_specific_force(acc_mps2, acceleration), len(mag), body)
    gyr = None if gyr_radps is None else _samples("gyr_radps", gyr_radps, len(mag), body)
    if np.ndim(field.declination_deg):
        raise InputError("field must be that of one place and date (scalars), not an array")
    if not np.isfinite(field.declination_deg):
        raise InputError("the field has no declination here (no horizontal part): no true heading can be given")
    if calibration is not None and str(calibration.body).upper() != str(body).upper():
        raise InputError(f"the calibration is in body frame {calibration.body}, the samples in {body}: "
                         "convert one of them")
    convergence, grid = (0.0, None) if crs is None else grid_convergence(crs, field.lat_deg, field.lon_deg)
    setup = {
        "calibration": _core_calibration(calibration, body, hard_iron_sigma_uT),
        "mag_noise_uT": mag_noise_uT if mag_noise_uT is not None
        else MAG_NOISE_UT if calibration is None else calibration.noise_uT,
        "declination_deg": field.declination_deg, "declination_sigma_deg": field.sigma.declination_deg,
        "convergence_deg": convergence,
        "total_uT": field.total_nT / 1000, "total_sigma_uT": field.sigma.total_nT / 1000,
        "inclination_deg": field.inclination_deg, "inclination_sigma_deg": field.sigma.inclination_deg,
        "gravity_mps2": normal_gravity_mps2(field.lat_deg, field.height_m), "acc_noise_mps2": acc_noise_mps2,
        "gyr_drift_radps": gyr_drift_radps, "level_sigma_deg": level_sigma_deg,
        "flags": int(field.flags) | (core.Flag.UNCALIBRATED if calibration is None else 0)
        | (core.Flag.ASSUMED_LEVEL if acc is None else 0),
    }
    out, status = core.heading_log(setup, _times(t_s, len(mag), gyr is not None), mag, acc, gyr)
    if one and status[0]:
        raise core.EXCEPTION_OF[status[0]](f"no heading: {core.status_text(status[0])}")
    _raise_setting(status)
    return _named(out, status, t_s, convergence, grid, field.declination_deg, one)


def _samples(name, values, count, body):
    try:
        array = np.atleast_2d(np.asarray(values, dtype=np.float64))
    except (TypeError, ValueError):
        raise InputError(f"{name} must be numbers of shape (3,) or (n, 3)") from None
    if array.ndim != 2 or array.shape[1] != 3 or (count is not None and len(array) != count):
        wanted = "(3,) or (n, 3)" if count is None else f"({count}, 3) as mag_uT"
        raise InputError(f"{name} has shape {np.shape(values)}; accepted: {wanted}")
    return np.ascontiguousarray(body_to_frd(array, body))


def _times(t_s, count, needed):
    if t_s is None:
        if needed and count > 1:
            raise InputError("gyr_radps needs t_s, the sample times in seconds")
        return np.arange(count) * LONE_STEP_S
    times = np.ascontiguousarray(np.atleast_1d(np.asarray(t_s, dtype=np.float64)))
    if times.shape != (count,):
        raise InputError(f"t_s has shape {np.shape(t_s)}; accepted: ({count},) as mag_uT")
    return times


def _core_calibration(calibration, body, hard_iron_sigma_uT):
    if calibration is None:
        hard, soft = np.zeros(3), np.eye(3)
        covariance = np.diag([hard_iron_sigma_uT**2] * 3 + [SOFT_IRON_SIGMA**2] * 6)
    else:
        calibration.check_usable()
        hard, soft, covariance = calibration.hard_iron_uT, calibration.soft_iron, calibration.covariance
    hard, soft, covariance = calibration_to_frd(hard, soft, covariance, body)
    return {"hard_iron_uT": hard.tolist(), "soft_iron": soft.ravel().tolist(),
            "covariance": covariance[np.tril_indices(9)].tolist()}


def _raise_setting(status):
    wrong = np.flatnonzero(status == core.PARAMETER_STATUS)
    if wrong.size:
        raise InputError("a sigma, noise or drift is negative or NaN: accepted are finite values from 0 upwards")


def _named(out, status, t_s, convergence, grid, declination_deg, one):
    failed = status != 0

    def column(values):
        values = np.where(failed, np.nan, values)
        return float(values[0]) if one else values

    true, sigma = column(out["true_deg"]), column(out["sigma_deg"])
    low, high = interval_95(true, sigma)
    names = np.where(failed, "", np.array(CONTRIBUTIONS)[out["dominant"]])
    flags = out["flags"].astype(np.uint32)
    return Headings(
        t_s=t_s, magnetic_deg=column(out["magnetic_deg"]), true_deg=true,
        grid_deg=column(out["grid_deg"] if grid is not None else np.full(len(out), np.nan)),
        sigma_magnetic_deg=column(out["sigma_magnetic_deg"]), sigma_deg=sigma, low_95_deg=low, high_95_deg=high,
        contribution_deg={name: column(out["contribution_deg"][:, k]) for k, name in enumerate(CONTRIBUTIONS)},
        dominant=str(names[0]) if one else names, roll_deg=column(out["roll_deg"]), pitch_deg=column(out["pitch_deg"]),
        measured_total_uT=column(out["measured_total_uT"]),
        measured_inclination_deg=column(out["measured_inclination_deg"]),
        flags=core.Flag(int(flags[0])) if one else flags, status=int(status[0]) if one else status,
        declination_deg=declination_deg, convergence_deg=convergence, grid=grid)
