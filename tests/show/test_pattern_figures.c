// Figures of one pattern on the stand-in of standin_pattern.c: 3/7 on a six, 14 revolutions.
#include "near.h"
#include "standin_pattern.h"
#include <math.h>
#include <string.h>

#define PI  3.14159265358979323846
#define RPM (PI / 30)

static const tacet_quantity torque = {
    .name = "link-torque", .unit = "N m", .target = TACET_TARGET_LINK};
static const tacet_quantity roll_torque = {.name = "roll-torque", .unit = "N m"};
static double speeds[] = {900 * RPM, 1000 * RPM, 1100 * RPM};
static struct tacet_model model;
static struct tacet_workspace work;
static tacet_figure_source source;

static tacet_roll *roll_of(const char *word)
{
    tacet_pattern p;
    tacet_roll *r = NULL;
    assert_int_equal(tacet_pattern_parse(word, &p, NULL), TACET_OK);
    assert_int_equal(tacet_roll_create(&p, 6, 4, &r, NULL), TACET_OK);
    return r;
}

static void set_pattern(const char *word, const char *name)
{
    source.roll = roll_of(word);
    source.name = name;
}

static int begin(void **state)
{
    (void)state;
    model = (struct tacet_model){
        .study = {.title = "A stand-in", .screen = {.speeds_rad_per_s = speeds, .n_speeds = 3}},
        .band =
            {{.name = "low",
              .kind = TACET_BAND_MOUNT,
              .counted_low_hz = 3,
              .counted_high_hz = 10,
              .of = {&torque, 0}},
             {.name = "other", .counted_low_hz = 1, .counted_high_hz = 2, .of = {&roll_torque, 0}}},
        .all_fire = roll_of("x"),
        .all_fire_reachable = true};
    work = (struct tacet_workspace){.model = &model, .arena = tacet_arena_create()};
    source = (tacet_figure_source){
        .model = &model, .work = &work, .arena = tacet_arena_create(), .of = {&torque, 0}};
    set_pattern("..x.x.x", "3/7");
    return 0;
}

static int end(void **state)
{
    (void)state;
    tacet_roll_destroy(model.all_fire);
    tacet_roll *own = NULL;
    memcpy(&own, &source.roll, sizeof own);
    tacet_roll_destroy(own);
    tacet_arena_destroy(work.arena);
    tacet_arena_destroy(source.arena);
    return 0;
}

// Order 3 of all-fire is line 6 of its 2 revolutions and line 42 of the pattern's 14.
static void test_bars(void **state)
{
    (void)state;
    tacet_figure_bars f;
    tacet_error e = {0};
    assert_int_equal(tacet_bars_of_condition(&source, 1000 * RPM, 300, &f, &e), TACET_OK);
    assert_int_equal(f.n_lines, 42);
    assert_int_equal(f.n_orders, 20);
    for (size_t i = 0; i < 19; i++) { // the largest of the pattern: lines 1 to 19
        assert_near(f.order[i], (double)(i + 1) / 14, 0, 1e-15);
        assert_near(f.peak[i], 1.0 / (double)(i + 1), 0, 1e-15);
        assert_near(f.reference_peak[i], 0, 0, 0);
    }
    assert_near(f.order[19], 3, 0, 1e-15);
    assert_near(f.peak[19], 1.0 / 42, 0, 1e-15);
    assert_near(f.reference_peak[19], 2, 0, 1e-15);
    assert_near(f.speed_rpm, 1000, 1e-9, 0);
    assert_string_equal(f.quantity, "link-torque:coupling");
    assert_string_equal(f.name, "3/7 ..x.x.x");
    assert_string_equal(f.reference_name, "all cylinders firing");
    assert_string_equal(f.subtitle, "3/7 ..x.x.x at 1000 rpm and 300 N m brake torque");
    assert_int_equal(f.n_bands, 2);
    assert_true(f.band[0].judged && !f.band[1].judged);
}

static void test_bars_without_reference(void **state)
{
    (void)state;
    tacet_figure_bars f;
    tacet_error e = {0};
    model.all_fire_reachable = false;
    assert_int_equal(tacet_bars_of_condition(&source, 1000 * RPM, 300, &f, &e), TACET_OK);
    assert_int_equal(f.n_orders, 20);
    for (size_t i = 0; i < 20; i++)
        assert_true(isnan(f.reference_peak[i]));
    assert_near(f.order[19], 20.0 / 14, 0, 1e-15);
    assert_non_null(strstr(f.reference_name, "not reachable"));
}

