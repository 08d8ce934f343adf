/* Fuzzes the calibrator: readings of any size; whatever comes, a solution that is not refused is finite. */
#include "fuzz_bytes.h"

#include "magnav_calibrator.h"

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    bytes from = {data, size};
    magnav_calibrator calibrator;
    magnav_calibrator_result result;

    if (magnav_calibrator_start(&calibrator, take_real(&from, 1, 100)) != MAGNAV_OK) {
        return 0;
    }
    for (int i = 0; i < 120; i++) {
        magnav_real mag[3];
        for (int k = 0; k < 3; k++) {
            mag[k] = take_real(&from, -100, 100);
        }
        (void)magnav_calibrator_add(&calibrator, mag);
    }
    MUST(magnav_calibrator_solve(&calibrator, &result) == MAGNAV_OK);
    MUST(result.refusal >= MAGNAV_REFUSED_NOT && result.refusal <= MAGNAV_REFUSED_RESIDUAL);
    MUST(result.seen >= 0 && result.seen <= MAGNAV_CALIBRATOR_DIRECTIONS);
    if (result.refusal == MAGNAV_REFUSED_NOT) {
        for (int i = 0; i < 45; i++) {
            MUST(isfinite(result.calibration.covariance[i]));
        }
        MUST(isfinite(result.noise_uT) && result.noise_uT >= 0);
    }
    return 0;
}
