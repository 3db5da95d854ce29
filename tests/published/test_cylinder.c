// The ideal four-stroke cycle with residual gas, in closed form: constant gamma, no heat to the
// walls, tight rings, all fuel burnt at top. The program's cylinder is run in that limit.
#include "direct.h"
#include "near.h"
#include <math.h>

typedef struct {
    double ratio, gamma, inlet_Pa, exhaust_Pa;
} ideal;

static const ideal cases[] = {{8, 1.4, 100e3, 100e3},
                              {10, 1.3, 50e3, 100e3},
                              {12.5, 1.35, 180e3, 120e3},
                              {10.8, 1.38, 30e3, 112e3},
                              {9, 1.4, 100e3, 112e3}};
#define N_CASES (sizeof cases / sizeof *cases)

#define HEAT (44e6 / 16.6) // J for each kg drawn in

static cylinder made(const ideal *i, unsigned steps)
{
    tacet_engine_def d = demo_six();
    d.compression_ratio = i->ratio;
    d.cycle.exhaust_Pa = i->exhaust_Pa;
    cylinder c = cylinder_of(&d);
    c.gas.gamma0 = i->gamma, c.gas.slope_per_K = 0;
    c.wall_factor = c.blow_by_m2 = 0;
    assert_int_equal(cylinder_grid(&c, steps), TACET_OK);
    return c;
}

static double volume(const cylinder *c, double deg)
{
    double x, dx, ddx;
    tacet_slider_at(&c->slider, deg * DEG, &x, &dx, &ddx);
    return c->clearance_m3 + c->piston_m2 * x;
}

// Work of a pressure that goes from p0 to p1 over the degrees a0..a1 as 1 - y^2 (3 - 2 y), by the
// trapezoid over volume.
static double glide(const cylinder *c, double a0, double a1, double p0, double p1)
{
    double work = 0, before = p0;
    int n = 20000;
    for (int i = 1; i <= n; i++) {
        double y = (double)i / n, p = p1 + (p0 - p1) * (1 - y * y * (3 - 2 * y));
        double step = (a1 - a0) / n;
        work += (p + before) / 2 * (volume(c, a0 + i * step) - volume(c, a0 + (i - 1) * step));
        before = p;
    }
    return work;
}

// Gas drawn in: first law of the intake with gas of temperature Ti (what is pushed out into the
// inlet comes back as it went), m cp Ti = (pi V1 - pe V2)/(gamma - 1) + work. With the inlet's
// pressure from the start, work = pi Vd, it is Heywood's volumetric efficiency of the ideal cycle,
// r/(r-1) - (pe/pi + gamma - 1)/(gamma (r-1)) (eq. 6.3, from memory); here the pressure goes there
// over 30 degrees.
static double drawn_in(const cylinder *c, const ideal *i, double inlet_Pa, double *work)
{
    double V2 = c->clearance_m3, V1 = V2 + c->swept_m3, g = i->gamma;
    *work = glide(c, 0, 30, i->exhaust_Pa, inlet_Pa) + inlet_Pa * (V1 - volume(c, 30));
    double energy = (inlet_Pa * V1 - i->exhaust_Pa * V2) / (g - 1) + *work;
    return energy / (g / (g - 1) * c->gas.R_J_per_kgK * c->intake_K);
}

static void test_heywood_volumetric_efficiency(void **state)
{
    (void)state;
    for (size_t k = 0; k < N_CASES; k++) {
        const ideal *i = &cases[k];
        cylinder c = made(i, 2);
        double work, ratio = i->exhaust_Pa / i->inlet_Pa, r = i->ratio;
        double fresh = drawn_in(&c, i, i->inlet_Pa, &work);
        double full = i->inlet_Pa * c.swept_m3 / (287 * c.intake_K);
        double heywood = r / (r - 1) - (ratio + i->gamma - 1) / (i->gamma * (r - 1));
        double late = (i->gamma - 1) / i->gamma * (work / (i->inlet_Pa * c.swept_m3) - 1);
        assert_near(fresh / full, heywood + late, 0, 1e-12);
        assert_true(fabs(late) < 0.03);
        if (ratio == 1) assert_near(heywood, 1, 0, 1e-12);
        cylinder_run run = {.speed_rad_per_s = 150,
                            .manifold_Pa = i->inlet_Pa,
                            .heat_J_per_kg = HEAT,
                            .burn_end_rad = 0.1 * DEG};
        for (double T = 600; T < 1500; T += 400) { // whatever the residual gas
            cylinder_gas gas = cylinder_fill(&c, i->exhaust_Pa, T);
            cylinder_half up;
            assert_true(cylinder_run_half(&c, &run, halves_rule_up_fire(), &gas, &up));
            assert_near(up.fresh_kg, fresh, 0, 2e-5);
            assert_near(up.fuel_J, HEAT * fresh, 0, 2e-5);
            assert_near(up.work_J[0], work, 1e-5 * i->inlet_Pa * c.swept_m3, 0);
        }
        cylinder_clear(&c);
    }
}

