"""Calibration: the estimate and its covariance by simulation, the likelihood against scipy, what is refused and why.

Simulated data test the statistics of the estimator; real recordings are in test_calibration_recordings.py.
"""

import datetime
import json
from types import SimpleNamespace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays
from scipy.optimize import least_squares
from scipy.spatial.transform import Rotation
from scipy.stats import chi2

import magnav
from magnav.calibration import judgement
from magnav.calibration.coverage import CELLS, cell_of, coverage
from magnav.calibration.ellipsoid import fit_ellipsoid, fit_sphere, residual_and_jacobian, six_of, symmetric
from magnav.calibration.iron_change import largest_change
from magnav.errors import CalibrationRefused, InputError

EARTH_UT = np.array([21.0, 1.5, 43.0])
TOTAL_UT = float(np.linalg.norm(EARTH_UT))
DIP_DEG = float(np.degrees(np.arctan2(EARTH_UT[2], np.hypot(*EARTH_UT[:2]))))
FIELD = SimpleNamespace(total_nT=1000 * TOTAL_UT, inclination_deg=DIP_DEG, model="stand-in", year=2026.5, lat_deg=50.0,
                        lon_deg=10.0, height_m=100.0, sigma=SimpleNamespace(total_nT=138.0, inclination_deg=0.2))
HARD = np.array([14.0, -22.0, 9.0])
SOFT = np.array([[0.93, 0.03, -0.02], [0.03, 1.06, 0.04], [-0.02, 0.04, 0.99]])
TRUTH = np.concatenate([HARD, six_of(SOFT)])
NOISE_UT = 0.3


def readings(attitudes, rng, noise=NOISE_UT, hard=HARD):
    """Readings of a distorted sensor in attitudes given as body-to-NED rotations."""
    body = attitudes.inv().apply(EARTH_UT)
    return body @ np.linalg.inv(SOFT) + hard + noise * rng.normal(size=body.shape)


def tumbling(count, rng):
    return Rotation.random(count, random_state=rng)


def tilted(count, rng, limit_deg):
    angles = np.column_stack([rng.uniform(0, 360, count), rng.uniform(-limit_deg, limit_deg, (count, 2))])
    return Rotation.from_euler("ZYX", angles, degrees=True)


def parameters(calibration):
    return np.concatenate([calibration.hard_iron_uT, six_of(calibration.soft_iron)])


# ---- the estimate ----

def test_known_iron_is_found():
    rng = np.random.default_rng(1)
    calibration = magnav.calibrate(readings(tumbling(3000, rng), rng), field=FIELD)
    assert calibration.verdict == "good" and calibration.reasons == () and calibration.warnings == ()
    assert np.all(np.abs(parameters(calibration) - TRUTH) < 4 * np.sqrt(np.diag(calibration.covariance)))
    assert calibration.noise_uT == pytest.approx(NOISE_UT, rel=0.05)
    assert calibration.coverage == 1.0 and calibration.scale == "model total field"
    attitudes = tumbling(100, rng)
    back = calibration.apply(readings(attitudes, rng, noise=0.0))
    assert np.abs(back - attitudes.inv().apply(EARTH_UT)).max() < 0.15


def test_covariance_is_that_of_the_estimates():
    """300 seeded runs: normalised error squared against chi-square with nine degrees of freedom, mean within its 99 %
    interval, for the covariance of the likelihood; what is stated adds the allowance for correlation, on white noise
    some per cent on the safe side. Each parameter's spread within 15 % of it (its sampling error is 4 %)."""
    rng = np.random.default_rng(2)
    field = SimpleNamespace(**{**vars(FIELD), "sigma": SimpleNamespace(total_nT=0.0, inclination_deg=0.2)})
    errors, stated, squared, allowance = [], [], [], []
    for _ in range(300):
        mag = readings(tumbling(400, rng), rng)
        calibration = magnav.calibrate(mag, field=field)
        allowance.append(len(mag) / judgement.effective_count(fit_ellipsoid(mag, TOTAL_UT).residual_uT))
        error = parameters(calibration) - TRUTH
        errors.append(error)
        stated.append(np.diag(calibration.covariance))
        squared.append(error @ np.linalg.solve(calibration.covariance / allowance[-1], error))
    low, high = chi2.ppf([0.005, 0.995], 9 * 300) / 300
    assert low < np.mean(squared) < high
    assert np.min(allowance) >= 1.0 and np.mean(allowance) < 1.15
    assert np.std(errors, axis=0) == pytest.approx(np.sqrt(np.mean(stated, axis=0)), rel=0.15)
    assert np.all(np.abs(np.mean(errors, axis=0)) < 4 * np.std(errors, axis=0) / np.sqrt(300))


