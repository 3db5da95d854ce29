// Unequal cylinders and cycles, from study to row. Expected values are closed forms, or two ways to
// ask for the same thing.
#include "demo.h"
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define PERCENT 0.02 // cyclic dispersion of the studies below

// A single-cylinder engine behind a soft shaft, so lightly damped that its resonance is a
// thousandth of the band wide, and the same shaft without damping.
static const char one_cylinder[] =
    "title: one\n"
    "engine: {strokes: 4, bore_mm: 108, stroke_mm: 130, rod_length_mm: 215, "
    "compression_ratio: 12.5, reciprocating_mass_kg: 2.7, firing_order: [1],\n"
    "  dispersion: {cylinder_percent: 0, cyclic_percent: 2}}\n"
    "cycle: {manifold_kpa: {lowest: 25, highest: 185}}\n"
    "skip: {longest_run: 1}\n"
    "train:\n"
    "  nodes: [{name: throw1, inertia_kgm2: 3}, {name: flywheel, inertia_kgm2: 2}]\n"
    "  links: [{name: shaft, from: throw1, to: flywheel, stiffness_nm_per_rad: 2e4, DAMPING}]\n"
    "  flywheel: flywheel\n"
    "bands: [{name: shaft, kind: crank, low_hz: 19, high_hz: 22, quantity: \"link-torque:shaft\", "
    "limit_rms: 50}]\n"
    "screen: {speeds_rpm: [900], brake_torque_nm: 40}                                \n";

static char *one_text(const char *damping)
{
    char *text = calloc(1, 4096);
    strcpy(text, one_cylinder);
    demo_replace(text, "DAMPING", damping);
    return text;
}

// Torque T exp(i w t) on J1 gives a shaft torque of (k + i w c) / J1 / (w_n^2 - w^2 + 2 i z w_n w),
// w_n^2 = k (1/J1 + 1/J2). Over a resonance much narrower than the band, integral |H|^2 df =
// (k/J1)^2 / (8 z w_n^3) (the mean square of an oscillator under white noise, 1 / (4 z w_n^3) times
// pi over 2 pi), less the tails beyond the band: 2/pi z (w_n/(w_n - w_low) + ..) of it. Campbell:
// mean square 2 lambda sigma^2 |P|^2 integral.
static void sharp(double ratio, double tolerance)
{
    demo d;
    char damping[64];
    snprintf(damping, sizeof damping, "damping_ratio: %g", ratio);
    char *text = one_text(damping);
    demo_open_text(&d, text);
    tacet_row row;
    tacet_condition c = demo_condition(&d, tacet_model_all_fire(d.model), 900);
    assert_int_equal(tacet_solve(d.model, &c, TACET_LEVEL_RIPPLE, d.work, &row), TACET_OK);
    const tacet_train *t = tacet_model_train(d.model);
    double k = 2e4, J1 = tacet_train_node_inertia(t, 0), J2 = 2, wn = sqrt(k * (1 / J1 + 1 / J2));
    double rpm = 900, turns_per_s = rpm / 60, order = wn / (2 * M_PI) / turns_per_s;
    assert_true(wn / (2 * M_PI) > 19.5 && wn / (2 * M_PI) < 21.5);
    double complex pulse;
    tacet_engine_fired_pulse(tacet_model_engine(d.model), tacet_workspace_engine(d.work), 1, &order,
                             &pulse);
    pulse /= 2 * M_PI * turns_per_s; // N m s
    double integral = k / J1 * k / J1 / (8 * ratio * wn * wn * wn);
    double expected =
        2 * turns_per_s / 2 * PERCENT * PERCENT * creal(pulse * conj(pulse)) * integral;
    const tacet_band_level *level = &row.bands[0].level;
    double got = level->dispersed * level->dispersed - level->nominal * level->nominal;
    assert_near(got, expected, 0, tolerance);
    free(text);
    demo_close(&d);
}

static void test_resonance_sharper_than_any_grid(void **state)
{
    (void)state;
    sharp(1e-3, 0.02); // tails of 1 %
    sharp(1e-5, 2e-3);
}

