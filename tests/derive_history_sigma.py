"""Derives the error tables of IGRF-14 and gufm1 in magnav/field/models/catalogue.toml.

Run: python tests/derive_history_sigma.py

No error model is published for either in our sources, so this is our estimate, made like this:
- what a core-field model omits (crust, daily variation): the published figures of WMM2025;
- the core's error where the two models overlap, 1900 to 1990: the worldwide RMS of their difference on an equal-area
  sample, over the square root of two, half each; IGRF after 1990: as in 1990;
- gufm1 before 1900: the horizontal error of 1900 grown to 1200 nT in 1590 as observations thin out (our estimate), the
  vertical in the same proportion; before 1840 intensity was not measured, and the model's scale rests on an assumed
  decay of the axial dipole: 5 % of a typical intensity (H 25,000, Z 40,000, F 50,000 nT) on top of H, Z, F and X by
  1700, reached linearly from 1840 (our estimate). Declination does not depend on the scale.
"""

import numpy as np

import magnav
from magnav.uncertainty.model_error import ELEMENTS

OMITTED = {"north_nT": 137, "east_nT": 89, "down_nT": 141, "horizontal_nT": 133, "total_nT": 138,
           "inclination_deg": 0.20, "declination_nT_deg": 5417}
SCALE_ERROR_NT = {"north_nT": 1250, "down_nT": 2000, "horizontal_nT": 1250, "total_nT": 2500}
EARLY_YEARS = (1590, 1650, 1700, 1750, 1800, 1840, 1870)
EARLY_HORIZONTAL_NT = (1200, 900, 700, 500, 380, 280, 200)


def overlap(year, points=4000):
    """RMS of IGRF-14 minus gufm1 over the sphere, each element; the declination's as nT across the field."""
    k = np.arange(points) + 0.5
    lat, lon = np.degrees(np.arcsin(1 - 2 * k / points)), (k * 222.49223594996) % 360
    one, other = (magnav.load_model(name).field(lat, lon, when=float(year)) for name in ("IGRF-14", "gufm1"))
    rms = {n: np.sqrt(np.mean((getattr(one, n) - getattr(other, n)) ** 2)) for n in ELEMENTS if n != "declination_deg"}
    turn = np.radians((one.declination_deg - other.declination_deg + 180) % 360 - 180)
    return rms | {"declination_nT_deg": np.degrees(np.sqrt(np.mean((turn * one.horizontal_nT) ** 2)))}


def table(years, core):
    """Core error and what is omitted, in quadrature, as rows for the catalogue."""
    print(f"year = {list(years)}")
    for name, omitted in OMITTED.items():
        values = [np.hypot(omitted, part[name]) for part in core]
        digits = 2 if name == "inclination_deg" else 0
        print(f"{name} = [{', '.join(f'{v:.{digits}f}' for v in values)}]")


def main():
    measured = (1900, 1910, 1920, 1930, 1940, 1950, 1960, 1970, 1980, 1990)
    halves = [{name: value / np.sqrt(2) for name, value in overlap(year).items()} for year in measured]
    print("IGRF-14")
    table((*measured, 2030), [*halves, halves[-1]])
    first = halves[0]
    early = []
    for year, horizontal in zip(EARLY_YEARS, EARLY_HORIZONTAL_NT, strict=True):
        grown = {name: value * horizontal / np.hypot(first["north_nT"], first["east_nT"]) * np.sqrt(2)
                 for name, value in first.items()}
        unscaled = np.clip((1840 - year) / (1840 - 1700), 0, 1)
        early.append(grown | {name: np.hypot(grown[name], unscaled * size) for name, size in SCALE_ERROR_NT.items()})
    print("gufm1")
    table((*EARLY_YEARS, *measured), [*early, *halves])


if __name__ == "__main__":
    main()
