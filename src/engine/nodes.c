#include "nodes.h"
#include "internal.h"
#include <string.h>

// A range of speeds narrower than this share of its middle is widened to it, so that nodes differ.
#define LEAST_RANGE 0.02
// Bends nearer to one another than this share of the range count as one.
#define LEAST_APART 1e-6

typedef struct {
    double at[TABLE_BENDS + 2]; // rad/s, with both ends of the range
    size_t n;
} bends;

static void insert(bends *b, double speed)
{
    size_t i = 0;
    double apart = LEAST_APART * (b->at[b->n - 1] - b->at[0]);
    while (i < b->n && b->at[i] < speed - apart)
        i++;
    bool outside = i == 0 || i == b->n, known = !outside && b->at[i] <= speed + apart;
    if (outside || known || b->n == TABLE_BENDS + 2) return;
    memmove(b->at + i + 1, b->at + i, (b->n - i) * sizeof *b->at);
    b->at[i] = speed;
    b->n++;
}

// Speeds at which the running condition of a cycle bends.
static bends bends_of(const tacet_cycle_def *c, double low, double high)
{
    bends b = {{low, high}, 2};
    const tacet_curve *curves[] = {&c->mid_burn_rad, &c->burn_10_90_rad, &c->air_fuel_ratio,
                                   c->load_by == TACET_LOAD_FUEL ? &c->highest_Pa : NULL};
    for (size_t k = 0; k < 4; k++)
        for (size_t i = 0; curves[k] && i < curves[k]->n; i++)
            insert(&b, curves[k]->x[i] * 2 * M_PI / 60);
    return b;
}

static size_t intervals(const bends *b, size_t k)
{
    double share = (b->at[k + 1] - b->at[k]) / (b->at[b->n - 1] - b->at[0]);
    size_t n = (size_t)ceil(TABLE_SPEEDS * share - 1e-9);
    return n > TABLE_BETWEEN || b->n == 2 ? n : TABLE_BETWEEN;
}

static void place_speeds(table *t, const bends *b)
{
    size_t first = 0;
    t->n_bends = b->n;
    for (size_t k = 0; k + 1 < b->n; k++) {
        size_t n = intervals(b, k);
        table_nodes(t->speed_rad_per_s + first, n + 1, b->at[k], b->at[k + 1]);
        t->bend[k] = first;
        first += n;
    }
    t->bend[b->n - 1] = first;
}

static void widen(const tacet_engine *en, double speed, double factor, double range[2])
{
    double rpm = speed * 60 / (2 * M_PI);
    range[0] = fmin(range[0], factor * engine_lowest(&en->def.cycle, rpm));
    range[1] = fmax(range[1], factor * engine_highest(&en->def.cycle, rpm));
}

// Lowest and highest charge that any cylinder may see at any speed: curves have their extremes at
// their points and at the ends of the range.
static void charge_range(const tacet_engine *en, double low, double high, double range[2])
{
    const tacet_cycle_def *c = &en->def.cycle;
    const tacet_curve *curves[] = {&c->lowest_Pa, &c->highest_Pa};
    double most = 0;
    range[0] = INFINITY, range[1] = 0;
    for (unsigned s = 0; s < en->n_slots; s++) {
        double factor = en->slot[s].charge_factor;
        most = fmax(most, factor);
        widen(en, low, factor, range);
        widen(en, high, factor, range);
        for (size_t k = 0; k < 2; k++)
            for (size_t i = 0; i < curves[k]->n; i++) {
                double speed = curves[k]->x[i] * 2 * M_PI / 60;
                if (speed > low && speed < high) widen(en, speed, factor, range);
            }
    }
    if (c->load_by == TACET_LOAD_FUEL) range[0] = 0, range[1] = most;
}

tacet_status nodes_compute(tacet_engine *en, double lowest_rad_per_s, double highest_rad_per_s,
                           unsigned longest_run, tacet_error *e)
{
    double middle = (lowest_rad_per_s + highest_rad_per_s) / 2, least = LEAST_RANGE / 2 * middle;
    double low = fmin(lowest_rad_per_s, middle - least),
           high = fmax(highest_rad_per_s, middle + least);
    bends b = bends_of(&en->def.cycle, low, high);
    size_t n_speeds = 1;
    for (size_t k = 0; k + 1 < b.n; k++)
        n_speeds += intervals(&b, k);
    unsigned steps = cylinder_steps(&en->cyl, low);
    if (steps == 0)
        return tacet_fail(
            e, TACET_BAD_INPUT,
            "cycle.blow_by_area_mm2: %.6g; past rings this wide the gas at top leaves "
            "within a degree at %.6g rpm, which is not computed",
            en->cyl.blow_by_m2 * 1e6, low * 60 / (2 * M_PI));
    halves h = halves_of(en->def.skip.trapped, longest_run, en->exhaust_first);
    tacet_status status = table_create(&en->table, &h, CYLINDER_SAMPLES, n_speeds, TABLE_CHARGES);
    if (status == TACET_OK) status = cylinder_grid(&en->cyl, steps);
    if (status != TACET_OK) return tacet_fail(e, status, "no memory for the cycle table");
    double range[2];
    place_speeds(&en->table, &b);
    charge_range(en, low, high, range);
    table_nodes(en->table.charge, TABLE_CHARGES, range[0], range[1]);
    return table_compute(&en->table, &en->cyl, &en->def, e);
}
