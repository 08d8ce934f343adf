"""Golden inputs and outputs from the desk, seeded: what a target, or anybody's implementation, is checked with.

Inputs are numbers that a float holds exactly, so that a float target starts from the same ones; only the points a
millimetre from a pole are not, and there a float means the pole. They come from Python's own random numbers and the
core's arithmetic, so that a seed gives the same vectors on every machine.
"""

import csv
import dataclasses
import hashlib
import json
import math
import random
import struct

import numpy as np

from .. import core
from ..errors import InputError, LogFileError
from .image import make_image

FIELD_INPUTS = ("lat_deg", "lon_deg", "height_m", "year")
HEADING_INPUTS = ("mag_x_uT", "mag_y_uT", "mag_z_uT", "down_x", "down_y", "down_z", "tilt_sigma_deg", "setup")
TRIG_INPUTS = ("angle_deg", "turn_deg", "y", "x")
FIELD_OUTPUTS = core.FIELD_DTYPE.names
HEADING_OUTPUTS = ("magnetic_deg", "true_deg", "grid_deg", "sigma_magnetic_deg", "sigma_deg", "sensor_deg",
                   "calibration_deg", "tilt_deg", "model_deg", "roll_deg", "pitch_deg", "measured_total_uT",
                   "measured_inclination_deg", "dominant", "heading_flags")
TRIG_OUTPUTS = ("sine", "cosine", "full_circle_deg", "atan2_deg")
GROUPS = {"trig": (TRIG_INPUTS, TRIG_OUTPUTS), "field": (FIELD_INPUTS, FIELD_OUTPUTS),
          "heading": (HEADING_INPUTS, HEADING_OUTPUTS), "field_errors": (FIELD_INPUTS, ("status",)),
          "heading_errors": (HEADING_INPUTS, ("status",))}
INTEGERS = ("flags", "dominant", "heading_flags", "status")
# outputs for which 359 degrees is two from 1
ON_THE_CIRCLE = ("declination_deg", "grid_variation_deg", "magnetic_deg", "true_deg", "grid_deg", "roll_deg",
                 "full_circle_deg", "atan2_deg")
CALIBRATION = ("hard_iron_uT", "soft_iron", "covariance")
MILLIMETRE_DEG = 0.001 / 111_694
# a model constant in time has no dates of its own
CONSTANT_YEARS = (2000.0, 2030.0)
# twenty roundings of a float: nearer than this to a limit, a flag is a matter of luck there
MARGIN = 2e-6


@dataclasses.dataclass(frozen=True)
class Vectors:
    """`rows` of each group: {"field": list of dicts with id, inputs and outputs, ...}; `setups` of the headings, as
    the core's structure takes them; `model`, a `Model`; `image` of it, None where it is not the same bits."""

    model: object
    seed: int
    rows: dict
    setups: list
    image: object


def make_vectors(model, count=200, seed=1):
    """`count` rows of trigonometry, fields and headings each from the desk, and inputs that give a status.

    model: a `Model`. The fields hold both poles, points a millimetre and one step of a float from them, the ends of
    the validity, of the accepted heights and longitudes. Raises InputError.
    """
    if not 20 <= count <= 100_000:
        raise InputError(f"{count} vectors: accepted are 20 to 100,000 a group")
    if not 0 <= seed < 2**64:
        raise InputError(f"seed {seed}: accepted are 0 to 2^64 - 1")
    setups = _setups(random.Random(f"setups {seed}"))
    rows = {"trig": _trig(random.Random(f"trig {seed}"), count),
            "field": _fields(model, random.Random(f"field {seed}"), count),
            "heading": _headings(setups, random.Random(f"heading {seed}"), count),
            "field_errors": _field_errors(model), "heading_errors": _heading_errors(setups)}
    for group, found in rows.items():
        for i, row in enumerate(found):
            row["id"] = f"{group}-{i}"
    return Vectors(model, seed, rows, setups, _image(model))


