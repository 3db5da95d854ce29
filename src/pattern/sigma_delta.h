// One-bit modulators and their dither. Every step is a few correctly rounded double operations in a
// fixed order (no contraction), so the bits are the same on every machine.
#ifndef PATTERN_SIGMA_DELTA_H
#define PATTERN_SIGMA_DELTA_H
#include "makers.h"

typedef struct {
    int order; // 1 or 2
    double density, dither;
    uint64_t seed;
    double error, error_before; // quantisation error of the last step and the one before
    uint64_t steps;
} sigma_delta;

// Next opportunity: true fires.
bool sigma_delta_step(sigma_delta *m);

// n-th (from 0) 64-bit word of a seed's stream.
uint64_t dither_word(uint64_t seed, uint64_t n);

// A word of d->length letters.
TACET_USE tacet_status sigma_delta_make(int order, const tacet_maker_def *d, tacet_arena *a,
                                        tacet_words *out, tacet_error *e);
#endif
