// Harmonic solution with torque at the throws' own angles.
//
// A throw turns by a = W t + d, and its equation is
//   (J0 + J(a)) a'' + J'(a)/2 a'^2 = T(a) + link and damping torques.
// With the mean <J> of the reciprocating inertia on the left, what drives the train is
//   F = T(W t + d) - J'/2 (W + d')^2 - (J - <J>) d'',
// which the harmonic solution turns into a new d. At low speed and firing density the crank's speed
// varies by a tenth and more, d reaches a tenth of a radian, and lines of torque move by up to a
// quarter. Each pass samples F on a time grid, transforms it and solves; the part of d that all
// throws share takes a Newton step (common.c), the rest contracts by itself, about tenfold a pass.
//
// d includes the static twist of the mean torques against the flywheel, whose own mean angle is W
// t.
//
// The first passes are made on a quarter and a half of the samples and on the lines that these
// resolve; only passes on all samples decide whether the result stands. A pass that changed things
// by c, the one before by c / rho, leaves an error of about c rho / (1 - rho); passes take turns in
// contracting well and badly, so a few times that is reckoned with.
#include "train/ripple.h"
#include <math.h>
#include <string.h>

#define OVERSAMPLING   4    // samples per period of the highest line, at least
#define SAMPLES_A_TURN 126  // at least: no line of torque below order 90 reaches order 36
#define FEWER          3    // samples per period of the highest line, on fewer samples
#define LOW_ORDER      6    // lines up to here take Newton's step
#define QUARTER_PASSES 2    // fewer leave low lines to be found on more samples
#define HALF_PASSES    4    // at most
#define HALF_ENOUGH    2e-4 // aliasing on half the samples is a tenth of that
#define TOLERANCE      1e-6 // where none is asked for
#define SLOW           0.5  // above, what is left cannot be told from the last changes
#define CAUTION        4    // times the error that steady contraction would leave
#define FIRST          0.5  // of a first pass's change that is left, at most, where passes contract
#define MOVE           100  // times what is enough: moving by so much is right to a hundredth of it
#define DIVERGED       1e3  // change over size of the torque lines

// ---- torque -----------------------------------------------------------------------------------

// Sizes of the largest change and of the largest line so far, squared.
typedef struct {
    double moved, largest;
} changes;

static void look_at(changes *c, double weight, double complex before, double complex after)
{
    double re = creal(after) - creal(before), im = cimag(after) - cimag(before);
    double moved = weight * (re * re + im * im);
    double size = weight * (creal(after) * creal(after) + cimag(after) * cimag(after));
    if (moved > c->moved) c->moved = moved;
    if (size > c->largest) c->largest = size;
}

static double relative(const changes *c)
{
    return c->largest > 0 ? sqrt(c->moved / c->largest) : 0;
}

// New torque of all throws; the largest change of a line over the largest line.
static tacet_status renew_torque(ripple *r, double *change)
{
    ripple_work *m = &r->w->ripple;
    changes all = {0, 0};
    for (size_t i = 0; i < r->n_throws; i++) {
        m->fresh.n_lines = r->n_lines;
        tacet_status status = ripple_torque(r, i, &m->fresh);
        if (status != TACET_OK) return status;
        tacet_spectrum *old = &m->torque[i];
        for (size_t h = 1; h <= r->n_lines; h++)
            look_at(&all, 1, old->line[h], m->fresh.line[h]);
        old->n_lines = r->n_lines;
        old->mean = m->fresh.mean;
        memcpy(old->line + 1, m->fresh.line + 1, r->n_lines * sizeof *old->line);
    }
    *change = relative(&all);
    return TACET_OK;
}

// ---- angle ------------------------------------------------------------------------------------

void twist_statically(tacet_train_work *w)
{
    const tacet_train *t = w->t;
    w->ripple.offset[t->flywheel] = 0;
    for (size_t k = t->n_links; k-- > 0;) {
        size_t node = t->leaf[k];
        const tacet_link_info *l = &t->link[t->up[node]];
        double ratio = t->ratio[l->to], stiffness = l->stiffness_Nm_per_rad * ratio * ratio;
        w->ripple.offset[node] = w->ripple.offset[t->parent[node]] + w->mean[node] / stiffness;
    }
}

