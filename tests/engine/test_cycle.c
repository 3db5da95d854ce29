// The cylinder cycle: limits in closed form (E5, E7), a second method for work and wall heat (E18),
// conservation, and what each kind of skipped cylinder holds.
#include "direct.h"
#include "near.h"
#include <stdlib.h>
#include <string.h>

// Straight-six cylinder; loss-free: no wall heat, no flow past the rings.
static cylinder made(double ratio, double gamma0, double slope, bool loss_free, unsigned steps)
{
    tacet_engine_def d = demo_six();
    d.compression_ratio = ratio;
    cylinder c = cylinder_of(&d);
    c.gas.gamma0 = gamma0;
    c.gas.slope_per_K = slope;
    if (loss_free) c.wall_factor = c.blow_by_m2 = 0;
    assert_int_equal(cylinder_grid(&c, steps), TACET_OK);
    return c;
}

static cylinder_run running(double rpm, double manifold_Pa, double mid_deg, double burn_deg)
{
    cylinder_run r = {rpm * RPM, manifold_Pa, 44e6 / 16.6, 0, 0};
    gas_burn_span(mid_deg * DEG, burn_deg * DEG, &r.burn_start_rad, &r.burn_end_rad);
    return r;
}

static const cylinder_rule shut_up = {.up = true}, shut_down = {.up = false};

// E7: p2 = p1 r^n, T2 = T1 r^(n-1) (first: used in Khurmi and Gupta ex. 15.13): 0.1 MPa, r = 14,
// n = 1.35: 3.525923 MPa; r = 10, n = 1.3, 300 K: 19.952623 p1 and 598.5787 K.
static void test_cycle_polytrope_e7(void **state)
{
    (void)state;
    static const struct {
        double r, n, p1, T1, p2, T2;
    } row[] = {{14, 1.35, 0.1e6, 330, 3.525923e6, 330 * 2.518516}, // T2 = T1 p2 / (p1 r)
               {10, 1.30, 1e5, 300, 19.952623e5, 598.5787}};
    for (size_t i = 0; i < 2; i++) {
        cylinder c = made(row[i].r, row[i].n, 0, true, 1);
        cylinder_run run = running(1500, 1e5, 8, 25);
        cylinder_gas gas = cylinder_fill(&c, row[i].p1 * pow(row[i].r, row[i].n),
                                         row[i].T1 * pow(row[i].r, row[i].n - 1));
        cylinder_half half;
        assert_true(cylinder_run_half(&c, &run, shut_up, &gas, &half));
        assert_near(half.pressure_Pa[180], row[i].p1, 0, 1e-6);
        assert_near(half.pressure_Pa[360], row[i].p2, 0, 1e-6);
        assert_near(half.peak_Pa, row[i].p2, 0, 1e-6);
        assert_near(gas_T(&c.gas, gas.energy_J / gas.mass_kg), row[i].T2, 0, 1e-6);
        cylinder_clear(&c);
    }
}

// A motored cylinder without losses gives back what it takes: no work over a revolution, also with
// a gamma that depends on temperature, and the gas is as before.
static void test_cycle_returns_its_work(void **state)
{
    (void)state;
    cylinder c = made(12.5, 1.38, 0.08e-3, true, 1);
    cylinder_run run = running(1500, 1e5, 8, 25);
    cylinder_gas gas = cylinder_fill(&c, 112e3, 900), before = gas;
    for (int i = 0; i < 4; i++) {
        cylinder_half half;
        assert_true(cylinder_run_half(&c, &run, i % 2 ? shut_down : shut_up, &gas, &half));
        assert_true(half.work_J[0] > 10);
        assert_near(half.work_J[0] + half.work_J[1], 0, 2e-6 * half.work_J[0], 0);
        assert_near(half.wall_J, 0, 0, 0);
        assert_near(half.ring_J, 0, 0, 0);
    }
    assert_near(gas.mass_kg, before.mass_kg, 0, 0);
    assert_near(gas.energy_J, before.energy_J, 0, 1e-6);
    cylinder_clear(&c);
}

