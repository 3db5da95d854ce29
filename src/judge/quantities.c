// The table of quantities.
#include "judge/quantities.h"
#include <string.h>

#define SIGNAL(function) .statistic = -1, .spectrum = function
#define NUMBER(function) .scalar = true, .value = function

static const tacet_quantity quantities[] = {
    {.name = "roll-torque",
     .unit = "N m",
     .doc = "torque of the moving parts on the housing about the crank",
     SIGNAL(roll_torque)},
    {.name = "link-torque",
     .unit = "N m",
     .doc = "torque in a link, on the `to` side of a gear stage",
     .target = TACET_TARGET_LINK,
     SIGNAL(link_torque)},
    {.name = "link-stress",
     .unit = "MPa",
     .doc = "shear stress of a shaft in torsion alone, with its stress concentration",
     .target = TACET_TARGET_LINK,
     SIGNAL(link_stress)},
    {.name = "node-angle",
     .unit = "rad",
     .doc = "deviation of a node from its mean rotation",
     .target = TACET_TARGET_NODE,
     SIGNAL(node_angle)},
    {.name = "node-speed",
     .unit = "rad/s",
     .doc = "speed of a node, mean included; negative against the crank",
     .target = TACET_TARGET_NODE,
     SIGNAL(node_speed)},
    {.name = "node-acceleration",
     .unit = "rad/s2",
     .doc = "angular acceleration of a node",
     .target = TACET_TARGET_NODE,
     SIGNAL(node_acceleration)},
    {.name = "irregularity",
     .unit = "1",
     .doc = "speed of the flywheel over its mean; a limit is on (highest - lowest) / mean",
     .statistic = TACET_STAT_PP,
     .over_mean_speed = true,
     .spectrum = irregularity},
    {.name = "mount-force",
     .unit = "N",
     .doc = "force of a mount on the frame along the mount's own axis",
     .target = TACET_TARGET_MOUNT,
     SIGNAL(mount_force)},
    {.name = "place-acceleration",
     .unit = "m/s2",
     .doc = "acceleration of a place of the powertrain along an axis of the body",
     .target = TACET_TARGET_PLACE,
     SIGNAL(place_acceleration)},
    {.name = "cab",
     .unit = "m/s2, Pa or m/s",
     .doc = "what arrives at a point through its paths, weighted as the point says",
     .target = TACET_TARGET_POINT,
     SIGNAL(cab)},
    {.name = "shaking",
     .unit = "N or N m",
     .doc = "load of reciprocating and rotating masses about the centre of gravity, at constant "
            "speed; it does not depend on the pattern",
     .target = TACET_TARGET_MEMBER,
     SIGNAL(shaking)},
    {.name = "damper-heat",
     .unit = "W",
     .doc = "mean power that a link turns into heat, all lines",
     .target = TACET_TARGET_LINK,
     .statistic = TACET_STAT_MEAN,
     NUMBER(damper_heat)},
    {.name = "peak-pressure",
     .unit = "MPa",
     .doc = "highest cylinder pressure of any cycle of the repeat",
     .statistic = TACET_STAT_MAX,
     NUMBER(peak_pressure)},
    {.name = NULL},
};

const tacet_quantity *tacet_quantities(void)
{
    return quantities;
}

const tacet_quantity *tacet_quantity_find(const char *name)
{
    for (const tacet_quantity *q = quantities; q->name; q++)
        if (strcmp(q->name, name) == 0) return q;
    return NULL;
}
