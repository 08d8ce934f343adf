"""COF, the layout of the World Magnetic Model: a header, rows `n m g h g' h'`, two closing lines of nines.

WMM technical report (NOAA NCEI and BGS), section on the coefficient file.
"""

import numpy as np

from ..coefficients import Coefficients, term_count, term_index

VALID_FOR_YR = 5.0
CLOSING = "9" * 48


def looks_like(first):
    words = first.split()
    return len(words) == 3 and words[0].replace(".", "", 1).isdigit() and "/" in words[2]


def read(lines):
    number, header = lines.rows[0]
    words = header.split()
    if not looks_like(header):
        lines.fail(number, "the header must be: epoch, name, release date")
    epoch = lines.number(number, words[0], "epoch")
    if not 1000 <= epoch <= 3000:
        lines.fail(number, f"epoch {words[0]} is not a year from 1000 to 3000")
    values, degree = [], 0
    expected = (1, 0)
    for number, row in lines.rows[1:]:
        words = row.split()
        if words == [CLOSING]:
            break
        if len(words) == 1 and set(words[0]) == {"9"}:
            lines.fail(number, f"a closing line has {len(CLOSING)} nines, this one {len(words[0])}: it is cut off")
        if len(words) != 6:
            lines.fail(number, f"{len(words)} columns where `n m g h g' h'` are expected")
        n, m = lines.degree_order(number, words[0], words[1])
        if (n, m) != expected:
            lines.fail(number, f"row of degree {n}, order {m} where {expected[0]}, {expected[1]} is due: a row is "
                               "missing, twice or out of order")
        four = [lines.number(number, word, name) for word, name in zip(words[2:], ("g", "h", "g'", "h'"), strict=True)]
        if m == 0 and (four[1] or four[3]):
            lines.fail(number, "h of order 0 must be 0")
        values.append((n, m, four))
        degree = n
        expected = (n, m + 1) if m < n else (n + 1, 0)
    else:
        lines.fail(lines.rows[-1][0], "the closing lines of nines are missing: the file is cut off")
    if expected[1] != 0 or not values:
        lines.fail(number, f"degree {expected[0]} is not complete: order {expected[1]} is missing")
    tail = lines.rows[number - 1:]
    if [text.split() for _, text in tail] != [[CLOSING]] * 2:
        wrong = tail[2] if len(tail) > 2 and tail[1][1].split() == [CLOSING] else tail[min(1, len(tail) - 1)]
        lines.fail(wrong[0], f"two closing lines of {len(CLOSING)} nines must end the file")
    polynomials = np.zeros((1, 2, term_count(degree)))
    for n, m, (g, h, g_rate, h_rate) in values:
        polynomials[0, :, term_index(n, m)] = g, g_rate
        if m:
            polynomials[0, :, term_index(n, m, sine=True)] = h, h_rate
    name, released = header.split()[1:]
    return Coefficients(name, f"COF file, released {released}", degree, epoch, epoch, epoch + VALID_FOR_YR,
                        np.array([epoch, epoch + VALID_FOR_YR]), polynomials)
