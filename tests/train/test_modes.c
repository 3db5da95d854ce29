// Free vibration against published and closed-form results. Each row says where its value is from.
#include "near.h"
#include "tacet/train.h"
#include "trains.h"
#include <math.h>
#include <stdlib.h>

typedef struct {
    size_t n;
    double *hz, *shape;
} modes;

static modes solve(const tacet_train *t)
{
    modes m = {.n = tacet_train_nodes(t)};
    m.hz = malloc(m.n * sizeof(double));
    m.shape = malloc(m.n * m.n * sizeof(double));
    assert_int_equal(tacet_train_modes(t, m.hz, m.shape), TACET_OK);
    return m;
}

static void drop(modes *m)
{
    free(m->hz);
    free(m->shape);
}

// All frequencies (rad/s if `scale` is 1/(2 pi)) of a definition, the rigid one exactly 0.
static void check_frequencies(bench_train *b, const double *expected, size_t n, double scale,
                              double rtol)
{
    tacet_train *t = bench_create(b);
    modes m = solve(t);
    assert_true(m.n >= n);
    assert_true(m.hz[0] == 0);
    for (size_t i = 0; i < n; i++)
        assert_near(m.hz[i], expected[i] * scale, 1e-15, rtol);
    drop(&m);
    tacet_train_destroy(t);
}

static void check_shape(const modes *m, size_t mode, const double *expected, double tolerance)
{
    const double *shape = &m->shape[mode * m->n];
    double by = 0; // both scaled to the first element
    for (size_t j = 0; j < m->n; j++) {
        by = expected[j] / expected[0];
        assert_near(shape[j] / shape[0], by, tolerance, tolerance);
    }
}

#define PER_RAD (1 / (2 * M_PI))

// w = sqrt(k (J1 + J2) / (J1 J2)), th2/th1 = -J1/J2: any vibration text (from memory).
static void test_two_rotors(void **state)
{
    (void)state;
    const double J[] = {2, 3}, k[] = {1e5}, w[] = {0, 288.6751346}, shape[] = {1, -2.0 / 3};
    check_frequencies(bench_chain(2, J, k), w, 2, PER_RAD, 1e-9);
    tacet_train *t = bench_create(bench_chain(2, J, k));
    modes m = solve(t);
    check_shape(&m, 1, shape, 1e-12);
    assert_near(m.shape[2], 1, 0, 0); // largest is 1 and positive
    assert_near(m.shape[0], 1, 0, 0);
    assert_near(m.shape[1], 1, 0, 0);
    assert_near(2 * M_PI * m.hz[1], sqrt(1e5 * 5 / 6), 0, 1e-14);
    drop(&m);
    tacet_train_destroy(t);
}

// Roots of w^4 - w^2 [k1/J1 + (k1 + k2)/J2 + k2/J3] + k1 k2 (J1 + J2 + J3)/(J1 J2 J3) (closed
// form).
static void test_three_rotors(void **state)
{
    (void)state;
    const double J[] = {0.7, 0.11, 2.3}, k[] = {3e4, 8e5};
    double b = k[0] / J[0] + (k[0] + k[1]) / J[1] + k[1] / J[2];
    double c = k[0] * k[1] * (J[0] + J[1] + J[2]) / (J[0] * J[1] * J[2]);
    double high = (b + sqrt(b * b - 4 * c)) / 2;
    const double w[] = {0, sqrt(c / high), sqrt(high)};
    check_frequencies(bench_chain(3, J, k), w, 3, PER_RAD, 1e-12);
}

static bench_train *three_on_a_shaft(double factor)
{
    const double J[] = {0.15 * factor, 0.30 * factor, 0.09 * factor}, length[] = {1.5, 1.0};
    bench_train *b = bench_chain(3, J, length);
    for (int i = 0; i < 2; i++) {
        b->link[i].stiffness_Nm_per_rad = NAN;
        b->link[i].length_m = length[i];
        b->link[i].outer_m = 0.070;
        b->link[i].shear_modulus_Pa = 84e9;
    }
    return b;
}

