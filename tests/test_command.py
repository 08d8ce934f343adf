"""The command: what it prints, its JSON keys, its tables, its exit codes."""

import csv
import json
import pathlib
import subprocess
import sys

import numpy as np
import pytest

import magnav
from magnav.caution import CAUTION
from magnav.command.main import main

DEMO_LOG = pathlib.Path(__file__).parents[1] / "calibration_demo" / "log.csv"
DEMO_PLACE = ["--lat", "46.62", "--lon", "12.91", "--height-m", "640", "--date", "2026-05-12"]
ELEMENTS = ("north_nT", "east_nT", "down_nT", "horizontal_nT", "total_nT", "declination_deg", "inclination_deg")


def run(capsys, *arguments):
    code = main([str(a) for a in arguments])
    out, err = capsys.readouterr()
    return code, out, err


def table_in(path):
    return list(csv.DictReader(path.read_text(encoding="utf-8").splitlines()))


def test_field_json_has_the_documented_keys(capsys):
    code, out, _ = run(capsys, "field", "--lat", 80, "--lon", 0, "--height-m", 0, "--date", "2025.0", "--json")
    answer = json.loads(out)
    assert code == 0
    for name in ELEMENTS:
        assert isinstance(answer[name], float) and isinstance(answer[f"{name}_per_yr"], float)
        assert answer["sigma"][name] > 0
    field = magnav.load_model("WMM2025").field(80, 0, 0, when=2025.0)
    assert answer["declination_deg"] == field.declination_deg
    assert answer["model"] == "WMM2025" and answer["flags"] == ["STEEP_DIP"]


def test_field_as_text(capsys):
    code, out, _ = run(capsys, "field", "--lat", -70, "--lon", 140, "--date", "2027-03-01")
    assert code == 0
    assert "blackout" in out or "caution" in out
    assert "WMM2025" in out and CAUTION in out and "Grid variation" in out


def test_field_table(capsys, tmp_path):
    """Published rows of the WMM2025 test values (NOAA NCEI and BGS, 2024) through a table, one bad row of each kind."""
    table = tmp_path / "points.csv"
    table.write_text("id,lat_deg,lon_deg,height_m,date\na,89,-121,28000,2025.0\nb,95,0,0,2025.0\nc,43,93,65000,2025.0\n"
                     "d,1,2,3,yesterday\ne,1,2,3,1500\nf,1,x,3,2025\ng,-33,109,51000,2025-01-01\n", encoding="utf-8")
    result = tmp_path / "fields.csv"
    code, _, err = run(capsys, "field", "--input", table, "--output", result)
    assert code == 5
    rows = table_in(result)
    assert [row["id"] for row in rows] == ["a", "c", "g"]
    assert [round(float(row["declination_deg"]), 2) for row in rows] == [-99.77, 0.5, -5.49]
    assert float(rows[0]["north_nT"]) == pytest.approx(-255.388723, abs=1e-3)
    assert rows[0]["flags"] == "BLACKOUT_ZONE STEEP_DIP"
    bad = table_in(tmp_path / "fields.csv.bad.csv")
    assert [row["line"] for row in bad] == ["3", "5", "6", "7"]
    assert "latitude outside" in bad[0]["reason"] and "cannot be read" in bad[1]["reason"]
    assert "outside the model's validity" in bad[2]["reason"] and "not a number" in bad[3]["reason"]
    assert "4 bad row(s), the first in line 3" in err


def test_table_to_standard_output_with_the_place_from_arguments(capsys, tmp_path):
    table = tmp_path / "bearings.csv"
    table.write_text("bearing_deg\n10\n20\n", encoding="utf-8")
    code, out, _ = run(capsys, "bearing", "--input", table, "--to", "grid", "--crs", "utm", "--lat", 47, "--lon", 8,
                       "--date", "2026-01-01")
    rows = list(csv.DictReader(out.splitlines()))
    field = magnav.load_model("WMM2025").field(47, 8, when="2026-01-01")
    expected = magnav.convert_bearing([10.0, 20.0], "magnetic", "grid", field=field, crs="utm")
    assert code == 0
    assert np.allclose([float(r["grid_deg"]) for r in rows], expected.grid_deg, atol=1e-6)


