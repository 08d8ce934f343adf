"""The models by name: what is shipped, what a name means, which model is made for which date."""

import dataclasses
import functools
import importlib.resources
import pathlib
import tomllib

import numpy as np

from ..errors import InputError
from .model import AutoModel, Model
from .readers import read_coefficients

FOLDER = importlib.resources.files("magnav.field") / "models"


@functools.cache
def _catalogue():
    return tomllib.loads((FOLDER / "catalogue.toml").read_text(encoding="utf-8"))["model"]


def model_names():
    """Names of the shipped models, the default first."""
    return sorted((entry["name"] for entry in _catalogue()), key=lambda name: not _entry(name).get("default", False))


def _plain(name):
    return name.lower().replace("-", "").replace(" ", "")


def _entry(name):
    for entry in _catalogue():
        if _plain(name) in map(_plain, [entry["name"], *entry.get("aliases", [])]):
            return entry
    return None


@functools.cache
def _shipped(name):
    entry = _entry(name)
    with importlib.resources.as_file(FOLDER / entry["file"]) as path:
        coefficients = dataclasses.replace(read_coefficients(path), name=entry["name"], source=entry["source"])
    return Model(coefficients, entry["error_model"], entry["title"])


@functools.cache
def _auto():
    entries = sorted((e for e in _catalogue() if "auto_until_yr" in e), key=lambda e: e["auto_until_yr"])
    return AutoModel([_shipped(e["name"]) for e in entries], [e["auto_until_yr"] for e in entries])


def load_model(name_or_path="WMM2025"):
    """A model by its name, from a coefficient file, or "auto": for each date the one made for it.

    Names compare without regard to case, hyphens and spaces; `model_names()` lists them. A file's layout is found from
    its content (COF, SHC, the IGRF table, a spline table). A file that holds no shipped model takes the default model's
    error figures, since it has none of its own.
    Raises InputError for an unknown name, CoefficientFileError (file and line) for a file that cannot be trusted.
    """
    if isinstance(name_or_path, str):
        if _plain(name_or_path) == "auto":
            return _auto()
        entry = _entry(name_or_path)
        if entry is not None:
            return _shipped(entry["name"])
    path = pathlib.Path(name_or_path)
    if not path.exists():
        raise InputError(f"{name_or_path!s} is neither a model's name ({', '.join(model_names())}, auto) "
                         "nor a file that exists")
    coefficients = read_coefficients(path)
    same = _shipped_alike(coefficients)
    error_model = (same or _entry("WMM2025"))["error_model"]
    return Model(coefficients, error_model, same and same["title"])


def _shipped_alike(coefficients):
    """The catalogue's entry with the very same coefficients, or None."""
    entry = _entry(coefficients.name)
    if entry is None:
        return None
    ours = _shipped(entry["name"]).coefficients
    alike = (np.array_equal(ours.breaks_yr, coefficients.breaks_yr)
             and np.array_equal(ours.polynomials, coefficients.polynomials))
    return entry if alike else None
