"""Bearings from one north to another."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import magnav
from magnav.errors import InputError

NORTHS = ("magnetic", "true", "grid")


@settings(max_examples=60, deadline=None)
@given(st.floats(0, 359.999), st.sampled_from(NORTHS), st.sampled_from(NORTHS), st.floats(-79, 83),
       st.floats(-180, 180))
def test_round_trip(bearing, one, other, lat, lon):
    field = magnav.load_model("WMM2025").field(lat, lon, when=2026.2)
    there = magnav.convert_bearing(bearing, one, other, field=field, crs="utm")
    back = magnav.convert_bearing(there.bearing_deg, other, one, field=field, crs="utm")
    assert (back.bearing_deg - bearing + 180) % 360 == pytest.approx(180, abs=1e-9)
    assert 0 <= there.bearing_deg < 360


def test_signs_as_the_trade_has_them():
    """East declination is added to a magnetic bearing for the true one; grid bearing = true - convergence, convergence
    positive where grid north lies east of true north. Common practice, no source."""
    field = magnav.load_model("WMM2020").field(52.51, 13.32, 40.0, when="2020-07-01")
    bearing = magnav.convert_bearing(100.0, "magnetic", "grid", field=field, crs="utm")
    assert field.declination_deg > 0
    assert bearing.true_deg == pytest.approx(100.0 + field.declination_deg)
    assert bearing.grid_deg == pytest.approx(bearing.true_deg - bearing.convergence_deg)
    assert bearing.bearing_deg == bearing.grid_deg
    assert bearing.grid == "WGS 84 / UTM zone 33N"


def test_the_models_sigma_enters_only_between_magnetic_and_the_others():
    field = magnav.load_model("WMM2025").field(40.0, -105.0, when=2025.5)
    def sigma(a, b):
        return magnav.convert_bearing(10.0, a, b, field=field, crs="utm", sigma_deg=0.3).sigma_deg

    assert sigma("true", "grid") == sigma("magnetic", "magnetic") == 0.3
    assert sigma("magnetic", "true") == sigma("grid", "magnetic") == np.hypot(0.3, field.sigma.declination_deg)
    for own, larger in ((0.3, "model"), (3.0, "reading")):
        bearing = magnav.convert_bearing(10.0, "magnetic", "true", field=field, sigma_deg=own)
        assert bearing.contribution_deg == {"reading": own, "model": field.sigma.declination_deg}
        assert bearing.dominant == larger


def test_interval_wraps_and_vanishes():
    field = magnav.load_model("WMM2025").field(40.0, -105.0, when=2025.5)
    bearing = magnav.convert_bearing(0.0, "true", "true", field=field, sigma_deg=1.0)
    assert bearing.low_95_deg == pytest.approx(360 - 1.96, abs=1e-4)
    assert bearing.high_95_deg == pytest.approx(1.96, abs=1e-4)
    wide = magnav.convert_bearing(0.0, "true", "true", field=field, sigma_deg=92.0)
    assert np.isnan(wide.low_95_deg) and np.isnan(wide.high_95_deg)


def test_arrays_broadcast_and_scalars_stay_scalars():
    field = magnav.load_model("WMM2025").field([40.0, 41.0], [-105.0, -104.0], when=2025.5)
    many = magnav.convert_bearing(np.array([[1.0], [2.0], [3.0]]), "magnetic", "grid", field=field, crs="utm")
    assert many.bearing_deg.shape == many.sigma_deg.shape == (3, 2)
    one = magnav.load_model("WMM2025").field(40.0, -105.0, when=2025.5)
    assert isinstance(magnav.convert_bearing(5, "magnetic", "true", field=one).bearing_deg, float)


@pytest.mark.parametrize(("keywords", "words"), [
    ({"bearing_deg": 400.0}, "between -360 and 360"), ({"bearing_deg": np.nan}, "between -360 and 360"),
    ({"sigma_deg": -1.0}, "0 or more"), ({"sigma_deg": np.nan}, "0 or more"),
    ({"to_north": "up"}, "accepted: magnetic, true, grid"), ({"to_north": "grid"}, "needs a projected")])
def test_bad_values_are_refused(keywords, words):
    field = magnav.load_model("WMM2025").field(40.0, -105.0, when=2025.5)
    arguments = {"bearing_deg": 1.0, "from_north": "magnetic", "to_north": "true", "field": field} | keywords
    with pytest.raises(InputError, match=words):
        magnav.convert_bearing(**arguments)


def test_bad_values_among_good_ones():
    field = magnav.load_model("WMM2025").field([40.0, 41.0, 88.0], [-105.0, -104.0, 3.0], when=2025.5)
    bearing = magnav.convert_bearing([10.0, 500.0, 20.0], "magnetic", "grid", field=field, crs="utm", bad="nan")
    assert np.isfinite(bearing.bearing_deg).tolist() == [True, False, False]
