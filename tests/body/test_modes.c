// Free modes, energy shares, static deflection and torque-roll axis of a body on mounts.
#include "bodies.h"
#include "near.h"
#include <math.h>
#include <string.h>

static tacet_body_modes modes_of(const bench_body *b)
{
    tacet_body *body = body_of(b, NULL);
    tacet_body_modes m;
    assert_int_equal(tacet_body_modes_of(body, &m), TACET_OK);
    assert_true(m.settled);
    tacet_body_destroy(body);
    return m;
}

// Four equal corner mounts below the centre of gravity: Himelblau and Rubin in Harris, Shock and
// Vibration Handbook, ch. 3: f_z = sqrt(4 kz / m) / 2 pi, yaw, and x-pitch, y-roll in pairs, with
// rho^2 = I / m, A = (kx/kz)(1 + az^2/rho^2) + ax^2/rho^2, B = 4 (kx/kz) ax^2/rho^2,
// (f/f_z)^2 = (A -/+ sqrt(A^2 - B)) / 2. Formula in the handbook, coupled form from memory.
static void pair(double m, double i, double k, double kz, double a, double az, double f_z,
                 double out[2])
{
    double rho = i / m, A = k / kz * (1 + az * az / rho) + a * a / rho;
    double B = 4 * k / kz * a * a / rho, root = sqrt(A * A - B);
    out[0] = f_z * sqrt((A - root) / 2);
    out[1] = f_z * sqrt((A + root) / 2);
}

static void test_four_corner_mounts(void **state)
{
    (void)state;
    const double m = 200, ax = 0.35, ay = 0.25, az = 0.15, k[3] = {1.0e5, 1.2e5, 2.5e5};
    bench_body b;
    bench_body_new(&b, m, (tacet_inertia_def){8, 14, 16, 0, 0, 0});
    for (int i = 0; i < 4; i++)
        bench_mount(&b, "m", (double[]){i & 1 ? ax : -ax, i & 2 ? ay : -ay, -az}, k);
    tacet_body_modes got = modes_of(&b);
    double f_z = sqrt(4 * k[2] / m) / (2 * M_PI), x[2], y[2];
    pair(m, 14, k[0], k[2], ax, az, f_z, x);
    pair(m, 8, k[1], k[2], ay, az, f_z, y);
    double yaw = sqrt(4 * (k[0] * ay * ay + k[1] * ax * ax) / 16) / (2 * M_PI);
    const double expected[6] = {x[0], y[0], f_z, yaw, x[1], y[1]};
    const double also[6] = {6.808403, 7.029415, 11.253954, 11.518135, 15.563743, 15.603489};
    for (int i = 0; i < 6; i++) {
        assert_near(got.hz[i], expected[i], 0, 1e-10);
        assert_near(got.hz[i], also[i], 0, 1e-6); // recomputed elsewhere by a 6 x 6 eigenproblem
    }
    assert_near(got.share[0][0], 0.978015, 1e-6, 0); // energy: x, pitch, y, roll
    assert_near(got.share[0][4], 0.021985, 1e-6, 0);
    assert_near(got.share[1][1], 0.941357, 1e-6, 0);
    assert_near(got.share[2][2], 1, 1e-9, 0);
    assert_near(got.share[5][3], 0.941357, 1e-6, 0);
}

// Three mounts and products of inertia (invented; recomputed with an independent eigensolver).
static void three_mounts(bench_body *b)
{
    bench_body_new(b, 190, (tacet_inertia_def){9.5, 6.2, 9.0, -1.1, -0.6, 0.4});
    bench_mount(b, "a", (double[]){-0.05, 0.45, 0.20}, (double[]){1.1e5, 1.0e5, 1.9e5});
    bench_mount(b, "b", (double[]){0.04, -0.48, 0.12}, (double[]){1.0e5, 0.7e5, 1.7e5});
    bench_mount(b, "c", (double[]){0.15, -0.08, -0.28}, (double[]){2.0e5, 1.5e4, 1.5e4});
}

