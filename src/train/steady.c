// Periodic steady state of the full equations by march and shooting.
//
// Marching until a train has settled takes as long as its slowest mode. Instead one repeat of
// length T is marched from a start x, and the start is corrected by Newton's method until the end
// meets it:
//   (exp(A T) - 1) dx + b dL = -(x(T) - x(0)),
// A the linear model (march.h: mean inertia, no torque), exp(A T) its monodromy, b what a constant
// load torque adds in a repeat. The angle of the flywheel at the start is pinned: its place among
// the unknowns is taken by the load torque L, which no law gives; angles are deviations from W t,
// so that meeting the start means turning by 2 pi N ratio. The start comes from the harmonic
// solution.
//
// Where the crank's speed swings widely the linear monodromy is a poor one. What each correction
// left over tells more about it, at no cost: Broyden's good update of the inverse (Broyden 1965;
// kept as the steps alone, Kelley 1995, Iterative Methods for Linear and Nonlinear Equations, sec.
// 7.3), from memory.
//
// Full equations at the throws' own angles (deviation, static twist) with the inertia J0 + J(a); or
// `frozen`: torque at W t less J'/2 W^2 on the mean inertia, which is the harmonic solution's model
// at constant speed, so that the two must agree.
//
// In the full equations time may begin anywhere; the result is turned so that the flywheel's mean
// angle is W t, as in ripple.
#include "train/expm.h"
#include "train/ripple.h"
#include <gsl/gsl_blas.h>
#include <gsl/gsl_errno.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#define TOLERANCE        1e-6 // closure where none is asked for
#define STEP_TOLERANCE   1e-7
#define SAMPLES_A_TURN   512
#define SAMPLES_A_PERIOD 8    // of the highest line
#define STEPS_A_SAMPLE   1000 // more: the march is stuck
#define STEPS_KEPT       24   // corrections that Broyden's update remembers
#define START_TOLERANCE  1e-5 // of ripple
#define START_BLOCKS     12   // of as many lines as the result has, for the start
#define FLOOR            1e-9 // least scale of a state over the largest of its kind

typedef struct {
    tacet_train_work *w;
    steady_work *s;
    const tacet_periodic *how;
    march_drive drive;
    double period_s;
    const tacet_transform *grid;
    size_t samples;
    tacet_train_motion *out;
    tacet_solver_note *note;
} steady;

// ---- memory -----------------------------------------------------------------------------------

// Matrices and samples by malloc: the arena would touch them.
bool steady_reserve(tacet_train_work *w)
{
    steady_work *s = &w->steady;
    if (!march_model_create(&s->model, w->t, w->arena)) return false;
    size_t n = s->model.size, square = (n + 1) * (n + 1) * sizeof(double);
    size_t channels = s->model.n + s->model.links + 1;
    s->step = gsl_odeiv2_step_alloc(gsl_odeiv2_step_rk8pd, n);
    s->evolve = gsl_odeiv2_evolve_alloc(n);
    s->state = tacet_arena_alloc(w->arena, n * sizeof(double));
    s->start = tacet_arena_alloc(w->arena, n * sizeof(double));
    s->defect = tacet_arena_alloc(w->arena, n * sizeof(double));
    s->scale = tacet_arena_alloc(w->arena, n * sizeof(double));
    s->mean = tacet_arena_alloc(w->arena, w->n_throws * sizeof(double));
    s->monodromy = malloc(square);
    s->matrix = malloc(square);
    s->scratch = malloc(EXPM_MATRICES * square);
    s->newton = gsl_matrix_alloc(n, n);
    s->reflection = gsl_vector_alloc(n);
    s->solution = gsl_vector_alloc(n);
    s->steps = tacet_arena_alloc(w->arena, STEPS_KEPT * n * sizeof(double));
    s->sample = malloc(channels * w->most_samples * sizeof(double));
    s->coupling =
        malloc(SLOW_MODES_MOST * (SLOW_MODES_MOST + 1) / 2 * w->most_samples * sizeof(double));
    return s->step && s->evolve && s->state && s->start && s->defect && s->scale && s->mean &&
           s->monodromy && s->matrix && s->scratch && s->newton && s->reflection && s->solution &&
           s->steps && s->sample && s->coupling;
}

