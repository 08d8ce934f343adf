"""The models shipped: figure by figure what was published, and what their names mean."""

import hashlib
import importlib.resources
import tomllib

import derive_history_sigma
import numpy as np
import pytest

import magnav
from magnav.errors import InputError
from magnav.field import catalogue
from magnav.field.coefficients import term_index

MODELS = importlib.resources.files("magnav.field") / "models"


def test_wmm2025_is_the_published_file():
    """SHA-256 and MD5 of the coefficient file that NOAA NCEI and BGS published on 2024-11-13."""
    content = (MODELS / "WMM2025.COF").read_bytes()
    assert hashlib.sha256(content).hexdigest() == "dfa8597825af4e0b87ff4198a5b4fb661b3c49f4cd090cd0164e0259b075582f"
    assert hashlib.md5(content).hexdigest() == "a1b6402dd23658d15affb0f31babccc7"


def test_every_file_has_the_digest_in_the_catalogue():
    for entry in catalogue._catalogue():
        assert hashlib.sha256((MODELS / entry["file"]).read_bytes()).hexdigest() == entry["sha256"], entry["name"]


@pytest.mark.parametrize("name", ["wmm2025", "wmm2020", "wmm2015v2"])
def test_wmm_figures(shared, name):
    """Every coefficient against the published figures (NOAA NCEI and BGS)."""
    polynomials = magnav.load_model(name).coefficients.polynomials
    rows = [line.split(",") for line in (shared / "reference/coefficients" / f"{name}.csv").read_text().splitlines()
            if line[0] not in "#n"]
    assert len(rows) == 90
    for n, m, g, h, g_rate, h_rate in rows:
        assert polynomials[0, :, term_index(int(n), int(m))].tolist() == [float(g), float(g_rate)]
        if int(m):
            assert polynomials[0, :, term_index(int(n), int(m), sine=True)].tolist() == [float(h), float(h_rate)]


def test_igrf14_figures(shared):
    """Every coefficient of every epoch against the published table (IAGA Division V-MOD, 2024)."""
    coefficients = magnav.load_model("IGRF-14").coefficients
    lines = (shared / "reference/coefficients/igrf14.csv").read_text().splitlines()[1:]
    years = [float(y) for y in lines[0].split(",")[3:-1]]
    assert coefficients.breaks_yr.tolist() == [*years, 2030.0]
    for kind, n, m, *values in (line.split(",") for line in lines[1:]):
        term = term_index(int(n), int(m), sine=kind == "h")
        assert coefficients.polynomials[:, 0, term].tolist() == [float(v) for v in values[:-1]]
        assert coefficients.polynomials[-1, 1, term] == pytest.approx(float(values[-1]), abs=1e-9)


def test_gufm1_figures(shared):
    """The spline coefficients as published (Jackson, Jonkers and Walker 2000), to the thousandth."""
    published = [line for line in (shared / "reference/coefficients/gufm1.csv").read_text().splitlines()
                 if not line.startswith("#")]
    ours = [line for line in (MODELS / "gufm1.csv").read_text().splitlines() if not line.startswith("#")]
    assert ours == published


def test_history_figures_are_what_their_derivation_prints(capsys):
    """Our estimate: the catalogue's tables can be made again from the models and the published WMM2025 figures."""
    derive_history_sigma.main()
    igrf, gufm1 = capsys.readouterr().out.removeprefix("IGRF-14\n").split("gufm1\n")
    for name, printed in (("IGRF-14", igrf), ("gufm1", gufm1)):
        kept = catalogue._entry(name)["error_model"]
        derived = tomllib.loads(printed)
        assert derived.keys() == kept.keys() - {"source", "declination_floor_deg"}
        for key, values in derived.items():
            assert values == pytest.approx(kept[key], abs=0.0101 if key == "inclination_deg" else 1.01), (name, key)


def test_names():
    assert magnav.model_names()[0] == "WMM2025"
    assert set(magnav.model_names()) == {"WMM2025", "WMM2020", "WMM2015v2", "IGRF-14", "gufm1"}
    for said, meant in (("wmm-2025", "WMM2025"), ("igrf14", "IGRF-14"), ("IGRF", "IGRF-14"), ("GUFM1", "gufm1"),
                        ("WMM 2015", "WMM2015v2")):
        assert magnav.load_model(said).name == meant
    assert magnav.load_model().name == "WMM2025"
    assert magnav.load_model("igrf14") is magnav.load_model("IGRF-14")
    with pytest.raises(InputError, match="neither a model's name"):
        magnav.load_model("WMM1999")


def test_a_model_carries_what_it_is():
    model = magnav.load_model("WMM2025")
    assert model.degree == 12 and model.epoch_yr == model.valid_from_yr == 2025.0 and model.valid_until_yr == 2030.0
    assert "NOAA NCEI and BGS" in model.source and model.title == "World Magnetic Model 2025"
    assert repr(model) == "<Model WMM2025: degree 12, valid 2025 to 2030>"
    assert "gufm1" in repr(magnav.load_model("auto"))


def test_a_file_of_a_shipped_model_keeps_its_error_figures(tmp_path):
    copy = tmp_path / "elsewhere.cof"
    copy.write_bytes((MODELS / "WMM2020.COF").read_bytes())
    assert magnav.load_model(copy).error_model["north_nT"] == 131
    text = copy.read_text().replace("-29404.5", "-29404.6")
    copy.write_text(text, newline="\n")
    changed = magnav.load_model(str(copy))
    assert changed.error_model["north_nT"] == 137 and changed.title == "WMM-2020"
    assert changed.field(50, 10, when=2021).north_nT != magnav.load_model("WMM2020").field(50, 10, when=2021).north_nT


def test_forecast_error_figures():
    """Worldwide RMS of WMM2020 carried forward minus IGRF-14, and of neighbouring models at the seams: the published
    models' own figures, here recomputed on an equal-area sample to the digits of the measured table."""
    k = np.arange(4000) + 0.5
    lat, lon = np.degrees(np.arcsin(1 - 2 * k / 4000)), (k * 222.49223594996) % 360

    def rms(one, other, year, name):
        a, b = (magnav.load_model(n).field(lat, lon, when=year) for n in (one, other))
        return np.sqrt(np.mean((getattr(a, name) - getattr(b, name)) ** 2))

    table = {2021.0: (12.4, 12.1, 20.3), 2022.0: (20.8, 22.3, 36.4), 2023.0: (29.7, 32.9, 53.1),
             2024.0: (38.8, 43.5, 70.0), 2025.0: (47.9, 54.2, 86.9)}
    for year, figures in table.items():
        found = [rms("WMM2020", "IGRF-14", year, n) for n in ("north_nT", "east_nT", "down_nT")]
        assert found == pytest.approx(figures, rel=0.02)
    found = [rms("WMM2015v2", "WMM2020", 2020.0, n) for n in ("north_nT", "east_nT", "down_nT")]
    assert found == pytest.approx((9.4, 14.6, 21.1), rel=0.03)
    found = [rms("WMM2025", "IGRF-14", 2025.0, n) for n in ("north_nT", "east_nT", "down_nT")]
    assert found == pytest.approx((6.6, 5.1, 8.8), rel=0.03)
