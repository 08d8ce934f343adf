"""Hard and soft iron from a log, with a verdict."""

import dataclasses

import numpy as np

from ..errors import InputError
from . import judgement as j
from .calibration import Calibration
from .coverage import coverage, directions_from_sphere
from .ellipsoid import PAIRS, fit_ellipsoid, six_of
from .iron_change import largest_change

# factor that a reading in this unit would have against uT, and the unit's name
UNIT_SLIPS = ((1e3, "nT"), (1e-3, "mT"), (1e-6, "T"), (0.01, "gauss"), (10.0, "milligauss"))


def calibrate(mag_uT, acc_mps2=None, gyr_radps=None, t_s=None, field=None, *, body="FRD", date=None):
    """Hard iron and soft iron (full symmetric) of a magnetometer from a log in which it was turned.

    mag_uT: (n, 3) readings in the frame `body`, "FRD" or "FLU", which the result keeps.
    field: scalar `Field` at the place and date; |B| is scaled to its total. Without, the scale stays relative, which
    headings do not feel. date: in any form that `Model.field` takes, kept as a decimal year; the
    field's, by default.
    acc_mps2 (n, 3), specific force, and gyr_radps (n, 3): not used in the fit, but to check the dip of the calibrated
    field against the model's on samples at rest. t_s (n,): must increase.
    Returns `Calibration`, whose verdict is "refused", with reasons, where the log cannot tell.
    Raises InputError for wrong shapes, values that are not finite (the first row named), times that do not increase.
    Method: maximum likelihood, see `ellipsoid.py`; what is refused and why, `judgement.py`.
    """
    mag = _samples("mag_uT", mag_uT, None)
    acc = None if acc_mps2 is None else _samples("acc_mps2", acc_mps2, len(mag))
    gyr = None if gyr_radps is None else _samples("gyr_radps", gyr_radps, len(mag))
    if t_s is not None:
        _check_times(np.asarray(t_s, dtype=np.float64), len(mag))
    if str(body).upper() not in ("FRD", "FLU"):
        raise InputError(f"body frame {body!r} is not known; accepted: FRD, FLU")
    about = {"body": str(body).upper(), "samples": len(mag),
             "scale": "relative" if field is None else "model total field",
             "date_yr": getattr(field, "year", None) if date is None else _year(date)}
    for name in ("model", "lat_deg", "lon_deg", "height_m"):
        about[name] = getattr(field, name, None)
    given_uT = None if field is None else field.total_nT / 1000
    dip_deg = j.DEFAULT_INCLINATION_DEG if field is None else field.inclination_deg

    faults = _faults_of_readings(mag, given_uT)
    if faults:
        return _refused(faults, given_uT, **about)
    try:
        calibration = _judged(mag, acc, gyr, given_uT, dip_deg, field, about)
    except np.linalg.LinAlgError:
        calibration = None
    if calibration is None or not all(np.all(np.isfinite(value)) for value in (
            calibration.hard_iron_uT, calibration.soft_iron, calibration.covariance)):
        return _refused(["the fit did not settle: the data do not determine a calibration"], given_uT, **about)
    return calibration


def _judged(mag, acc, gyr, given_uT, dip_deg, field, about):
    fit, field_uT = _fit(mag, given_uT)
    direction = fit.directions(mag)
    noise = float(np.sqrt(fit.residual_uT @ fit.residual_uT / (len(mag) - 9)))
    by_cells = j.covariance_by_cells(fit, direction, max(noise, j.SMALLEST_MISFIT * field_uT))
    covariance = j.covariance_of(fit)
    predicted = j.worst_heading_sigma_deg(covariance, fit.soft_iron, field_uT, dip_deg)
    reasons, plausible = _reasons(fit, noise, by_cells, predicted, field_uT, dip_deg, given_uT)
    six = six_of(fit.soft_iron)
    if field is None:
        covariance = _at_determinant_one(fit.soft_iron, covariance) if plausible else covariance
    else:
        scale = np.concatenate([np.zeros(3), six]) * field.sigma.total_nT / field.total_nT
        covariance = covariance + np.outer(scale, scale)
    warnings = [] if reasons or field is None else _warnings(mag, fit, acc, gyr, field)
    return Calibration(
        hard_iron_uT=fit.hard_iron_uT, soft_iron=fit.soft_iron, covariance=covariance, noise_uT=noise,
        verdict="refused" if reasons else "good", reasons=tuple(reasons), warnings=tuple(warnings),
        coverage=coverage(direction if plausible else directions_from_sphere(mag, given_uT)),
        predicted_heading_sigma_deg=predicted if np.isfinite(predicted) else None, total_uT=field_uT, **about)