void steady_release(tacet_train_work *w)
{
    steady_work *s = &w->steady;
    if (s->step) gsl_odeiv2_step_free(s->step);
    if (s->evolve) gsl_odeiv2_evolve_free(s->evolve);
    if (s->newton) gsl_matrix_free(s->newton);
    if (s->reflection) gsl_vector_free(s->reflection);
    if (s->solution) gsl_vector_free(s->solution);
    free(s->monodromy);
    free(s->matrix);
    free(s->scratch);
    free(s->sample);
    free(s->coupling);
}

// ---- start ------------------------------------------------------------------------------------

// Where the lines of throw i's torque on all samples are kept until the march.
static tacet_spectrum start_lines(const steady *s, size_t i)
{
    return (tacet_spectrum){
        .revolutions = s->how->revolutions,
        .n_lines = s->samples / 2 - 1,
        .mean = 0,
        .line = (double complex *)(void *)(s->s->sample + i * s->samples),
    };
}

// Torque of throw i at W t on the mean inertia.
static tacet_status constant_torque(steady *s, size_t i, tacet_spectrum *out)
{
    tacet_train_work *w = s->w;
    double W = s->drive.speed_rad_per_s, turn = 2 * M_PI * s->how->revolutions / (double)s->samples;
    double *torque = w->buffer[0];
    for (size_t k = 0; k < s->samples; k++)
        w->at_angle[k] = turn * (double)k;
    tacet_status status = s->drive.drive(s->drive.who, i, s->samples, w->at_angle, w->at_torque,
                                         w->at_inertia, w->at_slope);
    for (size_t k = 0; k < s->samples; k++)
        torque[k] = w->at_torque[k] - 0.5 * w->at_slope[k] * W * W;
    tacet_transform_lines(s->grid, torque, out);
    return status;
}

// Torque of throw i at the angles that ripple found.
static tacet_status torque_of_ripple(steady *s, size_t i, tacet_spectrum *out)
{
    tacet_solver_note note = {0};
    ripple r = {.w = s->w,
                .speed = s->drive.speed_rad_per_s,
                .n_throws = s->drive.n_throws,
                .node = s->drive.node,
                .drive = s->drive.drive,
                .who = s->drive.who,
                .how = s->how,
                .note = &note,
                .grid = s->grid,
                .n_lines = s->how->n_lines};
    return ripple_torque(&r, i, out);
}

// Torques of the throws on all samples, with lines far beyond the result's, in memory that the
// march takes later; from ripple, or at constant speed where the model is that or ripple fails.
static tacet_status start_torque(steady *s)
{
    tacet_train_work *w = s->w;
    bool follows = !s->drive.frozen;
    if (follows) {
        tacet_periodic how = *s->how;
        tacet_solver_note note;
        how.tolerance = START_TOLERANCE;
        tacet_status status =
            ripple_solve(w, s->drive.speed_rad_per_s, s->drive.n_throws, s->drive.node,
                         s->drive.drive, s->drive.who, &how, s->out, &note);
        if (status != TACET_OK && status != TACET_NOT_CONVERGED) return status;
        follows = status == TACET_OK;
    }
    for (size_t i = 0; i < s->drive.n_throws; i++) {
        tacet_spectrum fine = start_lines(s, i);
        tacet_status status =
            follows ? torque_of_ripple(s, i, &fine) : constant_torque(s, i, &fine);
        if (status != TACET_OK) return status;
        s->s->mean[i] = fine.mean;
    }
    return TACET_OK;
}

// Value at t = 0 and sum of amplitudes of a signal's lines.
typedef struct {
    double value, scale;
} first;

