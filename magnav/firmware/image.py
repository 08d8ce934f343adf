"""A model as a compact binary image for flash or the air; the layout is in c_core/include/magnav_image.h."""

import dataclasses
import struct
import zlib

import numpy as np

from ..errors import InputError

MAGIC, VERSION, YEAR, NAME_BYTES, POWERS = b"MGNI", 1, 10_000, 16, 6
FOREVER = 2**31 - 1
# divisors tried for an exact decimal, before the finest that fits 32 bits
DECIMALS = (1, 5, 10, 50, 100, 500, 1000, 5000, 10_000)
# quotients of decimals differ from the desk's by their last bits; beyond this a value is not such a decimal
LAST_BITS_NT = 1e-9


@dataclasses.dataclass(frozen=True)
class Image:
    """`content` the bytes; `name`; `largest_difference_nT` of any coefficient (or its rate, per year) from the desk's
    model: 0 means the same bits."""

    content: bytes
    name: str
    largest_difference_nT: float


def make_image(model, first_yr=None, last_yr=None):
    """The image of a model, or of its pieces that serve first_yr to last_yr.

    model: a `Model`. Raises InputError where its dates or degree do not fit the layout.
    """
    c = model.coefficients
    pieces, order, _ = c.polynomials.shape
    if order > POWERS or pieces > 10_000 or c.degree > 2000:
        raise InputError(f"model {c.name} does not fit an image: order {order}, {pieces} pieces, degree {c.degree}")
    valid = [c.valid_from_yr if first_yr is None else max(first_yr, c.valid_from_yr),
             c.valid_until_yr if last_yr is None else min(last_yr, c.valid_until_yr)]
    if not valid[0] <= valid[1]:
        raise InputError(f"years {first_yr} to {last_yr} hold nothing of {c.name}, valid {c.valid_from_yr:g} to "
                         f"{c.valid_until_yr:g}")
    low = int(np.clip(np.searchsorted(c.breaks_yr, valid[0], side="right") - 1, 0, pieces - 1))
    # at its end a step function has already taken its next value
    side = "right" if order == 1 else "left"
    high = int(np.clip(np.searchsorted(c.breaks_yr, valid[1], side=side), low + 1, pieces))
    breaks, polynomials = c.breaks_yr[low:high + 1], c.polynomials[low:high]

    scaled = [_scaled(polynomials[:, power]) for power in range(order)]
    blank = [0] * (POWERS - order)
    head = MAGIC + struct.pack("<HHHH", VERSION, c.degree, order, len(polynomials))
    tail = (struct.pack("<2i", *(_year(y) for y in valid)) + c.name.encode()[:NAME_BYTES].ljust(NAME_BYTES, b"\0")
            + struct.pack("<6I", *(divisor for divisor, _, _ in scaled), *blank)
            + struct.pack("<6B2x", *(width for _, width, _ in scaled), *blank)
            + struct.pack(f"<{len(breaks)}i", *(_year(y) for y in breaks)))
    blocks = b""
    for i in range(len(polynomials)):
        for _, width, values in scaled:
            block = values[i].astype(f"<i{width}").tobytes()
            blocks += block + b"\0" * (-len(block) % 4)
    content = head + struct.pack("<I", len(head) + 4 + len(tail) + len(blocks) + 4) + tail + blocks
    content += struct.pack("<I", zlib.crc32(content))
    difference = max(float(np.abs(values / divisor - polynomials[:, power]).max())
                     for power, (divisor, _, values) in enumerate(scaled))
    return Image(content, c.name, difference)


def _year(year):
    if np.isinf(year):
        return FOREVER if year > 0 else -FOREVER
    ticks = round(year * YEAR)
    if abs(ticks) >= FOREVER or ticks / YEAR != year:
        raise InputError(f"year {year!r} does not fit an image: years to four decimals do")
    return ticks


def _scaled(values):
    """Divisor, bytes a value and integers of one power (pieces, terms)."""
    largest = float(np.abs(values).max())
    for divisor in DECIMALS:
        integers = np.round(values * divisor)
        if largest * divisor < 2**31 - 1 and np.abs(integers / divisor - values).max() <= LAST_BITS_NT:
            break
    else:
        divisor = min(int(10 ** np.floor(np.log10((2**31 - 1) / largest))), 10**9)
        integers = np.round(values * divisor)
    return divisor, 2 if np.abs(integers).max() < 2**15 else 4, integers


def c_source(image, name):
    """A C file with the image as an array `name` and its size `name`_size; it needs <stdint.h> alone."""
    if not (name.isidentifier() and name.isascii()):
        raise InputError(f"{name!r} is not a name in C")
    rows = [image.content[i:i + 16] for i in range(0, len(image.content), 16)]
    lines = ",\n".join("    " + ", ".join(f"0x{byte:02x}" for byte in row) for row in rows)
    size = len(image.content)
    return (f"/* Image of the model {image.name}, layout version {VERSION}: see magnav_image.h. Written by magnav. */\n"
            f"#include <stdint.h>\n\nextern const uint8_t {name}[{size}];\nextern const uint32_t {name}_size;\n\n"
            f"const uint32_t {name}_size = {size}u;\nconst uint8_t {name}[{size}] = {{\n{lines}}};\n")