def test_bearing_table_bad_rows(capsys, tmp_path):
    table = tmp_path / "bearings.csv"
    table.write_text("bearing_deg,lat_deg,lon_deg\n10,47,8\n700,47,8\n20,88,8\n30,99,8\n", encoding="utf-8")
    code, out, _ = run(capsys, "bearing", "--input", table, "--to", "grid", "--crs", "utm", "--date", "2026")
    assert code == 5 and len(out.splitlines()) == 2
    bad = table_in(tmp_path / "bearings.csv.bad.csv")
    assert [(row["line"], row["reason"].split(":")[0]) for row in bad] == [
        ("3", "bearing_deg outside -360 to 360"), ("4", "no direction here"),
        ("5", "latitude outside -90 to 90 degrees")]


def test_one_bearing(capsys):
    arguments = ["bearing", "123.5", "--from", "magnetic", "--to", "grid", "--crs", "utm", *DEMO_PLACE]
    code, out, _ = run(capsys, *arguments)
    assert code == 0 and "grid bearing" in out and "UTM zone 33N" in out and CAUTION in out
    code, out, _ = run(capsys, *arguments, "--json")
    answer = json.loads(out)
    assert answer["bearing_deg"] == answer["grid_deg"] and answer["to_north"] == "grid"
    assert answer["field"]["model"] == "WMM2025"


def test_heading_of_the_demo_log(capsys, tmp_path):
    result = tmp_path / "headings.csv"
    code, out, _ = run(capsys, "heading", DEMO_LOG, *DEMO_PLACE, "--crs", "utm", "--output", result)
    assert code == 0
    assert "GOOD" in out and "UTM zone 33N" in out and "root mean square parts" in out and CAUTION in out
    rows = table_in(result)
    truth = np.loadtxt(DEMO_LOG.parent / "truth.csv", delimiter=",", skiprows=2)[:, 1]
    error = (np.array([float(r["true_deg"]) for r in rows]) - truth + 180) % 360 - 180
    sigma = np.array([float(r["sigma_deg"]) for r in rows])
    flight = truth.size // 2
    assert np.sqrt(np.mean((error[flight:] / sigma[flight:]) ** 2)) < 1.1
    assert np.mean(np.abs(error) <= 1.96 * sigma) > 0.93


def test_heading_json_and_calibration_file(capsys, tmp_path):
    saved, picture = tmp_path / "cal.json", tmp_path / "cal.png"
    code, out, _ = run(capsys, "calibrate", DEMO_LOG, *DEMO_PLACE, "--output", saved, "--picture", picture)
    assert code == 0 and "GOOD" in out and saved.exists() and picture.stat().st_size > 10_000
    code, out, _ = run(capsys, "heading", DEMO_LOG, *DEMO_PLACE, "--calibration", saved, "--json")
    answer = json.loads(out)
    assert code == 0 and answer["calibration"]["verdict"] == "good" and answer["grid"] is None
    first = answer["samples"][0]
    assert {"line", "t_s", "magnetic_deg", "true_deg", "grid_deg", "sigma_deg", "low_95_deg", "high_95_deg", "dominant",
            "flags", "sensor_deg", "calibration_deg", "tilt_deg", "model_deg"} <= set(first)
    assert first["grid_deg"] is None and first["line"] == 3
    code, out, _ = run(capsys, "heading", DEMO_LOG, *DEMO_PLACE, "--calibration", "none")
    assert code == 0 and "no calibration was applied" in out


def test_a_refused_calibration_says_why_and_heading_goes_on_without(capsys, tmp_path):
    flat = tmp_path / "flat.csv"
    turn = np.radians(np.arange(0, 360, 2.0))
    rows = np.column_stack([22 * np.cos(turn) + 5, -22 * np.sin(turn), np.full(turn.size, 43.0)])
    np.savetxt(flat, rows, delimiter=",", header="mag_x_uT,mag_y_uT,mag_z_uT", comments="", fmt="%.3f")
    saved = tmp_path / "cal.json"
    code, out, _ = run(capsys, "calibrate", flat, *DEMO_PLACE, "--output", saved)
    assert code == 4 and "REFUSED" in out and not saved.exists()
    code, out, _ = run(capsys, "heading", flat, *DEMO_PLACE)
    assert code == 0 and "used as they are" in out and "no accelerometer" in out


