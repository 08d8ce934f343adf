/* Horizontal and total intensity, declination, inclination, their yearly change and the zones, from a vector. */
#include "real.h"

#define PER_RADIAN MAGNAV_C(57.295779513082320877)

/* The same angle in (-180, 180], for one in [-360, 360]; exact. */
static magnav_real half_circle_deg(magnav_real x_deg)
{
    magnav_real angle = x_deg;
    if (angle > MAGNAV_C(180.0)) {
        angle = angle - MAGNAV_C(360.0);
    } else if (angle <= MAGNAV_C(-180.0)) {
        angle = angle + MAGNAV_C(360.0);
    }
    return angle;
}

magnav_status magnav_elements(const magnav_real ned_nT[3], const magnav_real ned_nT_per_yr[3], magnav_real lat_deg,
                              magnav_real lon_deg, magnav_field_values *field)
{
    const magnav_real zero = MAGNAV_C(0.0);
    magnav_field_values v;
    magnav_real h2;
    magnav_real f2;

    if (ned_nT == NULL || field == NULL) {
        return MAGNAV_E_NULL;
    }
    if (!all_finite(ned_nT, 3) || (ned_nT_per_yr != NULL && !all_finite(ned_nT_per_yr, 3)) || !isfinite(lat_deg) ||
        !isfinite(lon_deg)) {
        return MAGNAV_E_NOT_FINITE;
    }
    if (real_abs(lat_deg) > MAGNAV_C(90.0)) {
        return MAGNAV_E_LATITUDE;
    }
    if (real_abs(lon_deg) > MAGNAV_C(360.0)) {
        return MAGNAV_E_LONGITUDE;
    }
    (void)memset(&v, 0, sizeof v);
    v.north_nT = ned_nT[0];
    v.east_nT = ned_nT[1];
    v.down_nT = ned_nT[2];
    h2 = v.north_nT * v.north_nT + v.east_nT * v.east_nT;
    f2 = h2 + v.down_nT * v.down_nT;
    v.horizontal_nT = real_sqrt(h2);
    v.total_nT = real_sqrt(f2);
    if (h2 > zero) {
        v.declination_deg = magnav_atan2_deg(v.east_nT, v.north_nT);
    }
    v.inclination_deg = magnav_atan2_deg(v.down_nT, v.horizontal_nT);
    if (ned_nT_per_yr != NULL) {
        v.north_nT_per_yr = ned_nT_per_yr[0];
        v.east_nT_per_yr = ned_nT_per_yr[1];
        v.down_nT_per_yr = ned_nT_per_yr[2];
        if (h2 > zero) {
            v.horizontal_nT_per_yr =
                (v.north_nT * v.north_nT_per_yr + v.east_nT * v.east_nT_per_yr) / v.horizontal_nT;
            v.declination_deg_per_yr =
                (v.north_nT * v.east_nT_per_yr - v.east_nT * v.north_nT_per_yr) / h2 * PER_RADIAN;
        }
        if (f2 > zero) {
            v.total_nT_per_yr = (v.north_nT * v.north_nT_per_yr + v.east_nT * v.east_nT_per_yr +
                                 v.down_nT * v.down_nT_per_yr) / v.total_nT;
            v.inclination_deg_per_yr =
                (v.horizontal_nT * v.down_nT_per_yr - v.down_nT * v.horizontal_nT_per_yr) / f2 * PER_RADIAN;
        }
    }
    if (!isfinite(f2) || !isfinite(v.horizontal_nT_per_yr) || !isfinite(v.total_nT_per_yr) ||
        !isfinite(v.declination_deg_per_yr) || !isfinite(v.inclination_deg_per_yr)) {
        return MAGNAV_E_NOT_FINITE; /* the values overflow */
    }
    if (real_abs(lat_deg) >= MAGNAV_GRID_VARIATION_LATITUDE_DEG) {
        /* the polar grid's convergence is the longitude, with its sign changed in the south */
        const magnav_real convergence = half_circle_deg((lat_deg > zero) ? lon_deg : zero - lon_deg);
        v.grid_variation_deg = half_circle_deg(v.declination_deg - convergence);
    }
    if (v.horizontal_nT < MAGNAV_BLACKOUT_NT) {
        v.flags |= MAGNAV_FLAG_BLACKOUT_ZONE;
    } else if (v.horizontal_nT < MAGNAV_CAUTION_NT) {
        v.flags |= MAGNAV_FLAG_CAUTION_ZONE;
    }
    if (!(h2 > zero)) {
        v.flags |= MAGNAV_FLAG_NO_DECLINATION;
    }
    if (real_abs(v.inclination_deg) > MAGNAV_STEEP_DIP_DEG) {
        v.flags |= MAGNAV_FLAG_STEEP_DIP;
    }
    if (real_abs(lat_deg) >= MAGNAV_POLE_LATITUDE_DEG) {
        v.flags |= MAGNAV_FLAG_NEAR_GEOGRAPHIC_POLE;
    }
    *field = v;
    return MAGNAV_OK;
}
