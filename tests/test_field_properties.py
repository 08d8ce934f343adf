"""What must hold of any potential field, whatever the figures; points and dates drawn by hypothesis.

The potential is that of reference_synthesis.py, evaluated and differenced in mpmath, not the core's.
"""

import concurrent.futures
import math
import time

import numpy as np
import pytest
import reference_synthesis as reference
from hypothesis import given, settings
from hypothesis import strategies as st
from mpmath import mp

import magnav
from magnav import core

NED = ("north_nT", "east_nT", "down_nT")
ELEMENTS = (*NED, "horizontal_nT", "total_nT", "declination_deg", "inclination_deg")
NAMES = (*ELEMENTS, *(f"{n}_per_yr" for n in ELEMENTS))
ACCURACY_NT = 1e-9  # the header of the core

latitudes = st.floats(-90, 90) | st.sampled_from([-90.0, -89.99999999, 0.0, 89.99999999, 90.0])
longitudes = st.floats(-360, 360) | st.sampled_from([-360.0, -180.0, 0.0, 180.0, 360.0])
heights = st.floats(-1000, 850e3)
shipped = st.sampled_from([("WMM2025", 2025.0, 2030.0), ("WMM2020", 2020.0, 2025.0), ("WMM2015v2", 2015.0, 2020.0),
                           ("IGRF-14", 1900.0, 2030.0), ("gufm1", 1590.0, 1990.0)])


@st.composite
def models_and_dates(draw):
    name, first, last = draw(shipped)
    return magnav.load_model(name), draw(st.floats(first, last))


def vector(field):
    return np.array([getattr(field, n) for n in NED])


def ulps_apart(degrees):
    """Room for three units in the last place of the arctangent (its header) and two roundings on the way to it."""
    return 5 * math.ulp(max(abs(degrees), 1e-3))


@settings(max_examples=40, deadline=None)
@given(models_and_dates(), latitudes, longitudes, heights)
def test_the_vector_is_minus_the_gradient_of_the_potential(model_and_date, lat, lon, height):
    model, year = model_and_date
    with mp.workdps(reference.DIGITS):
        terms, _ = reference.at_date(model.coefficients, year)
        gradient = reference.gradient_field(terms, lat, lon, height)
        ours = vector(model.field(lat, lon, height, when=year)).tolist()
        assert max(abs(a - b) for a, b in zip(gradient, ours, strict=True)) < ACCURACY_NT


@settings(max_examples=200, deadline=None)
@given(models_and_dates(), latitudes, longitudes, heights)
def test_rates_are_differences_in_time(model_and_date, lat, lon, height):
    """Over a short step within one piece of the time law; of every element, those that bend near a magnetic pole kept
    to where the horizontal field is not weak."""
    model, year = model_and_date
    breaks = model.coefficients.breaks_yr
    piece = min(int(np.searchsorted(breaks, year, side="right")) - 1, len(breaks) - 2)
    step = 0.05
    middle = min(max(year, breaks[piece] + step), breaks[piece + 1] - step)
    before, at, after = (model.field(lat, lon, height, when=middle + k * step) for k in (-1, 0, 1))
    assert after.year - before.year == pytest.approx(2 * step, abs=1e-12)
    # a cubic law leaves its third derivative times step^2 / 6, well under 1e-2 nT/yr
    cubic = 1e-2 if model.coefficients.polynomials.shape[1] > 2 else 0.0
    for name in ELEMENTS:
        if name in ("horizontal_nT", "declination_deg", "inclination_deg") and at.horizontal_nT < 3000:
            continue
        found = (getattr(after, name) - getattr(before, name)) / (after.year - before.year)
        nT_here = 57.3 / at.horizontal_nT if name.endswith("deg") else 1.0
        # an element that is not linear in the vector bends by at most (rate * step / H)^2 times its size
        bend = 0 if name in NED else 200 * (200 * step / at.horizontal_nT) ** 2
        assert getattr(at, f"{name}_per_yr") == pytest.approx(found, abs=(1e-8 + cubic + bend) * nT_here), name


