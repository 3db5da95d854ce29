// What cannot be, and what is unusual, in the definition of an engine.
#include "internal.h"
#include <math.h>
#include <string.h>

#define DEG     (M_PI / 180)
#define ERROR   false
#define WARNING true

// Angles that the file states in whole degrees or with a few decimals agree within this, rad.
#define ANGLE_TOLERANCE (0.05 * DEG)

// Usual ranges: common practice, no source.
#define LEAST_ROD_RATIO       2.2 // rod over crank radius
#define MOST_ROD_RATIO        6.0
#define LEAST_STROKE_RATIO    0.55 // stroke over bore
#define MOST_STROKE_RATIO     4.5
#define LEAST_PISTON_DENSITY  150.0 // reciprocating mass over bore^3, kg/m3
#define MOST_PISTON_DENSITY   5000.0
#define LEAST_COMPRESSION     7.0
#define MOST_COMPRESSION      23.0
#define LOWEST_EFFICIENT_HEAT 10e6 // J/kg, below every fuel in use
#define HIGHEST_HEAT          121e6
// Heat of the fuel that air can burn: about 3 MJ for each kg of air, hydrogen 3.5 (stoichiometric
// mixtures; common practice, no source). All fuel burns in the model, so more is unusual.
#define MOST_HEAT_OF_AIR 3.6e6

static bool holds(const tacet_engine_def *d, unsigned number)
{
    for (size_t i = 0; i < d->n_cylinders; i++)
        if (d->firing_order[i] == number) return true;
    return false;
}

static bool check_firing_order(const tacet_engine_def *d, const tacet_reporter *r)
{
    const char *path = "engine.firing_order";
    if (d->n_cylinders < 1 || d->n_cylinders > TACET_ENGINE_CYLINDERS_MOST) {
        tacet_report(r, ERROR, path, "%zu cylinders; 1 to %d are allowed", d->n_cylinders,
                     TACET_ENGINE_CYLINDERS_MOST);
        return false;
    }
    for (unsigned number = 1; number <= d->n_cylinders; number++)
        if (!holds(d, number)) {
            tacet_report(r, ERROR, path,
                         "%zu cylinders, and cylinder %u is missing; each number from 1 to %zu "
                         "stands once",
                         d->n_cylinders, number, d->n_cylinders);
            return false;
        }
    return true;
}

static void check_intervals(const tacet_engine_def *d, const tacet_reporter *r)
{
    const char *path = "engine.firing_intervals_deg";
    if (d->n_intervals == 0) return;
    if (d->n_intervals != d->n_cylinders) {
        tacet_report(r, ERROR, path, "%zu intervals; one for each of %zu firings are needed",
                     d->n_intervals, d->n_cylinders);
        return;
    }
    double sum = 0, cycle = M_PI * d->strokes;
    for (size_t i = 0; i < d->n_intervals; i++)
        sum += d->firing_intervals_rad[i];
    if (!(fabs(sum - cycle) <= ANGLE_TOLERANCE))
        tacet_report(r, ERROR, path, "intervals add up to %.6g degrees; a cycle has %.0f",
                     sum / DEG, cycle / DEG);
}

static void check_cylinders(const tacet_engine_def *d, const tacet_reporter *r)
{
    for (size_t i = 0; i < d->n_cylinder_defs; i++) {
        char path[64];
        tacet_text(path, sizeof path, "engine.cylinders[%zu].number", i);
        unsigned number = d->cylinders[i].number;
        if (!holds(d, number))
            tacet_report(r, ERROR, path, "cylinder %u is not in the firing order", number);
        for (size_t j = 0; j < i; j++)
            if (d->cylinders[j].number == number)
                tacet_report(r, ERROR, path, "cylinder %u stands twice", number);
    }
}

// Where the crank pin of the cylinder in a slot lies at angle 0, in the direction of rotation from
// vertical. A cylinder's pin points along its bank at its own piston top; a bank that is positive
// against a clockwise rotation lies behind the vertical of a clockwise crank.
static double pin_angle(const tacet_engine_def *d, size_t slot)
{
    double bank = engine_cylinder(d, d->firing_order[slot]).bank_rad;
    return (d->rotation == 0 ? -bank : bank) - engine_firing_angle(d, slot);
}

static void node_name(const tacet_engine_def *d, size_t slot, char out[64])
{
    tacet_cylinder_def c = engine_cylinder(d, d->firing_order[slot]);
    if (c.node)
        tacet_text(out, 64, "%s", c.node);
    else
        tacet_text(out, 64, "throw%u", c.number);
}

