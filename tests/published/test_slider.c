// Slider-crank and its inertia torque: series in closed form, a piston found by its rod's length,
// and the handbook tables of balance and of phase-vector sums over firing orders.
#include "near.h"
#include "tacet/engine.h"
#include <complex.h>
#include <fftw3.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define DEG     (M_PI / 180)
#define SAMPLES 720

static tacet_engine *engine_of(const tacet_engine_def *d)
{
    tacet_engine *en = NULL;
    tacet_error e = {0};
    if (tacet_engine_create(d, &en, &e) != TACET_OK) fail_msg("engine: %s", e.text);
    return en;
}

// Crank radius 50 mm, 1 kg, a rod of 1/lam radii.
static tacet_engine_def single(double lam)
{
    static unsigned one[] = {1};
    tacet_engine_def d = tacet_engine_default();
    d.bore_m = 0.1, d.stroke_m = 0.1, d.rod_length_m = 0.05 / lam, d.reciprocating_mass_kg = 1;
    d.firing_order = one, d.n_cylinders = 1;
    return d;
}

// ---- series

// Binomial coefficient (1/2 over j).
static double half_over(unsigned j)
{
    double c = 1;
    for (unsigned i = 0; i < j; i++)
        c *= (0.5 - i) / (i + 1);
    return c;
}

static double choose(unsigned n, unsigned k)
{
    double c = 1;
    for (unsigned i = 1; i <= k; i++)
        c *= (double)(n - k + i) / i;
    return c;
}

// Coefficient of cos 2k a in sqrt(1 - lam^2 sin^2 a): binomial series, with sin^2j a = 4^-j
// (C(2j,j)
// + 2 sum over k of (-1)^k C(2j,j-k) cos 2k a). Its first terms give the handbook series A2 = lam +
// lam^3/4 + 15 lam^5/128, A4 = -(lam^3/4 + 3 lam^5/16), A6 = 9 lam^5/128 (from memory).
static double root_line(double lam, unsigned k)
{
    double sum = 0;
    for (unsigned j = k; j < k + 60; j++)
        sum += half_over(j) * pow(-lam * lam, j) * 2 * pow(0.25, j) * choose(2 * j, j - k);
    return (k % 2 ? -1 : 1) * sum;
}

#define TERMS 24
// Lines of speed over r w (sin) and of acceleration over r w^2 (cos): of x = 1 - cos a + (1 - root)
// / lam.
static void series(double lam, double v[TERMS], double a[TERMS])
{
    memset(v, 0, TERMS * sizeof *v);
    v[1] = 1;
    for (unsigned k = 1; 2 * k < TERMS; k++)
        v[2 * k] = 2 * k * root_line(lam, k) / lam;
    for (unsigned n = 0; n < TERMS; n++)
        a[n] = n * v[n];
}

// Line n (cosine and minus sine part) of f over a turn.
static double complex line_of(const double *f, unsigned n)
{
    static double x[SAMPLES];
    static fftw_complex y[SAMPLES / 2 + 1];
    fftw_plan plan = fftw_plan_dft_r2c_1d(SAMPLES, x, y, FFTW_ESTIMATE);
    assert_non_null(plan);
    memcpy(x, f, sizeof x);
    fftw_execute(plan);
    fftw_destroy_plan(plan);
    return y[n] * (n ? 2.0 : 1.0) / SAMPLES;
}

static const double lams[] = {0.2, 0.25, 0.3, 1.0 / 3};

static void test_series_of_motion(void **state)
{
    (void)state;
    assert_near(0.25 + pow(0.25, 3) / 4 + 15 * pow(0.25, 5) / 128, 4 * root_line(0.25, 1) / 0.25,
                2e-5, 0);
    for (size_t i = 0; i < 4; i++) {
        tacet_slider s = {.crank_m = 1, .rod_m = 1 / lams[i], .bore_m = 1, .mass_kg = 1};
        double v[TERMS], a[TERMS], speed[SAMPLES], bend[SAMPLES], x;
        series(lams[i], v, a);
        for (int k = 0; k < SAMPLES; k++)
            tacet_slider_at(&s, 2 * M_PI * k / SAMPLES, &x, &speed[k], &bend[k]);
        for (unsigned n = 0; n < TERMS; n++) {
            assert_near(cabs(line_of(speed, n) + I * v[n]), 0, 1e-13, 0);
            assert_near(cabs(line_of(bend, n) - a[n]), 0, 1e-12, 0);
        }
    }
}

