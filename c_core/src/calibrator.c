/* The calibrator for the target; the method is described in its header. */
#include "magnav_calibrator.h"

#include "real.h"

#define UNKNOWNS 9
#define COLUMNS 10
#define SWEEPS 12
#define LARGEST_CONDITION MAGNAV_C(1.8)
#define LARGEST_OFFSET MAGNAV_C(4.0)
#define LARGEST_RESIDUAL MAGNAV_C(0.05)
/* cosine of the angle within which a reading makes a direction seen */
#define NEAR_ENOUGH MAGNAV_C(0.8)

/* Place of row i, column j >= i in the packed upper triangle. */
static int32_t place(int32_t i, int32_t j)
{
    return i * COLUMNS - i * (i - 1) / 2 + (j - i);
}

/* Unit vector of a direction: the 26 triples of -1, 0, 1 without the zero one. */
static void direction_of(int32_t index, magnav_real unit[3])
{
    const int32_t code = (index < 13) ? index : index + 1;
    const int32_t parts[3] = {code % 3 - 1, code / 3 % 3 - 1, code / 9 - 1};
    const magnav_real size =
        real_sqrt((magnav_real)(parts[0] * parts[0] + parts[1] * parts[1] + parts[2] * parts[2]));
    for (int32_t i = 0; i < 3; i++) {
        unit[i] = (magnav_real)parts[i] / size;
    }
}

magnav_status magnav_calibrator_start(magnav_calibrator *calibrator, magnav_real field_uT)
{
    const magnav_calibrator blank = {{0}, {0}, {0}, 0, 0};

    if (calibrator == NULL) {
        return MAGNAV_E_NULL;
    }
    if (!(field_uT > MAGNAV_C(0.0)) || !isfinite(field_uT)) {
        return MAGNAV_E_PARAMETER;
    }
    *calibrator = blank;
    calibrator->field_uT = field_uT;
    return MAGNAV_OK;
}

magnav_status magnav_calibrator_add(magnav_calibrator *calibrator, const magnav_real mag_uT[3])
{
    magnav_real row[COLUMNS];
    magnav_real x[3];

    if (calibrator == NULL || mag_uT == NULL) {
        return MAGNAV_E_NULL;
    }
    if (!all_finite(mag_uT, 3)) {
        return MAGNAV_E_NOT_FINITE;
    }
    if (calibrator->count == INT32_MAX) {
        return MAGNAV_E_MEMORY;
    }
    for (int32_t i = 0; i < 3; i++) {
        if (calibrator->count == 0) {
            calibrator->origin_uT[i] = mag_uT[i];
        }
        x[i] = (mag_uT[i] - calibrator->origin_uT[i]) / calibrator->field_uT;
    }
    if (real_abs(x[0]) + real_abs(x[1]) + real_abs(x[2]) > MAGNAV_C(1000.0)) {
        return MAGNAV_E_MAGNETIC; /* no reading of such a sensor; it would drown all others */
    }
    calibrator->count = calibrator->count + 1;
    for (int32_t k = 0; k < MAGNAV_CALIBRATOR_DIRECTIONS; k++) {
        magnav_real unit[3];
        magnav_real reach;
        direction_of(k, unit);
        reach = dot(unit, x);
        if (reach > calibrator->farthest[k]) {
            calibrator->farthest[k] = reach;
        }
    }
    row[0] = x[0] * x[0] - x[2] * x[2];
    row[1] = x[1] * x[1] - x[2] * x[2];
    row[2] = MAGNAV_C(2.0) * x[0] * x[1];
    row[3] = MAGNAV_C(2.0) * x[0] * x[2];
    row[4] = MAGNAV_C(2.0) * x[1] * x[2];
    for (int32_t i = 0; i < 3; i++) {
        row[5 + i] = MAGNAV_C(2.0) * x[i];
    }
    row[8] = MAGNAV_C(-1.0);
    row[9] = MAGNAV_C(0.0) - dot(x, x);
    for (int32_t i = 0; i < COLUMNS; i++) {
        magnav_real *diagonal = &calibrator->factor[place(i, i)];
        const magnav_real size = real_sqrt(*diagonal * *diagonal + row[i] * row[i]);
        if (size > MAGNAV_C(0.0)) {
            const magnav_real c = *diagonal / size;
            const magnav_real s = row[i] / size;
            for (int32_t j = i; j < COLUMNS; j++) {
                const magnav_real kept = calibrator->factor[place(i, j)];
                calibrator->factor[place(i, j)] = c * kept + s * row[j];
                row[j] = c * row[j] - s * kept;
            }
        }
    }
    return MAGNAV_OK;
}

