/* A patch: the field over a mission area as one small polynomial, for parts too small for a model.
 *
 * Each component (north, east, down; never the angle) is a polynomial in latitude, longitude, height and date, each
 * brought to [-1, 1] over the area. The desk makes it with a guaranteed bound on its error against the full model. */
#ifndef MAGNAV_PATCH_H
#define MAGNAV_PATCH_H

#include "magnav_core.h"

#ifdef __cplusplus
extern "C" {
#endif

#define MAGNAV_PATCH_MAX_DEGREE 8

/* The middle of each range and the inverse of half its width, in the order latitude (deg), longitude (deg), height (m),
 * date (decimal year). The terms of a patch are those powers i, j, k, l with k <= 2, l <= 1, i + j + 2 k + 2 l <= degree,
 * l outermost, then k, i, j; three coefficients each (north, east, down), nT. */
typedef struct magnav_patch {
    const magnav_real *coefficients;
    magnav_real middle[4];
    magnav_real inverse_half[4];
    magnav_real bound_nT[3];            /* largest error of each component against the model, in float or double */
    magnav_real declination_bound_deg;  /* what that makes of the declination; 180 where it can be anything */
    int32_t degree;                     /* 1 .. MAGNAV_PATCH_MAX_DEGREE */
} magnav_patch;

/* The field from a patch; MAGNAV_E_AREA outside it. Longitudes may differ by a full turn from the patch's. */
magnav_status magnav_patch_at(const magnav_patch *patch, magnav_real lat_deg, magnav_real lon_deg, magnav_real height_m,
                              magnav_real year, magnav_real ned_nT[3]);

#ifdef __cplusplus
}
#endif
#endif
