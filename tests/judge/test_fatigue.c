// Rainflow counting, mean stress, Miner's sum.
#include "near.h"
#include "tacet/judge.h"
#include <math.h>
#include <string.h>

#define N(a) (sizeof(a) / sizeof *(a))

static void check_cycles(size_t n, const double *series, const tacet_rain *expected, size_t cycles)
{
    double stack[64];
    tacet_rain got[64];
    assert_int_equal(tacet_rainflow(n, series, stack, got), cycles);
    for (size_t i = 0; i < cycles; i++) {
        assert_near(got[i].range, expected[i].range, 0, 0);
        assert_near(got[i].mean, expected[i].mean, 0, 0);
        assert_near(got[i].count, expected[i].count, 0, 0);
    }
}

static const double astm[] = {-2, 1, -3, 5, -1, 3, -4, 4, -2};

// ASTM E1049-85, 5.4.4, the example of fig. 6 as quoted in public tests; between reversals and
// repeated points change nothing.
static void test_the_example_of_the_standard(void **state)
{
    (void)state;
    const tacet_rain expected[] = {{3, -.5, .5}, {4, -1, .5}, {4, 1, 1}, {8, 1, .5},
                                   {9, .5, .5},  {8, 0, .5},  {6, 1, .5}};
    const double slow[] = {-2, -2, 0, 1, 1,  -1, -3, 0, 5, 5, 5,  2, -1,
                           -1, 0,  3, 3, -4, -4, 0,  4, 4, 1, -2, -2};
    check_cycles(N(astm), astm, expected, N(expected));
    check_cycles(N(slow), slow, expected, N(expected));
}

// Worked by hand with the same rules.
static void test_another_series(void **state)
{
    (void)state;
    const double series[] = {0, 10, -5, 8, -8, 6, -2, 4, -10, 3, 0};
    const tacet_rain expected[] = {{10, 5, .5}, {13, 1.5, 1},   {6, 1, 1},   {14, -1, 1},
                                   {20, 0, .5}, {13, -3.5, .5}, {3, 1.5, .5}};
    check_cycles(N(series), series, expected, N(expected));
    check_cycles(0, series, NULL, 0);
    check_cycles(1, series, NULL, 0);
    check_cycles(3, (double[]){2, 2, 2}, NULL, 0);
}

// From the largest value on around, every cycle is whole: ranges of a closed repeat come in pairs
// of halves. One period of the standard's series: peak 5, .. closed by -2 .. 1 .. -3 .. 5.
static void test_closed_repeat(void **state)
{
    (void)state;
    double series[16], stack[16], whole = 0, largest = 0;
    tacet_rain got[16];
    size_t n =
        tacet_rainflow_repeat(N(astm) - 1, astm, series, stack, got); // the last is the first
    for (size_t i = 0; i < n; i++) {
        whole += got[i].count;
        largest = fmax(largest, got[i].range);
    }
    assert_near(series[0], 5, 0, 0);
    assert_near(whole, 4, 0, 0); // eight reversals, four cycles
    assert_near(largest, 9, 0, 0);
    double turned[8]; // wherever the period is begun
    for (int by = 1; by < 8; by++) {
        for (int i = 0; i < 8; i++)
            turned[i] = astm[(i + by) % 8];
        tacet_rain other[16];
        assert_int_equal(tacet_rainflow_repeat(8, turned, series, stack, other), n);
        assert_memory_equal(other, got, n * sizeof *got);
    }
}

// 10 MPa a unit, N = 1e6 (a / 100)^-5 (invented, recomputed by hand).
static void test_miner_sum(void **state)
{
    (void)state;
    double series[9], stack[9];
    tacet_rain got[9];
    for (int i = 0; i < 9; i++)
        series[i] = 10 * astm[i];
    size_t n = tacet_rainflow(9, series, stack, got);
    tacet_fatigue_def f = {100, 1e6, 5, 500, TACET_MEAN_NONE};
    assert_near(tacet_miner_sum(&f, n, got), 2.1199375e-8, 0, 1e-8);
    // Goodman's correction in tension only would leave out the two negative means
    f.mean_rule = TACET_MEAN_GOODMAN;
    double magnitude = 0;
    for (size_t i = 0; i < n; i++)
        magnitude +=
            got[i].count * 1e-6 * pow(got[i].range / 2 / (1 - fabs(got[i].mean) / 500) / 100, 5);
    assert_near(tacet_miner_sum(&f, n, got), magnitude, 0, 1e-14);
    // Palmgren and Miner: parts of the lives add up
    double part = 2e4 / 1e5 + 5e4 / 2e5 + 1e5 / 4e5, sum = 0;
    const double cycles[] = {2e4, 5e4, 1e5}, life[] = {1e5, 2e5, 4e5};
    f.mean_rule = TACET_MEAN_NONE;
    for (int i = 0; i < 3; i++) {
        tacet_rain one = {2 * 100 * pow(life[i] / 1e6, -1.0 / 5), 0, cycles[i]};
        sum += tacet_miner_sum(&f, 1, &one);
    }
    assert_near(part, 0.7, 1e-15, 0);
    assert_near(sum, part, 0, 1e-12);
}

// a 100, m 120, ultimate 600 MPa: Goodman 125, Gerber 104.1667 (textbook formulas, from memory).
static void test_mean_stress(void **state)
{
    (void)state;
    tacet_fatigue_def f = {100, 1e6, 5, 600, TACET_MEAN_GOODMAN};
    assert_near(tacet_reversed_amplitude(&f, 100, 120), 125, 0, 1e-12);
    assert_near(tacet_reversed_amplitude(&f, 100, -120), 125, 0, 1e-12); // shear has no sign
    assert_true(isinf(tacet_reversed_amplitude(&f, 1, 600)));
    f.mean_rule = TACET_MEAN_GERBER;
    assert_near(tacet_reversed_amplitude(&f, 100, 120), 104.1666667, 0, 1e-9);
    f.mean_rule = TACET_MEAN_NONE;
    assert_near(tacet_reversed_amplitude(&f, 100, 120), 100, 0, 0);
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_the_example_of_the_standard),
    cmocka_unit_test(test_another_series),
    cmocka_unit_test(test_closed_repeat),
    cmocka_unit_test(test_miner_sum),
    cmocka_unit_test(test_mean_stress),
};
TEST_MAIN(tests)
