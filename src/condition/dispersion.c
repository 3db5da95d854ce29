// Transfers from each throw to each band's quantity, and what unequal cylinders and cycles add.
#include "condition/internal.h"
#include <math.h>

// Quantity of a band for unit torque on one throw, constant speed, lines of `revolutions` at
// `speed`. The piston torque that goes with it: the unit itself on that throw, less <J> a'' on
// every throw.
static tacet_status unit_response(tacet_workspace *w, size_t throw_index, double speed,
                                  unsigned revolutions, size_t n_lines, tacet_response *r)
{
    const tacet_model *m = w->m;
    w->unit.revolutions = revolutions;
    w->unit.n_lines = n_lines;
    w->unit.mean = 0;
    for (size_t h = 1; h <= n_lines; h++)
        w->unit.line[h] = 1;
    for (size_t i = 0; i < w->unit_motion.n_nodes; i++) {
        w->unit_motion.angle_rad[i].revolutions = revolutions;
        w->unit_motion.angle_rad[i].n_lines = n_lines;
    }
    for (size_t i = 0; i < w->unit_motion.n_links; i++) {
        w->unit_motion.link_torque_Nm[i].revolutions = revolutions;
        w->unit_motion.link_torque_Nm[i].n_lines = n_lines;
    }
    tacet_status status = tacet_train_harmonic(m->train, speed, 1, &m->throw_node[throw_index],
                                               &w->unit, w->train_unit, &w->unit_motion);
    if (status != TACET_OK) return status;
    double base = speed / revolutions;
    for (size_t i = 0; i < m->n_throws; i++) {
        const tacet_spectrum *angle = &w->unit_motion.angle_rad[m->throw_node[i]];
        tacet_spectrum *p = &w->unit_piston[i];
        p->revolutions = revolutions;
        p->n_lines = n_lines;
        p->mean = 0;
        for (size_t h = 1; h <= n_lines; h++) {
            double omega = base * (double)h;
            p->line[h] = (i == throw_index) + m->throw_inertia[i] * omega * omega * angle->line[h];
        }
    }
    *r = (tacet_response){
        .train = m->train,
        .motion = &w->unit_motion,
        .piston_torque_Nm = w->unit_piston,
        .throw_node = m->throw_node,
        .n_throws = m->n_throws,
        .speed_rad_per_s = speed,
        .revolutions = revolutions,
        .n_lines = n_lines,
    };
    return TACET_OK;
}

static bool wants_dispersion(const tacet_model *m)
{
    return m->study->engine.cylinder_dispersion > 0 || m->study->engine.cyclic_dispersion > 0;
}

// Lines up to the highest counted band edge.
static size_t band_lines(const tacet_model *m, double speed, unsigned revolutions)
{
    double lines = ceil(m->highest_band_hz / tacet_order_hz(1.0 / revolutions, speed));
    size_t all = tacet_model_lines(m, revolutions);
    return lines < 1 ? 1 : lines < (double)all ? (size_t)lines : all;
}

tacet_status dispersion_transfers(tacet_workspace *w, double speed, unsigned revolutions)
{
    const tacet_model *m = w->m;
    transfer_memo *memo = &w->transfers;
    if (memo->valid && memo->speed == speed && memo->revolutions == revolutions) return TACET_OK;
    memo->valid = false;
    memo->n_lines = band_lines(m, speed, revolutions);
    for (size_t t = 0; t < m->n_throws; t++) {
        tacet_response r;
        tacet_status status = unit_response(w, t, speed, revolutions, memo->n_lines, &r);
        for (size_t b = 0; b < m->n_bands && status == TACET_OK; b++) {
            tacet_spectrum *out = &memo->transfer[b * m->n_throws + t];
            out->revolutions = revolutions;
            out->n_lines = memo->n_lines;
            status = m->bands[b].of.what->spectrum(&r, m->bands[b].of.target, out);
        }
        if (status != TACET_OK) return status;
    }
    memo->speed = speed;
    memo->revolutions = revolutions;
    memo->valid = true;
    return TACET_OK;
}

