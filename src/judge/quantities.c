// The table of quantities and its names.
#include "judge/quantities.h"
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
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

// ---- names --------------------------------------------------------------------------------------

static const char *kind_of(int target)
{
    return target == TACET_TARGET_NODE ? "node" : "link";
}

static size_t target_count(const tacet_train *t, int target)
{
    return target == TACET_TARGET_NODE ? tacet_train_nodes(t) : tacet_train_links(t);
}

static const char *target_name(const tacet_train *t, int target, size_t i)
{
    return target == TACET_TARGET_NODE ? tacet_train_node_name(t, i) : tacet_train_link_name(t, i);
}

// "a, b, c" as far as it fits, then "..".
static void list(char *out, size_t size, const char *const *names, size_t n)
{
    size_t used = 0;
    out[0] = 0;
    for (size_t i = 0; i < n; i++) {
        size_t more = strlen(names[i]) + 2;
        if (used + more + 3 > size) {
            snprintf(out + used, size - used, ", ..");
            return;
        }
        used += (size_t)snprintf(out + used, size - used, "%s%s", i ? ", " : "", names[i]);
    }
}

// What was read, what is near it, what is allowed.
static tacet_status unknown(tacet_error *e, const char *kind, const char *read,
                            const char *const *names, size_t n)
{
    char allowed[170];
    const char *near = tacet_near_name(read, names, n);
    list(allowed, sizeof allowed, names, n);
    if (near)
        return tacet_fail(e, TACET_BAD_INPUT, "unknown %s '%.40s'; did you mean '%s'?", kind, read,
                          near);
    return tacet_fail(e, TACET_BAD_INPUT, "unknown %s '%.40s'; allowed: %s", kind, read, allowed);
}

static tacet_status unknown_quantity(const char *read, tacet_error *e)
{
    const char *names[sizeof quantities / sizeof *quantities];
    size_t n = 0;
    for (; quantities[n].name; n++)
        names[n] = quantities[n].name;
    return unknown(e, "quantity", read, names, n);
}

static tacet_status unknown_target(const char *read, const tacet_train *t, int target,
                                   tacet_error *e)
{
    size_t n = target_count(t, target);
    const char **names = calloc(n + 1, sizeof *names);
    if (!names) return tacet_fail(e, TACET_NO_MEMORY, "no memory");
    for (size_t i = 0; i < n; i++)
        names[i] = target_name(t, target, i);
    tacet_status status = unknown(e, kind_of(target), read, names, n);
    free(names);
    return status;
}

// What a target must have for this quantity to mean something.
static tacet_status target_check(tacet_quantity_ref ref, const tacet_train *t, tacet_error *e)
{
    if (ref.what->target != TACET_TARGET_LINK) return TACET_OK;
    tacet_link_info info = tacet_train_link_info(t, ref.target);
    const char *name = tacet_train_link_name(t, ref.target);
    if (ref.what->spectrum == link_stress && !(info.section_modulus_m3 > 0))
        return tacet_fail(e, TACET_BAD_INPUT,
                          "link-stress needs the section of link '%s': state its outer_mm", name);
    if (ref.what->value == damper_heat && info.loss_factor == 0 && info.damping_Nms_per_rad == 0)
        return tacet_fail(e, TACET_BAD_INPUT, "damper-heat needs a damped link; '%s' has none",
                          name);
    return TACET_OK;
}

tacet_status tacet_quantity_parse(const char *text, const tacet_train *t, tacet_quantity_ref *out,
                                  tacet_error *e)
{
    if (!text) text = "";
    const char *colon = strchr(text, ':');
    size_t length = colon ? (size_t)(colon - text) : strlen(text);
    char name[64];
    snprintf(name, sizeof name, "%.*s", (int)(length < 63 ? length : 63), text);
    tacet_quantity_ref ref = {.what = tacet_quantity_find(name)};
    if (!ref.what) return unknown_quantity(name, e);
    if (ref.what->target == TACET_TARGET_NONE) {
        if (colon)
            return tacet_fail(e, TACET_BAD_INPUT, "'%.60s': %s takes no name after it", text,
                              ref.what->name);
        *out = ref;
        return TACET_OK;
    }
    const char *kind = kind_of(ref.what->target);
    if (!colon || !colon[1])
        return tacet_fail(e, TACET_BAD_INPUT, "'%.60s' needs the name of a %s: %s:NAME", text, kind,
                          ref.what->name);
    size_t n = target_count(t, ref.what->target);
    while (ref.target < n && strcmp(target_name(t, ref.what->target, ref.target), colon + 1) != 0)
        ref.target++;
    if (ref.target == n) return unknown_target(colon + 1, t, ref.what->target, e);
    tacet_status status = target_check(ref, t, e);
    if (status == TACET_OK) *out = ref;
    return status;
}
