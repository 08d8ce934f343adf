"""An independent evaluation of a field model, in mpmath: slow, plain, and unlike the core in every step.

What the core does by recursion this does from closed forms (Langel, in Jacobs (ed.), Geomagnetism vol. 1, 1987,
sec. 3; Schmidt semi-normalisation as in Winch et al., Geophys. J. Int. 160, 2005):
  * the Legendre polynomial from Rodrigues' formula, with whole-number coefficients, and its derivatives term by term:
        P(n,m)(x) = (1 - x^2)^(m/2) D(n,m)(x),   D(n,m) = d^m P_n / dx^m;
  * the potential as a function of Cartesian coordinates fixed to the Earth, smooth at the poles:
        V = a sum (a/r)^(n+1) S(n,m) D(n,m)(z/r) [g cos(m lon) + h sin(m lon)] sin^m(theta);
  * the field as its gradient, a vector in those coordinates, resolved along the geodetic north, east and down.
Working precision: `DIGITS` significant digits, and more for a high degree, where the polynomials' terms cancel.
"""

import functools
import math

from mpmath import mp, mpf

DIGITS = 50
REFERENCE_RADIUS_M = 6371200
WGS84_A_M = 6378137
WGS84_INVERSE_FLATTENING = "298.257223563"


def working_digits(degree):
    """Digits to carry for DIGITS true ones: the terms of P_n grow as (1 + sqrt 2)^n and cancel to at most 1."""
    return DIGITS + 10 + math.ceil(degree * math.log10(1 + math.sqrt(2)))


