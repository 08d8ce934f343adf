"""Readers of published coefficient files; the layout is found from the content, not from the file's name."""

from . import cof, igrf_table, image, shc, spline_table
from .text import LARGEST_FILE, Lines


def _image_of(path):
    """The bytes of a file that starts as a binary image does, else None."""
    try:
        with open(path, "rb") as file:
            if file.read(len(image.MAGIC)) == image.MAGIC:
                file.seek(0)
                return file.read(LARGEST_FILE)
    except OSError:
        pass  # the reader of text says what is wrong with the file
    return None


def read_coefficients(path):
    """Read a model from a file: COF, SHC, the IGRF table, a spline table, or a binary image of ours.

    Returns `Coefficients`. Raises CoefficientFileError, with the line, where the file cannot be trusted.
    """
    content = _image_of(path)
    if content is not None:
        return image.read(path, content)
    lines = Lines(path)
    number, first = next(((n, t) for n, t in lines.rows if t.strip() and not t.startswith("#")), lines.rows[-1])
    for layout in (igrf_table, spline_table, shc, cof):
        if layout.looks_like(first):
            return layout.read(lines)
    lines.fail(number, "is no header of a known layout; accepted: COF, SHC, the IGRF table, a spline table")
