"""Derives GROWTH_DOUBLES_YR in magnav/uncertainty/model_error.py. Run: python tests/derive_extrapolation_growth.py

How wrong a model becomes when it is carried on in a straight line, `age` years past its epoch: worldwide root mean
square of X, Y, Z on an equal-area sample of the ellipsoid, against IGRF-14.
  * From IGRF-14's own snapshots: from each epoch, along the slope of the five years before it. Since 1950, and since
    1980 alone, when satellites had made the slopes as good as a present model's (the earlier snapshots are rounded to
    1 nT and end at degree 10, so their slopes are worse).
  * WMM2020 and WMM2015v2 carried to 2025 as they were published (the second was made in 2018, knowing more).
Then the law  error = rate * age * (1 + (age - 5) / G),  with the rates of model_error.py: the factor in brackets as
measured, and the G that each age asks for.
"""

import numpy as np

import magnav
from magnav.uncertainty.model_error import GROWTH_DOUBLES_YR, RATE_SIGMA_NT_PER_YR

RATE = np.array(RATE_SIGMA_NT_PER_YR)
AGES = (5, 10, 15, 20, 25, 30)


def sample(count=2000):
    """Points of equal area: a golden spiral over the sphere."""
    k = np.arange(count) + 0.5
    return np.degrees(np.arcsin(1 - 2 * k / count)), (180 * (1 + 5**0.5) * k) % 360 - 180


def vectors(name, year):
    field = magnav.load_model(name).field(*sample(), when=float(year), extrapolate=True)
    return np.stack([field.north_nT, field.east_nT, field.down_nT])


def straight_line_errors(first_epoch):
    """{age: (number of epochs, RMS of X, Y, Z over all of them)} for the epochs from `first_epoch` on."""
    truth = {year: vectors("IGRF-14", year) for year in range(first_epoch - 5, 2026, 5)}
    found = {}
    for age in AGES:
        epochs = range(first_epoch, 2026 - age, 5)
        errors = [truth[e] + age * (truth[e] - truth[e - 5]) / 5 - truth[e + age] for e in epochs]
        found[age] = len(errors), np.sqrt(np.mean(np.square(errors), axis=(0, 2)))
    return found


def text_of(values, digits=0):
    return " ".join(f"{v:.{digits}f}" for v in values)


if __name__ == "__main__":
    print("RMS error in nT of a straight line, its factor over rate * age, and the G that gives the factor (X Y Z)")
    for first_epoch in (1950, 1980):
        print(f"from epochs since {first_epoch}")
        for age, (count, rms) in straight_line_errors(first_epoch).items():
            factor = rms / (RATE * age)
            asked = text_of((age - 5) / (factor - 1)) if age > 5 else ""
            print(f"  age {age:2d}, {count:2d} epochs: {text_of(rms):>12}   {text_of(factor, 2):>15}   {asked}")
    print("as published, against IGRF-14 at 2025.0")
    for name, age in (("WMM2020", 5), ("WMM2015v2", 10)):
        rms = np.sqrt(np.mean((vectors(name, 2025) - vectors("IGRF-14", 2025)) ** 2, axis=1))
        print(f"  age {age:2d}, {name:>9}: {text_of(rms):>12}   {text_of(rms / (RATE * age), 2):>15}")
    print(f"the law in use, G = {GROWTH_DOUBLES_YR:g}")
    for age in AGES:
        factor = 1 + (age - 5) / GROWTH_DOUBLES_YR
        print(f"  age {age:2d}: {text_of(RATE * age * factor):>23}   {factor:.2f}")
