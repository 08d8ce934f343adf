"""Patches: the guaranteed bound holds against the full model (itself tested against published values)."""

import functools
import pathlib
import subprocess

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import magnav
from magnav.command.main import main
from magnav.errors import InputError
from magnav.firmware.patch import c_source, make_patch, terms_of

ROOT = pathlib.Path(__file__).parents[1]
MODEL = magnav.load_model("WMM2025")
AREAS = [((45, 49), (9, 17), (0, 5000), 1.0), ((-40, -36), (172, 186), (0, 3000), 1.0),
         ((84, 90), (0, 60), (0, 1000), 5.0), ((70, 80), (-120, -90), (0, 12000), 5.0)]


@functools.cache
def patch_of(area):
    lat, lon, height, error = AREAS[area]
    return make_patch(MODEL, lat, lon, height, (2026.0, 2028.0), error)


def apart(patch, lat, lon, height, year, rng, count=400):
    """Largest difference from the model at random points, corners among them."""
    unit = rng.uniform(-1, 1, (count, 4))
    unit[:16] = np.array(np.meshgrid(*[[-1, 1]] * 4)).reshape(4, -1).T
    middle, half = np.mean([lat, lon, height, year], axis=1), np.diff([lat, lon, height, year])[:, 0] / 2
    at = np.float32(middle + half * unit).astype(float)
    at = np.clip(at, middle - half, middle + half)
    lon_in = np.mod(at[:, 1] + 180, 360) - 180
    full = MODEL.field(at[:, 0], lon_in, at[:, 2], at[:, 3]).vector_nT()
    return np.abs(np.array([patch.field_nT(*point) for point in at]) - full).max(axis=0), at


@pytest.mark.parametrize("area", range(len(AREAS)))
def test_bound_holds_in_double_and_is_of_use(area):
    lat, lon, height, error = AREAS[area]
    patch = patch_of(area)
    worst, _ = apart(patch, lat, lon, height, (2026.0, 2028.0), np.random.default_rng(2))
    assert np.all(worst <= patch.bound_nT) and patch.bound_nT.max() <= error
    # a bound far above what happens would be of no use: within an order of magnitude of a thing this small
    assert patch.bound_nT.max() < 10 * worst.max() + 0.1


@settings(max_examples=5, deadline=None)
@given(st.floats(-88, 86), st.floats(-180, 180), st.floats(0.5, 2), st.floats(0.5, 2))
def test_bound_holds_anywhere(south, west, tall, wide):
    lat, lon, height, years = (south, south + tall), (west, west + wide), (0.0, 2000.0), (2025.5, 2026.5)
    patch = make_patch(MODEL, lat, lon, height, years, 4.0)
    worst, _ = apart(patch, lat, lon, height, years, np.random.default_rng(3), 100)
    assert np.all(worst <= patch.bound_nT)


def test_c_source_on_this_machine_in_float_and_double(tmp_path):
    """The generated file compiled, run in both reals at points of the area: within the bound written into it; outside,
    the status of the area."""
    lat, lon, height, _ = AREAS[0]
    patch = patch_of(0)
    (tmp_path / "patch.c").write_text(c_source(patch, "alps"), encoding="ascii")
    _, at = apart(patch, lat, lon, height, (2026.0, 2028.0), np.random.default_rng(4), 60)
    full = MODEL.field(*at.T).vector_nT()
    calls = "".join(f"    show({', '.join(repr(float(v)) for v in point)});\n" for point in at)
    (tmp_path / "main.c").write_text(
        '#include <stdio.h>\n#include "magnav_patch.h"\nextern const magnav_patch alps;\n'
        "static void show(double a, double b, double c, double d)\n{\n    magnav_real ned[3] = {0, 0, 0};\n"
        "    int status =\n"
        "        magnav_patch_at(&alps, (magnav_real)a, (magnav_real)b, (magnav_real)c, (magnav_real)d, ned);\n"
        '    printf("%d %.9g %.9g %.9g\\n", status, (double)ned[0], (double)ned[1], (double)ned[2]);\n}\n'
        f"int main(void)\n{{\n{calls}    show(44.9, 12, 100, 2027);\n    return 0;\n}}\n", encoding="ascii")
    for define in ([], ["-DMAGNAV_SINGLE"]):
        subprocess.run(["cc", "-std=c99", "-O2", "-ffp-contract=off", "-Wall", "-Wextra", "-Werror", *define,
                        f"-I{ROOT / 'c_core/include'}", str(tmp_path / "main.c"), str(tmp_path / "patch.c"),
                        str(ROOT / "c_core/src/patch.c"), "-lm", "-o", str(tmp_path / "program")], check=True)
        said = subprocess.run([str(tmp_path / "program")], capture_output=True, text=True, check=True).stdout
        table = np.array([line.split() for line in said.splitlines()], dtype=float)
        assert np.all(table[:-1, 0] == 0) and table[-1, 0] == -13
        assert np.all(np.abs(table[:-1, 1:] - full) <= patch.bound_nT)


