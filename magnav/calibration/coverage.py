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
