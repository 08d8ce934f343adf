"""The core's sine, cosine and arctangent against mpmath (general reference library), in units in the last place of the
true value. Largest errors measured over some eight million random arguments: sine and cosine 1.63, arctangent 2.54.
"""

import math

import numpy as np
import pytest
from mpmath import mp, mpf

from magnav.core import atan2_deg, lib, sincos_deg

# what the core's header states
SINE_ULP, ARCTANGENT_ULP = 2, 3
DIGITS = 60
LARGEST_DEG = 1e6


def ulps(found, true):
    """The error in units in the last place of the true value; of zero, none may be left."""
    return 0.0 if found == true else float(abs(mpf(found) - true) / mpf(math.ulp(float(true))))


def angles():
    """Seeded angles over the whole range, every size, and the neighbours of the multiples of 15 degrees, where the
    reduction changes over or a value vanishes."""
    rng = np.random.default_rng(21)
    grid = np.concatenate([np.arange(-1440.0, 1441.0, 15.0), 90.0 * np.arange(-11111, 11112, 101)])
    half = 45.0 + 90.0 * np.arange(-400.0, 401.0)
    return np.concatenate([
        rng.uniform(-360, 360, 8000), rng.uniform(-LARGEST_DEG, LARGEST_DEG, 4000),
        rng.choice([-1, 1], 2000) * 10 ** rng.uniform(-300, 6, 2000), grid, half,
        *(np.nextafter(values, way) for values in (grid, half) for way in (-np.inf, np.inf)),
        [-LARGEST_DEG, LARGEST_DEG, 5e-324, 2.3e-308],
        [14.365098693006452]]).tolist()  # the worst one found


def test_sine_and_cosine_over_the_whole_range():
    worst = [0.0, 0.0]
    with mp.workdps(DIGITS):
        for x in angles():
            true = mp.sin(mp.radians(mpf(x))), mp.cos(mp.radians(mpf(x)))
            if math.fmod(x, 90.0) == 0.0:
                continue  # exact, and mpmath's pi is not: see the test below
            worst = [max(w, ulps(found, t)) for w, found, t in zip(worst, sincos_deg(x), true, strict=True)]
    assert max(worst) <= SINE_ULP, worst


@pytest.mark.parametrize("turns", [0, 1, -1, 2, -2, 7, -7, 2777, -2777])
def test_quarter_turns_are_exact(turns):
    whole = 360.0 * turns
    assert [sincos_deg(whole + x) for x in (0.0, 90.0, 180.0, 270.0)] == [(0, 1), (1, 0), (0, -1), (-1, 0)]


def test_well_known_values_are_nearest():
    """sin 30 and cos 60 are one half to the last place, and 45 degrees gives twice the same to one."""
    for x, sine, cosine in ((30, 0.5, None), (150, 0.5, None), (-30, -0.5, None), (60, None, 0.5), (120, None, -0.5)):
        found = sincos_deg(float(x))
        for value, known in zip(found, (sine, cosine), strict=True):
            assert known is None or abs(value - known) <= math.ulp(0.5)
    sine, cosine = sincos_deg(45.0)
    assert abs(sine - cosine) <= math.ulp(sine) and abs(sine - math.sqrt(0.5)) <= math.ulp(sine)


def test_zeros_of_sine_and_cosine_carry_no_stray_sign():
    """Every zero result is +0, that of -0 too, so that no later quotient or text shows a "-0"."""
    for x in [-0.0, *(90.0 * quarter for quarter in range(-8, 9))]:
        zeros = [value for value in sincos_deg(x) if value == 0]
        assert len(zeros) == 1 and math.copysign(1, zeros[0]) == 1, x


def test_sine_is_odd_cosine_even_and_both_have_the_circle_for_period():
    rng = np.random.default_rng(22)
    for x in (rng.integers(-360 * 2**30, 360 * 2**30, 2000) / 2**30).tolist():  # so that adding 360 is exact
        sine, cosine = sincos_deg(x)
        assert sincos_deg(-x) == (-sine, cosine)
        assert sincos_deg(x + 360.0) == sincos_deg(x - 720.0) == (sine, cosine)
        assert sincos_deg(x + 180.0) == (-sine, -cosine)


