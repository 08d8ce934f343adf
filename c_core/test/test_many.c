/* Many points in one call: the same bits as one by one, bad rows reported and the others right. */
#include "check.h"

#include <stddef.h>

#define COUNT 300

static magnav_real lat[COUNT], lon[COUNT], height[COUNT], year[COUNT];
static magnav_field_values fields[COUNT];
static int32_t status[COUNT];

static int same_bits(const magnav_field_values *a, const magnav_field_values *b)
{
    return memcmp(a, b, offsetof(magnav_field_values, flags) + sizeof a->flags) == 0;
}

static void points(void)
{
    const magnav_real infinite = R(INFINITY);
    for (int i = 0; i < COUNT; i++) {
        lat[i] = R(spread(-90, 90));
        lon[i] = R(spread(-360, 360));
        height[i] = R(spread(-1000, 900000));
        year[i] = R(2025 + (i / 7) % 5 + 0.5 * (i % 2));
    }
    lat[3] = R(91);
    lon[14] = R(-361);
    height[15] = R(2e7);
    lat[16] = R(NAN);
    /* a date that fails between two of the same year, at the end of a run, twice in a row */
    year[20] = R(NAN);
    year[21] = infinite;
    year[22] = R(2024);
    year[40] = R(2031);
    year[COUNT - 1] = -infinite;
    lat[COUNT - 2] = R(90);
}

static void compare(int32_t extrapolate)
{
    const magnav_model model = wmm2025_model();
    magnav_real memory[WMM_REALS], memory2[WMM_REALS];
    magnav_snapshot snapshot;
    int good = 0, bad = 0;

    SPOIL(fields);
    SPOIL(status);
    CHECK(magnav_field_many(&model, extrapolate, memory, WMM_REALS, COUNT, lat, lon, height, year, fields, status) ==
          MAGNAV_OK);
    for (int i = 0; i < COUNT; i++) {
        magnav_field_values one;
        magnav_status wanted = magnav_snapshot_at(&model, year[i], extrapolate, memory2, WMM_REALS, &snapshot);
        if (wanted == MAGNAV_OK) {
            wanted = magnav_field_at(&snapshot, lat[i], lon[i], height[i], &one);
        }
        CHECK(status[i] == (int32_t)wanted);
        if (wanted == MAGNAV_OK) {
            good++;
            CHECK(same_bits(&fields[i], &one));
        } else {
            bad++;
            CHECK(is_spoilt(&fields[i], sizeof fields[i]));
        }
    }
    CHECK(bad == (extrapolate ? 7 : 9) && good == COUNT - bad);
    CHECK(status[3] == MAGNAV_E_LATITUDE && status[14] == MAGNAV_E_LONGITUDE && status[15] == MAGNAV_E_HEIGHT);
    CHECK(status[20] == MAGNAV_E_NOT_FINITE && status[COUNT - 1] == MAGNAV_E_NOT_FINITE);
    CHECK(status[22] == (extrapolate ? MAGNAV_OK : MAGNAV_E_DATE));
}

static void whole_call_fails(void)
{
    const magnav_model good = wmm2025_model();
    magnav_model model = good;
    magnav_real memory[WMM_REALS];

#define MANY(m, memory, reals, lat, lon, height, year, fields, status) \
    magnav_field_many(m, 0, memory, reals, COUNT, lat, lon, height, year, fields, status)
    SPOIL(fields);
    SPOIL(status);
    CHECK(MANY(NULL, memory, WMM_REALS, lat, lon, height, year, fields, status) == MAGNAV_E_NULL);
    CHECK(MANY(&good, NULL, WMM_REALS, lat, lon, height, year, fields, status) == MAGNAV_E_NULL);
    CHECK(MANY(&good, memory, WMM_REALS, NULL, lon, height, year, fields, status) == MAGNAV_E_NULL);
    CHECK(MANY(&good, memory, WMM_REALS, lat, NULL, height, year, fields, status) == MAGNAV_E_NULL);
    CHECK(MANY(&good, memory, WMM_REALS, lat, lon, NULL, year, fields, status) == MAGNAV_E_NULL);
    CHECK(MANY(&good, memory, WMM_REALS, lat, lon, height, NULL, fields, status) == MAGNAV_E_NULL);
    CHECK(MANY(&good, memory, WMM_REALS, lat, lon, height, year, NULL, status) == MAGNAV_E_NULL);
    CHECK(MANY(&good, memory, WMM_REALS, lat, lon, height, year, fields, NULL) == MAGNAV_E_NULL);
    CHECK(MANY(&good, memory, WMM_REALS - 1, lat, lon, height, year, fields, status) == MAGNAV_E_MEMORY);
    model.degree = 0;
    CHECK(MANY(&model, memory, WMM_REALS, lat, lon, height, year, fields, status) == MAGNAV_E_MODEL);
    model = good;
    model.polynomials = NULL;
    CHECK(MANY(&model, memory, WMM_REALS, lat, lon, height, year, fields, status) == MAGNAV_E_NULL);
    CHECK(is_spoilt(fields, sizeof fields) && is_spoilt(status, sizeof status));
    CHECK(magnav_field_many(&good, 0, memory, WMM_REALS, 0, lat, lon, height, year, fields, status) == MAGNAV_OK);
    CHECK(is_spoilt(fields, sizeof fields) && is_spoilt(status, sizeof status));
}

void test_many(void)
{
    points();
    compare(0);
    compare(1);
    whole_call_fails();
}
