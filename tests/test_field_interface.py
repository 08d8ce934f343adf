"""The Python face of the field: shapes, types, dates, errors, uncertainty figures, the choice of a model by date."""

import dataclasses
import datetime as dt
import json

import numpy as np
import pytest
from derive_extrapolation_growth import straight_line_errors

import magnav
from magnav import core
from magnav.core import lib
from magnav.errors import InputError, MagnavError, OutOfValidityError
from magnav.uncertainty.model_error import RATE_SIGMA_NT_PER_YR, SIGMA_NAMES

VALUES = tuple(f.name for f in dataclasses.fields(magnav.Field)
               if f.name not in ("model", "sigma", "flags", "status", "grid_variation_deg"))
ELEMENTS = VALUES[4:11]
PLACE = (50.0, 15.0, 300.0)


@pytest.fixture(scope="module")
def wmm():
    return magnav.load_model("WMM2025")


@pytest.fixture(scope="module")
def auto():
    return magnav.load_model("auto")


# ---- shapes and types ----

def test_scalars_give_floats(wmm):
    for place in (PLACE, (50, 15, 300), tuple(map(np.float32, PLACE)), tuple(np.array(v) for v in PLACE)):
        field = wmm.field(*place, when=2026.0)
        assert all(type(getattr(field, n)) is float for n in VALUES)
        assert all(type(v) is float for v in vars(field.sigma).values())
        assert isinstance(field.flags, magnav.Flag) and type(field.status) is int and field.status == 0
        assert field.model == "WMM2025"
        assert np.isnan(field.grid_variation_deg)
        assert [getattr(field, n) for n in VALUES] == [getattr(wmm.field(*PLACE, when=2026.0), n) for n in VALUES]


def test_height_defaults_to_the_ellipsoid(wmm):
    assert wmm.field(50.0, 15.0, when=2026.0).total_nT == wmm.field(50.0, 15.0, 0.0, when=2026.0).total_nT


def test_broadcasting(wmm):
    lat, lon = np.linspace(-80, 80, 5)[:, None], np.linspace(-170, 170, 7)
    years = np.array([2025.0, 2029.9]).reshape(2, 1, 1)
    field = wmm.field(lat, lon, 100.0, when=years)
    for name in (*VALUES, "grid_variation_deg", "flags", "status"):
        assert getattr(field, name).shape == (2, 5, 7), name
    assert all(v.shape == (2, 5, 7) for v in vars(field.sigma).values())
    assert field.flags.dtype == np.uint32 and field.model == "WMM2025"
    assert field.lat_deg[1, 3, 0] == lat[3, 0] and field.year[1, 0, 0] == 2029.9
    one = wmm.field(lat[3, 0], lon[2], 100.0, when=2029.9)
    assert [getattr(field, n)[1, 3, 2] for n in VALUES] == [getattr(one, n) for n in VALUES]


def test_anything_array_like(wmm):
    lat = np.array([10.0, -20.5, 45.25, 60.0])
    plain = wmm.field(lat, 30.0, when=2026.5)
    strided = np.repeat(lat, 3)[::3]
    reversed_twice = lat[::-1].copy()[::-1]
    fortran = np.asfortranarray(np.tile(lat[:, None], (1, 2)))[:, 1]
    for like in (lat.tolist(), tuple(lat), lat.astype(np.float32), strided, reversed_twice, fortran,
                 lat.astype(object), lat.astype(">f8"), np.ma.array(lat)):
        field = wmm.field(like, 30.0, when=2026.5)
        for name in VALUES:
            assert np.array_equal(getattr(field, name), getattr(plain, name)), (type(like), name)
    whole = wmm.field(np.array([10, 20]), [30, 40], 5, when=np.array([2026, 2027]))
    assert np.array_equal(whole.total_nT, wmm.field([10.0, 20.0], [30.0, 40.0], 5.0, when=[2026.0, 2027.0]).total_nT)


def test_empty_arrays(wmm, auto):
    for model in (wmm, auto):
        for shape in ((0,), (0, 3)):
            field = model.field(np.empty(shape), 10.0, when=2026.0)
            assert field.total_nT.shape == field.flags.shape == field.sigma.total_nT.shape == shape
            assert field.warnings == [] and field.as_dict()["total_nT"] == np.empty(shape).tolist()


