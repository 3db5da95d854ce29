// Inside of the room body.
#ifndef BODY_INTERNAL_H
#define BODY_INTERNAL_H
#include "tacet/body.h"
#include <math.h>

typedef struct {
    double at[3];
    double axis[3][3]; // axis[i]: the mount's own axis i, in the body's axes
    double static_N_per_m[3];
} body_mount;

typedef struct { // a table of a path, or none
    size_t n;
    double *hz;
    double complex *value;
} body_table;

struct tacet_body {
    const tacet_body_def *def;
    tacet_arena *arena;
    double mass[36];
    double direction; // of the crank about x: 1 clockwise from the free end, -1
    body_mount *mount;
    size_t *path_mount, *path_point; // [n_paths]
    body_table *table;               // [n_paths]
    double complex shaking[TACET_SHAKING_HALVES + 1][6];
    bool same_at_all_hz;          // mounts without curves
    double complex stiffness[36]; // then
};

// Displacement of a point of the body: q[0..2] + q[3..5] cross at.
void six_point(const double at[3], const double complex q[6], double complex out[3]);
// Adds a force at a point to a load.
void six_add_force(const double at[3], const double complex force[3], double complex load[6]);
// Solves a x = b, a symmetric or not, both overwritten, x in b; false: singular or not finite.
TACET_USE bool six_solve(double complex a[36], double complex b[6]);

// Complex stiffness of a mount along its axis.
double complex mount_stiffness(const tacet_body *b, size_t mount, int axis, double f_hz);
void mount_assemble(tacet_body *b);
void shaking_assemble(tacet_body *b, const tacet_engine *en);
TACET_USE tacet_status paths_assemble(tacet_body *b, tacet_error *e);
// Transfer of a path without its point's weighting.
double complex path_transfer(const tacet_body *b, size_t path, double f_hz);
#endif
