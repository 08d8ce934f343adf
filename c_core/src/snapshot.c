/* A model advanced to a date, its coefficients turned to the form that the evaluation uses.
 *
 * The Schmidt semi-normalised function is sin^m(theta) kappa(n,m) q(n,m), with q a monic polynomial in cos(theta) that
 * obeys q(n+1) = cos(theta) q(n) - beta(n,m) q(n-1),  beta = (n^2 - m^2) / (4 n^2 - 1).
 * kappa goes into the coefficients here, so that the evaluation has no norms, no divisions and no pole.
 * Layout: orders m outer, degrees n inner, five values each: beta, g, h, g per year, h per year. */
#include "real.h"
#include "timeline.h"

static magnav_status check_model(const magnav_model *model)
{
    if (model->breaks_yr == NULL || model->polynomials == NULL) {
        return MAGNAV_E_NULL;
    }
    if (model->degree < 1 || model->degree > MAGNAV_MAX_DEGREE || model->order < 1 ||
        model->order > MAGNAV_MAX_TIME_ORDER || model->pieces < 1 || model->pieces > 10000) {
        return MAGNAV_E_MODEL;
    }
    for (int32_t i = 0; i < model->pieces; i++) {
        /* written so that a NaN fails */
        if (!(model->breaks_yr[i + 1] > model->breaks_yr[i])) {
            return MAGNAV_E_MODEL;
        }
    }
    return MAGNAV_OK;
}

static magnav_real model_break(const void *source, int32_t i)
{
    const magnav_model *model = (const magnav_model *)source;
    return model->breaks_yr[i];
}

static magnav_real model_value(const void *source, int32_t piece, int32_t power, int32_t term)
{
    const magnav_model *model = (const magnav_model *)source;
    const size_t terms = (size_t)model->degree * ((size_t)model->degree + 2);
    return model->polynomials[((size_t)piece * (size_t)model->order + (size_t)power) * terms + (size_t)term];
}

/* The piece that holds `year`, the time within it, and how far beyond the model's ends it lies. */
static int32_t find_piece(const timeline *line, magnav_real year, magnav_real *within, magnav_real *beyond)
{
    const magnav_real first = line->break_yr(line->source, 0);
    const magnav_real last = line->break_yr(line->source, line->pieces);
    const magnav_real held = (year < first) ? first : (year > last) ? last : year;
    int32_t piece = 0;

    while (piece + 1 < line->pieces && held >= line->break_yr(line->source, piece + 1)) {
        piece++;
    }
    *within = held - line->break_yr(line->source, piece);
    *beyond = year - held;
    return piece;
}

/* Value and slope of a coefficient at `within`, carried on by the tangent. */
static void value_and_slope(const timeline *line, int32_t piece, int32_t term, magnav_real within, magnav_real beyond,
                            magnav_real *value, magnav_real *slope)
{
    magnav_real v = line->value(line->source, piece, line->order - 1, term);
    magnav_real s = MAGNAV_C(0.0);
    for (int32_t k = line->order - 2; k >= 0; k--) {
        s = s * within + v;
        v = v * within + line->value(line->source, piece, k, term);
    }
    *value = v + s * beyond;
    *slope = s;
}

magnav_status magnav_timeline_snapshot(const timeline *line, magnav_real year, int32_t extrapolate,
                                       magnav_real *memory, size_t memory_reals, magnav_snapshot *snapshot)
{
    magnav_real within;
    magnav_real beyond;
    magnav_real sectoral = MAGNAV_C(1.0); /* kappa(m, m) */
    magnav_real *out = memory;
    int32_t piece;
    int32_t inside;

    if (memory_reals < MAGNAV_SNAPSHOT_REALS(line->degree)) {
        return MAGNAV_E_MEMORY;
    }
    if (!isfinite(year)) {
        return MAGNAV_E_NOT_FINITE;
    }
    inside = year >= line->valid_from_yr && year <= line->valid_until_yr;
    if (!inside && extrapolate == 0) {
        return MAGNAV_E_DATE;
    }
    piece = find_piece(line, year, &within, &beyond);

    for (int32_t m = 0; m <= line->degree; m++) {
        magnav_real kappa;
        if (m > 1) {
            sectoral = sectoral * real_sqrt((magnav_real)(2 * m - 1) / (magnav_real)(2 * m));
        }
        kappa = sectoral;
        for (int32_t n = m; n <= line->degree; n++) {
            if (n > 0) {
                const int32_t term = n * n - 1 + ((m == 0) ? 0 : 2 * m - 1);
                magnav_real h = MAGNAV_C(0.0);
                magnav_real h_rate = MAGNAV_C(0.0);

                out[0] = (magnav_real)(n * n - m * m) / (magnav_real)(4 * n * n - 1);
                value_and_slope(line, piece, term, within, beyond, &out[1], &out[3]);
                if (m > 0) {
                    value_and_slope(line, piece, term + 1, within, beyond, &h, &h_rate);
                }
                out[1] = kappa * out[1];
                out[2] = kappa * h;
                out[3] = kappa * out[3];
                out[4] = kappa * h_rate;
                out += 5;
            }
            kappa = kappa * ((magnav_real)(2 * n + 1) / real_sqrt((magnav_real)((n + 1 - m) * (n + 1 + m))));
        }
    }
    snapshot->terms = memory;
    snapshot->year = year;
    snapshot->degree = line->degree;
    snapshot->flags = inside ? 0U : MAGNAV_FLAG_OUTSIDE_VALIDITY;
    return MAGNAV_OK;
}

magnav_status magnav_snapshot_at(const magnav_model *model, magnav_real year, int32_t extrapolate, magnav_real *memory,
                                 size_t memory_reals, magnav_snapshot *snapshot)
{
    timeline line;
    magnav_status status;

    if (model == NULL || memory == NULL || snapshot == NULL) {
        return MAGNAV_E_NULL;
    }
    status = check_model(model);
    if (status != MAGNAV_OK) {
        return status;
    }
    line.source = model;
    line.break_yr = model_break;
    line.value = model_value;
    line.valid_from_yr = model->valid_from_yr;
    line.valid_until_yr = model->valid_until_yr;
    line.degree = model->degree;
    line.order = model->order;
    line.pieces = model->pieces;
    return magnav_timeline_snapshot(&line, year, extrapolate, memory, memory_reals, snapshot);
}
