// Memory of the solutions: one a thread, sized once, nothing allocated in a solve.
#ifndef TRAIN_WORK_H
#define TRAIN_WORK_H
#include "train/internal.h"

typedef struct { // split complex: real and imaginary parts apart, so that loops over lines
                 // vectorise
    double *re, *im;
} split;

// Factors of the elimination on the lines of one (speed, revolutions): a one-slot memo. By leaf k
// of the train and line: [k * stride + h - 1].
typedef struct {
    bool valid;
    double speed_rad_per_s;
    unsigned revolutions;
    size_t n_lines;
    split share;    // g = K / (K + Z)
    split carried;  // Z' = K Z / (K + Z)
    split softness; // 1 / K
    split root;     // 1 / Z of the flywheel, [stride]
} factor_memo;

struct tacet_train_work {
    const tacet_train *t;
    tacet_arena *arena;
    size_t most_lines, n_throws, stride;
    factor_memo factor;
    split stiffness, dynamic; // K of one link; Z of each node: [n * stride], while factors are made
    double *arm_re, *arm_im;  // of one arm on the lines
    split force, angle;       // [n * CHUNK], referred
    double *mean;             // [n]
    bool *driven;             // [n] by node: a throw hangs from it or is it
};

#define CHUNK 128 // lines at a time

// Makes the factors of this grid unless they are at hand.
void harmonic_factors(tacet_train_work *w, double speed_rad_per_s, unsigned revolutions,
                      size_t n_lines);
#endif
