/* The vertical in the body frame from the accelerometer, carried by the gyroscope where there is one.
 *
 * A scalar Kalman filter on a unit vector: the gyroscope turns the vector (d' = d x w) and its drift adds variance; the
 * sample's -acc / |acc| draws it back. The acceleration of the body itself is seen only by its trace in | |acc| - g |:
 * the running mean square of that is taken as the variance of one component. As it lasts, half a second here, a sample
 * inside that time brings no new information: its variance is raised by the ratio of the two times. */
#include "real.h"

/* How long the body's own acceleration stays of one sign; our estimate. */
#define UNREST_TIME_S MAGNAV_C(0.5)
#define PER_RADIAN MAGNAV_C(57.295779513082320877)

/* A turn in one step beyond which magnav_sincos_deg does not go, nor a gyroscope. */
#define LARGEST_TURN_DEG MAGNAV_C(1.0e6)

/* Turn `v` by the rotation that the body's turn about `rate` for `dt` causes in body axes: by -rate dt. */
static magnav_status turn_back(magnav_real v[3], const magnav_real rate[3], magnav_real dt)
{
    const magnav_real speed = real_sqrt(dot(rate, rate));
    const magnav_real turn_deg = speed * dt * PER_RADIAN;
    magnav_real axis[3];
    magnav_real across[3];
    magnav_real sine;
    magnav_real cosine;
    magnav_real along;

    if (!(turn_deg <= LARGEST_TURN_DEG)) {
        return MAGNAV_E_NOT_FINITE;
    }
    if (speed > MAGNAV_C(0.0)) {
        for (int32_t i = 0; i < 3; i++) {
            axis[i] = rate[i] / speed;
        }
        magnav_sincos_deg(turn_deg, &sine, &cosine);
        cross(v, axis, across);
        along = dot(v, axis) * (MAGNAV_C(1.0) - cosine);
        for (int32_t i = 0; i < 3; i++) {
            v[i] = v[i] * cosine + across[i] * sine + axis[i] * along;
        }
    }
    return MAGNAV_OK;
}

magnav_status magnav_vertical_step(magnav_vertical *vertical, const magnav_heading_setup *setup,
                                   const magnav_real acc_mps2[3], const magnav_real *gyr_radps, magnav_real dt_s)
{
    magnav_vertical v;
    magnav_real size;
    magnav_real stray;
    magnav_real fading;
    magnav_real sample;

    if (vertical == NULL || setup == NULL || acc_mps2 == NULL) {
        return MAGNAV_E_NULL;
    }
    v = *vertical;
    if (!isfinite(setup->gravity_mps2) || !isfinite(setup->acc_noise_mps2) || !isfinite(setup->gyr_drift_radps) ||
        setup->gravity_mps2 <= MAGNAV_C(0.0) || setup->acc_noise_mps2 < MAGNAV_C(0.0) ||
        setup->gyr_drift_radps < MAGNAV_C(0.0)) {
        return MAGNAV_E_PARAMETER;
    }
    if (!all_finite(acc_mps2, 3) || (gyr_radps != NULL && !all_finite(gyr_radps, 3))) {
        return MAGNAV_E_NOT_FINITE;
    }
    if (v.started != 0 && !(dt_s > MAGNAV_C(0.0) && isfinite(dt_s))) {
        return MAGNAV_E_TIME;
    }
    size = real_sqrt(dot(acc_mps2, acc_mps2));
    if (!(size > MAGNAV_C(0.0))) {
        return MAGNAV_E_ACCELERATION;
    }
    stray = size - setup->gravity_mps2;
    if (v.started == 0) {
        v.unrest = stray * stray;
    } else {
        fading = UNREST_TIME_S / (UNREST_TIME_S + dt_s);
        v.unrest = fading * v.unrest + (MAGNAV_C(1.0) - fading) * stray * stray;
    }
    sample = (setup->acc_noise_mps2 * setup->acc_noise_mps2 + v.unrest) / (setup->gravity_mps2 * setup->gravity_mps2);
    if (!isfinite(sample)) {
        return MAGNAV_E_NOT_FINITE; /* kept, it would stay in the running mean for ever */
    }

    if (v.started == 0 || gyr_radps == NULL || dt_s > UNREST_TIME_S) {
        /* nothing to carry from: the sample alone (after a gap, too) */
        for (int32_t i = 0; i < 3; i++) {
            v.down[i] = (MAGNAV_C(0.0) - acc_mps2[i]) / size;
        }
        v.variance = sample;
    } else {
        const magnav_real drift = setup->gyr_drift_radps * dt_s;
        const magnav_real correlated = sample * (MAGNAV_C(1.0) + UNREST_TIME_S / dt_s);
        magnav_real both;
        magnav_real gain;
        magnav_real length;

        if (turn_back(v.down, gyr_radps, dt_s) != MAGNAV_OK) {
            return MAGNAV_E_NOT_FINITE;
        }
        /* a drift that keeps its sign over the filter's memory grows faster than a random one: hence the second term */
        v.variance = v.variance + drift * drift + MAGNAV_C(2.0) * drift * real_sqrt(v.variance);
        if (!isfinite(v.variance)) {
            return MAGNAV_E_NOT_FINITE;
        }
        /* where both are said to be exact the sample is taken; a NaN, from a sample of no variance at once, too */
        both = v.variance + correlated;
        gain = (both > MAGNAV_C(0.0)) ? v.variance / both : MAGNAV_C(1.0);
        for (int32_t i = 0; i < 3; i++) {
            v.down[i] = v.down[i] - gain * (acc_mps2[i] / size + v.down[i]);
        }
        v.variance = (MAGNAV_C(1.0) - gain) * v.variance;
        length = real_sqrt(dot(v.down, v.down));
        if (!(length > MAGNAV_C(0.0))) {
            return MAGNAV_E_ACCELERATION;
        }
        for (int32_t i = 0; i < 3; i++) {
            v.down[i] = v.down[i] / length;
        }
    }
    v.started = 1;
    *vertical = v;
    return MAGNAV_OK;
}
