"""The calibrator that runs on the target, held against the desk's batch solution on the same samples."""

import pathlib
from types import SimpleNamespace

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

import magnav
from magnav import core

DEMO_LOG = pathlib.Path(__file__).parents[1] / "calibration_demo" / "log.csv"
TOTAL_UT = 48.0
# no scale error in the model, so that the covariances are of the same thing
FIELD = SimpleNamespace(total_nT=48_000.0, inclination_deg=64.0,
                        sigma=SimpleNamespace(total_nT=0.0, inclination_deg=0.2))
PAIRS = ([0, 1, 2, 0, 0, 1], [0, 1, 2, 1, 2, 2])


def parameters(hard, soft):
    return np.concatenate([hard, soft[PAIRS]])


def agrees(mag, field, total_uT):
    desk = magnav.calibrate(mag, field=field)
    target = core.calibrator_solution(mag, total_uT)
    assert desk.verdict == "good" and target["refusal"] == core.lib.MAGNAV_REFUSED_NOT
    sigma = np.sqrt(np.diag(desk.covariance))
    apart = parameters(target["hard_iron_uT"], target["soft_iron"]) - parameters(desk.hard_iron_uT, desk.soft_iron)
    # the two weight readings differently: a fraction of what the noise makes of either
    assert np.abs(apart / sigma).max() < 0.5
    assert target["noise_uT"] == pytest.approx(desk.noise_uT, rel=0.02)
    return desk, target


@pytest.mark.parametrize("seed", range(6))
def test_agrees_with_the_desk_on_simulated_readings(seed):
    rng = np.random.default_rng(seed)
    bend = np.eye(3) + 0.06 * rng.normal(size=(3, 3))
    bend = (bend + bend.T) / 2
    directions = Rotation.random(2000, random_state=rng).apply([TOTAL_UT, 0, 0])
    mag = directions @ bend + rng.uniform(-90, 90, 3) + 0.3 * rng.normal(size=(2000, 3))
    desk, target = agrees(mag, FIELD, TOTAL_UT)
    assert np.sqrt(np.diag(target["covariance"])) == pytest.approx(np.sqrt(np.diag(desk.covariance)), rel=0.2)


def test_agrees_with_the_desk_on_the_demo():
    log = magnav.read_log(DEMO_LOG)
    field = magnav.load_model("WMM2025").field(46.62, 12.91, 640, "2026-05-12")
    agrees(log.mag_uT, field, field.total_nT / 1000)


@pytest.mark.parametrize("trial", ["02", "05"])
def test_agrees_with_the_desk_on_recordings(shared, trial):
    """BROAD recordings (Laidig, Caruso, Cereatti and Seel 2021, CC BY 4.0)."""
    log = magnav.read_log(next((shared / "datasets/broad").glob(f"{trial}_*.csv")))
    field = magnav.load_model("auto").field(52.51, 13.32, 40.0, "2020-07-01")
    agrees(log.mag_uT, field, field.total_nT / 1000)


def test_a_disturbed_recording_pulls_the_two_apart_by_little(shared):
    """In trial 30 a magnet stands nearby; readings far from the ellipsoid weigh by the square on the target."""
    log = magnav.read_log(next((shared / "datasets/broad").glob("30_*.csv")))
    field = magnav.load_model("auto").field(52.51, 13.32, 40.0, "2020-07-01")
    desk = magnav.calibrate(log.mag_uT, field=field)
    target = core.calibrator_solution(log.mag_uT, field.total_nT / 1000)
    apart = desk.apply(log.mag_uT) - (log.mag_uT - target["hard_iron_uT"]) @ target["soft_iron"]
    assert np.sqrt(np.mean(np.sum(apart**2, axis=1))) < 0.03 * field.total_nT / 1000


@pytest.mark.parametrize("trial", ["10", "25", "33", "35"])
def test_refuses_what_the_desk_refuses(shared, trial):
    log = magnav.read_log(next((shared / "datasets/broad").glob(f"{trial}_*.csv")))
    field = magnav.load_model("auto").field(52.51, 13.32, 40.0, "2020-07-01")
    assert magnav.calibrate(log.mag_uT, field=field).verdict == "refused"
    assert core.calibrator_solution(log.mag_uT, field.total_nT / 1000)["refusal"] != core.lib.MAGNAV_REFUSED_NOT
