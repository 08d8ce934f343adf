#!/usr/bin/env bash
# Builds identity.c for every target, runs it natively or under an emulator, and holds the hashes against each other.
#   run.sh        all targets; exits 1 on any difference and 2 where a tool is missing
# Double results must agree among all targets, float results among themselves.
set -euo pipefail
cd "$(dirname "$0")/.."

out=$(mktemp -d)
trap 'rm -rf "$out"' EXIT
flags="-std=c99 -ffp-contract=off -fno-math-errno -Iinclude -Itest"
sources="targets/identity.c $(echo src/*.c)"
limit=900

need() { command -v "$1" >/dev/null || { echo "missing: $1"; exit 2; }; }

# name, points, real ("" or -DMAGNAV_SINGLE), compiler and its flags, then after -- how to run
target() {
    local name=$1 points=$2 real=$3 label
    shift 3
    local build=()
    while [ "$1" != -- ]; do build+=("$1"); shift; done
    shift
    label="$name $([ -n "$real" ] && echo float || echo double)"
    need "${build[0]}"
    # shellcheck disable=SC2086
    "${build[@]}" $flags $real -DPOINTS="$points" $sources -o "$out/$name$real" ${LINK:-} -lm 2>"$out/log" ||
        { echo "$label: does not build"; cat "$out/log"; exit 1; }
    local began=$SECONDS
    timeout "$limit" "$@" "$out/$name$real" </dev/null >"$out/$name$real.txt" 2>"$out/log" ||
        { echo "$label: does not run"; tail -5 "$out/log"; exit 1; }
    # a run that prints nothing must not pass for one that agrees
    grep -q "^all $points " "$out/$name$real.txt" || { echo "$label: no hash of $points points"; exit 1; }
    echo "$(grep '^all' "$out/$name$real.txt" | tail -1)  $label  $((SECONDS - began)) s"
}

native() {
    local real=$1 level
    for level in -O0 -O2 -O3 "-O3 -march=native"; do
        local name=${level// /}
        name=${name//=/-} # env would take a name with = for a variable
        # shellcheck disable=SC2086
        target "gcc$name" 1000000 "$real" gcc $level -- env
        # shellcheck disable=SC2086
        target "clang$name" 1000000 "$real" clang-14 $level -- env
    done
}

picolibc() { # ram start, ram size, flash start, flash size
    LINK="-T picolibc.ld -Wl,--defsym=__flash=$3 -Wl,--defsym=__flash_size=$4 -Wl,--defsym=__ram=$1"
    LINK="$LINK -Wl,--defsym=__ram_size=$2 -Wl,--defsym=__stack_size=0x1800"
}

semihosting="-nographic -monitor none -serial none -chardev stdio,id=c0 -semihosting-config enable=on,target=native,chardev=c0"
arm="arm-none-eabi-gcc --specs=picolibc.specs --oslib=semihost --crt0=hosted -O2 -mthumb"

emulated() {
    local real=$1
    target i686-sse2 20000 "$real" i686-linux-gnu-gcc -O2 -msse2 -mfpmath=sse -static -- env
    target aarch64 20000 "$real" aarch64-linux-gnu-gcc -O2 -static -- qemu-aarch64
    # s390x: in float the compiler would compute wider than the type
    target s390x 20000 "$real" s390x-linux-gnu-gcc -O2 -static ${real:+-fexcess-precision=fast} -- qemu-s390x
    picolibc 0x20000000 0x00010000 0x00000000 0x00040000
    # in double, the run-time library's addition is replaced by a correct one
    local plain=$LINK
    [ -n "$real" ] || LINK="ports/thumb2_double.c $LINK -Wl,--wrap=__aeabi_dadd,--wrap=__aeabi_dsub,--wrap=__aeabi_drsub"
    # shellcheck disable=SC2086
    target cortex-m4f 20000 "$real" $arm -mcpu=cortex-m4 -mfloat-abi=hard -mfpu=fpv4-sp-d16 -- \
        qemu-system-arm -M mps2-an386 $semihosting -kernel
    LINK=$plain
    # shellcheck disable=SC2086
    target cortex-m7 20000 "$real" $arm -mcpu=cortex-m7 -mfloat-abi=hard -mfpu=fpv5-d16 -- \
        qemu-system-arm -M mps2-an500 -cpu cortex-m7 $semihosting -kernel
    picolibc 0x20000000 0x00004000 0x00000000 0x00040000
    # shellcheck disable=SC2086
    target cortex-m0 20000 "$real" $arm -mcpu=cortex-m0 -- qemu-system-arm -M microbit $semihosting -kernel
    picolibc 0x80200000 0x00200000 0x80000000 0x00200000
    # shellcheck disable=SC2086
    target riscv32 20000 "$real" riscv64-unknown-elf-gcc --specs=picolibc.specs --oslib=semihost --crt0=hosted -O2 \
        -march=rv32imac -mabi=ilp32 -- qemu-system-riscv32 -M virt -bios none $semihosting -kernel
    LINK=""
}

agree() { # real: every hash of a group and a count must be one and the same
    local real=$1 kind=$2 differing
    differing=$(cat "$out"/*"$real".txt | sort -u | awk '{print $1 " *" $2}' | uniq -d)
    if [ -n "$differing" ]; then
        echo "$kind: the bits differ in:"
        echo "$differing" | while read -r group; do grep -H "^$group" "$out"/*"$real".txt | sed "s|$out/||"; done
        return 1
    fi
    echo "$kind: the same bits on every target"
}

gcc -std=c99 -O2 ports/thumb2_double.c targets/check_port.c -o "$out/port" -lm
echo "addition for Thumb-2 against this processor's: $("$out/port")"
for tool in qemu-system-arm qemu-system-riscv32 qemu-aarch64 qemu-s390x; do need "$tool"; done
native ""
emulated ""
agree "" double
rm -f "$out"/*.txt
native -DMAGNAV_SINGLE
emulated -DMAGNAV_SINGLE
agree -DMAGNAV_SINGLE float
