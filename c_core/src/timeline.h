/* A model's coefficients over time, wherever they are kept; not part of the interface. */
#ifndef MAGNAV_TIMELINE_H
#define MAGNAV_TIMELINE_H

#include "magnav_core.h"

typedef struct timeline {
    const void *source;
    /* break number i, 0 .. pieces */
    magnav_real (*break_yr)(const void *source, int32_t i);
    /* coefficient `term` (g10 g11 h11 ...) of a power of the time since the piece's start */
    magnav_real (*value)(const void *source, int32_t piece, int32_t power, int32_t term);
    magnav_real valid_from_yr, valid_until_yr;
    int32_t degree, order, pieces;
} timeline;

/* As magnav_snapshot_at; degree, order, pieces and breaks are known to be sound. */
magnav_status magnav_timeline_snapshot(const timeline *line, magnav_real year, int32_t extrapolate,
                                       magnav_real *memory, size_t memory_reals, magnav_snapshot *snapshot);

#endif