def test_same_optimum_as_scipy():
    """scipy.optimize.least_squares (general reference library) on the same distances, written anew from their
    definition, with its own numerical derivative and from the truth instead of a sphere."""
    rng = np.random.default_rng(3)
    mag = readings(tumbling(500, rng), rng)
    fit = fit_ellipsoid(mag, TOTAL_UT)

    def distances(p):
        soft = np.array([[p[3], p[6], p[7]], [p[6], p[4], p[8]], [p[7], p[8], p[5]]])
        field = (soft @ (mag - p[:3]).T).T
        size = np.sqrt((field**2).sum(axis=1))
        slope = np.sqrt(((soft @ (field / size[:, None]).T) ** 2).sum(axis=0))
        above = fit.noise_uT**2 * (np.trace(soft @ soft) - slope**2) / (2 * TOTAL_UT)
        return (size - above - TOTAL_UT) / slope

    found = np.concatenate([fit.hard_iron_uT, six_of(fit.soft_iron)])
    other = least_squares(distances, TRUTH, jac="3-point", xtol=1e-15, ftol=1e-15, gtol=1e-15,
                          x_scale=np.array([1.0] * 3 + [0.02] * 6))
    assert fit.converged
    assert np.allclose(found, other.x, rtol=0, atol=1e-6)
    assert np.allclose(fit.residual_uT, distances(found), rtol=0, atol=1e-12)
    assert fit.noise_uT == pytest.approx(np.sqrt(fit.residual_uT @ fit.residual_uT / 491), rel=1e-3)


def test_jacobian_against_finite_differences():
    rng = np.random.default_rng(4)
    mag = readings(tumbling(40, rng), rng)
    at = TRUTH + 0.01 * rng.normal(size=9)
    _, jacobian = residual_and_jacobian(at, mag, TOTAL_UT, 0.5)
    step = 1e-6
    for k in range(9):
        shift = step * np.eye(9)[k]
        numeric = (residual_and_jacobian(at + shift, mag, TOTAL_UT, 0.5)[0]
                   - residual_and_jacobian(at - shift, mag, TOTAL_UT, 0.5)[0]) / (2 * step)
        assert np.allclose(jacobian[:, k], numeric, rtol=0, atol=1e-6)


def test_sphere_fit_is_exact_without_noise():
    rng = np.random.default_rng(5)
    points = np.array([5.0, -80.0, 2.0]) + tumbling(20, rng).apply([30.0, 0.0, 0.0])
    centre, radius = fit_sphere(points)
    assert np.allclose(centre, [5, -80, 2]) and radius == pytest.approx(30.0)


def test_relative_scale_has_the_same_shape_and_an_honest_covariance():
    rng = np.random.default_rng(6)
    runs = [magnav.calibrate(readings(tumbling(300, rng), rng)) for _ in range(200)]
    truth = np.concatenate([HARD, six_of(SOFT / np.linalg.det(SOFT) ** (1 / 3))])
    assert runs[0].scale == "relative"
    assert np.linalg.det(runs[0].soft_iron) == pytest.approx(1.0)
    assert runs[0].total_uT == pytest.approx(TOTAL_UT / np.linalg.det(SOFT) ** (1 / 3), rel=0.01)
    errors = np.array([parameters(run) - truth for run in runs])
    stated = np.sqrt(np.mean([np.diag(run.covariance) for run in runs], axis=0))
    assert np.std(errors, axis=0) == pytest.approx(stated, rel=0.2)


def test_without_a_field_the_limits_are_of_the_sphere_found():
    """A log that is mostly rest scatters by much less than the field; the verdict must not depend on that."""
    rng = np.random.default_rng(17)
    turning = readings(tumbling(400, rng), rng)
    resting = turning[:1] + NOISE_UT * rng.normal(size=(8000, 3))
    for mag in (np.vstack([resting, turning]), np.vstack([np.repeat(turning[:1], 600, axis=0), turning])):
        calibration = magnav.calibrate(mag)
        assert calibration.verdict == "good", calibration.reasons
        assert np.allclose(calibration.hard_iron_uT, HARD, atol=0.3)
        assert calibration.total_uT == pytest.approx(TOTAL_UT / np.linalg.det(SOFT) ** (1 / 3), rel=0.01)