// E5: Otto efficiency 1 - r^(1-gamma): approached as the burn gets short, from below, and met by a
// burn within a fraction of a degree at top.
static double closed_efficiency(double ratio, double gamma, double mid_deg, double burn_deg)
{
    cylinder c = made(ratio, gamma, 0, true, 8);
    cylinder_run run = running(1500, 1e5, mid_deg, burn_deg);
    cylinder_gas gas = cylinder_fill(&c, 20e5, 700);
    cylinder_half up, down;
    gas.fuel_J = 0;
    run.burn_start_rad = 0; // burn from top on
    run.burn_end_rad = burn_deg * DEG;
    assert_true(cylinder_run_half(&c, &run, shut_up, &gas, &up));
    gas.fuel_J = 2000;
    gas.energy_J += gas.fuel_J;
    gas.inlet_Pa = gas.inlet_m3 = gas.inlet_K = gas.exponent = 1; // no wall heat: not used
    assert_true(cylinder_run_half(&c, &run, shut_down, &gas, &down));
    cylinder_clear(&c);
    return (up.work_J[1] + down.work_J[0]) / 2000;
}

static void test_cycle_otto_e5(void **state)
{
    (void)state;
    static const double row[][3] = {{8, 1.4, .564725},
                                    {10, 1.4, .601893},
                                    {12, 1.4, .629893},
                                    {8, 1.3, .464113},
                                    {10, 1.3, .498813}};
    for (size_t i = 0; i < 5; i++) {
        double limit = closed_efficiency(row[i][0], row[i][1], 0, 0.2);
        double near = closed_efficiency(row[i][0], row[i][1], 0, 10);
        double far = closed_efficiency(row[i][0], row[i][1], 0, 40);
        assert_near(limit, row[i][2], 2e-5, 0);
        assert_true(far < near && near < limit);
        assert_true(limit - near < 0.01);
    }
}

static void settle(const cylinder *c, const cylinder_run *run, cylinder_gas *gas, cylinder_half *up,
                   cylinder_half *down)
{
    const cylinder_rule in = {true, true, true}, out = {false, true, true};
    for (int i = 0; i < 12; i++) {
        assert_true(cylinder_run_half(c, run, in, gas, up));
        assert_true(cylinder_run_half(c, run, out, gas, down));
    }
}

// A quarter of the step: work and fuel within 1e-4 of the fuel, pressure within 1e-4 of the peak,
// for a fired and for a shut cycle.
static void test_cycle_step(void **state)
{
    (void)state;
    cylinder coarse = made(12.5, 1.38, 0.08e-3, false, 1),
             fine = made(12.5, 1.38, 0.08e-3, false, 4);
    for (double manifold = 25e3; manifold < 200e3; manifold += 35e3) {
        cylinder_run run = running(900 + manifold / 200, manifold, 8, 25);
        cylinder_gas a = cylinder_fill(&coarse, 112e3, 1000), b = a;
        cylinder_half u1, d1, u2, d2;
        settle(&coarse, &run, &a, &u1, &d1);
        settle(&fine, &run, &b, &u2, &d2);
        assert_near(u1.fuel_J, u2.fuel_J, 0, 1e-4);
        assert_near(u1.work_J[0] + u1.work_J[1], u2.work_J[0] + u2.work_J[1], 1e-4 * u2.fuel_J, 0);
        assert_near(d1.work_J[0] + d1.work_J[1], d2.work_J[0] + d2.work_J[1], 1e-4 * u2.fuel_J, 0);
        for (int i = 0; i < CYLINDER_SAMPLES; i++)
            assert_near(d1.pressure_Pa[i], d2.pressure_Pa[i], 1e-4 * d2.peak_Pa, 0);
        assert_true(cylinder_run_half(&coarse, &run, shut_up, &a, &u1));
        assert_true(cylinder_run_half(&fine, &run, shut_up, &b, &u2));
        assert_near(u1.work_J[1], u2.work_J[1], 1e-5 * u2.work_J[0], 1e-5);
    }
    cylinder_clear(&coarse);
    cylinder_clear(&fine);
}

// Simpson's rule over the pressure at whole degrees.
static double work_of(const cylinder *c, const double *p, int from, int to)
{
    double sum = 0, x, dx, ddx;
    for (int i = from; i <= to; i++) {
        tacet_slider_at(&c->slider, i * DEG, &x, &dx, &ddx);
        sum += p[i] * dx * c->piston_m2 * (i == from || i == to ? 1 : (i - from) % 2 ? 4 : 2);
    }
    return sum * DEG / 3;
}

