/* The field vector at a point, from a snapshot: spherical harmonic synthesis without a special case at the poles.
 *
 * With s, c the sine and cosine of the colatitude, rho = a / r and column sums over the degrees n of one order m
 *   S = sum g q,  T = sum (n+1) g q,  U = sum (n-m) g q',   q' the polynomial of order m+1 (the derivative of q),
 * the components are (Langel, in Jacobs (ed.), Geomagnetism vol. 1, 1987, sec. 3, differentiated term by term)
 *   north  rho^2 sum_m  m c rho (rho s)^(m-1) (C S_g + D S_h) - (rho s)^(m+1) (C U_g + D U_h)
 *   east   rho^2 sum_m  m   rho (rho s)^(m-1) (D S_g - C S_h)
 *   down  -rho^2 sum_m  (rho s)^m (C T_g + D T_h)
 * with C + iD = exp(i m lon). No power of s is ever divided by: at a pole only m = 1 is left in north and east. */
#include "real.h"

#define REFERENCE_RADIUS_M MAGNAV_C(6371200.0)
/* WGS84: semi-major axis and first eccentricity squared, f (2 - f) with f = 1 / 298.257223563 */
#define WGS84_A_M MAGNAV_C(6378137.0)
#define WGS84_E2 MAGNAV_C(0.0066943799901413169961)

typedef struct position {
    magnav_real sine_lon, cosine_lon;
    magnav_real s, c;                /* of the geocentric colatitude */
    magnav_real rho;                 /* reference radius over radius */
    magnav_real sine_psi, cosine_psi; /* of geodetic minus geocentric latitude */
} position;

static magnav_status locate(magnav_real lat_deg, magnav_real lon_deg, magnav_real height_m, position *at)
{
    magnav_real sine;
    magnav_real cosine;
    magnav_real normal;
    magnav_real p;
    magnav_real z;
    magnav_real r;

    if (!isfinite(lat_deg) || !isfinite(lon_deg) || !isfinite(height_m)) {
        return MAGNAV_E_NOT_FINITE;
    }
    if (real_abs(lat_deg) > MAGNAV_C(90.0)) {
        return MAGNAV_E_LATITUDE;
    }
    if (real_abs(lon_deg) > MAGNAV_C(360.0)) {
        return MAGNAV_E_LONGITUDE;
    }
    if (height_m < MAGNAV_LOWEST_M || height_m > MAGNAV_HIGHEST_M) {
        return MAGNAV_E_HEIGHT;
    }
    magnav_sincos_deg(lon_deg, &at->sine_lon, &at->cosine_lon);
    magnav_sincos_deg(lat_deg, &sine, &cosine);
    normal = WGS84_A_M / real_sqrt(MAGNAV_C(1.0) - WGS84_E2 * sine * sine);
    p = (normal + height_m) * cosine;
    z = (normal * (MAGNAV_C(1.0) - WGS84_E2) + height_m) * sine;
    r = real_sqrt(p * p + z * z);
    at->s = p / r;
    at->c = z / r;
    at->rho = REFERENCE_RADIUS_M / r;
    /* sin(lat - geocentric lat) in the form that does not cancel */
    at->sine_psi = WGS84_E2 * normal * sine * cosine / r;
    at->cosine_psi = (p * cosine + z * sine) / r;
    return MAGNAV_OK;
}

/* Column sums of one order for one set of coefficients; u belongs to the order before. */
typedef struct column_sums {
    magnav_real sg, sh, tg, th, ug, uh;
} column_sums;

static inline void add_term(column_sums *sums, const magnav_real gh[2], magnav_real q, magnav_real weighted)
{
    sums->sg = sums->sg + gh[0] * q;
    sums->sh = sums->sh + gh[1] * q;
    sums->tg = sums->tg + gh[0] * weighted;
    sums->th = sums->th + gh[1] * weighted;
}

static inline void add_slope(column_sums *sums, const magnav_real gh[2], magnav_real weighted)
{
    sums->ug = sums->ug + gh[0] * weighted;
    sums->uh = sums->uh + gh[1] * weighted;
}

