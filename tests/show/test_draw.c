// Drawings by the real gnuplot. Its absence is a failure here: the package list holds it.
#include "samples.h"
#include "scratch.h"
#include <math.h>

static const tacet_drawing_format *format(const char *name)
{
    const tacet_drawing_format *f = tacet_drawing_format_find(name);
    assert_non_null(f);
    return f;
}

static const char *const stems[] = {"map", "orders", "bars", "repeat", "modes", "forces", "paths"};
#define STEMS (sizeof stems / sizeof *stems)

static void draw_all(void **state, const char *folder_name, const char *format_name)
{
    const struct {
        const char *stem;
        tacet_figure figure;
    } all[] = {{"map", {TACET_FIGURE_MAP, {.map = sample_map(41, 20)}}},
               {"orders", {TACET_FIGURE_ORDERS, {.orders = sample_orders()}}},
               {"bars", {TACET_FIGURE_BARS, {.bars = sample_bars()}}},
               {"repeat", {TACET_FIGURE_REPEAT, {.repeat = sample_repeat()}}},
               {"modes", {TACET_FIGURE_MODES, {.modes = sample_modes()}}},
               {"forces", {TACET_FIGURE_ORDERS, {.orders = sample_orders()}}},
               {"paths", {TACET_FIGURE_PATHS, {.paths = sample_paths(3, 8)}}}};
    tacet_folder *folder;
    tacet_draw_how how = tacet_draw_default();
    how.format = format(format_name);
    assert_int_equal(tacet_folder_open(scratch_path(*state, folder_name), &folder, NULL), TACET_OK);
    for (size_t i = 0; i < STEMS; i++) {
        tacet_error e = {0};
        tacet_status s = tacet_draw(folder, all[i].stem, &all[i].figure, &how, &e);
        if (s != TACET_OK) print_error("%s: %s\n", all[i].stem, e.text);
        assert_int_equal(s, TACET_OK);
    }
    tacet_folder_close(folder);
}

static char *drawing(void **state, const char *folder, const char *stem, const char *tail,
                     size_t *bytes)
{
    char name[100];
    snprintf(name, sizeof name, "%s/%s.%s", folder, stem, tail);
    char *text = scratch_read(scratch_path(*state, name), bytes);
    assert_non_null(text);
    return text;
}

static void test_same_bytes_again(void **state)
{
    draw_all(state, "a", "svg");
    draw_all(state, "b", "svg");
    for (size_t i = 0; i < STEMS; i++) {
        size_t bytes[2];
        char *a = drawing(state, "a", stems[i], "svg", &bytes[0]);
        char *b = drawing(state, "b", stems[i], "svg", &bytes[1]);
        assert_int_equal(bytes[0], bytes[1]);
        assert_memory_equal(a, b, bytes[0]);
        free(a);
        free(b);
    }
}

// Titles and names try a command, a script tag and gnuplot's own marks: all arrive as text.
static void test_hostile_text_is_text(void **state)
{
    char here[256];
    assert_non_null(getcwd(here, sizeof here));
    assert_int_equal(chdir(((scratch *)*state)->path), 0);
    draw_all(state, "a", "svg");
    assert_int_equal(chdir(here), 0);
    assert_int_equal(scratch_count(((scratch *)*state)->path), 1);
    assert_int_equal(scratch_count(scratch_path(*state, "a")), 2 * STEMS);
    for (size_t i = 0; i < STEMS; i++) {
        size_t bytes;
        char *svg = drawing(state, "a", stems[i], "svg", &bytes);
        assert_null(strstr(svg, "<script"));
        assert_non_null(
            strstr(svg, "&lt;script>alert('x')&lt;/script> `touch hit1` $(touch hit2)"));
        assert_non_null(strstr(svg, "K\xc3\xb6nig"));
        free(svg);
    }
}

static void test_png_is_whole(void **state)
{
    draw_all(state, "a", "png");
    for (size_t i = 0; i < STEMS; i++) {
        size_t bytes;
        char *png = drawing(state, "a", stems[i], "png", &bytes);
        static const unsigned char head[] = {0x89, 'P', 'N', 'G', 0x0d, 0x0a, 0x1a, 0x0a};
        assert_true(bytes > 10000);
        assert_memory_equal(png, head, sizeof head);
        // width and height, PNG specification 11.2.2
        assert_memory_equal(png + 16, "\0\0\5\0\0\0\2\xd0", 8);
        free(png);
    }
}

// A home without fonts: fontconfig reads its file from the environment that we pass on.
static void test_png_without_fonts_is_said(void **state)
{
    tacet_folder *folder;
    tacet_error e = {0};
    tacet_draw_how how = tacet_draw_default();
    tacet_figure figure = {TACET_FIGURE_MAP, {.map = sample_map(4, 3)}};
    how.format = format("png");
    char path[300], before[600], program[200];
    snprintf(path, sizeof path, "%s/bin", ((scratch *)*state)->path);
    snprintf(program, sizeof program, "%s/bin/gnuplot", ((scratch *)*state)->path);
    snprintf(before, sizeof before,
             "#!/bin/sh\nFONTCONFIG_FILE=%s/fonts.conf exec /usr/bin/gnuplot \"$@\"\n",
             ((scratch *)*state)->path);
    scratch_file(scratch_path(*state, "fonts.conf"),
                 "<?xml version=\"1.0\"?><fontconfig></fontconfig>\n");
    mkdir(path, 0777);
    scratch_file(program, before);
    chmod(program, 0755);
    setenv("PATH", path, 1);
    assert_int_equal(tacet_folder_open(scratch_path(*state, "out"), &folder, NULL), TACET_OK);
    tacet_status s = tacet_draw(folder, "map", &figure, &how, &e);
    setenv("PATH", "/usr/local/bin:/usr/bin:/bin", 1);
    tacet_folder_close(folder);
    assert_int_equal(s, TACET_OUTSIDE_WORLD);
    assert_non_null(strstr(e.text, "font"));
}

