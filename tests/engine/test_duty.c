// Charge for a demand: the demand is met, limits are named, nothing depends on what was asked
// before.
#include "direct.h"
#include "near.h"
#include <string.h>

// Mean over the repeat of all gas torques, sampled every half degree.
static double mean_gas_torque(const engine_pair *p, const tacet_roll *r)
{
    double sum = 0, angle, t;
    unsigned n = 720 * r->revolutions;
    for (unsigned slot = 0; slot < r->cylinders; slot++)
        for (unsigned i = 0; i < n; i++) {
            angle = (i + 0.25) * DEG / 2;
            tacet_engine_gas_torque(p->engine, p->work, slot, 1, &angle, &t);
            sum += t;
        }
    return sum / n;
}

// Brake torque is the mean of all gas torques less friction, here of the torque that a load gives;
// friction is fmep V / (4 pi) of the study's coefficients (E15, E16); energies add up to the fuel.
static void test_duty_meets_demand(void **state)
{
    (void)state;
    static const char *const words[] = {"x", "x.", "..x.x.x", "xx.", "x.5"};
    tacet_engine_def d = demo_six();
    engine_pair p = engine_made(&d, 900, 1900, 4);
    for (size_t i = 0; i < 5; i++)
        for (double rpm = 1000; rpm < 1900; rpm += 430) {
            double demand = 150 + 37 * (double)i;
            tacet_roll *r = roll_of(words[i], 6);
            tacet_duty q;
            assert_int_equal(tacet_engine_duty(p.engine, r, rpm * RPM, demand, p.work, &q),
                             TACET_OK);
            assert_true(q.reachable && q.reach == TACET_REACH_OK);
            assert_near(q.brake_torque_Nm, demand, 0, 1e-11);
            assert_int_equal(tacet_engine_load(p.engine, r, &q, rpm * RPM, p.work), TACET_OK);
            assert_near(mean_gas_torque(&p, r) - q.friction_Nm, demand, 0, 1e-4);
            double k = rpm / 1000, volume = 6 * M_PI / 4 * 0.108 * 0.108 * 0.130;
            double own = (65e3 + 13e3 * k + 4e3 * k * k) * volume / (4 * M_PI);
            double peaks = q.friction_Nm - own; // 4 kPa for each MPa of mean peak pressure
            double most = 4e3 * q.peak_pressure_Pa / 1e6 * volume / (4 * M_PI);
            if (i == 0) assert_near(peaks, most, 0, 1e-9); // all peaks are alike
            if (i > 0) assert_true(peaks > 0 && peaks < 0.99 * most);
            assert_near(q.brake_W, demand * rpm * RPM, 0, 1e-10);
            assert_near(q.friction_W, q.friction_Nm * rpm * RPM, 0, 1e-12);
            assert_near(q.gross_W - q.pumping_W - q.friction_W, q.brake_W, 0, 1e-10);
            assert_near(q.brake_W + q.friction_W + q.wall_heat_W + q.exhaust_W + q.blow_by_W,
                        q.fuel_W, 0, 1e-6);
            assert_near(q.fuel_kg_per_s, q.fuel_W / 44e6, 0, 1e-14);
            assert_near(q.charge_ratio,
                        (q.charge_Pa - 25e3) / (tacet_curve_at(&d.cycle.highest_Pa, rpm) - 25e3), 0,
                        1e-12);
            tacet_roll_destroy(r);
        }
    engine_cleared(&p);
}

// E8 through the engine: a friction mep of 10 bar on 2.0 l is 159.15494 N m, and 50.000 kW at
// 3000 rpm.
static void test_duty_friction_e8(void **state)
{
    (void)state;
    tacet_engine_def d = demo_v8();
    d.stroke_m = 2e-3 / (8 * M_PI / 4 * 0.01);
    d.rod_length_m = 3 * d.stroke_m;
    d.friction = (tacet_friction_def){10e5, 0, 0, 0};
    engine_pair p = engine_made(&d, 2900, 3000, 0);
    assert_near(tacet_engine_displacement(p.engine), 2e-3, 0, 1e-14);
    tacet_duty q = duty_of(&p, "x", 3000, 0);
    assert_near(q.friction_Nm, 159.15494, 1e-5, 0);
    assert_near(q.friction_W, 50e3, 1e-6, 0);
    engine_cleared(&p);
}