def _image(model):
    try:
        image = make_image(model)
    except InputError:
        return None
    return image if image.largest_difference_nT == 0 else None


def _float(value):
    return float(np.float32(value))


def _next(value, towards):
    return float(np.nextafter(np.float32(value), np.float32(towards)))


def _row(group, inputs, outputs):
    names_in, names_out = GROUPS[group]
    return dict(zip(names_in, inputs, strict=True)) | dict(zip(names_out, outputs, strict=True))


def _trig(rng, count):
    angles = [0.0, -0.0, 30.0, 45.0, -60.0, 90.0, -90.0, 135.0, 180.0, -180.0, 270.0, 360.0, -720.0, 1e6, -1e6, 1e-30]
    points = [(0.0, 0.0), (0.0, 1.0), (1.0, 0.0), (0.0, -1.0), (-1.0, 0.0), (-0.0, -1.0), (-0.0, 1.0), (1.0, 1.0),
              (1.0, -1.0), (-3.0, -3.0), (1e-30, 1.0), (1.0, 1e-30), (-1e-30, -1.0), (1e30, 1e30), (2.0, 1.0),
              (1.0, 2.0)]
    rows = []
    for i in range(count):
        if i < len(angles):
            angle, (y, x) = angles[i], points[i]
        else:
            angle = _float(rng.uniform(-1e6, 1e6) if i % 2 else rng.uniform(-720, 720))
            y, x = (_float(rng.uniform(-1, 1) * 10.0 ** rng.randrange(-6, 7)) for _ in range(2))
        turn = angle if abs(angle) <= 720 else _float(rng.uniform(-720, 720))
        sine, cosine = core.sincos_deg(angle)
        rows.append(_row("trig", (angle, turn, y, x), (sine, cosine, core.lib.magnav_full_circle_deg(turn),
                                                       core.atan2_deg(y, x))))
    return rows


def _years(model):
    first, last = model.valid_from_yr, model.valid_until_yr
    return (first, last) if math.isfinite(first) and math.isfinite(last) else CONSTANT_YEARS


def _fields(model, rng, count):
    first, last = _years(model)

    def somewhere(lat=None, lon=None, height=None, year=None):
        z = rng.uniform(-1, 1)
        lat = _float(core.atan2_deg(z, math.sqrt(1 - z * z))) if lat is None else lat
        lon = _float(rng.uniform(-360, 360)) if lon is None else lon
        height = _float(rng.uniform(-1000, 850_000)) if height is None else height
        # rounding must not lead out of the validity
        year = min(max(_float(rng.uniform(first, last)), first), last) if year is None else year
        return lat, lon, height, year

    near = _next(90, 0)
    points = [somewhere(lat=lat, lon=lon) for lat, lon in (
        (90.0, 0.0), (-90.0, 180.0), (90.0 - MILLIMETRE_DEG, 33.0), (MILLIMETRE_DEG - 90.0, 33.0), (near, 33.0),
        (-near, -120.0), (0.0, 360.0), (0.0, -360.0), (55.0, 180.0), (-55.0, -180.0))]
    points += [somewhere(height=h) for h in (-10_000.0, -1000.0, 0.0, 850_000.0, 10_000_000.0)]
    points += [somewhere(year=y) for y in (first, last)]
    settled = len(points)
    while len(points) < count or settled < count:
        points = points[:settled] + [somewhere() for _ in range(count - settled)]
        out, _ = _evaluate(model, points)
        points = points[:settled] + [p for p, o in zip(points[settled:], out[settled:], strict=True) if _steady(p, o)]
        settled = len(points)
    out, status = _evaluate(model, points)
    if status.any():
        raise InputError(f"model {model.name} gives no field at {points[int(np.flatnonzero(status)[0])]}")
    return [_row("field", p, [o[name].item() for name in FIELD_OUTPUTS]) for p, o in zip(points, out, strict=True)]


def _evaluate(model, points):
    return core.field_many(model.core_model, False, *map(np.ascontiguousarray, zip(*points, strict=True)))


