// Engines with invented gas pulses, for tests of ripple, march and steady. The drive is a table of
// torque over angle for a fired and a skipped window of 720 degrees, and of the exact slider-crank.
#ifndef TEST_PULSES_H
#define TEST_PULSES_H
#include "tacet/train.h"

#define PULSES_STEPS 720 // of a window

typedef struct {
    unsigned cylinders, throws, length,
        revolutions;  // length of the word; revolutions of the repeat
    const char *word; // 'x' fires, '.' skips, in firing sequence
    unsigned slot_throw[8], throw_slot[8][2], throw_slots[8]; // slots in firing sequence
    double crank_m, rod_m, mass_kg, bore_m;
    double torque[2][PULSES_STEPS + 1], slope[2][PULSES_STEPS + 1]; // skipped, fired; per step
    double inertia[PULSES_STEPS + 1], rise[PULSES_STEPS + 1]; // of a piston over a turn; per step
    bool massless;                                            // pistons
} pulses;

// Straight six, 7.15 L, 1-5-3-6-2-4, and cross-plane V8, 5.78 L, two cylinders a throw,
// 1-8-4-3-6-5-7-2; fired cycles of `work_J` each.
void pulses_six(pulses *p, const char *word, double work_J);
void pulses_eight(pulses *p, const char *word, double work_J);
tacet_drive pulses_drive;                    // who: pulses
double pulses_mean_inertia(const pulses *p); // of one cylinder
#endif
