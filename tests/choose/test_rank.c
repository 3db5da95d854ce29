// Ranking, notes and recommendation, on screens made by hand. Expected values follow from the rules
// in choose.h and from arithmetic.
#include "near.h"
#include "synthetic.h"
#include <math.h>
#include <string.h>

static const char *const bands[] = {"roll", "coupling"}, *const limits[] = {"stress"};

static note_rules usual(void)
{
    return (note_rules){150 * RPM, 0.01, 3, bands, limits, 2};
}

static void judge(tacet_screen *s, const note_rules *rules)
{
    tacet_arena *scratch = tacet_arena_create();
    assert_int_equal(ranks_make(s, scratch), TACET_OK);
    assert_int_equal(notes_make(s, scratch), TACET_OK);
    assert_int_equal(recommend(s, rules, scratch), TACET_OK);
    tacet_arena_destroy(scratch);
}

static void assert_ranked(const tacet_screen *s, size_t speed, const size_t *candidates, size_t n)
{
    assert_int_equal(s->ranks[speed].n_ranked, n);
    for (size_t i = 0; i < n; i++)
        assert_int_equal(s->cells[s->ranks[speed].ranked[i]].candidate, candidates[i]);
}

// Each rule decides before the next: solved, scalar limits, clear, fuel.
static void test_rank_order(void **state)
{
    (void)state;
    tacet_screen *s = synthetic_screen(8, 1, 1000, 25, NULL);
    set_fuel(cell_at(s, 0, 0), 0.80); // least fuel, but unreachable
    set_outcome(cell_at(s, 0, 0), TACET_UNREACHABLE);
    set_fuel(cell_at(s, 1, 0), 0.82); // a scalar limit over, however good the bands
    set_margin(cell_at(s, 1, 0), 20, 3, 0);
    cell_at(s, 1, 0)->row.n_limits = 1;
    cell_at(s, 1, 0)->row.limits[0].verdict = TACET_OVER;
    cell_at(s, 1, 0)->row.worst = TACET_OVER;
    set_fuel(cell_at(s, 2, 0), 0.84); // over by more
    set_margin(cell_at(s, 2, 0), -6, 3, 1);
    set_fuel(cell_at(s, 3, 0), 0.86); // over by less
    set_margin(cell_at(s, 3, 0), -1, 3, 1);
    set_fuel(cell_at(s, 4, 0), 0.88); // inside the reserve
    set_margin(cell_at(s, 4, 0), 2.9, 3, 0);
    set_fuel(cell_at(s, 5, 0), 0.97); // clear; margin does not count any more
    set_margin(cell_at(s, 5, 0), 30, 3, 0);
    set_fuel(cell_at(s, 6, 0), 0.93); // clear, less fuel
    set_margin(cell_at(s, 6, 0), 3, 3, 0);
    judge(s, &(note_rules){150 * RPM, 0.01, 3, bands, limits, 2});
    assert_ranked(s, 0, (size_t[]){6, 5, 7, 4, 3, 2, 1, 0}, 8);
    assert_int_equal(s->cells[s->ranks[0].best].candidate, 6);
    assert_near(s->ranks[0].demand_Nm, 300, 0, 0);
    synthetic_destroy(s);
}

static void test_rank_failed_refused_and_ties(void **state)
{
    (void)state;
    tacet_screen *s = synthetic_screen(5, 1, 1000, 25, NULL);
    set_outcome(cell_at(s, 0, 0), TACET_FAILED);
    set_outcome(cell_at(s, 1, 0), TACET_UNREACHABLE);
    set_margin(cell_at(s, 2, 0), NAN, 3, 0); // no line at all: clear, ranked by fuel like the rest
    s->candidates[3].refused = "it cannot";
    note_rules rules = usual();
    judge(s, &rules);
    assert_ranked(s, 0, (size_t[]){2, 4, 1, 0}, 4); // 2 before 4: equal fuel, given order
    assert_string_equal(s->notes[3].why_not, "it cannot");
    assert_false(s->notes[3].recommended);
    synthetic_destroy(s);
}

