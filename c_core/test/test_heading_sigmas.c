/* The parts of the heading's uncertainty against what the heading itself does when an input is moved a little:
 * numerical derivatives (JCGM 100:2008, 5.1.3), for the calibration with a full covariance multiplied out. */
#include "check.h"

#define PARAMETERS 9

static double heading_of(const magnav_heading_setup *setup, const double mag[3], const double down[3])
{
    const magnav_real m[3] = {R(mag[0]), R(mag[1]), R(mag[2])}, d[3] = {R(down[0]), R(down[1]), R(down[2])};
    magnav_heading h;
    memset(&h, 0, sizeof h);
    CHECK(magnav_heading_of(setup, m, d, 0, &h) == MAGNAV_OK);
    return h.magnetic_deg;
}

/* Moves calibration parameter k, in the order b_x b_y b_z W_xx W_yy W_zz W_xy W_xz W_yz. */
static void move(magnav_calibration *c, int k, double by)
{
    static const int at[6][2] = {{0, 0}, {4, 4}, {8, 8}, {1, 3}, {2, 6}, {5, 7}};
    if (k < 3) {
        c->hard_iron_uT[k] = R(c->hard_iron_uT[k] + by);
    } else {
        c->soft_iron[at[k - 3][0]] = R(c->soft_iron[at[k - 3][0]] + by);
        c->soft_iron[at[k - 3][1]] = c->soft_iron[at[k - 3][0]];
    }
}

/* A covariance L L^T of random L, packed; and whole for the reference. */
static void random_covariance(magnav_calibration *c, double whole[PARAMETERS][PARAMETERS])
{
    double factor[PARAMETERS][PARAMETERS];
    int packed = 0;
    for (int i = 0; i < PARAMETERS; i++) {
        for (int j = 0; j < PARAMETERS; j++) {
            factor[i][j] = spread(-1, 1) * ((i < 3) ? 0.3 : 0.004);
        }
    }
    for (int i = 0; i < PARAMETERS; i++) {
        for (int j = 0; j < PARAMETERS; j++) {
            whole[i][j] = 0;
            for (int k = 0; k < PARAMETERS; k++) {
                whole[i][j] += factor[i][k] * factor[j][k];
            }
        }
        for (int j = 0; j <= i; j++) {
            c->covariance[packed++] = R(whole[i][j]);
        }
    }
}

static void one_case(double yaw, double pitch, double roll)
{
    const double step = BY_TYPE(1e-4, 0.03), soft_step = BY_TYPE(1e-5, 1e-3), tilt_step = BY_TYPE(1e-5, 1e-3);
    const double near = BY_TYPE(1e-6, 1e-2);
    const double field_ned[3] = {20, 3, 45}, down_ned[3] = {0, 0, 1};
    magnav_heading_setup setup = perfect_setup();
    double rotation[3][3], covariance[PARAMETERS][PARAMETERS], mag[3], down[3], g[PARAMETERS];
    double sensor = 0, calibration = 0, tilt = 0;
    magnav_real field_body[3], down_body[3], m[3];
    magnav_heading h;

    body_from_ned(yaw, pitch, roll, rotation);
    rotate(rotation, field_ned, field_body);
    rotate(rotation, down_ned, down_body);
    for (int i = 0; i < 3; i++) {
        mag[i] = field_body[i] * (1 + 0.1 * i) + 5 - 3 * i;
        m[i] = R(mag[i]);
        down[i] = down_body[i];
        setup.calibration.hard_iron_uT[i] = R(5 - 3 * i);
        setup.calibration.soft_iron[4 * i] = R(1 / (1 + 0.1 * i));
    }
    move(&setup.calibration, 6, 0.03);
    move(&setup.calibration, 7, -0.05);
    move(&setup.calibration, 8, 0.02);
    random_covariance(&setup.calibration, covariance);
    setup.mag_noise_uT = R(0.4);
    setup.declination_deg = R(3);
    setup.declination_sigma_deg = R(0.35);

    for (int i = 0; i < 3; i++) {
        double plus[3] = {mag[0], mag[1], mag[2]}, minus[3] = {mag[0], mag[1], mag[2]}, slope;
        plus[i] += step;
        minus[i] -= step;
        slope = remainder(heading_of(&setup, plus, down) - heading_of(&setup, minus, down), 360) / (2 * step);
        sensor += 0.4 * 0.4 * slope * slope;
    }
    for (int k = 0; k < PARAMETERS; k++) {
        const double by = (k < 3) ? step : soft_step;
        magnav_heading_setup plus = setup, minus = setup;
        move(&plus.calibration, k, by);
        move(&minus.calibration, k, -by);
        g[k] = remainder(heading_of(&plus, mag, down) - heading_of(&minus, mag, down), 360) / (2 * by);
    }
    for (int i = 0; i < PARAMETERS; i++) {
        for (int j = 0; j < PARAMETERS; j++) {
            calibration += g[i] * covariance[i][j] * g[j];
        }
    }
    for (int axis = 0; axis < 2; axis++) { /* about north and about east, both horizontal */
        double plus[3], minus[3], slope;
        for (int i = 0; i < 3; i++) {
            /* a turn about the horizontal axis moves down along the other one */
            plus[i] = down[i] + tilt_step * rotation[i][axis];
            minus[i] = down[i] - tilt_step * rotation[i][axis];
        }
        slope = remainder(heading_of(&setup, mag, plus) - heading_of(&setup, mag, minus), 360) / (2 * tilt_step);
        tilt += slope * slope * RADIAN * RADIAN * 1.5 * 1.5;
    }

    CHECK(magnav_heading_of(&setup, m, down_body, R(1.5), &h) == MAGNAV_OK);
    NEAR(h.contribution_deg[MAGNAV_FROM_SENSOR] / sqrt(sensor), 1, near);
    NEAR(h.contribution_deg[MAGNAV_FROM_CALIBRATION] / sqrt(calibration), 1, near);
    NEAR(h.contribution_deg[MAGNAV_FROM_TILT] / sqrt(tilt), 1, near);
    CHECK(h.contribution_deg[MAGNAV_FROM_MODEL] == R(0.35));
    NEAR(h.sigma_magnetic_deg / sqrt(sensor + calibration + tilt), 1, near);
    NEAR(h.sigma_deg / sqrt(sensor + calibration + tilt + 0.35 * 0.35), 1, near);
}

