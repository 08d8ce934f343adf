/* The calibrator for the target: known iron found, its covariance, what it refuses and why. */
#include "check.h"

#include "magnav_calibrator.h"

#define FIELD 48.0

/* A reading of a distorted sensor along a direction: m = W^-1 F u + b, W^-1 given. */
static void reading(const double u[3], double noise, magnav_real out[3])
{
    static const double bend[3][3] = {{1.08, 0.03, -0.02}, {0.03, 0.94, 0.04}, {-0.02, 0.04, 1.01}};
    static const double hard[3] = {62.0, -35.0, 11.0};
    for (int i = 0; i < 3; i++) {
        out[i] = R(FIELD * (bend[i][0] * u[0] + bend[i][1] * u[1] + bend[i][2] * u[2]) + hard[i] +
                   noise * spread(-1.7320508, 1.7320508));
    }
}

/* A direction drawn evenly from the sphere between two heights. */
static void direction(double low, double high, double u[3])
{
    const double z = spread(low, high);
    const double turn = spread(0, 6.283185307179586);
    const double across = sqrt(1 - z * z);
    u[0] = across * cos(turn);
    u[1] = across * sin(turn);
    u[2] = z;
}

static magnav_calibrator filled(int count, double low, double high, double noise)
{
    magnav_calibrator c;
    CHECK(magnav_calibrator_start(&c, R(FIELD)) == MAGNAV_OK);
    for (int i = 0; i < count; i++) {
        double u[3];
        magnav_real m[3];
        direction(low, high, u);
        reading(u, noise, m);
        CHECK(magnav_calibrator_add(&c, m) == MAGNAV_OK);
    }
    return c;
}

static magnav_calibrator_result solved(const magnav_calibrator *c)
{
    magnav_calibrator_result result;
    SPOIL(result);
    CHECK(magnav_calibrator_solve(c, &result) == MAGNAV_OK);
    return result;
}

static void known_iron(void)
{
    const magnav_calibrator exact = filled(400, -1, 1, 0);
    const magnav_calibrator noisy = filled(4000, -1, 1, 0.3);
    const magnav_calibrator_result one = solved(&exact);
    const magnav_calibrator_result other = solved(&noisy);
    double worst = 0;

    CHECK(one.refusal == MAGNAV_REFUSED_NOT && one.seen == MAGNAV_CALIBRATOR_DIRECTIONS);
    CHECK(other.refusal == MAGNAV_REFUSED_NOT);
    NEAR(one.calibration.hard_iron_uT[0], 62.0, BY_TYPE(1e-9, 2e-3));
    NEAR(one.calibration.hard_iron_uT[1], -35.0, BY_TYPE(1e-9, 2e-3));
    NEAR(one.calibration.hard_iron_uT[2], 11.0, BY_TYPE(1e-9, 2e-3));
    NEAR(one.noise_uT, 0, BY_TYPE(1e-9, 2e-3));
    NEAR(other.noise_uT, 0.3, 0.015);
    for (int i = 0; i < 50; i++) {
        double u[3];
        magnav_real m[3];
        direction(-1, 1, u);
        reading(u, 0, m);
        for (int k = 0; k < 3; k++) {
            double b = 0;
            for (int j = 0; j < 3; j++) {
                b += (double)one.calibration.soft_iron[3 * k + j] *
                     ((double)m[j] - (double)one.calibration.hard_iron_uT[j]);
            }
            worst = fmax(worst, fabs(b - FIELD * u[k]));
        }
    }
    CHECK(worst < BY_TYPE(1e-8, 5e-3));
    /* hard iron and its stated sigma: noise / sqrt(n / 3) is the bound of a sphere (Cramer and Rao) */
    NEAR(sqrt((double)other.calibration.covariance[0]), 0.3 / sqrt(4000 / 3.0), 0.003);
    CHECK(fabs((double)other.calibration.hard_iron_uT[0] - 62.0) < 4 * sqrt((double)other.calibration.covariance[0]));
    for (int i = 0; i < 9; i++) {
        CHECK(other.calibration.covariance[i * (i + 1) / 2 + i] > 0);
    }
}

