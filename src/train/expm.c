// Matrix exponential by scaling and squaring of a Taylor polynomial.
//
// exp(A t) = (exp(A t / 2^s))^(2^s), s so that the norm of the scaled matrix is at most 1/2; there
// the polynomial of degree 12 is exact to rounding (0.5^13/13! = 2e-14 relative to 1, and each
// squaring only doubles a relative error). The polynomial is evaluated in powers of the cube
// (Paterson & Stockmeyer, SIAM J. Comput. 2, 1973): five products. (C. Moler & C. Van Loan, SIAM
// Rev. 45, 2003, method 3.) A is balanced by a diagonal of powers of two first (Parlett & Reinsch,
// Numer. Math. 13, 1969), as speeds and twists differ by orders of magnitude.
#include "train/expm.h"
#include <math.h>
#include <string.h>

#define NORM   0.5
#define PASSES 20

// ---- product ----------------------------------------------------------------------------------

#define ROWS 4
#define COLS 8

// c[0..rows) += a b on columns first..first + COLS, kept in registers.
static void tile(size_t n, const double *restrict a, const double *restrict b, double *restrict c)
{
    double sum[ROWS][COLS] = {{0}};
    for (size_t k = 0; k < n; k++)
        for (size_t i = 0; i < ROWS; i++) {
            double x = a[i * n + k];
            for (size_t j = 0; j < COLS; j++)
                sum[i][j] += x * b[k * n + j];
        }
    for (size_t i = 0; i < ROWS; i++)
        for (size_t j = 0; j < COLS; j++)
            c[i * n + j] = sum[i][j];
}

static void edge(size_t n, const double *restrict a, const double *restrict b, double *restrict c,
                 size_t rows, size_t cols)
{
    for (size_t i = 0; i < rows; i++)
        for (size_t j = 0; j < cols; j++) {
            double sum = 0;
            for (size_t k = 0; k < n; k++)
                sum += a[i * n + k] * b[k * n + j];
            c[i * n + j] = sum;
        }
}

static void multiply(size_t n, const double *a, const double *b, double *c)
{
    for (size_t j = 0; j < n; j += COLS)
        for (size_t i = 0; i < n; i += ROWS) {
            const double *row = a + i * n, *column = b + j;
            double *to = c + i * n + j;
            if (i + ROWS <= n && j + COLS <= n)
                tile(n, row, column, to);
            else
                edge(n, row, column, to, n - i < ROWS ? n - i : ROWS, n - j < COLS ? n - j : COLS);
        }
}

// ---- balancing --------------------------------------------------------------------------------

// Norms of row and column i off the diagonal.
static void norms(size_t n, const double *a, size_t i, double *row, double *column)
{
    *row = *column = 0;
    for (size_t k = 0; k < n; k++) {
        if (k == i) continue;
        *row += fabs(a[i * n + k]);
        *column += fabs(a[k * n + i]);
    }
}

// a becomes D^-1 a D.
static void balance(size_t n, double *a, double *d)
{
    for (size_t i = 0; i < n; i++)
        d[i] = 1;
    bool changed = true;
    for (int pass = 0; pass < PASSES && changed; pass++) {
        changed = false;
        for (size_t i = 0; i < n; i++) {
            double row, column;
            norms(n, a, i, &row, &column);
            if (row == 0 || column == 0) continue;
            double f = exp2(round(0.5 * log2(row / column)));
            if (column * f + row / f > 0.95 * (column + row)) continue;
            changed = true;
            d[i] *= f;
            for (size_t k = 0; k < n; k++) {
                a[k * n + i] *= f;
                a[i * n + k] /= f;
            }
        }
    }
}

static double norm(size_t n, const double *a)
{
    double largest = 0;
    for (size_t i = 0; i < n; i++) {
        double sum = 0;
        for (size_t k = 0; k < n; k++)
            sum += fabs(a[i * n + k]);
        largest = fmax(largest, sum);
    }
    return largest;
}

// ---- polynomial -------------------------------------------------------------------------------

// p = c0 1 + c1 x + c2 x2.
static void quadratic(size_t n, const double *x, const double *x2, const double c[3], double *p)
{
    for (size_t i = 0; i < n * n; i++)
        p[i] = c[1] * x[i] + c[2] * x2[i];
    for (size_t i = 0; i < n; i++)
        p[i * n + i] += c[0];
}

// sum x^k / k!, k = 0..12, by Horner's rule in x^3 over quadratics.
static void taylor(size_t n, const double *x, double *out, double *scratch)
{
    double *x2 = scratch, *x3 = scratch + n * n, *p = scratch + 2 * n * n, c[13] = {1};
    for (int k = 1; k <= 12; k++)
        c[k] = c[k - 1] / k;
    multiply(n, x, x, x2);
    multiply(n, x2, x, x3);
    for (size_t i = 0; i < n * n; i++)
        out[i] = c[12] * x3[i];
    for (int block = 3; block >= 0; block--) {
        quadratic(n, x, x2, &c[3 * block], p);
        for (size_t i = 0; i < n * n; i++)
            out[i] += p[i];
        if (block == 0) break;
        multiply(n, out, x3, p);
        memcpy(out, p, n * n * sizeof *out);
    }
}

void matrix_exponential(size_t n, const double *a, double t, double *out, double *scratch)
{
    double *x = scratch, *d = scratch + n * n, *rest = scratch + 2 * n * n;
    for (size_t i = 0; i < n * n; i++)
        x[i] = a[i] * t;
    balance(n, x, d);
    double size = norm(n, x);
    int squarings = size > NORM ? (int)ceil(log2(size / NORM)) : 0;
    if (!isfinite(size)) squarings = 0;
    for (size_t i = 0; i < n * n; i++)
        x[i] = ldexp(x[i], -squarings);
    taylor(n, x, out, rest);
    for (int i = 0; i < squarings; i++) {
        multiply(n, out, out, rest);
        memcpy(out, rest, n * n * sizeof *out);
    }
    for (size_t i = 0; i < n; i++)
        for (size_t k = 0; k < n; k++)
            out[i * n + k] *= d[i] / d[k];
}
