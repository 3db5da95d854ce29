// A stand-in for the solver, for the figures of one pattern: a six with even firing, spectra that
// are known line by line, speeds under 950 rpm out of reach.
#ifndef SHOW_STANDIN_PATTERN_H
#define SHOW_STANDIN_PATTERN_H
#include "tacet/show.h"

#define STANDIN_LINES_PER_REVOLUTION 3 // lines reach order 3

struct tacet_model {
    tacet_study study;
    tacet_band band[2];
    tacet_roll *all_fire;
    bool all_fire_reachable;
    bool no_body;
    double phase_rad; // of every line
};
struct tacet_workspace {
    const tacet_model *model;
    tacet_arena *arena;
    tacet_spectrum spectrum, share, pistons[2];
    tacet_response response;
};
// A body on two mounts with the points "seat" (no path), "ear" (two paths) and "knee" (nine). What
// arrives is the drawn quantity; of paths to the ear, the first brings 1.5 + 0.4 i times it on odd
// lines and 0.25 times it on even ones, the second the rest; of those to the knee, path k brings
// k / 36 (k = 0 .. 8).
// Amplitude (peak) of line h of a roll's drawn quantity: 1 / h of a pattern; all-fire has 2 at
// order 3 and nothing else. Mean 50.
double standin_amplitude(const tacet_roll *r, size_t h);

#endif
