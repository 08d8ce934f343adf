"""How much of the sphere a set of directions covers: cells of equal area."""

import numpy as np

# Six bands of equal height (equal area, by Archimedes) times eight sectors: cells of about 30 degrees.
BANDS, SECTORS = 6, 8
CELLS = BANDS * SECTORS


def cell_of(direction):
    """The cell, 0 to CELLS - 1, of each unit vector (n, 3)."""
    band = np.clip(((direction[:, 2] + 1) / 2 * BANDS).astype(int), 0, BANDS - 1)
    turn = np.arctan2(direction[:, 1], direction[:, 0]) / (2 * np.pi) + 0.5
    return band * SECTORS + np.clip((turn * SECTORS).astype(int), 0, SECTORS - 1)


def coverage(direction):
    """Fraction of the cells that hold at least one direction."""
    return len(np.unique(cell_of(direction))) / CELLS


def directions_from_sphere(mag_uT, radius_uT=None):
    """Directions (n, 3) of readings (n, 3) from the centre of a sphere of a known radius through them.

    For readings that do not determine an ellipsoid. By default the radius is the magnitude of the readings. A patch has
    two such centres; the part of the sphere that it covers is the same from either.
    """
    radius = radius_uT or float(np.median(np.linalg.norm(mag_uT, axis=1)))
    middle = mag_uT.mean(axis=0)
    _, sizes, axes = np.linalg.svd(mag_uT - middle, full_matrices=False)
    inside = float(np.sum(sizes**2)) / len(mag_uT)
    # the mean of points on a sphere lies below its surface: |mean - centre|^2 = radius^2 - scatter^2
    centre = middle - axes[2] * np.sqrt(max(radius**2 - inside, 0.0))
    direction = mag_uT - centre
    return direction / np.maximum(np.linalg.norm(direction, axis=1), np.finfo(float).tiny)[:, None]
