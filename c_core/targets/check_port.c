/* Holds ports/thumb2_double.c against the processor's own addition: natively, on numbers of every exponent difference. */
#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <string.h>

uint64_t __wrap___aeabi_dadd(uint64_t a, uint64_t b);
uint64_t __wrap___aeabi_dsub(uint64_t a, uint64_t b);
uint64_t __wrap___aeabi_drsub(uint64_t a, uint64_t b);

static uint64_t state = 88172645463325252u;
static long passed = 0;
static long failed = 0;

static uint64_t next(void)
{
    state ^= state << 13;
    state ^= state >> 7;
    state ^= state << 17;
    return state;
}

static void check(uint64_t got, double expected)
{
    uint64_t bits;
    memcpy(&bits, &expected, sizeof bits);
    if (got == bits || (isnan(expected) && (got & ~((uint64_t)1 << 63)) > ((uint64_t)0x7FF << 52))) {
        passed++;
    } else {
        failed++;
    }
}

int main(void)
{
    static const uint64_t edges[] = {0, 1, 0x000FFFFFFFFFFFFFu, 0x0010000000000000u, 0x3FF0000000000000u,
                                     0x7FEFFFFFFFFFFFFFu, 0x7FF0000000000000u, 0x7FF8000000000000u};
    for (long i = 0; i < 4000000; i++) {
        const uint64_t kind = next() % 16;
        uint64_t x = next();
        uint64_t y = next();
        double a;
        double b;
        if (kind < 12) {
            /* exponents at most 70 apart, sparse fractions now and then for ties */
            const uint64_t e = 100 + next() % 1800;
            const uint64_t mask = (kind < 4) ? ~(uint64_t)0 << (next() % 52) : ~(uint64_t)0;
            x = (x & 0x800FFFFFFFFFFFFFu & mask) | (e << 52) | (x & ((uint64_t)1 << 63));
            y = (y & 0x800FFFFFFFFFFFFFu & mask) | ((e + next() % 71) << 52) | (y & ((uint64_t)1 << 63));
        } else if (kind == 12) {
            x = edges[next() % 8] | (x & ((uint64_t)1 << 63));
            y = edges[next() % 8] | (y & ((uint64_t)1 << 63));
        } else if (kind == 13) {
            x &= 0x801FFFFFFFFFFFFFu;
            y &= 0x801FFFFFFFFFFFFFu;
        }
        memcpy(&a, &x, sizeof a);
        memcpy(&b, &y, sizeof b);
        check(__wrap___aeabi_dadd(x, y), a + b);
        check(__wrap___aeabi_dsub(x, y), a - b);
        check(__wrap___aeabi_drsub(x, y), b - a);
    }
    printf("%ld passed, %ld failed\n", passed, failed);
    return failed != 0;
}
