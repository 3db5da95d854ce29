// Shaking forces and moments of reciprocating and rotating masses.
//
// Layouts: the usual handbook table of engine balance (from memory; recomputed by vector sums),
// forces over m r W^2 (first order) and m r A2 W^2 (second), couples over that times the spacing.
#include "bodies.h"
#include "near.h"
#include <math.h>
#include <string.h>

#define MOST 12
#define DEG  (M_PI / 180)
#define A2   0.2540250 // second harmonic of the slider-crank, rod four times the throw (S2)
#define A4   (-0.0040981)
#define A6   0.0000744

typedef struct {
    const char *name;
    unsigned n;
    double bank[MOST], pin[MOST], at[MOST]; // deg about x from up; spacings
    double f1, c1, f2, c2;                  // amplitudes (largest of the ellipse)
    double f1_least, c1_least;              // smallest; NAN: not looked at
} layout;

static const layout layouts[] = {
    {"I2 360", 2, {0}, {0, 0}, {-.5, .5}, 2, 0, 2, 0, 0, NAN},
    {"I2 180", 2, {0}, {0, 180}, {-.5, .5}, 0, 1, 2, 0, NAN, 0},
    {"I3", 3, {0}, {0, 120, 240}, {-1, 0, 1}, 0, 1.7320508, 0, 1.7320508, NAN, 0},
    {"I4", 4, {0}, {0, 180, 180, 0}, {-1.5, -.5, .5, 1.5}, 0, 0, 4, 0, NAN, NAN},
    {"I4 cross", 4, {0}, {0, 90, 270, 180}, {-1.5, -.5, .5, 1.5}, 0, 3.1622777, 0, 0, NAN, 0},
    {"I6",
     6,
     {0},
     {0, 120, 240, 240, 120, 0},
     {-2.5, -1.5, -.5, .5, 1.5, 2.5},
     0,
     0,
     0,
     0,
     NAN,
     NAN},
    {"V2 90", 2, {-45, 45}, {0, 0}, {0, 0}, 1, 0, 1.4142136, 0, 1, NAN},
    {"V6 90",
     6,
     {-45, 45, -45, 45, -45, 45},
     {0, 0, 120, 120, 240, 240},
     {-1, -1, 0, 0, 1, 1},
     0,
     1.7320508,
     0,
     2.4494897,
     NAN,
     1.7320508},
    {"V6 60",
     6,
     {-30, 30, -30, 30, -30, 30},
     {0, 0, 120, 120, 240, 240},
     {-1, -1, 0, 0, 1, 1},
     0,
     2.5980762,
     0,
     1.5,
     NAN,
     0.8660254},
    {"V8 cross",
     8,
     {-45, 45, -45, 45, -45, 45, -45, 45},
     {0, 0, 90, 90, 270, 270, 180, 180},
     {-1.5, -1.5, -.5, -.5, .5, .5, 1.5, 1.5},
     0,
     3.1622777,
     0,
     0,
     NAN,
     3.1622777},
    {"V8 flat",
     8,
     {-45, 45, -45, 45, -45, 45, -45, 45},
     {0, 0, 180, 180, 180, 180, 0, 0},
     {-1.5, -1.5, -.5, -.5, .5, .5, 1.5, 1.5},
     0,
     0,
     5.6568542,
     0,
     NAN,
     NAN},
    {"V12 60",
     12,
     {-30, 30, -30, 30, -30, 30, -30, 30, -30, 30, -30, 30},
     {0, 0, 120, 120, 240, 240, 240, 240, 120, 120, 0, 0},
     {-2.5, -2.5, -1.5, -1.5, -.5, -.5, .5, .5, 1.5, 1.5, 2.5, 2.5},
     0,
     0,
     0,
     0,
     NAN,
     NAN},
    {"flat 4 opposed",
     4,
     {-90, 90, -90, 90},
     {0, 180, 180, 0},
     {-.5, -.5, .5, .5},
     0,
     0,
     0,
     0,
     NAN,
     NAN},
    {"radial 3", 3, {0, 120, -120}, {0, 0, 0}, {0, 0, 0}, 1.5, 0, 1.5, 0, 1.5, NAN},
};

// ---- engines of any layout ----------------------------------------------------------------------

typedef struct {
    tacet_engine_def d;
    tacet_cylinder_def cylinder[MOST];
    unsigned order[MOST];
    double interval[MOST];
} bench_engine;

