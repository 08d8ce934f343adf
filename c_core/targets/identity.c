/* Evaluates everything the core computes at seeded points and hashes the bits: the same line on every target.
 *
 * Points: -DPOINTS=20000 (natively 1,000,000 too). One line a group: name, points, FNV-1a 64 hash; a last line for all.
 * Values are hashed by their IEEE bits, highest byte first, so that the target's byte order does not matter. */
#include <inttypes.h>
#include <stdio.h>
#include <string.h>

#include "magnav_calibrator.h"
#include "magnav_core.h"
#include "magnav_image.h"
#include "magnav_patch.h"
#include "wmm2025_data.h"

#ifndef POINTS
#define POINTS 20000
#endif
#define TERMS (12 * 14)

static uint64_t hash;
static uint64_t total = 14695981039346656037u;

static void mix(uint64_t *h, uint64_t bits, int bytes)
{
    for (int i = bytes - 1; i >= 0; i--) {
        *h = (*h ^ ((bits >> (8 * i)) & 0xFFU)) * 1099511628211u;
    }
}

static void see_int(int32_t value)
{
    mix(&hash, (uint32_t)value, 4);
}

static void see(magnav_real value)
{
#ifdef MAGNAV_SINGLE
    uint32_t bits;
#else
    uint64_t bits;
#endif
    memcpy(&bits, &value, sizeof bits);
    mix(&hash, bits, (int)sizeof bits);
}

static void see_all(const magnav_real *values, int count)
{
    for (int i = 0; i < count; i++) {
        see(values[i]);
    }
}

/* Numbers from integers alone: xorshift64 (Marsaglia, J. Stat. Softw. 8(14), 2003), 24 bits a number. */
static uint64_t state;

static magnav_real spread(magnav_real low, magnav_real high)
{
    state ^= state << 13;
    state ^= state >> 7;
    state ^= state << 17;
    return low + (high - low) * ((magnav_real)(uint32_t)(state >> 40) / (magnav_real)16777216);
}

static void begin(void)
{
    hash = 14695981039346656037u;
    state = 88172645463325252u;
}

static void end(const char *name, long points)
{
    printf("%-10s %8ld %08" PRIx32 "%08" PRIx32 "\n", name, points, (uint32_t)(hash >> 32), (uint32_t)hash);
    mix(&total, hash, 8);
}

static magnav_real polynomials[2 * TERMS];
static const magnav_real breaks[2] = {2025, 2030};
static magnav_real memory[MAGNAV_SNAPSHOT_REALS(12)];

static magnav_model wmm2025(void)
{
    magnav_model model = {breaks, polynomials, 2025, 2030, 12, 2, 1};
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
    return model;
}

static magnav_real latitude(long i)
{
    /* both poles, a millimetre from them, and the rest of the globe */
    switch (i % 50) {
    case 0: return 90;
    case 1: return -90;
    case 2: return (magnav_real)90 - (magnav_real)9e-9;
    case 3: return (magnav_real)-90 + (magnav_real)9e-9;
    default: return spread(-90, 90);
    }
}

static void fields(long points)
{
    const magnav_model model = wmm2025();
    magnav_snapshot snapshot = {NULL, 0, 0, 0};
    begin();
    for (long i = 0; i < points; i++) {
        magnav_field_values f;
        magnav_real vector[3];
        const magnav_real lat = latitude(i);
        const magnav_real lon = spread(-360, 360);
        const magnav_real height = spread(-1000, 850000);
        memset(&f, 0, sizeof f);
        if (i % 100 == 0) {
            see_int(magnav_snapshot_at(&model, spread(2023, 2032), 1, memory, MAGNAV_SNAPSHOT_REALS(12), &snapshot));
        }
        see_int(magnav_field_at(&snapshot, lat, lon, height, &f));
        see_int(magnav_vector_at(&snapshot, lat, lon, height, vector));
        see_all(vector, 3);
        see_all(&f.north_nT, 15);
        see_int((int32_t)f.flags);
    }
    end("field", points);
}

static void snapshots(long points)
{
    /* a cubic in two pieces, and dates beyond both ends */
    static const magnav_real ends[3] = {1990, 2002.5, 2015};
    static magnav_real cubic[2 * 4 * 3];
    const magnav_model model = {ends, cubic, 1990, 2015, 1, 4, 2};
    magnav_snapshot snapshot;
    begin();
    for (int i = 0; i < 24; i++) {
        cubic[i] = spread(-30000, 30000) / (magnav_real)(1 + 40 * (i / 3 % 4));
    }
    for (long i = 0; i < points; i++) {
        see_int(magnav_snapshot_at(&model, spread(1980, 2025), 1, memory, MAGNAV_SNAPSHOT_REALS(1), &snapshot));
        see_all(memory, (int)MAGNAV_SNAPSHOT_REALS(1));
        see_int((int32_t)snapshot.flags);
    }
    end("snapshot", points);
}

static void angles(long points)
{
    begin();
    for (long i = 0; i < points; i++) {
        magnav_real sine;
        magnav_real cosine;
        /* one number a statement: C leaves the order within an expression open */
        const magnav_real wide = spread(-720, 720);
        const magnav_real divisor = spread(1, 1000);
        const magnav_real y = spread(-1, 1);
        const magnav_real x = spread(-1, 1);
        const magnav_real angle = (i % 3 == 0) ? wide : wide / divisor;
        magnav_sincos_deg(angle, &sine, &cosine);
        see(sine);
        see(cosine);
        see(magnav_atan2_deg(y, x / divisor));
        see(magnav_full_circle_deg(angle));
    }
    end("angles", points);
}