def _steady(point, out):
    """Whether no flag hangs on the last bits of a float."""
    return (min(abs(out["horizontal_nT"] - limit) for limit in (2000.0, 6000.0)) > 1
            and abs(abs(out["inclination_deg"]) - 80) > 0.001 and abs(abs(point[0]) - 89.9) > 1e-4)


def _setups(rng):
    """Four setups: no calibration, and three calibrations with a full covariance, the last near a magnetic pole."""
    flags = core.Flag
    setups = []
    for i in range(4):
        hard, soft, lower = [0.0] * 3, [1.0, 0.0, 0.0, 0.0, 1.0, 0.0, 0.0, 0.0, 1.0], [[0.0] * 9 for _ in range(9)]
        if i:
            hard = [_float(rng.uniform(-30, 30)) for _ in range(3)]
            for row in range(3):
                for column in range(row + 1):
                    value = _float(rng.uniform(0.85, 1.15) if row == column else rng.uniform(-0.06, 0.06))
                    soft[3 * row + column] = soft[3 * column + row] = value
            for row in range(9):
                size = 0.3 if row < 3 else 0.004
                for column in range(row + 1):
                    lower[row][column] = size * (1.0 if row == column else rng.uniform(-0.3, 0.3))
        covariance = [_float(sum(lower[r][k] * lower[c][k] for k in range(9))) for r in range(9) for c in range(r + 1)]
        setups.append({
            "calibration": {"hard_iron_uT": hard, "soft_iron": soft, "covariance": covariance},
            "mag_noise_uT": _float(rng.uniform(0.1, 1)), "declination_deg": _float(rng.uniform(-180, 180)),
            "declination_sigma_deg": _float(rng.uniform(0.2, 2)), "convergence_deg": _float(i and rng.uniform(-3, 3)),
            "total_uT": _float(rng.uniform(25, 60)), "total_sigma_uT": 0.140625,
            "inclination_deg": _float(rng.uniform(-70, 70) if i < 3 else 81.5), "inclination_sigma_deg": 0.203125,
            "gravity_mps2": 9.8125, "acc_noise_mps2": 0.125, "gyr_drift_radps": 0.0078125, "level_sigma_deg": 3.0,
            "flags": int((flags.UNCALIBRATED, flags(0), flags(0), flags.CAUTION_ZONE | flags.STEEP_DIP)[i])})
    return setups


def _heading(setup, values):
    return core.heading_of(setup, values[:3], values[3:6], values[6])


def _headings(setups, rng, count):
    rows = []
    while len(rows) < count:
        number = len(rows) % len(setups)
        values = [_float(rng.uniform(-60, 60)) for _ in range(3)] + [_float(rng.uniform(-1, 1)) for _ in range(3)]
        values.append(_float(rng.uniform(0, 4)))
        heading, status = _heading(setups[number], values)
        # a magnetic vector or a forward axis along the vertical leaves rounding errors to speak for the heading
        if status or abs(heading["measured_inclination_deg"]) > 85 or abs(heading["pitch_deg"]) > 85:
            continue
        shifted = ([v * (1 + s) for v, s in zip(values, shift, strict=True)] for shift in _SHIFTS)
        if not all(_same_words(heading, _heading(setups[number], other)) for other in shifted):
            continue
        parts = dict(zip(HEADING_OUTPUTS[5:9], heading["contribution_deg"].tolist(), strict=True))
        outputs = [parts[name] if name in parts else heading[name.removeprefix("heading_")].item()
                   for name in HEADING_OUTPUTS]
        rows.append(_row("heading", [*values, number], outputs))
    return rows


# every input a little off, one at a time, both ways
_SHIFTS = tuple(tuple(sign * MARGIN * (i == j) for j in range(7)) for i in range(7) for sign in (1, -1))


def _same_words(heading, other):
    found, status = other
    return not status and heading["flags"] == found["flags"] and heading["dominant"] == found["dominant"]


