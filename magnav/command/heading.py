"""`magnav heading`: from a raw log to headings from magnetic, true and grid north with their uncertainty."""

import csv

import numpy as np

from . import exits
from .calibrate import add_log, calibrate_log, describe, read_log_of
from .place import add_grid, add_place, add_subparser, field_of
from .say import east_west, place_text, plain, print_caution, print_json, print_warnings, side_file_of, write_bad_rows

COLUMNS = ("line", "t_s", "magnetic_deg", "true_deg", "grid_deg", "sigma_magnetic_deg", "sigma_deg", "low_95_deg",
           "high_95_deg", "sensor_deg", "calibration_deg", "tilt_deg", "model_deg", "dominant", "roll_deg",
           "pitch_deg", "measured_total_uT", "measured_inclination_deg", "flags")
ROWS_SHOWN = 10


def add_parser(commands):
    parser = add_subparser(commands, "heading", run, "The heading of every sample of a log from magnetic, true and "
                           "grid north, its standard uncertainty and 95 % interval, what dominates it, and warnings.")
    add_log(parser)
    add_place(parser)
    add_grid(parser)
    parser.add_argument("--calibration", default="auto", metavar="JSON",
                        help="a calibration file, none, or auto: from this log, where it can tell (auto)")
    parser.add_argument("--mag-noise-ut", type=float, metavar="UT",
                        help="noise of the magnetometer, one axis, one sample (the calibration's)")
    parser.add_argument("--hard-iron-sigma-ut", type=float, metavar="UT",
                        help="what to allow for an unknown iron where there is no calibration (20)")
    parser.add_argument("--json", action="store_true", help="everything, samples included, under documented keys")
    parser.add_argument("--output", metavar="CSV", help="where the headings of all samples go")


def run(options):
    from ..calibration import Calibration
    from ..heading import compute_heading

    field = field_of(options)
    log = read_log_of(options)
    found = None
    if options.calibration == "auto":
        found = calibrate_log(log, field, options)
    elif options.calibration != "none":
        found = Calibration.load(options.calibration)
    refused = options.calibration == "auto" and found.verdict == "refused"
    # with the gyroscope alone and no times there is nothing to integrate over
    gyr = log.gyr_radps if log.t_s is not None else None
    unknown = {} if options.hard_iron_sigma_ut is None else {"hard_iron_sigma_uT": options.hard_iron_sigma_ut}
    headings = compute_heading(
        log.mag_uT, log.acc_mps2, gyr, log.t_s, field=field, calibration=None if refused else found, body=options.body,
        acceleration=options.acceleration, crs=options.crs, mag_noise_uT=options.mag_noise_ut, **unknown)
    bad = _bad_samples(headings, log)
    bad = sorted(log.bad + bad)
    write_bad_rows(bad, side_file_of(options.output or options.log))
    if options.output:
        _write_csv(headings, log, options.output)
    if options.json:
        _print_json(field, found, headings, log, bad)
    else:
        _describe(field, found, headings, log, refused)
        if options.output:
            print(f"\nAll {int(np.sum(headings.status == 0))} headings are in {options.output}")
        print_caution()
    return exits.BAD_ROWS if bad else exits.DONE


def _bad_samples(headings, log):
    from ..core import status_text

    return [(int(log.lines[i]), status_text(headings.status[i]), "") for i in np.flatnonzero(headings.status)]


def table_of(headings, lines):
    """The columns of a log's headings by name, as the CSV and the JSON have them."""
    from ..core import Flag

    columns = {name: getattr(headings, name) for name in COLUMNS if hasattr(headings, name)}
    columns |= {f"{name}_deg": part for name, part in headings.contribution_deg.items()}
    columns["line"] = lines
    columns["t_s"] = np.full(len(lines), np.nan) if headings.t_s is None else headings.t_s
    columns["flags"] = np.array([" ".join(f.name for f in Flag if flags & f) for flags in headings.flags.tolist()])
    return {name: columns[name] for name in COLUMNS}