def test_what_can_be_read_off_a_calibration():
    calibration = magnav.calibrate(GOOD, field=FIELD)
    residual = fit_ellipsoid(GOOD, TOTAL_UT).residual_uT
    assert calibration.residual_rms_uT == pytest.approx(np.sqrt(np.mean(residual**2)))
    values = np.linalg.eigvalsh(calibration.soft_iron)
    assert calibration.condition_number == pytest.approx(values[-1] / values[0])
    assert calibration.apply(GOOD.reshape(2, 100, 3)).shape == (2, 100, 3)
    with pytest.raises(InputError, match=r"shape \(3, 1\); accepted: \(..., 3\)"):
        calibration.apply(np.ones((3, 1)))


@pytest.mark.parametrize(("date", "year"), [
    ("2026-05-12", 2026 + 131 / 365), (datetime.date(2026, 5, 12), 2026 + 131 / 365), (2026.25, 2026.25), (None, None)])
def test_date_is_kept_as_a_year(date, year):
    calibration = magnav.Calibration.from_json(magnav.calibrate(GOOD, date=date).to_json())
    assert calibration.date_yr == (year and pytest.approx(year, abs=1e-9))
    # a date given goes before the field's
    assert magnav.calibrate(GOOD, field=FIELD, date=date).date_yr == pytest.approx(year or 2026.5, abs=1e-9)


def test_correlated_residuals_are_worth_less():
    """A first-order autoregressive series of correlation r is worth (1 - r) / (1 + r) of its length (Priestley,
    Spectral Analysis and Time Series, 1981, 5.3)."""
    rng = np.random.default_rng(7)
    white = rng.normal(size=60_000)
    assert judgement.effective_count(white) == pytest.approx(len(white), rel=0.05)
    series = np.zeros(60_000)
    for i in range(1, len(series)):
        series[i] = 0.8 * series[i - 1] + white[i]
    assert judgement.effective_count(series) == pytest.approx(len(white) * 0.2 / 1.8, rel=0.15)
    assert judgement.effective_count(np.zeros(10)) == 10


def test_cells_have_equal_areas():
    directions = Rotation.random(96_000, random_state=8).apply([1.0, 0.0, 0.0])
    counts = np.bincount(cell_of(directions), minlength=CELLS)
    assert len(counts) == CELLS and np.all(np.abs(counts - 2000) < 5 * np.sqrt(2000))
    assert coverage(directions) == 1.0
    assert coverage(np.array([[0, 0, 1.0], [0, 0, -1.0], [1.0, 0, 0]])) == 3 / CELLS


def test_predicted_heading_error_is_what_happens():
    """The covariance of a calibration, drawn 3,000 times, makes the error that is predicted for the worst heading."""
    rng = np.random.default_rng(9)
    calibration = magnav.calibrate(readings(tilted(150, rng, 75), rng), field=FIELD)
    drawn = rng.multivariate_normal(parameters(calibration), calibration.covariance, 3000)
    worst = 0.0
    soft = np.array([symmetric(p[3:]) for p in drawn])
    for pitch, roll in ((0, 0), (30, 0), (-30, 0), (0, 30), (0, -30)):
        for heading in np.arange(0, 360, 10.0):
            attitude = Rotation.from_euler("ZYX", [heading, pitch, roll], degrees=True)
            raw = attitude.inv().apply(EARTH_UT) @ np.linalg.inv(calibration.soft_iron) + calibration.hard_iron_uT
            field = attitude.apply(np.einsum("nij,nj->ni", soft, raw - drawn[:, :3]))
            turned = np.degrees(np.arctan2(field[:, 1], field[:, 0]) - np.arctan2(EARTH_UT[1], EARTH_UT[0]))
            worst = max(worst, np.std(turned))
    assert calibration.predicted_heading_sigma_deg == pytest.approx(worst, rel=0.06)


# ---- what is refused, and why ----

def refusal(mag, **keywords):
    calibration = magnav.calibrate(mag, **({"field": FIELD} | keywords))
    assert calibration.verdict == "refused" and calibration.reasons
    with pytest.raises(CalibrationRefused, match="refused: "):
        calibration.apply(mag)
    return " | ".join(calibration.reasons)


