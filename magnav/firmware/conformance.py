"""Holds what a target printed against the vectors: pass or fail for each output, with the worst point."""

import csv
import dataclasses
import math
import re
import struct
import xml.etree.ElementTree as ET

from ..errors import InputError, LogFileError
from .vectors import GROUPS, INTEGERS, ON_THE_CIRCLE, bits_hash, group_hash

# Above this horizontal field a declination is compared; below, the vector it comes from says all there is.
DECLINATION_FIELD_NT = 2000.0
NEEDS_HORIZONTAL = ("declination_deg", "declination_deg_per_yr", "grid_variation_deg")
OUTPUTS = frozenset(name for _, outputs in GROUPS.values() for name in outputs)
INPUTS = frozenset(name for inputs, _ in GROUPS.values() for name in inputs)
BITS = re.compile(r"0[xX]([0-9a-fA-F]{8}|[0-9a-fA-F]{16})")
SUMMARY = re.compile(r"# (\w+), (\d+), (\d+), ([0-9a-f]{16})")
# the self-test evaluates the fields a second time, from the image of the model
SAME_VECTORS = {"image": "field"}
HASH = "hash of all outputs"


@dataclasses.dataclass(frozen=True)
class Tolerance:
    """Largest difference accepted, by unit (`ratio`: a sine or cosine). `bits`: the same bits, nothing else."""

    nT: float
    nT_per_yr: float
    deg: float
    deg_per_yr: float
    heading_deg: float
    uT: float
    ratio: float
    bits: bool = False

    def of(self, group, name):
        if name in INTEGERS:
            return 0.0
        if name in ("sine", "cosine"):
            return self.ratio
        if name.endswith("_nT_per_yr"):
            return self.nT_per_yr
        if name.endswith("_deg_per_yr"):
            return self.deg_per_yr
        if name.endswith("_nT"):
            return self.nT
        return self.uT if name.endswith("_uT") else self.heading_deg if group == "heading" else self.deg


# the reason for each figure is in docs/conformance.md
CLASSES = {
    "exact": Tolerance(0.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0, bits=True),
    "double": Tolerance(1e-6, 1e-6, 1e-7, 1e-7, 1e-7, 1e-9, 1e-14),
    "float": Tolerance(0.1, 0.01, 0.002, 0.002, 0.01, 0.001, 2.5e-7),
}


@dataclasses.dataclass
class Finding:
    """One output of one group: how many were compared, the worst of them and where it was.

    `missing`: vectors without a value in the results; `left_out`: those whose horizontal field is too weak for a
    declination; `worst` is NaN where the value got is none.
    """

    group: str
    output: str
    compared: int = 0
    missing: int = 0
    left_out: int = 0
    bad: int = 0
    worst: float = 0.0
    tolerance: float = 0.0
    worst_id: str = ""
    expected: float | str = 0.0
    got: float | str = 0.0
    inputs: dict = dataclasses.field(default_factory=dict)

    @property
    def passed(self):
        return self.bad == 0 and self.missing == 0 and self.compared > 0


@dataclasses.dataclass(frozen=True)
class Results:
    """What a target printed: `values` {id: {output: number}}; `columns`, the outputs that a header names; `summaries`
    {group: (vectors, hash)}; `ignored` columns that are not known; `faults` of the file (text)."""

    values: dict
    columns: set
    summaries: dict
    ignored: list
    faults: list


@dataclasses.dataclass(frozen=True)
class Report:
    """`findings` for every output that the results have, `not_checked` (group, output) for those they do not have,
    `ignored` columns, `faults` of the file itself (text)."""

    findings: list
    not_checked: list
    ignored: list
    faults: list

    @property
    def passed(self):
        """Whether all that was there to be checked passed."""
        return bool(self.findings) and not self.faults and all(finding.passed for finding in self.findings)

    @property
    def complete(self):
        """Whether nothing was left unchecked."""
        return not self.not_checked

    def groups(self):
        """{group: "pass", "FAIL" or "not checked"}, every group."""
        said = dict.fromkeys(GROUPS, "not checked")
        for finding in self.findings:
            if not finding.passed:
                said[finding.group] = "FAIL"
            elif said.get(finding.group) != "FAIL":
                said[finding.group] = "pass"
        return said


