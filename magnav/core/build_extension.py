"""Builds the C core with its cffi face. The declarations are read from the core's own header, so they cannot differ."""

import pathlib
import re

from setuptools.command.build_ext import build_ext

INCLUDE, SOURCE = pathlib.Path("c_core/include"), pathlib.Path("c_core/src")
# the core's own header first: the others build on its types
HEADERS = [INCLUDE / "magnav_core.h",
           *sorted(path for path in INCLUDE.glob("magnav_*.h") if path.stem not in ("magnav_core", "magnav_config"))]

# what the header says with the preprocessor, which cffi does not read
MACROS = """
typedef double magnav_real;
static const double MAGNAV_GRID_VARIATION_LATITUDE_DEG;
size_t MAGNAV_SNAPSHOT_REALS(int32_t degree);
"""


def declarations(header_texts):
    """The types, functions and whole-number macros of the headers, without other preprocessor lines."""
    text = re.sub(r"/\*.*?\*/", "", "\n".join(header_texts), flags=re.S)
    numbers = re.findall(r"^#define \w+ \d+[ ]*$", text, flags=re.M)
    text = re.sub(r"#ifdef __cplusplus.*?#endif", "", text, flags=re.S)
    text = re.sub(r"^#.*(?:\\\n.*)*$", "", text, flags=re.M)
    return "\n".join([MACROS, *numbers, text])


class BuildCore(build_ext):
    """Adds the generated face to the core's sources; MSVC and the others each get their flag against contraction."""

    def build_extension(self, ext):
        import cffi
        from cffi import recompiler

        ffi = cffi.FFI()
        ffi.cdef(declarations([header.read_text(encoding="utf-8") for header in HEADERS]))
        face = pathlib.Path(self.build_temp) / "core_face.c"
        face.parent.mkdir(parents=True, exist_ok=True)
        recompiler.make_c_source(ffi, ext.name, "".join(f'#include "{header.name}"\n' for header in HEADERS), str(face))
        ext.depends = [*map(str, HEADERS), *map(str, SOURCE.glob("*.h"))]
        ext.sources = [*sorted(map(str, SOURCE.glob("*.c"))), str(face)]
        msvc = self.compiler.compiler_type == "msvc"
        ext.extra_compile_args = ["/fp:precise"] if msvc else ["-std=c99", "-ffp-contract=off", "-fno-math-errno"]
        super().build_extension(ext)
