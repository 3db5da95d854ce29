// Points, loads and equations of six members.
#include "internal.h"

void six_point(const double at[3], const double complex q[6], double complex out[3])
{
    out[0] = q[0] + q[4] * at[2] - q[5] * at[1];
    out[1] = q[1] + q[5] * at[0] - q[3] * at[2];
    out[2] = q[2] + q[3] * at[1] - q[4] * at[0];
}

void six_add_force(const double at[3], const double complex f[3], double complex load[6])
{
    for (int i = 0; i < 3; i++)
        load[i] += f[i];
    load[3] += at[1] * f[2] - at[2] * f[1];
    load[4] += at[2] * f[0] - at[0] * f[2];
    load[5] += at[0] * f[1] - at[1] * f[0];
}

static void swap_rows(double complex a[36], double complex b[6], int i, int k)
{
    double complex keep = b[i];
    b[i] = b[k];
    b[k] = keep;
    for (int j = 0; j < 6; j++) {
        keep = a[6 * i + j];
        a[6 * i + j] = a[6 * k + j];
        a[6 * k + j] = keep;
    }
}

// Gauss with row pivots: GSL's complex LU takes memory, which a solve must not.
bool six_solve(double complex a[36], double complex b[6])
{
    for (int i = 0; i < 6; i++) {
        int best = i;
        for (int k = i + 1; k < 6; k++)
            if (cabs(a[6 * k + i]) > cabs(a[6 * best + i])) best = k;
        if (!(cabs(a[6 * best + i]) > 0)) return false;
        swap_rows(a, b, i, best);
        for (int k = i + 1; k < 6; k++) {
            double complex by = a[6 * k + i] / a[6 * i + i];
            for (int j = i; j < 6; j++)
                a[6 * k + j] -= by * a[6 * i + j];
            b[k] -= by * b[i];
        }
    }
    bool finite = true;
    for (int i = 5; i >= 0; i--) {
        for (int j = i + 1; j < 6; j++)
            b[i] -= a[6 * i + j] * b[j];
        b[i] /= a[6 * i + i];
        finite = finite && isfinite(creal(b[i])) && isfinite(cimag(b[i]));
    }
    return finite;
}
