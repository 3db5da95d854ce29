// Trains at the edges of what the keys allow, against closed forms.
#include "chance.h"
#include "near.h"
#include "rig.h"
#include <stdlib.h>

// ---- rigid links --------------------------------------------------------------------------------

// Two elastic modes of three inertias in a row: w^4 - b w^2 + c = 0 with
//   b = k1 (1/J1 + 1/J2) + k2 (1/J2 + 1/J3),  c = k1 k2 (J1 + J2 + J3) / (J1 J2 J3)
// (closed form; from memory). A link as stiff as the keys allow leaves the other mode its digits.
static void test_rigid_link_leaves_modes_their_digits(void **state)
{
    (void)state;
    const double stiff[] = {1e6, 1e9, 1e12}, soft[] = {1e-2, 1, 1e3};
    const double J[] = {0.1, 0.3, 0.7};
    for (int i = 0; i < 3; i++)
        for (int s = 0; s < 3; s++) {
            const double k[] = {stiff[i], soft[s]};
            double hz[3], shape[9];
            tacet_train *t = bench_create(bench_chain(3, J, k));
            assert_int_equal(tacet_train_modes(t, hz, shape), TACET_OK);
            double b = k[0] * (1 / J[0] + 1 / J[1]) + k[1] * (1 / J[1] + 1 / J[2]);
            double c = k[0] * k[1] * (J[0] + J[1] + J[2]) / (J[0] * J[1] * J[2]);
            double high = (b + sqrt(b * b - 4 * c)) / 2, low = c / high;
            assert_near(hz[1], sqrt(low) / (2 * M_PI), 0, 1e-13);
            assert_near(hz[2], sqrt(high) / (2 * M_PI), 0, 1e-13);
            // the two on the rigid link move together against the third
            assert_near(shape[3] * (J[0] + J[1]) + shape[5] * J[2], 0, soft[s] / stiff[i] + 1e-13,
                        0);
            tacet_train_destroy(t);
        }
}

// Two inertias tied rigidly answer as their sum, but for 2e-8 of softness, which the neighbourhood
// of the mode makes sixty times larger; the rigid link carries what turns the one beyond.
static void test_rigid_link_is_one_inertia(void **state)
{
    (void)state;
    const double J[] = {0.1, 0.3, 0.7}, k[] = {1e12, 2e4};
    const double lumped[] = {0.4, 0.7}, one[] = {2e4};
    const size_t first[] = {0};
    rig *r = rig_new(bench_chain(3, J, k), 1, first, 2, 48);
    rig *q = rig_new(bench_chain(2, lumped, one), 1, first, 2, 48);
    for (size_t h = 1; h <= 48; h++)
        r->torque[0].line[h] = q->torque[0].line[h] = 10.0 / (double)h * cexp(I * (double)h);
    assert_int_equal(rig_harmonic(r, 900, &r->m), TACET_OK);
    assert_int_equal(rig_harmonic(q, 900, &q->m), TACET_OK);
    assert_true(lines_apart(&r->m.angle_rad[0], &q->m.angle_rad[0], 1, 1) < 1.2e-6);
    assert_true(lines_apart(&r->m.angle_rad[2], &q->m.angle_rad[1], 1, 1) < 1.2e-6);
    for (size_t h = 1; h <= 48; h++) {
        double w = 900 * 2 * M_PI / 60 / 2 * (double)h;
        double complex beyond = r->torque[0].line[h] + w * w * J[0] * r->m.angle_rad[0].line[h];
        assert_near(cabs(r->m.link_torque_Nm[0].line[h] - beyond), 0, 1e-9, 0);
    }
    rig_free(r);
    rig_free(q);
}

// ---- resonance ----------------------------------------------------------------------------------