def test_caller_and_result_share_no_memory(wmm):
    lat, when = np.array([10.0, 20.0]), np.array([2026.0, 2027.0])
    field = wmm.field(lat, 0.0, when=when)
    assert lat.tolist() == [10.0, 20.0] and when.tolist() == [2026.0, 2027.0]
    lat[:], when[:] = 0.0, 0.0
    assert field.lat_deg.tolist() == [10.0, 20.0] and field.year.tolist() == [2026.0, 2027.0]
    read_only = lat.copy()
    read_only.setflags(write=False)
    assert wmm.field(read_only, 0.0, when=2026.0).total_nT.shape == (2,)


def test_a_field_cannot_be_changed(wmm):
    with pytest.raises(dataclasses.FrozenInstanceError):
        wmm.field(*PLACE, when=2026.0).north_nT = 0.0


@pytest.mark.parametrize("when", [
    dt.date(2026, 7, 2), dt.datetime(2026, 7, 2), dt.datetime(2026, 7, 2, tzinfo=dt.UTC), np.datetime64("2026-07-02"),
    "2026-07-02", "2026-07-02T00:00Z", 2026 + 182 / 365, np.float64(2026 + 182 / 365), np.array(2026 + 182 / 365)])
def test_every_way_of_saying_when_gives_the_same_field(wmm, when):
    field = wmm.field(*PLACE, when=when)
    assert field.year == pytest.approx(2026 + 182 / 365, abs=3e-13, rel=0)
    assert field.north_nT == pytest.approx(wmm.field(*PLACE, when=2026 + 182 / 365).north_nT, abs=1e-9)


def test_dates_as_an_array(wmm):
    days = np.array(["2026-01-01", "2027-07-02"], dtype="M8[D]")
    for when in (days, days.tolist(), days.astype(str).tolist(), [dt.date(2026, 1, 1), "2027-07-02"]):
        field = wmm.field(*PLACE, when=when)
        assert field.year == pytest.approx([2026.0, 2027 + 182 / 365], abs=3e-13)
        assert field.total_nT[0] != field.total_nT[1]


# ---- errors ----

BAD_POINTS = [
    ((90.0000001, 0.0, 0.0), "latitude outside -90 to 90 degrees", lib.MAGNAV_E_LATITUDE),
    ((-91.0, 0.0, 0.0), "latitude outside", lib.MAGNAV_E_LATITUDE),
    ((0.0, 360.0000001, 0.0), "longitude outside -360 to 360 degrees", lib.MAGNAV_E_LONGITUDE),
    ((0.0, -361.0, 0.0), "longitude outside", lib.MAGNAV_E_LONGITUDE),
    ((0.0, 0.0, -10000.1), "height outside -10,000 m to 10,000,000 m", lib.MAGNAV_E_HEIGHT),
    ((0.0, 0.0, 1.00000001e7), "height outside", lib.MAGNAV_E_HEIGHT),
    ((np.nan, 0.0, 0.0), "NaN", lib.MAGNAV_E_NOT_FINITE), ((0.0, np.inf, 0.0), "infinite", lib.MAGNAV_E_NOT_FINITE),
    ((0.0, 0.0, -np.inf), "infinite", lib.MAGNAV_E_NOT_FINITE), ((None, 0.0, 0.0), "NaN", lib.MAGNAV_E_NOT_FINITE),
]


@pytest.mark.parametrize(("point", "message", "status"), BAD_POINTS)
def test_a_bad_point_is_refused_and_said_why(wmm, point, message, status):
    with pytest.raises(InputError, match=message) as caught:
        wmm.field(*point, when=2026.0)
    assert isinstance(caught.value, MagnavError) and isinstance(caught.value, ValueError)
    assert "index" not in str(caught.value)
    field = wmm.field(*point, when=2026.0, bad="nan")
    assert field.status == status and np.isnan(field.north_nT) and np.isnan(field.sigma.north_nT)


@pytest.mark.parametrize("point", [(90, 360, -10000), (-90, -360, 1e7), (0, 360, 0), (90.0, -180.0, 0.0)])
def test_the_ends_of_the_ranges_belong_to_them(wmm, point):
    assert wmm.field(*point, when=2025.0).status == 0
    assert wmm.field(*point, when=2030.0).status == 0