// At constant speed the reciprocating mass takes the torque 1/2 J' w^2, J = m x'^2, out of the
// crank: -a v, lines by multiplying the two series. Its sixth-order table is S3 of the unit tests;
// here all lines, of the engine's own J and slope. Mean of J: m r^2/2 times the sum of squares of
// v.
static void test_series_of_inertia_torque(void **state)
{
    (void)state;
    for (size_t i = 0; i < 4; i++) {
        tacet_engine_def d = single(lams[i]);
        tacet_engine *en = engine_of(&d);
        double v[TERMS], a[TERMS], b[TERMS] = {0}, squares = 0;
        double angle[SAMPLES], inertia[SAMPLES], slope[SAMPLES], torque[SAMPLES];
        series(lams[i], v, a);
        for (int p = 1; p < TERMS; p++) { // sin p cos q = (sin(p+q) + sin(p-q)) / 2
            squares += v[p] * v[p];
            for (int q = 1; q < TERMS; q++) {
                if (p + q < TERMS) b[p + q] -= v[p] * a[q] / 2;
                if (p != q) b[abs(p - q)] -= (p > q ? 1 : -1) * v[p] * a[q] / 2;
            }
        }
        assert_near(b[2], -0.5, 6e-4, 0); // leading terms lam/4, -1/2, -3 lam/4, from memory
        assert_near(b[1], lams[i] / 4, 0, 0.04);
        assert_near(b[3], -3 * lams[i] / 4, 0, 0.05);
        for (int k = 0; k < SAMPLES; k++)
            angle[k] = 2 * M_PI * k / SAMPLES;
        tacet_engine_inertia(en, 0, SAMPLES, angle, inertia, slope);
        for (int k = 0; k < SAMPLES; k++)
            torque[k] = -slope[k] / 2 / (0.05 * 0.05);
        for (unsigned n = 0; n < TERMS / 2; n++)
            assert_near(cabs(line_of(torque, n) + I * b[n]), 0, 1e-9, 0);
        assert_near(creal(line_of(inertia, 0)), 0.05 * 0.05 / 2 * squares, 0, 1e-9);
        assert_near(tacet_engine_mean_inertia(en), 0.05 * 0.05 / 2 * squares, 0, 1e-12);
        tacet_engine_destroy(en);
    }
}

// ---- a second way to the piston

// Height of the piston pin over the crank axis: where the rod, from the crank pin, is as long as it
// is. Found by bisection; `turn` is the crank's angle from the cylinder axis.
static double height(const tacet_slider *s, double turn)
{
    double y = s->crank_m * sin(turn), z = s->crank_m * cos(turn), low = z, high = z + s->rod_m;
    for (int i = 0; i < 80; i++) {
        double middle = (low + high) / 2;
        *(hypot(middle - z, s->offset_m - y) < s->rod_m ? &low : &high) = middle;
    }
    return low;
}

// Top is where the height is largest (golden section); speed and bend by Richardson's differences
// of the height, some 1e-9.
static void test_piston_by_rod_length(void **state)
{
    (void)state;
    for (double offset = -0.012; offset < 0.013; offset += 0.008) {
        tacet_slider s = {.crank_m = 0.05, .rod_m = 0.16, .offset_m = offset};
        double low = -0.2, high = 0.2, part = (sqrt(5) - 1) / 2;
        for (int i = 0; i < 40; i++) {
            double a = high - part * (high - low), b = low + part * (high - low);
            if (height(&s, a) < height(&s, b))
                low = a;
            else
                high = b;
        }
        double top = (low + high) / 2, most = height(&s, top);
        for (double angle = 0; angle < 2 * M_PI; angle += 0.1) {
            double x, dx, ddx, f[5], h = 2e-3;
            tacet_slider_at(&s, angle, &x, &dx, &ddx);
            for (int k = 0; k < 5; k++)
                f[k] = most - height(&s, top + angle + (k - 2) * h);
            assert_near(x, f[2], 2e-9, 0);
            assert_near(dx, (8 * (f[3] - f[1]) - (f[4] - f[0])) / (12 * h), 2e-8, 0);
            assert_near(ddx, (16 * (f[3] + f[1]) - (f[4] + f[0]) - 30 * f[2]) / (12 * h * h), 2e-8,
                        0);
        }
    }
}

