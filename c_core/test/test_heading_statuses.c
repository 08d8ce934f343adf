/* Every way in which a heading and the vertical can fail: the status, and that the outputs are as they were. */
#include "check.h"

#include <stddef.h>

static const magnav_real MAG[3] = {R(20), R(3), R(45)}, DOWN[3] = {0, 0, 1}, ACC[3] = {0, 0, R(-9.81)};

static magnav_status heading_status(const magnav_heading_setup *setup, const magnav_real *mag, const magnav_real *down,
                                    magnav_real tilt)
{
    magnav_heading h;
    magnav_status status;
    SPOIL(h);
    status = magnav_heading_of(setup, mag, down, tilt, &h);
    CHECK((status == MAGNAV_OK) != is_spoilt(&h, sizeof h));
    return status;
}

static void samples(void)
{
    static const double not_finite[] = {NAN, INFINITY, -INFINITY};
    const magnav_heading_setup setup = perfect_setup();
    const magnav_real none[3] = {0, 0, 0}, vertical[3] = {0, 0, R(45)}, huge[3] = {LARGE, LARGE, LARGE};

    CHECK(heading_status(&setup, MAG, DOWN, R(1)) == MAGNAV_OK);
    CHECK(heading_status(NULL, MAG, DOWN, 0) == MAGNAV_E_NULL);
    CHECK(heading_status(&setup, NULL, DOWN, 0) == MAGNAV_E_NULL);
    CHECK(heading_status(&setup, MAG, NULL, 0) == MAGNAV_E_NULL);
    CHECK(magnav_heading_of(&setup, MAG, DOWN, 0, NULL) == MAGNAV_E_NULL);
    for (int i = 0; i < LENGTH(not_finite); i++) {
        for (int k = 0; k < 3; k++) {
            magnav_real bad[3] = {R(20), R(3), R(45)};
            bad[k] = R(not_finite[i]);
            CHECK(heading_status(&setup, bad, DOWN, 0) == MAGNAV_E_NOT_FINITE);
            CHECK(heading_status(&setup, MAG, bad, 0) == MAGNAV_E_NOT_FINITE);
        }
    }
    CHECK(heading_status(&setup, MAG, DOWN, R(NAN)) == MAGNAV_E_NOT_FINITE);
    CHECK(heading_status(&setup, MAG, DOWN, R(INFINITY)) == MAGNAV_E_NOT_FINITE);
    CHECK(heading_status(&setup, huge, DOWN, 0) == MAGNAV_E_NOT_FINITE); /* its length overflows */
    CHECK(heading_status(&setup, MAG, huge, 0) == MAGNAV_E_NOT_FINITE);
    CHECK(heading_status(&setup, MAG, DOWN, LARGE) == MAGNAV_E_NOT_FINITE);
    CHECK(heading_status(&setup, MAG, none, 0) == MAGNAV_E_ACCELERATION);
    CHECK(heading_status(&setup, none, DOWN, 0) == MAGNAV_E_MAGNETIC);
    CHECK(heading_status(&setup, vertical, DOWN, 0) == MAGNAV_E_MAGNETIC);
    CHECK(heading_status(&setup, MAG, DOWN, R(-0.1)) == MAGNAV_E_PARAMETER);
}

