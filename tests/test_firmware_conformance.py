"""The conformance kit: vectors from the desk, the harness on this machine, the check of what it printed."""

import json
import math
import pathlib
import re
import subprocess
import xml.etree.ElementTree as ET

import mpmath
import numpy as np
import pytest

import magnav
from magnav.command.main import main
from magnav.errors import InputError
from magnav.firmware import conformance
from magnav.firmware import vectors as v

ROOT = pathlib.Path(__file__).parents[1]
STRICT = ("-Wall", "-Wextra", "-Wconversion", "-Wdouble-promotion", "-Wshadow", "-pedantic", "-Werror")
CUSTOM = ("--class", "custom", "--tolerance-nT", "0.01", "--tolerance-deg", "0.001")


def harness(folder, *arguments):
    program = folder / "self_test"
    sources = [str(path) for path in sorted((ROOT / "c_core/src").glob("*.c"))]
    subprocess.run(["cc", "-std=c99", "-O2", "-ffp-contract=off", *STRICT, f"-I{ROOT / 'c_core/include'}",
                    f"-I{folder}", str(ROOT / "c_core/kit/self_test.c"), *arguments, *sources, "-lm", "-o",
                    str(program)], check=True)
    return subprocess.run([str(program)], capture_output=True, text=True, check=True).stdout


@pytest.fixture(scope="module", params=["WMM2025", "IGRF-14", "gufm1"])
def kit(request, tmp_path_factory):
    """Vectors of a model (time laws of order 2 and 4), and what the double and the float build printed."""
    folder = tmp_path_factory.mktemp("kit")
    table, header = folder / "vectors.csv", folder / "vectors.h"
    assert main(["firmware", "vectors", "--model", request.param, "--count", "120", "--seed", "7", "--output",
                 str(table), "--c-header", str(header)]) == 0
    out = {"vectors": table, "folder": folder, "model": request.param}
    for real, defines in (("double", ()), ("float", ("-DMAGNAV_SINGLE",))):
        out[real] = folder / f"{real}.csv"
        out[real].write_text(harness(folder, "-DKIT_RESULTS", *defines), encoding="ascii")
    return out


@pytest.fixture(scope="module")
def wmm_kit(tmp_path_factory):
    """The same for one model, in double, without compiling: the table is its own results."""
    folder = tmp_path_factory.mktemp("wmm")
    table = folder / "vectors.csv"
    vectors = v.make_vectors(magnav.load_model("WMM2025"), 60, 7)
    v.write_csv(vectors, table)
    double = folder / "double.csv"
    # as a target prints it: a table a group
    lines = []
    for group, rows in vectors.rows.items():
        outputs = v.GROUPS[group][1]
        lines += [",".join(("id", *outputs))]
        lines += [",".join((row["id"], *(repr(float(row[name])) for name in outputs))) for row in rows]
    double.write_text("\n".join(lines) + "\n", encoding="ascii")
    return {"vectors": table, "double": double, "folder": folder, "rows": vectors.rows}


def check(kit, results, *arguments):
    return main(["firmware", "check", str(results), "--vectors", str(kit["vectors"]), *arguments])


def write(kit, text, name="results.csv"):
    path = kit["folder"] / name
    path.write_text(text, encoding="utf-8")
    return path


# ---- round trip: vectors, harness on this machine, check

def test_double_build_conforms_exactly_and_float_in_its_class(kit, capsys):
    assert check(kit, kit["double"]) == 0
    out = capsys.readouterr().out
    assert "conforms (class exact)" in out and "not checked" not in out
    # the images of the others are not the same bits: none in their vectors
    assert ("hash of all outputs" in out.partition("image")[2]) == (kit["model"] == "WMM2025")
    assert check(kit, kit["float"], "--class", "float") == 0
    assert "conforms (class float)" in capsys.readouterr().out
    assert check(kit, kit["float"]) == 6
    assert "DOES NOT CONFORM (class exact)" in capsys.readouterr().out


