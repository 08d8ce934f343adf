/* The field vector at a point, from a snapshot: spherical harmonic synthesis without a special case at the poles.
 *
 * With s, c the sine and cosine of the colatitude, rho = a / r and column sums over the degrees n of one order m
 *   S = sum g q,  T = sum (n+1) g q,  U = sum g p,   p the derivative of q by rho c, carried along by its own recursion,
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

/* Sums over the degrees of one order, and what one order adds to the vector. */
typedef struct column_sums {
    magnav_real sg, sh, tg, th, ug, uh;
} column_sums;

static void add_order(magnav_real ned[3], const column_sums *sums, const position *at, magnav_real m,
                      magnav_real rho_s, const magnav_real e[2])
{
    /* e = (rho s)^(m-1) exp(i m lon) */
    const magnav_real m_rho = m * at->rho;

    ned[0] = ned[0] + (m_rho * at->c * (e[0] * sums->sg + e[1] * sums->sh) -
                       rho_s * rho_s * (e[0] * sums->ug + e[1] * sums->uh));
    ned[1] = ned[1] + m_rho * (e[1] * sums->sg - e[0] * sums->sh);
    ned[2] = ned[2] - rho_s * (e[0] * sums->tg + e[1] * sums->th);
}

/* Geocentric north, east, down to the geodetic vertical. */
static void turn_to_vertical(const magnav_real geocentric[3], const position *at, magnav_real ned[3])
{
    const magnav_real rho2 = at->rho * at->rho;

    ned[0] = rho2 * (geocentric[0] * at->cosine_psi + geocentric[2] * at->sine_psi);
    ned[1] = rho2 * geocentric[1];
    ned[2] = rho2 * (geocentric[2] * at->cosine_psi - geocentric[0] * at->sine_psi);
}

/* The vector, and with `ned_rate` not NULL its yearly change. */
static void synthesise(const magnav_snapshot *snapshot, const position *at, magnav_real ned[3],
                       magnav_real ned_rate[3])
{
    const magnav_real zero = MAGNAV_C(0.0);
    const magnav_real one = MAGNAV_C(1.0);
    const magnav_real rho_s = at->rho * at->s;
    const magnav_real z = at->rho * at->c;
    const magnav_real rho2 = at->rho * at->rho;
    const magnav_real *term = snapshot->terms;
    magnav_real e[2] = {at->cosine_lon, at->sine_lon};
    magnav_real field[3] = {zero, zero, zero};
    magnav_real rate[3] = {zero, zero, zero};
    magnav_real m_real = zero;

    for (int32_t m = 0; m <= snapshot->degree; m++) {
        /* order 0 starts at n = 1 with q = z, after q = 1 at n = 0, whose coefficient is zero */
        magnav_real q = (m == 0) ? z : one;
        magnav_real q_before = (m == 0) ? one : zero;
        magnav_real p = (m == 0) ? one : zero; /* the slope of q by z */
        magnav_real p_before = zero;
        magnav_real n_plus_1 = (m == 0) ? MAGNAV_C(2.0) : m_real + one;
        magnav_real sg = zero, sh = zero, tg = zero, th = zero, ug = zero, uh = zero;
        /* the same for the yearly change */
        magnav_real dsg = zero, dsh = zero, dtg = zero, dth = zero, dug = zero, duh = zero;

        for (int32_t left = snapshot->degree - ((m == 0) ? 0 : m - 1); left > 0; left--) {
            const magnav_real beta = term[0] * rho2;
            const magnav_real weighted = n_plus_1 * q;
            const magnav_real p_next = (q + z * p) - beta * p_before;
            const magnav_real q_next = z * q - beta * q_before;
            magnav_real g = term[1];
            magnav_real h = term[2];

            sg = sg + g * q;
            sh = sh + h * q;
            tg = tg + g * weighted;
            th = th + h * weighted;
            ug = ug + g * p;
            uh = uh + h * p;
            if (ned_rate != NULL) {
                g = term[3];
                h = term[4];
                dsg = dsg + g * q;
                dsh = dsh + h * q;
                dtg = dtg + g * weighted;
                dth = dth + h * weighted;
                dug = dug + g * p;
                duh = duh + h * p;
            }
            q_before = q;
            q = q_next;
            p_before = p;
            p = p_next;
            n_plus_1 = n_plus_1 + one;
            term += 5;
        }
        if (m == 0) {
            field[0] = zero - rho_s * ug;
            field[2] = zero - tg;
            rate[0] = zero - rho_s * dug;
            rate[2] = zero - dtg;
        } else {
            const magnav_real cosine = e[0];
            const column_sums sums = {sg, sh, tg, th, ug, uh};
            add_order(field, &sums, at, m_real, rho_s, e);
            if (ned_rate != NULL) {
                const column_sums change = {dsg, dsh, dtg, dth, dug, duh};
                add_order(rate, &change, at, m_real, rho_s, e);
            }
            e[0] = rho_s * (cosine * at->cosine_lon - e[1] * at->sine_lon);
            e[1] = rho_s * (cosine * at->sine_lon + e[1] * at->cosine_lon);
        }
        m_real = m_real + one;
    }
    turn_to_vertical(field, at, ned);
    if (ned_rate != NULL) {
        turn_to_vertical(rate, at, ned_rate);
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
    synthesise(snapshot, &at, ned, NULL);
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
    synthesise(snapshot, &at, ned, rate);
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
