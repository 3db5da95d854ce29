// Tables, texts, JSON and map of the screen of standin.c. Every expected line is worked out by hand
// from the numbers there: savings are 100 (1 - ratio), means are of the runs' speeds.
#include "near.h"
#include "standin.h"
#include <jansson.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

static char *csv_of(const char *table)
{
    tacet_screen *s = standin_screen();
    tacet_arena *a = tacet_arena_create();
    tacet_table t;
    char *text = NULL;
    size_t bytes;
    FILE *to = open_memstream(&text, &bytes);
    const tacet_screen_table *which = tacet_screen_table_find(table);
    assert_non_null(which);
    assert_int_equal(which->build(standin_model(), s, a, &t), TACET_OK);
    assert_string_equal(t.name, table);
    tacet_table_write(&t, tacet_writer_find("csv"), NULL, to);
    fclose(to);
    tacet_arena_destroy(a);
    standin_release(s);
    return text;
}

static void expect_csv(const char *table, const char *expected)
{
    char *text = csv_of(table);
    assert_string_equal(text, expected);
    free(text);
}

static void test_runs(void **state)
{
    (void)state;
    // 950 to 1000 rpm: mean of 6.25, 12.5 and 9.375 %
    expect_csv("runs",
               "from_rpm,to_rpm,run,word,saving_percent,least_margin_db,limited_by,at_order\n"
               "900,900,1,x,0,9,pump coupling,1.5\n"
               "925,925,none is clear,,,,,\n"
               "950,1000,1/2,.x,9.375,4,pump coupling,1.5\n");
}

static void test_ranking(void **state)
{
    (void)state;
    char *text = csv_of("ranking");
    const char *line = strchr(text, '\n') + 1;
    static const char *const expected[] = {
        "900,330,recommended,1,x,clear,9,pump coupling,1.5,10,0,1/2,over,-6.25,",
        "925,328,none is clear,1,x,clear,9,pump coupling,1.5,10,0,1/2,near,1.5,",
        "950,326,recommended,1/2,.x,clear,4,pump coupling,1.5,9.375,6.25,",
        "975,324,recommended,1/2,.x,clear,5,pump coupling,1.5,8.75,12.5,",
        "1000,322,recommended,1/2,.x,clear,6,pump coupling,1.5,9.0625,9.375,"};
    for (size_t i = 0; i < 5; i++) {
        assert_int_equal(strncmp(line, expected[i], strlen(expected[i])), 0);
        line = strchr(line, '\n') + 1;
    }
    assert_int_equal(*line, 0);
    free(text);
}

static void test_summary_table(void **state)
{
    (void)state;
    char *text = csv_of("summary");
    assert_non_null(strstr(text, "\n1/2,.x,0.5,2,0,3,1,1,0,0,3,950,1000,50,"));
    assert_non_null(strstr(text, ",pump coupling,1.5,yes,recommended\n"));
    assert_non_null(strstr(text, "\n\"outer, \"\"pair\"\"\",x..,"));
    assert_non_null(strstr(text, "\"clear over 0 rpm, under 150\"\n"));
    // refused: no counts, and the reason
    assert_non_null(strstr(text, "\n1/40,x.,0.025,0,0,,,,,,,,,,,,,no,a skip run of 39 cycles\n"));
    free(text);
}

static void test_no_go_table(void **state)
{
    (void)state;
    expect_csv("no-go",
               "candidate,band,from_rpm,to_rpm,open,beyond,worst_margin_db,at_rpm,leading_order\n"
               "1/2,pump coupling,900,918.25,below,not screened,-6.25,900,1.5\n"
               "\"outer, \"\"pair\"\"\",pump coupling,940,960,both ends,\"out of reach, not "
               "solved\",-2,950,1\n");
}

static void test_agreement_table(void **state)
{
    (void)state;
    expect_csv("agreement",
               "candidate,word,speed_rpm,margin_db,same_model,full_model_db,repeats,evaluations,"
               "closure,status\n"
               "1/2,.x,900,-6.25,2e-09,0.0421,2,200000,1e-10,settled\n"
               "1/2,x.,975,5,,,,,,not converged\n");
}

static void test_levels_table(void **state)
{
    (void)state;
    char *text = csv_of("levels");
    const char *head = "candidate,placement,extra_speed,speed_rpm,word,outcome,fuel_vs_all_fire,"
                       "method,pump coupling.margin_db,pump coupling.verdict,boom.margin_db,"
                       "boom.verdict,crank stress.value,crank stress.margin_db,"
                       "crank stress.verdict,crank stress.why\n";
    size_t lines = 0;
    assert_int_equal(strncmp(text, head, strlen(head)), 0);
    for (const char *c = text; *c; c++)
        lines += *c == '\n';
    assert_int_equal(lines, 16);
    // the second placement at 975 rpm has its own word
    assert_non_null(strstr(text, "\n1/2,2,no,975,x.,solved,0.875,ripple,5,clear,,clear,20,6.0206,"
                                 "clear,\n"));
    // absent numbers are empty and a column beside them says why
    assert_non_null(strstr(text,
                           "\n\"outer, \"\"pair\"\"\",1,no,900,x..,unreachable,,ripple,,none,,"
                           "clear,,,none,unreachable\n"));
    free(text);
}

