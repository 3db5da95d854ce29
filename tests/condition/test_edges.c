// Studies and conditions at the edges of what can be asked.
#include "demo.h"
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static demo six;

static char *six_text(void)
{
    char *text = demo_text("forwarder.yaml");
    demo_replace(text, "{trapped: residual}", "{trapped: residual, longest_run: 2}");
    demo_replace(text, "900:1900:25", "[900, 1900]");
    return text;
}

static int open_six(void **state)
{
    (void)state;
    char *text = six_text();
    demo_open_text(&six, text);
    free(text);
    return 0;
}

static int close_six(void **state)
{
    (void)state;
    demo_close(&six);
    return 0;
}

static tacet_row solve(demo *d, const char *word, double rpm, double demand, tacet_level level)
{
    tacet_roll *roll = demo_roll(d, word);
    tacet_condition c = demo_condition(d, roll, rpm);
    if (!isnan(demand)) c.demand_Nm = demand;
    tacet_row row;
    assert_int_equal(tacet_solve(d->model, &c, level, d->work, &row), TACET_OK);
    tacet_roll_destroy(roll);
    return row;
}

static const char *reach_of(const demo *d, const tacet_row *row)
{
    size_t n;
    const tacet_column *column = tacet_row_columns(&n);
    char buffer[TACET_COLUMN_BUFFER];
    for (size_t i = 0; i < n; i++)
        if (strcmp(column[i].name, "reach") == 0)
            return column[i].text(d->model, NULL, row, buffer);
    fail();
    return NULL;
}

// ---- words ------------------------------------------------------------------------------------

// Nothing fires: only being dragged along can be asked for, at one torque, without fuel.
static void test_word_that_never_fires(void **state)
{
    (void)state;
    tacet_row row = solve(&six, ".", 1200, 312, TACET_LEVEL_RIPPLE);
    assert_int_equal(row.outcome, TACET_UNREACHABLE);
    assert_string_equal(reach_of(&six, &row), "too high");
    double dragged = row.duty.brake_torque_Nm;    // the nearest that can be met
    assert_true(dragged < -20 && dragged > -120); // friction of 0.8 to 1.5 bar of 7.15 l
    row = solve(&six, ".", 1200, dragged, TACET_LEVEL_RIPPLE);
    assert_int_equal(row.outcome, TACET_SOLVED);
    assert_near(row.duty.fuel_kg_per_s, 0, 0, 0);
    assert_near(row.bands[2].level.dispersed, row.bands[2].level.nominal, 0,
                0); // no fire, no spread
    row = solve(&six, ".", 1200, dragged - 1, TACET_LEVEL_RIPPLE);
    assert_int_equal(row.outcome, TACET_UNREACHABLE);
    assert_string_equal(reach_of(&six, &row), "too low");
}

// Lines as far down as order 1/128 of the speed: ripple settles, without the march.
static void test_long_words_are_solved_by_ripple(void **state)
{
    (void)state;
    static const char *const word[] = {
        "xx..x.xx..x.xx.xx..x.x.", "x.xx.x..x.xx.x.x..xx.x.x.x..xx.",
        "x..xx..xx..xx..xx..xx..xx..xx..xx..xx..xx..xx..xx..xx..xx..xx.x."};
    demo d;
    char *text = demo_text("forwarder.yaml");
    demo_replace(text, "{trapped: residual}", "{trapped: residual, longest_run: 6}");
    demo_replace(text, "900:1900:25", "[900, 1900]");
    demo_open_text(&d, text);
    for (int i = 0; i < 3; i++) {
        tacet_row row = solve(&d, word[i], i ? 1200 : 900, NAN, TACET_LEVEL_RIPPLE);
        assert_int_equal(row.outcome, TACET_SOLVED);
        assert_string_equal(row.solver.method, "ripple");
        assert_true(row.solver.difference <= 1e-6);
    }
    free(text);
    demo_close(&d);
}

