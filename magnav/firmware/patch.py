"""A patch of the field over a mission area, with a guaranteed bound on its error against the full model.

The bound. Let e be the difference of model and patch in one component. On a grid with steps s_a along latitude,
longitude and height, e differs from its multilinear interpolant by at most the sum over a of s_a^2 / 8 times the
largest second derivative along a (tensor-product interpolation; de Boor, A Practical Guide to Splines, 1978, ch. II
and XVII), and the interpolant by no more than the largest value on the grid. In time both are linear within a piece of
the model, so the two ends suffice. Second derivatives of the patch follow from its coefficients. Those of the model are
bounded degree by degree: with A_n^2 the sum of the squared Gauss coefficients of degree n, the addition theorem gives
|B_n| <= V_n = sqrt((n+1)(2n+1)) A_n (a/r)^(n+2); each Cartesian part of B_n is homogeneous of degree -(n+2) and a
spherical harmonic of degree n+1, so that Bernstein's inequality on great circles bounds its first derivative by
(2n+3) V_n / r and its second by (n+3)(2n+3) V_n / r^2. Along the meridian the basis turns with the latitude, which adds
2 |B'| + |B|; along a parallel a component is a trigonometric polynomial of degree n: n^2 V_n. What a target in float
loses to rounding is added; the area's middle is a number that a float holds, so the bound is for the position and date
as the target holds them.
"""

import dataclasses

import numpy as np

from .. import core
from ..errors import InputError
from ..field.dates import decimal_year

LARGEST_DEGREE = 8
FLOAT_EPSILON = 2.0**-24
# roundings that a coefficient's product passes through on its way into the sum, beside one for each power
ROUNDINGS = 40
# a share of the bound that the room between the grid's points may take, and the most points that are tried for it
BETWEEN_SHARE = 0.3
MOST_POINTS = 2_000_000
# the meridian's radius of curvature and the polar radius of WGS84, metres: the largest and smallest radii met
LARGEST_CURVATURE_M, POLAR_M, REFERENCE_M = 6_399_594.0, 6_356_752.0, 6_371_200.0


@dataclasses.dataclass(frozen=True, eq=False)
class Patch:
    """`coefficients` (terms, 3) nT; `middle` and `half` (4,) of latitude, longitude, height, date; `bound_nT` (3,)
    guaranteed for north, east, down, in double and in float; `declination_bound_deg`; `degree`; `model`."""

    coefficients: np.ndarray
    middle: np.ndarray
    half: np.ndarray
    bound_nT: np.ndarray
    declination_bound_deg: float
    degree: int
    model: str

    def field_nT(self, lat_deg, lon_deg, height_m, year):
        """North, east, down (3,) by the C core. Raises InputError outside the area."""
        ned, status = core.patch_at(self, lat_deg, lon_deg, height_m, year)
        if status:
            raise core.EXCEPTION_OF[status](f"patch: {core.status_text(status)}")
        return ned


def terms_of(degree):
    """Powers (l, k, i, j) of date, height, latitude, longitude in the core's order."""
    return [(t, k, i, j) for t in (0, 1) for k in range(3) for i in range(degree - 2 * k - 2 * t + 1)
            for j in range(degree - 2 * k - 2 * t - i + 1)]


def make_patch(model, lat_deg, lon_deg, height_m, when, error_nT=1.0):
    """The smallest patch whose guaranteed error stays within error_nT in every component.

    lat_deg, lon_deg, height_m, when: (low, high) each; a longitude range across 180 goes beyond it (170, 190).
    Raises InputError where a range is not one, where the dates span a break of the model or leave its validity, and,
    saying what can be reached, where no degree up to 8 meets the limit.
    """
    ranges = np.array([lat_deg, lon_deg, height_m, [decimal_year(w) for w in when]], dtype=np.float64)
    for name, (low, high) in zip(("lat_deg", "lon_deg", "height_m", "when"), ranges, strict=True):
        if not (np.isfinite([low, high]).all() and low < high):
            raise InputError(f"{name} must be a range (low, high), not ({low:g}, {high:g})")
    if np.abs(ranges[0]).max() > 90 or ranges[2, 0] < -10_000 or ranges[2, 1] > 1_000_000:
        raise InputError("lat_deg must lie in -90 to 90, height_m in -10,000 to 1,000,000")
    if ranges[1, 1] - ranges[1, 0] > 90 or ranges[0, 1] - ranges[0, 0] > 45:
        raise InputError("a patch covers at most 45 degrees of latitude and 90 of longitude")
    rates = _one_piece(model, *ranges[3])
    middle = ranges.mean(axis=1).astype(np.float32).astype(np.float64)
    # a little wider, so that the corners lie inside in float, too
    half = np.abs(ranges - middle[:, None]).max(axis=1) * (1 + 8 * FLOAT_EPSILON)
    best = np.inf
    for degree in range(2, LARGEST_DEGREE + 1):
        coefficients, misfit = _fit(model, middle, half, degree)
        if misfit > error_nT:
            best = min(best, 1.5 * misfit)
            continue
        bound, horizontal = _bound(model, rates, coefficients, misfit, middle, half, degree, error_nT)
        best = min(best, bound.max())
        if bound.max() <= error_nT:
            across = np.hypot(bound[0], bound[1])
            turn = 180.0 if across >= horizontal else float(np.degrees(np.arcsin(across / horizontal)))
            return Patch(coefficients, middle, half, bound, turn, degree, model.name)
    raise InputError(f"an error of {error_nT:g} nT cannot be guaranteed over this area; {best:.2g} nT can: take that, "
                     "or a smaller area")


