#include "hand_train.h"
#include "near.h"
#include "tacet/judge.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>

#define LINES 6

static const tacet_fatigue_def steel = {40, 1e6, 5, 100, TACET_MEAN_GOODMAN};
static const tacet_train train = {
    .fatigue = &steel,
    .n_nodes = 2,
    .n_links = 1,
    .node = {{"flywheel", 1, 0, 1, true}, {"load", 1, 0, 1, false}},
    .link = {{"coupling", 0, 1, 1e4, 0, 3, 1, 1e-5, 2}},
};

typedef struct {
    tacet_arena *arena;
    tacet_spectrum angle[2], torque, scratch;
    tacet_train_motion motion;
    tacet_transform *t;
    double *x;
    tacet_response r;
} bench;

static void bench_init(bench *b)
{
    *b = (bench){.arena = tacet_arena_create()};
    assert_int_equal(tacet_spectrum_init(&b->angle[0], LINES, b->arena), TACET_OK);
    assert_int_equal(tacet_spectrum_init(&b->angle[1], LINES, b->arena), TACET_OK);
    assert_int_equal(tacet_spectrum_init(&b->torque, LINES, b->arena), TACET_OK);
    assert_int_equal(tacet_spectrum_init(&b->scratch, LINES, b->arena), TACET_OK);
    assert_int_equal(tacet_transform_create(tacet_transform_length(LINES, 6), &b->t), TACET_OK);
    b->x = tacet_transform_buffer(b->t);
    b->motion = (tacet_train_motion){b->angle, &b->torque, 2, 1};
    b->r = (tacet_response){.train = &train,
                            .motion = &b->motion,
                            .speed_rad_per_s = 100,
                            .revolutions = 2,
                            .n_lines = LINES,
                            .peak_pressure_Pa = 12e6};
}

static void bench_clear(bench *b)
{
    tacet_transform_release(b->x);
    tacet_transform_destroy(b->t);
    tacet_arena_destroy(b->arena);
}

static tacet_limit limit_of(const char *quantity, int statistic, double value)
{
    tacet_limit l;
    tacet_error e = {.text = ""};
    tacet_limit_def d = {.name = "l", .quantity = quantity, .statistic = statistic, .value = value};
    if (tacet_limit_create(&d, &train, NULL, &l, &e) != TACET_OK) fail_msg("%s", e.text);
    return l;
}

static tacet_limit_result judge(bench *b, tacet_limit l)
{
    tacet_limit_result r;
    memset(&r, 0xff, sizeof r);
    assert_int_equal(
        tacet_limit_judge(&l, &b->r, 3, &(tacet_limit_scratch){&b->scratch, b->t, b->x, NULL}, &r),
        TACET_OK);
    return r;
}

// Signal -10 + 3 cos a' + 2 cos 2 a': by hand highest -5 (both 1), lowest where cos a' = -3/8:
// -10 - 9/8 + 2 (2 * 9/64 - 1) = -10 - 9/8 + 9/16 - 2 = -12.5625. rms^2 = (9 + 4) / 2.
static void test_statistics_of_a_signal(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    b.torque.mean = -10;
    b.torque.line[1] = 3 * cexp(0.5 * I);
    b.torque.line[2] = 2 * cexp(1.0 * I);
    struct {
        int statistic;
        double expected;
    } row[] = {{TACET_STAT_PP, 7.5625},
               {TACET_STAT_HALF_RANGE, 3.78125},
               {TACET_STAT_RMS, sqrt(6.5)},
               {TACET_STAT_MEAN, 10},      // magnitude
               {TACET_STAT_MAX, 12.5625}}; // largest magnitude, mean included
    for (size_t i = 0; i < 5; i++) {
        tacet_limit_result r = judge(&b, limit_of("link-torque:coupling", row[i].statistic, 100));
        assert_near(r.value, row[i].expected, 0, 1e-6);
        assert_near(r.margin_db, 20 * log10(100 / row[i].expected), 1e-5, 0);
        assert_int_equal(r.verdict, TACET_CLEAR);
    }
    b.torque.mean = 10; // turned over, the largest magnitude is on top
    b.torque.line[1] *= -1;
    b.torque.line[2] *= -1;
    assert_near(judge(&b, limit_of("link-torque:coupling", TACET_STAT_MAX, 100)).value, 12.5625, 0,
                1e-6);
    bench_clear(&b);
}