def points():
    """Seeded points: all quadrants, slopes of every size, coordinates of every size the header allows, and the slopes
    where the reduction changes over."""
    rng = np.random.default_rng(23)
    half_of_largest = np.finfo(float).max / 2
    slopes = np.concatenate([np.tan(np.radians([22.5, 45.0, 67.5])), rng.uniform(0, 1, 6000)])
    wide = rng.choice([-1, 1], (4000, 2)) * 10 ** rng.uniform(-150, 150, (4000, 2))
    near = np.column_stack([slopes * (scale := rng.uniform(1, 2, slopes.size)), scale])
    worst_found = [0.064087575174304, 1.9101194952005274]
    edges = np.array([[np.nextafter(1.0, way), 1.0] for way in (0, 2)]
                     + [[half_of_largest, half_of_largest / 3], worst_found])
    return np.vstack([rng.normal(size=(6000, 2)), near, edges, edges[:, ::-1], wide, -near[:1000]]).tolist()


def test_arctangent_over_all_quadrants_and_slopes():
    worst = 0.0
    with mp.workdps(DIGITS):
        for y, x in points():
            found, true = atan2_deg(y, x), mp.degrees(mp.atan2(mpf(y), mpf(x)))
            # the range is (-180, 180]: what would round to -180 is 180, the same direction
            worst = max(worst, ulps(found, true + 360 if found == 180 and true < 0 else true))
    assert worst <= ARCTANGENT_ULP


def test_arctangent_whose_result_is_below_the_normal_numbers():
    """The quotient y / x is then a subnormal number and loses digits: no relative accuracy, but the angle is right to
    30 times the smallest number there is."""
    rng = np.random.default_rng(24)
    with mp.workdps(DIGITS):
        for tiny in (10 ** rng.uniform(-322, -309, 500)).tolist():
            assert abs(atan2_deg(tiny, 1.0) - mp.degrees(mpf(tiny))) <= 30 * 5e-324
            assert abs(atan2_deg(-tiny * 2.0**300, 2.0**300) + mp.degrees(mpf(tiny))) <= 30 * 5e-324


def test_arctangent_on_the_axes_and_diagonals_is_exact():
    for size in (5e-324, 1e-300, 0.7, 1.0, 3.0, 1e300):
        compass = [(0.0, 1.0), (1.0, 1.0), (1.0, 0.0), (1.0, -1.0), (0.0, -1.0), (-1.0, -1.0), (-1.0, 0.0), (-1.0, 1.0)]
        assert [atan2_deg(y * size, x * size) for y, x in compass] == [0, 45, 90, 135, 180, -135, -90, -45]


def test_arctangent_of_signed_zeros():
    """The range is (-180, 180]: the sign of a zero y says nothing, and no result is -0 or -180."""
    for zero in (0.0, -0.0):
        assert atan2_deg(zero, 1.0) == 0 and math.copysign(1, atan2_deg(zero, 1.0)) == 1
        assert atan2_deg(zero, -1.0) == 180
        assert atan2_deg(1.0, zero) == 90 and atan2_deg(-1.0, zero) == -90
        for other in (0.0, -0.0):
            assert atan2_deg(zero, other) == 0 and math.copysign(1, atan2_deg(zero, other)) == 1
    # so near to the negative x axis that the angle rounds to 180
    assert atan2_deg(-1e-300, -1.0) == atan2_deg(1e-300, -1.0) == 180


def test_arctangent_undoes_sine_and_cosine():
    rng = np.random.default_rng(25)
    for x in rng.uniform(-180, 180, 2000).tolist():
        assert atan2_deg(*sincos_deg(x)) == pytest.approx(x, abs=2e-13, rel=0)


@pytest.mark.parametrize(("x", "expected"), [(0.0, 0.0), (-0.0, 0.0), (360.0, 0.0), (-360.0, 0.0), (720.0, 0.0),
                                             (-720.0, 0.0), (359.0, 359.0), (-1.0, 359.0), (-361.0, 359.0),
                                             (719.0, 359.0), (540.5, 180.5), (-1e-300, 0.0)])
def test_full_circle(x, expected):
    """In [0, 360), the upper end never reached: a tiny negative angle is 0."""
    assert lib.magnav_full_circle_deg(x) == expected


def test_full_circle_is_the_same_direction():
    rng = np.random.default_rng(26)
    for x in rng.uniform(-720, 720, 2000).tolist():
        found = lib.magnav_full_circle_deg(x)
        assert 0 <= found < 360
        assert abs(math.remainder(found - x, 360.0)) <= 2 * math.ulp(720.0)
