/* Every way in which the field can fail: the status, and that the outputs are as they were. */
#include "check.h"

static magnav_real memory[WMM_REALS];

static magnav_status snapshot_status(const magnav_model *model, magnav_real year, int32_t extrapolate, size_t reals)
{
    magnav_snapshot snapshot;
    magnav_status status;
    SPOIL(snapshot);
    SPOIL(memory);
    status = magnav_snapshot_at(model, year, extrapolate, memory, reals, &snapshot);
    CHECK((status == MAGNAV_OK) != is_spoilt(&snapshot, sizeof snapshot));
    CHECK((status == MAGNAV_OK) != is_spoilt(memory, sizeof memory));
    return status;
}

static magnav_status model_status(const magnav_model *model)
{
    return snapshot_status(model, R(2026), 1, WMM_REALS);
}

static void snapshots(void)
{
    static const double not_finite[] = {NAN, INFINITY, -INFINITY};
    static const magnav_real falling[2] = {R(2030), R(2025)}, equal[2] = {R(2025), R(2025)};
    static const magnav_real not_a_date[2] = {R(2025), R(NAN)}, not_a_start[2] = {R(NAN), R(2025)};
    static const magnav_real second_equal[3] = {R(2025), R(2030), R(2030)};
    const magnav_model good = wmm2025_model();
    magnav_model model = good;
    magnav_snapshot snapshot;

    CHECK(model_status(&good) == MAGNAV_OK);
    CHECK(snapshot_status(NULL, R(2026), 0, WMM_REALS) == MAGNAV_E_NULL);
    CHECK(magnav_snapshot_at(&good, R(2026), 0, NULL, WMM_REALS, &snapshot) == MAGNAV_E_NULL);
    CHECK(magnav_snapshot_at(&good, R(2026), 0, memory, WMM_REALS, NULL) == MAGNAV_E_NULL);
    model.breaks_yr = NULL;
    CHECK(model_status(&model) == MAGNAV_E_NULL);
    model = good;
    model.polynomials = NULL;
    CHECK(model_status(&model) == MAGNAV_E_NULL);

#define WITH(member, value)                          \
    model = good;                                    \
    model.member = (value);                          \
    CHECK(model_status(&model) == MAGNAV_E_MODEL)
    WITH(degree, 0);
    WITH(degree, -1);
    WITH(degree, MAGNAV_MAX_DEGREE + 1);
    WITH(order, 0);
    WITH(order, MAGNAV_MAX_TIME_ORDER + 1);
    WITH(pieces, 0);
    WITH(pieces, 10001);
    WITH(breaks_yr, falling);
    WITH(breaks_yr, equal);
    WITH(breaks_yr, not_a_date);
    WITH(breaks_yr, not_a_start);
    model = good;
    model.pieces = 2;
    model.breaks_yr = second_equal;
    CHECK(model_status(&model) == MAGNAV_E_MODEL);

    CHECK(snapshot_status(&good, R(2026), 0, WMM_REALS - 1) == MAGNAV_E_MEMORY);
    CHECK(snapshot_status(&good, R(2026), 0, 0) == MAGNAV_E_MEMORY);
    for (int i = 0; i < LENGTH(not_finite); i++) {
        CHECK(snapshot_status(&good, R(not_finite[i]), 1, WMM_REALS) == MAGNAV_E_NOT_FINITE);
    }
    CHECK(snapshot_status(&good, R(2025), 0, WMM_REALS) == MAGNAV_OK);
    CHECK(snapshot_status(&good, R(2030), 0, WMM_REALS) == MAGNAV_OK);
    CHECK(snapshot_status(&good, NEXT(R(2025), R(0)), 0, WMM_REALS) == MAGNAV_E_DATE);
    CHECK(snapshot_status(&good, NEXT(R(2030), R(3000)), 0, WMM_REALS) == MAGNAV_E_DATE);
    CHECK(snapshot_status(&good, R(2031), 1, WMM_REALS) == MAGNAV_OK);
    model = good;
    model.valid_from_yr = R(NAN); /* a validity that holds no date */
    CHECK(snapshot_status(&model, R(2026), 0, WMM_REALS) == MAGNAV_E_DATE);
}

static magnav_status point_status(const magnav_snapshot *snapshot, double lat, double lon, double height)
{
    magnav_field_values field;
    magnav_real ned[3];
    magnav_status status;
    SPOIL(field);
    SPOIL(ned);
    status = magnav_field_at(snapshot, R(lat), R(lon), R(height), &field);
    CHECK(status == magnav_vector_at(snapshot, R(lat), R(lon), R(height), ned));
    CHECK((status == MAGNAV_OK) != is_spoilt(&field, sizeof field));
    CHECK((status == MAGNAV_OK) != is_spoilt(ned, sizeof ned));
    return status;
}