static void add_line(first *f, double complex line)
{
    f->value += creal(line);
    f->scale += sqrt(creal(line) * creal(line) + cimag(line) * cimag(line));
}

// Twist of link k and of its arms at t = 0, from its torque, which is exact where angles are not.
static void add_link(steady *s, size_t k, size_t beyond)
{
    const march_model *m = &s->s->model;
    const tacet_train *t = m->t;
    size_t node = m->child[k], link = t->up[node];
    const tacet_spectrum *torque = &s->out->link_torque_Nm[link];
    double base = s->drive.speed_rad_per_s / s->how->revolutions;
    double referred = t->sign[node] / t->ratio[t->link[link].to];
    first twist = {0, 0};
    double *arm = s->s->start + m->arms;
    for (size_t h = 1; h <= torque->n_lines; h++) {
        double w = base * (double)(beyond + h);
        double complex u = referred * torque->line[h] / tacet_train_link_impedance(t, link, w);
        add_line(&twist, u);
        for (size_t a = 0; k < m->lossy && a < t->n_arms; a++)
            arm[a * m->lossy + k] += creal(u * (I * w / (t->rate[a] + I * w)));
    }
    s->s->start[m->n + k] += twist.value;
    s->s->scale[m->n + k] += twist.scale;
    for (size_t a = 0; k < m->lossy && a < t->n_arms; a++)
        s->s->scale[m->arms + a * m->lossy + k] += twist.scale;
}

// Adds what lines beyond + 1 .. of the motion in s->out are at t = 0.
static void add_lines(steady *s, size_t beyond)
{
    const march_model *m = &s->s->model;
    double base = s->drive.speed_rad_per_s / s->how->revolutions;
    double *start = s->s->start, *scale = s->s->scale;
    first angle = {0, 0};
    for (size_t j = 0; j < m->n; j++) {
        first speed = {0, 0};
        const tacet_spectrum *x = &s->out->angle_rad[j];
        for (size_t h = 1; h <= x->n_lines; h++) {
            double complex y = x->line[h] / m->t->ratio[j];
            add_line(&speed, I * (base * (double)(beyond + h)) * y);
            if (j == m->t->flywheel) add_line(&angle, y);
        }
        start[j] += speed.value;
        scale[j] += speed.scale;
    }
    start[m->root_angle] += angle.value;
    scale[m->root_angle] += angle.scale;
    for (size_t k = 0; k < m->links; k++)
        add_link(s, k, beyond);
}

// Scales of states first..first + n not below a share of their largest.
static void lift(double *scale, size_t n)
{
    double largest = 0;
    for (size_t i = 0; i < n; i++)
        largest = fmax(largest, scale[i]);
    for (size_t i = 0; i < n; i++)
        scale[i] = fmax(scale[i], largest > 0 ? FLOOR * largest : 1);
}

// State at t = 0 of the harmonic solution, block after block of lines, the result's own last.
static tacet_status start_state(steady *s)
{
    const march_model *m = &s->s->model;
    size_t n = s->how->n_lines, blocks = (s->samples / 2 - 1) / n;
    tacet_spectrum *torque = s->w->ripple.torque;
    memset(s->s->start, 0, m->size * sizeof(double));
    memset(s->s->scale, 0, m->size * sizeof(double));
    spectra_shape(torque, s->drive.n_throws, s->how->revolutions, n);
    for (size_t b = blocks < START_BLOCKS ? blocks : START_BLOCKS; b-- > 0;) {
        for (size_t i = 0; i < s->drive.n_throws; i++) {
            tacet_spectrum fine = start_lines(s, i);
            torque[i].mean = s->s->mean[i];
            memcpy(torque[i].line + 1, fine.line + 1 + b * n, n * sizeof *fine.line);
        }
        tacet_status status =
            harmonic_solve_beyond(s->w, s->drive.speed_rad_per_s, b * n, s->drive.n_throws,
                                  s->drive.node, torque, s->out);
        if (status != TACET_OK) return status;
        add_lines(s, b * n);
    }
    twist_statically(s->w); // of the means that the march is told
    lift(s->s->scale, m->n);
    lift(s->s->scale + m->n, m->links);
    lift(s->s->scale + m->root_angle, 1);
    lift(s->s->scale + m->arms, m->size - m->arms);
    return TACET_OK;
}