/* Unknowns from the factor by back substitution; 0 where it is singular. */
static int32_t back_substitute(const magnav_calibrator *calibrator, magnav_real unknown[UNKNOWNS])
{
    for (int32_t i = UNKNOWNS - 1; i >= 0; i--) {
        const magnav_real diagonal = calibrator->factor[place(i, i)];
        magnav_real sum = calibrator->factor[place(i, UNKNOWNS)];
        if (!(real_abs(diagonal) > MAGNAV_C(0.0))) {
            return 0;
        }
        for (int32_t j = i + 1; j < UNKNOWNS; j++) {
            sum = sum - calibrator->factor[place(i, j)] * unknown[j];
        }
        unknown[i] = sum / diagonal;
    }
    return all_finite(unknown, UNKNOWNS);
}

/* Eigenvalues (on the diagonal of a) and vectors (columns of v) of a symmetric matrix, by Jacobi's rotations. */
static void jacobi(magnav_real a[3][3], magnav_real v[3][3])
{
    static const int32_t PAIRS[3][2] = {{0, 1}, {0, 2}, {1, 2}};

    for (int32_t i = 0; i < 3; i++) {
        for (int32_t j = 0; j < 3; j++) {
            v[i][j] = (i == j) ? MAGNAV_C(1.0) : MAGNAV_C(0.0);
        }
    }
    for (int32_t sweep = 0; sweep < 3 * SWEEPS; sweep++) {
        const int32_t p = PAIRS[sweep % 3][0];
        const int32_t q = PAIRS[sweep % 3][1];
        if (real_abs(a[p][q]) > MAGNAV_C(0.0)) {
            const magnav_real theta = (a[q][q] - a[p][p]) / (MAGNAV_C(2.0) * a[p][q]);
            const magnav_real root = real_sqrt(theta * theta + MAGNAV_C(1.0));
            const magnav_real t = (theta < MAGNAV_C(0.0)) ? MAGNAV_C(-1.0) / (root - theta)
                                                          : MAGNAV_C(1.0) / (root + theta);
            const magnav_real c = MAGNAV_C(1.0) / real_sqrt(t * t + MAGNAV_C(1.0));
            const magnav_real s = t * c;
            for (int32_t k = 0; k < 3; k++) {
                const magnav_real kp = a[k][p];
                const magnav_real kq = a[k][q];
                a[k][p] = c * kp - s * kq;
                a[k][q] = s * kp + c * kq;
            }
            for (int32_t k = 0; k < 3; k++) {
                const magnav_real pk = a[p][k];
                const magnav_real qk = a[q][k];
                const magnav_real vp = v[k][p];
                const magnav_real vq = v[k][q];
                a[p][k] = c * pk - s * qk;
                a[q][k] = s * pk + c * qk;
                v[k][p] = c * vp - s * vq;
                v[k][q] = s * vp + c * vq;
            }
        }
    }
}

/* What the ellipsoid is, in units of the field from the first reading. */
typedef struct ellipsoid {
    magnav_real centre[3];
    magnav_real soft[3][3];
    magnav_real reach[3][3]; /* inverse of soft^2: the square of how far the ellipsoid reaches in a direction */
    magnav_real scale; /* (x-c)'A(x-c) = scale, with soft^2 = A / scale */
} ellipsoid;

