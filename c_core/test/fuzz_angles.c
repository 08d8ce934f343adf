/* Fuzzes the angles within the ranges that the header gives. Bytes: three reals (x, y, angle). */
#include "fuzz_bytes.h"

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    bytes from = {data, size};
    const magnav_real half_largest = (sizeof(magnav_real) == 4) ? (magnav_real)1.7e38 : (magnav_real)8.9e307;
    const magnav_real x = take_real(&from, -100, 100);
    const magnav_real y = take_real(&from, -100, 100);
    const magnav_real angle = take_real(&from, -720, 720);
    magnav_real sine = 2, cosine = 2;

    if (fabs((double)x) < (double)half_largest && fabs((double)y) < (double)half_largest) {
        const magnav_real a = magnav_atan2_deg(y, x);
        MUST(a > -180 && a <= 180);
        MUST((y >= 0) ? a >= 0 : a <= 0 || a == 180);
        MUST(magnav_full_circle_deg(a) >= 0 && magnav_full_circle_deg(a) < 360);
    }
    if (fabs((double)angle) <= 1e6) {
        magnav_sincos_deg(angle, &sine, &cosine);
        MUST(fabs((double)sine) <= 1 && fabs((double)cosine) <= 1);
        MUST(fabs((double)sine * (double)sine + (double)cosine * (double)cosine - 1) < 1e-6);
    }
    if (fabs((double)angle) <= 720) {
        MUST(magnav_full_circle_deg(angle) >= 0 && magnav_full_circle_deg(angle) < 360);
    }
    return 0;
}