// The limit is in the quantity's unit: 2 / 1e-5 m3 * 5 N m = 1 MPa.
static void test_value_is_in_the_unit(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    b.torque.line[1] = 5;
    tacet_limit_result r = judge(&b, limit_of("link-stress:coupling", TACET_STAT_HALF_RANGE, 10));
    assert_near(r.value, 1, 0, 1e-6);
    assert_near(r.margin_db, 20, 1e-5, 0);
    bench_clear(&b);
}

// Numbers: 1/2 c w^2 D^2 = 0.5 * 3 * 50^2 * 0.02^2 = 1.5 W; 12 MPa; pp of the speed over its mean
// 2 * 50 * 0.02 / 100 = 0.02.
static void test_quantities_with_one_statistic(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    b.angle[0].line[1] = 0.02 * I;
    assert_near(judge(&b, limit_of("damper-heat:coupling", -1, 10)).value, 1.5, 0, 1e-13);
    assert_near(judge(&b, limit_of("damper-heat:coupling", TACET_STAT_MEAN, 10)).value, 1.5, 0,
                1e-13);
    assert_near(judge(&b, limit_of("peak-pressure", -1, 16)).value, 12, 0, 1e-14);
    assert_near(judge(&b, limit_of("peak-pressure", TACET_STAT_MAX, 16)).value, 12, 0, 1e-14);
    assert_near(judge(&b, limit_of("irregularity", -1, 0.1)).value, 0.02, 0, 1e-6);
    bench_clear(&b);
}

// over below 0 dB, near below the reserve of 3 dB (a factor of 1.4125), clear from there.
static void test_verdicts(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    assert_int_equal(judge(&b, limit_of("peak-pressure", -1, 11.99)).verdict, TACET_OVER);
    assert_int_equal(judge(&b, limit_of("peak-pressure", -1, 12.01)).verdict, TACET_NEAR);
    assert_int_equal(judge(&b, limit_of("peak-pressure", -1, 12 * 1.4124)).verdict, TACET_NEAR);
    assert_int_equal(judge(&b, limit_of("peak-pressure", -1, 12 * 1.4126)).verdict, TACET_CLEAR);
    assert_int_equal(judge(&b, limit_of("peak-pressure", -1, 100)).why, TACET_WHY_NONE);
    bench_clear(&b);
}

// A signal that is not there: clear, without a margin.
static void test_zero_is_clear(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    tacet_limit_result r = judge(&b, limit_of("link-torque:coupling", TACET_STAT_PP, 1));
    assert_int_equal(r.verdict, TACET_CLEAR);
    assert_near(r.value, 0, 0, 0);
    assert_true(isnan(r.margin_db));
    bench_clear(&b);
}

// A cosine of 20 MPa on a mean of 10 with its tops halfway between two of its 16 samples: Goodman
// 20 / (1 - 10 / 100) = 22.222 MPa, four times a repeat of two revolutions; by Miner at 100 rad/s
// 3600 * 100 / (4 pi) repeats an hour of 4 (22.222 / 40)^5 / 1e6.
static void test_cycles_between_samples(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    size_t n = tacet_transform_samples(b.t);
    assert_int_equal(n, 64);
    b.torque.mean = 50;
    b.torque.line[4] = 100 * cexp(I * M_PI / 16);
    double *cycles = calloc(TACET_RAIN_SCRATCH * (n + 1), sizeof *cycles);
    const tacet_limit_scratch scratch = {&b.scratch, b.t, b.x, cycles};
    const double expected[2] = {20 / 0.9,
                                3600 * 100 / (4 * M_PI) * 4 * pow(20 / 0.9 / 40, 5) / 1e6};
    for (int i = 0; i < 2; i++) {
        tacet_limit l =
            limit_of("link-stress:coupling", i ? TACET_STAT_DAMAGE : TACET_STAT_REVERSED, 30);
        tacet_limit_result r;
        assert_int_equal(tacet_limit_judge(&l, &b.r, 3, &scratch, &r), TACET_OK);
        assert_near(r.value, expected[i], 0, i ? 5e-3 : 1e-3);
        b.torque.line[3] = NAN;
        assert_int_equal(tacet_limit_judge(&l, &b.r, 3, &scratch, &r), TACET_NOT_FINITE);
        b.torque.line[3] = 0;
    }
    free(cycles);
    bench_clear(&b);
}

