"""`magnav calibrate`: hard and soft iron from a log, with a verdict."""

from ..errors import InputError
from . import exits
from .place import add_place, add_subparser, field_of
from .say import Progress, place_text, print_caution, print_warnings, side_file_of, write_bad_rows


def add_log(parser):
    parser.add_argument("log", metavar="LOG", help="CSV with mag_x_uT mag_y_uT mag_z_uT and, if there, t_s, acc_x_mps2 "
                        "..., gyr_x_radps ...; other units by their names (mag_x_nT, acc_x_g, gyr_x_degps, t_ms)")
    parser.add_argument("--column", action="append", default=[], metavar="OURS=THEIRS",
                        help="a column named otherwise in the file, e.g. mag_x_nT=Bx; may be repeated")
    parser.add_argument("--body", choices=("FRD", "FLU"), default="FRD",
                        help="axes of the sensor: forward right down, or forward left up (FRD)")
    parser.add_argument("--acceleration", choices=("specific-force", "gravity"), default="specific-force",
                        help="what the accelerometer shows at rest: up (specific force) or down (specific-force)")


def read_log_of(options):
    """The log of the arguments."""
    from ..logs import read_log

    names = {}
    for pair in options.column:
        ours, equals, theirs = pair.partition("=")
        if not equals:
            raise InputError(f"--column {pair}: accepted is OURS=THEIRS, e.g. mag_x_nT=Bx")
        names[ours] = theirs
    progress = Progress("reading")
    log = read_log(options.log, names, progress)
    progress.end()
    return log


def calibrate_log(log, field, options):
    """Calibrate from a log that `read_log_of` read."""
    from ..calibration import calibrate
    from ..frames import to_specific_force

    acc = None if log.acc_mps2 is None else to_specific_force(log.acc_mps2, options.acceleration)
    return calibrate(log.mag_uT, acc, log.gyr_radps, log.t_s, field, body=options.body, date=field and field.year)


def add_parser(commands):
    parser = add_subparser(commands, "calibrate", run, "Hard and soft iron of a magnetometer from a log in which it "
                           "was turned through all orientations; refused, with the reason, where the log cannot tell.")
    add_log(parser)
    add_place(parser)
    parser.add_argument("--json", action="store_true", help="print the calibration file's content")
    parser.add_argument("--output", metavar="JSON", help="where the calibration goes")
    parser.add_argument("--picture", metavar="PNG", help="before and after on the sphere (needs magnav[pictures])")


def run(options):
    log = read_log_of(options)
    write_bad_rows(log.bad, side_file_of(options.output or options.log))
    field = field_of(options) if options.lat is not None or options.lon is not None else None
    calibration = calibrate_log(log, field, options)
    if options.output and calibration.verdict != "refused":
        calibration.save(options.output)
    if options.picture:
        from ..pictures import calibration_picture

        calibration_picture(log.mag_uT, calibration, options.picture)
    if options.json:
        print(calibration.to_json())
    else:
        describe(calibration, field, log)
        if options.output and calibration.verdict != "refused":
            print(f"\nWritten to {options.output}")
        print_caution()
    if calibration.verdict == "refused":
        return exits.REFUSED
    return exits.BAD_ROWS if log.bad else exits.DONE


def describe(calibration, field, log):
    """The calibration as a person reads it."""
    print(f"Calibration from {len(log)} samples of {log.path}: {calibration.verdict.upper()}")
    if field is not None:
        print(f"  scaled to the model's total field, {field.total_nT / 1000:.2f} uT, at {place_text(field)}")
    else:
        print("  no place given: scale is relative, headings are not affected by it")
    for reason in calibration.reasons:
        print(f"  - {reason}")
    if calibration.verdict != "refused":
        sigma = calibration.covariance.diagonal()[:3] ** 0.5
        print(f"  hard iron  {_row(calibration.hard_iron_uT)} uT   +/- {_row(1.96 * sigma)} (95 %), {calibration.body}")
        for label, row in zip(("soft iron  ", "           ", "           "), calibration.soft_iron, strict=True):
            print(f"  {label}{_row(row, 4)}")
        print(f"  noise {calibration.noise_uT:.2f} uT an axis; sphere covered {100 * calibration.coverage:.0f} %; "
              f"heading error from the calibration up to {calibration.predicted_heading_sigma_deg:.2f} deg (1 sigma)")
    print_warnings(calibration.warnings)


def _row(values, digits=2):
    return " ".join(f"{v:9.{digits}f}" for v in values)


