"""`magnav field`: the field at a place and date, or at every row of a table."""

import numpy as np

from ..uncertainty.interval import half_width_95_deg
from .place import add_place, add_subparser, field_of
from .say import east_west, place_text, print_caution, print_json, print_warnings

RESULTS = ("north_nT", "east_nT", "down_nT", "horizontal_nT", "total_nT", "declination_deg", "inclination_deg",
           "declination_deg_per_yr", "sigma_declination_deg", "model", "flags")


def add_parser(commands):
    parser = add_subparser(commands, "field", run, "The Earth's main field at a place and a date, with its yearly "
                           "change, its uncertainty and warnings.")
    add_place(parser)
    parser.add_argument("--json", action="store_true", help="keys are the attribute names of magnav.Field")
    parser.add_argument("--input", metavar="CSV", help="a table with lat_deg, lon_deg and, if there, height_m and date")
    parser.add_argument("--output", metavar="CSV", help="where the table goes (standard output)")


def run(options):
    if options.input is not None:
        from .bulk import run_bulk

        return run_bulk(options, (), _results(options), RESULTS)
    field = field_of(options)
    if options.json:
        print_json(field.as_dict())
        return 0
    print(f"Main field at {place_text(field)}\n")
    print(f"{'':14}{'value':>14}   {'+/- (95 %)':>12}   {'change a year':>16}")
    for label, name, unit, digits in (("declination", "declination_deg", "deg", 2),
                                      ("inclination", "inclination_deg", "deg", 2),
                                      ("horizontal", "horizontal_nT", "nT", 1), ("north", "north_nT", "nT", 1),
                                      ("east", "east_nT", "nT", 1), ("down", "down_nT", "nT", 1),
                                      ("total", "total_nT", "nT", 1)):
        value, rate = getattr(field, name), getattr(field, f"{name}_per_yr")
        wide = half_width_95_deg(getattr(field.sigma, name))
        print(f"{label:14}{value:14.{digits}f}   {wide:12.{digits}f}   {rate:+16.{digits}f} {unit}")
    print(f"\nMagnetic north lies {east_west(field.declination_deg)} of true north.")
    if np.isfinite(field.grid_variation_deg):
        print(f"Grid variation (polar stereographic grid): {east_west(field.grid_variation_deg)}")
    print_warnings(field.warnings)
    print_caution()
    return 0


def _results(options):
    from ..core import Flag, status_text
    from ..field.catalogue import load_model

    model = load_model(options.model)

    def results_of(columns, year):
        dated = np.where(np.isnan(year), 2000.0, year)
        field = model.field(columns["lat_deg"], columns["lon_deg"], columns["height_m"], when=dated,
                            extrapolate=options.extrapolate, bad="nan")
        results = {name: getattr(field, name) for name in RESULTS[:8]}
        results["sigma_declination_deg"] = field.sigma.declination_deg
        results["model"] = [str(name) for name in np.broadcast_to(field.model, year.shape)]
        results["flags"] = [" ".join(f.name for f in Flag if flags & f) for flags in field.flags.tolist()]
        return results, [status_text(s) if s else None for s in field.status.tolist()]

    return results_of
