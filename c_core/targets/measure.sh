#!/usr/bin/env bash
# Sizes, stack and instruction counts on Cortex-M, held against budget.csv; exits 1 past a budget, 2 without a tool.
# (The image of WMM2025, 1,092 bytes, has its limit in tests/test_firmware_image.py.)
set -euo pipefail
cd "$(dirname "$0")/.."
for tool in arm-none-eabi-gcc arm-none-eabi-nm qemu-system-arm; do
    command -v "$tool" >/dev/null || { echo "missing: $tool"; exit 2; }
done
out=$(mktemp -d)
trap 'rm -rf "$out"' EXIT
flags="-std=c99 -Os -ffp-contract=off -fno-math-errno -DMAGNAV_SINGLE -DMAGNAV_MAX_DEGREE=12 -Iinclude -Itest
       -ffunction-sections -fdata-sections -mthumb"
picolibc="--specs=picolibc.specs --oslib=semihost --crt0=hosted -Wl,--gc-sections -T picolibc.ld
          -Wl,--defsym=__flash=0x00000000 -Wl,--defsym=__flash_size=0x00040000 -Wl,--defsym=__ram=0x20000000
          -Wl,--defsym=__stack_size=0x1000"
semihosting="-nographic -monitor none -serial none -chardev stdio,id=c0 -semihosting-config enable=on,target=native,chardev=c0"

# the evaluator alone: what a program that takes a snapshot and evaluates a field links of the core
evaluator() {
    cat >"$out/use.c" <<'C'
#include "magnav_core.h"
extern magnav_real memory[MAGNAV_SNAPSHOT_REALS(12)];
int main(void)
{
    extern const magnav_model model;
    magnav_snapshot snapshot;
    magnav_field_values field;
    magnav_real vector[3];
    return magnav_snapshot_at(&model, 2026, 0, memory, MAGNAV_SNAPSHOT_REALS(12), &snapshot) +
           magnav_vector_at(&snapshot, 47, 11, 0, vector) + magnav_field_at(&snapshot, 47, 11, 0, &field);
}
C
    mkdir -p "$out/objects"
    for file in src/*.c; do
        # shellcheck disable=SC2086
        arm-none-eabi-gcc $flags $core -fstack-usage -c "$file" -o "$out/objects/$(basename "$file" .c).o"
    done
    # shellcheck disable=SC2086
    arm-none-eabi-gcc $flags $core -c "$out/use.c" -o "$out/use.o"
    # shellcheck disable=SC2086
    arm-none-eabi-gcc $core -mthumb -nostdlib -Wl,--gc-sections -Wl,-e,main -Wl,--unresolved-symbols=ignore-all \
        "$out/use.o" "$out"/objects/*.o -o "$out/use.elf"
    local use
    use=$(arm-none-eabi-size "$out/use.o" | awk 'NR == 2 {print $1}')
    arm-none-eabi-size "$out/use.elf" | awk -v use="$use" 'NR == 2 {
        print "code and constant tables of the evaluator (float; degree 12; -Os)," $1 - use; print "static RAM," $2 + $3}'
}

# the deepest chain of magnav_field_at: itself, the synthesis, what that calls (the frames of -fstack-usage)
stack() {
    cat "$out"/objects/*.su | awk '{split($1, part, ":"); name = part[length(part)]; sub(/\..*/, "", name);
        if ($2 > frame[name]) frame[name] = $2}
        END {branch = frame["synthesise"] + frame["add_order"]; other = frame["locate"] + frame["magnav_sincos_deg"];
             third = frame["magnav_elements"] + frame["magnav_atan2_deg"];
             if (other > branch) branch = other; if (third > branch) branch = third;
             print "deepest stack of magnav_field_at," frame["magnav_field_at"] + branch}'
}

board() { # RAM size, ticks, machine
    # shellcheck disable=SC2086
    arm-none-eabi-gcc $flags $core -DPER_TICK="$2" targets/instructions.c src/*.c $picolibc \
        -Wl,--defsym=__ram_size="$1" -lm -o "$out/count.elf"
    # shellcheck disable=SC2086
    timeout 120 qemu-system-arm -M "$3" $semihosting -icount shift=5 -kernel "$out/count.elf" </dev/null
}

core="-mcpu=cortex-m4 -mfloat-abi=hard -mfpu=fpv4-sp-d16"
{ evaluator; stack; board 0x00010000 1250 mps2-an386; } >"$out/m4f.csv"
core="-mcpu=cortex-m0"
{ evaluator; stack; board 0x00004000 1953 microbit; } >"$out/m0.csv"

echo "Cortex-M0 (soft float), for information"
awk -F, '{printf "  %-64s %8d\n", $1, $2}' "$out/m0.csv"
echo "Cortex-M4F, with budgets"
awk -F, 'NR == FNR { if ($0 !~ /^#/) budget[$2] = $4; next }
    $1 in budget { over = $2 > budget[$1]; bad += over; seen[$1] = 1
        printf "  %-64s %8d  of %8d%s\n", $1, $2, budget[$1], over ? "  PAST THE BUDGET" : "" }
    END { for (what in budget) if (!(what in seen)) { print "  not measured: " what; bad++ }; exit bad > 0 }' targets/budget.csv "$out/m4f.csv"