// One inertia on a spring against one that stands still, damping 1e-5 of critical, line 24 exactly
// on the mode: amplitude Q = 1/(2 zeta) times static, a quarter period late; the lines beside it
// 1/|1 - r^2|, in and out of phase. Marched too: the solution decays over 16000 periods and
// shooting must find it all the same.
static void test_lightly_damped_resonance_on_a_line(void **state)
{
    (void)state;
    const double zeta = 1e-5, w1 = 2400, J = 0.5, k = J * w1 * w1;
    const size_t first[] = {0};
    bench_train *b = bench_new();
    bench_node(b, J);
    bench_node(b, 1e7); // as large as the keys allow
    bench_link(b, 0, 1, k);
    double both = J * 1e7 / (J + 1e7), wn = sqrt(k / both);
    b->link[0].damping_Nms_per_rad = 2 * zeta * both * wn;
    rig *r = rig_new(b, 1, first, 2, 48);
    for (size_t h = 1; h <= 48; h++)
        r->torque[0].line[h] = 1;
    double rpm = wn / 24 * 2 * 60 / (2 * M_PI);
    assert_int_equal(rig_harmonic(r, rpm, &r->m), TACET_OK);
    for (size_t h = 20; h <= 28; h++) {
        double ratio = (double)h / 24;
        // relative motion of two free inertias: u = (F/J) / (wn^2 - w^2 + 2 i zeta wn w)
        double complex u = 1 / (J * wn * wn * (1 - ratio * ratio + 2 * I * zeta * ratio));
        double complex T = u * (k + I * 2 * zeta * both * wn * wn * ratio);
        double off = cabs(r->m.link_torque_Nm[0].line[h] - T);
        assert_near(off / cabs(T), 0, h == 24 ? 1e-9 : 1e-12, 0);
        if (h == 24) assert_near(cabs(T), 1 / (2 * zeta), 0, 1e-6);
    }
    tacet_train_motion marched = rig_motion(r);
    rig_tabulate(r);
    r->how.frozen = true;
    r->how.tolerance = 1e-9;
    assert_int_equal(rig_steady(r, rpm, rig_drive, r, &marched), TACET_OK);
    double apart = lines_apart(marched.link_torque_Nm, r->m.link_torque_Nm, 1, 0);
    print_message("resonance marched: %.2g apart, %u repeats\n", apart, r->note.repeats);
    assert_true(apart < 1e-6);
    rig_free(r);
}

// Not damped at all and driven exactly there: no finite motion, and so it is said.
static void test_undamped_resonance_is_refused(void **state)
{
    (void)state;
    const double J[] = {1, 1}, k[] = {2}; // w^2 = 2 k / J = 4
    const size_t first[] = {0};
    rig *r = rig_new(bench_chain(2, J, k), 1, first, 1, 2);
    r->torque[0].line[2] = 1;
    double rpm = 60 / (2 * M_PI); // line 2 at 2 rad/s
    double complex x;
    tacet_status status = rig_harmonic(r, rpm, &r->m);
    x = r->m.angle_rad[0].line[2];
    // rounding of the speed may leave a denominator of some 1e-16: then the answer is that large
    assert_true(status == TACET_NOT_FINITE || cabs(x) > 1e14);
    rig_free(r);
}

// ---- equal modes --------------------------------------------------------------------------------

// A hub with n equal branches: n - 1 equal modes sqrt(k/J) with the hub at rest, and
// sqrt(k (J0 + n J)/(J0 J)) (closed form). Torque on one branch against one on another drives none
// but the equal ones.
static void test_equal_modes(void **state)
{
    (void)state;
    enum { BRANCHES = 6 };
    const double J0 = 0.5, J = 0.2, k = 1000, eta = 0.02;
    const size_t ends[] = {1, 2};
    bench_train *b = bench_new();
    bench_node(b, J0);
    for (int i = 0; i < BRANCHES; i++) {
        size_t end = bench_node(b, J);
        b->link[bench_link(b, i % 2 ? end : 0, i % 2 ? 0 : end, k)].damping_ratio = eta / 2;
    }
    b->d.flywheel = b->node[0].name;
    rig *r = rig_new(b, 2, ends, 1, 12);
    double hz[BRANCHES + 1], shape[(BRANCHES + 1) * (BRANCHES + 1)], w = sqrt(k / J);
    assert_int_equal(tacet_train_modes(r->t, hz, shape), TACET_OK);
    for (int i = 1; i < BRANCHES; i++) {
        assert_near(hz[i], w / (2 * M_PI), 0, 1e-13);
        assert_near(shape[i * (BRANCHES + 1)], 0, 1e-12, 0);
    }
    assert_near(hz[BRANCHES], sqrt(k * (J0 + BRANCHES * J) / (J0 * J)) / (2 * M_PI), 0, 1e-13);
    for (size_t h = 1; h <= 12; h++) {
        r->torque[0].line[h] = 1;
        r->torque[1].line[h] = -1;
    }
    assert_int_equal(rig_harmonic(r, 60, &r->m), TACET_OK);
    double c = tacet_train_link_info(r->t, 0).damping_Nms_per_rad;
    for (size_t h = 1; h <= 12; h++) {
        double s = 2 * M_PI * (double)h;
        double complex x = 1 / (k - s * s * J + I * s * c);
        assert_near(cabs(r->m.angle_rad[1].line[h] - x) / cabs(x), 0, 1e-12, 0);
        assert_near(cabs(r->m.angle_rad[2].line[h] + x) / cabs(x), 0, 1e-12, 0);
        assert_near(cabs(r->m.angle_rad[0].line[h]) / cabs(x), 0, 1e-14, 0);
        assert_near(cabs(r->m.angle_rad[5].line[h]) / cabs(x), 0, 1e-14, 0);
    }
    rig_free(r);
}

