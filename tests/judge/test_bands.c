#include "hand_train.h"
#include "near.h"
#include "tacet/judge.h"
#include <math.h>
#include <string.h>

#define RPM (2 * M_PI / 60)

static const tacet_train train = {
    .n_nodes = 2,
    .n_links = 1,
    .node = {{"flywheel", 1, 0, 1, true}, {"load", 1, 0, 1, false}},
    .link = {{"coupling", 0, 1, 1e4, 0.1, 0, 1, NAN, NAN}},
};

static const tacet_band_def mount = {.name = "roll",
                                     .kind = TACET_BAND_MOUNT,
                                     .low_hz = 11,
                                     .high_hz = 18,
                                     .quantity = "link-torque:coupling",
                                     .limit_rms = 230,
                                     .over_all_fire_db = NAN,
                                     .floor_rms = NAN,
                                     .guard = NAN};

static tacet_band band_of(tacet_band_def d)
{
    tacet_band b;
    tacet_error e = {.text = ""};
    if (tacet_band_create(&d, 3, &train, NULL, &b, &e) != TACET_OK) fail_msg("%s", e.text);
    return b;
}

// counted band = [low (1 - guard), high (1 + guard)].
static void test_create_widens_by_the_guard(void **state)
{
    (void)state;
    tacet_band b = band_of(mount);
    assert_near(b.low_hz, 11, 0, 0);
    assert_near(b.high_hz, 18, 0, 0);
    assert_near(b.counted_low_hz, 10.45, 1e-14, 0);
    assert_near(b.counted_high_hz, 18.9, 1e-14, 0);
    assert_near(b.reserve_db, 3, 0, 0);
    assert_string_equal(b.of.what->name, "link-torque");
    tacet_band_def d = mount;
    d.guard = 0.1;
    b = band_of(d);
    assert_near(b.counted_low_hz, 9.9, 1e-14, 0);
    assert_near(b.counted_high_hz, 19.8, 1e-14, 0);
}

static void refused(tacet_band_def d, const char *part)
{
    tacet_band b = {.kind = 42};
    tacet_error e = {.text = ""};
    assert_int_equal(tacet_band_create(&d, 3, &train, NULL, &b, &e), TACET_BAD_INPUT);
    if (!strstr(e.text, part)) fail_msg("'%s' does not say '%s'", e.text, part);
    assert_int_equal(b.kind, 42);
}

static void test_create_refuses(void **state)
{
    (void)state;
    tacet_band_def d = mount;
    d.quantity = "link-torque:couplin";
    refused(d, "unknown link 'couplin'");
    d.quantity = "damper-heat:coupling";
    refused(d, "damper-heat is one number");
    d = mount;
    d.high_hz = 11;
    refused(d, "read 11 and 11");
    d.high_hz = NAN;
    refused(d, "from low_hz up to high_hz");
    d = mount;
    d.limit_rms = NAN;
    refused(d, "limit_rms or over_all_fire_db");
}

// Order 9/7 in 11..18 Hz: 60 f / order: 513.33 to 840.00 rpm bare, 487.67 to 882.00 with 5 % guard.
static void test_order_window_nine_sevenths(void **state)
{
    (void)state;
    tacet_band b = band_of(mount);
    double low, high;
    tacet_order_window(&b, 9.0 / 7, false, &low, &high);
    assert_near(low / RPM, 513.33, 0.005, 0);
    assert_near(high / RPM, 840.00, 1e-10, 0);
    tacet_order_window(&b, 9.0 / 7, true, &low, &high);
    assert_near(low / RPM, 487.67, 0.005, 0);
    assert_near(high / RPM, 882.00, 1e-10, 0);
    tacet_order_window(&b, 0, false, &low, &high); // order 0 lies in no band
    assert_true(isnan(low) && isnan(high));
}

// ---- level --------------------------------------------------------------------------------------

typedef struct {
    tacet_arena *arena;
    tacet_spectrum s;
    tacet_band_level level;
} bench;