// ---- march ------------------------------------------------------------------------------------

// Step size by the largest error over STEP_TOLERANCE of the scale of its state (GSL's standard rule
// with a scale for each state, which its own control would allocate anew for every solution).
static int adjust(void *scales, size_t n, unsigned order, const double y[], const double error[],
                  const double rate[], double *h)
{
    (void)y, (void)rate;
    const double *scale = scales;
    double worst = 0;
    for (size_t i = 0; i < n; i++)
        worst = fmax(worst, fabs(error[i]) / scale[i]);
    worst /= STEP_TOLERANCE;
    if (worst > 1.1) {
        *h *= fmax(0.9 / pow(worst, 1.0 / order), 0.2);
        return GSL_ODEIV_HADJ_DEC;
    }
    if (worst < 0.5) {
        *h *= fmin(fmax(0.9 / pow(fmax(worst, 1e-30), 1.0 / (order + 1)), 1), 5);
        return GSL_ODEIV_HADJ_INC;
    }
    return GSL_ODEIV_HADJ_NIL;
}

static const gsl_odeiv2_control_type by_scale = {.name = "scale", .hadjust = adjust};

// What is kept of a state: speeds, link torques, the flywheel's angle; channel by channel.
static void keep(steady *s, size_t k)
{
    march_model *m = &s->s->model;
    const double *x = s->s->state;
    double *to = s->s->sample + k;
    size_t n = s->samples;
    march_links(m, x, s->s->defect); // as scratch
    for (size_t j = 0; j < m->n; j++, to += n)
        *to = x[j];
    for (size_t e = 0; e < m->links; e++, to += n)
        *to = m->torque[e];
    *to = x[m->root_angle];
}

// From s->start over one repeat; s->defect is end less start.
static tacet_status march_repeat(steady *s)
{
    steady_work *q = s->s;
    gsl_odeiv2_system system = {march_rate, NULL, q->model.size, &s->drive};
    gsl_odeiv2_control control = {&by_scale, q->scale};
    double t = 0, h = s->period_s / (double)s->samples;
    memcpy(q->state, q->start, q->model.size * sizeof *q->state);
    if (gsl_odeiv2_step_reset(q->step) || gsl_odeiv2_evolve_reset(q->evolve))
        return TACET_NOT_CONVERGED;
    for (size_t k = 0; k < s->samples; k++) {
        keep(s, k);
        double next = s->period_s * (double)(k + 1) / (double)s->samples;
        for (int steps = 0; t < next; steps++) {
            int failed = gsl_odeiv2_evolve_apply(q->evolve, &control, q->step, &system, &t, next,
                                                 &h, q->state);
            if (s->drive.status != TACET_OK) return s->drive.status;
            if (failed || steps == STEPS_A_SAMPLE) return TACET_NOT_CONVERGED;
        }
    }
    for (size_t i = 0; i < q->model.size; i++)
        q->defect[i] = q->state[i] - q->start[i];
    s->note->repeats++;
    return TACET_OK;
}

// ---- shooting ---------------------------------------------------------------------------------

static double closure(const steady *s)
{
    double worst = 0;
    for (size_t i = 0; i < s->s->model.size; i++)
        worst = fmax(worst, fabs(s->s->defect[i]) / s->s->scale[i]);
    return worst;
}