// ---- scales -------------------------------------------------------------------------------------

// Stiffness of a sound train times s, speed times sqrt(s), torque times s: the same angles; the
// march too, in time that runs faster or slower.
static void check_scale(double s)
{
    const size_t throws[] = {2, 3, 4, 5, 6, 7};
    rig *pair[2];
    for (int i = 0; i < 2; i++) {
        bench_train *b = forwarder();
        double by = i ? s : 1;
        for (size_t e = 0; e < b->d.n_links; e++)
            b->link[e].stiffness_Nm_per_rad *= by;
        b->d.lowest_hz *= sqrt(by);
        b->d.highest_hz *= sqrt(by);
        pair[i] = rig_new(b, 6, throws, 2, 48);
        for (size_t k = 0; k < 6; k++)
            for (size_t h = 1; h <= 48; h++)
                pair[i]->torque[k].line[h] =
                    by * 400.0 / (double)(h + 10) * cexp(I * (double)((k + 2) * h));
        assert_int_equal(rig_harmonic(pair[i], 900 * sqrt(by), &pair[i]->m), TACET_OK);
    }
    assert_true(lines_apart(pair[0]->m.angle_rad, pair[1]->m.angle_rad, 11, 1) < 1e-9);
    tacet_train_motion marched = rig_motion(pair[1]);
    rig_tabulate(pair[1]);
    pair[1]->how.frozen = true;
    assert_int_equal(rig_steady(pair[1], 900 * sqrt(s), rig_drive, pair[1], &marched), TACET_OK);
    assert_true(lines_apart(marched.angle_rad, pair[1]->m.angle_rad, 11, 1) < 1e-6);
    rig_free(pair[0]);
    rig_free(pair[1]);
}

// The same torques at the same speed on a train a million times softer or stiffer. Soft: no link
// passes anything on, every throw turns alone, -w^2 J x = F. Stiff: all turn as one.
static void check_limit(double s)
{
    const size_t throws[] = {2, 3, 4, 5, 6, 7};
    bench_train *b = forwarder();
    for (size_t e = 0; e < b->d.n_links; e++)
        b->link[e].stiffness_Nm_per_rad *= s;
    rig *r = rig_new(b, 6, throws, 2, 48);
    for (size_t k = 0; k < 6; k++)
        for (size_t h = 1; h <= 48; h++)
            r->torque[k].line[h] = 400.0 / (double)(h + 10) * cexp(I * (double)((k + 2) * h));
    assert_int_equal(rig_harmonic(r, 900, &r->m), TACET_OK);
    for (size_t h = 4; h <= 48; h++) {
        double w = 900 * 2 * M_PI / 60 / 2 * (double)h;
        double complex sum = 0;
        for (size_t k = 0; k < 6; k++) {
            double J = tacet_train_node_inertia(r->t, throws[k]);
            double complex alone = -r->torque[k].line[h] / (w * w * J);
            sum += r->torque[k].line[h];
            if (s < 1) assert_near(cabs(r->m.angle_rad[throws[k]].line[h] / alone - 1), 0, 0.02, 0);
        }
        double complex all = -sum / (w * w * tacet_train_total_inertia(r->t));
        for (size_t j = 0; j < 11 && s > 1; j++)
            assert_near(cabs(r->m.angle_rad[j].line[h] - all) / cabs(all), 0, 1e-3, 0);
    }
    rig_free(r);
}

static void test_soft_and_stiff(void **state)
{
    (void)state;
    check_scale(1e-6);
    check_scale(1e6);
    check_limit(1e-6);
    check_limit(1e6);
}

// ---- gears --------------------------------------------------------------------------------------

