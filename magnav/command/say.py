"""How the command speaks: text lines, JSON, a progress bar, the list of bad rows."""

import csv
import json
import sys

import numpy as np

from ..caution import CAUTION


def print_json(value):
    json.dump(value, sys.stdout, indent=2, allow_nan=False)
    print()


def plain(value):
    """A value for JSON: numpy to Python, not-a-number to None."""
    if isinstance(value, dict):
        return {key: plain(v) for key, v in value.items()}
    if isinstance(value, (np.ndarray, np.generic)):
        return plain(value.tolist())
    if isinstance(value, (list, tuple)):
        return [plain(v) for v in value]
    return None if isinstance(value, float) and not np.isfinite(value) else value


def place_text(field):
    lat, lon = field.lat_deg, field.lon_deg
    return (f"{abs(lat):.4f} {'N' if lat >= 0 else 'S'}, {abs(lon):.4f} {'E' if lon >= 0 else 'W'}, "
            f"{field.height_m:g} m, date {field.year:.4f}, model {field.model}")


def east_west(angle_deg, digits=2):
    return f"{abs(angle_deg):.{digits}f} deg {'E' if angle_deg >= 0 else 'W'}"


def print_warnings(lines):
    if lines:
        print("\nWarnings")
        for line in lines:
            print(f"  ! {line}")


def print_caution():
    print(f"\n{CAUTION}")


class Progress:
    """A bar on stderr for long work; silent where stderr is no terminal."""

    def __init__(self, what):
        self._what, self._shown, self._live = what, -1, sys.stderr.isatty()

    def __call__(self, fraction):
        percent = int(100 * fraction)
        if self._live and percent != self._shown:
            self._shown = percent
            print(f"\r{self._what} [{'=' * (percent // 4):<25}] {percent:3d} %", end="", file=sys.stderr, flush=True)

    def end(self):
        if self._live and self._shown >= 0:
            print(file=sys.stderr)


def side_file_of(path):
    """Where the bad rows of a file go: beside the output, else beside the input."""
    return f"{path}.bad.csv"


def write_bad_rows(bad, path):
    """List the bad rows (line, reason, text) in a side file and say so on stderr; nothing where there are none."""
    if not bad:
        return
    line, reason, _ = bad[0]
    said = f"{len(bad)} bad row(s), the first in line {line}: {reason}"
    try:
        with open(path, "w", encoding="utf-8", newline="") as file:
            writer = csv.writer(file, lineterminator="\n")
            writer.writerow(["line", "reason", "row"])
            writer.writerows(bad)
        print(f"{said}; all are listed in {path}", file=sys.stderr)
    except OSError as error:
        # beside a log that may only be read: none may be lost for that
        print(f"{said}; {path} cannot be written ({error.strerror}), so all of them here:", file=sys.stderr)
        for line, reason, _ in bad:
            print(f"  line {line}: {reason}", file=sys.stderr)
