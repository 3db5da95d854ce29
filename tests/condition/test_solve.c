// One condition, from roll to row. Expected values are closed forms, symmetries or a second way to
// the same number; none comes from the program.
#include "demo.h"
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

static tacet_row solve(demo *d, const tacet_roll *roll, double rpm, tacet_level level)
{
    tacet_condition c = demo_condition(d, roll, rpm);
    tacet_row row;
    assert_int_equal(tacet_solve(d->model, &c, level, d->work, &row), TACET_OK);
    return row;
}

// Mean torque in the shaft to the load, on the crank's side, N m.
static double torque_to_the_load(demo *d, const char *shaft, double ratio)
{
    size_t link = tacet_train_link_find(tacet_model_train(d->model), shaft);
    return tacet_workspace_response(d->work)->motion->link_torque_Nm[link].mean / ratio;
}

// What all links turn into heat, W.
static double heat_W(demo *d)
{
    const tacet_quantity *heat = tacet_quantities();
    while (strcmp(heat->name, "damper-heat") != 0)
        heat++;
    double sum = 0;
    for (size_t i = 0; i < tacet_train_links(tacet_model_train(d->model)); i++) {
        double one = NAN;
        assert_int_equal(heat->value(tacet_workspace_response(d->work), i, &one), TACET_OK);
        sum += one;
    }
    return sum;
}

// At constant speed the load carries the demand (statics). With ripple the engine's work over a
// repeat is the same, the demand times the angle, and the dampers take their heat out of it (energy
// balance).
static void test_demand_less_damper_heat_reaches_the_load(void **state)
{
    (void)state;
    tacet_roll *r6 = demo_roll(&six, "..x.x.x"), *r8 = demo_roll(&eight, "x.");
    tacet_row row = solve(&six, r6, 1200, TACET_LEVEL_CONSTANT);
    assert_near(torque_to_the_load(&six, "pump-shaft", 1), row.demand_Nm, 0, 5e-6);
    row = solve(&eight, r8, 2000, TACET_LEVEL_CONSTANT);
    assert_near(torque_to_the_load(&eight, "tyres", 3.73), row.demand_Nm, 0, 5e-6);
    row = solve(&six, r6, 1200, TACET_LEVEL_RIPPLE);
    double lost = heat_W(&six) / row.speed_rad_per_s;
    assert_true(lost >
                1); // the coupling's loss factor of 0.15 near its resonance: hundreds of watts
    assert_near(torque_to_the_load(&six, "pump-shaft", 1) + lost, row.demand_Nm, 0, 2e-5);
    row = solve(&eight, r8, 2000, TACET_LEVEL_RIPPLE);
    lost = heat_W(&eight) / row.speed_rad_per_s;
    assert_near(torque_to_the_load(&eight, "tyres", 3.73) + lost, row.demand_Nm, 0, 2e-5);
    tacet_roll_destroy(r6);
    tacet_roll_destroy(r8);
}

// A light four before a soft dual-mass spring: the crank's speed swings by half its mean and more.
// Ripple does not contract there and neither does shooting with the linear monodromy; what each
// repeat teaches settles it (the closure of GSL's march is the proof), and work balances.
static void test_strong_swing_is_settled(void **state)
{
    (void)state;
    const struct {
        const char *word;
        double rpm;
    } strong[] = {{"..x.x", 1200}, {".x.xx", 1225}, {"..x.x", 1330}};
    demo four;
    demo_open_path(&four, TEST_ROOT "/tests/condition/strong.yaml");
    for (size_t i = 0; i < sizeof strong / sizeof *strong; i++) {
        tacet_roll *roll = demo_roll(&four, strong[i].word);
        tacet_row row = solve(&four, roll, strong[i].rpm, TACET_LEVEL_RIPPLE);
        assert_int_equal(row.outcome, TACET_SOLVED);
        print_message("%s at %.0f rpm: %s, %u repeats, closure %.1e, irregularity %.2f\n",
                      strong[i].word, strong[i].rpm, row.solver.method, row.solver.repeats,
                      row.solver.closure, row.limits[0].value);
        assert_string_equal(row.solver.method, "steady");
        assert_true(row.solver.closure <= 1e-5);
        assert_true(row.limits[0].value > 0.4);
        double lost = heat_W(&four) / row.speed_rad_per_s;
        assert_near(torque_to_the_load(&four, "shafts", 2.1) + lost, row.demand_Nm, 0, 1e-3);
        tacet_roll_destroy(roll);
    }
    demo_close(&four);
}