static void refusals(void)
{
    magnav_calibrator c = filled(49, -1, 1, 0.3);
    magnav_real spike[3] = {0, 0, 0};

    CHECK(solved(&c).refusal == MAGNAV_REFUSED_FEW);
    c = filled(2000, 0.75, 1, 0.3);
    CHECK(solved(&c).refusal == MAGNAV_REFUSED_COVERAGE || solved(&c).refusal == MAGNAV_REFUSED_SHAPE);
    c = filled(2000, 0.4, 1, 0.05);
    CHECK(solved(&c).refusal == MAGNAV_REFUSED_COVERAGE);
    CHECK(solved(&c).seen < MAGNAV_CALIBRATOR_SEEN);
    /* the same reading again and again says nothing */
    CHECK(magnav_calibrator_start(&c, R(FIELD)) == MAGNAV_OK);
    for (int i = 0; i < 100; i++) {
        const magnav_real m[3] = {20, 10, 40};
        CHECK(magnav_calibrator_add(&c, m) == MAGNAV_OK);
    }
    CHECK(solved(&c).refusal == MAGNAV_REFUSED_COVERAGE);
    /* another scale: twice the field is another sensor's unit, seen as shape at the right size */
    c = filled(1500, -1, 1, 6.0);
    CHECK(solved(&c).refusal == MAGNAV_REFUSED_RESIDUAL);
    /* far off centre */
    CHECK(magnav_calibrator_start(&c, R(FIELD)) == MAGNAV_OK);
    for (int i = 0; i < 1000; i++) {
        double u[3];
        magnav_real m[3];
        direction(-1, 1, u);
        reading(u, 0.1, m);
        m[1] += R(5 * FIELD);
        CHECK(magnav_calibrator_add(&c, m) == MAGNAV_OK);
    }
    CHECK(solved(&c).refusal == MAGNAV_REFUSED_OFFSET);
    /* stretched twofold */
    CHECK(magnav_calibrator_start(&c, R(FIELD)) == MAGNAV_OK);
    for (int i = 0; i < 1000; i++) {
        double u[3];
        magnav_real m[3];
        direction(-1, 1, u);
        for (int k = 0; k < 3; k++) {
            m[k] = R(FIELD * u[k] * ((k == 2) ? 2.0 : 1.0));
        }
        CHECK(magnav_calibrator_add(&c, m) == MAGNAV_OK);
    }
    CHECK(solved(&c).refusal == MAGNAV_REFUSED_SHAPE);

    spike[1] = R(2e6);
    CHECK(magnav_calibrator_add(&c, spike) == MAGNAV_E_MAGNETIC && c.count == 1000);
    spike[1] = R(NAN);
    CHECK(magnav_calibrator_add(&c, spike) == MAGNAV_E_NOT_FINITE && c.count == 1000);
    CHECK(magnav_calibrator_add(NULL, spike) == MAGNAV_E_NULL && magnav_calibrator_add(&c, NULL) == MAGNAV_E_NULL);
    c.count = INT32_MAX;
    spike[1] = 0;
    CHECK(magnav_calibrator_add(&c, spike) == MAGNAV_E_MEMORY);
    CHECK(magnav_calibrator_solve(NULL, NULL) == MAGNAV_E_NULL && magnav_calibrator_solve(&c, NULL) == MAGNAV_E_NULL);
    CHECK(magnav_calibrator_start(NULL, R(50)) == MAGNAV_E_NULL);
    CHECK(magnav_calibrator_start(&c, R(0)) == MAGNAV_E_PARAMETER);
    CHECK(magnav_calibrator_start(&c, R(-50)) == MAGNAV_E_PARAMETER);
    CHECK(magnav_calibrator_start(&c, R(INFINITY)) == MAGNAV_E_PARAMETER);
    CHECK(magnav_calibrator_start(&c, R(NAN)) == MAGNAV_E_PARAMETER);
}

void test_calibrator(void)
{
    CHECK(sizeof(magnav_calibrator) <= (size_t)BY_TYPE(800, 400));
    known_iron();
    refusals();
}