@pytest.mark.parametrize("seed", range(5))
def test_motion_in_a_plane_is_refused(seed):
    rng = np.random.default_rng(seed)
    words = refusal(readings(tilted(2000, rng, 0.5), rng))
    assert "covers too little" in words and "along z is not determined" in words
    assert "points along and against z" in words


@pytest.mark.parametrize("seed", range(5))
def test_small_tilt_is_refused(seed):
    rng = np.random.default_rng(seed)
    words = refusal(readings(tilted(3000, rng, 20), rng))
    assert "covers too little" in words and " z" in words


@pytest.mark.parametrize("field", [FIELD, None])
def test_a_sensor_at_rest_is_named(field):
    rng = np.random.default_rng(19)
    mag = HARD + [20.0, 5.0, 43.0] + 0.1 * rng.normal(size=(2000, 3))
    assert "the sensor was hardly turned" in refusal(mag, field=field)
    mag[7] = 1e300
    assert "no magnetometer's in uT" in refusal(mag, field=field)
    repeated = readings(tumbling(500, rng), rng)
    repeated[:, 2] = repeated[:, 0]
    assert "in one plane exactly" in refusal(repeated, field=field)


def test_a_sphere_of_another_size_is_refused():
    rng = np.random.default_rng(20)
    assert "radius of 12" in refusal(readings(tumbling(2000, rng), rng) / 4)


@pytest.mark.parametrize(("weak", "words"), [
    ([1, 0, 0, 0, 0, 0, 0, 0, 0], "offset along x is not determined (error about 5 uT): turn the sensor so that the "
     "field points along and against x"),
    ([1, 0, 0, 1, 0, 1, 0, 0, 0], "offset along x and scale along x and z are not determined"),
    ([0, 0, 0, 0, 0, 0, 0, 0, 1], "skew of y-z is not determined (error about 5 uT): turn the sensor so that the field "
     "points along and against midway between y and z"),
    # all nine parts alike: none stands out, all are named
    ([1] * 9, "offset along x, y and z and scale along x, y and z and skew of x-y, x-z and y-z")])
def test_direction_left_open_is_named(weak, words):
    vector = np.array(weak) / np.linalg.norm(weak) * 5.0 / np.array([1.0] * 3 + [50.0] * 6)
    error_uT, text = judgement.weakest(np.outer(vector, vector), 50.0)
    assert error_uT == pytest.approx(5.0)
    assert words.replace(" and scale", ", scale" if "skew" in words else " and scale") in text


@settings(max_examples=60, deadline=None)
@given(arrays(np.float64, st.tuples(st.integers(0, 120), st.just(3)), fill=st.nothing(),
              elements=st.floats(-1e6, 1e6, allow_subnormal=False)), st.booleans(), st.integers(0, 2**32 - 1))
def test_any_readings_get_a_verdict_that_survives_the_file(mag, with_field, seed):
    """Whatever is logged: a verdict and a file, no other exception. Small noise takes it past the first checks."""
    mag = mag + 1e-3 * np.random.default_rng(seed).normal(size=mag.shape)
    calibration = magnav.calibrate(mag, field=FIELD if with_field else None)
    assert calibration.verdict == "good" or calibration.reasons
    back = magnav.Calibration.from_json(calibration.to_json())
    assert np.array_equal(back.soft_iron, calibration.soft_iron) and back.reasons == calibration.reasons


def test_few_samples_stuck_axes_and_units_are_named():
    rng = np.random.default_rng(10)
    mag = readings(tumbling(500, rng), rng)
    assert "1 different readings" in refusal(mag[:1])
    assert "40 different readings" in refusal(np.repeat(mag[:40], 20, axis=0))
    stuck = mag.copy()
    stuck[:, 1] = 12.0
    assert "axis y is stuck" in refusal(stuck)
    for factor, unit in ((1000, "nT"), (1e-3, "mT"), (0.01, "gauss"), (10, "milligauss"), (1e-6, "T")):
        assert f"look like {unit}" in refusal(mag * factor)