// ---- layouts: bank from vertical, against the rotation; pin in the direction of rotation

typedef struct {
    double bank_deg, pin_deg, at;
} place;

typedef struct {
    const char *name;
    unsigned n;
    place at[12];
    double f1, c1, f2, c2;               // largest, over m r w^2 and lam m r w^2, throw spacing 1
    double f1_least, c1_least, c2_least; // smallest over a turn: equal if it rotates; -1: not told
} layout;

#define SQRT2  1.4142135623730951
#define SQRT3  1.7320508075688772
#define SQRT6  2.449489742783178
#define SQRT10 3.1622776601683795

// Usual handbook table of balance (from memory; recomputed elsewhere by vector sums).
static const layout layouts[] = {
    {"I2, 360", 2, {{0, 0, 0}, {0, 0, 1}}, 2, 0, 2, 0, 0, 0, 0},
    {"I2, 180", 2, {{0, 0, 0}, {0, 180, 1}}, 0, 1, 2, 0, 0, 0, 0},
    {"I3", 3, {{0, 0, 0}, {0, 120, 1}, {0, 240, 2}}, 0, SQRT3, 0, SQRT3, 0, 0, 0},
    {"I4", 4, {{0, 0, 0}, {0, 180, 1}, {0, 180, 2}, {0, 0, 3}}, 0, 0, 4, 0, 0, 0, 0},
    {"I4 cross-plane",
     4,
     {{0, 0, 0}, {0, 90, 1}, {0, 270, 2}, {0, 180, 3}},
     0,
     SQRT10,
     0,
     0,
     0,
     0,
     0},
    {"I6",
     6,
     {{0, 0, 0}, {0, 120, 1}, {0, 240, 2}, {0, 240, 3}, {0, 120, 4}, {0, 0, 5}},
     0,
     0,
     0,
     0,
     0,
     0,
     0},
    {"V2-90", 2, {{-45, 0, 0}, {45, 0, 0}}, 1, 0, SQRT2, 0, 1, 0, 0},
    {"V6-90",
     6,
     {{-45, 0, 0}, {45, 0, 0}, {-45, 120, 1}, {45, 120, 1}, {-45, 240, 2}, {45, 240, 2}},
     0,
     SQRT3,
     0,
     SQRT6,
     0,
     SQRT3,
     0},
    {"V6-60",
     6,
     {{-30, 0, 0}, {30, 0, 0}, {-30, 120, 1}, {30, 120, 1}, {-30, 240, 2}, {30, 240, 2}},
     0,
     2.598076,
     0,
     1.5,
     0,
     0.866025,
     1.5},
    {"V8-90 cross-plane",
     8,
     {{-45, 0, 0},
      {45, 0, 0},
      {-45, 90, 1},
      {45, 90, 1},
      {-45, 270, 2},
      {45, 270, 2},
      {-45, 180, 3},
      {45, 180, 3}},
     0,
     SQRT10,
     0,
     0,
     0,
     SQRT10,
     0},
    {"V8-90 flat",
     8,
     {{-45, 0, 0},
      {45, 0, 0},
      {-45, 180, 1},
      {45, 180, 1},
      {-45, 180, 2},
      {45, 180, 2},
      {-45, 0, 3},
      {45, 0, 3}},
     0,
     0,
     4 * SQRT2,
     0,
     0,
     0,
     0},
    {"V12-60",
     12,
     {{-30, 0, 0},
      {30, 0, 0},
      {-30, 120, 1},
      {30, 120, 1},
      {-30, 240, 2},
      {30, 240, 2},
      {-30, 240, 3},
      {30, 240, 3},
      {-30, 120, 4},
      {30, 120, 4},
      {-30, 0, 5},
      {30, 0, 5}},
     0,
     0,
     0,
     0,
     0,
     0,
     0},
    {"flat-4", 4, {{-90, 0, 0}, {90, 180, 0}, {-90, 180, 1}, {90, 0, 1}}, 0, 0, 0, 0, 0, 0, 0},
    {"radial-3", 3, {{0, 0, 0}, {120, 0, 0}, {240, 0, 0}}, 1.5, 0, 1.5, 0, 1.5, 0, 0}};

