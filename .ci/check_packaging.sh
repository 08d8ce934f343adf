#!/usr/bin/env bash
# Checks every way the C core is handed on: one file, CMake, pkg-config, folders for embedded package systems. Installs
# the tools it needs (Debian 12, root). Exits non-zero on any failure.
set -euo pipefail
ci=$(cd "$(dirname "$0")" && pwd)
core=$(cd "$ci/../c_core" && pwd)

packages=(gcc g++ make cmake clang-14 binutils pkg-config mawk gawk original-awk busybox python3 python3-yaml
    python3-kconfiglib)
missing=()
for package in "${packages[@]}"; do
    dpkg-query -W -f='${Status}' "$package" 2>/dev/null | grep -q 'ok installed' || missing+=("$package")
done
if [ "${#missing[@]}" -gt 0 ]; then
    echo "installing ${missing[*]}"
    export DEBIAN_FRONTEND=noninteractive
    apt-get update -qq
    apt-get install -y -qq --no-install-recommends "${missing[@]}" >/dev/null
fi

work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
warnings="-Wall -Wextra -Wconversion -Wdouble-promotion -Wshadow -pedantic -Werror"
exact="-std=c99 -ffp-contract=off -O2"
packaging="$core/packaging"
release=$(sed -n 's/^#define MAGNAV_CORE_RELEASE "\(.*\)"$/\1/p' "$core/include/magnav_core.h")

# /usr/bin/python3: the one that Debian's python3-yaml and python3-kconfiglib belong to
section() { printf '=== %s\n' "$*"; }
die() { echo "check_packaging: $*" >&2; exit 1; }
refused() { # $1: what it must say; the rest: the command, which must fail
    local words=$1
    shift
    if "$@" >"$work/refused.txt" 2>&1; then die "should have failed: $*"; fi
    grep -q "$words" "$work/refused.txt" || die "failed for another reason: $*: $(cat "$work/refused.txt")"
}
fused() { objdump -d "$1" | grep -cE '\sv?fn?m(add|sub|la|ls)' || true; }
fma=
if [ "$(uname -m)" = x86_64 ]; then fma=-mfma; fi
runs_fma() { [ -z "$fma" ] || grep -qw fma /proc/cpuinfo; }

# --- the reference: the library as its own Makefile's flags build it, its tests' output and the bits of its results
declare -A define=([double]="" [float]="-DMAGNAV_SINGLE")
tests=()
for file in "$core"/test/*.c; do
    case $file in */fuzz_*) ;; *) tests+=("$file") ;; esac
done
for real in double float; do
    mkdir -p "$work/reference-$real" "$work/program-$real"
    (cd "$work/reference-$real" && gcc $exact ${define[$real]} -I"$core/include" -c "$core"/src/*.c)
    (cd "$work/program-$real" && gcc $exact ${define[$real]} -I"$core/include" -c "${tests[@]}")
    gcc $exact -Wall -Wextra -pedantic -Werror ${define[$real]} -I"$core/include" -I"$core/test" \
        -c "$packaging/check/bits.c" -o "$work/bits-$real.o"
    gcc "$work/program-$real"/*.o "$work/reference-$real"/*.o -lm -o "$work/tests-$real"
    "$work/tests-$real" >"$work/tests-$real.txt"
    gcc "$work/bits-$real.o" "$work/reference-$real"/*.o -lm -o "$work/bits-$real"
    "$work/bits-$real" >"$work/bits-$real.txt"
done
cmp -s "$work/bits-double.txt" "$work/bits-float.txt" && die "double and float agree in every bit: nothing is compared"
[ "$(wc -l <"$work/bits-double.txt")" -gt 600 ] || die "few results to compare"

# $1: real; the rest: objects or a library. Its results must be the reference's, bit for bit.
same_bits() {
    local real=$1
    shift
    gcc "$work/bits-$real.o" "$@" -lm -lstdc++ -o "$work/bits-other"
    "$work/bits-other" >"$work/bits-other.txt"
    cmp "$work/bits-other.txt" "$work/bits-$real.txt" || die "other bits: $real $*"
}

section "amalgamation: the same from every awk"
sh "$packaging/amalgamate.sh" "$work/one"
for awk in "gawk --posix" original-awk "busybox awk" mawk; do
    mkdir -p "$work/bin"
    printf '#!/bin/sh\nexec %s "$@"\n' "$awk" >"$work/bin/awk"
    chmod +x "$work/bin/awk"
    for shell in sh "busybox sh"; do
        rm -rf "$work/again"
        PATH="$work/bin:$PATH" $shell "$packaging/amalgamate.sh" "$work/again"
        diff -r "$work/one" "$work/again" >/dev/null || die "$awk under $shell makes another amalgamation"
    done
done
rm -rf "$work/bin"
make -s -C "$core" amalgamation
cmp "$work/one/magnav.c" "$core/build/magnav.c"
cmp "$work/one/magnav.h" "$core/build/magnav.h"
refused usage sh "$packaging/amalgamate.sh"
refused usage sh "$packaging/amalgamate.sh" "$work/x" half

section "amalgamation: C99, C11 and C++17, no warnings, the library's results"
# its tests include the library's headers by name: each leads to the one header
mkdir -p "$work/by-name"
for header in "$core"/include/*.h; do
    echo '#include "magnav.h"' >"$work/by-name/${header##*/}"
