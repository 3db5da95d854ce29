// What it takes to meet a demand: the charge at which mean gas torque less friction is the demand.
#include "internal.h"
#include <string.h>

// A cylinder fires at tenths of the common charge; the least of them may not go below the lowest
// charge. Values at a charge are sums over groups of halves, each at its own share of it.
typedef struct {
    const tacet_engine *en;
    tacet_engine_work *w;
    double speed_rad_per_s, angle_rad; // of the repeat
    unsigned events;
} problem;

static void fill_memo(const tacet_engine *en, double speed, tacet_engine_work *w)
{
    if (w->memo_valid && memcmp(&w->memo_speed, &speed, sizeof speed) == 0) return;
    const table *t = &en->table;
    table_place at = table_at_speed(t, speed);
    for (size_t kind = 0; kind < t->n_kinds; kind++)
        for (size_t c = 0; c < t->n_charges; c++)
            table_numbers(t, kind, &at, c, w->memo + (kind * t->n_charges + c) * HALF_NUMBERS);
    w->memo_speed = speed;
    w->memo_valid = true;
}

static const double *memo(const tacet_engine_work *w, unsigned kind)
{
    return w->memo + kind * w->engine->table.n_charges * HALF_NUMBERS;
}

static double *sum_of(const tacet_engine_work *w, unsigned group)
{
    return w->sum + group * w->engine->table.n_charges * HALF_NUMBERS;
}

// Sums over the repeat at every charge node. The peak counts once a cycle, with its half down.
static void add_up(const problem *p)
{
    const table *t = &p->en->table;
    for (unsigned g = 0; g < p->w->n_groups; g++) {
        const engine_group *group = &p->w->group[g];
        double *sum = sum_of(p->w, g);
        memset(sum, 0, t->n_charges * HALF_NUMBERS * sizeof *sum);
        for (unsigned k = 0; k < group->n_used; k++) {
            unsigned kind = group->used[k];
            double times = group->count[kind];
            const double *x = memo(p->w, kind);
            bool up = halves_is_up(&t->halves, kind);
            for (size_t i = 0; i < t->n_charges * HALF_NUMBERS; i += HALF_NUMBERS)
                for (size_t j = 0; j < HALF_NUMBERS; j++)
                    if (j != HALF_PEAK || !up) sum[i + j] += times * x[i + j];
        }
    }
}

static void totals(const problem *p, double charge, double total[HALF_NUMBERS])
{
    const table *t = &p->en->table;
    memset(total, 0, HALF_NUMBERS * sizeof *total);
    for (unsigned g = 0; g < p->w->n_groups; g++) {
        table_place at = table_at_charge(t, charge * p->w->group[g].share);
        const double *sum = sum_of(p->w, g) + at.first * HALF_NUMBERS;
        for (size_t k = 0; k < at.n; k++)
            for (size_t j = 0; j < HALF_NUMBERS; j++)
                total[j] += at.weight[k] * sum[k * HALF_NUMBERS + j];
    }
}

static double friction(const problem *p, const double total[HALF_NUMBERS])
{
    const tacet_friction_def *f = &p->en->def.friction;
    double fmep = gas_fmep(f->constant_Pa, f->per_krpm_Pa, f->per_krpm2_Pa, f->per_mpa_peak_Pa,
                           p->speed_rad_per_s, total[HALF_PEAK] / p->events);
    return gas_mep_torque(fmep, p->en->displacement_m3, p->en->def.strokes);
}

static double brake(const problem *p, double charge)
{
    double total[HALF_NUMBERS];
    totals(p, charge, total);
    return total[HALF_WORK] / p->angle_rad - friction(p, total);
}

