#include "near.h"
#include "tacet/base.h"
#include <string.h>

#define MOST 1000

static void check(const char *text, size_t n, const double *expected)
{
    tacet_arena *a = tacet_arena_create();
    double *value;
    size_t got;
    tacet_error e = {0};
    if (tacet_list_parse(text, MOST, a, &value, &got, &e)) fail_msg("%s: %s", text, e.text);
    assert_int_equal(got, n);
    for (size_t i = 0; i < n; i++)
        assert_near(value[i], expected[i], 1e-12, 1e-15);
    tacet_arena_destroy(a);
}

static void test_list_good(void **state)
{
    (void)state;
    check("7", 1, (double[]){7});
    check(" 1, 2.5 ,-3", 3, (double[]){1, 2.5, -3});
    check("900:1000:25", 5, (double[]){900, 925, 950, 975, 1000});
    check("900:1000:30", 4, (double[]){900, 930, 960, 990});
    check("0:0.3:0.1", 4, (double[]){0, 0.1, 0.2, 0.3}); // 0.3/0.1 is 2.9999999999999996
    check("10:5:-2.5, 4", 4, (double[]){10, 7.5, 5, 4});
    check("5:5:1", 1, (double[]){5});
    check("1.000001:5:1", 5, (double[]){1.000001, 2.000001, 3.000001, 4.000001, 5}); // no further
    check("1 : 3 : 1", 3, (double[]){1, 2, 3});
}

static void refuse(const char *text, int column, const char *part)
{
    tacet_arena *a = tacet_arena_create();
    double *value = NULL;
    size_t n = 42;
    tacet_error e = {0};
    if (!tacet_list_parse(text, MOST, a, &value, &n, &e)) fail_msg("'%s' was taken", text);
    assert_int_equal(e.status, TACET_BAD_INPUT);
    if (!strstr(e.text, part)) fail_msg("'%s': %s", text, e.text);
    if (e.column != column) fail_msg("'%s': column %d", text, e.column);
    assert_true(value == NULL && n == 42);
    tacet_arena_destroy(a);
}

static void test_list_bad(void **state)
{
    (void)state;
    refuse("", 1, "not a number");
    refuse("1,,2", 3, "not a number");
    refuse("1, 2,", 6, "not a number");
    refuse("a", 1, "not a number");
    refuse("1, 900:x:25", 8, "not a number");
    refuse("900:1900", 1, "without a step");
    refuse("1:2:3:4", 7, "more than from:to:step");
    refuse("1:2:0", 1, "never ends");
    refuse("2, 10:20:-1", 4, "never ends");
    refuse("-1e308:1e308:1e-300", 1, "never ends");
    refuse("0:1e15:1", 1, "more than 1000 values");
    refuse("1:999:1, 1:2:1", 10, "more than 1000 values");
    refuse("1,  2x", 5, "not a number");
    refuse("nan", 1, "not a number");
    refuse("1:1e999:1", 3, "not a number");
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_list_good),
    cmocka_unit_test(test_list_bad),
};
TEST_MAIN(tests)
