/* Instructions of the core's calls on a Cortex-M, read from SysTick while the emulator counts (-icount shift=5). */
#include <stdint.h>
#include <stdio.h>
#include <string.h>

#include "magnav_calibrator.h"
#include "magnav_core.h"
#include "magnav_patch.h"
#include "wmm2025_data.h"

#define SYSTICK ((volatile uint32_t *)0xE000E010u) /* control, reload, current */
#define TERMS (12 * 14)
/* instructions a tick, in thousandths: depends on the board's clock */
#ifndef PER_TICK
#define PER_TICK 1250
#endif

static magnav_real polynomials[2 * TERMS];
static magnav_real memory[MAGNAV_SNAPSHOT_REALS(12)];
static uint32_t overhead;

static uint32_t now(void)
{
    return SYSTICK[2];
}

static void report(const char *what, uint32_t from, uint32_t to)
{
    const uint32_t ticks = ((from - to) & 0xFFFFFFu) - overhead;
    printf("instructions of %s,%lu\n", what, (unsigned long)((uint64_t)ticks * PER_TICK / 1000));
}

int main(void)
{
    static const magnav_real breaks[2] = {2025, 2030};
    const magnav_model model = {breaks, polynomials, 2025, 2030, 12, 2, 1};
    const magnav_real mag[3] = {21, -3, 44};
    static const magnav_real terms[3 * 29] = {20000, 1500, 43000};
    const magnav_patch patch = {terms, {47, 13, 2000, 2027}, {(magnav_real)0.5, (magnav_real)0.25, (magnav_real)0.0005, 1},
                                {1, 1, 1}, (magnav_real)0.01, 4};
    const magnav_real down[3] = {(magnav_real)0.1, (magnav_real)-0.2, 1};
    magnav_snapshot snapshot;
    magnav_field_values field;
    magnav_heading_setup setup;
    magnav_heading heading;
    magnav_calibrator calibrator;
    magnav_real vector[3];
    uint32_t from;
    uint32_t to;
    int status;

    for (size_t i = 0; i < sizeof WMM2025 / sizeof WMM2025[0]; i++) {
        const wmm_row *row = &WMM2025[i];
        const int term = row->n * row->n - 1 + ((row->m == 0) ? 0 : 2 * row->m - 1);
        polynomials[term] = (magnav_real)row->g_nT;
        polynomials[TERMS + term] = (magnav_real)row->g_nT_per_yr;
        if (row->m > 0) {
            polynomials[term + 1] = (magnav_real)row->h_nT;
            polynomials[TERMS + term + 1] = (magnav_real)row->h_nT_per_yr;
        }
    }
    memset(&setup, 0, sizeof setup);
    setup.calibration.soft_iron[0] = setup.calibration.soft_iron[4] = setup.calibration.soft_iron[8] = 1;
    setup.mag_noise_uT = setup.acc_noise_mps2 = (magnav_real)0.3;
    setup.gravity_mps2 = (magnav_real)9.8;
    setup.total_uT = 48;
    setup.inclination_deg = 65;
    status = magnav_calibrator_start(&calibrator, 48);

    SYSTICK[1] = 0xFFFFFFu;
    SYSTICK[2] = 0;
    SYSTICK[0] = 5;
    for (volatile int wait = 0; wait < 100; wait++) {
    }
    from = now();
    to = now();
    overhead = (from - to) & 0xFFFFFFu;
    from = now();
    status |= magnav_snapshot_at(&model, (magnav_real)2026.3, 0, memory, MAGNAV_SNAPSHOT_REALS(12), &snapshot);
    to = now();
    report("magnav_snapshot_at", from, to);
    from = now();
    status |= magnav_vector_at(&snapshot, (magnav_real)47.3, (magnav_real)11.2, 600, vector);
    to = now();
    report("magnav_vector_at (X Y Z)", from, to);
    from = now();
    status |= magnav_field_at(&snapshot, (magnav_real)47.3, (magnav_real)11.2, 600, &field);
    to = now();
    report("magnav_field_at (all elements and rates)", from, to);
    from = now();
    status |= magnav_heading_of(&setup, mag, down, 1, &heading);
    to = now();
    report("magnav_heading_of", from, to);
    status |= magnav_calibrator_add(&calibrator, down);
    from = now();
    status |= magnav_calibrator_add(&calibrator, mag);
    to = now();
    report("magnav_calibrator_add", from, to);
    from = now();
    status |= magnav_patch_at(&patch, 47, 12, 500, 2027, vector);
    to = now();
    report("magnav_patch_at (degree 4: 29 terms)", from, to);
    printf("state of the calibrator,%lu\n", (unsigned long)sizeof calibrator);
    return status != 0;
}
