/* magnav core: the Earth's main field and a heading from it, in C99.
 *
 * The direction computed here must never be the only means of safety-critical navigation.
 *
 * UNITS AND FRAMES. Angles in degrees, heights in metres above the WGS84 ellipsoid, dates in decimal years (UTC), the
 * Earth's field in nT, a sensor's in uT, time in s, acceleration in m/s^2, turn rates in rad/s. Local frame: north,
 * east, down (NED), of the geodetic vertical. Body frame: forward, right, down (FRD).
 * An accelerometer gives specific force: at rest and level it reads (0, 0, -9.81).
 *
 * MEMORY AND THREADS. No heap, no mutable file-level state, no I/O, no recursion. Every buffer comes from the caller;
 * sizes are the macros below. Functions may run at once in any number of threads on different outputs.
 *
 * STATUS. Every function that can fail returns a magnav_status. Zero: computed. Negative: nothing was computed and the
 * outputs are as they were. What was computed but deserves a warning is said in a set of MAGNAV_FLAG_ bits.
 *
 * ARITHMETIC. + - * / and sqrt of IEEE 754, and the core's own sine, cosine and arctangent: build without contraction
 * (-ffp-contract=off) and without -ffast-math.
 *
 * ACCURACY of the double build, against 50-digit evaluation of the same coefficients: X, Y, Z within 1e-9 nT.
 */
#ifndef MAGNAV_CORE_H
#define MAGNAV_CORE_H

#include <stddef.h>
#include <stdint.h>

#include "magnav_config.h"

