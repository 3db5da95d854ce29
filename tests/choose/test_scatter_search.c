// The search within a scatter of stiffness, on systems whose margin is a closed form.
//
// A spring k (1 + i eta) between a force and the ground passes on T = k (1 + i eta) / (k (1 + i
// eta) - w^2 m) of what drives the mass m (any text on vibration). With f the stiffness over the
// stated one and c = w^2 m / k: |T|^2 = (1 + eta^2) / ((1 - c/f)^2 + eta^2), largest at f = c,
// where it is (1 + eta^2) / eta^2.
#include "choose/scatter.h"
#include "near.h"
#include <math.h>
#include <string.h>

typedef struct {
    double c, eta;
    bool spring;    // force of a spring that is pressed by a given way: level ~ f
    bool both;      // two springs, one on the other's scale: f = f0 f1
    double unknown; // factors above this are not known; 0: all are
    double silent;  // factors below this have no line
    size_t n, stop; // looks; after `stop` of them a probe fails, 0: never
} passing;

static double passed_db(const passing *p, double f)
{
    if (p->spring) return 20 * log10(f);
    double off = 1 - p->c / f;
    return 10 * log10((1 + p->eta * p->eta) / (off * off + p->eta * p->eta));
}

// Margin 0: 10 dB less what is passed. Margin 1 moves with nothing.
static tacet_status look(void *who, const double *factor, double *margin_db)
{
    passing *p = who;
    if (p->stop && p->n == p->stop) return TACET_STOPPED;
    p->n++;
    double f = p->both ? factor[0] * factor[1] : factor[0];
    margin_db[0] = 10 - passed_db(p, f);
    if (p->unknown > 0 && f > p->unknown) margin_db[0] = NAN;
    if (f < p->silent) margin_db[0] = INFINITY;
    margin_db[1] = 5;
    return TACET_OK;
}

typedef struct {
    scatter_least least[2];
    size_t points, failed;
    tacet_arena *arena;
} result;

static tacet_status find(passing *p, size_t n, double half_width, result *out)
{
    double width[4] = {half_width, half_width, half_width, half_width};
    *out = (result){.arena = tacet_arena_create()};
    scatter_space q = {n, 2, width, look, p, out->arena};
    return scatter_search(&q, out->least, &out->points, &out->failed);
}

static void test_force_of_a_spring(void **state)
{
    (void)state;
    passing p = {.spring = true};
    result r;
    assert_int_equal(find(&p, 1, 0.15, &r), TACET_OK);
    assert_near(r.least[0].stated_db, 10, 0, 0);
    assert_near(r.least[0].least_db, 10 - 20 * log10(1.15), 1e-12, 0);
    assert_near(r.least[0].at[0], 1.15, 1e-15, 0);
    assert_near(r.least[0].slope_db[0], -20 / log(10), 1e-9, 0);
    assert_int_equal(r.least[0].governs, 0);
    assert_int_equal(r.points, p.n);
    // the other moves with nothing
    assert_near(r.least[1].least_db, 5, 0, 0);
    assert_near(r.least[1].at[0], 1, 0, 0);
    assert_near(r.least[1].slope_db[0], 0, 1e-12, 0);
    assert_int_equal(r.least[1].governs, SIZE_MAX);
    tacet_arena_destroy(r.arena);
}

// Between the looks at 5 % steps and sharper than they are apart; both ends are harmless.
static void test_resonance_inside(void **state)
{
    (void)state;
    for (double c = 0.87; c < 1.14; c += 0.013) {
        passing p = {.c = c, .eta = 0.05};
        result r;
        double peak = 10 * log10((1 + 0.05 * 0.05) / (0.05 * 0.05));
        assert_int_equal(find(&p, 1, 0.15, &r), TACET_OK);
        assert_near(r.least[0].least_db, 10 - peak, 0.1, 0);
        assert_true(r.least[0].least_db >= 10 - peak - 1e-9);
        assert_near(r.least[0].at[0], c, 0.01, 0);
        assert_true(10 - passed_db(&p, 0.85) > r.least[0].least_db + 0.3);
        assert_true(10 - passed_db(&p, 1.15) > r.least[0].least_db + 0.3);
        tacet_arena_destroy(r.arena);
    }
}

// d(margin)/d(ln f) at f = 1: 20/ln 10 c (1 - c) / ((1 - c)^2 + eta^2).
static void test_slope(void **state)
{
    (void)state;
    static const double c[] = {0.3, 0.8, 0.97, 1.1, 2};
    for (int i = 0; i < 5; i++) {
        passing p = {.c = c[i], .eta = 0.12};
        result r;
        double off = 1 - c[i], slope = 20 / log(10) * c[i] * off / (off * off + 0.12 * 0.12);
        assert_int_equal(find(&p, 1, 0.2, &r), TACET_OK);
        assert_near(r.least[0].slope_db[0], slope, 0, 3e-3);
        tacet_arena_destroy(r.arena);
    }
}

