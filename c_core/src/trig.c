/* Sine, cosine and arctangent of our own, in degrees: the same bits on every target, where the system's differ.
 * Polynomials by Remez exchange; tests/derive_trig_coefficients.py prints them with their errors. */
#include "magnav_core.h"

#define DEGREE MAGNAV_C(0.017453292519943295769)
#define PER_DEGREE MAGNAV_C(57.295779513082320877)
#define TAN_22_5 MAGNAV_C(0.41421356237309504880)

#ifdef MAGNAV_SINGLE
static const magnav_real SINE[] = {-0.1666665494f, 0.008332178142f, -0.000195172986f};
static const magnav_real COSINE[] = {0.04166664687f, -0.001388736752f, 2.443845192e-5f};
static const magnav_real ARCTANGENT[] = {-0.3333331551f, 0.1999848944f, -0.1424384873f, 0.1059600159f, -0.06083453533f};
#else
static const magnav_real SINE[] = {-0.1666666666666663206,    0.00833333333332242363,  -0.0001984126982981637812,
                                   2.755731369505886829e-6,   -2.505075863029574084e-8, 1.589682673364966752e-10};
static const magnav_real COSINE[] = {0.04166666666666659956,   -0.00138888888888741385, 0.00002480158728949176297,
                                     -2.755731435522685959e-7, 2.087572368273363284e-9, -1.135966979215866411e-11};
static const magnav_real ARCTANGENT[] = {
    -0.3333333333333319897,  0.1999999999995405375,  -0.142857142802463097,   0.1111111078604964981,
    -0.09090897834366342689, 0.07692061606216186831, -0.0666312008798703991,  0.05848007091344470155,
    -0.05039838521172880289, 0.0380781699125385078,  -0.01792213888011776916};
#endif

#define COUNT(table) ((int32_t)(sizeof(table) / sizeof((table)[0])))

static magnav_real polynomial(const magnav_real *c, int32_t count, magnav_real x)
{
    magnav_real sum = c[count - 1];
    for (int32_t k = count - 2; k >= 0; k--) {
        sum = sum * x + c[k];
    }
    return sum;
}

void magnav_sincos_deg(magnav_real x_deg, magnav_real *sine, magnav_real *cosine)
{
    const magnav_real nearest = (x_deg < MAGNAV_C(0.0)) ? MAGNAV_C(-0.5) : MAGNAV_C(0.5);
    const int32_t quarter = (int32_t)(x_deg / MAGNAV_C(90.0) + nearest);
    /* exact: both terms are multiples of the last place of x_deg and the difference is small */
    const magnav_real y = (x_deg - MAGNAV_C(90.0) * (magnav_real)quarter) * DEGREE;
    const magnav_real y2 = y * y;
    const magnav_real s = y + y * y2 * polynomial(SINE, COUNT(SINE), y2);
    const magnav_real c = MAGNAV_C(1.0) - (MAGNAV_C(0.5) * y2 - y2 * y2 * polynomial(COSINE, COUNT(COSINE), y2));
    const int32_t turn = ((quarter % 4) + 4) % 4;
    const magnav_real zero = MAGNAV_C(0.0);

    /* 0 - x rather than -x keeps exact zeros positive */
    *sine = (turn == 0) ? s : (turn == 1) ? c : (turn == 2) ? zero - s : zero - c;
    *cosine = (turn == 0) ? c : (turn == 1) ? zero - s : (turn == 2) ? zero - c : s;
}

magnav_real magnav_atan2_deg(magnav_real y, magnav_real x)
{
    const magnav_real zero = MAGNAV_C(0.0);
    const magnav_real ay = (y < zero) ? zero - y : y;
    const magnav_real ax = (x < zero) ? zero - x : x;
    const int32_t steep = ay > ax;
    const magnav_real small = steep ? ax : ay;
    const magnav_real large = steep ? ay : ax;
    magnav_real t = zero;
    magnav_real base = zero;
    magnav_real angle;

    if (large > zero) {
        if (small > large * TAN_22_5) {
            t = (small - large) / (small + large);
            base = MAGNAV_C(45.0);
        } else {
            t = small / large;
        }
    }
    angle = base + (t + t * t * t * polynomial(ARCTANGENT, COUNT(ARCTANGENT), t * t)) * PER_DEGREE;
    if (steep) {
        angle = MAGNAV_C(90.0) - angle;
    }
    if (x < zero) {
        angle = MAGNAV_C(180.0) - angle;
    }
    /* just below the negative x axis the angle rounds to 180: that is returned, as -180 is not in the range */
    return (y < zero && angle < MAGNAV_C(180.0)) ? zero - angle : angle;
}

magnav_real magnav_full_circle_deg(magnav_real x_deg)
{
    const magnav_real full = MAGNAV_C(360.0);
    magnav_real angle = x_deg;

    /* two steps each way reach the circle from anywhere in the accepted range */
    for (int32_t step = 0; step < 2; step++) {
        if (angle < MAGNAV_C(0.0)) {
            angle = angle + full;
        }
    }
    for (int32_t step = 0; step < 2; step++) {
        if (angle >= full) {
            angle = angle - full;
        }
    }
    /* a tiny negative angle rounds up to 360 when the circle is added */
    return (angle >= full) ? MAGNAV_C(0.0) : angle;
}