// At crank angle 0 the pin stands at `pin` about x; its piston is at top when it stands along the
// bank, on a clockwise engine bank degrees the other way: firing = -pin - bank. Equal ones fire a
// revolution apart.
static void engine_of(bench_engine *e, const layout *l)
{
    double fire[MOST];
    memset(e, 0, sizeof *e);
    e->d = plain_single();
    for (unsigned i = 0; i < l->n; i++) {
        fire[i] = fmod(720 - l->pin[i] - l->bank[i], 360);
        for (unsigned k = 0; k < i; k++)
            if (fabs(fire[k] - fire[i]) < 1e-9) fire[i] += 360;
        e->cylinder[i] = (tacet_cylinder_def){i + 1, NULL, l->bank[i] * DEG, l->at[i], 1};
    }
    for (unsigned i = 0; i < l->n; i++) { // sorted by insertion
        unsigned k = i;
        for (; k > 0 && fire[e->order[k - 1] - 1] > fire[i]; k--)
            e->order[k] = e->order[k - 1];
        e->order[k] = i + 1;
    }
    for (unsigned i = 0; i < l->n; i++) {
        double next = i + 1 < l->n ? fire[e->order[i + 1] - 1] : fire[e->order[0] - 1] + 720;
        e->interval[i] = (next - fire[e->order[i] - 1]) * DEG;
    }
    e->d.firing_order = e->order, e->d.n_cylinders = l->n;
    e->d.firing_intervals_rad = e->interval, e->d.n_intervals = l->n;
    e->d.cylinders = e->cylinder, e->d.n_cylinder_defs = l->n;
}

static tacet_body *balance_of(const layout *l, const bench_body *b)
{
    bench_engine e;
    engine_of(&e, l);
    return body_of(b, &e.d);
}

static void free_body(bench_body *b)
{
    bench_body_new(b, 100, (tacet_inertia_def){5, 5, 5, 0, 0, 0});
}

// Half axes of the ellipse that Re(v exp(i t)) draws in two members.
static void axes_of(const double complex *v, double *most, double *least)
{
    double size = creal(v[0] * conj(v[0]) + v[1] * conj(v[1]));
    double flat = cabs(v[0] * v[0] + v[1] * v[1]);
    *most = sqrt((size + flat) / 2);
    *least = sqrt(fmax(size - flat, 0) / 2);
}

static void check_ellipse(const char *name, const double complex *v, double unit, double most,
                          double least)
{
    double a, b;
    axes_of(v, &a, &b);
    print_message("%-16s %.6f %.6f\n", name, a / unit, b / unit);
    assert_near(a / unit, most, 2e-6, 2e-6);
    if (!isnan(least)) assert_near(b / unit, least, 2e-6, 2e-6);
}

static void test_balance_of_layouts(void **state)
{
    (void)state;
    bench_body b;
    free_body(&b);
    const double r = 0.05;
    for (size_t i = 0; i < sizeof layouts / sizeof *layouts; i++) {
        const layout *l = &layouts[i];
        tacet_body *body = balance_of(l, &b);
        const double complex(*s)[6] = tacet_body_shaking(body);
        check_ellipse(l->name, &s[2][1], r, l->f1, l->f1_least);
        check_ellipse(l->name, &s[2][4], r, l->c1, l->c1_least);
        check_ellipse(l->name, &s[4][1], r * A2, l->f2, NAN);
        check_ellipse(l->name, &s[4][4], r * A2, l->c2, NAN);
        for (int k = 1; k <= TACET_SHAKING_HALVES; k += 2) // no half orders
            for (int m = 0; m < 6; m++)
                assert_near(cabs(s[k][m]), 0, 0, 0);
        tacet_body_destroy(body);
    }
}

// What an inline six and four leave: 6 A6 and 4 A4 of m r.
static void test_higher_orders(void **state)
{
    (void)state;
    bench_body b;
    free_body(&b);
    tacet_body *six = balance_of(&layouts[5], &b), *four = balance_of(&layouts[3], &b);
    assert_near(creal(tacet_body_shaking(six)[12][2]) / 0.05, 6 * A6, 6e-7, 0);
    assert_near(creal(tacet_body_shaking(four)[8][2]) / 0.05, 4 * A4, 4e-7, 0);
    tacet_body_destroy(six);
    tacet_body_destroy(four);
}

// Exact at top: all harmonics of a single add up to m r (1 + lambda) upwards, and at bottom to
// m r (1 - lambda) downwards (closed form).
static void test_single_at_top_and_bottom(void **state)
{
    (void)state;
    bench_body b;
    free_body(&b);
    tacet_body *body = body_of(&b, NULL);
    const double complex(*s)[6] = tacet_body_shaking(body);
    double top = 0, bottom = 0;
    for (int k = 2; k <= TACET_SHAKING_HALVES; k += 2) {
        top += creal(s[k][2]);
        bottom += creal(s[k][2]) * (k % 4 == 0 ? 1 : -1);
    }
    assert_near(top, 0.05 * 1.25, 1e-12, 0);
    assert_near(bottom, -0.05 * 0.75, 1e-12, 0);
    tacet_body_destroy(body);
}

