// Whole-body vibration after ISO 2631-1 (clauses from memory).
#include "near.h"
#include "tacet/judge.h"
#include <math.h>
#include <string.h>

#define SAMPLES 512
static const double quarter = 0.25;

static tacet_comfort comfort_of(double rms, size_t line)
{
    double complex lines[33] = {0};
    tacet_spectrum s = {.revolutions = 2, .n_lines = 32, .line = lines};
    tacet_transform *t = NULL;
    tacet_comfort c;
    if (line) lines[line] = rms * M_SQRT2 * cexp(0.7 * I);
    assert_int_equal(tacet_transform_create(SAMPLES, &t), TACET_OK);
    double *buffer = tacet_transform_buffer(t);
    tacet_comfort_of(&s, t, buffer, &c);
    tacet_transform_release(buffer);
    tacet_transform_destroy(t);
    return c;
}

// A sine: VDV = (3/8)^(1/4) A T^(1/4) (integral of cos^4); rms 1 over 10 s: 1.967990; A = 2 over
// 60 s: 4.355877. Crest factor sqrt 2.
static void test_a_sine(void **state)
{
    (void)state;
    tacet_comfort c = comfort_of(1, 5);
    assert_near(c.weighted_rms, 1, 0, 1e-12);
    assert_near(c.crest_factor, M_SQRT2, 0, 1e-9);
    assert_near(tacet_vibration_dose(&c, 10), 1.967990, 0, 1e-6);
    assert_near(tacet_vibration_dose(&c, 10), pow(3.0 / 8, quarter) * M_SQRT2 * pow(10, quarter), 0,
                1e-12);
    c = comfort_of(M_SQRT2, 1);
    assert_near(tacet_vibration_dose(&c, 60), 4.355877, 0, 1e-6);
    assert_true(c.rms_says_enough);
    // 1.4 a_w T^(1/4) is what the rms alone would estimate: 2.489591
    assert_near(1.4 * 1 * pow(10, quarter), 2.489591, 0, 1e-6);
    c = comfort_of(0, 0);
    assert_near(c.weighted_rms + c.crest_factor + c.fourth_power, 0, 0, 0);
}

// All 32 lines in phase: a pulse of crest factor sqrt(2 * 32) = 8, and of 41 lines one above 9.
static void test_pulses_ask_for_more_than_rms(void **state)
{
    (void)state;
    double complex lines[65] = {0};
    tacet_transform *t = NULL;
    assert_int_equal(tacet_transform_create(SAMPLES, &t), TACET_OK);
    double *buffer = tacet_transform_buffer(t);
    for (size_t n = 1; n <= 64; n++)
        lines[n] = 1;
    for (size_t n = 2; n <= 64; n *= 2) {
        tacet_spectrum s = {.revolutions = 2, .n_lines = n, .line = lines};
        tacet_comfort c;
        tacet_comfort_of(&s, t, buffer, &c);
        assert_near(c.crest_factor, sqrt(2.0 * (double)n), 0, 1e-9);
        assert_true(c.rms_says_enough ==
                    (c.crest_factor <= 9 && c.fourth_power <= 1.75 * c.weighted_rms));
        if (n == 64) assert_false(c.rms_says_enough); // 11.3
    }
    tacet_transform_release(buffer);
    tacet_transform_destroy(t);
}

static void test_total_value_and_words(void **state)
{
    (void)state;
    const double a[3] = {0.5, 0.3, 0.8}, comfort[3] = {1, 1, 1}, health[3] = {1.4, 1.4, 1};
    assert_near(tacet_total_value(comfort, a), 0.989949, 0, 1e-6);
    assert_near(tacet_total_value(health, a), 1.142979, 0, 1e-6);
    const char *second;
    assert_string_equal(tacet_comfort_words(0.31, &second), "not uncomfortable");
    assert_null(second);
    assert_string_equal(tacet_comfort_words(0.4, &second), "a little uncomfortable");
    assert_null(second);
    assert_string_equal(tacet_comfort_words(0.9, &second), "fairly uncomfortable");
    assert_string_equal(second, "uncomfortable"); // the ranges overlap on purpose
    assert_string_equal(tacet_comfort_words(2.2, &second), "very uncomfortable");
    assert_string_equal(second, "extremely uncomfortable");
    assert_string_equal(tacet_comfort_words(9, NULL), "extremely uncomfortable");
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_a_sine),
    cmocka_unit_test(test_pulses_ask_for_more_than_rms),
    cmocka_unit_test(test_total_value_and_words),
};
TEST_MAIN(tests)
