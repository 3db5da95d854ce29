#include "near.h"
#include "tacet/order.h"
#include <math.h>
#include <pthread.h>
#include <string.h>

// One transform with a spectrum of as many lines as it can hold.
typedef struct {
    tacet_arena *arena;
    tacet_transform *t;
    double *x;
    tacet_spectrum s;
    size_t n;
} bench;

static bench bench_of(size_t n)
{
    bench b = {.n = n, .arena = tacet_arena_create()};
    assert_int_equal(tacet_transform_create(n, &b.t), TACET_OK);
    b.x = tacet_transform_buffer(b.t);
    assert_non_null(b.x);
    assert_int_equal(tacet_spectrum_init(&b.s, n / 2 - 1, b.arena), TACET_OK);
    return b;
}

static void bench_clear(bench *b)
{
    tacet_transform_release(b->x);
    tacet_transform_destroy(b->t);
    tacet_arena_destroy(b->arena);
}

// DFT bin m of the last transform: n/2 times the line.
static double complex bin(const bench *b, size_t m)
{
    return b->s.line[m] * (double)b->n / 2;
}

// N1: 16 samples of 3 cos(2 pi 3 n/16 + 30 deg): X[3] = 20.784610 + 12i, all others below 1e-13.
// Closed form: 8 * 3 exp(i pi/6).
static void test_lines_n1_cosine(void **state)
{
    (void)state;
    bench b = bench_of(16);
    for (size_t j = 0; j < 16; j++)
        b.x[j] = 3 * cos(2 * M_PI * 3 * (double)j / 16 + M_PI / 6);
    tacet_transform_lines(b.t, b.x, &b.s);
    assert_near(creal(bin(&b, 3)), 20.784610, 5e-7, 0);
    assert_near(cimag(bin(&b, 3)), 12, 1e-13, 0);
    assert_near(cabs(b.s.line[3]), 3, 1e-14, 0); // amplitude is peak
    assert_near(carg(b.s.line[3]), M_PI / 6, 1e-14, 0);
    assert_near(b.s.mean, 0, 1e-14, 0);
    for (size_t h = 1; h < 8; h++)
        if (h != 3) assert_near(cabs(bin(&b, h)), 0, 1e-13, 0);
    bench_clear(&b);
}

// N2: x = 1, 2, 3, 4 has X = 10, -2 + 2i, -2, -2 - 2i. By hand.
static void test_lines_n2_ramp(void **state)
{
    (void)state;
    bench b = bench_of(4);
    for (size_t j = 0; j < 4; j++)
        b.x[j] = (double)j + 1;
    tacet_transform_lines(b.t, b.x, &b.s);
    assert_near(b.s.mean * 4, 10, 1e-15, 0);
    assert_near(creal(bin(&b, 1)), -2, 1e-15, 0);
    assert_near(cimag(bin(&b, 1)), 2, 1e-15, 0);
    bench_clear(&b);
}

// N3: 8-point box of 3 ones: |X_m| = |sin(3 pi m/8) / sin(pi m/8)|. Closed form.
static void test_lines_n3_box(void **state)
{
    (void)state;
    bench b = bench_of(8);
    double expected[] = {3, 2.414214, 1, 0.414214};
    for (size_t j = 0; j < 8; j++)
        b.x[j] = j < 3;
    tacet_transform_lines(b.t, b.x, &b.s);
    assert_near(b.s.mean * 8, expected[0], 1e-15, 0);
    for (size_t m = 1; m < 4; m++) {
        assert_near(cabs(bin(&b, m)), expected[m], 5e-7, 0);
        assert_near(cabs(bin(&b, m)),
                    fabs(sin(3 * M_PI * (double)m / 8) / sin(M_PI * (double)m / 8)), 1e-14, 0);
    }
    bench_clear(&b);
}

// N4: 64 samples of 2 sin(2 pi 2.5 n/64): bins 2, 3 read 1.412146 and 1.160061; with a Hann window
// divided by its gain 1.690305 and 1.701609. Recomputed values.
static void test_lines_n4_between_bins(void **state)
{
    (void)state;
    bench b = bench_of(64);
    for (int hann = 0; hann < 2; hann++) {
        for (size_t j = 0; j < 64; j++) {
            double w = hann ? 1 - cos(2 * M_PI * (double)j / 64) : 1; // gain 0.5 divided out
            b.x[j] = w * 2 * sin(2 * M_PI * 2.5 * (double)j / 64);
        }
        tacet_transform_lines(b.t, b.x, &b.s);
        assert_near(cabs(b.s.line[2]), hann ? 1.690305 : 1.412146, 5e-7, 0);
        assert_near(cabs(b.s.line[3]), hann ? 1.701609 : 1.160061, 5e-7, 0);
    }
    bench_clear(&b);
}

