// Harmonic solution with torque at the throws' own angles.
#include "near.h"
#include "pulses.h"
#include "tacet/train.h"
#include "trains.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>

// ---- rigid, exact -------------------------------------------------------------------------------

// T = 500 cos(3 theta / 7), no pistons.
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

typedef struct {
    double line[4], pp; // of T at orders 3/7, 6/7, 9/7; speed variation over mean speed
} exact;

// Rigid inertia J: w^2 = w0^2 + (2/J) integral of T over theta; w0 so that the mean speed in time
// is W. Lines of T in time by quadrature over theta, dt = dtheta / w. Independent of the program.
static exact by_energy(double J, double T, double W)
{
    enum { N = 40000 };
    double period = 2 * M_PI * 7 / 3, low = 0.5 * W, high = 2 * W, w0 = W;
    for (int pass = 0; pass < 200; pass++) {
        double time = 0;
        w0 = (low + high) / 2;
        for (int i = 0; i < N; i++)
            time += period / N / sqrt(w0 * w0 + 2 / J * T * 7 / 3 * sin(2 * M_PI * i / N));
        if (time > period / W)
            low = w0; // too slow
        else
            high = w0;
    }
    exact e = {.pp = (sqrt(w0 * w0 + 2 / J * T * 7 / 3) - sqrt(w0 * w0 - 2 / J * T * 7 / 3)) / W};
    for (int h = 1; h <= 3; h++) {
        double complex sum = 0;
        double t = 0, before = 1 / w0;
        for (int i = 0; i < N; i++) {
            double a = 2 * M_PI * i / N, w = sqrt(w0 * w0 + 2 / J * T * 7 / 3 * sin(a));
            if (i) t += period / N * (before + 1 / w) / 2; // trapezoid
            before = 1 / w;
            sum += T * cos(a) * cexp(-I * h * 3.0 / 7 * W * t) / w;
        }
        e.line[h] = cabs(sum) * (period / N) * 2 / (period / W);
    }
    return e;
}

static void test_rigid_is_exact(void **state)
{
    (void)state;
    enum { LINES = 30 };
    double W = 900 * 2 * M_PI / 60, T = 500;
    exact e = by_energy(2, T, W);
    // the same figures as found once by other means
    assert_near(e.line[1], 499.33, 0.005, 0);
    assert_near(e.line[2], 16.38, 0.005, 0);
    assert_near(e.line[3], 0.403, 0.0005, 0);
    assert_near(e.pp, 0.1312, 0.00005, 0);
    bench_train *b = bench_new();
    const size_t throws[] = {bench_node(b, 2)};
    tacet_train *t = bench_create(b);
    tacet_train_work *w = NULL;
    tacet_arena *a = tacet_arena_create();
    tacet_train_motion m;
    tacet_spectrum torque;
    tacet_solver_note note;
    assert_int_equal(tacet_train_work_create(t, LINES, 1, &w), TACET_OK);
    assert_int_equal(tacet_train_motion_init(&m, t, LINES, a), TACET_OK);
    assert_int_equal(tacet_spectrum_init(&torque, LINES, a), TACET_OK);
    tacet_periodic how = tacet_periodic_default();
    how.revolutions = 7;
    how.n_lines = LINES;
    how.tolerance = 1e-9;
    assert_int_equal(tacet_train_ripple(t, W, 1, throws, seventh, &T, &how, w, &m, &torque, &note),
                     TACET_OK);
    for (int h = 1; h <= 3; h++)
        assert_near(cabs(torque.line[3 * h]), e.line[h], 1e-6, 1e-7);
    assert_near(torque.mean, 0, 1e-6, 0);
    assert_true(note.repeats <= 10);
    // speed: pp from the lines of angle
    double high = -1, low = 1;
    for (int k = 0; k < 4000; k++) {
        double v = 0;
        for (int h = 1; h <= LINES; h++)
            v += creal(I * (h / 7.0) * m.angle_rad[0].line[h] * cexp(I * h * 2 * M_PI * k / 4000));
        high = fmax(high, v);
        low = fmin(low, v);
    }
    assert_near(high - low, e.pp, 0, 1e-6);
    // and at constant speed the line is 500: ripple is what moved it
    assert_true(fabs(cabs(torque.line[3]) - 500) > 0.6);
    tacet_train_work_destroy(w);
    tacet_train_destroy(t);
    tacet_arena_destroy(a);
}