// Cylinders on one node share a pin: their piston tops and banks must say the same of it.
static void check_pins(const tacet_engine_def *d, const tacet_reporter *r)
{
    for (size_t i = 0; i < d->n_cylinders; i++)
        for (size_t j = 0; j < i; j++) {
            char here[64], there[64];
            node_name(d, i, here);
            node_name(d, j, there);
            if (strcmp(here, there) != 0) continue;
            double apart = remainder(pin_angle(d, i) - pin_angle(d, j), 2 * M_PI);
            if (fabs(apart) <= ANGLE_TOLERANCE) continue;
            tacet_report(r, ERROR, "engine.firing_order",
                         "cylinders %u and %u drive %s, but firing order, intervals and banks put "
                         "their pins %.6g degrees apart; give split pins a node each",
                         d->firing_order[j], d->firing_order[i], here, fabs(apart) / DEG);
            return;
        }
}

static void check_geometry(const tacet_engine_def *d, const tacet_reporter *r)
{
    double crank = d->stroke_m / 2, offset = fabs(d->pin_offset_m);
    if (!(d->rod_length_m > crank + offset)) {
        tacet_report(r, ERROR, "engine.rod_length_mm",
                     "a rod of %.6g mm; longer than the crank radius and the pin offset together, "
                     "%.6g mm, is needed",
                     d->rod_length_m * 1e3, (crank + offset) * 1e3);
        return;
    }
    double ratio = d->rod_length_m / crank;
    if (ratio < LEAST_ROD_RATIO || ratio > MOST_ROD_RATIO)
        tacet_report(r, WARNING, "engine.rod_length_mm",
                     "the rod is %.3g crank radii long; %g to %g is usual", ratio, LEAST_ROD_RATIO,
                     MOST_ROD_RATIO);
    ratio = d->stroke_m / d->bore_m;
    if (ratio < LEAST_STROKE_RATIO || ratio > MOST_STROKE_RATIO)
        tacet_report(r, WARNING, "engine.stroke_mm", "the stroke is %.3g bores; %g to %g is usual",
                     ratio, LEAST_STROKE_RATIO, MOST_STROKE_RATIO);
    if (offset > 0.1 * d->bore_m)
        tacet_report(r, WARNING, "engine.pin_offset_mm",
                     "the pin offset is %.3g of the bore; below 0.1 is usual", offset / d->bore_m);
    double density = d->reciprocating_mass_kg / pow(d->bore_m, 3);
    if (density < LEAST_PISTON_DENSITY || density > MOST_PISTON_DENSITY)
        tacet_report(r, WARNING, "engine.reciprocating_mass_kg",
                     "%.3g kg at this bore; %.2g to %.2g kg is usual", d->reciprocating_mass_kg,
                     LEAST_PISTON_DENSITY * pow(d->bore_m, 3),
                     MOST_PISTON_DENSITY * pow(d->bore_m, 3));
    if (d->compression_ratio < LEAST_COMPRESSION || d->compression_ratio > MOST_COMPRESSION)
        tacet_report(r, WARNING, "engine.compression_ratio", "%.4g; %g to %g is usual",
                     d->compression_ratio, LEAST_COMPRESSION, MOST_COMPRESSION);
}

// The i-th speed at which `n` curves that belong together are looked at: every point of those with
// more than one, or any one speed when all are constant. `text`: " at 1400 rpm", or nothing then.
// False: there are no more.
static bool speed_at(const tacet_curve *const *curve, size_t n, size_t i, double *rpm,
                     char text[32])
{
    bool constant = true;
    text[0] = '\0';
    for (size_t k = 0; k < n; k++) {
        if (curve[k]->n < 2) continue;
        constant = false;
        if (i < curve[k]->n) {
            *rpm = curve[k]->x[i];
            tacet_text(text, 32, " at %.6g rpm", *rpm);
            return true;
        }
        i -= curve[k]->n;
    }
    *rpm = 0;
    return constant && i == 0;
}

static void check_burn(const tacet_cycle_def *c, const tacet_reporter *r)
{
    const tacet_curve *const curves[] = {&c->mid_burn_rad, &c->burn_10_90_rad};
    double rpm, start, end;
    char at[32];
    for (size_t i = 0; speed_at(curves, 2, i, &rpm, at); i++) {
        gas_burn_span(engine_mid_burn(c, rpm), engine_burn_10_90(c, rpm), &start, &end);
        if (start > -GAS_BURN_EARLIEST && end < GAS_BURN_LATEST) continue;
        tacet_report(r, ERROR, "cycle.burn_10_90_deg",
                     "the fuel would burn from %.4g to %.4g degrees after top%s; it must lie "
                     "between %.0f and %.0f",
                     start / DEG, end / DEG, at, -GAS_BURN_EARLIEST / DEG, GAS_BURN_LATEST / DEG);
        return;
    }
}

