"""Calibration on real recordings: BROAD (Laidig, Caruso, Cereatti and Seel, Data 6(7):72, 2021, CC BY 4.0).

Scored by the azimuth scatter in the optical reference frame, on rows that the calibration has not seen; only sensor
columns are used to calibrate. The laboratory's field is some 10 % below the model's (the building).
"""

import importlib.util
import warnings

import numpy as np
import pytest

import magnav


@pytest.fixture(scope="module")
def score(shared):
    spec = importlib.util.spec_from_file_location("score_azimuth", shared / "datasets/score_azimuth.py")
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


@pytest.fixture(scope="module")
def field():
    return magnav.load_model("auto").field(52.51, 13.32, 40.0, when="2020-07-01")


def rows_of(score, shared, trial):
    path = next((shared / "datasets/broad").glob(f"{trial}_*.csv"))
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", ResourceWarning)  # the scorer leaves its file to the collector
        return score.load(path)


def calibrate(rows, field):
    return magnav.calibrate(rows[:, 7:10], rows[:, 1:4], rows[:, 4:7], rows[:, 0], field, body="FLU")


@pytest.mark.parametrize("trial", ["02", "05", "30"])
def test_turning_trials_give_a_calibration_that_serves(score, shared, field, trial):
    rows = rows_of(score, shared, trial)
    fit, judged = score.split(rows)
    calibration = calibrate(fit, field)
    assert calibration.verdict == "good"
    assert any("below the model's field" in line for line in calibration.warnings)
    raw = score.azimuth_scatter(judged, judged[:, 7:10])
    after = score.azimuth_scatter(judged, calibration.apply(judged[:, 7:10]))
    # raw is good here: what the calibration adds is no more than it says of itself
    assert after <= np.hypot(raw, calibration.predicted_heading_sigma_deg)


@pytest.mark.parametrize("trial", ["05", "30"])
def test_calibration_makes_no_azimuth_worse_by_a_tenth(score, shared, field, trial):
    """Calibrated on the whole file, scored on the rows in motion."""
    rows = rows_of(score, shared, trial)
    _, judged = score.split(rows)
    calibration = calibrate(rows, field)
    assert calibration.verdict == "good"
    raw = score.azimuth_scatter(judged, judged[:, 7:10])
    assert score.azimuth_scatter(judged, calibration.apply(judged[:, 7:10])) <= 1.10 * raw


@pytest.mark.parametrize("trial", ["02", "05"])
def test_field_of_the_laboratory_is_found_without_a_model(score, shared, trial):
    """About 44.6 uT, as the notes beside the recordings give it (shared/datasets/README.md)."""
    calibration = calibrate(rows_of(score, shared, trial), None)
    assert calibration.verdict == "good" and calibration.scale == "relative"
    assert calibration.total_uT == pytest.approx(44.6, rel=0.01)


@pytest.mark.parametrize(("trial", "part"), [("10", 1.0), ("25", 1.0), ("33", 1.0), ("35", 1.0), ("02", 0.5)])
def test_what_the_data_cannot_tell_is_refused(score, shared, field, trial, part):
    """10 and 25 hardly turn; in 33 and 35 a magnet comes and goes; half of 02 covers a fifth of the sphere."""
    rows = rows_of(score, shared, trial)
    calibration = calibrate(rows[:int(part * len(rows))], field)
    assert calibration.verdict == "refused"
    words = " | ".join(calibration.reasons)
    assert "not determined" in words and "points along and against" in words
    if trial in ("33", "35"):
        assert "changed during the recording" in words


def test_a_magnet_that_stays_is_taken_out(score, shared, field):
    rows = rows_of(score, shared, "35")
    fit, judged = score.split(rows, (45, 90))
    calibration = calibrate(fit, field)
    assert calibration.verdict == "good"
    raw = score.azimuth_scatter(judged, judged[:, 7:10])
    after = score.azimuth_scatter(judged, calibration.apply(judged[:, 7:10]))
    assert raw > 15 and after < 3
