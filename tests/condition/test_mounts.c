// What reaches mounts and people from one condition, and one cylinder dead. Expected values come
// from the body's own equations solved again, from statics, from symmetry and from the laws of
// shaking forces.
#include "demo.h"
#include <complex.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

static demo six, eight;

static int open_demos(void **state)
{
    (void)state;
    demo_open(&six, "forwarder.yaml");
    demo_open(&eight, "brush-truck.yaml");
    return 0;
}

static int close_demos(void **state)
{
    (void)state;
    demo_close(&six);
    demo_close(&eight);
    return 0;
}

static tacet_row solve(demo *d, const char *word, double rpm)
{
    tacet_roll *roll = demo_roll(d, word);
    tacet_condition c = demo_condition(d, roll, rpm);
    tacet_row row;
    assert_int_equal(tacet_solve(d->model, &c, TACET_LEVEL_RIPPLE, d->work, &row), TACET_OK);
    assert_int_equal(row.outcome, TACET_SOLVED);
    tacet_roll_destroy(roll);
    return row;
}

typedef struct {
    double mean;
    size_t n;
    unsigned revolutions;
    double complex line[1200];
} signal;

static void keep(const tacet_spectrum *s, signal *out)
{
    assert_true(s->n_lines < 1200);
    *out = (signal){.mean = s->mean, .n = s->n_lines, .revolutions = s->revolutions};
    memcpy(out->line, s->line, (s->n_lines + 1) * sizeof *s->line);
}

static void quantity(demo *d, const char *name, size_t target, signal *out)
{
    const tacet_spectrum *s;
    tacet_quantity_ref q = {tacet_quantity_find(name), target};
    assert_int_equal(tacet_workspace_quantity(d->work, q, &s, NULL), TACET_OK);
    keep(s, out);
}

static double largest(const signal *s)
{
    double most = 0;
    for (size_t h = 1; h <= s->n; h++)
        most = fmax(most, cabs(s->line[h]));
    return most;
}

// Inputs add with phase: what arrives at a point is the sum of its paths, and their shares of any
// line come to one.
static void check_paths(demo *d, size_t point)
{
    static signal sum, whole, one;
    const tacet_body_def *def = tacet_body_def_of(tacet_model_body(d->model));
    quantity(d, "cab", point, &whole);
    memset(&sum, 0, sizeof sum);
    double shares = 0;
    size_t leading = 1;
    for (size_t h = 2; h <= whole.n; h++)
        if (cabs(whole.line[h]) > cabs(whole.line[leading])) leading = h;
    for (size_t i = 0; i < def->n_paths; i++) {
        const tacet_spectrum *s;
        if (strcmp(def->paths[i].to, def->points[point].name) != 0) continue;
        assert_int_equal(tacet_workspace_path(d->work, i, &s), TACET_OK);
        keep(s, &one);
        for (size_t h = 1; h <= one.n; h++)
            sum.line[h] += one.line[h];
        shares += tacet_share(one.line[leading], whole.line[leading]);
    }
    assert_true(largest(&whole) > 0);
    for (size_t h = 1; h <= whole.n; h++)
        assert_near(cabs(sum.line[h] - whole.line[h]), 0, 1e-12 * largest(&whole), 0);
    assert_near(shares, 1, 1e-12, 0);
}

static void test_paths_add_to_what_arrives(void **state)
{
    (void)state;
    solve(&six, "..x.x.x", 1200);
    check_paths(&six, 0);
    check_paths(&six, 1);
    solve(&eight, "x.", 1800);
    check_paths(&eight, 0);
    check_paths(&eight, 1);
}

// A part at 60 degrees to the sum counts for half of its size, one at right angles for nothing.
static void test_share_is_the_projection(void **state)
{
    (void)state;
    double complex sum = 4 * cexp(0.7 * I);
    assert_near(tacet_share(2 * cexp((0.7 + M_PI / 3) * I), sum), 0.25, 1e-14, 0);
    assert_near(tacet_share(cexp((0.7 + M_PI / 2) * I), sum), 0, 1e-14, 0);
    assert_near(tacet_share(-sum, sum), -1, 1e-14, 0);
    assert_true(isnan(tacet_share(1, 0)));
}