static void check_mixture(const tacet_cycle_def *c, const tacet_reporter *r)
{
    const tacet_curve *const curve = &c->air_fuel_ratio;
    double rpm;
    char at[32];
    for (size_t i = 0; speed_at(&curve, 1, i, &rpm, at); i++) {
        double ratio = engine_air_fuel_ratio(c, rpm),
               heat = c->lower_heating_value_J_per_kg / ratio;
        if (!(heat > MOST_HEAT_OF_AIR)) continue;
        tacet_report(r, WARNING, "cycle.fuel.air_fuel_ratio",
                     "%.4g%s, %.3g MJ of fuel for each kg of air; more than %.3g does not burn",
                     ratio, at, heat / 1e6, MOST_HEAT_OF_AIR / 1e6);
        return;
    }
}

static void check_manifold(const tacet_cycle_def *c, const tacet_reporter *r)
{
    if (c->load_by != TACET_LOAD_CHARGE) return;
    const tacet_curve *const curves[] = {&c->lowest_Pa, &c->highest_Pa};
    double rpm;
    char at[32];
    for (size_t i = 0; speed_at(curves, 2, i, &rpm, at); i++) {
        double lowest = engine_lowest(c, rpm), highest = engine_highest(c, rpm);
        if (lowest < highest) continue;
        tacet_report(r, ERROR, "cycle.manifold_kpa.lowest",
                     "%.6g kPa%s; it must lie below `highest`, %.6g kPa%s", lowest / 1e3, at,
                     highest / 1e3, *at ? " there" : "");
        return;
    }
}

static void check_cycle(const tacet_engine_def *d, const tacet_reporter *r)
{
    const tacet_cycle_def *c = &d->cycle;
    check_manifold(c, r);
    check_mixture(c, r);
    if (c->lower_heating_value_J_per_kg < LOWEST_EFFICIENT_HEAT ||
        c->lower_heating_value_J_per_kg > HIGHEST_HEAT)
        tacet_report(r, WARNING, "cycle.fuel.lower_heating_value_mj_per_kg",
                     "%.4g MJ/kg; %.0f to %.0f is usual", c->lower_heating_value_J_per_kg / 1e6,
                     LOWEST_EFFICIENT_HEAT / 1e6, HIGHEST_HEAT / 1e6);
    if (c->kind == TACET_CYCLE_TRACES) {
        if (!c->fired_trace)
            tacet_report(r, ERROR, "cycle.traces.fired",
                         "kind: traces needs a file of fired cycles");
        if (!c->skipped_trace)
            tacet_report(r, ERROR, "cycle.traces.skipped",
                         "kind: traces needs a file of skipped cycles");
        return;
    }
    if (d->strokes == 2)
        tacet_report(r, ERROR, "cycle.kind",
                     "wiebe; 2-stroke engines need traces: their gas exchange is not computed");
    if (c->wall_temperature_K < c->intake_temperature_K)
        tacet_report(r, WARNING, "cycle.wall_temperature_k",
                     "%.4g K, colder than the gas that is drawn in, %.4g K", c->wall_temperature_K,
                     c->intake_temperature_K);
    check_burn(c, r);
}

static void check_skip(const tacet_engine_def *d, const tacet_reporter *r)
{
    for (size_t i = 0; i < d->skip.n_cylinders; i++)
        if (!holds(d, d->skip.cylinders[i]))
            tacet_report(r, ERROR, "skip.cylinders", "cylinder %u is not in the firing order",
                         d->skip.cylinders[i]);
}

void tacet_engine_def_check(const tacet_engine_def *d, const tacet_reporter *r)
{
    if (d->strokes != 4 && d->strokes != 2) {
        tacet_report(r, ERROR, "engine.strokes", "%u; 4 and 2 are allowed", d->strokes);
        return;
    }
    check_geometry(d, r);
    check_cycle(d, r);
    if (!check_firing_order(d, r)) return;
    check_intervals(d, r);
    check_cylinders(d, r);
    check_skip(d, r);
    if (d->n_intervals == 0 || d->n_intervals == d->n_cylinders) check_pins(d, r);
}
