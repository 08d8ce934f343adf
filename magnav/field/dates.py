"""Any way of saying when, as a decimal year: year + elapsed days of the year / its length, UTC, Gregorian calendar."""

import datetime as dt

import numpy as np

from ..errors import InputError

ACCEPTED = ("a datetime or date, a numpy datetime64, a decimal year (2025.5) or ISO 8601 text (2025-07-02, "
            "2025-07-02T12:00Z), or an array or list of these")


def decimal_year(when, missing="raise"):
    """`when` as float decimal years: a float for one date, an array of the same shape for an array.

    Accepts datetime (a time zone is converted to UTC; none means UTC), date (its midnight), numpy datetime64, a real
    number, text in ISO 8601 or as a decimal number, and arrays or nested lists of these.
    missing: "nan" makes NaN of a NaN, a NaT or a masked element, which are errors otherwise.
    Raises InputError naming the first date that cannot be read (its index, for an array).
    """
    when, keep = unmasked(when), missing == "nan"
    if isinstance(when, np.ndarray) and when.ndim and when.dtype.kind in "Mfiu":
        return _datetime64(when, keep) if when.dtype.kind == "M" else _numbers(when, keep)
    if isinstance(when, (list, tuple, np.ndarray)) and np.ndim(when):
        array = np.asarray(when, dtype=object)
        years = np.empty(array.shape)
        for index in np.ndindex(array.shape):
            try:
                years[index] = _one(array[index], keep)
            except InputError as error:
                where = index[0] if len(index) == 1 else index
                raise InputError(f"{error} (element {where})") from None
        return years
    return _one(when.item() if isinstance(when, np.ndarray) and when.dtype.kind != "M" else when, keep)


def unmasked(value):
    """A masked array as a plain one that holds NaN or NaT where it is masked; anything else as it is."""
    if not isinstance(value, np.ma.MaskedArray):
        return value
    if value.dtype.kind == "M":
        return value.filled(np.datetime64("NaT"))
    return value.astype(np.float64 if value.dtype.kind in "fiu" else object).filled(np.nan)


def _one(when, keep):
    if isinstance(when, np.datetime64) or (isinstance(when, np.ndarray) and when.dtype.kind == "M"):
        return float(_datetime64(np.asarray(when), keep))
    if isinstance(when, dt.datetime):
        if when.tzinfo is not None:
            when = when.astimezone(dt.UTC).replace(tzinfo=None)
        return _elapsed(when)
    if isinstance(when, dt.date):
        return _elapsed(dt.datetime(when.year, when.month, when.day))
    if isinstance(when, str):
        return _text(when)
    # numpy counts a duration among the integers
    if isinstance(when, (int, float, np.integer, np.floating)) and not isinstance(when, (bool, np.timedelta64)):
        return float(_numbers(np.asarray(when), keep))
    raise InputError(f"date {when!r} is of type {type(when).__name__}; accepted: {ACCEPTED}")


def _elapsed(moment):
    start = dt.datetime(moment.year, 1, 1)
    return moment.year + (moment - start) / dt.timedelta(days=366 if _is_leap(moment.year) else 365)


def _is_leap(year):
    return year % 4 == 0 and (year % 100 != 0 or year % 400 == 0)


def _text(text):
    stripped = text.strip()
    try:
        # a plain number is a decimal year; eight digits are the basic ISO form, which the date parser knows
        if stripped.replace(".", "", 1).isdigit() and len(stripped.split(".")[0]) <= 4:
            return float(_numbers(np.asarray(float(stripped)), False))
        return _one(dt.datetime.fromisoformat(stripped), False)
    except (ValueError, OverflowError) as error:
        if isinstance(error, InputError):
            raise
        raise InputError(f"date {text!r} cannot be read; accepted: {ACCEPTED}") from None


def _numbers(values, keep):
    years = np.asarray(values, dtype=np.float64)
    bad = (np.isnan(years) & (not keep)) | (np.abs(years) > 9999)
    if bad.any():
        index = np.argwhere(bad)[0]
        where = f" (element {index[0] if index.size == 1 else tuple(index.tolist())})" if index.size else ""
        raise InputError(f"date {years[tuple(index)]!s} is not a decimal year between -9999 and 9999{where}")
    return years


def _datetime64(moments, keep):
    missing = np.isnat(moments)
    if missing.any() and not keep:
        index = np.argwhere(missing)[0]
        where = f" (element {index[0] if index.size == 1 else tuple(index.tolist())})" if index.size else ""
        raise InputError(f"date NaT is not a date{where}; accepted: {ACCEPTED}")
    year = moments.astype("datetime64[Y]")
    start = year.astype("datetime64[us]")
    length = (year + 1).astype("datetime64[us]") - start
    # NaT has no calendar year: its integer is replaced, its elapsed part is NaN
    number = np.where(missing, 0, year.astype(np.int64)) + 1970
    return number + (moments.astype("datetime64[us]") - start) / length
