// Periodic steady state by march and shooting.
#include "near.h"
#include "rig.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>

static const size_t throws[] = {2, 3, 4, 5, 6, 7};

static rig *six_rig(pulses *p, const char *word, double work_J, double order)
{
    pulses_six(p, word, work_J);
    return rig_new(forwarder(), 6, throws, p->revolutions, (size_t)(order * p->revolutions));
}

static rig *eight_rig(pulses *p, const char *word, double work_J, double order)
{
    pulses_eight(p, word, work_J);
    return rig_new(brush_truck(), 4, throws, p->revolutions, (size_t)(order * p->revolutions));
}

// ---- frozen: the harmonic solution's model ------------------------------------------------------

// Band-limited torque, so that the march sees exactly what the harmonic solution does: all kinds of
// damping, gears. Agreement 1e-6 of the largest line is asked for.
static void check_same_model(rig *r, double rpm)
{
    tacet_train_motion marched = rig_motion(r);
    assert_int_equal(rig_harmonic(r, rpm, &r->m), TACET_OK);
    rig_tabulate(r);
    r->how.frozen = true;
    assert_int_equal(rig_steady(r, rpm, rig_drive, r, &marched), TACET_OK);
    double torque = lines_apart(marched.link_torque_Nm, r->m.link_torque_Nm, r->m.n_links, 0);
    double speed = lines_apart(marched.angle_rad, r->m.angle_rad, r->m.n_nodes, 1);
    print_message("same model at %.0f rpm: torque %.1e, speed %.1e, %u repeats, closure %.1e\n",
                  rpm, torque, speed, r->note.repeats, r->note.closure);
    assert_true(torque < 1e-8);
    assert_true(speed < 1e-8);
    assert_true(r->note.repeats <= 3);
    for (size_t e = 0; e < r->m.n_links; e++)
        assert_near(marched.link_torque_Nm[e].mean, r->m.link_torque_Nm[e].mean, 1e-5, 0);
    rig_free(r);
}

static void some_torque(rig *r)
{
    for (size_t i = 0; i < r->n; i++) {
        r->torque[i].mean = 40.0 + (double)i;
        for (size_t h = 1; h <= r->lines; h++)
            r->torque[i].line[h] = cexp(I * (double)((i + 2) * h)) * 400.0 / (double)(h + 10);
    }
}

static void test_same_model(void **state)
{
    (void)state;
    rig *r = rig_new(forwarder(), 6, throws, 2, 48);
    some_torque(r);
    check_same_model(r, 900);
    bench_train *b = brush_truck();
    b->node[7].damping_Nms_per_rad = 0.3;
    b->node[10].damping_Nms_per_rad = 20;
    b->link[4].loss_factor = NAN;
    b->link[4].damping_ratio = 0.02;
    size_t side = bench_node(b, 0.01); // a branch, geared against the rest
    size_t link = bench_link(b, side, 8, 3e3);
    b->link[link].gear_ratio = -1.7;
    b->link[link].loss_factor = 0.3;
    b->d.flywheel = b->node[6].name;
    r = rig_new(b, 4, throws, 4, 96);
    some_torque(r);
    check_same_model(r, 1300);
}

// The march carries the arms of lossy links in pairs: one, two and three of them.
static void test_any_number_of_lossy_links(void **state)
{
    (void)state;
    const double J[] = {0.1, 0.2, 0.3, 0.5}, k[] = {2e4, 3e4, 5e4};
    const size_t first[] = {0};
    for (size_t links = 1; links <= 3; links++) {
        bench_train *b = bench_chain(links + 1, J, k);
        for (size_t e = 0; e < links; e++)
            b->link[e].loss_factor = 0.2;
        rig *r = rig_new(b, 1, first, 1, 24);
        some_torque(r);
        check_same_model(r, 900);
    }
}

// The start is the harmonic solution, which a frozen march has only to confirm. Without it: lines
// far fewer than the torque has make a poor start, and the march must find the same lines all the
// same.
static void test_shooting_from_a_poor_start(void **state)
{
    (void)state;
    rig *full = rig_new(forwarder(), 6, throws, 2, 48);
    some_torque(full);
    assert_int_equal(rig_harmonic(full, 900, &full->m), TACET_OK);
    rig_tabulate(full);
    rig *few = rig_new(forwarder(), 6, throws, 2, 6);
    for (size_t i = 0; i < 6; i++) { // the same torque function
        few->table[i] = full->table[i];
        full->table[i] = NULL;
    }
    few->how.frozen = true;
    few->how.tolerance = 1e-10;
    assert_int_equal(rig_steady(few, 900, rig_drive, few, &few->m), TACET_OK);
    assert_true(few->note.repeats >= 2 && few->note.repeats <= 3);
    assert_true(few->note.closure <= 1e-10);
    print_message("from a poor start: %u repeats\n", few->note.repeats);
    assert_true(lines_apart(few->m.link_torque_Nm, full->m.link_torque_Nm, few->m.n_links, 0) <
                1e-8);
    assert_true(lines_apart(few->m.angle_rad, full->m.angle_rad, few->m.n_nodes, 1) < 1e-8);
    rig_free(few);
    rig_free(full);
}