static void test_out_of_reach_is_said(void **state)
{
    (void)state;
    tacet_figure_bars bars;
    tacet_figure_repeat repeat;
    tacet_error e = {0};
    assert_int_equal(tacet_bars_of_condition(&source, 900 * RPM, 300, &bars, &e), TACET_BAD_INPUT);
    assert_string_equal(e.text, "nothing to draw: 300 N m at 900 rpm is unreachable");
    assert_int_equal(tacet_repeat_of_condition(&source, 900 * RPM, 300, &repeat, &e),
                     TACET_BAD_INPUT);
}

// The drawing ends at 1.12 x 10 Hz; line 9 is at 10.71 Hz at 1000 rpm, line 10 at 11.90 Hz. 900 rpm
// cannot be reached, so that line 10 (10.71 Hz there) does not come in by it.
static void test_orders(void **state)
{
    (void)state;
    tacet_figure_orders f;
    tacet_error e = {0};
    assert_int_equal(tacet_orders_of_pattern(&source, &f, &e), TACET_OK);
    assert_int_equal(f.n_speeds, 3);
    assert_int_equal(f.n_orders, 9);
    for (size_t o = 0; o < 9; o++) {
        assert_near(f.order[o], (double)(o + 1) / 14, 0, 1e-15);
        assert_true(isnan(f.level_rms[o * 3]));
        for (size_t i = 1; i < 3; i++)
            assert_near(f.level_rms[o * 3 + i], sqrt(0.5) / (double)(o + 1), 0, 1e-14);
    }
    // elastic modes, named by the link with most strain energy
    assert_int_equal(f.n_modes, 2);
    assert_string_equal(f.mode[0].name, "coupling");
    assert_near(f.mode[0].hz, 21.5, 0, 0);
    assert_string_equal(f.mode[1].name, "shaft");
}

static void test_repeat(void **state)
{
    (void)state;
    tacet_figure_repeat f;
    tacet_error e = {0};
    assert_int_equal(tacet_repeat_of_condition(&source, 1000 * RPM, 300, &f, &e), TACET_OK);
    assert_near(f.angle_deg[0], 0, 0, 0);
    assert_near(f.angle_deg[f.n_samples - 1], 14 * 360, 1e-9, 0);
    // 42 opportunities, 120 degrees apart, the word over and over
    assert_int_equal(f.n_events, 42);
    for (size_t i = 0; i < 42; i++) {
        assert_near(f.event[i].angle_deg, 120.0 * (double)i, 1e-9, 0);
        assert_int_equal(f.event[i].tenths, "..x.x.x"[i % 7] == 'x' ? 10 : 0);
    }
    assert_int_equal(f.n_pressure, 6);
    for (size_t k = 0; k < 6; k++)
        assert_near(f.pressure_MPa[k].value[7], (double)k + 1, 0, 1e-15);
    assert_string_equal(f.pressure_MPa[1].name, "cylinder 5");
    assert_true(f.pressure_MPa[0].strong && !f.pressure_MPa[1].strong);
    // at angle 0 all cosines are 1: 50 + sum of 1/h; two throws make twice that
    double sum = 50;
    for (size_t h = 1; h <= 42; h++)
        sum += 1.0 / (double)h;
    assert_near(f.torque_Nm[0].value[0], 2 * sum, 0, 1e-12);
    assert_near(f.torque_Nm[1].value[0], sum, 0, 1e-12);
    assert_true(f.torque_Nm[1].strong);
    assert_string_equal(f.torque_Nm[1].name, "link-torque:coupling");
}

// x.x. is x.: slots 0, 2 and 4 always fire, the others never; one of each is drawn heavy.
static void test_repeat_of_fixed_cylinders(void **state)
{
    (void)state;
    tacet_figure_repeat f;
    tacet_error e = {0};
    tacet_roll *own = NULL;
    memcpy(&own, &source.roll, sizeof own);
    tacet_roll_destroy(own);
    set_pattern("x.", "x.");
    assert_int_equal(tacet_repeat_of_condition(&source, 1000 * RPM, 300, &f, &e), TACET_OK);
    assert_int_equal(f.n_events, 6);
    for (size_t k = 0; k < 6; k++)
        assert_int_equal(f.pressure_MPa[k].strong, k < 2);
    assert_string_equal(f.subtitle, "x. at 1000 rpm and 300 N m brake torque");
}

