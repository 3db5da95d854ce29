// Weightings of vibration (ISO 2631-1) and sound (IEC 61672-1).
#include "near.h"
#include "tacet/order.h"
#include <math.h>

// ISO 2631-1:1997 table 3, Wk x 1000 at nominal third-octave frequencies, as printed (1 to 80 Hz as
// quoted in public code, the rest from memory). Two printed factors, at 1.25 and 16 Hz, are one
// unit off what the filter of annex A gives.
static void test_vertical_against_the_printed_table(void **state)
{
    (void)state;
    const double row[][3] = {
        {0.1, 31.2, .05}, {0.2, 121, .5},   {0.4, 352, .5},   {0.5, 418, .5},    {0.63, 459, .5},
        {0.8, 477, .5},   {1, 482, .5},     {1.25, 484, .6},  {1.6, 494, .5},    {2, 531, .5},
        {2.5, 631, .5},   {3.15, 804, .5},  {4, 967, .5},     {5, 1039, .5},     {6.3, 1054, .5},
        {8, 1036, .5},    {10, 988, .5},    {12.5, 902, .5},  {16, 768, .8},     {20, 636, .5},
        {25, 513, .5},    {31.5, 405, .5},  {40, 314, .5},    {50, 246, .5},     {63, 186, .5},
        {80, 132, .5},    {100, 88.7, .05}, {160, 28.5, .05}, {250, 7.90, .005}, {400, 1.95, .005}};
    for (size_t i = 0; i < sizeof row / sizeof *row; i++)
        assert_near(1000 * cabs(tacet_weighting_at(TACET_WEIGHTING_VERTICAL, row[i][0])), row[i][1],
                    row[i][2], 0);
}

// The same at the exact frequencies 10^(n/10) of ISO 8041, recomputed from the filter's parameters.
static void test_vertical_at_exact_frequencies(void **state)
{
    (void)state;
    const double row[][2] = {{0, 482.47}, {4, 633.48}, {9, 1037.35}, {12, 774.28}, {19, 133.87}};
    for (size_t i = 0; i < sizeof row / sizeof *row; i++)
        assert_near(1000 *
                        cabs(tacet_weighting_at(TACET_WEIGHTING_VERTICAL, pow(10, row[i][0] / 10))),
                    row[i][1], 0.005, 0);
    // three tones of rms 0.5, 1.0, 0.4: root of the sum of squares (recomputed)
    double sum = 0;
    const double tone[][2] = {{0.6, 0.5}, {1.2, 1.0}, {1.4, 0.4}};
    for (size_t i = 0; i < 3; i++) {
        double w = cabs(tacet_weighting_at(TACET_WEIGHTING_VERTICAL, pow(10, tone[i][0])));
        sum += w * w * tone[i][1] * tone[i][1];
    }
    assert_near(sqrt(sum), 0.934814, 1e-6, 0);
}

// The filter as its differential equations, marched over a sine until it has settled: second-order
// sections in state form, one after another. An independent realisation of the same weighting.
typedef struct {
    double b0, b1, b2, a1, a2; // (b0 + b1 s + b2 s^2) / (1 + a1 s + a2 s^2)
} section;

static double ring(const section *s, int n, double f_hz)
{
    enum { STEPS = 400 };
    double state[4][2] = {{0}}, h = 1 / f_hz / STEPS, largest = 0;
    int turns = (int)(12 * f_hz) + 20;
    for (int k = 0; k < turns * STEPS; k++) {
        double in = sin(2 * M_PI * ((k % STEPS) + 0.5) / STEPS); // held at mid-step
        for (int i = 0; i < n; i++) {
            // a2 v'' + a1 v' + v = in, out = b0 v + b1 v' + b2 v'' ; midpoint rule
            double *v = state[i], a = (in - v[0] - s[i].a1 * v[1]) / s[i].a2;
            double mid[2] = {v[0] + h / 2 * v[1], v[1] + h / 2 * a};
            double am = (in - mid[0] - s[i].a1 * mid[1]) / s[i].a2;
            v[0] += h * mid[1], v[1] += h * am;
            in = s[i].b0 * mid[0] + s[i].b1 * mid[1] + s[i].b2 * am;
        }
        if (k >= (turns - 1) * STEPS) largest = fmax(largest, fabs(in));
    }
    return largest;
}