// E18: pumping work is that of the exhaust and intake strokes, net = gross + pumping; work is the
// integral of p dV (here of the pressures at whole degrees), and pumping mep is near the pressure
// difference of the manifolds.
static void test_cycle_work_e18(void **state)
{
    (void)state;
    cylinder c = made(12.5, 1.38, 0.08e-3, false, 1);
    for (double manifold = 25e3; manifold < 110e3; manifold += 20e3) {
        cylinder_run run = running(1400, manifold, 8, 25);
        cylinder_gas gas = cylinder_fill(&c, 112e3, 1000);
        cylinder_half up, down;
        settle(&c, &run, &gas, &up, &down);
        double pumping =
            work_of(&c, up.pressure_Pa, 0, 180) + work_of(&c, down.pressure_Pa, 180, 360);
        double gross =
            work_of(&c, up.pressure_Pa, 180, 360) + work_of(&c, down.pressure_Pa, 0, 180);
        assert_near(up.work_J[0] + down.work_J[1], pumping, 1e-5 * up.fuel_J, 0);
        assert_near(up.work_J[1] + down.work_J[0], gross, 1e-5 * up.fuel_J, 0);
        double mep = pumping / c.swept_m3; // common practice, no source: about p_int - p_exh
        assert_near(mep, manifold - 112e3, 3e3, 0);
        assert_true(mep > manifold - 112e3);
    }
    cylinder_clear(&c);
}

// Wall heat a second way: Woschni's formula on the pressures at whole degrees, temperature from the
// gas law with the mass that is in the cylinder (no flow past the rings), by the trapezoid.
static void test_cycle_wall_heat(void **state)
{
    (void)state;
    cylinder c = made(12.5, 1.38, 0.08e-3, false, 1);
    c.blow_by_m2 = 0;
    cylinder_run run = running(1400, 60e3, 8, 25);
    cylinder_gas gas = cylinder_fill(&c, 112e3, 1000);
    cylinder_half up, down, shut;
    settle(&c, &run, &gas, &up, &down);
    assert_true(cylinder_run_half(&c, &run, (cylinder_rule){true, true, true}, &gas, &up));
    double mass = gas.mass_kg, sp = 2 * 0.130 * 1400 / 60, heat[2] = {0};
    double V0 = c.clearance_m3 + c.swept_m3, T0 = up.pressure_Pa[180] * V0 / (mass * 287);
    cylinder_gas left = gas;
    assert_true(
        cylinder_run_half(&c, &run, shut_down, &left, &down)); // expansion to 140 degrees ..
    assert_true(cylinder_run_half(&c, &run, shut_up, &left, &shut));
    for (int k = 0; k < 2; k++) // .. of the fire, and of the same gas once more without fuel
        for (int i = k ? 180 : 0; i <= (k ? 360 : 180); i++) {
            double x, dx, ddx, p = k ? shut.pressure_Pa[i] : down.pressure_Pa[i], w = 2.28 * sp;
            tacet_slider_at(&c.slider, i * DEG, &x, &dx, &ddx);
            double V = c.clearance_m3 + c.piston_m2 * x, T = p * V / (mass * 287);
            if (k == 0) {
                double motored = up.pressure_Pa[180] * pow(V0 / V, gas.exponent);
                w += 3.24e-3 * c.swept_m3 * T0 / (up.pressure_Pa[180] * V0) * fmax(p - motored, 0);
            }
            double area = 2 * c.piston_m2 + M_PI * 0.108 * V / c.piston_m2;
            double rate = gas_woschni(0.108, p, T, w) * area * (T - 430) / (1400 * RPM);
            heat[k] += rate * DEG * (i % 180 ? 1 : 0.5);
        }
    cylinder fine = made(12.5, 1.38, 0.08e-3, false, 1); // strokes apart: integrate halves again
    fine.blow_by_m2 = 0;
    double balance = gas.energy_J - down.work_J[0]; // energy at bottom = at top - work - wall heat
    double x, dx, ddx;
    tacet_slider_at(&c.slider, M_PI, &x, &dx, &ddx);
    double Tb = down.pressure_Pa[180] * (c.clearance_m3 + c.piston_m2 * x) / (mass * 287);
    assert_near(balance - mass * gas_u(&c.gas, Tb), heat[0], 0, 2e-4);
    Tb = shut.pressure_Pa[180] * (c.clearance_m3 + c.piston_m2 * x) / (mass * 287);
    double at_bottom = mass * gas_u(&c.gas, Tb);
    assert_near(at_bottom - shut.work_J[1] - left.energy_J, heat[1], 2e-4 * fabs(heat[1]) + 1e-3,
                0);
    // the motored exponent is that of this cycle's own compression, a little below gamma
    assert_true(gas.exponent > 1.28 && gas.exponent < 1.38);
    cylinder_clear(&c);
    cylinder_clear(&fine);
}

