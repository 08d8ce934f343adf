"""Coefficient files: the published layouts read right, and every hostile file ends in an error that names its line."""

import importlib.resources
import os

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.interpolate import BSpline, PPoly, make_interp_spline

import magnav
from magnav.errors import CoefficientFileError
from magnav.field.coefficients import term_count, term_index
from magnav.field.readers import read_coefficients

MODELS = importlib.resources.files("magnav.field") / "models"
COF = (MODELS / "WMM2025.COF").read_text(encoding="ascii")
SHC = (MODELS / "IGRF14.shc").read_text(encoding="ascii")
SPLINES = (MODELS / "gufm1.csv").read_text(encoding="ascii")


def igrf_table():
    """The IGRF table with the figures of the SHC file, in the layout that IAGA Division V-MOD publishes."""
    rows = [line.split() for line in SHC.splitlines() if not line.startswith("#")]
    years, rows = rows[1], rows[2:]
    out = ["# IGRF in its table layout", "c/s deg ord " + " ".join(["IGRF"] * (len(years) - 1)) + " SV",
           "g/h n m " + " ".join(f"{float(y):.1f}" for y in years[:-1]) + " 2025-30"]
    for n, m, *values in rows:
        rate = (float(values[-1]) - float(values[-2])) / 5
        out.append(f"{'g' if int(m) >= 0 else 'h'} {n} {abs(int(m))} {' '.join(values[:-1])} {rate:.1f}")
    return "\n".join(out) + "\n"


TABLE = igrf_table()


def read(tmp_path, text):
    path = tmp_path / "model"
    path.write_bytes(text if isinstance(text, bytes) else text.encode())
    return read_coefficients(path)


def at(model, year):
    """The coefficients at a date: the definition in `Coefficients`, by scipy's own piecewise polynomial."""
    return PPoly(np.swapaxes(model.polynomials[:, ::-1], 0, 1), model.breaks_yr)(year)


# ---- the layouts ----

def test_cof_is_what_is_printed(tmp_path):
    model = read(tmp_path, COF)
    assert (model.name, model.degree, model.epoch_yr) == ("WMM-2025", 12, 2025.0)
    assert (model.valid_from_yr, model.valid_until_yr) == (2025.0, 2030.0)
    # first and last rows as NOAA NCEI and BGS publish them
    assert model.polynomials[0, :, term_index(1, 0)].tolist() == [-29351.8, 12.0]
    assert model.polynomials[0, :, term_index(12, 12)].tolist() == [-0.7, -0.1]
    assert model.polynomials[0, :, term_index(1, 1, sine=True)].tolist() == [4545.4, -21.5]


def test_cof_of_another_degree(tmp_path):
    rows = COF.splitlines()
    kept = [rows[0], *(r for r in rows[1:-2] if int(r.split()[0]) <= 7), *rows[-2:]]
    model = read(tmp_path, "\n".join(kept) + "\n")
    assert model.degree == 7
    assert np.array_equal(model.polynomials[..., :term_count(7)], read(tmp_path, COF).polynomials[..., :term_count(7)])


@pytest.mark.parametrize(("order", "steps"), [(1, 1), (1, 3), (2, 1), (2, 2), (3, 2), (3, 4), (4, 3), (4, 5)])
def test_shc_spline_orders_against_scipy(tmp_path, order, steps):
    """B-splines in time by scipy (general reference library), sampled as the layout says, read back."""
    rng = np.random.default_rng(order * 10 + steps)
    breaks = np.arange(2000.0, 2021.0, 2.5)
    years = np.linspace(breaks[0], breaks[-1], (len(breaks) - 1) * steps + 1)
    knots = np.concatenate([[breaks[0]] * (order - 1), breaks, [breaks[-1]] * (order - 1)])
    spline = BSpline(knots, rng.normal(size=(len(knots) - order, term_count(3))) * 1000, order - 1)
    model = read(tmp_path, shc_text(years, spline(years), 1, 3, order, steps))
    when = rng.uniform(breaks[0], breaks[-1], 200)
    assert np.abs(at(model, when) - spline(when)).max() < 1e-9
    assert np.abs(at(model, years) - spline(years)).max() < 1e-9
    assert (model.valid_from_yr, model.valid_until_yr, model.degree) == (2000.0, 2020.0, 3)


