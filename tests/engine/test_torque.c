// Torque, pressure and reciprocating inertia at crank angles.
#include "direct.h"
#include "near.h"
#include <complex.h>
#include <stdlib.h>

static engine_pair loaded(const tacet_engine_def *d, const char *word, tacet_roll **r)
{
    engine_pair p = engine_made(d, 1000, 1600, 3);
    tacet_duty q;
    *r = roll_of(word, (unsigned)d->n_cylinders);
    assert_int_equal(tacet_engine_duty(p.engine, *r, 1250 * RPM, 110, p.work, &q), TACET_OK);
    assert_true(q.reachable);
    assert_int_equal(tacet_engine_load(p.engine, *r, &q, 1250 * RPM, p.work), TACET_OK);
    return p;
}

static double torque_at(const engine_pair *p, unsigned slot, double angle)
{
    double t;
    tacet_engine_gas_torque(p->engine, p->work, slot, 1, &angle, &t);
    return t;
}

static double pressure_at(const engine_pair *p, unsigned slot, double angle)
{
    double x;
    tacet_engine_pressure(p->engine, p->work, slot, 1, &angle, &x);
    return x;
}

// Torque is (p - crankcase) area x' of the exact slider at the cylinder's own angle; the firing
// stroke drives, compression brakes.
static void test_torque_is_pressure_times_lever(void **state)
{
    (void)state;
    tacet_engine_def d = demo_v8();
    d.pin_offset_m = 0.001;
    tacet_roll *r;
    engine_pair p = loaded(&d, "..x.x.x", &r);
    double area = M_PI / 4 * 0.01;
    for (unsigned slot = 0; slot < 8; slot += 3)
        for (double deg = 0.3; deg < 360.0 * r->revolutions; deg += 7.1) {
            double x, dx, ddx, angle = deg * DEG;
            tacet_slider_at(tacet_engine_slider(p.engine),
                            angle - tacet_engine_firing_angle(p.engine, slot), &x, &dx, &ddx);
            assert_near(torque_at(&p, slot, angle),
                        (pressure_at(&p, slot, angle) - 100e3) * area * dx, 0.5, 2e-3);
        }
    for (unsigned slot = 0; slot < 8; slot++)
        for (unsigned c = 0; c < r->cycles; c++) {
            double top = tacet_engine_firing_angle(p.engine, slot) + 4 * M_PI * c;
            if (tacet_roll_cycle(r, slot, c).tenths == 0) continue;
            assert_true(torque_at(&p, slot, top + 20 * DEG) > 300);
            assert_true(torque_at(&p, slot, top - 20 * DEG) < -50);
        }
    tacet_roll_destroy(r);
    engine_cleared(&p);
}

// A march that runs away asks for any angle there is: the answer is a torque or NAN, from inside
// the tables.
static void test_torque_angles_out_of_all_reach(void **state)
{
    (void)state;
    tacet_engine_def d = demo_six();
    tacet_roll *r;
    engine_pair p = loaded(&d, "xx.x", &r);
    for (double angle = 1; angle < 1e300; angle *= 1.37)
        for (int sign = -1; sign <= 1; sign += 2) {
            double a = sign * angle, t = 0, J = 0, s = 0, J1, s1;
            bool far = angle * 180 / M_PI > 1.001e9;
            tacet_engine_drive(p.engine, p.work, 2, 1, &a, &t, &J, &s);
            tacet_engine_inertia(p.engine, 2, 1, &a, &J1, &s1);
            assert_true(far ? isnan(t) && isnan(J) && isnan(s) && isnan(J1) && isnan(s1)
                            : fabs(t) < 1e4 && J >= 0 && J < 0.1 && J1 >= 0 && J1 < 0.1);
            assert_true(isnan(pressure_at(&p, 2, a)) == far && isnan(torque_at(&p, 2, a)) == far);
        }
    tacet_roll_destroy(r);
    engine_cleared(&p);
}

