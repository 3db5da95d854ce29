// The engine: create, destroy, what it is, and the cycle table.
#include "internal.h"
#include "nodes.h"
#include "traces.h"
#include <stdlib.h>
#include <string.h>

static void hear(void *who, bool warning, const char *path, const char *text)
{
    tacet_error *e = who;
    if (warning || e->status != TACET_OK) return;
    (void)tacet_fail(e, TACET_BAD_INPUT, "%s: %s", path, text);
}

static bool listed(const tacet_skip_def *s, unsigned number)
{
    for (size_t i = 0; i < s->n_cylinders; i++)
        if (s->cylinders[i] == number) return true;
    return s->n_cylinders == 0;
}

static void fill_slots(tacet_engine *en)
{
    const tacet_engine_def *d = &en->def;
    en->n_slots = (unsigned)d->n_cylinders;
    for (unsigned i = 0; i < en->n_slots; i++) {
        engine_slot *s = &en->slot[i];
        tacet_cylinder_def c = engine_cylinder(d, d->firing_order[i]);
        *s = (engine_slot){.number = c.number,
                           .firing_rad = engine_firing_angle(d, i),
                           .charge_factor = c.charge_factor,
                           .may_skip = listed(&d->skip, c.number)};
        if (c.node)
            tacet_text(s->node, sizeof s->node, "%s", c.node);
        else
            tacet_text(s->node, sizeof s->node, "throw%u", c.number);
        bool seen = false;
        for (unsigned j = 0; j < i; j++)
            seen = seen || en->slot[j].charge_factor == c.charge_factor;
        en->n_factors += !seen;
    }
}

tacet_status tacet_engine_create(const tacet_engine_def *d, tacet_engine **out, tacet_error *e)
{
    tacet_error first = {0};
    tacet_reporter r = {hear, &first};
    tacet_engine_def_check(d, &r);
    if (first.status != TACET_OK) {
        if (e) *e = first;
        return first.status;
    }
    tacet_engine *en = calloc(1, sizeof *en);
    if (!en) return tacet_fail(e, TACET_NO_MEMORY, "no memory for the engine");
    en->def = *d;
    en->cyl = cylinder_of(d);
    fill_slots(en);
    engine_geometry(en);
    if (!isfinite(en->mean_inertia_kgm2) || !isfinite(en->displacement_m3)) {
        free(en);
        return tacet_fail(e, TACET_BAD_INPUT, "the engine's dimensions are not finite");
    }
    *out = en;
    return TACET_OK;
}

void tacet_engine_destroy(tacet_engine *en)
{
    if (!en) return;
    cylinder_clear(&en->cyl);
    table_clear(&en->table);
    free(en);
}

unsigned tacet_engine_cylinders(const tacet_engine *en)
{
    return en->n_slots;
}

unsigned tacet_engine_strokes(const tacet_engine *en)
{
    return en->def.strokes;
}

double tacet_engine_displacement(const tacet_engine *en)
{
    return en->displacement_m3;
}

unsigned tacet_engine_number(const tacet_engine *en, unsigned slot)
{
    return en->slot[slot].number;
}

double tacet_engine_firing_angle(const tacet_engine *en, unsigned slot)
{
    return en->slot[slot].firing_rad;
}

tacet_cylinder_def tacet_engine_cylinder(const tacet_engine *en, unsigned slot)
{
    return engine_cylinder(&en->def, en->slot[slot].number);
}

const char *tacet_engine_node(const tacet_engine *en, unsigned slot)
{
    return en->slot[slot].node;
}

bool tacet_engine_may_skip(const tacet_engine *en, unsigned slot)
{
    return en->slot[slot].may_skip;
}

const tacet_slider *tacet_engine_slider(const tacet_engine *en)
{
    return &en->cyl.slider;
}

double tacet_engine_mean_inertia(const tacet_engine *en)
{
    return en->mean_inertia_kgm2;
}

const tacet_engine_def *tacet_engine_def_of(const tacet_engine *en)
{
    return &en->def;
}

tacet_status tacet_engine_prepare(tacet_engine *en, double lowest_rad_per_s,
                                  double highest_rad_per_s, unsigned longest_run, tacet_error *e)
{
    if (!(lowest_rad_per_s > 0 && lowest_rad_per_s <= highest_rad_per_s &&
          isfinite(highest_rad_per_s)))
        return tacet_fail(e, TACET_BAD_INPUT,
                          "speeds from %g to %g rad/s; from above 0, rising, is allowed",
                          lowest_rad_per_s, highest_rad_per_s);
    if (longest_run > TACET_ENGINE_RUN_MOST)
        return tacet_fail(e, TACET_BAD_INPUT, "runs of %u skips; at most %d are allowed",
                          longest_run, TACET_ENGINE_RUN_MOST);
    table_clear(&en->table);
    en->prepared = false;
    tacet_status status =
        en->def.cycle.kind == TACET_CYCLE_TRACES
            ? traces_table(en, longest_run, e)
            : nodes_compute(en, lowest_rad_per_s, highest_rad_per_s, longest_run, e);
    if (status != TACET_OK) {
        table_clear(&en->table);
        return status;
    }
    const table *t = &en->table;
    // traces of one speed, or of none stated, serve all
    bool bounded = en->def.cycle.kind == TACET_CYCLE_TRACES && t->n_speeds > 1;
    en->lowest_rad_per_s = lowest_rad_per_s;
    en->highest_rad_per_s = highest_rad_per_s;
    if (bounded) {
        en->lowest_rad_per_s = fmax(lowest_rad_per_s, t->speed_rad_per_s[0]);
        en->highest_rad_per_s = fmin(highest_rad_per_s, t->speed_rad_per_s[t->n_speeds - 1]);
    }
    en->prepared = true;
    return TACET_OK;
}
