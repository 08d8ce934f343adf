/* Numbers from a fuzzer's bytes, in a defined order: the same bytes mean the same call on every machine.
 *
 * fuzz_angles.c   magnav_sincos_deg, magnav_atan2_deg, magnav_full_circle_deg
 * fuzz_field.c    magnav_snapshot_at, magnav_field_at, magnav_vector_at, magnav_elements, magnav_field_many
 * fuzz_heading.c  magnav_heading_of, magnav_vertical_step, magnav_heading_log, the words
 * fuzz_image.c    magnav_image_open, magnav_image_snapshot, magnav_crc32
 * fuzz_calibrator.c  magnav_calibrator_start, _add, _solve */
#ifndef FUZZ_BYTES_H
#define FUZZ_BYTES_H

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "magnav_core.h"

/* A promise of the core that must hold whatever the input. */
#define MUST(condition)                                                         \
    do {                                                                        \
        if (!(condition)) {                                                     \
            fprintf(stderr, "%s:%d: broken: %s\n", __FILE__, __LINE__, #condition); \
            abort();                                                            \
        }                                                                       \
    } while (0)

typedef struct bytes {
    const uint8_t *next;
    size_t left;
} bytes;

/* One byte; 0 when there are none left. */
static inline uint32_t take_byte(bytes *from)
{
    uint32_t value = 0;
    if (from->left > 0) {
        value = *from->next++;
        from->left--;
    }
    return value;
}

/* `count` bytes as a number, the lowest first. */
static inline uint64_t take_number(bytes *from, int count)
{
    uint64_t value = 0;
    for (int i = 0; i < count; i++) {
        value |= (uint64_t)take_byte(from) << (8 * i);
    }
    return value;
}

/* A real: mostly in [low, high], at times an edge, at times any pattern of bits. */
static inline magnav_real take_real(bytes *from, double low, double high)
{
    const uint32_t kind = take_byte(from);
    double value;

    if (kind >= 32) {
        return (magnav_real)(low + (high - low) * ((double)take_number(from, 3) / 16777215.0));
    }
    if (kind >= 16) {
        const double edges[16] = {0.0, -0.0, 1.0, -1.0, low, high, -low, -high, low - 1e-9, high + 1e-9,
                                  NAN, INFINITY, -INFINITY, 1e-30, 1e30, -1e18};
        return (magnav_real)edges[kind - 16];
    }
#ifdef MAGNAV_SINGLE
    {
        const uint32_t pattern = (uint32_t)take_number(from, 4);
        float single;
        memcpy(&single, &pattern, sizeof single);
        value = (double)single;
    }
#else
    {
        const uint64_t pattern = take_number(from, 8);
        memcpy(&value, &pattern, sizeof value);
    }
#endif
    return (magnav_real)value;
}

/* Memory of exactly this size, so that a step beyond it is seen; filled with a pattern that no result has. */
static inline void *spoilt_memory(size_t size)
{
    void *memory = malloc(size + (size == 0));
    MUST(memory != NULL);
    memset(memory, 0xA5, size);
    return memory;
}

static inline int is_spoilt(const void *object, size_t size)
{
    const uint8_t *byte = object;
    int spoilt = 1;
    for (size_t i = 0; i < size; i++) {
        spoilt = spoilt && byte[i] == 0xA5;
    }
    return spoilt;
}

#endif
