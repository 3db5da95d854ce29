// Forced response at constant speed against published and closed-form results.
#include "near.h"
#include "tacet/train.h"
#include "trains.h"
#include <math.h>
#include <stdlib.h>

#define GROUND 1e13 // an inertia so large that it stands still

// A train, its memory and torques on n throws for n_lines lines.
typedef struct {
    tacet_train *t;
    tacet_train_work *w;
    tacet_arena *arena;
    tacet_train_motion m;
    tacet_spectrum torque[8];
    size_t node[8], n;
} rig;

static rig rig_new(bench_train *b, size_t n, const size_t *node, unsigned revolutions,
                   size_t n_lines)
{
    rig r = {.t = bench_create(b), .n = n, .arena = tacet_arena_create()};
    assert_non_null(r.arena);
    assert_int_equal(tacet_train_work_create(r.t, n_lines, n, &r.w), TACET_OK);
    assert_int_equal(tacet_train_motion_init(&r.m, r.t, n_lines, r.arena), TACET_OK);
    for (size_t i = 0; i < n; i++) {
        r.node[i] = node[i];
        assert_int_equal(tacet_spectrum_init(&r.torque[i], n_lines, r.arena), TACET_OK);
        r.torque[i].revolutions = revolutions;
    }
    return r;
}

static void rig_solve(rig *r, double speed)
{
    assert_int_equal(tacet_train_harmonic(r->t, speed, r->n, r->node, r->torque, r->w, &r->m),
                     TACET_OK);
}

static void rig_drop(rig *r)
{
    tacet_train_work_destroy(r->w);
    tacet_train_destroy(r->t);
    tacet_arena_destroy(r->arena);
}

// Mass 1, spring 1 and damper to ground; unit torque at w = r (line 1 of one revolution).
static rig single(double zeta)
{
    bench_train *b = bench_new();
    size_t mass = bench_node(b, 1), ground = bench_node(b, GROUND), throws[] = {mass};
    b->link[bench_link(b, mass, ground, 1)].damping_Nms_per_rad = 2 * zeta;
    rig r = rig_new(b, 1, throws, 1, 1);
    r.torque[0].line[1] = 1;
    return r;
}

// M = 1/sqrt((1 - r^2)^2 + (2 z r)^2), phase = atan2(2 z r, 1 - r^2), TR = M sqrt(1 + (2 z r)^2)
// (from memory, any vibration text).
static void test_single_mass(void **state)
{
    (void)state;
    const double row[][5] = {{0.5, 0.1, 1.321637, 7.5946, 1.328229},
                             {1, 0.05, 10, 90, 10.049876},
                             {2, 0.1, 0.330409, 172.4054, 0.355862},
                             {M_SQRT2, 0.25, 0.816497, 144.7356, 1.000000},
                             {3, 0.05, 0.124912, 177.8524, 0.130412}};
    for (int i = 0; i < 5; i++) {
        rig r = single(row[i][1]);
        rig_solve(&r, row[i][0]);
        double complex x = r.m.angle_rad[0].line[1], T = r.m.link_torque_Nm[0].line[1];
        assert_near(cabs(x), row[i][2], 5.1e-7, 0);
        assert_near(-carg(x) * 180 / M_PI, row[i][3], 6e-5, 0); // the angle lags
        assert_near(cabs(T), row[i][4], 5.1e-7, 0);
        rig_drop(&r);
    }
}

// Main inertia 1 on spring 1 with an absorber; amplitude over static deflection at frequency g.
typedef struct {
    double mu, tuning, c, k; // k < 0: mu tuning^2
} absorber;

static double main_amplitude(absorber a, double g)
{
    bench_train *b = bench_new();
    size_t mass = bench_node(b, 1), ground = bench_node(b, GROUND), small = bench_node(b, a.mu);
    size_t throws[] = {mass};
    bench_link(b, mass, ground, 1);
    size_t link = bench_link(b, small, mass, a.k > 0 ? a.k : a.mu * a.tuning * a.tuning);
    b->link[link].damping_Nms_per_rad = a.c;
    rig r = rig_new(b, 1, throws, 1, 1);
    r.torque[0].line[1] = 1;
    rig_solve(&r, g);
    double x = cabs(r.m.angle_rad[mass].line[1]);
    rig_drop(&r);
    return x;
}

