"""Each flag of a field, on either side of its limit. Zones: caution below 6000 nT of horizontal field, blackout below
2000 nT (WMM technical report, NOAA NCEI and BGS); heights -1 km to 850 km (the same). The others are the project's own.
"""

import math

import numpy as np
import pytest

import magnav
from magnav import Flag
from magnav.core import Flag as CoreFlag
from magnav.core import ffi, flag_text, flags_in, lib
from magnav.field.coefficients import Coefficients

MID = (45.0, 10.0)


def flags_of_vector(north, east, down, lat=MID[0], lon=MID[1]):
    """Flags and values the core gives to a vector at a place."""
    values = ffi.new("magnav_field_values *")
    status = lib.magnav_elements(ffi.new("double[3]", [north, east, down]), ffi.NULL, lat, lon, values)
    assert status == lib.MAGNAV_OK
    return Flag(values.flags), values


def below(x):
    return math.nextafter(x, -math.inf)


def above(x):
    return math.nextafter(x, math.inf)


@pytest.mark.parametrize(("horizontal", "expected"), [
    (above(6000.0), Flag(0)), (6000.0, Flag(0)), (below(6000.0), Flag.CAUTION_ZONE),
    (above(2000.0), Flag.CAUTION_ZONE), (2000.0, Flag.CAUTION_ZONE), (below(2000.0), Flag.BLACKOUT_ZONE),
    (1e-3, Flag.BLACKOUT_ZONE)])
def test_zones(horizontal, expected):
    for north, east in ((horizontal, 0.0), (0.0, -horizontal)):
        flags, _ = flags_of_vector(north, east, 1e-4)
        assert flags == expected


@pytest.mark.parametrize(("lat", "lon", "height", "published_H", "expected"), [
    (89.0, -121.0, 28e3, 1504.298146, Flag.BLACKOUT_ZONE), (80.0, -96.0, 48e3, 2164.2855, Flag.CAUTION_ZONE),
    (82.0, 87.0, 54e3, 2302.4273, Flag.CAUTION_ZONE), (-59.0, -8.0, 39e3, 14918.1158, Flag(0))])
def test_zones_at_published_test_points(lat, lon, height, published_H, expected):
    """H from the test values published with WMM2025."""
    field = magnav.load_model("WMM2025").field(lat, lon, height, when=2025.0)
    assert field.horizontal_nT == pytest.approx(published_H, abs=1e-3)
    assert field.flags & (Flag.CAUTION_ZONE | Flag.BLACKOUT_ZONE) == expected


def test_zones_over_a_grid_follow_the_horizontal_field():
    lat, lon = np.arange(-90.0, 90.1, 2.5)[:, None], np.arange(-180.0, 180.0, 5.0)
    field = magnav.load_model("WMM2025").field(lat, lon, when=2026.0)
    caution, blackout = ((field.flags & int(f)) != 0 for f in (Flag.CAUTION_ZONE, Flag.BLACKOUT_ZONE))
    assert np.array_equal(blackout, field.horizontal_nT < 2000)
    assert np.array_equal(caution, (field.horizontal_nT >= 2000) & (field.horizontal_nT < 6000))
    assert 0 < blackout.sum() < caution.sum() < 0.1 * caution.size
    # both magnetic poles have their zones
    assert blackout[lat[:, 0] > 0].any() and blackout[lat[:, 0] < 0].any()


def test_steep_dip():
    for sign in (1, -1):
        for dip, up in ((79.999999, False), (80.000001, True), (89.0, True), (0.0, False)):
            down = sign * 10000.0 * math.tan(math.radians(dip))
            flags, values = flags_of_vector(10000.0, 0.0, down)
            assert values.inclination_deg == pytest.approx(sign * dip, abs=1e-9)
            assert flags == (Flag.STEEP_DIP if up else Flag(0))
    # one degree of tilt then grows at least tan 80 = 5.67 times, as the header says
    assert math.tan(math.radians(80)) == pytest.approx(5.7, abs=0.05)


def test_near_a_geographic_pole():
    for sign in (1, -1):
        for lat, up in ((below(89.9), False), (89.9, True), (90.0, True), (80.0, False)):
            flags, _ = flags_of_vector(20000.0, 0.0, 20000.0, lat=sign * lat)
            assert flags == (Flag.NEAR_GEOGRAPHIC_POLE if up else Flag(0))
            field = magnav.load_model("WMM2025").field(sign * lat, 0.0, when=2026.0)
            assert bool(field.flags & Flag.NEAR_GEOGRAPHIC_POLE) == up


