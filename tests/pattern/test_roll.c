// The roll: repeat, skips of each cylinder, runs, what an engine allows.
#include "near.h"
#include "tacet/pattern.h"
#include <math.h>
#include <string.h>

static tacet_roll *roll(const char *text, unsigned cylinders, unsigned strokes)
{
    tacet_pattern p;
    tacet_roll *r;
    assert_int_equal(tacet_pattern_parse(text, &p, NULL), TACET_OK);
    assert_int_equal(tacet_roll_create(&p, cylinders, strokes, &r, NULL), TACET_OK);
    return r;
}

static void assert_cycle(const tacet_roll *r, unsigned slot, unsigned cycle, unsigned tenths,
                         unsigned skips)
{
    tacet_cycle c = tacet_roll_cycle(r, slot, cycle);
    assert_int_equal(c.tenths, tenths);
    assert_int_equal(c.skips, skips);
}

// K10: with unequal cylinders the repeat is lcm(L, n) opportunities, fundamental order
// n/(2 lcm(L, n)) of a four-stroke: (4,3) 0.16667; (4,2) 0.5; (8,4) 0.5; (8,5) 0.1 (closed form).
static void test_repeat_k10(void **state)
{
    (void)state;
    static const struct {
        unsigned cylinders;
        const char *word;
        double order;
    } cases[] = {{4, "xx.", 1. / 6}, {4, "x.", .5}, {8, "xxx.", .5}, {8, "x.xx.", .1}};
    for (size_t i = 0; i < 4; i++) {
        tacet_roll *r = roll(cases[i].word, cases[i].cylinders, 4);
        assert_near(1. / r->revolutions, cases[i].order, 1e-12, 0);
        assert_int_equal(r->opportunities, r->cycles * r->cylinders);
        tacet_roll_destroy(r);
    }
}

// Lowest order in the fires of a roll, all cylinders alike: lines of the opportunities of a repeat.
static double lowest_order(const tacet_roll *r)
{
    for (unsigned h = 1; h <= r->opportunities / 2; h++) {
        double re = 0, im = 0;
        for (unsigned o = 0; o < r->opportunities; o++) {
            tacet_cycle c = tacet_roll_cycle(r, o % r->cylinders, o / r->cylinders);
            double angle = 8 * atan(1) * h * o / r->opportunities;
            re += c.tenths * cos(angle);
            im -= c.tenths * sin(angle);
        }
        if (hypot(re, im) > 1e-9) return (double)h / r->revolutions;
    }
    return 0;
}

// K10: with cylinders all alike the fundamental order of a primitive pattern is n/(2L) of a
// four-stroke: n=4: L=2 1.0, 3 0.66667, 5 0.4; n=6: L=4 0.75; n=8: L=3 1.33333, L=5 0.8 (closed
// form). A two-stroke has twice the order.
static void test_fundamental_k10(void **state)
{
    (void)state;
    static const struct {
        unsigned cylinders;
        const char *word;
        double order;
    } cases[] = {{4, "x.", 1},       {4, "xx.", 2. / 3},    {4, "x.xx.", .4}, {6, "xxx.", .75},
                 {8, "x..", 4. / 3}, {8, "xx.xx.xx..", .4}, {8, "x.xx.", .8}};
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        tacet_roll *r = roll(cases[i].word, cases[i].cylinders, 4);
        assert_near(lowest_order(r), cases[i].order, 1e-12, 0);
        tacet_roll_destroy(r);
        r = roll(cases[i].word, cases[i].cylinders, 2);
        assert_near(lowest_order(r), 2 * cases[i].order, 1e-12, 0);
        tacet_roll_destroy(r);
    }
}

// 3/7 on a six, counted by hand: repeat 42 opportunities, 7 cycles, 14 revolutions, 18 fires. Slot
// 0 meets letters 0, 6, 5, 4, 3, 2, 1 of `..x.x.x`: . x . x . x .
static void test_roll_by_hand(void **state)
{
    (void)state;
    tacet_roll *r = roll("..x.x.x", 6, 4);
    assert_int_equal(r->opportunities, 42);
    assert_int_equal(r->cycles, 7);
    assert_int_equal(r->revolutions, 14);
    assert_int_equal(r->fires, 18);
    assert_int_equal(r->longest_gap, 2);
    assert_int_equal(r->longest_run, 2);
    static const unsigned tenths[] = {0, 10, 0, 10, 0, 10, 0}, skips[] = {2, 2, 1, 1, 1, 1, 1};
    for (unsigned c = 0; c < 7; c++)
        assert_cycle(r, 0, c, tenths[c], skips[c]);
    assert_cycle(r, 0, 7, 0, 2);
    for (unsigned s = 0; s < 6; s++)
        assert_int_equal(tacet_roll_fires_of(r, s), 3);
    tacet_roll_destroy(r);
}

