/* The heading of a level and of a tilted body, attitude signs, north from north, and a known calibration undone. */
#include "check.h"

/* The field of mid-latitudes: 20 uT towards magnetic north, 45 uT down. */
static const double FIELD[3] = {20, 0, 45};
static const double DOWN[3] = {0, 0, 1};

static magnav_heading heading(const magnav_heading_setup *setup, const magnav_real mag[3], const magnav_real down[3])
{
    magnav_heading h;
    memset(&h, 0, sizeof h);
    CHECK(magnav_heading_of(setup, mag, down, 0, &h) == MAGNAV_OK);
    return h;
}

static double turn(double a, double b)
{
    return remainder(a - b, 360);
}

/* Facing magnetic north the field's horizontal part is on the forward axis; facing east it is to the left. */
static void level(void)
{
    static const struct {
        double forward, right, wanted;
    } at[] = {{20, 0, 0}, {0, -20, 90}, {-20, 0, 180}, {0, 20, 270}, {20, -20, 45}, {20, 20, 315}};
    const magnav_heading_setup setup = perfect_setup();
    const magnav_real down[3] = {0, 0, R(2)}; /* any length */

    for (int i = 0; i < LENGTH(at); i++) {
        const magnav_real mag[3] = {R(at[i].forward), R(at[i].right), R(45)};
        const double horizontal = hypot(at[i].forward, at[i].right);
        const magnav_heading h = heading(&setup, mag, down);
        CHECK(h.magnetic_deg == R(at[i].wanted));
        CHECK(h.true_deg == h.magnetic_deg && h.grid_deg == h.magnetic_deg);
        CHECK(h.roll_deg == 0 && h.pitch_deg == 0);
        NEAR(h.measured_total_uT, hypot(horizontal, 45), 100 * EPSILON);
        NEAR(h.measured_inclination_deg, atan2(45, horizontal) / RADIAN, 100 * EPSILON);
        CHECK(h.sigma_deg == 0 && h.sigma_magnetic_deg == 0);
    }
}

static void tilted(void)
{
    const magnav_heading_setup setup = perfect_setup();
    double rotation[3][3];
    magnav_real mag[3], down[3];

    for (int yaw = 0; yaw < 360; yaw += 15) {
        for (int pitch = -80; pitch <= 80; pitch += 20) {
            for (int roll = -170; roll <= 170; roll += 34) {
                magnav_heading h;
                body_from_ned(yaw, pitch, roll, rotation);
                rotate(rotation, FIELD, mag);
                rotate(rotation, DOWN, down);
                h = heading(&setup, mag, down);
                NEAR(turn(h.magnetic_deg, yaw), 0, 3000 * EPSILON);
                NEAR(h.pitch_deg, pitch, 3000 * EPSILON);
                NEAR(h.roll_deg, roll, 3000 * EPSILON);
                NEAR(h.measured_inclination_deg, atan2(45, 20) / RADIAN, 1000 * EPSILON);
                CHECK(h.flags == 0);
            }
        }
    }
}

/* FRD: nose up is positive pitch and puts specific force on the forward axis; right side down is positive roll. */
static void signs(void)
{
    magnav_heading_setup setup = perfect_setup();
    const magnav_real nose_up[3] = {R(9.81 * 0.5), 0, R(-9.81 * 0.86602540378443865)};
    const magnav_real right_down[3] = {0, R(-9.81 * 0.5), R(-9.81 * 0.86602540378443865)};
    const magnav_real mag[3] = {R(20), 0, R(45)};
    const magnav_real t = 0;
    magnav_heading h;
    int32_t status = -99;

    CHECK(magnav_heading_log(&setup, 1, &t, mag, nose_up, NULL, &h, &status) == MAGNAV_OK && status == MAGNAV_OK);
    NEAR(h.pitch_deg, 30, 1000 * EPSILON);
    NEAR(h.roll_deg, 0, 1000 * EPSILON);
    CHECK(magnav_heading_log(&setup, 1, &t, mag, right_down, NULL, &h, &status) == MAGNAV_OK && status == MAGNAV_OK);
    NEAR(h.roll_deg, 30, 1000 * EPSILON);
    NEAR(h.pitch_deg, 0, 1000 * EPSILON);
}

