/* A whole log: as sample by sample, bad rows reported, the others as if the bad ones had not been there. */
#include "check.h"

#define COUNT 60

static magnav_real t[COUNT], mag[3 * COUNT], acc[3 * COUNT], gyr[3 * COUNT];
static magnav_heading headings[COUNT], wanted[COUNT];
static int32_t status[COUNT];

static magnav_heading_setup usual_setup(void)
{
    magnav_heading_setup setup = perfect_setup();
    setup.mag_noise_uT = R(0.3);
    setup.acc_noise_mps2 = R(0.1);
    setup.gyr_drift_radps = R(0.01);
    setup.declination_deg = R(-4);
    setup.declination_sigma_deg = R(0.3);
    return setup;
}

/* A body that turns at 40 deg/s while it pitches and rolls; turn rates from the attitude by differences are not needed
 * here: what matters is that every row has its own, known numbers. */
static void record(void)
{
    const double field[3] = {20, 1, 45}, force[3] = {0, 0, -9.81};
    double rotation[3][3];
    for (int i = 0; i < COUNT; i++) {
        t[i] = R(1000 + 0.02 * i);
        body_from_ned(0.8 * i, 10 * sin(0.1 * i), 15 * cos(0.07 * i), rotation);
        rotate(rotation, field, &mag[3 * i]);
        rotate(rotation, force, &acc[3 * i]);
        for (int k = 0; k < 3; k++) {
            acc[3 * i + k] += R(spread(-0.1, 0.1));
            gyr[3 * i + k] = R(spread(-0.1, 0.1) + ((k == 2) ? 0.7 : 0));
        }
    }
}

static void run(const magnav_heading_setup *setup, const magnav_real *a, const magnav_real *g)
{
    SPOIL(headings);
    SPOIL(status);
    CHECK(magnav_heading_log(setup, COUNT, t, mag, a, g, headings, status) == MAGNAV_OK);
}

/* Step by step with the two public parts, in the same order, skipping row `without` (none if negative). */
static void by_hand(const magnav_heading_setup *setup, const magnav_real *g, int without)
{
    magnav_vertical v;
    magnav_real before = 0;
    memset(&v, 0, sizeof v);
    for (int i = 0; i < COUNT; i++) {
        if (i != without) {
            const magnav_real *rates = g ? &g[3 * i] : NULL;
            CHECK(magnav_vertical_step(&v, setup, &acc[3 * i], rates, t[i] - before) == MAGNAV_OK);
            before = t[i];
            CHECK(magnav_heading_of(setup, &mag[3 * i], v.down,
                                    R(BY_TYPE(sqrt(v.variance), sqrtf((float)v.variance)) * R(57.295779513082320877)),
                                    &wanted[i]) == MAGNAV_OK);
        }
    }
}

static void compare(int without, int32_t wanted_status)
{
    for (int i = 0; i < COUNT; i++) {
        if (i == without) {
            CHECK(status[i] == wanted_status);
            CHECK(is_spoilt(&headings[i], sizeof headings[i]));
        } else {
            CHECK(status[i] == MAGNAV_OK);
            CHECK(memcmp(&headings[i], &wanted[i], sizeof wanted[i]) == 0);
        }
    }
}

static void good_log(void)
{
    const magnav_heading_setup setup = usual_setup();
    record();
    run(&setup, acc, gyr);
    by_hand(&setup, gyr, -1);
    compare(-1, MAGNAV_OK);
    run(&setup, acc, NULL);
    by_hand(&setup, NULL, -1);
    compare(-1, MAGNAV_OK);
}

/* One row spoilt, in the first, a middle and the last place: its status, and the rest as without it. */
static void bad_row(magnav_real *value, magnav_real bad, int row, int32_t wanted_status)
{
    const magnav_heading_setup setup = usual_setup();
    const magnav_real kept = *value;
    by_hand(&setup, gyr, row);
    *value = bad;
    run(&setup, acc, gyr);
    compare(row, wanted_status);
    *value = kept;
}

static void bad_rows(void)
{
    static const int rows[] = {0, 27, COUNT - 1};
    record();
    for (int i = 0; i < LENGTH(rows); i++) {
        const int row = rows[i];
        bad_row(&acc[3 * row], R(NAN), row, MAGNAV_E_NOT_FINITE);
        bad_row(&acc[3 * row + 2], R(-INFINITY), row, MAGNAV_E_NOT_FINITE);
        bad_row(&acc[3 * row + 1], LARGE, row, MAGNAV_E_NOT_FINITE); /* a spike must not stay in the running mean */
        bad_row(&gyr[3 * row + 1], R(NAN), row, MAGNAV_E_NOT_FINITE);
        bad_row(&t[row], R(NAN), row, MAGNAV_E_NOT_FINITE);
        bad_row(&t[row], R(INFINITY), row, MAGNAV_E_NOT_FINITE);
    }
    bad_row(&gyr[3 * 27], R(1e12), 27, MAGNAV_E_NOT_FINITE);
    bad_row(&t[27], t[26], 27, MAGNAV_E_TIME);
    bad_row(&t[27], t[20], 27, MAGNAV_E_TIME);
}

/* A bad magnetic reading costs its own heading only: the vertical goes on with that row's acceleration. */
static void bad_magnetic(void)
{
    const magnav_heading_setup setup = usual_setup();
    record();
    by_hand(&setup, gyr, -1);
    mag[3 * 30] = R(NAN);
    run(&setup, acc, gyr);
    compare(30, MAGNAV_E_NOT_FINITE);
    record();
    by_hand(&setup, gyr, -1);
    memset(&mag[3 * 30], 0, 3 * sizeof(magnav_real));
    run(&setup, acc, gyr);
    compare(30, MAGNAV_E_MAGNETIC);
}

static void no_acceleration(void)
{
    const magnav_heading_setup setup = usual_setup();
    record();
    memset(&acc[3 * 5], 0, 3 * sizeof(magnav_real));
    run(&setup, acc, gyr);
    CHECK(status[5] == MAGNAV_E_ACCELERATION && status[4] == MAGNAV_OK && status[6] == MAGNAV_OK);
    record();
    mag[3 * 7] = R(INFINITY);
    run(&setup, NULL, NULL); /* level assumed: no vertical to follow */
    for (int i = 0; i < COUNT; i++) {
        CHECK(status[i] == ((i == 7) ? MAGNAV_E_NOT_FINITE : MAGNAV_OK));
        CHECK(i == 7 || (headings[i].flags & MAGNAV_FLAG_ASSUMED_LEVEL) != 0);
    }
    CHECK(is_spoilt(&headings[7], sizeof headings[7]));
}

/* A setting that is wrong is said in every row. */
static void bad_setting(void)
{
    magnav_heading_setup setup = usual_setup();
    record();
    setup.gravity_mps2 = 0;
    run(&setup, acc, gyr);
    for (int i = 0; i < COUNT; i++) {
        CHECK(status[i] == MAGNAV_E_PARAMETER);
    }
    CHECK(is_spoilt(headings, sizeof headings));
}

void test_log(void)
{
    good_log();
    bad_rows();
    bad_magnetic();
    no_acceleration();
    bad_setting();
}