def test_summary_alone_is_enough_for_the_same_bits(kit, capsys):
    """A target with a slow line prints seven lines; a changed hash, a lost line and a short count are found."""
    text = "".join(line + "\n" for line in kit["double"].read_text().splitlines() if line.startswith("#"))
    assert [line.split(", ")[2] for line in text.splitlines()] == ["0"] * len(text.splitlines())
    assert check(kit, write(kit, text)) == 0
    assert capsys.readouterr().out.count("hash of all outputs") == len(text.splitlines()) - 1
    found = re.search(r"# heading, 120, 0, (\w{16})", text)
    assert check(kit, write(kit, text.replace(found[1], found[1][::-1]))) == 6
    assert found[1] in capsys.readouterr().out
    assert check(kit, write(kit, text.replace(found[0] + "\n", ""))) == 6
    assert "does not fit the lines of its groups" in capsys.readouterr().out
    assert check(kit, write(kit, text[:text.index("# all")])) == 6
    assert "did not come to its end" in capsys.readouterr().out
    # differences cannot be told from a hash
    assert check(kit, write(kit, text), "--class", "double") == 6
    capsys.readouterr()


def test_summary_of_the_float_build_shows_differences(kit):
    lines = [line.split(", ") for line in kit["float"].read_text().splitlines() if line.startswith("#")]
    worst = {line[0][2:]: int(line[2]) for line in lines}
    # below the limit of 0.1 nT, in millionths, and not nothing
    assert 0 < worst["field"] < 100_000 and 0 < worst["trig"] < 2000 and 0 < worst["heading"] < 1000
    assert worst["field_errors"] == worst["heading_errors"] == 0
    assert worst["all"] == max(value for name, value in worst.items() if name != "all")


def test_on_a_board_without_stdio(tmp_path):
    """The hooks: text goes to the board's own function, the test is called by name, nothing comes from the heap."""
    vectors = v.make_vectors(magnav.load_model("WMM2025"), 20, 1)
    (tmp_path / "vectors.h").write_text(v.c_header(vectors), encoding="ascii")
    (tmp_path / "board.h").write_text("void board_print(const char *text);\n")
    (tmp_path / "board.c").write_text(
        "#include <stdio.h>\n#include \"board.h\"\nint board_test(void);\n"
        "void board_print(const char *text) { fputs(text, stdout); }\nint main(void) { return board_test(); }\n")
    hooks = ["-include", "board.h", "-DKIT_PRINT=board_print", "-DKIT_MAIN=board_test"]
    said = harness(tmp_path, *hooks, str(tmp_path / "board.c"))
    assert said.splitlines()[-1].startswith("# all, ")
    compiled = tmp_path / "kit.o"
    subprocess.run(["cc", "-std=c99", "-O2", "-c", f"-I{ROOT / 'c_core/include'}", f"-I{tmp_path}", *hooks,
                    str(ROOT / "c_core/kit/self_test.c"), "-o", str(compiled)], check=True)
    listed = subprocess.run(["nm", "-u", str(compiled)], capture_output=True, text=True, check=True).stdout
    needed = {line.split()[-1] for line in listed.splitlines()}
    assert {name for name in needed if not name.startswith("magnav_")} <= {
        "board_print", "memcpy", "memset", "__stack_chk_fail", "_GLOBAL_OFFSET_TABLE_"}


def test_a_wrong_build_is_found(tmp_path, capsys):
    """The harness compiled against vectors of another model's coefficients: every field differs, trig does not."""
    vectors = v.make_vectors(magnav.load_model("WMM2025"), 20, 1)
    table = tmp_path / "vectors.csv"
    v.write_csv(vectors, table)
    text = v.c_header(vectors)
    first = re.search(r"model_polynomials\[2\]\[168\] = \{\n    \{MAGNAV_C\((-?[\d.]+)\)", text)
    assert first and float(first[1]) == magnav.load_model("WMM2025").coefficients.polynomials[0, 0, 0]
    (tmp_path / "vectors.h").write_text(text[:first.start(1)] + str(float(first[1]) + 1) + text[first.end(1):])
    (tmp_path / "results.csv").write_text(harness(tmp_path, "-DKIT_RESULTS"))
    assert main(["firmware", "check", str(tmp_path / "results.csv"), "--vectors", str(table)]) == 6
    out = capsys.readouterr().out
    assert "FAIL: field" in out and "pass: trig" in out and "pass: heading" in out


# ---- the vectors themselves