// Wall heat with the exhaust open and the enthalpy that leaves, a second way: from the pressures at
// whole degrees, m cp dT = V dp - dQ (what leaves does not change the temperature of what stays),
// m = pV/(RT), by Heun's method; C1 = 6.18 from the opening on,
// and of a fire no more of the burn's share then.
static void exhaust_again(bool fired)
{
    cylinder c = made(12.5, 1.38, 0.08e-3, false, 1);
    c.blow_by_m2 = 0;
    cylinder_run run = running(1400, 60e3, 8, 25);
    cylinder_gas gas = cylinder_fill(&c, 20e5, 1500); // no fuel: hot gas at top, as after a burn
    cylinder_half up, down;
    if (fired) {
        settle(&c, &run, &gas, &up, &down);
        assert_true(cylinder_run_half(&c, &run, (cylinder_rule){true, true, true}, &gas, &up));
    }
    double mass = gas.mass_kg, sp = 2 * 0.130 * 1400 / 60, T = 0, heat = 0, enthalpy = 0, V[361];
    assert_true(cylinder_run_half(&c, &run, (cylinder_rule){.open = true}, &gas, &down));
    for (int i = 0; i <= 360; i++) {
        double x, dx, ddx;
        tacet_slider_at(&c.slider, i * DEG, &x, &dx, &ddx);
        V[i] = c.clearance_m3 + c.piston_m2 * x;
    }
    for (int i = 0; i < 360; i++) {
        const double *p = down.pressure_Pa;
        double slope[2], rate[2], before = T;
        for (int k = 0; k < 2; k++) {
            double at = i + k < 140 || (i + k == 140 && k == 1) ? p[i + k] * V[i + k] / (mass * 287)
                        : k                                     ? T + slope[0]
                                                                : T;
            if (i == 140 && k == 0) at = T = p[i] * V[i] / (mass * 287), before = T;
            double w = (i < 140 ? 2.28 : 6.18) * sp, area = 2 * c.piston_m2;
            area += M_PI * 0.108 * V[i + k] / c.piston_m2;
            rate[k] = gas_woschni(0.108, p[i + k], at, w) * area * (at - 430) / (1400 * RPM) * DEG;
            double cp = 287 * gas_gamma(&c.gas, at) / (gas_gamma(&c.gas, at) - 1);
            double m = p[i + k] * V[i + k] / (287 * at), middle = (V[i] + V[i + 1]) / 2;
            slope[k] = (middle * (p[i + 1] - p[i]) - rate[k]) / (m * cp);
        }
        heat += (rate[0] + rate[1]) / 2;
        if (i < 140) continue;
        T += (slope[0] + slope[1]) / 2;
        double out = p[i] * V[i] / (287 * before) - p[i + 1] * V[i + 1] / (287 * T);
        enthalpy += out * (gas_h(&c.gas, (before + T) / 2) - gas_h(&c.gas, 320));
    }
    assert_near(T, gas_T(&c.gas, gas.energy_J / gas.mass_kg), 0, 1e-3);
    if (!fired) assert_near(down.wall_J, heat, 0, 2e-3);
    assert_near(down.valve_J, enthalpy, 0, 2e-3);
    cylinder_clear(&c);
}

static void test_cycle_exhaust(void **state)
{
    (void)state;
    exhaust_again(false);
    exhaust_again(true);
}

// Flow past the rings a second way: the orifice law on the pressures at whole degrees of a shut
// cylinder, out while above crankcase pressure and in, at wall temperature, while below.
static void test_cycle_rings(void **state)
{
    (void)state;
    cylinder c = made(12.5, 1.38, 0.08e-3, false, 1);
    cylinder_run run = running(1400, 60e3, 8, 25);
    for (double p0 = 150e3; p0 < 4e6; p0 *= 5) {
        cylinder_gas gas = cylinder_fill(&c, p0, 600), start = gas;
        cylinder_half half;
        assert_true(cylinder_run_half(&c, &run, shut_up, &gas, &half));
        double mass = start.mass_kg, joule = 0, out = 0, in = 0, h_in = gas_h(&c.gas, 320);
        for (int i = 0; i < 360; i++) { // midpoints
            double x, dx, ddx, p = (half.pressure_Pa[i] + half.pressure_Pa[i + 1]) / 2;
            tacet_slider_at(&c.slider, (i + 0.5) * DEG, &x, &dx, &ddx);
            double T = p * (c.clearance_m3 + c.piston_m2 * x) / (mass * 287),
                   time = DEG / (1400 * RPM);
            bool above = p > 100e3;
            double kg =
                0.8e-6 * time *
                (above ? gas_orifice(&c.gas, p, T, 100e3) : -gas_orifice(&c.gas, 100e3, 430, p));
            mass -= kg;
            joule += kg * (gas_h(&c.gas, above ? T : 430) - h_in);
            *(above ? &out : &in) += fabs(kg);
        }
        assert_near(gas.mass_kg - start.mass_kg, in - out, 5e-3 * (in + out), 0);
        assert_near(half.ring_J, joule, 0.01 * fabs(joule) + 2e-3, 0);
        assert_true(out > 0 && (in > 0 || p0 > 2e6));
    }
    cylinder_clear(&c);
}

