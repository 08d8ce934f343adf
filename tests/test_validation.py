"""Validation of a compass module against published examples."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq
from scipy.stats import chi2

from magnav.errors import InputError
from magnav.validation import allan_deviation, approximate_coefficients, compare_runs, fit_deviation

# Handbook of Magnetic Compass Adjustment (formerly Pub. 226), chapter V: deviations, east positive, by compass heading
HANDBOOK = {0: 10.5, 45: 20.0, 90: 11.5, 135: -1.2, 180: -5.5, 225: -8.0, 270: -12.5, 315: -6.8}


def test_handbooks_sums_to_their_printed_digits():
    found = approximate_coefficients(list(HANDBOOK.values()))
    assert {name: round(value, 1) for name, value in found.items()} == {
        "A": 1.0, "B": 12.0, "C": 8.0, "D": 5.0, "E": 1.5}


def test_least_squares_on_the_handbooks_headings():
    """numpy's Fourier transform (general reference library) gives the same least squares on even spacing."""
    compass = np.array(list(HANDBOOK), dtype=float)
    deviation = np.array(list(HANDBOOK.values()))
    curve = fit_deviation(compass, compass + deviation)
    wave = np.fft.rfft(deviation) / 8
    expected = [wave[0].real, -2 * wave[1].imag, 2 * wave[1].real, -2 * wave[2].imag, 2 * wave[2].real]
    assert curve.coefficients_deg == pytest.approx(expected, abs=1e-12)
    # and lies within the rounding of the handbook's approximate ones
    for name, value in approximate_coefficients(deviation).items():
        assert curve.named[name][0] == pytest.approx(value, abs=0.15)
    assert np.abs(curve.residual_deg).max() < 0.5


def test_uncertainty_by_simulation():
    """Normalised error squared over 500 simulated swings of 16 uneven headings: F-distributed by the estimated
    variance; its median against the chi-square's within sampling error."""
    rng = np.random.default_rng(4)
    truth = np.array([1.5, -3.0, 2.0, 0.7, -0.4])
    compass = np.sort(rng.uniform(0, 360, 16))
    z = np.radians(compass)
    clean = truth @ [np.ones(16), np.sin(z), np.cos(z), np.sin(2 * z), np.cos(2 * z)]
    known, pulls = [], []
    for _ in range(500):
        curve = fit_deviation(compass, compass + clean + 0.25 * rng.normal(size=16))
        error = curve.coefficients_deg - truth
        known.append(error @ np.linalg.solve(curve.covariance * (0.25 / curve.sigma_deg) ** 2, error))
        pulls.append(curve.sigma_deg**2)
    assert np.mean(pulls) == pytest.approx(0.0625, rel=0.06)
    low, high = chi2.ppf([0.005, 0.995], 5 * 500) / 500
    assert low < np.mean(known) < high
    at = np.array([0.0, 100.0])
    assert np.all(curve.deviation_sigma_deg(at) > 0)


@settings(max_examples=60, deadline=None)
@given(st.lists(st.floats(-6, 6), min_size=4, max_size=4), st.floats(-170, 170), st.floats(0, 360))
def test_there_and_back(four, a, magnetic):
    compass = np.arange(0, 360, 20.0)
    z = np.radians(compass)
    deviation = a + np.array(four) @ [np.sin(z), np.cos(z), np.sin(2 * z), np.cos(2 * z)]
    curve = fit_deviation(compass, compass + deviation)
    back = curve.compass_deg(magnetic)
    assert (curve.magnetic_deg(back) - magnetic + 180) % 360 == pytest.approx(180, abs=1e-9)


def test_card_against_a_root_finder():
    """Compass headings to steer by scipy's brentq (general reference library)."""
    compass = np.array(list(HANDBOOK), dtype=float)
    curve = fit_deviation(compass, compass + np.array(list(HANDBOOK.values())))
    card = curve.card(30.0)
    assert card[:, 0].tolist() == list(np.arange(0, 360, 30.0))
    for magnetic, steer, deviation in card:
        root = brentq(lambda c, m=magnetic: c + curve.deviation_deg(c) - m, magnetic - 40, magnetic + 40)
        assert (steer - root + 180) % 360 == pytest.approx(180, abs=1e-6)
        assert deviation == pytest.approx(curve.deviation_deg(steer))