/* Each number of the setup that a heading uses: not finite, negative or beyond its limit. */
static void settings(void)
{
    static const struct {
        size_t at;
        double limit; /* 0: not negative; otherwise the largest magnitude; below 0: any finite value */
    } number[] = {
        {offsetof(magnav_heading_setup, mag_noise_uT), 0},
        {offsetof(magnav_heading_setup, declination_deg), 180},
        {offsetof(magnav_heading_setup, declination_sigma_deg), 0},
        {offsetof(magnav_heading_setup, convergence_deg), 180},
        {offsetof(magnav_heading_setup, total_uT), 0},
        {offsetof(magnav_heading_setup, total_sigma_uT), 0},
        {offsetof(magnav_heading_setup, inclination_deg), 90},
        {offsetof(magnav_heading_setup, inclination_sigma_deg), 0},
        {offsetof(magnav_heading_setup, calibration.hard_iron_uT), -1},
        {offsetof(magnav_heading_setup, calibration.soft_iron) + 3 * sizeof(magnav_real), -1},
        {offsetof(magnav_heading_setup, calibration.covariance) + 44 * sizeof(magnav_real), -1},
    };
    static const double not_finite[] = {NAN, INFINITY, -INFINITY};

    for (int i = 0; i < LENGTH(number); i++) {
        magnav_heading_setup setup = perfect_setup();
        magnav_real *value = (magnav_real *)(void *)((char *)&setup + number[i].at);
        for (int k = 0; k < LENGTH(not_finite); k++) {
            *value = R(not_finite[k]);
            CHECK(heading_status(&setup, MAG, DOWN, 0) == MAGNAV_E_PARAMETER);
        }
        if (number[i].limit >= 0) {
            *value = R(-number[i].limit);
            CHECK(heading_status(&setup, MAG, DOWN, 0) == MAGNAV_OK);
            *value = NEXT(R(-number[i].limit), R(-1000));
            CHECK(heading_status(&setup, MAG, DOWN, 0) == MAGNAV_E_PARAMETER);
        }
        if (number[i].limit > 0) {
            *value = R(number[i].limit);
            CHECK(heading_status(&setup, MAG, DOWN, 0) == MAGNAV_OK);
            *value = NEXT(R(number[i].limit), R(1000));
            CHECK(heading_status(&setup, MAG, DOWN, 0) == MAGNAV_E_PARAMETER);
        }
    }
}

/* Figures so large or so small that a part of sigma would overflow: said, never a part of zero. */
static void overflow(void)
{
    const magnav_real faint[3] = {R(BY_TYPE(1e-160, 1e-21)), 0, R(45)};
    magnav_heading_setup setup = perfect_setup();
    CHECK(heading_status(&setup, faint, DOWN, R(1)) == MAGNAV_E_NOT_FINITE);
    setup.declination_sigma_deg = LARGE;
    CHECK(heading_status(&setup, MAG, DOWN, 0) == MAGNAV_E_NOT_FINITE);
    setup = perfect_setup();
    setup.calibration.covariance[2] = R(BY_TYPE(1e300, 1e30)); /* a large sigma, yet a number */
    CHECK(heading_status(&setup, MAG, DOWN, 0) == MAGNAV_OK);
    for (int i = 0; i < LENGTH(setup.calibration.covariance); i++) {
        setup.calibration.covariance[i] = R((i % 2) ? 1 : -1) * R(BY_TYPE(1e308, 1e38)); /* infinity minus infinity */
    }
    CHECK(heading_status(&setup, MAG, DOWN, 0) == MAGNAV_E_NOT_FINITE);
}

static magnav_status step_status(const magnav_vertical *from, const magnav_heading_setup *setup, const magnav_real *acc,
                                 const magnav_real *gyr, magnav_real dt)
{
    magnav_vertical v = *from;
    const magnav_status status = magnav_vertical_step(&v, setup, acc, gyr, dt);
    CHECK(status == MAGNAV_OK || memcmp(&v, from, sizeof v) == 0);
    return status;
}

