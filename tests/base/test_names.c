#include "near.h"
#include "tacet/base.h"

static const char *const names[] = {"bore_mm",       "stroke_mm",
                                    "rod_length_mm", "reciprocating_mass_kg",
                                    "firing_order",  "firing_intervals_deg",
                                    "throw1",        "throw2",
                                    "coupling",      NULL};

static void near(const char *word, const char *expected)
{
    const char *got = tacet_near_name(word, names, sizeof names / sizeof *names);
    if (!expected) {
        if (got) fail_msg("'%s' was taken for '%s'", word, got);
        return;
    }
    if (!got) fail_msg("nothing near '%s'", word);
    assert_string_equal(got, expected);
}

static void test_near(void **state)
{
    (void)state;
    near("bore", "bore_mm"); // the unit left out
    near("Bore-MM", "bore_mm");
    near("broe_mm", "bore_mm"); // a swap is one edit
    near("mass_kg", "reciprocating_mass_kg");
    near("stroke_cm", "stroke_mm");
    near("firing_ordr", "firing_order");
    near("throw3", "throw1"); // the first of equals
    near("cupling", "coupling");
    near("rod_lenght_mm", "rod_length_mm");
}

static void test_not_near(void **state)
{
    (void)state;
    near("x", NULL);
    near("", NULL);
    near("wheels", NULL);
    near("body", NULL);
    near("ab", NULL);
    near("aaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaa", NULL);
    assert_null(tacet_near_name("bore", NULL, 0));
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_near),
    cmocka_unit_test(test_not_near),
};
TEST_MAIN(tests)
