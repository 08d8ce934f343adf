"""The conformance kit: vectors from the desk, the harness on this machine, the check of what it printed."""

import json
import pathlib
import subprocess
import xml.etree.ElementTree as ET

import numpy as np
import pytest

import magnav
from magnav.command.main import main
from magnav.errors import InputError
from magnav.firmware import vectors as v

ROOT = pathlib.Path(__file__).parents[1]


def harness(tmp_path, header, *defines):
    program = tmp_path / "self_test"
    sources = [str(path) for path in sorted((ROOT / "c_core/src").glob("*.c"))]
    subprocess.run(["cc", "-std=c99", "-O2", "-ffp-contract=off", "-Wall", "-Wextra", "-Werror", *defines,
                    f"-I{ROOT / 'c_core/include'}", f"-I{header.parent}", str(ROOT / "c_core/kit/self_test.c"),
                    *sources, "-lm", "-o", str(program)], check=True)
    return subprocess.run([str(program)], capture_output=True, text=True, check=True).stdout


@pytest.fixture(scope="module", params=["WMM2025", "gufm1"])
def kit(request, tmp_path_factory):
    """Vectors of a model, and what the double and the float build printed."""
    folder = tmp_path_factory.mktemp("kit")
    table, header = folder / "vectors.csv", folder / "vectors.h"
    assert main(["firmware", "vectors", "--model", request.param, "--count", "150", "--seed", "7", "--output",
                 str(table), "--c-header", str(header)]) == 0
    out = {"vectors": table, "header": header, "folder": folder, "model": request.param}
    for real, defines in (("double", ()), ("float", ("-DMAGNAV_SINGLE",))):
        out[real] = folder / f"{real}.csv"
        out[real].write_text(harness(folder, header, "-DKIT_RESULTS", *defines), encoding="ascii")
    return out


def check(kit, results, *arguments):
    return main(["firmware", "check", str(results), "--vectors", str(kit["vectors"]), *arguments])


def test_double_build_conforms_exactly_and_float_in_its_class(kit, capsys):
    if kit["model"] == "WMM2025":
        assert check(kit, kit["double"]) == 0
        assert "conforms (class exact)" in capsys.readouterr().out
        assert check(kit, kit["float"], "--class", "float") == 0
    else:
        # the image of gufm1 is rounded to 32 bits: not the same bits, and it says so
        assert check(kit, kit["double"]) == 6
        assert check(kit, kit["double"], "--class", "custom", "--tolerance-nT", "0.01", "--tolerance-deg", "1e-3") == 0
    capsys.readouterr()
    assert check(kit, kit["float"]) == 6
    assert "DOES NOT CONFORM (class exact)" in capsys.readouterr().out


def test_vectors_are_seeded_and_hold_the_edges(tmp_path):
    model = magnav.load_model("WMM2025")
    for path, seed in ((tmp_path / "a", 3), (tmp_path / "b", 3), (tmp_path / "c", 4)):
        v.write_csv(v.make_vectors(model, 40, seed), path)
    assert (tmp_path / "a").read_bytes() == (tmp_path / "b").read_bytes() != (tmp_path / "c").read_bytes()
    rows = v.read_csv(tmp_path / "a")["field"]
    assert {90.0, -90.0} <= {row["lat_deg"] for row in rows} and {2025.0, 2030.0} <= {row["year"] for row in rows}
    for row in rows:
        field = model.field(row["lat_deg"], row["lon_deg"], row["height_m"], row["year"])
        assert field.north_nT == row["north_nT"] and np.float32(row["lat_deg"]) == row["lat_deg"]
    for count in (3, 10**6):
        with pytest.raises(InputError, match="accepted are 20 to"):
            v.make_vectors(model, count)


def test_summary_lines(kit):
    lines = harness(kit["folder"], kit["header"]).splitlines()
    assert [line.split(", ")[:2] for line in lines] == [["# field", "150"], ["# heading", "150"]]
    if kit["model"] == "WMM2025":
        assert [line.split(", ")[2] for line in lines] == ["0", "0"]
    assert all(len(line.split(", ")[3]) == 16 for line in lines)