static void test_word_and_its_double_are_one(void **state)
{
    (void)state;
    tacet_roll *one = demo_roll(&six, "x."), *two = demo_roll(&six, "x.x.");
    tacet_row a = solve(&six, one, 1300, TACET_LEVEL_RIPPLE);
    tacet_row b = solve(&six, two, 1300, TACET_LEVEL_RIPPLE);
    assert_int_equal(one->revolutions, two->revolutions);
    for (size_t i = 0; i < a.n_bands; i++)
        assert_memory_equal(&a.bands[i].level.dispersed, &b.bands[i].level.dispersed,
                            sizeof(double));
    tacet_roll_destroy(one);
    tacet_roll_destroy(two);
}

// Sum over throws of the applied torque: for `x.` and `.x` on a six the same words half a cycle
// apart, so the same amplitudes; orders that are no multiple of 1.5 vanish in the sum (three even
// fires in two revolutions).
static void sum_of_throws(const tacet_response *r, size_t h, double complex *sum, double *largest)
{
    *sum = 0;
    *largest = 0;
    for (size_t i = 0; i < r->n_throws; i++) {
        const tacet_spectrum *angle = &r->motion->angle_rad[r->throw_node[i]];
        double w = r->speed_rad_per_s * (double)h / r->revolutions;
        double inertia = tacet_engine_mean_inertia(tacet_model_engine(six.model));
        double complex applied = r->piston_torque_Nm[i].line[h] - inertia * w * w * angle->line[h];
        *sum += applied;
        *largest = fmax(*largest, cabs(applied));
    }
}

static void test_placements_share_roll_torque_and_load_the_crank_differently(void **state)
{
    (void)state;
    tacet_roll *first = demo_roll(&six, "x."), *second = demo_roll(&six, ".x");
    double amplitude[2][145], crank[2] = {0}, biggest = 0;
    assert_int_equal(first->revolutions, 2);
    for (int p = 0; p < 2; p++) {
        tacet_row row = solve(&six, p ? second : first, 1200, TACET_LEVEL_CONSTANT);
        assert_int_equal(row.outcome, TACET_SOLVED);
        const tacet_response *r = tacet_workspace_response(six.work);
        size_t link = tacet_train_link_find(tacet_model_train(six.model), "crank3");
        crank[p] = cabs(r->motion->link_torque_Nm[link].line[1]); // order 1/2
        for (size_t h = 1; h <= 48; h++) {
            double complex sum;
            double one;
            sum_of_throws(r, h, &sum, &one);
            amplitude[p][h] = cabs(sum);
            biggest = fmax(biggest, cabs(sum));
        }
    }
    for (size_t h = 1; h <= 48; h++) {
        assert_near(amplitude[0][h], amplitude[1][h], 1e-12 * biggest, 0);
        if (h % 3 != 0) assert_true(amplitude[0][h] <= 1e-12 * biggest);
    }
    // firing cylinders 1, 3, 2 against 5, 6, 4: other throws, another torque in the middle of the
    // crank
    assert_true(fabs(crank[0] - crank[1]) > 0.05 * fmax(crank[0], crank[1]));
    tacet_roll_destroy(first);
    tacet_roll_destroy(second);
}

// Constant-speed harmonic is linear: with every torque doubled, every amplitude doubles. Doubling
// gas and inertia torque of a condition is not a condition, so scale the spectra themselves.
static void test_double_torque_double_amplitude(void **state)
{
    (void)state;
    tacet_arena *a = tacet_arena_create();
    const tacet_train *t = tacet_model_train(six.model);
    size_t n = tacet_model_throws(six.model), lines = 100, node[16];
    tacet_spectrum torque[16];
    tacet_train_motion once, twice;
    tacet_train_work *w;
    assert_int_equal(tacet_train_motion_init(&once, t, lines, a), TACET_OK);
    assert_int_equal(tacet_train_motion_init(&twice, t, lines, a), TACET_OK);
    assert_int_equal(tacet_train_work_create(t, lines, n, &w), TACET_OK);
    for (size_t i = 0; i < n; i++) {
        node[i] = tacet_model_throw_node(six.model, i);
        assert_int_equal(tacet_spectrum_init(&torque[i], lines, a), TACET_OK);
        torque[i].revolutions = 14;
        for (size_t h = 1; h <= lines; h++)
            torque[i].line[h] = cexp(I * (double)(h * (i + 1))) * 100.0 / (double)h;
    }
    assert_int_equal(tacet_train_harmonic(t, 100, n, node, torque, w, &once), TACET_OK);
    for (size_t i = 0; i < n; i++)
        for (size_t h = 1; h <= lines; h++)
            torque[i].line[h] *= 2;
    assert_int_equal(tacet_train_harmonic(t, 100, n, node, torque, w, &twice), TACET_OK);
    for (size_t l = 0; l < once.n_links; l++)
        for (size_t h = 1; h <= lines; h++)
            assert_near(cabs(twice.link_torque_Nm[l].line[h] - 2 * once.link_torque_Nm[l].line[h]),
                        0, 1e-13 * cabs(twice.link_torque_Nm[l].line[h]), 0);
    tacet_train_work_destroy(w);
    tacet_arena_destroy(a);
}