def _fit(mag, given_uT):
    """The fit and the field's magnitude in its scale: the one given, or what makes the soft iron's determinant 1."""
    field_uT = given_uT or _spread_uT(mag)
    fit = fit_ellipsoid(mag, field_uT)
    if given_uT is None and np.linalg.eigvalsh(fit.soft_iron)[0] > 0:
        size = float(np.linalg.det(fit.soft_iron)) ** (1 / 3)
        jacobian = fit.jacobian * np.array([1.0] * 3 + [size] * 6)
        fit = dataclasses.replace(fit, soft_iron=fit.soft_iron / size, jacobian=jacobian)
        field_uT /= size
    return fit, field_uT


def _reasons(fit, noise, by_cells, predicted, field_uT, dip_deg, given_uT):
    """Why the fit is refused, empty where it is not; and whether it can be the sensor's ellipsoid at all."""
    reasons = []
    heading = max(predicted, j.worst_heading_sigma_deg(by_cells, fit.soft_iron, field_uT, dip_deg))
    if not heading <= j.LARGEST_HEADING_SIGMA_DEG:
        weakest, words = j.weakest(by_cells, field_uT)
        if weakest > j.WEAK * field_uT:
            reasons.append(f"the motion covers too little of the sphere: {words}")
        else:
            reasons.append(f"headings would be uncertain by {heading:.1f} deg (1 sigma; accepted: "
                           f"{j.LARGEST_HEADING_SIGMA_DEG:g}): the noise is too large for the horizontal field here")
    count = len(reasons)
    values = np.linalg.eigvalsh(fit.soft_iron)
    if not 0 < values[-1] <= j.LARGEST_CONDITION * values[0]:
        reasons.append("the soft iron found is not plausible (one axis stretched more than "
                       f"{j.LARGEST_CONDITION:g} times another): the data do not determine it")
    radius = field_uT / float(np.cbrt(np.prod(np.abs(values))))
    if given_uT is not None and not 1 / j.LARGEST_SCALE <= radius / given_uT <= j.LARGEST_SCALE:
        reasons.append(f"the sphere found has a radius of {radius:.3g} uT where the field has {given_uT:.3g}: the "
                       "sensor was hardly turned, or its scale is wrong")
    offset = float(np.linalg.norm(fit.hard_iron_uT))
    if not offset <= j.LARGEST_OFFSET * field_uT:
        reasons.append(f"the hard iron found, {offset:.0f} uT, is more than {j.LARGEST_OFFSET:g} times the field")
    plausible = len(reasons) == count
    change, explained = largest_change(fit, field_uT)
    size = float(np.linalg.norm(change))
    if not max(noise / j.LARGEST_RESIDUAL, j.drift_uT(fit.residual_uT) / j.LARGEST_DRIFT) <= field_uT:
        reasons.append(f"the readings do not fit one calibration (residual {noise:.1f} uT): the iron or the field "
                       "changed during the recording")
    elif plausible and size > j.LARGEST_CHANGE * field_uT and explained > j.SURE_CHANGE:
        reasons.append(f"the readings do not fit one calibration (the hard iron moves by {size:.1f} uT): the iron or "
                       "the field changed during the recording")
    if not (fit.converged or reasons):
        reasons.append("the fit did not settle: the data do not determine a calibration")
    return reasons, plausible


def _warnings(mag, fit, acc, gyr, field):
    """What a good calibration leaves open."""
    out = []
    ratio = (np.linalg.det(fit.soft_iron) ** (-1 / 3)) - 1
    if abs(ratio) > j.MAGNITUDE_MARGIN:
        out.append(f"the readings are {abs(100 * ratio):.0f} % {'above' if ratio > 0 else 'below'} the model's field: "
                   "a disturbed place (a building, a vehicle) or the sensor's scale; the shape is not affected")
    found = None if acc is None else _dip_at_rest(fit.directions(mag), acc, gyr)
    allowed = 3 * field.sigma.inclination_deg + j.DIP_MARGIN_DEG
    if found is not None and abs(found - field.inclination_deg) > allowed:
        out.append(f"the calibrated field dips by {found:.1f} deg, the model's by {field.inclination_deg:.1f}: "
                   "a disturbed place, or sensor and accelerometer are not aligned")
    return out


