// What the powertrain on its mounts does: forces of mounts, motion of places, what reaches points.
//
// The body's motion on line h is the roll torque of the pattern times the answer to one newton
// metre, and the answer to the shaking loads, which belong to the speed alone. Order 0: the mean
// roll torque on the static stiffness.
#include "judge/quantities.h"
#include <math.h>
#include <string.h>

// Roll torque of the response into out, the number of lines that the body's answer has too.
static tacet_status begin(const tacet_response *r, tacet_spectrum *out, size_t *n)
{
    if (!r->body || !r->mounts || r->mounts->revolutions != r->revolutions ||
        r->mounts->speed_rad_per_s != r->speed_rad_per_s)
        return TACET_BAD_INPUT;
    tacet_status status = roll_torque(r, 0, out);
    *n = out->n_lines < r->n_lines ? out->n_lines : r->n_lines;
    return *n <= r->mounts->n_lines ? status : TACET_BAD_INPUT;
}

static void motion_on(const tacet_response *r, size_t h, double complex roll, tacet_six_complex q)
{
    for (int i = 0; i < 6; i++)
        q[i] = roll * r->mounts->roll[h][i] + (r->shaken ? r->mounts->shaken[h][i] : 0);
}

static void motion_at_rest(const tacet_response *r, double roll, tacet_six_complex q)
{
    for (int i = 0; i < 6; i++)
        q[i] = roll * r->mounts->roll_static[i];
}

tacet_status mount_force(const tacet_response *r, size_t target, tacet_spectrum *out)
{
    size_t n, mount = target / 3;
    int axis = (int)(target % 3);
    tacet_six_complex q;
    tacet_status status = begin(r, out, &n);
    if (status != TACET_OK) return status;
    motion_at_rest(r, out->mean, q);
    out->mean = creal(tacet_body_mount_force(r->body, mount, axis, 0, q));
    for (size_t h = 1; h <= n; h++) {
        motion_on(r, h, out->line[h], q);
        out->line[h] =
            tacet_body_mount_force(r->body, mount, axis, quantity_base(r) * (double)h, q);
    }
    return TACET_OK;
}

tacet_status place_acceleration(const tacet_response *r, size_t target, tacet_spectrum *out)
{
    size_t n;
    tacet_six_complex q;
    tacet_status status = begin(r, out, &n);
    if (status != TACET_OK) return status;
    out->mean = 0;
    for (size_t h = 1; h <= n; h++) {
        double w = quantity_base(r) * (double)h;
        motion_on(r, h, out->line[h], q);
        out->line[h] = -w * w * tacet_body_place_motion(r->body, target / 3, (int)(target % 3), q);
    }
    return TACET_OK;
}

tacet_status cab(const tacet_response *r, size_t point, tacet_spectrum *out)
{
    size_t n;
    tacet_six_complex q;
    tacet_status status = begin(r, out, &n);
    if (status != TACET_OK) return status;
    out->mean = 0; // what is felt or heard is what changes
    for (size_t h = 1; h <= n; h++) {
        motion_on(r, h, out->line[h], q);
        out->line[h] = tacet_body_point_response(r->body, point, quantity_base(r) * (double)h, q);
    }
    return TACET_OK;
}

tacet_status tacet_path_share(const tacet_response *r, size_t path, tacet_spectrum *out)
{
    size_t n;
    tacet_six_complex q;
    tacet_status status = begin(r, out, &n);
    if (status != TACET_OK) return status;
    out->mean = 0;
    for (size_t h = 1; h <= n; h++) {
        motion_on(r, h, out->line[h], q);
        out->line[h] = tacet_body_path_response(r->body, path, quantity_base(r) * (double)h, q);
    }
    return TACET_OK;
}

double tacet_share(double complex part, double complex sum)
{
    double square = creal(sum) * creal(sum) + cimag(sum) * cimag(sum);
    return square > 0 ? creal(part * conj(sum)) / square : NAN;
}

tacet_status shaking(const tacet_response *r, size_t member, tacet_spectrum *out)
{
    size_t n = quantity_begin(r, out);
    if (!r->body) return TACET_BAD_INPUT;
    double square = r->speed_rad_per_s * r->speed_rad_per_s;
    for (size_t half = 1; half <= TACET_SHAKING_HALVES && r->shaken; half++) {
        size_t h = half * r->revolutions / 2;
        if (half * r->revolutions % 2 == 0 && h <= n)
            out->line[h] = square * tacet_body_shaking(r->body)[half][member];
    }
    return TACET_OK;
}
