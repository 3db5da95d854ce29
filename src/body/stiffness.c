// Stiffness of mounts and of the body on them.
#include "internal.h"
#include <string.h>

// Rx(a) Ry(b) Rz(c): turned about x, then the new y, then the new z; columns are the mount's axes.
static void turn(const double *angle, double axis[3][3])
{
    double a = angle ? angle[0] : 0, b = angle ? angle[1] : 0, c = angle ? angle[2] : 0;
    double ca = cos(a), sa = sin(a), cb = cos(b), sb = sin(b), cc = cos(c), sc = sin(c);
    const double x[3] = {cb * cc, ca * sc + sa * sb * cc, sa * sc - ca * sb * cc};
    const double y[3] = {-cb * sc, ca * cc - sa * sb * sc, sa * cc + ca * sb * sc};
    const double z[3] = {sb, -sa * cb, ca * cb};
    memcpy(axis[0], x, sizeof x);
    memcpy(axis[1], y, sizeof y);
    memcpy(axis[2], z, sizeof z);
}

static const tacet_curve *curve_of(const tacet_mount_def *d, int axis)
{
    return axis == 0 ? &d->x_N_per_m : axis == 1 ? &d->y_N_per_m : &d->z_N_per_m;
}

double complex mount_stiffness(const tacet_body *b, size_t mount, int axis, double f_hz)
{
    const tacet_mount_def *d = &b->def->mounts[mount];
    if (f_hz == 0) return b->mount[mount].static_N_per_m[axis];
    return tacet_curve_at(curve_of(d, axis), f_hz) *
           (1 + I * tacet_curve_at(&d->loss_factor, f_hz));
}

// Adds k times the square of the work of a unit displacement along one axis of a mount:
// g = (e, at cross e), K += k g g^T.
static void add_axis(const body_mount *m, int axis, double complex k, double complex out[36])
{
    double complex e[3], g[6] = {0};
    for (int i = 0; i < 3; i++)
        e[i] = m->axis[axis][i];
    six_add_force(m->at, e, g);
    for (int i = 0; i < 6; i++)
        for (int j = 0; j < 6; j++)
            out[6 * i + j] += k * (g[i] * g[j]);
}

static void assemble(const tacet_body *b, double f_hz, double complex k[36])
{
    memset(k, 0, 36 * sizeof *k);
    for (size_t m = 0; m < b->def->n_mounts; m++)
        for (int axis = 0; axis < 3; axis++)
            add_axis(&b->mount[m], axis, mount_stiffness(b, m, axis, f_hz), k);
}

void tacet_body_stiffness(const tacet_body *b, double f_hz, double complex k[36])
{
    if (b->same_at_all_hz && f_hz != 0)
        memcpy(k, b->stiffness, sizeof b->stiffness);
    else
        assemble(b, f_hz, k);
}

void mount_assemble(tacet_body *b)
{
    bool same = true;
    for (size_t m = 0; m < b->def->n_mounts; m++) {
        const tacet_mount_def *d = &b->def->mounts[m];
        const double stated[3] = {d->static_x_N_per_m, d->static_y_N_per_m, d->static_z_N_per_m};
        body_mount *mount = &b->mount[m];
        memcpy(mount->at, d->at_m, sizeof mount->at);
        turn(d->n_turned ? d->turned_rad : NULL, mount->axis);
        for (int axis = 0; axis < 3; axis++) {
            const tacet_curve *c = curve_of(d, axis);
            mount->static_N_per_m[axis] = isnan(stated[axis]) ? c->y[0] : stated[axis];
            same = same && c->n == 1;
        }
        same = same && d->loss_factor.n == 1;
    }
    assemble(b, 1, b->stiffness);
    b->same_at_all_hz = same;
}