def _one_piece(model, first, last):
    """Gauss coefficients at the two dates, (2, terms), where one straight line holds between them."""
    c = model.coefficients
    if first < c.valid_from_yr or last > c.valid_until_yr:
        raise InputError(f"dates {first:g} to {last:g} leave the validity of {c.name}, {c.valid_from_yr:g} to "
                         f"{c.valid_until_yr:g}")
    piece = int(np.clip(np.searchsorted(c.breaks_yr, first, side="right") - 1, 0, len(c.polynomials) - 1))
    if c.polynomials.shape[1] > 2 or (last > c.breaks_yr[piece + 1] and len(c.polynomials) > 1):
        raise InputError(f"between {first:g} and {last:g} {c.name} is no single straight line in time: a patch holds "
                         "dates between two neighbouring epochs")
    times = np.array([first, last]) - c.breaks_yr[piece]
    return sum(times[:, None] ** k * c.polynomials[piece, k] for k in range(c.polynomials.shape[1]))


def _basis(at, degree):
    """Terms (n, terms) at scaled positions (n, 4)."""
    x, y, h, t = at.T
    return np.stack([t**a * h**k * x**i * y**j for a, k, i, j in terms_of(degree)], axis=1)


def _vectors(model, middle, half, at):
    lat, lon, height, year = (middle + half * at).T
    # the core alone: a million points need no sigmas; sorted by date, which the core advances to but once a change
    order = np.argsort(year, kind="stable")
    places = [np.clip(lat, -90.0, 90.0), np.mod(lon + 180.0, 360.0) - 180.0, height, year]
    out, status = core.field_many(model.core_model, True, *(np.ascontiguousarray(place[order]) for place in places))
    assert not status.any(), "the area's own points were refused"
    vectors = np.empty((len(lat), 3))
    vectors[order] = np.stack([out["north_nT"], out["east_nT"], out["down_nT"]], axis=1)
    return vectors


def _fit(model, middle, half, degree):
    """Least squares on Chebyshev nodes, close to the best there is: coefficients, and the largest misfit there."""
    nodes = [np.cos(np.pi * (np.arange(n) + 0.5) / n) for n in (degree + 4, degree + 4, 4, 2)]
    at = np.stack(np.meshgrid(*nodes, indexing="ij"), axis=-1).reshape(-1, 4)
    basis, vectors = _basis(at, degree), _vectors(model, middle, half, at)
    coefficients = np.linalg.lstsq(basis, vectors, rcond=None)[0]
    return coefficients, float(np.abs(basis @ coefficients - vectors).max())


def _curvatures(model, coefficients_at_ends, low_height_m, high_height_m):
    """Bounds on the model's second derivatives along latitude, longitude (rad) and height (m), and on its first along
    latitude."""
    degree = model.degree
    ratio = (LARGEST_CURVATURE_M + high_height_m) / (POLAR_M + low_height_m)
    radius = POLAR_M + low_height_m
    lat = lon = height = slope = 0.0
    for n in range(1, degree + 1):
        here = coefficients_at_ends[:, n * n - 1:n * n + 2 * n]
        size = np.sqrt(np.max(np.sum(here**2, axis=1)))
        v = np.sqrt((n + 1) * (2 * n + 1)) * size * (REFERENCE_M / radius) ** (n + 2)
        first, second = (2 * n + 3) * v, (n + 3) * (2 * n + 3) * v
        # the second derivative of the position by latitude is no longer than 1.02 radii of curvature
        lat += second * ratio**2 + 1.02 * first * ratio + 2 * first * ratio + v
        lon += n * n * v
        height += second / radius**2
        slope += first * ratio + v
    return np.array([lat, lon, height]), slope


