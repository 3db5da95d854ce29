#include "condition/internal.h"
#include <math.h>
#include <string.h>

#define CHUNK 256
// Change of a line between the last two passes, over the largest line.
#define RIPPLE_CHANGE 1e-6
// End defect of the marched repeat over the motion: a thousandth of the 0.1 dB that is asked for,
// and what linear shooting reaches in two to four repeats of the full equations.
#define STEADY_CLOSURE 1e-5

// Applied torque, reciprocating inertia and its slope of one throw at n angles: all cylinders on
// it, less an equal share of the mean friction.
tacet_status workspace_drive(const void *who, size_t throw_index, size_t n, const double *angle_rad,
                             double *torque_Nm, double *inertia_kgm2, double *slope_kgm2_per_rad)
{
    const tacet_workspace *w = who;
    const tacet_model *m = w->m;
    unsigned cylinders = tacet_engine_cylinders(m->engine), on = m->throw_n_slots[throw_index];
    const unsigned *slot = &m->throw_slots[throw_index * cylinders];
    double friction = w->friction_Nm * on / cylinders;
    double torque[CHUNK], inertia[CHUNK], slope[CHUNK];
    for (size_t from = 0; from < n; from += CHUNK) {
        size_t count = n - from < CHUNK ? n - from : CHUNK;
        for (size_t k = 0; k < count; k++) {
            torque_Nm[from + k] = -friction;
            inertia_kgm2[from + k] = slope_kgm2_per_rad[from + k] = 0;
        }
        for (unsigned i = 0; i < on; i++) {
            tacet_engine_gas_torque(m->engine, w->engine, slot[i], count, angle_rad + from, torque);
            tacet_engine_inertia(m->engine, slot[i], count, angle_rad + from, inertia, slope);
            for (size_t k = 0; k < count; k++) {
                torque_Nm[from + k] += torque[k];
                inertia_kgm2[from + k] += inertia[k];
                slope_kgm2_per_rad[from + k] += slope[k];
            }
        }
    }
    return TACET_OK;
}

// At constant speed W: F = T_gas - friction - J'/2 W^2 (- m x' x'' W^2, as J = m x'^2).
static tacet_status constant_torque(tacet_workspace *w, double W, unsigned revolutions)
{
    const tacet_transform *t = model_torque_transform(w->m, revolutions);
    size_t n = tacet_transform_samples(t);
    for (size_t k = 0; k < n; k++)
        w->angle[k] = 2 * M_PI * revolutions * (double)k / (double)n;
    for (size_t i = 0; i < w->m->n_throws; i++) {
        tacet_status status =
            workspace_drive(w, i, n, w->angle, w->torque_at, w->inertia_at, w->slope_at);
        if (status != TACET_OK) return status;
        for (size_t k = 0; k < n; k++)
            w->samples[k] = w->torque_at[k] - 0.5 * w->slope_at[k] * W * W;
        tacet_transform_lines(t, w->samples, &w->torque[i]);
    }
    return TACET_OK;
}

tacet_status motion_constant(tacet_workspace *w, double speed_rad_per_s, unsigned revolutions,
                             size_t n_lines)
{
    workspace_shape(w, revolutions, n_lines);
    tacet_status status = constant_torque(w, speed_rad_per_s, revolutions);
    if (status != TACET_OK) return status;
    return tacet_train_harmonic(w->m->train, speed_rad_per_s, w->m->n_throws, w->m->throw_node,
                                w->torque, w->train, &w->motion);
}

// Piston torque from the effective torque F that a harmonic solution has on its right-hand side:
//   T_piston = T_gas - J'/2 a'^2 - J a'' = F + friction share - <J> a''.
static void piston_from_torque(tacet_workspace *w, double W, unsigned revolutions, size_t n_lines)
{
    const tacet_model *m = w->m;
    double base = W / revolutions;
    for (size_t i = 0; i < m->n_throws; i++) {
        const tacet_spectrum *angle = &w->motion.angle_rad[m->throw_node[i]];
        tacet_spectrum *p = &w->piston[i];
        p->mean = w->torque[i].mean +
                  w->friction_Nm * m->throw_n_slots[i] / tacet_engine_cylinders(m->engine);
        for (size_t h = 1; h <= n_lines; h++) {
            double omega = base * (double)h;
            p->line[h] =
                w->torque[i].line[h] + m->throw_inertia[i] * omega * omega * angle->line[h];
        }
    }
}

