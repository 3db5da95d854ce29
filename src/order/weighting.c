// Frequency weightings of vibration and sound.
//
// ISO 2631-1 (annex A): H = high pass, low pass, transition (acceleration to velocity), step:
//   Hh = 1 / (1 + w1 / (Q1 s) + (w1 / s)^2), f1 = 0.4 Hz, Q1 = 1/sqrt 2
//   Hl = 1 / (1 + s / (Q2 w2) + (s / w2)^2), f2 = 100 Hz, Q2 = 1/sqrt 2
//   Ht = (1 + s / w3) / (1 + s / (Q4 w4) + (s / w4)^2)
//   Hs = (1 + s / (Q5 w5) + (s / w5)^2) / (1 + s / (Q6 w6) + (s / w6)^2) (w5 / w6)^2; 1 for Wd
// Limits: both vanish at 0 and above 100 Hz; Wd is near 1 between 0.5 and 2 Hz.
#include "tacet/order.h"
#include <math.h>

#define HIGH_PASS_HZ 0.4
#define LOW_PASS_HZ  100.0
#define A_AT_1000_DB 2.000 // brings A to 0 dB at 1000 Hz, as the standard rounds it

const char *const tacet_weighting_names[] = {"none", "wk", "wd", "a", NULL};

static double complex second_order(double f, double f0, double q)
{
    double r = f / f0;
    return 1 - r * r + I * r / q;
}

static double complex of_body(double f, double f3, double f4, double complex step)
{
    double r = f / HIGH_PASS_HZ;
    if (f == 0) return 0;
    double complex high = -r * r / second_order(f, HIGH_PASS_HZ, M_SQRT1_2);
    double complex low = 1 / second_order(f, LOW_PASS_HZ, M_SQRT1_2);
    return high * low * (1 + I * f / f3) / second_order(f, f4, 0.63) * step;
}

static double of_hearing(double f)
{
    const double f1 = 20.598997, f2 = 107.65265, f3 = 737.86223, f4 = 12194.217;
    double s = f * f;
    double ratio =
        f4 * f4 * s * s / ((s + f1 * f1) * sqrt((s + f2 * f2) * (s + f3 * f3)) * (s + f4 * f4));
    return ratio * pow(10, A_AT_1000_DB / 20);
}

double complex tacet_weighting_at(int weighting, double f_hz)
{
    double f = f_hz;
    if (weighting == TACET_WEIGHTING_VERTICAL) {
        double complex step = second_order(f, 2.37, 0.91) / second_order(f, 3.35, 0.91) *
                              (2.37 / 3.35) * (2.37 / 3.35);
        return of_body(f, 12.5, 12.5, step);
    }
    if (weighting == TACET_WEIGHTING_HORIZONTAL) return of_body(f, 2.0, 2.0, 1);
    return weighting == TACET_WEIGHTING_HEARING ? of_hearing(f) : 1;
}
