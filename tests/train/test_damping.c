// Damping of links: how each statement becomes a law, and how well a loss factor is met.
#include "near.h"
#include "tacet/train.h"
#include "trains.h"
#include <math.h>
#include <stdio.h>

static double complex K(const tacet_train *t, size_t link, double hz)
{
    return tacet_train_link_impedance(t, link, 2 * M_PI * hz);
}

static tacet_train *two(double loss, double at_hz, double lowest, double highest)
{
    const double J[] = {0.1, 0.3}, k[] = {2e5};
    bench_train *b = bench_chain(2, J, k);
    b->link[0].loss_factor = loss;
    b->link[0].at_hz = at_hz;
    b->d.lowest_hz = lowest;
    b->d.highest_hz = highest;
    return bench_create(b);
}

// Im K / Re K against eta, and |K| against the law k |w / w_m|^alpha (Kjartansson 1979), over the
// whole range, lowest and highest line included.
static void worst_of(double loss, double lowest, double highest, double *eta, double *law)
{
    double alpha = 2 / M_PI * atan(loss), at = sqrt(lowest * highest);
    tacet_train *t = two(loss, at, lowest, highest);
    *eta = *law = 0;
    for (int i = 0; i <= 1000; i++) {
        double hz = lowest * pow(highest / lowest, i / 1000.0);
        double complex z = K(t, 0, hz);
        *eta = fmax(*eta, fabs(cimag(z) / creal(z) / loss - 1));
        *law = fmax(*law, fabs(creal(z) / (2e5 * pow(hz / at, alpha)) - 1));
    }
    assert_near(creal(K(t, 0, at)), 2e5, 0, 1e-13);
    tacet_train_destroy(t);
}

static void test_loss_factor_is_met(void **state)
{
    (void)state;
    const double losses[] = {0.001, 0.01, 0.02, 0.12, 0.18, 0.3, 0.6, 1};
    const double lows[] = {0.5, 0.94, 5}, highs[] = {1140, 1200, 4000};
    double worst_eta = 0, worst_law = 0, eta, law;
    for (int i = 0; i < 8; i++)
        for (int r = 0; r < 3; r++) {
            worst_of(losses[i], lows[r], highs[r], &eta, &law);
            worst_eta = fmax(worst_eta, eta);
            worst_law = fmax(worst_law, law / losses[i]); // in units of the loss factor
        }
    print_message("loss factor met within %.2f %%, growth of stiffness within %.2f %% of it\n",
                  100 * worst_eta, 100 * worst_law);
    assert_true(worst_eta < 0.02);
    assert_true(worst_law < 0.03);
}

// The limit of none: a loss factor that is rounding leaves a spring, K = k.
static void test_next_to_no_loss(void **state)
{
    (void)state;
    const double losses[] = {2e-15, 1e-17, 4.9e-324};
    for (int i = 0; i < 3; i++) {
        tacet_train *t = two(losses[i], NAN, 1, 1000), *spring = two(0, NAN, 1, 1000);
        for (double hz = 0.3; hz < 3000; hz *= 7) {
            double complex k = K(spring, 0, hz);
            assert_near(cabs(K(t, 0, hz) - k) / cabs(k), 0, 1e-12, 0);
        }
        tacet_train_destroy(t);
        tacet_train_destroy(spring);
    }
}

// Causal: as a spring with Maxwell arms stiffness only grows with frequency and loss is never
// negative, outside the range too.
static void test_passive_everywhere(void **state)
{
    (void)state;
    tacet_train *t = two(0.2, NAN, 1, 1000);
    double before = 0;
    for (double hz = 1e-4; hz < 1e6; hz *= 1.3) {
        double complex z = K(t, 0, hz);
        assert_true(creal(z) > before);
        assert_true(cimag(z) > 0);
        before = creal(z);
    }
    assert_near(creal(K(t, 0, 0)), 2e5, 0, 0); // order 0 uses k
    assert_near(cimag(K(t, 0, 0)), 0, 0, 0);
    tacet_train_destroy(t);
}

// Stated where it holds: at the link's main mode unless at_hz says otherwise, also outside the
// range, where the law carries it.
static void test_where_stiffness_holds(void **state)
{
    (void)state;
    double mode = sqrt(2e5 * 0.4 / 0.03) / (2 * M_PI), alpha = 2 / M_PI * atan(0.2);
    tacet_train *t = two(0.2, NAN, 1, 1000);
    assert_near(tacet_train_link_info(t, 0).main_mode_hz, mode, 0, 1e-12);
    assert_near(creal(K(t, 0, mode)), 2e5, 0, 1e-13);
    tacet_train_destroy(t);
    t = two(0.2, 5000, 1, 1000);
    assert_near(creal(K(t, 0, 1000)), 2e5 * pow(0.2, alpha), 0, 1e-13);
    tacet_train_destroy(t);
}

static void test_viscous_ratio_and_constant(void **state)
{
    (void)state;
    const double J[] = {0.1, 0.3, 4.0, 0.2}, k[] = {2e5, 1e3, 5e5};
    bench_train *b = bench_chain(4, J, k);
    b->link[0].damping_Nms_per_rad = 7;
    b->link[1].damping_ratio = 0.03;
    b->link[2].loss_factor = 0.1;
    b->link[2].loss_law = TACET_LOSS_CONSTANT;
    tacet_train *t = bench_create(b);
    assert_near(creal(K(t, 0, 50)), 2e5, 0, 0);
    assert_near(cimag(K(t, 0, 50)), 7 * 2 * M_PI * 50, 0, 1e-14);
    // c = 2 zeta k / w, w of the mode with most strain energy in the link: the first, in which the
    // soft link alone works: close to sqrt(k/J) of both sides as rigid bodies, 0.4 and 4.2 kg m2
    double w = 2 * M_PI * tacet_train_link_info(t, 1).main_mode_hz;
    assert_near(w, sqrt(1e3 * 4.6 / (0.4 * 4.2)), 0, 0.01);
    assert_near(tacet_train_link_info(t, 1).damping_Nms_per_rad, 2 * 0.03 * 1e3 / w, 0, 1e-14);
    assert_near(cimag(K(t, 1, 20)), 2 * 0.03 * 1e3 / w * 2 * M_PI * 20, 0, 1e-14);
    assert_near(creal(K(t, 2, 3)), 5e5, 0, 0);
    assert_near(cimag(K(t, 2, 3)), 5e4, 0, 1e-15);
    assert_near(cimag(K(t, 2, 3000)), 5e4, 0, 1e-15);
    assert_near(tacet_train_link_info(t, 2).loss_factor, 0.1, 0, 0);
    assert_near(tacet_train_link_info(t, 0).loss_factor, 0, 0, 0);
    tacet_train_destroy(t);
}

// Each link of the demo train has its own main mode: the coupling the first, the damper the second.
static void test_main_modes(void **state)
{
    (void)state;
    tacet_train *t = bench_create(forwarder());
    assert_near(tacet_train_link_info(t, 8).main_mode_hz, 21.86, 0.01, 0);
    assert_near(tacet_train_link_info(t, 0).main_mode_hz, 135.6, 0.1, 0);
    assert_near(tacet_train_link_info(t, 9).main_mode_hz, 166.1, 0.1, 0);
    tacet_train_destroy(t);
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_loss_factor_is_met),         cmocka_unit_test(test_next_to_no_loss),
    cmocka_unit_test(test_passive_everywhere),         cmocka_unit_test(test_where_stiffness_holds),
    cmocka_unit_test(test_viscous_ratio_and_constant), cmocka_unit_test(test_main_modes),
};
TEST_MAIN(tests)