// Takes the throws' new angles from the solution, with Newton's step on the low lines; the largest
// change of a speed line before that step over the largest speed line.
static bool renew_angle(ripple *r, double *change)
{
    ripple_work *m = &r->w->ripple;
    size_t low = (size_t)LOW_ORDER * r->how->revolutions;
    changes all = {0, 0};
    if (low > r->n_lines) low = r->n_lines;
    for (size_t h = 1; h <= low; h++) {
        m->rest[h] = 0;
        for (size_t i = 0; i < r->n_throws; i++)
            m->rest[h] += r->out->angle_rad[r->node[i]].line[h] - m->angle[i].line[h];
        m->rest[h] /= (double)r->n_throws;
    }
    if (!common_step(r->w, r->speed, r->how->revolutions, r->n_throws, low)) return false;
    for (size_t i = 0; i < r->n_throws; i++) {
        const double complex *found = r->out->angle_rad[r->node[i]].line;
        double complex *line = m->angle[i].line;
        for (size_t h = 1; h <= r->n_lines; h++)
            look_at(&all, (double)h * (double)h, line[h], found[h]);
        m->angle[i].n_lines = r->n_lines;
        memcpy(line + 1, found + 1, r->n_lines * sizeof *line);
        for (size_t h = 1; h <= low; h++)
            line[h] += m->step[h] - m->rest[h];
    }
    *change = relative(&all);
    return true;
}

// ---- passes -----------------------------------------------------------------------------------

// Response of the throws' mean angle to a torque shared by them equally.
static tacet_status find_transfer(ripple *r, size_t n)
{
    ripple_work *m = &r->w->ripple;
    double share = 1 / (double)r->n_throws;
    for (size_t i = 0; i < r->n_throws; i++) {
        m->torque[i].n_lines = n;
        m->torque[i].mean = 0;
        for (size_t h = 1; h <= n; h++)
            m->torque[i].line[h] = share;
    }
    tacet_status status =
        harmonic_solve(r->w, r->speed, r->n_throws, r->node, m->torque, true, r->out);
    for (size_t h = 1; h <= n; h++) {
        m->transfer[h] = 0;
        for (size_t i = 0; i < r->n_throws; i++)
            m->transfer[h] += share * r->out->angle_rad[r->node[i]].line[h];
    }
    return status;
}

// From constant speed: no angle, no torque, no twist.
static tacet_status start(ripple *r)
{
    ripple_work *m = &r->w->ripple;
    unsigned revolutions = r->how->revolutions;
    size_t n = r->how->n_lines, low = (size_t)LOW_ORDER * revolutions;
    spectra_shape(m->torque, r->n_throws, revolutions, n);
    spectra_shape(m->angle, r->n_throws, revolutions, n);
    harmonic_factors(r->w, r->speed, revolutions, n); // all lines at once
    tacet_status status = find_transfer(r, low < n ? low : n);
    for (size_t i = 0; i < r->n_throws; i++) {
        memset(m->torque[i].line, 0, (n + 1) * sizeof *m->torque[i].line);
        memset(m->angle[i].line, 0, (n + 1) * sizeof *m->angle[i].line);
    }
    memset(m->offset, 0, r->w->t->n * sizeof *m->offset);
    return status;
}

// One pass on the grid; `change` is what it changed, relative.
static tacet_status pass(ripple *r, double *change)
{
    double torque = 0, angle = 0;
    tacet_status status = renew_torque(r, &torque);
    if (status != TACET_OK) return status;
    status =
        harmonic_solve(r->w, r->speed, r->n_throws, r->node, r->w->ripple.torque, true, r->out);
    if (status != TACET_OK) return status;
    twist_statically(r->w);
    if (!renew_angle(r, &angle)) return TACET_NOT_CONVERGED;
    *change = r->note->difference = fmax(torque, angle);
    r->note->repeats++;
    return *change < DIVERGED ? TACET_OK : TACET_NOT_CONVERGED;
}

