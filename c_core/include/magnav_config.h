/* Build configuration of the magnav core. Defaults work unchanged; a port overrides them on the command line. */
#ifndef MAGNAV_CONFIG_H
#define MAGNAV_CONFIG_H

/* Define MAGNAV_SINGLE to compute in float; the default is double. */
#ifdef MAGNAV_SINGLE
typedef float magnav_real;
#define MAGNAV_C(x) (x##f)
#else
typedef double magnav_real;
#define MAGNAV_C(x) (x)
#endif

/* Highest spherical-harmonic degree accepted. It bounds loops, not memory: buffers come from the caller and are sized
   by MAGNAV_SNAPSHOT_REALS. A microcontroller build with the main field alone may set 13 or 12. */
#ifndef MAGNAV_MAX_DEGREE
#ifdef MAGNAV_SINGLE
#define MAGNAV_MAX_DEGREE 24
#else
#define MAGNAV_MAX_DEGREE 800
#endif
#endif

/* Highest order of the polynomials in time: 2 is an epoch with a secular variation, 4 a cubic spline. */
#ifndef MAGNAV_MAX_TIME_ORDER
#define MAGNAV_MAX_TIME_ORDER 6
#endif

#endif
