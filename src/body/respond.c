// Motion of the body under roll torque and shaking loads; what reaches mounts, places and points.
#include "internal.h"
#include <string.h>

tacet_status tacet_body_response_init(tacet_body_response *r, size_t most_lines, tacet_arena *a)
{
    r->roll = tacet_arena_alloc(a, (most_lines + 1) * sizeof *r->roll);
    r->shaken = tacet_arena_alloc(a, (most_lines + 1) * sizeof *r->shaken);
    return r->roll && r->shaken ? TACET_OK : TACET_NO_MEMORY;
}

tacet_status tacet_body_solve(const tacet_body *b, double w, const tacet_six_complex load,
                              tacet_six_complex q)
{
    double complex a[36];
    tacet_body_stiffness(b, w / (2 * M_PI), a);
    for (int i = 0; i < 36; i++)
        a[i] -= w * w * b->mass[i];
    memcpy(q, load, sizeof(tacet_six_complex));
    return six_solve(a, q) ? TACET_OK : TACET_NOT_FINITE;
}

static tacet_status respond_line(const tacet_body *b, double speed, unsigned revolutions, size_t h,
                                 tacet_body_response *out)
{
    double w = speed / revolutions * (double)h;
    const tacet_six_complex roll = {0, 0, 0, b->direction, 0, 0};
    tacet_status status = tacet_body_solve(b, w, roll, out->roll[h]);
    memset(out->shaken[h], 0, sizeof out->shaken[h]);
    size_t half = 2 * h / revolutions;
    if (status != TACET_OK || half * revolutions != 2 * h || half > TACET_SHAKING_HALVES)
        return status;
    tacet_six_complex load;
    for (int i = 0; i < 6; i++)
        load[i] = speed * speed * b->shaking[half][i];
    return tacet_body_solve(b, w, load, out->shaken[h]);
}

tacet_status tacet_body_respond(const tacet_body *b, double speed, unsigned revolutions,
                                size_t n_lines, tacet_body_response *out)
{
    const tacet_six unit = {0, 0, 0, b->direction, 0, 0};
    tacet_status status = TACET_OK;
    out->speed_rad_per_s = speed;
    out->revolutions = revolutions;
    out->n_lines = n_lines;
    if (tacet_body_static(b, unit, out->roll_static) != TACET_OK)
        for (int i = 0; i < 6; i++)
            out->roll_static[i] = NAN;
    for (size_t h = 1; h <= n_lines && status == TACET_OK; h++)
        status = respond_line(b, speed, revolutions, h, out);
    return status;
}

double complex tacet_body_mount_force(const tacet_body *b, size_t mount, int axis, double w,
                                      const tacet_six_complex q)
{
    const body_mount *m = &b->mount[mount];
    double complex moved[3];
    six_point(m->at, q, moved);
    const double *e = m->axis[axis];
    return mount_stiffness(b, mount, axis, w / (2 * M_PI)) *
           (e[0] * moved[0] + e[1] * moved[1] + e[2] * moved[2]);
}

double complex tacet_body_place_motion(const tacet_body *b, size_t place, int axis,
                                       const tacet_six_complex q)
{
    double complex moved[3];
    six_point(b->def->places[place].at_m, q, moved);
    return moved[axis];
}
