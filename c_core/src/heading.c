/* One heading with its uncertainty: calibration, tilt compensation, declination, convergence, plausibility.
 *
 * East is down x field, north east x down; the heading is the azimuth of the forward axis in them. First-order
 * propagation (JCGM 100:2008, 5.1) of:
 *   the reading      an error e of the horizontal field across it turns north by e / H;
 *   the calibration  the same, with e = -W db + dW (m - b) over the nine parameters and their covariance;
 *   the vertical     a tilt w turns the azimuth of a vector v by (v_down / v_horizontal)(w . v's horizontal direction):
 *                    taken for the forward axis and for the field, with the angle between them;
 *   the model        the declination's sigma. */
#include "real.h"

#define PER_RADIAN MAGNAV_C(57.295779513082320877)
#define COVERAGE_95 MAGNAV_C(1.959963984540054)
/* The check on magnitude and dip allows this many standard deviations before it warns. */
#define CHECK_SIGMAS MAGNAV_C(3.0)
/* Beyond this the body's own acceleration, not the sensor's noise, sets the tilt; our choice. */
#define ACCELERATED_TILT_DEG MAGNAV_C(2.0)

/* gradient of e (field across the heading of north) by the nine calibration parameters, times the covariance */
static magnav_real calibration_variance(const magnav_calibration *cal, const magnav_real east[3],
                                        const magnav_real offset_reading[3])
{
    magnav_real g[9];
    magnav_real sum = MAGNAV_C(0.0);
    const magnav_real *row = cal->covariance;

    for (int32_t i = 0; i < 3; i++) {
        g[i] = MAGNAV_C(0.0) - dot(&cal->soft_iron[3 * i], east); /* symmetric: row i is column i */
        g[3 + i] = east[i] * offset_reading[i];
    }
    g[6] = east[0] * offset_reading[1] + east[1] * offset_reading[0];
    g[7] = east[0] * offset_reading[2] + east[2] * offset_reading[0];
    g[8] = east[1] * offset_reading[2] + east[2] * offset_reading[1];
    for (int32_t i = 0; i < 9; i++) {
        for (int32_t j = 0; j < i; j++) {
            sum = sum + MAGNAV_C(2.0) * g[i] * g[j] * row[j];
        }
        sum = sum + g[i] * g[i] * row[i];
        row += i + 1;
    }
    return (sum < MAGNAV_C(0.0)) ? MAGNAV_C(0.0) : sum; /* written so that a NaN stays */
}

static int32_t setup_usable(const magnav_heading_setup *s)
{
    const magnav_real from_zero[5] = {s->mag_noise_uT, s->declination_sigma_deg, s->total_uT, s->total_sigma_uT,
                                      s->inclination_sigma_deg};
    int32_t usable = all_finite(s->calibration.hard_iron_uT, 3) && all_finite(s->calibration.soft_iron, 9) &&
                     all_finite(s->calibration.covariance, 45) && all_finite(from_zero, 5);

    for (int32_t i = 0; i < 5; i++) {
        usable = usable && from_zero[i] >= MAGNAV_C(0.0);
    }
    return usable && real_abs(s->declination_deg) <= MAGNAV_C(180.0) &&
           real_abs(s->convergence_deg) <= MAGNAV_C(180.0) && real_abs(s->inclination_deg) <= MAGNAV_C(90.0);
}