// Of two bands the one of kind mount lies under the modes.
static void test_modes_of_body(void **state)
{
    (void)state;
    tacet_figure_modes f;
    tacet_error e = {0};
    model.band[1].kind = TACET_BAND_DRIVELINE;
    assert_int_equal(tacet_modes_of_body(&model, source.arena, &f, &e), TACET_OK);
    assert_near(f.modes->hz[3], 8, 0, 0);
    assert_near(f.modes->share[3][5], 0.2, 0, 0);
    assert_int_equal(f.n_bands, 1);
    assert_string_equal(f.band[0].name, "low");
    assert_near(f.band[0].high_hz, 10, 0, 0);
    model.no_body = true;
    assert_int_equal(tacet_modes_of_body(&model, source.arena, &f, &e), TACET_BAD_INPUT);
}

// As the order drawing, with the body's modes (a second direction is named from 15 % on). It ends
// at 1.12 x 20 Hz; line 18 is at 21.43 Hz at 1000 rpm, line 19 at 22.62 Hz.
static void test_forces(void **state)
{
    (void)state;
    static const char *const name[] = {"x", "y", "z", "roll with yaw", "pitch with z", "yaw"};
    tacet_figure_orders f;
    tacet_error e = {0};
    model.band[1].kind = TACET_BAND_DRIVELINE;
    model.band[0].counted_high_hz = 20;
    assert_int_equal(tacet_forces_of_pattern(&source, &f, &e), TACET_OK);
    assert_near(f.highest_hz, 22.4, 0, 1e-12);
    assert_int_equal(f.n_orders, 18);
    assert_near(f.level_rms[2 * 3 + 1], sqrt(0.5) / 3, 0, 1e-14);
    assert_int_equal(f.n_modes, 6);
    for (size_t i = 0; i < 6; i++) {
        assert_string_equal(f.mode[i].name, name[i]);
        assert_near(f.mode[i].hz, 5.0 + (double)i, 0, 0);
    }
    assert_int_equal(f.n_bands, 1);
    // no band that mounts reach: up to 1.3 times the last mode, line 10 is at 11.90 Hz at 1000 rpm
    model.band[0].kind = TACET_BAND_DRIVELINE;
    source.of = (tacet_quantity_ref){&roll_torque, 1};
    assert_int_equal(tacet_forces_of_pattern(&source, &f, &e), TACET_OK);
    assert_int_equal(f.n_bands, 0);
    assert_near(f.highest_hz, 13, 0, 1e-12);
    assert_int_equal(f.n_orders, 10);
    model.no_body = true;
    assert_int_equal(tacet_forces_of_pattern(&source, &f, &e), TACET_BAD_INPUT);
}

// The only line, order 3, is at 50 Hz at the lowest speed in reach: the axis goes past it.
static void test_forces_reach_the_largest_line(void **state)
{
    (void)state;
    tacet_figure_orders f;
    tacet_error e = {0};
    tacet_roll *own = NULL;
    memcpy(&own, &source.roll, sizeof own);
    tacet_roll_destroy(own);
    set_pattern("x", "1");
    assert_int_equal(tacet_forces_of_pattern(&source, &f, &e), TACET_OK);
    assert_near(f.highest_hz, 56, 0, 1e-12);
    assert_int_equal(f.n_orders, 1);
    assert_near(f.order[0], 3, 0, 1e-15);
    assert_int_equal(tacet_orders_of_pattern(&source, &f, &e), TACET_OK);
    assert_near(f.highest_hz, 11.2, 0, 1e-12);
    assert_int_equal(f.n_orders, 0);
}

