// What torque that follows the throws' angles does to the slow modes in a repeat.
//
// A throw's torque is a function of its angle, so that a start that is off by d meets torque that
// is off by k(t) d, k = (dF/dt) / (d theta/dt). The linear model does not know this; the rigid mode
// and the slowest elastic ones feel it most. In their coordinates, q_r'' = -w_r^2 q_r - c_r q_r' +
// sum K_rs q_s with K_rs = sum over throws of phi_ri k_i phi_si, the monodromy with and without K
// is found by Runge-Kutta steps, and the difference D of the two is what the shooting's matrix
// lacks:
//   exp(A T) + E D P,  P: state to (q, q'),  E: (q, q') to state, arms as in a harmonic motion.
// It only serves to need fewer repeats: where the march ends up does not depend on it.
#include "train/work.h"
#include <math.h>
#include <string.h>

#define LOW_ORDER   18 // modes up to this order of the speed
#define SLOW_MOST   SLOW_MODES_MOST
#define STATES      (2 * SLOW_MOST)
#define COLUMNS     (STATES + 1) // and a constant load torque
#define OVERSAMPLED 16           // samples of K per period of the highest line that matters

typedef struct {
    tacet_train_work *w;
    const march_model *m;
    size_t modes, samples;
    double step_s;
    double w2[SLOW_MOST], c[SLOW_MOST], load[SLOW_MOST]; // (rad/s)^2, 1/s, share of a load torque
    double *shape;                          // [modes * n], referred, of unit modal inertia
    double *coupling[SLOW_MOST][SLOW_MOST]; // [samples]; upper triangle
} slow;

typedef double block[STATES][COLUMNS];

static void take_modes(slow *s, double speed)
{
    const tacet_train *t = s->m->t;
    for (size_t r = 0; r < t->n && r < SLOW_MOST; r++) {
        double *y = s->shape + r * t->n, inertia = 0, w = 2 * M_PI * t->mode_hz[r];
        if (w > LOW_ORDER * speed) break;
        for (size_t j = 0; j < t->n; j++) {
            y[j] = t->mode_shape[r * t->n + j] / t->ratio[j];
            inertia += s->m->inertia[j] * y[j] * y[j];
        }
        s->c[r] = 0;
        for (size_t j = 0; j < t->n; j++) {
            y[j] /= sqrt(inertia);
            s->c[r] += s->m->damping[j] * y[j] * y[j];
        }
        for (size_t e = 0; r && e < t->n_links; e++)
            s->c[r] += t->energy_share[r * t->n_links + e] * w *
                       cimag(tacet_train_link_impedance(t, e, w)) / t->link[e].stiffness_Nm_per_rad;
        s->w2[r] = w * w;
        s->load[r] = -y[t->load];
        s->modes = r + 1;
    }
}

// Samples of a derivative in time of the first lines of a spectrum.
static void rate_samples(slow *s, const tacet_transform *grid, const tacet_spectrum *of, size_t n,
                         double base, double *out)
{
    tacet_spectrum *signal = &s->w->ripple.signal;
    signal->n_lines = n < of->n_lines ? n : of->n_lines;
    signal->mean = 0;
    for (size_t h = 1; h <= signal->n_lines; h++)
        signal->line[h] = I * (base * (double)h) * of->line[h];
    tacet_transform_samples_of(grid, signal, out);
}

static void couple(slow *s, const tacet_transform *grid, size_t n_throws, const size_t *node,
                   const tacet_train_motion *motion, double speed, size_t n, double base)
{
    double *torque = s->w->buffer[0], *turn = s->w->buffer[1];
    for (size_t r = 0; r < s->modes; r++)
        for (size_t q = r; q < s->modes; q++)
            memset(s->coupling[r][q], 0, s->samples * sizeof(double));
    for (size_t i = 0; i < n_throws; i++) {
        rate_samples(s, grid, &s->w->ripple.torque[i], n, base, torque);
        rate_samples(s, grid, &motion->angle_rad[node[i]], n, base, turn);
        for (size_t k = 0; k < s->samples; k++)
            torque[k] /= fmax(speed + turn[k], 0.1 * speed);
        for (size_t r = 0; r < s->modes; r++)
            for (size_t q = r; q < s->modes; q++) {
                double by = s->shape[r * s->m->n + node[i]] * s->shape[q * s->m->n + node[i]];
                for (size_t k = 0; k < s->samples; k++)
                    s->coupling[r][q][k] += by * torque[k];
            }
    }
}

// Derivative of all columns at sample k; without coupling where `on` is 0.
static void derive(const slow *s, size_t k, double on, block x, block dx)
{
    k %= s->samples;
    for (size_t r = 0; r < s->modes; r++)
        for (size_t c = 0; c < COLUMNS; c++) {
            dx[r][c] = x[SLOW_MOST + r][c];
            dx[SLOW_MOST + r][c] = -s->w2[r] * x[r][c] - s->c[r] * x[SLOW_MOST + r][c] +
                                   (c == STATES ? s->load[r] : 0);
        }
    for (size_t r = 0; r < s->modes; r++)
        for (size_t q = 0; q < s->modes; q++) {
            double by = on * (q < r ? s->coupling[q][r][k] : s->coupling[r][q][k]);
            for (size_t c = 0; c < COLUMNS; c++)
                dx[SLOW_MOST + r][c] += by * x[q][c];
        }
}