static void points(void)
{
    static const double not_finite[] = {NAN, INFINITY, -INFINITY};
    magnav_real reals[WMM_REALS];
    const magnav_snapshot good = wmm2025_at(2026, reals);
    magnav_snapshot snapshot = good;
    magnav_field_values field;
    magnav_real ned[3];

    CHECK(point_status(NULL, 0, 0, 0) == MAGNAV_E_NULL);
    snapshot.terms = NULL;
    CHECK(point_status(&snapshot, 0, 0, 0) == MAGNAV_E_NULL);
    CHECK(magnav_field_at(&good, 0, 0, 0, NULL) == MAGNAV_E_NULL);
    CHECK(magnav_vector_at(&good, 0, 0, 0, NULL) == MAGNAV_E_NULL);
    for (int i = 0; i < LENGTH(not_finite); i++) {
        CHECK(point_status(&good, not_finite[i], 0, 0) == MAGNAV_E_NOT_FINITE);
        CHECK(point_status(&good, 0, not_finite[i], 0) == MAGNAV_E_NOT_FINITE);
        CHECK(point_status(&good, 0, 0, not_finite[i]) == MAGNAV_E_NOT_FINITE);
    }
    for (int side = -1; side <= 1; side += 2) {
        CHECK(point_status(&good, side * 90, 0, 0) == MAGNAV_OK);
        CHECK(point_status(&good, side * 90.0001, 0, 0) == MAGNAV_E_LATITUDE);
        CHECK(point_status(&good, 0, side * 360, 0) == MAGNAV_OK);
        CHECK(point_status(&good, 0, side * 360.0001, 0) == MAGNAV_E_LONGITUDE);
    }
    CHECK(point_status(&good, 0, 0, MAGNAV_LOWEST_M) == MAGNAV_OK);
    CHECK(point_status(&good, 0, 0, -10000.01) == MAGNAV_E_HEIGHT);
    CHECK(point_status(&good, 0, 0, MAGNAV_HIGHEST_M) == MAGNAV_OK);
    CHECK(point_status(&good, 0, 0, 10000001) == MAGNAV_E_HEIGHT);

    /* a coefficient that is no number, or too large, reaches nobody */
    reals[1] = R(NAN);
    CHECK(point_status(&good, 40, 10, 0) == MAGNAV_E_NOT_FINITE);
    reals[1] = R(INFINITY);
    CHECK(point_status(&good, 40, 10, 0) == MAGNAV_E_NOT_FINITE);
    reals[1] = R(-30000);
    reals[3] = R(NAN); /* a rate: the vector alone does not use it */
    SPOIL(field);
    CHECK(magnav_field_at(&good, R(40), R(10), 0, &field) == MAGNAV_E_NOT_FINITE && is_spoilt(&field, sizeof field));
    CHECK(magnav_vector_at(&good, R(40), R(10), 0, ned) == MAGNAV_OK);
}

static magnav_status vector_status(const magnav_real ned[3], const magnav_real *rate, magnav_real lat, magnav_real lon)
{
    magnav_field_values field;
    magnav_status status;
    SPOIL(field);
    status = magnav_elements(ned, rate, lat, lon, &field);
    CHECK((status == MAGNAV_OK) != is_spoilt(&field, sizeof field));
    return status;
}

static void vectors(void)
{
    static const double not_finite[] = {NAN, INFINITY, -INFINITY};
    const magnav_real ned[3] = {R(20000), R(1000), R(45000)}, rate[3] = {R(10), R(10), R(10)};
    magnav_real bad[3] = {R(20000), R(1000), R(45000)};

    CHECK(vector_status(ned, rate, 0, 0) == MAGNAV_OK);
    CHECK(vector_status(NULL, rate, 0, 0) == MAGNAV_E_NULL);
    CHECK(magnav_elements(ned, rate, 0, 0, NULL) == MAGNAV_E_NULL);
    for (int i = 0; i < LENGTH(not_finite); i++) {
        const magnav_real wrong = R(not_finite[i]);
        CHECK(vector_status(ned, rate, wrong, 0) == MAGNAV_E_NOT_FINITE);
        CHECK(vector_status(ned, rate, 0, wrong) == MAGNAV_E_NOT_FINITE);
        for (int k = 0; k < 3; k++) {
            const magnav_real kept = bad[k];
            bad[k] = wrong;
            CHECK(vector_status(bad, rate, 0, 0) == MAGNAV_E_NOT_FINITE);
            CHECK(vector_status(ned, bad, 0, 0) == MAGNAV_E_NOT_FINITE);
            bad[k] = kept;
        }
    }
    CHECK(vector_status(ned, rate, NEXT(R(90), R(91)), 0) == MAGNAV_E_LATITUDE);
    CHECK(vector_status(ned, rate, R(-91), 0) == MAGNAV_E_LATITUDE);
    CHECK(vector_status(ned, rate, 0, NEXT(R(360), R(361))) == MAGNAV_E_LONGITUDE);
    CHECK(vector_status(ned, rate, 0, R(-361)) == MAGNAV_E_LONGITUDE);
    bad[0] = LARGE;
    CHECK(vector_status(bad, NULL, 0, 0) == MAGNAV_E_NOT_FINITE);
    bad[0] = R(BY_TYPE(1e305, 1e37));
    bad[1] = bad[0];
    bad[2] = bad[0];
    CHECK(vector_status(ned, bad, 0, 0) == MAGNAV_E_NOT_FINITE);
}

void test_field_statuses(void)
{
    snapshots();
    points();
    vectors();
}