static int32_t shape_of(const magnav_real unknown[UNKNOWNS], ellipsoid *found)
{
    const magnav_real one = MAGNAV_C(1.0);
    magnav_real a[3][3] = {{one + unknown[0], unknown[2], unknown[3]},
                           {unknown[2], one + unknown[1], unknown[4]},
                           {unknown[3], unknown[4], one - unknown[0] - unknown[1]}};
    magnav_real v[3][3];
    magnav_real along[3];
    magnav_real low;
    magnav_real high;

    jacobi(a, v);
    low = a[0][0];
    high = a[0][0];
    for (int32_t i = 1; i < 3; i++) {
        low = (a[i][i] < low) ? a[i][i] : low;
        high = (a[i][i] > high) ? a[i][i] : high;
    }
    if (!(low > MAGNAV_C(0.0)) || !(high <= low * LARGEST_CONDITION * LARGEST_CONDITION)) {
        return 0;
    }
    found->scale = unknown[8];
    for (int32_t i = 0; i < 3; i++) {
        const magnav_real projected = v[0][i] * unknown[5] + v[1][i] * unknown[6] + v[2][i] * unknown[7];
        along[i] = (MAGNAV_C(0.0) - projected) / a[i][i];
        found->scale = found->scale + projected * projected / a[i][i];
    }
    if (!(found->scale > MAGNAV_C(0.0)) || !isfinite(found->scale)) {
        return 0;
    }
    for (int32_t i = 0; i < 3; i++) {
        found->centre[i] = v[i][0] * along[0] + v[i][1] * along[1] + v[i][2] * along[2];
        for (int32_t j = 0; j < 3; j++) {
            found->soft[i][j] = MAGNAV_C(0.0);
            found->reach[i][j] = MAGNAV_C(0.0);
            for (int32_t k = 0; k < 3; k++) {
                found->soft[i][j] = found->soft[i][j] + v[i][k] * v[j][k] * real_sqrt(a[k][k] / found->scale);
                found->reach[i][j] = found->reach[i][j] + v[i][k] * v[j][k] * (found->scale / a[k][k]);
            }
        }
    }
    return 1;
}

/* Derivatives of the row's model by the nine parameters b_x .. W_yz, as the combination of columns that a small change
 * of a parameter is. With M = W^2 in units of the field: x'Mx - 2 b'M x + b'Mb = 1, divided by trace(M) / 3. */
static void change_of(const ellipsoid *found, int32_t parameter, magnav_real change[UNKNOWNS])
{
    static const int32_t PAIR[6][2] = {{0, 0}, {1, 1}, {2, 2}, {0, 1}, {0, 2}, {1, 2}};
    const magnav_real two = MAGNAV_C(2.0);
    magnav_real m[3][3];
    magnav_real dm[3][3];
    magnav_real db[3] = {MAGNAV_C(0.0), MAGNAV_C(0.0), MAGNAV_C(0.0)};
    magnav_real mb[3];
    magnav_real dmb[3];
    magnav_real g[3];
    magnav_real mean;
    magnav_real d_mean;

    for (int32_t i = 0; i < 3; i++) {
        for (int32_t j = 0; j < 3; j++) {
            m[i][j] = dot(found->soft[i], found->soft[j]);
            dm[i][j] = MAGNAV_C(0.0);
        }
    }
    if (parameter < 3) {
        db[parameter] = MAGNAV_C(1.0);
    } else {
        /* d(W W) = dW W + W dW */
        const int32_t p = PAIR[parameter - 3][0];
        const int32_t q = PAIR[parameter - 3][1];
        for (int32_t i = 0; i < 3; i++) {
            dm[p][i] = dm[p][i] + found->soft[q][i];
            dm[i][p] = dm[i][p] + found->soft[i][q];
            if (p != q) {
                dm[q][i] = dm[q][i] + found->soft[p][i];
                dm[i][q] = dm[i][q] + found->soft[i][p];
            }
        }
    }
    mean = (m[0][0] + m[1][1] + m[2][2]) / MAGNAV_C(3.0);
    d_mean = (dm[0][0] + dm[1][1] + dm[2][2]) / MAGNAV_C(3.0);
    for (int32_t i = 0; i < 3; i++) {
        mb[i] = dot(m[i], found->centre);
        dmb[i] = dot(dm[i], found->centre) + dot(m[i], db);
        g[i] = (MAGNAV_C(0.0) - dmb[i] + mb[i] * d_mean / mean) / mean;
        change[5 + i] = g[i];
    }
    change[0] = (dm[0][0] - m[0][0] * d_mean / mean) / mean;
    change[1] = (dm[1][1] - m[1][1] * d_mean / mean) / mean;
    change[2] = (dm[0][1] - m[0][1] * d_mean / mean) / mean;
    change[3] = (dm[0][2] - m[0][2] * d_mean / mean) / mean;
    change[4] = (dm[1][2] - m[1][2] * d_mean / mean) / mean;
    /* k = (1 - b'Mb) / mean */
    change[8] = (MAGNAV_C(0.0) - two * dot(mb, db) - (dot(dmb, found->centre) - dot(mb, db)) -
                 (MAGNAV_C(1.0) - dot(mb, found->centre)) * d_mean / mean) / mean;
}

