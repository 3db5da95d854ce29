// Energy, and that the order of nodes and links in the file does not matter.
#include "near.h"
#include "rig.h"
#include <math.h>
#include <stdlib.h>

static const size_t throws[] = {2, 3, 4, 5, 6, 7};

static void check_power(rig *r, double rpm)
{
    tacet_train_power p =
        tacet_train_power_of(r->t, rpm * 2 * M_PI / 60, r->n, r->node, r->torque, &r->m);
    print_message("in %.6f W, dissipated %.6f W, out %.6f W\n", p.in_W, p.dissipated_W, p.out_W);
    assert_true(p.in_W > 0 && p.dissipated_W > 0);
    assert_near(p.in_W, p.dissipated_W + p.out_W, 0, 1e-9);
    assert_true(p.dissipated_W > 1e-4 * p.in_W); // or the balance would say nothing of it
    double mean = 0;
    for (size_t i = 0; i < r->n; i++)
        mean += r->torque[i].mean;
    assert_near(p.out_W, mean * rpm * 2 * M_PI / 60, 0, 1e-12);
}

// What goes in at the throws leaves at the load and in dampers: harmonic and ripple, gears, all
// kinds of damping.
static void test_power_balances(void **state)
{
    (void)state;
    pulses p;
    pulses_six(&p, "..x.x.x", 2050);
    rig *r = rig_new(forwarder(), 6, throws, 14, 336);
    assert_int_equal(rig_ripple(r, 900, pulses_drive, &p, &r->m), TACET_OK);
    check_power(r, 900);
    rig_free(r);
    pulses_eight(&p, "x.", 410);
    bench_train *b = brush_truck();
    b->node[7].damping_Nms_per_rad = 0.3;
    b->node[10].damping_Nms_per_rad = 20;
    b->link[4].loss_law = TACET_LOSS_CONSTANT;
    r = rig_new(b, 4, throws, 2, 48);
    assert_int_equal(rig_ripple(r, 1000, pulses_drive, &p, &r->m), TACET_OK);
    check_power(r, 1000);
    rig_free(r);
}

// One link, one line: c (w u)^2 / 2 and pi k eta u^2 f (closed form, any vibration text).
static void test_heat_of_one_link(void **state)
{
    (void)state;
    const double J[] = {0.1, 0.5}, k[] = {3e4};
    const size_t first[] = {0};
    for (int viscous = 0; viscous < 2; viscous++) {
        bench_train *b = bench_chain(2, J, k);
        if (viscous)
            b->link[0].damping_Nms_per_rad = 2;
        else
            b->link[0].loss_factor = 0.15;
        b->link[0].loss_law = viscous ? TACET_LOSS_CAUSAL : TACET_LOSS_CONSTANT;
        rig *r = rig_new(b, 1, first, 1, 1);
        r->torque[0].line[1] = 10;
        double hz = 60;
        assert_int_equal(rig_harmonic(r, hz * 60, &r->m), TACET_OK);
        double u = cabs(r->m.angle_rad[0].line[1] - r->m.angle_rad[1].line[1]), w = 2 * M_PI * hz;
        tacet_train_power p = tacet_train_power_of(r->t, w, 1, first, r->torque, &r->m);
        double heat = viscous ? 2 * w * w * u * u / 2 : M_PI * 3e4 * 0.15 * u * u * hz;
        assert_near(p.dissipated_W, heat, 0, 1e-10);
        assert_near(p.in_W, heat, 0, 1e-10);
        assert_near(p.out_W, 0, 1e-12, 0);
        rig_free(r);
    }
}

// ---- order of the file --------------------------------------------------------------------------

// The same train with nodes and links in another order, links turned round where they are plain.
static bench_train *shuffled(bench_train *b, size_t *where)
{
    bench_train *s = bench_new();
    size_t n = b->d.n_nodes, m = b->d.n_links;
    for (size_t i = 0; i < n; i++) {
        size_t from = (i * 5 + 3) % n; // 5 is coprime to 11 and 12
        where[from] = i;
        s->node[i] = b->node[from];
        s->added[i] = b->added[from];
    }
    for (size_t i = 0; i < m; i++) {
        tacet_link_def l = b->link[(i * 7 + 2) % m]; // 7 is coprime to 10 and 11
        const char *from = l.from;
        if (l.gear_ratio == 1 && i % 2) {
            l.from = l.to;
            l.to = from;
        }
        s->link[i] = l;
    }
    s->d.n_nodes = n;
    s->d.n_links = m;
    s->d.flywheel = b->d.flywheel;
    s->d.load = b->d.load;
    s->d.lowest_hz = b->d.lowest_hz;
    s->d.highest_hz = b->d.highest_hz;
    return s;
}

static void check_order(bench_train *(*make)(void), void (*fill)(pulses *, const char *, double),
                        double work_J)
{
    pulses p;
    fill(&p, "x..", work_J);
    size_t where[16], node[8], lines = 24 * p.revolutions;
    bench_train *original = make(), *other = shuffled(original, where);
    for (size_t i = 0; i < p.throws; i++)
        node[i] = where[throws[i]];
    rig *b = rig_new(other, p.throws, node, p.revolutions, lines); // names are the original's
    rig *a = rig_new(original, p.throws, throws, p.revolutions, lines);
    assert_int_equal(rig_ripple(a, 1000, pulses_drive, &p, &a->m), TACET_OK);
    assert_int_equal(rig_ripple(b, 1000, pulses_drive, &p, &b->m), TACET_OK);
    for (size_t j = 0; j < a->m.n_nodes; j++)
        assert_true(lines_apart(&a->m.angle_rad[j], &b->m.angle_rad[where[j]], 1, 1) < 1e-10);
    for (size_t e = 0; e < a->m.n_links; e++) {
        size_t there = tacet_train_link_find(b->t, tacet_train_link_name(a->t, e));
        tacet_link_info here = tacet_train_link_info(a->t, e),
                        x = tacet_train_link_info(b->t, there);
        double sign = where[here.from] == x.from ? 1 : -1;
        for (size_t h = 1; h <= lines; h++)
            b->m.link_torque_Nm[there].line[h] *= sign;
        assert_true(lines_apart(&a->m.link_torque_Nm[e], &b->m.link_torque_Nm[there], 1, 0) <
                    1e-10);
    }
    rig_free(a);
    rig_free(b);
}

static void test_order_of_the_file(void **state)
{
    (void)state;
    check_order(forwarder, pulses_six, 1700);
    check_order(brush_truck, pulses_eight, 600);
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_power_balances),
    cmocka_unit_test(test_heat_of_one_link),
    cmocka_unit_test(test_order_of_the_file),
};
TEST_MAIN(tests)