def test_vectors_are_seeded_and_hold_the_edges(tmp_path):
    model = magnav.load_model("WMM2025")
    for path, seed in ((tmp_path / "a", 3), (tmp_path / "b", 3), (tmp_path / "c", 4)):
        v.write_csv(v.make_vectors(model, 40, seed), path)
    assert (tmp_path / "a").read_bytes() == (tmp_path / "b").read_bytes() != (tmp_path / "c").read_bytes()
    rows = v.read_csv(tmp_path / "a")["field"]
    assert {90.0, -90.0} <= {row["lat_deg"] for row in rows} and {2025.0, 2030.0} <= {row["year"] for row in rows}
    assert {-10_000.0, 10_000_000.0} <= {row["height_m"] for row in rows}
    assert {-360.0, 360.0} <= {row["lon_deg"] for row in rows}
    # a degree of latitude at a pole is 111,694 m (WGS84, value from memory)
    near = [row["lat_deg"] for row in rows if 0 < 90 - abs(row["lat_deg"]) < 1e-6]
    assert [(90 - abs(lat)) * 111_694 for lat in near] == pytest.approx([0.001, 0.001], rel=1e-4)
    for row in rows:
        field = model.field(row["lat_deg"], row["lon_deg"], row["height_m"], row["year"])
        assert all(getattr(field, name) == row[name] for name in ("north_nT", "east_nT", "down_nT", "total_nT"))
        assert np.float32(row["lat_deg"]) == row["lat_deg"] or row["lat_deg"] in near
    for count, seed, words in ((3, 1, "accepted are 20 to"), (10**6, 1, "accepted are 20 to"), (20, -1, "seed -1")):
        with pytest.raises(InputError, match=words):
            v.make_vectors(model, count, seed)


def test_comments_say_where_the_table_comes_from(wmm_kit):
    text = wmm_kit["vectors"].read_text()
    for words in ("# magnav vectors of WMM2025, seed 7\n", "degree 12", "# valid: 2025.0 to 2030.0", "core version: 1",
                  "binary64", "# group field: 60 rows"):
        assert words in text
    assert f"SHA-256 {v.model_digest(magnav.load_model('WMM2025'))}" in text
    assert v.model_digest(magnav.load_model("WMM2020")) not in text


def test_hash_is_the_published_one():
    """FNV-1a, 64 bits: test values of the IETF draft draft-eastlake-fnv, from memory."""
    assert [v.bits_hash(text) for text in (b"", b"a", b"foobar")] == [
        0xcbf29ce484222325, 0xaf63dc4c8601ec8c, 0x85944171f73967e8]


def test_trig_vectors_against_mpmath(wmm_kit):
    for row in v.read_csv(wmm_kit["vectors"])["trig"]:
        with mpmath.workdps(40):
            angle = mpmath.mpf(row["angle_deg"]) * mpmath.pi / 180
            assert row["sine"] == pytest.approx(float(mpmath.sin(angle)), rel=1e-15, abs=1e-25)
            assert row["cosine"] == pytest.approx(float(mpmath.cos(angle)), rel=1e-15, abs=1e-25)
            arc = float(mpmath.atan2(row["y"], row["x"]) * 180 / mpmath.pi) if (row["y"], row["x"]) != (0, 0) else 0
            # the core's range is (-180, 180]
            arc = 180.0 if arc == -180.0 else arc
        assert row["atan2_deg"] == pytest.approx(arc, rel=1e-15, abs=1e-25)
        assert 0 <= row["full_circle_deg"] < 360
        assert math.remainder(row["full_circle_deg"] - row["turn_deg"], 360) == pytest.approx(0, abs=1e-12)


def test_heading_vectors_from_the_table_alone(wmm_kit):
    """Another implementation in a few lines of numpy: the setups in the comments and the rows are all it needs."""
    setups = {int(number): json.loads(text) for number, text in
              re.findall(r"^# setup (\d+): (.*)$", wmm_kit["vectors"].read_text(), flags=re.M)}
    rows = v.read_csv(wmm_kit["vectors"])["heading"]
    lines = ["id,magnetic_deg,true_deg,grid_deg,measured_total_uT,roll_deg,pitch_deg"]
    for row in rows:
        setup = setups[row["setup"]]
        reading = np.array([row["mag_x_uT"], row["mag_y_uT"], row["mag_z_uT"]])
        field = np.reshape(setup["calibration"]["soft_iron"], (3, 3)) @ (reading - setup["calibration"]["hard_iron_uT"])
        down = np.array([row["down_x"], row["down_y"], row["down_z"]])
        down /= np.linalg.norm(down)
        east = np.cross(down, field)
        north = np.cross(east / np.linalg.norm(east), down)
        magnetic = np.degrees(np.arctan2(east[0] / np.linalg.norm(east), north[0]))
        true = magnetic + setup["declination_deg"]
        grid = true - setup["convergence_deg"]
        lines.append(f"{row['id']},{magnetic},{true},{grid},{np.linalg.norm(field)},"
                     f"{np.degrees(np.arctan2(down[1], down[2]))},{np.degrees(np.arcsin(-down[0]))}")
    assert {row["setup"] for row in rows} == set(setups)
    assert check(wmm_kit, write(wmm_kit, "\n".join(lines)), "--class", "double") == 0