// Gas that is compressed on the way to a gas-exchange top peaks a little before it, as it loses
// heat: the peak counts with the cycle that begins there.
static void test_cycle_late_peak(void **state)
{
    (void)state;
    cylinder c = made(12.5, 1.38, 0.08e-3, false, 1);
    cylinder_run run = running(600, 60e3, 8, 25);
    cylinder_gas gas = cylinder_fill(&c, 60e5, 2000);
    cylinder_half up, down;
    double before = 0;
    assert_true(cylinder_run_half(&c, &run, shut_down, &gas, &down));
    assert_true(cylinder_run_half(&c, &run, shut_up, &gas, &up));
    for (int i = 180; i <= 360; i++)
        before = fmax(before, down.pressure_Pa[i]);
    assert_true(before > 1.0005 * up.pressure_Pa[0]);
    assert_true(up.peak_Pa >= before && up.peak_Pa < 1.001 * before);
    assert_near(down.peak_Pa, 60e5, 0, 1e-12);
    cylinder_clear(&c);
}

// Compression after the inlet has shut, a second way: from the pressures at whole degrees, with
// C1 = 2.28 again.
static void test_cycle_compression(void **state)
{
    (void)state;
    cylinder c = made(12.5, 1.38, 0.08e-3, false, 1);
    c.blow_by_m2 = 0;
    cylinder_run run = running(1400, 60e3, 8, 25);
    cylinder_gas gas = cylinder_fill(&c, 112e3, 900);
    cylinder_half up;
    assert_true(cylinder_run_half(&c, &run, (cylinder_rule){.up = true, .open = true}, &gas, &up));
    double mass = gas.mass_kg, sp = 2 * 0.130 * 1400 / 60, heat = 0, first = 0;
    for (int i = 180; i <= 360; i++) {
        double x, dx, ddx;
        tacet_slider_at(&c.slider, i * DEG, &x, &dx, &ddx);
        double V = c.clearance_m3 + c.piston_m2 * x, T = up.pressure_Pa[i] * V / (mass * 287);
        double area = 2 * c.piston_m2 + M_PI * 0.108 * V / c.piston_m2;
        double h = gas_woschni(0.108, up.pressure_Pa[i], T, 2.28 * sp);
        heat += h * area * (T - 430) / (1400 * RPM) * DEG * (i % 180 ? 1 : 0.5);
        if (i == 180) first = mass * gas_u(&c.gas, T);
    }
    assert_near(first - up.work_J[1] - gas.energy_J, heat, 2e-3 * fabs(heat) + 1e-3, 0);
    cylinder_clear(&c);
}

// A burn that starts at top or after it has the motored line of its own compression as well:
// exponent a little below gamma, and wall heat that goes on evenly as the start passes top.
static void test_cycle_late_burn(void **state)
{
    (void)state;
    cylinder c = made(12.5, 1.38, 0.08e-3, false, 1);
    double wall[12];
    for (int i = 0; i < 12; i++) {
        cylinder_run run = running(1400, 90e3, 12.2 + i, 15); // starts 3.5 before to 7.5 after top
        cylinder_gas gas = cylinder_fill(&c, 112e3, 1000);
        cylinder_half up, down;
        settle(&c, &run, &gas, &up, &down);
        assert_true(gas.exponent > 1.28 && gas.exponent < 1.38);
        wall[i] = (up.wall_J + down.wall_J) / up.fuel_J;
        if (i > 0) assert_true(wall[i] < wall[i - 1]);
        if (i > 1) assert_near(wall[i - 2] - 2 * wall[i - 1] + wall[i], 0, 5e-4, 0);
    }
    cylinder_clear(&c);
}

