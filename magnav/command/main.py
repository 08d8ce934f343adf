"""Entry of the command `magnav`: finds the subcommand, turns exceptions into messages and exit codes."""

import argparse
import os
import sys

from .. import __version__
from ..caution import CAUTION
from ..errors import CalibrationRefused, CoefficientFileError, LogFileError, MagnavError
from . import exits


def build_parser():
    """The whole parser; each subcommand's module adds its own."""
    from . import bearing, calibrate, deviation, field, firmware, heading

    parser = argparse.ArgumentParser(
        prog="magnav", formatter_class=argparse.RawDescriptionHelpFormatter,
        description="Directions from true and grid north, with an honest uncertainty, from a magnetic sensor or a "
                    "compass bearing.", epilog=f"{exits.MEANING}\n{CAUTION}")
    parser.add_argument("--version", action="version", version=f"magnav {__version__}")
    commands = parser.add_subparsers(dest="command", metavar="COMMAND", required=True)
    for module in (field, calibrate, heading, bearing, deviation, firmware):
        module.add_parser(commands)
    return parser


def main(arguments=None):
    """Run the command; returns the exit code."""
    parser = build_parser()
    options = parser.parse_args(arguments)
    try:
        return options.run(options)
    except BrokenPipeError:
        # whoever read our output has gone; leave quietly, and keep Python from complaining at its own end
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return exits.DONE
    except MagnavError as error:
        print(f"magnav {options.command}: {error}", file=sys.stderr)
        if isinstance(error, CalibrationRefused):
            return exits.REFUSED
        return exits.FILE if isinstance(error, (LogFileError, CoefficientFileError)) else exits.ARGUMENTS
    except OSError as error:
        print(f"magnav {options.command}: {error.filename or 'file'}: {error.strerror}", file=sys.stderr)
        return exits.FILE