static bench bench_of(unsigned revolutions, size_t n_lines)
{
    bench b = {.arena = tacet_arena_create()};
    assert_int_equal(tacet_spectrum_init(&b.s, n_lines, b.arena), TACET_OK);
    b.s.revolutions = revolutions;
    return b;
}

static void judge_level(bench *b, double rpm, const tacet_dispersion *d)
{
    tacet_band band = band_of(mount);
    memset(&b->level, 0xff, sizeof b->level);
    tacet_band_level_of(&band, &b->s, rpm * RPM, d, &b->level);
}

// By hand: 7 revolutions at 600 rpm, lines of 10/7 Hz; counted 10.45 to 18.9 Hz are lines 8 to 13.
static void test_level_sums_the_lines_inside(void **state)
{
    (void)state;
    bench b = bench_of(7, 20);
    b.s.mean = 1e6;
    for (size_t h = 1; h <= 20; h++)
        b.s.line[h] = 1000;
    for (size_t h = 8; h <= 13; h++)
        b.s.line[h] = 3;
    b.s.line[11] = 4 * I;
    judge_level(&b, 600, NULL);
    assert_near(b.level.nominal, sqrt((5 * 9 + 16) / 2.0), 0, 1e-15);
    assert_near(b.level.dispersed, b.level.nominal, 0, 0);
    assert_true(b.level.has_line);
    assert_int_equal(b.level.leading_line, 11);
    assert_near(b.level.leading_order, 11.0 / 7, 1e-15, 0);
    assert_near(b.level.leading_peak, 4, 1e-15, 0); // peak, not rms
    tacet_arena_destroy(b.arena);
}

// A line on an edge counts, at speeds computed from the edge; 1e-9 beyond it does not.
static void test_level_edges_are_inclusive(void **state)
{
    (void)state;
    tacet_band band = band_of(mount);
    bench b = bench_of(7, 40);
    for (size_t h = 1; h <= 40; h++) {
        tacet_spectrum_zero(&b.s);
        b.s.line[h] = 5;
        double low, high;
        tacet_order_window(&band, (double)h / 7, true, &low, &high);
        double speed[] = {low, high, low * (1 - 1e-9), high * (1 + 1e-9)};
        for (int i = 0; i < 4; i++) {
            judge_level(&b, speed[i] / RPM, NULL);
            assert_near(b.level.nominal, i < 2 ? 5 / sqrt(2) : 0, 1e-15, 0);
            assert_int_equal(b.level.has_line, i < 2);
            assert_int_equal(b.level.leading_line, i < 2 ? h : 0);
        }
    }
    tacet_arena_destroy(b.arena);
}

// The band above all lines, below the first, and beyond the end of the spectrum.
static void test_level_without_lines_inside(void **state)
{
    (void)state;
    bench b = bench_of(2, 4);
    for (size_t h = 1; h <= 4; h++)
        b.s.line[h] = 1;
    double rpm[] = {60, 6000, 1e-9, 1e12};
    for (int i = 0; i < 4; i++) {
        judge_level(&b, rpm[i], NULL);
        assert_near(b.level.nominal, 0, 0, 0);
        assert_false(b.level.has_line);
        assert_near(b.level.leading_order, 0, 0, 0);
    }
    tacet_arena_destroy(b.arena);
}

// A band from 0 Hz still leaves order 0 out, and has line 1.
static void test_level_order_zero_is_excluded(void **state)
{
    (void)state;
    bench b = bench_of(7, 20);
    tacet_band band = band_of(mount);
    band.counted_low_hz = 0;
    b.s.mean = 1e6;
    b.s.line[0] = 1e6;
    b.s.line[1] = 2;
    tacet_band_level_of(&band, &b.s, 600 * RPM, NULL, &b.level);
    assert_near(b.level.nominal, sqrt(2), 0, 1e-15);
    assert_int_equal(b.level.leading_line, 1);
    tacet_arena_destroy(b.arena);
}

