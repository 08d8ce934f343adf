"""`magnav firmware`: what goes onto a target. Each step is a small class of its own below, listed in STEPS."""

import pathlib
import re

from ..errors import InputError
from . import exits
from .place import add_subparser


class ImageStep:
    """A model as a binary image."""

    NAME = "image"
    SUMMARY = "A model as a compact binary image, for flash or the air; the core checks it in place and evaluates it."

    @staticmethod
    def add(parser):
        _add_model(parser)
        parser.add_argument("--output", required=True, metavar="FILE", help="where the image goes")

    @staticmethod
    def run(options):
        image = _image(options)
        pathlib.Path(options.output).write_bytes(image.content)
        print(f"{options.output}: {image.name}, {len(image.content)} bytes, {_difference(image)}")
        return exits.DONE


class SourceStep:
    """The same image as a C file."""

    NAME = "source"
    SUMMARY = "The image of a model as a C array; the file needs <stdint.h> alone."

    @staticmethod
    def add(parser):
        _add_model(parser)
        parser.add_argument("--name", metavar="NAME", help="name of the array (model_image, with the model's name)")
        parser.add_argument("--output", required=True, metavar="FILE", help="where the C file goes")

    @staticmethod
    def run(options):
        from ..firmware.image import c_source

        image = _image(options)
        name = options.name or re.sub(r"\W", "_", f"{image.name.lower()}_image")
        text = c_source(image, name)
        with open(options.output, "w", encoding="ascii", newline="\n") as file:
            file.write(text)
        print(f"{options.output}: array {name}, {len(image.content)} bytes, {_difference(image)}")
        return exits.DONE


class VectorsStep:
    """Golden inputs and outputs."""

    NAME = "vectors"
    SUMMARY = "Golden inputs and outputs from the desk, seeded: a table, and a C header for c_core/kit/self_test.c."

    @staticmethod
    def add(parser):
        _add_model(parser, years=False)
        parser.add_argument("--count", type=int, default=200, metavar="N", help="vectors a group (200)")
        parser.add_argument("--seed", type=int, default=1, metavar="N", help="(1)")
        parser.add_argument("--output", required=True, metavar="CSV", help="where the table goes")
        parser.add_argument("--c-header", metavar="FILE", help="where the C header goes: vectors.h for the harness")

    @staticmethod
    def run(options):
        from ..firmware.vectors import c_header, make_vectors, write_csv

        vectors = make_vectors(_model(options), options.count, options.seed)
        write_csv(vectors, options.output)
        if options.c_header:
            with open(options.c_header, "w", encoding="ascii", newline="\n") as file:
                file.write(c_header(vectors))
        counts = ", ".join(f"{len(rows)} {group}" for group, rows in vectors.rows.items())
        print(f"{options.output}: {counts} vectors of {vectors.model.name}, seed {options.seed}")
        return exits.DONE


class CheckStep:
    """What a target printed, against the vectors."""

    NAME = "check"
    SUMMARY = "Hold what a target, or any implementation, printed against the vectors: pass or fail, and the worst."

    @staticmethod
    def add(parser):
        parser.add_argument("results", metavar="CSV", help="what the target printed: id and outputs by our names")
        parser.add_argument("--vectors", required=True, metavar="CSV", help="the table that firmware vectors wrote")
        parser.add_argument("--class", dest="kind", default="exact", choices=("exact", "double", "float", "custom"),
                            help="how close is close enough (exact: the same bits)")
        parser.add_argument("--tolerance-nT", type=float, metavar="NT", help="for the class custom")
        parser.add_argument("--tolerance-deg", type=float, metavar="DEG", help="for the class custom")
        parser.add_argument("--json", metavar="FILE", help="the report as JSON")
        parser.add_argument("--junit", metavar="FILE", help="the report as JUnit XML")

    @staticmethod
    def run(options):
        from ..firmware import conformance
        from ..firmware.vectors import read_csv

        tolerance = conformance.tolerance_of(options.kind, options.tolerance_nT, options.tolerance_deg)
        report = conformance.check_results(read_csv(options.vectors), conformance.read_results(options.results),
                                           tolerance)
        _print_report(report, options.kind)
        if options.json:
            _write_json(options.json, options.kind, report)
        if options.junit:
            pathlib.Path(options.junit).write_text(conformance.as_junit(report), encoding="utf-8")
        return exits.DONE if report.passed else exits.FAILED


FAULTS_SHOWN = 20