// The repeat repeats, at any angle; many angles in one call give what single calls give; what is
// not finite comes back as such.
static void test_torque_angles(void **state)
{
    (void)state;
    tacet_engine_def d = demo_six();
    tacet_roll *r;
    engine_pair p = loaded(&d, "xx.x", &r);
    double repeat = 2 * M_PI * r->revolutions, angle[500], t[500], q[500];
    for (int i = 0; i < 500; i++)
        angle[i] = -3 + 0.31 * i + (i % 7 == 3 ? -40 * repeat : 0) + 0.002 * sin(i);
    tacet_engine_gas_torque(p.engine, p.work, 4, 500, angle, t);
    tacet_engine_pressure(p.engine, p.work, 4, 500, angle, q);
    for (int i = 0; i < 500; i++) {
        assert_near(t[i], torque_at(&p, 4, angle[i]), 1e-9, 1e-11);
        assert_near(torque_at(&p, 4, angle[i] + 5 * repeat), t[i], 1e-6, 1e-8);
        assert_near(q[i], pressure_at(&p, 4, angle[i] - repeat), 1e-2, 1e-8);
    }
    assert_true(isnan(torque_at(&p, 0, NAN)) && isnan(torque_at(&p, 0, INFINITY)));
    assert_true(isnan(pressure_at(&p, 0, -INFINITY)));
    double inertia, slope, bad = NAN;
    tacet_engine_inertia(p.engine, 0, 1, &bad, &inertia, &slope);
    assert_true(isnan(inertia) && isnan(slope));
    tacet_roll_destroy(r);
    engine_cleared(&p);
}

// Uneven firing: a cylinder fires at the sum of the intervals before it, and equal cylinders that
// all fire do the same from there on, so the work of the repeat stays what it is.
static void test_torque_uneven(void **state)
{
    (void)state;
    static const double interval[] = {90, 150, 100, 140, 110, 130},
                        at[] = {0, 90, 240, 340, 480, 590};
    double rad[6];
    for (int i = 0; i < 6; i++)
        rad[i] = interval[i] * DEG;
    tacet_engine_def d = demo_six();
    engine_pair even = engine_made(&d, 1200, 1300, 0);
    d.firing_intervals_rad = rad, d.n_intervals = 6;
    engine_pair p = engine_made(&d, 1200, 1300, 0);
    tacet_duty q = duty_of(&p, "x", 1250, 300), r = duty_of(&even, "x", 1250, 300);
    assert_near(q.charge_Pa, r.charge_Pa, 0, 1e-12);
    tacet_roll *all = roll_of("x", 6);
    assert_int_equal(tacet_engine_load(p.engine, all, &q, 1250 * RPM, p.work), TACET_OK);
    for (unsigned slot = 0; slot < 6; slot++) {
        assert_near(tacet_engine_firing_angle(p.engine, slot), at[slot] * DEG, 1e-12, 0);
        for (double a = 0.1; a < 4 * M_PI; a += 0.37) {
            double own = torque_at(&p, slot, at[slot] * DEG + a);
            assert_near(own, torque_at(&p, 0, a), 1e-6, 1e-9);
        }
        assert_true(torque_at(&p, slot, (at[slot] + 25) * DEG) > 500);
    }
    tacet_roll_destroy(all);
    engine_cleared(&even);
    engine_cleared(&p);
}

// Value and slope are continuous over whole degrees and over both tops, for every kind of trapped
// gas and with tenths, whose pressures differ most over the gas-exchange top.
static void test_torque_is_smooth(void **state)
{
    (void)state;
    for (int trapped = TACET_TRAPPED_RESIDUAL; trapped <= TACET_TRAPPED_OPEN; trapped++) {
        tacet_engine_def d = demo_six();
        d.skip.trapped = trapped;
        tacet_roll *r;
        engine_pair p = loaded(&d, "x.5..", &r);
        assert_int_equal(tacet_roll_fires_of(r, 1), 2); // a full and a half charge, and skips
        double h = 1e-5 * DEG, top = tacet_engine_firing_angle(p.engine, 1);
        for (unsigned deg = 0; deg < 360 * r->revolutions; deg++) {
            double a = top + deg * DEG, at = torque_at(&p, 1, a);
            double before = (at - torque_at(&p, 1, a - h)) / h;
            double after = (torque_at(&p, 1, a + h) - at) / h;
            assert_near(after, before, 0.5, 1e-4);
        }
        tacet_roll_destroy(r);
        engine_cleared(&p);
    }
}

