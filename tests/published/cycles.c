// Prints cylinder cycles of the program as JSON for cylinder.py, which computes them again: cases
// of cycles run one after another, and duties of whole engines.
#include "direct.h"
#include "near.h"
#include <stdio.h>
#include <stdlib.h>

static void number(const char *name, double value)
{
    printf("\"%s\": %.17g, ", name, value);
}

static void definition(const tacet_engine_def *d, double rpm)
{
    const tacet_cycle_def *c = &d->cycle;
    number("bore_m", d->bore_m), number("stroke_m", d->stroke_m);
    number("rod_m", d->rod_length_m), number("offset_m", d->pin_offset_m);
    number("ratio", d->compression_ratio), number("cylinders", (double)d->n_cylinders);
    number("rpm", rpm), number("mid_deg", engine_mid_burn(c, rpm) / DEG);
    number("burn_deg", engine_burn_10_90(c, rpm) / DEG);
    number("heating", c->lower_heating_value_J_per_kg);
    number("air_fuel", engine_air_fuel_ratio(c, rpm)), number("by_fuel", c->load_by);
    number("highest_Pa", engine_highest(c, rpm)), number("intake_K", c->intake_temperature_K);
    number("exhaust_Pa", c->exhaust_Pa), number("wall_K", c->wall_temperature_K);
    number("rings_m2", c->blow_by_area_m2), number("crankcase_Pa", c->crankcase_Pa);
    number("trapped", d->skip.trapped);
    number("fmep_constant", d->friction.constant_Pa);
    number("fmep_krpm", d->friction.per_krpm_Pa), number("fmep_krpm2", d->friction.per_krpm2_Pa);
    number("fmep_mpa_peak", d->friction.per_mpa_peak_Pa);
}

// One cylinder's settled repeat at a charge.
static void cycles(tacet_engine_def d, const char *word, double rpm, double charge, double factor)
{
    tacet_cylinder_def own = {.number = d.firing_order[0], .charge_factor = factor};
    d.cylinders = &own, d.n_cylinder_defs = 1;
    cylinder c = cylinder_of(&d);
    assert_int_equal(cylinder_grid(&c, 1), TACET_OK);
    tacet_roll *r = roll_of(word, (unsigned)d.n_cylinders);
    halves h = halves_of(d.skip.trapped, 63, false);
    direct_run run = direct_repeat(&c, &h, &d, r, 0, rpm * RPM, charge);
    printf("{\"kind\": \"cycles\", \"word\": \"%s\", ", word);
    definition(&d, rpm);
    number("charge", charge), number("factor", factor), number("unsettled", run.unsettled);
    number("fuel_J", run.fuel_J), number("work_J", run.work_J), number("wall_J", run.wall_J);
    number("exhaust_J", run.valve_J), number("rings_J", run.ring_J);
    printf("\"pressure_Pa\": [");
    for (unsigned k = 0; k < 2 * r->cycles; k++)
        for (unsigned i = 0; i < 360; i++)
            printf("%s%.17g", k + i ? ", " : "", run.half[k].pressure_Pa[i]);
    printf("]}");
    free(run.half);
    tacet_roll_destroy(r);
    cylinder_clear(&c);
}

// What an engine needs for a demand.
static void duty(const tacet_engine_def *d, const char *word, double rpm, double demand)
{
    engine_pair p = engine_made(d, 900, 2100, 3);
    tacet_duty q = duty_of(&p, word, rpm, demand);
    assert_true(q.reachable);
    printf(",\n{\"kind\": \"duty\", \"word\": \"%s\", ", word);
    definition(d, rpm);
    number("demand_Nm", demand), number("charge", engine_charge(p.engine, &q));
    number("friction_Nm", q.friction_Nm), number("fuel_kg_per_s", q.fuel_kg_per_s);
    number("gross_W", q.gross_W), number("pumping_W", q.pumping_W);
    number("wall_W", q.wall_heat_W), number("exhaust_W", q.exhaust_W);
    number("rings_W", q.blow_by_W);
    printf("\"peak_Pa\": %.17g}", q.peak_pressure_Pa);
    engine_cleared(&p);
}

int main(void)
{
    tacet_engine_def v8 = demo_v8(), six = demo_six(), fuel = demo_six(), offset = demo_six();
    v8.cylinders = NULL, v8.n_cylinder_defs = 0;
    fuel.cycle.load_by = TACET_LOAD_FUEL;
    offset.pin_offset_m = 0.004;
    offset.cycle.blow_by_area_m2 = 3e-6;
    printf("[\n");
    cycles(v8, "x", 1500, 45e3, 1);
    for (int trapped = TACET_TRAPPED_RESIDUAL; trapped <= TACET_TRAPPED_OPEN; trapped++) {
        printf(",\n");
        v8.skip.trapped = trapped;
        cycles(v8, "x5.", 1300, 70e3, trapped == TACET_TRAPPED_AIR ? 1.2 : 1);
    }
    printf(",\n");
    cycles(fuel, "x.3x.", 1200, 0.8, 0.9);
    printf(",\n");
    cycles(offset, "x....", 1700, 150e3, 1);
    duty(&six, "x", 1400, 300);
    duty(&fuel, "x", 1100, 260);
    duty(&six, "x..x.", 1800, 150);
    printf("\n]\n");
    return 0;
}