// ---- engines ------------------------------------------------------------------------------------

typedef struct {
    pulses p;
    tacet_train *t;
    tacet_train_work *w;
    tacet_arena *arena;
    tacet_train_motion m;
    tacet_spectrum torque[6];
    tacet_periodic how;
    tacet_solver_note note;
    size_t lines;
} engine;

static const size_t nodes[] = {2, 3, 4, 5, 6, 7};

static void engine_new(engine *e, bench_train *b)
{
    *e = (engine){.p = e->p};
    e->t = bench_create(b);
    e->lines = 24 * e->p.revolutions;
    e->arena = tacet_arena_create();
    assert_int_equal(tacet_train_work_create(e->t, e->lines, e->p.throws, &e->w), TACET_OK);
    assert_int_equal(tacet_train_motion_init(&e->m, e->t, e->lines, e->arena), TACET_OK);
    for (int i = 0; i < 6; i++)
        assert_int_equal(tacet_spectrum_init(&e->torque[i], e->lines, e->arena), TACET_OK);
    e->how = tacet_periodic_default();
    e->how.revolutions = e->p.revolutions;
    e->how.n_lines = e->lines;
}

static void engine_drop(engine *e)
{
    tacet_train_work_destroy(e->w);
    tacet_train_destroy(e->t);
    tacet_arena_destroy(e->arena);
}

static tacet_status engine_ripple(engine *e, double rpm)
{
    return tacet_train_ripple(e->t, rpm * 2 * M_PI / 60, e->p.throws, nodes, pulses_drive, &e->p,
                              &e->how, e->w, &e->m, e->torque, &e->note);
}

// Largest difference of torque lines over the largest line.
static double apart(const engine *a, const engine *b)
{
    double most = 0, largest = 0;
    for (size_t i = 0; i < a->p.throws; i++)
        for (size_t h = 1; h <= a->lines; h++) {
            most = fmax(most, cabs(a->torque[i].line[h] - b->torque[i].line[h]));
            largest = fmax(largest, cabs(b->torque[i].line[h]));
        }
    return most / largest;
}

// Both kinds of engine, low speed, sparse patterns: within eight passes on all samples, and as near
// as asked to where many more passes lead.
static void test_converges(void **state)
{
    (void)state;
    const char *const six[] = {"x", "x.", "x..", "..x.x.x", "x.x.x.xx.xx"};
    const char *const eight[] = {"x", "x.", "x...", "x..x.x.x.", "x.xx.xx"};
    for (int i = 0; i < 10; i++) {
        engine e;
        const char *word = i < 5 ? six[i] : eight[i - 5];
        double fires = 0, brake = i < 5 ? 420 : 130;
        for (const char *c = word; *c; c++)
            fires += *c == 'x';
        double each = brake * 4 * M_PI / (i < 5 ? 6 : 8) * (double)strlen(word) / fires;
        (i < 5 ? pulses_six : pulses_eight)(&e.p, word, each);
        engine_new(&e, i < 5 ? forwarder() : brush_truck());
        tacet_status status = engine_ripple(&e, i < 5 ? 900 : 1000);
        assert_int_equal(status, TACET_OK);
        engine f = {.p = e.p};
        engine_new(&f, i < 5 ? forwarder() : brush_truck());
        f.how.tolerance = 1e-10;
        f.how.most_passes = 30;
        assert_int_equal(engine_ripple(&f, i < 5 ? 900 : 1000), TACET_OK);
        print_message("%-12s %u passes, last change %.1e, error %.1e\n", word, e.note.repeats,
                      e.note.difference, apart(&e, &f));
        assert_true(apart(&e, &f) <= 1e-6);
        e.how.tolerance = 1e-4;
        assert_int_equal(engine_ripple(&e, i < 5 ? 900 : 1000), TACET_OK);
        assert_true(apart(&e, &f) <= 1e-4);
        engine_drop(&e);
        engine_drop(&f);
    }
}