@settings(max_examples=200, deadline=None)
@given(models_and_dates(), latitudes, longitudes, heights)
def test_elements_and_their_rates_are_those_of_the_vector(model_and_date, lat, lon, height):
    """H, F, D, I by their definitions, with the standard library's functions; the vector again from F, D, I."""
    model, year = model_and_date
    f = model.field(lat, lon, height, when=year)
    h = math.hypot(f.north_nT, f.east_nT)
    assert f.horizontal_nT == pytest.approx(h, rel=1e-15 * 3)
    assert f.total_nT == pytest.approx(math.hypot(h, f.down_nT), rel=1e-15 * 3)
    d, i = math.degrees(math.atan2(f.east_nT, f.north_nT)), math.degrees(math.atan2(f.down_nT, h))
    assert f.declination_deg == pytest.approx(d, abs=ulps_apart(d), rel=0)
    assert f.inclination_deg == pytest.approx(i, abs=ulps_apart(i), rel=0)
    assert -180 < f.declination_deg <= 180 and -90 <= f.inclination_deg <= 90

    # rates by the chain rule, F H D I solved for X Y Z and back
    dec, inc = math.radians(f.declination_deg), math.radians(f.inclination_deg)
    h_rate = math.cos(dec) * f.north_nT_per_yr + math.sin(dec) * f.east_nT_per_yr
    across = math.cos(dec) * f.east_nT_per_yr - math.sin(dec) * f.north_nT_per_yr
    assert f.horizontal_nT_per_yr == pytest.approx(h_rate, abs=1e-10)
    assert f.total_nT_per_yr == pytest.approx(math.cos(inc) * h_rate + math.sin(inc) * f.down_nT_per_yr, abs=1e-10)
    assert math.radians(f.declination_deg_per_yr) * h == pytest.approx(across, abs=1e-10)
    assert math.radians(f.inclination_deg_per_yr) * f.total_nT == pytest.approx(
        math.cos(inc) * f.down_nT_per_yr - math.sin(inc) * h_rate, abs=1e-10)


@settings(max_examples=100, deadline=None)
@given(models_and_dates(), st.floats(-90, 90), st.floats(-360, 360), heights)
def test_grid_variation_is_the_declination_from_the_polar_grids_north(model_and_date, lat, lon, height):
    """Grid north of the polar stereographic grid points along the meridian of Greenwich: its bearing is the longitude
    in the north, its opposite in the south (UPS, DMA TM 8358.2)."""
    model, year = model_and_date
    f = model.field(lat, lon, height, when=year)
    if abs(lat) < 55:
        assert math.isnan(f.grid_variation_deg)
    else:
        expected = f.declination_deg - lon if lat > 0 else f.declination_deg + lon
        assert abs(math.remainder(f.grid_variation_deg - expected, 360)) < 1e-12
        assert -180 < f.grid_variation_deg <= 180


@settings(max_examples=200, deadline=None)
@given(models_and_dates(), latitudes, st.integers(0, 360 * 2**20), heights)
def test_longitude_has_the_circle_for_period(model_and_date, lat, part, height):
    """The same bits, where the longitude less 360 is a number at all; at odd multiples of 45 degrees the reduction may
    take the other neighbour, and the last place differ."""
    model, year = model_and_date
    lon = part / 2**20
    here, there = (model.field(lat, x, height, when=year) for x in (lon, lon - 360.0))
    if lon % 90 == 45:
        assert np.max(np.abs(vector(here) - vector(there))) < ACCURACY_NT
    else:
        assert [getattr(here, n) for n in NAMES] == [getattr(there, n) for n in NAMES]


@settings(max_examples=50, deadline=None)
@given(models_and_dates(), latitudes, heights)
def test_no_seam_at_the_ends_of_the_longitude(model_and_date, lat, height):
    model, year = model_and_date
    whole = model.field(lat, [-360.0, 0.0, 360.0], height, when=year)
    assert np.all(vector(whole) == vector(whole)[:, :1])
    step = 1e-9
    for seam in (180.0, -180.0, 360.0):
        across = vector(model.field(lat, [seam - step if seam > 0 else seam + step, seam, -seam], height, when=year))
        # no component turns faster than 20,000 nT a degree
        assert np.max(np.abs(across[:, 0] - across[:, 1])) < 20000 * step
        assert np.max(np.abs(across[:, 1] - across[:, 2])) < ACCURACY_NT


