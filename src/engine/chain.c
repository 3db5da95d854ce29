// The chain of halves at one running condition, and the state of a cylinder that never fires.
#include "halves.h"
#include <string.h>

#define CYCLES_MOST 200
#define SAME_GAS    1e-11 // relative change at which an engine that fires on has settled
#define SETTLED     1e-9  // .. at which a run of skips goes on unchanged

typedef struct {
    const cylinder *c;
    const cylinder_run *r;
    const halves *h;
    halves_store *store;
    void *who;
    cylinder_half half; // of the last run
    double number[HALF_NUMBERS];
    double peak_up_Pa; // of the half up before a half down
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
    k->store(k->who, kind, k->number, k->half.pressure_Pa);
    return true;
}

static double change(const cylinder_gas *a, const cylinder_gas *b)
{
    return fmax(fabs(a->mass_kg / b->mass_kg - 1), fabs(a->energy_J / b->energy_J - 1));
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
        if (moved < SAME_GAS) return TACET_OK;
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

// Newton's method on the gas (mass, energy) that a revolution leaves as it was, with differences
// for derivatives. Without flow past the rings the mass is the one it came with.
static tacet_status settle_idle(chain *k, cylinder_gas *gas)
{
    bool closed = k->c->blow_by_m2 == 0 && !k->h->open;
    for (int i = 0; i < 40; i++) {
        cylinder_gas at = *gas, dm = *gas, de = *gas;
        double hm = 1e-6 * gas->mass_kg, he = 1e-6 * fabs(gas->energy_J) + 1e-9;
        dm.mass_kg += hm;
        dm.energy_J *= 1 + 1e-6;
        de.energy_J += he;
        if (!idle(k, &at) || !idle(k, &dm) || !idle(k, &de)) return TACET_NOT_FINITE;
        double fm = at.mass_kg - gas->mass_kg, fe = at.energy_J - gas->energy_J;
        // columns: along (mass, energy) together, and along energy
        double a11 = (dm.mass_kg - at.mass_kg) / hm - 1;
        double a21 = (dm.energy_J - at.energy_J) / hm - gas->energy_J / gas->mass_kg;
        double a12 = (de.mass_kg - at.mass_kg) / he, a22 = (de.energy_J - at.energy_J) / he - 1;
        double det = a11 * a22 - a12 * a21, s = 0, t = -fe / a22;
        if (!closed) s = (a12 * fe - a22 * fm) / det, t = (a21 * fm - a11 * fe) / det;
        s = fmax(s, -0.5 * gas->mass_kg);
        double energy = gas->energy_J + s * gas->energy_J / gas->mass_kg + t;
        cylinder_gas next = *gas;
        next.mass_kg += s;
        next.energy_J = energy;
        next.late_Pa = at.late_Pa;
        if (!isfinite(next.energy_J)) return TACET_NOT_FINITE;
        double moved = change(&next, gas);
        *gas = next;
        if (moved < SETTLED) return TACET_OK;
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

tacet_status halves_chain(const cylinder *c, const cylinder_run *r, const halves *h,
                          cylinder_gas *start, cylinder_gas *never, halves_store *store, void *who)
{
    chain k = {.c = c, .r = r, .h = h, .store = store, .who = who};
    tacet_status status = settle_fires(&k, start);
    if (status != TACET_OK) return status;
    cylinder_gas gas = *start;
    if (!fire(&k, 0, &gas)) return TACET_NOT_FINITE;
    for (unsigned j = 1; j <= h->longest; j++)
        if (!skip(&k, j, &gas)) return TACET_NOT_FINITE;
    return never_fires(&k, &gas, never);
}