// Largest amplitude between two frequencies, by golden section.
static double peak_between(absorber a, double low, double high, double *at)
{
    double s = (sqrt(5) - 1) / 2;
    for (int i = 0; i < 60; i++) {
        double p = high - s * (high - low), q = low + s * (high - low);
        if (main_amplitude(a, p) > main_amplitude(a, q))
            high = q;
        else
            low = p;
    }
    *at = (low + high) / 2;
    return main_amplitude(a, *at);
}

// Den Hartog, Mechanical Vibrations, ch. 3, and Brock 1946 (from memory; maxima recomputed):
// f = 1/(1 + mu), fixed points g^2 = (1 -/+ sqrt(mu/(2 + mu)))/(1 + mu) of height sqrt(1 + 2/mu),
// c/(2 m_a w_a) = sqrt(3 mu/(8 (1 + mu))).
static void test_tuned_absorber(void **state)
{
    (void)state;
    const double mus[] = {0.05, 0.1, 0.2, 0.25};
    const double heights[] = {6.403124, 4.582576, 3.316625, 3.0};
    for (int i = 0; i < 4; i++) {
        double mu = mus[i], f = 1 / (1 + mu);
        for (int side = -1; side <= 1; side += 2)
            for (int damping = 1; damping <= 2; damping++) {
                double g = sqrt((1 + side * sqrt(mu / (2 + mu))) / (1 + mu));
                absorber a = {mu, f, 2 * mu * f * 0.13 * damping, -1};
                assert_near(main_amplitude(a, g), heights[i], 0, 1e-6);
            }
    }
    double mu = 0.1, f = 1 / 1.1, z = sqrt(3 * mu / (8 * (1 + mu))), at;
    assert_near(z, 0.184637, 1e-6, 0);
    absorber a = {mu, f, 2 * mu * f * z, -1};
    assert_near(peak_between(a, 0.75, 0.95, &at), 4.588367, 0, 1e-6);
    assert_near(at, 0.847856, 1e-5, 0);
    assert_near(peak_between(a, 0.98, 1.2, &at), 4.590220, 0, 1e-6);
    assert_near(at, 1.059288, 1e-5, 0);
}

// Nishihara & Asami, J. Vib. Acoust. 124, 2002 (from memory; confirmed by numeric search): the
// absorber with the lowest peaks has both equally high.
static void test_best_absorber(void **state)
{
    (void)state;
    const double row[][4] = {{0.1, 4.589166, 0.909058, 0.185470},
                             {0.2, 3.325439, 0.833223, 0.252173}};
    for (int i = 0; i < 2; i++) {
        double mu = row[i][0], r = sqrt(4 + 3 * mu), at;
        double f = 2 / (1 + mu) *
                   sqrt(2 * (16 + 23 * mu + 9 * mu * mu + 2 * (2 + mu) * r) /
                        (3 * (64 + 80 * mu + 27 * mu * mu)));
        double z = sqrt((8 + 9 * mu - 4 * r) / (1 + mu)) / 4;
        assert_near(f, row[i][2], 1e-6, 0);
        assert_near(z, row[i][3], 1e-6, 0);
        absorber a = {mu, f, 2 * mu * f * z, -1};
        double low = peak_between(a, 0.6, 0.9, &at), high = peak_between(a, 0.9, 1.3, &at);
        assert_near(low, row[i][1], 0, 1e-6);
        assert_near(high, low, 0, 1e-9);
    }
}

// Untuned viscous damper (Houdaille; Thomson, Den Hartog, from memory): z = c/(2 J_d w_n) =
// 1/sqrt(2 (1 + mu)(2 + mu)) gives the peak 1 + 2/mu at g = sqrt(2/(2 + mu)), a point that all
// dampings pass through. The link's spring is too soft to count.
static void test_viscous_damper(void **state)
{
    (void)state;
    const double row[][4] = {{0.1, 0.465242, 21, 0.975900},
                             {0.25, 0.421637, 9, 0.942809},
                             {0.5, 0.365148, 5, 0.894427},
                             {1, 0.288675, 3, 0.816497}};
    for (int i = 0; i < 4; i++) {
        double mu = row[i][0], z = 1 / sqrt(2 * (1 + mu) * (2 + mu)), at;
        assert_near(z, row[i][1], 1e-6, 0);
        absorber a = {mu, 0, 2 * mu * z, 1e-9};
        assert_near(peak_between(a, 0.5, 1.5, &at), row[i][2], 0, 1e-6);
        assert_near(at, row[i][3], 1e-5, 0);
        a.c *= 3;
        assert_near(main_amplitude(a, row[i][3]), row[i][2], 0, 1e-5);
    }
}