// qna.carrieradda.com/26013 and /26108 print 171 and 277 Hz, nodes at 1.146 m, and at 0.4356 m
// from the left and 0.726 m from the right rotor; exact values recomputed.
static void test_three_rotors_published(void **state)
{
    (void)state;
    const double hz[] = {0, 170.687713, 277.034007}, doubled[] = {0, 120.694439, 195.892625};
    check_frequencies(three_on_a_shaft(1), hz, 3, 1, 1e-8);
    check_frequencies(three_on_a_shaft(2), doubled, 3, 1, 1e-8);
    tacet_train *t = bench_create(three_on_a_shaft(1));
    modes m = solve(t);
    assert_near(m.hz[1], 171, 0.5, 0);
    assert_near(m.hz[2], 277, 0.5, 0);
    const double first[] = {1, -0.307000, -0.643335}, second[] = {1, -2.443000, 6.476668};
    check_shape(&m, 1, first, 2e-6);
    check_shape(&m, 2, second, 2e-6);
    const double *a = &m.shape[3], *b = &m.shape[6];
    assert_near(1.5 * a[0] / (a[0] - a[1]), 1.147667, 1e-6, 0);
    assert_near(1.5 * b[0] / (b[0] - b[1]), 0.435667, 1e-6, 0);
    assert_near(1.0 * b[2] / (b[2] - b[1]), 0.726111, 1e-6, 0);
    drop(&m);
    tacet_train_destroy(t);
}

// B. K. Sarkar, Theory of Machines, ex. 12 p. 298: 4.20 Hz (with pi = 3.147: 4.1985), exact
// 4.202126. Rotor A 400 kg m2 at 1500 rpm, B 1400 kg m2 at 500 rpm; the gears are massless, here
// 1e-6 kg m2.
static void test_geared_pair(void **state)
{
    (void)state;
    for (int turned = 0; turned < 2; turned++) { // gear link stated from either side
        bench_train *b = bench_new();
        size_t A = bench_node(b, 400), gear = bench_node(b, 1e-6), B = bench_node(b, 1400);
        double ka = M_PI * 84e9 * pow(0.045, 4) / (32 * 0.18);
        double kb = M_PI * 84e9 * pow(0.090, 4) / (32 * 0.45);
        bench_link(b, A, gear, ka);
        size_t stage = turned ? bench_link(b, B, gear, kb / 9) : bench_link(b, gear, B, kb);
        b->link[stage].gear_ratio = turned ? 1.0 / 3 : 3;
        b->d.flywheel = b->node[A].name;
        tacet_train *t = bench_create(b);
        modes m = solve(t);
        assert_near(m.hz[1], 4.202126, 0, 2e-7);
        assert_near(m.hz[1], 4.20, 0.005, 0);
        assert_near(tacet_train_node_ratio(t, B), 1.0 / 3, 0, 1e-15);
        assert_near(tacet_train_total_inertia(t), 400 + 1400.0 / 9, 2e-6, 0);
        // shapes are in the nodes' own angles: momentum at crank speed is balanced
        assert_near(400 * m.shape[3] + 1400 * m.shape[5] / 3, 0, 1e-3, 0);
        drop(&m);
        tacet_train_destroy(t);
    }
}

// T. Bevan, The Theory of Machines, ex. 11(a) p. 587: prints 84.8 /s. With g = 386.089 in/s2:
// 84.5948. D turns at 0.6 of A's speed; 66.5 in of 2.75 in shaft at A's speed, G = 12e6 psi.
static void test_geared_pair_bevan(void **state)
{
    (void)state;
    double inch = 0.0254, lb_in2 = 0.45359237 * inch * inch;
    double psi = 0.45359237 * 9.80665 / (inch * inch);
    bench_train *b = bench_new();
    size_t A = bench_node(b, 1500 * lb_in2), D = bench_node(b, 50000 * lb_in2);
    double k = M_PI * 12e6 * psi * pow(2.75 * inch, 4) / (32 * 66.5 * inch);
    b->link[bench_link(b, D, A, k)].gear_ratio = 0.6;
    tacet_train *t = bench_create(b);
    modes m = solve(t);
    assert_near(m.hz[1], 84.5948, 1.5e-4, 0);
    assert_near(m.hz[1], 84.8, 0, 3e-3);
    drop(&m);
    tacet_train_destroy(t);
}