static void verticals(void)
{
    static const double not_finite[] = {NAN, INFINITY, -INFINITY};
    const magnav_heading_setup good = perfect_setup();
    const magnav_real still[3] = {0, 0, 0}, fast[3] = {R(1e9), 0, 0};
    const magnav_real huge[3] = {LARGE, 0, 0}, tiny[3] = {R(1e-3), 0, 0};
    magnav_heading_setup setup = good;
    magnav_vertical v;

    memset(&v, 0, sizeof v);
    CHECK(step_status(&v, &good, still, NULL, 0) == MAGNAV_E_ACCELERATION);
    CHECK(step_status(&v, &good, huge, NULL, 0) == MAGNAV_E_NOT_FINITE);
    CHECK(magnav_vertical_step(&v, &good, ACC, NULL, R(NAN)) == MAGNAV_OK); /* the first has no time before it */
    CHECK(step_status(&v, &good, ACC, still, R(0.01)) == MAGNAV_OK);
    CHECK(magnav_vertical_step(NULL, &good, ACC, still, R(0.01)) == MAGNAV_E_NULL);
    CHECK(step_status(&v, NULL, ACC, still, R(0.01)) == MAGNAV_E_NULL);
    CHECK(step_status(&v, &good, NULL, still, R(0.01)) == MAGNAV_E_NULL);
    for (int i = 0; i < LENGTH(not_finite); i++) {
        for (int k = 0; k < 3; k++) {
            magnav_real bad[3] = {0, 0, R(-9.81)};
            bad[k] = R(not_finite[i]);
            CHECK(step_status(&v, &good, bad, still, R(0.01)) == MAGNAV_E_NOT_FINITE);
            CHECK(step_status(&v, &good, ACC, bad, R(0.01)) == MAGNAV_E_NOT_FINITE);
        }
        CHECK(step_status(&v, &good, ACC, still, R(not_finite[i])) == MAGNAV_E_TIME);
#define SETTING(name, value)                                                       \
    setup = good;                                                                  \
    setup.name = R(value);                                                         \
    CHECK(step_status(&v, &setup, ACC, still, R(0.01)) == MAGNAV_E_PARAMETER)
        SETTING(gravity_mps2, not_finite[i]);
        SETTING(acc_noise_mps2, not_finite[i]);
        SETTING(gyr_drift_radps, not_finite[i]);
    }
    SETTING(gravity_mps2, 0);
    SETTING(acc_noise_mps2, -1e-9);
    SETTING(gyr_drift_radps, -1e-9);
    CHECK(step_status(&v, &good, ACC, still, 0) == MAGNAV_E_TIME);
    CHECK(step_status(&v, &good, ACC, still, R(-0.01)) == MAGNAV_E_TIME);
    CHECK(step_status(&v, &good, ACC, fast, R(0.01)) == MAGNAV_E_NOT_FINITE); /* more turns than an angle can hold */
    CHECK(step_status(&v, &good, ACC, huge, R(0.01)) == MAGNAV_E_NOT_FINITE);
    CHECK(step_status(&v, &good, huge, still, R(0.01)) == MAGNAV_E_NOT_FINITE);
    CHECK(step_status(&v, &good, tiny, still, R(0.01)) == MAGNAV_OK);
    setup = good;
    setup.gyr_drift_radps = LARGE;
    setup.acc_noise_mps2 = R(0.1);
    CHECK(step_status(&v, &setup, ACC, still, R(0.01)) == MAGNAV_E_NOT_FINITE);

    /* a sample straight against the vertical, of the same weight: the two cancel and nothing is left */
    setup = good;
    setup.acc_noise_mps2 = R(9.81);
    memset(&v, 0, sizeof v);
    v.down[2] = 1;
    v.variance = 2;
    v.started = 1;
    {
        const magnav_real against[3] = {0, 0, R(9.81)};
        CHECK(step_status(&v, &setup, against, still, R(0.5)) == MAGNAV_E_ACCELERATION);
    }
}

static void logs(void)
{
    const magnav_heading_setup setup = perfect_setup();
    const magnav_real t = 0;
    magnav_heading h;
    int32_t status;

    SPOIL(h);
    SPOIL(status);
    CHECK(magnav_heading_log(NULL, 1, &t, MAG, ACC, NULL, &h, &status) == MAGNAV_E_NULL);
    CHECK(magnav_heading_log(&setup, 1, NULL, MAG, ACC, NULL, &h, &status) == MAGNAV_E_NULL);
    CHECK(magnav_heading_log(&setup, 1, &t, NULL, ACC, NULL, &h, &status) == MAGNAV_E_NULL);
    CHECK(magnav_heading_log(&setup, 1, &t, MAG, ACC, NULL, NULL, &status) == MAGNAV_E_NULL);
    CHECK(magnav_heading_log(&setup, 1, &t, MAG, ACC, NULL, &h, NULL) == MAGNAV_E_NULL);
    CHECK(magnav_heading_log(&setup, 0, &t, MAG, ACC, NULL, &h, &status) == MAGNAV_OK);
    CHECK(is_spoilt(&h, sizeof h) && is_spoilt(&status, sizeof status));
}

void test_heading_statuses(void)
{
    samples();
    settings();
    overflow();
    verticals();
    logs();
}