def read_results(path):
    """`Results` from what a target printed.

    Tables with a header row that starts with id, several one after another. Of lines that start with # only the
    self-test's own are read, of columns only those named as outputs here. A cell is a decimal, or the bits of a float
    or double as 0x and 8 or 16 digits; an empty one is no value. Raises LogFileError.
    """
    results = Results({}, set(), {}, [], [])
    header = None
    try:
        with open(path, encoding="utf-8-sig", errors="replace", newline="") as file:
            for number, line in enumerate(file, 1):
                line = line.strip()
                if line.startswith("#"):
                    _summary(results, line, number)
                    continue
                try:
                    cells = [cell.strip() for cell in next(csv.reader([line]), [])]
                except csv.Error as error:
                    results.faults.append(f"line {number}: {error}")
                    continue
                if not any(cells):
                    continue
                if cells[0] == "id":
                    header = cells
                    _see_header(results, header, number)
                elif header is None:
                    raise LogFileError(f"{path}, line {number}: a header row that starts with id is needed")
                elif len(cells) != len(header):
                    results.faults.append(f"line {number}: {len(cells)} cells where the header has {len(header)}")
                else:
                    _see_row(results, header, cells, number)
    except OSError as error:
        raise LogFileError(f"{path}: cannot be opened ({error.strerror})") from None
    if not results.values and not results.summaries:
        raise LogFileError(f"{path}: no results")
    return results


def _summary(results, line, number):
    found = SUMMARY.fullmatch(line)
    if line.startswith("# refused: "):
        results.faults.append(f"line {number}: {line[2:]!r}")
    elif found and found[1] in results.summaries:
        results.faults.append(f"line {number}: the summary of {found[1]} is there twice")
    elif found:
        results.summaries[found[1]] = (int(found[2]), found[4])


def _see_header(results, header, number):
    twice = sorted({name for name in header if header.count(name) > 1})
    if twice:
        results.faults.append(f"line {number}: the header has {', '.join(map(repr, twice))} twice")
    results.columns.update(OUTPUTS.intersection(header))
    unknown = (name for name in dict.fromkeys(header[1:]) if name not in OUTPUTS | INPUTS | {"group"})
    results.ignored.extend(name for name in unknown if name not in results.ignored)


def _see_row(results, header, cells, number):
    row = results.values.setdefault(cells[0], {})
    there = [(name, cell) for name, cell in zip(header[1:], cells[1:], strict=True) if name in OUTPUTS and cell]
    if any(name in row for name, _ in there):
        results.faults.append(f"line {number}: {cells[0]!r} is there twice")
        return
    for name, cell in there:
        value = _value(cell)
        if value is None:
            results.faults.append(f"line {number}, column {name}: {cell[:30]!r} is no number")
        else:
            row[name] = value


def _value(cell):
    bits = BITS.fullmatch(cell)
    if bits:
        raw = bytes.fromhex(bits[1])
        return struct.unpack(">f" if len(raw) == 4 else ">d", raw)[0]
    try:
        # Python would read 1_000 too, and digits of other scripts
        return float(cell) if cell.isascii() and "_" not in cell else None
    except ValueError:
        return None


def check_results(vectors, results, tolerance):
    """Compare `Results` with the rows of `read_csv`. Returns `Report`; ids that the vectors do not have are faults."""
    known = {row["id"] for rows in vectors.values() for row in rows}
    faults = results.faults + [f"{name!r} is no vector" for name in results.values if name not in known]
    findings, not_checked = [], []
    for group, rows in vectors.items():
        inputs, outputs = GROUPS[group]
        there = any(row["id"] in results.values for row in rows)
        for name in outputs if rows else ():
            # a column promises a value for every vector; that of the statuses serves two groups
            if name not in results.columns or (name == "status" and not there):
                # the hash stands for every output of a group that was not printed row by row
                if there or not tolerance.bits or group not in results.summaries:
                    not_checked.append((group, name))
            else:
                finding = Finding(group, name, tolerance=tolerance.of(group, name))
                for row in rows:
                    _compare(finding, row, results.values.get(row["id"], {}).get(name), inputs, tolerance.bits)
                findings.append(finding)
    findings += _hashes(vectors, results, tolerance)
    return Report(findings, not_checked, results.ignored, faults + _total_fault(results.summaries))