static void test_rank_none_clear(void **state)
{
    (void)state;
    tacet_screen *s = synthetic_screen(2, 3, 1000, 100, NULL);
    for (size_t i = 0; i < 3; i++) {
        set_margin(cell_at(s, 0, i), -2.25, 3, 1);
        set_margin(cell_at(s, 1, i), i == 2 ? 2 : -1, 3, 0);
    }
    note_rules rules = usual();
    judge(s, &rules);
    assert_true(s->ranks[0].best == SIZE_MAX && s->ranks[2].best == SIZE_MAX);
    assert_false(s->notes[1].recommended);
    assert_string_equal(
        s->notes[1].why_not,
        "clear at no screened speed: at best 2.00 dB at 1200 rpm (roll); 3 dB are asked");
    assert_string_equal(
        s->notes[0].why_not,
        "clear at no screened speed: at best -2.25 dB at 1000 rpm (coupling); 3 dB are asked");
    assert_int_equal(s->notes[1].n_near, 1);
    assert_int_equal(s->notes[1].n_over, 2);
    assert_near(s->notes[1].clear_rad_per_s, 0, 0, 0);
    assert_true(isnan(s->notes[1].clear_from_rad_per_s));
    assert_true(isnan(s->notes[1].saving));
    synthetic_destroy(s);
}

// 1/2 clear at 1000, 1025, 1050 and 1200..1300 rpm: 50 + 100 rpm, widest 1200-1300.
static void test_note_spans(void **state)
{
    (void)state;
    tacet_screen *s = synthetic_screen(2, 13, 1000, 25, NULL);
    for (size_t i = 3; i < 8; i++)
        set_margin(cell_at(s, 0, i), -1 - (double)i, 3, i == 3 ? 0 : 1);
    cell_at(s, 0, 7)->row.bands[1].level.leading_order = 1.5;
    for (size_t i = 0; i < 13; i++)
        set_fuel(cell_at(s, 0, i), i < 3 ? 0.90 : 0.95);
    note_rules rules = usual();
    judge(s, &rules);
    const tacet_candidate_note *n = &s->notes[0];
    assert_int_equal(n->n_clear, 8);
    assert_int_equal(n->n_over, 5);
    assert_near(n->clear_rad_per_s, 150 * RPM, 1e-9, 0);
    assert_near(n->clear_from_rad_per_s, 1200 * RPM, 1e-9, 0);
    assert_near(n->clear_to_rad_per_s, 1300 * RPM, 1e-9, 0);
    assert_near(n->saving, (3 * 0.10 + 5 * 0.05) / 8, 1e-12, 0);
    assert_int_equal(n->limiting_band, 1);
    assert_near(n->limiting_order, 1.5, 0, 0);
    assert_true(n->recommended);
    assert_int_equal(n->n_best, 8);
    assert_int_equal(s->notes[1].n_best, 5);
    synthetic_destroy(s);
}

// An extra speed that is over between two clear grid speeds takes that step away; one that is clear
// beside one that is over adds its part.
static void test_note_spans_with_extra_speeds(void **state)
{
    (void)state;
    size_t extra[] = {3, 0};
    tacet_screen *s = synthetic_screen(2, 4, 1000, 100, extra);
    static const double rpm[] = {1140, 1160, 1260};
    for (size_t i = 0; i < 3; i++)
        cell_at(s, 0, 4 + i)->row.speed_rad_per_s = rpm[i] * RPM;
    set_margin(cell_at(s, 0, 5), -1, 3, 0);
    set_margin(cell_at(s, 0, 3), 1, 3, 0);
    note_rules rules = usual();
    judge(s, &rules); // clear: 1000-1140, 1200-1260
    assert_near(s->notes[0].clear_rad_per_s, 200 * RPM, 1e-9, 0);
    assert_near(s->notes[0].clear_to_rad_per_s, 1140 * RPM, 1e-9, 0);
    assert_int_equal(s->notes[0].n_clear, 3); // grid speeds alone are counted
    synthetic_destroy(s);
}