// Between whole degrees: against cycles computed with four steps a degree and sampled in between,
// the torque is within 0.2 % of its rms.
static void test_torque_between_degrees(void **state)
{
    (void)state;
    tacet_engine_def d = demo_six();
    tacet_roll *r;
    engine_pair p = loaded(&d, "x", &r);
    cylinder fine = cylinder_of(&d);
    assert_int_equal(cylinder_grid(&fine, 1), TACET_OK);
    tacet_duty q = duty_of(&p, "x", 1250, 110);
    direct_run run =
        direct_repeat(&fine, &p.engine->table.halves, &d, r, 0, 1250 * RPM, q.charge_Pa);
    double off = 0, all = 0;
    for (unsigned i = 1; i < 359; i++) { // pressure between degrees by a cubic, exact lever
        const double *c = run.half[1].pressure_Pa + i;
        double x, dx, ddx, a = (i + 0.5) * DEG;
        double mid = (9 * (c[0] + c[1]) - (c[-1] + c[2])) / 16;
        tacet_slider_at(tacet_engine_slider(p.engine), a, &x, &dx, &ddx);
        double direct = (mid - 100e3) * M_PI / 4 * 0.108 * 0.108 * dx, t = torque_at(&p, 0, a);
        off += (t - direct) * (t - direct);
        all += direct * direct;
    }
    assert_near(sqrt(off / all), 0, 2e-3, 0);
    free(run.half);
    cylinder_clear(&fine);
    tacet_roll_destroy(r);
    engine_cleared(&p);
}

// J = m x'^2 and its slope, against the exact slider; the mean against a fine sum, and against the
// closed form r^2 m (1/2 + lam^2/8) of the first terms.
static void test_torque_inertia(void **state)
{
    (void)state;
    tacet_engine_def d = demo_v8();
    for (double offset = 0; offset < 0.004; offset += 0.0015) {
        d.pin_offset_m = offset;
        tacet_engine *en = NULL;
        assert_int_equal(tacet_engine_create(&d, &en, NULL), TACET_OK);
        double sum = 0;
        for (int i = 0; i < 5000; i++) {
            double a = -20 + 0.0173 * i, J, slope, x, dx, ddx, m = 0.62;
            tacet_engine_inertia(en, 3, 1, &a, &J, &slope);
            tacet_slider_at(tacet_engine_slider(en), a - tacet_engine_firing_angle(en, 3), &x, &dx,
                            &ddx);
            assert_near(J, m * dx * dx, 1e-15, 1e-13);
            assert_near(slope, 2 * m * dx * ddx, 1e-13, 1e-12);
            tacet_slider_at(tacet_engine_slider(en), 2 * M_PI * i / 5000, &x, &dx, &ddx);
            sum += m * dx * dx / 5000;
        }
        assert_near(tacet_engine_mean_inertia(en), sum, 0, 1e-13);
        double lam = 0.046 / 0.155;
        if (offset == 0) assert_near(sum, 0.62 * 0.046 * 0.046 * (0.5 + lam * lam / 8), 0, 2e-3);
        tacet_engine_destroy(en);
    }
}

// With a pin offset a stroke is a little longer than two cranks: sqrt((l+r)^2 - e^2) -
// sqrt((l-r)^2 - e^2), closed form; displacement and compression ratio are of that stroke.
static void test_torque_displacement(void **state)
{
    (void)state;
    tacet_engine_def d = demo_v8();
    d.pin_offset_m = 0.02;
    tacet_engine *en = NULL;
    assert_int_equal(tacet_engine_create(&d, &en, NULL), TACET_OK);
    double stroke = sqrt(0.201 * 0.201 - 4e-4) - sqrt(0.109 * 0.109 - 4e-4), x, dx, ddx;
    assert_true(stroke > 0.0925);
    assert_near(tacet_engine_displacement(en), 8 * M_PI / 4 * 0.01 * stroke, 0, 1e-14);
    double bottom = M_PI + asin(0.02 / 0.109) - asin(0.02 / 0.201), dead = en->cyl.clearance_m3;
    tacet_slider_at(tacet_engine_slider(en), bottom, &x, &dx, &ddx);
    assert_near((dead + M_PI / 4 * 0.01 * x) / dead, 10.8, 0, 1e-13);
    tacet_engine_destroy(en);
}

