"""SHC, the layout in which IGRF and other models of several epochs are published.

Comments, a line of five integers (lowest degree, highest degree, number of times, spline order, steps between break
points), a line of decimal years, then rows `n m value ...`, m negative for h. The columns are field values. Between two
break points (every steps-th time) the field is a polynomial of that order (degree order - 1) through the values there;
of order 1, each value holds until the next break point. Words after the five integers are left aside: some files
repeat the first and last year there.
"""

import math

import numpy as np

from ..coefficients import Coefficients, term_count, term_index

# values that are not a polynomial of the stated order stand further from it than their own rounding
LARGEST_MISFIT_NT = 0.05
# a low degree left out costs no bytes in the file, but memory here
MOST_VALUES = 2**24


def looks_like(first):
    words = first.split()
    return len(words) >= 5 and all(word.lstrip("+-").isdigit() for word in words[:5])


def read(lines):
    rows = [(number, text.split()) for number, text in lines.rows if text.strip() and not text.startswith("#")]
    name, source = _named(lines)
    number, words = rows[0]
    low, high, count, order, steps = (lines.integer(number, word, "header") for word in words[:5])
    if not 1 <= low <= high:
        lines.fail(number, f"degrees {low} to {high} are not a range from 1 upwards")
    lines.degree_order(number, str(high), "0")
    if not 1 <= order <= 4:
        lines.fail(number, f"spline order {order} is outside 1 to 4")
    if count < 1 or steps < 1:
        lines.fail(number, f"{count} times and {steps} steps: both must be at least 1")
    if term_count(high) * count > MOST_VALUES:
        lines.fail(number, f"degree {high} at {count} times: more than {MOST_VALUES:,} values are not read")
    if len(rows) < 2:
        lines.fail(number, "the line of years is missing")
    years = _years(lines, rows[1], count)
    values = _values(lines, rows[2:], rows[1][0], low, high, count)
    first, last = float(years[0]), float(years[-1])
    if count == 1:
        return Coefficients(name, source, high, first, -math.inf, math.inf, np.array([first, first + 1]),
                            values.T[np.newaxis].copy())
    breaks, polynomials = _pieces(lines, number, years, values, order, steps)
    return Coefficients(name, source, high, first, first, last, breaks, polynomials)


def _named(lines):
    comments = [text.lstrip("# ").strip() for _, text in lines.rows if text.startswith("#")]
    comments = [c for c in comments if c]
    if not comments:
        return "SHC model", "SHC file without comments"
    return comments[0].split(",")[0].split(":")[0][:60], comments[0]


def _years(lines, row, count):
    number, words = row
    if len(words) != count:
        lines.fail(number, f"{len(words)} years where the header says {count}")
    return lines.years(number, words)


def _values(lines, rows, before, low, high, count):
    """(terms, times), zero below the lowest degree."""
    values = np.zeros((term_count(high), count))
    due = ((n, m) for n in range(low, high + 1) for k in range(n + 1) for m in ((k, -k) if k else (0,)))
    number = before
    for number, words in rows:
        expected = next(due, None)
        if expected is None:
            lines.fail(number, f"a row after the last one of degree {high}")
        if len(words) != count + 2:
            lines.fail(number, f"{len(words)} columns where n, m and {count} values are expected")
        n, m = lines.degree_order(number, words[0], words[1], lowest_m=-1)
        if (n, m) != expected:
            lines.fail(number, f"row of degree {n}, order {m} where {expected[0]}, {expected[1]} is due: a row is "
                               "missing, twice or out of order")
        values[term_index(n, abs(m), sine=m < 0)] = [lines.number(number, word, "coefficient") for word in words[2:]]
    expected = next(due, None)
    if expected is not None:
        lines.fail(number, f"the file ends where degree {expected[0]}, order {expected[1]} is due: it is cut off")
    return values


def _pieces(lines, number, years, values, order, steps):
    """Break points and polynomials (pieces, order, terms)."""
    if steps < order - 1:
        lines.fail(number, f"spline order {order} needs at least {order - 1} steps between break points, not {steps}")
    if (len(years) - 1) % steps:
        lines.fail(number, f"{len(years)} times do not make whole intervals of {steps} steps")
    breaks = years[::steps]
    polynomials = np.empty((len(breaks) - 1, order, len(values)))
    for i, start in enumerate(range(0, len(years) - 1, steps)):
        # of order 1 the field may jump at a break point: the value there belongs to the next piece
        here = slice(start, start + steps + (order > 1))
        length = years[start + steps] - years[start]
        powers = np.vander((years[here] - years[start]) / length, order, increasing=True)
        if order == 1 and steps == 1:
            fit = values[:, here].T
        elif order == 2 and steps == 1:
            fit = np.stack([values[:, start], values[:, start + 1] - values[:, start]])
        else:
            fit = np.linalg.lstsq(powers, values[:, here].T, rcond=None)[0]
        misfit = np.abs(powers @ fit - values[:, here].T).max()
        if misfit > LARGEST_MISFIT_NT:
            lines.fail(number, f"the values from {years[start]:g} are no polynomial of order {order}: "
                               f"off by {misfit:.3g} nT")
        polynomials[i] = fit / length ** np.arange(order)[:, np.newaxis]
    if order == 1 and np.any(values[:, -1] != values[:, -2]):
        # the last year belongs to the validity: its values need a piece of their own
        breaks = np.append(breaks, years[-1] + 1)
        polynomials = np.append(polynomials, values.T[np.newaxis, -1:], axis=0)
    return breaks, polynomials
