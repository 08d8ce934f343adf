/* Elements of a vector and the flags of the field: each raised on one side of its limit and not on the other. */
#include "check.h"

static magnav_field_values elements(double north, double east, double down, magnav_real lat, magnav_real lon)
{
    const magnav_real ned[3] = {R(north), R(east), R(down)};
    magnav_field_values v;
    CHECK(magnav_elements(ned, NULL, lat, lon, &v) == MAGNAV_OK);
    return v;
}

static uint32_t flags(double north, double down, magnav_real lat)
{
    return elements(north, 0, down, lat, 0).flags;
}

static void values(void)
{
    /* WMM2025 test values, row 2: X, Y, Z and the elements published beside them (NOAA NCEI and BGS) */
    magnav_field_values v = elements(24299.852822, 210.517066, 50037.923998, R(43), R(93));
    NEAR(v.horizontal_nT, 24300.764692, BY_TYPE(1e-6, 0.01));
    NEAR(v.total_nT, 55626.621348, BY_TYPE(1e-6, 0.01));
    NEAR(v.declination_deg, 0.5, 0.005);
    NEAR(v.inclination_deg, 64.1, 0.005);
    CHECK(v.grid_variation_deg == 0 && v.flags == 0);
    CHECK(v.north_nT_per_yr == 0 && v.declination_deg_per_yr == 0 && v.total_nT_per_yr == 0);
    CHECK(elements(-20000, -1e-18, 0, 0, 0).declination_deg == 180); /* never -180 */
    CHECK(elements(0, 0, 50000, 0, 0).inclination_deg == 90);
    CHECK(elements(0, 0, -50000, 0, 0).inclination_deg == -90);
    v = elements(0, 0, 0, 0, 0);
    CHECK(v.total_nT == 0 && v.inclination_deg == 0 && v.declination_deg == 0);
}

static void rates(void)
{
    const magnav_real ned[3] = {R(3000), R(4000), R(12000)};
    const magnav_real rate[3] = {R(30), R(40), R(12)};
    const magnav_real none[3] = {0, 0, 0};
    magnav_field_values v;

    CHECK(magnav_elements(ned, rate, 0, 0, &v) == MAGNAV_OK);
    /* a change along the horizontal field: 3-4-5 and 5-12-13 triangles */
    NEAR(v.horizontal_nT_per_yr, 50, 50 * EPSILON);
    NEAR(v.declination_deg_per_yr, 0, EPSILON);
    NEAR(v.total_nT_per_yr, (5 * 50 + 12 * 12) / 13.0, 100 * EPSILON);
    NEAR(v.inclination_deg_per_yr, (5 * 12 - 12 * 50) / 13.0 / 13000 / RADIAN, 10 * EPSILON);
    CHECK(magnav_elements(none, rate, 0, 0, &v) == MAGNAV_OK); /* nothing to divide by: the change of an angle is 0 */
    CHECK(v.declination_deg_per_yr == 0 && v.inclination_deg_per_yr == 0 && v.total_nT_per_yr == 0);
    CHECK(v.north_nT_per_yr == rate[0] && v.down_nT_per_yr == rate[2]);
}

