// No two texts of a drawing meet, and none leaves it: read back from the scripts.
#include "near.h"
#include "samples.h"
#include "show/canvas.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>

#define LABELS_MOST 600
typedef struct {
    char text[400];
    double left, right, top, bottom; // px
} label;

// One line `set label N 'text' at screen X, screen Y left front noenhanced font 'F,S' ..`.
static bool read_label(const char *line, label *out)
{
    unsigned number;
    int used = 0;
    if (sscanf(line, "set label %u '%n", &number, &used) != 1 || used == 0) return false;
    size_t n = 0;
    const char *s = line + used;
    for (; !(s[0] == '\'' && s[1] != '\''); s++) {
        assert_true(*s && *s != '\n');
        if (s[0] == '\'') s++;
        out->text[n++] = *s;
    }
    out->text[n] = 0;
    char anchor[16], font[64];
    double x, y, size;
    assert_int_equal(sscanf(s,
                            "' at screen %lf, screen %lf %15s front noenhanced font '%63[^,],%lf'",
                            &x, &y, anchor, font, &size) == 5 ||
                         sscanf(s, "' at screen %lf, screen %lf %15s front noenhanced font ',%lf'",
                                &x, &y, anchor, &size) == 4,
                     1);
    bool bold = strstr(s, "Bold") != NULL;
    double width = canvas_text_width(out->text, size, bold);
    out->left = x * CANVAS_WIDTH - (strcmp(anchor, "left") == 0     ? 0
                                    : strcmp(anchor, "center") == 0 ? width / 2
                                                                    : width);
    out->right = out->left + width;
    // from the top of a capital to the foot of a comma
    out->top = (1 - y) * CANVAS_HEIGHT - 0.42 * size;
    out->bottom = (1 - y) * CANVAS_HEIGHT + 0.42 * size;
    return true;
}

static size_t read_labels(const tacet_figure *figure, label *labels)
{
    char *script = NULL;
    size_t bytes, n = 0;
    FILE *to = open_memstream(&script, &bytes);
    assert_int_equal(tacet_figure_script(figure, tacet_drawing_formats(), to, NULL), TACET_OK);
    fclose(to);
    for (char *line = strtok(script, "\n"); line; line = strtok(NULL, "\n")) {
        assert_true(n < LABELS_MOST);
        n += read_label(line, &labels[n]);
    }
    free(script);
    return n;
}

static void check(const tacet_figure *figure, size_t at_least)
{
    static label labels[LABELS_MOST];
    size_t n = read_labels(figure, labels), bad = 0;
    assert_true(n >= at_least);
    for (size_t i = 0; i < n; i++) {
        const label *a = &labels[i];
        if (a->left < 0 || a->right > CANVAS_WIDTH || a->top < 0 || a->bottom > CANVAS_HEIGHT) {
            print_error("outside: '%s' %.0f..%.0f, %.0f..%.0f\n", a->text, a->left, a->right,
                        a->top, a->bottom);
            bad++;
        }
        for (size_t k = 0; k < i; k++) {
            const label *b = &labels[k];
            if (a->left >= b->right || b->left >= a->right || a->top >= b->bottom ||
                b->top >= a->bottom)
                continue;
            print_error("'%s' and '%s' meet\n", a->text, b->text);
            bad++;
        }
    }
    assert_int_equal(bad, 0);
}

static void test_map(void **state)
{
    (void)state;
    static const size_t speeds[] = {1, 2, 7, 41, 101, 240}, rows[] = {1, 2, 20, 33, 64};
    for (size_t i = 0; i < sizeof speeds / sizeof *speeds; i++)
        for (size_t k = 0; k < sizeof rows / sizeof *rows; k++)
            check(&(tacet_figure){TACET_FIGURE_MAP, {.map = sample_map(speeds[i], rows[k])}}, 15);
}

// Letters and dots have room in their own cells, not on the average: a grid with two speeds 1 rpm
// apart has no letters there.
static void test_map_with_uneven_speeds(void **state)
{
    (void)state;
    tacet_figure_map f = *sample_map(5, 4);
    static const double rpm[] = {900, 901, 902, 1500, 2000};
    char *script = NULL;
    size_t bytes;
    f.speed_rpm = rpm;
    tacet_figure figure = {TACET_FIGURE_MAP, {.map = &f}};
    check(&figure, 15);
    FILE *to = open_memstream(&script, &bytes);
    assert_int_equal(tacet_figure_script(&figure, tacet_drawing_formats(), to, NULL), TACET_OK);
    fclose(to);
    assert_non_null(strstr(script, "$over << END_OF_DATA"));
    assert_null(strstr(script, "\n901 0.5 A\n"));
    const char *dots = strstr(script, "$clear << END_OF_DATA\n");
    assert_non_null(dots); // one row, that outside of the plot
    assert_int_equal(strncmp(strchr(strchr(dots, '\n') + 1, '\n'), "\nEND_OF_DATA", 12), 0);
    free(script);
}

static void test_map_with_many_limits(void **state)
{
    (void)state;
    tacet_figure_map f = *sample_map(41, 20);
    static char name[40][40];
    static const char *names[40];
    static tacet_map_cell cell[41 * 20];
    for (int i = 0; i < 40; i++) {
        snprintf(name[i], sizeof name[i], "band %d with a name of some length", i);
        names[i] = name[i];
    }
    for (size_t i = 0; i < 41 * 20; i++) {
        cell[i] = f.cell[i];
        cell[i].limiting = (int)(i % 40);
        cell[i].mark = TACET_MARK_OVER;
    }
    f.limiting = names, f.n_limiting = 40, f.cell = cell;
    check(&(tacet_figure){TACET_FIGURE_MAP, {.map = &f}}, 30);
}

