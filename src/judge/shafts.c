// Torque, stress and heat of links.
#include "judge/quantities.h"
#include <math.h>

tacet_status link_torque(const tacet_response *r, size_t link, tacet_spectrum *out)
{
    size_t n = quantity_begin(r, out);
    const tacet_spectrum *torque = &r->motion->link_torque_Nm[link];
    out->mean = torque->mean;
    for (size_t h = 1; h <= n; h++)
        out->line[h] = torque->line[h];
    return TACET_OK;
}

// tau = K_t T / W_t, W_t = pi (D^4 - d^4) / (16 D): torsion only, no bending. MPa.
tacet_status link_stress(const tacet_response *r, size_t link, tacet_spectrum *out)
{
    tacet_link_info info = tacet_train_link_info(r->train, link);
    double k = isnan(info.stress_concentration) ? 1 : info.stress_concentration;
    double per_Nm = k / info.section_modulus_m3 * MPA_PER_PA;
    tacet_status status = link_torque(r, link, out);
    out->mean *= per_Nm;
    for (size_t h = 1; h <= out->n_lines; h++)
        out->line[h] *= per_Nm;
    return status;
}

// A link that twists by D cos(w t) takes T = |K| D cos(w t + phase of K): a mean power of
// 1/2 w Im K |D|^2. Viscous, Im K = w c: 1/2 c w^2 D^2; hysteretic, Im K = k eta: 1/2 k eta w D^2,
// with pi k eta D^2 a cycle. All lines. Twist on the `to` side of a gear stage, where K stands.
tacet_status damper_heat(const tacet_response *r, size_t link, double *out)
{
    tacet_link_info info = tacet_train_link_info(r->train, link);
    const double complex *from = r->motion->angle_rad[info.from].line;
    const double complex *to = r->motion->angle_rad[info.to].line;
    double base = quantity_base(r), sum = 0;
    for (size_t h = 1; h <= r->n_lines; h++) {
        double w = base * (double)h;
        double complex twist = from[h] / info.gear_ratio - to[h];
        double square = creal(twist) * creal(twist) + cimag(twist) * cimag(twist);
        sum += 0.5 * w * cimag(tacet_train_link_impedance(r->train, link, w)) * square;
    }
    *out = sum;
    return TACET_OK;
}