def test_bad_rows_of_a_log(capsys, tmp_path):
    lines = DEMO_LOG.read_text(encoding="utf-8").splitlines()
    lines[10] = lines[10].replace(",", ",x", 1)
    lines[20] = lines[19]
    broken = tmp_path / "log.csv"
    broken.write_text("\n".join(lines) + "\n", encoding="utf-8")
    code, _, err = run(capsys, "heading", broken, *DEMO_PLACE, "--output", tmp_path / "out.csv")
    assert code == 5 and "2 bad row(s), the first in line 11" in err
    bad = table_in(tmp_path / "out.csv.bad.csv")
    assert [row["line"] for row in bad] == ["11", "21"] and "time does not increase" in bad[1]["reason"]
    code, out, _ = run(capsys, "heading", broken, *DEMO_PLACE, "--json")
    assert code == 5 and [row["line"] for row in json.loads(out)["bad_rows"]] == [11, 21]


def test_bad_rows_are_said_where_no_side_file_can_be_written(capsys, tmp_path):
    log = tmp_path / "log.csv"
    log.write_text("mag_x_uT,mag_y_uT,mag_z_uT\n20,1,43\nx,1,43\n20,1\n", encoding="utf-8")
    (tmp_path / "log.csv.bad.csv").mkdir()
    code, _, err = run(capsys, "heading", log, *DEMO_PLACE)
    assert code == 5 and "cannot be written" in err and "  line 3: " in err and "  line 4: " in err


@pytest.mark.parametrize(("arguments", "code", "words"), [
    (["field", "--lat", "1"], 2, "--lon is needed"), (["field", "--lat", "95", "--lon", "1"], 2, "latitude outside"),
    (["field", "--lat", "1", "--lon", "1", "--date", "1500"], 2, "outside the validity"),
    (["field", "--lat", "1", "--lon", "1", "--model", "WMM1066"], 2, "neither a model's name"),
    (["field", "--input", "nowhere.csv"], 3, "cannot be opened"),
    (["heading", "nowhere.csv", *DEMO_PLACE], 3, "cannot be opened"),
    (["heading", str(DEMO_LOG), *DEMO_PLACE, "--column", "x"], 2, "OURS=THEIRS"),
    (["heading", str(DEMO_LOG), *DEMO_PLACE, "--crs", "EPSG:4326"], 2, "not a projected"),
    (["heading", str(DEMO_LOG), *DEMO_PLACE, "--output", "/nowhere/at/all.csv"], 3, "No such file"),
    (["bearing", *DEMO_PLACE], 2, "a bearing in degrees is needed"),
    (["bearing", "10", "--to", "grid", *DEMO_PLACE], 2, "needs a projected"),
    (["field", "--lat", "1", "--lon", "1", "--model", str(DEMO_LOG)], 3, "line 2")])
def test_exit_codes_and_messages(capsys, arguments, code, words):
    found, _, err = run(capsys, *arguments)
    assert found == code and words in err and err.startswith(f"magnav {arguments[0]}: ")