def test_the_first_bad_index_and_the_count_are_named(wmm):
    lat = np.zeros((3, 4))
    lat[1, 2], lat[2, 0] = 95.0, -95.0
    with pytest.raises(InputError, match=r"latitude .* at index \(1, 2\): lat_deg 95, .*\(2 points are bad; this is"):
        wmm.field(lat, 0.0, when=2026.0)
    with pytest.raises(InputError, match=r"at index \(2,\)") as caught:
        wmm.field([1.0, 2.0, 300.0], 0.0, when=2026.0)
    assert "points are bad" not in str(caught.value)


@pytest.mark.parametrize(("arguments", "message"), [
    (dict(lat_deg="north"), "lat_deg must be a real number"), (dict(lat_deg="50"), "lat_deg must be a real number"),
    (dict(lon_deg=1 + 2j), "lon_deg must be a real number"), (dict(lon_deg=np.array([1 + 2j])), "lon_deg must be"),
    (dict(height_m=[1.0, [2.0, 3.0]]), "height_m must be"), (dict(height_m={"m": 1}), "height_m must be"),
    (dict(lat_deg=np.datetime64("2026-01-01")), "lat_deg must be"), (dict(lat_deg=True), "lat_deg must be"),
    (dict(lat_deg=[1.0, 2.0], lon_deg=[1.0, 2.0, 3.0]), r"do not broadcast: shapes \(2,\), \(3,\), \(\), \(\)"),
    (dict(when="soon"), "cannot be read"), (dict(when=[2026.0, None]), "element 1"), (dict(when=1e5), "decimal year"),
    (dict(bad="ignore"), 'accepted are "raise" and "nan"'),
])
def test_unusable_arguments(wmm, arguments, message):
    with pytest.raises(InputError, match=message):
        wmm.field(**(dict(lat_deg=50.0, lon_deg=15.0, when=2026.0) | arguments))


def test_when_must_be_said(wmm):
    with pytest.raises(InputError, match="when is needed"):
        wmm.field(50.0, 15.0)


def test_bad_nan_reports_each_row_and_computes_the_others(wmm):
    """A mask, a NaN and a date outside the validity each have their status in their own row; the rest is untouched."""
    lat = np.ma.array([10.0, 20.0, 30.0, 99.0, 50.0, 60.0], mask=[0, 1, 0, 0, 0, 0])
    when = np.array([2026.0, 2026.0, np.nan, 2026.0, 2031.0, 2026.0])
    field = wmm.field(lat, 5.0, when=when, bad="nan")
    finite, date = lib.MAGNAV_E_NOT_FINITE, lib.MAGNAV_E_DATE
    assert field.status.tolist() == [0, finite, finite, lib.MAGNAV_E_LATITUDE, date, 0]
    for values in (*(getattr(field, n) for n in ELEMENTS), *vars(field.sigma).values()):
        assert np.isfinite(values).tolist() == [True, False, False, False, False, True]
    for i in (0, 5):
        one = wmm.field(float(lat[i]), 5.0, when=2026.0)
        assert [getattr(field, n)[i] for n in ELEMENTS] == [getattr(one, n) for n in ELEMENTS]
    assert field.flags[1:5].tolist() == [0, 0, 0, 0]
    with pytest.raises(InputError, match=r"date nan is not a decimal year .*element 2"):
        wmm.field(lat, 5.0, when=when)
    with pytest.raises(InputError, match=r"NaN.*at index \(1,\).*\(2 points are bad"):
        wmm.field(lat, 5.0, when=2026.0)


def test_missing_dates_are_rows_too(wmm, auto):
    days = np.array(["2026-01-01", "NaT"], dtype="M8[D]")
    masked = np.ma.array(days.astype("M8[s]"), mask=[True, False])
    for model in (wmm, auto):
        assert model.field(1.0, 2.0, when=days, bad="nan").status.tolist() == [0, lib.MAGNAV_E_NOT_FINITE]
        assert model.field(1.0, 2.0, when=masked, bad="nan").status.tolist() == [lib.MAGNAV_E_NOT_FINITE] * 2
        assert model.field(1.0, 2.0, when=np.ma.array([2026, 2027], mask=[0, 1]), bad="nan").status.tolist() == [
            0, lib.MAGNAV_E_NOT_FINITE]
        for bad_dates in (days, masked, np.ma.array([2026.0, 2027.0], mask=[0, 1])):
            with pytest.raises(InputError, match="element"):
                model.field(1.0, 2.0, when=bad_dates)


