// The chain of halves at one running condition, and the state of a cylinder that never fires.
#include "halves.h"
#include <string.h>

#define CYCLES_MOST 200
#define SAME_GAS    1e-11 // relative change at which an engine that fires on has settled
#define SETTLED     1e-9  // .. at which a run of skips goes on unchanged
// Where flow in the inlet port turns within a step of the cycle, its gas may jump by some 1e-6 with
// the gas at its start, and no cycle need come nearer to itself than that.
#define PATIENCE 30
#define TURNING  1e-5

typedef struct {
    const cylinder *c;
    const cylinder_run *r;
    const halves *h;
    halves_store *store;
    void *who;
    cylinder_half half; // of the last run
    double number[HALF_NUMBERS];
    double peak_up_Pa; // of the half up before a half down
    unsigned bank;     // first kind of the bank in hand
} chain;

static bool run(chain *k, cylinder_rule rule, cylinder_gas *gas)
{
    double before = cylinder_stored(k->c, gas);
    if (!cylinder_run_half(k->c, k->r, rule, gas, &k->half)) return false;
    const cylinder_half *half = &k->half;
    k->number[HALF_WORK] = half->work_J[0] + half->work_J[1];
    k->number[HALF_PUMPING] = -half->work_J[rule.up ? 0 : 1];
    k->number[HALF_WALL] = half->wall_J;
    k->number[HALF_VALVE] = half->valve_J;
    k->number[HALF_RING] = half->ring_J;
    k->number[HALF_STORED] = cylinder_stored(k->c, gas) - before;
    k->number[HALF_FUEL] = half->fuel_J;
    if (rule.up) k->peak_up_Pa = half->peak_Pa;
    k->number[HALF_PEAK] = fmax(k->peak_up_Pa, half->peak_Pa);
    return true;
}

static bool run_and_store(chain *k, cylinder_rule rule, cylinder_gas *gas, unsigned kind)
{
    if (!run(k, rule, gas)) return false;
    k->store(k->who, k->bank + kind, k->number, k->half.pressure_Pa);
    return true;
}

// Relative change; of energy in terms of that of gas at about room temperature over absolute zero,
// as the zero of energy is an arbitrary one.
#define ENERGY_SCALE 2e5 // J/kg
static double change(const cylinder_gas *a, const cylinder_gas *b)
{
    return fmax(fabs(a->mass_kg / b->mass_kg - 1),
                fabs(a->energy_J - b->energy_J) / (b->mass_kg * ENERGY_SCALE));
}

// Cycles of an engine that fires on, until its gas at gas-exchange top repeats.
static tacet_status settle_fires(chain *k, cylinder_gas *start)
{
    for (int i = 0; i < CYCLES_MOST; i++) {
        cylinder_gas gas = *start;
        if (!run(k, halves_rule_up_fire(), &gas)) return TACET_NOT_FINITE;
        if (!run(k, halves_rule_down_fire(k->h, true), &gas)) return TACET_NOT_FINITE;
        double moved = change(&gas, start);
        *start = gas;
        if (moved < (i < PATIENCE ? SAME_GAS : TURNING)) return TACET_OK;
    }
    return TACET_NOT_CONVERGED;
}

// A fire after `skips` skipped cycles, from the gas at gas-exchange top. The gas after it, for the
// case that the next cycle skips, in `gas`.
static bool fire(chain *k, unsigned skips, cylinder_gas *gas)
{
    const halves *h = k->h;
    if (!run_and_store(k, halves_rule_up_fire(), gas, halves_up_fire(h, skips))) return false;
    cylinder_gas next = *gas;
    if (h->fire_next &&
        !run_and_store(k, halves_rule_down_fire(h, true), &next, halves_down_fire(h, skips, true)))
        return false;
    return run_and_store(k, halves_rule_down_fire(h, false), gas,
                         halves_down_fire(h, skips, false));
}

// The j-th skipped cycle of a run, and the fire that may follow it.
static bool skip(chain *k, unsigned j, cylinder_gas *gas)
{
    const halves *h = k->h;
    if (!run_and_store(k, halves_rule_up_skip(h, j), gas, halves_up_skip(h, j))) return false;
    cylinder_gas back = *gas;
    if (h->skip_next &&
        !run_and_store(k, halves_rule_down_skip(h, true), &back, halves_down_skip(h, j, true)))
        return false;
    if (!run_and_store(k, halves_rule_down_skip(h, false), gas, halves_down_skip(h, j, false)))
        return false;
    if (!h->skip_next) back = *gas;
    return j > h->longest || fire(k, j, &back);
}

// One revolution (valves shut) or cycle (open) of a cylinder that never fires.
static bool idle(chain *k, cylinder_gas *gas)
{
    unsigned forever = k->h->longest + 1;
    if (!run(k, halves_rule_up_skip(k->h, forever), gas)) return false;
    return !k->h->open || run(k, halves_rule_down_skip(k->h, false), gas);
}

// Change of mass and energy of the gas over a revolution, and over one with more mass at the same
// temperature (per kg) and one with more energy (per J), by differences.
typedef struct {
    double mass, energy, mass_by_mass, energy_by_mass, mass_by_energy, energy_by_energy;
    double late_Pa;
} idle_change;

