"""Lines of a coefficient file, read so that nothing in the file can do harm: bounded, strict, each with its number."""

import os
import re

import numpy as np

from ...errors import CoefficientFileError

LARGEST_FILE = 64 * 2**20
LONGEST_LINE = 65_536
MOST_LINES = 1_000_000  # degree 800 takes 641,600; without it, 64 MiB of line ends fill gigabytes of memory
HIGHEST_DEGREE = 800
LARGEST_NT = 1e6
MOST_YEARS = 10_000  # the core takes no more pieces
SHORTEST_STEP_YR = 1e-4  # divided by: closer years would make rates that overflow

_NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d{1,4})?")
_INTEGER = re.compile(r"[+-]?\d{1,9}")
_BINARY = re.compile(rb"[\x00-\x08\x0b\x0c\x0e-\x1f\x7f]")


def without_waiting(path, flags):
    """An opener for `open`: a pipe is opened without waiting for its other end."""
    return os.open(path, flags | getattr(os, "O_NONBLOCK", 0))


class Lines:
    """An open text file as `rows`, a list of (line number, text): UTF-8, LF line ends, bounded in bytes and lines."""

    def __init__(self, path, file):
        self.path = path
        self.rows = []
        self._read(file)
        if not self.rows:
            self.fail(None, "empty")

    def fail(self, line, message):
        raise CoefficientFileError(self.path, line, message)

    def _read(self, file):
        size = 0
        while line := file.readline(LONGEST_LINE + 1):
            number = len(self.rows) + 1
            size += len(line)
            if len(line) > LONGEST_LINE:
                self.fail(number, f"longer than {LONGEST_LINE} characters: no published layout has such lines")
            if size > LARGEST_FILE:
                self.fail(number, f"the file is larger than {LARGEST_FILE // 2**20} MiB here: no coefficient file is")
            if number > MOST_LINES:
                self.fail(number, f"the file has more than {MOST_LINES:,} lines: no coefficient file has")
            if _BINARY.search(line):
                self.fail(number, "holds binary data, not text")
            if b"\r" in line:
                self.fail(number, "ends in CR or CR LF; accepted are lines ending in LF alone: convert the file")
            if not line.endswith(b"\n"):
                self.fail(number, "the last line has no line end: the file is cut off")
            try:
                text = line[:-1].decode("utf-8")
            except UnicodeDecodeError:
                self.fail(number, "is not UTF-8 text")
            if not text.isascii() and not text.startswith("#"):
                self.fail(number, "holds characters that are not ASCII outside a comment")
            self.rows.append((number, text))

    def number(self, line, text, what):
        if not _NUMBER.fullmatch(text):
            self.fail(line, f"{what}: {text[:40]!r} is not a number")
        value = float(text)
        if not abs(value) <= LARGEST_NT:
            self.fail(line, f"{what}: {text[:40]} is beyond {LARGEST_NT:g}")
        return value

    def integer(self, line, text, what):
        if not _INTEGER.fullmatch(text):
            self.fail(line, f"{what}: {text[:40]!r} is not a whole number")
        return int(text)

    def years(self, line, texts):
        """The years of a line as an array; they must increase."""
        if len(texts) > MOST_YEARS:
            self.fail(line, f"{len(texts)} years: at most {MOST_YEARS} are read")
        years = np.array([self.number(line, text, "year") for text in texts])
        wrong = np.flatnonzero(np.diff(years) < SHORTEST_STEP_YR)
        if wrong.size:
            self.fail(line, f"years do not increase: {texts[wrong[0]][:40]} is followed by {texts[wrong[0] + 1][:40]}")
        return years

    def degree_order(self, line, n_text, m_text, lowest_m=0):
        n, m = self.integer(line, n_text, "degree n"), self.integer(line, m_text, "order m")
        if not 1 <= n <= HIGHEST_DEGREE:
            self.fail(line, f"degree {n} is outside 1 to {HIGHEST_DEGREE}")
        if not lowest_m * n <= m <= n:
            self.fail(line, f"order {m} is outside {lowest_m * n} to {n}, its degree")
        return n, m
