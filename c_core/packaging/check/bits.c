/* Prints the bits of many results, so that two builds of the core can be compared byte for byte: fields of WMM2025 over
 * the globe, a log of headings, and rows that must be refused. */
#include <stdio.h>
#include <string.h>

#include "magnav_core.h"

#include "wmm2025_data.h"

#define TERMS (WMM2025_DEGREE * (WMM2025_DEGREE + 2))
#define LENGTH(array) ((int)(sizeof(array) / sizeof((array)[0])))
#define ROWS 200

static uint32_t state = 1;

/* The generator of Numerical Recipes, 2nd ed., sec. 7.1; in steps that both real types hold exactly. */
static magnav_real spread(int low, int high)
{
    state = state * 1664525u + 1013904223u;
    return (magnav_real)low + (magnav_real)((high - low) * 1024.0 * (double)(state >> 20) / 4096.0) / 1024;
}

static void print_reals(const char *what, const magnav_real *values, size_t count)
{
    printf("%s", what);
    for (size_t i = 0; i < count; i++) {
        unsigned char bytes[sizeof(magnav_real)];
        memcpy(bytes, &values[i], sizeof bytes);
        printf(" ");
        for (size_t k = sizeof bytes; k > 0; k--) {
            printf("%02x", bytes[k - 1]);
        }
    }
}

int main(void)
{
    static magnav_real polynomials[2 * TERMS];
    static magnav_real memory[MAGNAV_SNAPSHOT_REALS(WMM2025_DEGREE)];
    static magnav_real t_s[ROWS], mag_uT[3 * ROWS], acc_mps2[3 * ROWS], gyr_radps[3 * ROWS];
    static magnav_heading headings[ROWS];
    static int32_t status[ROWS];
    static const magnav_real breaks[2] = {2025, 2030};
    const magnav_model model = {breaks, polynomials, 2025, 2030, WMM2025_DEGREE, 2, 1};
    const magnav_real infinite = (magnav_real)1e30f * (magnav_real)1e30f * (magnav_real)1e300;
    magnav_heading_setup setup;
    magnav_snapshot snapshot;
    magnav_field_values field;
    magnav_status made;

    for (int i = 0; i < LENGTH(WMM2025); i++) {
        const wmm_row *row = &WMM2025[i];
        const int g = row->n * row->n - 1 + ((row->m == 0) ? 0 : 2 * row->m - 1);
        polynomials[g] = (magnav_real)row->g_nT;
        polynomials[TERMS + g] = (magnav_real)row->g_nT_per_yr;
        if (row->m > 0) {
            polynomials[g + 1] = (magnav_real)row->h_nT;
            polynomials[TERMS + g + 1] = (magnav_real)row->h_nT_per_yr;
        }
    }
    made = magnav_snapshot_at(&model, (magnav_real)2027.25, 0, memory, LENGTH(memory), &snapshot);
    printf("snapshot %d\n", (int)made);
    for (int i = 0; i < 500; i++) {
        const magnav_real lat_deg = spread(-90, 91), lon_deg = spread(-180, 360), height_m = spread(-1000, 600000);
        memset(&field, 0, sizeof field);
        made = magnav_field_at(&snapshot, lat_deg, lon_deg, height_m, &field);
        print_reals("field", &field.north_nT, offsetof(magnav_field_values, flags) / sizeof(magnav_real));
        printf(" %d %lx\n", (int)made, (unsigned long)field.flags);
    }
    memset(&setup, 0, sizeof setup);
    for (int i = 0; i < 3; i++) {
        setup.calibration.hard_iron_uT[i] = spread(-20, 20);
        for (int k = 0; k < 3; k++) {
            setup.calibration.soft_iron[3 * i + k] = (magnav_real)((i == k) ? 1.03125 : 0.015625);
        }
    }
    for (int i = 0; i < 9; i++) {
        setup.calibration.covariance[i * (i + 3) / 2] = (magnav_real)0.0078125;
    }
    setup.mag_noise_uT = (magnav_real)0.375;
    setup.declination_deg = (magnav_real)3.7;
    setup.declination_sigma_deg = (magnav_real)0.4;
    setup.gravity_mps2 = (magnav_real)9.81;
    setup.acc_noise_mps2 = (magnav_real)0.05;
    setup.gyr_drift_radps = (magnav_real)0.002;
    for (int i = 0; i < ROWS; i++) {
        t_s[i] = (magnav_real)i / 64;
        for (int k = 0; k < 3; k++) {
            mag_uT[3 * i + k] = spread(-50, 50);
            acc_mps2[3 * i + k] = spread(-2, 2) - ((k == 2) ? 9 : 0);
            gyr_radps[3 * i + k] = spread(-1, 1);
        }
    }
    /* under a compiler that takes infinities and NaN for impossible these would be computed */
    mag_uT[30] = infinite;
    acc_mps2[93] = infinite - infinite;
    memset(headings, 0, sizeof headings);
    made = magnav_heading_log(&setup, ROWS, t_s, mag_uT, acc_mps2, gyr_radps, headings, status);
    for (int i = 0; i < ROWS; i++) {
        print_reals("heading", &headings[i].magnetic_deg, offsetof(magnav_heading, dominant) / sizeof(magnav_real));
        printf(" %d %d %d %lx\n", (int)made, (int)status[i], (int)headings[i].dominant,
               (unsigned long)headings[i].flags);
    }
    return (status[10] == MAGNAV_E_NOT_FINITE && status[31] == MAGNAV_E_NOT_FINITE && status[0] == MAGNAV_OK) ? 0 : 1;
}
