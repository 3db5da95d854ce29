// Motion of the body under loads, forces of its mounts, and what paths carry to points.
#include "bodies.h"
#include "near.h"
#include <math.h>
#include <string.h>

static const tacet_six_complex some_load = {3 + 1 * I, -2, 5 * I, 0.7, -1.1 + 0.2 * I, 0.4};

static void leaning(bench_body *b) // nothing symmetric about it
{
    brush_truck_body(b);
    bench_turn(b, 0, 0.3, -0.2, 0.5);
    bench_turn(b, 1, -0.6, 0.1, 0.2);
}

// One degree of freedom with structural damping: F / (k (1 + i loss) - w^2 m).
static void test_bounce_is_one_degree_of_freedom(void **state)
{
    (void)state;
    bench_body b;
    bench_body_new(&b, 200, (tacet_inertia_def){8, 14, 16, 0, 0, 0});
    b.loss = 0.1;
    for (int i = 0; i < 4; i++)
        bench_mount(&b, "m", (double[]){i & 1 ? .3 : -.3, i & 2 ? .2 : -.2, 0},
                    (double[]){1e5, 1e5, 2.5e5});
    tacet_body *body = body_of(&b, NULL);
    const double hz[] = {1, 11.253954, 30};
    for (int i = 0; i < 3; i++) {
        double w = 2 * M_PI * hz[i];
        const tacet_six_complex load = {0, 0, 10, 0, 0, 0};
        tacet_six_complex q;
        assert_int_equal(tacet_body_solve(body, w, load, q), TACET_OK);
        double complex expected = 10 / (1e6 * (1 + 0.1 * I) - w * w * 200);
        assert_near(cabs(q[2] - expected) / cabs(expected), 0, 1e-12, 0);
        assert_near(cabs(q[0]) + cabs(q[1]) + cabs(q[3]) + cabs(q[4]) + cabs(q[5]), 0, 1e-18, 0);
        double complex force = 0; // TR = (1 + i loss) / (1 + i loss - r^2)
        for (size_t m = 0; m < 4; m++)
            force += tacet_body_mount_force(body, m, 2, w, q);
        assert_near(cabs(force - expected * 1e6 * (1 + 0.1 * I)), 0, 1e-11, 0);
    }
    tacet_body_destroy(body);
}

// Newton: the mounts' forces together are the load plus what the body's inertia asks, w^2 M q.
static void test_mount_forces_balance_load_and_inertia(void **state)
{
    (void)state;
    bench_body b;
    leaning(&b);
    tacet_body *body = body_of(&b, NULL);
    double mass[36], w = 2 * M_PI * 12;
    tacet_six_complex q;
    tacet_body_mass(body, mass);
    assert_int_equal(tacet_body_solve(body, w, some_load, q), TACET_OK);
    tacet_six_complex sum = {0};
    for (size_t m = 0; m < 3; m++) {
        // axes of the mount from its turns: Rx Ry Rz
        double a = b.turned[m][0], c = b.turned[m][1], d = b.turned[m][2];
        double complex f[3], g[3], h[3];
        for (int i = 0; i < 3; i++)
            f[i] = tacet_body_mount_force(body, m, i, w, q);
        g[0] = cos(d) * f[0] - sin(d) * f[1], g[1] = sin(d) * f[0] + cos(d) * f[1], g[2] = f[2];
        h[0] = cos(c) * g[0] + sin(c) * g[2], h[1] = g[1], h[2] = -sin(c) * g[0] + cos(c) * g[2];
        f[0] = h[0], f[1] = cos(a) * h[1] - sin(a) * h[2], f[2] = sin(a) * h[1] + cos(a) * h[2];
        const double *p = b.at[m];
        for (int i = 0; i < 3; i++)
            sum[i] += f[i];
        sum[3] += p[1] * f[2] - p[2] * f[1];
        sum[4] += p[2] * f[0] - p[0] * f[2];
        sum[5] += p[0] * f[1] - p[1] * f[0];
    }
    for (int i = 0; i < 6; i++) {
        double complex expected = some_load[i];
        for (int j = 0; j < 6; j++)
            expected += w * w * mass[6 * i + j] * q[j];
        assert_near(cabs(sum[i] - expected), 0, 1e-10, 0);
    }
    tacet_body_destroy(body);
}

