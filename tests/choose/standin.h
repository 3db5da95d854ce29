// A stand-in for engine, train and condition, so that the screen can be tested on levels that are
// known: lines of the word's own spectrum through one resonance, counted inside two bands.
#ifndef TEST_STANDIN_H
#define TEST_STANDIN_H
#include "tacet/choose.h"

struct tacet_model {
    tacet_study study;
    tacet_band band[2];
    double mode_hz[3];
    double scale;         // level over limit of a line of amplitude 1 off resonance
    double uneven;        // rms that unequal cylinders add to both levels
    double least_density; // below: unreachable
    double fails_at_rpm;  // conditions within 1 rpm fail; 0: none
    bool may_skip[6];
    size_t referees, solves;
    size_t fails_after; // solves before tacet_solve itself runs out of memory; 0: never
};
// Six cylinders, four-stroke; densities 1/2, 3/7 and 1, 900-1900 rpm by `step`.
struct tacet_model standin(double step_rpm, tacet_arena *a);
#endif