def _write_csv(headings, log, path):
    columns = table_of(headings, log.lines)
    good = np.flatnonzero(headings.status == 0)
    with open(path, "w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(COLUMNS)
        cells = [[_cell(v) for v in columns[name][good].tolist()] for name in COLUMNS]
        writer.writerows(zip(*cells, strict=True))


def _cell(value):
    if isinstance(value, float):
        return "" if value != value else f"{value:.4f}"
    return value


def _print_json(field, calibration, headings, log, bad):
    import json

    columns = {name: plain(values) for name, values in table_of(headings, log.lines).items()}
    good = np.flatnonzero(headings.status == 0)
    print_json({
        "field": field.as_dict(), "grid": headings.grid, "declination_deg": headings.declination_deg,
        "convergence_deg": headings.convergence_deg if headings.grid else None,
        "calibration": None if calibration is None else json.loads(calibration.to_json()),
        "warnings": headings.warnings,
        "bad_rows": [{"line": line, "reason": reason} for line, reason, _ in bad],
        "samples": [{name: columns[name][i] for name in COLUMNS} for i in good],
    })


def _describe(field, calibration, headings, log, refused):
    print(f"Headings from {log.path} at {place_text(field)}")
    print(f"  declination {east_west(field.declination_deg)}"
          + (f"; grid convergence {east_west(headings.convergence_deg)} ({headings.grid})" if headings.grid else ""))
    if calibration is not None:
        print()
        describe(calibration, field, log)
    if refused:
        print("  The readings are used as they are: the uncertainty allows for an unknown iron.")
    good = np.flatnonzero(headings.status == 0)
    if not good.size:
        return
    print(f"\n{'line':>7} {'t_s':>9} {'magnetic':>9} {'true':>7} {'grid':>7} {'sigma':>6}  {'true, 95 %':15}  dominant")
    for i in good[np.unique(np.linspace(0, good.size - 1, ROWS_SHOWN).astype(int))]:
        print(_row(headings, log, i))
    if good.size > ROWS_SHOWN:
        print(f"        ({ROWS_SHOWN} of {good.size} samples, evenly spaced)")
    sigma = headings.sigma_deg[good]
    print(f"\nStandard uncertainty: median {np.median(sigma):.2f} deg, from {sigma.min():.2f} to {sigma.max():.2f}")
    largest = np.sqrt(np.mean(np.square([headings.contribution_deg[n][good] for n in headings.contribution_deg]), 1))
    print("  root mean square parts: " + ", ".join(
        f"{name} {part:.2f}" for name, part in zip(headings.contribution_deg, largest, strict=True)) + " deg")
    _describe_flags(headings, good)


def _row(headings, log, i):
    def number(value, width, digits=1):
        return f"{value:{width}.{digits}f}" if np.isfinite(value) else f"{'-':>{width}}"

    interval = (f"{headings.low_95_deg[i]:.1f} to {headings.high_95_deg[i]:.1f}"
                if np.isfinite(headings.low_95_deg[i]) else "no heading")
    t = number(np.nan if log.t_s is None else log.t_s[i], 9, 2)
    return (f"{log.lines[i]:7d} {t} {number(headings.magnetic_deg[i], 9)} {number(headings.true_deg[i], 7)} "
            f"{number(headings.grid_deg[i], 7)} {number(headings.sigma_deg[i], 6)}  {interval:15}  "
            f"{headings.dominant[i]}")


def _describe_flags(headings, good):
    from ..core import flag_text, flags_in

    flags = headings.flags[good]
    lines = []
    for flag in flags_in(flags):
        count = int(np.sum((flags & flag) != 0))
        lines.append(f"{flag_text(flag)}" + (f" ({count} of {good.size} samples)" if count < good.size else ""))
    print_warnings(lines)
