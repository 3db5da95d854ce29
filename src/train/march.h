// The train in the time domain: what a march integrates, and its linear model.
//
// Motion is a deviation from the mean rotation under the mean torques, referred to the crank.
// State:
//   v_j    speed of node j                                     [n]
//   u_k    twist of link k, child against the node above it    [m]
//   y      angle of the flywheel                               [1]
//   s_ak   elongation of the spring of Maxwell arm a, link k   [arms, lossy links only]
// Twists instead of angles: a stiff link's twist is a millionth of its nodes' angles.
//   u' = v_child - v_above,  s' = u' - r s,  y' = v_flywheel,
//   t_k = rest u + viscous u' + sum g s      on the node above, -t_k on the child
//   J_j v_j' = sum of t - c v_j + what drives - (load torque - its estimate)
#ifndef TRAIN_MARCH_H
#define TRAIN_MARCH_H
#include "train/internal.h"

typedef struct {
    const tacet_train *t;
    size_t n, links, lossy, size; // of the state: n + links + 1 + n_arms lossy
    size_t root_angle, arms;      // places of y and of the first s in the state
    // Links, those with a loss factor first: ends, law; [links], weight[a * lossy + k].
    size_t *child, *above;
    double *rest, *viscous, *weight, *rate;
    size_t *outward;                               // links from the flywheel outwards
    size_t *place;                                 // by node: the link that it hangs from
    double *inertia, *damping;                     // [n]
    double *angle, *rate_of_twist, *torque, *push; // scratch
} march_model;

typedef struct {
    march_model *m;
    size_t n_throws;
    const size_t *node;
    tacet_drive *drive;
    const void *who;
    bool frozen;
    double speed_rad_per_s, load_Nm; // load_Nm: over its estimate, referred
    const double *offset, *mean;     // static twist by node; estimated mean torque of each throw
    tacet_status status;             // of the drive
    unsigned evaluations;
} march_drive;

TACET_USE bool march_model_create(march_model *m, const tacet_train *t, tacet_arena *a);
// Derivative of the state at time t; GSL's signature, params is a march_drive.
int march_rate(double t, const double state[], double rate[], void *params);
// Torques of the links in a state, referred, into m->torque; their part of the state's rate.
void march_links(march_model *m, const double *state, double *rate);
// Matrix of the linear model, size + 1 square: the last state is a constant load torque.
void march_matrix(const march_model *m, double *a);

#endif
