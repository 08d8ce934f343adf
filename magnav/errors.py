"""The exceptions magnav raises; each derives from the built-in class a caller would expect."""


class MagnavError(Exception):
    """Base of every exception raised on purpose by magnav."""


class InputError(MagnavError, ValueError):
    """A value handed in is wrong: the message says which, where, and what is accepted."""


class CoefficientFileError(MagnavError, ValueError):
    """A coefficient file cannot be trusted. `path` and `line` (1-based, or None) say where."""

    def __init__(self, path, line, message):
        self.path, self.line = str(path), line
        where = f"{path}, line {line}" if line is not None else f"{path}"
        super().__init__(f"{where}: {message}")


class OutOfValidityError(InputError):
    """A date lies outside the model's validity and `extrapolate` was not asked for."""


class LogFileError(MagnavError, ValueError):
    """A sensor log or a table of points cannot be read at all (single bad rows are reported, not raised)."""


class CalibrationRefused(MagnavError, ValueError):
    """A calibration whose verdict is `refused` was applied or asked for."""
