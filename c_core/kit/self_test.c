/* Self-test for a target: evaluates the vectors that magnav firmware vectors wrote and prints what came out.
 *
 * Build with the core's sources and -I to the folder of vectors.h. Settings, by -D or in a file given by -include:
 *     KIT_PRINT(text)   hands each piece of text to a function of yours; without it, stdio
 *     KIT_MAIN          the name of the function, int (void), that runs the test; without it, main
 *     KIT_RESULTS       prints a table with the bits of every output too
 * Prints a line for each group and one for all; magnav firmware check reads them, and the table:
 *     # group, vectors, worst difference in millionths of the output's unit (rounded up), hash of the output bits
 * Returns 0 unless a vector was refused or one that must be refused was not. No heap. */
#include <string.h>

#include "magnav_core.h"
#include "magnav_image.h"
#include "vectors.h"

#ifndef KIT_PRINT
#include <stdio.h>
#define KIT_PRINT(text) fputs((text), stdout)
#endif
#ifndef KIT_MAIN
#define KIT_MAIN main
#endif

#define MOST_OUTPUTS 16
#define HASH_START 14695981039346656037u
/* what a status is said to be where nothing should have been computed and the outputs were changed nevertheless */
#define TOUCHED 99

int KIT_MAIN(void);

typedef struct group {
    const char *name;
    uint64_t hash;
    magnav_real worst;
    uint32_t count;
    uint32_t circle; /* outputs on the circle, a bit each */
    int outputs;
    int shown; /* whether its rows are printed */
} group;

typedef struct totals {
    uint64_t hash;
    magnav_real worst;
    uint32_t count;
    int failed;
} totals;

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