// Passes on one grid until `enough` or `most` of them; the last one's remaining error. `error`
// comes in as what the coarser grid left: where that was little, passes contract, and the first one
// on this grid need not be followed by another to see it. Torque is sampled anew as long as moving
// its samples could matter.
static tacet_status passes(ripple *r, size_t samples, unsigned most, double enough, double *error)
{
    tacet_status status = TACET_OK;
    size_t resolved = samples / FEWER;
    double change = INFINITY, first = *error <= HALF_ENOUGH ? FIRST : 1;
    *error = INFINITY;
    r->grid = work_transform(r->w, samples);
    r->n_lines = resolved < r->how->n_lines ? resolved : r->how->n_lines;
    for (unsigned i = 0; i < most && status == TACET_OK && *error > enough; i++) {
        double before = change;
        r->again = i > 0 && change <= MOVE * enough;
        status = pass(r, &change);
        double rho = change / before;
        *error = i == 0 ? first * change : change;
        if (i > 0 && rho < SLOW) *error = fmin(change, CAUTION * change * rho / (1 - rho));
    }
    return status;
}

static tacet_status converge(ripple *r)
{
    size_t turns = r->how->revolutions;
    size_t least = OVERSAMPLING * r->how->n_lines;
    if (least < SAMPLES_A_TURN * turns) least = SAMPLES_A_TURN * turns;
    size_t all = tacet_transform_samples(work_transform(r->w, least));
    double error = INFINITY, tolerance = r->how->tolerance > 0 ? r->how->tolerance : TOLERANCE;
    tacet_status status = start(r);
    if (status == TACET_OK && all / 4 >= FEWER * LOW_ORDER * turns)
        status = passes(r, all / 4, QUARTER_PASSES, 0, &error);
    if (status == TACET_OK && all / 2 >= FEWER * 2 * LOW_ORDER * turns)
        status = passes(r, all / 2, HALF_PASSES, fmax(tolerance, HALF_ENOUGH), &error);
    if (status == TACET_OK) status = passes(r, all, r->how->most_passes, tolerance, &error);
    return status == TACET_OK && !(error <= tolerance) ? TACET_NOT_CONVERGED : status;
}

tacet_status ripple_solve(tacet_train_work *w, double speed, size_t n_throws,
                          const size_t *throw_node, tacet_drive *drive, const void *who,
                          const tacet_periodic *how, tacet_train_motion *out,
                          tacet_solver_note *note)
{
    *note = (tacet_solver_note){.method = "ripple"};
    ripple r = {.w = w,
                .speed = speed,
                .n_throws = n_throws,
                .node = throw_node,
                .drive = drive,
                .who = who,
                .how = how,
                .out = out,
                .note = note};
    tacet_status status = converge(&r);
    if (status == TACET_OK) // now all nodes and links
        status = harmonic_solve(w, speed, n_throws, throw_node, w->ripple.torque, false, out);
    return status;
}

tacet_status tacet_train_ripple(const tacet_train *t, double speed, size_t n_throws,
                                const size_t *throw_node, tacet_drive *drive, const void *who,
                                const tacet_periodic *how, tacet_train_work *w,
                                tacet_train_motion *out, tacet_spectrum *torque,
                                tacet_solver_note *note)
{
    tacet_status status = periodic_check(t, speed, n_throws, throw_node, how, w);
    if (status != TACET_OK) return status;
    status = ripple_solve(w, speed, n_throws, throw_node, drive, who, how, out, note);
    for (size_t i = 0; status == TACET_OK && torque && i < n_throws; i++) {
        spectra_shape(&torque[i], 1, how->revolutions, how->n_lines);
        torque[i].mean = w->ripple.torque[i].mean;
        memcpy(torque[i].line, w->ripple.torque[i].line, (how->n_lines + 1) * sizeof *torque->line);
    }
    return status;
}