static void test_undamped_mode_in_a_band_is_refused(void **state)
{
    (void)state;
    demo d;
    tacet_error e;
    char *text = one_text("damping_ratio: 0");
    assert_int_equal(demo_try_text(&d, text, &e), TACET_BAD_INPUT);
    assert_non_null(strstr(e.text, "band 'shaft' holds an undamped mode at 20."));
    assert_non_null(strstr(e.text, "cyclic_percent: 0"));
    demo_close(&d);
    demo_replace(text, "cyclic_percent: 2", "cyclic_percent: 0");
    assert_int_equal(demo_try_text(&d, text, &e), TACET_OK);
    demo_close(&d);
    free(text);
}

static char *six_text(const char *bands)
{
    char *text = demo_text("forwarder.yaml");
    char *from = strstr(text, "bands:\n"), *to = strstr(text, "\nlimits:");
    assert_true(from && to);
    memmove(from + strlen(bands), to, strlen(to) + 1);
    memcpy(from, bands, strlen(bands));
    demo_replace(text, "{trapped: residual}", "{trapped: residual, longest_run: 2}");
    demo_replace(text, "900:1900:25", "[900, 1200, 1900]");
    return text;
}

static double added(const tacet_band_result *b)
{
    return b->level.dispersed * b->level.dispersed - b->level.nominal * b->level.nominal;
}

// Irregularity is the flywheel's speed over the mean speed, whatever makes it vary.
static void test_irregularity_is_speed_over_mean_speed(void **state)
{
    (void)state;
    demo d;
    tacet_row row;
    char *text =
        six_text("bands:\n"
                 "  - {name: a, kind: crank, low_hz: 15, high_hz: 29, quantity: irregularity, "
                 "limit_rms: 1}\n"
                 "  - {name: b, kind: crank, low_hz: 15, high_hz: 29, quantity: "
                 "\"node-speed:flywheel\", limit_rms: 1}\n");
    demo_open_text(&d, text);
    tacet_roll *roll = demo_roll(&d, "..x.x.x");
    for (double rpm = 900; rpm < 2000; rpm += 500) {
        tacet_condition c = demo_condition(&d, roll, rpm);
        assert_int_equal(tacet_solve(d.model, &c, TACET_LEVEL_RIPPLE, d.work, &row), TACET_OK);
        double W = c.speed_rad_per_s;
        assert_near(row.bands[0].level.nominal * W, row.bands[1].level.nominal, 0, 1e-9);
        assert_true(added(&row.bands[1]) > 1e-6 * pow(row.bands[1].level.nominal, 2));
        assert_near(added(&row.bands[0]) * W * W, added(&row.bands[1]), 0, 1e-6);
    }
    tacet_roll_destroy(roll);
    free(text);
    demo_close(&d);
}

// Every fire at half of a double charge is all-fire: level and spread are the same.
static void test_tenths_of_a_larger_charge_spread_alike(void **state)
{
    (void)state;
    demo d;
    tacet_row whole, half;
    char *text = six_text("bands:\n"
                          "  - {name: a, kind: cab, low_hz: 3, high_hz: 8, quantity: roll-torque, "
                          "limit_rms: 300}\n"
                          "  - {name: b, kind: cab, low_hz: 42, high_hz: 62, quantity: "
                          "roll-torque, limit_rms: 300}\n");
    demo_open_text(&d, text);
    tacet_roll *roll = demo_roll(&d, "5");
    tacet_condition c = demo_condition(&d, tacet_model_all_fire(d.model), 1200);
    assert_int_equal(tacet_solve(d.model, &c, TACET_LEVEL_RIPPLE, d.work, &whole), TACET_OK);
    c.roll = roll;
    assert_int_equal(tacet_solve(d.model, &c, TACET_LEVEL_RIPPLE, d.work, &half), TACET_OK);
    assert_int_equal(half.outcome, TACET_SOLVED);
    assert_near(half.duty.charge_Pa, 2 * whole.duty.charge_Pa, 0, 1e-9);
    for (int b = 0; b < 2; b++) {
        assert_near(half.bands[b].level.dispersed, whole.bands[b].level.dispersed, 0, 1e-9);
        assert_true(added(&whole.bands[b]) > 1e-3);
    }
    tacet_roll_destroy(roll);
    free(text);
    demo_close(&d);
}