static void test_orders(void **state)
{
    (void)state;
    tacet_figure_orders f = *sample_orders();
    check(&(tacet_figure){TACET_FIGURE_ORDERS, {.orders = &f}}, 30);
    f.n_bands = 0;
    check(&(tacet_figure){TACET_FIGURE_ORDERS, {.orders = &f}}, 20);
    // more names than there is room for
    static tacet_figure_mode modes[40];
    for (int i = 0; i < 40; i++)
        modes[i] = (tacet_figure_mode){"a node with a name", 1.0 + 0.3 * i};
    f.mode = modes, f.n_modes = 40;
    check(&(tacet_figure){TACET_FIGURE_ORDERS, {.orders = &f}}, 30);
    f.n_speeds = 1;
    check(&(tacet_figure){TACET_FIGURE_ORDERS, {.orders = &f}}, 15);
}

static void test_bars(void **state)
{
    (void)state;
    tacet_figure_bars f = *sample_bars();
    for (f.n_orders = 1; f.n_orders <= 20; f.n_orders++)
        check(&(tacet_figure){TACET_FIGURE_BARS, {.bars = &f}}, 8);
    f.n_orders = 20;
    f.name = "a word of a book with a very long name that says what it is good for";
    f.quantity = "node-acceleration:coupling-out-of-the-second-gearbox-behind-the-first";
    f.unit = "rad/s2";
    check(&(tacet_figure){TACET_FIGURE_BARS, {.bars = &f}}, 8);
}

static void test_repeat(void **state)
{
    (void)state;
    tacet_figure_repeat f = *sample_repeat();
    check(&(tacet_figure){TACET_FIGURE_REPEAT, {.repeat = &f}}, 10);
}

static void test_modes(void **state)
{
    (void)state;
    tacet_figure_modes f = *sample_modes();
    check(&(tacet_figure){TACET_FIGURE_MODES, {.modes = &f}}, 35);
    static tacet_figure_band bands[TACET_BANDS_MOST];
    for (int i = 0; i < TACET_BANDS_MOST; i++)
        bands[i] = (tacet_figure_band){"a band with a name of more than one word", 4.0 + i,
                                       11.0 + 7 * i, true};
    f.band = bands, f.n_bands = TACET_BANDS_MOST;
    check(&(tacet_figure){TACET_FIGURE_MODES, {.modes = &f}}, 45);
    f.n_bands = 0;
    check(&(tacet_figure){TACET_FIGURE_MODES, {.modes = &f}}, 30);
}

static void test_paths(void **state)
{
    (void)state;
    for (size_t points = 1; points <= TACET_FIGURE_POINTS_MOST; points++)
        for (size_t paths = 1; paths <= 8; paths++)
            check(&(tacet_figure){TACET_FIGURE_PATHS, {.paths = sample_paths(points, paths)}},
                  7 + points * (2 + 2 * paths));
}

static void test_spread_moves_as_little_as_needed(void **state)
{
    (void)state;
    double apart[] = {100, 10, 50};
    assert_true(canvas_spread(3, apart, 20, 0, 200));
    assert_near(apart[0], 100, 1e-12, 0);
    assert_near(apart[1], 10, 1e-12, 0);
    // two that coincide part evenly
    double same[] = {50, 50};
    assert_true(canvas_spread(2, same, 20, 0, 200));
    assert_near(fabs(same[0] - same[1]), 20, 1e-12, 0);
    assert_near((same[0] + same[1]) / 2, 50, 1e-12, 0);
    // the ends hold
    double edge[] = {199, 198, 0, 1};
    assert_true(canvas_spread(4, edge, 20, 0, 200));
    for (int i = 0; i < 4; i++) {
        assert_true(edge[i] >= -1e-12 && edge[i] <= 200 + 1e-12);
        for (int k = 0; k < i; k++)
            assert_true(fabs(edge[i] - edge[k]) >= 20 - 1e-9);
    }
    double many[] = {1, 2, 3};
    assert_false(canvas_spread(3, many, 20, 0, 30));
    assert_near(many[1], 2, 0, 0);
}

static void test_thin_keeps_the_heaviest(void **state)
{
    (void)state;
    const double at[] = {0, 5, 10, 30}, half[] = {4, 4, 4, 4}, weight[] = {1, 3, 2, 0};
    bool keep[4];
    assert_int_equal(canvas_thin(4, at, half, weight, keep), 2);
    assert_true(!keep[0] && keep[1] && !keep[2] && keep[3]);
}

// DejaVu Sans, units per em 2048: "H" is 1540, "i" 569, "0" 1303 wide.
static void test_text_width(void **state)
{
    (void)state;
    assert_near(canvas_text_width("Hi0", 2048, false), 1540 + 569 + 1303, 6, 0);
    assert_true(canvas_text_width("Hi0", 16, true) > canvas_text_width("Hi0", 16, false));
}

int main(void)
{
    static const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_map),
        cmocka_unit_test(test_map_with_uneven_speeds),
        cmocka_unit_test(test_map_with_many_limits),
        cmocka_unit_test(test_orders),
        cmocka_unit_test(test_bars),
        cmocka_unit_test(test_repeat),
        cmocka_unit_test(test_modes),
        cmocka_unit_test(test_paths),
        cmocka_unit_test(test_spread_moves_as_little_as_needed),
        cmocka_unit_test(test_thin_keeps_the_heaviest),
        cmocka_unit_test(test_text_width),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
