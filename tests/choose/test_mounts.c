// Worst mount forces of a screen, against every condition solved and searched again.
#include "choose/internal.h"
#include "near.h"
#include <complex.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#define RPM 0.10471975511965977

// ---- the list -----------------------------------------------------------------------------------

static uint32_t seed = 1;
static unsigned draw(unsigned below)
{
    seed = seed * 1664525u + 1013904223u;
    return (seed >> 8) % below;
}

// Forces on 400 orders, many of them equal, several conditions on each.
#define MANY 4000
static worst_line *many(void)
{
    worst_line *x = calloc(MANY, sizeof *x);
    assert_non_null(x);
    for (size_t i = 0; i < MANY; i++)
        x[i] = (worst_line){.line = 1 + draw(100),
                            .revolutions = 2 * (1 + draw(4)),
                            .square = draw(500),
                            .candidate = draw(5),
                            .speed = 100 + draw(3)};
    return x;
}

static void assert_same_lists(const worst_list *a, const worst_list *b)
{
    assert_int_equal(a->n, b->n);
    for (size_t i = 0; i < a->n; i++) {
        const worst_line *x = &a->at[i], *y = &b->at[i];
        assert_int_equal((unsigned long)x->line * y->revolutions,
                         (unsigned long)y->line * x->revolutions);
        assert_near(x->square, y->square, 0, 0);
        assert_int_equal(x->candidate, y->candidate);
        assert_near(x->speed, y->speed, 0, 0);
    }
}

static void test_list_in_any_order(void **state)
{
    (void)state;
    worst_line *x = many();
    static worst_list first, other;
    first.n = other.n = 0;
    for (size_t i = 0; i < MANY; i++)
        worst_take(&first, &x[i]);
    assert_int_equal(first.n, MOUNT_ORDERS_MOST);
    for (int shuffle = 0; shuffle < 5; shuffle++) {
        for (size_t i = MANY - 1; i > 0; i--) {
            size_t k = draw((unsigned)i + 1);
            worst_line swapped = x[i];
            x[i] = x[k];
            x[k] = swapped;
        }
        other.n = 0;
        for (size_t i = 0; i < MANY; i++)
            worst_take(&other, &x[i]);
        assert_same_lists(&first, &other);
    }
    free(x);
}

// The orders kept are those with the largest worst forces: no order that is not kept has a force
// above the least of them, and each kept one has its own largest.
static void test_list_keeps_the_largest(void **state)
{
    (void)state;
    worst_line *x = many();
    static worst_list l;
    l.n = 0;
    for (size_t i = 0; i < MANY; i++)
        worst_take(&l, &x[i]);
    for (size_t i = 0; i < MANY; i++) {
        size_t k = 0;
        while (k < l.n && (unsigned long)l.at[k].line * x[i].revolutions !=
                              (unsigned long)x[i].line * l.at[k].revolutions)
            k++;
        assert_true(x[i].square <= l.at[k < l.n ? k : l.n - 1].square);
    }
    free(x);
}

// ---- a screen -----------------------------------------------------------------------------------

typedef struct {
    tacet_study *study;
    tacet_model *model;
    tacet_screen *screen;
} whole;

static void open_screen(whole *k, const char **densities, size_t n)
{
    static double grid[] = {1000 * RPM, 1250 * RPM, 1600 * RPM};
    tacet_error e = {.text = ""};
    tacet_problems *p = tacet_problems_create();
    assert_int_equal(tacet_study_read(FORWARDER, p, &k->study), TACET_OK);
    tacet_study *s = k->study;
    s->engine.skip.longest_run = 2; // fewer kinds of cycle: a quicker table
    s->screen.speeds_rad_per_s = grid;
    s->screen.n_speeds = 3;
    s->screen.densities.list = densities;
    s->screen.densities.n_list = n;
    s->screen.referee = 0;
    assert_int_equal(tacet_model_create(s, &k->model, &e), TACET_OK);
    assert_int_equal(tacet_model_prepare(k->model, &e), TACET_OK);
    assert_int_equal(tacet_screen_run(k->model, NULL, &k->screen, p, &e), TACET_OK);
    tacet_problems_destroy(p);
}

static void close_screen(whole *k)
{
    tacet_screen_destroy(k->screen);
    tacet_model_destroy(k->model);
    tacet_study_destroy(k->study);
}

