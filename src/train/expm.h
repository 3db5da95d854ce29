#ifndef TRAIN_EXPM_H
#define TRAIN_EXPM_H
#include "tacet/base.h"

#define EXPM_MATRICES 6
// exp(a t) into out, n square, row by row. `scratch` holds EXPM_MATRICES of them, 64-byte aligned
// or not; a is left alone. Not finite: the result is not, either.
void matrix_exponential(size_t n, const double *a, double t, double *out, double *scratch);

#endif