def test_declination_bound_holds():
    patch = patch_of(3)
    _, at = apart(patch, *AREAS[3][:3], (2026.0, 2028.0), np.random.default_rng(5))
    field = MODEL.field(*at.T)
    mine = np.array([patch.field_nT(*point) for point in at])
    turned = np.degrees(np.arctan2(mine[:, 1], mine[:, 0])) - field.declination_deg
    assert np.abs((turned + 180) % 360 - 180).max() <= patch.declination_bound_deg < 2.0


def test_outside_is_said():
    patch = patch_of(1)
    assert patch.field_nT(-38, -179, 10, 2027).tolist() == patch.field_nT(-38, 181, 10, 2027).tolist()
    for point in ((-41, 175, 10, 2027), (-38, 171, 10, 2027), (-38, 175, 3500, 2027), (-38, 175, 10, 2028.1)):
        with pytest.raises(InputError, match="outside the area"):
            patch.field_nT(*point)


@pytest.mark.parametrize(("change", "words"), [
    ({"lat_deg": (49, 45)}, "must be a range"), ({"lat_deg": (80, 91)}, "-90 to 90"),
    ({"lat_deg": (0, 60)}, "at most 45"),
    ({"lon_deg": (0, 100)}, "90 of longitude"), ({"when": (2024.0, 2026.0)}, "leave the validity"),
    ({"error_nT": 0.01}, "cannot be guaranteed"), ({"height_m": (0, 2e6)}, "1,000,000"),
    ({"model": magnav.load_model("IGRF-14"), "when": (2019.0, 2021.0)}, "no single straight line"),
    ({"model": magnav.load_model("gufm1"), "when": (1800.0, 1801.0)}, "no single straight line")])
def test_what_cannot_be_made(change, words):
    arguments = {"model": MODEL, "lat_deg": (45, 49), "lon_deg": (9, 17), "height_m": (0, 1000),
                 "when": (2026.0, 2028.0), "error_nT": 5.0} | change
    with pytest.raises(InputError, match=words):
        make_patch(**arguments)


def test_order_of_terms():
    assert terms_of(2) == [(0, 0, 0, 0), (0, 0, 0, 1), (0, 0, 0, 2), (0, 0, 1, 0), (0, 0, 1, 1), (0, 0, 2, 0),
                           (0, 1, 0, 0), (1, 0, 0, 0)]
    with pytest.raises(InputError, match="not a name in C"):
        c_source(make_patch(MODEL, (45, 46), (9, 10), (0, 500), (2026.0, 2026.5), 5.0), "a-b")


def test_command(capsys, tmp_path):
    output = tmp_path / "patch.c"
    code = main(["firmware", "patch", "--lat", "45", "47", "--lon", "9", "12", "--height-m", "0", "3000", "--dates",
                 "2026-03-01", "2026.9", "--output", str(output)])
    assert code == 0 and "degree" in capsys.readouterr().out and "field_patch" in output.read_text()