// Two inertias, torque 10 N m at 400 rad/s on the first (closed form, as in test_forced.c).
static void test_two_inertias(void **state)
{
    (void)state;
    const double J[] = {0.1, 0.5}, k[] = {2e4};
    const size_t first[] = {0};
    bench_train *b = bench_chain(2, J, k);
    b->link[0].damping_Nms_per_rad = 5;
    rig *r = rig_new(b, 1, first, 1, 4);
    r->torque[0].line[1] = 10;
    rig_tabulate(r);
    r->how.frozen = true;
    assert_int_equal(rig_steady(r, 400 * 60 / (2 * M_PI), rig_drive, r, &r->m), TACET_OK);
    assert_near(cabs(r->m.angle_rad[0].line[1]), 8.98460872e-4, 0, 1e-8);
    assert_near(cabs(r->m.angle_rad[1].line[1]), 3.00813595e-4, 0, 1e-8);
    assert_near(cabs(r->m.link_torque_Nm[0].line[1]), 24.0650876, 0, 1e-8);
    rig_free(r);
}

// ---- full ---------------------------------------------------------------------------------------

static tacet_status seventh(const void *who, size_t i, size_t n, const double *angle,
                            double *torque, double *inertia, double *slope)
{
    (void)i;
    for (size_t k = 0; k < n; k++) {
        torque[k] = *(const double *)who * cos(3 * angle[k] / 7);
        inertia[k] = slope[k] = 0;
    }
    return TACET_OK;
}

// Rigid, J = 2 kg m2, T = 500 cos(3 theta/7), 900 rpm: lines of T in time 499.33, 16.38, 0.403 N m
// (by the energy integral, test_ripple.c), here from the marched angle, T = -w^2 J times it.
static void test_rigid_is_exact(void **state)
{
    (void)state;
    bench_train *b = bench_new();
    const size_t only[] = {bench_node(b, 2)};
    const double expected[] = {0, 499.33, 16.38, 0.403}, within[] = {0, 0.005, 0.005, 0.0005};
    double T = 500, base = 900 * 2 * M_PI / 60 / 7;
    rig *r = rig_new(b, 1, only, 7, 30);
    r->how.tolerance = 1e-8;
    assert_int_equal(rig_steady(r, 900, seventh, &T, &r->m), TACET_OK);
    for (int h = 1; h <= 3; h++) {
        double w = base * 3 * h;
        assert_near(w * w * 2 * cabs(r->m.angle_rad[0].line[3 * h]), expected[h], within[h], 0);
    }
    tacet_train_motion ripple = rig_motion(r);
    r->how.tolerance = 1e-9;
    assert_int_equal(rig_ripple(r, 900, seventh, &T, &ripple), TACET_OK);
    assert_true(lines_apart(r->m.angle_rad, ripple.angle_rad, 1, 1) < 1e-6); // phases too
    rig_free(r);
}

// The same at a speed that swings threefold: J w^2/2 = E + T 7/3 sin(3 theta/7), E = 1.25 T 7/3.
// dt = dtheta/w gives the period; line h of the angle is the integral of exp(-i h w0 t) dtheta over
// i h w0, times 2 over the period (by parts).
static void test_rigid_swings_threefold(void **state)
{
    (void)state;
    enum { STEPS = 40000 };
    static double time[STEPS];
    bench_train *b = bench_new();
    const size_t only[] = {bench_node(b, 2)};
    double T = 500, amplitude = T * 7 / 3, period = 0, step = 14 * M_PI / STEPS;
    for (int k = 0; k < STEPS; k++) { // midpoints of a periodic integrand
        double took = step / sqrt(1.25 * amplitude + amplitude * sin(3 * (k + 0.5) * step / 7));
        time[k] = period + 0.5 * took;
        period += took;
    }
    rig *r = rig_new(b, 1, only, 7, 90);
    r->how.most_passes = 24;
    tacet_train_motion ripple = rig_motion(r);
    assert_int_equal(rig_ripple(r, 7 * 60 / period, seventh, &T, &ripple), TACET_OK);
    r->how.tolerance = 1e-8;
    assert_int_equal(rig_steady(r, 7 * 60 / period, seventh, &T, &r->m), TACET_OK);
    double base = 2 * M_PI / period;
    for (int h = 3; h <= 12; h += 3) {
        double complex line = 0;
        for (int k = 0; k < STEPS; k++)
            line += cexp(-I * h * base * time[k]) * step;
        double exact = cabs(line) * 2 / period / (h * base);
        assert_near(cabs(r->m.angle_rad[0].line[h]), exact, 0, 1e-6);
        assert_near(cabs(ripple.angle_rad[0].line[h]), exact, 0, 1e-3); // lines past 90 left out
    }
    rig_free(r);
}

