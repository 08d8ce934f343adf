/* Fuzzes the heading chain. Bytes: a count of samples, which arrays are there, a number for the words (4), the setup in
 * the order of the structure, then each sample: time step, magnetic, acceleration and turn rate axis by axis. */
#include "fuzz_bytes.h"

#define SAMPLES 8

static magnav_heading_setup take_setup(bytes *from)
{
    magnav_heading_setup s;
    for (int i = 0; i < 3; i++) {
        s.calibration.hard_iron_uT[i] = take_real(from, -100, 100);
    }
    for (int i = 0; i < 9; i++) {
        s.calibration.soft_iron[i] = take_real(from, -2, 2);
    }
    for (int i = 0; i < 45; i++) {
        s.calibration.covariance[i] = take_real(from, -1, 1);
    }
    s.mag_noise_uT = take_real(from, 0, 2);
    s.declination_deg = take_real(from, -180, 180);
    s.declination_sigma_deg = take_real(from, 0, 5);
    s.convergence_deg = take_real(from, -180, 180);
    s.total_uT = take_real(from, 0, 70);
    s.total_sigma_uT = take_real(from, 0, 2);
    s.inclination_deg = take_real(from, -90, 90);
    s.inclination_sigma_deg = take_real(from, 0, 2);
    s.gravity_mps2 = take_real(from, 9, 10);
    s.acc_noise_mps2 = take_real(from, 0, 1);
    s.gyr_drift_radps = take_real(from, 0, 1);
    s.level_sigma_deg = take_real(from, 0, 5);
    s.flags = take_byte(from);
    return s;
}

static void check_row(const magnav_heading *h, int32_t status)
{
    MUST(status <= MAGNAV_OK && status > MAGNAV_E_END);
    if (status != MAGNAV_OK) {
        MUST(is_spoilt(h, sizeof *h));
        return;
    }
    MUST(h->magnetic_deg >= 0 && h->magnetic_deg < 360);
    MUST(h->true_deg >= 0 && h->true_deg < 360);
    MUST(h->grid_deg >= 0 && h->grid_deg < 360);
    MUST(h->roll_deg > -180 && h->roll_deg <= 180 && h->pitch_deg >= -90 && h->pitch_deg <= 90);
    MUST(isfinite(h->measured_total_uT) && h->measured_total_uT >= 0);
    MUST(h->measured_inclination_deg >= -90 && h->measured_inclination_deg <= 90);
    MUST(h->dominant >= MAGNAV_FROM_SENSOR && h->dominant <= MAGNAV_FROM_MODEL);
    MUST(h->flags < (uint32_t)1 << MAGNAV_FLAG_COUNT);
    MUST(isfinite(h->sigma_deg) && h->sigma_deg >= h->sigma_magnetic_deg && h->sigma_magnetic_deg >= 0);
    for (int k = 0; k < 4; k++) {
        MUST(h->contribution_deg[k] >= 0 && h->contribution_deg[k] <= h->contribution_deg[h->dominant]);
    }
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    bytes from = {data, size};
    const size_t count = take_byte(&from) % (SAMPLES + 1);
    const uint32_t there = take_byte(&from);
    const int32_t word = (int32_t)(uint32_t)take_number(&from, 4);
    magnav_real *t = spoilt_memory(count * sizeof *t);
    magnav_real *mag = spoilt_memory(3 * count * sizeof *mag);
    magnav_real *acc = spoilt_memory(3 * count * sizeof *acc);
    magnav_real *gyr = spoilt_memory(3 * count * sizeof *gyr);
    magnav_heading *headings = spoilt_memory(count * sizeof *headings);
    int32_t *status = spoilt_memory(count * sizeof *status);
    magnav_heading_setup setup;

    MUST(magnav_status_text(word) != NULL);
    MUST((magnav_flag_name(word) != NULL) == (word >= 0 && word < MAGNAV_FLAG_COUNT));
    MUST((magnav_flag_text(word) != NULL) == (word >= 0 && word < MAGNAV_FLAG_COUNT));
    setup = take_setup(&from);
    for (size_t i = 0; i < count; i++) {
        t[i] = take_real(&from, 0, 0.6) + ((i > 0) ? t[i - 1] : 0);
        for (size_t k = 3 * i; k < 3 * i + 3; k++) {
            mag[k] = take_real(&from, -70, 70);
            acc[k] = take_real(&from, -15, 15);
            gyr[k] = take_real(&from, -10, 10);
        }
    }
    MUST(magnav_heading_log(&setup, count, t, mag, (there & 1) ? NULL : acc, (there & 2) ? NULL : gyr, headings,
                            status) == MAGNAV_OK);
    for (size_t i = 0; i < count; i++) {
        check_row(&headings[i], status[i]);
    }
    if (count > 0) { /* with a vertical that is not of unit length */
        magnav_heading one;
        memset(&one, 0xA5, sizeof one);
        check_row(&one, (magnav_heading_of(&setup, mag, acc, gyr[0], &one) == MAGNAV_OK) ? MAGNAV_OK : MAGNAV_E_NULL);
    }
    free(t);
    free(mag);
    free(acc);
    free(gyr);
    free(headings);
    free(status);
    return 0;
}