static double highest_peak(const problem *p, double charge, bool *in_skip)
{
    const table *t = &p->en->table;
    double highest = 0;
    for (unsigned g = 0; g < p->w->n_groups; g++) {
        const engine_group *group = &p->w->group[g];
        table_place at = table_at_charge(t, charge * group->share);
        for (unsigned k = 0; k < group->n_used; k++) {
            double peak = 0;
            const double *x = memo(p->w, group->used[k]) + at.first * HALF_NUMBERS + HALF_PEAK;
            for (size_t i = 0; i < at.n; i++)
                peak += at.weight[i] * x[i * HALF_NUMBERS];
            if (!(peak > highest)) continue;
            highest = peak;
            *in_skip = halves_is_skip(&t->halves, group->used[k]);
        }
    }
    return highest;
}

static double over_limit(const problem *p, double charge)
{
    bool in_skip;
    return highest_peak(p, charge, &in_skip) - p->en->def.cycle.peak_pressure_Pa;
}

// Charge at which f reaches `value` between low (f below it) and high (above): regula falsi with
// the Illinois weight, which always keeps the bracket.
static double charge_at(const problem *p, double (*f)(const problem *, double), double value,
                        double low, double high)
{
    double at_low = f(p, low) - value, at_high = f(p, high) - value, x = high;
    int side = 0;
    if (at_low == at_high) return low; // nothing fires: whatever the charge
    for (int i = 0; i < 200 && high - low > 1e-14 * high; i++) {
        x = low + (high - low) * at_low / (at_low - at_high);
        double y = f(p, x) - value;
        if (y == 0) return x;
        if (y < 0) {
            low = x, at_low = y;
            if (side < 0) at_high /= 2;
            side = -1;
        } else {
            high = x, at_high = y;
            if (side > 0) at_low /= 2;
            side = 1;
        }
        if (fabs(y) < 1e-13 * (1 + fabs(value))) return x;
    }
    return x;
}

// Range of the common charge: no fire below `lowest` or above `highest`, nor outside the table.
static void limits(const problem *p, const tacet_roll *r, double *low, double *high)
{
    const tacet_engine *en = p->en;
    double rpm = p->speed_rad_per_s * 60 / (2 * M_PI), least = INFINITY, most = 0;
    for (unsigned g = 0; g < p->w->n_groups; g++) {
        least = fmin(least, p->w->group[g].share);
        most = fmax(most, p->w->group[g].share);
    }
    *low = 0, *high = 1;
    if (en->def.cycle.load_by == TACET_LOAD_CHARGE) {
        unsigned tenths = 10;
        for (unsigned slot = 0; slot < r->cylinders; slot++)
            for (unsigned c = 0; c < r->cycles; c++) {
                unsigned own = tacet_roll_cycle(r, slot, c).tenths;
                if (own > 0 && own < tenths) tenths = own;
            }
        *high = engine_highest(&en->def.cycle, rpm);
        *low = engine_lowest(&en->def.cycle, rpm) * 10 / tenths;
    }
    if (en->def.cycle.kind != TACET_CYCLE_TRACES) return; // a computed table covers all of it
    *low = fmax(*low, en->table.charge[0] / least);
    *high = fmin(*high, en->table.charge[en->table.n_charges - 1] / most);
}

static void fill_duty(const problem *p, double charge, tacet_duty *out)
{
    double total[HALF_NUMBERS], per_s = p->speed_rad_per_s / p->angle_rad;
    double rpm = p->speed_rad_per_s * 60 / (2 * M_PI);
    const tacet_cycle_def *c = &p->en->def.cycle;
    double lowest = engine_lowest(c, rpm), highest = engine_highest(c, rpm);
    bool fuel = c->load_by == TACET_LOAD_FUEL;
    totals(p, charge, total);
    out->friction_Nm = friction(p, total);
    out->brake_torque_Nm = total[HALF_WORK] / p->angle_rad - out->friction_Nm;
    out->charge_Pa = fuel ? highest : charge;
    out->charge_ratio = fuel ? charge : (charge - lowest) / (highest - lowest);
    out->fuel_W = total[HALF_FUEL] * per_s;
    out->fuel_kg_per_s = out->fuel_W / c->lower_heating_value_J_per_kg;
    out->gross_W = (total[HALF_WORK] + total[HALF_PUMPING]) * per_s;
    out->pumping_W = total[HALF_PUMPING] * per_s;
    out->friction_W = out->friction_Nm * p->speed_rad_per_s;
    out->brake_W = out->brake_torque_Nm * p->speed_rad_per_s;
    out->wall_heat_W = total[HALF_WALL] * per_s;
    out->exhaust_W = (total[HALF_VALVE] + total[HALF_STORED]) * per_s;
    out->blow_by_W = total[HALF_RING] * per_s;
    out->peak_pressure_Pa = highest_peak(p, charge, &out->peak_in_skip);
}