def test_deviation(capsys, tmp_path):
    """Handbook of Magnetic Compass Adjustment (formerly Pub. 226), chapter V: the eight deviations of its example."""
    deviations = dict(zip(range(0, 360, 45), (10.5, 20.0, 11.5, -1.2, -5.5, -8.0, -12.5, -6.8), strict=True))
    table, picture = tmp_path / "swing.csv", tmp_path / "curve.png"
    rows = [f"{compass},{(compass + d) % 360},{way}" for compass, d in deviations.items() for way in ("cw", "ccw")]
    table.write_text("compass_deg,reference_deg,sense\n" + "\n".join(rows) + "\n1,2,up\n", encoding="utf-8")
    code, out, err = run(capsys, "deviation", table, "--picture", picture)
    assert code == 5 and "column sense: 'up'" in err and "Deviation card" in out and CAUTION in out
    assert picture.stat().st_size > 10_000
    code, out, _ = run(capsys, "deviation", table, "--json", "--limit-deg", 30, "--hysteresis-limit-deg", 1)
    answer = json.loads(out)
    assert code == 5 and [check["passed"] for check in answer["checks"]] == [True, True]
    assert answer["coefficients_deg"]["B"] == pytest.approx(12.0, abs=0.15) and len(answer["card"]) == 24
    code, out, _ = run(capsys, "deviation", table, "--limit-deg", 15, "--residual-limit-deg", 1)
    assert code == 6 and "FAIL  largest deviation" in out and "pass  scatter" in out
    code, out, _ = run(capsys, "deviation", table, "--reference", "true", "--json", *DEMO_PLACE)
    shift = answer["coefficients_deg"]["A"] - json.loads(out)["coefficients_deg"]["A"]
    assert shift == pytest.approx(magnav.load_model("WMM2025").field(46.62, 12.91, 640, "2026-05-12").declination_deg)
    table.write_text("compass_deg,reference_deg\n" + "\n".join(r.rpartition(",")[0] for r in rows), encoding="utf-8")
    code, _, err = run(capsys, "deviation", table, "--hysteresis-limit-deg", 1)
    assert code == 2 and "needs a column sense" in err


def test_firmware_image_and_source(capsys, tmp_path):
    image, source = tmp_path / "wmm.img", tmp_path / "wmm.c"
    code, out, _ = run(capsys, "firmware", "image", "--model", "WMM2025", "--output", image)
    assert code == 0 and "1092 bytes, the same bits" in out
    code, out, _ = run(capsys, "field", "--lat", 80, "--lon", 0, "--date", "2025.0", "--model", image, "--json")
    assert json.loads(out)["declination_deg"] == magnav.load_model("WMM2025").field(80, 0, when=2025.0).declination_deg
    code, out, _ = run(capsys, "firmware", "source", "--model", "igrf14", "--first-year", 2020, "--output", source)
    assert code == 0 and "array igrf_14_image" in out and "within" in out
    assert f"igrf_14_image[{len(source.read_text().split('0x')) - 1}]" in source.read_text()
    code, _, err = run(capsys, "firmware", "image", "--model", "auto", "--output", image)
    assert code == 2 and "name the model" in err
    code, _, err = run(capsys, "firmware", "source", "--name", "9lives", "--output", source)
    assert code == 2 and "not a name in C" in err
    image.write_bytes(image.read_bytes()[:-1])
    code, _, err = run(capsys, "field", "--lat", 80, "--lon", 0, "--model", image)
    assert code == 3 and "damaged" in err


def test_help_says_the_caution_and_the_exit_codes(capsys):
    with pytest.raises(SystemExit) as stop:
        main(["--help"])
    out = capsys.readouterr().out
    assert stop.value.code == 0 and CAUTION in out and "exit codes" in out
    for name in ("field", "calibrate", "heading", "bearing"):
        with pytest.raises(SystemExit):
            main([name, "--help"])
        assert "safety-critical" in capsys.readouterr().out


def test_as_a_program_with_a_closed_pipe(tmp_path, monkeypatch):
    # away from the checkout, whose package folder would hide the installed one
    monkeypatch.chdir(tmp_path)
    command = [sys.executable, "-m", "magnav"]
    done = subprocess.run([*command, "--version"], capture_output=True, text=True, check=True)
    assert done.stdout.startswith("magnav ")
    with subprocess.Popen([*command, "heading", str(DEMO_LOG), *DEMO_PLACE, "--json"], stdout=subprocess.PIPE,
                          stderr=subprocess.PIPE) as reader:
        reader.stdout.read(10)
        reader.stdout.close()
        assert reader.stderr.read() == b""
        assert reader.wait() == 0


def test_progress_bar_only_on_a_terminal(capsys, monkeypatch):
    from magnav.command.say import Progress

    quiet = Progress("reading")
    quiet(0.5)
    quiet.end()
    assert capsys.readouterr().err == ""
    monkeypatch.setattr(sys.stderr, "isatty", lambda: True, raising=False)
    shown = Progress("reading")
    shown(0.5)
    shown(1.0)
    shown.end()
    assert "100 %" in capsys.readouterr().err
