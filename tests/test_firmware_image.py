"""The binary image of a model: the same bits as the desk's, small, and no error goes unseen."""

import importlib.resources
import subprocess
import zlib

import numpy as np
import pytest

import magnav
from magnav import core
from magnav.errors import CoefficientFileError, InputError
from magnav.field.model import Model
from magnav.firmware.image import c_source, make_image

POINTS = ([89.99999999, -90.0, 0.0, 52.5, -33.0], [10.0, -77.0, 180.0, 13.3, 151.0], [0.0, 1e5, -500.0, 40.0, 8e5])


def from_image(tmp_path, image):
    path = tmp_path / "model.image"
    path.write_bytes(image.content)
    return magnav.load_model(path)


@pytest.mark.parametrize("name", ["WMM2025", "WMM2020", "WMM2015v2"])
def test_image_of_wmm_gives_the_same_bits(tmp_path, name):
    model = magnav.load_model(name)
    image = make_image(model)
    assert image.largest_difference_nT == 0.0
    assert len(image.content) <= 1536
    back = from_image(tmp_path, image)
    assert (back.name, back.degree, back.valid_from_yr) == (name, 12, model.valid_from_yr)
    for year in model.valid_from_yr + np.array([-2.0, 0.0, 1.7, 5.0, 9.9]):
        one, other = (m.field(*POINTS, when=year, extrapolate=True) for m in (model, back))
        for element in core.FIELD_DTYPE.names:
            assert np.array_equal(getattr(one, element), getattr(other, element), equal_nan=True), element


def test_images_of_the_others_say_how_far_they_are(tmp_path):
    """IGRF's slopes are quotients: the last bit only. gufm1's cubics are no decimals: rounded to 32 bits."""
    for name, limit in (("IGRF-14", 1e-12), ("gufm1", 1e-4)):
        model = magnav.load_model(name)
        image = make_image(model)
        assert 0 < image.largest_difference_nT < limit
        back = from_image(tmp_path, image)
        one, other = model.coefficients, back.coefficients
        assert np.abs(other.polynomials - one.polynomials).max() == image.largest_difference_nT
        assert np.array_equal(other.breaks_yr, one.breaks_yr)


def test_years_wanted_cut_the_pieces(tmp_path):
    model = magnav.load_model("IGRF-14")
    image = make_image(model, 2021.0, 2029.5)
    assert len(image.content) < 2500
    back = from_image(tmp_path, image)
    assert (back.valid_from_yr, back.valid_until_yr) == (2021.0, 2029.5)
    assert back.coefficients.breaks_yr.tolist() == [2020.0, 2025.0, 2030.0]
    one, other = (m.field(50, 10, when=2023.3).north_nT for m in (back, model))
    assert one == pytest.approx(other, abs=1e-9)
    with pytest.raises(InputError, match="hold nothing of IGRF-14"):
        make_image(model, 2040.0, 2050.0)


def test_a_static_model_is_valid_for_ever(tmp_path):
    path = tmp_path / "crust.shc"
    path.write_text("# a crust\n1 1 1 1 1\n2020.0\n1 0 5.25\n1 1 -3.5\n1 -1 0.125\n", encoding="ascii")
    back = from_image(tmp_path, make_image(magnav.load_model(path)))
    assert back.valid_from_yr == -np.inf and back.valid_until_yr == np.inf
    assert back.field(10, 20, when=1500).total_nT > 0


def test_checksum_is_the_published_one():
    """CRC-32 of IEEE 802.3 by the standard library's zlib."""
    data = np.random.default_rng(3).integers(0, 256, 999, dtype=np.uint8).tobytes()
    assert core.lib.magnav_crc32(core.ffi.from_buffer("uint8_t[]", data), len(data)) == zlib.crc32(data)


def test_every_error_of_one_two_bits_and_bursts_is_detected():
    """The checksum is linear over GF(2): an error goes unseen only if the syndromes of its bits cancel.

    Exhaustive over the image: all syndromes differ from zero and from each other (every one- and two-bit error), and
    those of any 32 neighbouring bits are independent (every burst up to 32 bits, wherever it starts).
    """
    content = make_image(magnav.load_model("WMM2025")).content
    size = len(content)
    table = [zlib.crc32(bytes([value]), 0xFFFFFFFF) ^ zlib.crc32(b"\0", 0xFFFFFFFF) for value in range(256)]
    syndromes = []
    for position in range(8 * size):
        byte, bit = divmod(position, 8)
        if byte >= size - 4:
            # an error in the stored checksum itself
            syndromes.append(1 << (8 * (byte - size + 4) + bit))
            continue
        crc = table[1 << bit]
        for _ in range(size - 4 - byte - 1):
            crc = (crc >> 8) ^ table[crc & 0xFF]
        syndromes.append(crc)
    # the linear model is the checksum: check it on real images
    rng = np.random.default_rng(5)
    for position in rng.integers(0, 8 * (size - 4), 50):
        bad = bytearray(content)
        bad[position // 8] ^= 1 << (position % 8)
        assert zlib.crc32(bytes(bad[:-4])) ^ zlib.crc32(content[:-4]) == syndromes[position]
        assert not core.image_is_sound(bytes(bad))
    assert 0 not in syndromes and len(set(syndromes)) == len(syndromes)
    for start in range(8 * size - 31):
        basis = {}
        for value in syndromes[start:start + 32]:
            while value and value.bit_length() in basis:
                value ^= basis[value.bit_length()]
            assert value, f"a burst from bit {start} would go unseen"
            basis[value.bit_length()] = value


def test_damaged_files_are_refused(tmp_path):
    content = make_image(magnav.load_model("WMM2025")).content
    path = tmp_path / "model.image"
    for bad in (content[:-1], content + b"\0", content[:4] + b"\2\0" + content[6:], content[:500] + content,
                content[:4], content[:600] + make_image(magnav.load_model("WMM2020")).content[600:]):
        path.write_bytes(bad)
        with pytest.raises(CoefficientFileError, match="damaged"):
            magnav.load_model(path)


def test_what_does_not_fit_is_refused():
    import dataclasses

    model = magnav.load_model("WMM2025")
    odd = dataclasses.replace(model.coefficients, breaks_yr=np.array([2025.000001, 2030.0]))
    with pytest.raises(InputError, match="years to four decimals"):
        make_image(Model(odd, model.error_model))
    with pytest.raises(InputError, match="not a name in C"):
        c_source(make_image(model), "2bad name")


def test_c_source_compiles_alone_and_holds_the_image(tmp_path):
    image = make_image(magnav.load_model("WMM2025"))
    source = tmp_path / "wmm.c"
    source.write_text(c_source(image, "wmm2025"), encoding="ascii")
    main = tmp_path / "main.c"
    main.write_text("#include <stdint.h>\n#include <stdio.h>\nextern const uint8_t wmm2025[];\n"
                    "extern const uint32_t wmm2025_size;\n"
                    "int main(void) { return fwrite(wmm2025, 1, wmm2025_size, stdout) != wmm2025_size; }\n")
    program = tmp_path / "program"
    subprocess.run(["cc", "-std=c99", "-Wall", "-Wextra", "-pedantic", "-Werror", str(source), str(main), "-o",
                    str(program)], check=True)
    assert subprocess.run([str(program)], capture_output=True, check=True).stdout == image.content


def test_images_read_as_the_shipped_model_keep_its_error_figures(tmp_path):
    back = from_image(tmp_path, make_image(magnav.load_model("WMM2020")))
    assert back.error_model["north_nT"] == 131
    assert (importlib.resources.files("magnav.field") / "models" / "WMM2020.COF").is_file()
