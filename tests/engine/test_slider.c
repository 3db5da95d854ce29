// Slider-crank: S1 to S4 and its own limits.
#include "near.h"
#include "tacet/engine.h"
#include <complex.h>
#include <math.h>

#define DEG (M_PI / 180)

static tacet_slider slider(double crank_m, double rod_m)
{
    return (tacet_slider){.crank_m = crank_m, .rod_m = rod_m, .bore_m = 0.1, .mass_kg = 1};
}

// S1, exact kinematics at crank over rod 0.25, recomputed from the closed form.
static void test_slider_s1(void **state)
{
    (void)state;
    static const double row[][4] = {{0, 0, 0, 1.250000},
                                    {30, 0.165348, 0.609109, 0.995013},
                                    {45, 0.355889, 0.834107, 0.711204},
                                    {60, 0.594875, 0.976909, 0.375112},
                                    {90, 1.127017, 1.000000, -0.258199},
                                    {120, 1.594875, 0.755142, -0.624888},
                                    {150, 1.897398, 0.390891, -0.737038},
                                    {180, 2, 0, -0.750000}};
    tacet_slider s = slider(1, 4);
    for (size_t i = 0; i < sizeof row / sizeof *row; i++) {
        double x, dx, ddx;
        tacet_slider_at(&s, row[i][0] * DEG, &x, &dx, &ddx);
        assert_near(x, row[i][1], 1e-6, 0);
        assert_near(dx, row[i][2], 1e-6, 0);
        assert_near(ddx, row[i][3], 1e-6, 0);
    }
}

#define SAMPLES 256
// Coefficient of cos(k angle) (real part) and sin (minus the imaginary part) of f.
static double complex harmonic(const tacet_slider *s, unsigned k,
                               double (*f)(double x, double dx, double ddx))
{
    double complex sum = 0;
    for (unsigned i = 0; i < SAMPLES; i++) {
        double angle = 2 * M_PI * i / SAMPLES, x, dx, ddx;
        tacet_slider_at(s, angle, &x, &dx, &ddx);
        sum += f(x, dx, ddx) * cexp(-I * k * angle);
    }
    return 2 * sum / SAMPLES;
}

static double acceleration(double x, double dx, double ddx)
{
    (void)x, (void)dx;
    return ddx;
}

static double inertia_torque(double x, double dx, double ddx)
{
    (void)x;
    return -ddx * dx;
}

// S2, harmonics of acceleration over r w^2 (tables of Maleev, Taylor, Biezeno-Grammel, from memory;
// recomputed by Fourier transform).
static void test_slider_s2(void **state)
{
    (void)state;
    static const double row[][4] = {{3.0, 0.3431086, -0.0100991, 0.0003344},
                                    {3.5, 0.2917795, -0.0062105, 0.0001487},
                                    {4.0, 0.2540250, -0.0040981, 0.0000744},
                                    {4.5, 0.2250311, -0.0028489, 0.0000406},
                                    {5.0, 0.2020384, -0.0020618, 0.0000237}};
    for (size_t i = 0; i < sizeof row / sizeof *row; i++) {
        tacet_slider s = slider(1, row[i][0]);
        assert_near(creal(harmonic(&s, 1, acceleration)), 1, 1e-12, 0);
        for (unsigned k = 1; k <= 3; k++) {
            double complex line = harmonic(&s, 2 * k, acceleration);
            assert_near(creal(line), row[i][k], 6e-8, 0);
            assert_near(cimag(line), 0, 1e-12, 0);
        }
    }
}