// What comes out solves the equation: torque sampled afresh at the solution's own angles gives the
// same lines, and these give the same motion at constant speed.
static void test_is_a_fixed_point(void **state)
{
    (void)state;
    enum { N = 16384 };
    engine e;
    pulses_six(&e.p, "..x.x.x", 2050);
    engine_new(&e, forwarder());
    e.how.tolerance = 1e-8;
    e.how.most_passes = 20;
    double W = 900 * 2 * M_PI / 60, base = W / 14;
    assert_int_equal(engine_ripple(&e, 900), TACET_OK);
    double *a = calloc(N, sizeof *a), *T = calloc(N, sizeof *T), *J = calloc(N, sizeof *J);
    double *s = calloc(N, sizeof *s), mean = pulses_mean_inertia(&e.p);
    // static twist of throw 3 against the flywheel: mean torques that pass links 4..7 (crank2..6)
    double twist = 0, passed = 0;
    for (int link = 2; link < 8; link++) {
        tacet_link_info info = tacet_train_link_info(e.t, (size_t)link);
        if (link >= 4) twist += e.m.link_torque_Nm[link].mean / info.stiffness_Nm_per_rad;
        passed += e.torque[link - 2].mean;
        if (link < 7) assert_near(e.m.link_torque_Nm[link].mean, passed, 1e-9, 0);
    }
    assert_true(twist > 1e-4);
    for (int k = 0; k < N; k++) {
        double x = 2 * M_PI * k / N, d = twist;
        for (size_t h = 1; h <= e.lines; h++)
            d += creal(e.m.angle_rad[4].line[h] * cexp(I * (double)h * x));
        a[k] = 14 * x + d;
    }
    assert_int_equal(pulses_drive(&e.p, 2, N, a, T, J, s), TACET_OK);
    for (int k = 0; k < N; k++) {
        double x = 2 * M_PI * k / N, v = W, acc = 0;
        for (size_t h = 1; h <= e.lines; h++) {
            double complex now = e.m.angle_rad[4].line[h] * cexp(I * (double)h * x),
                           w = I * base * (double)h;
            v += creal(w * now);
            acc += creal(w * w * now);
        }
        T[k] += -0.5 * s[k] * v * v - (J[k] - mean) * acc;
    }
    double largest = 0;
    for (size_t h = 1; h <= e.lines; h++)
        largest = fmax(largest, cabs(e.torque[2].line[h]));
    for (size_t h = 1; h <= e.lines; h += 7) {
        double complex sum = 0;
        for (int k = 0; k < N; k++)
            sum += T[k] * cexp(-I * (double)h * 2 * M_PI * k / N) * 2.0 / N;
        assert_near(cabs(sum - e.torque[2].line[h]) / largest, 0, 2e-6, 0); // aliasing of 2048
    }
    tacet_train_motion m;
    assert_int_equal(tacet_train_motion_init(&m, e.t, e.lines, e.arena), TACET_OK);
    assert_int_equal(tacet_train_harmonic(e.t, W, 6, nodes, e.torque, e.w, &m), TACET_OK);
    for (size_t j = 0; j < m.n_nodes; j++)
        assert_memory_equal(m.angle_rad[j].line + 1, e.m.angle_rad[j].line + 1,
                            e.lines * sizeof(double complex));
    free(a);
    free(T);
    free(J);
    free(s);
    engine_drop(&e);
}

// A much heavier flywheel leaves the speed constant: the constant-speed solution.
static void test_heavy_is_constant_speed(void **state)
{
    (void)state;
    engine e;
    pulses_six(&e.p, "..x.x.x", 2050);
    e.p.massless = true;
    bench_train *b = bench_new();
    for (int i = 0; i < 2; i++)
        bench_node(b, 1e7);
    for (int i = 0; i < 6; i++)
        bench_node(b, 1e7);
    for (size_t i = 0; i < 7; i++)
        bench_link(b, i, i + 1, 1e12);
    engine_new(&e, b);
    assert_int_equal(engine_ripple(&e, 900), TACET_OK);
    enum { N = 4096 };
    static double a[N], T[N], J[N], s[N];
    for (int k = 0; k < N; k++)
        a[k] = 14 * 2 * M_PI * k / N;
    assert_int_equal(pulses_drive(&e.p, 1, N, a, T, J, s), TACET_OK);
    for (size_t h = 1; h <= 60; h++) {
        double complex sum = 0;
        for (int k = 0; k < N; k++)
            sum += T[k] * cexp(-I * (double)h * 2 * M_PI * k / N) * 2.0 / N;
        assert_near(cabs(sum - e.torque[1].line[h]), 0, 1e-4, 0);
    }
    engine_drop(&e);
}

