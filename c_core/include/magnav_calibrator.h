/* A calibrator for the target: takes readings one by one in constant memory, says what it has seen, solves on the spot.
 *
 * METHOD. Readings of a field of constant magnitude F lie on an ellipsoid: x'x + x'D x + 2 g'x = k with D symmetric and
 * without trace, nine unknowns, linear. Each reading is one row of a least-squares problem whose triangular factor is
 * kept and updated by Givens rotations (Golub and Van Loan, Matrix Computations, 4th ed., 6.5.3): half the digits that
 * normal equations would cost, which is what lets it run in float. Hard and soft iron follow from the ellipsoid, their
 * covariance from the factor. The desk's maximum-likelihood fit weights readings a little otherwise: the two agree to a
 * fraction of their standard uncertainty, unless a disturbance throws readings far off the ellipsoid: here those weigh
 * by the square.
 *
 * COVERAGE. In 26 directions (the faces, edges and corners of a cube) the farthest reading is kept; a direction counts
 * as seen when a reading lies within some 37 degrees of it. */
#ifndef MAGNAV_CALIBRATOR_H
#define MAGNAV_CALIBRATOR_H

#include "magnav_core.h"

#ifdef __cplusplus
extern "C" {
#endif

#define MAGNAV_CALIBRATOR_ROWS 55      /* upper triangle of 10 by 10 */
#define MAGNAV_CALIBRATOR_DIRECTIONS 26

/* All there is to keep: 344 bytes in float. */
typedef struct magnav_calibrator {
    magnav_real factor[MAGNAV_CALIBRATOR_ROWS];
    magnav_real farthest[MAGNAV_CALIBRATOR_DIRECTIONS];
    magnav_real origin_uT[3]; /* the first reading: the others are taken from it */
    magnav_real field_uT;
    int32_t count;
} magnav_calibrator;

/* Why a solution is refused. */
typedef enum magnav_refusal {
    MAGNAV_REFUSED_NOT = 0,
    MAGNAV_REFUSED_FEW = 1,       /* fewer readings than MAGNAV_CALIBRATOR_FEWEST */
    MAGNAV_REFUSED_COVERAGE = 2,  /* fewer than MAGNAV_CALIBRATOR_SEEN directions seen */
    MAGNAV_REFUSED_SHAPE = 3,     /* no ellipsoid, or an axis stretched more than 1.8 times another */
    MAGNAV_REFUSED_OFFSET = 4,    /* hard iron of more than 4 times the field */
    MAGNAV_REFUSED_RESIDUAL = 5   /* readings stray by more than 5 % of the field: the iron changed */
} magnav_refusal;

#define MAGNAV_CALIBRATOR_FEWEST 50
#define MAGNAV_CALIBRATOR_SEEN 20

typedef struct magnav_calibrator_result {
    magnav_calibration calibration; /* valid where refusal is MAGNAV_REFUSED_NOT */
    magnav_real noise_uT;           /* one axis, one reading */
    int32_t seen;                   /* directions seen, of MAGNAV_CALIBRATOR_DIRECTIONS */
    int32_t refusal;                /* a magnav_refusal */
} magnav_calibrator_result;

/* Start afresh. field_uT: the model's total field at the place, to which the result is scaled. */
magnav_status magnav_calibrator_start(magnav_calibrator *calibrator, magnav_real field_uT);

/* Take one reading (FRD, uT). */
magnav_status magnav_calibrator_add(magnav_calibrator *calibrator, const magnav_real mag_uT[3]);

/* Solve with what there is; the calibrator goes on. MAGNAV_OK also where the result is a refusal. */
magnav_status magnav_calibrator_solve(const magnav_calibrator *calibrator, magnav_calibrator_result *result);

#ifdef __cplusplus
}
#endif
#endif
