/* The core's own test program. Prints what it measures and `N passed, N failed`; exits 1 on any failure. */
#include "check.h"

#include "wmm2025_data.h"

static long passed = 0;
static long failed = 0;

void check_that(int good, const char *what, const char *file, int line)
{
    if (good) {
        passed++;
    } else {
        failed++;
        printf("%s:%d: not so: %s\n", file, line, what);
    }
}

void check_near(double value, double wanted, double tolerance, const char *what, const char *file, int line)
{
    if (fabs(value - wanted) <= tolerance) {
        passed++;
    } else {
        failed++;
        printf("%s:%d: %s is %.17g, wanted %.17g within %g, off by %g\n", file, line, what, value, wanted, tolerance,
               value - wanted);
    }
}

int is_spoilt(const void *object, size_t bytes)
{
    const unsigned char *byte = object;
    int spoilt = 1;
    for (size_t i = 0; i < bytes; i++) {
        spoilt = spoilt && byte[i] == 0xA5;
    }
    return spoilt;
}

double spread(double low, double high)
{
    /* the generator of Numerical Recipes, 2nd ed., sec. 7.1 */
    static uint32_t state = 2025;
    state = state * 1664525u + 1013904223u;
    return low + (high - low) * (state / 4294967296.0);
}

magnav_model wmm2025_model(void)
{
    static magnav_real polynomials[2 * WMM2025_DEGREE * (WMM2025_DEGREE + 2)];
    static const magnav_real breaks[2] = {R(2025), R(2030)};
    const int terms = WMM2025_DEGREE * (WMM2025_DEGREE + 2);
    magnav_model model = {breaks, polynomials, R(2025), R(2030), WMM2025_DEGREE, 2, 1};

    for (int i = 0; i < LENGTH(WMM2025); i++) {
        const wmm_row *row = &WMM2025[i];
        const int g = row->n * row->n - 1 + ((row->m == 0) ? 0 : 2 * row->m - 1);
        polynomials[g] = R(row->g_nT);
        polynomials[terms + g] = R(row->g_nT_per_yr);
        if (row->m > 0) {
            polynomials[g + 1] = R(row->h_nT);
            polynomials[terms + g + 1] = R(row->h_nT_per_yr);
        }
    }
    return model;
}

magnav_snapshot wmm2025_at(double year, magnav_real memory[WMM_REALS])
{
    const magnav_model model = wmm2025_model();
    magnav_snapshot snapshot = {NULL, 0, 0, 0};
    CHECK(magnav_snapshot_at(&model, R(year), 0, memory, WMM_REALS, &snapshot) == MAGNAV_OK);
    return snapshot;
}

void body_from_ned(double heading, double pitch, double roll, double rotation[3][3])
{
    const double ch = cos(heading * RADIAN), sh = sin(heading * RADIAN);
    const double cp = cos(pitch * RADIAN), sp = sin(pitch * RADIAN);
    const double cr = cos(roll * RADIAN), sr = sin(roll * RADIAN);
    const double rows[3][3] = {{cp * ch, cp * sh, -sp},
                               {sr * sp * ch - cr * sh, sr * sp * sh + cr * ch, sr * cp},
                               {cr * sp * ch + sr * sh, cr * sp * sh - sr * ch, cr * cp}};
    memcpy(rotation, rows, sizeof rows);
}

void rotate(double rotation[3][3], const double ned[3], magnav_real body[3])
{
    for (int i = 0; i < 3; i++) {
        body[i] = R(rotation[i][0] * ned[0] + rotation[i][1] * ned[1] + rotation[i][2] * ned[2]);
    }
}

magnav_heading_setup perfect_setup(void)
{
    magnav_heading_setup setup;
    memset(&setup, 0, sizeof setup);
    for (int i = 0; i < 3; i++) {
        setup.calibration.soft_iron[4 * i] = R(1);
    }
    setup.gravity_mps2 = R(9.81);
    return setup;
}

int main(void)
{
    CHECK(magnav_core_version() == MAGNAV_CORE_VERSION);
    CHECK(magnav_real_bytes() == (int32_t)sizeof(magnav_real));
    CHECK(magnav_max_degree() == MAGNAV_MAX_DEGREE);
    test_angles();
    test_words();
    test_field();
    test_poles();
    test_time();
    test_elements();
    test_many();
    test_field_statuses();
    test_heading();
    test_heading_sigmas();
    test_heading_flags();
    test_heading_statuses();
    test_vertical();
    test_log();
    test_image();
    test_calibrator();
    test_patch();
    printf("%ld passed, %ld failed\n", passed, failed);
    return failed != 0;
}