// What is left of lines that cancel is no line: 1e-9 of the total rms.
static void test_level_no_line_rule(void **state)
{
    (void)state;
    bench b = bench_of(7, 20);
    b.s.line[20] = 1e3;
    b.s.line[10] = 0.99e-6;
    judge_level(&b, 600, NULL);
    assert_false(b.level.has_line);
    assert_int_equal(b.level.leading_line, 0);
    b.s.line[10] = 1.01e-6;
    judge_level(&b, 600, NULL);
    assert_true(b.level.has_line);
    assert_int_equal(b.level.leading_line, 10);
    tacet_spectrum_zero(&b.s); // nothing at all
    judge_level(&b, 600, NULL);
    assert_false(b.level.has_line);
    tacet_arena_destroy(b.arena);
}

// A line that is not finite is not taken for no line.
static void test_level_not_finite_is_told(void **state)
{
    (void)state;
    bench b = bench_of(7, 20);
    b.s.line[10] = NAN;
    judge_level(&b, 600, NULL);
    assert_false(isfinite(b.level.dispersed));
    tacet_band band = band_of(mount);
    tacet_band_result r;
    tacet_band_judge(&band, &b.level, NULL, &r);
    assert_int_equal(r.verdict, TACET_NO_VERDICT);
    assert_int_equal(r.why, TACET_WHY_FAILED);
    tacet_arena_destroy(b.arena);
}

// ---- dispersion ---------------------------------------------------------------------------------

static double noise(uint64_t *seed) // uniform in [-1, 1)
{
    *seed = *seed * 6364136223846793005u + 1442695040888963407u;
    return (double)(*seed >> 11) / 4503599627370496.0 - 1;
}

static double gauss(uint64_t *seed) // Box and Muller
{
    double u = 0.5 * (noise(seed) + 1), v = 0.5 * (noise(seed) + 1);
    return sqrt(-2 * log(1 - u)) * cos(2 * M_PI * v);
}

#define SLOTS 4

typedef struct {
    bench b;
    tacet_spectrum transfer[SLOTS], fired[SLOTS];
    const tacet_spectrum *transfers[SLOTS];
    tacet_dispersion d;
} cylinders;

// Four cylinders fire once each in two revolutions, equal pulses a quarter of a repeat apart.
static void cylinders_init(cylinders *c, size_t n_lines)
{
    *c = (cylinders){.b = bench_of(2, n_lines)};
    uint64_t seed = 4;
    for (size_t i = 0; i < SLOTS; i++) {
        assert_int_equal(tacet_spectrum_init(&c->transfer[i], n_lines, c->b.arena), TACET_OK);
        assert_int_equal(tacet_spectrum_init(&c->fired[i], n_lines, c->b.arena), TACET_OK);
        c->transfers[i] = &c->transfer[i];
        for (size_t h = 1; h <= n_lines; h++) {
            c->transfer[i].line[h] = 1 + 0.3 * noise(&seed) + 0.3 * I * noise(&seed);
            c->fired[i].line[h] = 100 / (double)h * cexp(-I * 2 * M_PI * (double)(h * i) / SLOTS);
        }
    }
    c->d = (tacet_dispersion){
        .cylinder_sigma = 0.03, .n_slots = SLOTS, .transfer = c->transfers, .fired = c->fired};
}

// Response with strengths 1 + e[i] of the cylinders.
static void respond(cylinders *c, const double *e)
{
    for (size_t h = 1; h <= c->b.s.n_lines; h++) {
        c->b.s.line[h] = 0;
        for (size_t i = 0; i < SLOTS; i++)
            c->b.s.line[h] += (1 + e[i]) * c->transfer[i].line[h] * c->fired[i].line[h];
    }
}

