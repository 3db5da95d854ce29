// Whole screens of the forwarder study, from the file to the notes.
#include "near.h"
#include "tacet/choose.h"
#include <gsl/gsl_errno.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#define RPM 0.10471975511965977

typedef struct {
    tacet_study *study;
    tacet_model *model;
    tacet_screen *screen;
    double speeds[256];
} case_;

static void read_study(case_ *k)
{
    tacet_problems *p = tacet_problems_create();
    assert_int_equal(tacet_study_read(FORWARDER, p, &k->study), TACET_OK);
    tacet_problems_destroy(p);
    k->study->engine.skip.longest_run = 3; // fewer kinds of cycle: a quicker table
}

static void set_speeds(case_ *k, double from, double to, double step)
{
    size_t n = 0;
    for (double rpm = from; rpm <= to + 1e-9; rpm += step)
        k->speeds[n++] = rpm * RPM;
    k->study->screen.speeds_rad_per_s = k->speeds;
    k->study->screen.n_speeds = n;
}

static void set_densities(case_ *k, const char **list, size_t n)
{
    k->study->screen.densities.list = list;
    k->study->screen.densities.n_list = n;
}

static void run(case_ *k)
{
    tacet_error e = {0};
    tacet_problems *p = tacet_problems_create();
    tacet_status status = tacet_model_create(k->study, &k->model, &e);
    if (status == TACET_OK) status = tacet_model_prepare(k->model, &e);
    if (status == TACET_OK) status = tacet_screen_run(k->model, NULL, &k->screen, p, &e);
    if (status != TACET_OK) fail_msg("%s", e.text);
    tacet_problems_destroy(p);
}

static void clear(case_ *k)
{
    tacet_screen_destroy(k->screen);
    tacet_model_destroy(k->model);
    tacet_study_destroy(k->study);
}

// The same ranges to 0.5 rpm from grids of 25 and of 100 rpm. The bands that refer to all-fire at
// its worst screened speed are left out: their limit itself depends on the grid.
static void test_no_go_from_two_grids(void **state)
{
    (void)state;
    static const char *densities[] = {"3/7", "1/2", "2/3", "1"};
    static const double step[] = {25, 100};
    case_ k[2] = {{0}};
    for (int i = 0; i < 2; i++) {
        read_study(&k[i]);
        set_speeds(&k[i], 900, 1700, step[i]);
        set_densities(&k[i], densities, 4);
        k[i].study->n_bands = 2;
        k[i].study->screen.referee = 0;
        run(&k[i]);
        assert_int_equal(k[i].screen->n_failed, 0);
    }
    const tacet_screen *a = k[0].screen, *b = k[1].screen;
    assert_true(a->n_no_go >= 4);
    assert_int_equal(a->n_no_go, b->n_no_go);
    for (size_t i = 0; i < a->n_no_go; i++) {
        assert_int_equal(a->no_go[i].candidate, b->no_go[i].candidate);
        assert_int_equal(a->no_go[i].band, b->no_go[i].band);
        assert_near(a->no_go[i].low_rad_per_s / RPM, b->no_go[i].low_rad_per_s / RPM, 0.5, 0);
        assert_near(a->no_go[i].high_rad_per_s / RPM, b->no_go[i].high_rad_per_s / RPM, 0.5, 0);
    }
    clear(&k[0]);
    clear(&k[1]);
}