static void headings(long points)
{
    magnav_heading_setup setup;
    magnav_vertical vertical;
    memset(&setup, 0, sizeof setup);
    memset(&vertical, 0, sizeof vertical);
    begin();
    for (int i = 0; i < 9; i++) {
        setup.calibration.soft_iron[i] = (i % 4 == 0) ? (magnav_real)1.05 : (magnav_real)0.02;
        setup.calibration.hard_iron_uT[i % 3] = (magnav_real)(7 - 5 * (i % 3));
        setup.calibration.covariance[i * (i + 1) / 2 + i] = (i < 3) ? (magnav_real)0.04 : (magnav_real)1e-6;
    }
    setup.mag_noise_uT = (magnav_real)0.4;
    setup.declination_deg = (magnav_real)4.3;
    setup.declination_sigma_deg = (magnav_real)0.4;
    setup.convergence_deg = (magnav_real)-1.3;
    setup.total_uT = 49;
    setup.total_sigma_uT = (magnav_real)0.14;
    setup.inclination_deg = 66;
    setup.inclination_sigma_deg = (magnav_real)0.2;
    setup.gravity_mps2 = (magnav_real)9.81;
    setup.acc_noise_mps2 = (magnav_real)0.1;
    setup.gyr_drift_radps = (magnav_real)0.01;
    for (long i = 0; i < points; i++) {
        magnav_heading h;
        magnav_real acc[3];
        magnav_real gyr[3];
        magnav_real mag[3];
        for (int k = 0; k < 3; k++) {
            acc[k] = spread(-6, 6);
            gyr[k] = spread(-2, 2);
            mag[k] = spread(-60, 60);
        }
        memset(&h, 0, sizeof h);
        see_int(magnav_vertical_step(&vertical, &setup, acc, (i % 5 == 0) ? NULL : gyr, (magnav_real)0.02));
        see_all(vertical.down, 3);
        see(vertical.variance);
        see(vertical.unrest);
        see_int(magnav_heading_of(&setup, mag, vertical.down, spread(0, 3), &h));
        see_all(&h.magnetic_deg, 13);
        see_int(h.dominant);
        see_int((int32_t)h.flags);
    }
    end("heading", points);
}

static void calibrations(long points)
{
    magnav_calibrator calibrator;
    magnav_calibrator_result result;
    begin();
    see_int(magnav_calibrator_start(&calibrator, 48));
    for (long i = 0; i < points; i++) {
        magnav_real u[3];
        magnav_real size = 0;
        magnav_real s;
        magnav_real c;
        magnav_sincos_deg(spread(0, 360), &s, &c);
        u[2] = spread(-1, 1);
        magnav_sincos_deg(magnav_atan2_deg(u[2], spread((magnav_real)0.1, 1)), &u[2], &size);
        u[0] = 48 * size * c + 12 + spread(-1, 1);
        u[1] = 45 * size * s - 30 + spread(-1, 1);
        u[2] = 50 * u[2] + 5 + spread(-1, 1);
        see_int(magnav_calibrator_add(&calibrator, u));
        if (i % 1000 == 999) {
            see_int(magnav_calibrator_solve(&calibrator, &result));
            see_int(result.refusal);
            see_int(result.seen);
            see(result.noise_uT);
            see_all(result.calibration.hard_iron_uT, 3);
            see_all(result.calibration.soft_iron, 9);
            see_all(result.calibration.covariance, 45);
        }
    }
    end("calibrator", points);
}

static void patches(long points)
{
    static magnav_real terms[3 * 29];
    const magnav_patch patch = {terms, {47, 179, 2000, 2027}, {(magnav_real)0.5, (magnav_real)0.25, (magnav_real)0.0005, 1},
                                {1, 1, 1}, 1, 4};
    begin();
    for (int i = 0; i < 3 * 29; i++) {
        terms[i] = spread(-30000, 30000) / (magnav_real)(1 + i * i);
    }
    for (long i = 0; i < points; i++) {
        magnav_real ned[3] = {0, 0, 0};
        const magnav_real lat = spread(44, 50);
        const magnav_real lon = spread(170, 190);
        const magnav_real height = spread(-100, 4100);
        const magnav_real year = spread(2025, 2029);
        see_int(magnav_patch_at(&patch, lat, lon, height, year, ned));
        see_all(ned, 3);
    }
    end("patch", points);
}

static void images(long points)
{
    uint8_t bytes[64] = {0};
    begin();
    for (long i = 0; i < points; i++) {
        bytes[i % 64] = (uint8_t)(int)spread(0, 256);
        see_int((int32_t)magnav_crc32(bytes, 64));
    }
    end("crc", points);
}

int main(void)
{
    const long counts[] = {20000, POINTS};
    /* the short run first: it is what every target prints */
    for (int i = 0; i < ((POINTS > 20000) ? 2 : 1); i++) {
        const long points = (POINTS < 20000) ? POINTS : counts[i];
        total = 14695981039346656037u;
        fields(points);
        snapshots(points);
        angles(points);
        headings(points);
        calibrations(points / 4);
        patches(points);
        images(points / 4);
        printf("all %ld %08" PRIx32 "%08" PRIx32 "\n", points, (uint32_t)(total >> 32), (uint32_t)total);
    }
    return 0;
}