typedef struct {
    tacet_engine_def def;
    tacet_cylinder_def cylinder[12];
    unsigned order[12];
    double interval[12], fires_deg[12];
    char node[12][8];
} built;

// A cylinder is at its top when its pin, pin + angle, points along its bank, -bank; of two with the
// same top the second fires a revolution later.
static void build(const layout *l, built *b)
{
    *b = (built){.def = single(0.25)};
    for (unsigned i = 0; i < l->n; i++) {
        double top = fmod(-l->at[i].bank_deg - l->at[i].pin_deg + 1080, 360);
        for (unsigned j = 0; j < i; j++)
            if (fabs(b->fires_deg[j] - top) < 1e-9) top += 360;
        b->fires_deg[i] = top;
        int pin = (int)(l->at[i].pin_deg + 360 * 4 * l->at[i].at);
        bool common = strchr("VrR", l->name[0]) != NULL;
        snprintf(b->node[i], sizeof b->node[i], "%c%u", common ? 'p' : 'c',
                 common ? (unsigned)pin : i + 1);
        b->cylinder[i] =
            (tacet_cylinder_def){i + 1, b->node[i], l->at[i].bank_deg * DEG, l->at[i].at, 1};
        b->order[i] = i + 1;
    }
    for (unsigned i = 1; i < l->n; i++) // sort by firing
        for (unsigned j = i;
             j > 0 && b->fires_deg[b->order[j] - 1] < b->fires_deg[b->order[j - 1] - 1]; j--) {
            unsigned swap = b->order[j];
            b->order[j] = b->order[j - 1], b->order[j - 1] = swap;
        }
    for (unsigned i = 0; i < l->n; i++) {
        double next = b->fires_deg[b->order[(i + 1) % l->n] - 1];
        b->interval[i] = (next - b->fires_deg[b->order[i] - 1] + (i + 1 == l->n ? 720 : 0)) * DEG;
    }
    b->def.cylinders = b->cylinder, b->def.n_cylinder_defs = l->n;
    b->def.firing_order = b->order, b->def.n_cylinders = l->n;
    b->def.firing_intervals_rad = b->interval, b->def.n_intervals = l->n;
}

// Largest and smallest length over a turn of the vector with lines y and z.
static void axes(double complex y, double complex z, double *most, double *least)
{
    double sum = cabs(y) * cabs(y) + cabs(z) * cabs(z), swing = cabs(y * y + z * z);
    *most = sqrt((sum + swing) / 2);
    *least = sqrt(fmax(0, (sum - swing) / 2));
}