// Equal transfers, equal pulses: order 2 alone is left (line 4), all other lines cancel; 3 % of one
// cylinder's line adds sqrt(4) times itself to every line. 600 rpm: lines of 5 Hz; 10.45 to 18.9 Hz
// holds line 3 alone.
static void test_false_zero_is_filled(void **state)
{
    (void)state;
    cylinders c;
    cylinders_init(&c, 8);
    for (size_t i = 0; i < SLOTS; i++)
        for (size_t h = 1; h <= 8; h++)
            c.transfer[i].line[h] = 1;
    respond(&c, (double[SLOTS]){0});
    judge_level(&c.b, 600, NULL);
    assert_near(c.b.level.nominal, 0, 1e-13, 0);
    assert_false(c.b.level.has_line);
    judge_level(&c.b, 600, &c.d);
    assert_near(c.b.level.nominal, 0, 1e-13, 0);
    assert_near(c.b.level.dispersed, 0.03 * 2 * (100.0 / 3) / sqrt(2), 0, 1e-12);
    assert_true(c.b.level.has_line);
    assert_int_equal(c.b.level.leading_line, 3);
    assert_near(c.b.level.leading_peak, 0.03 * 2 * (100.0 / 3), 0, 1e-12);
    c.d.cylinder_sigma = 0;
    c.d.cyclic_mean_square =
        0.49; // cycles alone, between the lines: a level without a leading line
    judge_level(&c.b, 600, &c.d);
    assert_near(c.b.level.dispersed, 0.7, 0, 1e-12);
    assert_true(c.b.level.has_line);
    assert_int_equal(c.b.level.leading_line, 0);
    tacet_arena_destroy(c.b.arena);
}

static double level_squared(cylinders *c, const double *e)
{
    respond(c, e);
    judge_level(&c->b, 300, NULL); // lines of 2.5 Hz; 5, 6 and 7 inside
    return c->b.level.nominal * c->b.level.nominal;
}

// The leading line is the largest with what unequal cylinders add: by hand line 5 has 9 + 0, line 6
// 8 + 5 (all times their units), lines of 2.5 Hz.
static void test_leading_line_counts_unequal_cylinders(void **state)
{
    (void)state;
    cylinders c;
    cylinders_init(&c, 12);
    tacet_spectrum_zero(&c.b.s);
    c.b.s.line[5] = 3;
    c.b.s.line[6] = sqrt(8);
    c.d.cylinder_sigma = 1;
    for (size_t i = 0; i < SLOTS; i++)
        tacet_spectrum_zero(&c.fired[i]);
    c.transfer[2].line[6] = I;
    c.fired[2].line[6] = -sqrt(5);
    judge_level(&c.b, 300, &c.d);
    assert_int_equal(c.b.level.leading_line, 6);
    assert_near(c.b.level.leading_peak, sqrt(13), 0, 1e-14);
    assert_near(c.b.level.dispersed, sqrt(22 / 2.0), 0, 1e-14);
    tacet_arena_destroy(c.b.arena);
}

// Seeded Monte Carlo: the mean over engines of level^2, with strengths 1 + 0.03 xi, is the
// formula's. 10,000 engines and their mirror images (strengths 1 - 0.03 xi), so that what is linear
// in xi falls out of the scatter; that is measured and below 2 % of the added part.
static void test_cylinder_dispersion_against_random_engines(void **state)
{
    (void)state;
    cylinders c;
    cylinders_init(&c, 12);
    double nominal = level_squared(&c, (double[SLOTS]){0});
    judge_level(&c.b, 300, &c.d);
    double added = c.b.level.dispersed * c.b.level.dispersed - nominal, sum = 0, sum2 = 0;
    assert_near(c.b.level.nominal * c.b.level.nominal, nominal, 0, 0);
    uint64_t seed = 2024;
    int engines = 10000;
    for (int k = 0; k < engines; k++) {
        double e[SLOTS], mirror[SLOTS];
        for (size_t i = 0; i < SLOTS; i++) {
            e[i] = 0.03 * gauss(&seed);
            mirror[i] = -e[i];
        }
        double more = 0.5 * (level_squared(&c, e) + level_squared(&c, mirror)) - nominal;
        sum += more;
        sum2 += more * more;
    }
    double mean = sum / engines, scatter = sqrt((sum2 / engines - mean * mean) / engines);
    assert_true(scatter < 0.02 * added);
    assert_near(mean, added, 3.5 * scatter, 0);
    tacet_arena_destroy(c.b.arena);
}