// A word that makes a cylinder skip that may not, or too long, is out of reach and says why.
static void test_words_that_the_engine_may_not_run(void **state)
{
    (void)state;
    demo d;
    char *text = six_text();
    demo_replace(text, "longest_run: 2", "longest_run: 2, cylinders: [4, 5, 6]");
    demo_open_text(&d, text);
    free(text);
    tacet_row row =
        solve(&d, "x.", 1200, NAN, TACET_LEVEL_RIPPLE); // 5, 6, 4 skip: order 1 5 3 6 2 4
    assert_int_equal(row.outcome, TACET_SOLVED);
    row = solve(&d, ".x", 1200, NAN, TACET_LEVEL_RIPPLE);
    assert_int_equal(row.outcome, TACET_UNREACHABLE);
    assert_string_equal(reach_of(&d, &row), "cylinder may not skip");
    assert_int_equal(row.worst, TACET_NO_VERDICT);
    assert_null(tacet_workspace_response(d.work));
    row = solve(&d, "xxxxxx......xxxxxx......xxxxxx", 1200, NAN, TACET_LEVEL_RIPPLE);
    assert_string_equal(reach_of(&d, &row), "cylinder may not skip");
    row = solve(&six, "xxxxxx..................", 1200, NAN, TACET_LEVEL_RIPPLE);
    assert_int_equal(row.outcome, TACET_UNREACHABLE);
    assert_string_equal(reach_of(&six, &row), "skip too long");
    demo_close(&d);
}

// ---- speeds and lines -------------------------------------------------------------------------

static void test_speed_out_of_range_is_said(void **state)
{
    (void)state;
    tacet_row row = solve(&six, "x", 805, 300, TACET_LEVEL_RIPPLE); // down to nine tenths of 900
    assert_int_equal(row.outcome, TACET_UNREACHABLE);
    assert_string_equal(reach_of(&six, &row), "speed");
    row = solve(&six, "x", 815, 300, TACET_LEVEL_RIPPLE);
    assert_int_equal(row.outcome, TACET_SOLVED);
}

static void refused(char *text, const char *why)
{
    demo d;
    tacet_error e;
    assert_int_equal(demo_try_text(&d, text, &e), TACET_BAD_INPUT);
    if (!strstr(e.text, why)) assert_string_equal(e.text, why);
    demo_close(&d);
    free(text);
}

// Lines that are not computed would pass for silence: order 4 at 810 rpm is 54 Hz, and the highest
// band is counted up to 65.1 Hz.
static void test_lines_reach_over_every_band(void **state)
{
    (void)state;
    char *text = six_text();
    demo_replace(text, "reserve_db: 3", "highest_order: 4");
    refused(text, "highest_order 4: at 810 rpm that is 54 Hz, and band 'cab boom' is counted up to "
                  "65.1 Hz; order 5 or more is needed");
    text = six_text();
    demo_replace(text, "high_hz: 62", "high_hz: 860"); // 903 Hz at 810 rpm: order 66.9
    refused(text, "counted up to 903 Hz, at 810 rpm order 67; lines are computed up to order 60");
    demo d;
    bool limited;
    text = six_text();
    demo_replace(text, "high_hz: 62", "high_hz: 600"); // 630 Hz: order 46.7, beyond the usual 36
    demo_open_text(&d, text);
    assert_near(tacet_model_highest_order(d.model, &limited), 47, 0, 0);
    tacet_row row = solve(&d, "x", 815, 300, TACET_LEVEL_RIPPLE);
    assert_int_equal(row.outcome, TACET_SOLVED);
    assert_true((double)tacet_workspace_response(d.work)->n_lines / 2 * 815 / 60 >= 630);
    demo_close(&d);
    free(text);
}

// ---- trains -----------------------------------------------------------------------------------

static void test_throw_behind_a_gear_is_refused(void **state)
{
    (void)state;
    char *text = six_text();
    demo_replace(text, "{name: crank6, from: throw6,",
                 "{name: crank6, gear_ratio: 2, from: throw6,");
    refused(text, "cylinders drive node 'throw1', which turns at 2 times the speed of the flywheel "
                  "'flywheel'");
}

// A law of frequency alone has a harmonic solution and no march.
static void test_harmonic_only(void **state)
{
    (void)state;
    demo d;
    tacet_agreement a;
    char *text = six_text();
    demo_replace(text, "loss_factor: 0.15}", "loss_factor: 0.15, loss_law: constant}");
    demo_open_text(&d, text);
    free(text);
    tacet_row row = solve(&d, "x.", 1200, NAN, TACET_LEVEL_RIPPLE);
    assert_int_equal(row.outcome, TACET_SOLVED);
    row = solve(&d, "x.", 1200, NAN, TACET_LEVEL_STEADY);
    assert_int_equal(row.outcome, TACET_FAILED);
    assert_int_equal(row.why, TACET_HARMONIC_ONLY);
    tacet_roll *roll = demo_roll(&d, "x.");
    tacet_condition c = demo_condition(&d, roll, 1200);
    assert_int_equal(tacet_solve_referee(d.model, &c, d.work, &a), TACET_HARMONIC_ONLY);
    assert_true(!a.settled && isnan(a.same_model) && isnan(a.full_model_db));
    tacet_roll_destroy(roll);
    demo_close(&d);
}