def _compare(finding, row, got, inputs, bits):
    if got is None:
        finding.missing += 1
        return
    name, expected = finding.output, row[finding.output]
    if not bits and name in NEEDS_HORIZONTAL and row["horizontal_nT"] <= DECLINATION_FIELD_NT:
        finding.left_out += 1
        return
    apart = abs(got - expected)
    if name in ON_THE_CIRCLE and not bits and math.isfinite(apart):
        apart = abs((got - expected + 180.0) % 360.0 - 180.0)
    bad = not apart <= finding.tolerance
    if bits and name not in INTEGERS:
        bad = struct.pack(">d", got) != struct.pack(">d", expected)
    finding.compared += 1
    # a bad one before a good one, then the largest; NaN is larger than all
    rank = (bad, math.inf if math.isnan(apart) else apart)
    if finding.compared == 1 or rank > (finding.bad > 0, math.inf if math.isnan(finding.worst) else finding.worst):
        finding.worst, finding.worst_id, finding.expected, finding.got = apart, row["id"], expected, got
        finding.inputs = {key: row[key] for key in inputs}
    finding.bad += bad


def _hashes(vectors, results, tolerance):
    """In the class exact, the hash that the self-test printed for each group against that of the vectors."""
    findings = []
    for group, (count, got) in results.summaries.items() if tolerance.bits else ():
        rows = vectors.get(SAME_VECTORS.get(group, group))
        if rows:
            expected = f"{group_hash(SAME_VECTORS.get(group, group), rows):016x}"
            findings.append(Finding(group, HASH, compared=count, missing=max(0, len(rows) - count),
                                    bad=int(got != expected or count > len(rows)), expected=expected, got=got,
                                    worst=0.0 if got == expected else math.nan))
    return findings


def _total_fault(summaries):
    """A fault where the last line of the self-test does not fit those before it: something was lost on the way."""
    groups = {name: said for name, said in summaries.items() if name != "all"}
    if not groups:
        return []
    if "all" not in summaries:
        return ["the self-test's last line is missing: it did not come to its end"]
    total = bits_hash(b"".join(bytes.fromhex(hashed) for _, hashed in groups.values()))
    if summaries["all"] != (sum(count for count, _ in groups.values()), f"{total:016x}"):
        return ["the self-test's last line does not fit the lines of its groups"]
    return []


def as_junit(report):
    """The report as JUnit XML text: a test case for each output, one for the file, a skipped one for each output that
    was not checked."""
    failures = sum(not finding.passed for finding in report.findings) + bool(report.faults or not report.findings)
    suite = ET.Element("testsuite", name="magnav conformance", errors="0", failures=str(failures),
                       tests=str(1 + len(report.findings) + len(report.not_checked)),
                       skipped=str(len(report.not_checked)))
    case = ET.SubElement(suite, "testcase", classname="file", name="sound")
    if report.faults or not report.findings:
        ET.SubElement(case, "failure", message=f"{len(report.faults)} faults" if report.faults else "nothing checked"
                      ).text = "\n".join(report.faults)
    for finding in report.findings:
        case = ET.SubElement(suite, "testcase", classname=finding.group, name=finding.output)
        if not finding.passed:
            ET.SubElement(case, "failure", message=f"{finding.bad} of {finding.compared} beyond {finding.tolerance:g}, "
                          f"{finding.missing} missing").text = worst_text(finding)
    for group, name in report.not_checked:
        case = ET.SubElement(suite, "testcase", classname=group, name=name)
        ET.SubElement(case, "skipped", message="the results have no such column")
    return ET.tostring(suite, encoding="unicode", xml_declaration=True)


def worst_text(finding):
    if not finding.compared:
        return f"nothing to compare, {finding.missing} missing"
    if finding.output == HASH:
        return f"expected {finding.expected}, got {finding.got}: print the rows to see where"
    inputs = ", ".join(f"{name} {value!r}" for name, value in finding.inputs.items())
    return (f"worst {finding.worst:.3g} at {finding.worst_id}: expected {finding.expected!r}, got {finding.got!r} "
            f"({inputs})")


def tolerance_of(name, nT=None, deg=None):
    """A class by its name, or "custom" from limits for components (nT; rates the same, a reading's nT / 1000) and for
    angles (deg; rates and headings the same, a sine's in radians). Raises InputError."""
    if name != "custom":
        if nT is not None or deg is not None:
            raise InputError(f"--tolerance-nT and --tolerance-deg are for the class custom, not {name}")
        return CLASSES[name]
    if nT is None or deg is None or not (0 <= nT < math.inf and 0 <= deg < math.inf):
        raise InputError("the class custom needs --tolerance-nT and --tolerance-deg, finite and 0 or more")
    return Tolerance(nT, nT, deg, deg, deg, nT / 1000, math.radians(deg))