// w_i = 2 sqrt(k/J) sin(i pi / (2n)); th_j ~ cos(i pi (2j - 1)/(2n)) (from memory, any text).
static void test_equal_disks_free(void **state)
{
    (void)state;
    enum { N = 6 };
    double J[N], k[N], w[N];
    for (int i = 0; i < N; i++)
        J[i] = k[i] = 1, w[i] = 2 * sin(i * M_PI / (2 * N));
    check_frequencies(bench_chain(N, J, k), w, N, PER_RAD, 1e-13);
    assert_near(w[1], 0.5176380902, 1e-10, 0);
    tacet_train *t = bench_create(bench_chain(N, J, k));
    modes m = solve(t);
    for (int i = 0; i < N; i++) {
        double shape[N];
        for (int j = 0; j < N; j++)
            shape[j] = cos(i * M_PI * (2 * j + 1) / (2 * N));
        check_shape(&m, (size_t)i, shape, 1e-11);
    }
    drop(&m);
    tacet_train_destroy(t);
}

#define GROUND 1e13 // an inertia so large that it stands still

// Last disk tied to ground: w_i = 2 sqrt(k/J) sin((2i - 1) pi/(2 (2n + 1))) (from memory).
static void test_equal_disks_grounded(void **state)
{
    (void)state;
    enum { N = 6 };
    double J[N + 1], k[N], w[N + 1] = {0};
    for (int i = 0; i < N; i++)
        J[i] = k[i] = 1, w[i + 1] = 2 * sin((2 * i + 1) * M_PI / (2 * (2 * N + 1)));
    J[N] = GROUND;
    check_frequencies(bench_chain(N + 1, J, k), w, N + 1, PER_RAD, 1e-12);
    assert_near(w[1], 0.2410733605, 1e-10, 0);
    assert_near(w[6], 1.9418836349, 1e-10, 0);
    tacet_train *t = bench_create(bench_chain(N + 1, J, k));
    modes m = solve(t);
    const double shape[] = {1, 0.9418836, 0.8290284, 0.6679931, 0.4681364, 0.2410734, 0};
    check_shape(&m, 1, shape, 1e-7);
    drop(&m);
    tacet_train_destroy(t);
}

// Free-free uniform shaft f_n = n c/(2L), c = sqrt(G/rho); N elements with half inertias at the
// ends converge as 1/N^2 (from memory; lumped values recomputed).
static void test_uniform_shaft(void **state)
{
    (void)state;
    const int elements[] = {10, 50, 200};
    const double hz[3][3] = {{0, 1589.617861, 3140.094054},
                             {0, 1595.911222, 3190.247472},
                             {0, 1596.157359, 3192.216259}};
    double rho = 7850, G = 80e9, section = M_PI * pow(0.06, 4) / 32, exact = sqrt(G / rho) / 2;
    double error[3];
    for (int i = 0; i < 3; i++) {
        int n = elements[i];
        bench_train *b = bench_new();
        for (int j = 0; j <= n; j++)
            bench_node(b, rho * section / n * (j == 0 || j == n ? 0.5 : 1));
        for (int j = 0; j < n; j++)
            bench_link(b, (size_t)j, (size_t)j + 1, G * section * n);
        check_frequencies(b, hz[i], 3, 1, 1e-9);
        error[i] = exact - hz[i][1];
    }
    assert_near(exact, 1596.173769, 0, 1e-9);
    assert_near(error[0] / error[1], 25, 0, 0.01);
    assert_near(error[1] / error[2], 16, 0, 0.01);
}

static bench_train *hub_with_branches(void)
{
    bench_train *b = bench_new();
    size_t hub = bench_node(b, 0.5), one = bench_node(b, 0.2), two = bench_node(b, 0.2);
    bench_link(b, hub, one, 1000);
    bench_link(b, two, hub, 1000);
    return b;
}

// Hub with two equal branches: sqrt(k/J), hub at rest, and sqrt(k (J0 + 2J)/(J0 J)) (closed form).
static void test_branches(void **state)
{
    (void)state;
    const double w[] = {0, 70.71067812, 94.86832981};
    check_frequencies(hub_with_branches(), w, 3, PER_RAD, 1e-9);
    tacet_train *t = bench_create(hub_with_branches());
    modes m = solve(t);
    assert_near(m.shape[3], 0, 1e-13, 0);
    assert_near(m.shape[4] + m.shape[5], 0, 1e-13, 0);
    assert_near(m.shape[6] / m.shape[7], -2 * 0.2 / 0.5, 1e-12, 0);
    drop(&m);
    tacet_train_destroy(t);
}

