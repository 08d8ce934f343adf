/* The time law: polynomials of several orders and pieces, breaks, tangents beyond the ends, rates. */
#include "check.h"

/* One zonal term of degree 1 has X = -g10 rho^3 on the equator (height 0: rho = 6371.2 / 6378.137): reads it back. */
static void g10_at(const magnav_model *model, double year, double *g, double *rate)
{
    const double rho3 = pow(6371.2 / 6378.137, 3);
    magnav_real memory[MAGNAV_SNAPSHOT_REALS(1)];
    magnav_snapshot snapshot;
    magnav_field_values v;
    CHECK(magnav_snapshot_at(model, R(year), 1, memory, LENGTH(memory), &snapshot) == MAGNAV_OK);
    CHECK(snapshot.year == R(year) && snapshot.degree == 1);
    CHECK(((snapshot.flags & MAGNAV_FLAG_OUTSIDE_VALIDITY) != 0) ==
          (R(year) < model->valid_from_yr || R(year) > model->valid_until_yr));
    CHECK(magnav_field_at(&snapshot, R(0), R(0), R(0), &v) == MAGNAV_OK);
    CHECK(v.flags == 0 || v.flags == MAGNAV_FLAG_OUTSIDE_VALIDITY);
    *g = -v.north_nT / rho3;
    *rate = -v.north_nT_per_yr / rho3;
}

#define PIECES 3
static const double BREAKS[PIECES + 1] = {2000, 2004, 2005, 2010};

static double coefficient(int piece, int k)
{
    static const double c[PIECES][4] = {{-30000, 25, -3, 0.5}, {-31000, -12, 4, -1.5}, {-29000, 8, 2.5, -0.25}};
    return c[piece][k];
}

static void expected(int order, double year, double *g, double *rate)
{
    const double held = fmin(fmax(year, BREAKS[0]), BREAKS[PIECES]);
    const int piece = (held >= BREAKS[2]) ? 2 : (held >= BREAKS[1]) ? 1 : 0;
    const double t = held - BREAKS[piece];
    *g = 0;
    *rate = 0;
    for (int k = 0; k < order; k++) {
        *g += coefficient(piece, k) * pow(t, k);
        *rate += (k == 0) ? 0 : k * coefficient(piece, k) * pow(t, k - 1);
    }
    *g += *rate * (year - held);
}

static void time_law(int order)
{
    /* before, at and after every break, within, on both ends and far beyond */
    static const double years[] = {
        1980, 1999.875, 2000,     2000.125, 2002,     2003.9990234375, 2004,     2004.0009765625, 2004.5,
        2004.875, 2005, 2007.25,  2009.875, 2010,     2010.125,        2040};
    magnav_real breaks[PIECES + 1];
    magnav_real polynomials[PIECES * 4 * 3] = {0};
    magnav_model model = {breaks, polynomials, R(2001), R(2009), 1, order, PIECES};
    double g, rate, g_wanted, rate_wanted;

    for (int i = 0; i <= PIECES; i++) {
        breaks[i] = R(BREAKS[i]);
    }
    for (int i = 0; i < PIECES; i++) {
        for (int k = 0; k < order; k++) {
            polynomials[(i * order + k) * 3] = R(coefficient(i, k));
        }
    }
    for (int i = 0; i < LENGTH(years); i++) {
        g10_at(&model, years[i], &g, &rate);
        expected(order, years[i], &g_wanted, &rate_wanted);
        NEAR(g, g_wanted, 20 * EPSILON * 31000);
        NEAR(rate, rate_wanted, 20 * EPSILON * fmax(25, fabs(rate_wanted)));
    }
}

/* As many pieces as are accepted, a step each: every one is found. */
static void most_pieces(void)
{
    enum { MOST = 10000 };
    static magnav_real breaks[MOST + 1], polynomials[3 * MOST];
    magnav_model model = {breaks, polynomials, R(0), R(MOST), 1, 1, MOST};
    double g, rate;

    for (int i = 0; i <= MOST; i++) {
        breaks[i] = R(i);
    }
    for (int i = 0; i < MOST; i++) {
        polynomials[3 * i] = R(-20000 - i);
    }
    for (int i = 0; i < MOST; i += 1111) {
        g10_at(&model, i + 0.5, &g, &rate);
        NEAR(g, -20000 - i, 20 * EPSILON * 30000);
        CHECK(rate == 0);
    }
}

/* Rates are the derivatives of the values: central differences of two snapshots. */
static void rates(void)
{
    const double step = BY_TYPE(0.001, 0.25);
    /* float: rounding of the values, over the step, and of the curvature */
    const double nT = BY_TYPE(1e-6, 0.2), degrees = BY_TYPE(1e-8, 0.003);
    magnav_real memory[WMM_REALS];

    for (int i = 0; i < 200; i++) {
        const magnav_real lat = R(spread(-85, 85)), lon = R(spread(-180, 180)), height = R(spread(0, 500000));
        const double year = BY_TYPE(spread(2025.1, 2029.9), 2025.5 + i % 4);
        magnav_field_values before, now, after;
        magnav_snapshot snapshot = wmm2025_at(year - step, memory);
        CHECK(magnav_field_at(&snapshot, lat, lon, height, &before) == MAGNAV_OK);
        snapshot = wmm2025_at(year + step, memory);
        CHECK(magnav_field_at(&snapshot, lat, lon, height, &after) == MAGNAV_OK);
        snapshot = wmm2025_at(year, memory);
        CHECK(magnav_field_at(&snapshot, lat, lon, height, &now) == MAGNAV_OK);
        if (now.horizontal_nT < 5000) {
            continue; /* the declination is too curved for a difference */
        }
#define RATE(name, tolerance) NEAR(now.name##_per_yr, ((double)after.name - before.name) / (2 * step), tolerance)
        RATE(north_nT, nT);
        RATE(east_nT, nT);
        RATE(down_nT, nT);
        RATE(horizontal_nT, nT);
        RATE(total_nT, nT);
        RATE(inclination_deg, degrees);
        NEAR(now.declination_deg_per_yr,
             remainder((double)after.declination_deg - before.declination_deg, 360) / (2 * step), degrees);
    }
}

void test_time(void)
{
    time_law(1);
    time_law(2);
    time_law(4);
    most_pieces();
    rates();
}