/* Level: sensor noise s turns north by s / H, a tilt w by w tan(dip), whatever the heading. */
static void level(void)
{
    magnav_heading_setup setup = perfect_setup();
    const magnav_real down[3] = {0, 0, 1};
    const magnav_real mag[3] = {R(12), R(16), R(60)};
    magnav_heading h;

    setup.mag_noise_uT = R(0.5);
    CHECK(magnav_heading_of(&setup, mag, down, R(0.25), &h) == MAGNAV_OK);
    NEAR(h.contribution_deg[MAGNAV_FROM_SENSOR], 0.5 / 20 / RADIAN, 10 * EPSILON);
    NEAR(h.contribution_deg[MAGNAV_FROM_TILT], 0.25 * 3, 10 * EPSILON);
    CHECK(h.contribution_deg[MAGNAV_FROM_CALIBRATION] == 0 && h.contribution_deg[MAGNAV_FROM_MODEL] == 0);
    CHECK(h.sigma_magnetic_deg == h.sigma_deg);
}

/* The largest part is named. */
static void dominant(void)
{
    const magnav_real down[3] = {0, 0, 1};
    const magnav_real mag[3] = {R(20), R(0), R(45)};
    magnav_heading h;

    for (int32_t k = 0; k < 4; k++) {
        magnav_heading_setup setup = perfect_setup();
        setup.mag_noise_uT = R((k == MAGNAV_FROM_SENSOR) ? 2 : 0.1);
        setup.calibration.covariance[2] = R((k == MAGNAV_FROM_CALIBRATION) ? 4 : 0.01); /* variance of b_y */
        setup.declination_sigma_deg = R((k == MAGNAV_FROM_MODEL) ? 3 : 0.1);
        CHECK(magnav_heading_of(&setup, mag, down, R((k == MAGNAV_FROM_TILT) ? 1.5 : 0.1), &h) == MAGNAV_OK);
        CHECK(h.dominant == k);
    }
}

/* A covariance that rounding has left slightly negative is none, and one parameter has its plain derivative. */
static void covariance_edges(void)
{
    const magnav_real down[3] = {0, 0, 1};
    const magnav_real mag[3] = {R(20), R(0), R(45)};
    magnav_heading_setup setup = perfect_setup();
    magnav_heading h;

    setup.calibration.covariance[2] = R(0.16);
    CHECK(magnav_heading_of(&setup, mag, down, 0, &h) == MAGNAV_OK);
    NEAR(h.contribution_deg[MAGNAV_FROM_CALIBRATION], 0.4 / 20 / RADIAN, 10 * EPSILON);
    setup.calibration.covariance[2] = R(-1e-9);
    CHECK(magnav_heading_of(&setup, mag, down, 0, &h) == MAGNAV_OK);
    CHECK(h.contribution_deg[MAGNAV_FROM_CALIBRATION] == 0);
}

/* Nose straight up: no azimuth of the forward axis, the tilt's part is that of the field alone. */
static void forward_up(void)
{
    const magnav_real down[3] = {-1, 0, 0};
    const magnav_real mag[3] = {R(-45), R(0), R(20)};
    const magnav_heading_setup setup = perfect_setup();
    magnav_heading h;

    CHECK(magnav_heading_of(&setup, mag, down, R(0.5), &h) == MAGNAV_OK);
    CHECK(h.pitch_deg == 90 && (h.flags & MAGNAV_FLAG_FORWARD_VERTICAL) != 0);
    NEAR(h.contribution_deg[MAGNAV_FROM_TILT], 0.5 * 45 / 20, 10 * EPSILON);
}

void test_heading_sigmas(void)
{
    for (int i = 0; i < 60; i++) {
        one_case(spread(0, 360), spread(-60, 60), spread(-180, 180));
    }
    one_case(0, 0, 0);
    level();
    dominant();
    covariance_edges();
    forward_up();
}