static void test_three_mounts_with_products_of_inertia(void **state)
{
    (void)state;
    bench_body b;
    three_mounts(&b);
    tacet_body_modes got = modes_of(&b);
    const double hz[6] = {4.850417, 6.894880, 7.069639, 8.445804, 12.494348, 15.775788};
    for (int i = 0; i < 6; i++)
        assert_near(got.hz[i], hz[i], 0, 1e-6);
    assert_near(got.share[0][1], 0.99017, 1e-5, 0);
    assert_near(got.share[2][2], 0.99985, 1e-5, 0);
    assert_near(got.share[5][3], 0.90451, 1e-5, 0);
    tacet_body *body = body_of(&b, NULL);
    double complex k[36];
    tacet_body_stiffness(body, 10, k);
    assert_near(creal(k[0 * 6 + 4]), -22000, 1e-6, 0);
    assert_near(creal(k[3 * 6 + 3]), 83923, 1e-6, 0);
    assert_near(creal(k[4 * 6 + 4]), 22604.5, 1e-6, 0);
    assert_near(creal(k[5 * 6 + 5]), 47294.5, 1e-6, 0);
    assert_near(creal(k[4 * 6 + 5]), -8620, 1e-6, 0);
    double q[6];
    const double weight[6] = {0, 0, -190 * 9.80665, 0, 0, 0}, pitch[6] = {0, 0, 0, 0, 100, 0};
    assert_int_equal(tacet_body_static(body, weight, q), TACET_OK);
    assert_near(q[2], -4.969923e-3, 0, 1e-6);
    assert_near(q[3], 1.61571e-4, 0, 1e-5);
    assert_int_equal(tacet_body_static(body, pitch, q), TACET_OK);
    assert_near(q[4], 5.174e-3, 5e-7, 0);
    tacet_body_destroy(body);
}

// A pair of mounts whose compression axes lean inwards by 40 degrees. Textbook formulas, from
// memory: lateral 2 (kc sin^2 + ks cos^2), vertical 2 (kc cos^2 + ks sin^2), elastic centre above
// their line by b (L - 1) tan / (L tan^2 + 1), L = kc / ks. A lateral push at the elastic centre
// turns nothing: the moment of the lateral stiffness about the line is -height times it.
static void test_leaning_pair(void **state)
{
    (void)state;
    const double kc = 4e5, ks = 1e5, half = 0.25, phi = 40 * M_PI / 180;
    const double stiffness[3] = {ks, ks, kc};
    bench_body b;
    bench_body_new(&b, 100, (tacet_inertia_def){5, 5, 5, 0, 0, 0});
    bench_mount(&b, "plus", (double[]){0, half, 0}, stiffness);
    bench_mount(&b, "minus", (double[]){0, -half, 0}, stiffness);
    bench_turn(&b, 0, phi, 0, 0); // about +x: up goes to -y, inwards on this side
    bench_turn(&b, 1, -phi, 0, 0);
    tacet_body *body = body_of(&b, NULL);
    double complex k[36];
    tacet_body_stiffness(body, 1, k);
    assert_near(creal(k[1 * 6 + 1]), 447905.547, 0, 1e-8);
    assert_near(creal(k[2 * 6 + 2]), 552094.453, 0, 1e-8);
    assert_near(-creal(k[3 * 6 + 1]) / creal(k[1 * 6 + 1]), 0.16490214, 0, 1e-7);
    tacet_body_destroy(body);
}

static void test_no_mounts_six_zeros(void **state)
{
    (void)state;
    bench_body b;
    bench_body_new(&b, 190, (tacet_inertia_def){9.5, 6.2, 9.0, -1.1, -0.6, 0.4});
    tacet_body_modes got = modes_of(&b);
    for (int i = 0; i < 6; i++)
        assert_near(got.hz[i], 0, 0, 0);
    tacet_body *body = body_of(&b, NULL);
    double q[6];
    assert_int_equal(tacet_body_static(body, (double[]){0, 0, 1, 0, 0, 0}, q), TACET_BAD_INPUT);
    tacet_body_destroy(body);
}