// Ripple against the full march: lines within 40 dB of the largest to 0.1 dB; phases too.
static void check_full_model(rig *r, double rpm, const pulses *p)
{
    tacet_train_motion marched = rig_motion(r);
    assert_int_equal(rig_ripple(r, rpm, pulses_drive, p, &r->m), TACET_OK);
    assert_int_equal(rig_steady(r, rpm, pulses_drive, p, &marched), TACET_OK);
    double db = lines_apart_db(r->m.link_torque_Nm, marched.link_torque_Nm, r->m.n_links, 40);
    db = fmax(db, lines_apart_db(r->m.angle_rad, marched.angle_rad, r->m.n_nodes, 40));
    double torque = lines_apart(r->m.link_torque_Nm, marched.link_torque_Nm, r->m.n_links, 0);
    double speed = lines_apart(r->m.angle_rad, marched.angle_rad, r->m.n_nodes, 1);
    print_message("full model, %s at %.0f rpm: %.4f dB, torque %.1e, speed %.1e, %u repeats, "
                  "closure %.1e\n",
                  p->word, rpm, db, torque, speed, r->note.repeats, r->note.closure);
    assert_true(db < 0.1);
    assert_true(torque < 1e-4);
    assert_true(speed < 1e-4);
    assert_true(r->note.repeats <= 5);
    rig_free(r);
}

static void test_full_model(void **state)
{
    (void)state;
    pulses p;
    rig *r = six_rig(&p, "x.", 1750, 24);
    check_full_model(r, 900, &p);
    r = six_rig(&p, "..x.x.x", 2050, 24);
    check_full_model(r, 900, &p);
    r = eight_rig(&p, "x.x..", 500, 24);
    check_full_model(r, 1000, &p);
}

// Pulses whose first call gives up, as ripple does that does not contract.
typedef struct {
    const pulses *p;
    bool *gave_up;
} balky;

static tacet_status balky_drive(const void *who, size_t i, size_t n, const double *angle_rad,
                                double *torque_Nm, double *inertia_kgm2, double *slope_kgm2_per_rad)
{
    const balky *b = who;
    if (!*b->gave_up) {
        *b->gave_up = true;
        return TACET_NOT_CONVERGED;
    }
    return pulses_drive(b->p, i, n, angle_rad, torque_Nm, inertia_kgm2, slope_kgm2_per_rad);
}

// A crank so soft that the mean torque twists it by a third of a degree: the march must find the
// same motion from ripple and from constant speed, where ripple gives up.
static void test_static_twist_whatever_the_start(void **state)
{
    (void)state;
    pulses p;
    bool gave_up = false;
    balky b = {.p = &p, .gave_up = &gave_up};
    pulses_six(&p, "x.", 1750);
    bench_train *soft = forwarder();
    for (size_t i = 1; i <= 7; i++)
        soft->link[i].stiffness_Nm_per_rad *= 0.2;
    rig *r = rig_new(soft, 6, throws, p.revolutions, 24 * p.revolutions);
    tacet_train_motion other = rig_motion(r);
    assert_int_equal(rig_steady(r, 1400, pulses_drive, &p, &r->m), TACET_OK);
    assert_int_equal(rig_steady(r, 1400, balky_drive, &b, &other), TACET_OK);
    assert_true(gave_up);
    assert_true(lines_apart(other.link_torque_Nm, r->m.link_torque_Nm, r->m.n_links, 0) < 1e-4);
    assert_true(lines_apart(other.angle_rad, r->m.angle_rad, r->m.n_nodes, 1) < 1e-4);
    rig_free(r);
}

