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


STEPS = (ImageStep, SourceStep)


def add_parser(commands):
    parser = add_subparser(commands, "firmware", None, "What goes onto a target: a model's image, as bytes or as C.")
    # each step sets its own run
    steps = parser.add_subparsers(dest="step", metavar="STEP", required=True)
    for step in STEPS:
        step.add(add_subparser(steps, step.NAME, step.run, step.SUMMARY))


def _add_model(parser):
    parser.add_argument("--model", default="WMM2025", metavar="NAME",
                        help="a model's name or coefficient file (WMM2025)")
    parser.add_argument("--first-year", type=float, metavar="YEAR", help="leave out what serves only before")
    parser.add_argument("--last-year", type=float, metavar="YEAR", help="leave out what serves only after")


def _image(options):
    from ..field.catalogue import load_model
    from ..firmware.image import make_image

    model = load_model(options.model)
    if not hasattr(model, "coefficients"):
        raise InputError("auto is a choice among models, not one: name the model that goes onto the target")
    return make_image(model, options.first_year, options.last_year)


def _difference(image):
    if image.largest_difference_nT == 0:
        return "the same bits as on the desk"
    return f"coefficients within {image.largest_difference_nT:.1e} nT of the desk's"