// Shaking force and couple about the middle from every piston's x'', at the engine's own firing
// angles; an engine with common pins is only made where firing order and banks agree on them.
static void test_balance_table_s6(void **state)
{
    (void)state;
    for (size_t i = 0; i < sizeof layouts / sizeof *layouts; i++) {
        const layout *l = &layouts[i];
        built b;
        build(l, &b);
        tacet_engine *en = engine_of(&b.def);
        double middle = l->at[l->n - 1].at / 2;
        static double f[2][2][SAMPLES];
        memset(f, 0, sizeof f);
        for (unsigned slot = 0; slot < l->n; slot++) {
            const place *at = &l->at[tacet_engine_number(en, slot) - 1];
            double bank = at->bank_deg * DEG, x, dx, ddx;
            for (int k = 0; k < SAMPLES; k++) {
                double angle = 2 * M_PI * k / SAMPLES - tacet_engine_firing_angle(en, slot);
                tacet_slider_at(tacet_engine_slider(en), angle, &x, &dx, &ddx);
                for (int couple = 0; couple < 2; couple++) {
                    double arm = couple ? at->at - middle : 1;
                    f[couple][0][k] += arm * ddx / 0.05 * sin(bank);
                    f[couple][1][k] += arm * ddx / 0.05 * cos(bank);
                }
            }
        }
        double most, least, lam2 = 0.2540250; // A2 at l/r = 4 (Maleev and others, from memory)
        axes(line_of(f[0][0], 1), line_of(f[0][1], 1), &most, &least);
        assert_near(most, l->f1, 1e-6, 0);
        assert_near(least, l->f1_least, 1e-6, 0);
        axes(line_of(f[1][0], 1), line_of(f[1][1], 1), &most, &least);
        assert_near(most, l->c1, 1e-6, 0);
        assert_near(least, l->c1_least, 1e-6, 0);
        axes(line_of(f[0][0], 2), line_of(f[0][1], 2), &most, &least);
        assert_near(most / lam2, l->f2, 2e-6, 0);
        axes(line_of(f[1][0], 2), line_of(f[1][1], 2), &most, &least);
        assert_near(most / lam2, l->c2, 2e-6, 0);
        assert_near(least / lam2, l->c2_least, 2e-6, 0);
        // higher orders of engines in line: 4 A4 of the four, 3 A6 and 6 A6 of three and six
        if (strcmp(l->name, "I4") == 0)
            assert_near(creal(line_of(f[0][1], 4)), 4 * -0.0040981, 4e-7, 0);
        if (strcmp(l->name, "I3") == 0 || strcmp(l->name, "I6") == 0)
            assert_near(creal(line_of(f[0][1], 6)), l->n * 0.0000744, 4e-7, 0);
        tacet_engine_destroy(en);
    }
}

// A bank on the wrong side puts the pins of a cross-plane V8 apart: refused.
static void test_balance_wrong_bank(void **state)
{
    (void)state;
    built b;
    tacet_engine *en = NULL;
    tacet_error e = {0};
    build(&layouts[9], &b);
    for (unsigned i = 0; i < 8; i++)
        b.cylinder[i].bank_rad *= -1;
    assert_int_equal(tacet_engine_create(&b.def, &en, &e), TACET_BAD_INPUT);
    assert_non_null(strstr(e.text, "180 degrees apart"));
}

// BEV: T. Bevan, The Theory of Machines, ch. 14 ex. 12: radial-3, 4 lb a cylinder, stroke 5 in, rod
// 9 in, 1500 rpm: secondary force 266 lb; primary balance mass at 3.5 in 4.29 lb.
static void test_radial_bevan(void **state)
{
    (void)state;
    double force = 0, primary = 0, x, dx, ddx;
    tacet_slider s = {.crank_m = 2.5 / 12, .rod_m = 9.0 / 12, .bore_m = 1, .mass_kg = 4};
    static double f[2][SAMPLES];
    for (int k = 0; k < SAMPLES; k++)
        for (int i = 0; i < 3; i++) { // banks 0, 120, 240 in the direction of rotation; one pin
            double bank = 120 * DEG * i;
            tacet_slider_at(&s, 2 * M_PI * k / SAMPLES - bank, &x, &dx, &ddx);
            f[0][k] += 4 * ddx * sin(bank), f[1][k] += 4 * ddx * cos(bank);
        }
    double w = 1500 * 2 * M_PI / 60, least;
    axes(line_of(f[0], 2), line_of(f[1], 2), &force, &least);
    axes(line_of(f[0], 1), line_of(f[1], 1), &primary, &least);
    // printed with A2 = lam; the next term, lam^3/4, is 1.9 % of it here
    double two_term = force * s.crank_m / s.rod_m /
                      (4 * root_line(s.crank_m / s.rod_m, 1) / (s.crank_m / s.rod_m));
    assert_near(two_term * w * w / 32.2, 266.067, 0.3, 0);
    assert_near(primary / (3.5 / 12), 4.285714, 1e-6, 0);
}

// ---- phase-vector sums