// B. K. Sarkar, Theory of Machines, ex. 3 p. 291: wheel 450 kg, radius of gyration 0.5 m, between
// fixed shafts d = 50 mm, 0.9 and 0.6 m long, G = 84 GPa: prints 5.673 Hz; exact 5.677697.
static void test_wheel_between_shafts(void **state)
{
    (void)state;
    bench_train *b = bench_new();
    size_t left = bench_node(b, GROUND), wheel = bench_node(b, 450 * 0.25);
    size_t right = bench_node(b, GROUND);
    double section = M_PI * pow(0.05, 4) / 32;
    bench_link(b, left, wheel, 84e9 * section / 0.9);
    bench_link(b, wheel, right, 84e9 * section / 0.6);
    tacet_train *t = bench_create(b);
    modes m = solve(t);
    assert_near(m.hz[2], 5.677697, 0, 1e-6); // mode 1: the two grounds against one another
    assert_near(m.hz[2], 5.673, 0, 1e-3);
    drop(&m);
    tacet_train_destroy(t);
}

static const double six_J[] = {0.012, 0.03, 0.03, 0.03, 0.03, 0.14};
static const double six_k[] = {4e5, 4e5, 4e5, 4e5, 4e5};

// Constructed six-mass train, recomputed with another eigensolver.
static void test_six_masses(void **state)
{
    (void)state;
    const double hz[] = {0, 244.799011, 560.964648, 847.922708, 1059.32013, 1184.42971};
    check_frequencies(bench_chain(6, six_J, six_k), hz, 6, 1, 1e-8);
    tacet_train *t = bench_create(bench_chain(6, six_J, six_k));
    modes m = solve(t);
    const double first[] = {1, 0.929026, 0.693210, 0.334393, -0.083756, -0.487044};
    const double second[] = {1, 0.627306, -0.329870, -0.979695, -0.716705, 0.214064};
    check_shape(&m, 1, first, 2e-6);
    check_shape(&m, 2, second, 2e-6);
    drop(&m);
    tacet_train_destroy(t);
}

// Chains: mode i has i nodes (sign changes). All: modes are orthogonal over J, elastic ones carry
// no momentum, and the strain energy equals w^2 / 2 sum J th^2 (closed form).
static void check_rules(tacet_train *t, bool chain)
{
    modes m = solve(t);
    for (size_t i = 0; i < m.n; i++) {
        const double *a = &m.shape[i * m.n];
        size_t changes = 0;
        double momentum = 0, twist = 0, kinetic = 0;
        for (size_t j = 0; j < m.n; j++) {
            double J = tacet_train_node_inertia(t, j), ratio = tacet_train_node_ratio(t, j);
            momentum += J * ratio * a[j];
            kinetic += J * a[j] * a[j];
            if (j && a[j] / ratio * a[j - 1] / tacet_train_node_ratio(t, j - 1) < 0) changes++;
        }
        for (size_t e = 0; e < tacet_train_links(t); e++) {
            tacet_link_info l = tacet_train_link_info(t, e);
            double u = a[l.from] / l.gear_ratio - a[l.to];
            twist += l.stiffness_Nm_per_rad * u * u;
        }
        double w = 2 * M_PI * m.hz[i];
        assert_near(twist, w * w * kinetic, 0, i ? 1e-10 : 0);
        if (i) assert_near(momentum, 0, 1e-12 * tacet_train_total_inertia(t), 0);
        if (chain) assert_int_equal(changes, i);
        for (size_t k = 0; k < i; k++) {
            double product = 0, other = 0;
            for (size_t j = 0; j < m.n; j++) {
                double J = tacet_train_node_inertia(t, j);
                product += J * a[j] * m.shape[k * m.n + j];
                other += J * m.shape[k * m.n + j] * m.shape[k * m.n + j];
            }
            assert_near(product / sqrt(kinetic * other), 0, 1e-10, 0);
        }
    }
    drop(&m);
    tacet_train_destroy(t);
}

static void test_rules_of_modes(void **state)
{
    (void)state;
    check_rules(bench_create(bench_chain(6, six_J, six_k)), true);
    check_rules(bench_create(forwarder()), true);
    check_rules(bench_create(brush_truck()), true);
}

