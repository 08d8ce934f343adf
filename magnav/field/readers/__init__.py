"""Readers of published coefficient files; the layout is found from the content, not from the file's name."""

from . import cof, igrf_table, shc, spline_table
from .text import Lines


def read_coefficients(path):
    """Read a coefficient file in one of the accepted layouts (COF, SHC, the IGRF table, a spline table).

    Returns `Coefficients`. Raises CoefficientFileError, with the line, where the file cannot be trusted.
    """
    lines = Lines(path)
    number, first = next(((n, t) for n, t in lines.rows if t.strip() and not t.startswith("#")), lines.rows[-1])
    for layout in (igrf_table, spline_table, shc, cof):
        if layout.looks_like(first):
            return layout.read(lines)
    lines.fail(number, "is no header of a known layout; accepted: COF, SHC, the IGRF table, a spline table")
