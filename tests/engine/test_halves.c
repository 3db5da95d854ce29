// Kinds of halves and their valves, firing angles, and what an engine says of itself.
#include "direct.h"
#include "near.h"
#include <string.h>

// Valves as the kinds of trapped gas say: residual shuts after its exhaust stroke and comes back
// with an intake; burnt keeps its exhaust shut and comes back with an exhaust; air takes one more
// intake, then the same; open goes on.
static void test_halves_valves(void **state)
{
    (void)state;
    static const struct {
        int trapped;
        bool exhaust_first; // compared with intake first
        bool fire_then_skip, first_intake, later_intake, skip_then_fire, skip_then_skip;
    } row[] = {{TACET_TRAPPED_RESIDUAL, false, true, false, false, false, false},
               {TACET_TRAPPED_RESIDUAL, true, true, false, false, true, false},
               {TACET_TRAPPED_BURNT, false, false, false, false, true, false},
               {TACET_TRAPPED_AIR, false, true, true, false, true, false},
               {TACET_TRAPPED_OPEN, false, true, true, true, true, true}};
    for (size_t i = 0; i < sizeof row / sizeof *row; i++) {
        halves h = halves_of(row[i].trapped, 5, row[i].exhaust_first);
        assert_true(halves_rule_up_fire().open && halves_rule_up_fire().fire);
        assert_true(halves_rule_down_fire(&h, true).open);
        assert_int_equal(halves_rule_down_fire(&h, false).open, row[i].fire_then_skip);
        assert_int_equal(halves_rule_up_skip(&h, 1).open, row[i].first_intake);
        for (unsigned run = 2; run <= 6; run++) // 6: of a cylinder that never fires
            assert_int_equal(halves_rule_up_skip(&h, run).open, row[i].later_intake);
        assert_false(halves_rule_up_skip(&h, 1).fire);
        assert_int_equal(halves_rule_down_skip(&h, true).open, row[i].skip_then_fire);
        assert_int_equal(halves_rule_down_skip(&h, false).open, row[i].skip_then_skip);
    }
}

// Where the next cycle changes the valves there are two kinds, else one; all others differ, and
// each knows whether it goes up and whether it is of a skip.
static void test_halves_kinds(void **state)
{
    (void)state;
    for (int trapped = TACET_TRAPPED_RESIDUAL; trapped <= TACET_TRAPPED_OPEN; trapped++) {
        halves h = halves_of(trapped, 4, false);
        unsigned seen[200] = {0}, n = 0;
        for (unsigned run = 0; run <= 5; run++)
            for (int next = 0; next < 2; next++) {
                unsigned kind[4] = {halves_up_fire(&h, run), halves_down_fire(&h, run, next),
                                    halves_up_skip(&h, run), halves_down_skip(&h, run, next)};
                for (int i = 0; i < 4; i++) {
                    if (i < 2 ? run > 4 : run < 1) continue;
                    assert_true(kind[i] < halves_bank(&h));
                    n += !seen[kind[i]];
                    seen[kind[i]] |= 1u << i;
                    assert_int_equal(seen[kind[i]], 1u << i);
                    assert_int_equal(halves_is_up(&h, kind[i]), i % 2 == 0);
                    assert_int_equal(halves_is_skip(&h, kind[i]), i >= 2);
                }
            }
        assert_int_equal(n, halves_bank(&h));
        bool fire = halves_rule_down_fire(&h, true).open != halves_rule_down_fire(&h, false).open;
        bool skip = halves_rule_down_skip(&h, true).open != halves_rule_down_skip(&h, false).open;
        assert_int_equal(halves_down_fire(&h, 2, true) != halves_down_fire(&h, 2, false), fire);
        assert_int_equal(halves_down_skip(&h, 2, true) != halves_down_skip(&h, 2, false), skip);
    }
}

