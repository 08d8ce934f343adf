/* Evaluates a patch: every term's power product once, for the three components together. */
#include "magnav_patch.h"

#include "real.h"

magnav_status magnav_patch_at(const magnav_patch *patch, magnav_real lat_deg, magnav_real lon_deg, magnav_real height_m,
                              magnav_real year, magnav_real ned_nT[3])
{
    const magnav_real one = MAGNAV_C(1.0);
    magnav_real at[4];
    magnav_real north = MAGNAV_C(0.0);
    magnav_real east = MAGNAV_C(0.0);
    magnav_real down = MAGNAV_C(0.0);
    magnav_real date_power = one;
    magnav_real y;
    const magnav_real *c;

    if (patch == NULL || patch->coefficients == NULL || ned_nT == NULL) {
        return MAGNAV_E_NULL;
    }
    if (patch->degree < 1 || patch->degree > MAGNAV_PATCH_MAX_DEGREE) {
        return MAGNAV_E_MODEL;
    }
    at[0] = lat_deg - patch->middle[0];
    at[1] = lon_deg - patch->middle[1];
    at[2] = height_m - patch->middle[2];
    at[3] = year - patch->middle[3];
    if (at[1] > MAGNAV_C(180.0)) {
        at[1] = at[1] - MAGNAV_C(360.0);
    } else if (at[1] < MAGNAV_C(-180.0)) {
        at[1] = at[1] + MAGNAV_C(360.0);
    }
    for (int32_t i = 0; i < 4; i++) {
        at[i] = at[i] * patch->inverse_half[i];
        if (!(at[i] <= one && at[i] >= MAGNAV_C(-1.0))) {
            /* a NaN fails the comparison, too */
            return isfinite(at[i]) ? MAGNAV_E_AREA : MAGNAV_E_NOT_FINITE;
        }
    }
    c = patch->coefficients;
    y = at[1];
    for (int32_t after_date = patch->degree; after_date >= patch->degree - 2 && after_date >= 0; after_date -= 2) {
        magnav_real height_power = date_power;
        for (int32_t left = after_date; left >= 0 && left >= after_date - 4; left -= 2) {
            magnav_real lat_power = height_power;
            for (int32_t i = left; i >= 0; i--) {
                magnav_real product = lat_power;
                for (int32_t j = i; j >= 0; j--) {
                    north = north + c[0] * product;
                    east = east + c[1] * product;
                    down = down + c[2] * product;
                    product = product * y;
                    c += 3;
                }
                lat_power = lat_power * at[0];
            }
            height_power = height_power * at[2];
        }
        date_power = date_power * at[3];
    }
    ned_nT[0] = north;
    ned_nT[1] = east;
    ned_nT[2] = down;
    return MAGNAV_OK;
}
