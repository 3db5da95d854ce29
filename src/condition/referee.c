// Two solvers on one condition: how well they agree.
#include "condition/internal.h"
#include <math.h>
#include <string.h>

// The band-limited torque of the constant-speed harmonic, sampled finely enough that interpolation
// with eight points reproduces its highest line to 1e-6 of that line.
#define FINE_OVERSAMPLE 16
#define POINTS          8
// The frozen equations are linear: shooting meets its start to rounding in two repeats.
#define FROZEN_CLOSURE 1e-9
// .. but for a link that is stiff far beyond all lines: the march's steps then follow the bound of
// its stability, and their rounding leaves this much.
#define STIFF_CLOSURE 1e-6
// Lines this far below the largest are left out of the comparison in dB.
#define COMPARE_DB 40.0

typedef struct {
    const tacet_workspace *w;
    size_t n;
    double per_sample; // rad
    double *sample;    // [n_throws * n]
} frozen_torque;

// Lagrange interpolation on POINTS equally spaced periodic samples.
static double interpolate(const double *y, size_t n, double at)
{
    double whole = floor(at), u = at - whole, sum = 0;
    long long first = (long long)whole - (POINTS / 2 - 1);
    double weight[POINTS];
    const int middle = POINTS / 2 - 1;
    for (int i = 0; i < POINTS; i++) {
        double product = 1;
        for (int j = 0; j < POINTS; j++)
            if (j != i) product *= (u + middle - j) / (i - j);
        weight[i] = product;
    }
    for (int i = 0; i < POINTS; i++) {
        long long k = (first + i) % (long long)n;
        sum += weight[i] * y[k < 0 ? k + (long long)n : k];
    }
    return sum;
}

static tacet_status frozen_drive(const void *who, size_t throw_index, size_t n,
                                 const double *angle_rad, double *torque_Nm, double *inertia_kgm2,
                                 double *slope_kgm2_per_rad)
{
    const frozen_torque *f = who;
    const double *sample = &f->sample[throw_index * f->n];
    for (size_t k = 0; k < n; k++) {
        torque_Nm[k] = interpolate(sample, f->n, angle_rad[k] / f->per_sample);
        inertia_kgm2[k] = f->w->m->throw_inertia[throw_index];
        slope_kgm2_per_rad[k] = 0;
    }
    return TACET_OK;
}

static tacet_status frozen_create(tacet_workspace *w, unsigned revolutions, size_t n_lines,
                                  tacet_arena *a, frozen_torque *out)
{
    const tacet_transform *t = model_transform(w->m, n_lines, FINE_OVERSAMPLE);
    if (!t) t = model_transform(w->m, w->m->most_lines, PEAK_OVERSAMPLE);
    size_t n = tacet_transform_samples(t);
    *out = (frozen_torque){.w = w, .n = n, .per_sample = 2 * M_PI * revolutions / (double)n};
    out->sample = tacet_arena_alloc(a, w->m->n_throws * n * sizeof(double));
    double *buffer = tacet_transform_buffer(t);
    if (!out->sample || !buffer) {
        tacet_transform_release(buffer);
        return TACET_NO_MEMORY;
    }
    for (size_t i = 0; i < w->m->n_throws; i++) {
        tacet_transform_samples_of(t, &w->torque[i], buffer);
        memcpy(&out->sample[i * n], buffer, n * sizeof(double));
    }
    tacet_transform_release(buffer);
    return TACET_OK;
}

static void copy_lines(tacet_spectrum *to, const tacet_spectrum *from, size_t n)
{
    for (size_t i = 0; i < n; i++) {
        to[i].revolutions = from[i].revolutions;
        to[i].n_lines = from[i].n_lines;
        to[i].mean = from[i].mean;
        memcpy(to[i].line, from[i].line, (from[i].n_lines + 1) * sizeof *to[i].line);
    }
}

static void copy_motion(tacet_train_motion *to, const tacet_train_motion *from)
{
    copy_lines(to->angle_rad, from->angle_rad, from->n_nodes);
    copy_lines(to->link_torque_Nm, from->link_torque_Nm, from->n_links);
}

