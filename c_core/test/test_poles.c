/* The geographic poles, the date line, signed zeros and one unit in the last place beside each. */
#include "check.h"

/* Components along axes that do not turn with the longitude: at a pole the north axis of meridian `lon` is turned. */
static void fixed_frame(const magnav_real ned[3], double lat, double lon, double out[3])
{
    const double turn = (lat > 0) ? -lon : lon;
    const double s = sin(turn * RADIAN), c = cos(turn * RADIAN);
    out[0] = c * ned[0] - s * ned[1];
    out[1] = s * ned[0] + c * ned[1];
    out[2] = ned[2];
}

static double distance(const double a[3], const double b[3])
{
    return sqrt((a[0] - b[0]) * (a[0] - b[0]) + (a[1] - b[1]) * (a[1] - b[1]) + (a[2] - b[2]) * (a[2] - b[2]));
}

static void pole(const magnav_snapshot *snapshot, double lat)
{
    /* in double 1 mm beside the pole, in float the next latitude there is, 0.85 m */
    const magnav_real beside = BY_TYPE(R(lat * (1 - 1e-3 / 111694.0 / 90)), NEXT(R(lat), R(0)));
    const double metres = 111694.0 * (90 - fabs((double)beside));
    magnav_real ned[3];
    double at_pole[3], here[3], there[3], mean[3];

    CHECK(fabs((double)beside) < 90);
    CHECK(magnav_vector_at(snapshot, R(lat), R(0), R(0), ned) == MAGNAV_OK);
    fixed_frame(ned, lat, 0, at_pole);
    CHECK(hypot(at_pole[0], at_pole[1]) > 1000); /* there is something to turn */
    for (int lon = -180; lon <= 180; lon += 15) {
        CHECK(magnav_vector_at(snapshot, R(lat), R(lon), R(0), ned) == MAGNAV_OK);
        fixed_frame(ned, lat, lon, here);
        NEAR(distance(here, at_pole), 0, BY_TYPE(1e-10, 0.05));
        CHECK(magnav_vector_at(snapshot, beside, R(lon), R(0), ned) == MAGNAV_OK);
        fixed_frame(ned, lat, lon, here);
        /* the field's gradient is at most some 0.02 nT/m there */
        NEAR(distance(here, at_pole), 0, BY_TYPE(1e-10, 0.05) + 0.02 * metres);
        CHECK(magnav_vector_at(snapshot, beside, R(lon + ((lon > 0) ? -180 : 180)), R(0), ned) == MAGNAV_OK);
        fixed_frame(ned, lat, lon + 180, there);
        /* across the pole it is a straight line: the mean of both sides is the pole's */
        for (int i = 0; i < 3; i++) {
            mean[i] = (here[i] + there[i]) / 2;
        }
        NEAR(distance(mean, at_pole), 0, BY_TYPE(3e-10, 0.05));
    }
    CHECK(magnav_vector_at(snapshot, NEXT(R(lat), R(2 * lat)), R(0), R(0), ned) == MAGNAV_E_LATITUDE);
}

static int same(const magnav_snapshot *snapshot, double lat, double lon, double lat2, double lon2)
{
    magnav_field_values a, b;
    CHECK(magnav_field_at(snapshot, R(lat), R(lon), R(100), &a) == MAGNAV_OK);
    CHECK(magnav_field_at(snapshot, R(lat2), R(lon2), R(100), &b) == MAGNAV_OK);
    return a.north_nT == b.north_nT && a.east_nT == b.east_nT && a.down_nT == b.down_nT &&
           a.declination_deg == b.declination_deg && a.grid_variation_deg == b.grid_variation_deg &&
           a.declination_deg_per_yr == b.declination_deg_per_yr && a.flags == b.flags;
}

/* The grid of the polar stereographic projection does not turn at the pole: nor does the angle from it. */
static void grid_at_pole(const magnav_snapshot *snapshot, double lat)
{
    magnav_field_values first, v;
    CHECK(magnav_field_at(snapshot, R(lat), R(0), R(0), &first) == MAGNAV_OK);
    for (int lon = -360; lon <= 360; lon += 15) {
        CHECK(magnav_field_at(snapshot, R(lat), R(lon), R(0), &v) == MAGNAV_OK);
        NEAR(remainder(v.grid_variation_deg - first.grid_variation_deg, 360), 0, BY_TYPE(1e-11, 1e-3));
        CHECK(v.grid_variation_deg > -180 && v.grid_variation_deg <= 180);
        NEAR(v.horizontal_nT, first.horizontal_nT, BY_TYPE(1e-10, 0.05));
        CHECK((v.flags & MAGNAV_FLAG_NEAR_GEOGRAPHIC_POLE) != 0);
    }
}

void test_poles(void)
{
    static const double lats[] = {-90, -89.5, -45, -0.0, 0.0, 12.5, 60, 90};
    magnav_real memory[WMM_REALS];
    magnav_real ned[3], beside[3];
    const magnav_snapshot snapshot = wmm2025_at(2027.5, memory);

    pole(&snapshot, 90);
    pole(&snapshot, -90);
    grid_at_pole(&snapshot, 90);
    grid_at_pole(&snapshot, -90);
    for (int i = 0; i < LENGTH(lats); i++) {
        CHECK(same(&snapshot, lats[i], 180, lats[i], -180));
        CHECK(same(&snapshot, lats[i], 0, lats[i], 360));
        CHECK(same(&snapshot, lats[i], 0, lats[i], -360));
        CHECK(same(&snapshot, lats[i], 0.0, lats[i], -0.0));
        CHECK(same(&snapshot, lats[i], 270, lats[i], -90));
    }
    CHECK(same(&snapshot, 0.0, 10, -0.0, 10));
    /* one unit in the last place beside the date line, the circle's end and the equator */
    for (int i = 0; i < 4; i++) {
        const magnav_real lon = R((i < 2) ? 180 : 360) * R((i % 2) ? -1 : 1);
        CHECK(magnav_vector_at(&snapshot, R(40), lon, R(0), ned) == MAGNAV_OK);
        CHECK(magnav_vector_at(&snapshot, R(40), NEXT(lon, R(0)), R(0), beside) == MAGNAV_OK);
        for (int k = 0; k < 3; k++) {
            NEAR(beside[k], ned[k], BY_TYPE(1e-9, 0.1));
        }
    }
    CHECK(magnav_vector_at(&snapshot, R(0), R(40), R(0), ned) == MAGNAV_OK);
    CHECK(magnav_vector_at(&snapshot, NEXT(R(0), R(-1)), R(40), R(0), beside) == MAGNAV_OK);
    CHECK(ned[0] == beside[0] && ned[1] == beside[1] && ned[2] == beside[2]);
}