@functools.cache
def rodrigues(n, m):
    """Whole coefficients of 2^n D(n,m) by powers that fall by two, from Rodrigues' sum differentiated m times:
    2^n P_n(x) = sum_k (-1)^k C(n,k) C(2n-2k,n) x^(n-2k)."""
    return [(-1) ** k * math.comb(n, k) * math.comb(2 * n - 2 * k, n) * math.perm(n - 2 * k, m)
            for k in range((n - m) // 2 + 1)]


def legendre_derivatives(n, x):
    """D(n,m)(x) for m = 0 .. n + 1, the last one zero: Horner's rule in x^2 on whole numbers, in fixed point."""
    bits = mp.prec
    x2 = int(mp.ldexp(x * x, bits))
    found = []
    for m in range(n + 1):
        total = 0
        for whole in rodrigues(n, m):
            total = (total * x2 >> bits) + (whole << bits)
        found.append(mp.ldexp(total, -bits - n) * (x if (n - m) % 2 else 1))
    return [*found, mpf(0)]


@functools.cache
def schmidt(n, m, digits):
    """The Schmidt semi-normalisation of the unnormalised function, without the Condon-Shortley sign."""
    with mp.workdps(digits):
        return mp.sqrt(mpf(2 if m else 1) * math.factorial(n - m) / math.factorial(n + m))


def coefficients_of(terms, n, m):
    """g(n,m) and h(n,m) from the list g10 g11 h11 g20 g21 h21 g22 h22 ..."""
    before = (n - 1) * (n + 1)
    return (terms[before + 2 * m - 1], terms[before + 2 * m]) if m else (terms[before], 0)


def degree_of(terms):
    """Degree of a list of degree * (degree + 2) coefficients."""
    return math.isqrt(len(terms) + 1) - 1


def cartesian(lat_deg, lon_deg, height_m):
    """Earth-fixed x, y, z in metres of a geodetic WGS84 point (by the prime-vertical radius, textbook geodesy)."""
    lat, lon, height = (mpf(v) for v in (lat_deg, lon_deg, height_m))
    f = 1 / mpf(WGS84_INVERSE_FLATTENING)
    e2 = f * (2 - f)
    sine, cosine = mp.sin(mp.radians(lat)), mp.cos(mp.radians(lat))
    normal = WGS84_A_M / mp.sqrt(1 - e2 * sine ** 2)
    across = (normal + height) * cosine
    return across * mp.cos(mp.radians(lon)), across * mp.sin(mp.radians(lon)), (normal * (1 - e2) + height) * sine


def directions(lat_deg, lon_deg):
    """Unit vectors to geodetic north, east and down in Earth-fixed coordinates."""
    lat, lon = mp.radians(mpf(lat_deg)), mp.radians(mpf(lon_deg))
    return ((-mp.sin(lat) * mp.cos(lon), -mp.sin(lat) * mp.sin(lon), mp.cos(lat)),
            (-mp.sin(lon), mp.cos(lon), mpf(0)),
            (-mp.cos(lat) * mp.cos(lon), -mp.cos(lat) * mp.sin(lon), -mp.sin(lat)))


def _powers(u, v, degree):
    """Real and imaginary parts of (u + iv)^m = sin^m(theta) exp(i m lon), m = 0 .. degree."""
    real, imaginary = [mpf(1)], [mpf(0)]
    for _ in range(degree):
        before = real[-1], imaginary[-1]
        real.append(before[0] * u - before[1] * v)
        imaginary.append(before[0] * v + before[1] * u)
    return real, imaginary


def potential(terms, x, y, z):
    """The scalar potential in nT m at an Earth-fixed point, at the precision in force."""
    r = mp.sqrt(x * x + y * y + z * z)
    u, v, w = x / r, y / r, z / r
    degree = degree_of(terms)
    real, imaginary = _powers(u, v, degree)
    total = mpf(0)
    for n in range(1, degree + 1):
        d = legendre_derivatives(n, w)
        for m in range(n + 1):
            g, h = coefficients_of(terms, n, m)
            shape = schmidt(n, m, mp.dps) * d[m] * (g * real[m] + h * imaginary[m])
            total += (REFERENCE_RADIUS_M / r) ** (n + 1) * shape
    return REFERENCE_RADIUS_M * total


def fields(lists_of_terms, lat_deg, lon_deg, height_m):
    """North, east, down at one point for each list of coefficients (a field, its yearly change): lists of mpf triples.

    Minus the gradient of `potential`, written out: V depends on r and on the direction (u, v, w) = (x, y, z) / r, and
    grad u = (e_x - u e_r) / r, likewise for v and w.
    """
    degree = degree_of(lists_of_terms[0])
    with mp.workdps(working_digits(degree)):
        x, y, z = cartesian(lat_deg, lon_deg, height_m)
        r = mp.sqrt(x * x + y * y + z * z)
        u, v, w = x / r, y / r, z / r
        real, imaginary = _powers(u, v, degree)
        # r dV/dr, dV/dw, dV/du, dV/dv, each over r, for each list
        sums = [[mpf(0)] * 4 for _ in lists_of_terms]
        scale = (REFERENCE_RADIUS_M / r) ** 2
        for n in range(1, degree + 1):
            scale *= REFERENCE_RADIUS_M / r
            d = legendre_derivatives(n, w)
            for m in range(n + 1):
                factor = scale * schmidt(n, m, mp.dps)
                value = d[m] * factor
                by_r, by_uv, by_w = -(n + 1) * value, m * value, d[m + 1] * factor
                for terms, total in zip(lists_of_terms, sums, strict=True):
                    g, h = coefficients_of(terms, n, m)
                    along = g * real[m] + h * imaginary[m]
                    total[0] += by_r * along
                    total[1] += by_w * along
                    if m:
                        total[2] += by_uv * (g * real[m - 1] + h * imaginary[m - 1])
                        total[3] += by_uv * (h * real[m - 1] - g * imaginary[m - 1])
        axes = directions(lat_deg, lon_deg)
        found = []
        for by_r, by_w, by_u, by_v in sums:
            outward = by_r - u * by_u - v * by_v - w * by_w
            gradient = (by_u + outward * u, by_v + outward * v, by_w + outward * w)
            found.append(tuple(-sum(a * b for a, b in zip(axis, gradient, strict=True)) for axis in axes))
        return found


def gradient_field(terms, lat_deg, lon_deg, height_m, step_m="1e-7"):
    """North, east, down by central differences of `potential`: nothing differentiated by hand."""
    with mp.workdps(working_digits(degree_of(terms))):
        point = cartesian(lat_deg, lon_deg, height_m)
        step = mpf(step_m)
        gradient = []
        for axis in range(3):
            ahead, behind = ([c + (sign * step if i == axis else 0) for i, c in enumerate(point)] for sign in (1, -1))
            gradient.append((potential(terms, *ahead) - potential(terms, *behind)) / (2 * step))
        return tuple(-sum(a * b for a, b in zip(axis, gradient, strict=True)) for axis in directions(lat_deg, lon_deg))


def at_date(coefficients, year):
    """The main terms and their yearly change at `year`, two lists of mpf, from a model's polynomials in time."""
    breaks = [mpf(float(b)) for b in coefficients.breaks_yr]
    year = mpf(year)
    piece = max(0, min(sum(b <= year for b in breaks) - 1, len(breaks) - 2))
    t = year - breaks[piece]
    values, slopes = [], []
    for falling in zip(*coefficients.polynomials[piece, ::-1].tolist(), strict=True):
        value = slope = mpf(0)
        for c in falling:
            slope = slope * t + value
            value = value * t + c
        values.append(value)
        slopes.append(slope)
    return values, slopes
