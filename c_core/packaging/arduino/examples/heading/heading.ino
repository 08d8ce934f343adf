// A tilt-compensated true heading from one reading of a magnetometer and an accelerometer, with its uncertainty.
#include <magnav.h>

// The dipole of WMM2025 alone, constant in time: g10 g11 h11, nT. A real sketch takes a whole model.
static const magnav_real breaks[2] = {2025, 2030};
static const magnav_real coefficients[3] = {MAGNAV_C(-29351.8), MAGNAV_C(-1410.8), MAGNAV_C(4545.4)};
static const magnav_model model = {breaks, coefficients, 2025, 2030, 1, 1, 1};

static magnav_heading_setup heading_setup;
static magnav_status ready;

void setup()
{
    magnav_real memory[MAGNAV_SNAPSHOT_REALS(1)];
    magnav_snapshot snapshot;
    magnav_field_values field;

    Serial.begin(115200);
    ready = magnav_snapshot_at(&model, 2026, 0, memory, MAGNAV_SNAPSHOT_REALS(1), &snapshot);
    if (ready == MAGNAV_OK) {
        ready = magnav_field_at(&snapshot, 47, 11, 600, &field);
    }
    if (ready != MAGNAV_OK) {
        Serial.println(magnav_status_text(ready));
        return;
    }
    heading_setup.calibration.soft_iron[0] = 1; // your calibration goes here
    heading_setup.calibration.soft_iron[4] = 1;
    heading_setup.calibration.soft_iron[8] = 1;
    heading_setup.mag_noise_uT = MAGNAV_C(0.1);
    heading_setup.declination_deg = field.declination_deg;
    heading_setup.declination_sigma_deg = MAGNAV_C(0.5);
    heading_setup.gravity_mps2 = MAGNAV_C(9.81);
    heading_setup.acc_noise_mps2 = MAGNAV_C(0.05);
    heading_setup.flags = field.flags | MAGNAV_FLAG_UNCALIBRATED;
}

void loop()
{
    // forward, right, down: replace by your sensors' readings
    const magnav_real mag_uT[3] = {0, MAGNAV_C(-20.0), MAGNAV_C(43.0)};
    const magnav_real acc_mps2[3] = {0, 0, MAGNAV_C(-9.81)};
    magnav_vertical vertical = {};
    magnav_heading heading;
    magnav_status status = ready;

    if (status == MAGNAV_OK) {
        status = magnav_vertical_step(&vertical, &heading_setup, acc_mps2, NULL, 0);
    }
    if (status == MAGNAV_OK) {
        // a steady body: the accelerometer's noise alone tilts its vertical, 0.3 deg
        status = magnav_heading_of(&heading_setup, mag_uT, vertical.down, MAGNAV_C(0.3), &heading);
    }
    if (status == MAGNAV_OK) {
        Serial.print(heading.true_deg);
        Serial.print(" deg true, sigma ");
        Serial.println(heading.sigma_deg);
    } else {
        Serial.println(magnav_status_text(status));
    }
    delay(1000);
}