static void test_summary_lines(void **state)
{
    (void)state;
    tacet_screen *s = standin_screen();
    tacet_arena *a = tacet_arena_create();
    const char *const *lines;
    size_t n;
    assert_int_equal(tacet_screen_summary(standin_model(), s, a, &lines, &n), TACET_OK);
    // mean of 0, 6.25, 12.5 and 9.375 %; near or over: 2 of 1/2, 2 of the word
    static const char *const expected[] = {
        "Run all cylinders at 900 rpm, nothing clear at 925 rpm, 1/2 at 950-1000 rpm.",
        "Saves 7.0 % of the fuel against all cylinders firing at equal torque, mean of 4 speeds; "
        "most at 975 rpm, 12.5 %.",
        "Limits: pump coupling (4) of the 4 conditions that are near or over.",
        "At 1 of 5 speeds nothing is clear, all cylinders included.",
        "1 of 2 checks by the second solver did not settle.",
        "1 of 4 candidates were not screened; the table says why.",
        "Solvers agree on the 1 worst condition: same model within 2e-09, fast path against the "
        "full march within 0.042 dB."};
    assert_int_equal(n, sizeof expected / sizeof *expected);
    for (size_t i = 0; i < n; i++)
        assert_string_equal(lines[i], expected[i]);
    tacet_arena_destroy(a);
    standin_release(s);
}

static void test_print_is_in_reading_order(void **state)
{
    (void)state;
    tacet_screen *s = standin_screen();
    char *text = NULL;
    size_t bytes;
    FILE *to = open_memstream(&text, &bytes);
    assert_int_equal(tacet_screen_print(standin_model(), s, &(tacet_table_style){0}, to), TACET_OK);
    fclose(to);
    static const char *const order[] = {"A stand-in", "\nRun all",           "\nSaves",
                                        "\nLimits:",  "\nWhat runs where\n", "\nCandidates",
                                        "\nNo-go",    "\nAgreement",         "\nCaution:"};
    const char *at = text;
    for (size_t i = 0; i < sizeof order / sizeof *order; i++) {
        at = strstr(at, order[i]);
        assert_non_null(at);
    }
    for (const char *line = text, *end; (end = strchr(line, '\n')); line = end + 1)
        assert_true(end == line || end[-1] != ' ');
    free(text);
    standin_release(s);
}

static void test_json(void **state)
{
    (void)state;
    tacet_screen *s = standin_screen();
    char *text = NULL;
    size_t bytes;
    FILE *to = open_memstream(&text, &bytes);
    tacet_json j = tacet_json_start(to);
    tacet_json_head(&j, "screen", tacet_model_study(standin_model()), "ok");
    assert_int_equal(tacet_screen_json(&j, standin_model(), s), TACET_OK);
    tacet_json_end_object(&j);
    assert_int_equal(tacet_json_finish(&j, "memory", NULL), TACET_OK);
    fclose(to);
    json_error_t why;
    json_t *root = json_loads(text, JSON_REJECT_DUPLICATES, &why);
    if (!root) print_error("%d: %s\n", why.line, why.text);
    assert_non_null(root);
    assert_int_equal(json_array_size(json_object_get(root, "runs")), 3);
    assert_int_equal(json_array_size(json_object_get(root, "ranking")), 5);
    assert_int_equal(json_array_size(json_object_get(root, "no_go")), 2);
    assert_int_equal(json_array_size(json_object_get(root, "candidates")), 4);
    json_t *conditions = json_object_get(root, "conditions");
    assert_int_equal(json_array_size(conditions), 15);
    json_t *one = json_array_get(conditions, 0);
    assert_string_equal(json_string_value(json_object_get(one, "candidate")), "1/2");
    assert_string_equal(json_string_value(json_object_get(one, "word")), ".x");
    assert_null(json_object_get(one, "fuel_vs_all_fire")); // in the duty
    json_t *duty = json_object_get(one, "duty");
    assert_near(json_number_value(json_object_get(duty, "fuel_vs_all_fire")), 0.9, 0, 1e-15);
    json_t *band = json_array_get(json_object_get(one, "bands"), 0);
    assert_string_equal(json_string_value(json_object_get(band, "name")), "pump coupling");
    assert_near(json_number_value(json_object_get(band, "margin_db")), -6.25, 0, 1e-15);
    json_t *limit = json_array_get(json_object_get(one, "limits"), 0);
    assert_near(json_number_value(json_object_get(limit, "limit")), 40, 0, 1e-15);
    // a null has a reason beside it
    json_t *far = json_array_get(conditions, 10);
    duty = json_object_get(far, "duty");
    assert_true(json_is_null(json_object_get(duty, "fuel_vs_all_fire")));
    assert_string_equal(json_string_value(json_object_get(duty, "fuel_vs_all_fire_why")),
                        "unreachable");
    limit = json_array_get(json_object_get(far, "limits"), 0);
    assert_true(json_is_null(json_object_get(limit, "value")));
    assert_string_equal(json_string_value(json_object_get(limit, "why")), "unreachable");
    json_decref(root);
    free(text);
    standin_release(s);
}