static void test_too_short_is_not_recommended(void **state)
{
    (void)state;
    tacet_screen *s = synthetic_screen(2, 13, 1000, 25, NULL);
    for (size_t i = 0; i < 13; i++) {
        set_fuel(cell_at(s, 0, i), 0.9);
        if (i > 5) set_margin(cell_at(s, 0, i), -1, 3, 0); // clear over 125 rpm
    }
    note_rules rules = usual();
    judge(s, &rules);
    assert_false(s->notes[0].recommended);
    assert_string_equal(s->notes[0].why_not, "clear over 125 rpm only; at least 150 are asked");
    assert_int_equal(s->notes[1].n_best, 13);
    rules.least_clear_rad_per_s = 125 * RPM * (1 - 1e-12);
    judge(s, &rules);
    assert_true(s->notes[0].recommended);
    assert_int_equal(s->notes[0].n_best, 6);
    synthetic_destroy(s);
}

// One speed alone spans nothing, and a screen of one speed cannot ask for a span.
static void test_narrow_screen_asks_no_span(void **state)
{
    (void)state;
    tacet_screen *s = synthetic_screen(2, 1, 1000, 25, NULL);
    set_fuel(cell_at(s, 0, 0), 0.9);
    note_rules rules = usual();
    judge(s, &rules);
    assert_true(s->notes[0].recommended);
    synthetic_destroy(s);
}

// Fuel 0.93, 0.936, 0.942, 1: against 1 the third saves 5.8 %, the second 0.6 % more, the first
// 1.2 % more than the third. A chain of small savings is not thrown away as a whole.
static void test_small_savings(void **state)
{
    (void)state;
    tacet_screen *s = synthetic_screen(4, 13, 1000, 25, NULL);
    static const double fuel[] = {0.93, 0.936, 0.942, 1};
    for (size_t c = 0; c < 4; c++)
        for (size_t i = 0; i < 13; i++)
            set_fuel(cell_at(s, c, i), fuel[c]);
    note_rules rules = usual();
    judge(s, &rules);
    assert_true(s->notes[0].recommended);
    assert_string_equal(s->notes[0].why_not, "");
    assert_string_equal(s->notes[1].why_not,
                        "saves at most 0.60 % more than 3/4, the next clear one; 1 % are asked");
    assert_string_equal(s->notes[2].why_not,
                        "wherever it is clear, another saves more; 1/2 for one");
    set_margin(cell_at(s, 3, 0), -1, 3, 0); // all-fire over: the thirstiest clear one stands first
    for (size_t i = 0; i < 13; i++)
        set_fuel(cell_at(s, 0, i), 0.9335); // 0.85 % more than 3/4
    judge(s, &rules);
    assert_int_equal(s->cells[s->ranks[0].best].candidate, 2);
    assert_false(s->notes[0].recommended);
    synthetic_destroy(s);
}

// Saving is a share of all-fire's fuel; where that is not known, of the other's own.
static void test_saving_without_reference(void **state)
{
    (void)state;
    tacet_screen *s = synthetic_screen(2, 1, 1000, 25, NULL);
    s->candidates[1].fires = 2; // 2/3: no all-fire in this list
    s->candidates[1].length = 3;
    for (size_t c = 0; c < 2; c++)
        cell_at(s, c, 0)->row.fuel_to_all_fire = NAN;
    cell_at(s, 0, 0)->row.duty.fuel_kg_per_s = 0.991e-3;
    note_rules rules = usual();
    judge(s, &rules); // 0.9 %
    assert_int_equal(s->cells[s->ranks[0].best].candidate, 1);
    assert_true(isnan(s->notes[0].saving));
    cell_at(s, 0, 0)->row.duty.fuel_kg_per_s = 0.989e-3;
    judge(s, &rules);
    assert_int_equal(s->cells[s->ranks[0].best].candidate, 0);
    set_fuel(cell_at(s, 1, 0), 0.600); // 0.9 % of all-fire, though 1.5 % of the other's own
    set_fuel(cell_at(s, 0, 0), 0.591);
    judge(s, &rules);
    assert_int_equal(s->cells[s->ranks[0].best].candidate, 1);
    synthetic_destroy(s);
}

static void test_thirstier_saves_nothing(void **state)
{
    (void)state;
    tacet_screen *s = synthetic_screen(2, 1, 1000, 25, NULL);
    set_fuel(cell_at(s, 0, 0), 1.02);
    note_rules rules = usual();
    judge(s, &rules);
    assert_int_equal(s->cells[s->ranks[0].best].candidate, 1);
    synthetic_destroy(s);
}