magnav_status magnav_heading_of(const magnav_heading_setup *setup, const magnav_real mag_uT[3],
                                const magnav_real down[3], magnav_real tilt_sigma_deg, magnav_heading *heading)
{
    const magnav_real zero = MAGNAV_C(0.0);
    magnav_heading out;
    magnav_real d[3];
    magnav_real reading[3];
    magnav_real field[3];
    magnav_real east[3];
    magnav_real north[3];
    magnav_real seen[3];
    magnav_real size;
    magnav_real horizontal;
    magnav_real vertical;
    magnav_real forward;
    magnav_real steep_forward;
    magnav_real steep_field;
    magnav_real tilt2;
    magnav_real across;
    magnav_real noise2;
    magnav_real along2;
    magnav_real within2;
    magnav_real tolerance;

    if (setup == NULL || mag_uT == NULL || down == NULL || heading == NULL) {
        return MAGNAV_E_NULL;
    }
    if (!setup_usable(setup) || tilt_sigma_deg < zero) {
        return MAGNAV_E_PARAMETER;
    }
    size = real_sqrt(dot(down, down));
    if (!all_finite(mag_uT, 3) || !isfinite(size) || !isfinite(tilt_sigma_deg)) {
        return MAGNAV_E_NOT_FINITE;
    }
    if (!(size > zero)) {
        return MAGNAV_E_ACCELERATION;
    }
    for (int32_t i = 0; i < 3; i++) {
        d[i] = down[i] / size;
        reading[i] = mag_uT[i] - setup->calibration.hard_iron_uT[i];
    }
    for (int32_t i = 0; i < 3; i++) {
        field[i] = dot(&setup->calibration.soft_iron[3 * i], reading);
    }
    (void)memset(&out, 0, sizeof out);
    out.measured_total_uT = real_sqrt(dot(field, field));
    if (!isfinite(out.measured_total_uT)) {
        return MAGNAV_E_NOT_FINITE;
    }
    cross(d, field, east);
    horizontal = real_sqrt(dot(east, east));
    if (!(horizontal > zero)) {
        return MAGNAV_E_MAGNETIC;
    }
    for (int32_t i = 0; i < 3; i++) {
        east[i] = east[i] / horizontal;
    }
    cross(east, d, north);
    vertical = dot(field, d);
    forward = real_sqrt(north[0] * north[0] + east[0] * east[0]);

    out.magnetic_deg = magnav_full_circle_deg(magnav_atan2_deg(east[0], north[0]));
    out.true_deg = magnav_full_circle_deg(out.magnetic_deg + setup->declination_deg);
    out.grid_deg = magnav_full_circle_deg(out.true_deg - setup->convergence_deg);
    out.pitch_deg = magnav_atan2_deg(zero - d[0], forward);
    out.roll_deg = magnav_atan2_deg(d[1], d[2]);
    out.measured_inclination_deg = magnav_atan2_deg(vertical, horizontal);
    out.flags = setup->flags;

    /* the parts, as variances of the heading in degrees squared */
    for (int32_t i = 0; i < 3; i++) {
        seen[i] = dot(&setup->calibration.soft_iron[3 * i], east);
    }
    noise2 = setup->mag_noise_uT * setup->mag_noise_uT;
    across = PER_RADIAN / horizontal;
    out.contribution_deg[MAGNAV_FROM_SENSOR] = real_sqrt(noise2 * dot(seen, seen)) * across;
    out.contribution_deg[MAGNAV_FROM_CALIBRATION] =
        real_sqrt(calibration_variance(&setup->calibration, east, reading)) * across;
    steep_field = vertical / horizontal;
    if (forward > zero) {
        steep_forward = d[0] / forward;
        tilt2 = steep_field * steep_field + steep_forward * steep_forward -
                MAGNAV_C(2.0) * steep_field * steep_forward * north[0] / forward;
    } else {
        tilt2 = steep_field * steep_field;
    }
    out.contribution_deg[MAGNAV_FROM_TILT] =
        (tilt2 > zero) ? tilt_sigma_deg * real_sqrt(tilt2) : zero;
    out.contribution_deg[MAGNAV_FROM_MODEL] = setup->declination_sigma_deg;

    for (int32_t k = 0; k < 4; k++) {
        const magnav_real part = out.contribution_deg[k];
        if (part > out.contribution_deg[out.dominant]) {
            out.dominant = k;
        }
        if (k == MAGNAV_FROM_MODEL) {
            out.sigma_magnetic_deg = real_sqrt(out.sigma_deg);
        }
        out.sigma_deg = out.sigma_deg + part * part;
    }
    out.sigma_deg = real_sqrt(out.sigma_deg);
    /* a covariance or a ratio that overflows would otherwise end as a part of zero */
    if (!isfinite(out.sigma_deg) || !isfinite(tilt2)) {
        return MAGNAV_E_NOT_FINITE;
    }

    /* plausibility against the model: along the field for the magnitude, in its vertical plane for the dip */
    for (int32_t i = 0; i < 3; i++) {
        seen[i] = field[i] / out.measured_total_uT;
    }
    along2 = noise2 + calibration_variance(&setup->calibration, seen, reading);
    tolerance = CHECK_SIGMAS * real_sqrt(setup->total_sigma_uT * setup->total_sigma_uT + along2);
    if (setup->total_uT > zero && real_abs(out.measured_total_uT - setup->total_uT) > tolerance) {
        out.flags |= MAGNAV_FLAG_MAGNITUDE_IMPLAUSIBLE;
    }
    for (int32_t i = 0; i < 3; i++) {
        seen[i] = (d[i] * horizontal - north[i] * vertical) / out.measured_total_uT;
    }
    within2 = (noise2 + calibration_variance(&setup->calibration, seen, reading)) * (PER_RADIAN * PER_RADIAN) /
              (out.measured_total_uT * out.measured_total_uT);
    tolerance = CHECK_SIGMAS * real_sqrt(setup->inclination_sigma_deg * setup->inclination_sigma_deg +
                                         tilt_sigma_deg * tilt_sigma_deg + within2);
    if (setup->total_uT > zero && real_abs(out.measured_inclination_deg - setup->inclination_deg) > tolerance) {
        out.flags |= MAGNAV_FLAG_DIP_IMPLAUSIBLE;
    }
    if (real_abs(out.pitch_deg) > MAGNAV_VERTICAL_LIMIT_DEG) {
        out.flags |= MAGNAV_FLAG_FORWARD_VERTICAL;
    }
    if (tilt_sigma_deg > ACCELERATED_TILT_DEG && (setup->flags & MAGNAV_FLAG_ASSUMED_LEVEL) == 0U) {
        out.flags |= MAGNAV_FLAG_ACCELERATED;
    }
    if (out.sigma_deg * COVERAGE_95 >= MAGNAV_C(180.0)) {
        out.flags |= MAGNAV_FLAG_HEADING_UNUSABLE;
    }
    *heading = out;
    return MAGNAV_OK;
}

