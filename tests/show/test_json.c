// What the writer writes is read back with jansson.
#include "near.h"
#include "tacet/show.h"
#include <errno.h>
#include <jansson.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

typedef struct {
    char *text;
    size_t bytes;
    FILE *to;
    tacet_json j;
} sheet;

static sheet *sheet_open(void)
{
    sheet *s = calloc(1, sizeof *s);
    assert_non_null(s);
    s->to = open_memstream(&s->text, &s->bytes);
    assert_non_null(s->to);
    s->j = tacet_json_start(s->to);
    return s;
}

static json_t *sheet_read(sheet *s)
{
    json_error_t why;
    assert_int_equal(tacet_json_finish(&s->j, "memory", NULL), TACET_OK);
    fclose(s->to);
    json_t *root = json_loads(s->text, JSON_REJECT_DUPLICATES | JSON_ALLOW_NUL, &why);
    if (!root) print_error("%s\n%s\n", why.text, s->text);
    assert_non_null(root);
    free(s->text);
    free(s);
    return root;
}

static void test_round_trip_of_values(void **state)
{
    (void)state;
    static const double values[] = {
        0, -0.0, 1, 0.1, 1.0 / 3, -2.5e-300, 1e300, 5e-324, 1.7976931348623157e308, 123456789.25};
    sheet *s = sheet_open();
    tacet_json_begin_array(&s->j);
    for (size_t i = 0; i < sizeof values / sizeof *values; i++)
        tacet_json_number(&s->j, values[i]);
    tacet_json_number(&s->j, NAN);
    tacet_json_number(&s->j, -INFINITY);
    tacet_json_count(&s->j, 9007199254740993u); // 2^53 + 1: no double holds it
    tacet_json_bool(&s->j, true);
    tacet_json_null(&s->j);
    tacet_json_text(&s->j, NULL);
    tacet_json_end_array(&s->j);
    json_t *root = sheet_read(s);
    size_t n = sizeof values / sizeof *values;
    for (size_t i = 0; i < n; i++)
        assert_true(json_number_value(json_array_get(root, i)) == values[i]);
    assert_true(json_is_null(json_array_get(root, n)));
    assert_true(json_is_null(json_array_get(root, n + 1)));
    assert_true(json_integer_value(json_array_get(root, n + 2)) == 9007199254740993);
    assert_true(json_is_true(json_array_get(root, n + 3)));
    assert_true(json_is_null(json_array_get(root, n + 4)));
    assert_true(json_is_null(json_array_get(root, n + 5)));
    json_decref(root);
}

static void test_round_trip_of_text(void **state)
{
    (void)state;
    char every[128];
    for (int i = 1; i < 128; i++)
        every[i - 1] = (char)i;
    every[127] = 0;
    sheet *s = sheet_open();
    tacet_json_begin_object(&s->j);
    tacet_json_put_text(&s->j, "every \"ASCII\" \\ byte", every);
    tacet_json_put_text(&s->j, "beyond", "\xc3\xa4\xe2\x82\xac\xf0\x9f\x98\x80");
    tacet_json_put_text(&s->j, "broken", "a\xff\xc3(b");
    tacet_json_end_object(&s->j);
    json_t *root = sheet_read(s);
    assert_string_equal(json_string_value(json_object_get(root, "every \"ASCII\" \\ byte")), every);
    assert_string_equal(json_string_value(json_object_get(root, "beyond")),
                        "\xc3\xa4\xe2\x82\xac\xf0\x9f\x98\x80");
    assert_string_equal(json_string_value(json_object_get(root, "broken")),
                        "a\xef\xbf\xbd\xef\xbf\xbd(b");
    json_decref(root);
}