static section band(double f, double q, bool high)
{
    double w = 2 * M_PI * f;
    return high ? (section){0, 0, 1 / (w * w), 1 / (q * w), 1 / (w * w)}
                : (section){1, 0, 0, 1 / (q * w), 1 / (w * w)};
}

static void test_filters_in_time(void **state)
{
    (void)state;
    double w3 = 2 * M_PI * 12.5, w4 = w3, d3 = 2 * M_PI * 2.0, d4 = d3;
    double w5 = 2 * M_PI * 2.37, w6 = 2 * M_PI * 3.35, step = w5 / w6 * (w5 / w6);
    const section k[4] = {
        band(0.4, M_SQRT1_2, true),
        band(100, M_SQRT1_2, false),
        {1, 1 / w3, 0, 1 / (0.63 * w4), 1 / (w4 * w4)},
        {step, step / (0.91 * w5), step / (w5 * w5), 1 / (0.91 * w6), 1 / (w6 * w6)}};
    const section d[3] = {band(0.4, M_SQRT1_2, true),
                          band(100, M_SQRT1_2, false),
                          {1, 1 / d3, 0, 1 / (0.63 * d4), 1 / (d4 * d4)}};
    const double f[] = {1, 3.2, 8, 20};
    for (size_t i = 0; i < 4; i++) {
        assert_near(ring(k, 4, f[i]), cabs(tacet_weighting_at(TACET_WEIGHTING_VERTICAL, f[i])), 0,
                    5e-3);
        assert_near(ring(d, 3, f[i]), cabs(tacet_weighting_at(TACET_WEIGHTING_HORIZONTAL, f[i])), 0,
                    5e-3);
    }
}

// A of IEC 61672-1 at exact third octaves 10^(n/10), dB as tabulated.
static void test_hearing_against_the_table(void **state)
{
    (void)state;
    const double dB[] = {-63.4, -56.7, -50.5, -44.7, -39.4, -34.6, -30.2, -26.2, -22.5,
                         -19.1, -16.1, -13.4, -10.9, -8.6,  -6.6,  -4.8,  -3.2,  -1.9,
                         -0.8,  0,     0.6,   1.0,   1.2,   1.3,   1.2,   1.0,   0.5,
                         -0.1,  -1.1,  -2.5,  -4.3,  -6.6,  -9.3};
    for (int i = 0; i < 33; i++) {
        double f = pow(10, (11 + i) / 10.0);
        assert_near(20 * log10(cabs(tacet_weighting_at(TACET_WEIGHTING_HEARING, f))), dB[i], 0.0501,
                    0);
    }
    // 60 dB at 63 Hz, 50 at 125, 40 at 1000: 41.7 dB(A) with the table's rounded values
    double sum = pow(10, (60 - 26.2) / 10) + pow(10, (50 - 16.1) / 10) + pow(10, 40 / 10.0),
           got = 0;
    const double level[][2] = {{1.8, 60}, {2.1, 50}, {3, 40}};
    for (int i = 0; i < 3; i++) {
        double a = cabs(tacet_weighting_at(TACET_WEIGHTING_HEARING, pow(10, level[i][0])));
        got += a * a * pow(10, level[i][1] / 10);
    }
    assert_near(10 * log10(sum), 41.71830, 1e-5, 0);
    assert_near(10 * log10(got), 41.71830, 0.03, 0);
}

static void test_limits(void **state)
{
    (void)state;
    assert_near(cabs(tacet_weighting_at(TACET_WEIGHTING_NONE, 50) - 1), 0, 0, 0);
    for (int w = TACET_WEIGHTING_VERTICAL; w <= TACET_WEIGHTING_HEARING; w++)
        assert_near(cabs(tacet_weighting_at(w, 0)), 0, 0, 0);
    double peak = 0, at = 0;
    for (double f = 1; f < 20; f *= 1.0001)
        if (cabs(tacet_weighting_at(TACET_WEIGHTING_VERTICAL, f)) > peak)
            peak = cabs(tacet_weighting_at(TACET_WEIGHTING_VERTICAL, f)), at = f;
    assert_near(peak, 1.05450, 5e-6, 0); // largest, recomputed
    assert_near(at, 6.17, 0.01, 0);      // a flat top
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_vertical_against_the_printed_table),
    cmocka_unit_test(test_vertical_at_exact_frequencies),
    cmocka_unit_test(test_filters_in_time),
    cmocka_unit_test(test_hearing_against_the_table),
    cmocka_unit_test(test_limits),
};
TEST_MAIN(tests)