// Force of a mount and axis on an order in one condition; 0: not a line of it, NAN: not solved.
static double force(const whole *k, tacet_workspace *w, const tacet_roll *roll, double speed,
                    const tacet_mount_worst *of)
{
    tacet_condition c = {
        .speed_rad_per_s = speed, .demand_Nm = tacet_model_demand(k->model, speed), .roll = roll};
    tacet_row row;
    const tacet_spectrum *s;
    tacet_quantity_ref q = {tacet_quantity_find("mount-force"), 3 * of->mount + (size_t)of->axis};
    assert_int_equal(tacet_solve(k->model, &c, TACET_LEVEL_RIPPLE, w, &row), TACET_OK);
    if (row.outcome != TACET_SOLVED) return NAN;
    assert_int_equal(tacet_workspace_quantity(w, q, &s, NULL), TACET_OK);
    size_t line = (size_t)of->line * s->revolutions / of->revolutions;
    if (of->line == 0) return fabs(s->mean);
    if (line * of->revolutions != (size_t)of->line * s->revolutions || line > s->n_lines) return 0;
    return cabs(s->line[line]);
}

static double worst_again(const whole *k, tacet_workspace *w, const tacet_mount_worst *of)
{
    double worst = 0;
    for (size_t i = 0; i < k->screen->n_cells; i++) {
        const tacet_cell *cell = &k->screen->cells[i];
        const tacet_candidate *c = &k->screen->candidates[cell->candidate];
        for (size_t p = 0; p < c->n_placements; p++) // fmax passes over NAN
            worst = fmax(worst, force(k, w, c->roll[p], cell->row.speed_rad_per_s, of));
    }
    return worst;
}

static double all_fire_again(const whole *k, tacet_workspace *w, const tacet_mount_worst *of)
{
    double worst = 0;
    for (size_t i = 0; i < k->screen->n_speeds; i++)
        worst = fmax(
            worst, force(k, w, tacet_model_all_fire(k->model), k->screen->speeds_rad_per_s[i], of));
    return worst;
}

static void check(whole *k)
{
    tacet_workspace *w = NULL;
    const tacet_screen *s = k->screen;
    assert_true(s->n_mounts > 12);
    assert_int_equal(tacet_workspace_create(k->model, &w), TACET_OK);
    for (size_t i = 0; i < s->n_mounts; i += 7) { // a sample, every mount and axis among them
        const tacet_mount_worst *m = &s->mounts[i];
        assert_near(m->peak_N, worst_again(k, w, m), 1e-12, 1e-12);
        double there =
            force(k, w, s->candidates[m->candidate].roll[m->placement], m->speed_rad_per_s, m);
        assert_near(there, m->peak_N, 1e-12, 1e-12);
        assert_near(m->demand_Nm, tacet_model_demand(k->model, m->speed_rad_per_s), 0, 0);
        assert_near(m->all_fire_N, all_fire_again(k, w, m), 1e-12, 1e-12);
    }
    tacet_workspace_destroy(w);
}

static void test_worst_of_all_conditions(void **state)
{
    (void)state;
    static const char *densities[] = {"1/2", "2/3"};
    whole k;
    open_screen(&k, densities, 2); // all-fire is no candidate and is solved apart
    check(&k);
    for (size_t i = 1; i < k.screen->n_mounts; i++) { // by mount and axis, the largest first
        const tacet_mount_worst *a = &k.screen->mounts[i - 1], *b = &k.screen->mounts[i];
        size_t x = 3 * a->mount + (size_t)a->axis, y = 3 * b->mount + (size_t)b->axis;
        assert_true(x <= y);
        if (x == y && b->line > 0) assert_true(a->peak_N >= b->peak_N);
    }
    close_screen(&k);
}

// All-fire alone: its own forces stand on both sides.
static void test_all_fire_against_itself(void **state)
{
    (void)state;
    static const char *densities[] = {"1"};
    whole k;
    open_screen(&k, densities, 1);
    assert_true(k.screen->n_mounts > 0);
    for (size_t i = 0; i < k.screen->n_mounts; i++) {
        const tacet_mount_worst *m = &k.screen->mounts[i];
        assert_near(m->all_fire_N, m->peak_N, 0, 0);
        assert_near(m->all_fire_speed_rad_per_s, m->speed_rad_per_s, 0, 0);
    }
    close_screen(&k);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_list_in_any_order),
        cmocka_unit_test(test_list_keeps_the_largest),
        cmocka_unit_test(test_worst_of_all_conditions),
        cmocka_unit_test(test_all_fire_against_itself),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
