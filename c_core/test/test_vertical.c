/* The vertical filter: at rest, turning, accelerated, after a gap, and with settings that claim perfection. */
#include "check.h"

#define GRAVITY 9.81

static double angle_deg(const magnav_real a[3], const double b[3])
{
    const double x = a[1] * b[2] - a[2] * b[1], y = a[2] * b[0] - a[0] * b[2], z = a[0] * b[1] - a[1] * b[0];
    return atan2(sqrt(x * x + y * y + z * z), a[0] * b[0] + a[1] * b[1] + a[2] * b[2]) / RADIAN;
}

static double length(const magnav_real v[3])
{
    return sqrt((double)v[0] * v[0] + (double)v[1] * v[1] + (double)v[2] * v[2]);
}

/* Close to normal: the sum of twelve even ones. */
static double noise(double sigma)
{
    double sum = -6;
    for (int i = 0; i < 12; i++) {
        sum += spread(0, 1);
    }
    return sigma * sum;
}

static magnav_heading_setup usual_setup(void)
{
    magnav_heading_setup setup = perfect_setup();
    setup.gravity_mps2 = R(GRAVITY);
    setup.acc_noise_mps2 = R(0.1);
    setup.gyr_drift_radps = R(0.001);
    return setup;
}

/* At rest under noise the filter's error falls below the sample's, and its sigma with it. */
static void at_rest(void)
{
    const magnav_heading_setup setup = usual_setup();
    const magnav_real still[3] = {0, 0, 0};
    double rotation[3][3], truth[3], sum_filter = 0, sum_sample = 0;
    magnav_real down[3], first;
    const double down_ned[3] = {0, 0, 1};
    magnav_vertical v, alone;

    body_from_ned(30, 12, -25, rotation);
    rotate(rotation, down_ned, down);
    for (int i = 0; i < 3; i++) {
        truth[i] = down[i];
    }
    memset(&v, 0, sizeof v);
    first = 0;
    for (int n = 0; n < 3000; n++) {
        magnav_real acc[3];
        for (int i = 0; i < 3; i++) {
            acc[i] = R(-GRAVITY * truth[i] + noise(0.1));
        }
        CHECK(magnav_vertical_step(&v, &setup, acc, still, R(0.01)) == MAGNAV_OK);
        NEAR(length(v.down), 1, 4 * EPSILON);
        memset(&alone, 0, sizeof alone);
        CHECK(magnav_vertical_step(&alone, &setup, acc, NULL, 0) == MAGNAV_OK);
        if (n == 0) {
            first = v.variance;
        }
        if (n >= 1000) {
            sum_filter += angle_deg(v.down, truth) * angle_deg(v.down, truth);
            sum_sample += angle_deg(alone.down, truth) * angle_deg(alone.down, truth);
        }
    }
    CHECK(v.variance < first / 4);
    CHECK(sum_filter < sum_sample / 10);
    /* two horizontal axes; the variance given must cover what is seen */
    CHECK(sqrt(sum_filter / 2000 / 2) * RADIAN < sqrt((double)v.variance));
}