// One cylinder on one body: its piston's mean inertia is 15 % of the whole.
static const char rigid[] =
    "title: one\n"
    "engine: {strokes: 4, bore_mm: 108, stroke_mm: 130, rod_length_mm: 215, "
    "compression_ratio: 12.5, reciprocating_mass_kg: 6, firing_order: [1],\n"
    "  dispersion: {cylinder_percent: 50, cyclic_percent: 0}}\n"
    "cycle: {manifold_kpa: {lowest: 25, highest: 185}}\n"
    "skip: {longest_run: 1}\n"
    "train:\n"
    "  nodes: [{name: throw1, inertia_kgm2: 0.08}]\n"
    "  flywheel: throw1\n"
    "bands: [{name: roll, kind: mount, low_hz: 7, high_hz: 8, quantity: roll-torque, "
    "limit_rms: 300}]\n"
    "screen: {speeds_rpm: [900], brake_torque_nm: 40}\n";

// It fires always: all of its torque varies with it. At constant speed order 1/2 holds no inertia
// torque (its orders are whole numbers), so the level of a band around it is that of the fired
// torque alone, and a cylinder that is 1 + sigma xi strong makes sqrt(1 + sigma^2) of it. What the
// piston's own acceleration takes away, it takes from both.
static void test_unequal_cylinder_alone(void **state)
{
    (void)state;
    demo d;
    tacet_row row;
    demo_open_text(&d, rigid);
    tacet_condition c = demo_condition(&d, tacet_model_all_fire(d.model), 900);
    assert_int_equal(tacet_solve(d.model, &c, TACET_LEVEL_CONSTANT, d.work, &row), TACET_OK);
    const tacet_band_level *level = &row.bands[0].level;
    double piston = tacet_engine_mean_inertia(tacet_model_engine(d.model));
    assert_near(piston / (piston + 0.08), 0.15, 0.02, 0);
    assert_near(level->leading_order, 0.5, 1e-15, 0);
    assert_true(level->nominal > 10);
    assert_near(level->dispersed / level->nominal, sqrt(1 + 0.5 * 0.5), 0, 1e-3);
    demo_close(&d);
}

// The same with cycles that vary instead. A rigid body answers alike at every frequency: a torque T
// on the crank turns the housing by T less what the piston's inertia <J> takes, T (1 - <J>/J). So
// (Campbell) the mean square is 2 lambda sigma^2 (1 - <J>/J)^2 times the integral of |P|^2 over the
// counted band, 7.125 to 8.4 Hz with the guard of 5 %; lambda = 7.5 fires a second.
static void test_cyclic_variation_of_a_rigid_engine(void **state)
{
    (void)state;
    enum { N = 400 };
    demo d;
    tacet_row row;
    char text[sizeof rigid + 16];
    strcpy(text, rigid);
    demo_replace(text, "cylinder_percent: 50, cyclic_percent: 0",
                 "cylinder_percent: 0, cyclic_percent: 20");
    demo_replace(text, "low_hz: 7,", "low_hz: 7.5,");
    demo_open_text(&d, text);
    tacet_condition c = demo_condition(&d, tacet_model_all_fire(d.model), 900);
    assert_int_equal(tacet_solve(d.model, &c, TACET_LEVEL_CONSTANT, d.work, &row), TACET_OK);
    double low = 7.5 * 0.95, step = (8 * 1.05 - low) / N, order[N + 1], integral = 0;
    double complex pulse[N + 1];
    for (int k = 0; k <= N; k++)
        order[k] = (low + k * step) / 15; // 15 revolutions a second
    tacet_engine_fired_pulse(tacet_model_engine(d.model), tacet_workspace_engine(d.work), N + 1,
                             order, pulse);
    for (int k = 0; k <= N; k++)
        integral += (k == 0 || k == N ? 0.5 : 1) * step * creal(pulse[k] * conj(pulse[k]));
    integral /= c.speed_rad_per_s * c.speed_rad_per_s; // pulses over angle -> over time
    double piston = tacet_engine_mean_inertia(tacet_model_engine(d.model));
    double share = 1 - piston / (piston + 0.08);
    assert_near(added(&row.bands[0]), 2 * 7.5 * 0.2 * 0.2 * share * share * integral, 0, 1e-3);
    demo_close(&d);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_resonance_sharper_than_any_grid),
        cmocka_unit_test(test_undamped_mode_in_a_band_is_refused),
        cmocka_unit_test(test_irregularity_is_speed_over_mean_speed),
        cmocka_unit_test(test_tenths_of_a_larger_charge_spread_alike),
        cmocka_unit_test(test_unequal_cylinder_alone),
        cmocka_unit_test(test_cyclic_variation_of_a_rigid_engine),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