// Rotating masses at the pins of a cross-plane V8 make its couple 2 m_rot larger in each throw;
// counterweights at the ends take up the rotating couple of m_rot + m/2 (90-degree V, two a pin:
// 2 m / 2 rotates with the pin), whole.
static void test_counterweights_of_a_cross_plane_v8(void **state)
{
    (void)state;
    const double r = 0.05;
    double pin[4] = {0, 90, 270, 180}, at[4] = {-1.5, -.5, .5, 1.5};
    tacet_counterweight_def weight[4];
    bench_body b;
    free_body(&b);
    b.def.rotating_mass_kg = 0.3; // two a pin: 0.6, and 2 * 1 kg / 2 reciprocating
    // each throw's own counterweight, against its pin; the first of the order fires at crank angle
    // 0 of the engine, where its pin is the reference
    const layout *v8 = &layouts[9];
    bench_engine e;
    engine_of(&e, v8);
    double first = pin[(e.order[0] - 1) / 2];
    for (int i = 0; i < 4; i++)
        weight[i] = (tacet_counterweight_def){at[i], (0.6 + 1.0) * r, (pin[i] - first + 180) * DEG};
    b.def.counterweights = weight;
    tacet_body *plain = body_of(&b, &e.d);
    double most, least, without;
    axes_of(&tacet_body_shaking(plain)[2][4], &without, &least);
    assert_near(without, 3.1622777 * r * 1.6, 0, 1e-7);
    tacet_body_destroy(plain);
    b.def.n_counterweights = 4;
    tacet_body *balanced = body_of(&b, &e.d);
    axes_of(&tacet_body_shaking(balanced)[2][4], &most, &least);
    assert_near(most, 0, 1e-12, 0);
    tacet_body_destroy(balanced);
}

// Two shafts at twice the speed, one each way, take up the second order of a four (Lanchester):
// each m r A2 / 2, downwards at top; 2 U (2 W)^2 = 4 m r A2 W^2.
static void test_balance_shafts_of_a_four(void **state)
{
    (void)state;
    double here[3] = {0, 0.1, -0.2}, there[3] = {0, -0.1, -0.2};
    bench_body b;
    free_body(&b);
    tacet_body *plain = balance_of(&layouts[3], &b);
    double complex second = tacet_body_shaking(plain)[4][2];
    tacet_balance_shaft_def shaft[2] = {{here, 3, 2, creal(second) / 8, M_PI},
                                        {there, 3, -2, creal(second) / 8, M_PI}};
    b.def.balance_shafts = shaft, b.def.n_balance_shafts = 2;
    tacet_body *balanced = balance_of(&layouts[3], &b);
    assert_near(creal(second), 4 * 0.05 * A2, 0, 1e-6);
    for (int m = 0; m < 3; m++)
        assert_near(cabs(tacet_body_shaking(balanced)[4][m]), 0, 1e-12, 0);
    tacet_body_destroy(plain);
    tacet_body_destroy(balanced);
}

// Seen in a mirror: an engine that turns the other way, banks changed over, shakes y the other way
// and z the same.
static void test_the_other_rotation_mirrors(void **state)
{
    (void)state;
    bench_body b;
    free_body(&b);
    b.def.rotating_mass_kg = 0.4;
    bench_engine e;
    engine_of(&e, &layouts[8]);
    tacet_body *one = body_of(&b, &e.d);
    for (unsigned i = 0; i < 6; i++)
        e.cylinder[i].bank_rad *= -1;
    e.d.rotation = 1;
    tacet_body *other = body_of(&b, &e.d);
    for (int k = 2; k <= 12; k += 2) {
        const double complex *s = tacet_body_shaking(one)[k], *t = tacet_body_shaking(other)[k];
        const double sign[6] = {1, -1, 1, -1, 1, -1};
        for (int m = 0; m < 6; m++)
            assert_near(cabs(t[m] - sign[m] * s[m]), 0, 1e-12, 0);
    }
    tacet_body_destroy(one);
    tacet_body_destroy(other);
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_balance_of_layouts),
    cmocka_unit_test(test_higher_orders),
    cmocka_unit_test(test_single_at_top_and_bottom),
    cmocka_unit_test(test_counterweights_of_a_cross_plane_v8),
    cmocka_unit_test(test_balance_shafts_of_a_four),
    cmocka_unit_test(test_the_other_rotation_mirrors),
};
TEST_MAIN(tests)