// Transfers and pulses that end inside the band are used as far as they go.
static void test_dispersion_of_short_spectra(void **state)
{
    (void)state;
    cylinders c;
    cylinders_init(&c, 12);
    tacet_spectrum_zero(&c.b.s);
    for (size_t i = 0; i < SLOTS; i++) {
        c.transfer[i].n_lines = 6;
        for (size_t h = 1; h <= 12; h++)
            c.transfer[i].line[h] = 1;
    }
    judge_level(&c.b, 300, &c.d);
    double expected = 0.03 * 2 * sqrt((100.0 / 5 * 100 / 5 + 100.0 / 6 * 100 / 6) / 2);
    assert_near(c.b.level.dispersed, expected, 0, 1e-12);
    for (size_t i = 0; i < SLOTS; i++)
        c.fired[i].n_lines = 5;
    judge_level(&c.b, 300, &c.d);
    assert_near(c.b.level.dispersed, 0.03 * 2 * (100.0 / 5) / sqrt(2), 0, 1e-12);
    tacet_arena_destroy(c.b.arena);
}

// Closed form: flat H and P give 2 lambda sigma^2 |H P|^2 times the width; slots add; a rising
// |P|^2 over uneven steps follows the trapezium.
static void test_cyclic_mean_square_by_hand(void **state)
{
    (void)state;
    double f[3] = {10, 11, 14}, rate[2] = {20, 5};
    double complex H[6] = {2, 2, 2, I, I, I}, P[3] = {3 * I, 3, -3};
    double expected = 2 * 0.02 * 0.02 * 9 * 4 * (20 * 4 + 5 * 1);
    assert_near(tacet_cyclic_mean_square(3, f, 2, H, P, rate, 0.02), expected, 0, 1e-14);
    double complex rising[3] = {0, 1, 2};
    expected = 2 * 0.1 * 0.1 * 20 * 4 * (0.5 * 1 + 0.5 * 3 * 5);
    assert_near(tacet_cyclic_mean_square(3, f, 1, H, rising, rate, 0.1), expected, 0, 1e-14);
    assert_near(tacet_cyclic_mean_square(1, f, 1, H, rising, rate, 0.1), 0, 0, 0);
}

// One degree of freedom driven by half-sine pulses of random strength, marched in time by the
// classical Runge-Kutta rule; then the mean square of its lines inside a band.
#define MARCH_STEPS 65536
#define STEP        (1.0 / 2048)
#define PERIOD      0.0625 // s between pulses: 16 a second
#define WIDTH       0.015625
#define NATURAL     (2 * M_PI * 14)
#define RATIO       0.05

static double pulse_at(const double *strength, double t)
{
    long k = lround(floor(t / PERIOD + 1e-9));
    double x = t - (double)k * PERIOD;
    return x < WIDTH ? strength[k] * sin(M_PI * x / WIDTH) : 0;
}

static void rate_of(const double y[2], double force, double out[2])
{
    out[0] = y[1];
    out[1] = force - 2 * RATIO * NATURAL * y[1] - NATURAL * NATURAL * y[0];
}

static void march(const double *strength, double *out)
{
    double y[2] = {0, 0};
    for (size_t j = 0; j < MARCH_STEPS; j++) {
        double t = (double)j * STEP, k[4][2], z[2];
        double force[3] = {pulse_at(strength, t), pulse_at(strength, t + STEP / 2),
                           pulse_at(strength, t + STEP)};
        out[j] = y[0];
        rate_of(y, force[0], k[0]);
        for (int stage = 1; stage < 4; stage++) {
            double part = stage == 3 ? STEP : STEP / 2;
            for (int i = 0; i < 2; i++)
                z[i] = y[i] + part * k[stage - 1][i];
            rate_of(z, force[stage == 3 ? 2 : 1], k[stage]);
        }
        for (int i = 0; i < 2; i++)
            y[i] += STEP / 6 * (k[0][i] + 2 * k[1][i] + 2 * k[2][i] + k[3][i]);
    }
}