def test_errors_cover_the_statuses(wmm_kit):
    """Every status that inputs alone can raise, by the numbers in magnav_core.h."""
    header = (ROOT / "c_core/include/magnav_core.h").read_text()
    numbers = {name: int(value) for name, value in re.findall(r"MAGNAV_E_(\w+) = (-\d+)", header)}
    rows = v.read_csv(wmm_kit["vectors"])
    assert {row["status"] for row in rows["field_errors"]} == {
        numbers[name] for name in ("NOT_FINITE", "LATITUDE", "LONGITUDE", "HEIGHT", "DATE")}
    assert {row["status"] for row in rows["heading_errors"]} == {
        numbers[name] for name in ("NOT_FINITE", "ACCELERATION", "MAGNETIC", "PARAMETER")}


# ---- what is wrong is found

def replace(lines, row, column, text):
    cells = lines[row].split(",")
    cells[column] = text
    lines[row] = ",".join(cells)


def spoiled(kit, change):
    """The results with a change in the fields' table, whose rows are given from its header on."""
    lines = kit["double"].read_text().splitlines()
    start = next(i for i, line in enumerate(lines) if line.startswith("id,north_nT"))
    fields = lines[start:]
    change(fields)
    return write(kit, "\n".join(lines[:start] + fields) + "\n", "spoiled.csv")


@pytest.mark.parametrize(("change", "words"), [
    (lambda ls: replace(ls, 8, 2, "99999.0"), "at field-7: expected"),
    (lambda ls: replace(ls, 8, 2, "nan"), "worst nan at field-7"),
    (lambda ls: replace(ls, 8, 2, "-inf"), "worst inf at field-7"),
    (lambda ls: replace(ls, 8, 2, "0x7ff8000000000000"), "worst nan at field-7"),
    (lambda ls: replace(ls, 8, 2, "north"), "column east_nT: 'north' is no number"),
    (lambda ls: replace(ls, 8, 2, "1_0"), "column east_nT: '1_0' is no number"),
    (lambda ls: replace(ls, 8, 2, ""), "1 missing"),
    (lambda ls: ls.insert(8, ls[8]), "'field-7' is there twice"), (lambda ls: ls.pop(8), "1 missing"),
    (lambda ls: replace(ls, 8, 0, "field-999"), "'field-999' is no vector"),
    (lambda ls: replace(ls, 8, 0, "f\x01"), "'f\\x01' is no vector"),
    (lambda ls: replace(ls, 0, 2, "north_nT"), "the header has 'north_nT' twice"),
    (lambda ls: ls.insert(8, "x" * 200_000 + ",1"), "field larger than field limit"),
    (lambda ls: ls.insert(8, "# refused: field-7: out of memory"), "refused: field-7"),
    (lambda ls: ls.__delitem__(slice(1, 61)), "60 missing"),
    (lambda ls: ls.insert(8, "field-7,1"), "2 cells where the header has 17")])
def test_what_is_wrong_is_found_and_named(wmm_kit, capsys, change, words):
    report, junit = wmm_kit["folder"] / "report.json", wmm_kit["folder"] / "report.xml"
    code = check(wmm_kit, spoiled(wmm_kit, change), *CUSTOM, "--json", str(report), "--junit", str(junit))
    out = capsys.readouterr().out
    assert code == 6 and words in out and "DOES NOT CONFORM" in out
    assert json.loads(report.read_text())["passed"] is False
    suite = ET.parse(junit).getroot()
    assert suite.tag == "testsuite" and int(suite.get("failures")) == len(suite.findall("testcase/failure")) >= 1
    assert int(suite.get("tests")) == len(suite.findall("testcase"))