def spoiled(kit, change):
    lines = kit["double"].read_text().splitlines()
    change(lines)
    path = kit["folder"] / "spoiled.csv"
    path.write_text("\n".join(lines) + "\n", encoding="utf-8")
    return path


def replace(lines, row, column, text):
    cells = lines[row].split(",")
    cells[column] = text
    lines[row] = ",".join(cells)


@pytest.mark.parametrize(("change", "words"), [
    (lambda ls: replace(ls, 8, 2, "99999.0"), "worst"), (lambda ls: replace(ls, 8, 2, "nan"), "worst       inf"),
    (lambda ls: replace(ls, 8, 2, "north"), "line 9, column east_nT: 'north' is no number"),
    (lambda ls: ls.insert(8, ls[8]), "field-7 is there twice"), (lambda ls: ls.pop(8), "1 missing"),
    (lambda ls: replace(ls, 8, 0, "field-999"), "field-999 is no vector"),
    (lambda ls: ls.insert(8, "field-7,1"), "2 cells where the header has 17")])
def test_what_is_wrong_is_found_and_named(kit, capsys, change, words):
    report, junit = kit["folder"] / "report.json", kit["folder"] / "report.xml"
    code = check(kit, spoiled(kit, change), "--class", "custom", "--tolerance-nT", "0.01", "--tolerance-deg", "0.001",
                 "--json", str(report), "--junit", str(junit))
    out = capsys.readouterr().out
    assert code == 6 and words in out and "DOES NOT CONFORM" in out
    assert json.loads(report.read_text())["passed"] is False
    suite = ET.parse(junit).getroot()
    assert suite.tag == "testsuite" and int(suite.get("failures")) == len(suite.findall("testcase/failure")) >= 1


def test_worst_point_is_the_one_changed(kit, capsys):
    path = spoiled(kit, lambda ls: replace(ls, 20, 2, "99999.0"))
    assert check(kit, path, "--class", "custom", "--tolerance-nT", "0.01", "--tolerance-deg", "0.001") == 6
    (line,) = [text for text in capsys.readouterr().out.splitlines() if "at field-19: expected" in text]
    assert "got 99999.0" in line and "lat_deg" in line


def test_somebody_elses_table_with_some_columns(kit, capsys):
    """Decimals, one group, three columns: what is not there is said, not passed over."""
    rows = v.read_csv(kit["vectors"])["field"]
    path = kit["folder"] / "other.csv"
    path.write_text("id,north_nT,east_nT,declination_deg\n" + "".join(
        f"{r['id']},{r['north_nT']:.4f},{r['east_nT']:.4f},{r['declination_deg'] + 360:.6f}\n" for r in rows))
    junit = kit["folder"] / "other.xml"
    assert check(kit, path, "--class", "float", "--junit", str(junit)) == 0
    out = capsys.readouterr().out
    for name in ("field: down_nT", "heading: true_deg"):
        assert f"not checked, no such column: {name}" in out
    assert len(ET.parse(junit).getroot().findall("testcase/skipped")) == 13 + 15


def test_files_that_cannot_be_read(kit, capsys):
    empty = kit["folder"] / "empty.csv"
    for text in ("", "# nothing\n", "1,2,3\n", "id,north_nT\n"):
        empty.write_text(text)
        assert check(kit, empty) == 3
    assert check(kit, kit["folder"] / "nowhere.csv") == 3
    for text in ("", "id,group\nx,other\n", "id,group\nx,field\n", "a,b\n1,2\n"):
        empty.write_text(text)
        assert main(["firmware", "check", str(kit["double"]), "--vectors", str(empty)]) == 3
    assert check(kit, kit["double"], "--class", "custom") == 2
    assert main(["firmware", "check", str(kit["double"]), "--vectors", str(kit["folder"] / "nowhere.csv")]) == 3
    capsys.readouterr()