static void test_round_trip_of_nesting(void **state)
{
    (void)state;
    sheet *s = sheet_open();
    tacet_json_begin_object(&s->j);
    tacet_json_key(&s->j, "orders");
    tacet_json_begin_array(&s->j);
    for (int i = 0; i < 3; i++) {
        tacet_json_begin_array(&s->j);
        tacet_json_number(&s->j, i);
        tacet_json_number(&s->j, 2 * i);
        tacet_json_end_array(&s->j);
    }
    tacet_json_end_array(&s->j);
    tacet_json_key(&s->j, "empty");
    tacet_json_begin_object(&s->j);
    tacet_json_end_object(&s->j);
    tacet_json_key(&s->j, "none");
    tacet_json_begin_array(&s->j);
    tacet_json_end_array(&s->j);
    tacet_json_put_bool(&s->j, "last", false);
    tacet_json_end_object(&s->j);
    json_t *root = sheet_read(s);
    assert_int_equal(json_object_size(root), 4);
    json_t *pair = json_array_get(json_object_get(root, "orders"), 2);
    assert_true(json_number_value(json_array_get(pair, 1)) == 4);
    assert_int_equal(json_object_size(json_object_get(root, "empty")), 0);
    assert_int_equal(json_array_size(json_object_get(root, "none")), 0);
    assert_true(json_is_false(json_object_get(root, "last")));
    json_decref(root);
}

static void test_head(void **state)
{
    (void)state;
    tacet_study study = {.title = "a \"title\"", .fingerprint = 0xfedcba9876543210u};
    sheet *s = sheet_open();
    tacet_json_head(&s->j, "modes", &study, "ok");
    tacet_json_end_object(&s->j);
    json_t *root = sheet_read(s);
    json_t *own = json_object_get(root, "tacet"), *of = json_object_get(root, "study");
    assert_int_equal(json_integer_value(json_object_get(own, "format")), 1);
    assert_string_equal(json_string_value(json_object_get(own, "version")), tacet_version());
    assert_string_equal(json_string_value(json_object_get(own, "command")), "modes");
    assert_string_equal(json_string_value(json_object_get(of, "title")), study.title);
    assert_string_equal(json_string_value(json_object_get(of, "fingerprint")), "fedcba9876543210");
    assert_string_equal(json_string_value(json_object_get(root, "status")), "ok");
    const char *caution = json_string_value(json_object_get(root, "caution"));
    assert_non_null(strstr(caution, "not a release"));
    assert_non_null(strstr(caution, "qualified engineer"));
    json_decref(root);
}

// Every call out of order is found at the end.
static void test_misuse_is_found(void **state)
{
    (void)state;
    for (int which = 0; which < 8; which++) {
        sheet *s = sheet_open();
        tacet_json *j = &s->j;
        tacet_json_begin_object(j);
        if (which == 0) tacet_json_number(j, 1); // no key
        if (which == 1) tacet_json_end_array(j); // wrong kind
        if (which == 2) tacet_json_key(j, "a"), tacet_json_key(j, "b");
        if (which == 3) tacet_json_key(j, "a"), tacet_json_end_object(j);
        if (which == 4) tacet_json_end_object(j), tacet_json_begin_array(j); // second root
        if (which == 5) tacet_json_end_object(j), tacet_json_end_object(j);
        if (which == 6) tacet_json_key(j, "a"), tacet_json_begin_array(j); // left open
        for (int i = 0; which == 7 && i < TACET_JSON_DEPTH + 1; i++)
            tacet_json_key(j, "a"), tacet_json_begin_object(j);
        assert_int_equal(tacet_json_finish(j, "memory", NULL), TACET_BAD_INPUT);
        fclose(s->to);
        free(s->text);
        free(s);
    }
}

static void test_full_disk_is_said(void **state)
{
    (void)state;
    tacet_error e;
    FILE *full = fopen("/dev/full", "w");
    if (!full) skip();
    tacet_json j = tacet_json_start(full);
    tacet_json_begin_array(&j);
    for (int i = 0; i < 100000; i++) // more than any buffer
        tacet_json_number(&j, i);
    tacet_json_end_array(&j);
    assert_int_equal(tacet_json_finish(&j, "somewhere/screen.json", &e), TACET_OUTSIDE_WORLD);
    assert_int_equal(errno, ENOSPC);
    assert_non_null(strstr(e.text, "somewhere/screen.json"));
    assert_non_null(strstr(e.text, strerror(ENOSPC)));
    fclose(full);
}

int main(void)
{
    static const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_round_trip_of_values),  cmocka_unit_test(test_round_trip_of_text),
        cmocka_unit_test(test_round_trip_of_nesting), cmocka_unit_test(test_head),
        cmocka_unit_test(test_misuse_is_found),       cmocka_unit_test(test_full_disk_is_said),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