// Ratio -1.6: the shaft behind it turns backwards, and the pair has w^2 = k (1/J_to + 1/(g^2
// J_from)) (closed form: refer `from` to the shaft's side). At the static limit the torque beyond
// is what the inertias share.
static void test_reversing_gear(void **state)
{
    (void)state;
    const double J[] = {0.3, 0.8}, k[] = {5e4}, g = -1.6;
    const size_t first[] = {0};
    bench_train *b = bench_chain(2, J, k);
    b->link[0].gear_ratio = g;
    b->d.flywheel = b->node[0].name;
    rig *r = rig_new(b, 1, first, 1, 1);
    double hz[2], shape[4], speed = 1;
    assert_int_equal(tacet_train_modes(r->t, hz, shape), TACET_OK);
    assert_near(hz[1], sqrt(k[0] * (1 / J[1] + 1 / (g * g * J[0]))) / (2 * M_PI), 0, 1e-13);
    assert_near(tacet_train_node_ratio(r->t, 1), 1 / g, 0, 1e-15);
    assert_near(tacet_train_total_inertia(r->t), J[0] + J[1] / (g * g), 0, 1e-14);
    r->torque[0].mean = 100;
    r->torque[0].line[1] = 10;
    assert_int_equal(rig_harmonic(r, speed * 60 / (2 * M_PI), &r->m), TACET_OK);
    double acceleration = -10 / tacet_train_total_inertia(r->t); // x = -F/(w^2 J), w = 1
    assert_near(creal(r->m.angle_rad[0].line[1]), acceleration, 0, 1e-4);
    assert_near(creal(r->m.angle_rad[1].line[1]), acceleration / g, 0, 1e-4);
    // T_to turns J_to: T = -w^2 J_to x_to
    assert_near(creal(r->m.link_torque_Nm[0].line[1]), -J[1] * creal(r->m.angle_rad[1].line[1]), 0,
                1e-12);
    // the flywheel is the load: nothing passes the gear
    assert_near(r->m.link_torque_Nm[0].mean, 0, 1e-15, 0);
    rig_free(r);
}

// ---- many ---------------------------------------------------------------------------------------

// Frequencies of a chain below w: negative pivots of K - w^2 J (Sturm; from memory, any text on
// eigenvalues of tridiagonal matrices).
static int modes_below(size_t n, const double *J, const double *k, double w)
{
    int count = 0;
    double pivot = 0;
    for (size_t i = 0; i < n; i++) {
        double before = i ? k[i - 1] : 0, after = i + 1 < n ? k[i] : 0;
        pivot = before + after - w * w * J[i] - (i ? before * before / pivot : 0);
        count += pivot < 0;
    }
    return count;
}

// 200 nodes of sizes that differ ten thousandfold: no mode is missing, none comes twice.
static void test_many_nodes(void **state)
{
    (void)state;
    enum { N = 200 };
    static double J[N], k[N], hz[N], shape[N * N];
    chance c = {.state = 1};
    double trace = 0, sum = 0;
    for (int i = 0; i < N; i++) {
        J[i] = chance_log(&c, 1e-3, 10);
        k[i] = chance_log(&c, 1e2, 1e7);
    }
    for (int i = 0; i + 1 < N; i++)
        trace += k[i] * (1 / J[i] + 1 / J[i + 1]);
    tacet_train *t = bench_create(bench_chain(N, J, k));
    assert_int_equal(tacet_train_modes(t, hz, shape), TACET_OK);
    for (int i = 1; i < N; i++) {
        sum += 4 * M_PI * M_PI * hz[i] * hz[i];
        assert_int_equal(modes_below(N, J, k, 2 * M_PI * hz[i] * (1 - 1e-8)), i);
        assert_int_equal(modes_below(N, J, k, 2 * M_PI * hz[i] * (1 + 1e-8)), i + 1);
    }
    assert_near(sum, trace, 0, 1e-12);
    tacet_train_destroy(t);
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_rigid_link_leaves_modes_their_digits),
    cmocka_unit_test(test_rigid_link_is_one_inertia),
    cmocka_unit_test(test_lightly_damped_resonance_on_a_line),
    cmocka_unit_test(test_undamped_resonance_is_refused),
    cmocka_unit_test(test_equal_modes),
    cmocka_unit_test(test_soft_and_stiff),
    cmocka_unit_test(test_reversing_gear),
    cmocka_unit_test(test_many_nodes),
};
TEST_MAIN(tests)
