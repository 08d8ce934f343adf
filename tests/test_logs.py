"""Sensor logs and tables: what is read, what is refused, what is reported row by row."""

import numpy as np
import pytest

from magnav.errors import LogFileError
from magnav.logs import read_log
from magnav.tables import Table


def write(tmp_path, text, name="log.csv", mode="w"):
    path = tmp_path / name
    if mode == "wb":
        path.write_bytes(text)
    else:
        path.write_text(text, encoding="utf-8")
    return path


def test_units_by_name(tmp_path):
    path = write(tmp_path, "t_ms,mag_x_nT,mag_y_nT,mag_z_nT,acc_x_g,acc_y_g,acc_z_g,"
                           "gyr_x_degps,gyr_y_degps,gyr_z_degps\n"
                           "500,20000,-1000,45000,0,0,-1,180,0,-90\n")
    log = read_log(path)
    assert log.t_s.tolist() == [0.5]
    assert np.allclose(log.mag_uT, [[20, -1, 45]])
    # standard gravity: ISO 80000-3
    assert np.allclose(log.acc_mps2, [[0, 0, -9.80665]])
    assert np.allclose(log.gyr_radps, [[np.pi, 0, -np.pi / 2]])


@pytest.mark.parametrize(("unit", "one_gauss"), [("G", 1.0), ("mG", 1000.0), ("uT", 100.0), ("mT", 0.1), ("T", 1e-4)])
def test_magnetic_units(tmp_path, unit, one_gauss):
    """1 gauss is 100 microtesla: SI Brochure (9th edition)."""
    path = write(tmp_path, f"mag_x_{unit},mag_y_{unit},mag_z_{unit}\n{one_gauss},0,0\n")
    assert read_log(path).mag_uT[0, 0] == pytest.approx(100.0)


@pytest.mark.parametrize("delimiter", [",", ";", "\t"])
def test_delimiters_comments_and_optional_columns(tmp_path, delimiter):
    text = "# a comment\nmag_x_uT,mag_y_uT,mag_z_uT,note\n1,2,3,\n\n# more\n4,5,6,x\n".replace(",", delimiter)
    log = read_log(write(tmp_path, text))
    assert log.mag_uT.tolist() == [[1, 2, 3], [4, 5, 6]]
    assert log.lines.tolist() == [3, 6]
    assert log.t_s is None and log.acc_mps2 is None and log.gyr_radps is None


def test_bad_rows_are_kept_apart_with_their_lines(tmp_path):
    path = write(tmp_path, "t_s,mag_x_uT,mag_y_uT,mag_z_uT\n0,1,2,3\n1,x,2,3\n2,1,2\n3,,2,3\n4,nan,2,3\n5,1e400,2,3\n"
                           "6,1_0,2,3\n7,7,8,9\n")
    log = read_log(path)
    assert log.mag_uT.tolist() == [[1, 2, 3], [7, 8, 9]]
    assert [(line, reason) for line, reason, _ in log.bad] == [
        (3, "column mag_x_uT: 'x' is not a number"), (4, "3 cells where the header has 4"),
        (5, "column mag_x_uT is empty"), (6, "column mag_x_uT: 'nan' is not a finite number"),
        (7, "column mag_x_uT: '1e400' is not a finite number"), (8, "column mag_x_uT: '1_0' is not a finite number")]


def test_columns_named_otherwise(tmp_path):
    path = write(tmp_path, "Bx,By,Bz\n100,200,300\n")
    log = read_log(path, {"mag_x_nT": "Bx", "mag_y_nT": "By", "mag_z_nT": "Bz"})
    assert np.allclose(log.mag_uT, [[0.1, 0.2, 0.3]])
    with pytest.raises(LogFileError, match="no column 'Q'"):
        read_log(path, {"mag_x_nT": "Q"})
    with pytest.raises(LogFileError, match="'mag_x_furlong' is not known"):
        read_log(path, {"mag_x_furlong": "Bx"})


@pytest.mark.parametrize(("text", "words"), [
    ("", "empty"), ("# only a comment\n", "empty"), ("t_s,a,b\n1,2,3\n", "no magnetometer"),
    ("mag_x_uT,mag_y_uT\n1,2\n", "mag_z_uT is missing"), ("mag_x_uT,mag_x_uT\n1,2\n", "there twice"),
    ("mag_x_uT,mag_y_uT,mag_z_uT\n", "no usable row"),
    ("mag_x_uT,mag_y_uT,mag_z_uT\na,b,c\n", "no usable row.*line 2")])
def test_a_file_that_is_no_log(tmp_path, text, words):
    with pytest.raises(LogFileError, match=words):
        read_log(write(tmp_path, text))


def test_binary_missing_and_endless_lines(tmp_path):
    with pytest.raises(LogFileError, match="not UTF-8"):
        read_log(write(tmp_path, b"\xff\xfe\x00\x01" * 100, mode="wb"))
    with pytest.raises(LogFileError, match="cannot be opened"):
        read_log(tmp_path / "nowhere.csv")
    with pytest.raises(LogFileError, match="not a line of a table"):
        read_log(write(tmp_path, "mag_x_uT,mag_y_uT,mag_z_uT\n" + "1" * 2_000_000))
    with pytest.raises(LogFileError, match="not a line of a table"):
        read_log(write(tmp_path, b"mag_x_uT,mag_y_uT,mag_z_uT\n1,2\x00,3\n", mode="wb"))


def test_times_that_do_not_increase_cost_as_few_samples_as_can_be(tmp_path):
    times = [0, 1, 2, 2, 3, 1e9, 4, 5, 3.5, 6]
    rows = "".join(f"{t},1,2,{i}\n" for i, t in enumerate(times))
    log = read_log(write(tmp_path, "t_s,mag_x_uT,mag_y_uT,mag_z_uT\n" + rows))
    assert log.t_s.tolist() == [0, 1, 2, 3, 4, 5, 6]
    assert [(line, reason) for line, reason, _ in log.bad][1:] == [
        (7, "time does not increase"), (10, "time does not increase")]
    assert log.bad[0][0] == 5 and len(log.lines) == len(log.mag_uT) == 7


def test_progress_reaches_the_end(tmp_path):
    seen = []
    rows = "".join(f"{i},2,3\n" for i in range(50_000))
    log = read_log(write(tmp_path, "mag_x_uT,mag_y_uT,mag_z_uT\n" + rows), progress=seen.append)
    assert len(log) == 50_000
    assert seen == sorted(seen) and seen[-1] == 1.0 and len(seen) == 3


def test_table_keeps_text_and_passes_other_columns_on(tmp_path):
    path = write(tmp_path, 'lat_deg,"name",date\n1.5,"a, b",2025-01-01\n')
    with Table(path) as table:
        (rows,) = table.rows(["lat_deg"], ["date", "height_m"], text=("date",), pass_through=True)
    assert rows.columns["lat_deg"].tolist() == [1.5]
    assert rows.columns["date"] == ["2025-01-01"] and rows.columns["name"] == ["a, b"]
    with Table(path) as table, pytest.raises(LogFileError, match="no column 'lon_deg'"):
        list(table.rows(["lon_deg"]))