@pytest.mark.parametrize("seed", range(3))
@pytest.mark.parametrize("size_uT", [5.0, 7.0, 12.0])
def test_iron_that_changes_during_the_recording_is_refused(seed, size_uT):
    """An offset that moves by a tenth of the field and more, either side of which the sensor turned through everything:
    one fit halves the change, and neither the residuals' size nor their mean gives it away."""
    rng = np.random.default_rng(seed)
    change = rng.normal(size=3)
    mag = readings(tumbling(2000, rng), rng)
    assert magnav.calibrate(mag, field=FIELD).verdict == "good"
    mag[rng.integers(500, 1500):] += size_uT * change / np.linalg.norm(change)
    assert "changed during the recording" in refusal(mag)
    assert "changed during the recording" in refusal(mag, field=None)


def test_size_of_a_change_is_found():
    rng = np.random.default_rng(18)
    mag = readings(tumbling(4000, rng), rng)
    still, _ = largest_change(fit_ellipsoid(mag, TOTAL_UT), TOTAL_UT)
    assert np.linalg.norm(still) < 0.3
    mag[1000:2200] += [2.0, -1.0, 2.0]  # on and off again
    moved, explained = largest_change(fit_ellipsoid(mag, TOTAL_UT), TOTAL_UT)
    assert np.allclose(moved, [2.0, -1.0, 2.0], atol=0.2) and explained > 1000


def test_implausible_iron_is_refused():
    rng = np.random.default_rng(12)
    body = tumbling(2000, rng).inv().apply(EARTH_UT)
    stretched = body * [1.0, 1.0, 2.2] + 0.3 * rng.normal(size=body.shape)
    assert "soft iron found is not plausible" in refusal(stretched)
    far = readings(tumbling(2000, rng), rng, hard=np.array([250.0, 0, 0]))
    assert "hard iron found, 250 uT" in refusal(far) or "look like" in refusal(far)


def test_noise_that_leaves_no_heading_is_refused():
    rng = np.random.default_rng(13)
    steep = SimpleNamespace(**{**vars(FIELD), "inclination_deg": 88.5})
    assert "too large for the horizontal field here" in refusal(readings(tumbling(3000, rng), rng), field=steep)


# ---- warnings ----

def test_magnitude_and_dip_against_the_model():
    rng = np.random.default_rng(14)
    attitudes = tumbling(2000, rng)
    mag = readings(attitudes, rng)
    acc = attitudes.inv().apply([0.0, 0.0, -9.81]) + 0.03 * rng.normal(size=(2000, 3))
    quiet = magnav.calibrate(mag, acc, np.zeros((2000, 3)), np.arange(2000) / 50, FIELD)
    assert quiet.warnings == ()
    weaker = SimpleNamespace(**{**vars(FIELD), "total_nT": FIELD.total_nT * 1.12})
    assert "10 % below the model's field" in magnav.calibrate(mag, field=weaker).warnings[0]
    steeper = SimpleNamespace(**{**vars(FIELD), "inclination_deg": DIP_DEG + 5})
    assert "dips by" in magnav.calibrate(mag, acc, field=steeper).warnings[0]
    # samples in motion say nothing of the dip
    assert magnav.calibrate(mag, acc * 1.1, field=steeper).warnings == ()
    assert magnav.calibrate(mag, acc, np.ones((2000, 3)), field=steeper).warnings == ()


# ---- input ----

GOOD = readings(tumbling(200, np.random.default_rng(15)), np.random.default_rng(16))


def with_nan():
    bad = GOOD.copy()
    bad[7, 1] = np.nan
    return bad


@pytest.mark.parametrize(("change", "words"), [
    ({"mag_uT": GOOD[:, :2]}, r"shape \(200, 2\)"), ({"mag_uT": GOOD[0]}, r"accepted: \(n, 3\)"),
    ({"mag_uT": "x"}, "must be numbers"), ({"mag_uT": with_nan()}, "the first is row 7"),
    ({"acc_mps2": GOOD[:5]}, r"accepted: \(200, 3\) as mag_uT"), ({"gyr_radps": with_nan()}, "gyr_radps: 1 row"),
    ({"t_s": np.zeros(200)}, "does not increase at row 1"), ({"t_s": np.zeros(3)}, "t_s has shape"),
    ({"body": "ENU"}, "accepted: FRD, FLU")])
def test_bad_input(change, words):
    with pytest.raises(InputError, match=words):
        magnav.calibrate(**({"mag_uT": GOOD, "field": FIELD} | change))


# ---- the file ----