static inline void add_order(magnav_real ned[3], const column_sums *sums, const position *at, magnav_real m,
                             magnav_real rho_s, const magnav_real e_now[2], const magnav_real e_before[2])
{
    /* e_now = (rho s)^(m-1) exp(i m lon); e_before is that of order m - 1, for the sums u */
    const magnav_real along = e_now[0] * sums->sg + e_now[1] * sums->sh;
    const magnav_real across = e_now[1] * sums->sg - e_now[0] * sums->sh;
    const magnav_real slope = e_before[0] * sums->ug + e_before[1] * sums->uh;

    ned[0] = ned[0] + (m * at->c * at->rho * along - rho_s * rho_s * slope);
    ned[1] = ned[1] + m * at->rho * across;
    ned[2] = ned[2] - rho_s * (e_now[0] * sums->tg + e_now[1] * sums->th);
}

/* Geocentric north, east, down, and with `rates` their yearly change, turned to the geodetic vertical. */
static void synthesise(const magnav_snapshot *snapshot, const position *at, int32_t rates, magnav_real ned[3],
                       magnav_real ned_rate[3])
{
    const int32_t degree = snapshot->degree;
    const magnav_real rho_s = at->rho * at->s;
    const magnav_real rho_c = at->rho * at->c;
    const magnav_real rho2 = at->rho * at->rho;
    const magnav_real turn[2] = {rho_s * at->cosine_lon, rho_s * at->sine_lon};
    magnav_real e_before[2] = {MAGNAV_C(0.0), MAGNAV_C(0.0)};
    magnav_real e_now[2] = {MAGNAV_C(0.0), MAGNAV_C(0.0)};
    const magnav_real *column = snapshot->terms; /* of order m, its first degree */
    const magnav_real *column_before = snapshot->terms;
    magnav_real field[3] = {MAGNAV_C(0.0), MAGNAV_C(0.0), MAGNAV_C(0.0)};
    magnav_real rate[3] = {MAGNAV_C(0.0), MAGNAV_C(0.0), MAGNAV_C(0.0)};

    for (int32_t m = 0; m <= degree; m++) {
        column_sums sums = {0};
        column_sums sums_rate = {0};
        const int32_t first = (m == 0) ? 1 : m;
        /* order 0 starts at n = 1 with q = cos, after q = 1 at n = 0, whose coefficient is zero */
        magnav_real q = (m == 0) ? rho_c : MAGNAV_C(1.0);
        magnav_real q_before = (m == 0) ? MAGNAV_C(1.0) : MAGNAV_C(0.0);
        const magnav_real *term = column;
        /* the order before, at the same degree; order 0 has no such, and no slope either */
        const magnav_real *term_before = column_before + ((m > 1) ? 5 : 0);

        for (int32_t n = first; n <= degree; n++) {
            const magnav_real weighted = (magnav_real)(n + 1) * q;
            const magnav_real q_next = rho_c * q - term[0] * rho2 * q_before;

            add_term(&sums, &term[1], q, weighted);
            if (rates) {
                add_term(&sums_rate, &term[3], q, weighted);
            }
            if (m > 0) {
                const magnav_real slope = (magnav_real)(n - m + 1) * q;
                add_slope(&sums, &term_before[1], slope);
                if (rates) {
                    add_slope(&sums_rate, &term_before[3], slope);
                }
                term_before += 5;
            }
            q_before = q;
            q = q_next;
            term += 5;
        }
        if (m == 0) {
            field[2] = field[2] - sums.tg;
            rate[2] = rate[2] - sums_rate.tg;
        } else {
            if (m == 1) {
                e_now[0] = at->cosine_lon;
                e_now[1] = at->sine_lon;
                /* order 0 has u weighted by (rho s)^1 alone: fold its missing power here */
                field[0] = field[0] - rho_s * sums.ug;
                rate[0] = rate[0] - rho_s * sums_rate.ug;
            } else {
                e_before[0] = e_now[0];
                e_before[1] = e_now[1];
                e_now[0] = e_before[0] * turn[0] - e_before[1] * turn[1];
                e_now[1] = e_before[0] * turn[1] + e_before[1] * turn[0];
            }
            add_order(field, &sums, at, (magnav_real)m, rho_s, e_now, e_before);
            if (rates) {
                add_order(rate, &sums_rate, at, (magnav_real)m, rho_s, e_now, e_before);
            }
        }
        column_before = column;
        column = term;
    }
    ned[0] = rho2 * (field[0] * at->cosine_psi + field[2] * at->sine_psi);
    ned[1] = rho2 * field[1];
    ned[2] = rho2 * (field[2] * at->cosine_psi - field[0] * at->sine_psi);
    if (rates) {
        ned_rate[0] = rho2 * (rate[0] * at->cosine_psi + rate[2] * at->sine_psi);
        ned_rate[1] = rho2 * rate[1];
        ned_rate[2] = rho2 * (rate[2] * at->cosine_psi - rate[0] * at->sine_psi);
    }
}

