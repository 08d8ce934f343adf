"""Readers of published coefficient files; the layout is found from the content, not from the file's name."""

import os
import stat

from ...errors import CoefficientFileError
from . import cof, igrf_table, image, shc, spline_table
from .text import LARGEST_FILE, Lines, without_waiting


def read_coefficients(path):
    """Read a model from a file: COF, SHC, the IGRF table, a spline table, or a binary image of ours.

    Returns `Coefficients`. Raises CoefficientFileError, with the line, where the file cannot be trusted.
    """
    try:
        with open(path, "rb", opener=without_waiting) as file:
            if not stat.S_ISREG(os.fstat(file.fileno()).st_mode):
                raise CoefficientFileError(path, None, "not a regular file")
            if file.read(len(image.MAGIC)) == image.MAGIC:
                file.seek(0)
                return image.read(path, file.read(LARGEST_FILE))
            file.seek(0)
            lines = Lines(path, file)
    except OSError as error:
        raise CoefficientFileError(path, None, f"cannot be read: {error.strerror}") from error
    number, first = next(((n, t) for n, t in lines.rows if t.strip() and not t.startswith("#")), lines.rows[-1])
    for layout in (igrf_table, spline_table, shc, cof):
        if layout.looks_like(first):
            return layout.read(lines)
    lines.fail(number, "is no header of a known layout; accepted: COF, SHC, the IGRF table, a spline table")