static void test_not_finite_is_refused(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    for (int statistic = TACET_STAT_PP; statistic <= TACET_STAT_MAX; statistic++) {
        tacet_limit l = limit_of("link-torque:coupling", statistic, 1);
        tacet_limit_result r = {.value = 42};
        b.torque.mean = b.torque.line[3] = NAN;
        assert_int_equal(
            tacet_limit_judge(&l, &b.r, 3, &(tacet_limit_scratch){&b.scratch, b.t, b.x, NULL}, &r),
            TACET_NOT_FINITE);
        assert_near(r.value, 42, 0, 0);
    }
    b.r.peak_pressure_Pa = INFINITY;
    tacet_limit l = limit_of("peak-pressure", -1, 1);
    tacet_limit_result r;
    assert_int_equal(
        tacet_limit_judge(&l, &b.r, 3, &(tacet_limit_scratch){&b.scratch, b.t, b.x, NULL}, &r),
        TACET_NOT_FINITE);
    bench_clear(&b);
}

static void refused(const char *quantity, int statistic, double value, const char *part)
{
    tacet_limit l = {.statistic = 42};
    tacet_error e = {.text = ""};
    tacet_limit_def d = {.quantity = quantity, .statistic = statistic, .value = value};
    assert_int_equal(tacet_limit_create(&d, &train, NULL, &l, &e), TACET_BAD_INPUT);
    if (!strstr(e.text, part)) fail_msg("'%s' does not say '%s'", e.text, part);
    assert_int_equal(l.statistic, 42);
}

static void test_create_refuses(void **state)
{
    (void)state;
    refused("link-torque:coupling", -1, 1, "needs a statistic: pp, half_range, rms, mean, max");
    refused("link-torque:coupling", 7, 1, "needs a statistic");
    refused("link-torque:coupling", TACET_STAT_DAMAGE, 1, "damage is a statistic of a link-stress");
    refused("peak-pressure", TACET_STAT_PP, 1, "the statistic of peak-pressure is max; read pp");
    refused("irregularity", TACET_STAT_MAX, 1, "the statistic of irregularity is pp; read max");
    refused("damper-heat:coupling", TACET_STAT_RMS, 1, "damper-heat is mean; read rms");
    refused("roll-torque", TACET_STAT_PP, 0, "above 0; read 0");
    refused("roll-torque", TACET_STAT_PP, NAN, "above 0");
    refused("roll-torque", TACET_STAT_PP, INFINITY, "above 0");
    refused("roll-torqu", TACET_STAT_PP, 1, "unknown quantity 'roll-torqu'");
}

static void test_no_verdict(void **state)
{
    (void)state;
    tacet_limit_result r;
    tacet_limit_no_verdict(TACET_WHY_UNREACHABLE, &r);
    assert_int_equal(r.verdict, TACET_NO_VERDICT);
    assert_int_equal(r.why, TACET_WHY_UNREACHABLE);
    assert_true(isnan(r.value) && isnan(r.margin_db));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_statistics_of_a_signal),
        cmocka_unit_test(test_value_is_in_the_unit),
        cmocka_unit_test(test_quantities_with_one_statistic),
        cmocka_unit_test(test_verdicts),
        cmocka_unit_test(test_zero_is_clear),
        cmocka_unit_test(test_cycles_between_samples),
        cmocka_unit_test(test_not_finite_is_refused),
        cmocka_unit_test(test_create_refuses),
        cmocka_unit_test(test_no_verdict),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