// (K* - w^2 M) q = roll torque about x + shaking load, line by line; then k (1 + i loss) times the
// displacement of the mount along its axis.
static void check_forces(demo *d)
{
    static signal roll, load[6], force;
    const tacet_body *b = tacet_model_body(d->model);
    double speed = tacet_workspace_response(d->work)->speed_rad_per_s;
    quantity(d, "roll-torque", 0, &roll);
    for (size_t i = 0; i < 6; i++)
        quantity(d, "shaking", i, &load[i]);
    for (size_t target = 0; target < 3 * tacet_body_mounts(b); target++) {
        quantity(d, "mount-force", target, &force);
        double tolerance = 1e-9 * (largest(&force) + 1e-3);
        for (size_t h = 1; h <= force.n; h++) {
            double w = speed / roll.revolutions * (double)h;
            tacet_six_complex all, q;
            for (size_t i = 0; i < 6; i++)
                all[i] = load[i].line[h] + (i == 3 ? roll.line[h] : 0); // clockwise: about +x
            assert_int_equal(tacet_body_solve(b, w, all, q), TACET_OK);
            double complex f = tacet_body_mount_force(b, target / 3, (int)(target % 3), w, q);
            assert_near(cabs(force.line[h] - f), 0, tolerance, 0);
        }
    }
}

static void test_mount_forces_are_the_body_driven_by_both_loads(void **state)
{
    (void)state;
    solve(&six, "x.", 1100);
    check_forces(&six);
    solve(&eight, "x..x.", 1500);
    check_forces(&eight);
}

// Statics: on the frame the mounts pass on the mean roll torque and no force.
static void check_statics(demo *d)
{
    static signal roll, force;
    const tacet_body *b = tacet_model_body(d->model);
    double sum[3] = {0}, about_x = 0;
    quantity(d, "roll-torque", 0, &roll);
    for (size_t m = 0; m < tacet_body_mounts(b); m++) {
        const double *at = tacet_body_def_of(b)->mounts[m].at_m;
        for (size_t axis = 0; axis < 3; axis++) { // the demos' mounts are parallel to the body
            quantity(d, "mount-force", 3 * m + axis, &force);
            sum[axis] += force.mean;
            about_x += axis == 2 ? at[1] * force.mean : axis == 1 ? -at[2] * force.mean : 0;
        }
    }
    for (size_t axis = 0; axis < 3; axis++)
        assert_near(sum[axis], 0, 1e-9 * fabs(roll.mean), 0);
    assert_near(about_x, roll.mean, 1e-9 * fabs(roll.mean), 0);
}

static void test_mounts_carry_the_mean_torque(void **state)
{
    (void)state;
    solve(&six, "x.", 1100); // engine and pumps on one body: hardly any torque leaves
    check_statics(&six);
    tacet_row row = solve(&eight, "x.", 1500);
    check_statics(&eight);
    static signal roll;
    quantity(&eight, "roll-torque", 0, &roll);
    assert_near(roll.mean, -row.demand_Nm, 0,
                0.02); // the propshaft's leaves; dampers take the rest
}

// F = (speed^2) x (geometry and masses): no pattern in it, four times as much at twice the speed.
static void test_shaking_knows_speed_alone(void **state)
{
    (void)state;
    static signal even, odd, twice;
    double most = 0;
    for (size_t member = 0; member < 6; member++) {
        solve(&eight, "x", 1250);
        quantity(&eight, "shaking", member, &even);
        solve(&eight, "x..x.", 1250);
        quantity(&eight, "shaking", member, &odd);
        solve(&eight, "x..x.", 2500);
        quantity(&eight, "shaking", member, &twice);
        assert_int_equal(odd.revolutions, twice.revolutions);
        size_t times = odd.revolutions / even.revolutions;
        assert_true(times > 1);
        for (size_t h = 1; h <= even.n; h++) {
            assert_near(cabs(odd.line[times * h] - even.line[h]), 0, 0, 0);
            assert_near(cabs(twice.line[times * h] - 4 * even.line[h]), 0,
                        1e-12 * cabs(even.line[h]) + 1e-30, 0);
            most = fmax(most, cabs(even.line[h]));
        }
        for (size_t h = 1; h <= odd.n; h++)
            if (h % times) assert_near(cabs(odd.line[h]), 0, 0, 0);
    }
    assert_true(most > 1); // N or N m: there is something to compare
}

