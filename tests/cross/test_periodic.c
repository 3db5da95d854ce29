// The periodic steady state by four ways: harmonic, march with shooting, matrix exponential, CVODE
// marched until settled. Equations for the last two are set up a second time (reference.h).
#include "near.h"
#include "reference.h"
#include "rig.h"
#include "train/internal.h"
#include <lapacke.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

static const size_t throws[] = {2, 3, 4, 5, 6, 7};
#define AGREE 1e-6 // of the largest line

static void compare(const char *what, const tacet_train_motion *a, const tacet_train_motion *b,
                    double within)
{
    double torque = lines_apart(a->link_torque_Nm, b->link_torque_Nm, b->n_links, 0);
    double speed = lines_apart(a->angle_rad, b->angle_rad, b->n_nodes, 1);
    print_message("%s: torque %.1e, speed %.1e of the largest line\n", what, torque, speed);
    assert_true(torque < within);
    assert_true(speed < within);
}

static void some_torque(rig *r)
{
    for (size_t i = 0; i < r->n; i++) {
        r->torque[i].mean = 40.0 + (double)i;
        for (size_t h = 1; h <= r->lines; h++)
            r->torque[i].line[h] = cexp(I * (double)((i + 2) * h)) * 400.0 / (double)(h + 10);
    }
}

static void means_of(const rig *r, double *mean)
{
    for (size_t i = 0; i < r->n; i++)
        mean[i] = r->torque[i].mean;
}

// ---- matrix exponential -------------------------------------------------------------------------

static void product(size_t n, const double *a, const double *b, double *c)
{
    for (size_t i = 0; i < n; i++) {
        memset(c + i * n, 0, n * sizeof *c);
        for (size_t k = 0; k < n; k++)
            for (size_t j = 0; j < n; j++)
                c[i * n + j] += a[i * n + k] * b[k * n + j];
    }
}

// exp(a) by plain Taylor and squaring, apart from the library's.
static void exponential(size_t n, double *a, double *out)
{
    double norm = 0, *term = malloc(n * n * sizeof *term), *next = malloc(n * n * sizeof *next);
    for (size_t i = 0; i < n; i++) {
        double sum = 0;
        for (size_t j = 0; j < n; j++)
            sum += fabs(a[i * n + j]);
        norm = fmax(norm, sum);
    }
    int squarings = (int)fmax(0, ceil(log2(norm)) + 3);
    memset(out, 0, n * n * sizeof *out);
    memset(term, 0, n * n * sizeof *term);
    for (size_t i = 0; i < n * n; i++)
        a[i] = ldexp(a[i], -squarings);
    for (size_t i = 0; i < n; i++)
        out[i * n + i] = term[i * n + i] = 1;
    for (int k = 1; k <= 12; k++) {
        product(n, term, a, next);
        for (size_t i = 0; i < n * n; i++) {
            term[i] = next[i] / k;
            out[i] += term[i];
        }
    }
    for (int k = 0; k < squarings; k++) {
        product(n, out, out, next);
        memcpy(out, next, n * n * sizeof *out);
    }
    free(term);
    free(next);
}

#define DEGREE 9 // of the torque's Taylor polynomial within a sample interval

static tacet_status nothing(const void *who, size_t i, size_t n, const double *angle,
                            double *torque, double *inertia, double *slope)
{
    (void)who, (void)i, (void)n, (void)angle;
    torque[0] = inertia[0] = slope[0] = 0;
    return TACET_OK;
}

// Derivatives of throw i's torque (without mean) at sample k, times step^p.
static void derivatives(const rig *r, size_t i, size_t k, size_t samples, double *out)
{
    for (int p = 0; p <= DEGREE; p++)
        out[p] = 0;
    for (size_t h = 1; h <= r->lines; h++) {
        double complex z =
            r->torque[i].line[h] * cexp(I * 2 * M_PI * (double)(h * k % samples) / (double)samples);
        for (int p = 0; p <= DEGREE; p++) {
            out[p] += creal(z);
            z *= I * 2 * M_PI * (double)h / (double)samples;
        }
    }
}