static void test_duty_limits(void **state)
{
    (void)state;
    tacet_engine_def d = demo_six();
    engine_pair p = engine_made(&d, 900, 1900, 2);
    tacet_duty q = duty_of(&p, "x.", 1500, 5000);
    assert_true(!q.reachable && q.reach == TACET_REACH_TOO_HIGH);
    assert_near(q.charge_Pa, 185e3, 0, 1e-12);
    assert_near(q.charge_ratio, 1, 1e-12, 0);
    assert_true(q.brake_torque_Nm > 300 && q.brake_torque_Nm < 5000);
    double most = q.brake_torque_Nm;
    q = duty_of(&p, "x.", 1500, most * (1 - 1e-9));
    assert_true(q.reachable);
    q = duty_of(&p, "x.", 1500, -500);
    assert_true(!q.reachable && q.reach == TACET_REACH_TOO_LOW);
    assert_near(q.charge_Pa, 25e3, 0, 1e-12);
    q = duty_of(&p, "x.", 899, 100);
    assert_true(!q.reachable && q.reach == TACET_REACH_SPEED);
    assert_true(isnan(q.charge_Pa) && isnan(q.fuel_W));
    assert_true(duty_of(&p, "x.", 900, 100).reachable && duty_of(&p, "x.", 1900, 100).reachable);
    q = duty_of(&p, "x......", 1500, 100); // each cylinder skips 6 in a row
    assert_true(!q.reachable && q.reach == TACET_REACH_RUN);
    q = duty_of(&p, "x.....", 1500, 100); // one cylinder fires always, five never
    // with the friction of six some 1.7 MPa of imep from its 1.19 L: boosted to 1.85 bar it can
    assert_true(q.reachable && q.charge_ratio > 0.5);
    q = duty_of(&p, "x1", 1500, 300); // a tenth of 185 kPa lies below the lowest charge
    assert_true(!q.reachable && q.reach == TACET_REACH_TOO_LOW);
    q = duty_of(&p, "x2", 1500, 450);
    assert_true(q.reachable && 0.2 * q.charge_Pa >= 25e3);
    engine_cleared(&p);
}

// A peak-pressure limit that binds: the nearest reachable duty has just that peak.
static void test_duty_peak_limit(void **state)
{
    (void)state;
    tacet_engine_def d = demo_six();
    d.cycle.peak_pressure_Pa = 6e6;
    engine_pair p = engine_made(&d, 900, 1900, 2);
    tacet_duty free = duty_of(&p, "x", 1500, 250);
    assert_true(free.reachable && free.peak_pressure_Pa < 6e6 && !free.peak_in_skip);
    tacet_duty q = duty_of(&p, "x.", 1500, 330);
    assert_true(!q.reachable && q.reach == TACET_REACH_PEAK_PRESSURE);
    assert_near(q.peak_pressure_Pa, 6e6, 0, 1e-9);
    assert_true(q.brake_torque_Nm < 330);
    q = duty_of(&p, "x.", 1500, 3000); // the charge would not do either
    assert_true(!q.reachable && q.reach == TACET_REACH_TOO_HIGH);
    assert_near(q.peak_pressure_Pa, 6e6, 0, 1e-9);
    engine_cleared(&p);
}