// One band's transfers on CYCLIC_INTERVALS equal intervals of its counted width. The train is
// solved on the lines of a fictitious repeat of one revolution a spacing long; lines below the band
// are unused.
static tacet_status prepare_band(tacet_model *m, tacet_workspace *w, size_t b)
{
    const tacet_band *band = &m->bands[b];
    cyclic_grid *g = &m->cyclic[b];
    double low = band->counted_low_hz, high = band->counted_high_hz;
    g->n = CYCLIC_INTERVALS + 1;
    g->f_hz = tacet_arena_alloc(m->arena, g->n * sizeof *g->f_hz);
    g->H = tacet_arena_alloc(m->arena, g->n * m->n_throws * sizeof *g->H);
    if (!g->f_hz || !g->H) return TACET_NO_MEMORY;
    for (size_t k = 0; k < g->n; k++)
        g->f_hz[k] = low + (high - low) * (double)k / CYCLIC_INTERVALS;
    for (size_t t = 0; t < m->n_throws; t++)
        for (size_t k = 0; k < g->n; k++) {
            tacet_response r;
            tacet_status status = unit_response(w, t, 2 * M_PI * g->f_hz[k], 1, 1, &r);
            w->quantity.revolutions = 1;
            w->quantity.n_lines = 1;
            if (status == TACET_OK)
                status = band->of.what->spectrum(&r, band->of.target, &w->quantity);
            if (status != TACET_OK) return status;
            g->H[t * g->n + k] = w->quantity.line[1];
        }
    return TACET_OK;
}

tacet_status dispersion_prepare(tacet_model *m, tacet_workspace *w)
{
    tacet_status status = TACET_OK;
    for (size_t b = 0; b < m->n_bands && status == TACET_OK && wants_dispersion(m); b++)
        status = prepare_band(m, w, b);
    return status;
}

double dispersion_cyclic(tacet_workspace *w, size_t b, double speed)
{
    const tacet_model *m = w->m;
    const cyclic_grid *g = &m->cyclic[b];
    double sigma = m->study->engine.cyclic_dispersion;
    if (!(sigma > 0)) return 0;
    double rate[TACET_PATTERN_LONGEST] = {0};
    double repeats_per_s = speed / (2 * M_PI * w->roll->revolutions);
    for (unsigned slot = 0; slot < w->roll->cylinders; slot++)
        rate[m->slot_throw[slot]] += tacet_roll_fires_of(w->roll, slot) * repeats_per_s;
    for (size_t k = 0; k < g->n; k++)
        w->order[k] = g->f_hz[k] / tacet_order_hz(1, speed);
    tacet_engine_fired_pulse(m->engine, w->engine, g->n, w->order, w->pulse);
    for (size_t k = 0; k < g->n; k++)
        w->pulse[k] /= speed; // N m rad -> N m s
    return tacet_cyclic_mean_square(g->n, g->f_hz, m->n_throws, g->H, w->pulse, rate, sigma);
}

// Fired torque of each slot alone: the pulse of one fired window at its own firing angles, weighted
// by its share of the full charge. line[h] = P(h/R) / (pi R) sum_c weight_c exp(-i h/R (firing
// angle of cycle c)).
void dispersion_fired(tacet_workspace *w, size_t n_lines)
{
    const tacet_model *m = w->m;
    const tacet_roll *roll = w->roll;
    double per_cycle = M_PI * roll->strokes;
    for (size_t h = 1; h <= n_lines; h++)
        w->order[h - 1] = (double)h / roll->revolutions;
    tacet_engine_fired_pulse(m->engine, w->engine, n_lines, w->order, w->pulse);
    for (unsigned slot = 0; slot < roll->cylinders; slot++) {
        tacet_spectrum *f = &w->fired[slot];
        double first = tacet_engine_firing_angle(m->engine, slot);
        tacet_spectrum_zero(f);
        f->revolutions = roll->revolutions;
        f->n_lines = n_lines;
        for (size_t h = 1; h <= n_lines; h++)
            f->line[h] = 0;
        for (unsigned c = 0; c < roll->cycles; c++) {
            double weight = 0.1 * tacet_roll_cycle(roll, slot, c).tenths;
            if (weight == 0) continue;
            double complex step = cexp(-I * (first + c * per_cycle) / roll->revolutions), at = 1;
            for (size_t h = 1; h <= n_lines; h++) {
                at *= step;
                f->line[h] += weight * at;
            }
        }
        for (size_t h = 1; h <= n_lines; h++)
            f->line[h] *= w->pulse[h - 1] / (M_PI * roll->revolutions);
    }
}