// At 1000 rpm lines 3 to 8 (3.57 to 9.52 Hz) lie in the band of 3 to 10 Hz; each is 1 / h. The part
// of 1.5 + 0.4 i along the sum is 1.5.
static void test_paths(void **state)
{
    (void)state;
    tacet_figure_paths f;
    tacet_error e = {0};
    tacet_point_condition at = {.point = 1,
                                .band = 0,
                                .roll = source.roll,
                                .speed_rad_per_s = 1000 * RPM,
                                .demand_Nm = 300};
    model.phase_rad = 0.7;
    assert_int_equal(tacet_paths_of_points(&source, &at, 1, &f, &e), TACET_OK);
    assert_int_equal(f.n_points, 1);
    const tacet_figure_point *p = &f.point[0];
    assert_string_equal(p->name, "ear");
    assert_string_equal(p->all, "all of low");
    assert_int_equal(p->n_paths, 2);
    assert_string_equal(p->path[0], "left z");
    assert_string_equal(p->path[1], "right y");
    double odd = 1.0 / 9 + 1.0 / 25 + 1.0 / 49, even = 1.0 / 16 + 1.0 / 36 + 1.0 / 64;
    assert_true(isnan(p->sum[0].order));
    assert_near(p->sum[0].level_rms, sqrt((odd + even) / 2), 0, 1e-14);
    assert_near(p->sum[0].share[0], (1.5 * odd + 0.25 * even) / (odd + even), 0, 1e-14);
    assert_near(p->sum[0].share[1], (-0.5 * odd + 0.75 * even) / (odd + even), 0, 1e-14);
    assert_int_equal(p->n_sums, 5); // the four largest: lines 3 to 6
    for (size_t k = 1; k < 5; k++) {
        size_t h = k + 2;
        assert_near(p->sum[k].order, (double)h / 14, 0, 1e-15);
        assert_near(p->sum[k].hz, (double)h / 14 * 1000 / 60, 0, 1e-14);
        assert_near(p->sum[k].level_rms, sqrt(0.5) / (double)h, 0, 1e-14);
        assert_near(p->sum[k].share[0], h % 2 ? 1.5 : 0.25, 0, 1e-14);
        assert_near(p->sum[k].share[1], h % 2 ? -0.5 : 0.75, 0, 1e-14);
    }
}

// Without a band all 42 lines count. Of the knee's nine paths seven are shown: 0 and 1/36 are
// "others".
static void test_paths_without_band(void **state)
{
    (void)state;
    tacet_figure_paths f;
    tacet_error e = {0};
    tacet_point_condition at[TACET_FIGURE_POINTS_MOST + 1];
    for (size_t i = 0; i <= TACET_FIGURE_POINTS_MOST; i++)
        at[i] = (tacet_point_condition){.point = i ? 0 : 2,
                                        .band = SIZE_MAX,
                                        .roll = source.roll,
                                        .speed_rad_per_s = 1000 * RPM,
                                        .demand_Nm = 300};
    assert_int_equal(tacet_paths_of_points(&source, at, TACET_FIGURE_POINTS_MOST + 1, &f, &e),
                     TACET_OK);
    assert_int_equal(f.n_points, TACET_FIGURE_POINTS_MOST);
    assert_non_null(strstr(f.subtitle, "(6 of 7 points"));
    const tacet_figure_point *p = &f.point[0];
    assert_string_equal(p->all, "all orders");
    assert_string_equal(p->at, "at 1000 rpm and 300 N m");
    assert_int_equal(p->n_paths, 8);
    assert_string_equal(p->path[0], "left z"); // the third to the knee
    assert_string_equal(p->path[7], "2 other paths");
    for (size_t k = 0; k < p->n_sums; k++) {
        for (size_t i = 0; i < 7; i++)
            assert_near(p->sum[k].share[i], (double)(i + 2) / 36, 0, 1e-14);
        assert_near(p->sum[k].share[7], 1.0 / 36, 0, 1e-14);
    }
    assert_int_equal(f.point[1].n_paths, 0);
    // nothing to draw where the condition cannot be reached
    at[0].speed_rad_per_s = 900 * RPM;
    assert_int_equal(tacet_paths_of_points(&source, at, 1, &f, &e), TACET_BAD_INPUT);
}

#define EACH(t) cmocka_unit_test_setup_teardown(t, begin, end)
int main(void)
{
    static const struct CMUnitTest tests[] = {
        EACH(test_bars),
        EACH(test_bars_without_reference),
        EACH(test_out_of_reach_is_said),
        EACH(test_orders),
        EACH(test_repeat),
        EACH(test_repeat_of_fixed_cylinders),
        EACH(test_modes_of_body),
        EACH(test_forces),
        EACH(test_forces_reach_the_largest_line),
        EACH(test_paths),
        EACH(test_paths_without_band),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