/* A constant turn, with an accelerometer of no worth: the gyroscope alone must carry the vertical round. */
static void carried(void)
{
    static const double rates[][3] = {{1, 0, 0}, {0, -1, 0}, {0, 0, 2}, {0.3, -0.7, 1.1}};
    magnav_heading_setup setup = usual_setup();
    setup.gyr_drift_radps = 0;

    for (int k = 0; k < LENGTH(rates); k++) {
        const double speed = sqrt(rates[k][0] * rates[k][0] + rates[k][1] * rates[k][1] + rates[k][2] * rates[k][2]);
        const magnav_real gyr[3] = {R(rates[k][0]), R(rates[k][1]), R(rates[k][2])};
        const magnav_real level[3] = {0, 0, R(-GRAVITY)};
        const double down[3] = {0, 0, 1};
        double axis[3], truth[3];
        magnav_vertical v;

        memset(&v, 0, sizeof v);
        setup.acc_noise_mps2 = 0;
        CHECK(magnav_vertical_step(&v, &setup, level, gyr, 0) == MAGNAV_OK);
        CHECK(v.down[2] == 1 && v.variance == 0);
        setup.acc_noise_mps2 = R(1000); /* from here on the sample weighs nothing */
        for (int n = 1; n <= 500; n++) {
            const double a = -speed * 0.01 * n; /* body axes turn by +w t, a fixed vector in them by -w t */
            const double c = cos(a), s = sin(a);
            double along;
            CHECK(magnav_vertical_step(&v, &setup, level, gyr, R(0.01)) == MAGNAV_OK);
            for (int i = 0; i < 3; i++) {
                axis[i] = rates[k][i] / speed;
            }
            along = axis[2];
            truth[0] = axis[1] * down[2] * s + axis[0] * along * (1 - c);
            truth[1] = -axis[0] * down[2] * s + axis[1] * along * (1 - c);
            truth[2] = down[2] * c + axis[2] * along * (1 - c);
            NEAR(angle_deg(v.down, truth), 0, BY_TYPE(1e-10, 0.02));
        }
    }
}

/* The sign in words: rolling right side down moves down towards the right axis; pitching up, towards the tail. */
static void signs(void)
{
    magnav_heading_setup setup = perfect_setup();
    const magnav_real level[3] = {0, 0, R(-GRAVITY)}, roll_right[3] = {1, 0, 0}, nose_up[3] = {0, 1, 0};
    magnav_vertical start, v;

    memset(&start, 0, sizeof start);
    CHECK(magnav_vertical_step(&start, &setup, level, NULL, 0) == MAGNAV_OK);
    setup.acc_noise_mps2 = R(1000);
    v = start;
    CHECK(magnav_vertical_step(&v, &setup, level, roll_right, R(0.1)) == MAGNAV_OK);
    NEAR(v.down[1], sin(0.1), 4 * EPSILON);
    v = start;
    CHECK(magnav_vertical_step(&v, &setup, level, nose_up, R(0.1)) == MAGNAV_OK);
    NEAR(v.down[0], -sin(0.1), 4 * EPSILON);
}

/* Two seconds of a lateral 3 m/s^2 while turning: with the gyroscope the vertical stays near, without it is off by
 * atan(3 / 9.81) = 17 degrees; and the sample's variance says that it is not to be trusted. */
static void accelerated(void)
{
    const magnav_heading_setup setup = usual_setup();
    const magnav_real gyr[3] = {0, 0, R(0.2)};
    const double truth[3] = {0, 0, 1};
    double worst = 0, sample_worst = 0;
    magnav_real rest_variance = 0;
    magnav_vertical v, alone;

    memset(&v, 0, sizeof v);
    for (int n = 0; n < 1000; n++) {
        const double push = (n >= 600 && n < 800) ? 3 : 0;
        const magnav_real acc[3] = {0, R(push), R(-GRAVITY)};
        CHECK(magnav_vertical_step(&v, &setup, acc, gyr, R(0.01)) == MAGNAV_OK);
        memset(&alone, 0, sizeof alone);
        CHECK(magnav_vertical_step(&alone, &setup, acc, NULL, 0) == MAGNAV_OK);
        if (n == 599) {
            rest_variance = alone.variance;
        }
        if (n == 700) {
            CHECK(alone.variance > 5 * rest_variance);
        }
        worst = fmax(worst, angle_deg(v.down, truth));
        sample_worst = fmax(sample_worst, angle_deg(alone.down, truth));
    }
    NEAR(sample_worst, atan2(3, GRAVITY) / RADIAN, 0.001);
    CHECK(worst < sample_worst / 4);
}