// What the pistons do to the housing is what the moving parts lose of momentum and do not hand on.
// (A node without ground damping: neither study has any.)
static void test_roll_torque_is_loss_of_momentum(void **state)
{
    (void)state;
    tacet_roll *roll = demo_roll(&six, "..x.x.x");
    for (tacet_level level = TACET_LEVEL_CONSTANT; level <= TACET_LEVEL_RIPPLE; level++) {
        (void)solve(&six, roll, 900, level);
        assert_near(demo_roll_mismatch(&six), 0, 1e-9, 0);
    }
    tacet_roll_destroy(roll);
    roll = demo_roll(&eight, "..x.x.x");
    (void)solve(&eight, roll, 1000, TACET_LEVEL_RIPPLE);
    assert_near(demo_roll_mismatch(&eight), 0, 1e-9, 0);
    tacet_roll_destroy(roll);
}

static bool same_row(const tacet_row *a, const tacet_row *b)
{
    bool same = a->outcome == b->outcome && a->worst == b->worst &&
                memcmp(&a->duty.charge_Pa, &b->duty.charge_Pa, sizeof(double)) == 0 &&
                memcmp(&a->fuel_to_all_fire, &b->fuel_to_all_fire, sizeof(double)) == 0 &&
                memcmp(&a->worst_margin_db, &b->worst_margin_db, sizeof(double)) == 0;
    for (size_t i = 0; i < a->n_bands; i++)
        same = same &&
               memcmp(&a->bands[i].level.dispersed, &b->bands[i].level.dispersed, sizeof(double)) ==
                   0 &&
               memcmp(&a->bands[i].level.leading_peak, &b->bands[i].level.leading_peak,
                      sizeof(double)) == 0;
    for (size_t i = 0; i < a->n_limits; i++)
        same = same && memcmp(&a->limits[i].value, &b->limits[i].value, sizeof(double)) == 0;
    return same;
}

static void test_same_bits_in_any_order_and_with_a_fresh_workspace(void **state)
{
    (void)state;
    const char *word[] = {"x", "x.", "..x.x.x", "xx.", ".xx", "x.x.xx."};
    tacet_roll *roll[6];
    tacet_row row[24], again;
    for (int i = 0; i < 6; i++)
        roll[i] = demo_roll(&six, word[i]);
    for (int i = 0; i < 24; i++)
        row[i] = solve(&six, roll[i % 6], 950 + 225 * (i / 6), TACET_LEVEL_RIPPLE);
    for (int k = 0; k < 24; k++) {
        int i = (k * 7 + 5) % 24; // 7 and 24 have no common factor: every condition once
        again = solve(&six, roll[i % 6], 950 + 225 * (i / 6), TACET_LEVEL_RIPPLE);
        assert_true(same_row(&row[i], &again));
    }
    for (int i = 0; i < 24; i += 5) {
        demo fresh = six;
        assert_int_equal(tacet_workspace_create(six.model, &fresh.work), TACET_OK);
        again = solve(&fresh, roll[i % 6], 950 + 225 * (i / 6), TACET_LEVEL_RIPPLE);
        assert_true(same_row(&row[i], &again));
        tacet_workspace_destroy(fresh.work);
    }
    // whatever the workspace did before: a march, a comparison, what cannot be reached
    tacet_condition c = demo_condition(&six, roll[1], 950);
    tacet_agreement agreement;
    (void)solve(&six, roll[2], 950, TACET_LEVEL_STEADY);
    again = solve(&six, roll[1], 950, TACET_LEVEL_RIPPLE);
    assert_true(same_row(&row[1], &again));
    assert_int_equal(tacet_solve_referee(six.model, &c, six.work, &agreement), TACET_OK);
    c.demand_Nm = 1e5;
    assert_int_equal(tacet_solve(six.model, &c, TACET_LEVEL_RIPPLE, six.work, &again), TACET_OK);
    assert_int_equal(again.outcome, TACET_UNREACHABLE);
    again = solve(&six, roll[2], 950, TACET_LEVEL_RIPPLE);
    assert_true(same_row(&row[2], &again));
    again = solve(&six, roll[1], 950, TACET_LEVEL_CONSTANT);
    again = solve(&six, roll[1], 950, TACET_LEVEL_RIPPLE);
    assert_true(same_row(&row[1], &again));
    for (int i = 0; i < 6; i++)
        tacet_roll_destroy(roll[i]);
}