magnav_status magnav_heading_log(const magnav_heading_setup *setup, size_t count, const magnav_real *t_s,
                                 const magnav_real *mag_uT, const magnav_real *acc_mps2,
                                 const magnav_real *gyr_radps, magnav_heading *headings, int32_t *status)
{
    static const magnav_real LEVEL[3] = {MAGNAV_C(0.0), MAGNAV_C(0.0), MAGNAV_C(1.0)};
    magnav_vertical vertical;
    magnav_real t_before = MAGNAV_C(0.0);

    if (setup == NULL || t_s == NULL || mag_uT == NULL || headings == NULL || status == NULL) {
        return MAGNAV_E_NULL;
    }
    (void)memset(&vertical, 0, sizeof vertical);
    for (size_t i = 0; i < count; i++) {
        magnav_status row;
        if (acc_mps2 == NULL) {
            row = magnav_heading_of(setup, &mag_uT[3 * i], LEVEL, setup->level_sigma_deg, &headings[i]);
            if (row == MAGNAV_OK) {
                headings[i].flags = (headings[i].flags & ~MAGNAV_FLAG_ACCELERATED) | MAGNAV_FLAG_ASSUMED_LEVEL;
            }
        } else if (!isfinite(t_s[i])) {
            row = MAGNAV_E_NOT_FINITE;
        } else {
            row = magnav_vertical_step(&vertical, setup, &acc_mps2[3 * i],
                                       (gyr_radps == NULL) ? NULL : &gyr_radps[3 * i], t_s[i] - t_before);
            if (row == MAGNAV_OK) {
                t_before = t_s[i];
                row = magnav_heading_of(setup, &mag_uT[3 * i], vertical.down,
                                        real_sqrt(vertical.variance) * PER_RADIAN, &headings[i]);
            }
        }
        status[i] = (int32_t)row;
    }
    return MAGNAV_OK;
}