static void test_reciprocity_static_and_free_limits(void **state)
{
    (void)state;
    bench_body b;
    leaning(&b);
    tacet_body *body = body_of(&b, NULL);
    tacet_six_complex column[6];
    for (int j = 0; j < 6; j++) {
        tacet_six_complex load = {0};
        load[j] = 1;
        assert_int_equal(tacet_body_solve(body, 2 * M_PI * 9, load, column[j]), TACET_OK);
    }
    for (int i = 0; i < 6; i++)
        for (int j = 0; j < 6; j++)
            assert_near(cabs(column[j][i] - column[i][j]), 0, 1e-9 * cabs(column[i][i]), 0);
    tacet_six still;
    tacet_six_complex slow, fast;
    const tacet_six weight = {0, 0, -100, 0, 0, 0};
    const tacet_six_complex load = {0, 0, -100, 0, 0, 0};
    assert_int_equal(tacet_body_static(body, weight, still), TACET_OK);
    assert_int_equal(tacet_body_solve(body, 1e-4, load, slow), TACET_OK);
    for (int i = 0; i < 6; i++) // the loss factor is the phase
        assert_near(cabs(slow[i] * (1 + 0.10 * I) - still[i]), 0, 1e-9 * fabs(still[2]), 0);
    assert_int_equal(tacet_body_solve(body, 1e5, load, fast), TACET_OK);
    assert_near(creal(fast[2]), 100 / (1e10 * 285), 0, 1e-6); // -F / (w^2 m)
    tacet_body_destroy(body);
}

// At rest the static stiffness stands where it is stated, without loss, else the dynamic one at its
// lowest frequency.
static void test_static_stiffness_at_rest(void **state)
{
    (void)state;
    bench_body b;
    bench_body_new(&b, 200, (tacet_inertia_def){8, 14, 16, 0, 0, 0});
    b.loss = 0.1;
    for (int i = 0; i < 4; i++)
        bench_mount(&b, "m", (double[]){i & 1 ? .3 : -.3, i & 2 ? .2 : -.2, 0},
                    (double[]){1e5, 1e5, 2.5e5});
    double hz[2] = {2, 90}, k[2] = {1.5e5, 4e5};
    for (int i = 0; i < 4; i++) {
        b.mount[i].static_z_N_per_m = 1e5;
        b.mount[i].y_N_per_m = (tacet_curve){hz, k, 2};
    }
    tacet_body *body = body_of(&b, NULL);
    const tacet_six load = {0, 60, 100, 0, 0, 0};
    tacet_six q;
    assert_int_equal(tacet_body_static(body, load, q), TACET_OK);
    assert_near(q[2], 100 / 4e5, 0, 1e-12);
    assert_near(q[1], 60 / 6e5, 0, 1e-12);
    const tacet_six_complex up = {0, 0, 1, 0, 0, 0};
    assert_near(cabs(tacet_body_mount_force(body, 0, 2, 0, up) - 1e5), 0, 1e-6, 0);
    assert_near(cabs(tacet_body_mount_force(body, 0, 2, 1, up) - 2.5e5 * (1 + 0.1 * I)), 0, 1e-6,
                0);
    tacet_body_destroy(body);
}

// Mounts symmetric about the vertical plane of the crank: a torque about it moves neither x nor z,
// and does not pitch, exactly.
static void test_symmetric_mounts_decouple(void **state)
{
    (void)state;
    bench_body b;
    forwarder_body(&b);
    tacet_body *body = body_of(&b, NULL);
    tacet_arena *a = tacet_arena_create();
    tacet_body_response r;
    assert_int_equal(tacet_body_response_init(&r, 48, a), TACET_OK);
    assert_int_equal(tacet_body_respond(body, 120, 4, 48, &r), TACET_OK);
    for (size_t h = 1; h <= 48; h++) {
        assert_near(cabs(r.roll[h][0]) + cabs(r.roll[h][2]) + cabs(r.roll[h][4]), 0, 1e-24, 0);
        double w = 30.0 * (double)h;
        double complex left = tacet_body_mount_force(body, 0, 2, w, r.roll[h]);
        double complex right = tacet_body_mount_force(body, 1, 2, w, r.roll[h]);
        assert_near(cabs(left + right), 0, 1e-12 * cabs(left), 0);
    }
    // a steady torque is carried by the mounts alone: sum of y F_z - z F_y = -(-torque)
    double complex moment = 0, q[6];
    for (int i = 0; i < 6; i++)
        q[i] = r.roll_static[i];
    for (size_t m = 0; m < 4; m++)
        moment += b.at[m][1] * tacet_body_mount_force(body, m, 2, 0, q) -
                  b.at[m][2] * tacet_body_mount_force(body, m, 1, 0, q);
    assert_near(creal(moment), 1, 1e-12, 0);
    tacet_arena_destroy(a);
    tacet_body_destroy(body);
}

