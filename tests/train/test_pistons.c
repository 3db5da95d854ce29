// A rigid crank with reciprocating masses against the exact motion that energy gives.
#include "near.h"
#include "rig.h"
#include <math.h>

enum { LINES = 16, N = 20000 };

// One body of inertia J0, pistons of J(a) = A sin^2 a (a slider-crank with an endless rod), and a
// torque of B sin 2a, which has the potential -B sin^2 a.
typedef struct {
    double J0, A, B, W; // kg m2, kg m2, N m, rad/s in the mean
} crank;

static tacet_status drive(const void *who, size_t i, size_t n, const double *angle, double *torque,
                          double *inertia, double *slope)
{
    const crank *c = who;
    (void)i;
    for (size_t k = 0; k < n; k++) {
        torque[k] = c->B * sin(2 * angle[k]);
        inertia[k] = c->A * sin(angle[k]) * sin(angle[k]);
        slope[k] = c->A * sin(2 * angle[k]);
    }
    return TACET_OK;
}

// Work and energy: (J0 + J(a)) a'^2 / 2 = E + B sin^2 a.
static double speed_at(const crank *c, double E, double angle)
{
    double square = sin(angle) * sin(angle);
    return sqrt(2 * (E + c->B * square) / (c->J0 + c->A * square));
}

// E such that a revolution takes 2 pi / W. By the trapezoid rule over a period, exact to rounding.
static double energy(const crank *c)
{
    double low = 0.1 * c->J0 * c->W * c->W, high = 10 * low;
    for (int pass = 0; pass < 100; pass++) {
        double E = (low + high) / 2, time = 0;
        for (int i = 0; i < N; i++)
            time += 2 * M_PI / N / speed_at(c, E, 2 * M_PI * i / N);
        *(time > 2 * M_PI / c->W ? &low : &high) = E;
    }
    return (low + high) / 2;
}

// Lines in time of the angle less W t: t(a) and then the lines by quadrature over the angle. The
// motion is the same backwards from angle 0, so the deviation has no mean.
static void exact_lines(const crank *c, double complex line[LINES + 1])
{
    double E = energy(c), turned = 0; // turned = W t
    for (int h = 0; h <= LINES; h++)
        line[h] = 0;
    for (int i = 0; i < N; i++) {
        double a = 2 * M_PI * i / N, h = 2 * M_PI / N;
        double pace = c->W / speed_at(c, E, a), next = c->W / speed_at(c, E, a + h);
        for (int k = 1; k <= LINES; k++)
            line[k] += 2.0 / N * (a - turned) * cexp(-I * k * turned) * pace;
        turned += h / 6 * (pace + 4 * c->W / speed_at(c, E, a + h / 2) + next); // Simpson's rule
    }
}

static void check(double A, double B)
{
    crank c = {.J0 = 0.4, .A = A, .B = B, .W = 600 * 2 * M_PI / 60};
    bench_train *b = bench_new();
    const size_t only[] = {bench_node(b, c.J0)};
    b->added[0] = c.A / 2; // mean of sin^2
    b->d.added_inertia_kgm2 = b->added;
    rig *r = rig_new(b, 1, only, 1, LINES);
    double complex exact[LINES + 1];
    exact_lines(&c, exact);
    double largest = cabs(exact[2]);
    for (int marched = 0; marched < 2; marched++) {
        r->how.tolerance = marched ? 1e-9 : 1e-10;
        assert_int_equal((marched ? rig_steady : rig_ripple)(r, 600, drive, &c, &r->m), TACET_OK);
        for (int h = 1; h <= LINES; h++)
            assert_near(cabs(r->m.angle_rad[0].line[h] - exact[h]), 0, 1e-9 * largest, 0);
    }
    rig_free(r);
}

// Nothing drives it: it runs slower where the pistons are fast.
static void test_spins_freely(void **state)
{
    (void)state;
    check(0.08, 0);
}

// A torque that works with the pistons' inertia torque, and one that works against it.
static void test_driven(void **state)
{
    (void)state;
    check(0.08, 100);
    check(0.08, -100);
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_spins_freely),
    cmocka_unit_test(test_driven),
};
TEST_MAIN(tests)
