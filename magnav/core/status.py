"""What the C core says of a call, in Python: statuses become exceptions, flags become a set of named bits."""

import enum

from ..errors import InputError, OutOfValidityError
from ._core import ffi, lib


def status_text(status):
    return ffi.string(lib.magnav_status_text(status)).decode()


# a status that a caller's value can cause, and the exception it becomes; any other is a fault of this package
EXCEPTION_OF = {
    lib.MAGNAV_E_NOT_FINITE: InputError,
    lib.MAGNAV_E_LATITUDE: InputError,
    lib.MAGNAV_E_LONGITUDE: InputError,
    lib.MAGNAV_E_HEIGHT: InputError,
    lib.MAGNAV_E_DATE: OutOfValidityError,
    lib.MAGNAV_E_MODEL: InputError,
    lib.MAGNAV_E_TIME: InputError,
    lib.MAGNAV_E_ACCELERATION: InputError,
    lib.MAGNAV_E_MAGNETIC: InputError,
    lib.MAGNAV_E_PARAMETER: InputError,
    lib.MAGNAV_E_AREA: InputError,
    lib.MAGNAV_E_NULL: RuntimeError,
    lib.MAGNAV_E_MEMORY: RuntimeError,
}

Flag = enum.IntFlag(
    "Flag", {ffi.string(lib.magnav_flag_name(bit)).decode(): 1 << bit for bit in range(lib.MAGNAV_FLAG_COUNT)})
Flag.__doc__ = "Warnings on a field or a heading; names, bits and texts are those of the C core."
Flag.__module__ = __name__


def flag_text(flag):
    """The one-line text of a single flag."""
    return ffi.string(lib.magnav_flag_text(int(flag).bit_length() - 1)).decode()


def flags_in(bits):
    """The flags set in an integer or in any element of an array of integers, in bit order."""
    import numpy as np

    every = int(np.bitwise_or.reduce(np.asarray(bits, dtype=np.uint32).ravel(), initial=0))
    return [flag for flag in Flag if every & flag]