def shc_text(years, values, low, high, order, steps):
    lines = ["# a model", f"{low} {high} {len(years)} {order} {steps}", " ".join(f"{y!r}" for y in years.tolist())]
    for n in range(low, high + 1):
        for m in range(n + 1):
            for sign in ((1, -1) if m else (1,)):
                column = values[:, term_index(n, m, sine=sign < 0)]
                lines.append(f"{n} {sign * m} " + " ".join(f"{v!r}" for v in column.tolist()))
    return "\n".join(lines) + "\n"


def test_shc_order_one_is_constant(tmp_path):
    values = np.random.default_rng(1).normal(size=(3, term_count(2)))
    one = read(tmp_path, shc_text(np.array([2010.0]), values[:1], 1, 2, 1, 1))
    assert one.polynomials.shape == (1, 1, 8) and one.valid_from_yr == -np.inf and one.valid_until_yr == np.inf
    steps = read(tmp_path, shc_text(np.array([2010.0, 2015.0, 2020.0]), values, 1, 2, 1, 1))
    # both ends belong to the validity: the last year has its own values
    assert np.array_equal(at(steps, [2012.0, 2015.0, 2017.0, 2020.0]), values[[0, 1, 1, 2]])
    assert (steps.valid_from_yr, steps.valid_until_yr) == (2010.0, 2020.0)
    text = shc_text(np.array([2010.0, 2015.0, 2020.0]), values, 1, 2, 1, 2)
    with pytest.raises(CoefficientFileError, match=r"line 2: .* no polynomial of order 1"):
        read(tmp_path, text)


@pytest.mark.parametrize("more", [" 1900.0", " 1900.0 2030.0", " 1900.0 2030.0 1"])
def test_shc_header_may_go_on_after_its_five_integers(tmp_path, more):
    lines = SHC.splitlines()
    lines[2] += more
    assert np.array_equal(read(tmp_path, "\n".join(lines) + "\n").polynomials, read(tmp_path, SHC).polynomials)


def test_igrf_table_up_to_the_turn_of_the_century(tmp_path):
    """1995-00 ends in 2000; before 2000 degree 10 is all there is (Alken et al. 2021)."""
    rows = [line.split() for line in TABLE.splitlines()[2:]]
    until = rows[0].index("1995.0") + 1
    out = ["g/h n m " + " ".join(rows[0][3:until]) + " 1995-00",
           *(" ".join([*row[:until], "1.5"]) for row in rows[1:] if int(row[1]) <= 10)]
    model = read(tmp_path, "\n".join(out) + "\n")
    assert (model.degree, model.valid_until_yr) == (10, 2000.0)
    assert model.polynomials[-1, 1].tolist() == [1.5] * term_count(10)
    with pytest.raises(CoefficientFileError, match="line 1: the secular variation 1990-99 does not start"):
        read(tmp_path, "\n".join(out).replace("1995-00", "1990-99") + "\n")


def test_shc_of_the_crust_starts_above_degree_one_and_is_evaluated(tmp_path):
    values = np.random.default_rng(2).normal(size=(1, term_count(20)))
    path = tmp_path / "crust.shc"
    path.write_text(shc_text(np.array([2020.0]), values, 16, 20, 1, 1), encoding="ascii")
    model = magnav.load_model(path)
    assert np.all(model.coefficients.polynomials[0, 0, :term_count(15)] == 0)
    assert model.field(10, 20, when=1700).total_nT == model.field(10, 20, when=2200).total_nT > 0


def test_igrf_table_and_shc_are_the_same_model(tmp_path):
    table, shc = read(tmp_path, TABLE), read(tmp_path, SHC)
    assert np.array_equal(table.breaks_yr, shc.breaks_yr)
    assert np.allclose(table.polynomials, shc.polynomials, rtol=0, atol=1e-10)
    assert (table.valid_from_yr, table.valid_until_yr, table.degree) == (1900.0, 2030.0, 13)


def test_igrf_is_linear_between_epochs_against_scipy(tmp_path):
    """IGRF-13 paper (Alken et al., Earth Planets Space 73:49, 2021): linear in time between five-year epochs."""
    rows = [line.split() for line in SHC.splitlines() if not line.startswith("#")]
    years = np.array(rows[1], dtype=float)
    model = read(tmp_path, SHC)
    when = np.linspace(1900, 2030, 391)
    for n, m, *values in rows[2::17]:
        spline = make_interp_spline(years, np.array(values, dtype=float), k=1)
        mine = at(model, when)[:, term_index(int(n), abs(int(m)), sine=int(m) < 0)]
        assert np.allclose(mine, spline(when), rtol=0, atol=1e-9)