/* Inverse of a symmetric positive matrix, in place, through its Cholesky factor; 0 where it is singular. */
static int32_t invert(magnav_real s[UNKNOWNS][UNKNOWNS])
{
    for (int32_t j = 0; j < UNKNOWNS; j++) {
        for (int32_t i = j; i < UNKNOWNS; i++) {
            magnav_real sum = s[i][j];
            for (int32_t k = 0; k < j; k++) {
                sum = sum - s[i][k] * s[j][k];
            }
            if (i == j && !(sum > MAGNAV_C(0.0))) {
                return 0;
            }
            s[i][j] = (i == j) ? real_sqrt(sum) : sum / s[j][j];
        }
    }
    /* the inverse of the factor in the upper triangle, its diagonal inverted in place */
    for (int32_t j = 0; j < UNKNOWNS; j++) {
        s[j][j] = MAGNAV_C(1.0) / s[j][j];
        for (int32_t i = j + 1; i < UNKNOWNS; i++) {
            magnav_real sum = MAGNAV_C(0.0);
            for (int32_t k = j; k < i; k++) {
                sum = sum - s[i][k] * ((k == j) ? s[j][j] : s[j][k]);
            }
            s[j][i] = sum / s[i][i];
        }
    }
    /* inverse = (factor^-1)' (factor^-1), row by row into the lower triangle */
    for (int32_t i = 0; i < UNKNOWNS; i++) {
        for (int32_t j = 0; j <= i; j++) {
            magnav_real sum = MAGNAV_C(0.0);
            for (int32_t k = i; k < UNKNOWNS; k++) {
                sum = sum + s[i][k] * s[j][k];
            }
            s[i][j] = sum;
        }
    }
    return 1;
}

static int32_t directions_seen(const magnav_calibrator *calibrator, const ellipsoid *found)
{
    int32_t seen = 0;
    for (int32_t k = 0; k < MAGNAV_CALIBRATOR_DIRECTIONS; k++) {
        magnav_real unit[3];
        magnav_real square = MAGNAV_C(0.0);
        direction_of(k, unit);
        for (int32_t i = 0; i < 3; i++) {
            square = square + unit[i] * dot(found->reach[i], unit);
        }
        if (calibrator->farthest[k] - dot(unit, found->centre) > NEAR_ENOUGH * real_sqrt(square)) {
            seen++;
        }
    }
    return seen;
}

/* Covariance of the nine parameters from the factor: (C'R'R C)^-1 times the residual's variance, C the change of the
 * linear unknowns with the parameters; 0 where it cannot be had. */
