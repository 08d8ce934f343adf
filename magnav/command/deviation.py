"""`magnav deviation`: a compass module's deviation curve and card from readings against references."""

import numpy as np

from ..errors import InputError, LogFileError
from . import exits
from .place import add_place, add_subparser, field_of
from .say import plain, print_caution, print_json, side_file_of, write_bad_rows

SENSES = {"cw": True, "clockwise": True, "ccw": False, "anticlockwise": False}


def add_parser(commands):
    parser = add_subparser(commands, "deviation", run, "The deviation curve of a compass module, its coefficients A to "
                           "E with their uncertainty, how it repeats, a deviation card, and pass or fail against "
                           "limits.")
    parser.add_argument("table", metavar="CSV", help="compass_deg (what the module says), reference_deg (turntable, "
                        "theodolite or pier marks) and, if there, sense (cw or ccw)")
    parser.add_argument("--reference", choices=("magnetic", "true"), default="magnetic",
                        help="north of the references; true needs place and date (magnetic)")
    parser.add_argument("--limit-deg", type=float, metavar="DEG", help="fail where the deviation exceeds this anywhere")
    parser.add_argument("--residual-limit-deg", type=float, metavar="DEG",
                        help="fail where the scatter about the curve (1 sigma) exceeds this")
    parser.add_argument("--hysteresis-limit-deg", type=float, metavar="DEG",
                        help="fail where clockwise and anticlockwise readings differ by more than this at any mark")
    parser.add_argument("--step-deg", type=float, default=15.0, metavar="DEG", help="step of the card (15)")
    parser.add_argument("--picture", metavar="PNG", help="the curve (needs magnav[pictures])")
    parser.add_argument("--json", action="store_true", help="documented keys instead of text")
    add_place(parser)


def run(options):
    from ..validation import compare_runs, fit_deviation

    compass, reference, sense, bad = _read(options.table)
    if options.reference == "true":
        reference = reference - field_of(options).declination_deg
    curve = fit_deviation(compass, reference)
    runs = None if sense is None else compare_runs(reference, compass, sense)
    checks = _checks(options, curve, runs)
    card = curve.card(options.step_deg)
    if options.picture:
        from ..pictures import deviation_picture

        deviation_picture(curve, compass, reference, options.picture)
    if options.json:
        print_json({"coefficients_deg": {name: value for name, (value, _) in curve.named.items()},
                    "coefficients_sigma_deg": {name: sigma for name, (_, sigma) in curve.named.items()},
                    "residual_sigma_deg": curve.sigma_deg, "readings": len(compass),
                    "runs": None if runs is None else plain(vars(runs)),
                    "card": [dict(zip(("magnetic_deg", "compass_deg", "deviation_deg"), row, strict=True))
                             for row in card.tolist()],
                    "checks": [{"check": c, "found": f, "limit": m, "passed": p} for c, f, m, p in checks],
                    "bad_rows": [{"line": line, "reason": reason} for line, reason, _ in bad]})
    else:
        _describe(options, curve, runs, checks, card, len(compass))
    write_bad_rows(bad, side_file_of(options.table))
    if not all(passed for *_, passed in checks):
        return exits.FAILED
    return exits.BAD_ROWS if bad else exits.DONE


def _read(path):
    from ..tables import Table

    columns, bad = {"compass_deg": [], "reference_deg": [], "sense": []}, []
    with Table(path) as table:
        sensed = "sense" in table.names
        for rows in table.rows(["compass_deg", "reference_deg"], ["sense"], text=("sense",)):
            bad += rows.bad
            for i, line in enumerate(rows.lines):
                word = rows.columns["sense"][i].strip().lower() if sensed else "cw"
                if word in SENSES:
                    columns["compass_deg"].append(rows.columns["compass_deg"][i])
                    columns["reference_deg"].append(rows.columns["reference_deg"][i])
                    columns["sense"].append(SENSES[word])
                else:
                    bad.append((int(line), f"column sense: {word!r}; accepted: {', '.join(SENSES)}", ""))
    if not columns["compass_deg"]:
        raise LogFileError(f"{path}: no usable row")
    arrays = {name: np.array(values) for name, values in columns.items()}
    return arrays["compass_deg"], arrays["reference_deg"], arrays["sense"] if sensed else None, sorted(bad)


def _checks(options, curve, runs):
    """(what, found, limit, passed) for each limit that was set."""
    around = np.arange(0.0, 360.0, 0.5)
    largest = float(np.max(np.abs(curve.deviation_deg(around)) + 1.96 * curve.deviation_sigma_deg(around)))
    out = []
    if options.limit_deg is not None:
        out.append(("largest deviation, its 95 % uncertainty included", largest, options.limit_deg))
    if options.residual_limit_deg is not None:
        out.append(("scatter about the curve", curve.sigma_deg, options.residual_limit_deg))
    if options.hysteresis_limit_deg is not None:
        if runs is None or np.isnan(runs.largest_hysteresis_deg):
            raise InputError("--hysteresis-limit-deg needs a column sense with both cw and ccw at the same marks")
        out.append(("largest hysteresis", abs(runs.largest_hysteresis_deg), options.hysteresis_limit_deg))
    return [(what, found, limit, found <= limit) for what, found, limit in out]


def _describe(options, curve, runs, checks, card, count):
    print(f"Deviation from {count} readings of {options.table}, references from {options.reference} north\n")
    for name, (value, sigma) in curve.named.items():
        print(f"  {name}  {value:+7.2f} deg   +/- {1.96 * sigma:.2f} (95 %)")
    print(f"\n  scatter about the curve {curve.sigma_deg:.2f} deg (1 sigma)")
    if runs is not None and np.isfinite(runs.hysteresis_deg):
        print(f"  clockwise minus anticlockwise {runs.hysteresis_deg:+.2f} deg on average, largest "
              f"{runs.largest_hysteresis_deg:+.2f} at {runs.largest_at_deg:.0f}")
    if runs is not None and np.isfinite(runs.repeatability_deg):
        print(f"  the same heading in the same sense repeats within {runs.repeatability_deg:.2f} deg (1 sigma)")
    print("\nDeviation card\n\n  magnetic   steer by compass   deviation")
    for magnetic, steer, deviation in card:
        print(f"  {magnetic:7.0f}    {steer:12.1f}       {abs(deviation):6.1f} {'E' if deviation >= 0 else 'W'}")
    if checks:
        print()
    for what, found, limit, passed in checks:
        print(f"  {'pass' if passed else 'FAIL'}  {what}: {found:.2f} deg, limit {limit:g}")
    print_caution()