// All three at once are what they are one after another, added to what was there; 2-stroke halves
// start at bottom (test_traces.c has such an engine).
static void test_torque_drive(void **state)
{
    (void)state;
    tacet_engine_def d = demo_v8();
    tacet_roll *r;
    engine_pair p = loaded(&d, "..x.x.x", &r);
    double angle[400], t[400], J[400], s[400], t1[400], J1[400], s1[400];
    for (int i = 0; i < 400; i++) {
        angle[i] = -7 + 0.41 * i + (i % 11 == 4 ? 1e4 : 0);
        t[i] = J[i] = s[i] = i;
    }
    angle[399] = NAN;
    for (unsigned slot = 0; slot < 8; slot++) {
        tacet_engine_gas_torque(p.engine, p.work, slot, 400, angle, t1);
        tacet_engine_inertia(p.engine, slot, 400, angle, J1, s1);
        tacet_engine_drive(p.engine, p.work, slot, 400, angle, t, J, s);
        for (int i = 0; i < 399; i++) {
            assert_near(t[i] - i, t1[i], 1e-9, 1e-9);
            assert_near(J[i] - i, J1[i], 1e-12, 1e-9);
            assert_near(s[i] - i, s1[i], 1e-12, 1e-9);
            t[i] = J[i] = s[i] = i;
        }
        assert_true(isnan(t[399]) && isnan(J[399]) && isnan(s[399]));
    }
    tacet_roll_destroy(r);
    engine_cleared(&p);
}

// Content of a fired cycle: against the trapezoid over 0.1 degrees of the torque from one
// gas-exchange top to the next, about its firing top; order 0 is its work. In a word with tenths:
// weighted by tenths, the pulses of all fires add up.
static void test_torque_pulse(void **state)
{
    (void)state;
    static const char *const words[] = {"x", "..x.x.x", "x.5."};
    static const double order[] = {0, 0.1, 0.5, 1, 1.5, 3, 7.25, 12, 24, 36};
    for (size_t k = 0; k < 3; k++) {
        tacet_engine_def d = demo_v8();
        tacet_roll *r;
        engine_pair p = loaded(&d, words[k], &r);
        double complex pulse[10], sum[10] = {0};
        double weight = 0;
        tacet_engine_fired_pulse(p.engine, p.work, 10, order, pulse);
        for (unsigned c = 0; c < r->cycles * 8; c++) {
            unsigned slot = c / r->cycles, tenths = tacet_roll_cycle(r, slot, c % r->cycles).tenths;
            if (tenths == 0) continue;
            weight += tenths / 10.0;
            double top = tacet_engine_firing_angle(p.engine, slot) + 4 * M_PI * (c % r->cycles);
            for (int i = -3600; i < 3600; i++) { // midpoints
                double a = (i + 0.5) * DEG / 10, t = torque_at(&p, slot, top + a);
                for (int j = 0; j < 10; j++)
                    sum[j] += t * cexp(-I * order[j] * a) * DEG / 10;
            }
        }
        for (int j = 0; j < 10; j++)
            assert_near(cabs(pulse[j] - sum[j] / weight), 0, 2e-4 * cabs(sum[0] / weight), 0);
        assert_true(creal(pulse[0]) > 50);
        tacet_roll_destroy(r);
        engine_cleared(&p);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_torque_is_pressure_times_lever),
        cmocka_unit_test(test_torque_angles),
        cmocka_unit_test(test_torque_uneven),
        cmocka_unit_test(test_torque_angles_out_of_all_reach),
        cmocka_unit_test(test_torque_is_smooth),
        cmocka_unit_test(test_torque_between_degrees),
        cmocka_unit_test(test_torque_inertia),
        cmocka_unit_test(test_torque_displacement),
        cmocka_unit_test(test_torque_drive),
        cmocka_unit_test(test_torque_pulse),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