static int32_t covariance_of(const magnav_calibrator *calibrator, const ellipsoid *found, magnav_real variance,
                             magnav_real packed[45])
{
    magnav_real image[UNKNOWNS][UNKNOWNS]; /* row p: R times the change with parameter p */
    magnav_real s[UNKNOWNS][UNKNOWNS];
    int32_t at = 0;

    for (int32_t p = 0; p < UNKNOWNS; p++) {
        magnav_real change[UNKNOWNS];
        change_of(found, p, change);
        for (int32_t i = 0; i < UNKNOWNS; i++) {
            image[p][i] = MAGNAV_C(0.0);
            for (int32_t j = i; j < UNKNOWNS; j++) {
                image[p][i] = image[p][i] + calibrator->factor[place(i, j)] * change[j];
            }
        }
    }
    for (int32_t p = 0; p < UNKNOWNS; p++) {
        for (int32_t q = 0; q < UNKNOWNS; q++) {
            s[p][q] = MAGNAV_C(0.0);
            for (int32_t i = 0; i < UNKNOWNS; i++) {
                s[p][q] = s[p][q] + image[p][i] * image[q][i];
            }
        }
    }
    if (!invert(s)) {
        return 0;
    }
    for (int32_t p = 0; p < UNKNOWNS; p++) {
        for (int32_t q = 0; q <= p; q++) {
            /* the hard iron is kept in units of the field */
            const magnav_real unit = ((p < 3) ? calibrator->field_uT : MAGNAV_C(1.0)) *
                                     ((q < 3) ? calibrator->field_uT : MAGNAV_C(1.0));
            packed[at] = s[p][q] * variance * unit;
            at++;
        }
    }
    return all_finite(packed, 45);
}

static int32_t judge(const magnav_calibrator *calibrator, magnav_calibrator_result *out)
{
    magnav_real unknown[UNKNOWNS];
    magnav_real left = MAGNAV_C(0.0);
    magnav_real variance;
    magnav_real offset2;
    ellipsoid found;

    if (calibrator->count < MAGNAV_CALIBRATOR_FEWEST) {
        return MAGNAV_REFUSED_FEW;
    }
    if (!back_substitute(calibrator, unknown)) {
        return MAGNAV_REFUSED_COVERAGE;
    }
    if (!shape_of(unknown, &found)) {
        return MAGNAV_REFUSED_SHAPE;
    }
    out->seen = directions_seen(calibrator, &found);
    if (out->seen < MAGNAV_CALIBRATOR_SEEN) {
        return MAGNAV_REFUSED_COVERAGE;
    }
    left = calibrator->factor[place(UNKNOWNS, UNKNOWNS)];
    variance = left * left / (magnav_real)(calibrator->count - UNKNOWNS);
    /* a distance d from the ellipsoid is a residual of 2 sqrt(scale) d */
    out->noise_uT = calibrator->field_uT * real_sqrt(variance / found.scale) / MAGNAV_C(2.0);
    for (int32_t i = 0; i < 3; i++) {
        out->calibration.hard_iron_uT[i] = calibrator->origin_uT[i] + calibrator->field_uT * found.centre[i];
        for (int32_t j = 0; j < 3; j++) {
            out->calibration.soft_iron[3 * i + j] = found.soft[i][j];
        }
    }
    if (!(out->noise_uT <= LARGEST_RESIDUAL * calibrator->field_uT)) {
        return MAGNAV_REFUSED_RESIDUAL;
    }
    offset2 = dot(out->calibration.hard_iron_uT, out->calibration.hard_iron_uT);
    if (!(offset2 <= LARGEST_OFFSET * LARGEST_OFFSET * calibrator->field_uT * calibrator->field_uT)) {
        return MAGNAV_REFUSED_OFFSET;
    }
    return covariance_of(calibrator, &found, variance, out->calibration.covariance) ? MAGNAV_REFUSED_NOT
                                                                                  : MAGNAV_REFUSED_COVERAGE;
}

magnav_status magnav_calibrator_solve(const magnav_calibrator *calibrator, magnav_calibrator_result *result)
{
    magnav_calibrator_result out = {{{0}, {0}, {0}}, 0, 0, 0};

    if (calibrator == NULL || result == NULL) {
        return MAGNAV_E_NULL;
    }
    out.refusal = judge(calibrator, &out);
    *result = out;
    return MAGNAV_OK;
}