// 1/s2 to rad, and int sin(pi t / width) exp(-i w t) dt over the pulse (closed form).
static double complex resonator(double f)
{
    double w = 2 * M_PI * f;
    return 1 / (NATURAL * NATURAL - w * w + 2 * I * RATIO * NATURAL * w);
}

static double complex half_sine(double f)
{
    double w = 2 * M_PI * f, b = M_PI / WIDTH;
    return b * (1 + cexp(-I * w * WIDTH)) / (b * b - w * w);
}

// The strengths' variation alone is applied (the even part makes lines only). 32 s a march, 12
// marches; 11 to 18 Hz holds some 220 lines of each, of which the resonance holds about 45
// independent ones: the scatter of the mean is about 1 / sqrt(12 * 45), 4 %. It is measured.
static void test_cyclic_mean_square_against_random_pulses(void **state)
{
    (void)state;
    static double strength[MARCH_STEPS / 128 + 2];
    double f[141], rate[1] = {1 / PERIOD}, low = 11, high = 18;
    double complex H[141], P[141];
    for (size_t k = 0; k < 141; k++) {
        f[k] = low + (high - low) * (double)k / 140;
        H[k] = resonator(f[k]);
        P[k] = half_sine(f[k]);
    }
    double expected = tacet_cyclic_mean_square(141, f, 1, H, P, rate, 0.02);
    tacet_transform *t;
    assert_int_equal(tacet_transform_create(MARCH_STEPS, &t), TACET_OK);
    double *x = tacet_transform_buffer(t);
    bench b = bench_of(1, 1024);
    double line_hz = 1 / (MARCH_STEPS * STEP), sum = 0, sum2 = 0;
    uint64_t seed = 77;
    int marches = 12;
    for (int k = 0; k < marches; k++) {
        for (size_t i = 0; i < sizeof strength / sizeof *strength; i++)
            strength[i] = 0.02 * gauss(&seed);
        march(strength, x);
        tacet_transform_lines(t, x, &b.s);
        double rms =
            tacet_spectrum_rms(&b.s, (size_t)ceil(low / line_hz), (size_t)floor(high / line_hz));
        sum += rms * rms / expected;
        sum2 += rms * rms * rms * rms / (expected * expected);
    }
    double mean = sum / marches, scatter = sqrt((sum2 / marches - mean * mean) / (marches - 1));
    assert_true(scatter < 0.08);
    assert_near(mean, 1, 3.5 * scatter, 0);
    tacet_transform_release(x);
    tacet_transform_destroy(t);
    tacet_arena_destroy(b.arena);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_create_widens_by_the_guard),
        cmocka_unit_test(test_create_refuses),
        cmocka_unit_test(test_order_window_nine_sevenths),
        cmocka_unit_test(test_level_sums_the_lines_inside),
        cmocka_unit_test(test_level_edges_are_inclusive),
        cmocka_unit_test(test_level_without_lines_inside),
        cmocka_unit_test(test_level_order_zero_is_excluded),
        cmocka_unit_test(test_level_no_line_rule),
        cmocka_unit_test(test_level_not_finite_is_told),
        cmocka_unit_test(test_false_zero_is_filled),
        cmocka_unit_test(test_leading_line_counts_unequal_cylinders),
        cmocka_unit_test(test_cylinder_dispersion_against_random_engines),
        cmocka_unit_test(test_dispersion_of_short_spectra),
        cmocka_unit_test(test_cyclic_mean_square_by_hand),
        cmocka_unit_test(test_cyclic_mean_square_against_random_pulses),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
