"""Holds what a target printed against the vectors: pass or fail for each output, with the worst point."""

import csv
import dataclasses
import re
import struct
import xml.etree.ElementTree as ET

import numpy as np

from ..errors import InputError, LogFileError
from .vectors import GROUPS, INTEGERS

# Above this horizontal field a declination is compared; below, the vector it comes from says all there is.
DECLINATION_FIELD_NT = 2000.0
NEEDS_HORIZONTAL = ("declination_deg", "declination_deg_per_yr", "grid_variation_deg")


@dataclasses.dataclass(frozen=True)
class Tolerance:
    """Largest difference accepted, by unit. The same bits where all are zero."""

    nT: float
    nT_per_yr: float
    deg: float
    deg_per_yr: float
    heading_deg: float
    uT: float

    def of(self, group, name):
        if name in INTEGERS:
            return 0.0
        if name.endswith("_nT_per_yr"):
            return self.nT_per_yr
        if name.endswith("_deg_per_yr"):
            return self.deg_per_yr
        if name.endswith("_nT"):
            return self.nT
        return self.uT if name.endswith("_uT") else self.heading_deg if group == "heading" else self.deg


CLASSES = {
    # the core's own sources in double, anywhere: bits
    "exact": Tolerance(0.0, 0.0, 0.0, 0.0, 0.0, 0.0),
    # another implementation in double: rounding alone, a millionth of what a compass can show
    "double": Tolerance(1e-6, 1e-6, 1e-7, 1e-7, 1e-7, 1e-9),
    # in float: the limits this project sets its own float build
    "float": Tolerance(0.1, 0.01, 0.002, 0.002, 0.01, 0.001),
}


@dataclasses.dataclass
class Finding:
    """One output of one group: how many were compared, the largest difference and where it was."""

    group: str
    output: str
    compared: int = 0
    missing: int = 0
    bad: int = 0
    worst: float = 0.0
    tolerance: float = 0.0
    worst_id: str = ""
    expected: float = 0.0
    got: float = 0.0
    inputs: dict = dataclasses.field(default_factory=dict)

    @property
    def passed(self):
        return self.bad == 0 and self.missing == 0 and self.compared > 0


@dataclasses.dataclass(frozen=True)
class Report:
    """`findings` for every output that the results have, `not_checked` the outputs they do not have, `faults` of the
    file itself (text)."""

    findings: list
    not_checked: list
    faults: list

    @property
    def passed(self):
        return bool(self.findings) and not self.faults and all(finding.passed for finding in self.findings)


def read_results(path):
    """({id: {output: value}}, columns there, faults) of what a target printed.

    Tables with a header row that starts with id, several one after another; lines that start with # are left out. A
    cell is a decimal, or the bits of a float or double as 0x and 8 or 16 digits. Raises LogFileError.
    """
    results, columns, faults, header = {}, set(), [], None
    try:
        with open(path, encoding="utf-8", errors="replace", newline="") as file:
            for number, line in enumerate(file, 1):
                cells = next(csv.reader([line.strip()]), [])
                if not cells or line.startswith("#"):
                    continue
                if cells[0].strip() == "id":
                    header = [cell.strip() for cell in cells]
                    columns |= set(header[1:])
                    continue
                if header is None:
                    raise LogFileError(f"{path}, line {number}: a header row that starts with id is needed")
                if len(cells) != len(header):
                    faults.append(f"line {number}: {len(cells)} cells where the header has {len(header)}")
                    continue
                if cells[0] in results and any(name in results[cells[0]] for name in header[1:]):
                    faults.append(f"line {number}: {cells[0]} is there twice")
                    continue
                row = results.setdefault(cells[0], {})
                for name, cell in zip(header[1:], cells[1:], strict=True):
                    value = _value(cell.strip())
                    if value is None:
                        faults.append(f"line {number}, column {name}: {cell.strip()[:30]!r} is no number")
                    else:
                        row[name] = value
    except OSError as error:
        raise LogFileError(f"{path}: cannot be opened ({error.strerror})") from None
    if not results:
        raise LogFileError(f"{path}: no results")
    return results, columns, faults


