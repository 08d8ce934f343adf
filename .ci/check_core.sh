#!/usr/bin/env bash
# All checks of the C core on its own; installs the tools it needs (Debian 12, root). Exits non-zero on any failure.
set -euo pipefail
cd "$(dirname "$0")/../c_core"

packages=(gcc g++ make cmake clang-14 libclang-rt-14-dev cppcheck gcovr)
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

# debris of an earlier run must not pass for this one's
make -s clean
make -s all
make -s all REAL=float
for target in check compilers sanitize static sizes coverage; do
    echo "=== make $target"
    make -s "$target"
done
echo "=== make fuzz"
make -s fuzz FUZZ_SECONDS="${FUZZ_SECONDS:-10}"

for single in OFF ON; do
    echo "=== CMake, MAGNAV_SINGLE=$single"
    build="build-cmake-$single"
    cmake -S . -B "$build" -DMAGNAV_SINGLE="$single" -DCMAKE_BUILD_TYPE=Release -DCMAKE_COMPILE_WARNING_AS_ERROR=ON \
        >/dev/null
    cmake --build "$build" -j2 >/dev/null
    ctest --test-dir "$build" --output-on-failure
done
echo "=== the README's example"
awk '/^```c$/ {inside = 1; next} /^```$/ {inside = 0} inside' README.md >build/example.c
gcc -std=c99 -ffp-contract=off -Wall -Wextra -Werror -Iinclude build/example.c build/libmagnav_core.a -lm -o build/example
build/example

echo "C core: every check passed"