// What is in the cylinder at the end is what flowed: mass by the gas law, energy by temperature.
static void test_cycle_state(void **state)
{
    (void)state;
    cylinder c = made(10.8, 1.38, 0.08e-3, false, 1);
    cylinder_run run = running(1400, 60e3, 8, 25);
    cylinder_gas gas = cylinder_fill(&c, 112e3, 1000);
    cylinder_half up, down;
    settle(&c, &run, &gas, &up, &down);
    double T = gas_T(&c.gas, gas.energy_J / gas.mass_kg);
    assert_near(down.pressure_Pa[360], 112e3, 0, 5e-5);
    assert_near(gas.mass_kg * 287 * T / c.clearance_m3, down.pressure_Pa[360], 0, 1e-9);
    assert_true(T > 800 && T < 1400); // common practice, no source: residual of a spark engine
    // fresh gas: what fits beside the residual, within what heating on the way in takes away
    double full = 60e3 * (c.swept_m3 + c.clearance_m3) / (287 * 320.0);
    assert_true(up.fresh_kg > 0.75 * full && up.fresh_kg < full);
    assert_near(up.fuel_J, up.fresh_kg * run.heat_J_per_kg, 0, 1e-14);
    for (int i = 40; i <= 180; i++)
        assert_near(up.pressure_Pa[i], 60e3, 0, 1e-5);
    for (int i = 180; i <= 360; i++)
        assert_near(down.pressure_Pa[i], 112e3, 0, 5e-5);
    cylinder_clear(&c);
}

// A cylinder filled through the inlet from near vacuum without losses: the gas that flows in ends
// hotter by gamma at most (filling a vessel, T = gamma T_in in the limit), and residual gas pushed
// out into the inlet comes back whole: with no wall heat the energy at inlet closing is
// U_residual + fresh h_in - p_in (swept volume) for any pressure before.
static void test_cycle_intake(void **state)
{
    (void)state;
    cylinder c = made(10.8, 1.38, 0.08e-3, true, 2);
    double h_in = gas_h(&c.gas, c.intake_K);
    for (double p = 20e3; p < 900e3; p *= 1.7) {
        cylinder_run run = running(1400, 60e3, 8, 25);
        run.heat_J_per_kg = 0;
        cylinder_gas gas = cylinder_fill(&c, p, 700), start = gas;
        cylinder_half up;
        assert_true(cylinder_run_half(&c, &run, (cylinder_rule){true, true, false}, &gas, &up));
        double fresh = gas.mass_kg - start.mass_kg;
        assert_near(up.fresh_kg, fresh, 1e-15, 1e-10);
        double energy = gas.energy_J + up.work_J[1]; // at inlet closing
        assert_near(energy, start.energy_J + fresh * h_in - up.work_J[0], 1e-4, 1e-5);
    }
    cylinder_clear(&c);
}

// Fixed point of a cylinder that never fires: as many revolutions as it takes come to the same.
static cylinder_half last_kept;
static unsigned kept_kind;
static void keep(void *who, unsigned kind, const double number[HALF_NUMBERS],
                 const double *pressure)
{
    (void)who, (void)number;
    if (kind != kept_kind) return;
    for (int i = 0; i < CYLINDER_SAMPLES; i++)
        last_kept.pressure_Pa[i] = pressure[i];
}

static void test_cycle_never_fires(void **state)
{
    (void)state;
    cylinder c = made(12.5, 1.38, 0.08e-3, false, 1);
    cylinder_run run = running(1100, 60e3, 8, 25);
    halves h = halves_of(TACET_TRAPPED_RESIDUAL, 2, false);
    cylinder_gas start = cylinder_fill(&c, 112e3, 1000), never = {0}, gas = start;
    kept_kind = halves_up_skip(&h, 3);
    assert_int_equal(halves_chain(&c, &run, &h, &start, &never, keep, NULL), TACET_OK);
    cylinder_half half;
    for (int i = 0; i < 600; i++)
        assert_true(cylinder_run_half(&c, &run, i % 2 ? shut_down : shut_up, &gas, &half));
    assert_near(gas.mass_kg, never.mass_kg, 0, 1e-7);
    assert_true(cylinder_run_half(&c, &run, shut_up, &gas, &half));
    for (int i = 0; i < CYLINDER_SAMPLES; i++)
        assert_near(last_kept.pressure_Pa[i], half.pressure_Pa[i], 0, 1e-7);
    // leaks in through low pressure and out near top: between the two, crankcase pressure is
    // crossed
    assert_true(half.pressure_Pa[180] < c.crankcase_Pa && half.pressure_Pa[0] > c.crankcase_Pa);
    assert_true(half.work_J[0] + half.work_J[1] < 0);
    cylinder_clear(&c);
}

