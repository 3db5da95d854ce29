// Significant lines and the speeds at which they enter, leave and cross.
#include "choose/internal.h"
#include "near.h"
#include "synthetic.h"
#include <math.h>
#include <string.h>

static tacet_arena *arena;

static int set_up(void **state)
{
    (void)state;
    arena = tacet_arena_create();
    return arena ? 0 : -1;
}

static int tear_down(void **state)
{
    (void)state;
    tacet_arena_destroy(arena);
    return 0;
}

static void test_mark_lines(void **state)
{
    (void)state;
    tacet_spectrum s;
    assert_int_equal(tacet_spectrum_init(&s, 4, arena), TACET_OK);
    s.mean = 100;
    s.line[1] = 3;
    s.line[2] = 3 * I - 4; // 5
    s.line[3] = -4.999;
    s.line[4] = 6;
    bool mark[5] = {false, false, false, true, false};
    mark_lines(&s, 5, mark);
    assert_false(mark[0] || mark[1]);
    assert_true(mark[2] && mark[4]);
    assert_true(mark[3]); // stays from another speed
}

// Order 9/7 is line 18 of 14 revolutions. Counted band 11 * 0.95 .. 18 * 1.05 Hz: closed form
// 60 f / order = 487.667 and 882 rpm.
static void test_enter_and_leave(void **state)
{
    (void)state;
    tacet_band b = {
        .low_hz = 11, .high_hz = 18, .counted_low_hz = 11 * 0.95, .counted_high_hz = 18 * 1.05};
    bool mark[43] = {false};
    mark[18] = true;
    const marked_lines wide = {14, 42, mark, {400 * RPM, 1000 * RPM}},
                       low = {14, 42, mark, {400 * RPM, 800 * RPM}},
                       none = {14, 42, mark, {900 * RPM, 1900 * RPM}};
    speeds out = {0};
    assert_int_equal(lines_enter_and_leave(&wide, &b, &out, arena), TACET_OK);
    assert_int_equal(out.n, 2);
    speeds_sort(&out);
    assert_near(out.at[0] / RPM, 487.0 + 2. / 3, 1e-9, 0);
    assert_near(out.at[1] / RPM, 882, 1e-9, 0);
    out.n = 0;
    assert_int_equal(lines_enter_and_leave(&low, &b, &out, arena), TACET_OK);
    assert_int_equal(out.n, 1);
    out.n = 0;
    assert_int_equal(lines_enter_and_leave(&none, &b, &out, arena), TACET_OK);
    assert_int_equal(out.n, 0);
}

// Orders 1 and 1.5 meet 22 Hz at 1320 and 880 rpm; 5 and 90 Hz lie outside 17-27 Hz.
static void test_cross(void **state)
{
    (void)state;
    static const double hz[] = {5, 22, 90};
    bool mark[9] = {false};
    mark[2] = mark[3] = true;
    const marked_lines l = {2, 8, mark, {600 * RPM, 2000 * RPM}};
    speeds out = {0};
    assert_int_equal(lines_cross(&l, hz, 3, 17, 27, &out, arena), TACET_OK);
    speeds_sort(&out);
    assert_int_equal(out.n, 2);
    assert_near(out.at[0] / RPM, 880, 1e-9, 0);
    assert_near(out.at[1] / RPM, 1320, 1e-9, 0);
}

static void test_speeds_sort(void **state)
{
    (void)state;
    speeds s = {0};
    for (int i = 0; i < 100; i++)
        assert_int_equal(speeds_add(&s, (1 + (i * 37) % 50) * (1 + 1e-13 * i), arena), TACET_OK);
    speeds_sort(&s);
    assert_int_equal(s.n, 50);
    for (int i = 0; i < 50; i++)
        assert_near(s.at[i], 1 + i, 1e-9, 0);
    speeds none = {0};
    speeds_sort(&none);
    assert_int_equal(none.n, 0);
}

// The worst placement per band: NAN is nothing known, no line is better than any margin.
static void test_sample_take(void **state)
{
    (void)state;
    sample s = sample_blank(100);
    tacet_row row = {.n_bands = 4};
    static const double first[] = {4, NAN, 1, NAN}, second[] = {2, NAN, 5, -1};
    for (int b = 0; b < 4; b++) {
        row.bands[b].margin_db = first[b];
        row.bands[b].verdict = b == 3 ? TACET_NO_VERDICT : TACET_CLEAR;
        row.bands[b].level.leading_order = 1;
    }
    assert_true(isnan(s.margin_db[0]));
    sample_take(&s, &row);
    assert_near(s.margin_db[0], 4, 0, 0);
    assert_true(isinf(s.margin_db[1]));
    assert_true(isnan(s.margin_db[3]));
    for (int b = 0; b < 4; b++) {
        row.bands[b].margin_db = second[b];
        row.bands[b].verdict = TACET_NEAR;
        row.bands[b].level.leading_order = 2;
    }
    sample_take(&s, &row);
    assert_near(s.margin_db[0], 2, 0, 0);
    assert_near(s.leading_order[0], 2, 0, 0);
    assert_true(isinf(s.margin_db[1]));
    assert_near(s.margin_db[2], 1, 0, 0);
    assert_near(s.leading_order[2], 1, 0, 0);
    assert_near(s.margin_db[3], -1, 0, 0);
    assert_true(isnan(s.margin_db[4]));
}

// Why nothing is known goes with the speed.
static void test_sample_says_why(void **state)
{
    (void)state;
    static const tacet_why why[] = {TACET_WHY_UNREACHABLE, TACET_WHY_FAILED,
                                    TACET_WHY_NO_REFERENCE};
    sample s = sample_blank(100);
    tacet_row row = {.n_bands = 3};
    for (int b = 0; b < 3; b++)
        tacet_band_no_verdict(why[b], &row.bands[b]);
    sample_take(&s, &row);
    for (int b = 0; b < 3; b++) {
        assert_true(isnan(s.margin_db[b]));
        assert_int_equal(s.why[b], why[b]);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_mark_lines),  cmocka_unit_test(test_enter_and_leave),
        cmocka_unit_test(test_cross),       cmocka_unit_test(test_speeds_sort),
        cmocka_unit_test(test_sample_take), cmocka_unit_test(test_sample_says_why),
    };
    return cmocka_run_group_tests(tests, set_up, tear_down);
}