static tacet_status make_newton(steady *s)
{
    steady_work *q = s->s;
    size_t n = q->model.size, root = q->model.root_angle;
    if (!q->valid || q->period_s != s->period_s) {
        march_matrix(&q->model, q->matrix);
        matrix_exponential(n + 1, q->matrix, s->period_s, q->monodromy, q->scratch);
        q->valid = true;
        q->period_s = s->period_s;
    }
    memcpy(q->matrix, q->monodromy, (n + 1) * (n + 1) * sizeof *q->matrix);
    if (!s->drive.frozen)
        slow_correct(s->w, s->drive.speed_rad_per_s, s->how->revolutions, s->drive.n_throws,
                     s->drive.node, s->out, q->matrix);
    // in units of the scales; the load's is one that turns the crank by its own in a repeat
    double turns = fabs(q->matrix[root * (n + 1) + n]);
    q->load_unit = turns > 0 ? q->scale[root] / turns : 1;
    q->n_steps = 0;
    for (size_t i = 0; i < n; i++)
        for (size_t k = 0; k < n; k++) {
            size_t from = k == root ? n : k;
            double x = q->matrix[i * (n + 1) + from] - (k == i && k != root);
            gsl_matrix_set(q->newton, i, k,
                           x * (k == root ? q->load_unit : q->scale[k]) / q->scale[i]);
        }
    // by reflections: GSL's elimination allocates, and looks for no failure of that
    if (gsl_linalg_QR_decomp(q->newton, q->reflection)) return TACET_NOT_CONVERGED;
    for (size_t i = 0; i < n; i++) {
        double pivot = gsl_matrix_get(q->newton, i, i);
        if (!isfinite(pivot)) return TACET_NOT_FINITE;
        if (pivot == 0) return TACET_NOT_CONVERGED;
    }
    return TACET_OK;
}

// Turns a step by the first Newton matrix into the one by its update from the steps taken so far.
static void learn(steady_work *q, gsl_vector *step)
{
    size_t n = q->model.size;
    for (size_t j = 0; j < q->n_steps; j++) {
        gsl_vector_view now = gsl_vector_view_array(q->steps + j * n, n);
        gsl_vector_view next = gsl_vector_view_array(q->steps + (j + 1) * n, n);
        bool last = j + 1 == q->n_steps;
        double along, square;
        gsl_blas_ddot(&now.vector, step, &along);
        gsl_blas_ddot(&now.vector, &now.vector, &square);
        if (square == 0) continue;
        if (last)
            gsl_vector_scale(step, 1 / (1 - along / square));
        else
            gsl_blas_daxpy(along / square, &next.vector, step);
    }
}

// Corrects start and load torque; the largest step over the scales.
static tacet_status correct(steady *s)
{
    steady_work *q = s->s;
    size_t n = q->model.size, root = q->model.root_angle;
    double largest = 0;
    for (size_t i = 0; i < n; i++)
        gsl_vector_set(q->solution, i, -q->defect[i] / q->scale[i]);
    if (gsl_linalg_QR_svx(q->newton, q->reflection, q->solution)) return TACET_NOT_CONVERGED;
    learn(q, q->solution);
    if (q->n_steps == STEPS_KEPT) q->n_steps = 0;
    for (size_t i = 0; i < n; i++) {
        double x = gsl_vector_get(q->solution, i);
        if (!isfinite(x)) return TACET_NOT_FINITE;
        q->steps[q->n_steps * n + i] = x;
        if (i == root) {
            s->drive.load_Nm += x * q->load_unit;
            continue;
        }
        q->start[i] += x * q->scale[i];
        largest = fmax(largest, fabs(x));
    }
    q->n_steps++;
    s->note->difference = largest;
    return TACET_OK;
}

static tacet_status shoot(steady *s)
{
    double tolerance = s->how->tolerance > 0 ? s->how->tolerance : TOLERANCE;
    tacet_status status = make_newton(s);
    while (status == TACET_OK) {
        status = march_repeat(s);
        if (status != TACET_OK) break;
        s->note->closure = closure(s);
        if (s->note->closure <= tolerance) return TACET_OK;
        if (!isfinite(s->note->closure)) return TACET_NOT_FINITE;
        if (s->note->repeats >= s->how->most_passes) return TACET_NOT_CONVERGED;
        status = correct(s);
    }
    return status;
}