@pytest.mark.parametrize(("height", "up"), [(-1000.0, False), (below(-1000.0), True), (850e3, False),
                                            (above(850e3), True), (-10e3, True), (1e7, True), (0.0, False)])
def test_height_out_of_range(height, up):
    field = magnav.load_model("WMM2025").field(*MID, height, when=2026.0)
    assert bool(field.flags & Flag.HEIGHT_OUT_OF_RANGE) == up
    # far out the field itself is weak enough for the zones
    assert up or field.flags == Flag(0)


@pytest.mark.parametrize(("year", "up"), [(2025.0, False), (below(2025.0), True), (2030.0, False),
                                          (above(2030.0), True)])
def test_outside_validity(year, up):
    field = magnav.load_model("WMM2025").field(*MID, when=year, extrapolate=True)
    assert field.flags == (Flag.OUTSIDE_VALIDITY if up else Flag(0))


def test_no_declination():
    flags, values = flags_of_vector(0.0, 0.0, 50000.0)
    assert flags == Flag.NO_DECLINATION | Flag.BLACKOUT_ZONE | Flag.STEEP_DIP and values.declination_deg == 0
    flags, values = flags_of_vector(1e-9, 0.0, 50000.0)
    assert not flags & Flag.NO_DECLINATION
    flags, values = flags_of_vector(0.0, -1e-9, 50000.0)
    assert not flags & Flag.NO_DECLINATION and values.declination_deg == -90


def test_zone_limits_through_a_model():
    """A dipole whose field at the equator is horizontal: its strength set to either side of a limit."""
    def field(strength):
        polynomials = np.array([[[-strength, 0.0, 0.0]]])
        model = magnav.Model(Coefficients("dipole", "invented", 1, 2025.0, 2025.0, 2030.0, np.array([2025.0, 2030.0]),
                                          polynomials), magnav.load_model("WMM2025").error_model)
        return model.field(0.0, 0.0, when=2026.0)

    for limit, flag in ((6000.0, Flag.CAUTION_ZONE), (2000.0, Flag.BLACKOUT_ZONE)):
        strength = limit / field(1.0).horizontal_nT
        for factor, up in ((1 + 1e-12, False), (1 - 1e-12, True)):
            found = field(strength * factor)
            assert found.horizontal_nT == pytest.approx(limit, rel=1e-11)
            assert bool(found.flags & flag) == up


# ---- names and texts ----

def test_every_flag_has_one_name_one_text_one_bit():
    assert len(Flag) == lib.MAGNAV_FLAG_COUNT and Flag is CoreFlag
    assert [flag.value for flag in Flag] == [1 << bit for bit in range(lib.MAGNAV_FLAG_COUNT)]
    texts = [flag_text(flag) for flag in Flag]
    assert all(texts) and len(set(texts)) == len(texts)
    for bit, flag in enumerate(Flag):
        assert ffi.string(lib.magnav_flag_name(bit)).decode() == flag.name
        assert ffi.string(lib.magnav_flag_text(bit)).decode() == flag_text(flag)
    for outside in (-1, lib.MAGNAV_FLAG_COUNT, 2**31 - 1, -(2**31)):
        assert lib.magnav_flag_name(outside) == ffi.NULL and lib.magnav_flag_text(outside) == ffi.NULL


def test_the_limits_are_in_the_texts():
    for flag, words in {Flag.CAUTION_ZONE: "6000 nT", Flag.BLACKOUT_ZONE: "2000 nT", Flag.STEEP_DIP: "80 degrees",
                        Flag.NEAR_GEOGRAPHIC_POLE: "0.1 degree", Flag.HEIGHT_OUT_OF_RANGE: "-1 km to 850 km"}.items():
        assert words in flag_text(flag)


def test_flags_in_and_warnings_are_in_bit_order_and_once():
    assert flags_in(0) == [] and flags_in(np.array([], dtype=np.uint32)) == []
    assert flags_in(Flag.STEEP_DIP | Flag.CAUTION_ZONE) == [Flag.CAUTION_ZONE, Flag.STEEP_DIP]
    assert flags_in(np.array([[8, 1], [1, 0]])) == [Flag.CAUTION_ZONE, Flag.STEEP_DIP]
    field = magnav.load_model("WMM2025").field([80.0, 45.0, 80.0], -96.0, [0.0, 900e3, 0.0], when=2025.0)
    assert field.warnings == [flag_text(f) for f in (Flag.CAUTION_ZONE, Flag.STEEP_DIP, Flag.HEIGHT_OUT_OF_RANGE)]