// The cycles of one cylinder of a single-cylinder engine are the word itself: x x . . x . (then x
// x): the run before the fifth letter began after a fire after a fire, the last one after a fire
// that had followed a run.
static void test_halves_of_a_word(void **state)
{
    (void)state;
    tacet_roll *r = roll_of("xx..x.", 1);
    halves h = halves_of(TACET_TRAPPED_BURNT, 3, false);
    unsigned bank = halves_bank(&h);
    const unsigned expected[6][2] = {
        {bank + halves_up_fire(&h, 1), bank + halves_down_fire(&h, 1, true)},
        {halves_up_fire(&h, 0), halves_down_fire(&h, 0, false)},
        {halves_up_skip(&h, 1), halves_down_skip(&h, 1, false)},
        {halves_up_skip(&h, 2), halves_down_skip(&h, 2, true)},
        {halves_up_fire(&h, 2), halves_down_fire(&h, 2, false)},
        {bank + halves_up_skip(&h, 1), bank + halves_down_skip(&h, 1, true)}};
    for (unsigned c = 0; c < 6; c++) {
        unsigned up, down;
        assert_true(halves_of_cycle(&h, r, 0, c, &up, &down));
        assert_int_equal(up, expected[c][0]);
        assert_int_equal(down, expected[c][1]);
    }
    h = halves_of(TACET_TRAPPED_BURNT, 1, false); // a run of two is too long
    unsigned up, down;
    assert_false(halves_of_cycle(&h, r, 0, 3, &up, &down));
    assert_false(halves_of_cycle(&h, r, 0, 4, &up, &down));
    assert_true(halves_of_cycle(&h, r, 0, 5, &up, &down));
    tacet_roll_destroy(r);
    r = roll_of("x.", 2); // the second cylinder never fires
    h = halves_of(TACET_TRAPPED_RESIDUAL, 3, false);
    assert_true(halves_of_cycle(&h, r, 1, 0, &up, &down));
    assert_int_equal(up, halves_up_skip(&h, 4));
    assert_int_equal(down, halves_down_skip(&h, 4, false));
    tacet_roll_destroy(r);
}

static void test_engine_says(void **state)
{
    (void)state;
    tacet_engine_def d = demo_v8();
    unsigned skip[] = {2, 3, 5, 8};
    d.skip.cylinders = skip, d.skip.n_cylinders = 4;
    tacet_engine *en = NULL;
    assert_int_equal(tacet_engine_create(&d, &en, NULL), TACET_OK);
    static const unsigned order[] = {1, 8, 4, 3, 6, 5, 7, 2};
    for (unsigned i = 0; i < 8; i++) {
        assert_int_equal(tacet_engine_number(en, i), order[i]);
        assert_near(tacet_engine_firing_angle(en, i), i * M_PI / 2, 1e-12, 0);
        bool may = order[i] == 2 || order[i] == 3 || order[i] == 5 || order[i] == 8;
        assert_int_equal(tacet_engine_may_skip(en, i), may);
    }
    assert_string_equal(tacet_engine_node(en, 1), "throw4"); // cylinder 8
    assert_near(tacet_engine_displacement(en), 5.78e-3, 5e-6, 0);
    assert_int_equal(tacet_engine_cylinders(en), 8);
    assert_int_equal(tacet_engine_strokes(en), 4);
    tacet_engine_work *none = NULL;
    assert_int_equal(tacet_engine_work_create(en, &none), TACET_BAD_INPUT); // not prepared
    tacet_engine_destroy(en);
    d = demo_six();
    double interval[] = {90 * DEG, 150 * DEG, 90 * DEG, 150 * DEG, 90 * DEG, 150 * DEG};
    static const double angle[] = {0, 90, 240, 330, 480, 570};
    d.firing_intervals_rad = interval, d.n_intervals = 6;
    assert_int_equal(tacet_engine_create(&d, &en, NULL), TACET_OK);
    for (unsigned i = 0; i < 6; i++)
        assert_near(tacet_engine_firing_angle(en, i), angle[i] * DEG, 1e-12, 0);
    assert_string_equal(tacet_engine_node(en, 1), "throw5"); // by default, of cylinder 5
    assert_true(tacet_engine_may_skip(en, 3));
    tacet_engine_destroy(en);
    tacet_engine_destroy(NULL);
    tacet_engine_work_destroy(NULL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_halves_valves),
        cmocka_unit_test(test_halves_kinds),
        cmocka_unit_test(test_halves_of_a_word),
        cmocka_unit_test(test_engine_says),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