def _bound(model, at_ends, coefficients, misfit, middle, half, degree, wanted_nT):
    """Guaranteed largest error of each component (3,), and a horizontal field that is nowhere less."""
    low, high = middle[2] - half[2], middle[2] + half[2]
    curvature, slope = _curvatures(model, at_ends, low, high)
    unit = np.array([np.radians(half[0]), np.radians(half[1]), half[2]])
    # in scaled variables, both of the model and of the patch
    of_model = curvature * unit**2
    powers = np.array(terms_of(degree))
    size = np.abs(coefficients)
    of_patch = np.stack([(powers[:, a] * (powers[:, a] - 1))[:, None] * size for a in (2, 3, 1)]).sum(axis=1)
    second = of_model[:, None] + of_patch  # (3 axes, 3 components)

    # steps so that what may hide between points is a share of what is wanted, each axis alike
    allowed = BETWEEN_SHARE * wanted_nT / 3
    counts = np.ceil(2.0 / np.sqrt(8 * allowed / second.max(axis=1))).astype(int) + 1
    counts = np.maximum(counts, 3)
    while np.prod(counts) * 2 > MOST_POINTS:
        counts[np.argmax(counts)] = int(counts.max() * 0.9)
    steps = 2.0 / (counts - 1)
    between = (steps[:, None] ** 2 / 8 * second).sum(axis=0)

    rounding = FLOAT_EPSILON * ((ROUNDINGS + powers.sum(axis=1))[:, None] * size).sum(axis=0)
    if (misfit + between + rounding).max() > wanted_nT:
        return misfit + between + rounding, 0.0  # no grid would bring it down
    seen, horizontal = np.zeros(3), np.inf
    axes = [np.linspace(-1, 1, n) for n in counts]
    for x in np.array_split(axes[0], max(1, int(np.prod(counts) // 100_000))):
        at = np.stack(np.meshgrid(x, axes[1], axes[2], [-1.0, 1.0], indexing="ij"), axis=-1).reshape(-1, 4)
        vectors = _vectors(model, middle, half, at)
        seen = np.maximum(seen, np.abs(_basis(at, degree) @ coefficients - vectors).max(axis=0))
        horizontal = min(horizontal, float(np.hypot(vectors[:, 0], vectors[:, 1]).min()))
    # between the points the horizontal field may be less by its slope over half a step
    horizontal -= slope * np.sum(steps[:2] * unit[:2]) / 2 + slope / (POLAR_M + low) * steps[2] * unit[2] / 2
    return seen + between + rounding, max(horizontal, 0.0)


def c_source(patch, name):
    """A C file with the patch as a constant `name`; it needs magnav_patch.h."""
    if not (name.isidentifier() and name.isascii()):
        raise InputError(f"{name!r} is not a name in C")
    low, high = patch.middle - patch.half, patch.middle + patch.half

    def numbers(values):
        return ", ".join(f"MAGNAV_C({float(v)!r})" for v in np.ravel(values))

    rows = ",\n".join(f"    {numbers(row)}" for row in patch.coefficients)
    return (f"/* Patch of {patch.model}: latitude {low[0]:g} to {high[0]:g}, longitude {low[1]:g} to {high[1]:g} deg, "
            f"height {low[2]:g} to {high[2]:g} m,\n * date {low[3]:g} to {high[3]:g}. Error against the model at most "
            f"{', '.join(f'{b:.3f}' for b in patch.bound_nT)} nT (north, east, down),\n * "
            f"{patch.declination_bound_deg:.4f} deg of declination. Written by magnav. */\n"
            f'#include "magnav_patch.h"\n\nextern const magnav_patch {name};\n\n'
            f"static const magnav_real {name}_coefficients[{patch.coefficients.size}] = {{\n{rows}}};\n\n"
            f"const magnav_patch {name} = {{{name}_coefficients, {{{numbers(patch.middle)}}},\n"
            f"    {{{numbers(1 / patch.half)}}}, {{{numbers(patch.bound_nT)}}},\n"
            f"    {numbers(patch.declination_bound_deg)}, {patch.degree}}};\n")