static void advance(block x, double h, block dx, block out)
{
    for (size_t i = 0; i < STATES; i++)
        for (size_t c = 0; c < COLUMNS; c++)
            out[i][c] = x[i][c] + h * dx[i][c];
}

// Monodromy of the modal coordinates; the last column is what a unit load torque adds.
static void run(const slow *s, double on, block x)
{
    double h = 2 * s->step_s;
    block a = {{0}}, b = {{0}}, c = {{0}}, d = {{0}}, at;
    memset(x, 0, sizeof(block));
    for (size_t i = 0; i < STATES; i++)
        x[i][i] = 1;
    for (size_t k = 0; k < s->samples; k += 2) {
        derive(s, k, on, x, a);
        advance(x, h / 2, a, at);
        derive(s, k + 1, on, at, b);
        advance(x, h / 2, b, at);
        derive(s, k + 1, on, at, c);
        advance(x, h, c, at);
        derive(s, k + 2, on, at, d);
        for (size_t i = 0; i < STATES; i++)
            for (size_t j = 0; j < COLUMNS; j++)
                x[i][j] += h / 6 * (a[i][j] + 2 * b[i][j] + 2 * c[i][j] + d[i][j]);
    }
}

// Column of P for state i: (q, q') of a unit of that state alone.
static void project(const slow *s, size_t i, double out[STATES])
{
    const march_model *m = s->m;
    memset(out, 0, STATES * sizeof *out);
    for (size_t r = 0; r < s->modes; r++) {
        const double *y = s->shape + r * m->n;
        if (i < m->n) {
            out[SLOW_MOST + r] = m->inertia[i] * y[i];
        } else if (i < m->arms) {
            for (size_t j = 0; j < m->n; j++) {
                size_t at = j; // does node j turn with this twist, or the flywheel's angle?
                while (at != m->t->flywheel && m->n + m->place[at] != i)
                    at = m->t->parent[at];
                if (i == m->root_angle || at != m->t->flywheel) out[r] += m->inertia[j] * y[j];
            }
        }
    }
}

// Row of E for state i.
static void expand(const slow *s, size_t i, double out[STATES])
{
    const march_model *m = s->m;
    memset(out, 0, STATES * sizeof *out);
    for (size_t r = 0; r < s->modes; r++) {
        const double *y = s->shape + r * m->n;
        if (i < m->n) {
            out[SLOW_MOST + r] = y[i];
        } else if (i < m->root_angle) {
            out[r] = y[m->child[i - m->n]] - y[m->above[i - m->n]];
        } else if (i == m->root_angle) {
            out[r] = y[m->t->flywheel];
        } else {
            size_t k = (i - m->arms) % m->lossy;
            double rate = m->rate[(i - m->arms) / m->lossy];
            double twist = y[m->child[k]] - y[m->above[k]], by = rate * rate + s->w2[r];
            out[r] = twist * s->w2[r] / by;
            out[SLOW_MOST + r] = twist * rate / by;
        }
    }
}

// Adds E D P to a matrix of size + 1 columns, the last of them the load's.
static void add(const slow *s, block with, block without, double *matrix)
{
    size_t n = s->m->size;
    for (size_t k = 0; k <= n; k++) {
        double from[STATES], moved[STATES];
        if (k < n) project(s, k, from);
        for (size_t a = 0; a < STATES; a++) {
            moved[a] = k < n ? 0 : with[a][STATES] - without[a][STATES];
            for (size_t b = 0; k < n && b < STATES; b++)
                moved[a] += (with[a][b] - without[a][b]) * from[b];
        }
        for (size_t i = 0; i < n; i++) {
            double row[STATES], sum = 0;
            expand(s, i, row);
            for (size_t a = 0; a < STATES; a++)
                sum += row[a] * moved[a];
            matrix[i * (n + 1) + k] += sum;
        }
    }
}

void slow_correct(tacet_train_work *w, double speed, unsigned revolutions, size_t n_throws,
                  const size_t *node, const tacet_train_motion *motion, double *matrix)
{
    size_t low = (size_t)LOW_ORDER * revolutions;
    double base = speed / revolutions;
    const tacet_transform *grid = work_transform(w, tacet_transform_length(low, OVERSAMPLED));
    slow s = {.w = w, .m = &w->steady.model, .shape = w->steady.scratch};
    s.samples = tacet_transform_samples(grid);
    s.step_s = 2 * M_PI / base / (double)s.samples;
    double *memory = w->steady.coupling;
    for (size_t r = 0; r < SLOW_MOST; r++)
        for (size_t q = r; q < SLOW_MOST; q++, memory += s.samples)
            s.coupling[r][q] = memory;
    take_modes(&s, speed);
    couple(&s, grid, n_throws, node, motion, speed, 2 * low, base);
    block with, without;
    run(&s, 1, with);
    run(&s, 0, without);
    add(&s, with, without, matrix);
}