// Pressures of the whole cycle: p2 = pi r^gamma, burning at top adds (gamma - 1) Q / V2, isentropes
// before and after, blow-down from 140 degrees on. Residual share (pe/p3)^(1/gamma), as what stays
// expands isentropically. Work by strokes.
static void test_ideal_cycle_with_residual(void **state)
{
    (void)state;
    for (size_t k = 0; k < N_CASES; k++) {
        const ideal *i = &cases[k];
        cylinder c = made(i, 8);
        cylinder_run run = {.speed_rad_per_s = 150,
                            .manifold_Pa = i->inlet_Pa,
                            .heat_J_per_kg = HEAT,
                            .burn_end_rad = 0.1 * DEG};
        cylinder_gas gas = cylinder_fill(&c, i->exhaust_Pa, 900);
        cylinder_half up, down;
        for (int n = 0; n < 30; n++) {
            assert_true(cylinder_run_half(&c, &run, halves_rule_up_fire(), &gas, &up));
            assert_true(cylinder_run_half(&c, &run, (cylinder_rule){.open = true}, &gas, &down));
        }
        double g = i->gamma, V2 = c.clearance_m3, V1 = V2 + c.swept_m3, intake;
        double fresh = drawn_in(&c, i, i->inlet_Pa, &intake), p2 = i->inlet_Pa * pow(i->ratio, g);
        double p3 = p2 + (g - 1) * HEAT * fresh / V2, V = volume(&c, 140);
        double p4 = p3 * pow(V2 / V, g), near = 2e-5 * p3;
        for (int a = 180; a <= 360; a++)
            assert_near(up.pressure_Pa[a], i->inlet_Pa * pow(V1 / volume(&c, a), g), near, 0);
        for (int a = 1; a <= 140; a++)
            assert_near(down.pressure_Pa[a], p3 * pow(V2 / volume(&c, a), g), near, 0);
        double scale = 2e-5 * HEAT * fresh;
        assert_near(up.work_J[0], intake, scale, 0);
        assert_near(up.work_J[1], (i->inlet_Pa * V1 - p2 * V2) / (g - 1), scale, 0);
        assert_near(down.work_J[0],
                    (p3 * V2 - p4 * V) / (g - 1) + glide(&c, 140, 180, p4, i->exhaust_Pa), scale,
                    0);
        assert_near(down.work_J[1], -i->exhaust_Pa * c.swept_m3, scale, 0);
        double residual = pow(i->exhaust_Pa / p3, 1 / g), mass = fresh / (1 - residual);
        assert_near(gas.mass_kg, residual * mass, 0, 5e-5);
        assert_near(gas.mass_kg * 287 * gas_T(&c.gas, gas.energy_J / gas.mass_kg),
                    i->exhaust_Pa * V2, 0, 5e-5);
        double work = up.work_J[0] + up.work_J[1] + down.work_J[0] + down.work_J[1];
        assert_near(up.valve_J + down.valve_J, HEAT * fresh - work, scale, 0);
        // the closed part is near the Otto cycle's share of the heat
        double closed = (up.work_J[1] + (p3 * V2 - p3 * pow(V2 / V1, g) * V1) / (g - 1));
        assert_near(closed / (HEAT * fresh), 1 - pow(i->ratio, 1 - g), 1e-4, 0);
        cylinder_clear(&c);
    }
}

// Fuel of a whole engine in that limit: for a demand, the charge that is found draws in, by the
// formula above, what fuel there is; both are linear in the charge but for residual gas, so the
// table adds nothing. fuel = n N/2 drawn in/(1 + air/fuel). Fuel is then work over efficiency times
// heating value: brake and friction work and the exhaust's enthalpy are all of its heat.
static void test_fuel_of_ideal_gas(void **state)
{
    (void)state;
    const ideal i = {12.5, 1.38, 0, 112e3};
    tacet_engine_def d = demo_six();
    tacet_engine *en;
    tacet_engine_work *w;
    d.skip.trapped =
        TACET_TRAPPED_OPEN; // shut, without losses, a skipped cylinder has no one state
    assert_int_equal(tacet_engine_create(&d, &en, NULL), TACET_OK);
    en->cyl.gas.slope_per_K = 0, en->cyl.wall_factor = en->cyl.blow_by_m2 = 0;
    assert_int_equal(tacet_engine_prepare(en, 1000 * RPM, 1800 * RPM, 1, NULL), TACET_OK);
    assert_int_equal(tacet_engine_work_create(en, &w), TACET_OK);
    engine_pair p = {en, w};
    double before = 0;
    for (double rpm = 1000; rpm < 1800; rpm += 350)
        for (double demand = 250; demand < 800; demand += 170) {
            tacet_duty q = duty_of(&p, "x", rpm, demand);
            double work, fresh = drawn_in(&en->cyl, &i, q.charge_Pa, &work);
            assert_true(q.reachable);
            assert_near(q.fuel_kg_per_s, 6 * rpm / 120 * fresh / 16.6, 0, 3e-5);
            assert_near(q.wall_heat_W, 0, 1e-9, 0);
            assert_near(q.blow_by_W, 0, 1e-9, 0);
            assert_near(q.brake_W + q.friction_W + q.exhaust_W, 44e6 * q.fuel_kg_per_s, 0, 1e-6);
            double efficiency = (q.gross_W / q.fuel_W); // burn takes time: below Otto's
            assert_true(efficiency < 1 - pow(12.5, -0.38) &&
                        efficiency > 0.9 * (1 - pow(12.5, -0.38)));
            before = efficiency;
        }
    assert_true(before > 0);
    engine_cleared(&p);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_heywood_volumetric_efficiency),
        cmocka_unit_test(test_ideal_cycle_with_residual),
        cmocka_unit_test(test_fuel_of_ideal_gas),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