def test_spline_table_against_scipy(tmp_path):
    """gufm1's B-splines (Jackson, Jonkers and Walker 2000) by scipy's BSpline."""
    rows = [line.split(",") for line in SPLINES.splitlines() if not line.startswith("#")][1:]
    table = np.array(rows, dtype=float)
    knots = 1582.5 + 2.5 * np.arange(len(table) + 4)
    spline = BSpline(knots, table[:, 1:], 3)
    model = read(tmp_path, SPLINES)
    when = np.random.default_rng(5).uniform(1590, 1990, 400)
    assert np.abs(at(model, when) - spline(when)).max() < 1e-9
    rate = PPoly(np.swapaxes(model.polynomials[:, ::-1], 0, 1), model.breaks_yr).derivative()(when)
    assert np.abs(rate - spline.derivative()(when)).max() < 1e-9
    # published overlap figures: g(1,0) at 1990.0 and 1900.0
    assert at(model, 1990.0)[0] == pytest.approx(-29770.2, abs=0.05)
    assert at(model, 1900.0)[0] == pytest.approx(-31492.5, abs=0.05)
    assert (model.valid_from_yr, model.valid_until_yr, model.degree) == (1590.0, 1990.0, 14)


# ---- hostile files: (layout, what is done to its lines, the line that must be named, words of the message) ----

def swap(lines, i, j):
    lines[i], lines[j] = lines[j], lines[i]


def put(line, column, text):
    words = line.split("," if line.count(",") > 3 else None)
    words[column] = text
    return ("," if line.count(",") > 3 else " ").join(words)


def edit(i, column, text):
    return lambda lines: lines.__setitem__(i, put(lines[i], column, text))


