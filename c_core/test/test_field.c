/* The field against published test values, and on a whole globe against an independent synthesis in long double. */
#include "check.h"

#include "wmm2025_data.h"

/* The textbook form, unlike the core's: Schmidt semi-normalised functions of the colatitude and their derivatives by
 * Langel, in Jacobs (ed.), Geomagnetism vol. 1, 1987, with a division by sin(theta). No use at a pole. */
static void textbook(double year, double lat_deg, double lon_deg, double height_m, double ned[3], double rate[3])
{
    const long double pi = 3.14159265358979323846264338327950288L;
    const long double a = 6378137, f = 1 / 298.257223563L, e2 = f * (2 - f);
    const long double lat = lat_deg * pi / 180, lon = lon_deg * pi / 180;
    const long double normal = a / sqrtl(1 - e2 * sinl(lat) * sinl(lat));
    const long double x = (normal + height_m) * cosl(lat), z = (normal * (1 - e2) + height_m) * sinl(lat);
    const long double r = hypotl(x, z), s = x / r, c = z / r, psi = lat - atan2l(z, x);
    long double p[WMM2025_DEGREE + 1][WMM2025_DEGREE + 1] = {{0}};
    long double sum[2][3] = {{0}};

    p[0][0] = 1;
    for (int n = 1; n <= WMM2025_DEGREE; n++) {
        p[n][n] = s * p[n - 1][n - 1] * ((n == 1) ? 1 : sqrtl((2 * n - 1) / (2.0L * n)));
        for (int m = 0; m < n; m++) {
            const long double before = (n >= 2) ? sqrtl((n - 1.0L) * (n - 1) - m * m) * p[n - 2][m] : 0;
            p[n][m] = ((2 * n - 1) * c * p[n - 1][m] - before) / sqrtl((long double)(n * n - m * m));
        }
    }
    for (int i = 0; i < LENGTH(WMM2025); i++) {
        const wmm_row *row = &WMM2025[i];
        const int n = row->n, m = row->m;
        const long double scale = powl(6371200 / r, n + 2);
        const long double slope = (n * c * p[n][m] - sqrtl((long double)(n * n - m * m)) * p[n - 1][m]) / s;
        const long double g[2] = {row->g_nT + (year - 2025) * (long double)row->g_nT_per_yr, row->g_nT_per_yr};
        const long double h[2] = {row->h_nT + (year - 2025) * (long double)row->h_nT_per_yr, row->h_nT_per_yr};
        for (int k = 0; k < 2; k++) {
            const long double along = g[k] * cosl(m * lon) + h[k] * sinl(m * lon);
            sum[k][0] += scale * along * slope;
            sum[k][1] += scale * m * (g[k] * sinl(m * lon) - h[k] * cosl(m * lon)) * p[n][m] / s;
            sum[k][2] -= scale * (n + 1) * along * p[n][m];
        }
    }
    for (int k = 0; k < 2; k++) {
        double *out = (k == 0) ? ned : rate;
        out[0] = (double)(sum[k][0] * cosl(psi) + sum[k][2] * sinl(psi));
        out[1] = (double)sum[k][1];
        out[2] = (double)(sum[k][2] * cosl(psi) - sum[k][0] * sinl(psi));
    }
}

static void published(double value, double given, double tolerance)
{
    if (given < NOT_GIVEN) {
        NEAR(value, given, tolerance);
    }
}

/* Source of the figures: wmm2025_data.h, where angles have two decimals. In float a component is allowed 0.1 nT. */
static void published_values(void)
{
    const double nT = BY_TYPE(0.001, 0.1);
    const double degrees = 0.005 + BY_TYPE(0.0, 0.002);
    magnav_real memory[WMM_REALS];
    magnav_field_values v;

    for (int i = 0; i < LENGTH(WMM2025_TEST_VALUES); i++) {
        const wmm_test_value *t = &WMM2025_TEST_VALUES[i];
        const magnav_snapshot snapshot = wmm2025_at(t->year, memory);
        CHECK(magnav_field_at(&snapshot, R(t->lat_deg), R(t->lon_deg), R(1000 * t->height_km), &v) == MAGNAV_OK);
        published(v.declination_deg, t->D_deg, degrees);
        published(v.inclination_deg, t->I_deg, degrees);
        published(v.horizontal_nT, t->H_nT, nT);
        published(v.north_nT, t->X_nT, nT);
        published(v.east_nT, t->Y_nT, nT);
        published(v.down_nT, t->Z_nT, nT);
        published(v.total_nT, t->F_nT, nT);
        if (t->X_nT < NOT_GIVEN && t->H_nT > 2000) {
            NEAR(v.declination_deg, atan2(t->Y_nT, t->X_nT) / RADIAN, BY_TYPE(1e-5, 0.002));
        }
    }
}

