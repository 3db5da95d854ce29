// UTF-8, control characters and fixed decimals. Expected bytes: Unicode 15, table 3-7 (well-formed
// UTF-8 byte sequences).
#include "comma.h"
#include "near.h"
#include "show/text.h"
#include "tacet/show.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>

static void test_next_well_formed(void **state)
{
    (void)state;
    static const struct {
        const char *text;
        size_t bytes;
        uint32_t code;
    } cases[] = {{"A", 1, 'A'},
                 {"\xc3\xa4", 2, 0xe4},
                 {"\xe2\x82\xac", 3, 0x20ac},
                 {"\xf0\x9f\x98\x80", 4, 0x1f600},
                 {"\xf4\x8f\xbf\xbf", 4, 0x10ffff}};
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        uint32_t code;
        assert_int_equal(text_next(cases[i].text, &code), cases[i].bytes);
        assert_int_equal(code, cases[i].code);
    }
}

static void test_next_ill_formed_is_one_byte(void **state)
{
    (void)state;
    static const char *const bad[] = {
        "\x80",             // a continuation alone
        "\xc0\xaf",         // '/' in two bytes
        "\xe0\x80\x80",     // overlong
        "\xed\xa0\x80",     // a surrogate
        "\xf4\x90\x80\x80", // past U+10FFFF
        "\xf8\x88\x80\x80", // five-byte form
        "\xe2\x82",         // cut off by the end
        "\xc3",
    };
    for (size_t i = 0; i < sizeof bad / sizeof *bad; i++) {
        uint32_t code = 0;
        assert_int_equal(text_next(bad[i], &code), 1);
        assert_int_equal(code, TEXT_INVALID);
    }
}

static void test_clean_takes_out_controls(void **state)
{
    (void)state;
    char out[64];
    assert_string_equal(text_clean("a\033[31mb\n\xc2\x9b"
                                   "c\xff",
                                   sizeof out, out),
                        "a [31mb  c?");
    // turned direction of writing, and a zero-width space
    assert_string_equal(text_clean("a\xe2\x80\xae"
                                   "b\xe2\x80\x8b",
                                   sizeof out, out),
                        "a b ");
    // never half a character
    assert_string_equal(text_clean("ab\xc3\xa4", 4, out), "ab");
}

static void test_fixed(void **state)
{
    (void)state;
    char out[TACET_NUMBER_TEXT];
    assert_string_equal(text_fixed(3.14159, 2, out), "3.14");
    assert_string_equal(text_fixed(-0.04, 1, out), "0.0");
    assert_string_equal(text_fixed(-0.05001, 1, out), "-0.1");
    assert_string_equal(text_fixed(1400, 0, out), "1400");
    assert_string_equal(text_fixed(0.999, 2, out), "1.00");
    assert_string_equal(text_fixed(12.003, 3, out), "12.003");
    assert_string_equal(text_fixed(NAN, 1, out), "");
    assert_string_equal(text_fixed(-INFINITY, 1, out), "");
    // beyond what fixed decimals hold: still a number with the right value
    assert_near(strtod(text_fixed(2.5e20, 2, out), NULL), 2.5e20, 0, 1e-3);
}

static void test_fixed_ignores_locale(void **state)
{
    (void)state;
    char out[TACET_NUMBER_TEXT];
    if (!comma_begin()) skip();
    const char *text = text_fixed(1234.5, 1, out);
    comma_end();
    assert_string_equal(text, "1234.5");
}

int main(void)
{
    static const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_next_well_formed),
        cmocka_unit_test(test_next_ill_formed_is_one_byte),
        cmocka_unit_test(test_clean_takes_out_controls),
        cmocka_unit_test(test_fixed),
        cmocka_unit_test(test_fixed_ignores_locale),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
