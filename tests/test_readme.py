"""The README's Python example runs as it stands, and its first screen says what it must."""

import pathlib
import re

from magnav.caution import CAUTION

ROOT = pathlib.Path(__file__).parents[1]


def test_python_example_runs(monkeypatch, capsys):
    monkeypatch.chdir(ROOT)
    text = (ROOT / "README.md").read_text(encoding="utf-8")
    (example,) = re.findall(r"```python\n(.*?)```", text, flags=re.S)
    exec(compile(example, "README.md", "exec"), {})
    assert len(capsys.readouterr().out.splitlines()) == 3


def test_caution_is_said_where_people_look():
    words = "only means of safety-critical navigation"
    assert words in CAUTION
    for name in ("README.md", "docs/command.md", "docs/calibration.md", "c_core/include/magnav_core.h"):
        assert words in re.sub(r"[\s*]+", " ", (ROOT / name).read_text(encoding="utf-8")), name