static double largest(double before, double x, double y, double z)
{
    return fmax(before, fmax(fabs(x), fmax(fabs(y), fabs(z))));
}

static void whole_globe(void)
{
    magnav_real memory[WMM_REALS];
    double worst = 0, worst_rate = 0, worst_turn = 0;
    int same = 1;

    for (int k = 0; k < 40; k++) {
        const magnav_real year = R(spread(2025, 2030));
        const magnav_snapshot snapshot = wmm2025_at(year, memory);
        for (int i = 0; i < 250; i++) {
            const magnav_real lat = R(spread(-89.999, 89.999));
            const magnav_real lon = R(spread(-360, 360));
            const magnav_real height = R((i % 2) ? spread(-1000, 20000) : spread(-10000, 850000));
            double ned[3], rate[3];
            magnav_real vector[3];
            magnav_field_values v;
            CHECK(magnav_field_at(&snapshot, lat, lon, height, &v) == MAGNAV_OK);
            CHECK(magnav_vector_at(&snapshot, lat, lon, height, vector) == MAGNAV_OK);
            same = same && vector[0] == v.north_nT && vector[1] == v.east_nT && vector[2] == v.down_nT;
            textbook(year, lat, lon, height, ned, rate);
            worst = largest(worst, v.north_nT - ned[0], v.east_nT - ned[1], v.down_nT - ned[2]);
            worst_rate = largest(worst_rate, v.north_nT_per_yr - rate[0], v.east_nT_per_yr - rate[1],
                                 v.down_nT_per_yr - rate[2]);
            if (hypot(ned[0], ned[1]) > 2000) {
                const double turn = remainder(v.declination_deg - atan2(ned[1], ned[0]) / RADIAN, 360);
                worst_turn = fmax(worst_turn, fabs(turn));
            }
        }
    }
    CHECK(same);
    CHECK(worst < BY_TYPE(1e-9, 0.1));
    CHECK(worst_rate < BY_TYPE(1e-11, 0.001));
    CHECK(worst_turn < BY_TYPE(1e-11, 0.002));
    printf("WMM2025, 10000 points against long double: component %.3g nT, rate %.3g nT/yr\n", worst, worst_rate);
    printf("    declination %.3g deg where H > 2000 nT\n", worst_turn);
}

/* High degrees: for g(n,0) alone down is -(n + 1) rho^(n+2) g (+-1)^n on the axis, as P(n,0) is +-1 there. */
static void high_degree(void)
{
    static magnav_real terms[MAGNAV_MAX_DEGREE * (MAGNAV_MAX_DEGREE + 2)];
    static magnav_real memory[MAGNAV_SNAPSHOT_REALS(MAGNAV_MAX_DEGREE)];
    static const magnav_real breaks[2] = {R(2000), R(2001)};
    magnav_model model = {breaks, terms, R(2000), R(2001), MAGNAV_MAX_DEGREE, 1, 1};
    magnav_snapshot snapshot;
    magnav_real ned[3];
    /* on the axis the radius is the polar one plus the height: put it at the reference radius */
    const double height = 6371200 - 6378137 * (1 - 1 / 298.257223563);

    for (int n = 1; n <= MAGNAV_MAX_DEGREE; n += (n < 20) ? 1 : 13) {
        memset(terms, 0, sizeof terms);
        terms[n * n - 1] = R(1);
        CHECK(magnav_snapshot_at(&model, R(2000), 0, memory, LENGTH(memory), &snapshot) == MAGNAV_OK);
        CHECK(magnav_vector_at(&snapshot, R(90), R(0), R(height), ned) == MAGNAV_OK);
        NEAR(ned[2], -(n + 1.0), 20 * n * n * EPSILON);
        NEAR(ned[0], 0, 20 * n * n * EPSILON);
        CHECK(magnav_vector_at(&snapshot, R(-90), R(0), R(height), ned) == MAGNAV_OK);
        NEAR(ned[2], -(n + 1.0) * ((n % 2) ? -1 : 1), 20 * n * n * EPSILON);
    }
}

void test_field(void)
{
    published_values();
    whole_globe();
    high_degree();
}