static void test_limit_is_named(void **state)
{
    (void)state;
    tacet_screen *s = synthetic_screen(1, 1, 1000, 25, NULL);
    set_margin(cell_at(s, 0, 0), -1, 3, 0);
    cell_at(s, 0, 0)->row.limiting_band = -1;
    cell_at(s, 0, 0)->row.limiting_limit = 0;
    note_rules rules = usual();
    judge(s, &rules);
    assert_string_equal(
        s->notes[0].why_not,
        "clear at no screened speed: at best -1.00 dB at 1000 rpm (stress); 3 dB are asked");
    assert_int_equal(s->notes[0].limiting_band, -1);
    assert_int_equal(s->notes[0].limiting_limit, 0); // cell 0,0 is the one not clear
    synthetic_destroy(s);
}

static void test_equal_fuel_saves_nothing(void **state)
{
    (void)state;
    tacet_screen *s = synthetic_screen(2, 1, 1000, 25, NULL);
    note_rules rules = usual();
    judge(s, &rules);
    assert_int_equal(s->cells[s->ranks[0].best].candidate, 1);
    assert_string_equal(s->notes[0].why_not, "saves nothing against 1, which is clear as well");
    synthetic_destroy(s);
}

static void test_never_reachable(void **state)
{
    (void)state;
    tacet_screen *s = synthetic_screen(3, 2, 1000, 25, NULL);
    for (size_t i = 0; i < 2; i++) {
        set_outcome(cell_at(s, 0, i), TACET_UNREACHABLE);
        set_outcome(cell_at(s, 1, i), i ? TACET_FAILED : TACET_UNREACHABLE);
    }
    note_rules rules = usual();
    judge(s, &rules);
    assert_string_equal(s->notes[0].why_not, "cannot carry the torque at any screened speed");
    assert_int_equal(s->notes[0].n_unreachable, 2);
    assert_string_equal(s->notes[1].why_not, "no verdict at any screened speed");
    assert_int_equal(s->notes[1].n_none, 1);
    synthetic_destroy(s);
}

// Worst conditions spread over candidates: the worst of each first, then the second worst of each.
static void test_referee_pick(void **state)
{
    (void)state;
    tacet_screen *s = synthetic_screen(3, 3, 1000, 25, NULL);
    static const double margin[3][3] = {{-9, -8, -7}, {1, -1, 2}, {5, NAN, 4}};
    for (size_t c = 0; c < 3; c++)
        for (size_t i = 0; i < 3; i++)
            set_margin(cell_at(s, c, i), margin[c][i], 3, 0);
    set_outcome(cell_at(s, 0, 2), TACET_FAILED);
    tacet_arena *a = tacet_arena_create();
    size_t *cells, n;
    assert_int_equal(referee_pick(s, 4, a, &cells, &n, a), TACET_OK);
    assert_int_equal(n, 4);
    assert_true(cells[0] == 0 && cells[1] == 1 && cells[2] == 4 && cells[3] == 8);
    assert_int_equal(referee_pick(s, 100, a, &cells, &n, a), TACET_OK);
    assert_int_equal(n, 8);
    assert_int_equal(cells[7], 7);
    assert_int_equal(referee_pick(s, 0, a, &cells, &n, a), TACET_OK);
    assert_int_equal(n, 0);
    tacet_arena_destroy(a);
    synthetic_destroy(s);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_rank_order),
        cmocka_unit_test(test_rank_failed_refused_and_ties),
        cmocka_unit_test(test_rank_none_clear),
        cmocka_unit_test(test_note_spans),
        cmocka_unit_test(test_note_spans_with_extra_speeds),
        cmocka_unit_test(test_too_short_is_not_recommended),
        cmocka_unit_test(test_narrow_screen_asks_no_span),
        cmocka_unit_test(test_small_savings),
        cmocka_unit_test(test_saving_without_reference),
        cmocka_unit_test(test_thirstier_saves_nothing),
        cmocka_unit_test(test_limit_is_named),
        cmocka_unit_test(test_equal_fuel_saves_nothing),
        cmocka_unit_test(test_never_reachable),
        cmocka_unit_test(test_referee_pick),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