// The same bits from a fresh memory, a used one, and after another speed.
static void test_same_bits(void **state)
{
    (void)state;
    engine e, f;
    pulses_eight(&e.p, "x..x.x.x.", 300);
    f.p = e.p;
    engine_new(&e, brush_truck());
    engine_new(&f, brush_truck());
    assert_int_equal(engine_ripple(&e, 1400), TACET_OK);
    assert_int_equal(engine_ripple(&e, 1000), TACET_OK);
    assert_int_equal(engine_ripple(&f, 1000), TACET_OK);
    for (size_t j = 0; j < e.m.n_nodes; j++)
        assert_memory_equal(e.m.angle_rad[j].line, f.m.angle_rad[j].line,
                            (e.lines + 1) * sizeof(double complex));
    for (size_t j = 0; j < e.m.n_links; j++)
        assert_memory_equal(e.m.link_torque_Nm[j].line, f.m.link_torque_Nm[j].line,
                            (e.lines + 1) * sizeof(double complex));
    assert_int_equal(e.note.evaluations, f.note.evaluations);
    engine_drop(&e);
    engine_drop(&f);
}

static tacet_status broken(const void *who, size_t i, size_t n, const double *angle, double *torque,
                           double *inertia, double *slope)
{
    tacet_status status = pulses_drive(who, i, n, angle, torque, inertia, slope);
    if (i == 3) torque[n / 2] = NAN;
    return status;
}

static tacet_status refusing(const void *who, size_t i, size_t n, const double *angle,
                             double *torque, double *inertia, double *slope)
{
    (void)who, (void)i, (void)n, (void)angle, (void)torque, (void)inertia, (void)slope;
    return TACET_STOPPED;
}

static void test_what_goes_wrong(void **state)
{
    (void)state;
    engine e;
    double W = 94;
    pulses_six(&e.p, "..x.x.x", 2050);
    engine_new(&e, forwarder());
    assert_int_equal(
        tacet_train_ripple(e.t, W, 6, nodes, broken, &e.p, &e.how, e.w, &e.m, e.torque, &e.note),
        TACET_NOT_FINITE);
    assert_int_equal(
        tacet_train_ripple(e.t, W, 6, nodes, refusing, &e.p, &e.how, e.w, &e.m, e.torque, &e.note),
        TACET_STOPPED);
    tacet_periodic how = e.how;
    how.tolerance = 1e-14; // below rounding
    assert_int_equal(tacet_train_ripple(e.t, W, 6, nodes, pulses_drive, &e.p, &how, e.w, &e.m,
                                        e.torque, &e.note),
                     TACET_NOT_CONVERGED);
    // the crank would stop within a repeat: no ripple, no clamp
    assert_int_equal(engine_ripple(&e, 100), TACET_NOT_CONVERGED);
    how = e.how;
    how.revolutions = 0;
    assert_int_equal(tacet_train_ripple(e.t, W, 6, nodes, pulses_drive, &e.p, &how, e.w, &e.m,
                                        e.torque, &e.note),
                     TACET_BAD_INPUT);
    how = e.how;
    how.n_lines = e.lines + 1;
    assert_int_equal(tacet_train_ripple(e.t, W, 6, nodes, pulses_drive, &e.p, &how, e.w, &e.m,
                                        e.torque, &e.note),
                     TACET_BAD_INPUT);
    engine_drop(&e);
}

// Torque that follows angle needs a throw that turns with the crank, and one drive a node.
static void test_geared_throw_is_refused(void **state)
{
    (void)state;
    engine e;
    pulses_eight(&e.p, "x", 300);
    engine_new(&e, brush_truck());
    const size_t geared[] = {11}, twice[] = {2, 3, 2};
    assert_int_equal(tacet_train_ripple(e.t, 100, 3, twice, pulses_drive, &e.p, &e.how, e.w, &e.m,
                                        e.torque, &e.note),
                     TACET_BAD_INPUT);
    assert_int_equal(tacet_train_ripple(e.t, 100, 1, geared, pulses_drive, &e.p, &e.how, e.w, &e.m,
                                        e.torque, &e.note),
                     TACET_BAD_INPUT);
    engine_drop(&e);
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_rigid_is_exact),
    cmocka_unit_test(test_converges),
    cmocka_unit_test(test_is_a_fixed_point),
    cmocka_unit_test(test_heavy_is_constant_speed),
    cmocka_unit_test(test_same_bits),
    cmocka_unit_test(test_what_goes_wrong),
    cmocka_unit_test(test_geared_throw_is_refused),
};
TEST_MAIN(tests)