static void mix(uint64_t *hash, uint64_t bits, int bytes)
{
    for (int i = bytes - 1; i >= 0; i--) {
        *hash = (*hash ^ ((bits >> (8 * i)) & 0xFFU)) * 1099511628211u;
    }
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

static group begin(const char *name, int outputs, const char *columns, uint32_t circle, int shown)
{
    group g = {NULL, HASH_START, 0, 0, 0, 0, 0};
    g.name = name;
    g.outputs = outputs;
    g.circle = circle;
    g.shown = shown;
#ifdef KIT_RESULTS
    if (shown) {
        KIT_PRINT("id,");
        KIT_PRINT(columns);
        KIT_PRINT("\n");
    }
#else
    (void)columns;
#endif
    return g;
}

static void take(group *g, const magnav_real *got, const magnav_real *expected, uint32_t index)
{
#ifdef KIT_RESULTS
    if (g->shown) {
        KIT_PRINT(g->name);
        KIT_PRINT("-");
        print_number(index);
    }
#else
    (void)index;
#endif
    for (int i = 0; i < g->outputs; i++) {
        const uint64_t bits = bits_of(got[i]);
        magnav_real apart = (got[i] > expected[i]) ? got[i] - expected[i] : expected[i] - got[i];
        if (((g->circle >> i) & 1U) != 0U && apart > (magnav_real)180) {
            apart = (apart > (magnav_real)360) ? apart - (magnav_real)360 : (magnav_real)360 - apart;
        }
        /* once NaN, always NaN */
        if (!(apart <= g->worst)) {
            g->worst = apart;
        }
        mix(&g->hash, bits, (int)sizeof(magnav_real));
#ifdef KIT_RESULTS
        if (g->shown) {
            KIT_PRINT(",0x");
            if (sizeof(magnav_real) == 8) {
                print_hex((uint32_t)(bits >> 32));
            }
            print_hex((uint32_t)bits);
        }
#endif
    }
    g->count++;
#ifdef KIT_RESULTS
    if (g->shown) {
        KIT_PRINT("\n");
    }
#endif
}

static void print_line(const char *name, uint32_t count, magnav_real worst, uint64_t hash)
{
    const magnav_real millionths = worst * (magnav_real)1000000;
    uint32_t whole = 4000000000U;
    if (millionths < (magnav_real)4000000000.0) {
        whole = (uint32_t)millionths;
        whole += ((magnav_real)whole < millionths) ? 1U : 0U;
    }
    KIT_PRINT("# ");
    KIT_PRINT(name);
    KIT_PRINT(", ");
    print_number(count);
    KIT_PRINT(", ");
    print_number(whole);
    KIT_PRINT(", ");
    print_hex((uint32_t)(hash >> 32));
    print_hex((uint32_t)hash);
    KIT_PRINT("\n");
}

static void finish(totals *all, const group *g)
{
    print_line(g->name, g->count, g->worst, g->hash);
    mix(&all->hash, g->hash, 8);
    all->count += g->count;
    if (!(g->worst <= all->worst)) {
        all->worst = g->worst;
    }
}

static void refused(totals *all, const group *g, uint32_t index, int32_t status)
{
    KIT_PRINT("# refused: ");
    KIT_PRINT(g->name);
    KIT_PRINT("-");
    print_number(index);
    KIT_PRINT(": ");
    KIT_PRINT(magnav_status_text(status));
    KIT_PRINT("\n");
    all->failed = 1;
}

static void trig(totals *all)
{
    group g = begin("trig", TRIG_OUTPUTS, TRIG_COLUMNS, TRIG_CIRCLE, 1);
    for (uint32_t i = 0; i < TRIG_VECTORS; i++) {
        const magnav_real *in = trig_inputs[i];
        magnav_real out[TRIG_OUTPUTS];
        magnav_sincos_deg(in[0], &out[0], &out[1]);
        out[2] = magnav_full_circle_deg(in[1]);
        out[3] = magnav_atan2_deg(in[2], in[3]);
        take(&g, out, trig_outputs[i], i);
    }
    finish(all, &g);
}

/* The field from the model itself or, with `image`, from the image of it. */
static magnav_status field_of(const magnav_image *image, const magnav_real *in, magnav_field_values *field)
{
    static magnav_real memory[MAGNAV_SNAPSHOT_REALS(MODEL_DEGREE)];
    const size_t reals = sizeof memory / sizeof memory[0];
    magnav_snapshot snapshot = {NULL, 0, 0, 0};
    magnav_status status = (image == NULL) ? magnav_snapshot_at(&model, in[3], 0, memory, reals, &snapshot)
                                           : magnav_image_snapshot(image, in[3], 0, memory, reals, &snapshot);
    if (status == MAGNAV_OK) {
        status = magnav_field_at(&snapshot, in[0], in[1], in[2], field);
    }
    return status;
}

static void fields(totals *all, const char *name, const magnav_image *image)
{
    group g = begin(name, FIELD_OUTPUTS, FIELD_COLUMNS, FIELD_CIRCLE, image == NULL);
    for (uint32_t i = 0; i < FIELD_VECTORS; i++) {
        magnav_field_values f;
        magnav_real out[MOST_OUTPUTS];
        const magnav_status status = field_of(image, field_inputs[i], &f);
        if (status != MAGNAV_OK) {
            refused(all, &g, i, (int32_t)status);
            continue;
        }
        memcpy(out, &f, 15 * sizeof out[0]);
        out[15] = (magnav_real)f.flags;
        take(&g, out, field_outputs[i], i);
    }
    finish(all, &g);
}

static void headings(totals *all)
{
    group g = begin("heading", HEADING_OUTPUTS, HEADING_COLUMNS, HEADING_CIRCLE, 1);
    for (uint32_t i = 0; i < HEADING_VECTORS; i++) {
        const magnav_real *in = heading_inputs[i];
        magnav_heading h;
        magnav_real out[MOST_OUTPUTS];
        const magnav_status status = magnav_heading_of(&heading_setups[(int)in[7]], in, in + 3, in[6], &h);
        if (status != MAGNAV_OK) {
            refused(all, &g, i, (int32_t)status);
            continue;
        }
        memcpy(out, &h, 13 * sizeof out[0]);
        out[13] = (magnav_real)h.dominant;
        out[14] = (magnav_real)h.flags;
        take(&g, out, heading_outputs[i], i);
    }
    finish(all, &g);
}

/* The status of a call that must leave `size` bytes of outputs as they were, filled with 0x5a. */
static magnav_real status_of(totals *all, magnav_status status, const void *outputs, size_t size)
{
    const unsigned char *bytes = (const unsigned char *)outputs;
    int touched = 0;
    for (size_t i = 0; i < size; i++) {
        touched |= bytes[i] != 0x5aU;
    }
    all->failed |= touched;
    return (touched != 0) ? (magnav_real)TOUCHED : (magnav_real)status;
}

static void errors(totals *all)
{
    magnav_field_values f;
    magnav_heading h;
    magnav_real out;
    group g = begin("field_errors", FIELD_ERRORS_OUTPUTS, FIELD_ERRORS_COLUMNS, FIELD_ERRORS_CIRCLE, 1);
    for (uint32_t i = 0; i < FIELD_ERRORS_VECTORS; i++) {
        memset(&f, 0x5a, sizeof f);
        const magnav_status status = field_of(NULL, field_errors_inputs[i], &f);
        out = status_of(all, status, &f, sizeof f);
        take(&g, &out, field_errors_outputs[i], i);
    }
    finish(all, &g);
    g = begin("heading_errors", HEADING_ERRORS_OUTPUTS, HEADING_ERRORS_COLUMNS, HEADING_ERRORS_CIRCLE, 1);
    for (uint32_t i = 0; i < HEADING_ERRORS_VECTORS; i++) {
        const magnav_real *in = heading_errors_inputs[i];
        memset(&h, 0x5a, sizeof h);
        const magnav_status status = magnav_heading_of(&heading_setups[(int)in[7]], in, in + 3, in[6], &h);
        out = status_of(all, status, &h, sizeof h);
        take(&g, &out, heading_errors_outputs[i], i);
    }
    finish(all, &g);
}

int KIT_MAIN(void)
{
    totals all = {HASH_START, 0, 0, 0};
    trig(&all);
    fields(&all, "field", NULL);
    headings(&all);
    errors(&all);
#ifdef MODEL_IMAGE
    {
        magnav_image image;
        if (magnav_image_open(model_image, sizeof model_image, &image) == MAGNAV_OK) {
            fields(&all, "image", &image);
        } else {
            KIT_PRINT("# refused: the image of the model\n");
            all.failed = 1;
        }
    }
#endif
    print_line("all", all.count, all.worst, all.hash);
    return all.failed;
}