def test_worst_point_is_the_one_changed(wmm_kit, capsys):
    """Two are wrong: the worse one is named, with its inputs, in text, JSON and JUnit."""
    def change(lines):
        replace(lines, 10, 2, "88888.0")
        replace(lines, 20, 2, "99999999.0")

    report, junit = wmm_kit["folder"] / "report.json", wmm_kit["folder"] / "report.xml"
    row = wmm_kit["rows"]["field"][19]
    assert check(wmm_kit, spoiled(wmm_kit, change), *CUSTOM, "--json", str(report), "--junit", str(junit)) == 6
    (line,) = [text for text in capsys.readouterr().out.splitlines() if ": expected" in text]
    assert "at field-19" in line and f"expected {row['east_nT']!r}, got 99999999.0" in line
    content = json.loads(report.read_text())
    (finding,) = [finding for finding in content["findings"] if not finding["passed"]]
    assert (finding["output"], finding["bad"], finding["worst_id"]) == ("east_nT", 2, "field-19")
    assert finding["worst"] == 99999999.0 - row["east_nT"]
    assert finding["inputs"] == {name: row[name] for name in v.FIELD_INPUTS}
    assert content["groups"] == {name: "FAIL" if name == "field" else "pass" for name in v.GROUPS}
    (failure,) = ET.parse(junit).getroot().findall("testcase/failure")
    assert "at field-19" in failure.text


def test_exact_means_bits(wmm_kit, capsys):
    """One unit in the last place, and the sign of a zero, fail in exact and pass in double."""
    rows = wmm_kit["rows"]
    near = math.nextafter(rows["field"][30]["north_nT"], math.inf)
    zero = next(row for row in rows["trig"] if row["sine"] == 0 and math.copysign(1, row["sine"]) == 1)
    text = wmm_kit["double"].read_text()
    for path in (spoiled(wmm_kit, lambda ls: replace(ls, 31, 1, repr(near))),
                 write(wmm_kit, re.sub(rf"(?m)^{zero['id']},0.0,", f"{zero['id']},-0.0,", text))):
        assert path.read_text() != text
        assert check(wmm_kit, path, "--class", "double") == 0
        assert check(wmm_kit, path) == 6
    assert f"at {zero['id']}: expected 0.0, got -0.0" in capsys.readouterr().out


def test_angles_on_the_circle_and_others_not(wmm_kit, capsys):
    rows = wmm_kit["rows"]["heading"]

    def turned(name):
        return write(wmm_kit, f"id,{name}\n" + "".join(f"{r['id']},{r[name] + 360}\n" for r in rows))

    for name in ("magnetic_deg", "true_deg", "grid_deg", "roll_deg"):
        assert check(wmm_kit, turned(name), "--class", "double") == 0
        assert check(wmm_kit, turned(name)) == 6
    for name in ("sigma_deg", "tilt_deg", "pitch_deg", "measured_inclination_deg"):
        assert check(wmm_kit, turned(name), "--class", "float") == 6
    capsys.readouterr()


def test_weak_horizontal_field_leaves_declinations_out_and_says_so(capsys, tmp_path):
    vectors = v.make_vectors(magnav.load_model("WMM2025"), 800, 7)
    table, results = tmp_path / "vectors.csv", tmp_path / "results.csv"
    v.write_csv(vectors, table)
    rows = vectors.rows["field"]
    weak = {row["id"] for row in rows if row["horizontal_nT"] <= 2000}
    assert weak
    results.write_text("id,declination_deg\n" + "".join(
        f"{row['id']},{row['declination_deg'] + (1 if row['id'] in weak else 0)}\n" for row in rows))
    arguments = ["firmware", "check", str(results), "--vectors", str(table)]
    assert main([*arguments, "--class", "float"]) == 0
    out = capsys.readouterr().out
    assert f"{800 - len(weak)} compared" in out and f"{len(weak)} left out: H too weak" in out
    assert main(arguments) == 6
    capsys.readouterr()


