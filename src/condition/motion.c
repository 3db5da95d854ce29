#include "condition/internal.h"
#include <math.h>
#include <string.h>

// Change of a line between the last two passes, over the largest line.
#define RIPPLE_CHANGE 1e-6
// Long words have lines far below the speed, at which the angle swings widely: passes then contract
// by half, and steady would need seconds for what a few more of them settle.
#define RIPPLE_PASSES 24
// End defect of the marched repeat over the motion: a thousandth of the 0.1 dB that is asked for,
// and what linear shooting reaches in two to four repeats of the full equations.
#define STEADY_CLOSURE 1e-5
// Where the speed swings by half its mean and more: a dozen.
#define STEADY_REPEATS 24

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
    for (size_t k = 0; k < n; k++) {
        torque_Nm[k] = -friction;
        inertia_kgm2[k] = slope_kgm2_per_rad[k] = 0;
    }
    for (unsigned i = 0; i < on; i++)
        tacet_engine_drive(m->engine, w->engine, slot[i], n, angle_rad, torque_Nm, inertia_kgm2,
                           slope_kgm2_per_rad);
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
                                                  : -base * base * (double)(h * h);
        q->line[h] = factor * s->line[h];
    }
    tacet_transform_samples_of(t, q, w->samples);
    memcpy(out, w->samples, tacet_transform_samples(t) * sizeof *out);
}

// Mean angle of every node against the flywheel's, referred to the crank, under the mean torques
// that the links carry: y_from - y_to = T_to / (k ratio_to); order 0 uses the stated stiffness.
static void twist_statically(tacet_workspace *w)
{
    const tacet_train *t = w->m->train;
    size_t n = tacet_train_nodes(t), links = tacet_train_links(t);
    for (size_t j = 0; j < n; j++)
        w->twist[j] = NAN; // not reached yet
    w->twist[tacet_train_flywheel(t)] = 0;
    for (size_t pass = 0; pass < links; pass++) // a tree: each pass reaches one node or more
        for (size_t l = 0; l < links; l++) {
            tacet_link_info info = tacet_train_link_info(t, l);
            double *from = &w->twist[info.from], *to = &w->twist[info.to];
            double y = w->motion.link_torque_Nm[l].mean /
                       (info.stiffness_Nm_per_rad * tacet_train_node_ratio(t, info.to));
            if (isnan(*from) && !isnan(*to)) *from = *to + y;
            if (isnan(*to) && !isnan(*from)) *to = *from - y;
        }
}

// Piston torque of a motion that came from the march: from its actual angles, speeds and
// accelerations. Scratch: w->angle for a, a' and a'' in turn.
tacet_status motion_piston(tacet_workspace *w, double speed_rad_per_s, unsigned revolutions,
                           size_t n_lines)
{
    const tacet_model *m = w->m;
    const tacet_transform *t = model_transform(m, n_lines, PEAK_OVERSAMPLE);
    size_t n = tacet_transform_samples(t);
    double base = speed_rad_per_s / revolutions;
    twist_statically(w);
    for (size_t i = 0; i < m->n_throws; i++) {
        const tacet_spectrum *angle = &w->motion.angle_rad[m->throw_node[i]];
        double share = w->friction_Nm * m->throw_n_slots[i] / tacet_engine_cylinders(m->engine);
        double twist = w->twist[m->throw_node[i]];
        samples_of(w, t, angle, 0, base, w->angle);
        for (size_t k = 0; k < n; k++)
            w->angle[k] += twist + 2 * M_PI * revolutions * (double)k / (double)n;
        tacet_status status =
            workspace_drive(w, i, n, w->angle, w->torque_at, w->inertia_at, w->slope_at);
        if (status != TACET_OK) return status;
        samples_of(w, t, angle, 1, base, w->angle);
        for (size_t k = 0; k < n; k++) {
            double speed = speed_rad_per_s + w->angle[k];
            w->torque_at[k] += share - 0.5 * w->slope_at[k] * speed * speed;
        }
        samples_of(w, t, angle, 2, base, w->angle);
        for (size_t k = 0; k < n; k++)
            w->samples[k] = w->torque_at[k] - w->inertia_at[k] * w->angle[k];
        tacet_transform_lines(t, w->samples, &w->piston[i]);
    }
    return TACET_OK;
}

static tacet_status respond(tacet_workspace *w, const tacet_condition *c, size_t n_lines)
{
    const tacet_model *m = w->m;
    const tacet_body_response *mounts;
    tacet_status status =
        workspace_mounts(w, c->speed_rad_per_s, c->roll->revolutions, n_lines, &mounts);
    if (status != TACET_OK) return status;
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
        .body = m->body,
        .mounts = mounts,
        .shaken = true,
    };
    w->has_response = true;
    return TACET_OK;
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
        how.most_passes = RIPPLE_PASSES;
        status = tacet_train_ripple(m->train, W, m->n_throws, m->throw_node, workspace_drive, w,
                                    &how, w->train, &w->motion, w->torque, note);
    }
    if (status == TACET_OK) {
        piston_from_torque(w, W, revolutions, n_lines);
    } else if (status == TACET_NOT_CONVERGED) { // steady decides
        how.tolerance = STEADY_CLOSURE;
        how.most_passes = STEADY_REPEATS;
        status = tacet_train_steady(m->train, W, m->n_throws, m->throw_node, workspace_drive, w,
                                    &how, w->train, &w->motion, note);
        if (status == TACET_HARMONIC_ONLY && level == TACET_LEVEL_RIPPLE)
            status = TACET_NOT_CONVERGED; // as ripple said
        if (status == TACET_OK) status = motion_piston(w, W, revolutions, n_lines);
    }
    return status == TACET_OK ? respond(w, c, n_lines) : status;
}
