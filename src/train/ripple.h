// Inside of ripple: one solution under way.
#ifndef TRAIN_RIPPLE_H
#define TRAIN_RIPPLE_H
#include "train/work.h"

typedef struct {
    tacet_train_work *w;
    double speed;
    size_t n_throws;
    const size_t *node;
    tacet_drive *drive;
    const void *who;
    const tacet_periodic *how;
    tacet_train_motion *out;
    tacet_solver_note *note;
    const tacet_transform *grid; // of this pass
    size_t n_lines;              // of this pass
    bool again;                  // torque was sampled on this grid before, at angles close by
} ripple;

// Spectrum of F of throw i at the angles found so far, with as many lines as `out` has.
TACET_USE tacet_status ripple_torque(ripple *r, size_t i, tacet_spectrum *out);

#endif
