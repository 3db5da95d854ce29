#include "direct.h"
#include "near.h"
#include <stdlib.h>

#define REPEATS_MOST 4000

static bool cycle(const cylinder *c, const halves *h, const tacet_roll *r, unsigned slot,
                  unsigned k, const cylinder_run *run, cylinder_gas *gas, cylinder_half half[2])
{
    tacet_cycle here = tacet_roll_cycle(r, slot, k);
    bool next = tacet_roll_cycle(r, slot, k + 1).tenths > 0, fires = here.tenths > 0;
    unsigned place = here.skips == TACET_SKIPS_FOREVER ? 1000 : here.skips;
    cylinder_rule up = fires ? halves_rule_up_fire() : halves_rule_up_skip(h, place);
    cylinder_rule down = fires ? halves_rule_down_fire(h, next) : halves_rule_down_skip(h, next);
    return cylinder_run_half(c, run, up, gas, &half[0]) &&
           cylinder_run_half(c, run, down, gas, &half[1]);
}

static void add(direct_run *to, const cylinder_half *half)
{
    to->fuel_J += half->fuel_J;
    to->work_J += half->work_J[0] + half->work_J[1];
    to->wall_J += half->wall_J;
    to->valve_J += half->valve_J;
    to->ring_J += half->ring_J;
}

direct_run direct_repeat(const cylinder *c, const halves *h, const tacet_engine_def *d,
                         const tacet_roll *r, unsigned slot, double speed_rad_per_s, double charge)
{
    direct_run out = {.half = calloc(2 * r->cycles, sizeof *out.half), .unsettled = 1};
    assert_non_null(out.half);
    cylinder_gas gas = cylinder_fill(c, c->exhaust_Pa, 1000);
    double factor = engine_cylinder(d, d->firing_order[slot]).charge_factor;
    for (int i = 0; i < REPEATS_MOST && out.unsettled > 1e-12; i++) {
        cylinder_gas before = gas;
        out.fuel_J = out.work_J = out.wall_J = out.valve_J = out.ring_J = 0;
        for (unsigned k = 0; k < r->cycles; k++) {
            unsigned tenths = tacet_roll_cycle(r, slot, k).tenths;
            double share = factor * (tenths ? tenths / 10.0 : 1);
            cylinder_run run = table_run(d, speed_rad_per_s, charge * share);
            assert_true(cycle(c, h, r, slot, k, &run, &gas, &out.half[2 * k]));
            add(&out, &out.half[2 * k]);
            add(&out, &out.half[2 * k + 1]);
        }
        out.unsettled =
            fmax(fabs(gas.mass_kg / before.mass_kg - 1), fabs(gas.energy_J / before.energy_J - 1));
    }
    return out;
}

tacet_roll *roll_of(const char *word, unsigned cylinders)
{
    tacet_pattern p;
    tacet_roll *r = NULL;
    assert_int_equal(tacet_pattern_parse(word, &p, NULL), TACET_OK);
    assert_int_equal(tacet_roll_create(&p, cylinders, 4, &r, NULL), TACET_OK);
    return r;
}

engine_pair engine_made(const tacet_engine_def *d, double from_rpm, double to_rpm,
                        unsigned longest_run)
{
    engine_pair p = {0};
    tacet_error e = {0};
    if (tacet_engine_create(d, &p.engine, &e) != TACET_OK ||
        tacet_engine_prepare(p.engine, from_rpm * RPM, to_rpm * RPM, longest_run, &e) != TACET_OK ||
        tacet_engine_work_create(p.engine, &p.work) != TACET_OK)
        fail_msg("engine: %s", e.text);
    return p;
}

void engine_cleared(engine_pair *p)
{
    tacet_engine_work_destroy(p->work);
    tacet_engine_destroy(p->engine);
}

tacet_duty duty_of(const engine_pair *p, const char *word, double rpm, double demand_Nm)
{
    tacet_duty d;
    tacet_roll *r = roll_of(word, tacet_engine_cylinders(p->engine));
    assert_int_equal(tacet_engine_duty(p->engine, r, rpm * RPM, demand_Nm, p->work, &d), TACET_OK);
    tacet_roll_destroy(r);
    return d;
}