static void test_map(void **state)
{
    (void)state;
    tacet_screen *s = standin_screen();
    tacet_arena *a = tacet_arena_create();
    tacet_figure_map f;
    assert_int_equal(tacet_map_of_screen(standin_model(), s, a, &f), TACET_OK);
    // density rising from the bottom, the refused one left out
    assert_int_equal(f.n_rows, 3);
    assert_string_equal(f.row[0], "outer, \"pair\"");
    assert_string_equal(f.row[1], "1/2");
    assert_string_equal(f.row[2], "1");
    static const tacet_mark marks[3][5] = {
        {TACET_MARK_UNREACHABLE, TACET_MARK_UNREACHABLE, TACET_MARK_OVER, TACET_MARK_NEAR,
         TACET_MARK_CLEAR},
        {TACET_MARK_OVER, TACET_MARK_NEAR, TACET_MARK_CLEAR, TACET_MARK_CLEAR, TACET_MARK_CLEAR},
        {TACET_MARK_CLEAR, TACET_MARK_CLEAR, TACET_MARK_CLEAR, TACET_MARK_CLEAR, TACET_MARK_CLEAR}};
    static const bool best[3][5] = {{0}, {0, 0, 1, 1, 1}, {1}};
    for (size_t row = 0; row < 3; row++)
        for (size_t i = 0; i < 5; i++) {
            assert_int_equal(f.cell[row * 5 + i].mark, marks[row][i]);
            assert_int_equal(f.cell[row * 5 + i].recommended, best[row][i]);
        }
    assert_near(f.cell[5].margin_db, -6.25, 0, 1e-15);
    assert_int_equal(f.cell[5].limiting, 0);
    assert_int_equal(f.n_ranges, 2);
    assert_int_equal(f.range[0].row, 1);
    assert_near(f.range[0].high_rpm, 918.25, 1e-9, 0);
    assert_int_equal(f.range[1].row, 0);
    assert_int_equal(f.n_limiting, 3);
    assert_string_equal(f.limiting[2], "crank stress");
    tacet_arena_destroy(a);
    standin_release(s);
}

// ---- the n-th allocation fails

static size_t allocations_left = SIZE_MAX;
void *__real_calloc(size_t n, size_t size);
void *__wrap_calloc(size_t n, size_t size);
void *__wrap_calloc(size_t n, size_t size)
{
    if (allocations_left == 0) return NULL;
    if (allocations_left != SIZE_MAX) allocations_left--;
    return __real_calloc(n, size);
}

void *__real_aligned_alloc(size_t alignment, size_t size);
void *__wrap_aligned_alloc(size_t alignment, size_t size);
void *__wrap_aligned_alloc(size_t alignment, size_t size)
{
    if (allocations_left == 0) return NULL;
    if (allocations_left != SIZE_MAX) allocations_left--;
    return __real_aligned_alloc(alignment, size);
}

static void test_every_allocation_fails_once(void **state)
{
    (void)state;
    tacet_screen *s = standin_screen();
    FILE *nowhere = fopen("/dev/null", "w");
    assert_non_null(nowhere);
    size_t n = 0, failures = 0;
    for (;; n++) {
        allocations_left = n;
        tacet_json j = tacet_json_start(nowhere);
        tacet_json_begin_object(&j);
        tacet_status printed =
            tacet_screen_print(standin_model(), s, &(tacet_table_style){0}, nowhere);
        tacet_status json = tacet_screen_json(&j, standin_model(), s);
        allocations_left = SIZE_MAX;
        if (printed == TACET_OK && json == TACET_OK) break;
        assert_true(printed == TACET_OK || printed == TACET_NO_MEMORY);
        assert_true(json == TACET_OK || json == TACET_NO_MEMORY);
        failures++;
        assert_true(n < 1000);
    }
    assert_true(failures >= 4);
    fclose(nowhere);
    standin_release(s);
}

int main(void)
{
    static const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_runs),
        cmocka_unit_test(test_ranking),
        cmocka_unit_test(test_summary_table),
        cmocka_unit_test(test_no_go_table),
        cmocka_unit_test(test_agreement_table),
        cmocka_unit_test(test_levels_table),
        cmocka_unit_test(test_summary_lines),
        cmocka_unit_test(test_print_is_in_reading_order),
        cmocka_unit_test(test_json),
        cmocka_unit_test(test_map),
        cmocka_unit_test(test_every_allocation_fails_once),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
