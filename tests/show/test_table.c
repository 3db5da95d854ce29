// Tables as text, CSV and JSON. The CSV rules are those of RFC 4180, section 2, with LF.
#include "comma.h"
#include "near.h"
#include "tacet/show.h"
#include <errno.h>
#include <jansson.h>
#include <math.h>
#include <signal.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

static const tacet_table_column columns[] = {
    {"name", NULL, true, 0, false, NULL},       {"speed_rpm", "rpm", false, 0, false, NULL},
    {"margin_db", "dB", false, 1, false, NULL}, {"hidden", NULL, false, -1, true, NULL},
    {"why", NULL, true, 0, false, NULL},
};
#define N (sizeof columns / sizeof *columns)
static const tacet_table_cell cells[] = {
    {NAN, "3/7", true},
    {900, NULL, false},
    {-1.25, NULL, false},
    {1e-9, NULL, false},
    {NAN, "", false},
    {NAN, "a, \"b\"", false},
    {1400, NULL, false},
    {NAN, NULL, false},
    {0.1, NULL, false},
    {NAN, "line\nbreak", false},
    {NAN, "\xc3\xa4\033[1m", false},
    {NAN, NULL, false},
    {12, NULL, false},
    {2, NULL, false},
    {NAN, "no line", false},
};
static const tacet_table table = {"try", "A heading", columns, N, cells, 3};

static char *written(const char *writer, const tacet_table_style *style)
{
    char *text = NULL;
    size_t bytes;
    FILE *to = open_memstream(&text, &bytes);
    assert_non_null(to);
    assert_non_null(tacet_writer_find(writer));
    tacet_table_write(&table, tacet_writer_find(writer), style, to);
    assert_int_equal(tacet_stream_check(to, "memory", NULL), TACET_OK);
    fclose(to);
    return text;
}

static void test_csv_quotes(void **state)
{
    (void)state;
    char *text = written("csv", NULL);
    assert_string_equal(text, "name,speed_rpm,margin_db,hidden,why\n"
                              "3/7,900,-1.25,1e-09,\n"
                              "\"a, \"\"b\"\"\",1400,,0.1,\"line\nbreak\"\n"
                              "\xc3\xa4\033[1m,,12,2,no line\n");
    free(text);
}

static void test_csv_ignores_locale(void **state)
{
    (void)state;
    char *plain = written("csv", NULL);
    if (!comma_begin()) {
        free(plain);
        skip();
    }
    char *text = written("csv", NULL);
    comma_end();
    assert_string_equal(text, plain);
    free(plain);
    free(text);
}

static void test_text_is_aligned_and_clean(void **state)
{
    (void)state;
    char *text = written("text", NULL);
    // columns: 6, 9, 9 and the rest wide, two blanks between; no line ends in blanks
    // columns: 6, 9, 9 and the rest wide, two blanks between; no line ends in blanks
    assert_string_equal(text, "A heading\n"
                              "name    speed_rpm  margin_db  why\n"
                              "              rpm         dB\n"
                              "3/7           900       -1.3\n"
                              "a, \"b\"       1400          -  line break\n"
                              "\xc3\xa4 [1m           -       12.0  no line\n");
    free(text);
}

static void test_text_colour_only_when_asked(void **state)
{
    (void)state;
    char *quiet = written("text", NULL);
    char *lit = written("text", &(tacet_table_style){.colour = true});
    assert_null(strchr(quiet, 033));
    assert_non_null(strstr(lit, "\033[36m3/7\033[0m"));
    free(quiet);
    free(lit);
}

static void test_text_shows_at_most(void **state)
{
    (void)state;
    char *text = written("text", &(tacet_table_style){.most_rows = 1});
    assert_non_null(strstr(text, ".. 2 more\n"));
    assert_null(strstr(text, "1400"));
    free(text);
}

static void test_json_holds_rows(void **state)
{
    (void)state;
    char *text = written("json", NULL);
    json_t *root = json_loads(text, 0, NULL);
    assert_non_null(root);
    json_t *row = json_array_get(json_object_get(root, "rows"), 1);
    assert_string_equal(json_string_value(json_object_get(row, "name")), "a, \"b\"");
    assert_true(json_is_null(json_object_get(row, "margin_db")));
    assert_true(json_number_value(json_object_get(row, "hidden")) == 0.1);
    json_t *column = json_array_get(json_object_get(root, "columns"), 2);
    assert_string_equal(json_string_value(json_object_get(column, "unit")), "dB");
    json_decref(root);
    free(text);
}

static void test_writers_are_found(void **state)
{
    (void)state;
    size_t n = 0;
    for (const tacet_writer *w = tacet_writers(); w->name; w++, n++)
        assert_ptr_equal(tacet_writer_find(w->name), w);
    assert_int_equal(n, 3);
    assert_null(tacet_writer_find("xls"));
}

static void test_stream_says_full_disk(void **state)
{
    (void)state;
    tacet_error e;
    FILE *full = fopen("/dev/full", "w");
    if (!full) skip();
    tacet_table_write(&table, tacet_writer_find("csv"), NULL, full);
    assert_int_equal(tacet_stream_check(full, "standard output", &e), TACET_OUTSIDE_WORLD);
    assert_int_equal(errno, ENOSPC);
    assert_non_null(strstr(e.text, "cannot write standard output"));
    fclose(full);
}

static void test_stream_says_closed_pipe(void **state)
{
    (void)state;
    tacet_error e;
    int ends[2];
    assert_int_equal(pipe(ends), 0);
    close(ends[0]);
    signal(SIGPIPE, SIG_IGN);
    FILE *to = fdopen(ends[1], "w");
    tacet_table_write(&table, tacet_writer_find("text"), NULL, to);
    assert_int_equal(tacet_stream_check(to, "standard output", &e), TACET_OUTSIDE_WORLD);
    assert_int_equal(errno, EPIPE);
    fclose(to);
}

static void test_caution_says_what_it_must(void **state)
{
    (void)state;
    static const char *const words[] = {"screening result",   "not a release", "measurement",
                                        "qualified engineer", "class rules",   "bending",
                                        "bearings",           "mounts"};
    for (int form = 0; form < 2; form++) {
        char flat[1024];
        snprintf(flat, sizeof flat, "%s", tacet_caution(form));
        for (char *c = flat; *c; c++)
            if (*c == '\n') *c = ' ';
        for (size_t i = 0; i < sizeof words / sizeof *words; i++)
            assert_non_null(strstr(flat, words[i]));
    }
    assert_null(strchr(tacet_caution(TACET_CAUTION_SHORT), '\n'));
}

int main(void)
{
    static const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_csv_quotes),
        cmocka_unit_test(test_csv_ignores_locale),
        cmocka_unit_test(test_text_is_aligned_and_clean),
        cmocka_unit_test(test_text_colour_only_when_asked),
        cmocka_unit_test(test_text_shows_at_most),
        cmocka_unit_test(test_json_holds_rows),
        cmocka_unit_test(test_writers_are_found),
        cmocka_unit_test(test_stream_says_full_disk),
        cmocka_unit_test(test_stream_says_closed_pipe),
        cmocka_unit_test(test_caution_says_what_it_must),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
