/* Small helpers on magnav_real shared by the sources; not part of the interface. */
#ifndef MAGNAV_REAL_H
#define MAGNAV_REAL_H

#include <math.h>
#include <string.h>

#include "magnav_core.h"

/* The square root is the one function of the system's library: IEEE 754 fixes its every bit. */
static inline magnav_real real_sqrt(magnav_real x)
{
#ifdef MAGNAV_SINGLE
    return sqrtf(x);
#else
    return sqrt(x);
#endif
}

static inline magnav_real real_abs(magnav_real x)
{
    return (x < MAGNAV_C(0.0)) ? MAGNAV_C(0.0) - x : x;
}

static inline int32_t all_finite(const magnav_real *values, int32_t count)
{
    int32_t finite = 1;
    for (int32_t i = 0; i < count; i++) {
        finite = finite && (isfinite(values[i]) != 0);
    }
    return finite;
}

static inline magnav_real dot(const magnav_real a[3], const magnav_real b[3])
{
    return a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
}

static inline void cross(const magnav_real a[3], const magnav_real b[3], magnav_real out[3])
{
    const magnav_real x = a[1] * b[2] - a[2] * b[1];
    const magnav_real y = a[2] * b[0] - a[0] * b[2];
    out[2] = a[0] * b[1] - a[1] * b[0];
    out[0] = x;
    out[1] = y;
}

#endif
