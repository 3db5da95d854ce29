// A train with its memory, motion and torques, and band-limited torque as a drive.
#ifndef TEST_RIG_H
#define TEST_RIG_H
#include "pulses.h"
#include "tacet/train.h"
#include "trains.h"

#define RIG_THROWS 8
typedef struct {
    tacet_train *t;
    tacet_train_work *w;
    tacet_arena *arena;
    tacet_train_motion m;
    tacet_spectrum torque[RIG_THROWS];
    size_t node[RIG_THROWS], n, lines;
    tacet_periodic how;
    tacet_solver_note note;
    double *table[RIG_THROWS]; // of rig_drive
} rig;

// Frees b. Torques are zero, `how` the default on this grid.
rig *rig_new(bench_train *b, size_t n, const size_t *node, unsigned revolutions, size_t n_lines);
void rig_free(rig *r);
tacet_train_motion rig_motion(rig *r); // another one of the same shape
tacet_status rig_harmonic(rig *r, double rpm, tacet_train_motion *m);
tacet_status rig_ripple(rig *r, double rpm, tacet_drive *drive, const void *who,
                        tacet_train_motion *m);
tacet_status rig_steady(rig *r, double rpm, tacet_drive *drive, const void *who,
                        tacet_train_motion *m);
// The torques' lines as a function of angle: a fine table made from them by rig_tabulate, ten-point
// interpolation (1e-13 for the lines used here). who: the rig.
void rig_tabulate(rig *r);
tacet_drive rig_drive;

// Largest difference of lines over the largest line of all spectra; `power` 1: times the line.
double lines_apart(const tacet_spectrum *a, const tacet_spectrum *b, size_t n, int power);
// Largest difference in dB of lines within `range_db` of their own spectrum's largest.
double lines_apart_db(const tacet_spectrum *a, const tacet_spectrum *b, size_t n, double range_db);
#endif