// Per repeat, fuel = work + walls + enthalpy rise to the exhaust + past the rings, for each kind of
// trapped gas, to 1e-6 of the fuel (friction and brake work share the work), also of a cylinder
// with a charge factor. The sum of the terms over a settled repeat of cycles run one after another.
static void test_cycle_energy(void **state)
{
    (void)state;
    static const char *const words[] = {"x", "xx.", "..x.x.x", "x5."};
    tacet_engine_def d = demo_v8();
    tacet_cylinder_def own[8];
    memcpy(own, d.cylinders, sizeof own);
    d.cylinders = own;
    cylinder c = cylinder_of(&d);
    assert_int_equal(cylinder_grid(&c, 1), TACET_OK);
    for (int trapped = TACET_TRAPPED_RESIDUAL; trapped <= TACET_TRAPPED_OPEN; trapped++)
        for (size_t i = 0; i < 4; i++) {
            tacet_roll *r = roll_of(words[i], 8);
            halves h = halves_of(trapped, 12, false);
            double fuel[2];
            for (int k = 0; k < 2; k++) {
                own[7].charge_factor = k ? 1.25 : 1; // of the cylinder in slot 1, number 8
                direct_run run = direct_repeat(&c, &h, &d, r, 1, 1500 * RPM, 70e3);
                assert_true(run.unsettled <= 1e-12);
                assert_true(run.fuel_J > 100 && run.work_J > 0 && run.wall_J > 0 &&
                            run.valve_J > 0);
                assert_near(run.work_J + run.wall_J + run.valve_J + run.ring_J, run.fuel_J, 0,
                            1e-6);
                fuel[k] = run.fuel_J;
                free(run.half);
            }
            // more than in proportion, as residual gas takes up the same room
            assert_true(fuel[1] > 1.25 * fuel[0] && fuel[1] < 1.35 * fuel[0]);
            tacet_roll_destroy(r);
        }
    cylinder_clear(&c);
}

// Rings that leak much: the steps that are chosen hold 2e-4 of the peak pressure against 24 a
// degree, at slow running, through a fire and the skips after it; rings through which the gas at
// top leaves within a degree are refused; usual ones take one step. One step where more are asked
// for is far off: the choice matters.
static unsigned leaking(double area_mm2, double rpm, unsigned steps, double pressure_Pa[3][361])
{
    tacet_engine_def d = demo_six();
    d.cycle.blow_by_area_m2 = area_mm2 * 1e-6;
    cylinder c = cylinder_of(&d);
    unsigned chosen = cylinder_steps(&c, rpm * RPM);
    assert_int_equal(cylinder_grid(&c, steps ? steps : chosen), TACET_OK);
    cylinder_run run = running(rpm, 90e3, 8, 25);
    cylinder_gas gas = cylinder_fill(&c, 112e3, 1000);
    cylinder_half up, down, skip;
    settle(&c, &run, &gas, &up, &down);
    for (int i = 0; i < 3; i++) {
        assert_true(cylinder_run_half(&c, &run, shut_up, &gas, &skip));
        if (i < 2) assert_true(cylinder_run_half(&c, &run, shut_down, &gas, &skip));
    }
    memcpy(pressure_Pa[0], up.pressure_Pa, sizeof up.pressure_Pa);
    memcpy(pressure_Pa[1], down.pressure_Pa, sizeof down.pressure_Pa);
    memcpy(pressure_Pa[2], skip.pressure_Pa, sizeof skip.pressure_Pa);
    cylinder_clear(&c);
    return chosen;
}

static double apart(double a[3][361], double b[3][361])
{
    double most = 0;
    for (int k = 0; k < 3; k++)
        for (int i = 0; i < 361; i++)
            most = fmax(most, fabs(a[k][i] - b[k][i]) / cylinder_peak(b[k], 361));
    return most;
}

