// Inside of the room train.
//
// Gears are gone here: all angles are referred to the crank, y_j = x_j / ratio_j with ratio_j =
// mean speed of node j over the crank's. Then J ratio^2, c ratio^2 and k ratio_to^2 take the place
// of J, c and k, a torque F counts F ratio, and a link's torque T_to counts T ratio_to:
//   T_to = k (x_from / gear - x_to) = k ratio_to (y_from - y_to), gear = ratio_from / ratio_to.
// (Multiply inertia and stiffness of a geared shaft by the square of the speed ratio: W. T.
// Thomson, Theory of Vibration with Applications, on geared systems.)
#ifndef TRAIN_INTERNAL_H
#define TRAIN_INTERNAL_H
#include "tacet/train.h"

#define TRAIN_NODES_MOST 256
#define TRAIN_NAME       128 // bytes of a damper ring's name

// A link's damping in the time domain: torque = rest u + viscous u' + sum of arms, an arm being a
// spring `weight` behind a dashpot that relaxes at `rate`. Weights are in N m/rad on the `to` side.
typedef struct {
    double rest, viscous;
    const double *weight; // [n_arms], NULL: no loss factor
} link_law;

struct tacet_train {
    tacet_arena *arena;
    size_t n, n_links;
    const char **node_name, **link_name;
    double *inertia, *added, *damping, *ratio; // a node's own; inertia with the added share
    bool *housed;
    tacet_link_info *link;
    size_t flywheel, load;
    // The tree hangs from the flywheel: its n - 1 other nodes, each before the one it hangs from.
    size_t *leaf, *parent, *up; // leaf[n - 1]; by node: the node above and the link to it
    double *sign;               // by node: +1 if it is `from` of that link, -1 if `to`
    // Maxwell arms, rates in rad/s common to all links.
    size_t n_arms;
    double *rate, rate_ratio;
    link_law *law;
    bool *constant_loss;          // by link: k (1 + i eta), without a law in time
    double *mode_hz, *mode_shape; // [n], [n * n] in the nodes' own angles
    double *energy_share;         // [n * n_links] by mode
};

bool link_throw_stated(const tacet_link_def *l);
unsigned link_stiffness_ways(const tacet_link_def *l); // how many are stated
const char *damper_ring_name(const tacet_damper_def *d, char out[TRAIN_NAME]);

// Fills mode_hz, mode_shape, energy_share from inertia, ratio and link stiffness.
TACET_USE tacet_status train_modes_solve(tacet_train *t, tacet_error *e);
// Resolves each link's damping into law, constant_loss and link info.
TACET_USE tacet_status train_damping_resolve(tacet_train *t, const tacet_train_def *d,
                                             tacet_error *e);

#endif