#ifdef __cplusplus
extern "C" {
#endif

/* Raised when the meaning of a call or the layout of a structure changes. */
#define MAGNAV_CORE_VERSION 1
/* The release, as every package of the core is numbered. */
#define MAGNAV_CORE_RELEASE "0.1.0"

typedef enum magnav_status {
    MAGNAV_OK = 0,
    MAGNAV_E_NULL = -1,       /* a required pointer is NULL */
    MAGNAV_E_NOT_FINITE = -2, /* an input is NaN, infinite or so large that a result overflows */
    MAGNAV_E_LATITUDE = -3,   /* latitude outside -90..90 */
    MAGNAV_E_LONGITUDE = -4,  /* longitude outside -360..360 */
    MAGNAV_E_HEIGHT = -5,     /* height outside MAGNAV_LOWEST_M..MAGNAV_HIGHEST_M */
    MAGNAV_E_DATE = -6,       /* date outside the model's validity and extrapolation not asked for */
    MAGNAV_E_MODEL = -7,      /* degree, order, pieces or breaks of the model are not usable */
    MAGNAV_E_MEMORY = -8,     /* the caller's buffer is too small */
    MAGNAV_E_TIME = -9,       /* sample times do not increase */
    MAGNAV_E_ACCELERATION = -10, /* the acceleration vector is zero: no vertical */
    MAGNAV_E_MAGNETIC = -11,  /* the magnetic vector is zero or vertical: no direction */
    MAGNAV_E_PARAMETER = -12, /* a setting is out of its range (negative sigma, NaN, ...) */
    MAGNAV_E_AREA = -13,      /* outside the area of a patch */
    MAGNAV_E_END = -14        /* one past the last; no function returns it */
} magnav_status;

/* The name of a status and what it means, in a few words; "unknown" for a value outside the list. */
const char *magnav_status_text(int32_t status);

/* Warnings: bits of a set, each with one meaning, one name and one text on every target. Values never change. */
#define MAGNAV_FLAG_CAUTION_ZONE ((uint32_t)1 << 0)
#define MAGNAV_FLAG_BLACKOUT_ZONE ((uint32_t)1 << 1)
#define MAGNAV_FLAG_NEAR_GEOGRAPHIC_POLE ((uint32_t)1 << 2)
#define MAGNAV_FLAG_STEEP_DIP ((uint32_t)1 << 3)
#define MAGNAV_FLAG_OUTSIDE_VALIDITY ((uint32_t)1 << 4)
#define MAGNAV_FLAG_HEIGHT_OUT_OF_RANGE ((uint32_t)1 << 5)
#define MAGNAV_FLAG_NO_DECLINATION ((uint32_t)1 << 6)
#define MAGNAV_FLAG_MAGNITUDE_IMPLAUSIBLE ((uint32_t)1 << 7)
#define MAGNAV_FLAG_DIP_IMPLAUSIBLE ((uint32_t)1 << 8)
#define MAGNAV_FLAG_UNCALIBRATED ((uint32_t)1 << 9)
#define MAGNAV_FLAG_ACCELERATED ((uint32_t)1 << 10)
#define MAGNAV_FLAG_ASSUMED_LEVEL ((uint32_t)1 << 11)
#define MAGNAV_FLAG_FORWARD_VERTICAL ((uint32_t)1 << 12)
#define MAGNAV_FLAG_HEADING_UNUSABLE ((uint32_t)1 << 13)
#define MAGNAV_FLAG_COUNT 14

/* Name and one-line text of the flag of bit `bit`, 0 .. MAGNAV_FLAG_COUNT - 1; NULL outside. */
const char *magnav_flag_name(int32_t bit);
const char *magnav_flag_text(int32_t bit);

/* Limits behind the flags. Zones and heights: WMM technical report (NOAA NCEI and BGS). The others are ours. */
#define MAGNAV_CAUTION_NT MAGNAV_C(6000.0)
#define MAGNAV_BLACKOUT_NT MAGNAV_C(2000.0)
#define MAGNAV_POLE_LATITUDE_DEG MAGNAV_C(89.9)   /* within some 11 km of a geographic pole */
#define MAGNAV_STEEP_DIP_DEG MAGNAV_C(80.0)       /* a tilt error grows at least 5.7 times into the heading */
#define MAGNAV_MODEL_LOWEST_M MAGNAV_C(-1000.0)
#define MAGNAV_MODEL_HIGHEST_M MAGNAV_C(850000.0)
#define MAGNAV_GRID_VARIATION_LATITUDE_DEG MAGNAV_C(55.0)
#define MAGNAV_VERTICAL_LIMIT_DEG MAGNAV_C(85.0)  /* forward axis steeper than this: heading ill-defined */
/* Heights accepted at all. */
#define MAGNAV_LOWEST_M MAGNAV_C(-10000.0)
#define MAGNAV_HIGHEST_M MAGNAV_C(10000000.0)

/* How this library was built. */
int32_t magnav_core_version(void);
int32_t magnav_real_bytes(void);
int32_t magnav_max_degree(void);

/* ---- angles (trig.c) ---- */

/* Sine and cosine of an angle in degrees, |x| <= 1e6; exact at multiples of 90. Within 2 units in the last place. */
void magnav_sincos_deg(magnav_real x_deg, magnav_real *sine, magnav_real *cosine);
/* Angle of the point (x, y) from the x axis towards y, in (-180, 180]; 0 for (0, 0). Within 3 units in the last place
 * for coordinates below half the largest magnav_real. */
magnav_real magnav_atan2_deg(magnav_real y, magnav_real x);
/* The same angle in [0, 360) for one in [-720, 720]. */
magnav_real magnav_full_circle_deg(magnav_real x_deg);

/* ---- the field ---- */

/* A model: Gauss coefficients (Schmidt semi-normalised, nT, reference radius 6371.2 km) as polynomials in time.
 * In piece i, between breaks_yr[i] and breaks_yr[i + 1], a coefficient is
 *     sum over k of polynomials[(i * order + k) * degree * (degree + 2) + term] * (year - breaks_yr[i])^k,
 * with the terms in the order g10 g11 h11 g20 g21 h21 g22 h22 ... Outside the breaks the model is continued by the
 * straight line through its end, and only when asked for. */
typedef struct magnav_model {
    const magnav_real *breaks_yr;   /* pieces + 1, increasing */
    const magnav_real *polynomials; /* pieces * order * degree * (degree + 2) */
    magnav_real valid_from_yr;      /* both ends belong to the validity */
    magnav_real valid_until_yr;
    int32_t degree; /* 1 .. MAGNAV_MAX_DEGREE */
    int32_t order;  /* 1 .. MAGNAV_MAX_TIME_ORDER */
    int32_t pieces; /* 1 .. 10000 */
} magnav_model;

/* A model advanced to one date: what the evaluation works from. Its terms live in the caller's memory. */
typedef struct magnav_snapshot {
    const magnav_real *terms;
    magnav_real year;
    int32_t degree;
    uint32_t flags;
} magnav_snapshot;

/* How many magnav_real a snapshot of this degree needs. */
#define MAGNAV_SNAPSHOT_REALS(degree) (5 * (size_t)(degree) * ((size_t)(degree) + 3) / 2)

/* Advance `model` to `year`. `memory` holds `memory_reals` values and must outlive the snapshot. With `extrapolate` a
 * date outside the validity is computed and flagged; without, it is MAGNAV_E_DATE. */
magnav_status magnav_snapshot_at(const magnav_model *model, magnav_real year, int32_t extrapolate, magnav_real *memory,
                                 size_t memory_reals, magnav_snapshot *snapshot);

/* The field at a point and its yearly change.
 * At a geographic pole the north axis is the limit along the meridian of the longitude given. The declination is in
 * (-180, 180]; where the horizontal field is exactly zero it and its change are 0 and MAGNAV_FLAG_NO_DECLINATION is up.
 * The grid variation is the angle of magnetic north from the grid north of the polar stereographic grid (declination
 * minus longitude in the north, plus longitude in the south), in (-180, 180]; 0 below 55 degrees of latitude. */
typedef struct magnav_field_values {
    magnav_real north_nT, east_nT, down_nT, horizontal_nT, total_nT, declination_deg, inclination_deg;
    magnav_real north_nT_per_yr, east_nT_per_yr, down_nT_per_yr, horizontal_nT_per_yr, total_nT_per_yr;
    magnav_real declination_deg_per_yr, inclination_deg_per_yr;
    magnav_real grid_variation_deg;
    uint32_t flags;
} magnav_field_values;

magnav_status magnav_field_at(const magnav_snapshot *snapshot, magnav_real lat_deg, magnav_real lon_deg,
                              magnav_real height_m, magnav_field_values *field);

/* The vector alone, for small targets: X, Y, Z in nT. */
magnav_status magnav_vector_at(const magnav_snapshot *snapshot, magnav_real lat_deg, magnav_real lon_deg,
                               magnav_real height_m, magnav_real ned_nT[3]);

/* Elements of a vector and its yearly change (ned_nT_per_yr may be NULL: no rates). Position only enters the grid
 * variation and the flags. */
magnav_status magnav_elements(const magnav_real ned_nT[3], const magnav_real ned_nT_per_yr[3], magnav_real lat_deg,
                              magnav_real lon_deg, magnav_field_values *field);

/* `count` points, each with its own date; the snapshot is renewed only where the date changes from the point before.
 * status[i] says what became of point i; fields[i] is left alone where it is not MAGNAV_OK. Returns MAGNAV_OK unless
 * a pointer is NULL, the model is not usable or the memory too small. */
magnav_status magnav_field_many(const magnav_model *model, int32_t extrapolate, magnav_real *memory,
                                size_t memory_reals, size_t count, const magnav_real *lat_deg,
                                const magnav_real *lon_deg, const magnav_real *height_m, const magnav_real *year,
                                magnav_field_values *fields, int32_t *status);

/* ---- the heading ---- */

/* Earth field B (FRD, uT) from a reading m: B = soft_iron (m - hard_iron). The covariance is that of the nine
 * parameters in the order b_x b_y b_z W_xx W_yy W_zz W_xy W_xz W_yz, as packed rows of its lower triangle. */
typedef struct magnav_calibration {
    magnav_real hard_iron_uT[3];
    magnav_real soft_iron[9]; /* symmetric, row by row */
    magnav_real covariance[45];
} magnav_calibration;

/* What a heading needs beside the sample. Sigmas are one standard deviation. */
typedef struct magnav_heading_setup {
    magnav_calibration calibration;
    magnav_real mag_noise_uT;          /* one axis, one sample */
    magnav_real declination_deg, declination_sigma_deg;
    magnav_real convergence_deg;       /* grid north from true north, east positive; 0 when there is no grid */
    magnav_real total_uT, total_sigma_uT;             /* the model's, for the plausibility check */
    magnav_real inclination_deg, inclination_sigma_deg;
    magnav_real gravity_mps2;
    magnav_real acc_noise_mps2;        /* one axis, one sample, bias included */
    magnav_real gyr_drift_radps;       /* one axis: bias and slow drift left in the turn rates */
    magnav_real level_sigma_deg;       /* one axis: used when there is no accelerometer and level is assumed */
    uint32_t flags;                    /* of the field at the place and date, and MAGNAV_FLAG_UNCALIBRATED if so */
} magnav_heading_setup;

typedef enum magnav_contribution {
    MAGNAV_FROM_SENSOR = 0,
    MAGNAV_FROM_CALIBRATION = 1,
    MAGNAV_FROM_TILT = 2,
    MAGNAV_FROM_MODEL = 3
} magnav_contribution;

/* Headings of the body's forward axis in [0, 360), from magnetic, true and grid north, with their standard
 * uncertainty. `contribution_deg` holds the parts of sigma_deg in the order of magnav_contribution;
 * sigma_magnetic_deg leaves the model out. */
typedef struct magnav_heading {
    magnav_real magnetic_deg, true_deg, grid_deg;
    magnav_real sigma_magnetic_deg, sigma_deg;
    magnav_real contribution_deg[4];
    magnav_real roll_deg, pitch_deg;
    magnav_real measured_total_uT, measured_inclination_deg;
    int32_t dominant; /* a magnav_contribution */
    uint32_t flags;
} magnav_heading;

/* One heading from a magnetic reading (FRD, uT), the down direction in the body frame (any length but zero) and the
 * standard uncertainty of that direction about each horizontal axis. First-order propagation; where the 95 % interval
 * would cover the circle MAGNAV_FLAG_HEADING_UNUSABLE is up. */
magnav_status magnav_heading_of(const magnav_heading_setup *setup, const magnav_real mag_uT[3],
                                const magnav_real down[3], magnav_real tilt_sigma_deg, magnav_heading *heading);

/* The vertical, followed from sample to sample. Start with started = 0. */
typedef struct magnav_vertical {
    magnav_real down[3];     /* unit vector, body frame */
    magnav_real variance;    /* rad^2, one horizontal axis */
    magnav_real unrest;      /* running mean square of | |acc| - gravity |, (m/s^2)^2 */
    int32_t started;
} magnav_vertical;

/* Advance by one sample. Without turn rates (gyr_radps NULL) the vertical is the sample's own; with them it is carried
 * by the gyroscope and drawn towards the sample with the gain that the two variances give. How far the magnitude of
 * the acceleration strays from gravity, over half a second, sets the sample's variance. `dt_s` is the time since the
 * sample before, ignored at the start. */
magnav_status magnav_vertical_step(magnav_vertical *vertical, const magnav_heading_setup *setup,
                                   const magnav_real acc_mps2[3], const magnav_real *gyr_radps, magnav_real dt_s);

/* A log of `count` samples: row-major (count, 3) arrays, t_s increasing; acc_mps2 may be NULL (level is assumed),
 * gyr_radps may be NULL. A row with a bad value gets its status, its heading is left alone, and the next goes on. */
magnav_status magnav_heading_log(const magnav_heading_setup *setup, size_t count, const magnav_real *t_s,
                                 const magnav_real *mag_uT, const magnav_real *acc_mps2,
                                 const magnav_real *gyr_radps, magnav_heading *headings, int32_t *status);

#ifdef __cplusplus
}
#endif
#endif
