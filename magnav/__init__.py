"""Directions from true and grid north, with an honest uncertainty, from a magnetic sensor or a compass bearing.

Never the only means of safety-critical navigation: charts, notices, local codes and licensed practice come first.
"""

import importlib

__version__ = "0.1.0"

# each name and where it lives: loaded when first used, so that the command starts fast
_HOME = {
    "load_model": "field.catalogue", "model_names": "field.catalogue", "Field": "field.result", "Model": "field.model",
    "calibrate": "calibration", "Calibration": "calibration",
    "compute_heading": "heading", "Headings": "heading",
    "convert_bearing": "bearings", "Bearing": "bearings",
    "body_to_frd": "frames", "local_to_ned": "frames", "grid_convergence": "grid_north", "read_log": "logs",
    "Flag": "core", "flag_text": "core",
    "MagnavError": "errors", "InputError": "errors", "OutOfValidityError": "errors", "CoefficientFileError": "errors",
    "LogFileError": "errors", "CalibrationRefused": "errors",
}

__all__ = sorted(_HOME)


def __getattr__(name):
    if name not in _HOME:
        raise AttributeError(f"module 'magnav' has no attribute {name!r}")
    return getattr(importlib.import_module(f".{_HOME[name]}", __name__), name)


def __dir__():
    return __all__