// Modes of the two demo trains from an independent eigensolver, to the digits that were kept; the
// reciprocating share there was rounded, which moves crank modes by 2e-4. (To 1e-9 against LAPACK
// in tests/cross.)
static void test_demo_trains(void **state)
{
    (void)state;
    const double six[] = {0, 21.86, 135.6, 166.1, 250.6, 563.1, 883.7, 1162.9};
    const double eight[] = {0, 5.67, 12.97, 25.62, 111.9, 181.2, 241.0, 357.3, 695, 1018};
    tacet_train *t = bench_create(forwarder());
    modes m = solve(t);
    for (int i = 0; i < 8; i++)
        assert_near(m.hz[i], six[i], i == 1 ? 0.005 : 0.05, 2e-4);
    assert_near(tacet_train_total_inertia(t), 1.995, 0.0005, 0);
    drop(&m);
    tacet_train_destroy(t);
    t = bench_create(brush_truck());
    m = solve(t);
    for (int i = 0; i < 10; i++)
        assert_near(m.hz[i], eight[i], i < 4 ? 0.005 : i < 8 ? 0.05 : 0.5, 2e-4);
    // with the axle referred to crank speed by hand
    assert_near(tacet_train_node_ratio(t, 11), 1 / 3.73, 0, 1e-15);
    drop(&m);
    tacet_train_destroy(t);
}

// The axle's nodes and links referred to crank speed by hand: the same modes.
static void test_gear_referred_by_hand(void **state)
{
    (void)state;
    tacet_train *geared = bench_create(brush_truck());
    bench_train *b = brush_truck();
    for (int i = 10; i < 12; i++)
        b->node[i].inertia_kgm2 /= 3.73 * 3.73;
    for (int i = 9; i < 11; i++)
        b->link[i].stiffness_Nm_per_rad /= 3.73 * 3.73;
    b->link[9].gear_ratio = 1;
    tacet_train *plain = bench_create(b);
    modes g = solve(geared), p = solve(plain);
    for (size_t i = 0; i < g.n; i++)
        assert_near(g.hz[i], p.hz[i], 0, 1e-12);
    // own angle of a wheel is the referred one over the ratio
    for (size_t i = 1; i < 4; i++)
        assert_near(g.shape[i * g.n + 11] / g.shape[i * g.n],
                    p.shape[i * p.n + 11] / p.shape[i * p.n] / 3.73, 0, 1e-10);
    drop(&g);
    drop(&p);
    tacet_train_destroy(geared);
    tacet_train_destroy(plain);
}

static void test_turning_against_one_another(void **state)
{
    (void)state;
    const double J[] = {2, 3}, k[] = {1e5};
    bench_train *b = bench_chain(2, J, k);
    b->link[0].gear_ratio = -1;
    tacet_train *t = bench_create(b);
    modes m = solve(t);
    assert_near(2 * M_PI * m.hz[1], 288.6751346, 0, 1e-9);
    assert_near(m.shape[0] / m.shape[1], -1, 1e-15, 0);      // rigid: against one another
    assert_near(m.shape[2] / m.shape[3], 3.0 / 2, 1e-12, 0); // elastic: alike
    assert_near(tacet_train_node_ratio(t, 0), -1, 0, 0);
    drop(&m);
    tacet_train_destroy(t);
}

static void test_one_node(void **state)
{
    (void)state;
    bench_train *b = bench_new();
    bench_node(b, 2);
    tacet_train *t = bench_create(b);
    double hz = 1, shape = 0;
    assert_int_equal(tacet_train_modes(t, &hz, &shape), TACET_OK);
    assert_near(hz, 0, 0, 0);
    assert_near(shape, 1, 0, 0);
    tacet_train_destroy(t);
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_two_rotors),
    cmocka_unit_test(test_three_rotors),
    cmocka_unit_test(test_three_rotors_published),
    cmocka_unit_test(test_geared_pair),
    cmocka_unit_test(test_geared_pair_bevan),
    cmocka_unit_test(test_equal_disks_free),
    cmocka_unit_test(test_equal_disks_grounded),
    cmocka_unit_test(test_uniform_shaft),
    cmocka_unit_test(test_branches),
    cmocka_unit_test(test_wheel_between_shafts),
    cmocka_unit_test(test_six_masses),
    cmocka_unit_test(test_rules_of_modes),
    cmocka_unit_test(test_demo_trains),
    cmocka_unit_test(test_gear_referred_by_hand),
    cmocka_unit_test(test_turning_against_one_another),
    cmocka_unit_test(test_one_node),
};
TEST_MAIN(tests)
