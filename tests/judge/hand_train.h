// A train made by hand, in place of the room train's own: the judge's tests then stand on numbers
// that no solver made. Every function of a train that the room judge calls is here.
#ifndef TEST_HAND_TRAIN_H
#define TEST_HAND_TRAIN_H
#include "tacet/train.h"

#define HAND_MOST 8

struct tacet_train {
    size_t n_nodes, n_links, flywheel, load;
    const tacet_fatigue_def *fatigue; // of every link; NULL: not stated
    struct {
        const char *name;
        double inertia_kgm2, damping_Nms_per_rad, ratio;
        bool housed;
    } node[HAND_MOST];
    struct {
        const char *name;
        size_t from, to;
        double stiffness_Nm_per_rad, loss_factor, damping_Nms_per_rad, gear_ratio;
        double section_modulus_m3, stress_concentration;
    } link[HAND_MOST];
};

#endif
