#include "hand_train.h"
#include <math.h>

size_t tacet_train_nodes(const tacet_train *t)
{
    return t->n_nodes;
}

size_t tacet_train_links(const tacet_train *t)
{
    return t->n_links;
}

const char *tacet_train_node_name(const tacet_train *t, size_t node)
{
    return t->node[node].name;
}

const char *tacet_train_link_name(const tacet_train *t, size_t link)
{
    return t->link[link].name;
}

size_t tacet_train_flywheel(const tacet_train *t)
{
    return t->flywheel;
}

size_t tacet_train_load(const tacet_train *t)
{
    return t->load;
}

double tacet_train_node_ratio(const tacet_train *t, size_t node)
{
    return t->node[node].ratio;
}

double tacet_train_node_damping(const tacet_train *t, size_t node)
{
    return t->node[node].damping_Nms_per_rad;
}

bool tacet_train_node_housed(const tacet_train *t, size_t node)
{
    return t->node[node].housed;
}

tacet_link_info tacet_train_link_info(const tacet_train *t, size_t link)
{
    return (tacet_link_info){
        .fatigue = t->fatigue ? *t->fatigue : (tacet_fatigue_def){.amplitude_MPa = NAN},
        .from = t->link[link].from,
        .to = t->link[link].to,
        .stiffness_Nm_per_rad = t->link[link].stiffness_Nm_per_rad,
        .gear_ratio = t->link[link].gear_ratio,
        .section_modulus_m3 = t->link[link].section_modulus_m3,
        .stress_concentration = t->link[link].stress_concentration,
        .loss_factor = t->link[link].loss_factor,
        .damping_Nms_per_rad = t->link[link].damping_Nms_per_rad,
    };
}

// Constant loss factor or viscous damping.
double complex tacet_train_link_impedance(const tacet_train *t, size_t link, double w)
{
    return t->link[link].stiffness_Nm_per_rad * (1 + I * t->link[link].loss_factor) +
           I * w * t->link[link].damping_Nms_per_rad;
}
