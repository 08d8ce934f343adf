"""Dates as decimal years, against calendar arithmetic in whole numbers (the standard library's calendar, fractions)."""

import calendar
import datetime as dt
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from magnav.errors import InputError
from magnav.field.dates import decimal_year


def exact(year, month, day, microseconds=0):
    """Year plus the elapsed part of it, as a fraction, by counting the days of the months before."""
    days = sum(calendar.monthrange(year, m)[1] for m in range(1, month)) + day - 1
    return year + (days + Fraction(microseconds, 86_400_000_000)) / (366 if calendar.isleap(year) else 365)


@given(st.datetimes(min_value=dt.datetime(1, 1, 1), max_value=dt.datetime(9998, 12, 31)))
def test_any_datetime(moment):
    of_day = moment - moment.replace(hour=0, minute=0, second=0, microsecond=0)
    expected = float(exact(moment.year, moment.month, moment.day, of_day // dt.timedelta(microseconds=1)))
    # two roundings of a number of at most 9999
    assert decimal_year(moment) == pytest.approx(expected, abs=2e-12, rel=0)
    assert decimal_year(np.datetime64(moment)) == pytest.approx(expected, abs=2e-12, rel=0)
    assert decimal_year(moment.isoformat()) == decimal_year(moment)


@pytest.mark.parametrize(("when", "expected"), [
    (dt.date(2025, 1, 1), 2025.0),
    (dt.date(2025, 7, 2), 2025 + 182 / 365),
    (dt.date(2024, 7, 2), 2024 + 183 / 366),     # leap by the rule of four
    (dt.date(1900, 3, 1), 1900 + 59 / 365),      # not leap by the rule of a hundred
    (dt.date(2000, 3, 1), 2000 + 60 / 366),      # leap by the rule of four hundred
    (dt.date(1590, 12, 31), 1590 + 364 / 365),   # Gregorian before there were telescopes, too
    (dt.datetime(2025, 7, 2, 12), 2025.5),
    (dt.datetime(2024, 12, 31, 23, 59, 59, 999999), 2025.0),
    ("2025-07-02", 2025 + 182 / 365), ("20250702", 2025 + 182 / 365), (" 2025-07-02 ", 2025 + 182 / 365),
    ("2025-07-02T12:00", 2025.5), ("2025-07-02T12:00Z", 2025.5), ("2025-07-02 12:00:00", 2025.5),
    ("2025-W01-1", 2024 + 364 / 366),
    ("2025.5", 2025.5), ("2025", 2025.0), ("2025.", 2025.0),
    (2025, 2025.0), (2025.25, 2025.25), (np.float32(2025.5), 2025.5), (np.int16(1980), 1980.0), (-500.5, -500.5),
    (np.array(2025.5), 2025.5), (np.array("2025-07-02", dtype="M8[D]"), 2025 + 182 / 365),
    (np.datetime64("2025"), 2025.0), (np.datetime64("2025-07"), 2025 + 181 / 365),
    (np.datetime64("2025-07-02T12", "h"), 2025.5), (np.datetime64("2025-07-02T12:00:00.000000000", "ns"), 2025.5),
    (np.datetime64("1969-07-02T12:00", "s"), 1969.5),
])
def test_every_way_of_saying_when(when, expected):
    found = decimal_year(when)
    assert type(found) is float
    assert found == pytest.approx(expected, abs=3e-13, rel=0)


def test_time_zones_are_turned_to_utc_and_none_means_utc():
    noon = decimal_year(dt.datetime(2025, 7, 2, 12))
    east = dt.timezone(dt.timedelta(hours=5, minutes=30))
    assert decimal_year(dt.datetime(2025, 7, 2, 17, 30, tzinfo=east)) == noon
    assert decimal_year("2025-07-02T17:30+05:30") == noon
    assert decimal_year(dt.datetime(2025, 7, 2, 12, tzinfo=dt.UTC)) == noon
    # over the turn of the year
    assert decimal_year("2026-01-01T01:00+02:00") == pytest.approx(2025 + (365 - 1 / 24) / 365, abs=3e-13)


def test_arrays_keep_their_shape():
    days = np.array([["2025-01-01", "2025-07-02"], ["2024-07-02", "1900-01-01"]], dtype="M8[D]")
    expected = [[2025.0, 2025 + 182 / 365], [2024.5, 1900.0]]
    for array in (days, days.astype("M8[ns]"), days.astype(object), days.tolist(), days.astype(str).tolist(),
                  days.astype(str)):
        found = decimal_year(array)
        assert found.dtype == np.float64 and found.shape == (2, 2)
        assert found == pytest.approx(np.array(expected), abs=3e-13, rel=0)
    for numbers in ([2025, 2025.5], (2025, 2025.5), np.array([2025, 2025.5], dtype=np.float32)):
        assert decimal_year(numbers).tolist() == [2025.0, 2025.5]
    assert decimal_year([dt.date(2025, 1, 1), "2025.5", 2026, np.datetime64("2027")]).tolist() == [
        2025.0, 2025.5, 2026.0, 2027.0]
    for empty in ([], np.empty(0), np.empty(0, dtype="M8[s]"), np.empty((0, 3))):
        assert np.shape(decimal_year(empty)) == np.shape(empty)
    assert decimal_year(np.arange(2020.0, 2030.0)[::3]).tolist() == [2020.0, 2023.0, 2026.0, 2029.0]


@given(st.lists(st.datetimes(min_value=dt.datetime(1700, 1, 1), max_value=dt.datetime(2200, 1, 1)), min_size=1))
def test_an_array_is_its_elements(moments):
    one_by_one = [decimal_year(m) for m in moments]
    assert decimal_year(moments).tolist() == one_by_one
    assert decimal_year(np.array(moments, dtype="M8[us]")) == pytest.approx(one_by_one, abs=5e-13, rel=0)


def test_later_is_larger():
    day = np.arange("1995-12-25", "2005-01-05", dtype="M8[D]")
    years = decimal_year(day)
    # one day is 1/366 or 1/365 of a year, across leap years and turns of the year alike
    assert np.all(np.isclose(np.diff(years), 1 / 365, atol=1e-12) | np.isclose(np.diff(years), 1 / 366, atol=1e-12))


@pytest.mark.parametrize("when", [
    "yesterday", "", "2025-13-01", "2025-02-29", "02/07/2025", "2025-07-02T25:00", "20.25.5", "12345678901",
    "2016-12-31T23:59:60Z", float("nan"), float("inf"), 10000.0, -10000, 1e300, np.datetime64("NaT"), None, True,
    2025 + 0j, b"2025", {"year": 2025}, dt.timedelta(days=1), np.timedelta64(1, "D"), dt.time(12), np.bool_(True),
])
def test_what_is_no_date_is_refused(when):
    with pytest.raises(InputError, match="date"):
        decimal_year(when)


@pytest.mark.parametrize(("when", "where"), [
    ([2025, "soon"], "element 1"), ([[2025, 2026], [2027, None]], r"element \(1, 1\)"),
    (np.array([2025.0, np.nan]), "element 1"), (np.array([[2025.0], [np.inf]]), r"element \(1, 0\)"),
    (np.array(["2025-01-01", "NaT", "NaT"], dtype="M8[D]"), "element 1"),
])
def test_the_first_bad_date_is_named(when, where):
    with pytest.raises(InputError, match=where):
        decimal_year(when)


def test_missing_dates_are_errors_or_nan_as_asked():
    holes = [np.array([2025.0, np.nan]), [2025.0, float("nan")], np.array(["2025-01-01", "NaT"], dtype="M8[D]"),
             np.array(["2025-01-01", "NaT"], dtype="M8[ns]"), np.ma.array([2025.0, 1e9], mask=[0, 1]),
             np.ma.array([2025, 2026], mask=[0, 1]), np.ma.array(["2025-01-01", "2026"], dtype="M8[D]", mask=[0, 1]),
             np.ma.array(["2025-01-01", "soon"], mask=[0, 1]), [np.datetime64("2025"), np.datetime64("NaT")]]
    for when in holes:
        years = decimal_year(when, missing="nan")
        assert years[0] == 2025.0 and np.isnan(years[1])
        with pytest.raises(InputError, match="element 1"):
            decimal_year(when)
    for one in (float("nan"), np.datetime64("NaT"), np.ma.masked):
        assert np.isnan(decimal_year(one, missing="nan"))
        with pytest.raises(InputError):
            decimal_year(one)
    # what is there and is no date stays an error
    for when in ([2025.0, "soon"], [2025.0, np.inf], np.array([2025.0, 1e5])):
        with pytest.raises(InputError, match="element 1"):
            decimal_year(when, missing="nan")


def test_the_message_says_what_is_accepted():
    with pytest.raises(InputError, match=r"'soon' cannot be read; accepted: a datetime or date, .* ISO 8601"):
        decimal_year("soon")
    with pytest.raises(InputError, match="NoneType; accepted: a datetime"):
        decimal_year(None)
