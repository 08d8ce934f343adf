"""Arguments that say where, when and by which model; shared by every subcommand."""

import datetime as dt

from ..caution import CAUTION
from ..errors import InputError


def add_subparser(commands, name, run, summary, **keywords):
    """A subcommand with the caution at the end of its help."""
    parser = commands.add_parser(name, help=summary.replace("%", "%%"), description=summary, epilog=CAUTION, **keywords)
    parser.set_defaults(run=run)
    return parser


def add_place(parser):
    group = parser.add_argument_group("where and when")
    group.add_argument("--lat", type=float, metavar="DEG", help="geodetic latitude (WGS84), north positive")
    group.add_argument("--lon", type=float, metavar="DEG", help="longitude, east positive")
    group.add_argument("--height-m", type=float, default=0.0, metavar="M", help="height above the ellipsoid (0)")
    group.add_argument("--date", metavar="DATE", help="2025-07-02, 2025-07-02T12:00Z or 2025.5 (today, UTC)")
    group.add_argument("--model", default="auto", metavar="NAME",
                       help="WMM2025, WMM2020, WMM2015v2, IGRF-14, gufm1, a coefficient file, or auto: the one made "
                            "for the date (auto)")
    group.add_argument("--extrapolate", action="store_true",
                       help="compute outside the model's validity, flagged, with a growing uncertainty")


def date_of(options):
    """The date given, or today's."""
    return options.date if options.date is not None else dt.datetime.now(dt.UTC).date()


def require_place(options):
    for name in ("lat", "lon"):
        if getattr(options, name) is None:
            raise InputError(f"--{name} is needed: the place in degrees")


def field_of(options):
    """The field at the place and date of the arguments."""
    from ..field.catalogue import load_model

    require_place(options)
    return load_model(options.model).field(options.lat, options.lon, options.height_m, when=date_of(options),
                                           extrapolate=options.extrapolate)


def add_grid(parser):
    parser.add_argument("--crs", metavar="CRS",
                        help="projected coordinate system whose grid north to use: EPSG:32633, a PROJ string, WKT, "
                             "utm (the zone of the place) or ups")