// Two inertias, torque on the first: twist = (T0 J2/(J1 + J2)/k)/sqrt((1 - r^2)^2 + (2 z r)^2), w_n
// = sqrt(k/Jr), z = c/(2 sqrt(k Jr)) (closed form).
static void test_two_inertias(void **state)
{
    (void)state;
    const double J[] = {0.1, 0.5}, k[] = {2e4};
    const size_t throws[] = {0};
    bench_train *b = bench_chain(2, J, k);
    b->link[0].damping_Nms_per_rad = 5;
    rig r = rig_new(b, 1, throws, 1, 1);
    r.torque[0].line[1] = 10;
    rig_solve(&r, 400);
    double complex one = r.m.angle_rad[0].line[1], two = r.m.angle_rad[1].line[1];
    assert_near(cabs(one - two), 0.00119728286, 0, 1e-8);
    assert_near(cabs(one), 8.98460872e-4, 0, 1e-8);
    assert_near(cabs(two), 3.00813595e-4, 0, 1e-8);
    assert_near(cabs(r.m.link_torque_Nm[0].line[1]), 24.0650876, 0, 1e-8);
    // the link's torque is what accelerates the second inertia: in phase with -w^2 J2 th2
    double complex inertial = -400.0 * 400 * 0.5 * two;
    assert_near(cabs(r.m.link_torque_Nm[0].line[1] - inertial), 0, 1e-12, 0);
    rig_drop(&r);
}

// Six-mass train with 2 N m s/rad to ground and 100 N m on masses 2 to 5, phase - order x firing
// angle, firing order 1-3-4-2. Constructed; recomputed with a dense solver.
static void test_four_cylinders(void **state)
{
    (void)state;
    const double J[] = {0.012, 0.03, 0.03, 0.03, 0.03, 0.14}, k[] = {4e5, 4e5, 4e5, 4e5, 4e5};
    const size_t throws[] = {1, 2, 3, 4};
    const double firing[] = {0, 540, 180, 360}; // cylinders 1 2 3 4
    const double row[][3] = {{2, 3000, 0.162651},
                             {4, 6000, 0.0627939},
                             {4, 5000, 0.0935980},
                             {6, 3500, 0.0817672},
                             {0.5, 3000, 0.0333280}};
    const double torque[] = {85.98891, 172.76084, 202.70419, 165.98568, 74.86777};
    bench_train *b = bench_chain(6, J, k);
    for (int i = 1; i < 5; i++)
        b->node[i].damping_Nms_per_rad = 2;
    rig r = rig_new(b, 4, throws, 2, 16);
    for (int i = 0; i < 5; i++) {
        size_t h = (size_t)(2 * row[i][0]);
        for (int c = 0; c < 4; c++) {
            tacet_spectrum_zero(&r.torque[c]);
            r.torque[c].line[h] = 100 * cexp(-I * row[i][0] * firing[c] * M_PI / 180);
        }
        rig_solve(&r, row[i][1] * 2 * M_PI / 60);
        assert_near(cabs(r.m.angle_rad[0].line[h]) * 180 / M_PI, row[i][2], 0, 2e-6);
        if (i != 2) continue;
        for (int e = 0; e < 5; e++)
            assert_near(cabs(r.m.link_torque_Nm[e].line[h]), torque[e], 0, 1e-7);
    }
    rig_drop(&r);
}

// A rigid shaft's speed varies by T/(J q W): T = 100 N m, J = 0.2, q = 2, 1000 rpm: 2.387324 rad/s
// (closed form).
static void test_rigid_shaft(void **state)
{
    (void)state;
    const size_t throws[] = {0};
    bench_train *b = bench_new();
    bench_node(b, 0.2);
    rig r = rig_new(b, 1, throws, 1, 4);
    r.torque[0].line[2] = 100;
    double speed = 1000 * 2 * M_PI / 60;
    rig_solve(&r, speed);
    double complex v = I * 2 * speed * r.m.angle_rad[0].line[2];
    assert_near(cabs(v), 2.387324, 0, 1e-6);
    assert_near(carg(v), -M_PI / 2, 1e-12, 0); // speed follows torque by a quarter period
    rig_drop(&r);
}