typedef struct {
    const char *name;
    unsigned n, order[8];
    double weight[8]; // by cylinder number
    double sum[9];    // of orders 0.5, 1, .. ; -1: not told
} phase_case;

// |sum of w_i exp(i p phi_i)|, phi the firing angle, w the twist of a cylinder's throw in a mode
// (any text on torsional vibration). Weights F8: chain of equal disks clamped at one end.
static const phase_case phases[] = {
    {"P1 six", 6, {1, 5, 3, 6, 2, 4}, {1, 1, 1, 1, 1, 1}, {0, 0, 0, 0, 0, 6, 0, 0, 0}},
    {"P1 five", 5, {1, 2, 4, 5, 3}, {1, 1, 1, 1, 1}, {0, 0, 0, 0, 5, 0, 0, 0, 0}},
    {"P2",
     4,
     {1, 3, 4, 2},
     {1, 0.8793852, 0.6527036, 0.3472964},
     {0.69095, 0.18479, 0.69095, 2.87939, 0.69095, 0.18479, 0.69095, 2.87939, 0.69095}},
    {"P3",
     6,
     {1, 5, 3, 6, 2, 4},
     {1, 0.9418836, 0.8290284, 0.6679931, 0.4681364, 0.2410734},
     {0.51797, 0.22541, 1.39371, 0.22541, 0.51797, 4.14811, 0.51797, 0.22541, 1.39371}},
    {"P3, 1-4-2-6-3-5",
     6,
     {1, 4, 2, 6, 3, 5},
     {1, 0.9418836, 0.8290284, 0.6679931, 0.4681364, 0.2410734},
     {0.51797, 0.22541, 1.39371, 0.22541, 0.51797, 4.14811, 0.51797, 0.22541, 1.39371}},
    {"P4",
     6,
     {1, 5, 3, 6, 2, 4},
     {1, .8, .6, .4, .2, 0},
     {0.69282, 0, 1.8, 0, 0.69282, 3, 0.69282, 0, 1.8}},
    {"P5",
     8,
     {1, 8, 4, 3, 6, 5, 7, 2},
     {1, 1, 0.8793852, 0.8793852, 0.6527036, 0.6527036, 0.3472964, 0.3472964},
     {0.31657, 0.97715, 0.96067, 0, 0.96067, 0.97715, 0.31657, 5.75877, 0.31657}},
    {"P6",
     8,
     {1, 8, 4, 3, 6, 5, 7, 2},
     {1, 1, .7, .7, .4, .4, .1, .1},
     {0.62521, 1.34164, 1.18706, 0, 1.18706, 1.34164, 0.62521, 4.4, 0.62521}},
    {"P7",
     3,
     {1, 3, 2},
     {1, .7, .4},
     {0.51962, 0.51962, 2.1, 0.51962, 0.51962, 2.1, 0.51962, 0.51962, 2.1}}};

static void test_phase_sums_p1_p7(void **state)
{
    (void)state;
    for (size_t i = 0; i < sizeof phases / sizeof *phases; i++) {
        const phase_case *c = &phases[i];
        tacet_engine_def d = single(0.25);
        unsigned order[8];
        memcpy(order, c->order, sizeof order);
        d.firing_order = order, d.n_cylinders = c->n;
        tacet_engine *en = engine_of(&d);
        for (int p = 0; p < 9; p++) {
            double complex sum = 0;
            for (unsigned slot = 0; slot < c->n; slot++)
                sum += c->weight[tacet_engine_number(en, slot) - 1] *
                       cexp(I * (p + 1) / 2.0 * tacet_engine_firing_angle(en, slot));
            assert_near(cabs(sum), c->sum[p], 6e-6, 0);
        }
        tacet_engine_destroy(en);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_series_of_motion),
        cmocka_unit_test(test_series_of_inertia_torque),
        cmocka_unit_test(test_piston_by_rod_length),
        cmocka_unit_test(test_balance_table_s6),
        cmocka_unit_test(test_balance_wrong_bank),
        cmocka_unit_test(test_radial_bevan),
        cmocka_unit_test(test_phase_sums_p1_p7),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