// ---- one cylinder dead --------------------------------------------------------------------------

static tacet_one_dead one_dead(demo *d, double rpm, double demand_Nm)
{
    tacet_condition c = demo_condition(d, NULL, rpm);
    tacet_one_dead out;
    if (isfinite(demand_Nm)) c.demand_Nm = demand_Nm;
    assert_int_equal(tacet_solve_one_dead(d->model, &c, TACET_LEVEL_RIPPLE, d->work, &out),
                     TACET_OK);
    assert_null(tacet_workspace_response(d->work));
    return out;
}

// The same as a word that leaves out one position of the firing order, at its worst rotation.
static void test_one_dead_is_the_worst_word_with_one_gap(void **state)
{
    (void)state;
    static const char *const words[] = {".xxxxx", "x.xxxx", "xx.xxx", "xxx.xx", "xxxx.x", "xxxxx."};
    tacet_one_dead dead = one_dead(&six, 1300, NAN);
    tacet_row row[6];
    assert_int_equal(dead.n_cylinders, 6);
    assert_int_equal(dead.n_solved, 6);
    for (size_t i = 0; i < 6; i++)
        row[i] = solve(&six, words[i], 1300);
    for (size_t b = 0; b < row[0].n_bands; b++) {
        double worst = 0;
        for (size_t i = 0; i < 6; i++)
            worst = fmax(worst, row[i].bands[b].level.dispersed);
        assert_near(dead.level[b], worst, 0, 1e-12);
        assert_near(row[dead.slot[b]].bands[b].level.dispersed, worst, 0, 1e-12);
    }
    // a missing pulse a cycle is order 1/2: 10.8 Hz at 1300 rpm, in the band of powertrain roll
    // (11 to 18 Hz, 5 % guard), where all-fire has spread alone
    tacet_row all = solve(&six, "x", 1300);
    assert_true(dead.level[1] > 10 * all.bands[1].level.dispersed);
}

// What may skip is no matter of what may fail.
static void test_one_dead_needs_no_leave_to_skip(void **state)
{
    (void)state;
    demo few;
    char *text = demo_text("forwarder.yaml");
    demo_replace(text, "skip: {trapped: residual}", "skip: {trapped: residual, cylinders: [1]}");
    demo_open_text(&few, text);
    tacet_one_dead a = one_dead(&six, 1500, NAN), b = one_dead(&few, 1500, NAN);
    assert_int_equal(b.n_solved, 6);
    for (size_t i = 0; i < tacet_model_bands(six.model); i++)
        assert_near(a.level[i], b.level[i], 0, 1e-12);
    // the same gap as a pattern is still refused there
    tacet_roll *roll = demo_roll(&few, "xxxxx.");
    tacet_condition c = demo_condition(&few, roll, 1500);
    tacet_row row;
    assert_int_equal(tacet_solve(few.model, &c, TACET_LEVEL_RIPPLE, few.work, &row), TACET_OK);
    assert_int_equal(row.duty.reach, TACET_REACH_CYLINDER);
    tacet_roll_destroy(roll);
    demo_close(&few);
    free(text);
}

static void test_one_dead_out_of_reach(void **state)
{
    (void)state;
    tacet_one_dead dead = one_dead(&six, 1300, 5000);
    assert_int_equal(dead.n_solved, 0);
    assert_true(isnan(dead.level[0]));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_paths_add_to_what_arrives),
        cmocka_unit_test(test_share_is_the_projection),
        cmocka_unit_test(test_mount_forces_are_the_body_driven_by_both_loads),
        cmocka_unit_test(test_mounts_carry_the_mean_torque),
        cmocka_unit_test(test_shaking_knows_speed_alone),
        cmocka_unit_test(test_one_dead_is_the_worst_word_with_one_gap),
        cmocka_unit_test(test_one_dead_needs_no_leave_to_skip),
        cmocka_unit_test(test_one_dead_out_of_reach),
    };
    return cmocka_run_group_tests(tests, open_demos, close_demos);
}
