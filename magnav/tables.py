"""Tables of numbers in CSV files: columns found by name, units in the names, bad rows kept apart from good ones."""

import csv
import dataclasses
import itertools
import os

import numpy as np

from .errors import LogFileError

ROWS_AT_A_TIME = 20_000
LONGEST_LINE = 1_000_000


@dataclasses.dataclass
class Rows:
    """A run of rows: `columns` by name (float64, or text where asked), the file's line of each, and what was wrong."""

    columns: dict
    lines: np.ndarray
    bad: list  # (line, reason, the row's text)

    def __len__(self):
        return len(self.lines)


class Table:
    """A CSV file with a header row: comma, semicolon or tab separated; lines that start with # are comments.

    names: the header's columns, in order. Iterate with `rows`. Raises LogFileError where the file is no such table.
    """

    def __init__(self, path):
        self.path = str(path)
        try:
            self._file = open(path, encoding="utf-8-sig", newline="", errors="strict")  # noqa: SIM115
        except OSError as error:
            raise LogFileError(f"{path}: cannot be opened ({error.strerror})") from None
        self._line = 0
        try:
            self._read_header()
        except LogFileError:
            self._file.close()
            raise

    def _read_header(self):
        header = next(self._text_lines(), None)
        if header is None:
            raise LogFileError(f"{self.path}: empty: a header row with the columns' names is needed")
        self._delimiter = max(",;\t", key=header.count)
        self.names = [name.strip() for name in self._split(header)]
        twice = {name for name in self.names if self.names.count(name) > 1}
        if twice:
            raise LogFileError(f"{self.path}, line {self._line}: column {sorted(twice)[0]!r} is there twice")

    def __enter__(self):
        return self

    def __exit__(self, *_):
        self._file.close()

    def fraction_read(self):
        """How much of the file has been read, 0 to 1, for a progress bar."""
        size = os.fstat(self._file.fileno()).st_size
        return min(1.0, self._file.buffer.tell() / size) if size else 1.0

    def rows(self, wanted, optional=(), text=(), pass_through=False):
        """Yield `Rows` of the columns `wanted` and, where the file has them, `optional`.

        Columns named in `text` stay text, the others must be finite numbers. With `pass_through` every other column
        comes along as text. A row with too few or too many cells, or with a cell that is no number, goes to `bad`.
        """
        missing = [name for name in wanted if name not in self.names]
        if missing:
            raise LogFileError(f"{self.path}: no column {missing[0]!r}; the header has: {', '.join(self.names)}")
        chosen = [*wanted, *(name for name in optional if name in self.names)]
        if pass_through:
            chosen += [name for name in self.names if name not in chosen]
            text = {*text, *(set(self.names) - {*wanted, *optional})}
        places = [self.names.index(name) for name in chosen]
        lines = self._text_lines()
        while chunk := list(itertools.islice(((self._line, line) for line in lines), ROWS_AT_A_TIME)):
            yield self._parse(chunk, chosen, places, text)

    def _parse(self, chunk, chosen, places, text):
        kept, numbers, bad = [], [], []
        for number, line in chunk:
            cells = self._split(line)
            try:
                if len(cells) != len(self.names):
                    raise ValueError(f"{len(cells)} cells where the header has {len(self.names)}")
                kept.append([cells[place].strip() if name in text else _number(cells[place], name)
                             for name, place in zip(chosen, places, strict=True)])
                numbers.append(number)
            except ValueError as error:
                bad.append((number, str(error), line))
        columns = dict(zip(chosen, zip(*kept, strict=True), strict=True)) if kept else {name: () for name in chosen}
        return Rows({name: list(values) if name in text else np.array(values, dtype=np.float64)
                     for name, values in columns.items()}, np.array(numbers, dtype=np.int64), bad)

    def _split(self, line):
        return next(csv.reader([line], delimiter=self._delimiter), [])

    def _text_lines(self):
        while True:
            try:
                line = self._file.readline(LONGEST_LINE)
            except UnicodeDecodeError:
                raise LogFileError(f"{self.path}, after line {self._line}: not UTF-8 text") from None
            if not line:
                return
            self._line += 1
            if len(line) >= LONGEST_LINE or "\0" in line:
                raise LogFileError(f"{self.path}, line {self._line}: not a line of a table")
            line = line.rstrip("\r\n")
            if line.strip() and not line.startswith("#"):
                yield line


def _number(cell, name):
    try:
        value = float(cell)
    except ValueError:
        raise ValueError(f"column {name}: {cell.strip()!r} is not a number" if cell.strip()
                         else f"column {name} is empty") from None
    if not np.isfinite(value) or "_" in cell:
        raise ValueError(f"column {name}: {cell.strip()!r} is not a finite number")
    return value
