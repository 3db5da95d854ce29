// Memory of the solutions: one a thread, sized once, nothing allocated in a solve.
#ifndef TRAIN_WORK_H
#define TRAIN_WORK_H
#include "train/internal.h"
#include "train/march.h"
#include <gsl/gsl_linalg.h>
#include <gsl/gsl_odeiv2.h>

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

#define TRANSFORM_KINDS 40 // 16, 24, 32, 48, .. samples: powers of two, and one between each two
#define KRYLOV_MOST     12
#define SLOW_MODES_MOST 6

// Of ripple: the throws' angles and torques, and a linear solver for the angle common to all.
typedef struct {
    tacet_spectrum *angle, *torque; // [n_throws]
    tacet_spectrum fresh, signal;   // scratch
    double *offset;                 // [n] static twist against the flywheel, rad, referred
    double complex *transfer;       // angle common to the throws per torque shared by them
    double complex *rest, *step;    // right-hand side and solution
    double complex *basis[KRYLOV_MOST + 1];
    double *kept; // samples of the drive, ripple_torque.c; untouched memory until then
} ripple_work;

// Of steady. Matrices and samples are memory that stays untouched, and so costs nothing, until the
// first march.
typedef struct {
    march_model model;
    gsl_odeiv2_step *step;
    gsl_odeiv2_evolve *evolve;
    double *state, *start, *defect, *scale, *mean; // [size]; mean: [n_throws]
    // One-slot memo of exp(A T), size + 1 square.
    bool valid;
    double period_s;
    double *monodromy, *matrix, *scratch;
    gsl_matrix *newton;
    gsl_vector *reflection, *solution; // of newton; right-hand side, then the step
    double *coupling; // of slow modes, [SLOW_MODES_MOST (SLOW_MODES_MOST + 1) / 2 * most_samples]
    double *sample;   // [(n + links + 1) * most_samples]: speeds, link torques, flywheel's angle
    double *steps;    // [STEPS_KEPT * size] corrections taken, over the scales
    size_t n_steps;
    double load_unit; // N m
} steady_work;

struct tacet_train_work {
    const tacet_train *t;
    tacet_arena *arena;
    size_t most_lines, n_throws, stride;
    factor_memo factor;
    split stiffness, dynamic; // K of one link; Z of each node: [n * stride], while factors are made
    double *arm_re, *arm_im;  // of one arm on the lines
    split force, angle;       // [n * CHUNK], referred
    double *mean;             // [n] mean torque that each node hands to the one above, referred
    bool *driven;             // [n] by node: a throw hangs from it or is it
    tacet_transform *transform[TRANSFORM_KINDS]; // up to the longest
    size_t most_samples;
    double *buffer[3];                                    // of the longest transform
    double *at_angle, *at_torque, *at_inertia, *at_slope; // [most_samples] of a drive
    ripple_work ripple;
    steady_work steady;
};

#define CHUNK 128 // lines at a time

// Makes the factors of this grid unless they are at hand.
void harmonic_factors(tacet_train_work *w, double speed_rad_per_s, unsigned revolutions,
                      size_t n_lines);
// tacet_train_harmonic; with `driven_only` just the angles of nodes that torque passes on its way
// to the flywheel.
TACET_USE tacet_status harmonic_solve(tacet_train_work *w, double speed_rad_per_s, size_t n_throws,
                                      const size_t *throw_node, const tacet_spectrum *torque,
                                      bool driven_only, tacet_train_motion *out);
// The same with lines 1..n of the spectra standing for first + 1 .. first + n.
TACET_USE tacet_status harmonic_solve_beyond(tacet_train_work *w, double speed_rad_per_s,
                                             size_t first, size_t n_throws,
                                             const size_t *throw_node, const tacet_spectrum *torque,
                                             tacet_train_motion *out);
// The shortest transform of at least that length, or the longest that there is.
const tacet_transform *work_transform(const tacet_train_work *w, size_t n_samples);
void spectra_shape(tacet_spectrum *s, size_t n, unsigned revolutions, size_t n_lines);
TACET_USE tacet_status periodic_check(const tacet_train *t, double speed_rad_per_s, size_t n_throws,
                                      const size_t *throw_node, const tacet_periodic *how,
                                      const tacet_train_work *w);

// Static twist of every node against the flywheel, referred, from the mean torques that the
// harmonic solution left in w->mean, into w->ripple.offset; order 0 uses the stated stiffness.
void twist_statically(tacet_train_work *w);
// Ripple from constant speed; w->ripple.torque and offset are left as the last pass had them.
TACET_USE tacet_status ripple_solve(tacet_train_work *w, double speed_rad_per_s, size_t n_throws,
                                    const size_t *throw_node, tacet_drive *drive, const void *who,
                                    const tacet_periodic *how, tacet_train_motion *out,
                                    tacet_solver_note *note);
size_t ripple_kept_bytes(size_t most_samples); // for one throw
bool steady_reserve(tacet_train_work *w);
void steady_release(tacet_train_work *w);

// Adds to the linear model's monodromy (size + 1 square, the last column a load torque's) what
// torque that follows angle does to the slow modes; torques are in w->ripple.torque.
void slow_correct(tacet_train_work *w, double speed_rad_per_s, unsigned revolutions,
                  size_t n_throws, const size_t *node, const tacet_train_motion *motion,
                  double *matrix);

// Newton's step for the angle common to all throws, on lines 1..n of w->ripple.rest (what the last
// pass would change): into w->ripple.step. False: the crank all but stops within the repeat.
bool common_step(tacet_train_work *w, double speed_rad_per_s, unsigned revolutions, size_t n_throws,
                 size_t n);
#endif