/* Grid variation: declination minus longitude in the north, plus in the south (WMM technical report, sec. 1). */
static void grid_variation(void)
{
    const magnav_real below = NEXT(R(55), R(0));
    NEAR(elements(15000, 15000, 0, R(55), R(30)).grid_variation_deg, 15, 100 * EPSILON);
    NEAR(elements(15000, 15000, 0, R(-55), R(30)).grid_variation_deg, 75, 100 * EPSILON);
    CHECK(elements(15000, 15000, 0, below, R(30)).grid_variation_deg == 0);
    CHECK(elements(15000, 15000, 0, -below, R(30)).grid_variation_deg == 0);
    NEAR(elements(15000, 15000, 0, R(70), R(-170)).grid_variation_deg, -145, 400 * EPSILON);
    NEAR(elements(15000, 15000, 0, R(-70), R(170)).grid_variation_deg, -145, 400 * EPSILON);
    NEAR(elements(15000, 15000, 0, R(70), R(360)).grid_variation_deg, 45, 400 * EPSILON);
    CHECK(elements(-15000, 0, 0, R(70), R(360)).grid_variation_deg == 180);
    CHECK(elements(-15000, 0, 0, R(70), R(-360)).grid_variation_deg == 180);
    CHECK(elements(15000, 0, 0, R(70), R(180)).grid_variation_deg == 180);
    CHECK(elements(15000, 0, 0, R(-70), R(180)).grid_variation_deg == 180);
    for (int i = 0; i < 2000; i++) {
        /* declinations close to -180 and longitudes close to 360, where a rounded sum would leave the range */
        const magnav_real lon = R((i % 2) ? spread(-360, 360) : 360 - spread(0, 1e-12));
        const magnav_field_values v = elements(-15000, (i % 3) ? -spread(0, 1e-9) : spread(-9000, 9000), 0, R(70), lon);
        CHECK(v.grid_variation_deg > -180 && v.grid_variation_deg <= 180);
        NEAR(remainder(v.declination_deg - lon - v.grid_variation_deg, 360), 0, 1000 * EPSILON);
    }
}

static void zones(void)
{
    const uint32_t caution = MAGNAV_FLAG_CAUTION_ZONE, blackout = MAGNAV_FLAG_BLACKOUT_ZONE;
    const uint32_t steep = MAGNAV_FLAG_STEEP_DIP;
    const double tan80 = tan(80 * RADIAN);

    CHECK(flags(6000, 0, 0) == 0);
    CHECK(flags(NEXT(R(6000), R(0)), 0, 0) == caution);
    CHECK(flags(2000, 0, 0) == caution);
    CHECK(flags(NEXT(R(2000), R(0)), 0, 0) == blackout);
    CHECK(flags(0, 0, 0) == (blackout | MAGNAV_FLAG_NO_DECLINATION));
    CHECK(flags(1, 0, 0) == blackout);
    CHECK(flags(10000, 10000 * tan80 * (1 - 10 * EPSILON), 0) == 0);
    CHECK(flags(10000, 10000 * tan80 * (1 + 10 * EPSILON), 0) == steep);
    CHECK(flags(10000, -10000 * tan80 * (1 - 10 * EPSILON), 0) == 0);
    CHECK(flags(10000, -10000 * tan80 * (1 + 10 * EPSILON), 0) == steep);
    for (int side = -1; side <= 1; side += 2) {
        CHECK(flags(20000, 0, R(side) * MAGNAV_POLE_LATITUDE_DEG) == MAGNAV_FLAG_NEAR_GEOGRAPHIC_POLE);
        CHECK(flags(20000, 0, R(side) * NEXT(MAGNAV_POLE_LATITUDE_DEG, R(0))) == 0);
    }
    /* a horizontal field whose square is no longer a number is none */
    CHECK((elements(0, BY_TYPE(1e-170, 1e-25), 40000, 0, 0).flags & MAGNAV_FLAG_NO_DECLINATION) != 0);
    CHECK(elements(0, BY_TYPE(1e-170, 1e-25), 40000, 0, 0).declination_deg == 0);
}

/* Flags that the place and the snapshot raise in magnav_field_at. */
static void heights(void)
{
    magnav_real memory[WMM_REALS];
    const magnav_snapshot snapshot = wmm2025_at(2025, memory);
    static const struct {
        magnav_real height_m;
        int out;
    } at[] = {{MAGNAV_MODEL_LOWEST_M, 0}, {MAGNAV_MODEL_HIGHEST_M, 0}, {R(-1000.125), 1}, {R(850000.125), 1},
              {MAGNAV_LOWEST_M, 1},       {MAGNAV_HIGHEST_M, 1}};
    magnav_field_values v;

    for (int i = 0; i < LENGTH(at); i++) {
        CHECK(magnav_field_at(&snapshot, R(40), R(10), at[i].height_m, &v) == MAGNAV_OK);
        CHECK(((v.flags & MAGNAV_FLAG_HEIGHT_OUT_OF_RANGE) != 0) == at[i].out);
    }
}

void test_elements(void)
{
    values();
    rates();
    grid_variation();
    zones();
    heights();
}