static uint32_t position_flags(magnav_real height_m)
{
    return (height_m < MAGNAV_MODEL_LOWEST_M || height_m > MAGNAV_MODEL_HIGHEST_M) ? MAGNAV_FLAG_HEIGHT_OUT_OF_RANGE
                                                                                  : 0U;
}

magnav_status magnav_vector_at(const magnav_snapshot *snapshot, magnav_real lat_deg, magnav_real lon_deg,
                               magnav_real height_m, magnav_real ned_nT[3])
{
    position at;
    magnav_real ned[3];
    magnav_status status;

    if (snapshot == NULL || snapshot->terms == NULL || ned_nT == NULL) {
        return MAGNAV_E_NULL;
    }
    status = locate(lat_deg, lon_deg, height_m, &at);
    if (status != MAGNAV_OK) {
        return status;
    }
    synthesise(snapshot, &at, 0, ned, NULL);
    if (!all_finite(ned, 3)) {
        return MAGNAV_E_NOT_FINITE; /* a coefficient is */
    }
    for (int32_t i = 0; i < 3; i++) {
        ned_nT[i] = ned[i];
    }
    return MAGNAV_OK;
}

magnav_status magnav_field_at(const magnav_snapshot *snapshot, magnav_real lat_deg, magnav_real lon_deg,
                              magnav_real height_m, magnav_field_values *field)
{
    position at;
    magnav_real ned[3];
    magnav_real rate[3];
    magnav_status status;

    if (snapshot == NULL || snapshot->terms == NULL || field == NULL) {
        return MAGNAV_E_NULL;
    }
    status = locate(lat_deg, lon_deg, height_m, &at);
    if (status != MAGNAV_OK) {
        return status;
    }
    synthesise(snapshot, &at, 1, ned, rate);
    status = magnav_elements(ned, rate, lat_deg, lon_deg, field);
    if (status == MAGNAV_OK) {
        field->flags |= snapshot->flags | position_flags(height_m);
    }
    return status;
}

magnav_status magnav_field_many(const magnav_model *model, int32_t extrapolate, magnav_real *memory,
                                size_t memory_reals, size_t count, const magnav_real *lat_deg,
                                const magnav_real *lon_deg, const magnav_real *height_m, const magnav_real *year,
                                magnav_field_values *fields, int32_t *status)
{
    magnav_snapshot snapshot = {NULL, MAGNAV_C(0.0), 0, 0U};
    magnav_status dated = MAGNAV_E_DATE;

    if (model == NULL || memory == NULL || lat_deg == NULL || lon_deg == NULL || height_m == NULL || year == NULL ||
        fields == NULL || status == NULL) {
        return MAGNAV_E_NULL;
    }
    for (size_t i = 0; i < count; i++) {
        if (snapshot.terms == NULL || year[i] < snapshot.year || year[i] > snapshot.year || !isfinite(year[i])) {
            snapshot.terms = NULL;
            dated = magnav_snapshot_at(model, year[i], extrapolate, memory, memory_reals, &snapshot);
            if (dated == MAGNAV_E_NULL || dated == MAGNAV_E_MODEL || dated == MAGNAV_E_MEMORY) {
                return dated;
            }
        }
        status[i] = (int32_t)((dated == MAGNAV_OK)
                                  ? magnav_field_at(&snapshot, lat_deg[i], lon_deg[i], height_m[i], &fields[i])
                                  : dated);
    }
    return MAGNAV_OK;
}