// The mean torque flows to the load node; a gear stage hands on T ratio; beyond the load nothing.
static void test_means(void **state)
{
    (void)state;
    bench_train *b = bench_new();
    const size_t throws[] = {0, 1};
    for (int i = 0; i < 6; i++)
        bench_node(b, 0.1);
    bench_link(b, 1, 0, 1e5);
    bench_link(b, 1, 2, 1e5);
    b->link[bench_link(b, 2, 3, 1e5)].gear_ratio = 4;
    b->link[bench_link(b, 4, 3, 1e5)].gear_ratio = -0.5; // stated from the load's side
    bench_link(b, 2, 5, 1e5);                            // a branch without load
    b->d.flywheel = b->node[2].name;
    b->d.load = b->node[4].name;
    rig r = rig_new(b, 2, throws, 1, 2);
    r.torque[0].mean = 30;
    r.torque[1].mean = 70;
    rig_solve(&r, 100);
    const double expected[] = {-30, 100, 400, -400, 0};
    for (int e = 0; e < 5; e++)
        assert_near(r.m.link_torque_Nm[e].mean, expected[e], 1e-12, 0);
    assert_near(tacet_train_node_ratio(r.t, 4), -0.125, 0, 1e-15);
    rig_drop(&r);
}

// Doubling every torque doubles every amplitude; a second torque adds; and a fresh memory, one used
// for another speed, and more lines than before give the same bits.
static void test_linear_and_repeatable(void **state)
{
    (void)state;
    enum { LINES = 336 };
    const size_t throws[] = {2, 3, 4, 5, 6, 7};
    rig a = rig_new(forwarder(), 6, throws, 14, LINES),
        b = rig_new(forwarder(), 6, throws, 14, LINES);
    for (int i = 0; i < 6; i++)
        for (int h = 1; h <= LINES; h++) {
            a.torque[i].line[h] = cexp(I * (i + 1) * h) * 100.0 / h;
            b.torque[i].line[h] = 2 * a.torque[i].line[h];
        }
    rig_solve(&b, 50); // another speed first
    rig_solve(&b, 94);
    rig_solve(&a, 94);
    for (size_t j = 0; j < a.m.n_nodes; j++)
        for (int h = 1; h <= LINES; h++)
            assert_true(b.m.angle_rad[j].line[h] == 2 * a.m.angle_rad[j].line[h]);
    for (size_t e = 0; e < a.m.n_links; e++)
        for (int h = 1; h <= LINES; h++)
            assert_true(b.m.link_torque_Nm[e].line[h] == 2 * a.m.link_torque_Nm[e].line[h]);
    for (int i = 0; i < 6; i++)
        b.torque[i].n_lines = 200; // fewer lines: the same factors
    rig_solve(&b, 94);
    assert_int_equal(b.m.angle_rad[0].n_lines, 200);
    for (int h = 1; h <= 200; h++)
        assert_true(b.m.angle_rad[4].line[h] == 2 * a.m.angle_rad[4].line[h]);
    rig_drop(&a);
    rig_drop(&b);
}