// One body: J a' = torque over it, so the lines of its speed are those of the torque over J i w,
// and nothing leaves: roll torque is minus what turns it, J a''.
static const char one_body[] =
    "title: one\n"
    "engine: {strokes: 4, bore_mm: 108, stroke_mm: 130, rod_length_mm: 215, "
    "compression_ratio: 12.5, reciprocating_mass_kg: 2.7, firing_order: [1]}\n"
    "cycle: {manifold_kpa: {lowest: 25, highest: 185}}\n"
    "skip: {longest_run: 3}\n"
    "train:\n"
    "  nodes: [{name: throw1, inertia_kgm2: 3}]\n"
    "  flywheel: throw1\n"
    "bands: [{name: roll, kind: mount, low_hz: 5, high_hz: 40, quantity: roll-torque, "
    "limit_rms: 300}]\n"
    "limits: [{name: swing, quantity: irregularity, value: 0.5}]\n"
    "screen: {speeds_rpm: [900, 1100], brake_torque_nm: 40}\n";

static void test_one_cylinder_on_one_body(void **state)
{
    (void)state;
    demo d;
    demo_open_text(&d, one_body);
    for (tacet_level level = TACET_LEVEL_CONSTANT; level <= TACET_LEVEL_STEADY; level++) {
        tacet_row row = solve(&d, "x.", 1000, NAN, level);
        assert_int_equal(row.outcome, TACET_SOLVED);
        const tacet_response *r = tacet_workspace_response(d.work);
        double w0 = r->speed_rad_per_s / r->revolutions;
        for (size_t h = 1; h <= 20; h++) {
            double w = w0 * (double)h;
            // piston torque turns the 3 kg m2 beside the piston's own inertia
            double complex turns = 3 * -w * w * r->motion->angle_rad[0].line[h];
            assert_near(cabs(r->piston_torque_Nm[0].line[h] - turns), 0, 0.02, 0);
            if (h == 1) assert_true(cabs(turns) > 50);
        }
    }
    demo_close(&d);
}

// Sixteen cylinders and sixty nodes: the rigid sum of a balanced all-fire stays what statics says.
static void test_many_cylinders_and_nodes(void **state)
{
    (void)state;
    demo d;
    char *text = calloc(1, 32768), *at = text;
    at += sprintf(at, "title: many\nengine: {strokes: 4, bore_mm: 108, stroke_mm: 130, "
                      "rod_length_mm: 215, compression_ratio: 12.5, reciprocating_mass_kg: 2.7, "
                      "firing_order: [");
    for (int i = 1; i <= 16; i++)
        at += sprintf(at, "%d%s", i, i < 16 ? ", " : "]}\n");
    at += sprintf(at, "cycle: {manifold_kpa: {lowest: 25, highest: 185}}\nskip: {longest_run: 4}\n"
                      "train:\n  nodes:\n");
    for (int i = 1; i <= 60; i++)
        at += sprintf(at, "    - {name: %s%d, inertia_kgm2: %g}\n", i <= 16 ? "throw" : "n", i,
                      i == 17 ? 2.0 : 0.06);
    at += sprintf(at, "  links:\n");
    for (int i = 1; i < 60; i++)
        at += sprintf(at,
                      "    - {name: l%d, from: %s%d, to: %s%d, stiffness_nm_per_rad: %g, "
                      "loss_factor: 0.02}\n",
                      i, i <= 16 ? "throw" : "n", i, i + 1 <= 16 ? "throw" : "n", i + 1,
                      i <= 16 ? 2e6 : 3e5);
    sprintf(at, "  flywheel: n17\n  load: n60\n"
                "bands: [{name: end, kind: driveline, low_hz: 5, high_hz: 90, quantity: "
                "\"link-torque:l59\", limit_rms: 300}]\n"
                "screen: {speeds_rpm: [1000], brake_torque_nm: 700}\n");
    demo_open_text(&d, text);
    free(text);
    tacet_row row = solve(&d, "x", 1000, NAN, TACET_LEVEL_CONSTANT);
    assert_int_equal(row.outcome, TACET_SOLVED);
    const tacet_response *r = tacet_workspace_response(d.work);
    for (size_t l = 16; l < 59; l++) // no cylinder beyond: the same mean torque to the end
        assert_near(r->motion->link_torque_Nm[l].mean, 700, 0, 1e-5);
    row = solve(&d, "..x.x.x", 1000, NAN, TACET_LEVEL_RIPPLE);
    assert_int_equal(row.outcome, TACET_SOLVED);
    assert_string_equal(row.solver.method, "ripple");
    demo_close(&d);
}