# ---- validity and extrapolation ----

@pytest.mark.parametrize(("name", "first", "last"), [("WMM2025", 2025.0, 2030.0), ("WMM2020", 2020.0, 2025.0),
                                                     ("WMM2015v2", 2015.0, 2020.0), ("IGRF-14", 1900.0, 2030.0),
                                                     ("gufm1", 1590.0, 1990.0)])
def test_validity_and_extrapolation(name, first, last):
    model = magnav.load_model(name)
    assert (model.valid_from_yr, model.valid_until_yr) == (first, last)
    for inside in (first, last):
        assert not model.field(*PLACE, when=inside).flags & magnav.Flag.OUTSIDE_VALIDITY
    for outside in (np.nextafter(first, 0), np.nextafter(last, 9999), first - 5, last + 5):
        with pytest.raises(OutOfValidityError, match=f"outside the validity of {name}, {first:g} to {last:g}; "
                                                     "extrapolate=True") as caught:
            model.field(*PLACE, when=outside)
        assert isinstance(caught.value, InputError)
        field = model.field(*PLACE, when=outside, extrapolate=True)
        assert field.status == 0 and field.flags & magnav.Flag.OUTSIDE_VALIDITY
        assert any("outside the model's validity" in line for line in field.warnings)
        assert model.field(*PLACE, when=outside, bad="nan").status == lib.MAGNAV_E_DATE
    with pytest.raises(OutOfValidityError, match=r"at index \(1,\)"):
        model.field(*PLACE, when=[first, last + 1, last])


@pytest.mark.parametrize("name", ["WMM2025", "IGRF-14", "gufm1"])
def test_extrapolation_goes_on_by_the_tangent(name):
    """Published laws are linear beyond a WMM's and IGRF's last epoch; gufm1's spline goes on by its last slope."""
    model = magnav.load_model(name)
    end = model.valid_until_yr
    at_end = model.field(*PLACE, when=end)
    far = model.field(*PLACE, when=end + 10, extrapolate=True)
    for n in ELEMENTS[:3]:
        rate = getattr(at_end, f"{n}_per_yr")
        assert getattr(far, n) == pytest.approx(getattr(at_end, n) + 10 * rate, abs=1e-9)
        assert getattr(far, f"{n}_per_yr") == pytest.approx(rate, abs=1e-12)


# ---- uncertainty ----

@pytest.mark.parametrize(("name", "year", "figures", "floor", "k"), [
    ("WMM2025", 2027.0, (137, 89, 141, 133, 138, 0.20), 0.26, 5417),
    ("WMM2020", 2022.0, (131, 94, 157, 128, 148, 0.21), 0.26, 5625)])
def test_published_one_sigma_figures(name, year, figures, floor, k):
    """Technical reports of WMM2025 (2024) and WMM2020 (2019), error model: X, Y, Z, H, F in nT, I in deg, and
    D = sqrt(floor^2 + (k / H)^2) deg."""
    lat = np.array([0.0, 50.0, 86.0, -64.0])
    field = magnav.load_model(name).field(lat, 140.0, when=year)
    sigma = field.sigma
    for value, element in zip(figures, ("north_nT", "east_nT", "down_nT", "horizontal_nT", "total_nT",
                                        "inclination_deg"), strict=True):
        assert np.array_equal(getattr(sigma, element), np.full(4, value)), element
    assert sigma.declination_deg == pytest.approx(np.sqrt(floor**2 + (k / field.horizontal_nT) ** 2), rel=1e-14)


@pytest.mark.parametrize("name", ["WMM2025", "WMM2020", "IGRF-14", "gufm1"])
def test_sigma_outside_the_validity_grows_and_never_shrinks(name):
    model = magnav.load_model(name)
    ahead = model.valid_until_yr + np.array([0.0, 0.01, 0.5, 1, 2, 5, 10, 20, 40])
    back = model.valid_from_yr - (ahead - model.valid_until_yr)
    for years in (ahead, back):
        field = model.field(*PLACE, when=years, extrapolate=True)
        for element in ("north_nT", "east_nT", "down_nT", "horizontal_nT", "total_nT", "inclination_deg"):
            sigma = getattr(field.sigma, element)
            assert np.all(np.diff(sigma) > 0), element
            assert sigma[1] == pytest.approx(sigma[0], rel=0.01), "no jump at the end of the validity"