// Every node's equation of motion holds on every line, with K as the train tells it: gears, branch,
// ground damping, all kinds of link damping.
static void test_equations_hold(void **state)
{
    (void)state;
    enum { LINES = 300 };
    const size_t throws[] = {2, 3, 4, 5};
    bench_train *b = brush_truck();
    b->node[7].damping_Nms_per_rad = 0.3;
    b->node[10].damping_Nms_per_rad = 20;
    b->link[4].loss_factor = NAN;
    b->link[4].damping_ratio = 0.02;
    b->link[5].loss_law = TACET_LOSS_CONSTANT;
    size_t side = bench_node(b, 0.01); // a branch, geared against the rest
    size_t link = bench_link(b, side, 8, 3e3);
    b->link[link].gear_ratio = -1.7;
    b->link[link].loss_factor = 0.3;
    b->d.flywheel = b->node[6].name;
    rig r = rig_new(b, 4, throws, 8, LINES);
    for (int i = 0; i < 4; i++)
        for (int h = 1; h <= LINES; h++)
            r.torque[i].line[h] = cexp(I * (i + 1) * h) * 100.0 / h;
    double base = 110.0 / 8;
    rig_solve(&r, 110);
    for (int h = 1; h <= LINES; h++) {
        double w = base * h;
        double complex left[16] = {0};
        double scale[16] = {0};
        for (size_t j = 0; j < r.m.n_nodes; j++) {
            double complex x = r.m.angle_rad[j].line[h];
            left[j] = (-w * w * tacet_train_node_inertia(r.t, j) +
                       I * w * tacet_train_node_damping(r.t, j)) *
                      x;
            scale[j] = cabs(left[j]);
        }
        for (size_t e = 0; e < r.m.n_links; e++) {
            tacet_link_info l = tacet_train_link_info(r.t, e);
            double complex twist =
                r.m.angle_rad[l.from].line[h] / l.gear_ratio - r.m.angle_rad[l.to].line[h];
            double complex K = tacet_train_link_impedance(r.t, e, w);
            double complex T = r.m.link_torque_Nm[e].line[h];
            double digits = cabs(K) * cabs(r.m.angle_rad[l.to].line[h]); // lost in the difference
            assert_near(cabs(K * twist - T), 0, 1e-11 * cabs(T) + 1e-14 * digits, 0);
            left[l.to] -= T;
            left[l.from] += T / l.gear_ratio;
            scale[l.to] += cabs(T);
            scale[l.from] += cabs(T / l.gear_ratio);
        }
        for (size_t i = 0; i < 4; i++)
            left[throws[i]] -= r.torque[i].line[h];
        for (size_t j = 0; j < r.m.n_nodes; j++)
            assert_near(cabs(left[j]), 0, 1e-10 * scale[j], 0);
    }
    rig_drop(&r);
}

static void test_refusals(void **state)
{
    (void)state;
    const size_t throws[] = {2, 3};
    rig r = rig_new(forwarder(), 2, throws, 2, 10);
    r.torque[0].line[3] = 1;
    assert_int_equal(tacet_train_harmonic(r.t, 0, 2, throws, r.torque, r.w, &r.m), TACET_BAD_INPUT);
    assert_int_equal(tacet_train_harmonic(r.t, NAN, 2, throws, r.torque, r.w, &r.m),
                     TACET_BAD_INPUT);
    assert_int_equal(tacet_train_harmonic(r.t, 100, 0, throws, r.torque, r.w, &r.m),
                     TACET_BAD_INPUT);
    const size_t beyond[] = {2, 11};
    assert_int_equal(tacet_train_harmonic(r.t, 100, 2, beyond, r.torque, r.w, &r.m),
                     TACET_BAD_INPUT);
    r.torque[1].revolutions = 3;
    assert_int_equal(tacet_train_harmonic(r.t, 100, 2, throws, r.torque, r.w, &r.m),
                     TACET_BAD_INPUT);
    r.torque[1].revolutions = 2;
    r.torque[1].line[3] = NAN;
    assert_int_equal(tacet_train_harmonic(r.t, 100, 2, throws, r.torque, r.w, &r.m),
                     TACET_NOT_FINITE);
    r.torque[1].line[3] = 0;
    r.torque[1].mean = INFINITY;
    assert_int_equal(tacet_train_harmonic(r.t, 100, 2, throws, r.torque, r.w, &r.m),
                     TACET_NOT_FINITE);
    r.torque[1].mean = 0;
    rig_solve(&r, 100);
    rig_drop(&r);
    tacet_train *t = bench_create(forwarder());
    tacet_train_work *w = NULL;
    assert_int_equal(tacet_train_work_create(t, 0, 1, &w), TACET_BAD_INPUT);
    assert_int_equal(tacet_train_work_create(t, 10, 0, &w), TACET_BAD_INPUT);
    assert_null(w);
    tacet_train_destroy(t);
    tacet_train_destroy(NULL);
    tacet_train_work_destroy(NULL);
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_single_mass),
    cmocka_unit_test(test_tuned_absorber),
    cmocka_unit_test(test_best_absorber),
    cmocka_unit_test(test_viscous_damper),
    cmocka_unit_test(test_two_inertias),
    cmocka_unit_test(test_four_cylinders),
    cmocka_unit_test(test_rigid_shaft),
    cmocka_unit_test(test_means),
    cmocka_unit_test(test_linear_and_repeatable),
    cmocka_unit_test(test_equations_hold),
    cmocka_unit_test(test_refusals),
};
TEST_MAIN(tests)
