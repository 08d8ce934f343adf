"""Sensor logs: time, accelerometer, magnetometer and, where there is one, gyroscope, from a CSV file.

A column is known by its quantity and its unit: mag_x_uT, acc_z_mps2, gyr_y_radps, t_s; other units are in `UNITS`.
"""

import bisect
import dataclasses

import numpy as np

from .errors import LogFileError
from .tables import Table

# unit in a column's name -> factor to the unit used inside
UNITS = {
    "mag": {"uT": 1.0, "nT": 1e-3, "mT": 1e3, "T": 1e6, "G": 100.0, "mG": 0.1},
    "acc": {"mps2": 1.0, "g": 9.80665, "mg": 9.80665e-3},
    "gyr": {"radps": 1.0, "degps": np.pi / 180, "mdegps": np.pi / 180e3},
    "t": {"s": 1.0, "ms": 1e-3, "us": 1e-6, "ns": 1e-9},
}


@dataclasses.dataclass
class SensorLog:
    """A log in SI units and the sensor's own frame: t_s (n,), mag_uT, acc_mps2, gyr_radps (n, 3) or None where the
    file has no such columns, `lines` (n,) the file's line of each sample, `bad` the rows left out as
    (line, reason, text)."""

    path: str
    t_s: np.ndarray | None
    mag_uT: np.ndarray
    acc_mps2: np.ndarray | None
    gyr_radps: np.ndarray | None
    lines: np.ndarray
    bad: list

    def __len__(self):
        return len(self.lines)


def read_log(path, names=None, progress=None):
    """Read a sensor log.

    names: {our name: the file's name} for columns named otherwise, e.g. {"mag_x_nT": "Bx"}.
    progress: called with the fraction read.
    Raises LogFileError where the file is no table, the magnetometer is missing, or no row is usable.
    """
    with Table(path) as table:
        if names:
            _rename(table, names)
        found = {quantity: _find(table, quantity) for quantity in UNITS}
        if found["mag"] is None:
            raise LogFileError(f"{path}: no magnetometer: columns mag_x_uT, mag_y_uT, mag_z_uT (or with another of the "
                               f"units {', '.join(UNITS['mag'])}) are needed; the header has: {', '.join(table.names)}")
        wanted = [name for columns, _ in filter(None, found.values()) for name in columns]
        parts, lines, bad = {name: [] for name in wanted}, [], []
        for rows in table.rows(wanted):
            for name in wanted:
                parts[name].append(rows.columns[name])
            lines.append(rows.lines)
            bad += rows.bad
            if progress:
                progress(table.fraction_read())
    if not sum(map(len, lines)):
        why = f"; the first bad one, line {bad[0][0]}: {bad[0][1]}" if bad else ""
        raise LogFileError(f"{path}: no usable row{why}")

    def joined(quantity):
        if found[quantity] is None:
            return None
        columns, factor = found[quantity]
        values = np.column_stack([np.concatenate(parts[name]) for name in columns]) * factor
        return values[:, 0] if quantity == "t" else values

    lines, t_s = np.concatenate(lines), joined("t")
    keep = np.ones(len(lines), dtype=bool) if t_s is None else _increasing(t_s)
    bad += [(int(line), "time does not increase", "") for line in lines[~keep]]
    sensors = [values if values is None else values[keep] for values in (t_s, *map(joined, ("mag", "acc", "gyr")))]
    return SensorLog(str(path), *sensors, lines[keep], sorted(bad))


def _increasing(t_s):
    """Mask of the longest run of samples whose times increase: one wild time costs one sample, not all after it."""
    if np.all(np.diff(t_s) > 0):
        return np.ones(len(t_s), dtype=bool)
    ends, ends_at, before = [], [], np.full(len(t_s), -1)
    for i, t in enumerate(t_s.tolist()):
        place = bisect.bisect_left(ends, t)
        if ends[place:place + 1] == [t]:
            continue  # of equal times the first stays
        before[i] = ends_at[place - 1] if place else -1
        ends[place:place + 1], ends_at[place:place + 1] = [t], [i]
    keep = np.zeros(len(t_s), dtype=bool)
    i = ends_at[-1]
    while i >= 0:
        keep[i] = True
        i = before[i]
    return keep


def _rename(table, names):
    for ours, theirs in names.items():
        if theirs not in table.names:
            raise LogFileError(f"{table.path}: no column {theirs!r} to take as {ours}; the header has: "
                               f"{', '.join(table.names)}")
        quantity, _, unit = ours.partition("_")
        if quantity not in UNITS or unit.rpartition("_")[2] not in UNITS[quantity]:
            units = "; ".join(f"{q} in {', '.join(u)}" for q, u in UNITS.items())
            raise LogFileError(f"column name {ours!r} is not known; accepted are mag, acc, gyr with _x, _y, _z and a "
                               f"unit, or t with a unit: {units}")
        table.names[table.names.index(theirs)] = ours


def _find(table, quantity):
    """The columns of a quantity and the factor of their unit; None where there are none."""
    for unit, factor in UNITS[quantity].items():
        columns = [f"{quantity}_{unit}"] if quantity == "t" else [f"{quantity}_{axis}_{unit}" for axis in "xyz"]
        there = [name for name in columns if name in table.names]
        if there and len(there) < len(columns):
            missing = next(name for name in columns if name not in there)
            raise LogFileError(f"{table.path}: column {missing} is missing beside {there[0]}")
        if there:
            return columns, factor
    return None
