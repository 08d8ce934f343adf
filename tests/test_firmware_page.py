"""The page "Put it on your target in fifteen minutes", followed step by step on this machine."""

import pathlib
import re
import shutil
import subprocess

import pytest

import magnav
from magnav.command.main import main

ROOT = pathlib.Path(__file__).parents[1]
PAGE = (ROOT / "docs/firmware.md").read_text(encoding="utf-8")


@pytest.mark.parametrize("real", ["float", "double"])
def test_followed_step_by_step(tmp_path, real):
    core = tmp_path / "c_core"
    shutil.copytree(ROOT / "c_core", core, ignore=shutil.ignore_patterns("build*"))
    shutil.copy(ROOT / "LICENSE", tmp_path)
    assert main(["firmware", "source", "--model", "WMM2025", "--output", str(tmp_path / "wmm2025_image.c")]) == 0
    subprocess.run(["make", "-s", "-C", str(core), "amalgamation", f"REAL={real}"], check=True)
    folder = core / ("build-float" if real == "float" else "build")
    (example,) = re.findall(r"```c\n(.*?)```", PAGE, flags=re.S)
    (tmp_path / "main.c").write_text(example, encoding="utf-8")
    subprocess.run(["cc", "-std=c99", "-ffp-contract=off", "-Wall", "-Wextra", "-Werror", f"-I{folder}",
                    str(tmp_path / "main.c"), str(tmp_path / "wmm2025_image.c"), str(folder / "magnav.c"), "-lm", "-o",
                    str(tmp_path / "heading")], check=True)
    said = subprocess.run([str(tmp_path / "heading")], capture_output=True, text=True, check=True).stdout
    assert said.strip() in PAGE
    declination = magnav.load_model("WMM2025").field(46.62, 12.91, 640, when=2026.36).declination_deg
    assert float(said.split()[1].rstrip(",")) == pytest.approx(declination, abs=0.002)


@pytest.mark.parametrize("real", ["float", "double"])
def test_hash_on_the_page_is_this_machines(tmp_path, real):
    define = ["-DMAGNAV_SINGLE"] if real == "float" else []
    program = tmp_path / "identity"
    sources = [str(path) for path in sorted((ROOT / "c_core/src").glob("*.c"))]
    subprocess.run(["cc", "-std=c99", "-O2", "-ffp-contract=off", *define, f"-I{ROOT / 'c_core/include'}",
                    f"-I{ROOT / 'c_core/test'}", str(ROOT / "c_core/targets/identity.c"), *sources, "-lm", "-o",
                    str(program)], check=True)
    last = subprocess.run([str(program)], capture_output=True, text=True, check=True).stdout.splitlines()[-1]
    assert f"{last}     in {real}" in PAGE