// x' = A x + sum_i B_i T_i(t), T_i within an interval by its Taylor polynomial, whose derivatives
// are further states: one matrix exponential an interval, the same for all.
typedef struct {
    rig *r;
    reference *f;
    size_t samples, N, big; // states; with the torques' derivatives
    double *step;           // exp over one interval, [big * big]
    double *state;          // [(samples + 1) * N]
} stepper;

static void make_step(stepper *s, double interval_s)
{
    double *a = calloc(s->big * s->big, sizeof *a), *unit = calloc(s->N, sizeof *unit);
    double *column = calloc(s->N, sizeof *column);
    for (size_t j = 0; j < s->N; j++) {
        unit[j] = 1;
        reference_rate(s->f, 0, unit, column);
        unit[j] = 0;
        for (size_t i = 0; i < s->N; i++)
            a[i * s->big + j] = column[i] * interval_s;
    }
    for (size_t i = 0; i < s->r->n; i++) {
        size_t first = s->N + i * (DEGREE + 1), node = s->r->node[i];
        a[(s->f->n + node) * s->big + first] = interval_s / tacet_train_node_inertia(s->r->t, node);
        for (size_t p = 0; p < DEGREE; p++) // d(derivative p)/dt = derivative p + 1, in steps
            a[(first + p) * s->big + first + p + 1] = 1;
    }
    exponential(s->big, a, s->step);
    free(a);
    free(unit);
    free(column);
}

// From state[0] through a repeat.
static void step_through(stepper *s)
{
    double *z = calloc(s->big, sizeof *z);
    for (size_t k = 0; k < s->samples; k++) {
        double *next = s->state + (k + 1) * s->N;
        memcpy(z, s->state + k * s->N, s->N * sizeof *z);
        for (size_t i = 0; i < s->r->n; i++)
            derivatives(s->r, i, k, s->samples, z + s->N + i * (DEGREE + 1));
        for (size_t i = 0; i < s->N; i++) {
            next[i] = 0;
            for (size_t j = 0; j < s->big; j++)
                next[i] += s->step[i * s->big + j] * z[j];
        }
    }
    free(z);
}

// The periodic start solves (1 - E^n) x0 = where a repeat from rest ends; the angle of the whole is
// free, so least squares.
static void start_periodically(stepper *s)
{
    size_t N = s->N;
    double *power = calloc(N * N, sizeof *power), *square = calloc(N * N, sizeof *square);
    double *right = calloc(N, sizeof *right), *singular = calloc(N, sizeof *singular);
    lapack_int rank;
    for (size_t i = 0; i < N; i++)
        memcpy(power + i * N, s->step + i * s->big, N * sizeof *power);
    for (size_t k = s->samples; k > 1; k /= 2) { // samples is a power of two
        product(N, power, power, square);
        memcpy(power, square, N * N * sizeof *power);
    }
    for (size_t i = 0; i < N * N; i++)
        square[i] = (i % (N + 1) == 0) - power[i];
    memcpy(right, s->state + s->samples * N, N * sizeof *right);
    assert_int_equal(LAPACKE_dgelsd(LAPACK_ROW_MAJOR, (int)N, (int)N, 1, square, (int)N, right, 1,
                                    singular, 1e-13, &rank),
                     0);
    memcpy(s->state, right, N * sizeof *right);
    free(power);
    free(square);
    free(right);
    free(singular);
}

static void by_exponential(rig *r, double speed, size_t samples, tacet_train_motion *out)
{
    double mean[RIG_THROWS] = {0};
    stepper s = {.r = r, .samples = samples};
    s.f = reference_new(r->t, speed, r->n, r->node, mean, nothing, NULL, true);
    s.N = s.f->size;
    s.big = s.N + r->n * (DEGREE + 1);
    s.step = calloc(s.big * s.big, sizeof *s.step);
    s.state = calloc((samples + 1) * s.N, sizeof *s.state);
    make_step(&s, 2 * M_PI * r->how.revolutions / speed / (double)samples);
    step_through(&s);
    start_periodically(&s);
    step_through(&s);
    reference_lines(s.f, s.state, samples, r->how.revolutions, out);
    free(s.step);
    free(s.state);
    reference_free(s.f);
}

