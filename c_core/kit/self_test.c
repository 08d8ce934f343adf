/* Self-test for a target: evaluates the vectors that magnav firmware vectors wrote and prints what came out.
 *
 * Build with the core's sources and -I to the folder of vectors.h. For a board without stdio define
 * KIT_PRINT(text) to hand each piece of text to a function of yours. Prints, one a line:
 *     # group, vectors, worst difference in millionths of the output's unit, hash of the output bits
 * and with -DKIT_RESULTS a table with the bits of every output, which magnav firmware check reads. */
#include <string.h>

#include "magnav_core.h"
#include "magnav_image.h"
#include "vectors.h"

#ifndef KIT_PRINT
#include <stdio.h>
#define KIT_PRINT(text) fputs((text), stdout)
#endif

#define FIELD_OUTPUTS 16
#define HEADING_OUTPUTS 15

static magnav_real memory[MAGNAV_SNAPSHOT_REALS(MAGNAV_MAX_DEGREE > 20 ? 20 : MAGNAV_MAX_DEGREE)];

static void print_number(uint32_t value)
{
    char digits[11];
    int at = 10;
    digits[10] = '\0';
    do {
        digits[--at] = (char)('0' + value % 10U);
        value /= 10U;
    } while (value > 0U);
    KIT_PRINT(&digits[at]);
}

static void print_hex(uint32_t value)
{
    char digits[9];
    for (int i = 0; i < 8; i++) {
        digits[i] = "0123456789abcdef"[(value >> (28 - 4 * i)) & 15U];
    }
    digits[8] = '\0';
    KIT_PRINT(digits);
}

static uint64_t bits_of(magnav_real value)
{
#ifdef MAGNAV_SINGLE
    uint32_t bits;
#else
    uint64_t bits;
#endif
    memcpy(&bits, &value, sizeof bits);
    return bits;
}

typedef struct group {
    uint64_t hash;
    magnav_real worst;
} group;

static void take(group *g, const magnav_real *got, const magnav_real *expected, int count, const char *name,
                 uint32_t index)
{
#ifdef KIT_RESULTS
    KIT_PRINT(name);
    KIT_PRINT("-");
    print_number(index);
#else
    (void)name;
    (void)index;
#endif
    for (int i = 0; i < count; i++) {
        const uint64_t bits = bits_of(got[i]);
        magnav_real apart = (got[i] > expected[i]) ? got[i] - expected[i] : expected[i] - got[i];
        /* angles on the circle */
        if (apart > (magnav_real)180 && got[i] < (magnav_real)361 && expected[i] < (magnav_real)361) {
            apart = (magnav_real)360 - apart;
        }
        if (!(apart <= g->worst)) {
            g->worst = apart;
        }
        for (int byte = (int)sizeof(magnav_real) - 1; byte >= 0; byte--) {
            g->hash = (g->hash ^ ((bits >> (8 * byte)) & 0xFFU)) * 1099511628211u;
        }
#ifdef KIT_RESULTS
        KIT_PRINT(",0x");
        if (sizeof(magnav_real) == 8) {
            print_hex((uint32_t)(bits >> 32));
        }
        print_hex((uint32_t)bits);
#endif
    }
#ifdef KIT_RESULTS
    KIT_PRINT("\n");
#endif
}

static void finish(const group *g, const char *name, uint32_t count)
{
    const magnav_real millionths = g->worst * (magnav_real)1000000;
    KIT_PRINT("# ");
    KIT_PRINT(name);
    KIT_PRINT(", ");
    print_number(count);
    KIT_PRINT(", ");
    print_number((millionths < (magnav_real)4000000000.0) ? (uint32_t)millionths : 4000000000U);
    KIT_PRINT(", ");
    print_hex((uint32_t)(g->hash >> 32));
    print_hex((uint32_t)g->hash);
    KIT_PRINT("\n");
}

static int fields(void)
{
    magnav_image image;
    magnav_snapshot snapshot = {NULL, 0, 0, 0};
    group g = {14695981039346656037u, 0};

    if (magnav_image_open(model_image, sizeof model_image, &image) != MAGNAV_OK) {
        KIT_PRINT("# the model's image is refused\n");
        return 1;
    }
#ifdef KIT_RESULTS
    KIT_PRINT("id,north_nT,east_nT,down_nT,horizontal_nT,total_nT,declination_deg,inclination_deg,north_nT_per_yr,"
              "east_nT_per_yr,down_nT_per_yr,horizontal_nT_per_yr,total_nT_per_yr,declination_deg_per_yr,"
              "inclination_deg_per_yr,grid_variation_deg,flags\n");
#endif
    for (uint32_t i = 0; i < FIELD_VECTORS; i++) {
        const magnav_real *in = field_inputs[i];
        magnav_field_values f;
        magnav_real out[FIELD_OUTPUTS];
        if (magnav_image_snapshot(&image, in[3], 0, memory, sizeof memory / sizeof memory[0], &snapshot) != MAGNAV_OK ||
            magnav_field_at(&snapshot, in[0], in[1], in[2], &f) != MAGNAV_OK) {
            KIT_PRINT("# a field vector is refused: ");
            print_number(i);
            KIT_PRINT("\n");
            return 1;
        }
        memcpy(out, &f, 15 * sizeof out[0]);
        out[15] = (magnav_real)f.flags;
        take(&g, out, field_outputs[i], FIELD_OUTPUTS, "field", i);
    }
    finish(&g, "field", FIELD_VECTORS);
    return 0;
}

static int headings(void)
{
    group g = {14695981039346656037u, 0};
#ifdef KIT_RESULTS
    KIT_PRINT("id,magnetic_deg,true_deg,grid_deg,sigma_magnetic_deg,sigma_deg,sensor_deg,calibration_deg,tilt_deg,"
              "model_deg,roll_deg,pitch_deg,measured_total_uT,measured_inclination_deg,dominant,heading_flags\n");
#endif
    for (uint32_t i = 0; i < HEADING_VECTORS; i++) {
        const magnav_real *in = heading_inputs[i];
        magnav_heading h;
        magnav_real out[HEADING_OUTPUTS];
        if (magnav_heading_of(&heading_setup, in, in + 3, in[6], &h) != MAGNAV_OK) {
            KIT_PRINT("# a heading vector is refused: ");
            print_number(i);
            KIT_PRINT("\n");
            return 1;
        }
        memcpy(out, &h, 13 * sizeof out[0]);
        out[13] = (magnav_real)h.dominant;
        out[14] = (magnav_real)h.flags;
        take(&g, out, heading_outputs[i], HEADING_OUTPUTS, "heading", i);
    }
    finish(&g, "heading", HEADING_VECTORS);
    return 0;
}

int main(void)
{
    int failed = fields();
    failed = headings() || failed;
    return failed;
}