static bool idle_changes(chain *k, const cylinder_gas *gas, idle_change *out)
{
    cylinder_gas at = *gas, dm = *gas, de = *gas;
    double hm = 1e-6 * gas->mass_kg, he = 1e-6 * gas->mass_kg * ENERGY_SCALE;
    dm.mass_kg += hm;
    dm.energy_J *= 1 + 1e-6;
    de.energy_J += he;
    if (!idle(k, &at) || !idle(k, &dm) || !idle(k, &de)) return false;
    *out = (idle_change){.mass = at.mass_kg - gas->mass_kg,
                         .energy = at.energy_J - gas->energy_J,
                         .mass_by_mass = (dm.mass_kg - at.mass_kg) / hm - 1,
                         .energy_by_mass =
                             (dm.energy_J - at.energy_J) / hm - gas->energy_J / gas->mass_kg,
                         .mass_by_energy = (de.mass_kg - at.mass_kg) / he,
                         .energy_by_energy = (de.energy_J - at.energy_J) / he - 1,
                         .late_Pa = at.late_Pa};
    return true;
}

// Newton's method on the gas that a revolution leaves as it was; a step changes mass by a half and
// energy by a quarter at most. Without flow past the rings the mass is the one it came with.
static tacet_status settle_idle(chain *k, cylinder_gas *gas)
{
    bool closed = k->c->blow_by_m2 == 0 && !k->h->open;
    for (int i = 0; i < 60; i++) {
        idle_change f;
        if (!idle_changes(k, gas, &f)) return TACET_NOT_FINITE;
        double det = f.mass_by_mass * f.energy_by_energy - f.mass_by_energy * f.energy_by_mass;
        double dm = (f.mass_by_energy * f.energy - f.energy_by_energy * f.mass) / det;
        double de = (f.energy_by_mass * f.mass - f.mass_by_mass * f.energy) / det;
        if (closed) dm = 0, de = -f.energy / f.energy_by_energy;
        // gas that never gets up to crankcase pressure only gains mass, at a rate of its own
        if (!closed && !(-10 * f.mass_by_mass * gas->mass_kg > fabs(f.mass)))
            dm = copysign(0.5 * gas->mass_kg, f.mass), de = 0;
        double most =
            fmax(fabs(dm) / (0.5 * gas->mass_kg), fabs(de) / (0.25 * ENERGY_SCALE * gas->mass_kg));
        double part = most > 1 ? 1 / most : 1;
        cylinder_gas next = *gas;
        next.energy_J += part * (dm * gas->energy_J / gas->mass_kg + de);
        next.mass_kg += part * dm;
        next.late_Pa = f.late_Pa;
        if (!isfinite(next.energy_J)) return TACET_NOT_FINITE;
        double moved = change(&next, gas);
        *gas = next;
        if (moved < (i < PATIENCE ? SETTLED : TURNING)) return TACET_OK;
    }
    return TACET_NOT_CONVERGED;
}

// A cylinder that never fires. With valves shut and flow past the rings its gas forgets where it
// came from, so that the gas found at one charge serves all of the same speed.
static tacet_status never_fires(chain *k, const cylinder_gas *after_run, cylinder_gas *never)
{
    bool known = never->mass_kg > 0 && !k->h->open && k->c->blow_by_m2 > 0;
    cylinder_gas gas = known ? *never : *after_run;
    if (!known) {
        tacet_status status = settle_idle(k, &gas);
        if (status != TACET_OK) return status;
        *never = gas;
    }
    return skip(k, k->h->longest + 1, &gas) ? TACET_OK : TACET_NOT_FINITE;
}

// Cycles of a cylinder that fires and skips by turns, until its gas repeats: `gas` is that after a
// skip, at gas-exchange top.
static tacet_status settle_turns(chain *k, cylinder_gas *gas)
{
    for (int i = 0; i < CYCLES_MOST; i++) {
        cylinder_gas before = *gas;
        if (!run(k, halves_rule_up_fire(), gas) ||
            !run(k, halves_rule_down_fire(k->h, false), gas) ||
            !run(k, halves_rule_up_skip(k->h, 1), gas) ||
            !run(k, halves_rule_down_skip(k->h, true), gas))
            return TACET_NOT_FINITE;
        if (change(gas, &before) < (i < PATIENCE ? SAME_GAS : TURNING)) return TACET_OK;
    }
    return TACET_NOT_CONVERGED;
}

static tacet_status runs_of_skips(chain *k, cylinder_gas *gas)
{
    for (unsigned j = 1; j <= k->h->longest; j++)
        if (!skip(k, j, gas)) return TACET_NOT_FINITE;
    return TACET_OK;
}

// The second bank: runs after a fire that itself followed a skip.
static tacet_status runs_again(chain *k)
{
    cylinder_gas gas = cylinder_fill(k->c, k->c->exhaust_Pa, 1000);
    tacet_status status = settle_turns(k, &gas);
    if (status != TACET_OK) return status;
    if (!run(k, halves_rule_up_fire(), &gas) || !run(k, halves_rule_down_fire(k->h, false), &gas))
        return TACET_NOT_FINITE;
    k->bank = halves_bank(k->h);
    status = runs_of_skips(k, &gas);
    k->bank = 0;
    return status;
}

tacet_status halves_chain(const cylinder *c, const cylinder_run *r, const halves *h,
                          cylinder_gas *start, cylinder_gas *never, halves_store *store, void *who)
{
    chain k = {.c = c, .r = r, .h = h, .store = store, .who = who};
    tacet_status status = settle_fires(&k, start);
    if (status != TACET_OK) return status;
    cylinder_gas gas = *start;
    if (!fire(&k, 0, &gas)) return TACET_NOT_FINITE;
    status = runs_of_skips(&k, &gas);
    if (status == TACET_OK && h->again && h->longest > 0) status = runs_again(&k);
    return status == TACET_OK ? never_fires(&k, &gas, never) : status;
}