// Largest difference of lines over n spectra, each line weighted with h^power (1: angle to speed),
// relative to the largest weighted line of all.
static double largest_difference(const tacet_spectrum *a, const tacet_spectrum *b, size_t n,
                                 int power)
{
    double difference = 0, largest = 0;
    for (size_t i = 0; i < n; i++)
        for (size_t h = 1; h <= a[i].n_lines; h++) {
            double weight = power ? (double)h : 1;
            difference = fmax(difference, weight * cabs(a[i].line[h] - b[i].line[h]));
            largest = fmax(largest, weight * cabs(a[i].line[h]));
        }
    return largest > 0 ? difference / largest : difference;
}

// Largest difference in dB of lines within COMPARE_DB of their own spectrum's largest.
static double largest_difference_db(const tacet_spectrum *a, const tacet_spectrum *b, size_t n)
{
    double worst = 0;
    for (size_t i = 0; i < n; i++) {
        double largest = 0;
        for (size_t h = 1; h <= b[i].n_lines; h++)
            largest = fmax(largest, cabs(b[i].line[h]));
        for (size_t h = 1; h <= b[i].n_lines; h++) {
            double x = cabs(a[i].line[h]), y = cabs(b[i].line[h]);
            if (y < largest * pow(10, -COMPARE_DB / 20) || y <= 0) continue;
            worst = fmax(worst, x > 0 ? fabs(20 * log10(x / y)) : INFINITY);
        }
    }
    return worst;
}

static tacet_status compare_same_model(tacet_workspace *w, const tacet_condition *c, tacet_arena *a,
                                       tacet_agreement *out)
{
    const tacet_model *m = w->m;
    unsigned revolutions = c->roll->revolutions;
    size_t n_lines = tacet_model_lines(m, revolutions);
    frozen_torque frozen;
    tacet_solver_note note = {.closure = NAN};
    tacet_periodic how = tacet_periodic_default();
    how.revolutions = revolutions;
    how.n_lines = n_lines;
    how.frozen = true;
    how.tolerance = FROZEN_CLOSURE;
    tacet_status status = motion_constant(w, c->speed_rad_per_s, revolutions, n_lines);
    if (status == TACET_OK) {
        copy_motion(&w->unit_motion, &w->motion);
        status = frozen_create(w, revolutions, n_lines, a, &frozen);
    }
    if (status == TACET_OK)
        status = tacet_train_steady(m->train, c->speed_rad_per_s, m->n_throws, m->throw_node,
                                    frozen_drive, &frozen, &how, w->train, &w->motion, &note);
    if (status == TACET_NOT_CONVERGED && note.closure <= STIFF_CLOSURE) {
        how.tolerance = STIFF_CLOSURE;
        status = tacet_train_steady(m->train, c->speed_rad_per_s, m->n_throws, m->throw_node,
                                    frozen_drive, &frozen, &how, w->train, &w->motion, &note);
    }
    if (status == TACET_OK)
        out->same_model =
            fmax(largest_difference(w->motion.link_torque_Nm, w->unit_motion.link_torque_Nm,
                                    w->motion.n_links, 0),
                 largest_difference(w->motion.angle_rad, w->unit_motion.angle_rad,
                                    w->motion.n_nodes, 1));
    return status;
}

// Spectra of every band's quantity for the motion in the workspace.
static tacet_status take_quantities(tacet_workspace *w, tacet_spectrum *out)
{
    for (size_t b = 0; b < w->m->n_bands; b++) {
        const tacet_band *band = &w->m->bands[b];
        out[b].n_lines = w->response.n_lines;
        tacet_status status = band->of.what->spectrum(&w->response, band->of.target, &out[b]);
        if (status != TACET_OK) return status;
    }
    return TACET_OK;
}

static tacet_status create_quantities(const tacet_workspace *w, tacet_arena *a,
                                      tacet_spectrum **out)
{
    size_t n = w->m->n_bands;
    tacet_status status = TACET_OK;
    *out = tacet_arena_alloc(a, (n + 1) * sizeof **out);
    if (!*out) return TACET_NO_MEMORY;
    for (size_t b = 0; b < n && status == TACET_OK; b++)
        status = tacet_spectrum_init(&(*out)[b], w->response.n_lines, a);
    return status;
}