// One mount, or two in line with their turns: some motion stays free, and no rounding holds it.
static void test_what_does_not_hold(void **state)
{
    (void)state;
    const double at[2][3] = {{0.31, -0.22, 0.17}, {0.62, -0.44, 0.34}}, k[3] = {1e5, 1.3e5, 2e5};
    const double weight[6] = {0, 0, -1, 0, 0, 0};
    double q[6];
    for (size_t n = 1; n <= 2; n++) {
        bench_body b;
        bench_body_new(&b, 190, (tacet_inertia_def){9.5, 6.2, 9.0, -1.1, -0.6, 0.4});
        for (size_t i = 0; i < n; i++) {
            bench_mount(&b, "m", at[i], k);
            bench_turn(&b, i, 0.3, -0.7, 1.1);
        }
        tacet_body *body = body_of(&b, NULL);
        assert_int_equal(tacet_body_static(body, weight, q), TACET_BAD_INPUT);
        tacet_body_destroy(body);
        if (n < 2) continue;
        bench_mount(&b, "m", (double[]){-0.1, 0.4, 0.2}, k); // now it is held
        body = body_of(&b, NULL);
        assert_int_equal(tacet_body_static(body, weight, q), TACET_OK);
        tacet_body_destroy(body);
    }
}

// Where answers may bend: modes, resonances, corners of curves, rising and each once.
static void test_bends(void **state)
{
    (void)state;
    bench_body b;
    forwarder_body(&b);
    tacet_resonance_def of_path[2] = {{27, 0.06, NAN, 60000}, {4.6, 0.18, NAN, 9000}};
    tacet_point_def point = {"seat", TACET_POINT_ACCELERATION, TACET_WEIGHTING_NONE};
    tacet_path_def path[2] = {{"front-left", 2, "seat", 1, of_path, 2, NULL},
                              {"front-right", 2, "seat", -1, of_path, 2, NULL}};
    double hz[2] = {3, 80}, k[2] = {540e3, 540e3};
    b.mount[0].z_N_per_m = (tacet_curve){hz, k, 2};
    b.def.points = &point, b.def.n_points = 1, b.def.paths = path, b.def.n_paths = 2;
    tacet_body *body = body_of(&b, NULL);
    tacet_arena *a = tacet_arena_create();
    const double expected[10] = {3, 4.6, 5.02, 5.96, 8.04, 8.98, 10.49, 14.54, 27, 80};
    double *got;
    size_t n;
    assert_int_equal(tacet_body_bends(body, a, &got, &n), TACET_OK);
    assert_int_equal(n, 10);
    for (size_t i = 0; i < n; i++)
        assert_near(got[i], expected[i], 0.005, 0);
    tacet_arena_destroy(a);
    tacet_body_destroy(body);
}

// The whole turned by one rotation: other axes, same modes. Positions, tensor and mounts' axes turn
// with it: I' = R I R^T, and Rx(a) Ry(b) Rz(c) is what a mount's own turn means.
static void test_turned_axes_same_modes(void **state)
{
    (void)state;
    bench_body b, t;
    three_mounts(&b);
    double a = 0.4, c = -1.1, d = 0.7; // about x, new y, new z
    double ca = cos(a), sa = sin(a), cb = cos(c), sb = sin(c), cc = cos(d), sc = sin(d);
    double rx[3][3] = {{1, 0, 0}, {0, ca, -sa}, {0, sa, ca}};
    double ry[3][3] = {{cb, 0, sb}, {0, 1, 0}, {-sb, 0, cb}};
    double rz[3][3] = {{cc, -sc, 0}, {sc, cc, 0}, {0, 0, 1}}, xy[3][3], r[3][3];
    for (int i = 0; i < 3; i++)
        for (int j = 0; j < 3; j++) {
            xy[i][j] = 0;
            for (int k = 0; k < 3; k++)
                xy[i][j] += rx[i][k] * ry[k][j];
        }
    for (int i = 0; i < 3; i++)
        for (int j = 0; j < 3; j++) {
            r[i][j] = 0;
            for (int k = 0; k < 3; k++)
                r[i][j] += xy[i][k] * rz[k][j];
        }
    double before[3][3] = {{9.5, -1.1, -0.6}, {-1.1, 6.2, 0.4}, {-0.6, 0.4, 9.0}}, after[3][3];
    for (int i = 0; i < 3; i++)
        for (int j = 0; j < 3; j++) {
            after[i][j] = 0;
            for (int k = 0; k < 3; k++)
                for (int l = 0; l < 3; l++)
                    after[i][j] += r[i][k] * before[k][l] * r[j][l];
        }
    bench_body_new(&t, 190,
                   (tacet_inertia_def){after[0][0], after[1][1], after[2][2], after[0][1],
                                       after[0][2], after[1][2]});
    for (size_t m = 0; m < 3; m++) {
        double at[3] = {0};
        for (int i = 0; i < 3; i++)
            for (int k = 0; k < 3; k++)
                at[i] += r[i][k] * b.at[m][k];
        bench_mount(&t, "t", at, b.stiffness[m]);
        bench_turn(&t, m, a, c, d);
    }
    tacet_body_modes one = modes_of(&b), other = modes_of(&t);
    for (int i = 0; i < 6; i++)
        assert_near(other.hz[i], one.hz[i], 0, 1e-10);
}

