#!/usr/bin/env bash
# The core on other targets: the same bits everywhere, sizes and instructions within budget. Debian 12, root.
set -euo pipefail
cd "$(dirname "$0")/.."

packages=(gcc clang-14 gcc-arm-none-eabi libnewlib-arm-none-eabi picolibc-arm-none-eabi qemu-system-arm qemu-system-misc
    qemu-user gcc-riscv64-unknown-elf picolibc-riscv64-unknown-elf gcc-s390x-linux-gnu libc6-dev-s390x-cross
    gcc-aarch64-linux-gnu libc6-dev-arm64-cross gcc-i686-linux-gnu libc6-dev-i386-cross)
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
c_core/targets/measure.sh
c_core/targets/run.sh
echo "targets: every check passed"