// ---- lines ------------------------------------------------------------------------------------

// Transforms channel c and turns its lines by the flywheel's mean angle.
static void channel_lines(steady *s, size_t c, double complex turn, tacet_spectrum *out)
{
    double *buffer = s->w->buffer[0];
    double complex by = 1;
    memcpy(buffer, s->s->sample + c * s->samples, s->samples * sizeof *buffer);
    tacet_transform_lines(s->grid, buffer, out);
    for (size_t h = 1; h <= out->n_lines; h++) {
        by *= turn;
        out->line[h] *= by;
    }
}

static void take_lines(steady *s)
{
    const march_model *m = &s->s->model;
    const tacet_train *t = m->t;
    double base = s->drive.speed_rad_per_s / s->how->revolutions, mean = 0;
    const double *angle = s->s->sample + (m->n + m->links) * s->samples;
    for (size_t k = 0; k < s->samples; k++)
        mean += angle[k] / (double)s->samples;
    double complex turn = s->drive.frozen ? 1 : cexp(-I * mean / s->how->revolutions);
    for (size_t j = 0; j < m->n; j++) {
        tacet_spectrum *x = &s->out->angle_rad[j];
        channel_lines(s, j, turn, x);
        for (size_t h = 1; h <= x->n_lines; h++)
            x->line[h] *= t->ratio[j] / (I * (base * (double)h));
        x->mean = 0;
    }
    for (size_t k = 0; k < m->links; k++) {
        size_t node = m->child[k], link = t->up[node];
        double own = t->sign[node] / t->ratio[t->link[link].to];
        tacet_spectrum *x = &s->out->link_torque_Nm[link];
        double estimate = x->mean;
        channel_lines(s, m->n + k, turn, x);
        for (size_t h = 1; h <= x->n_lines; h++)
            x->line[h] *= own;
        x->mean = estimate + own * x->mean;
    }
}

// ---- the whole --------------------------------------------------------------------------------

static tacet_status choose_samples(steady *s)
{
    size_t wanted = tacet_transform_length(s->how->n_lines, SAMPLES_A_PERIOD);
    while (wanted < SAMPLES_A_TURN * (size_t)s->how->revolutions)
        wanted *= 2;
    s->grid = work_transform(s->w, wanted);
    s->samples = tacet_transform_samples(s->grid);
    return s->samples == wanted ? TACET_OK : TACET_BAD_INPUT;
}

tacet_status tacet_train_steady(const tacet_train *t, double speed, size_t n_throws,
                                const size_t *throw_node, tacet_drive *drive, const void *who,
                                const tacet_periodic *how, tacet_train_work *w,
                                tacet_train_motion *out, tacet_solver_note *note)
{
    *note = (tacet_solver_note){.method = "steady"};
    tacet_status status = periodic_check(t, speed, n_throws, throw_node, how, w);
    if (status != TACET_OK) return status;
    for (size_t e = 0; e < t->n_links; e++)
        if (t->constant_loss[e]) return TACET_HARMONIC_ONLY;
    steady s = {.w = w, .s = &w->steady, .how = how, .out = out, .note = note};
    s.period_s = 2 * M_PI * how->revolutions / speed;
    s.drive = (march_drive){.m = &w->steady.model,
                            .n_throws = n_throws,
                            .node = throw_node,
                            .drive = drive,
                            .who = who,
                            .frozen = how->frozen,
                            .speed_rad_per_s = speed,
                            .offset = w->ripple.offset,
                            .mean = w->steady.mean};
    status = choose_samples(&s);
    if (status == TACET_OK) status = start_torque(&s);
    if (status == TACET_OK) status = start_state(&s);
    if (status != TACET_OK) return status;
    status = shoot(&s);
    note->evaluations = s.drive.evaluations;
    if (status == TACET_OK) take_lines(&s);
    return status;
}