HOSTILE = [
    # a cut file, at a row and at the end
    ("COF", lambda ls: ls.__delitem__(slice(40, None)), 40, "cut off"),
    ("SHC", lambda ls: ls.__delitem__(slice(40, None)), 40, "cut off"),
    ("TABLE", lambda ls: ls.__delitem__(slice(40, None)), 40, "cut off"),
    ("SPLINES", lambda ls: ls.__delitem__(slice(40, None)), 40, "rows are missing"),
    ("SPLINES", lambda ls: ls.__delitem__(slice(6, None)), 6, "cut off"),
    ("COF", lambda ls: ls.pop(), 92, "two closing lines"),
    ("COF", edit(91, 0, "9" * 20), 92, "48 nines, this one 20"),
    ("COF", edit(92, 0, "9" * 20), 93, "two closing lines"),
    # a table cut where a degree is complete
    ("TABLE", lambda ls: ls.__delitem__(slice(3 + 168, None)), 171, "ends at degree 12, IGRF of 2025 at 13"),
    ("SPLINES", lambda ls: ls.pop(), 166, "rows are missing"),
    ("SPLINES", lambda ls: ls.pop(4), 166, "rows are missing"),
    # a row missing, twice, out of order
    *((kind, lambda ls: ls.pop(20), 21, "missing, twice or out of order") for kind in ("COF", "SHC", "TABLE")),
    *((kind, lambda ls: ls.insert(20, ls[20]), 22, "missing, twice or out of order")
      for kind in ("COF", "SHC", "TABLE")),
    *((kind, lambda ls: swap(ls, 20, 21), 21, "missing, twice or out of order") for kind in ("COF", "SHC", "TABLE")),
    ("SPLINES", lambda ls: ls.pop(20), 21, "missing, twice or out of order"),
    ("SPLINES", lambda ls: ls.insert(20, ls[20]), 22, "missing, twice or out of order"),
    ("SPLINES", lambda ls: swap(ls, 20, 21), 21, "missing, twice or out of order"),
    # values that are no numbers, or absurd
    *((kind, edit(20, -1, text), 21, words) for kind in ("COF", "SHC", "TABLE", "SPLINES")
      for text, words in (("NaN", "not a number"), ("inf", "not a number"), ("1e400", "beyond"),
                          ("1_0", "not a number"), ("0x10", "not a number"), ("12.3.4", "not a number"),
                          ("9999999", "beyond"), ("-1000001", "beyond"),
                          ("1" * 400, "beyond"), ("--5", "not a number"))),
    # degrees and orders
    ("COF", edit(20, 0, "10000"), 21, "degree 10000 is outside 1 to 800"),
    ("SHC", edit(20, 0, "10000"), 21, "degree 10000 is outside 1 to 800"),
    ("TABLE", edit(20, 1, "10000"), 21, "degree 10000 is outside 1 to 800"),
    ("SHC", edit(2, 1, "10000"), 3, "degree 10000 is outside 1 to 800"),
    ("COF", edit(20, 0, "-5"), 21, "degree -5 is outside"), ("COF", edit(20, 1, "9"), 21, "order 9 is outside"),
    ("SHC", edit(20, 1, "-9"), 21, "order -9 is outside"), ("TABLE", edit(20, 2, "-2"), 21, "order -2 is outside"),
    ("COF", edit(20, 0, "5.0"), 21, "not a whole number"), ("SHC", edit(20, 1, "x"), 21, "not a whole number"),
    ("COF", edit(1, 3, "7.0"), 2, "h of order 0"), ("COF", edit(1, 5, "7.0"), 2, "h of order 0"),
    ("TABLE", lambda ls: ls.insert(4, "h 1 0" + ls[3][5:]), 5, "row h 1 0 where g 1 1 is due"),
    ("SPLINES", lambda ls: ls.__setitem__(3, ls[3].replace("g1_1", "h1_0")), 4, "h1_0 where g1_1 is due"),
    # columns
    ("COF", edit(20, 0, "5 5"), 21, "7 columns"), ("SHC", edit(20, 3, "5 5"), 21, "30 columns"),
    ("TABLE", edit(20, 3, "5 5"), 21, "31 columns"), ("SPLINES", edit(20, 3, "5,5"), 21, "226 columns"),
    ("COF", edit(20, -1, ""), 21, "5 columns"), ("SHC", edit(20, -1, ""), 21, "28 columns"),
    ("TABLE", edit(20, -1, ""), 21, "29 columns"), ("SPLINES", edit(20, -1, ""), 21, "'' is not a number"),
    ("SPLINES", lambda ls: ls.__setitem__(20, ls[20].rpartition(",")[0]), 21, "224 columns"),
    # headers
    ("COF", edit(0, 0, "20255.0"), 1, "not a year"), ("SHC", edit(2, 0, "0"), 3, "not a range"),
    ("SHC", edit(2, 0, "14"), 3, "not a range"), ("SHC", edit(2, 2, "26"), 4, "27 years where the header says 26"),
    ("SHC", edit(2, 3, "7"), 3, "spline order 7 is outside 1 to 4"),
    ("SHC", edit(2, 3, "3"), 3, "needs at least 2 steps"), ("SHC", edit(2, 4, "4"), 3, "do not make whole intervals"),
    ("SHC", edit(2, 4, "13"), 3, "no polynomial of order 2"), ("SHC", edit(2, 4, "0"), 3, "at least 1"),
    ("SHC", edit(3, 5, "1900.0"), 4, "do not increase"), ("SHC", edit(3, 1, "1900.00001"), 4, "do not increase"),
    ("SHC", edit(2, 1, "800"), 3, "more than 16,777,216 values"),
    ("SHC", lambda ls: ls.__delitem__(slice(3, None)), 3, "years is missing"),
    ("TABLE", edit(2, -1, "SV"), 3, "secular variation"), ("TABLE", edit(2, 5, "1900.0"), 3, "do not increase"),
    ("TABLE", lambda ls: ls.pop(2), 3, "is missing"),
    ("SPLINES", lambda ls: ls.__setitem__(3, ls[3].replace("g2_1", "g2_7")), 4, "g2_7 where g2_1 is due"),
    ("SPLINES", lambda ls: ls.pop(2), 1, "valid YEAR to YEAR"),
    # rubbish after the end
    ("COF", lambda ls: ls.append("1 0 1.0 0.0 1.0 0.0"), 94, "two closing lines"),
    ("SHC", lambda ls: ls.append(ls[-1]), 200, "after the last one"),
    ("COF", lambda ls: ls.append(""), 94, "two closing lines"),
    ("TABLE", lambda ls: ls.append("rubbish"), 199, "1 columns"),
    ("TABLE", lambda ls: ls.append(ls[3]), 199, "row g 1 0 where g 14 0 is due"),
    ("SPLINES", lambda ls: ls.append("rubbish"), 168, "1 columns"),
    ("COF", lambda ls: ls.insert(0, "rubbish"), 1, "no header of a known layout"),
]