// Samples of a spectrum or of its derivative (times i omega) over the repeat into `out`.
static void samples_of(tacet_workspace *w, const tacet_transform *t, const tacet_spectrum *s,
                       int derivative, double base, double *out)
{
    tacet_spectrum *q = &w->quantity;
    q->mean = derivative ? 0 : s->mean;
    for (size_t h = 1; h <= s->n_lines; h++) {
        double complex factor = derivative == 0   ? 1
                                : derivative == 1 ? I * base * (double)h
                                                  : -base * base * h * h;
        q->line[h] = factor * s->line[h];
    }
    tacet_transform_samples_of(t, q, w->samples);
    memcpy(out, w->samples, tacet_transform_samples(t) * sizeof *out);
}

// Piston torque of a motion that came from the march: from its actual angles, speeds and
// accelerations. scratch: angle -> w->angle; a' and a'' in turn.
void motion_piston(tacet_workspace *w, double W, unsigned revolutions, size_t n_lines)
{
    const tacet_model *m = w->m;
    const tacet_transform *t = model_transform(m, n_lines, PEAK_OVERSAMPLE);
    size_t n = tacet_transform_samples(t);
    double base = W / revolutions;
    for (size_t i = 0; i < m->n_throws; i++) {
        const tacet_spectrum *angle = &w->motion.angle_rad[m->throw_node[i]];
        double share = w->friction_Nm * m->throw_n_slots[i] / tacet_engine_cylinders(m->engine);
        samples_of(w, t, angle, 0, base, w->angle);
        for (size_t k = 0; k < n; k++)
            w->angle[k] += 2 * M_PI * revolutions * (double)k / (double)n;
        (void)workspace_drive(w, i, n, w->angle, w->torque_at, w->inertia_at, w->slope_at);
        samples_of(w, t, angle, 1, base, w->angle);
        for (size_t k = 0; k < n; k++) {
            double speed = W + w->angle[k];
            w->torque_at[k] += share - 0.5 * w->slope_at[k] * speed * speed;
        }
        samples_of(w, t, angle, 2, base, w->angle);
        for (size_t k = 0; k < n; k++)
            w->samples[k] = w->torque_at[k] - w->inertia_at[k] * w->angle[k];
        tacet_transform_lines(t, w->samples, &w->piston[i]);
    }
}

static void respond(tacet_workspace *w, const tacet_condition *c, size_t n_lines)
{
    const tacet_model *m = w->m;
    w->response = (tacet_response){
        .train = m->train,
        .motion = &w->motion,
        .piston_torque_Nm = w->piston,
        .throw_node = m->throw_node,
        .n_throws = m->n_throws,
        .friction_Nm = w->friction_Nm,
        .speed_rad_per_s = c->speed_rad_per_s,
        .revolutions = c->roll->revolutions,
        .n_lines = n_lines,
    };
    w->has_response = true;
}

tacet_status motion_solve(tacet_workspace *w, const tacet_condition *c, tacet_level level,
                          tacet_solver_note *note)
{
    const tacet_model *m = w->m;
    double W = c->speed_rad_per_s;
    unsigned revolutions = c->roll->revolutions;
    size_t n_lines = tacet_model_lines(m, revolutions);
    tacet_status status = TACET_NOT_CONVERGED;
    tacet_periodic how = tacet_periodic_default();
    how.revolutions = revolutions;
    how.n_lines = n_lines;
    workspace_shape(w, revolutions, n_lines);
    if (level == TACET_LEVEL_CONSTANT) {
        *note = (tacet_solver_note){.method = "constant"};
        status = motion_constant(w, W, revolutions, n_lines);
    } else if (level == TACET_LEVEL_RIPPLE) {
        how.tolerance = RIPPLE_CHANGE;
        status = tacet_train_ripple(m->train, W, m->n_throws, m->throw_node, workspace_drive, w,
                                    &how, w->train, &w->motion, w->torque, note);
    }
    if (status == TACET_OK) {
        piston_from_torque(w, W, revolutions, n_lines);
    } else if (status == TACET_NOT_CONVERGED) { // steady decides
        how.tolerance = STEADY_CLOSURE;
        status = tacet_train_steady(m->train, W, m->n_throws, m->throw_node, workspace_drive, w,
                                    &how, w->train, &w->motion, note);
        if (status == TACET_OK) motion_piston(w, W, revolutions, n_lines);
    }
    if (status == TACET_OK) respond(w, c, n_lines);
    return status;
}