// Data sheet of the two demo machines, computed with an independent eigensolver.
static void test_demo_bodies(void **state)
{
    (void)state;
    bench_body six, eight;
    forwarder_body(&six);
    brush_truck_body(&eight);
    const double f6[6] = {5.02, 5.96, 8.04, 8.98, 10.49, 14.54};
    const double f8[6] = {4.52, 5.14, 6.99, 7.55, 8.69, 9.03};
    tacet_body_modes m6 = modes_of(&six), m8 = modes_of(&eight);
    for (int i = 0; i < 6; i++) {
        assert_near(m6.hz[i], f6[i], 0.005, 0);
        assert_near(m8.hz[i], f8[i], 0.005, 0);
    }
    assert_near(m6.share[5][3], 0.988, 5e-4, 0);
    assert_near(m8.share[5][3], 0.80, 5e-3, 0); // roll
    assert_near(m8.share[5][5], 0.17, 5e-3, 0); // yaw
}

// Stiffness that rises with frequency, k = k0 (1 + f / f1): one mass, f = sqrt(k(f)/m)/2 pi is a
// quadratic in f.
static void test_stiffness_over_frequency(void **state)
{
    (void)state;
    const double m = 100, k0 = 4e5, f1 = 50, far = 1000;
    double hz[2] = {0.001, far}, k[2] = {k0 * (1 + hz[0] / f1), k0 * (1 + far / f1)};
    bench_body b;
    bench_body_new(&b, m, (tacet_inertia_def){5, 5, 5, 0, 0, 0});
    bench_mount(&b, "one", (double[]){0, 0, 0}, (double[]){k0, k0, k0});
    b.mount[0].z_N_per_m = (tacet_curve){hz, k, 2};
    tacet_body *body = body_of(&b, NULL);
    tacet_body_modes got;
    assert_int_equal(tacet_body_modes_of(body, &got), TACET_OK);
    assert_true(got.settled);
    double p = k0 / (4 * M_PI * M_PI * m); // f^2 = p (1 + f / f1)
    double f = p / (2 * f1) + sqrt(p * p / (4 * f1 * f1) + p);
    assert_near(got.hz[3], sqrt(p), 0, 1e-9); // three free turns, x, y, then z
    assert_near(got.hz[5], f, 0, 1e-8);
    tacet_body_destroy(body);
}

// Jeong and Singh 2000: the direction of I^-1 e_x; a diagonal tensor: x itself.
static void test_torque_roll_axis(void **state)
{
    (void)state;
    bench_body b;
    double axis[3];
    forwarder_body(&b);
    tacet_body *body = body_of(&b, NULL);
    tacet_body_torque_roll_axis(body, axis);
    assert_near(axis[0], 1, 1e-15, 0);
    tacet_body_destroy(body);
    three_mounts(&b);
    body = body_of(&b, NULL);
    tacet_body_torque_roll_axis(body, axis);
    double ratio = 9.5 * axis[0] - 1.1 * axis[1] - 0.6 * axis[2]; // I a = (ratio, 0, 0)
    assert_true(ratio > 0);
    assert_near(-1.1 * axis[0] + 6.2 * axis[1] + 0.4 * axis[2], 0, 1e-12, 0);
    assert_near(-0.6 * axis[0] + 0.4 * axis[1] + 9.0 * axis[2], 0, 1e-12, 0);
    tacet_body_destroy(body);
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_four_corner_mounts),
    cmocka_unit_test(test_three_mounts_with_products_of_inertia),
    cmocka_unit_test(test_leaning_pair),
    cmocka_unit_test(test_no_mounts_six_zeros),
    cmocka_unit_test(test_what_does_not_hold),
    cmocka_unit_test(test_bends),
    cmocka_unit_test(test_turned_axes_same_modes),
    cmocka_unit_test(test_demo_bodies),
    cmocka_unit_test(test_stiffness_over_frequency),
    cmocka_unit_test(test_torque_roll_axis),
};
TEST_MAIN(tests)