// The highest peak of `burnt` can be of a skipped cycle, and then it is the one that counts.
static void test_duty_peak_in_skip(void **state)
{
    (void)state;
    tacet_engine_def d = demo_v8();
    d.skip.trapped = TACET_TRAPPED_BURNT;
    engine_pair p = engine_made(&d, 2000, 3000, 3);
    tacet_duty all = duty_of(&p, "x", 2500, 150), q = duty_of(&p, "xx.", 2500, 150);
    assert_true(all.reachable && q.reachable);
    assert_true(!all.peak_in_skip && q.peak_in_skip);
    // against the pressures themselves
    tacet_roll *r = roll_of("xx.", 8);
    double peak = 0, p_Pa;
    assert_int_equal(tacet_engine_load(p.engine, r, &q, 2500 * RPM, p.work), TACET_OK);
    for (double a = 0; a < 2 * M_PI * r->revolutions; a += DEG / 5) {
        tacet_engine_pressure(p.engine, p.work, 0, 1, &a, &p_Pa);
        peak = fmax(peak, p_Pa);
    }
    assert_near(peak, q.peak_pressure_Pa, 0, 3e-3);
    tacet_roll_destroy(r);
    engine_cleared(&p);
}

static void test_duty_refuses(void **state)
{
    (void)state;
    tacet_engine_def d = demo_six();
    engine_pair p = engine_made(&d, 900, 1900, 1);
    tacet_roll *six = roll_of("x", 6), *four = roll_of("x", 4);
    tacet_duty q = {0};
    assert_int_equal(tacet_engine_duty(p.engine, four, 1500 * RPM, 100, p.work, &q),
                     TACET_BAD_INPUT);
    assert_int_equal(tacet_engine_duty(p.engine, six, 1500 * RPM, NAN, p.work, &q),
                     TACET_BAD_INPUT);
    assert_int_equal(tacet_engine_duty(p.engine, six, INFINITY, 100, p.work, &q), TACET_BAD_INPUT);
    q = duty_of(&p, "x", 100, 100);
    assert_int_equal(tacet_engine_load(p.engine, six, &q, 1500 * RPM, p.work), TACET_BAD_INPUT);
    tacet_error e = {0};
    assert_int_equal(tacet_engine_prepare(p.engine, 100, 50, 1, &e), TACET_BAD_INPUT);
    assert_int_equal(tacet_engine_prepare(p.engine, 0, 50, 1, &e), TACET_BAD_INPUT);
    assert_int_equal(tacet_engine_prepare(p.engine, 50, NAN, 1, &e), TACET_BAD_INPUT);
    tacet_roll_destroy(six);
    tacet_roll_destroy(four);
    engine_cleared(&p);
    tacet_engine *none = NULL;
    d.rod_length_m = 0.01;
    assert_int_equal(tacet_engine_create(&d, &none, &e), TACET_BAD_INPUT);
    assert_null(none);
    assert_non_null(strstr(e.text, "engine.rod_length_mm: a rod of 10 mm"));
}

// The same bits forwards, backwards and from fresh memory, duty and torque alike.
#define ASKED 12
static void ask(const engine_pair *p, tacet_engine_work *w, size_t i, tacet_duty *q, double t[32])
{
    static const char *const words[] = {"x", "xx.", "..x.x.x", "x5."};
    tacet_roll *r = roll_of(words[i % 4], 6);
    double rpm = 950 + 300 * (double)(i / 4), angle[32];
    assert_int_equal(tacet_engine_duty(p->engine, r, rpm * RPM, 150 + 20 * (double)(i % 3), w, q),
                     TACET_OK);
    assert_int_equal(tacet_engine_load(p->engine, r, q, rpm * RPM, w), TACET_OK);
    for (int k = 0; k < 32; k++)
        angle[k] = 0.37 * k;
    tacet_engine_gas_torque(p->engine, w, 2, 32, angle, t);
    tacet_roll_destroy(r);
}

