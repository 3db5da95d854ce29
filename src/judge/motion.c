// Angle, speed and acceleration of nodes.
#include "judge/quantities.h"
#include <math.h>

size_t quantity_begin(const tacet_response *r, tacet_spectrum *out)
{
    tacet_spectrum_zero(out);
    out->revolutions = r->revolutions;
    return out->n_lines < r->n_lines ? out->n_lines : r->n_lines;
}

double quantity_base(const tacet_response *r)
{
    return r->speed_rad_per_s / r->revolutions;
}

// Deviation from the mean rotation: mean 0.
tacet_status node_angle(const tacet_response *r, size_t node, tacet_spectrum *out)
{
    size_t n = quantity_begin(r, out);
    const double complex *angle = r->motion->angle_rad[node].line;
    for (size_t h = 1; h <= n; h++)
        out->line[h] = angle[h];
    return TACET_OK;
}

// Of a node whose angle is w t + Re(a exp(i h w0 t)): w + Re(i h w0 a exp(..)).
tacet_status node_speed(const tacet_response *r, size_t node, tacet_spectrum *out)
{
    size_t n = quantity_begin(r, out);
    const double complex *angle = r->motion->angle_rad[node].line;
    double base = quantity_base(r);
    out->mean = r->speed_rad_per_s * tacet_train_node_ratio(r->train, node);
    for (size_t h = 1; h <= n; h++)
        out->line[h] = I * (base * (double)h) * angle[h];
    return TACET_OK;
}

tacet_status node_acceleration(const tacet_response *r, size_t node, tacet_spectrum *out)
{
    size_t n = quantity_begin(r, out);
    const double complex *angle = r->motion->angle_rad[node].line;
    double base = quantity_base(r);
    for (size_t h = 1; h <= n; h++) {
        double w = base * (double)h;
        out->line[h] = -w * w * angle[h];
    }
    return TACET_OK;
}

// Speed of the flywheel over its mean: the pp of it is (w_max - w_min) / w_mean.
tacet_status irregularity(const tacet_response *r, size_t none, tacet_spectrum *out)
{
    (void)none;
    tacet_status status = node_speed(r, tacet_train_flywheel(r->train), out);
    double mean = out->mean;
    for (size_t h = 1; h <= out->n_lines; h++)
        out->line[h] /= mean;
    out->mean = 1;
    return status;
}
