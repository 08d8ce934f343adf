/* Flags of the heading, each raised on one side of its limit and not on the other. */
#include "check.h"

static uint32_t flags_of(const magnav_heading_setup *setup, const magnav_real mag[3], double pitch, double tilt_sigma)
{
    const magnav_real down[3] = {R(-sin(pitch * RADIAN)), 0, R(cos(pitch * RADIAN))};
    magnav_heading h;
    memset(&h, 0, sizeof h);
    CHECK(magnav_heading_of(setup, mag, down, R(tilt_sigma), &h) == MAGNAV_OK);
    return h.flags;
}

/* The checks allow three standard deviations of all that enters: model, noise, calibration, for the dip the tilt. */
static void plausibility(void)
{
    const magnav_real mag[3] = {R(30), 0, R(40)}; /* 50 uT, dip atan(4/3) */
    const double dip = atan2(40, 30) / RADIAN;
    static const double beside[] = {-3.01, -2.99, 0, 2.99, 3.01};

    for (int i = 0; i < LENGTH(beside); i++) {
        const int out = fabs(beside[i]) > 3;
        magnav_heading_setup setup = perfect_setup();
        double sigma;
        /* magnitude: model 0.3, noise 0.4, and the forward bias 1.2 which enters by 30/50 of it */
        setup.total_sigma_uT = R(0.3);
        setup.mag_noise_uT = R(0.4);
        setup.calibration.covariance[0] = R(1.44);
        setup.inclination_deg = R(dip);
        sigma = sqrt(0.09 + 0.16 + 1.44 * 0.36);
        setup.total_uT = R(50 + beside[i] * sigma);
        CHECK(flags_of(&setup, mag, 0, 0) == (out ? MAGNAV_FLAG_MAGNITUDE_IMPLAUSIBLE : 0));
        setup.total_uT = 0; /* no model: no check */
        CHECK(flags_of(&setup, mag, 0, 0) == 0);

        /* dip: model 0.2 deg, tilt 0.5 deg, noise 0.4 uT over 50 uT, the bias by 40/50 of it */
        setup.total_uT = R(50);
        setup.inclination_sigma_deg = R(0.2);
        sigma = sqrt(0.04 + 0.25 + (0.16 + 1.44 * 0.64) / (50 * 50 * RADIAN * RADIAN));
        setup.inclination_deg = R(dip + beside[i] * sigma);
        CHECK(flags_of(&setup, mag, 0, 0.5) == (out ? MAGNAV_FLAG_DIP_IMPLAUSIBLE : 0));
        setup.total_uT = 0;
        CHECK(flags_of(&setup, mag, 0, 0.5) == 0);
    }
}

static void geometry(void)
{
    const magnav_real mag[3] = {R(20), 0, R(1)};
    magnav_heading_setup setup = perfect_setup();
    for (int side = -1; side <= 1; side += 2) {
        CHECK(flags_of(&setup, mag, side * 84.99, 0) == 0);
        CHECK(flags_of(&setup, mag, side * 85.01, 0) == MAGNAV_FLAG_FORWARD_VERTICAL);
    }
    CHECK(flags_of(&setup, mag, 0, 2) == 0);
    CHECK(flags_of(&setup, mag, 0, 2.001) == MAGNAV_FLAG_ACCELERATED);
    setup.flags = MAGNAV_FLAG_ASSUMED_LEVEL; /* there the tilt is not an accelerometer's */
    CHECK(flags_of(&setup, mag, 0, 2.001) == MAGNAV_FLAG_ASSUMED_LEVEL);
}

static void usable(void)
{
    const magnav_real mag[3] = {R(20), 0, R(45)};
    const double limit = 180 / 1.959963984540054; /* half the circle at 95 % of a normal distribution */
    magnav_heading_setup setup = perfect_setup();
    setup.declination_sigma_deg = R(limit - 0.01);
    CHECK(flags_of(&setup, mag, 0, 0) == 0);
    setup.declination_sigma_deg = R(limit + 0.01);
    CHECK(flags_of(&setup, mag, 0, 0) == MAGNAV_FLAG_HEADING_UNUSABLE);
}

/* What the setup brings is kept; nothing else is added. */
static void handed_on(void)
{
    const magnav_real mag[3] = {R(20), 0, R(45)};
    magnav_heading_setup setup = perfect_setup();
    CHECK(flags_of(&setup, mag, 0, 0) == 0);
    setup.flags = MAGNAV_FLAG_UNCALIBRATED | MAGNAV_FLAG_CAUTION_ZONE | MAGNAV_FLAG_OUTSIDE_VALIDITY;
    CHECK(flags_of(&setup, mag, 0, 0) == setup.flags);
}

/* Without an accelerometer the log says so itself, and does not blame an acceleration it cannot see. */
static void assumed_level(void)
{
    const magnav_real mag[3] = {R(20), 0, R(45)}, acc[3] = {0, 0, R(-9.81)}, t = 0;
    magnav_heading_setup setup = perfect_setup();
    magnav_heading h;
    int32_t status = -99;

    setup.level_sigma_deg = R(3);
    CHECK(magnav_heading_log(&setup, 1, &t, mag, NULL, NULL, &h, &status) == MAGNAV_OK && status == MAGNAV_OK);
    CHECK(h.flags == MAGNAV_FLAG_ASSUMED_LEVEL && h.roll_deg == 0 && h.pitch_deg == 0);
    NEAR(h.contribution_deg[MAGNAV_FROM_TILT], 3 * 45 / 20.0, 20 * EPSILON);
    CHECK(magnav_heading_log(&setup, 1, &t, mag, acc, NULL, &h, &status) == MAGNAV_OK && status == MAGNAV_OK);
    CHECK(h.flags == 0);
}

void test_heading_flags(void)
{
    plausibility();
    geometry();
    usable();
    handed_on();
    assumed_level();
}
