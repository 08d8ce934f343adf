"""A table through a function, a run of rows at a time: good rows go on, bad ones to a side file."""

import contextlib
import csv
import os
import sys

from ..errors import InputError
from ..field.dates import decimal_year
from ..tables import Table
from . import exits
from .say import Progress, side_file_of, write_bad_rows

PLACE_COLUMNS = ("lat_deg", "lon_deg", "height_m", "date")


def run_bulk(options, needed, results_of, result_names):
    """Read options.input, write options.output (stdout where it is None) with `result_names` added to each row.

    needed: numeric columns beside the place's. results_of(columns, year) -> (dict of arrays, list of a reason or None
    a row). lat_deg and lon_deg come from the table or the options; so do height_m and date.
    Returns the exit code.
    """
    bad, progress = [], Progress("rows")
    dates = {}
    with Table(options.input) as table, _output(options.output) as file:
        wanted = [*needed, *(n for n, v in (("lat_deg", options.lat), ("lon_deg", options.lon)) if v is None)]
        optional = [n for n in PLACE_COLUMNS if n not in wanted]
        writer = csv.writer(file, lineterminator="\n")
        header = None
        for rows in table.rows(wanted, optional, text=("date",), pass_through=True):
            if header is None:
                header = list(rows.columns)
                writer.writerow([*header, *result_names])
            bad += rows.bad
            good = _dated(rows, options, dates, bad)
            columns = _with_place(rows, options)
            results, reasons = results_of(columns, good)
            shown = [[_cell(v) for v in rows.columns[name]] for name in header]
            shown += [[_cell(v) for v in results[name]] for name in result_names]
            for i, reason in enumerate(reasons):
                if good[i] != good[i]:
                    continue
                if reason is None:
                    writer.writerow([column[i] for column in shown])
                else:
                    bad.append((int(rows.lines[i]), reason, ",".join(c[i] for c in shown[:len(header)])))
            progress(table.fraction_read())
    progress.end()
    bad.sort(key=lambda row: row[0])
    write_bad_rows(bad, side_file_of(options.output or options.input))
    return exits.BAD_ROWS if bad else exits.DONE


def _dated(rows, options, cache, bad):
    """Decimal year of each row, NaN (and an entry in bad) where it cannot be read."""
    import numpy as np

    from .place import date_of

    if "date" not in rows.columns:
        return np.full(len(rows), decimal_year(date_of(options)))
    years = np.full(len(rows), np.nan)
    for i, text in enumerate(rows.columns["date"]):
        if text not in cache:
            if len(cache) > 100_000:
                cache.clear()
            try:
                cache[text] = decimal_year(text)
            except InputError as error:
                cache[text] = str(error)
        if isinstance(cache[text], str):
            bad.append((int(rows.lines[i]), cache[text], ",".join(_cell(c[i]) for c in rows.columns.values())))
        else:
            years[i] = cache[text]
    return years


def _with_place(rows, options):
    import numpy as np

    columns = dict(rows.columns)
    for name, value in (("lat_deg", options.lat), ("lon_deg", options.lon), ("height_m", options.height_m)):
        if name not in columns:
            columns[name] = np.full(len(rows), value)
    return columns


def _cell(value):
    if isinstance(value, str):
        return value
    return "" if value != value else repr(round(float(value), 6))


@contextlib.contextmanager
def _output(path):
    """The output file, put in its place only when all is written; stdout where there is none."""
    if path is None:
        yield sys.stdout
        return
    part = f"{path}.part"
    with open(part, "w", encoding="utf-8", newline="") as file:
        yield file
    os.replace(part, path)