def test_growth_outside_the_validity_is_what_was_measured(wmm):
    """IGRF-14's snapshots since 1980 carried on in straight lines: what their error adds to that of the first five
    years. Never more than a tenth less, nor more than a third above, from 5 to 25 years beyond the validity."""
    measured = straight_line_errors(1980)
    inside = measured[5][1]
    for age in (10, 15, 20, 25, 30):
        added = np.sqrt(measured[age][1] ** 2 - inside**2)
        field = wmm.field(*PLACE, when=[2030.0, 2025.0 + age], extrapolate=True)
        ours = [np.sqrt(s[1] ** 2 - s[0] ** 2)
                for s in (field.sigma.north_nT, field.sigma.east_nT, field.sigma.down_nT)]
        ratio = np.array(ours) / added
        assert np.all(ratio > 0.9) and np.all(ratio < 1.33), (age, ratio)


def test_sigma_of_the_elements_follows_from_that_of_the_vector(wmm):
    """The rates' sigmas of H, F, D, I against a seeded simulation of the vector's (a check of the propagation)."""
    field = wmm.field(*PLACE, when=2026.0)
    rng = np.random.default_rng(31)
    x, y, z = (getattr(field, n) + rng.normal(0, s, 400_000)
               for n, s in zip(("north_nT", "east_nT", "down_nT"), RATE_SIGMA_NT_PER_YR, strict=True))
    h = np.hypot(x, y)
    for name, values in {"horizontal_nT": h, "total_nT": np.hypot(h, z),
                         "declination_deg": np.degrees(np.arctan2(y, x)),
                         "inclination_deg": np.degrees(np.arctan2(z, h))}.items():
        # 400,000 draws: 0.11 % standard error
        assert getattr(field.sigma, f"{name}_per_yr") == pytest.approx(np.std(values), rel=0.005), name


def test_every_element_and_rate_has_its_sigma():
    assert set(SIGMA_NAMES) == {*ELEMENTS, *(f"{n}_per_yr" for n in ELEMENTS)}


# ---- plain data ----

def test_as_dict_is_json_with_the_attributes_names(wmm):
    scalar = wmm.field(*PLACE, when=2026.0)
    plain = json.loads(json.dumps(scalar.as_dict(), allow_nan=False))
    assert set(plain) == {f.name for f in dataclasses.fields(magnav.Field)} - {"status"}
    assert set(plain["sigma"]) == set(SIGMA_NAMES)
    assert plain["north_nT"] == scalar.north_nT and plain["model"] == "WMM2025" and plain["flags"] == []
    assert plain["grid_variation_deg"] is None

    array = wmm.field([[80.0, 99.0]], -96.0, 48e3, when=2025.0, bad="nan")
    plain = json.loads(json.dumps(array.as_dict(), allow_nan=False))
    assert plain["down_nT"] == [[array.down_nT[0, 0], None]]
    assert plain["sigma"]["down_nT"] == [[141.0, None]]
    assert plain["flags"] == [[["CAUTION_ZONE", "STEEP_DIP"], []]]
    assert plain["lat_deg"] == [[80.0, 99.0]]


def test_no_declination_is_said_as_nan(wmm):
    """An axial dipole at its pole: the horizontal field is exactly zero."""
    flat = magnav.field.coefficients.Coefficients(
        "axial dipole", "invented", 1, 2025.0, 2025.0, 2030.0, np.array([2025.0, 2030.0]),
        np.array([[[-30000.0, 0.0, 0.0], [10.0, 0.0, 0.0]]]))
    field = magnav.Model(flat, wmm.error_model).field(90.0, 12.0, when=2026.0)
    assert field.flags & magnav.Flag.NO_DECLINATION and field.horizontal_nT == 0
    assert np.isnan(field.declination_deg) and np.isnan(field.declination_deg_per_yr)
    assert np.isnan(field.grid_variation_deg) and field.inclination_deg == 90
    assert field.down_nT == pytest.approx(2 * 29990 * (6371.2 / 6356.752314245) ** 3, rel=1e-12)
    plain = json.loads(json.dumps(field.as_dict(), allow_nan=False))
    assert plain["declination_deg"] is None and plain["sigma"]["declination_deg"] is None