@pytest.mark.parametrize(("compass", "magnetic", "words"), [
    (np.arange(5) * 72.0, np.arange(5) * 72.0, "at least 6"), (np.zeros((2, 3)), np.zeros((2, 3)), r"must be \(n,\)"),
    (np.arange(8) * 45.0, np.arange(7) * 45.0, r"must be \(n,\)"),
    (np.arange(8) * 45.0, np.append(np.arange(7) * 45.0, np.nan), "row 7"),
    (np.linspace(0, 90, 12), np.linspace(0, 90, 12), "270 degrees of the circle without")])
def test_what_cannot_be_fitted(compass, magnetic, words):
    with pytest.raises(InputError, match=words):
        fit_deviation(compass, magnetic)


def test_a_wild_curve_has_no_card():
    compass = np.arange(0, 360, 15.0)
    with pytest.raises(InputError, match="no compass heading can be told"):
        fit_deviation(compass, compass + 50 * np.sin(2 * np.radians(compass))).card()
    with pytest.raises(InputError, match="eight finite"):
        approximate_coefficients([1.0] * 7)


def test_allan_deviation_of_the_published_set():
    """NIST SP 1065 (Riley, 2008), the nine-value set of table 31: Allan deviation 91.22945 at one sample, overlapping
    85.95287 at two. Value from memory."""
    values = [892, 809, 823, 798, 671, 644, 883, 903, 677]
    tau, deviation = allan_deviation(values, 1.0, [1, 2])
    assert tau.tolist() == [1.0, 2.0]
    assert deviation == pytest.approx([91.22945, 85.95287], abs=1e-5)


def test_allan_deviation_of_white_noise_falls_with_the_root():
    """Common practice, no source: white noise averages down as one over the root of the time."""
    tau, deviation = allan_deviation(np.random.default_rng(6).normal(size=60_000) * 0.7, 50.0)
    assert tau[0] == 0.02 and deviation[0] == pytest.approx(0.7, rel=0.02)
    assert deviation[:8] == pytest.approx(0.7 / np.sqrt(2.0 ** np.arange(8)), rel=0.1)


@pytest.mark.parametrize(("arguments", "words"), [
    (([1.0, 2.0], 1.0), "at least three"), (([1.0, 2.0, np.nan], 1.0), "finite"), (([1.0, 2.0, 3.0], 0.0), "positive"),
    (([1.0, 2.0, 3.0], 1.0, [2]), "between 1 and half")])
def test_allan_deviation_refuses(arguments, words):
    with pytest.raises(InputError, match=words):
        allan_deviation(*arguments)


def test_runs():
    reference = np.tile(np.arange(0, 360, 45.0), 4)
    sense = np.repeat([True, False, True, False], 8)
    rng = np.random.default_rng(7)
    reading = reference + np.where(sense, 0.4, -0.4) + 0.1 * rng.normal(size=32)
    reading[reference == 90.0] += np.where(sense[reference == 90.0], 0.5, -0.5)
    runs = compare_runs(reference + np.where(sense, 0.0, 0.1), reading, sense)
    assert runs.hysteresis_deg == pytest.approx(0.8 + 1.0 / 8 + 0.1, abs=0.1)
    assert runs.largest_at_deg == 90.0 and runs.largest_hysteresis_deg == pytest.approx(1.9, abs=0.3)
    assert runs.repeatability_deg == pytest.approx(0.1, rel=0.4)
    one_way = compare_runs(reference[:8], reading[:8], np.ones(8))
    assert np.isnan(one_way.hysteresis_deg) and np.isnan(one_way.repeatability_deg)
    with pytest.raises(InputError, match="finite"):
        compare_runs([np.nan], [1.0], [True])
    with pytest.raises(InputError, match=r"must be \(n,\)"):
        compare_runs([1.0], [1.0, 2.0], [True])
    # marks on either side of north are one
    assert not np.isnan(compare_runs([359.9, 0.1], [0.0, 0.5], [True, False]).hysteresis_deg)
