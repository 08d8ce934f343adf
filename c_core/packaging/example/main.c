/* Field, declination and heading on a target. Exits 1 when the core and this file were not built alike, or when the
 * heading is not the one that the reading was made for. */
#include <stdio.h>

#include "magnav_core.h"

/* The dipole of WMM2025 alone, constant in time: g10 g11 h11, nT. A real build takes a whole model. */
static const magnav_real breaks[2] = {2025, 2030};
static const magnav_real coefficients[3] = {MAGNAV_C(-29351.8), MAGNAV_C(-1410.8), MAGNAV_C(4545.4)};
static const magnav_model model = {breaks, coefficients, 2025, 2030, 1, 1, 1};

/* A sensor without faults, noise 0.1 uT, level within 0.5 deg. */
static magnav_heading_setup setup_for(const magnav_field_values *field)
{
    magnav_heading_setup setup = {0};
    setup.calibration.soft_iron[0] = 1;
    setup.calibration.soft_iron[4] = 1;
    setup.calibration.soft_iron[8] = 1;
    setup.mag_noise_uT = MAGNAV_C(0.1);
    setup.declination_deg = field->declination_deg;
    setup.declination_sigma_deg = MAGNAV_C(0.5);
    setup.total_uT = field->total_nT / 1000;
    setup.total_sigma_uT = MAGNAV_C(0.3);
    setup.inclination_deg = field->inclination_deg;
    setup.inclination_sigma_deg = MAGNAV_C(0.3);
    setup.gravity_mps2 = MAGNAV_C(9.81);
    setup.flags = field->flags;
    return setup;
}

int main(void)
{
    magnav_real memory[MAGNAV_SNAPSHOT_REALS(1)];
    magnav_real sine, cosine, reading_uT[3];
    const magnav_real down[3] = {0, 0, 1};
    magnav_snapshot snapshot;
    magnav_field_values field;
    magnav_heading_setup setup;
    magnav_heading heading;
    magnav_status status;

    if (magnav_real_bytes() != (int32_t)sizeof(magnav_real) || magnav_core_version() != MAGNAV_CORE_VERSION) {
        printf("the library has reals of %d bytes, this file of %d\n", (int)magnav_real_bytes(),
               (int)sizeof(magnav_real));
        return 1;
    }
    status = magnav_snapshot_at(&model, 2026, 0, memory, MAGNAV_SNAPSHOT_REALS(1), &snapshot);
    if (status == MAGNAV_OK) {
        status = magnav_field_at(&snapshot, 47, 11, 600, &field);
    }
    if (status == MAGNAV_OK) {
        /* what a level body pointing to 60 deg true reads, in forward, right, down */
        magnav_sincos_deg(60, &sine, &cosine);
        reading_uT[0] = (field.north_nT * cosine + field.east_nT * sine) / 1000;
        reading_uT[1] = (field.east_nT * cosine - field.north_nT * sine) / 1000;
        reading_uT[2] = field.down_nT / 1000;
        setup = setup_for(&field);
        status = magnav_heading_of(&setup, reading_uT, down, MAGNAV_C(0.5), &heading);
    }
    if (status != MAGNAV_OK) {
        printf("%s\n", magnav_status_text(status));
        return 1;
    }
    printf("magnav %s, %d-byte reals: declination %.2f deg, heading %.2f deg true, sigma %.2f deg\n",
           MAGNAV_CORE_RELEASE, (int)magnav_real_bytes(), (double)field.declination_deg, (double)heading.true_deg,
           (double)heading.sigma_deg);
    return (heading.true_deg > MAGNAV_C(59.999) && heading.true_deg < MAGNAV_C(60.001) &&
            (heading.flags & (MAGNAV_FLAG_MAGNITUDE_IMPLAUSIBLE | MAGNAV_FLAG_DIP_IMPLAUSIBLE)) == 0) ? 0 : 1;
}
