/* Sine, cosine, arctangent and the circle: exact values, identities, and the last place against the system's library.
 * (The double build is held against 50-digit values elsewhere; here both builds are, against long double.) */
#include "check.h"

#define PI 3.14159265358979323846264338327950288L

static double ulps(magnav_real got, long double wanted)
{
    int exponent;
    frexpl(wanted, &exponent);
    return (wanted == 0) ? ((got == 0) ? 0 : 1e9)
                         : (double)(fabsl((long double)got - wanted) / ldexpl(EPSILON, exponent - 1));
}

/* The reference: reduced exactly before it is turned to radians, so that small results keep their digits. */
static void reference(magnav_real x_deg, long double *sine, long double *cosine)
{
    const long quarter = lroundl((long double)x_deg / 90);
    const long double y = ((long double)x_deg - 90.0L * quarter) * (PI / 180);
    const int turn = (int)((quarter % 4 + 4) % 4);
    const long double s = sinl(y), c = cosl(y);
    *sine = (turn == 0) ? s : (turn == 1) ? c : (turn == 2) ? -s : -c;
    *cosine = (turn == 0) ? c : (turn == 1) ? -s : (turn == 2) ? -c : s;
}

static void exact_values(void)
{
    static const struct {
        double x_deg, sine, cosine;
    } quarter[] = {{0, 0, 1},      {90, 1, 0},       {180, 0, -1},   {270, -1, 0},       {360, 0, 1},
                   {-90, -1, 0},   {-180, 0, -1},    {-270, 1, 0},   {-360, 0, 1},       {720, 0, 1},
                   {999990, -1, 0}, {-999990, 1, 0}, {999900, 0, -1}, {-999900, 0, -1}};
    magnav_real s, c, s2, c2;

    for (int i = 0; i < LENGTH(quarter); i++) {
        magnav_sincos_deg(R(quarter[i].x_deg), &s, &c);
        CHECK(s == R(quarter[i].sine) && c == R(quarter[i].cosine));
        /* an exact zero has no sign that would reach a heading */
        CHECK(s != 0 || !signbit(s));
        CHECK(c != 0 || !signbit(c));
    }
    magnav_sincos_deg(R(30), &s, &c);
    NEAR(s, 0.5, EPSILON);
    NEAR(c, sqrt(0.75), EPSILON);
    magnav_sincos_deg(R(45), &s, &c);
    NEAR(s, sqrt(0.5), EPSILON);
    NEAR(c, sqrt(0.5), EPSILON);
    magnav_sincos_deg(R(-60), &s, &c);
    NEAR(c, 0.5, EPSILON);
    magnav_sincos_deg(R(0), &s, &c);
    magnav_sincos_deg(R(-0.0), &s2, &c2);
    CHECK(s == s2 && c == c2);

    CHECK(magnav_atan2_deg(0, 0) == 0);
    CHECK(magnav_atan2_deg(0, 1) == 0);
    CHECK(magnav_atan2_deg(1, 0) == 90);
    CHECK(magnav_atan2_deg(-1, 0) == -90);
    CHECK(magnav_atan2_deg(0, -1) == 180);
    CHECK(magnav_atan2_deg(R(-0.0), -1) == 180);
    CHECK(magnav_atan2_deg(1, 1) == 45);
    CHECK(magnav_atan2_deg(1, -1) == 135);
    CHECK(magnav_atan2_deg(-1, 1) == -45);
    CHECK(magnav_atan2_deg(-1, -1) == -135);
    /* the angle rounds to -180, which is not in (-180, 180] */
    CHECK(magnav_atan2_deg(R(-1e-20), -1) == 180);
    CHECK(magnav_atan2_deg(R(-1e-20), 1) < 0);
    NEAR(magnav_atan2_deg(R(1), R(sqrt(3.0))), 30, 60 * EPSILON);
}

static void sines_swept(void)
{
    double worst = 0, worst_circle = 0;
    int odd = 1, rising = 1;
    magnav_real before = -1;

    for (int i = -200000; i <= 200000; i++) {
        const magnav_real x = R(i * 0.0037);
        magnav_real s, c, s2, c2;
        long double sine, cosine;
        magnav_sincos_deg(x, &s, &c);
        magnav_sincos_deg(-x, &s2, &c2);
        odd = odd && s2 == -s && c2 == c;
        reference(x, &sine, &cosine);
        worst = fmax(worst, fmax(ulps(s, sine), ulps(c, cosine)));
        worst_circle = fmax(worst_circle, fabs((double)s * s + (double)c * c - 1));
        if (fabs((double)x) <= 90) {
            rising = rising && s >= before;
            before = s;
        }
    }
    CHECK(odd);
    CHECK(rising);
    CHECK(worst <= 2);
    CHECK(worst_circle <= 3 * EPSILON);
    printf("sine and cosine: largest error %.2f units in the last place\n", worst);

    for (int i = 0; i < 20000; i++) {
        const magnav_real x = R(spread(-1e6, 1e6));
        magnav_real s, c;
        long double sine, cosine;
        magnav_sincos_deg(x, &s, &c);
        reference(x, &sine, &cosine);
        worst = fmax(worst, fmax(ulps(s, sine), ulps(c, cosine)));
    }
    CHECK(worst <= 2);
}

static void arctangent_swept(void)
{
    double worst = 0, worst_round = 0;
    int rising = 1, sides = 1;
    magnav_real before = -181;

    for (int i = -179999; i <= 180000; i++) {
        const double wanted = i * 0.001;
        magnav_real s, c, a;
        magnav_sincos_deg(R(wanted), &s, &c);
        a = magnav_atan2_deg(s, c);
        rising = rising && a >= before;
        before = a;
        worst_round = fmax(worst_round, fabs((double)a - (double)R(wanted)));
        worst = fmax(worst, ulps(a, atan2l(s, c) * (180 / PI)));
        sides = sides && magnav_atan2_deg(4 * s, 4 * c) == a && (a == 180 || magnav_atan2_deg(-s, c) == -a);
    }
    CHECK(rising);
    CHECK(sides);
    CHECK(worst <= 3);
    CHECK(worst_round <= 360 * EPSILON);
    printf("arctangent: largest error %.2f units in the last place\n", worst);
    for (int i = 0; i < 20000; i++) {
        const magnav_real y = R(pow(10, spread(-15, 15)));
        const magnav_real x = R(pow(10, spread(-15, 15)));
        worst = fmax(worst, ulps(magnav_atan2_deg(y, x), atan2l(y, x) * (180 / PI)));
    }
    CHECK(worst <= 3);
}

static void circle(void)
{
    static const double at[][2] = {{0, 0},     {359, 359}, {360, 0},  {361, 1},   {719, 359}, {720, 0},
                                   {-1, 359},  {-359, 1},  {-360, 0}, {-361, 359}, {-720, 0}};
    for (int i = 0; i < LENGTH(at); i++) {
        CHECK(magnav_full_circle_deg(R(at[i][0])) == R(at[i][1]));
    }
    CHECK(magnav_full_circle_deg(R(-1e-30)) == 0); /* rounds to 360, which is 0 */
    CHECK(magnav_full_circle_deg(NEXT(R(360), R(0))) < 360);
    for (int i = 0; i < 2000; i++) {
        const double x = spread(-720, 720);
        const double a = magnav_full_circle_deg(R(x));
        CHECK(a >= 0 && a < 360);
        NEAR(remainder(a - x, 360), 0, 720 * EPSILON);
    }
}

void test_angles(void)
{
    exact_values();
    sines_swept();
    arctangent_swept();
    circle();
}