// ---- the four -----------------------------------------------------------------------------------

static void four_ways(bench_train *b, size_t n, double rpm, unsigned revolutions, unsigned repeats)
{
    rig *r = rig_new(b, n, throws, revolutions, 24 * revolutions);
    double speed = rpm * 2 * M_PI / 60, period = 2 * M_PI * revolutions / speed, mean[RIG_THROWS];
    size_t samples = 512 * revolutions;
    tacet_train_motion other = rig_motion(r);
    some_torque(r);
    rig_tabulate(r);
    assert_int_equal(rig_harmonic(r, rpm, &r->m), TACET_OK);

    r->how.frozen = true;
    assert_int_equal(rig_steady(r, rpm, rig_drive, r, &other), TACET_OK);
    compare("march and shooting against harmonic", &other, &r->m, AGREE);

    by_exponential(r, speed, samples, &other);
    compare("matrix exponential against harmonic", &other, &r->m, AGREE);

    // from rest: ground damping lets all modes, the rigid one too, settle
    means_of(r, mean);
    reference *f = reference_new(r->t, speed, n, throws, mean, rig_drive, r, true);
    double *state = calloc(f->size, sizeof *state);
    double *states = calloc(samples * f->size, sizeof *states);
    size_t evaluations = reference_cvode(f, state, period, repeats, 1e-9, samples, states);
    reference_lines(f, states, samples, revolutions, &other);
    print_message("CVODE, %zu right-hand sides:\n", evaluations);
    compare("CVODE against harmonic", &other, &r->m, AGREE);
    for (size_t e = 0; e < r->m.n_links; e++)
        assert_near(other.link_torque_Nm[e].mean, r->m.link_torque_Nm[e].mean, 1e-3, 0);
    free(state);
    free(states);
    reference_free(f);
    rig_free(r);
}

static void test_forwarder(void **state)
{
    (void)state;
    bench_train *b = forwarder();
    b->node[10].damping_Nms_per_rad = 60; // pumps
    four_ways(b, 6, 900, 2, 24);
}

static void test_brush_truck(void **state)
{
    (void)state;
    bench_train *b = brush_truck();
    b->node[6].damping_Nms_per_rad = 4;
    b->node[11].damping_Nms_per_rad = 4000;
    four_ways(b, 4, 1300, 2, 60);
}

// ---- full model ---------------------------------------------------------------------------------

// The march's own solution, handed to CVODE as a start with the mean load torque that it found:
// CVODE stays on it, at the throws' own angles, with variable inertia.
static void test_full_model(void **state)
{
    (void)state;
    pulses p;
    pulses_six(&p, "x.", 1750);
    bench_train *b = forwarder();
    b->node[10].damping_Nms_per_rad = 60;
    rig *r = rig_new(b, 6, throws, 2, 96);
    double speed = 900 * 2 * M_PI / 60, mean[RIG_THROWS];
    r->how.tolerance = 1e-9;
    assert_int_equal(rig_ripple(r, 900, pulses_drive, &p, &r->m), TACET_OK); // means of torque
    assert_int_equal(rig_steady(r, 900, pulses_drive, &p, &r->m), TACET_OK);
    means_of(r, mean);
    reference *f = reference_new(r->t, speed, 6, throws, mean, pulses_drive, &p, false);
    f->load_Nm = r->m.link_torque_Nm[9].mean; // what the march found; ripple's is right to 1e-5
    double *start = calloc(f->size, sizeof *start),
           *states = calloc(1024 * f->size, sizeof *states);
    reference_start(f, &r->m, start);
    size_t evaluations = reference_cvode(f, start, 4 * M_PI / speed, 12, 1e-9, 1024, states);
    tacet_train_motion other = rig_motion(r);
    reference_lines(f, states, 1024, 2, &other);
    print_message("CVODE, %zu right-hand sides:\n", evaluations);
    compare("full march against CVODE", &other, &r->m, 1e-5);
    free(start);
    free(states);
    reference_free(f);
    rig_free(r);
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_forwarder),
    cmocka_unit_test(test_brush_truck),
    cmocka_unit_test(test_full_model),
};
TEST_MAIN(tests)
