/* Checks that count themselves, and what the test files share. */
#ifndef CHECK_H
#define CHECK_H

#include <float.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "magnav_core.h"

#define CHECK(condition) check_that((condition) != 0, #condition, __FILE__, __LINE__)
#define NEAR(value, wanted, tolerance) check_near((value), (wanted), (tolerance), #value, __FILE__, __LINE__)

void check_that(int good, const char *what, const char *file, int line);
/* Fails on a NaN as well. */
void check_near(double value, double wanted, double tolerance, const char *what, const char *file, int line);

#ifdef MAGNAV_SINGLE
#define EPSILON ((double)FLT_EPSILON)
#define NEXT(x, towards) nextafterf((x), (towards))
#define BY_TYPE(for_double, for_float) (for_float)
#define LARGE 1e25f /* its square overflows */
#else
#define EPSILON DBL_EPSILON
#define NEXT(x, towards) nextafter((x), (towards))
#define BY_TYPE(for_double, for_float) (for_double)
#define LARGE 1e200
#endif
#define R(x) ((magnav_real)(x))
#define LENGTH(array) ((int)(sizeof(array) / sizeof((array)[0])))
#define RADIAN 0.017453292519943295769

/* A pattern that no result has, to see that outputs were left alone. */
#define SPOIL(object) memset(&(object), 0xA5, sizeof(object))
int is_spoilt(const void *object, size_t bytes);

/* Evenly spread numbers in [low, high), the same on every run. */
double spread(double low, double high);

/* WMM2025 in the core's form, and its snapshot at a date. */
#define WMM_REALS MAGNAV_SNAPSHOT_REALS(12)
magnav_model wmm2025_model(void);
magnav_snapshot wmm2025_at(double year, magnav_real memory[WMM_REALS]);

/* Rotation from NED to FRD by heading, then pitch, then roll (the aerospace sequence), in degrees. */
void body_from_ned(double heading, double pitch, double roll, double rotation[3][3]);
void rotate(double rotation[3][3], const double ned[3], magnav_real body[3]);

/* A setup whose checks and sigmas are all off: a perfect sensor where the declination is zero. */
magnav_heading_setup perfect_setup(void);

void test_angles(void);
void test_words(void);
void test_field(void);
void test_poles(void);
void test_time(void);
void test_elements(void);
void test_many(void);
void test_field_statuses(void);
void test_heading(void);
void test_heading_sigmas(void);
void test_heading_flags(void);
void test_heading_statuses(void);
void test_vertical(void);
void test_log(void);
void test_image(void);
void test_calibrator(void);
void test_patch(void);

#endif