static void test_duty_is_pure(void **state)
{
    (void)state;
    tacet_engine_def d = demo_six();
    engine_pair p = engine_made(&d, 900, 1900, 4);
    tacet_duty first[ASKED], q;
    double torque[ASKED][32], t[32];
    memset(first, 0, sizeof first);
    for (size_t i = 0; i < ASKED; i++)
        ask(&p, p.work, i, &first[i], torque[i]);
    for (size_t k = 0; k < 2 * ASKED; k++) {
        size_t i = k < ASKED ? ASKED - 1 - k : (k * 7) % ASKED;
        tacet_engine_work *w = p.work, *fresh = NULL;
        assert_int_equal(tacet_engine_work_create(p.engine, &fresh), TACET_OK);
        if (k % 2) w = fresh;
        ask(&p, w, i, &q, t);
        assert_memory_equal(&q.charge_Pa, &first[i].charge_Pa, sizeof q.charge_Pa);
        assert_memory_equal(&q.fuel_W, &first[i].fuel_W, sizeof q.fuel_W);
        assert_memory_equal(&q.exhaust_W, &first[i].exhaust_W, sizeof q.exhaust_W);
        assert_memory_equal(t, torque[i], sizeof t);
        tacet_engine_work_destroy(fresh);
    }
    engine_cleared(&p);
}

// Rotations of one word need the same charge and fuel.
static void test_duty_placements(void **state)
{
    (void)state;
    tacet_engine_def d = demo_six();
    engine_pair p = engine_made(&d, 900, 1900, 4);
    tacet_duty a = duty_of(&p, "x.", 1300, 250), b = duty_of(&p, ".x", 1300, 250);
    assert_near(b.charge_Pa, a.charge_Pa, 0, 1e-12);
    assert_near(b.fuel_W, a.fuel_W, 0, 1e-12);
    a = duty_of(&p, "xx.x", 1300, 250), b = duty_of(&p, "x.xx", 1300, 250);
    assert_near(b.charge_Pa, a.charge_Pa, 0, 1e-12);
    tacet_duty same = duty_of(&p, "xx.xxx.x", 1300, 250);
    assert_near(same.charge_Pa, a.charge_Pa, 0, 1e-12);
    engine_cleared(&p);
}

// Highest pressure of the cylinder in a slot, sampled.
static double peak_of(const engine_pair *p, unsigned slot)
{
    double peak = 0, x;
    for (double a = 0; a < 4 * M_PI; a += DEG) {
        tacet_engine_pressure(p->engine, p->work, slot, 1, &a, &x);
        peak = fmax(peak, x);
    }
    return peak;
}

// A cylinder with 1.2 of the common charge runs as all cylinders do at 1.2 times the charge; the
// demand is met by the sum, at a lower common charge.
static void test_duty_charge_factor(void **state)
{
    (void)state;
    tacet_engine_def d = demo_v8();
    engine_pair even = engine_made(&d, 1000, 3000, 1);
    tacet_cylinder_def own[8];
    memcpy(own, d.cylinders, sizeof own);
    own[2].charge_factor = 1.2; // cylinder 3
    d.cylinders = own;
    engine_pair p = engine_made(&d, 1000, 3000, 1);
    tacet_duty all = duty_of(&even, "x", 1500, 100), q = duty_of(&p, "x", 1500, 100);
    assert_near(q.brake_torque_Nm, 100, 0, 1e-10);
    assert_near(q.charge_Pa * 8.2 / 8, all.charge_Pa, 0, 2e-3);
    assert_near(q.brake_W + q.friction_W + q.wall_heat_W + q.exhaust_W + q.blow_by_W, q.fuel_W, 0,
                1e-6);
    tacet_roll *r = roll_of("x", 8);
    assert_int_equal(tacet_engine_load(p.engine, r, &q, 1500 * RPM, p.work), TACET_OK);
    tacet_duty richer = q;
    richer.charge_Pa = 1.2 * q.charge_Pa;
    assert_int_equal(tacet_engine_load(even.engine, r, &richer, 1500 * RPM, even.work), TACET_OK);
    double rich = peak_of(&even, 0);
    assert_int_equal(tacet_engine_load(even.engine, r, &q, 1500 * RPM, even.work), TACET_OK);
    double common = peak_of(&even, 0);
    for (unsigned slot = 0; slot < 8; slot++) {
        bool own_charge = tacet_engine_number(p.engine, slot) == 3;
        assert_near(peak_of(&p, slot), own_charge ? rich : common, 0, 1e-3);
    }
    assert_near(q.peak_pressure_Pa, rich, 0, 3e-3);
    tacet_roll_destroy(r);
    engine_cleared(&even);
    engine_cleared(&p);
}