/* True = magnetic + declination; grid = true - convergence: each wraps into [0, 360). */
static void norths(void)
{
    static const double declinations[] = {-180, -27.5, 0, 13.25, 180}, convergences[] = {-180, -2.5, 0, 5, 180};
    magnav_heading_setup setup = perfect_setup();
    double rotation[3][3];
    magnav_real mag[3], down[3];

    for (int yaw = 0; yaw < 360; yaw += 5) {
        body_from_ned(yaw, 10, -20, rotation);
        rotate(rotation, FIELD, mag);
        rotate(rotation, DOWN, down);
        for (int i = 0; i < LENGTH(declinations); i++) {
            magnav_heading h;
            setup.declination_deg = R(declinations[i]);
            setup.convergence_deg = R(convergences[i]);
            h = heading(&setup, mag, down);
            CHECK(h.true_deg >= 0 && h.true_deg < 360 && h.grid_deg >= 0 && h.grid_deg < 360);
            NEAR(turn(h.true_deg, h.magnetic_deg + declinations[i]), 0, 1000 * EPSILON);
            NEAR(turn(h.grid_deg, h.true_deg - convergences[i]), 0, 1000 * EPSILON);
        }
    }
}

/* m = W^-1 B + b, inverted here by solving: the core's W (m - b) must give B back. */
static void calibrated(void)
{
    static const double w[3][3] = {{1.08, 0.05, -0.03}, {0.05, 0.93, 0.07}, {-0.03, 0.07, 1.02}};
    static const double b[3] = {25, -40, 12};
    const double det = w[0][0] * (w[1][1] * w[2][2] - w[1][2] * w[2][1]) -
                       w[0][1] * (w[1][0] * w[2][2] - w[1][2] * w[2][0]) +
                       w[0][2] * (w[1][0] * w[2][1] - w[1][1] * w[2][0]);
    magnav_heading_setup setup = perfect_setup();
    double rotation[3][3];
    magnav_real field[3], mag[3], down[3];
    double raw_error = 0;

    for (int yaw = 0; yaw < 360; yaw += 30) {
        magnav_heading h;
        body_from_ned(yaw, 25, -35, rotation);
        rotate(rotation, FIELD, field);
        rotate(rotation, DOWN, down);
        for (int i = 0; i < 3; i++) { /* Cramer's rule */
            double sum = 0;
            for (int j = 0; j < 3; j++) {
                const int r = (j + 1) % 3, s = (j + 2) % 3, p = (i + 1) % 3, q = (i + 2) % 3;
                sum += (w[r][p] * w[s][q] - w[r][q] * w[s][p]) * field[j];
            }
            mag[i] = R(sum / det + b[i]);
        }
        setup = perfect_setup();
        h = heading(&setup, mag, down);
        raw_error = fmax(raw_error, fabs(turn(h.magnetic_deg, yaw)));
        for (int i = 0; i < 3; i++) {
            setup.calibration.hard_iron_uT[i] = R(b[i]);
            for (int j = 0; j < 3; j++) {
                setup.calibration.soft_iron[3 * i + j] = R(w[i][j]);
            }
        }
        h = heading(&setup, mag, down);
        NEAR(turn(h.magnetic_deg, yaw), 0, 5000 * EPSILON);
        NEAR(h.measured_total_uT, sqrt(20 * 20 + 45 * 45), 1000 * EPSILON);
    }
    CHECK(raw_error > 30); /* without the calibration it is far off */
}

void test_heading(void)
{
    level();
    tilted();
    signs();
    norths();
    calibrated();
}
