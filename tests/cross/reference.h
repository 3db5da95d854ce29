// A second formulation of the train in time, for comparison: angles and speeds of the nodes in
// their own terms, gears as they stand, no referring, no twists, no tree. The constants of a loss
// factor's arms are the train's own; that they are a loss factor is tested in tests/train.
#ifndef TEST_REFERENCE_H
#define TEST_REFERENCE_H
#include "tacet/train.h"

typedef struct {
    const tacet_train *t;
    size_t n, links, arms, size; // of the state: n angles, n speeds, links * arms elongations
    double speed, load_Nm;       // load_Nm: mean, taken at the load node
    size_t n_throws;
    const size_t *node;
    tacet_drive *drive;
    const void *who;
    bool frozen;         // torque at W t less J'/2 W^2, mean inertia
    double *offset;      // [n] static twist against the flywheel, own angles
    double *mean_torque; // [links] mean torques, about which the state is a deviation
    size_t evaluations;
    double *push, *inertia;
} reference;

// Means of the throws' torques give the static state, at k.
reference *reference_new(const tacet_train *t, double speed_rad_per_s, size_t n_throws,
                         const size_t *node, const double *mean_Nm, tacet_drive *drive,
                         const void *who, bool frozen);
void reference_free(reference *r);
void reference_rate(reference *r, double t, const double *state, double *rate);
double reference_link_torque(const reference *r, size_t link, const double *state); // fluctuation
// State at t = 0 of a motion given by lines.
void reference_start(const reference *r, const tacet_train_motion *m, double *state);
// Lines from samples of states over a repeat, [samples][size], n a power of two; angles from
// speeds.
void reference_lines(const reference *r, const double *states, size_t n, unsigned revolutions,
                     tacet_train_motion *out);
// Marches `repeats` repeats by CVODE (Adams, fixed-point iteration) and leaves samples of the last
// one; relative and absolute tolerance as given. Number of right-hand sides.
size_t reference_cvode(reference *r, double *state, double period_s, unsigned repeats,
                       double tolerance, size_t n, double *states);
#endif