// f0 f1 = 1.25 lies on no axis (1.15 at most) and in no corner (1.3225).
static void test_resonance_off_the_axes(void **state)
{
    (void)state;
    passing p = {.c = 1.25, .eta = 0.03, .both = true};
    result r;
    assert_int_equal(find(&p, 2, 0.15, &r), TACET_OK);
    double peak = 10 * log10((1 + 0.03 * 0.03) / (0.03 * 0.03));
    assert_near(r.least[0].least_db, 10 - peak, 0.1, 0);
    assert_near(r.least[0].at[0] * r.least[0].at[1], 1.25, 0.005, 0);
    assert_near(r.least[0].slope_db[0], r.least[0].slope_db[1], 1e-9, 0);
    tacet_arena_destroy(r.arena);
}

// All corners: two springs in a row of four that only together come to 1.15^2.
static void test_corner(void **state)
{
    (void)state;
    passing p = {.spring = true, .both = true};
    for (size_t n = 2; n <= 4; n++) {
        result r;
        assert_int_equal(find(&p, n, 0.15, &r), TACET_OK);
        assert_near(r.least[0].least_db, 10 - 40 * log10(1.15), 1e-9, 0);
        tacet_arena_destroy(r.arena);
    }
}

// A spring that moves nothing stands as stated, though the corner with the least margin has it
// softer.
static void test_idle_entry_stands_as_stated(void **state)
{
    (void)state;
    passing p = {.spring = true};
    result r;
    assert_int_equal(find(&p, 3, 0.15, &r), TACET_OK);
    assert_near(r.least[0].at[0], 1.15, 1e-15, 0);
    assert_near(r.least[0].at[1], 1, 0, 0);
    assert_near(r.least[0].at[2], 1, 0, 0);
    p = (passing){.c = 1.05, .eta = 0.1, .both = true};
    tacet_arena_destroy(r.arena);
    assert_int_equal(find(&p, 3, 0.15, &r), TACET_OK);
    assert_near(r.least[0].at[2], 1, 0, 0);
    assert_near(passed_db(&p, r.least[0].at[0] * r.least[0].at[1]), 10 - r.least[0].least_db, 1e-12,
                0);
    tacet_arena_destroy(r.arena);
}

// No width, no change; a small one, the slope.
static void test_width_to_nothing(void **state)
{
    (void)state;
    static const double width[] = {1e-9, 1e-6, 1e-3, 1e-2};
    for (int i = 0; i < 4; i++) {
        passing p = {.c = 0.7, .eta = 0.1};
        result r;
        assert_int_equal(find(&p, 1, width[i], &r), TACET_OK);
        double fall = r.least[0].stated_db - r.least[0].least_db;
        double expected = width[i] * 20 / log(10) * 0.7 * 0.3 / (0.3 * 0.3 + 0.1 * 0.1);
        assert_near(fall, expected, 1e-4, 0.05);
        tacet_arena_destroy(r.arena);
    }
}

static void test_same_bits(void **state)
{
    (void)state;
    result r[2];
    for (int i = 0; i < 2; i++) {
        passing p = {.c = 1.07, .eta = 0.1, .both = true};
        assert_int_equal(find(&p, 2, 0.2, &r[i]), TACET_OK);
    }
    assert_memory_equal(&r[0].least[0].least_db, &r[1].least[0].least_db, sizeof(double));
    assert_memory_equal(r[0].least[0].at, r[1].least[0].at, 2 * sizeof(double));
    assert_int_equal(r[0].points, r[1].points);
    for (int i = 0; i < 2; i++)
        tacet_arena_destroy(r[i].arena);
}

static void test_not_known_and_no_line(void **state)
{
    (void)state;
    result r;
    passing part = {.spring = true, .unknown = 1.1};
    assert_int_equal(find(&part, 1, 0.15, &r), TACET_OK);
    assert_true(r.failed > 0 && r.failed < r.points);
    assert_near(r.least[0].least_db, 10 - 20 * log10(1.1), 0.1, 0);
    tacet_arena_destroy(r.arena);
    passing all = {.spring = true, .unknown = 0.5};
    assert_int_equal(find(&all, 1, 0.15, &r), TACET_OK); // as stated not known
    assert_true(isnan(r.least[0].stated_db) && isnan(r.least[0].least_db));
    assert_int_equal(r.failed, 0);
    tacet_arena_destroy(r.arena);
    passing silent = {.spring = true, .silent = 1.02};
    assert_int_equal(find(&silent, 1, 0.15, &r), TACET_OK); // a line comes in
    assert_true(isinf(r.least[0].stated_db));
    assert_near(r.least[0].least_db, 10 - 20 * log10(1.15), 1e-9, 0);
    tacet_arena_destroy(r.arena);
}

static void test_a_probe_that_ends_it(void **state)
{
    (void)state;
    for (size_t stop = 1; stop < 8; stop++) {
        passing p = {.c = 1.07, .eta = 0.1, .stop = stop};
        result r;
        assert_int_equal(find(&p, 1, 0.15, &r), TACET_STOPPED);
        tacet_arena_destroy(r.arena);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_force_of_a_spring),
        cmocka_unit_test(test_resonance_inside),
        cmocka_unit_test(test_slope),
        cmocka_unit_test(test_resonance_off_the_axes),
        cmocka_unit_test(test_corner),
        cmocka_unit_test(test_idle_entry_stands_as_stated),
        cmocka_unit_test(test_width_to_nothing),
        cmocka_unit_test(test_same_bits),
        cmocka_unit_test(test_not_known_and_no_line),
        cmocka_unit_test(test_a_probe_that_ends_it),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