@settings(max_examples=50, deadline=None)
@given(models_and_dates(), st.sampled_from([90.0, -90.0]), longitudes, heights)
def test_the_pole_is_the_limit_along_each_meridian(model_and_date, pole, lon, height):
    """Towards the pole the vector and its rate converge in proportion to the distance, down to the last number below
    90; at it, the horizontal part turns with the longitude as a rigid vector does."""
    model, year = model_and_date
    steps = np.array([0.0, np.spacing(90.0), 1e-12, 1e-9, 1e-6, 1e-3])
    field = model.field(pole - np.copysign(steps, pole), lon, height, when=year)
    values = vector(field)
    # no component changes by more than 3000 nT a degree along a meridian there
    assert np.all(np.abs(values - values[:, :1]) <= 3000 * steps + 2e-10)
    rates = np.array([getattr(field, f"{n}_per_yr") for n in NED])
    assert np.all(np.abs(rates - rates[:, :1]) <= 30 * steps + 2e-12)

    zero = vector(model.field(pole, 0.0, height, when=year))
    # the north axis turns with the longitude, to the left seen from above at the north pole
    turn = -np.radians(lon) * np.sign(pole)
    north = zero[0] * np.cos(turn) + zero[1] * np.sin(turn)
    east = zero[1] * np.cos(turn) - zero[0] * np.sin(turn)
    assert np.max(np.abs(values[:, 0] - [north, east, zero[2]])) < ACCURACY_NT


@settings(max_examples=50, deadline=None)
@given(models_and_dates(), st.lists(st.tuples(latitudes, longitudes, heights, st.floats(0, 1)), min_size=1, max_size=8))
def test_an_array_is_its_points_bit_for_bit(model_and_date, points):
    """Whatever the order of the dates, each renewing the snapshot or not."""
    model, year = model_and_date
    lat, lon, height, part = map(np.array, zip(*points, strict=True))
    # some dates repeat, some differ
    when = np.where(part < 0.5, year, model.valid_from_yr + part * (model.valid_until_yr - model.valid_from_yr))
    many = model.field(lat, lon, height, when=when)
    for i in range(len(points)):
        one = model.field(float(lat[i]), float(lon[i]), float(height[i]), when=float(when[i]))
        for name in NAMES:
            assert getattr(many, name)[i] == getattr(one, name), name
            assert getattr(many.sigma, name)[i] == getattr(one.sigma, name), name
        assert many.flags[i] == one.flags


def test_threads_give_the_same_bits():
    """Eight threads at once on one model, and on the automatic choice, against one."""
    rng = np.random.default_rng(41)
    lat, lon = np.degrees(np.arcsin(rng.uniform(-1, 1, 3000))), rng.uniform(-180, 180, 3000)
    for name, first, last in (("WMM2025", 2025.0, 2030.0), ("auto", 1590.0, 2030.0)):
        model = magnav.load_model(name)
        year = rng.uniform(first, last, 3000)

        def bits(_, model=model, year=year):
            field = model.field(lat, lon, 1000.0, when=year)
            return b"".join(getattr(field, n).tobytes() for n in NAMES) + field.flags.tobytes()

        alone = bits(None)
        with concurrent.futures.ThreadPoolExecutor(8) as pool:
            assert all(found == alone for found in pool.map(bits, range(32)))


def test_other_threads_run_while_the_core_computes():
    """A clock read over and over in this thread meanwhile: held up for the whole of one call into the core, it would
    jump by all the time that takes."""
    model = magnav.load_model("WMM2025")
    lat = np.linspace(-90, 90, 400_000)
    rest = np.zeros(lat.size), np.zeros(lat.size), np.full(lat.size, 2026.0)
    with concurrent.futures.ThreadPoolExecutor(1) as pool:
        times = [time.perf_counter()]
        running = pool.submit(core.field_many, model.core_model, False, lat, *rest)
        while not running.done():
            times.append(time.perf_counter())
        assert not running.result()[1].any()
    assert max(np.diff(times)) < 0.5 * (times[-1] - times[0])
