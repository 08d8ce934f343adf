"""`magnav bearing`: a bearing from one north to another."""

import numpy as np

from ..bearings.convert import NORTHS, convert_bearing
from ..errors import InputError
from .place import add_grid, add_place, add_subparser, field_of
from .say import east_west, place_text, plain, print_caution, print_json, print_warnings

RESULTS = ("magnetic_deg", "true_deg", "grid_deg", "sigma_deg", "declination_deg", "convergence_deg")


def add_parser(commands):
    parser = add_subparser(commands, "bearing", run, "A bearing turned from magnetic, true or grid north to another, "
                           "with its uncertainty.")
    parser.add_argument("bearing", nargs="?", type=float, metavar="DEG", help="clockwise from the north of --from")
    parser.add_argument("--from", dest="from_north", choices=NORTHS, default="magnetic", help="(magnetic)")
    parser.add_argument("--to", dest="to_north", choices=NORTHS, default="true", help="(true)")
    parser.add_argument("--sigma-deg", type=float, default=0.0, metavar="DEG",
                        help="standard uncertainty of the bearing itself (0)")
    add_grid(parser)
    add_place(parser)
    parser.add_argument("--json", action="store_true", help="keys are the attribute names of magnav.Bearing")
    parser.add_argument("--input", metavar="CSV",
                        help="a table with bearing_deg and, where not given here, lat_deg, lon_deg, height_m, date")
    parser.add_argument("--output", metavar="CSV", help="where the table goes (standard output)")


def run(options):
    if options.input is not None:
        from .bulk import run_bulk

        return run_bulk(options, ("bearing_deg",), _results(options), RESULTS)
    if options.bearing is None:
        raise InputError("a bearing in degrees is needed, or a table with --input")
    field = field_of(options)
    bearing = convert_bearing(options.bearing, options.from_north, options.to_north, field=field, crs=options.crs,
                              sigma_deg=options.sigma_deg)
    if options.json:
        print_json(plain(vars(bearing)) | {"from_north": options.from_north, "to_north": options.to_north,
                                           "field": field.as_dict()})
        return 0
    print(f"At {place_text(field)}\n")
    print(f"  {options.from_north + ' bearing':18}{options.bearing:9.2f} deg")
    print(f"  {options.to_north + ' bearing':18}{bearing.bearing_deg:9.2f} deg   +/- {1.96 * bearing.sigma_deg:.2f} "
          f"(95 %): {_interval(bearing)}")
    parts = ", ".join(f"{name} {part:.2f}" for name, part in bearing.contribution_deg.items())
    print(f"  standard uncertainty {bearing.sigma_deg:.2f} deg: {parts}\n")
    print(f"  declination {east_west(field.declination_deg)}, changing "
          f"{field.declination_deg_per_yr:+.2f} deg a year")
    if bearing.grid:
        print(f"  grid convergence {east_west(bearing.convergence_deg)} ({bearing.grid})")
    print_warnings(field.warnings)
    print_caution()
    return 0


def _interval(bearing):
    if not np.isfinite(bearing.low_95_deg):
        return "no direction can be given"
    return f"{bearing.low_95_deg:.2f} to {bearing.high_95_deg:.2f}"


def _results(options):
    from ..core import status_text
    from ..field.catalogue import load_model

    model = load_model(options.model)

    def results_of(columns, year):
        dated = np.where(np.isnan(year), 2000.0, year)
        field = model.field(columns["lat_deg"], columns["lon_deg"], columns["height_m"], when=dated,
                            extrapolate=options.extrapolate, bad="nan")
        bearing = convert_bearing(columns["bearing_deg"], options.from_north, options.to_north, field=field,
                                  crs=options.crs, sigma_deg=options.sigma_deg, bad="nan")
        reasons = [status_text(s) if s else None for s in field.status.tolist()]
        for i in np.flatnonzero((field.status == 0) & np.isnan(bearing.bearing_deg)):
            reasons[i] = ("bearing_deg outside -360 to 360" if abs(columns["bearing_deg"][i]) > 360
                          else "no direction here: the coordinate system or the declination is not defined")
        return {name: np.broadcast_to(getattr(bearing, name), year.shape) for name in RESULTS}, reasons

    return results_of