def test_somebody_elses_table_with_some_columns(wmm_kit, capsys):
    """Decimals, one group, three columns and one misspelt: what is not there is said, not passed over."""
    rows = v.read_csv(wmm_kit["vectors"])["field"]
    text = "\ufeffid,north_nT,east_nT,declination_deg,total_nt,lat_deg\r\n" + "".join(
        f"{r['id']}, {r['north_nT']:.4f},{r['east_nT']:.4f},{r['declination_deg'] + 360:.6f},?,{r['lat_deg']}\r\n"
        for r in rows)
    junit, report = wmm_kit["folder"] / "other.xml", wmm_kit["folder"] / "other.json"
    assert check(wmm_kit, write(wmm_kit, text), "--class", "float", "--junit", str(junit), "--json", str(report)) == 0
    out = capsys.readouterr().out
    skipped = sum(len(outputs) for _, outputs in v.GROUPS.values()) - 3
    assert f"conforms in what was checked; {skipped} outputs were not (class float)" in out
    assert "not checked: heading" in out and "not checked, no such column: down_nT" in out
    assert "unknown columns, left out: 'total_nt'" in out
    content = json.loads(report.read_text())
    assert content["passed"] and not content["complete"] and content["ignored_columns"] == ["total_nt"]
    assert {"group": "heading", "output": "true_deg"} in content["not_checked"]
    assert len(ET.parse(junit).getroot().findall("testcase/skipped")) == skipped == len(content["not_checked"])


def test_the_table_of_vectors_conforms_to_itself(wmm_kit, capsys):
    assert check(wmm_kit, wmm_kit["vectors"]) == 0
    assert "conforms (class exact)" in capsys.readouterr().out


def test_thousands_of_faults_are_counted_and_not_all_shown(wmm_kit, capsys):
    text = "id,north_nT\n" + "".join(f"stranger-{i},1\n" for i in range(500))
    assert check(wmm_kit, write(wmm_kit, text)) == 6
    out = capsys.readouterr().out
    assert out.count("is no vector") == 20 and "480 more faults" in out


def test_tolerances(capsys):
    for name, kind in conformance.CLASSES.items():
        for group, (_, outputs) in v.GROUPS.items():
            for output in outputs:
                limit = kind.of(group, output)
                assert (limit == 0) == (name == "exact" or output in v.INTEGERS)
    kind = conformance.CLASSES["float"]
    assert (kind.of("field", "down_nT"), kind.of("field", "declination_deg")) == (0.1, 0.002)
    for arguments in ({}, {"nT": 1.0}, {"nT": -1.0, "deg": 1.0}, {"nT": math.nan, "deg": 1.0},
                      {"nT": 1.0, "deg": math.inf}):
        with pytest.raises(InputError, match="custom needs"):
            conformance.tolerance_of("custom", **arguments)
    with pytest.raises(InputError, match="for the class custom, not float"):
        conformance.tolerance_of("float", nT=5.0)


def test_files_that_cannot_be_read(wmm_kit, capsys):
    for text in ("", "# nothing\n", "1,2,3\n", "id,north_nT\n", "boot 1.0\nid,north_nT\n"):
        assert check(wmm_kit, write(wmm_kit, text)) == 3
    assert check(wmm_kit, wmm_kit["folder"] / "nowhere.csv") == 3
    assert check(wmm_kit, wmm_kit["folder"]) == 3
    table = wmm_kit["vectors"].read_text()
    row = next(line for line in table.splitlines() if line.startswith("field-0,"))
    broken = wmm_kit["folder"] / "broken.csv"
    for text in ("", "id,group\n", "id,group\nx,other\n", "id,group\nx,field\n", "a,b\n1,2\n", table + row + "\n",
                 table.replace(repr(wmm_kit["rows"]["field"][9]["north_nT"]), "nan")):
        broken.write_text(text)
        assert main(["firmware", "check", str(wmm_kit["double"]), "--vectors", str(broken)]) == 3
    assert check(wmm_kit, wmm_kit["double"], "--class", "custom") == 2
    assert main(["firmware", "check", str(wmm_kit["double"]), "--vectors", "nowhere.csv"]) == 3
    assert main(["firmware", "vectors", "--model", "auto", "--output", str(broken)]) == 2
    capsys.readouterr()


def test_hash_on_the_page_is_this_machines():
    """What docs/conformance.md shows, and with it that a seed gives the same vectors everywhere."""
    rows = v.make_vectors(magnav.load_model("WMM2025"), 500, 7).rows["field"]
    line = f"    # field, 500, 0, {v.group_hash('field', rows):016x}\n"
    assert line in (ROOT / "docs/conformance.md").read_text(encoding="utf-8")
