"""The IGRF table: a line naming each epoch's kind, a line `g/h n m` with the years, rows, a last column of rates.

IAGA Division V-MOD; linear in time between epochs, five years of the last column's secular variation after the last.
Degree 10 before the year 2000, 13 from it on (Alken et al., Earth Planets Space 73:49, 2021).
"""

import re

import numpy as np

from ..coefficients import Coefficients, term_count, term_index


def looks_like(first):
    return first.split()[:1] == ["c/s"] or first.split()[:3] == ["g/h", "n", "m"]


def read(lines):
    rows = [(number, text.split()) for number, text in lines.rows if text.strip() and not text.startswith("#")]
    if rows[0][1][0] == "c/s":
        rows = rows[1:]
    if not rows or rows[0][1][:3] != ["g/h", "n", "m"]:
        lines.fail(lines.rows[-1][0] if not rows else rows[0][0], "the line `g/h n m` with the years is missing")
    number, header = rows[0]
    span = re.fullmatch(r"(\d{4})-(\d{2}|\d{4})", header[-1])
    if not span or len(header) < 5:
        lines.fail(number, "the last column must be a secular variation, named like 2025-30")
    years = lines.years(number, header[3:-1])
    start, end = int(span[1]), int(span[2])
    if len(span[2]) == 2:
        # 1995-00 ends in the next century
        end = start + (end - start) % 100
    if start != years[-1] or end <= start:
        lines.fail(number, f"the secular variation {header[-1]} does not start at the last year, {years[-1]:g}")
    parsed, expected = [], ("g", 1, 0)
    for number, words in rows[1:]:
        if len(words) != len(header):
            lines.fail(number, f"{len(words)} columns where the header has {len(header)}")
        n, m = lines.degree_order(number, words[1], words[2])
        if (words[0], n, m) != expected:
            lines.fail(number, f"row {words[0][:9]} {n} {m} where {' '.join(map(str, expected))} is due: a row is "
                               "missing, twice or out of order")
        parsed.append((term_index(n, m, sine=words[0] == "h"),
                       [lines.number(number, word, "coefficient") for word in words[3:]]))
        expected = ("h", n, m) if words[0] == "g" and m else ("g", n, m + 1) if m < n else ("g", n + 1, 0)
    if not parsed or expected[2] != 0 or expected[0] != "g":
        lines.fail(number, f"the table ends where {' '.join(map(str, expected))} is due: it is cut off")
    degree, due = expected[1] - 1, 13 if years[-1] >= 2000 else 10
    if degree < due:
        # the table says nowhere where it ends
        lines.fail(number, f"the table ends at degree {degree}, IGRF of {years[-1]:g} at {due}: it is cut off")
    polynomials = np.zeros((len(years), 2, term_count(degree)))
    breaks = np.append(years, float(end))
    for term, values in parsed:
        main = np.array(values[:-1])
        polynomials[:, 0, term] = main
        polynomials[:-1, 1, term] = np.diff(main) / np.diff(years)
        polynomials[-1, 1, term] = values[-1]
    name = next((text.lstrip("# ").strip() for _, text in lines.rows if text.startswith("#")), "IGRF table")
    return Coefficients(name[:60], name, degree, float(years[0]), float(years[0]), float(end), breaks, polynomials)
