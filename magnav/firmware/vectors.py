"""Golden inputs and outputs from the desk, seeded: what a target, or anybody's implementation, is checked with.

Inputs are numbers that a float holds exactly, so that a float target starts from the same ones.
"""

import csv
import dataclasses

import numpy as np

from .. import core
from ..errors import InputError, LogFileError
from .image import make_image

FIELD_INPUTS = ("lat_deg", "lon_deg", "height_m", "year")
HEADING_INPUTS = ("mag_x_uT", "mag_y_uT", "mag_z_uT", "down_x", "down_y", "down_z", "tilt_sigma_deg")
FIELD_OUTPUTS = core.FIELD_DTYPE.names
HEADING_OUTPUTS = ("magnetic_deg", "true_deg", "grid_deg", "sigma_magnetic_deg", "sigma_deg", "sensor_deg",
                   "calibration_deg", "tilt_deg", "model_deg", "roll_deg", "pitch_deg", "measured_total_uT",
                   "measured_inclination_deg", "dominant", "heading_flags")
GROUPS = {"field": (FIELD_INPUTS, FIELD_OUTPUTS), "heading": (HEADING_INPUTS, HEADING_OUTPUTS)}
INTEGERS = ("flags", "dominant", "heading_flags")
# one setup for all headings: a middling calibration in a middling place, in numbers a float holds
SETUP = {"mag_noise_uT": 0.5, "declination_deg": 4.25, "declination_sigma_deg": 0.375, "convergence_deg": -1.25,
         "total_uT": 48.5, "total_sigma_uT": 0.140625, "inclination_deg": 63.5, "inclination_sigma_deg": 0.203125,
         "gravity_mps2": 9.8125, "acc_noise_mps2": 0.125, "gyr_drift_radps": 0.0078125, "level_sigma_deg": 3.0,
         "flags": 0}
HARD_IRON_UT = (12.5, -7.25, 20.0)
SOFT_IRON = (1.0625, 0.03125, -0.015625, 0.03125, 0.9375, 0.0234375, -0.015625, 0.0234375, 1.03125)
COVARIANCE_DIAGONAL = (0.0625,) * 3 + (2.0**-20,) * 6


@dataclasses.dataclass(frozen=True)
class Vectors:
    """`rows` of each group: {"field": list of dicts with id, inputs and outputs, ...}; `image` of the model."""

    model: str
    seed: int
    rows: dict
    image: object


def heading_setup():
    """The setup of the heading vectors, as the core's structure takes it."""
    covariance = np.diag(COVARIANCE_DIAGONAL)[np.tril_indices(9)]
    return SETUP | {"calibration": {"hard_iron_uT": list(HARD_IRON_UT), "soft_iron": list(SOFT_IRON),
                                    "covariance": covariance.tolist()}}


def make_vectors(model, count=200, seed=1):
    """`count` fields and as many headings from the desk.

    model: a `Model`; its image goes with the vectors. The fields hold both poles, the points nearest to them that a
    float holds, the ends of the validity, longitudes over the whole accepted range.
    Raises InputError.
    """
    if not 20 <= count <= 100_000:
        raise InputError(f"{count} vectors: accepted are 20 to 100,000 a group")
    image = make_image(model)
    rng = np.random.default_rng(seed)
    return Vectors(model.name, seed, {"field": _fields(model, rng, count), "heading": _headings(rng, count)}, image)


def _float(values):
    return np.asarray(values, dtype=np.float32).astype(np.float64)


def _fields(model, rng, count):
    first, last = model.valid_from_yr, model.valid_until_yr
    if not np.isfinite(first):
        first, last = 2000.0, 2030.0
    lat = np.degrees(np.arcsin(rng.uniform(-1, 1, count)))
    nearest = np.nextafter(np.float32(90), np.float32(0))
    lat[:6] = 90.0, -90.0, nearest, -nearest, 0.0, 0.0
    lon = rng.uniform(-360, 360, count)
    lon[:6] = 0.0, 180.0, 33.0, -120.0, 360.0, -360.0
    year = rng.uniform(first, last, count)
    year[6:8] = first, last
    inputs = [_float(lat), _float(lon), _float(rng.uniform(-1000, 850_000, count)), np.clip(_float(year), first, last)]
    out, status = core.field_many(model.core_model, False, *map(np.ascontiguousarray, inputs))
    assert not status.any(), "an input of our own making was refused"
    return [{"id": f"field-{i}"} | dict(zip(FIELD_INPUTS, map(float, values), strict=True))
            | {name: out[name][i].item() for name in FIELD_OUTPUTS}
            for i, values in enumerate(zip(*inputs, strict=True))]


