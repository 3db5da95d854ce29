#include "near.h"
#include "tacet/order.h"
#include <math.h>

static tacet_spectrum spectrum_of(tacet_arena *a, size_t n)
{
    tacet_spectrum s;
    assert_int_equal(tacet_spectrum_init(&s, n, a), TACET_OK);
    return s;
}

static void test_init_is_zero(void **state)
{
    (void)state;
    tacet_arena *a = tacet_arena_create();
    tacet_spectrum s = spectrum_of(a, 5);
    assert_int_equal(s.n_lines, 5);
    assert_int_equal(s.revolutions, 1);
    for (size_t h = 0; h <= 5; h++)
        assert_near(cabs(s.line[h]), 0, 0, 0);
    assert_near(s.mean, 0, 0, 0);
    s.mean = 3, s.line[5] = 2 + I, s.revolutions = 7;
    tacet_spectrum_zero(&s);
    assert_near(s.mean, 0, 0, 0);
    assert_near(cabs(s.line[5]), 0, 0, 0);
    assert_int_equal(s.revolutions, 7); // the grid stays
    tacet_arena_destroy(a);
}

static void test_init_too_large_is_refused(void **state)
{
    (void)state;
    tacet_arena *a = tacet_arena_create();
    tacet_spectrum s = {.n_lines = 42};
    assert_int_equal(tacet_spectrum_init(&s, SIZE_MAX / 16, a), TACET_NO_MEMORY);
    assert_int_equal(s.n_lines, 42); // output untouched
    tacet_arena_destroy(a);
}

// By hand: (2 - i)(1 + 3i) = 5 + 5i; mean adds with the real part.
static void test_add_scales_by_complex_factor(void **state)
{
    (void)state;
    tacet_arena *a = tacet_arena_create();
    tacet_spectrum s = spectrum_of(a, 3), x = spectrum_of(a, 2);
    s.mean = 1, s.line[1] = 10, s.line[3] = 7;
    x.mean = 4, x.line[1] = 1 + 3 * I, x.line[2] = I;
    tacet_spectrum_add(&s, 2 - I, &x);
    assert_near(s.mean, 9, 1e-15, 0);
    assert_near(creal(s.line[1]), 15, 1e-15, 0);
    assert_near(cimag(s.line[1]), 5, 1e-15, 0);
    assert_near(creal(s.line[2]), 1, 1e-15, 0);
    assert_near(cimag(s.line[2]), 2, 1e-15, 0);
    assert_near(creal(s.line[3]), 7, 1e-15, 0);
    tacet_arena_destroy(a);
}

// Closed form: rms of 3 cos + 4 cos of another frequency is sqrt((9 + 16) / 2).
static void test_rms_of_a_range(void **state)
{
    (void)state;
    tacet_arena *a = tacet_arena_create();
    tacet_spectrum s = spectrum_of(a, 4);
    s.mean = 1000;     // order 0 never counts
    s.line[0] = 5000;  // nor what stands in its place
    s.line[1] = 3 * I; // phase does not matter
    s.line[2] = -4;
    s.line[4] = 12;
    assert_near(tacet_spectrum_rms(&s, 0, 2), sqrt(12.5), 0, 1e-15);
    assert_near(tacet_spectrum_rms(&s, 2, 2), 4 / sqrt(2), 0, 1e-15);
    assert_near(tacet_spectrum_rms(&s, 1, 99), sqrt(84.5), 0, 1e-15);
    assert_near(tacet_spectrum_rms(&s, 3, 3), 0, 0, 0);
    assert_near(tacet_spectrum_rms(&s, 3, 2), 0, 0, 0);
    tacet_arena_destroy(a);
}

// A cosine with phase p has line A exp(i p): A cos(q a + p) at crank angle a, order q = h / revs.
static void test_at_follows_the_phase_convention(void **state)
{
    (void)state;
    tacet_arena *a = tacet_arena_create();
    tacet_spectrum s = spectrum_of(a, 9);
    s.revolutions = 14;
    s.mean = -2;
    s.line[9] = 5 * cexp(I * 0.7);
    double angle[] = {0, 1, 11.3, 14 * 2 * M_PI};
    for (size_t i = 0; i < 4; i++)
        assert_near(tacet_spectrum_at(&s, angle[i]), -2 + 5 * cos(9.0 / 14 * angle[i] + 0.7), 1e-13,
                    0);
    tacet_arena_destroy(a);
}

// N7: order q at N rpm is q N / 60 Hz; 1.5 at 1500 rpm is 37.5 Hz.
static void test_order_hz_n7(void **state)
{
    (void)state;
    double rpm = 2 * M_PI / 60;
    assert_near(tacet_order_hz(1.5, 1500 * rpm), 37.5, 0, 1e-14);
    assert_near(tacet_order_speed(1.5, 37.5) / rpm, 1500, 0, 1e-14);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_init_is_zero),
        cmocka_unit_test(test_init_too_large_is_refused),
        cmocka_unit_test(test_add_scales_by_complex_factor),
        cmocka_unit_test(test_rms_of_a_range),
        cmocka_unit_test(test_at_follows_the_phase_convention),
        cmocka_unit_test(test_order_hz_n7),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