// S3, harmonics of the inertia torque -a v over m r^2 w^2 (leading terms from memory, exact values
// recomputed by Fourier transform); the mean is zero.
static void test_slider_s3(void **state)
{
    (void)state;
    static const double row[][7] = {
        {0.20, 0.0505096, -0.5000521, -0.1523020, -0.0102041, 0.0012985, 0.0001562},
        {0.25, 0.0635063, -0.5001301, -0.1920556, -0.0161290, 0.0025923, 0.0003903},
        {0.30, 0.0767627, -0.5002779, -0.2330021, -0.0235602, 0.0046035, 0.0008331},
        {1.0 / 3, 0.0857771, -0.5004333, -0.2611186, -0.0294117, 0.0064513, 0.0012987}};
    for (size_t i = 0; i < sizeof row / sizeof *row; i++) {
        tacet_slider s = slider(1, 1 / row[i][0]);
        assert_near(creal(harmonic(&s, 0, inertia_torque)), 0, 1e-13, 0);
        for (unsigned k = 1; k <= 6; k++)
            assert_near(-cimag(harmonic(&s, k, inertia_torque)), row[i][k], 6e-8, 0);
    }
}

// S4a and S4b: Khurmi and Gupta, Theory of Machines, ex. 15.4 and 15.5. The book prints the
// two-term series (4.19 and 85.36; 6.9 and 124.91); the exact values are recomputed.
static void test_slider_s4_speed_and_acceleration(void **state)
{
    (void)state;
    static const struct {
        double r, l, rpm, deg, v, a, v_two, a_two;
    } row[] = {{0.3, 1.5, 180, 40, 4.196434, 85.598856, 4.191774, 85.355892},
               {0.15, 0.6, 450, 60, 6.905360, 124.949344, 6.886769, 124.912181}};
    for (size_t i = 0; i < 2; i++) {
        tacet_slider s = slider(row[i].r, row[i].l);
        double w = row[i].rpm * 2 * M_PI / 60, x, dx, ddx;
        tacet_slider_at(&s, row[i].deg * DEG, &x, &dx, &ddx);
        assert_near(dx * w, row[i].v, 1e-6, 0);
        assert_near(ddx * w * w, row[i].a, 1e-6, 0);
        double lam = row[i].r / row[i].l, th = row[i].deg * DEG;
        assert_near(row[i].r * w * (sin(th) + lam * sin(2 * th) / 2), row[i].v_two, 1e-6, 0);
        assert_near(row[i].r * w * w * (cos(th) + lam * cos(2 * th)), row[i].a_two, 1e-6, 0);
        assert_near(dx * w, row[i].v_two, 0, 5e-3);
        assert_near(ddx * w * w, row[i].a_two, 0, 5e-3);
    }
}

// S4d: Khurmi and Gupta, ex. 15.7: torque of gas and inertia force, 14.491 kN m printed from the
// two-term series, 14.489518 kN m exact (recomputed). The weight of the piston is not in the book.
static void test_slider_s4_torque(void **state)
{
    (void)state;
    tacet_slider s = slider(0.3, 1.2);
    double w = 250 * 2 * M_PI / 60, x, dx, ddx;
    tacet_slider_at(&s, 60 * DEG, &x, &dx, &ddx);
    double force = 0.35e6 * M_PI / 4 * 0.5 * 0.5 - 250 * ddx * w * w;
    assert_near(force * dx, 14489.518, 1e-3, 0);
}

// S4c, S4f: largest piston speed and where. Printed for S4c by Khurmi and Gupta, ex. 15.3: 6.54 m/s
// at 75 degrees (two-term). S4f recomputed.
static void test_slider_s4_largest_speed(void **state)
{
    (void)state;
    static const double row[][3] = {
        {0.25, 1.03088270, 76.72098}, {0.3, 1.04433211, 74.52893}, {1.0 / 3, 1.05463955, 73.17530}};
    for (size_t i = 0; i < 3; i++) {
        tacet_slider s = slider(1, 1 / row[i][0]);
        double low = 60 * DEG, high = 90 * DEG, x, dx, ddx; // acceleration falls through zero
        for (int k = 0; k < 60; k++) {
            double middle = (low + high) / 2;
            tacet_slider_at(&s, middle, &x, &dx, &ddx);
            *(ddx > 0 ? &low : &high) = middle;
        }
        assert_near(low / DEG, row[i][2], 1e-5, 0);
        assert_near(dx, row[i][1], 1e-8, 0);
    }
}