def _value(cell):
    bits = re.fullmatch(r"0[xX]([0-9a-fA-F]{8}|[0-9a-fA-F]{16})", cell)
    if bits:
        raw = bytes.fromhex(bits[1])
        return struct.unpack(">f" if len(raw) == 4 else ">d", raw)[0]
    try:
        return float(cell)
    except ValueError:
        return None


def check_results(vectors, results, columns, faults, tolerance):
    """Compare results with the rows of `read_csv`. Returns `Report`; ids that the vectors do not have are faults."""
    known = {row["id"] for rows in vectors.values() for row in rows}
    strangers = [name for name in results if name not in known]
    faults = faults + [f"{name} is no vector" for name in strangers[:20]]
    findings, not_checked = [], []
    for group, rows in vectors.items():
        inputs, outputs = GROUPS[group]
        for name in outputs:
            if name not in columns:
                not_checked.append(f"{group}: {name}")
                continue
            finding = Finding(group, name, tolerance=tolerance.of(group, name))
            for row in rows:
                _compare(finding, row, results.get(row["id"], {}).get(name), inputs, name)
            findings.append(finding)
    return Report(findings, not_checked, faults)


def _compare(finding, row, got, inputs, name):
    if got is None:
        finding.missing += 1
        return
    expected = row[name]
    if finding.tolerance > 0 and name in NEEDS_HORIZONTAL and row["horizontal_nT"] <= DECLINATION_FIELD_NT:
        return
    apart = abs(got - expected)
    if name.endswith("_deg") and finding.tolerance > 0:
        apart = abs((got - expected + 180.0) % 360.0 - 180.0)
    apart = np.inf if np.isnan(apart) else float(apart)
    finding.compared += 1
    finding.bad += apart > finding.tolerance
    if apart > finding.worst or finding.compared == 1:
        finding.worst, finding.worst_id, finding.expected, finding.got = apart, row["id"], expected, got
        finding.inputs = {key: row[key] for key in inputs}


def as_junit(report):
    """The report as JUnit XML text: a test case for each output, one for the file and one for what was not checked."""
    suite = ET.Element("testsuite", name="magnav conformance", tests=str(len(report.findings) + 1),
                       failures=str(sum(not f.passed for f in report.findings) + bool(report.faults)),
                       skipped=str(len(report.not_checked)))
    case = ET.SubElement(suite, "testcase", classname="file", name="readable")
    if report.faults:
        ET.SubElement(case, "failure", message=f"{len(report.faults)} faults").text = "\n".join(report.faults)
    for finding in report.findings:
        case = ET.SubElement(suite, "testcase", classname=finding.group, name=finding.output)
        if not finding.passed:
            ET.SubElement(case, "failure", message=f"{finding.bad} of {finding.compared} beyond {finding.tolerance:g}, "
                          f"{finding.missing} missing").text = worst_text(finding)
    for name in report.not_checked:
        case = ET.SubElement(suite, "testcase", classname=name.split(": ")[0], name=name.split(": ")[1])
        ET.SubElement(case, "skipped", message="the results have no such column")
    return ET.tostring(suite, encoding="unicode", xml_declaration=True)


def worst_text(finding):
    if not finding.compared:
        return f"nothing to compare, {finding.missing} missing"
    inputs = ", ".join(f"{name} {value!r}" for name, value in finding.inputs.items())
    return (f"worst {finding.worst:.3g} at {finding.worst_id}: expected {finding.expected!r}, got {finding.got!r} "
            f"({inputs})")


def tolerance_of(name, nT=None, deg=None):
    """A class by its name, or "custom" from limits for components and angles; rates and headings take the same."""
    if name == "custom":
        if nT is None or deg is None or not (nT >= 0 and deg >= 0):
            raise InputError("the class custom needs --tolerance-nT and --tolerance-deg, 0 or more")
        return Tolerance(nT, nT, deg, deg, deg, nT / 1000)
    return CLASSES[name]