static void test_cycle_wide_rings(void **state)
{
    (void)state;
    static const double area[] = {0.8, 50, 20, 100, 500}, rpm[] = {300, 900};
    double got[3][361], fine[3][361], one[3][361];
    unsigned refined = 0;
    for (int k = 0; k < 5; k++)
        for (int i = 0; i < 2; i++) {
            if (k == 4 && i == 0) continue; // refused
            unsigned steps = leaking(area[k], rpm[i], 0, got);
            leaking(area[k], rpm[i], 24, fine);
            assert_near(apart(got, fine), 0, 2e-4, 0);
            if (k == 0) assert_int_equal(steps, 1);
            if (steps < 3) continue;
            leaking(area[k], rpm[i], 1, one);
            assert_true(apart(one, fine) > 4e-4);
            refined++;
        }
    assert_true(refined >= 4);
    tacet_engine_def d = demo_six();
    tacet_engine *en;
    tacet_error e;
    d.cycle.blow_by_area_m2 = 500e-6;
    assert_int_equal(tacet_engine_create(&d, &en, NULL), TACET_OK);
    assert_int_equal(tacet_engine_prepare(en, 300 * RPM, 900 * RPM, 1, &e), TACET_BAD_INPUT);
    assert_non_null(strstr(e.text, "blow_by_area_mm2: 500; past rings this wide the gas at top"));
    tacet_engine_destroy(en);
}

// Signs of the trade (common practice, no source). `burnt` recompresses above the firing peak;
// `residual` stays far below it; a cylinder with shut valves takes far less work than an open one
// under throttle.
static void test_cycle_trapped(void **state)
{
    (void)state;
    tacet_engine_def d = demo_v8();
    cylinder c = cylinder_of(&d);
    assert_int_equal(cylinder_grid(&c, 1), TACET_OK);
    tacet_roll *all = roll_of("x", 8), *r = roll_of("x..", 8);
    double firing, lost[4], idles[4];
    for (int trapped = TACET_TRAPPED_RESIDUAL; trapped <= TACET_TRAPPED_OPEN; trapped++) {
        halves h = halves_of(trapped, 12, false);
        direct_run fire = direct_repeat(&c, &h, &d, all, 0, 1500 * RPM, 50e3);
        direct_run skip = direct_repeat(&c, &h, &d, r, 0, 1500 * RPM, 50e3);
        firing = fire.half[1].peak_Pa;
        double idle = 0;
        lost[trapped] = 0;
        for (unsigned k = 0; k < r->cycles; k++) {
            bool fires = tacet_roll_cycle(r, 0, k).tenths > 0;
            for (int part = 0; part < 2; part++) {
                const cylinder_half *half = &skip.half[2 * k + part];
                if (!fires && part == 0) idle = fmax(idle, half->peak_Pa);
                if (!fires) lost[trapped] -= half->work_J[0] + half->work_J[1];
            }
        }
        idles[trapped] = idle;
        if (trapped == TACET_TRAPPED_BURNT) assert_true(idle > firing);
        if (trapped == TACET_TRAPPED_RESIDUAL) assert_true(idle < 0.3 * firing);
        if (trapped == TACET_TRAPPED_OPEN) assert_true(idle < firing && idle > 0.3 * firing);
        free(fire.half);
        free(skip.half);
    }
    assert_true(lost[TACET_TRAPPED_RESIDUAL] < 0.35 * lost[TACET_TRAPPED_OPEN]);
    assert_true(lost[TACET_TRAPPED_OPEN] > 0);
    // `air` takes one intake as an open cylinder does, and compresses it to the same pressure
    assert_near(idles[TACET_TRAPPED_AIR], idles[TACET_TRAPPED_OPEN], 0, 0.03);
    tacet_roll_destroy(all);
    tacet_roll_destroy(r);
    cylinder_clear(&c);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_cycle_polytrope_e7), cmocka_unit_test(test_cycle_returns_its_work),
        cmocka_unit_test(test_cycle_otto_e5),      cmocka_unit_test(test_cycle_step),
        cmocka_unit_test(test_cycle_work_e18),     cmocka_unit_test(test_cycle_wall_heat),
        cmocka_unit_test(test_cycle_exhaust),      cmocka_unit_test(test_cycle_rings),
        cmocka_unit_test(test_cycle_state),        cmocka_unit_test(test_cycle_intake),
        cmocka_unit_test(test_cycle_never_fires),  cmocka_unit_test(test_cycle_energy),
        cmocka_unit_test(test_cycle_trapped),      cmocka_unit_test(test_cycle_late_burn),
        cmocka_unit_test(test_cycle_compression),  cmocka_unit_test(test_cycle_late_peak),
        cmocka_unit_test(test_cycle_wide_rings),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