// `x.` on a six: slots 0, 2, 4 always fire, 1, 3, 5 never; one cycle, two revolutions.
static void test_roll_fixed_set(void **state)
{
    (void)state;
    tacet_roll *r = roll("x.x.", 6, 4);
    assert_int_equal(r->pattern.length, 2);
    assert_int_equal(r->cycles, 1);
    assert_int_equal(r->revolutions, 2);
    assert_int_equal(r->fires, 3);
    assert_int_equal(r->longest_run, 0);
    assert_int_equal(r->longest_gap, 1);
    for (unsigned s = 0; s < 6; s++)
        assert_cycle(r, s, 5, s % 2 ? 0 : 10, s % 2 ? TACET_SKIPS_FOREVER : 0);
    tacet_roll_destroy(r);
}

static void test_roll_tenths_and_two_strokes(void **state)
{
    (void)state;
    tacet_roll *r = roll("x5.", 2, 2); // slot 0: x . 5, slot 1: 5 x .
    assert_int_equal(r->revolutions, 3);
    assert_cycle(r, 0, 0, 10, 0);
    assert_cycle(r, 0, 1, 0, 1);
    assert_cycle(r, 0, 2, 5, 1);
    assert_cycle(r, 1, 0, 5, 1);
    assert_cycle(r, 1, 2, 0, 1);
    assert_int_equal(r->fires, 4);
    tacet_roll_destroy(r);
}

// One cylinder, longest word: 63 skips in a row, the gap runs across the end of the word.
static void test_roll_longest(void **state)
{
    (void)state;
    char text[65];
    memset(text, '.', 64);
    text[64] = '\0';
    text[10] = 'x';
    tacet_roll *r = roll(text, 1, 4);
    assert_int_equal(r->cycles, 64);
    assert_int_equal(r->longest_run, 63);
    assert_int_equal(r->longest_gap, 63);
    assert_cycle(r, 0, 10, 10, 63);
    assert_cycle(r, 0, 11, 0, 1);
    assert_cycle(r, 0, 9, 0, 63);
    tacet_roll_destroy(r);
}

static void test_roll_nothing_fires(void **state)
{
    (void)state;
    tacet_error e;
    tacet_roll *r = roll("..", 4, 4);
    assert_int_equal(r->fires, 0);
    assert_int_equal(r->longest_gap, 4);
    assert_false(tacet_roll_allowed(r, NULL, 0, &e));
    assert_non_null(strstr(e.text, "no cylinder fires"));
    tacet_roll_destroy(r);
}

static void test_roll_refused(void **state)
{
    (void)state;
    tacet_pattern p;
    tacet_error e;
    tacet_roll *r = (tacet_roll *)&p;
    assert_int_equal(tacet_pattern_parse("x.", &p, NULL), TACET_OK);
    assert_int_equal(tacet_roll_create(&p, 0, 4, &r, &e), TACET_BAD_INPUT);
    assert_null(r);
    assert_int_equal(tacet_roll_create(&p, 65, 4, &r, &e), TACET_BAD_INPUT);
    assert_int_equal(tacet_roll_create(&p, 6, 3, &r, &e), TACET_BAD_INPUT);
    assert_non_null(strstr(e.text, "3 strokes"));
    p.length = 0;
    assert_int_equal(tacet_roll_create(&p, 6, 4, &r, &e), TACET_BAD_INPUT);
}

static void test_roll_allowed(void **state)
{
    (void)state;
    tacet_error e = {0};
    bool may_skip[] = {true, true, false, true, true, true};
    tacet_roll *all = roll("x", 6, 4), *even = roll("x.", 6, 4), *odd = roll(".x", 6, 4),
               *sevenths = roll("..x.x.x", 6, 4);
    assert_true(tacet_roll_allowed(all, may_skip, 1, &e));
    assert_true(tacet_roll_allowed(even, may_skip, 1, &e)); // 1, 3, 5 never fire: no run
    assert_false(tacet_roll_allowed(odd, may_skip, 1, &e)); // slot 2 is one of those
    assert_int_equal(e.column, 3);
    assert_non_null(strstr(e.text, "position 3"));
    assert_true(tacet_roll_allowed(sevenths, NULL, 2, &e));
    assert_false(tacet_roll_allowed(sevenths, NULL, 1, &e));
    assert_non_null(strstr(e.text, "2 times in a row; 1"));
    assert_true(tacet_roll_allowed(sevenths, NULL, 0, NULL));
    assert_false(tacet_roll_allowed(sevenths, NULL, 1, NULL));
    tacet_roll_destroy(all);
    tacet_roll_destroy(even);
    tacet_roll_destroy(odd);
    tacet_roll_destroy(sevenths);
    tacet_roll_destroy(NULL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_repeat_k10),
        cmocka_unit_test(test_fundamental_k10),
        cmocka_unit_test(test_roll_by_hand),
        cmocka_unit_test(test_roll_fixed_set),
        cmocka_unit_test(test_roll_tenths_and_two_strokes),
        cmocka_unit_test(test_roll_longest),
        cmocka_unit_test(test_roll_nothing_fires),
        cmocka_unit_test(test_roll_refused),
        cmocka_unit_test(test_roll_allowed),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
