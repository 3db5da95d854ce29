#include "near.h"
#include "tacet/judge.h"
#include <math.h>
#include <stdio.h>
#include <string.h>

static void check_keys(const tacet_section *s, const char *const *keys)
{
    size_t i = 0;
    for (; keys[i]; i++) {
        assert_non_null(s->fields[i].key);
        assert_string_equal(s->fields[i].key, keys[i]);
        assert_non_null(s->fields[i].doc);
        assert_true(s->fields[i].offset < s->size);
        assert_true(!s->fields[i].unit || tacet_unit_factor(s->fields[i].unit) > 0);
    }
    assert_null(s->fields[i].key);
}

// Users script against these words.
static void test_keys_are_the_agreed_words(void **state)
{
    (void)state;
    const char *const band[] = {"name",
                                "kind",
                                "low_hz",
                                "high_hz",
                                "quantity",
                                "limit_rms",
                                "over_all_fire_db",
                                "floor_rms",
                                "guard_percent",
                                "reference",
                                NULL};
    const char *const limit[] = {"name", "quantity", "statistic", "value", NULL};
    assert_string_equal(tacet_band_keys()->name, "bands");
    assert_string_equal(tacet_limit_keys()->name, "limits");
    check_keys(tacet_band_keys(), band);
    check_keys(tacet_limit_keys(), limit);
}

static const tacet_field *field(const tacet_section *s, const char *key)
{
    for (const tacet_field *f = s->fields; f->key; f++)
        if (strcmp(f->key, key) == 0) return f;
    fail_msg("no key %s", key);
    return NULL;
}

// Words of a choice stand in the order of the enum that they fill.
static void test_choices_match_the_enums(void **state)
{
    (void)state;
    const tacet_field *kind = field(tacet_band_keys(), "kind");
    assert_string_equal(kind->choices[TACET_BAND_CAB], "cab");
    assert_string_equal(kind->choices[TACET_BAND_MOUNT], "mount");
    assert_string_equal(kind->choices[TACET_BAND_DRIVELINE], "driveline");
    assert_string_equal(kind->choices[TACET_BAND_CRANK], "crank");
    const tacet_field *reference = field(tacet_band_keys(), "reference");
    assert_string_equal(reference->choices[TACET_REFERENCE_SAME_SPEED], "same-speed");
    assert_string_equal(reference->fallback, reference->choices[TACET_REFERENCE_WORST]);
    const tacet_field *statistic = field(tacet_limit_keys(), "statistic");
    assert_string_equal(statistic->choices[TACET_STAT_PP], "pp");
    assert_string_equal(statistic->choices[TACET_STAT_HALF_RANGE], "half_range");
    assert_string_equal(statistic->choices[TACET_STAT_RMS], "rms");
    assert_string_equal(statistic->choices[TACET_STAT_MEAN], "mean");
    assert_string_equal(statistic->choices[TACET_STAT_MAX], "max");
}

static void test_offsets_reach_their_members(void **state)
{
    (void)state;
    assert_int_equal(field(tacet_band_keys(), "guard_percent")->offset,
                     offsetof(tacet_band_def, guard));
    assert_int_equal(field(tacet_band_keys(), "floor_rms")->offset,
                     offsetof(tacet_band_def, floor_rms));
    assert_int_equal(field(tacet_band_keys(), "limit_rms")->offset,
                     offsetof(tacet_band_def, limit_rms));
    assert_int_equal(field(tacet_band_keys(), "low_hz")->offset, offsetof(tacet_band_def, low_hz));
    assert_near(tacet_unit_factor(field(tacet_band_keys(), "guard_percent")->unit), 0.01, 0, 0);
    assert_int_equal(field(tacet_limit_keys(), "value")->offset, offsetof(tacet_limit_def, value));
}

// Guard: 5 % cab and mount, 3 % driveline, 2 % crank (common practice, no source); a stated one
// goes before, and none is one.
static void test_guard_by_kind(void **state)
{
    (void)state;
    double expected[] = {[TACET_BAND_CAB] = 0.05,
                         [TACET_BAND_MOUNT] = 0.05,
                         [TACET_BAND_DRIVELINE] = 0.03,
                         [TACET_BAND_CRANK] = 0.02};
    for (int kind = TACET_BAND_CAB; kind <= TACET_BAND_CRANK; kind++) {
        assert_near(tacet_band_guard(&(tacet_band_def){.kind = kind, .guard = NAN}), expected[kind],
                    0, 0);
        assert_near(tacet_band_guard(&(tacet_band_def){.kind = kind, .guard = 0.11}), 0.11, 0, 0);
        assert_near(tacet_band_guard(&(tacet_band_def){.kind = kind, .guard = 0}), 0, 0, 0);
    }
}

typedef struct {
    char errors[400], warnings[400];
} said;

static void hear(void *who, bool warning, const char *path, const char *text)
{
    said *s = who;
    char *to = warning ? s->warnings : s->errors;
    size_t used = strlen(to);
    snprintf(to + used, 400 - used, "%s: %.30s; ", path, text);
}

static said check(tacet_band_def d)
{
    said s = {"", ""};
    tacet_band_def_check(&d, "bands[2]", &(tacet_reporter){hear, &s});
    return s;
}

static void test_check_names_what_is_wrong(void **state)
{
    (void)state;
    tacet_band_def good = {.low_hz = 11,
                           .high_hz = 18,
                           .limit_rms = 230,
                           .over_all_fire_db = NAN,
                           .floor_rms = NAN,
                           .guard = NAN};
    assert_string_equal(check(good).errors, "");
    assert_string_equal(check(good).warnings, "");

    tacet_band_def d = good;
    d.high_hz = 11;
    assert_non_null(strstr(check(d).errors, "bands[2].high_hz: 11 Hz is not above low_hz, 11 "));

    d = good;
    d.over_all_fire_db = 6;
    assert_non_null(strstr(check(d).errors, "bands[2].over_all_fire_db: needs floor_rms"));
    d.floor_rms = 10;
    assert_string_equal(check(d).errors, "");
    d.limit_rms = NAN; // relative alone is a limit
    assert_string_equal(check(d).errors, "");

    d = good;
    d.floor_rms = 10;
    assert_string_equal(check(d).errors, "");
    assert_non_null(strstr(check(d).warnings, "bands[2].floor_rms: does nothing without"));

    d = good;
    d.limit_rms = NAN;
    assert_non_null(strstr(check(d).errors, "bands[2].limit_rms: a band needs limit_rms"));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_keys_are_the_agreed_words),
        cmocka_unit_test(test_choices_match_the_enums),
        cmocka_unit_test(test_offsets_reach_their_members),
        cmocka_unit_test(test_guard_by_kind),
        cmocka_unit_test(test_check_names_what_is_wrong),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