@pytest.mark.parametrize(("kind", "harm", "line", "words"), HOSTILE)
def test_hostile_lines(tmp_path, kind, harm, line, words):
    lines = {"COF": COF, "SHC": SHC, "TABLE": TABLE, "SPLINES": SPLINES}[kind].splitlines()
    harm(lines)
    with pytest.raises(CoefficientFileError, match=words) as caught:
        read(tmp_path, "\n".join(lines) + "\n")
    assert caught.value.line == line
    assert f"line {line}: " in str(caught.value)


@pytest.mark.parametrize("text", [COF, SHC, TABLE, SPLINES], ids=["COF", "SHC", "TABLE", "SPLINES"])
def test_wrong_line_ends_and_binary(tmp_path, text):
    lines = text.split("\n")
    cases = [(text.replace("\n", "\r\n"), 1, "CR"), (text.replace("\n", "\r"), 1, "CR|longer"),
             ("\n".join(lines[:9]) + "\r\n" + "\n".join(lines[9:]), 9, "convert the file"),
             (text[:-1], len(lines) - 1, "cut off"),
             ("\n".join(lines[:9]) + "\n\0\0\0\n" + "\n".join(lines[9:]), 10, "binary"),
             ("\n".join(lines[:9]) + "\n1\x1c2\n" + "\n".join(lines[9:]), 10, "binary"),
             (b"# \xff\n" + text.encode(), 1, "UTF-8"),
             ("\n".join(lines[:9]) + "\n５ 5\n" + "\n".join(lines[9:]), 10, "not ASCII"), ("", None, "empty"),
             (os.urandom(5000).replace(b"\n", b"") + b"\0\n", 1, ".")]
    for harmed, line, words in cases:
        with pytest.raises(CoefficientFileError, match=words) as caught:
            read(tmp_path, harmed)
        assert line is None or caught.value.line == line


def test_two_gigabytes_of_digits(tmp_path):
    """Refused at the first line too long, or where the size passes the limit: neither time nor memory is spent."""
    path = tmp_path / "digits"
    with open(path, "wb") as file:
        file.write(b"1" * 100_000)
        file.truncate(2 * 2**30)
    with pytest.raises(CoefficientFileError, match="longer than") as caught:
        read_coefficients(path)
    assert caught.value.line == 1
    with open(path, "wb") as file:
        for _ in range(70):
            file.write((b"1" * 1023 + b"\n") * 1024)
    with pytest.raises(CoefficientFileError, match="larger than 64 MiB") as caught:
        read_coefficients(path)
    assert caught.value.line == 65_537


def test_millions_of_short_lines(tmp_path):
    """Inside the limit of bytes, but each line costs far more memory than its own byte."""
    for line in (b"\n", b"#\n"):
        (tmp_path / "lines").write_bytes(line * 3_000_000)
        with pytest.raises(CoefficientFileError, match="more than 1,000,000 lines") as caught:
            read_coefficients(tmp_path / "lines")
        assert caught.value.line == 1_000_001


def test_what_is_no_file(tmp_path):
    os.mkfifo(tmp_path / "pipe")  # that nobody writes into: opening must not wait
    for path in (tmp_path, "/dev/zero", tmp_path / "nowhere", tmp_path / "pipe"):
        with pytest.raises(CoefficientFileError):
            read_coefficients(path)


@settings(max_examples=300, deadline=None)
@given(st.sampled_from([COF, SHC, TABLE, SPLINES]), st.data())
def test_fuzzed_files_are_models_or_errors_with_a_line(tmp_path_factory, text, data):
    """Random bytes changed, cut, repeated: nothing but a model or a CoefficientFileError may come of it."""
    raw = bytearray(text.encode())
    for _ in range(data.draw(st.integers(1, 4))):
        place = data.draw(st.integers(0, len(raw) - 1))
        kind = data.draw(st.sampled_from(["change", "cut", "repeat", "remove"]))
        if kind == "change":
            raw[place] = data.draw(st.integers(0, 255))
        elif kind == "cut":
            raw = raw[:place + 1]
        elif kind == "repeat":
            raw[place:place] = raw[place:place + data.draw(st.integers(1, 200))]
        else:
            del raw[place:place + data.draw(st.integers(1, 200))]
        if not raw:
            raw = bytearray(b"\n")
    path = tmp_path_factory.mktemp("fuzz") / "model"
    path.write_bytes(bytes(raw))
    try:
        model = read_coefficients(path)
    except CoefficientFileError as error:
        assert error.line is not None or not raw.strip()
    else:
        assert np.all(np.isfinite(model.polynomials)) and model.polynomials.shape[2] == term_count(model.degree)