def _headings(rng, count):
    setup, rows = heading_setup(), []
    while len(rows) < count:
        mag = _float(rng.uniform(-60, 60, 3))
        down = _float(rng.normal(size=3))
        tilt = float(_float(rng.uniform(0, 4)))
        heading, status = core.heading_of(setup, mag, down, tilt)
        # a magnetic vector along the vertical leaves rounding errors to speak for the heading
        if status or abs(heading["measured_inclination_deg"]) > 85 or abs(heading["pitch_deg"]) > 85:
            continue
        parts = dict(zip(HEADING_OUTPUTS[5:9], heading["contribution_deg"].tolist(), strict=True))
        named = {name: heading[name].item() for name in HEADING_OUTPUTS
                 if name not in parts and name != "heading_flags"}
        rows.append({"id": f"heading-{len(rows)}"} | dict(zip(HEADING_INPUTS, [*mag, *down, tilt], strict=True))
                    | {name: (named | parts | {"heading_flags": int(heading["flags"])})[name]
                       for name in HEADING_OUTPUTS})
    return rows


def write_csv(vectors, path):
    """One table of all groups; decimals that give the very bits back."""
    columns = ["id", "group", *FIELD_INPUTS, *HEADING_INPUTS, *FIELD_OUTPUTS, *HEADING_OUTPUTS]
    with open(path, "w", encoding="utf-8", newline="") as file:
        file.write(f"# vectors of {vectors.model}, seed {vectors.seed}, core version {core.CORE_VERSION}, double\n")
        writer = csv.DictWriter(file, columns, restval="", lineterminator="\n")
        writer.writeheader()
        for group, rows in vectors.rows.items():
            for row in rows:
                writer.writerow({"group": group} | {k: v if isinstance(v, (str, int)) else repr(float(v))
                                                    for k, v in row.items()})


def read_csv(path):
    """The rows of `write_csv` by group. Raises LogFileError where the file is no such table."""
    try:
        with open(path, encoding="utf-8", newline="") as file:
            table = csv.DictReader(line for line in file if not line.startswith("#"))
            if not table.fieldnames or not {"id", "group"} <= set(table.fieldnames):
                raise LogFileError(f"{path}: no table of vectors: columns id and group are needed")
            rows = {group: [] for group in GROUPS}
            for line in table:
                if line["group"] not in GROUPS:
                    raise LogFileError(f"{path}: group {line['group']!r} is not known; there are {', '.join(GROUPS)}")
                inputs, outputs = GROUPS[line["group"]]
                rows[line["group"]].append({"id": line["id"]} | {name: float(line[name]) for name in inputs + outputs})
    except OSError as error:
        raise LogFileError(f"{path}: cannot be opened ({error.strerror})") from None
    except (KeyError, TypeError, ValueError, UnicodeDecodeError) as error:
        raise LogFileError(f"{path}: no table of vectors ({error})") from None
    return rows


def c_header(vectors):
    """The vectors and the model's image as one C header for c_core/kit/self_test.c."""
    out = ["/* Vectors of the model " + vectors.model + f", seed {vectors.seed}. Written by magnav. */",
           "#ifndef MAGNAV_VECTORS_H", "#define MAGNAV_VECTORS_H", '#include "magnav_core.h"',
           f'#define VECTORS_MODEL "{vectors.model}"']
    for group, (inputs, outputs) in GROUPS.items():
        rows = vectors.rows[group]
        out.append(f"#define {group.upper()}_VECTORS {len(rows)}")
        for kind, names in (("inputs", inputs), ("outputs", outputs)):
            lines = ",\n".join("    {" + ", ".join(_c_number(row[name]) for name in names) + "}" for row in rows)
            out.append(f"/* {', '.join(names)} */")
            out.append(f"static const magnav_real {group}_{kind}[{len(rows)}][{len(names)}] = {{\n{lines}}};")
    setup = heading_setup()
    calibration = setup.pop("calibration")
    values = [", ".join(map(_c_number, calibration[k])) for k in ("hard_iron_uT", "soft_iron", "covariance")]
    rest = ", ".join(_c_number(setup[name]) for name in SETUP if name != "flags")
    out.append("static const magnav_heading_setup heading_setup = {{{" + "}, {".join(values) + f"}}}}, {rest}, 0}};")
    content = vectors.image.content
    out.append(f"static const uint8_t model_image[{len(content)}] = {{{', '.join(map(str, content))}}};")
    return "\n".join([*out, "#endif", ""])


def _c_number(value):
    return f"MAGNAV_C({float(value)!r})"