static void nothing(tacet_figure figure, const char *word)
{
    tacet_error e = {0};
    FILE *to = tmpfile();
    assert_non_null(to);
    tacet_status s = tacet_figure_script(&figure, format("svg"), to, &e);
    fclose(to);
    assert_int_equal(s, TACET_NOT_FINITE);
    assert_non_null(strstr(e.text, "nothing to draw"));
    if (!strstr(e.text, word)) print_error("said: %s\n", e.text);
    assert_non_null(strstr(e.text, word));
}

static void test_nothing_to_draw(void **state)
{
    (void)state;
    static const double nan3[] = {NAN, NAN, NAN}, up[] = {1, 2, 3}, down[] = {1, 3, 2};
    static const tacet_figure_trace trace = {"t", nan3, true};
    tacet_map_cell blank[3] = {{TACET_MARK_BLANK, NAN, -1, false},
                               {TACET_MARK_BLANK, NAN, -1, false},
                               {TACET_MARK_BLANK, NAN, -1, false}};
    static const char *const row[] = {"1/2"};
    tacet_figure_map map = {.title = "t", .subtitle = "", .row = row, .n_rows = 1, .cell = blank};
    nothing((tacet_figure){TACET_FIGURE_MAP, {.map = &map}}, "no speeds");
    map.speed_rpm = down, map.n_speeds = 3;
    nothing((tacet_figure){TACET_FIGURE_MAP, {.map = &map}}, "do not rise");
    map.speed_rpm = up;
    nothing((tacet_figure){TACET_FIGURE_MAP, {.map = &map}}, "no condition");
    tacet_figure_orders orders = {
        .speed_rpm = up, .n_speeds = 3, .order = up, .n_orders = 1, .level_rms = nan3};
    nothing((tacet_figure){TACET_FIGURE_ORDERS, {.orders = &orders}}, "no level");
    tacet_figure_bars bars = {.order = up, .peak = nan3, .reference_peak = nan3, .n_orders = 3};
    nothing((tacet_figure){TACET_FIGURE_BARS, {.bars = &bars}}, "no order");
    tacet_figure_repeat repeat = {.angle_deg = up,
                                  .n_samples = 3,
                                  .pressure_MPa = &trace,
                                  .n_pressure = 1,
                                  .torque_Nm = &trace,
                                  .n_torque = 1};
    nothing((tacet_figure){TACET_FIGURE_REPEAT, {.repeat = &repeat}}, "no pressure");
    tacet_body_modes free_body = {.settled = true};
    tacet_figure_modes modes = {.modes = &free_body};
    nothing((tacet_figure){TACET_FIGURE_MODES, {.modes = &modes}}, "nothing holds the body");
    free_body.hz[5] = 9, free_body.hz[2] = NAN;
    nothing((tacet_figure){TACET_FIGURE_MODES, {.modes = &modes}}, "not known");
    tacet_figure_sum sum = {1, 2, 0, nan3};
    tacet_figure_point point = {.n_paths = 3, .sum = &sum, .n_sums = 1};
    tacet_figure_paths paths = {.point = &point, .n_points = 1};
    nothing((tacet_figure){TACET_FIGURE_PATHS, {.paths = &paths}}, "nothing arrives");
    paths.n_points = TACET_FIGURE_POINTS_MOST + 1;
    nothing((tacet_figure){TACET_FIGURE_PATHS, {.paths = &paths}}, "too many points");
}

// Nothing to draw leaves no file, and the folder can be used on.
static void test_nothing_leaves_no_file(void **state)
{
    tacet_folder *folder;
    tacet_draw_how how = tacet_draw_default();
    tacet_figure_bars bars = {.n_orders = 0};
    tacet_figure figure = {TACET_FIGURE_BARS, {.bars = &bars}};
    assert_int_equal(tacet_folder_open(((scratch *)*state)->path, &folder, NULL), TACET_OK);
    assert_int_equal(tacet_draw(folder, "bars", &figure, &how, NULL), TACET_NOT_FINITE);
    assert_int_equal(scratch_count(((scratch *)*state)->path), 0);
    // a stem that is no file of ours
    figure = (tacet_figure){TACET_FIGURE_BARS, {.bars = sample_bars()}};
    assert_int_equal(tacet_draw(folder, "x;touch y", &figure, &how, NULL), TACET_BAD_INPUT);
    assert_int_equal(scratch_count(((scratch *)*state)->path), 0);
    tacet_folder_close(folder);
}

#define EACH(t) cmocka_unit_test_setup_teardown(t, scratch_create, scratch_destroy)
int main(void)
{
    static const struct CMUnitTest tests[] = {
        EACH(test_same_bytes_again), EACH(test_hostile_text_is_text),
        EACH(test_png_is_whole),     EACH(test_png_without_fonts_is_said),
        EACH(test_nothing_to_draw),  EACH(test_nothing_leaves_no_file),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