// A march that runs away is a condition that failed: nothing of it is left to read.
static void test_march_that_runs_away_is_a_failed_row(void **state)
{
    (void)state;
    demo d;
    char *text = six_text(), *at;
    demo_replace(text, "  firing_order", "  dispersion: {cyclic_percent: 0}\n  firing_order");
    while ((at = strstr(text, ", loss_factor: "))) // no damping at all
        memset(at, ' ', 2 + strcspn(at + 2, ",}"));
    demo_open_text(&d, text);
    free(text);
    tacet_row row = solve(&d, "..x.x.x", 1000, NAN, TACET_LEVEL_STEADY);
    if (row.outcome == TACET_FAILED) {
        assert_true(row.why == TACET_NOT_CONVERGED || row.why == TACET_NOT_FINITE);
        assert_null(tacet_workspace_response(d.work));
        assert_true(isnan(row.worst_margin_db) && row.limiting_band == -1);
        for (size_t b = 0; b < row.n_bands; b++)
            assert_int_equal(row.bands[b].why, TACET_WHY_FAILED);
    }
    row = solve(&d, "..x.x.x", 1000, NAN, TACET_LEVEL_RIPPLE); // the workspace is none the worse
    tacet_workspace *fresh;
    assert_int_equal(tacet_workspace_create(d.model, &fresh), TACET_OK);
    tacet_workspace_destroy(d.work);
    d.work = fresh;
    tacet_row again = solve(&d, "..x.x.x", 1000, NAN, TACET_LEVEL_RIPPLE);
    assert_int_equal(row.outcome, again.outcome);
    assert_memory_equal(&row.bands[0].level, &again.bands[0].level, sizeof again.bands[0].level);
    demo_close(&d);
}

// ---- rows -------------------------------------------------------------------------------------

// Of placements, what decides: out of reach, failed, over, without verdict, then the margin.
static void test_which_row_decides(void **state)
{
    (void)state;
    tacet_row row[] = {
        {.outcome = TACET_UNREACHABLE, .worst = TACET_NO_VERDICT, .worst_margin_db = NAN},
        {.outcome = TACET_FAILED, .worst = TACET_NO_VERDICT, .worst_margin_db = NAN},
        {.outcome = TACET_SOLVED, .worst = TACET_OVER, .worst_margin_db = -3},
        {.outcome = TACET_SOLVED, .worst = TACET_OVER, .worst_margin_db = -1},
        {.outcome = TACET_SOLVED, .worst = TACET_NO_VERDICT, .worst_margin_db = 2},
        {.outcome = TACET_SOLVED, .worst = TACET_NO_VERDICT, .worst_margin_db = NAN},
        {.outcome = TACET_SOLVED, .worst = TACET_NEAR, .worst_margin_db = 1},
        {.outcome = TACET_SOLVED, .worst = TACET_CLEAR, .worst_margin_db = 9},
        {.outcome = TACET_SOLVED, .worst = TACET_CLEAR, .worst_margin_db = NAN},
    };
    for (int i = 0; i < 9; i++)
        for (int k = 0; k < 9; k++)
            assert_int_equal(tacet_row_worse(&row[i], &row[k]), i < k);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_word_that_never_fires),
        cmocka_unit_test(test_long_words_are_solved_by_ripple),
        cmocka_unit_test(test_words_that_the_engine_may_not_run),
        cmocka_unit_test(test_speed_out_of_range_is_said),
        cmocka_unit_test(test_lines_reach_over_every_band),
        cmocka_unit_test(test_throw_behind_a_gear_is_refused),
        cmocka_unit_test(test_harmonic_only),
        cmocka_unit_test(test_one_cylinder_on_one_body),
        cmocka_unit_test(test_many_cylinders_and_nodes),
        cmocka_unit_test(test_march_that_runs_away_is_a_failed_row),
        cmocka_unit_test(test_which_row_decides),
    };
    return cmocka_run_group_tests(tests, open_six, close_six);
}
