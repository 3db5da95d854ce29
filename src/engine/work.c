// Memory of one thread, and which halves a roll is made of.
#include "internal.h"
#include <stdlib.h>
#include <string.h>

// A pattern has at most TACET_PATTERN_LONGEST places; at each a cylinder sees one half down and one
// half up, for each charge factor.
#define HALVES_MOST (2u * TACET_PATTERN_LONGEST)

void tacet_engine_work_destroy(tacet_engine_work *w)
{
    if (!w) return;
    free(w->memo);
    free(w->group);
    free(w->kinds_memory);
    free(w->sum);
    free(w->wave);
    free(w->piece);
    free(w->sequence);
    free(w);
}

tacet_status tacet_engine_work_create(const tacet_engine *en, tacet_engine_work **out)
{
    tacet_engine_work *w = calloc(1, sizeof *w);
    if (!w) return TACET_NO_MEMORY;
    size_t kinds = en->table.n_kinds, numbers = en->table.n_charges * HALF_NUMBERS;
    w->engine = en;
    w->most_groups = 11 * en->n_factors; // skip and ten tenths each
    w->most_waves = w->most_pieces = HALVES_MOST * en->n_factors;
    w->sequence_most = 2u * en->n_slots * TACET_PATTERN_LONGEST;
    w->memo = calloc(kinds * numbers, sizeof *w->memo);
    w->group = calloc(w->most_groups, sizeof *w->group);
    w->kinds_memory = calloc(2 * kinds * w->most_groups, sizeof *w->kinds_memory);
    w->sum = calloc(w->most_groups * numbers, sizeof *w->sum);
    w->wave = malloc(w->most_waves * sizeof *w->wave);
    w->piece = malloc(w->most_pieces * sizeof *w->piece);
    w->sequence = calloc(w->sequence_most, sizeof *w->sequence);
    if (!en->prepared || !w->memo || !w->group || !w->kinds_memory || !w->sum || !w->wave ||
        !w->piece || !w->sequence) {
        tacet_engine_work_destroy(w);
        return en->prepared ? TACET_NO_MEMORY : TACET_BAD_INPUT;
    }
    for (unsigned g = 0; g < w->most_groups; g++) {
        w->group[g].used = w->kinds_memory + 2 * kinds * g;
        w->group[g].count = w->group[g].used + kinds;
    }
    *out = w;
    return TACET_OK;
}

tacet_status engine_suits(const tacet_engine *en, const tacet_roll *r, double speed_rad_per_s)
{
    if (!en->prepared || !isfinite(speed_rad_per_s)) return TACET_BAD_INPUT;
    if (r->cylinders != en->n_slots || r->strokes != en->def.strokes) return TACET_BAD_INPUT;
    return r->cycles <= TACET_PATTERN_LONGEST ? TACET_OK : TACET_BAD_INPUT;
}

double engine_share(const tacet_engine *en, const tacet_roll *r, unsigned slot, unsigned cycle)
{
    tacet_cycle c = tacet_roll_cycle(r, slot, cycle);
    double factor = en->slot[slot].charge_factor;
    if (c.tenths > 0) return factor * c.tenths / 10;
    if (c.skips == TACET_SKIPS_FOREVER || !en->table.halves.charge_of_fires) return factor;
    return factor * tacet_roll_cycle(r, slot, cycle + r->cycles - c.skips % r->cycles).tenths / 10;
}

static engine_group *group_of(tacet_engine_work *w, double share)
{
    for (unsigned g = 0; g < w->n_groups; g++)
        if (w->group[g].share == share) return &w->group[g];
    engine_group *g = &w->group[w->n_groups++];
    g->share = share;
    g->n_used = 0;
    memset(g->count, 0, w->engine->table.n_kinds * sizeof *g->count);
    return g;
}

static void count(engine_group *g, unsigned kind)
{
    if (g->count[kind]++ == 0) g->used[g->n_used++] = kind;
}

static bool may_run(const tacet_engine *en, const tacet_roll *r, unsigned slot, unsigned cycle)
{
    tacet_cycle c = tacet_roll_cycle(r, slot, cycle);
    return c.tenths > 0 || en->slot[slot].may_skip || (r->fault && c.skips == TACET_SKIPS_FOREVER);
}

tacet_reach engine_gather(const tacet_engine *en, const tacet_roll *r, tacet_engine_work *w)
{
    w->n_groups = 0;
    for (unsigned slot = 0; slot < r->cylinders; slot++)
        for (unsigned c = 0; c < r->cycles; c++) {
            unsigned up, down;
            if (!may_run(en, r, slot, c)) return TACET_REACH_CYLINDER;
            if (!halves_of_cycle(&en->table.halves, r, slot, c, &up, &down)) return TACET_REACH_RUN;
            engine_group *g = group_of(w, engine_share(en, r, slot, c));
            count(g, up);
            count(g, down);
        }
    return TACET_REACH_OK;
}

double engine_charge(const tacet_engine *en, const tacet_duty *d)
{
    return en->def.cycle.load_by == TACET_LOAD_CHARGE ? d->charge_Pa : d->charge_ratio;
}
