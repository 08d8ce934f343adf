"""The heading chain: against rotations by scipy, against simulation, against published rules."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.spatial.transform import Rotation

import magnav
from magnav.core import Flag
from magnav.errors import InputError
from magnav.frames import body_to_frd
from magnav.heading.gravity import normal_gravity_mps2

FIELD = magnav.load_model("WMM2025").field(46.62, 12.91, 640.0, when="2026-05-12")
EARTH_UT = np.array([FIELD.north_nT, FIELD.east_nT, FIELD.down_nT]) / 1000
PERFECT = {"mag_noise_uT": 0.0, "acc_noise_mps2": 0.0}


def sensor(yaw, pitch, roll, field=FIELD):
    """Readings of a perfect sensor, FRD, in the attitude of the aerospace sequence (scipy's intrinsic ZYX)."""
    to_ned = Rotation.from_euler("ZYX", np.stack(np.broadcast_arrays(yaw, pitch, roll), -1), degrees=True)
    earth = np.array([field.north_nT, field.east_nT, field.down_nT]) / 1000
    gravity = normal_gravity_mps2(field.lat_deg, field.height_m)
    return to_ned.inv().apply(earth), to_ned.inv().apply([0.0, 0.0, -gravity])


def apart(a, b):
    return np.abs((np.asarray(a) - b + 180) % 360 - 180)


@settings(max_examples=200, deadline=None)
@given(st.floats(0, 360, exclude_max=True), st.floats(-84, 84), st.floats(-180, 180))
def test_heading_pitch_and_roll_in_any_attitude(yaw, pitch, roll):
    mag, acc = sensor(yaw, pitch, roll)
    heading = magnav.compute_heading(mag, acc, field=FIELD)
    assert apart(heading.true_deg, yaw) < 1e-9 / np.cos(np.radians(pitch))
    assert heading.pitch_deg == pytest.approx(pitch, abs=1e-9)
    assert apart(heading.roll_deg, roll) < 1e-9 / np.cos(np.radians(pitch))
    assert apart(heading.magnetic_deg, yaw - FIELD.declination_deg) < 1e-9 / np.cos(np.radians(pitch))


@pytest.mark.parametrize("body", ["FRD", "FLU"])
@pytest.mark.parametrize("sense", ["specific-force", "gravity"])
def test_frames_and_senses_named_by_the_caller(body, sense):
    mag, acc = sensor([10.0, 200.0], 12.0, -30.0)
    acc = -acc if sense == "gravity" else acc
    heading = magnav.compute_heading(body_to_frd(mag, body), body_to_frd(acc, body), field=FIELD, body=body,
                                     acceleration=sense, crs="utm")
    assert np.allclose(heading.true_deg, [10.0, 200.0], atol=1e-9)
    assert np.allclose(apart(heading.grid_deg, heading.true_deg - heading.convergence_deg), 0, atol=1e-9)
    assert heading.grid == "WGS 84 / UTM zone 33N"


def test_tilt_error_rule():
    """A tilt error e gives a heading error of up to e tan I: one degree is 2.7 degrees at I = 70. Common practice, no
    source."""
    gravity = normal_gravity_mps2(FIELD.lat_deg, FIELD.height_m)
    mag = np.array([np.cos(np.radians(70)), 0.0, np.sin(np.radians(70))]) * 50
    heading = magnav.compute_heading(mag, [0, 0, -gravity], field=FIELD, mag_noise_uT=0.0,
                                     acc_noise_mps2=gravity * np.radians(1.0))
    assert heading.contribution_deg["tilt"] == pytest.approx(2.7, abs=0.05)
    assert heading.dominant == "calibration" or heading.dominant == "tilt"


@pytest.mark.parametrize(("yaw", "pitch", "roll"), [(0, 0, 0), (75, 40, 10), (160, -60, 150), (300, 20, -80)])
def test_stated_sigma_against_simulation(yaw, pitch, roll):
    """20,000 simulated samples (sensor, tilt, calibration, declination drawn from their own models); linear
    propagation must give their spread within 3 %, sampling error of the spread included (0.5 %)."""
    rng = np.random.default_rng(17)
    count = 20_000
    calibration = _calibration(rng)
    mag, acc = sensor(yaw, pitch, roll)
    raw = np.linalg.solve(calibration.soft_iron, mag) + calibration.hard_iron_uT
    acc_noise = 0.06
    stated = magnav.compute_heading(raw, acc, field=FIELD, calibration=calibration, acc_noise_mps2=acc_noise)
    drawn = rng.multivariate_normal(np.concatenate([calibration.hard_iron_uT, _six(calibration.soft_iron)]),
                                    calibration.covariance, count)
    soft = np.empty((count, 3, 3))
    for k, (i, j) in enumerate([(0, 0), (1, 1), (2, 2), (0, 1), (0, 2), (1, 2)]):
        soft[:, i, j] = soft[:, j, i] = drawn[:, 3 + k]
    noisy = raw + calibration.noise_uT * rng.normal(size=(count, 3))
    field = np.einsum("nij,nj->ni", soft, noisy - drawn[:, :3])
    down = -(acc + acc_noise * rng.normal(size=(count, 3)))
    east = np.cross(down, field)
    north = np.cross(east, down / np.linalg.norm(down, axis=1)[:, None])
    found = np.degrees(np.arctan2(east[:, 0] / np.linalg.norm(east, axis=1),
                                  north[:, 0] / np.linalg.norm(north, axis=1)))
    found += rng.normal(FIELD.declination_deg, FIELD.sigma.declination_deg, count)
    error = (found - yaw + 180) % 360 - 180
    assert np.std(error) == pytest.approx(stated.sigma_deg, rel=0.03)
    assert np.mean(error) == pytest.approx(0, abs=4 * np.std(error) / np.sqrt(count) + 0.01)
    parts = stated.contribution_deg
    assert stated.sigma_deg == pytest.approx(np.sqrt(sum(p**2 for p in parts.values())))
    assert stated.sigma_magnetic_deg == pytest.approx(np.sqrt(stated.sigma_deg**2 - parts["model"] ** 2))
    assert stated.dominant == max(parts, key=parts.get)


def _six(w):
    return [w[0, 0], w[1, 1], w[2, 2], w[0, 1], w[0, 2], w[1, 2]]


def _calibration(rng, body="FRD"):
    from types import SimpleNamespace

    root = 0.1 * rng.normal(size=(9, 9)) * np.array([1.0] * 3 + [0.02] * 6)[:, None]
    return SimpleNamespace(hard_iron_uT=np.array([10.0, -5.0, 7.0]), noise_uT=0.4, body=body, verdict="good",
                           soft_iron=np.array([[1.05, 0.02, -0.01], [0.02, 0.97, 0.03], [-0.01, 0.03, 1.01]]),
                           covariance=root @ root.T, check_usable=lambda: None)


def test_interval_holds_the_stated_sigma_and_wraps():
    mag, acc = sensor(359.5, 0, 0)
    heading = magnav.compute_heading(mag, acc, field=FIELD)
    assert apart(heading.low_95_deg, 359.5 - 1.959964 * heading.sigma_deg) < 1e-4
    assert apart(heading.high_95_deg, 359.5 + 1.959964 * heading.sigma_deg) < 1e-4
    assert heading.low_95_deg > 180 > heading.high_95_deg


def test_gravity_formula():
    """NGA.STND.0036 (WGS 84, 2014), table 3.5: normal gravity at the equator 9.7803253359 and the pole 9.8321849379
    m/s^2; free air gradient -3.086e-6 /s^2 at mid latitude (common practice, no source)."""
    assert normal_gravity_mps2(0, 0) == pytest.approx(9.7803253359, abs=1e-9)
    assert normal_gravity_mps2(90, 0) == pytest.approx(9.8321849379, abs=2e-9)
    assert normal_gravity_mps2(45, 1000) - normal_gravity_mps2(45, 0) == pytest.approx(-3.086e-3, abs=2e-6)


# ---- flags: each raised, and not raised on the other side ----

def flags_of(mag, acc, **keywords):
    return Flag(int(magnav.compute_heading(mag, acc, **({"field": FIELD} | keywords)).flags))


def test_flags_of_the_sample():
    calibration = _calibration(np.random.default_rng(1))
    calibration.hard_iron_uT, calibration.soft_iron = np.zeros(3), np.eye(3)
    calibration.covariance = np.zeros((9, 9))
    mag, acc = sensor(30, 5, 5)
    quiet = flags_of(mag, acc, calibration=calibration, mag_noise_uT=0.1)
    assert quiet == 0
    assert flags_of(mag, acc) == Flag.UNCALIBRATED
    good = {"calibration": calibration, "mag_noise_uT": 0.1}
    assert flags_of(sensor(30, 0, 0)[0], None, **good) == Flag.ASSUMED_LEVEL
    # three sigmas of model and sensor are 0.51 uT
    assert flags_of(mag * (1 + 0.4 / 48.5), acc, **good) == 0
    assert flags_of(mag * (1 + 0.7 / 48.5), acc, **good) == Flag.MAGNITUDE_IMPLAUSIBLE
    steeper = dict_field(inclination_deg=FIELD.inclination_deg + 4.0)
    assert flags_of(mag, acc, field=steeper, **good) == Flag.DIP_IMPLAUSIBLE
    assert flags_of(mag, acc, field=dict_field(inclination_deg=FIELD.inclination_deg + 1.0), **good) == 0
    assert Flag.ACCELERATED in flags_of(mag, acc * 1.05, **good)
    assert Flag.ACCELERATED not in flags_of(mag, acc * 1.01, **good)
    assert Flag.FORWARD_VERTICAL in flags_of(*sensor(30, 86, 0), **good)
    assert Flag.FORWARD_VERTICAL not in flags_of(*sensor(30, 84, 0), **good)


def dict_field(**changed):
    import dataclasses

    return dataclasses.replace(FIELD, **changed)


def test_flags_of_the_place_come_along_and_an_unusable_heading_is_said():
    near_dip_pole = magnav.load_model("WMM2025").field(86.0, 140.0, when=2025.0)
    assert near_dip_pole.horizontal_nT < 2000
    mag, acc = sensor(10, 0, 0, near_dip_pole)
    heading = magnav.compute_heading(mag, acc, field=near_dip_pole)
    assert Flag.BLACKOUT_ZONE in heading.flags and Flag.STEEP_DIP in heading.flags
    assert Flag.HEADING_UNUSABLE in heading.flags
    assert np.isnan(heading.low_95_deg) and np.isnan(heading.high_95_deg)
    assert any("blackout" in line for line in heading.warnings)


# ---- the vertical through motion ----

def test_gyroscope_carries_the_vertical_through_acceleration():
    """Simulated: a level sensor pushed sideways for a second at 3 m/s^2; the accelerometer alone tilts by 17 deg."""
    t = np.arange(0, 20, 0.02)
    mag, acc = sensor(np.full(t.size, 40.0), 0.0, 0.0)
    pushed = (t > 10) & (t < 11)
    acc = acc + np.where(pushed, 3.0, 0.0)[:, None] * np.array([0.0, 1.0, 0.0])
    with_gyro = magnav.compute_heading(mag, acc, np.zeros_like(acc), t, field=FIELD)
    without = magnav.compute_heading(mag, acc, None, t, field=FIELD)
    assert np.abs(without.roll_deg[pushed]).max() > 15
    assert np.abs(with_gyro.roll_deg[pushed]).max() < np.abs(without.roll_deg[pushed]).max() / 3
    assert np.all(apart(with_gyro.true_deg, 40) <= 1.96 * with_gyro.sigma_deg + 0.1)


def test_real_recordings(shared):
    """BROAD recordings (Laidig, Caruso, Cereatti and Seel 2021, CC BY 4.0): the heading against optical motion capture,
    whose zero is the laboratory's, so that one constant is taken out; and its stated uncertainty against that error."""
    field = magnav.load_model("auto").field(52.51, 13.32, 40.0, when="2020-07-01")
    assert field.model == "WMM2020"
    for trial in ("02_undisturbed_slow_rotation_B", "05_undisturbed_slow_rotation_with_breaks_B"):
        path = shared / "datasets" / "broad" / f"{trial}.csv"
        log = magnav.read_log(path)
        q = np.genfromtxt(path, delimiter=",", skip_header=3)[:, 10:14]
        calibration = magnav.calibrate(log.mag_uT, log.acc_mps2, log.gyr_radps, log.t_s, field, body="FLU")
        assert calibration.verdict == "good"
        heading = magnav.compute_heading(log.mag_uT, log.acc_mps2, log.gyr_radps, log.t_s, field=field, body="FLU",
                                         calibration=calibration, crs="utm")
        assert np.all(heading.status == 0)
        ok = np.isfinite(q[:, 0]) & (np.abs(heading.pitch_deg) < 60)
        forward = Rotation.from_quat(q[ok], scalar_first=True).apply([1.0, 0.0, 0.0])
        reference = np.degrees(np.arctan2(forward[:, 0], forward[:, 1]))
        error = heading.true_deg[ok] - reference
        zero = np.degrees(np.angle(np.mean(np.exp(1j * np.radians(error)))))
        error = (error - zero + 180) % 360 - 180
        # the model's part is the same for all samples and goes with the zero
        sigma = heading.sigma_magnetic_deg[ok]
        assert np.sqrt(np.mean(error**2)) < 4.0
        assert np.mean(np.abs(error) <= 1.96 * sigma) >= 0.93


# ---- what is refused ----

@pytest.mark.parametrize(("change", "words"), [
    ({"mag_uT": np.zeros((4, 2))}, "mag_uT has shape"), ({"acc_mps2": np.zeros((3, 3))}, r"accepted: \(2, 3\)"),
    ({"mag_uT": "north"}, "must be numbers"), ({"gyr_radps": np.zeros((2, 3))}, "needs t_s"),
    ({"t_s": np.zeros(5)}, "t_s has shape"), ({"body": "NED"}, "accepted: FRD, FLU"),
    ({"acceleration": "up"}, "accepted: specific-force"), ({"mag_noise_uT": -1.0}, "negative or NaN"),
    ({"acc_noise_mps2": np.nan}, "negative or NaN"), ({"crs": "EPSG:4326"}, "not a projected"),
    ({"calibration": _calibration(np.random.default_rng(1), "FLU")}, "body frame FLU"),
    ({"field": dict_field(declination_deg=np.array([1.0]))}, "one place"),
    ({"field": dict_field(declination_deg=np.nan)}, "no declination")])
def test_bad_input_is_refused(change, words):
    mag, acc = sensor([10.0, 20.0], 0, 0)
    arguments = {"mag_uT": mag, "acc_mps2": acc, "field": FIELD} | change
    with pytest.raises(InputError, match=words):
        magnav.compute_heading(**arguments)


def test_bad_samples_among_good_ones():
    mag, acc = sensor(np.full(6, 25.0), 0, 0)
    t = np.array([0.0, 0.1, 0.2, 0.15, 0.4, 0.5])
    mag[1, 0], acc[2] = np.nan, 0.0
    heading = magnav.compute_heading(mag, acc, np.zeros((6, 3)), t, field=FIELD)
    assert np.isnan(heading.true_deg).tolist() == [False, True, True, False, False, False]
    assert np.allclose(heading.true_deg[[0, 3, 4, 5]], 25.0)
    t[4] = 0.15
    backwards = magnav.compute_heading(mag, acc, np.zeros((6, 3)), t, field=FIELD)
    assert np.isnan(backwards.true_deg[4]) and backwards.dominant[4] == ""
    with pytest.raises(InputError, match="NaN, infinite"):
        magnav.compute_heading([np.nan, 1, 2], [0, 0, -9.8], field=FIELD)
    with pytest.raises(InputError, match="zero or vertical"):
        magnav.compute_heading([0, 0, 40.0], [0, 0, -9.8], field=FIELD)