// The most fuel by fuel is the air over the lowest air/fuel ratio; by charge it is the mixture over
// one more. The same cylinder full of gas but for the little that residual gas differs.
static void test_duty_most_fuel(void **state)
{
    (void)state;
    tacet_engine_def d = demo_six();
    d.cycle.peak_pressure_Pa = NAN;
    engine_pair charge = engine_made(&d, 1400, 1600, 0);
    d.cycle.load_by = TACET_LOAD_FUEL;
    engine_pair fuel = engine_made(&d, 1400, 1600, 0);
    tacet_duty a = duty_of(&charge, "x", 1500, 1e6), b = duty_of(&fuel, "x", 1500, 1e6);
    assert_true(a.reach == TACET_REACH_TOO_HIGH && b.reach == TACET_REACH_TOO_HIGH);
    assert_near(b.charge_ratio, 1, 1e-12, 0);
    assert_near(b.fuel_W / a.fuel_W, 16.6 / 15.6, 0, 5e-3);
    // a cylinder full at manifold pressure and temperature, within a few per cent
    double mass = 6 * 185e3 * M_PI / 4 * 0.108 * 0.108 * 0.130 / (287 * 320);
    assert_near(b.fuel_kg_per_s, mass / 15.6 * 1500 / 120, 0, 0.03);
    engine_cleared(&charge);
    engine_cleared(&fuel);
}

// Load by fuel: air at the highest pressure, fuel from the demand; less fuel burns in more air, so
// peak pressure stays high at low load; zero fuel motors the engine.
static void test_duty_by_fuel(void **state)
{
    (void)state;
    tacet_engine_def d = demo_six();
    d.cycle.load_by = TACET_LOAD_FUEL;
    engine_pair p = engine_made(&d, 900, 1900, 2);
    tacet_duty low = duty_of(&p, "x", 1500, 100), high = duty_of(&p, "x", 1500, 400);
    assert_true(low.reachable && high.reachable);
    assert_near(low.charge_Pa, 185e3, 0, 1e-12);
    assert_true(low.charge_ratio < high.charge_ratio && high.charge_ratio < 1);
    assert_true(low.peak_pressure_Pa > 0.5 * high.peak_pressure_Pa);
    assert_near(low.brake_W + low.friction_W + low.wall_heat_W + low.exhaust_W + low.blow_by_W,
                low.fuel_W, 0, 1e-6);
    tacet_duty idle = duty_of(&p, "x", 1500, -1000);
    assert_true(idle.reach == TACET_REACH_TOO_LOW && idle.brake_torque_Nm < 0);
    assert_near(idle.fuel_W, 0, 1e-9, 0);
    // three cylinders do the work of six with the same fuel each, about twice the fuel a cylinder
    tacet_duty half = duty_of(&p, "x.", 1500, 100);
    assert_near(half.charge_ratio / low.charge_ratio, 2, 0.3, 0);
    engine_cleared(&p);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_duty_meets_demand),  cmocka_unit_test(test_duty_friction_e8),
        cmocka_unit_test(test_duty_limits),        cmocka_unit_test(test_duty_peak_limit),
        cmocka_unit_test(test_duty_peak_in_skip),  cmocka_unit_test(test_duty_refuses),
        cmocka_unit_test(test_duty_is_pure),       cmocka_unit_test(test_duty_placements),
        cmocka_unit_test(test_duty_charge_factor), cmocka_unit_test(test_duty_by_fuel),
        cmocka_unit_test(test_duty_most_fuel),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