def test_file_round_trip(tmp_path):
    calibration = magnav.calibrate(GOOD, field=FIELD, body="FLU")
    calibration.save(tmp_path / "cal.json")
    back = magnav.Calibration.load(tmp_path / "cal.json")
    for name, value in vars(calibration).items():
        assert np.array_equal(getattr(back, name), value), name
    content = json.loads((tmp_path / "cal.json").read_text())
    assert content["schema_version"] == 1 and content["body"] == "FLU" and content["model"] == "stand-in"
    assert content["date_yr"] == 2026.5 and content["verdict"] == "good" and "safety-critical" in content["caution"]
    assert np.array_equal(back.apply(GOOD[0]), calibration.apply(GOOD)[0])


@settings(max_examples=50, deadline=None)
@given(st.lists(st.floats(-500, 500), min_size=3, max_size=3), st.floats(0, 10), st.sampled_from(["FRD", "FLU"]),
       st.lists(st.text(max_size=20), max_size=3))
def test_any_values_survive_the_file(hard, noise, body, words):
    one = magnav.Calibration(hard_iron_uT=np.array(hard), soft_iron=SOFT, covariance=np.eye(9), noise_uT=noise,
                             verdict="good", reasons=tuple(words), warnings=(), body=body, scale="relative", samples=9,
                             coverage=0.5, predicted_heading_sigma_deg=None, total_uT=50.0)
    back = magnav.Calibration.from_json(one.to_json())
    assert all(np.array_equal(getattr(back, name), value) for name, value in vars(one).items())


FILE = magnav.calibrate(GOOD, field=FIELD).to_json()


@pytest.mark.parametrize(("key", "value", "words"), [
    ("schema", "other", "key schema must be"), ("schema_version", 2, "schema_version is 2; accepted: 1"),
    ("hard_iron_uT", [1, 2], "hard_iron_uT must be finite numbers of shape"),
    ("hard_iron_uT", "x", "hard_iron_uT must"),
    ("hard_iron_uT", [1, 2, 1e999], "finite"), ("soft_iron", [[1, 0, 0], [0.5, 1, 0], [0, 0, 1]], "symmetric"),
    ("soft_iron", [[1, 0, 0], [0, -1, 0], [0, 0, 1]], "positive definite"), ("noise_uT", -1, "noise_uT must be"),
    ("noise_uT", True, "noise_uT must be"), ("noise_uT", 10**400, "noise_uT must be"), ("coverage", 1.5, "from 0 to 1"),
    ("hard_iron_uT", ["1", "2", "3"], "hard_iron_uT must"), ("hard_iron_uT", [True, 2, 3], "hard_iron_uT must"),
    ("hard_iron_uT", [10**400, 2, 3], "hard_iron_uT must"), ("hard_iron_uT", [[1], [2, 3], []], "hard_iron_uT must"),
    ("schema_version", True, "schema_version is True"), ("schema_version", 1.0, "schema_version is 1.0"),
    ("covariance", (-np.eye(9)).tolist(), "no negative eigenvalue"),
    ("verdict", "excellent", "accepted: good, refused"), ("body", "XYZ", "accepted: FRD, FLU"),
    ("samples", 1.5, "samples"),
    ("reasons", "none", "reasons must be a list"), ("model", 5, "model must be a text"),
    ("lat_deg", "x", "lat_deg must"),
    ("scale", "x", "key scale")])
def test_hostile_files(tmp_path, key, value, words):
    path = tmp_path / "cal.json"
    path.write_text(json.dumps(json.loads(FILE) | {key: value}), encoding="utf-8")
    with pytest.raises(InputError, match=words) as caught:
        magnav.Calibration.load(path)
    assert "cal.json" in str(caught.value)


@pytest.mark.parametrize("text", ["", "[]", "{}", "{", "null", "[" * 100_000, FILE[:500], "\x00", b"\xff\xfe{",
                                  '{"schema": ' + "9" * 5000 + "}"])
def test_files_that_are_no_calibration(text):
    with pytest.raises(InputError):
        magnav.Calibration.from_json(text)


@pytest.mark.parametrize("key", [k for k in json.loads(FILE) if k not in ("caution", "parameters")])
def test_every_key_is_needed(key):
    content = json.loads(FILE)
    del content[key]
    with pytest.raises(InputError, match=key):
        magnav.Calibration.from_json(json.dumps(content))
