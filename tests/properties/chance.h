// Seeded chance: the same numbers on every host.
#ifndef TEST_CHANCE_H
#define TEST_CHANCE_H
#include <math.h>
#include <stdbool.h>
#include <stdint.h>

typedef struct {
    uint64_t state;
} chance;

// SplitMix64 (Steele, Lea & Flood, OOPSLA 2014).
static inline uint64_t chance_bits(chance *c)
{
    uint64_t z = c->state += 0x9e3779b97f4a7c15u;
    z = (z ^ (z >> 30)) * 0xbf58476d1ce4e5b9u;
    z = (z ^ (z >> 27)) * 0x94d049bb133111ebu;
    return z ^ (z >> 31);
}

static inline double chance_unit(chance *c) // [0, 1)
{
    return (double)(chance_bits(c) >> 11) * 0x1p-53;
}

static inline double chance_between(chance *c, double low, double high)
{
    return low + (high - low) * chance_unit(c);
}

static inline double chance_log(chance *c, double low, double high) // even in the logarithm
{
    return low * pow(high / low, chance_unit(c));
}

static inline unsigned chance_below(chance *c, unsigned n) // 0 .. n - 1
{
    return (unsigned)(chance_bits(c) % n);
}

static inline bool chance_of(chance *c, double share)
{
    return chance_unit(c) < share;
}

static inline void chance_permute(chance *c, unsigned *x, unsigned n)
{
    for (unsigned i = n; i > 1; i--) {
        unsigned k = chance_below(c, i), kept = x[k];
        x[k] = x[i - 1];
        x[i - 1] = kept;
    }
}
#endif
