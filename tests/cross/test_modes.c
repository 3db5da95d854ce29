// Modes against LAPACK (reference library).
#include "near.h"
#include "trains.h"
#include <lapacke.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

// K and J as they stand in the nodes' own angles, gears in K: dsygv on the whole matrices.
static void check(bench_train *b)
{
    tacet_train *t = bench_create(b);
    size_t n = tacet_train_nodes(t);
    double *K = calloc(n * n, sizeof *K), *J = calloc(n * n, sizeof *J);
    double *w2 = calloc(n, sizeof *w2), *hz = calloc(n, sizeof *hz);
    double *shape = calloc(n * n, sizeof *shape);
    for (size_t j = 0; j < n; j++)
        J[j * n + j] = tacet_train_node_inertia(t, j);
    for (size_t e = 0; e < tacet_train_links(t); e++) {
        tacet_link_info l = tacet_train_link_info(t, e);
        double k = l.stiffness_Nm_per_rad, g = 1 / l.gear_ratio;
        K[l.from * n + l.from] += k * g * g;
        K[l.to * n + l.to] += k;
        K[l.from * n + l.to] -= k * g;
        K[l.to * n + l.from] -= k * g;
    }
    assert_int_equal(LAPACKE_dsygv(LAPACK_ROW_MAJOR, 1, 'V', 'U', (int)n, K, (int)n, J, (int)n, w2),
                     0);
    assert_int_equal(tacet_train_modes(t, hz, shape), TACET_OK);
    assert_true(hz[0] == 0);
    for (size_t i = 1; i < n; i++) {
        // LAPACK's own error: eps times the largest eigenvalue
        double own = 1e-14 * w2[n - 1] / w2[i];
        assert_near(hz[i], sqrt(w2[i]) / (2 * M_PI), 0, 1e-9 + own);
        size_t top = 0;
        for (size_t j = 1; j < n; j++)
            if (fabs(shape[i * n + j]) > fabs(shape[i * n + top])) top = j;
        for (size_t j = 0; j < n; j++)
            assert_near(shape[i * n + j], K[j * n + i] / K[top * n + i], 1e-9 + own, 0);
    }
    free(K);
    free(J);
    free(w2);
    free(hz);
    free(shape);
    tacet_train_destroy(t);
}

static void test_demo_trains(void **state)
{
    (void)state;
    check(forwarder());
    check(brush_truck());
}

// Random trees with gears, some turning the other way.
static void test_random_trees(void **state)
{
    (void)state;
    unsigned long seed = 12345;
    for (int run = 0; run < 50; run++) {
        bench_train *b = bench_new();
        size_t n = 2 + (size_t)run % 20;
        for (size_t i = 0; i < n; i++) {
            double u[4];
            for (int k = 0; k < 4; k++) {
                seed =
                    (seed * 6364136223846793005UL + 1442695040888963407UL) & 0xffffffffffffffffUL;
                u[k] = (double)(seed >> 33) / 2147483648.0;
            }
            bench_node(b, pow(10, -2 + 3 * u[0]));
            if (i == 0) continue;
            size_t to = (size_t)(u[1] * (double)i);
            size_t e = run % 2 ? bench_link(b, i, to, pow(10, 3 + 3 * u[2]))
                               : bench_link(b, to, i, pow(10, 3 + 3 * u[2]));
            if (u[3] < 0.3) b->link[e].gear_ratio = u[3] < 0.1 ? -1.5 : 0.5 + 6 * u[3];
        }
        check(b);
    }
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_demo_trains),
    cmocka_unit_test(test_random_trees),
};
TEST_MAIN(tests)