# ---- the model by its date ----

SEAMS = {"gufm1": (1590.0, 1900.0), "IGRF-14": (1900.0, 2015.0), "WMM2015v2": (2015.0, 2020.0),
         "WMM2020": (2020.0, 2025.0), "WMM2025": (2025.0, 2030.0)}


@pytest.mark.parametrize(("name", "first", "last"), [(n, *span) for n, span in SEAMS.items()])
def test_auto_takes_the_model_made_for_the_date(auto, name, first, last):
    for year in (first, (first + last) / 2, np.nextafter(last, 0)):
        field, own = auto.field(*PLACE, when=year), magnav.load_model(name).field(*PLACE, when=year)
        assert field.model == name
        assert [getattr(field, n) for n in VALUES] == [getattr(own, n) for n in VALUES]
        assert field.sigma == own.sigma and field.flags == own.flags


def test_auto_over_many_dates(auto):
    years = np.array([[1590.0, 2026.5, 1899.999], [2015.0, 1900.0, 2030.0], [2024.9, 1950.0, 2019.0]])
    field = auto.field(40.0, [10.0, 20.0, 30.0], when=years)
    assert field.model.tolist() == [["gufm1", "WMM2025", "gufm1"], ["WMM2015v2", "IGRF-14", "WMM2025"],
                                    ["WMM2020", "IGRF-14", "WMM2015v2"]]
    for i, j in np.ndindex(3, 3):
        one = auto.field(40.0, [10.0, 20.0, 30.0][j], when=years[i, j])
        assert [getattr(field, n)[i, j] for n in VALUES] == [getattr(one, n) for n in VALUES]
        assert vars(one.sigma) == {n: v[i, j] for n, v in vars(field.sigma).items()}
    assert field.as_dict()["model"] == field.model.tolist()
    assert auto.field(40.0, 10.0, when=[2026.0, 2027.0]).model == "WMM2025"


def test_auto_outside_all_models(auto):
    assert (auto.valid_from_yr, auto.valid_until_yr) == (1590.0, 2030.0)
    for year, name in ((1589.0, "gufm1"), (2031.0, "WMM2025")):
        with pytest.raises(OutOfValidityError, match=f"validity of {name}"):
            auto.field(*PLACE, when=year)
        field = auto.field(*PLACE, when=year, extrapolate=True)
        assert field.model == name and field.flags & magnav.Flag.OUTSIDE_VALIDITY
    status = auto.field(*PLACE, when=[1589.0, 1700.0, 2031.0], bad="nan").status
    assert status.tolist() == [lib.MAGNAV_E_DATE, 0, lib.MAGNAV_E_DATE]


# ---- statuses ----

def statuses():
    return {name: getattr(lib, name) for name in dir(lib) if name.startswith("MAGNAV_E_") and name != "MAGNAV_E_END"}


def test_every_status_has_its_text_and_its_exception():
    found = statuses()
    # the list is whole: it fills the numbers from -1 down to the sentinel
    assert sorted(found.values()) == list(range(lib.MAGNAV_E_END + 1, 0))
    assert set(core.EXCEPTION_OF) == set(found.values())
    texts = {name: core.status_text(value) for name, value in found.items()}
    assert all(text and text != "unknown" for text in texts.values())
    assert len(set(texts.values())) == len(texts)
    assert core.status_text(lib.MAGNAV_OK) == "computed"
    for outside in (1, lib.MAGNAV_E_END, 2**31 - 1, -(2**31)):
        assert core.status_text(outside) == "unknown"
    assert all(issubclass(kind, (MagnavError, RuntimeError)) for kind in core.EXCEPTION_OF.values())
    assert core.EXCEPTION_OF[lib.MAGNAV_E_DATE] is OutOfValidityError
    # what only a fault of this package can cause is no error of the caller's
    assert {n for n, v in found.items() if core.EXCEPTION_OF[v] is RuntimeError} == {"MAGNAV_E_NULL", "MAGNAV_E_MEMORY"}