def _dip_at_rest(direction, acc, gyr):
    """Median dip over the samples whose acceleration is gravity's and that hardly turn; None where there are few."""
    size = np.linalg.norm(acc, axis=1)
    rest = np.abs(size - 9.81) < j.REST_ACCELERATION_MPS2
    if gyr is not None:
        rest &= np.linalg.norm(gyr, axis=1) < j.REST_TURN_RADPS
    if rest.sum() < j.FEWEST_SAMPLES:
        return None
    along = np.sum(-acc[rest] / size[rest, None] * direction[rest], axis=1)
    return float(np.degrees(np.median(np.arcsin(np.clip(along, -1, 1)))))


def _at_determinant_one(soft, covariance):
    """The covariance where the determinant of the soft iron, 1, is held: its variance taken out."""
    back = np.linalg.inv(soft)
    slope = np.array([back[a, b] * (1 if a == b else 2) for a, b in PAIRS])
    change = np.eye(9)
    change[3:, 3:] = np.eye(6) - np.outer(six_of(soft), slope) / 3
    return change @ covariance @ change.T


def _year(date):
    from ..field.dates import decimal_year

    year = decimal_year(date)
    if not isinstance(year, float):
        raise InputError(f"date {date!r} holds several dates; accepted: one")
    return year


def _spread_uT(mag):
    """RMS distance of the readings from their mean: the field's magnitude, about, where all orientations were seen."""
    return float(np.sqrt(np.mean(np.sum((mag - mag.mean(axis=0)) ** 2, axis=1))))


def _samples(name, values, count):
    try:
        array = np.asarray(values, dtype=np.float64)
    except (TypeError, ValueError):
        raise InputError(f"{name} must be numbers of shape (n, 3)") from None
    if array.ndim != 2 or array.shape[1] != 3 or (count is not None and len(array) != count):
        wanted = "(n, 3)" if count is None else f"({count}, 3) as mag_uT"
        raise InputError(f"{name} has shape {array.shape}; accepted: {wanted}")
    bad = np.flatnonzero(~np.isfinite(array).all(axis=1))
    if bad.size:
        raise InputError(f"{name}: {bad.size} row(s) hold NaN or infinity, the first is row {bad[0]}")
    return array


def _check_times(t_s, count):
    if t_s.shape != (count,):
        raise InputError(f"t_s has shape {t_s.shape}; accepted: ({count},) as mag_uT")
    wrong = np.flatnonzero(~(np.diff(t_s) > 0))
    if wrong.size:
        raise InputError(f"t_s does not increase at row {wrong[0] + 1}")


def _faults_of_readings(mag, given_uT):
    """What is wrong with the readings themselves; where anything is, there is nothing to fit."""
    distinct = len(np.unique(mag, axis=0))
    if distinct < j.FEWEST_SAMPLES:
        return [f"{distinct} different readings, where at least {j.FEWEST_SAMPLES} are needed"]
    largest = float(np.abs(mag).max())
    if largest > j.LARGEST_READING_UT:
        return [f"readings of up to {largest:.3g} uT are no magnetometer's in uT (accepted: up to "
                f"{j.LARGEST_READING_UT:g}): another unit, or broken rows"]
    stuck = [axis for axis, values in zip("xyz", mag.T, strict=True) if np.ptp(values) == 0]
    if stuck:
        return [f"axis {', '.join(stuck)} is stuck: all readings are the same"]
    if given_uT is not None:
        seen = float(np.median(np.linalg.norm(mag - np.median(mag, axis=0), axis=1)))
        for factor, unit in UNIT_SLIPS:
            if factor / 2 < max(seen, np.median(np.linalg.norm(mag, axis=1))) / given_uT < factor * 2:
                return [f"the readings are about {factor:g} times the field expected in uT: they look like {unit}"]
    extent = np.linalg.svd(mag - mag.mean(axis=0), compute_uv=False)
    if extent[2] < j.FLAT * extent[0]:
        return ["the readings lie in one plane exactly: an axis repeats others, or the values are made up"]
    spread, around = _spread_uT(mag), float(np.median(np.linalg.norm(mag, axis=1)))
    if spread < j.HARDLY_TURNED * max(given_uT or 0.0, around / (1 + j.LARGEST_OFFSET)):
        return [f"the readings differ by {spread:.2g} uT only, around {around:.3g} uT: the sensor was hardly turned; "
                "turn it through all orientations"]
    return []


def _refused(reasons, given_uT, **about):
    return Calibration(hard_iron_uT=np.zeros(3), soft_iron=np.eye(3), covariance=np.zeros((9, 9)), noise_uT=0.0,
                       verdict="refused", reasons=tuple(reasons), warnings=(), coverage=0.0,
                       predicted_heading_sigma_deg=None, total_uT=given_uT or 0.0, **about)