// Order 9/7 in 11-18 Hz with 5 % guard leaves the band at 60 * 18.9 / (9/7) = 882.00 rpm (closed
// form). Of 3/7 it and 12/7 are the strong orders (K7: 2.25 against 0.80 and 0.55); 12/7 has left
// at 661.5. So with a limit between them the roll band is over from the start to 882.00.
static void test_order_nine_sevenths(void **state)
{
    (void)state;
    static const char *densities[] = {"3/7"};
    static const double step[] = {25, 100};
    for (int i = 0; i < 2; i++) {
        case_ k = {0};
        read_study(&k);
        set_speeds(&k, 700, 1000, step[i]);
        set_densities(&k, densities, 1);
        tacet_curve *demand = &k.study->screen.brake_torque_Nm;
        for (size_t j = 0; j < demand->n; j++)
            demand->y[j] = 150;
        k.study->bands[1].quantity = "roll-torque"; // excitation, not what the mounts make of it
        k.study->bands[1].limit_rms = 170;
        k.study->n_bands = 2;
        k.study->screen.referee = 0;
        run(&k);
        const tacet_no_go *roll = NULL;
        for (size_t j = 0; j < k.screen->n_no_go; j++)
            if (k.screen->no_go[j].band == 1) {
                assert_null(roll);
                roll = &k.screen->no_go[j];
            }
        assert_non_null(roll);
        assert_int_equal(roll->low_open, TACET_OPEN_SPEEDS);
        assert_false(roll->high_open);
        assert_near(roll->high_rad_per_s / RPM, 882, 0.005, 0);
        assert_near(roll->leading_order, 9. / 7, 1e-12, 0);
        clear(&k);
    }
}

// Rows do not depend on what was solved before: every seventh cell again, from the last to the
// first, in one workspace and in a fresh one each, gives the same bits.
static void test_rows_without_history(void **state)
{
    (void)state;
    static const char *densities[] = {"1/2", "3/4", "1"};
    case_ k = {0};
    read_study(&k);
    set_speeds(&k, 1000, 1200, 100);
    set_densities(&k, densities, 3);
    run(&k);
    const tacet_screen *s = k.screen;
    tacet_workspace *one;
    assert_int_equal(tacet_workspace_create(k.model, &one), TACET_OK);
    for (size_t i = s->n_cells; i-- > 0;) {
        if (i % 7) continue;
        const tacet_cell *cell = &s->cells[i];
        tacet_condition c = {.speed_rad_per_s = cell->row.speed_rad_per_s,
                             .demand_Nm = cell->row.demand_Nm,
                             .roll = s->candidates[cell->candidate].roll[cell->placement]};
        tacet_workspace *fresh;
        tacet_row row[2];
        assert_int_equal(tacet_workspace_create(k.model, &fresh), TACET_OK);
        assert_int_equal(tacet_solve(k.model, &c, TACET_LEVEL_RIPPLE, one, &row[0]), TACET_OK);
        assert_int_equal(tacet_solve(k.model, &c, TACET_LEVEL_RIPPLE, fresh, &row[1]), TACET_OK);
        tacet_workspace_destroy(fresh);
        for (int j = 0; j < 2; j++) {
            assert_int_equal(row[j].outcome, cell->row.outcome);
            assert_memory_equal(&row[j].fuel_to_all_fire, &cell->row.fuel_to_all_fire, 8);
            assert_memory_equal(&row[j].worst_margin_db, &cell->row.worst_margin_db, 8);
            for (size_t b = 0; b < row[j].n_bands; b++)
                assert_memory_equal(&row[j].bands[b].level.dispersed,
                                    &cell->row.bands[b].level.dispersed, 8);
        }
    }
    tacet_workspace_destroy(one);
    clear(&k);
}

// The referee: constant-speed harmonic and march agree to 1e-6 of the largest line, ripple harmonic
// and full march to 0.1 dB, at the lowest speed of the study.
static void test_referee_agrees(void **state)
{
    (void)state;
    static const char *densities[] = {"3/7", "1/2"};
    case_ k = {0};
    read_study(&k);
    set_speeds(&k, 900, 900, 1);
    set_densities(&k, densities, 2);
    k.study->screen.referee = 2;
    run(&k);
    assert_int_equal(k.screen->n_referee, 2);
    for (size_t i = 0; i < 2; i++) {
        const tacet_referee *r = &k.screen->referee[i];
        assert_int_equal(r->status, TACET_OK);
        assert_true(r->a.settled);
        assert_true(r->a.same_model <= 1e-6);
        assert_true(r->a.full_model_db <= 0.1);
    }
    clear(&k);
}

int main(void)
{
    gsl_set_error_handler_off();
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_no_go_from_two_grids),
        cmocka_unit_test(test_order_nine_sevenths),
        cmocka_unit_test(test_rows_without_history),
        cmocka_unit_test(test_referee_agrees),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