static void test_all_fire_needs_the_fuel_of_all_fire(void **state)
{
    (void)state;
    tacet_row row = solve(&six, tacet_model_all_fire(six.model), 1500, TACET_LEVEL_RIPPLE);
    assert_true(row.fuel_to_all_fire == 1.0);
}

// Fewer, harder-working cylinders burn less at part load (common practice, no source); by how much
// is a rough expectation of the demo data: 7-8 % on the six, 12 % on the eight, with half the
// cylinders.
static void test_half_density_saves_fuel(void **state)
{
    (void)state;
    tacet_roll *r6 = demo_roll(&six, "x."), *r8 = demo_roll(&eight, "x.");
    double six_saves = 1 - solve(&six, r6, 1300, TACET_LEVEL_RIPPLE).fuel_to_all_fire;
    double eight_saves = 1 - solve(&eight, r8, 2000, TACET_LEVEL_RIPPLE).fuel_to_all_fire;
    assert_true(six_saves > 0.04 && six_saves < 0.12);
    assert_true(eight_saves > 0.07 && eight_saves < 0.18);
    tacet_roll_destroy(r6);
    tacet_roll_destroy(r8);
}

static void test_unreachable_is_a_row_without_verdict(void **state)
{
    (void)state;
    tacet_roll *roll = demo_roll(&six, "x.....");
    tacet_condition c = demo_condition(&six, roll, 1000);
    tacet_row row;
    assert_int_equal(tacet_solve(six.model, &c, TACET_LEVEL_RIPPLE, six.work, &row), TACET_OK);
    assert_int_equal(row.outcome, TACET_UNREACHABLE);
    assert_int_equal(row.worst, TACET_NO_VERDICT);
    for (size_t i = 0; i < row.n_bands; i++) {
        assert_int_equal(row.bands[i].verdict, TACET_NO_VERDICT);
        assert_int_equal(row.bands[i].why, TACET_WHY_UNREACHABLE);
        assert_true(isnan(row.bands[i].margin_db));
    }
    assert_null(tacet_workspace_response(six.work));
    tacet_roll_destroy(roll);
}

// Equal cylinders firing evenly have no line at order 1/2; unequal ones do. The dispersed level of
// all-fire in a band that holds only half orders is all dispersion.
static void test_dispersion_fills_false_zeros(void **state)
{
    (void)state;
    const tacet_band *cab = tacet_model_band(six.model, 2); // 3-8 Hz: order 1/2 (7.5 Hz) at 900 rpm
    tacet_row row = solve(&six, tacet_model_all_fire(six.model), 900, TACET_LEVEL_RIPPLE);
    assert_string_equal(cab->name, "cab suspension");
    assert_true(row.bands[2].level.dispersed > 0);
    assert_true(row.bands[2].level.nominal < 1e-2 * row.bands[2].level.dispersed);
}

static void test_bad_condition_is_refused(void **state)
{
    (void)state;
    tacet_condition c = demo_condition(&six, tacet_model_all_fire(six.model), 1000);
    tacet_row row;
    c.speed_rad_per_s = NAN;
    assert_int_equal(tacet_solve(six.model, &c, TACET_LEVEL_RIPPLE, six.work, &row),
                     TACET_BAD_INPUT);
    c = demo_condition(&six, tacet_model_all_fire(eight.model), 1000);
    assert_int_equal(tacet_solve(six.model, &c, TACET_LEVEL_RIPPLE, six.work, &row),
                     TACET_BAD_INPUT);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_demand_less_damper_heat_reaches_the_load),
        cmocka_unit_test(test_strong_swing_is_settled),
        cmocka_unit_test(test_word_and_its_double_are_one),
        cmocka_unit_test(test_placements_share_roll_torque_and_load_the_crank_differently),
        cmocka_unit_test(test_double_torque_double_amplitude),
        cmocka_unit_test(test_roll_torque_is_loss_of_momentum),
        cmocka_unit_test(test_same_bits_in_any_order_and_with_a_fresh_workspace),
        cmocka_unit_test(test_all_fire_needs_the_fuel_of_all_fire),
        cmocka_unit_test(test_half_density_saves_fuel),
        cmocka_unit_test(test_unreachable_is_a_row_without_verdict),
        cmocka_unit_test(test_dispersion_fills_false_zeros),
        cmocka_unit_test(test_bad_condition_is_refused),
    };
    return cmocka_run_group_tests(tests, open_demos, close_demos);
}