def _field_errors(model):
    first, last = _years(model)
    good = (45.0, 10.0, 100.0, _float((first + last) / 2))
    bad = [(0, _next(90, 91)), (0, _next(-90, -91)), (0, 1e4), (1, _next(360, 361)), (1, _next(-360, -361)), (1, 1e6),
           (2, _next(-10_000, -1e9)), (2, _next(10_000_000, 1e9))]
    bad += [(place, value) for place in range(4) for value in (math.nan, math.inf, -math.inf)]
    if math.isfinite(model.valid_from_yr):
        bad.append((3, _next(first, -1e9)))
    if math.isfinite(model.valid_until_yr):
        bad.append((3, _next(last, 1e9)))
    points = [(*good[:place], value, *good[place + 1:]) for place, value in bad]
    _, status = _evaluate(model, points)
    return [_row("field_errors", point, [int(code)]) for point, code in zip(points, status, strict=True)]


def _heading_errors(setups):
    good = [20.0, -5.0, 40.0, 0.0, 0.0, 1.0, 0.5]
    bad = [[0.0, 0.0, 0.0, *good[3:]], [0.0, 0.0, 50.0, *good[3:]], [*good[:3], 0.0, 0.0, 0.0, 0.5], [*good[:6], -0.5]]
    bad += [[*good[:place], value, *good[place + 1:]] for place in range(7) for value in (math.nan, math.inf)]
    return [_row("heading_errors", [*values, 0], [int(_heading(setups[0], values)[1])]) for values in bad]


def bits_hash(content):
    """FNV-1a, 64 bits, of bytes."""
    state = 14695981039346656037
    for byte in content:
        state = ((state ^ byte) * 1099511628211) & 0xFFFFFFFFFFFFFFFF
    return state


def group_hash(group, rows):
    """`bits_hash` of all outputs of a group, row by row, as doubles, highest byte first: what the self-test prints."""
    outputs = GROUPS[group][1]
    return bits_hash(b"".join(struct.pack(">d", row[name]) for row in rows for name in outputs))


def model_digest(model):
    """SHA-256 (hexadecimal) of the breaks and then the polynomials as in magnav_model, as little-endian doubles."""
    c = model.coefficients
    return hashlib.sha256(c.breaks_yr.astype("<f8").tobytes() + c.polynomials.astype("<f8").tobytes()).hexdigest()


def write_csv(vectors, path):
    """One table of all groups; decimals that give the very bits back; comments say where it comes from."""
    columns = ["id", "group"]
    for inputs, outputs in GROUPS.values():
        columns += [name for name in inputs + outputs if name not in columns]
    model = vectors.model
    with open(path, "w", encoding="utf-8", newline="") as file:
        file.write(f"# magnav vectors of {model.name}, seed {vectors.seed}\n"
                   f"# coefficients: SHA-256 {model_digest(model)}, degree {model.degree}\n"
                   f"# valid: {model.valid_from_yr!r} to {model.valid_until_yr!r}, decimal years (UTC), both included\n"
                   f"# core version: {core.CORE_VERSION}; real type: double (IEEE 754 binary64)\n"
                   "# units: in the names; height above WGS84; body axes forward, right, down\n"
                   "# status: magnav_status in magnav_core.h; flags: MAGNAV_FLAG_ bits there\n")
        for group, rows in vectors.rows.items():
            file.write(f"# group {group}: {len(rows)} rows, hash {group_hash(group, rows):016x}\n")
        for number, setup in enumerate(vectors.setups):
            file.write(f"# setup {number}: {json.dumps(setup)}\n")
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
            rows, seen = {group: [] for group in GROUPS}, set()
            for line in table:
                if line["group"] not in GROUPS:
                    raise LogFileError(f"{path}: group {line['group']!r} is not known; there are {', '.join(GROUPS)}")
                inputs, outputs = GROUPS[line["group"]]
                row = {name: float(line[name]) for name in inputs + outputs}
                if line["id"] in seen:
                    raise LogFileError(f"{path}: {line['id']!r} is there twice")
                if not all(math.isfinite(row[name]) for name in outputs):
                    raise LogFileError(f"{path}: {line['id']!r} has an output that is not finite")
                seen.add(line["id"])
                rows[line["group"]].append({"id": line["id"]} | row)
    except OSError as error:
        raise LogFileError(f"{path}: cannot be opened ({error.strerror})") from None
    except (KeyError, TypeError, ValueError, UnicodeDecodeError, csv.Error) as error:
        if isinstance(error, LogFileError):
            raise
        raise LogFileError(f"{path}: no table of vectors ({error})") from None
    if not seen:
        raise LogFileError(f"{path}: no vectors")
    return rows


