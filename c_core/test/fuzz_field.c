/* Fuzzes the field. Bytes: degree, order, pieces, extrapolate, memory short of the need, validity (2 reals), breaks
 * (first, then steps), points (a count, then year, lat, lon, height each), a vector and its rate, coefficients to the
 * end of the input, zeros after it. */
#include "fuzz_bytes.h"

#define POINTS 4

static void check_values(const magnav_field_values *v)
{
    const magnav_real all[] = {v->north_nT, v->east_nT, v->down_nT, v->horizontal_nT, v->total_nT, v->declination_deg,
                               v->inclination_deg, v->north_nT_per_yr, v->east_nT_per_yr, v->down_nT_per_yr,
                               v->horizontal_nT_per_yr, v->total_nT_per_yr, v->declination_deg_per_yr,
                               v->inclination_deg_per_yr, v->grid_variation_deg};
    for (size_t i = 0; i < sizeof all / sizeof all[0]; i++) {
        MUST(isfinite(all[i]));
    }
    MUST(v->declination_deg > -180 && v->declination_deg <= 180);
    MUST(v->grid_variation_deg > -180 && v->grid_variation_deg <= 180);
    MUST(v->inclination_deg >= -90 && v->inclination_deg <= 90);
    MUST(v->horizontal_nT >= 0 && v->total_nT >= v->horizontal_nT);
    MUST(v->flags < (uint32_t)1 << MAGNAV_FLAG_COUNT);
}

static void check_status(magnav_status status)
{
    MUST(status <= MAGNAV_OK && status > MAGNAV_E_END);
}

static magnav_status one_point(const magnav_snapshot *snapshot, const magnav_real point[4], magnav_field_values *field)
{
    magnav_real ned[3];
    magnav_status status, vector_status;

    memset(field, 0xA5, sizeof *field);
    memset(ned, 0xA5, sizeof ned);
    status = magnav_field_at(snapshot, point[1], point[2], point[3], field);
    vector_status = magnav_vector_at(snapshot, point[1], point[2], point[3], ned);
    check_status(status);
    check_status(vector_status);
    MUST((vector_status == MAGNAV_OK) != is_spoilt(ned, sizeof ned));
    if (status == MAGNAV_OK) {
        check_values(field);
        MUST(vector_status == MAGNAV_OK);
        MUST(ned[0] == field->north_nT && ned[1] == field->east_nT && ned[2] == field->down_nT);
    } else {
        MUST(is_spoilt(field, sizeof *field));
    }
    return status;
}

static void elements(const magnav_real vector[6], const magnav_real point[4])
{
    magnav_field_values field;
    magnav_status status;
    memset(&field, 0xA5, sizeof field);
    status = magnav_elements(vector, &vector[3], point[1], point[2], &field);
    check_status(status);
    if (status == MAGNAV_OK) {
        check_values(&field);
    } else {
        MUST(is_spoilt(&field, sizeof field));
    }
}

static void points(const magnav_model *model, int32_t extrapolate, size_t reals, size_t count,
                   magnav_real point[POINTS][4])
{
    magnav_real *memory = spoilt_memory(reals * sizeof *memory);
    magnav_real column[4][POINTS];
    magnav_field_values *fields = spoilt_memory(count * sizeof *fields);
    int32_t *statuses = spoilt_memory(count * sizeof *statuses);
    magnav_status whole;

    for (size_t i = 0; i < count; i++) {
        for (int k = 0; k < 4; k++) {
            column[k][i] = point[i][k];
        }
    }
    whole = magnav_field_many(model, extrapolate, memory, reals, count, column[1], column[2], column[3], column[0],
                              fields, statuses);
    check_status(whole);
    for (size_t i = 0; i < count; i++) {
        magnav_snapshot snapshot;
        magnav_field_values field;
        magnav_status status;
        memset(&snapshot, 0xA5, sizeof snapshot);
        memset(memory, 0xA5, reals * sizeof *memory);
        status = magnav_snapshot_at(model, point[i][0], extrapolate, memory, reals, &snapshot);
        check_status(status);
        if (status == MAGNAV_OK) {
            status = one_point(&snapshot, point[i], &field);
        } else {
            MUST(is_spoilt(&snapshot, sizeof snapshot) && is_spoilt(memory, reals * sizeof *memory));
        }
        if (whole == MAGNAV_OK) {
            MUST(statuses[i] == (int32_t)status);
            MUST(status != MAGNAV_OK || (fields[i].total_nT == field.total_nT && fields[i].flags == field.flags));
            MUST(status == MAGNAV_OK || is_spoilt(&fields[i], sizeof fields[i]));
        } else {
            MUST(status == whole);
            MUST(is_spoilt(fields, count * sizeof *fields) && is_spoilt(statuses, count * sizeof *statuses));
        }
    }
    free(memory);
    free(fields);
    free(statuses);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    bytes from = {data, size};
    magnav_model model;
    magnav_real point[POINTS][4], vector[6], *breaks, *polynomials;
    const int32_t degree = (int32_t)(take_byte(&from) % 14);
    const int32_t order = (int32_t)(take_byte(&from) % (MAGNAV_MAX_TIME_ORDER + 2));
    const int32_t pieces = (int32_t)(take_byte(&from) % 4);
    const int32_t extrapolate = (int32_t)(take_byte(&from) % 2);
    const size_t need = MAGNAV_SNAPSHOT_REALS(degree);
    const size_t reals = (take_byte(&from) == 1 && need > 0) ? need - 1 : need;
    const size_t terms = (size_t)(pieces * order * degree * (degree + 2));
    size_t count;

    model.degree = degree;
    model.order = order;
    model.pieces = pieces;
    model.valid_from_yr = take_real(&from, 1900, 2030);
    model.valid_until_yr = take_real(&from, 1900, 2030);
    breaks = spoilt_memory((size_t)(pieces + 1) * sizeof *breaks);
    breaks[0] = take_real(&from, 1900, 2030);
    for (int32_t i = 0; i < pieces; i++) {
        breaks[i + 1] = breaks[i] + take_real(&from, 0, 20);
    }
    count = take_byte(&from) % (POINTS + 1);
    for (size_t i = 0; i < count; i++) {
        point[i][0] = (i > 0 && take_byte(&from) % 2) ? point[i - 1][0] : take_real(&from, 1900, 2030);
        point[i][1] = take_real(&from, -90, 90);
        point[i][2] = take_real(&from, -360, 360);
        point[i][3] = take_real(&from, -10000, 1e7);
    }
    for (int i = 0; i < 6; i++) {
        vector[i] = take_real(&from, -60000, 60000);
    }
    polynomials = spoilt_memory(terms * sizeof *polynomials);
    for (size_t i = 0; i < terms; i++) {
        polynomials[i] = (from.left > 0) ? take_real(&from, -30000, 30000) : (magnav_real)0;
    }
    model.breaks_yr = breaks;
    model.polynomials = polynomials;
    points(&model, extrapolate, reals, count, point);
    if (count > 0) {
        elements(vector, point[0]);
    }
    free(breaks);
    free(polynomials);
    return 0;
}
