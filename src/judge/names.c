// Names of quantities and of what they are of.
#include "judge/quantities.h"

static const char *const axes[] = {"x", "y", "z"};
static const char *const members[] = {"x", "y", "z", "roll", "pitch", "yaw"};

const char *tacet_target_kind(int target)
{
    static const char *const kinds[] = {
        [TACET_TARGET_NONE] = "",
        [TACET_TARGET_NODE] = "node",
        [TACET_TARGET_LINK] = "link",
        [TACET_TARGET_MOUNT] = "mount and axis",
        [TACET_TARGET_PLACE] = "place and axis",
        [TACET_TARGET_POINT] = "point",
        [TACET_TARGET_MEMBER] = "load",
    };
    return kinds[target];
}

const char *tacet_target_form(int target)
{
    static const char *const forms[] = {
        [TACET_TARGET_NONE] = "",
        [TACET_TARGET_NODE] = ":NODE",
        [TACET_TARGET_LINK] = ":LINK",
        [TACET_TARGET_MOUNT] = ":MOUNT:AXIS",
        [TACET_TARGET_PLACE] = ":PLACE:AXIS",
        [TACET_TARGET_POINT] = ":POINT",
        [TACET_TARGET_MEMBER] = ":LOAD",
    };
    return forms[target];
}

size_t tacet_target_count(int target, const tacet_train *t, const tacet_body_def *body)
{
    if (target == TACET_TARGET_NODE) return t ? tacet_train_nodes(t) : 0;
    if (target == TACET_TARGET_LINK) return t ? tacet_train_links(t) : 0;
    if (!body || !tacet_body_def_given(body)) return 0;
    if (target == TACET_TARGET_MOUNT) return 3 * body->n_mounts;
    if (target == TACET_TARGET_PLACE) return 3 * body->n_places;
    if (target == TACET_TARGET_POINT) return body->n_points;
    return target == TACET_TARGET_MEMBER ? 6 : 0;
}

const char *tacet_target_text(int target, size_t i, const tacet_train *t,
                              const tacet_body_def *body, char out[TACET_QUANTITY_TEXT])
{
    if (target == TACET_TARGET_NODE) return tacet_train_node_name(t, i);
    if (target == TACET_TARGET_LINK) return tacet_train_link_name(t, i);
    if (target == TACET_TARGET_POINT) return body->points[i].name;
    if (target == TACET_TARGET_MEMBER) return members[i];
    const char *name =
        target == TACET_TARGET_MOUNT ? body->mounts[i / 3].name : body->places[i / 3].name;
    return tacet_text(out, TACET_QUANTITY_TEXT, "%s:%s", name ? name : "", axes[i % 3]);
}

const char *tacet_quantity_text(tacet_quantity_ref q, const tacet_train *t,
                                const tacet_body_def *body, char out[TACET_QUANTITY_TEXT])
{
    char target[TACET_QUANTITY_TEXT];
    if (q.what->target == TACET_TARGET_NONE) return q.what->name;
    return tacet_text(out, TACET_QUANTITY_TEXT, "%s:%s", q.what->name,
                      tacet_target_text(q.what->target, q.target, t, body, target));
}

const char *tacet_quantity_unit(tacet_quantity_ref q, const tacet_body_def *body)
{
    static const char *const sense[] = {[TACET_POINT_ACCELERATION] = "m/s2",
                                        [TACET_POINT_PRESSURE] = "Pa",
                                        [TACET_POINT_VELOCITY] = "m/s"};
    if (q.what->target == TACET_TARGET_POINT) return sense[body->points[q.target].sense];
    if (q.what->target == TACET_TARGET_MEMBER) return q.target < 3 ? "N" : "N m";
    return q.what->unit;
}

const char *tacet_limit_unit(const tacet_limit *l, const tacet_body_def *body)
{
    return l->statistic == TACET_STAT_DAMAGE ? "1/h" : tacet_quantity_unit(l->of, body);
}