/* Beyond half a second there is nothing to carry: the sample alone. Up to it the state still counts. */
static void gap(void)
{
    const magnav_heading_setup setup = usual_setup();
    const magnav_real level[3] = {0, 0, R(-GRAVITY)}, tilted[3] = {0, R(-6), R(-8)}, still[3] = {0, 0, 0};
    magnav_vertical start, v;

    memset(&start, 0, sizeof start);
    for (int n = 0; n < 200; n++) {
        CHECK(magnav_vertical_step(&start, &setup, level, still, R(0.01)) == MAGNAV_OK);
    }
    v = start;
    CHECK(magnav_vertical_step(&v, &setup, tilted, still, R(0.5)) == MAGNAV_OK);
    CHECK(v.down[1] < R(0.3));
    v = start;
    CHECK(magnav_vertical_step(&v, &setup, tilted, still, R(0.501)) == MAGNAV_OK);
    NEAR(v.down[1], 0.6, EPSILON);
    NEAR(v.down[2], 0.8, EPSILON);
    v = start;
    CHECK(magnav_vertical_step(&v, &setup, tilted, NULL, R(0.01)) == MAGNAV_OK); /* no turn rates: never carried */
    NEAR(v.down[1], 0.6, EPSILON);
}

/* Two steps worked by hand from the rule that the header and vertical.c state: the running mean of the stray magnitude,
 * the drift that keeps its sign, the sample's variance raised by half a second over the step, the gain. */
static void variances(void)
{
    magnav_heading_setup setup = perfect_setup();
    const magnav_real first[3] = {0, 0, R(-10)}, second[3] = {R(-0.6), 0, R(-10.4)}, still[3] = {0, 0, 0};
    const double g2 = GRAVITY * GRAVITY, size = sqrt(0.6 * 0.6 + 10.4 * 10.4);
    const double unrest0 = (10 - GRAVITY) * (10 - GRAVITY), before = (0.01 + unrest0) / g2;
    const double unrest1 = unrest0 * 5 / 6 + (size - GRAVITY) * (size - GRAVITY) / 6;
    const double grown = before + 0.005 * 0.005 + 2 * 0.005 * sqrt(before), sample = (0.01 + unrest1) / g2;
    const double gain = grown / (grown + 6 * sample);
    const double x = gain * 0.6 / size, z = 1 - gain + gain * 10.4 / size;
    magnav_vertical v;

    setup.gravity_mps2 = R(GRAVITY);
    setup.acc_noise_mps2 = R(0.1);
    setup.gyr_drift_radps = R(0.05);
    memset(&v, 0, sizeof v);
    CHECK(magnav_vertical_step(&v, &setup, first, still, 0) == MAGNAV_OK);
    NEAR(v.unrest / unrest0, 1, 500 * EPSILON);
    NEAR(v.variance / before, 1, 500 * EPSILON);
    CHECK(magnav_vertical_step(&v, &setup, second, still, R(0.1)) == MAGNAV_OK);
    NEAR(v.unrest / unrest1, 1, 500 * EPSILON);
    NEAR(v.variance / ((1 - gain) * grown), 1, 500 * EPSILON);
    NEAR(v.down[0], x / hypot(x, z), 10 * EPSILON);
    NEAR(v.down[2], z / hypot(x, z), 10 * EPSILON);
}

/* No noise, no drift, gravity to the last bit: nought over nought is not a failure. The sample is taken. */
static void perfection(void)
{
    const magnav_heading_setup setup = perfect_setup();
    const magnav_real level[3] = {0, 0, -setup.gravity_mps2}, still[3] = {0, 0, 0};
    const magnav_real side[3] = {0, -setup.gravity_mps2, 0};
    magnav_vertical v;

    memset(&v, 0, sizeof v);
    for (int n = 0; n < 10; n++) {
        CHECK(magnav_vertical_step(&v, &setup, level, still, R(0.01)) == MAGNAV_OK);
        CHECK(v.down[0] == 0 && v.down[1] == 0 && v.down[2] == 1 && v.variance == 0);
    }
    CHECK(magnav_vertical_step(&v, &setup, side, still, R(0.01)) == MAGNAV_OK);
    CHECK(v.down[1] == 1 && v.down[2] == 0);
    CHECK(magnav_vertical_step(&v, &setup, side, still, R(BY_TYPE(1e-310, 1e-42))) == MAGNAV_OK);
    CHECK(v.down[1] == 1);
}

void test_vertical(void)
{
    at_rest();
    carried();
    signs();
    accelerated();
    gap();
    variances();
    perfection();
}
