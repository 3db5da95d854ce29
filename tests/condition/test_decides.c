// What a row is judged against, and which of its bands decides.
#include "demo.h"
#include <math.h>
#include <stdio.h>
#include <stdlib.h>

// A single-cylinder engine on one body; BANDS is a list.
static const char study[] =
    "title: one\n"
    "engine: {strokes: 4, bore_mm: 108, stroke_mm: 130, rod_length_mm: 215, "
    "compression_ratio: 12.5, reciprocating_mass_kg: 2.7, firing_order: [1],\n"
    "  dispersion: {cylinder_percent: 30, cyclic_percent: 5}}\n"
    "cycle: {manifold_kpa: {lowest: 25, highest: 185}}\n"
    "skip: {longest_run: 1}\n"
    "train:\n"
    "  nodes: [{name: throw1, inertia_kgm2: 3}]\n"
    "  flywheel: throw1\n"
    "bands: [%s]\n"
    "screen: {speeds_rpm: [900, 1200, 1500], brake_torque_nm: [[900, 40], [1500, 70]], "
    "reserve_db: 3}\n";

static void open_with(demo *d, const char *bands)
{
    char text[4096];
    snprintf(text, sizeof text, study, bands);
    demo_open_text(d, text);
}

static tacet_row solve(demo *d, const tacet_roll *roll, double rpm)
{
    tacet_condition c = demo_condition(d, roll, rpm);
    tacet_row row;
    assert_int_equal(tacet_solve(d->model, &c, TACET_LEVEL_RIPPLE, d->work, &row), TACET_OK);
    assert_int_equal(row.outcome, TACET_SOLVED);
    return row;
}

// The reference is what all-fire itself reaches, dispersion included: at its worst screened speed
// and the demand there, or at the row's own speed. Asked for one speed after the other.
static void test_reference_is_all_fire_level(void **state)
{
    (void)state;
    demo d;
    open_with(&d, "{name: worst, kind: mount, low_hz: 7, high_hz: 26, quantity: roll-torque, "
                  "over_all_fire_db: 6, floor_rms: 0.001}, "
                  "{name: same, kind: mount, low_hz: 7, high_hz: 26, quantity: roll-torque, "
                  "over_all_fire_db: 6, floor_rms: 0.001, reference: same-speed}");
    static const double rpm[] = {900, 1200, 1500};
    double level[3], worst = 0, best = INFINITY;
    for (int i = 0; i < 3; i++) {
        const tacet_row row = solve(&d, tacet_model_all_fire(d.model), rpm[i]);
        level[i] = row.bands[0].level.dispersed;
        assert_true(level[i] > 1.02 * row.bands[0].level.nominal);
        worst = fmax(worst, level[i]);
        best = fmin(best, level[i]);
    }
    assert_true(worst > 1.05 * best);
    tacet_roll *roll = demo_roll(&d, "x.");
    for (int i = 0; i < 3; i++) {
        tacet_row row = solve(&d, roll, rpm[i]);
        const double reference[] = {worst, level[i]};
        for (int b = 0; b < 2; b++) {
            double limit = reference[b] * pow(10, 6 / 20.0), own = row.bands[b].level.dispersed;
            assert_near(row.bands[b].reference, reference[b], 0, 1e-12);
            assert_near(row.bands[b].limit, limit, 0, 1e-12);
            assert_near(row.bands[b].margin_db, 20 * log10(limit / own), 1e-9, 0);
        }
    }
    tacet_roll_destroy(roll);
    demo_close(&d);
}

// Bands that differ in nothing but their limits, put where the margins must come out: the row has
// the worst of the verdicts, the least of the margins and the band it belongs to, wherever in the
// list that one stands.
static void check_worst(double level, const double margin[3], tacet_verdict worst, int decides)
{
    char bands[1024];
    size_t n = 0;
    for (int b = 0; b < 3; b++)
        n += (size_t)snprintf(bands + n, sizeof bands - n,
                              "%s{name: b%d, kind: mount, low_hz: 7, high_hz: 26, quantity: "
                              "roll-torque, limit_rms: %.17g}",
                              b ? ", " : "", b, level * pow(10, margin[b] / 20));
    demo d;
    open_with(&d, bands);
    tacet_row row = solve(&d, tacet_model_all_fire(d.model), 1200);
    for (int b = 0; b < 3; b++)
        assert_near(row.bands[b].margin_db, margin[b], 1e-9, 0);
    assert_int_equal(row.worst, worst);
    assert_near(row.worst_margin_db, margin[decides], 1e-9, 0);
    assert_int_equal(row.limiting_band, decides);
    demo_close(&d);
}

static void test_worst_band_decides(void **state)
{
    (void)state;
    demo d;
    open_with(&d, "{name: a, kind: mount, low_hz: 7, high_hz: 26, quantity: roll-torque, "
                  "limit_rms: 1}");
    double level = solve(&d, tacet_model_all_fire(d.model), 1200).bands[0].level.dispersed;
    demo_close(&d);
    check_worst(level, (double[]){20, 1, 8}, TACET_NEAR, 1);
    check_worst(level, (double[]){-4, 20, 1}, TACET_OVER, 0);
    check_worst(level, (double[]){1, 20, -4}, TACET_OVER, 2);
    check_worst(level, (double[]){9, 8, 7}, TACET_CLEAR, 2);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_reference_is_all_fire_level),
        cmocka_unit_test(test_worst_band_decides),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