// The charge between the limits that meets the demand, or the nearest one and which limit it is.
static double find(const problem *p, double demand, double low, double high, tacet_reach *reach)
{
    double most = high;
    *reach = TACET_REACH_OK;
    if (isfinite(p->en->def.cycle.peak_pressure_Pa) && over_limit(p, high) > 0) {
        if (over_limit(p, low) > 0) {
            *reach = TACET_REACH_PEAK_PRESSURE;
            return low;
        }
        most = charge_at(p, over_limit, 0, low, high);
    }
    if (demand < brake(p, low)) {
        *reach = TACET_REACH_TOO_LOW;
        return low;
    }
    if (demand > brake(p, most)) {
        *reach = most < high && demand <= brake(p, high) ? TACET_REACH_PEAK_PRESSURE
                                                         : TACET_REACH_TOO_HIGH;
        return most;
    }
    return charge_at(p, brake, demand, low, most);
}

static tacet_status unreachable(tacet_reach reach, tacet_duty *out)
{
    *out = (tacet_duty){.reach = reach,
                        .charge_Pa = NAN,
                        .charge_ratio = NAN,
                        .brake_torque_Nm = NAN,
                        .friction_Nm = NAN,
                        .fuel_kg_per_s = NAN,
                        .fuel_W = NAN,
                        .gross_W = NAN,
                        .pumping_W = NAN,
                        .friction_W = NAN,
                        .wall_heat_W = NAN,
                        .exhaust_W = NAN,
                        .blow_by_W = NAN,
                        .brake_W = NAN,
                        .peak_pressure_Pa = NAN};
    return TACET_OK;
}

tacet_status tacet_engine_duty(const tacet_engine *en, const tacet_roll *r, double speed_rad_per_s,
                               double demand_Nm, tacet_engine_work *w, tacet_duty *out)
{
    tacet_status status = engine_suits(en, r, speed_rad_per_s);
    if (status != TACET_OK) return status;
    if (!isfinite(demand_Nm)) return TACET_BAD_INPUT;
    if (speed_rad_per_s < en->lowest_rad_per_s || speed_rad_per_s > en->highest_rad_per_s)
        return unreachable(TACET_REACH_SPEED, out);
    tacet_reach reach = engine_gather(en, r, w);
    if (reach != TACET_REACH_OK) return unreachable(reach, out);
    problem p = {en, w, speed_rad_per_s, M_PI * r->strokes * r->cycles, r->cylinders * r->cycles};
    fill_memo(en, speed_rad_per_s, w);
    add_up(&p);
    double low, high, charge;
    limits(&p, r, &low, &high);
    if (low > high) { // a fire at tenths would lie below the lowest charge
        charge = high;
        reach = TACET_REACH_TOO_LOW;
    } else {
        charge = find(&p, demand_Nm, low, high, &reach);
    }
    *out = (tacet_duty){.reachable = reach == TACET_REACH_OK, .reach = reach};
    fill_duty(&p, charge, out);
    bool finite = isfinite(out->brake_torque_Nm) && isfinite(out->fuel_W) && isfinite(charge);
    return finite ? TACET_OK : TACET_NOT_FINITE;
}