static double levels_difference_db(const tacet_model *m, const tacet_band_level *a,
                                   const tacet_band_level *b)
{
    double worst = 0;
    for (size_t i = 0; i < m->n_bands; i++)
        if (a[i].has_line && b[i].has_line)
            worst = fmax(worst, fabs(20 * log10(a[i].dispersed / b[i].dispersed)));
    return worst;
}

// What ripple and march give of one condition.
typedef struct {
    tacet_train_motion motion; // ripple's
    tacet_spectrum *ripple, *march;
    tacet_band_level ripple_level[TACET_BANDS_MOST], march_level[TACET_BANDS_MOST];
} both;

static tacet_status solve_ripple(tacet_workspace *w, const tacet_condition *c, tacet_arena *a,
                                 both *x, bool *converged)
{
    tacet_solver_note note;
    tacet_status status = motion_solve(w, c, TACET_LEVEL_RIPPLE, &note);
    if (status == TACET_OK) status = levels_solve(w, c, x->ripple_level);
    if (status == TACET_OK)
        status = tacet_train_motion_init(&x->motion, w->m->train, w->response.n_lines, a);
    if (status == TACET_OK) status = create_quantities(w, a, &x->ripple);
    if (status == TACET_OK) status = create_quantities(w, a, &x->march);
    if (status == TACET_OK) status = take_quantities(w, x->ripple);
    if (status != TACET_OK) return status;
    copy_motion(&x->motion, &w->motion);
    *converged = strcmp(note.method, "ripple") == 0;
    return TACET_OK;
}

static tacet_status compare_full_model(tacet_workspace *w, const tacet_condition *c, tacet_arena *a,
                                       tacet_agreement *out)
{
    tacet_solver_note note = {.closure = NAN};
    both x;
    bool converged = false;
    tacet_status status = solve_ripple(w, c, a, &x, &converged);
    if (status != TACET_OK) return status;
    status = motion_solve(w, c, TACET_LEVEL_STEADY, &note);
    out->repeats = note.repeats;
    out->evaluations = note.evaluations;
    out->closure = note.closure;
    if (status == TACET_OK) status = levels_solve(w, c, x.march_level);
    if (status == TACET_OK) status = take_quantities(w, x.march);
    if (status != TACET_OK || !converged) return status;
    double lines = fmax(
        largest_difference_db(x.motion.link_torque_Nm, w->motion.link_torque_Nm, x.motion.n_links),
        largest_difference_db(x.ripple, x.march, w->m->n_bands));
    out->full_model_db = fmax(levels_difference_db(w->m, x.ripple_level, x.march_level), lines);
    return TACET_OK;
}

tacet_status tacet_solve_referee(const tacet_model *m, const tacet_condition *c, tacet_workspace *w,
                                 tacet_agreement *out)
{
    tacet_row row; // brings duty and load of the condition into the workspace
    *out = (tacet_agreement){.same_model = NAN, .full_model_db = NAN, .closure = NAN};
    tacet_status status = tacet_solve(m, c, TACET_LEVEL_RIPPLE, w, &row);
    if (status != TACET_OK) return status;
    if (row.outcome != TACET_SOLVED) return row.outcome == TACET_FAILED ? row.why : TACET_OK;
    tacet_arena *a = tacet_arena_create();
    if (!a) return TACET_NO_MEMORY;
    tacet_status same = compare_same_model(w, c, a, out), full = TACET_NO_MEMORY;
    if (same != TACET_NO_MEMORY) full = compare_full_model(w, c, a, out);
    tacet_arena_destroy(a);
    w->has_response = false; // the spectra are no longer one condition's own
    out->settled = same == TACET_OK && full == TACET_OK;
    if (same != TACET_OK && same != TACET_NOT_CONVERGED) return same;
    return full == TACET_NOT_CONVERGED ? TACET_OK : full;
}
