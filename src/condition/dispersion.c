// Transfers from each throw to each band's quantity, and what unequal cylinders and cycles add.
#include "condition/internal.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>

#define CYCLIC_SPACING  0.25 // orders at the lowest screened speed between grid frequencies
#define CYCLIC_LEAST    24   // intervals
#define CYCLIC_BEND     1e-3 // of |H|^2 between neighbouring probes that is left to Simpson's rule
#define CYCLIC_HALVINGS 20   // of a grid interval at most: peaks down to a millionth of it
#define CYCLIC_PIECES   4000 // that a peak or zero may take; more, and |H|^2 is rounding, no curve
#define ROUNDED_PIECES  32   // then
#define ENDLESS_SHARE   1e-3 // of the band's integral in a piece too small to halve: a pole
#define BESIDE_MODE     1e-9 // relative

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
    const tacet_body_response *mounts;
    status = workspace_mounts(w, speed, revolutions, n_lines, &mounts);
    if (status != TACET_OK) return status;
    *r = (tacet_response){
        .train = m->train,
        .body = m->body,
        .mounts = mounts,
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

// ---- cycle-to-cycle variation -------------------------------------------------------------------

// |H|^2 of a band's quantity to unit torque on each throw at one frequency.
typedef struct {
    double f_hz, square[TACET_ENGINE_CYLINDERS_MOST];
} probe;

typedef struct {
    tacet_model *m;
    tacet_workspace *w;
    const tacet_band *band;
    const cyclic_grid *g;
    double *integral; // [n_throws * n] of |H|^2 under the hat of each grid frequency
    size_t k;         // interval from f_hz[k] to f_hz[k + 1]
    size_t pieces_left, pieces_most;
    // The largest of the pieces that were still rough when they could be halved no more. A corner
    // or a zero of |H|^2 leaves nearly nothing there, a pole leaves more than all else.
    double rough, rough_hz;
    tacet_status status;
} integration;

static void probe_once(integration *q, probe *p, double f_hz)
{
    tacet_response r;
    double speed = 2 * M_PI * f_hz; // a repeat of one revolution, of which line 1 is at f
    q->status = TACET_OK;
    for (size_t t = 0; t < q->m->n_throws && q->status == TACET_OK; t++) {
        q->status = unit_response(q->w, t, speed, 1, 1, &r);
        q->w->quantity.revolutions = 1;
        q->w->quantity.n_lines = 1;
        if (q->status == TACET_OK)
            q->status = q->band->of.what->spectrum(&r, q->band->of.target, &q->w->quantity);
        double complex H = q->w->quantity.line[1] * (q->band->of.what->over_mean_speed ? speed : 1);
        p->square[t] = creal(H) * creal(H) + cimag(H) * cimag(H);
    }
}

static void probe_at(integration *q, double f_hz, probe *p)
{
    if (q->status != TACET_OK) return;
    *p = (probe){.f_hz = f_hz};
    probe_once(q, p, f_hz);
    // exactly on an undamped mode
    if (q->status == TACET_NOT_FINITE) probe_once(q, p, f_hz * (1 + BESIDE_MODE));
}

// Adds Simpson's rule over a..middle..b, times the two hats that share the interval; returns what
// all throws add.
static double add_piece(integration *q, const probe *a, const probe *middle, const probe *b)
{
    const double *f = &q->g->f_hz[q->k];
    const probe *at[3] = {a, middle, b};
    double width = f[1] - f[0], sum = 0;
    for (size_t t = 0; t < q->m->n_throws; t++)
        for (int i = 0; i < 3; i++) {
            double part = (b->f_hz - a->f_hz) / 6 * (i == 1 ? 4 : 1) * at[i]->square[t];
            double rise = (at[i]->f_hz - f[0]) / width;
            sum += part;
            q->integral[t * q->g->n + q->k] += part * (1 - rise);
            q->integral[t * q->g->n + q->k + 1] += part * rise;
        }
    return sum;
}

// Is |H|^2 between a and b a parabola, near enough?
static bool smooth(const integration *q, const probe *a, const probe *middle, const probe *b)
{
    for (size_t t = 0; t < q->m->n_throws; t++) {
        double line = (a->square[t] + b->square[t]) / 2, bent = 2 * middle->square[t] + line;
        if (!(fabs(3 * line - bent) <= CYCLIC_BEND * bent)) return false;
    }
    return true;
}

static void integrate(integration *q, const probe *a, const probe *b, int halvings)
{
    probe middle;
    probe_at(q, (a->f_hz + b->f_hz) / 2, &middle);
    if (q->status != TACET_OK) return;
    bool is_smooth = smooth(q, a, &middle, b);
    if (halvings == 0 || q->pieces_left == 0 || is_smooth) {
        double part = add_piece(q, a, &middle, b);
        if (halvings > 0 || is_smooth || part <= q->rough) return;
        q->rough = part;
        q->rough_hz = middle.f_hz;
        return;
    }
    q->pieces_left--;
    integrate(q, a, &middle, halvings - 1);
    integrate(q, &middle, b, halvings - 1);
}

// Where the lines of the quantity cancel, |H|^2 is their rounding and rough however near one looks:
// one interval shows it, and the others of the band need not be looked at so closely.
static void integrate_between(integration *q, const probe *a, const probe *b)
{
    q->pieces_left = q->pieces_most;
    if (q->status == TACET_OK) integrate(q, a, b, CYCLIC_HALVINGS);
    if (q->pieces_left == 0) q->pieces_most = ROUNDED_PIECES;
}

// One interval of the grid, piece by piece between the bends in it, so that no peak is stepped
// over.
static void integrate_interval(integration *q, size_t k)
{
    const double *f = &q->g->f_hz[k];
    probe from = {0}, to = {0};
    q->k = k;
    probe_at(q, f[0], &from);
    if (q->status != TACET_OK) return;
    for (size_t i = 0; i < q->m->n_bends; i++) {
        double hz = q->m->bend_hz[i];
        if (!(hz > from.f_hz && hz < f[1])) continue;
        probe_at(q, hz, &to);
        if (q->status != TACET_OK) return;
        integrate_between(q, &from, &to);
        from = to;
    }
    probe_at(q, f[1], &to);
    integrate_between(q, &from, &to);
}

static size_t intervals(const tacet_model *m, const tacet_band *b)
{
    double lowest = m->study->screen.speeds_rad_per_s[0];
    for (size_t i = 1; i < m->study->screen.n_speeds; i++)
        lowest = fmin(lowest, m->study->screen.speeds_rad_per_s[i]);
    double wanted =
        (b->counted_high_hz - b->counted_low_hz) / tacet_order_hz(CYCLIC_SPACING, lowest);
    return (size_t)fmin(fmax(ceil(wanted), CYCLIC_LEAST), CYCLIC_MOST);
}

// One band's transfers on equal intervals of its counted width. The square of the pulse is smooth
// and taken as straight between two frequencies; that of H may have peaks of any sharpness, so H
// here is what keeps its integral under the hat of each frequency.
static tacet_status prepare_band(tacet_model *m, tacet_workspace *w, size_t b, tacet_error *e)
{
    const tacet_band *band = &m->bands[b];
    cyclic_grid *g = &m->cyclic[b];
    double low = band->counted_low_hz, width = band->counted_high_hz - low;
    size_t n = intervals(m, band);
    g->n = n + 1;
    g->f_hz = tacet_arena_alloc(m->arena, g->n * sizeof *g->f_hz);
    g->H = tacet_arena_alloc(m->arena, g->n * m->n_throws * sizeof *g->H);
    integration q = {.m = m, .w = w, .band = band, .g = g, .pieces_most = CYCLIC_PIECES};
    q.integral = tacet_arena_alloc(m->arena, g->n * m->n_throws * sizeof *q.integral);
    if (!g->f_hz || !g->H || !q.integral)
        return tacet_fail(e, TACET_NO_MEMORY, "no memory for the model");
    for (size_t k = 0; k < g->n; k++)
        g->f_hz[k] = low + width * (double)k / (double)n;
    for (size_t k = 0; k < n && q.status == TACET_OK; k++)
        integrate_interval(&q, k);
    if (q.status != TACET_OK)
        return tacet_fail(e, q.status, "response in band '%s': %s", band->name,
                          tacet_status_text(q.status));
    double whole = 0;
    for (size_t i = 0; i < m->n_throws * g->n; i++)
        whole += q.integral[i];
    if (q.rough > ENDLESS_SHARE * whole)
        return tacet_fail(e, TACET_BAD_INPUT,
                          "band '%s' holds an undamped mode at %.4g Hz, at which cycle-to-cycle "
                          "variation has no bound; give its links or mounts damping, or set "
                          "engine.dispersion.cyclic_percent: 0",
                          band->name, q.rough_hz);
    for (size_t t = 0; t < m->n_throws; t++)
        for (size_t k = 0; k < g->n; k++) {
            double hat = width / (double)n * (k == 0 || k == n ? 0.5 : 1);
            g->H[t * g->n + k] = sqrt(q.integral[t * g->n + k] / hat);
        }
    return TACET_OK;
}

static int rising(const void *a, const void *b)
{
    double x = *(const double *)a, y = *(const double *)b;
    return (x > y) - (x < y);
}

static tacet_status find_bends(tacet_model *m)
{
    size_t nodes = tacet_train_nodes(m->train), of_body = 0;
    double *body_hz = NULL;
    tacet_status status = TACET_OK;
    if (m->body) status = tacet_body_bends(m->body, m->arena, &body_hz, &of_body);
    if (status != TACET_OK) return status;
    m->n_bends = nodes + of_body;
    m->bend_hz = tacet_arena_alloc(m->arena, m->n_bends * sizeof *m->bend_hz);
    if (!m->bend_hz) return TACET_NO_MEMORY;
    memcpy(m->bend_hz, m->mode_hz, nodes * sizeof *m->bend_hz);
    if (of_body) memcpy(m->bend_hz + nodes, body_hz, of_body * sizeof *m->bend_hz);
    qsort(m->bend_hz, m->n_bends, sizeof *m->bend_hz, rising);
    return TACET_OK;
}

tacet_status dispersion_prepare(tacet_model *m, tacet_workspace *w, tacet_error *e)
{
    bool wanted = m->study->engine.cyclic_dispersion > 0;
    tacet_status status = wanted ? find_bends(m) : TACET_OK;
    if (status != TACET_OK)
        return tacet_fail(e, status, "the modes of the body: %s", tacet_status_text(status));
    for (size_t b = 0; b < m->n_bands && status == TACET_OK && wanted; b++)
        status = prepare_band(m, w, b, e);
    return status;
}

// Fires per second of each throw; a fire at tenths of the charge varies by as many tenths of the
// torque, and counts by the square.
static void fire_rates(const tacet_workspace *w, double speed, double *rate)
{
    const tacet_roll *roll = w->roll;
    double repeats_per_s = speed / (2 * M_PI * roll->revolutions);
    for (unsigned slot = 0; slot < roll->cylinders; slot++)
        for (unsigned c = 0; c < roll->cycles; c++) {
            double weight = 0.1 * tacet_roll_cycle(roll, slot, c).tenths;
            rate[w->m->slot_throw[slot]] += weight * weight * repeats_per_s;
        }
}

double dispersion_cyclic(tacet_workspace *w, size_t b, double speed)
{
    const tacet_model *m = w->m;
    const cyclic_grid *g = &m->cyclic[b];
    double sigma = m->study->engine.cyclic_dispersion;
    if (!(sigma > 0)) return 0;
    double rate[TACET_ENGINE_CYLINDERS_MOST] = {0};
    fire_rates(w, speed, rate);
    for (size_t k = 0; k < g->n; k++)
        w->order[k] = g->f_hz[k] / tacet_order_hz(1, speed);
    tacet_engine_fired_pulse(m->engine, w->engine, g->n, w->order, w->pulse);
    for (size_t k = 0; k < g->n; k++)
        w->pulse[k] /= speed; // N m rad -> N m s
    double over = m->bands[b].of.what->over_mean_speed ? speed : 1;
    return tacet_cyclic_mean_square(g->n, g->f_hz, m->n_throws, g->H, w->pulse, rate, sigma) /
           (over * over);
}

// ---- unequal cylinders --------------------------------------------------------------------------

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