done
for real in double float; do
    mkdir -p "$work/one-tests-$real"
    (cd "$work/one-tests-$real" && gcc $exact ${define[$real]} -I"$work/by-name" -I"$work/one" -c "${tests[@]}")
    for compiler in "gcc -std=c99" "gcc -std=c11" "clang-14 -std=c99" "clang-14 -std=c11" \
        "g++ -x c++ -std=c++17" "clang++-14 -x c++ -std=c++17"; do
        for level in -O0 -O2; do
            $compiler $warnings $level ${define[$real]} -c "$work/one/magnav.c" -o "$work/magnav.o"
        done
        gcc "$work/one-tests-$real"/*.o "$work/magnav.o" -lm -lstdc++ -o "$work/one-tests"
        "$work/one-tests" >"$work/one-tests.txt"
        cmp "$work/one-tests.txt" "$work/tests-$real.txt" || die "$compiler, $real: the tests measure otherwise"
        same_bits "$real" "$work/magnav.o"
        # a C++ program with the header alone
        printf '#include "magnav.h"\nint main() { return magnav_real_bytes() == sizeof(magnav_real) ? 0 : 1; }\n' \
            >"$work/user.cpp"
        g++ -std=c++17 $warnings ${define[$real]} -I"$work/one" "$work/user.cpp" "$work/magnav.o" -lm -o "$work/user"
        "$work/user"
        echo "$compiler, $real: $(tail -1 "$work/one-tests.txt")"
    done
done
sh "$packaging/amalgamate.sh" "$work/single" single
gcc -std=c99 $warnings -c "$work/single/magnav.c" -o "$work/magnav.o"
same_bits float "$work/magnav.o"

section "amalgamation: no contraction without the option, and no -ffast-math"
(mkdir "$work/loose" && cd "$work/loose" && gcc -std=gnu11 -O2 $fma -I"$core/include" -c "$core"/src/*.c)
[ "$(fused "$work/loose/synthesis.o")" -gt 0 ] || die "this compiler does not contract: nothing is tested"
for real in double float; do
    for compiler in "gcc -std=gnu11" "clang-14 -std=gnu11" "g++ -x c++ -std=gnu++17"; do
        $compiler -O3 $fma ${define[$real]} -c "$work/one/magnav.c" -o "$work/magnav.o"
        [ "$(fused "$work/magnav.o")" -eq 0 ] || die "$compiler contracts"
        if runs_fma; then same_bits "$real" "$work/magnav.o"; fi
    done
done
refused "without -ffast-math" gcc -ffast-math -c "$work/one/magnav.c" -o "$work/magnav.o"

section "amalgamation: equal names in two sources do not meet"
mkdir -p "$work/clash/c_core"
cp -r "$core/include" "$core/src" "$packaging" "$work/clash/c_core/"
cp "$core/../LICENSE" "$work/clash/"
for n in 1 2; do
    cat >"$work/clash/c_core/include/magnav_a$n.h" <<C
#ifndef MAGNAV_A${n}_H
#define MAGNAV_A${n}_H
#include "magnav_core.h"
$([ "$n" = 1 ] && echo '#include "magnav_a2.h"')
#ifdef __cplusplus
extern "C" {
#endif
$([ "$n" = 1 ] && echo 'typedef magnav_second magnav_first;' || echo 'typedef int32_t magnav_second;')
int32_t magnav_answer_$n(void);
#ifdef __cplusplus
}
#endif
#endif
C
    cat >"$work/clash/c_core/src/a$n.c" <<C
#include <float.h>
#include "magnav_a$n.h"
#define ANSWER $n
#define TWICE(x) (${n} * (x))
typedef struct pair {
    int32_t dot;
} pair;
typedef int32_t number;
enum kind { LOW = $n, HIGH };
static const struct {
    int32_t value;
} TABLE[] = {{ANSWER}};
static int32_t real_sqrt(number x)
{
    const pair p = {TWICE(x)};
    return p.dot;
}
static const char *const WORDS[2] = {"LOW", "TABLE"};
int32_t magnav_answer_$n(void) { return 1000 * real_sqrt(TABLE[0].value) + 10 * LOW + HIGH + WORDS[1][0] - 'T'; }
C
done
printf '%s\n' '#include <stdio.h>' '#include "magnav.h"' \
    'int main(void) { magnav_first f = magnav_answer_1();' \
    'printf("%d %d\n", (int)f, (int)magnav_answer_2()); return 0; }' \
    >"$work/clash/main.c"
sh "$work/clash/c_core/packaging/amalgamate.sh" "$work/clash/one"
for compiler in gcc g++ clang-14 clang++-14; do
    language=c
    case $compiler in *++*) language=c++ ;; esac
    $compiler -x $language $warnings -I"$work/clash/one" "$work/clash/main.c" "$work/clash/one/magnav.c" -lm \
        -o "$work/clash/main"
    [ "$("$work/clash/main")" = "1012 4023" ] || die "$compiler: two sources with equal names: $("$work/clash/main")"
done
printf '#ifdef MAGNAV_SINGLE\n#include <float.h>\n#endif\nint32_t magnav_none(void);\n' >"$work/clash/c_core/src/a3.c"
refused "depends on a condition" sh "$work/clash/c_core/packaging/amalgamate.sh" "$work/clash/two"

section "CMake and pkg-config, from a project of its own"
example="$packaging/example"
for real in double float; do
    single=OFF
    component=double
    other=single
    if [ "$real" = float ]; then single=ON component=single other=double; fi
    bytes=$([ "$real" = float ] && echo 4 || echo 8)
    here="$work/cmake-$real"
    build_example() { # $1: build folder; the rest: options
        local folder=$1
        shift
        cmake -S "$example" -B "$folder" -DCMAKE_COMPILE_WARNING_AS_ERROR=ON "$@" >/dev/null
        cmake --build "$folder" >/dev/null
        "$folder/heading_example" | tee "$work/example.txt"
        grep -q " $bytes-byte reals" "$work/example.txt"
    }
    cmake -S "$core" -B "$here/core" -DMAGNAV_SINGLE=$single -DBUILD_TESTING=OFF -DCMAKE_BUILD_TYPE=Release \
        -DCMAKE_INSTALL_PREFIX="$here/first" >/dev/null
    cmake --build "$here/core" -j2 >/dev/null
    cmake --install "$here/core" >/dev/null
    # what is installed may be moved, as into the root of a target
    mv "$here/first" "$here/installed"
    same_bits "$real" "$here/installed/lib/libmagnav_core.a"
    build_example "$here/found" -DCMAKE_PREFIX_PATH="$here/installed" -DMAGNAV_COMPONENTS=$component
    refused "NOT FOUND" cmake -S "$example" -B "$here/refused" \
        -DCMAKE_PREFIX_PATH="$here/installed" -DMAGNAV_COMPONENTS=$other
    # the user's own code keeps its own options
    grep -q 'fp-contract' "$here"/installed/lib/cmake/magnav_core/*.cmake && die "the package hands on its own options"
    # the sources inside another project that wants speed above all
    build_example "$here/inside" -DMAGNAV_SOURCE="$core" -DMAGNAV_SINGLE=$single -DCMAKE_C_FLAGS="-Ofast $fma"
    [ "$(fused "$here/inside/magnav_core/libmagnav_core.a")" -eq 0 ] || die "contraction inside another project"
    if runs_fma; then same_bits "$real" "$here/inside/magnav_core/libmagnav_core.a"; fi
    cmake --install "$here/inside" --prefix "$here/nothing" >/dev/null
    [ -z "$(find "$here/nothing" -type f 2>/dev/null)" ] || die "another project's install has the core's files"
    # pkg-config, also with a library folder of two levels
    cmake -S "$core" -B "$here/core" -DCMAKE_INSTALL_LIBDIR=lib/some-target >/dev/null
    cmake --install "$here/core" --prefix "$here/deep" >/dev/null
    for pc in "$here/installed/lib/pkgconfig" "$here/deep/lib/some-target/pkgconfig"; do
        export PKG_CONFIG_PATH="$pc"
        pkg-config --exact-version="$release" magnav_core
        gcc -std=c99 -Wall -Wextra -Werror $(pkg-config --cflags magnav_core) "$example/main.c" \
            $(pkg-config --libs magnav_core) -o "$work/pc-example"
        "$work/pc-example" | grep -q " $bytes-byte reals"
    done
done
# a user who forgets the define is told so by the example, and a limit set for the library reaches its users
gcc -std=c99 -I"$core/include" "$example/main.c" "$work/cmake-float/installed/lib/libmagnav_core.a" -lm -o "$work/wrong"
refused "reals of 4 bytes, this file of 8" "$work/wrong"
sed 's/magnav_core 0\.1 /magnav_core 0.2 /' "$example/CMakeLists.txt" >"$work/later.txt"
mkdir "$work/later" && cp "$work/later.txt" "$work/later/CMakeLists.txt" && cp "$example/main.c" "$work/later/"
cmp -s "$work/later.txt" "$example/CMakeLists.txt" && die "the example's version was not changed"
refused "compatible with requested version" cmake -S "$work/later" -B "$work/later/build" \
    -DCMAKE_PREFIX_PATH="$work/cmake-double/installed"
cmake -S "$core" -B "$work/limited" -DMAGNAV_SINGLE=ON -DMAGNAV_MAX_DEGREE=12 -DMAGNAV_MAX_TIME_ORDER=2 \
    -DBUILD_TESTING=OFF -DCMAKE_INSTALL_PREFIX="$work/limited/installed" >/dev/null
cmake --build "$work/limited" -j2 >/dev/null
cmake --install "$work/limited" >/dev/null
export PKG_CONFIG_PATH="$work/limited/installed/lib/pkgconfig"
gcc -std=c99 $(pkg-config --cflags magnav_core) "$packaging/check/settings.c" $(pkg-config --libs magnav_core) \
    -o "$work/settings"
[ "$("$work/settings")" = "real 4 4, degree 12 12, order 2" ] || die "limits by CMake: $("$work/settings")"

section "folders for embedded package systems"
for kind in zephyr esp-idf platformio arduino; do
    sh "$packaging/assemble.sh" $kind "$work/folders/$kind"
done
refused "not empty" sh "$packaging/assemble.sh" zephyr "$work/folders/zephyr"
refused usage sh "$packaging/assemble.sh" something "$work/x"
/usr/bin/python3 "$ci/check_manifests.py" manifests "$core/.." "$work/folders" "$work/cmake-double/installed"

# $1: name of the stand-in; $2: its variable for the folder; $3: Kconfig; $4: expected settings; the rest: symbols
stand_in() {
    local kind=$1 variable=$2 file=$3 expected=$4 config program
    shift 4
    config=$(/usr/bin/python3 "$ci/check_manifests.py" kconfig "$work/folders/$kind/$file" "$@")
    for program in "$packaging/check/settings.c" "$example/main.c"; do
        rm -rf "$work/stand-in"
        cmake -S "$packaging/check/$kind" -B "$work/stand-in" "-D$variable=$work/folders/$kind" -DPROGRAM="$program" \
            -DCMAKE_C_FLAGS="-std=gnu17 -Os -Wall -Wextra -Werror $fma" $config >/dev/null
        cmake --build "$work/stand-in" -j2 >/dev/null
        "$work/stand-in/program" >"$work/stand-in.txt"
        case $program in *settings.c) [ "$(cat "$work/stand-in.txt")" = "$expected" ] ||
            die "$kind, $*: $(cat "$work/stand-in.txt"), not $expected" ;; esac
    done
    [ "$(fused "$(find "$work/stand-in" -name '*.a')")" -eq 0 ] || die "$kind contracts"
    if runs_fma; then
        case $expected in
        "real 4"*) same_bits float "$(find "$work/stand-in" -name '*.a')" ;;
        *) same_bits double "$(find "$work/stand-in" -name '*.a')" ;;
        esac
    fi
    echo "$kind ${*:-default}: $expected"
}
for real in double float; do
    gcc -std=c99 ${define[$real]} -I"$core/include" "$packaging/check/settings.c" "$work/reference-$real"/*.o -lm \
        -o "$work/settings"
    # what Kconfig has by default is what the header has
    default=$("$work/settings")
    value=$([ "$real" = float ] && echo y || echo n)
    stand_in zephyr MODULE zephyr/Kconfig "$default" MAGNAV=y MAGNAV_SINGLE=$value
    stand_in esp-idf COMPONENT Kconfig "$default" MAGNAV_SINGLE=$value
done
limits="MAGNAV_SINGLE=y MAGNAV_MAX_DEGREE=12 MAGNAV_MAX_TIME_ORDER=2"
stand_in zephyr MODULE zephyr/Kconfig "real 4 4, degree 12 12, order 2" MAGNAV=y $limits
stand_in esp-idf COMPONENT Kconfig "real 4 4, degree 12 12, order 2" $limits
refused "MAGNAV_MAX_DEGREE" /usr/bin/python3 "$ci/check_manifests.py" kconfig "$work/folders/esp-idf/Kconfig" \
    MAGNAV_SINGLE=y MAGNAV_MAX_DEGREE=25

for real in double float; do
    folder="$work/folders/platformio"
    flags=$(/usr/bin/python3 -c 'import json, sys; print(*json.load(open(sys.argv[1]))["build"]["flags"])' \
        "$folder/library.json")
    mkdir "$work/platformio-$real"
    # a framework's usual options, the library's flags after them
    (cd "$work/platformio-$real" && gcc -std=gnu11 -Os $fma ${define[$real]} $flags -Wall -Wextra -Werror \
        -I"$folder/include" -I"$folder/src" -c "$folder"/src/*.c)
    if runs_fma; then same_bits "$real" "$work/platformio-$real"/*.o; fi
done
echo "platformio: flags $flags"

sh "$packaging/assemble.sh" arduino "$work/folders/arduino-single" single
for real in double float; do
    folder="$work/folders/arduino$([ "$real" = float ] && echo -single || true)"
    # the sources as C, the sketch as C++ with Arduino.h before it; src/ alone is on the path
    gcc -std=gnu11 -Os $fma -Wall -Wextra -Werror -I"$folder/src" -c "$folder/src/magnav.c" -o "$work/arduino.o"
    if runs_fma; then same_bits "$real" "$work/arduino.o"; fi
    for sketch in "$folder"/examples/*/*.ino; do
        { echo '#include <Arduino.h>'; cat "$sketch"; echo 'int main() { setup(); loop(); return 0; }'; } \
            >"$work/sketch.cpp"
        for standard in gnu++11 gnu++17; do
            g++ -std=$standard $warnings -I"$folder/src" -I"$packaging/check/arduino" "$work/sketch.cpp" \
                "$work/arduino.o" -lm -o "$work/sketch"
        done
        "$work/sketch" | tee "$work/sketch.txt"
        # 20 uT to the left of forward is 90 deg magnetic; the dipole's declination, by its closed form, is -13.4006 deg
        grep -q '^76\.60 deg true' "$work/sketch.txt"
    done
done

section "the README's commands"
(cd "$core/.." && awk '/^## Put it into your build/ {on = 1; next} /^## / {on = 0}
    on && /^```sh$/ {inside = 1; next} /^```$/ {inside = 0} inside' c_core/README.md >"$work/readme.sh"
    grep -q 'cmake --install' "$work/readme.sh" && grep -q 'assemble.sh' "$work/readme.sh"
    cp -r c_core LICENSE "$work/" && rm -rf "$work"/c_core/build* && cd "$work" && sh -eu readme.sh)

echo "packaging: every check passed"
