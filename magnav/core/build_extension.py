"""Builds the C core with its cffi face. The declarations are read from the core's own header, so they cannot differ."""

import pathlib
import re

from setuptools.command.build_ext import build_ext

MODULE = "magnav.core._core"
HEADER = pathlib.Path("c_core/include/magnav_core.h")

# what the header says with the preprocessor, which cffi does not read
MACROS = """
typedef double magnav_real;
#define MAGNAV_FLAG_COUNT ...
static const double MAGNAV_GRID_VARIATION_LATITUDE_DEG;
size_t MAGNAV_SNAPSHOT_REALS(int32_t degree);
"""


def declarations(header_text):
    """The types and functions of the header, without preprocessor lines and the C++ guard."""
    text = re.sub(r"/\*.*?\*/", "", header_text, flags=re.S)
    text = re.sub(r"#ifdef __cplusplus.*?#endif", "", text, flags=re.S)
    text = re.sub(r"^#.*(?:\\\n.*)*$", "", text, flags=re.M)
    return MACROS + text


class BuildCore(build_ext):
    """Adds the generated face to the core's sources; MSVC and the others each get their flag against contraction."""

    def build_extension(self, ext):
        import cffi
        from cffi import recompiler

        ffi = cffi.FFI()
        ffi.cdef(declarations(HEADER.read_text(encoding="utf-8")))
        face = pathlib.Path(self.build_temp) / "core_face.c"
        face.parent.mkdir(parents=True, exist_ok=True)
        recompiler.make_c_source(ffi, ext.name, '#include "magnav_core.h"', str(face))
        ext.sources = [*ext.sources, str(face)]
        msvc = self.compiler.compiler_type == "msvc"
        ext.extra_compile_args = ["/fp:precise"] if msvc else ["-std=c99", "-ffp-contract=off", "-fno-math-errno"]
        super().build_extension(ext)