// Lines of the shaking loads stand where their orders are, over the square of the speed.
static void test_shaking_on_its_lines(void **state)
{
    (void)state;
    bench_body b;
    forwarder_body(&b);
    b.crank_axis[2] = -0.1;
    tacet_body *body = body_of(&b, NULL);
    tacet_arena *a = tacet_arena_create();
    tacet_body_response r;
    assert_int_equal(tacet_body_response_init(&r, 80, a), TACET_OK);
    assert_int_equal(tacet_body_respond(body, 150, 14, 80, &r), TACET_OK);
    for (size_t h = 1; h <= 80; h++) {
        tacet_six_complex q, load;
        for (int i = 0; i < 6; i++) // orders 1 .. 5 of a single
            load[i] = h % 14 == 0 ? 150 * 150 * tacet_body_shaking(body)[2 * h / 14][i] : 0;
        assert_int_equal(tacet_body_solve(body, 150.0 / 14 * (double)h, load, q), TACET_OK);
        for (int i = 0; i < 6; i++)
            assert_near(cabs(q[i] - r.shaken[h][i]), 0, 0, 0);
    }
    assert_true(cabs(r.shaken[14][2]) > 0);
    tacet_arena_destroy(a);
    tacet_body_destroy(body);
}

// A path by two resonances and one by a table, weighed; inputs add with phase.
static void test_paths_add_up(void **state)
{
    (void)state;
    bench_body b;
    forwarder_body(&b);
    tacet_resonance_def seat[2] = {{4.6, 0.18, NAN, 9000}, {27, 0.06, NAN, 60000}};
    tacet_resonance_def ear[1] = {{52, 0.05, 2e-4, NAN}};
    tacet_point_def point[2] = {{"seat", TACET_POINT_ACCELERATION, TACET_WEIGHTING_NONE},
                                {"ear", TACET_POINT_PRESSURE, TACET_WEIGHTING_NONE}};
    tacet_path_def path[3] = {{"front-left", 2, "seat", 1, seat, 2, NULL},
                              {"front-right", 2, "seat", -1, seat, 2, NULL},
                              {"rear-left", 1, "ear", 0.6, ear, 1, NULL}};
    b.def.points = point, b.def.n_points = 2;
    b.def.paths = path, b.def.n_paths = 3;
    tacet_body *body = body_of(&b, NULL);
    const tacet_six_complex roll = {0, 0, 0, 1, 0, 0};
    tacet_six_complex q;
    double f = 11, w = 2 * M_PI * f;
    assert_int_equal(tacet_body_solve(body, w, roll, q), TACET_OK);
    double complex h = 0; // accelerations of two masses on springs
    for (int i = 0; i < 2; i++) {
        double r = f / seat[i].hz;
        h += -r * r / seat[i].mass_kg / (1 - r * r + 2 * I * seat[i].damping_ratio * r);
    }
    double complex both =
        tacet_body_mount_force(body, 0, 2, w, q) - tacet_body_mount_force(body, 1, 2, w, q);
    double complex got = tacet_body_point_response(body, 0, w, q);
    assert_near(cabs(got - h * both) / cabs(got), 0, 1e-12, 0);
    double r = f / 52;
    double complex sound =
        0.6 * 2e-4 / (1 - r * r + 0.1 * I * r) * tacet_body_mount_force(body, 2, 1, w, q);
    got = tacet_body_point_response(body, 1, w, q);
    assert_near(cabs(got - sound) / cabs(got), 0, 1e-12, 0);
    tacet_body_destroy(body);
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_bounce_is_one_degree_of_freedom),
    cmocka_unit_test(test_mount_forces_balance_load_and_inertia),
    cmocka_unit_test(test_reciprocity_static_and_free_limits),
    cmocka_unit_test(test_static_stiffness_at_rest),
    cmocka_unit_test(test_symmetric_mounts_decouple),
    cmocka_unit_test(test_shaking_on_its_lines),
    cmocka_unit_test(test_paths_add_up),
};
TEST_MAIN(tests)