// Only lines up to order 6 in result and start: the march has all of them inside.
static void test_few_lines_asked_for(void **state)
{
    (void)state;
    pulses p;
    rig *all = six_rig(&p, "x..", 1750, 24), *few = six_rig(&p, "x..", 1750, 6);
    all->how.tolerance = few->how.tolerance = 1e-7;
    assert_int_equal(rig_steady(all, 1200, pulses_drive, &p, &all->m), TACET_OK);
    assert_int_equal(rig_steady(few, 1200, pulses_drive, &p, &few->m), TACET_OK);
    assert_true(lines_apart(few->m.link_torque_Nm, all->m.link_torque_Nm, all->m.n_links, 0) <
                1e-5);
    assert_true(lines_apart(few->m.angle_rad, all->m.angle_rad, all->m.n_nodes, 1) < 1e-5);
    rig_free(all);
    rig_free(few);
}

// The same bits from a fresh memory and from one used for another speed and another model.
static void test_same_bits(void **state)
{
    (void)state;
    pulses p;
    rig *a = six_rig(&p, "x", 800, 24), *b = six_rig(&p, "x", 800, 24);
    assert_int_equal(rig_steady(a, 1500, pulses_drive, &p, &a->m), TACET_OK);
    a->how.frozen = true;
    assert_int_equal(rig_steady(a, 900, pulses_drive, &p, &a->m), TACET_OK);
    a->how.frozen = false;
    assert_int_equal(rig_steady(a, 900, pulses_drive, &p, &a->m), TACET_OK);
    assert_int_equal(rig_steady(b, 900, pulses_drive, &p, &b->m), TACET_OK);
    assert_int_equal(a->note.evaluations, b->note.evaluations);
    for (size_t j = 0; j < a->m.n_nodes; j++)
        assert_memory_equal(a->m.angle_rad[j].line, b->m.angle_rad[j].line,
                            (a->lines + 1) * sizeof(double complex));
    for (size_t e = 0; e < a->m.n_links; e++)
        assert_memory_equal(a->m.link_torque_Nm[e].line, b->m.link_torque_Nm[e].line,
                            (a->lines + 1) * sizeof(double complex));
    rig_free(a);
    rig_free(b);
}

static tacet_status broken(const void *who, size_t i, size_t n, const double *angle, double *torque,
                           double *inertia, double *slope)
{
    tacet_status status = pulses_drive(who, i, n, angle, torque, inertia, slope);
    if (n == 1 && angle[0] > 5) torque[0] = NAN; // in the march alone
    return status;
}

static tacet_status stopping(const void *who, size_t i, size_t n, const double *angle,
                             double *torque, double *inertia, double *slope)
{
    tacet_status status = pulses_drive(who, i, n, angle, torque, inertia, slope);
    return n == 1 && angle[0] > 5 ? TACET_STOPPED : status;
}

static void test_what_goes_wrong(void **state)
{
    (void)state;
    pulses p;
    rig *r = six_rig(&p, "x", 800, 24);
    assert_int_equal(rig_steady(r, 900, broken, &p, &r->m), TACET_NOT_FINITE);
    assert_int_equal(rig_steady(r, 900, stopping, &p, &r->m), TACET_STOPPED);
    r->how.tolerance = 1e-15; // below rounding: not settled is a result, with what was reached
    r->how.most_passes = 6;
    assert_int_equal(rig_steady(r, 900, pulses_drive, &p, &r->m), TACET_NOT_CONVERGED);
    assert_int_equal(r->note.repeats, 6);
    assert_true(r->note.closure > 0 && r->note.closure < 1e-6);
    r->how.tolerance = 0;
    r->how.revolutions = 1000; // memory is for 24 lines a revolution
    assert_int_equal(rig_steady(r, 900, pulses_drive, &p, &r->m), TACET_BAD_INPUT);
    rig_free(r);
    bench_train *b = forwarder();
    b->link[3].loss_law = TACET_LOSS_CONSTANT; // has no law in time
    r = rig_new(b, 6, throws, 2, 48);
    assert_int_equal(rig_steady(r, 900, pulses_drive, &p, &r->m), TACET_HARMONIC_ONLY);
    rig_free(r);
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_same_model),
    cmocka_unit_test(test_any_number_of_lossy_links),
    cmocka_unit_test(test_shooting_from_a_poor_start),
    cmocka_unit_test(test_two_inertias),
    cmocka_unit_test(test_rigid_is_exact),
    cmocka_unit_test(test_rigid_swings_threefold),
    cmocka_unit_test(test_static_twist_whatever_the_start),
    cmocka_unit_test(test_full_model),
    cmocka_unit_test(test_few_lines_asked_for),
    cmocka_unit_test(test_same_bits),
    cmocka_unit_test(test_what_goes_wrong),
};
TEST_MAIN(tests)