// N5: square wave +-1: 4/pi, 0, 4/(3 pi), 0, 4/(5 pi), as sines. n samples at the middle of their
// steps see 4/(n sin(h pi/n)), 1e-8 more at n = 8192.
static void test_lines_n5_square(void **state)
{
    (void)state;
    bench b = bench_of(8192);
    for (size_t j = 0; j < b.n; j++)
        b.x[j] = j < b.n / 2 ? 1 : -1;
    tacet_transform_lines(b.t, b.x, &b.s);
    assert_near(b.s.mean, 0, 1e-15, 0);
    for (size_t h = 1; h <= 5; h++)
        assert_near(cabs(b.s.line[h]), h % 2 ? 4 / (M_PI * (double)h) : 0, 1e-14, 1e-6);
    // the jump is half a step early: a sine has phase -90 degrees, less half a step
    assert_near(carg(b.s.line[1]), -M_PI / 2 + M_PI / 8192, 1e-12, 0);
    bench_clear(&b);
}

// N6: half-wave rectified unit sine: mean 1/pi, line 1 0.5, even h 2/(pi (h^2 - 1)), other odd 0.
// Fourier series; sampling adds 1e-7 at n = 4096.
static void test_lines_n6_rectified_sine(void **state)
{
    (void)state;
    bench b = bench_of(4096);
    double even[] = {0.212207, 0.042441, 0.018189};
    for (size_t j = 0; j < b.n; j++)
        b.x[j] = fmax(sin(2 * M_PI * (double)j / 4096), 0);
    tacet_transform_lines(b.t, b.x, &b.s);
    assert_near(b.s.mean, 1 / M_PI, 2e-7, 0);
    assert_near(cabs(b.s.line[1]), 0.5, 1e-12, 0);
    for (size_t i = 0; i < 3; i++)
        assert_near(cabs(b.s.line[2 * i + 2]), even[i], 8e-7, 0);
    assert_near(cabs(b.s.line[3]), 0, 1e-12, 0);
    bench_clear(&b);
}

// K11 with a four firing "110": a half-sine of unit height over 180 degrees for every fired
// opportunity. Amplitudes by the formula of the check, recomputed two ways in its source: mean
// 0.424413, orders 2/3 0.381972, 4/3 0.272837, 2 0.282942, 8/3 0.034725, 10/3 0.020987, 4 0.056588.
static void test_lines_k11_half_sines(void **state)
{
    (void)state;
    bench b = bench_of(12288); // 3 opportunities of half a revolution: 1.5 revolutions
    for (size_t j = 0; j < b.n; j++) {
        double opportunity = 3 * (double)j / (double)b.n;
        b.x[j] = opportunity < 2 ? sin(M_PI * fmod(opportunity, 1)) : 0;
    }
    tacet_transform_lines(b.t, b.x, &b.s); // line k: order k / 1.5
    double expected[] = {0.381972, 0.272837, 0.282942, 0.034725, 0.020987, 0.056588};
    assert_near(b.s.mean, 0.424413, 8e-7, 0);
    for (size_t k = 0; k < 6; k++)
        assert_near(cabs(b.s.line[k + 1]), expected[k], 8e-7, 0);
    bench_clear(&b);
}

static double noise(uint64_t *seed)
{
    *seed = *seed * 6364136223846793005u + 1442695040888963407u;
    return (double)(*seed >> 11) / 4503599627370496.0 - 1;
}

// Parseval: mean of x^2 = mean^2 + rms^2 (n odd in lines: no Nyquist part in the signal).
static void test_lines_parseval(void **state)
{
    (void)state;
    uint64_t seed = 1;
    bench b = bench_of(60);
    for (size_t j = 0; j < 60; j++)
        b.x[j] = noise(&seed);
    double nyquist = 0, square = 0;
    for (size_t j = 0; j < 60; j++)
        nyquist += (j % 2 ? -1 : 1) * b.x[j] / 60;
    for (size_t j = 0; j < 60; j++) {
        b.x[j] -= (j % 2 ? -1 : 1) * nyquist;
        square += b.x[j] * b.x[j] / 60;
    }
    tacet_transform_lines(b.t, b.x, &b.s);
    double rms = tacet_spectrum_rms(&b.s, 1, 29);
    assert_near(b.s.mean * b.s.mean + rms * rms, square, 0, 1e-13);
    bench_clear(&b);
}

// Samples of lines are the sum of cosines written out, with lines far below n/2.
static void test_samples_are_the_sum_of_cosines(void **state)
{
    (void)state;
    bench b = bench_of(48);
    tacet_spectrum s = b.s;
    s.n_lines = 5, s.revolutions = 3, s.mean = 0.25;
    uint64_t seed = 7;
    for (size_t h = 1; h <= 5; h++)
        s.line[h] = noise(&seed) + I * noise(&seed);
    memset(b.x, 0xff, 50 * sizeof *b.x); // what was in the buffer does not matter
    tacet_transform_samples_of(b.t, &s, b.x);
    for (size_t j = 0; j < 48; j++) {
        double sum = s.mean, turn = 2 * M_PI * (double)j / 48;
        for (size_t h = 1; h <= 5; h++)
            sum += cabs(s.line[h]) * cos((double)h * turn + carg(s.line[h]));
        assert_near(b.x[j], sum, 1e-14, 0);
        assert_near(tacet_spectrum_at(&s, 3 * turn), sum, 1e-14, 0);
    }
    bench_clear(&b);
}

