/* The patch: every term in its place, the edges of the area, what is refused. */
#include "check.h"

#include "magnav_patch.h"

#define LARGEST_TERMS 200

static magnav_real coefficients[3 * LARGEST_TERMS];

/* middle and half width of the area: 50 and 2, 179 and 3, 1000 and 1000, 2027 and 1 */
static magnav_patch patch_of(int degree)
{
    const magnav_patch patch = {coefficients, {50, 179, 1000, 2027}, {R(0.5), R(1.0 / 3), R(0.001), 1}, {1, 1, 1}, 1,
                                degree};
    return patch;
}

static void every_term(void)
{
    for (int degree = 1; degree <= MAGNAV_PATCH_MAX_DEGREE; degree++) {
        const magnav_patch patch = patch_of(degree);
        double expected[3] = {0, 0, 0};
        magnav_real ned[3];
        int term = 0;
        /* scaled position 0.5, -0.25, 0.75, -0.5 */
        for (int l = 0; l <= 1; l++) {
            for (int k = 0; k <= 2; k++) {
                for (int i = 0; i <= degree; i++) {
                    for (int j = 0; i + j + 2 * k + 2 * l <= degree; j++) {
                        const double product = pow(-0.5, l) * pow(0.75, k) * pow(0.5, i) * pow(-0.25, j);
                        for (int c = 0; c < 3; c++) {
                            coefficients[3 * term + c] = R(spread(-100, 100));
                            expected[c] += (double)coefficients[3 * term + c] * product;
                        }
                        term++;
                    }
                }
            }
        }
        CHECK(term <= LARGEST_TERMS);
        CHECK(magnav_patch_at(&patch, 51, R(178.25), 1750, R(2026.5), ned) == MAGNAV_OK);
        for (int c = 0; c < 3; c++) {
            NEAR(ned[c], expected[c], 2000 * EPSILON);
        }
    }
}

static magnav_status at(double lat, double lon, double height, double year)
{
    const magnav_patch patch = patch_of(3);
    magnav_real ned[3];
    magnav_status status;
    SPOIL(ned);
    status = magnav_patch_at(&patch, R(lat), R(lon), R(height), R(year), ned);
    CHECK((status == MAGNAV_OK) != is_spoilt(ned, sizeof ned));
    return status;
}

void test_patch(void)
{
    magnav_patch patch = patch_of(3);
    magnav_real ned[3];

    every_term();
    CHECK(at(48, 179, 0, 2026) == MAGNAV_OK && at(52, 179, 2000, 2028) == MAGNAV_OK);
    CHECK(at(50, -179, 1000, 2027) == MAGNAV_OK && at(50, 181, 1000, 2027) == MAGNAV_OK);
    CHECK(at(NEXT(R(52), R(60)), 179, 1000, 2027) == MAGNAV_E_AREA);
    CHECK(at(NEXT(R(48), R(0)), 179, 1000, 2027) == MAGNAV_E_AREA);
    CHECK(at(50, 175, 1000, 2027) == MAGNAV_E_AREA && at(50, -177, 1000, 2027) == MAGNAV_E_AREA);
    CHECK(at(50, 179, -10, 2027) == MAGNAV_E_AREA && at(50, 179, 2010, 2027) == MAGNAV_E_AREA);
    CHECK(at(50, 179, 1000, 2025.9) == MAGNAV_E_AREA && at(50, 179, 1000, 2028.1) == MAGNAV_E_AREA);
    CHECK(at(NAN, 179, 1000, 2027) == MAGNAV_E_NOT_FINITE && at(50, INFINITY, 1000, 2027) == MAGNAV_E_NOT_FINITE);
    CHECK(at(50, 179, NAN, 2027) == MAGNAV_E_NOT_FINITE && at(50, 179, 1000, -INFINITY) == MAGNAV_E_NOT_FINITE);
    CHECK(magnav_patch_at(NULL, 50, 179, 1000, 2027, ned) == MAGNAV_E_NULL);
    CHECK(magnav_patch_at(&patch, 50, 179, 1000, 2027, NULL) == MAGNAV_E_NULL);
    patch.degree = 0;
    CHECK(magnav_patch_at(&patch, 50, 179, 1000, 2027, ned) == MAGNAV_E_MODEL);
    patch.degree = MAGNAV_PATCH_MAX_DEGREE + 1;
    CHECK(magnav_patch_at(&patch, 50, 179, 1000, 2027, ned) == MAGNAV_E_MODEL);
    patch = patch_of(3);
    patch.coefficients = NULL;
    CHECK(magnav_patch_at(&patch, 50, 179, 1000, 2027, ned) == MAGNAV_E_NULL);
}
