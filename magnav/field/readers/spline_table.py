"""A spline table, our own layout: cubic B-spline coefficients of a model in time, one row a spline.

Comments; a header `first_knot_year,g1_0,g1_1,h1_1,...`; rows. The spline of row i spans knots i to i + 4; knots are
equally spaced, by the step between rows. A comment `# valid 1590 to 1990` sets the validity.
"""

import re

import numpy as np

from ..coefficients import Coefficients

# Cubic B-spline pieces on equal knots, by powers of the time since the piece's start over the step:
# row j: the spline that started j steps before (de Boor, A Practical Guide to Splines, 1978, ch. X)
CUBIC = np.array([[0, 0, 0, 1], [1, 3, 3, -3], [4, 0, -6, 3], [1, -3, 3, -1]]) / 6.0


def looks_like(first):
    return first.startswith("first_knot_year,")


def read(lines):
    rows = [(number, text) for number, text in lines.rows if text.strip() and not text.startswith("#")]
    number, header = rows[0]
    names = header.split(",")[1:]
    degree = round((len(names) + 1) ** 0.5) - 1
    due = [f"{kind}{n}_{m}" for n in range(1, degree + 1) for m in range(n + 1) for kind in ("gh" if m else "g")]
    if names != due or not degree:
        wrong = next((f"{a} where {b} is due" for a, b in zip(names, due, strict=False) if a != b), "not complete")
        lines.fail(number, f"columns are not those of a complete degree: {wrong[:80]}")
    starts, values = [], []
    for number, text in rows[1:]:
        cells = text.split(",")
        if len(cells) != len(names) + 1:
            lines.fail(number, f"{len(cells)} columns where the header has {len(names) + 1}")
        starts.append(lines.number(number, cells[0], "first_knot_year"))
        values.append([lines.number(number, cell, name) for cell, name in zip(cells[1:], names, strict=True)])
        step = starts[min(1, len(starts) - 1)] - starts[0]
        if len(starts) > 1 and (step <= 0 or abs(starts[-1] - starts[0] - step * (len(starts) - 1)) > 1e-6):
            lines.fail(number, f"knot {cells[0]} is not one step after the row before: a row is missing, twice or out "
                               "of order")
    if len(starts) < 4:
        lines.fail(number, "fewer than four splines: the file is cut off")
    comments = [text.lstrip("# ").strip() for _, text in lines.rows if text.startswith("#")]
    span = next((m for c in comments if (m := re.search(r"\bvalid (\d{4}(?:\.\d+)?) to (\d{4}(?:\.\d+)?)", c))), None)
    if span is None:
        lines.fail(1, "no comment says `valid YEAR to YEAR`")
    first, last = float(span[1]), float(span[2])
    breaks = starts[0] + step * np.arange(3, len(starts) + 1)
    if not breaks[0] - 1e-9 <= first < last <= breaks[-1] + 1e-9:
        lines.fail(number, f"the splines serve {breaks[0]:g} to {breaks[-1]:g}, not the validity {first:g} to "
                           f"{last:g}: rows are missing")
    values = np.array(values)
    pieces = len(values) - 3
    windows = np.stack([values[3 - j: 3 - j + pieces] for j in range(4)], axis=1)
    polynomials = np.einsum("jk,ijt->ikt", CUBIC, windows) / (step ** np.arange(4))[:, np.newaxis]
    name = comments[0].split()[0] if comments else "spline table"
    return Coefficients(name, comments[0], degree, first, first, last, breaks, np.ascontiguousarray(polynomials))