static void test_there_and_back(void **state)
{
    (void)state;
    bench b = bench_of(1024);
    uint64_t seed = 3;
    double complex kept[512] = {0};
    b.s.mean = 11;
    for (size_t h = 1; h < 512; h++)
        kept[h] = b.s.line[h] = noise(&seed) + I * noise(&seed);
    tacet_transform_samples_of(b.t, &b.s, b.x);
    tacet_spectrum_zero(&b.s);
    b.s.line[0] = 9;
    tacet_transform_lines(b.t, b.x, &b.s);
    assert_near(b.s.mean, 11, 1e-13, 0);
    assert_near(cabs(b.s.line[0]), 0, 0, 0);
    for (size_t h = 1; h < 512; h++)
        assert_near(cabs(b.s.line[h] - kept[h]), 0, 1e-14, 0);
    bench_clear(&b);
}

static void test_create_refuses_lengths(void **state)
{
    (void)state;
    size_t bad[] = {0, 1, 2, 3, 5, 1023, ((size_t)1 << 28) + 2, SIZE_MAX - 1};
    for (size_t i = 0; i < sizeof bad / sizeof *bad; i++) {
        tacet_transform *t = NULL;
        assert_int_equal(tacet_transform_create(bad[i], &t), TACET_BAD_INPUT);
        assert_null(t);
    }
    tacet_transform_destroy(NULL);
    tacet_transform_release(NULL);
}

// More lines than samples can tell apart: no number comes out.
static void test_too_many_lines_give_no_number(void **state)
{
    (void)state;
    bench b = bench_of(8);
    tacet_spectrum s;
    assert_int_equal(tacet_spectrum_init(&s, 4, b.arena), TACET_OK);
    tacet_transform_samples_of(b.t, &s, b.x);
    assert_true(isnan(b.x[0]) && isnan(b.x[7]));
    for (size_t j = 0; j < 8; j++)
        b.x[j] = 1;
    tacet_transform_lines(b.t, b.x, &s);
    assert_true(isnan(s.mean) && isnan(creal(s.line[4])));
    bench_clear(&b);
}

static void test_length(void **state)
{
    (void)state;
    assert_int_equal(tacet_transform_length(336, 3), 1024);
    assert_int_equal(tacet_transform_length(336, 6), 2048);
    assert_int_equal(tacet_transform_length(128, 8), 1024);
    assert_int_equal(tacet_transform_length(129, 8), 2048);
    assert_int_equal(tacet_transform_length(0, 6), 4);
    assert_int_equal(tacet_transform_length(2, 1), 8); // 2 lines need more than 4 samples
    assert_int_equal(tacet_transform_length(5, 0), 16);
    tacet_transform *t = NULL; // beyond every length: ends, and create refuses
    assert_int_equal(tacet_transform_create(tacet_transform_length(SIZE_MAX / 2, 6), &t),
                     TACET_BAD_INPUT);
}

static void *plan_and_run(void *who)
{
    double *out = who;
    for (int pass = 0; pass < 40; pass++) {
        bench b = bench_of(16 << (pass % 4));
        b.s.line[2] = 1 - 2 * I;
        tacet_transform_samples_of(b.t, &b.s, b.x);
        out[pass] = b.x[3];
        bench_clear(&b);
    }
    return NULL;
}

// Plans made from several threads at once, the same bits in each.
static void test_threads_plan_together(void **state)
{
    (void)state;
    double out[4][40];
    pthread_t thread[4];
    for (size_t i = 0; i < 4; i++)
        assert_int_equal(pthread_create(&thread[i], NULL, plan_and_run, out[i]), 0);
    for (size_t i = 0; i < 4; i++)
        pthread_join(thread[i], NULL);
    for (size_t i = 1; i < 4; i++)
        assert_memory_equal(out[0], out[i], sizeof out[0]);
    assert_near(out[0][0], cos(2 * M_PI * 6 / 16) + 2 * sin(2 * M_PI * 6 / 16), 1e-14, 0);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_lines_n1_cosine),
        cmocka_unit_test(test_lines_n2_ramp),
        cmocka_unit_test(test_lines_n3_box),
        cmocka_unit_test(test_lines_n4_between_bins),
        cmocka_unit_test(test_lines_n5_square),
        cmocka_unit_test(test_lines_n6_rectified_sine),
        cmocka_unit_test(test_lines_k11_half_sines),
        cmocka_unit_test(test_lines_parseval),
        cmocka_unit_test(test_samples_are_the_sum_of_cosines),
        cmocka_unit_test(test_there_and_back),
        cmocka_unit_test(test_create_refuses_lengths),
        cmocka_unit_test(test_too_many_lines_give_no_number),
        cmocka_unit_test(test_length),
        cmocka_unit_test(test_threads_plan_together),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
