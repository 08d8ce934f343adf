"""The binary image of a model, as `magnav firmware image` writes it: checked by the C core, read to the same bits."""

import struct

import numpy as np

from ...core import image_is_sound
from ...errors import CoefficientFileError
from ..coefficients import Coefficients, term_count

MAGIC, YEAR = b"MGNI", 10_000
FOREVER = 2**31 - 1


def read(path, content):
    """`Coefficients` of an image's bytes. Raises CoefficientFileError where they are cut, altered or no image."""
    if not image_is_sound(content):
        raise CoefficientFileError(path, None, "this image of a model is damaged, cut or of another version")
    _, degree, order, pieces, _, first, last = struct.unpack_from("<4H I 2i", content, 4)
    name = content[24:40].rstrip(b"\0").decode("ascii", "replace")
    divisors, widths = struct.unpack_from("<6I", content, 40), struct.unpack_from("<6B", content, 64)
    breaks = np.frombuffer(content, "<i4", pieces + 1, 72) / YEAR
    polynomials = np.empty((pieces, order, term_count(degree)))
    at = 72 + 4 * (pieces + 1)
    for piece in range(pieces):
        for power in range(order):
            values = np.frombuffer(content, f"<i{widths[power]}", term_count(degree), at)
            polynomials[piece, power] = values / divisors[power]
            at += (values.nbytes + 3) // 4 * 4
    valid = [np.copysign(np.inf, y) if abs(y) == FOREVER else y / YEAR for y in (first, last)]
    return Coefficients(name, "binary image", degree, float(breaks[0]), *map(float, valid), breaks, polynomials)
