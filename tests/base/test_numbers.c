#include "comma.h"
#include "near.h"
#include "tacet/base.h"
#include <float.h>
#include <locale.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

static void test_parse_accepts_decimals(void **state)
{
    (void)state;
    static const struct {
        const char *text;
        double value;
    } good[] = {{"0", 0},          {"-0.5", -0.5},         {"+12.25", 12.25}, {".5", 0.5},
                {"5.", 5},         {"1e3", 1000},          {"1.5E-2", 0.015}, {"007", 7},
                {"2.5e+4", 25000}, {"4.9e-324", 4.9e-324}, {"1e-400", 0}};
    for (size_t i = 0; i < sizeof good / sizeof *good; i++) {
        double value = NAN;
        assert_true(tacet_number_parse(good[i].text, &value));
        assert_true(value == good[i].value);
    }
}

static void test_parse_refuses_the_rest(void **state)
{
    (void)state;
    static const char *const bad[] = {
        "",      " ",     ".",     "-",   "e5",       "1e",    "1e+", "1.5junk", "1,5",
        "1.2.3", " 1",    "1 ",    "nan", "inf",      "-inf",  "NaN", "0x10",    "1e999",
        "--1",   "1_000", "1'000", "1d3", "infinity", "12:30", "no",  "1e1.5"};
    for (size_t i = 0; i < sizeof bad / sizeof *bad; i++) {
        double value = 42;
        if (tacet_number_parse(bad[i], &value)) fail_msg("'%s' was taken as %g", bad[i], value);
        assert_true(value == 42);
    }
}

static void test_format_reads_back_equal(void **state)
{
    (void)state;
    static const struct {
        double value;
        const char *text;
    } known[] = {{0.1, "0.1"},
                 {1e22, "1e+22"},
                 {-1550000, "-1550000"},
                 {0, "0"},
                 {1.0 / 3, "0.3333333333333333"},
                 {0.1 + 0.2, "0.30000000000000004"}};
    char text[TACET_NUMBER_TEXT];
    for (size_t i = 0; i < sizeof known / sizeof *known; i++)
        assert_string_equal(tacet_number_format(known[i].value, text), known[i].text);
    uint64_t bits = 88172645463325252u;
    for (int i = 0; i < 20000; i++) { // doubles of every size
        bits ^= bits << 13, bits ^= bits >> 7, bits ^= bits << 17;
        double value, back;
        memcpy(&value, &bits, sizeof value);
        if (!isfinite(value)) continue;
        assert_true(tacet_number_parse(tacet_number_format(value, text), &back));
        assert_true(back == value);
    }
    assert_string_equal(tacet_number_format(NAN, text), "null");
    assert_string_equal(tacet_number_format(-INFINITY, text), "null");
    assert_true(strlen(tacet_number_format(-DBL_MIN / 3, text)) < TACET_NUMBER_TEXT);
}

static void test_format_short(void **state)
{
    (void)state;
    static const struct {
        double value;
        int digits;
        const char *text;
    } known[] = {{1234.6, 3, "1235"},     {0.0012345, 3, "0.00123"}, {9999999, 3, "9999999"},
                 {1e7, 3, "1e7"},         {2.5e-4, 3, "2.5e-4"},     {-15.25, 3, "-15.2"},
                 {100, 4, "100"},         {0.5, 3, "0.5"},           {0, 3, "0"},
                 {12345678, 3, "1.23e7"}, {1.999, 3, "2"},           {0.001, 3, "0.001"}};
    char text[TACET_NUMBER_TEXT];
    for (size_t i = 0; i < sizeof known / sizeof *known; i++)
        assert_string_equal(tacet_number_format_short(known[i].value, known[i].digits, text),
                            known[i].text);
    assert_string_equal(tacet_number_format_short(NAN, 3, text), "null");
}

// The same under a locale with decimal commas: nothing changes, and the locale is left as it was.
static void test_comma_locale(void **state)
{
    (void)state;
    if (!comma_begin()) skip();
    double value = 0;
    char text[TACET_NUMBER_TEXT], message[64];
    assert_true(tacet_number_parse("1.5", &value));
    assert_true(value == 1.5);
    assert_false(tacet_number_parse("1,5", &value));
    assert_string_equal(tacet_number_format(1.5, text), "1.5");
    assert_string_equal(tacet_number_format_short(1234.5678, 6, text), "1234.57");
    assert_string_equal(tacet_number_format_short(1.25e9, 6, text), "1.25e9");
    assert_string_equal(tacet_text(message, sizeof message, "%g rpm", 2.5), "2.5 rpm");
    tacet_error e;
    assert_int_equal(tacet_fail(&e, TACET_BAD_INPUT, "%.2f mm", 0.5), TACET_BAD_INPUT);
    assert_string_equal(e.text, "0.50 mm");
    assert_string_equal(localeconv()->decimal_point, ",");
    comma_end();
    test_parse_accepts_decimals(state);
}

static void test_units(void **state)
{
    (void)state;
    // definitions of the units
    assert_near(tacet_unit_factor("mm"), 0.001, 0, 1e-15);
    assert_near(tacet_unit_factor("deg") * 180, 3.14159265358979323846, 0, 1e-15);
    assert_near(tacet_unit_factor("rpm") * 60, 6.28318530717958647692, 0, 1e-15);
    assert_near(tacet_unit_factor("N m/deg") * tacet_unit_factor("deg"), 1, 0, 1e-15);
    assert_near(tacet_unit_factor("kPa"), 1000, 0, 0);
    assert_near(tacet_unit_factor("%"), 0.01, 0, 0);
    assert_true(tacet_unit_factor("furlong") == 0);
    assert_true(tacet_unit_factor(NULL) == 1);
}

static void test_curve(void **state)
{
    (void)state;
    double x[] = {800, 1300, 1900}, y[] = {130, 185, 185};
    tacet_curve c = {x, y, 3};
    assert_near(tacet_curve_at(&c, 0), 130, 0, 0);
    assert_near(tacet_curve_at(&c, 800), 130, 0, 0);
    assert_near(tacet_curve_at(&c, 1050), 157.5, 0, 1e-15); // half way by hand
    assert_near(tacet_curve_at(&c, 1300), 185, 0, 0);
    assert_near(tacet_curve_at(&c, 5000), 185, 0, 0);
    c.n = 1;
    assert_near(tacet_curve_at(&c, 1900), 130, 0, 0);
    c.n = 0;
    assert_true(isnan(tacet_curve_at(&c, 1900)));
    c.n = 3;
    assert_true(isnan(tacet_curve_at(&c, NAN)));
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_parse_accepts_decimals),
    cmocka_unit_test(test_parse_refuses_the_rest),
    cmocka_unit_test(test_format_reads_back_equal),
    cmocka_unit_test(test_format_short),
    cmocka_unit_test(test_comma_locale),
    cmocka_unit_test(test_units),
    cmocka_unit_test(test_curve),
};
TEST_MAIN(tests)
