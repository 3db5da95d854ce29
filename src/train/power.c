// Mean powers of a periodic solution.
//
// A torque F on a node that turns at W ratio + v gives W ratio <F> + <F v>, <F v> = sum over lines
// of Re(F conj v)/2. A link takes w/2 Im K |u|^2 a line, u = T/K its twist; damping to ground c/2
// |v|^2; the load takes the mean torque that reaches it at its mean speed.
#include "train/internal.h"

static double square(double complex z)
{
    return creal(z) * creal(z) + cimag(z) * cimag(z);
}

static double put_in(const tacet_spectrum *torque, const tacet_spectrum *angle, double base)
{
    double sum = 0;
    for (size_t h = 1; h <= torque->n_lines && h <= angle->n_lines; h++) {
        double complex v = I * (base * (double)h) * angle->line[h];
        sum += 0.5 * (creal(torque->line[h]) * creal(v) + cimag(torque->line[h]) * cimag(v));
    }
    return sum;
}

static double taken_by_link(const tacet_train *t, size_t link, const tacet_spectrum *torque,
                            double base)
{
    double sum = 0;
    for (size_t h = 1; h <= torque->n_lines; h++) {
        double w = base * (double)h;
        double complex K = tacet_train_link_impedance(t, link, w);
        sum += 0.5 * w * cimag(K) * square(torque->line[h]) / square(K);
    }
    return sum;
}

static double taken_by_ground(double damping, const tacet_spectrum *angle, double base)
{
    double sum = 0;
    for (size_t h = 1; h <= angle->n_lines; h++)
        sum += 0.5 * damping * square(base * (double)h * angle->line[h]);
    return sum;
}

tacet_train_power tacet_train_power_of(const tacet_train *t, double speed, size_t n_throws,
                                       const size_t *throw_node, const tacet_spectrum *torque,
                                       const tacet_train_motion *motion)
{
    tacet_train_power p = {0, 0, 0};
    double base = speed / torque[0].revolutions, reaching = 0;
    for (size_t i = 0; i < n_throws; i++) {
        double mean = torque[i].mean * speed * t->ratio[throw_node[i]];
        p.in_W += mean + put_in(&torque[i], &motion->angle_rad[throw_node[i]], base);
        if (throw_node[i] == t->load) reaching += torque[i].mean;
    }
    for (size_t e = 0; e < t->n_links; e++) {
        p.dissipated_W += taken_by_link(t, e, &motion->link_torque_Nm[e], base);
        double mean = motion->link_torque_Nm[e].mean;
        if (t->link[e].to == t->load) reaching += mean;
        if (t->link[e].from == t->load) reaching -= mean / t->link[e].gear_ratio;
    }
    for (size_t j = 0; j < t->n; j++)
        p.dissipated_W += taken_by_ground(t->damping[j], &motion->angle_rad[j], base);
    p.out_W = reaching * speed * t->ratio[t->load];
    return p;
}