def _print_report(report, kind):
    from ..firmware.conformance import worst_text

    for group, said in report.groups().items():
        print(f"{said}: {group}")
        for finding in report.findings:
            if finding.group == group:
                print(f"  {'pass' if finding.passed else 'FAIL'}  {finding.output:24} "
                      f"{finding.compared:6d} compared, worst {finding.worst:9.3g} of {finding.tolerance:g}"
                      + (f", {finding.missing} missing" if finding.missing else "")
                      + (f", {finding.left_out} left out: H too weak" if finding.left_out else ""))
                if not finding.passed:
                    print(f"        {worst_text(finding)}")
        for name in (name for where, name in report.not_checked if where == group):
            print(f"  not checked, no such column: {name}")
    if report.ignored:
        print(f"unknown columns, left out: {', '.join(map(repr, report.ignored[:FAULTS_SHOWN]))}")
    for fault in report.faults[:FAULTS_SHOWN]:
        print(f"FAIL: {fault}")
    if len(report.faults) > FAULTS_SHOWN:
        print(f"FAIL: {len(report.faults) - FAULTS_SHOWN} more faults; --json lists all")
    verdict = "conforms" if report.passed else "DOES NOT CONFORM"
    if report.passed and not report.complete:
        verdict += f" in what was checked; {len(report.not_checked)} outputs were not"
    print(f"{verdict} (class {kind})")


def _write_json(path, kind, report):
    import json

    from .say import plain

    findings = [plain(vars(finding)) | {"passed": finding.passed} for finding in report.findings]
    content = {"passed": report.passed, "complete": report.complete, "class": kind, "groups": report.groups(),
               "findings": findings, "faults": report.faults, "ignored_columns": report.ignored,
               "not_checked": [{"group": group, "output": name} for group, name in report.not_checked]}
    pathlib.Path(path).write_text(json.dumps(content, indent=2, allow_nan=False) + "\n", encoding="utf-8")


class PatchStep:
    """The field over a mission area, for parts too small for a model."""

    NAME = "patch"
    SUMMARY = "The field over a mission area as a small C table with a guaranteed bound on its error."

    @staticmethod
    def add(parser):
        _add_model(parser, years=False)
        for name, what in (("lat", "degrees"), ("lon", "degrees; beyond 180 to go across it"), ("height-m", "metres")):
            parser.add_argument(f"--{name}", nargs=2, type=float, required=True, metavar=("LOW", "HIGH"), help=what)
        parser.add_argument("--dates", nargs=2, required=True, metavar=("FIRST", "LAST"), help="2026-03-01 2026.9")
        parser.add_argument("--error-nT", type=float, default=1.0, metavar="NT", help="bound wanted (1)")
        parser.add_argument("--name", default="field_patch", metavar="NAME", help="name of the constant (field_patch)")
        parser.add_argument("--output", required=True, metavar="FILE", help="where the C file goes")

    @staticmethod
    def run(options):
        from ..firmware.patch import c_source, make_patch

        patch = make_patch(_model(options), options.lat, options.lon, options.height_m, options.dates, options.error_nT)
        text = c_source(patch, options.name)
        with open(options.output, "w", encoding="ascii", newline="\n") as file:
            file.write(text)
        north, east, down = patch.bound_nT
        print(f"{options.output}: degree {patch.degree}, {patch.coefficients.size} coefficients; error at most "
              f"{north:.2f} north, {east:.2f} east, {down:.2f} down nT, {patch.declination_bound_deg:.4f} deg of "
              "declination")
        return exits.DONE


STEPS = (ImageStep, SourceStep, PatchStep, VectorsStep, CheckStep)


def add_parser(commands):
    parser = add_subparser(commands, "firmware", None, "What goes onto a target: a model's image, as bytes or as C; "
                           "and the vectors that prove what the target computes.")
    # each step sets its own run
    steps = parser.add_subparsers(dest="step", metavar="STEP", required=True)
    for step in STEPS:
        step.add(add_subparser(steps, step.NAME, step.run, step.SUMMARY))


def _add_model(parser, years=True):
    parser.add_argument("--model", default="WMM2025", metavar="NAME",
                        help="a model's name or coefficient file (WMM2025)")
    if not years:
        return
    parser.add_argument("--first-year", type=float, metavar="YEAR", help="leave out what serves only before")
    parser.add_argument("--last-year", type=float, metavar="YEAR", help="leave out what serves only after")


def _model(options):
    from ..field.catalogue import load_model

    model = load_model(options.model)
    if not hasattr(model, "coefficients"):
        raise InputError("auto is a choice among models, not one: name the model that goes onto the target")
    return model


def _image(options):
    from ..firmware.image import make_image

    return make_image(_model(options), options.first_year, options.last_year)


def _difference(image):
    if image.largest_difference_nT == 0:
        return "the same bits as on the desk"
    return f"coefficients within {image.largest_difference_nT:.1e} nT of the desk's"