// S4e: Khurmi and Gupta, ex. 15.9: bore 80, crank 50, rod 200 mm, 1 kg, 33 degrees, 0.7 MPa: net
// force 1848 N at 1800 rpm, reversal at 2612 rpm. Printed from the two-term series, which is 0.45 %
// off in acceleration there (closed form of the next term).
static void test_slider_s4_reversal(void **state)
{
    (void)state;
    tacet_slider s = slider(0.05, 0.2);
    double x, dx, ddx, gas = 0.7e6 * M_PI / 4 * 0.08 * 0.08, w = 1800 * 2 * M_PI / 60;
    tacet_slider_at(&s, 33 * DEG, &x, &dx, &ddx);
    double two_term = 0.05 * (cos(33 * DEG) + 0.25 * cos(66 * DEG));
    assert_near(gas - two_term * w * w, 1848, 0.5, 0);
    assert_near(sqrt(gas / two_term) * 60 / (2 * M_PI), 2612, 0.5, 0);
    assert_near(ddx, two_term, 0, 6e-3);
    assert_near(sqrt(gas / ddx) * 60 / (2 * M_PI), 2612, 0, 3e-3);
}

// With a pin offset: x vanishes with its slope at angle 0, the largest x is the closed form
// sqrt((l+r)^2-e^2) - sqrt((l-r)^2-e^2), derivatives agree with central differences, the piston
// takes longer on the way down for a positive offset (crank pin moves to that side after top), and
// a mirrored offset is the mirrored motion.
static void test_slider_offset(void **state)
{
    (void)state;
    tacet_slider s = {.crank_m = 0.05, .rod_m = 0.15, .offset_m = 0.01};
    tacet_slider mirrored = {.crank_m = 0.05, .rod_m = 0.15, .offset_m = -0.01};
    double x, dx, ddx, largest = 0, at = 0;
    tacet_slider_at(&s, 0, &x, &dx, &ddx);
    assert_near(x, 0, 1e-16, 0);
    assert_near(dx, 0, 1e-16, 0);
    for (double a = 0; a < 2 * M_PI; a += 1e-3) {
        double h = 1e-5, x0, x1, dx0, dx1, other;
        tacet_slider_at(&s, a, &x, &dx, &ddx);
        tacet_slider_at(&s, a - h, &x0, &dx0, &other);
        tacet_slider_at(&s, a + h, &x1, &dx1, &other);
        assert_near(dx, (x1 - x0) / (2 * h), 1e-9, 0);
        assert_near(ddx, (dx1 - dx0) / (2 * h), 1e-9, 0);
        tacet_slider_at(&mirrored, -a, &x0, &dx0, &other);
        assert_near(x0, x, 1e-15, 0);
        assert_near(dx0, -dx, 1e-15, 0);
        if (x > largest) largest = x, at = a;
    }
    assert_near(largest, sqrt(0.2 * 0.2 - 1e-4) - sqrt(0.1 * 0.1 - 1e-4), 1e-7, 0);
    // bottom: crank and rod in line again, at pi + asin(e/(l-r)) - asin(e/(l+r)) after top
    assert_near(at, M_PI + asin(0.1) - asin(0.05), 2e-3, 0);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_slider_s1),
        cmocka_unit_test(test_slider_s2),
        cmocka_unit_test(test_slider_s3),
        cmocka_unit_test(test_slider_s4_speed_and_acceleration),
        cmocka_unit_test(test_slider_s4_torque),
        cmocka_unit_test(test_slider_s4_largest_speed),
        cmocka_unit_test(test_slider_s4_reversal),
        cmocka_unit_test(test_slider_offset),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
