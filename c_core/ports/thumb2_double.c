/* Correctly rounded addition of doubles for Thumb-2 cores without a double-precision unit (Cortex-M3, M4, M33).
 *
 * The run-time library of gcc 12 for these cores misrounds a sum or a difference of two doubles whose exponents differ by
 * exactly 33 (1 - 1.4723825912020480e-10 comes out one unit low): enough to part the last bits from those of every other
 * target. Compile this file with the core's double build there, and link with
 *     -Wl,--wrap=__aeabi_dadd,--wrap=__aeabi_dsub,--wrap=__aeabi_drsub
 * Integers only, so that it calls nothing that it replaces. Round to nearest, ties to even (IEEE 754-2019, 4.3.1). */
#include <stdint.h>

#define SIGN ((uint64_t)1 << 63)
#define INFINITE ((uint64_t)0x7FF << 52)
#define HIDDEN ((uint64_t)1 << 52)
/* places below the last one: two decide the rounding, the rest is headroom for what is shifted out */
#define EXTRA 10

uint64_t __wrap___aeabi_dadd(uint64_t a, uint64_t b);
uint64_t __wrap___aeabi_dsub(uint64_t a, uint64_t b);
uint64_t __wrap___aeabi_drsub(uint64_t a, uint64_t b);

static uint64_t fraction(uint64_t bits)
{
    const uint64_t low = bits & (HIDDEN - 1);
    return (((bits & INFINITE) != 0) ? (low | HIDDEN) : low) << EXTRA;
}

static int32_t exponent(uint64_t bits)
{
    const int32_t e = (int32_t)((bits & INFINITE) >> 52);
    return (e == 0) ? 1 : e; /* subnormals share the lowest exponent */
}

/* Shift right, what falls out kept as a last bit that is set. */
static uint64_t shift_sticky(uint64_t value, int32_t places)
{
    if (places > 63) {
        return (value != 0) ? 1U : 0U;
    }
    return (value >> places) | (((value & (((uint64_t)1 << places) - 1)) != 0) ? 1U : 0U);
}

uint64_t __wrap___aeabi_dadd(uint64_t a, uint64_t b)
{
    uint64_t large = a;
    uint64_t small = b;
    uint64_t sum;
    uint64_t sign;
    uint64_t rest;
    int32_t e;

    if ((a & ~SIGN) < (b & ~SIGN)) {
        large = b;
        small = a;
    }
    sign = large & SIGN;
    if ((large & INFINITE) == INFINITE) {
        const int nan = (large & (HIDDEN - 1)) != 0;
        const int opposite = (small & ~SIGN) == INFINITE && ((large ^ small) & SIGN) != 0;
        return (nan || opposite) ? (INFINITE | (HIDDEN >> 1)) : large;
    }
    e = exponent(large);
    rest = shift_sticky(fraction(small), e - exponent(small));
    sum = (((large ^ small) & SIGN) == 0) ? fraction(large) + rest : fraction(large) - rest;
    if (sum == 0) {
        /* an exact difference is +0; two zeros of one sign keep it */
        return (((large ^ small) & SIGN) == 0) ? sign : 0;
    }
    if (sum >= (HIDDEN << (EXTRA + 1))) {
        sum = shift_sticky(sum, 1);
        e++;
    }
    while (sum < (HIDDEN << EXTRA) && e > 1) {
        sum <<= 1;
        e--;
    }
    rest = sum & (((uint64_t)1 << EXTRA) - 1);
    sum >>= EXTRA;
    if (rest > ((uint64_t)1 << (EXTRA - 1)) || (rest == ((uint64_t)1 << (EXTRA - 1)) && (sum & 1U) != 0)) {
        sum++;
    }
    if (sum >= (HIDDEN << 1)) {
        sum >>= 1;
        e++;
    }
    if (e >= 0x7FF) {
        return sign | INFINITE;
    }
    return sign | ((sum < HIDDEN) ? sum : (((uint64_t)e << 52) | (sum & (HIDDEN - 1))));
}

uint64_t __wrap___aeabi_dsub(uint64_t a, uint64_t b)
{
    return __wrap___aeabi_dadd(a, b ^ SIGN);
}

uint64_t __wrap___aeabi_drsub(uint64_t a, uint64_t b)
{
    return __wrap___aeabi_dadd(b, a ^ SIGN);
}