def c_header(vectors):
    """The vectors and the model as one C header for c_core/kit/self_test.c; it needs magnav_core.h alone."""
    model, c = vectors.model, vectors.model.coefficients
    pieces, order, _ = c.polynomials.shape
    out = [f"/* Vectors of the model {_comment(model.name)}, seed {vectors.seed}. Written by magnav. */",
           "#ifndef MAGNAV_VECTORS_H", "#define MAGNAV_VECTORS_H", "#include <math.h>", '#include "magnav_core.h"',
           f"#define MODEL_DEGREE {c.degree}", _array("model_breaks", [c.breaks_yr]),
           _array("model_polynomials", c.polynomials.reshape(pieces * order, -1)),
           "static const magnav_model model = {model_breaks[0], model_polynomials[0], "
           f"{_c_number(c.valid_from_yr)}, {_c_number(c.valid_until_yr)}, {c.degree}, {order}, {pieces}}};"]
    for group, (inputs, outputs) in GROUPS.items():
        rows, name = vectors.rows[group], group.upper()
        circle = sum(1 << i for i, output in enumerate(outputs) if output in ON_THE_CIRCLE)
        out += [f"#define {name}_VECTORS {len(rows)}u", f"#define {name}_OUTPUTS {len(outputs)}",
                f'#define {name}_COLUMNS "{",".join(outputs)}"',
                f"/* outputs on the circle, a bit each */\n#define {name}_CIRCLE {circle:#x}u",
                f"/* {', '.join(inputs)} */", _array(f"{group}_inputs", [[row[n] for n in inputs] for row in rows]),
                _array(f"{group}_outputs", [[row[n] for n in outputs] for row in rows])]
    setups = ",\n".join(_c_setup(setup) for setup in vectors.setups)
    out.append(f"static const magnav_heading_setup heading_setups[{len(vectors.setups)}] = {{\n{setups}}};")
    if vectors.image:
        content = vectors.image.content
        out += ["/* the image that goes onto targets; it holds the same bits */", "#define MODEL_IMAGE",
                f"static const uint8_t model_image[{len(content)}] = {{{', '.join(map(str, content))}}};"]
    return "\n".join([*out, "#endif", ""])


def _array(name, rows):
    lines = ",\n".join("    {" + ", ".join(map(_c_number, row)) + "}" for row in rows)
    return f"static const magnav_real {name}[{len(rows)}][{len(rows[0])}] = {{\n{lines}}};"


def _c_setup(setup):
    calibration = "}, {".join(", ".join(map(_c_number, setup["calibration"][name])) for name in CALIBRATION)
    rest = ", ".join(_c_number(value) for name, value in setup.items() if name not in ("calibration", "flags"))
    return f"    {{{{{{{calibration}}}}}, {rest}, {setup['flags']}u}}"


def _c_number(value):
    if math.isnan(value):
        return "(magnav_real)NAN"
    if math.isinf(value):
        return "(magnav_real)INFINITY" if value > 0 else "(magnav_real)-INFINITY"
    return f"MAGNAV_C({float(value)!r})"


def _comment(text):
    """A name may come from a file: nothing in it may end the comment."""
    return "".join(ch for ch in text if ch.isascii() and ch.isprintable()).replace("*/", "")
