#include "train/march.h"
#include <gsl/gsl_errno.h>
#include <math.h>
#include <string.h>

static double *numbers(tacet_arena *a, size_t n)
{
    return tacet_arena_alloc(a, n * sizeof(double));
}

static size_t *places(tacet_arena *a, size_t n)
{
    return tacet_arena_alloc(a, n * sizeof(size_t));
}

static bool reserve(march_model *m, tacet_arena *a)
{
    m->child = places(a, m->links);
    m->above = places(a, m->links);
    m->outward = places(a, m->links);
    m->place = places(a, m->n);
    m->rest = numbers(a, m->links);
    m->viscous = numbers(a, m->links);
    m->weight = numbers(a, m->lossy * m->t->n_arms);
    m->rate = m->t->rate;
    m->inertia = numbers(a, m->n);
    m->damping = numbers(a, m->n);
    m->angle = numbers(a, m->n);
    m->rate_of_twist = numbers(a, m->links);
    m->torque = numbers(a, m->links);
    m->push = numbers(a, m->n);
    return m->child && m->above && m->outward && m->place && m->rest && m->viscous && m->weight &&
           m->inertia && m->damping && m->angle && m->rate_of_twist && m->torque && m->push;
}

static void fill_link(march_model *m, size_t k, size_t node)
{
    const tacet_train *t = m->t;
    const link_law *law = &t->law[t->up[node]];
    double ratio = t->ratio[t->link[t->up[node]].to], referred = ratio * ratio;
    m->child[k] = node;
    m->above[k] = t->parent[node];
    m->place[node] = k;
    m->rest[k] = law->rest * referred;
    m->viscous[k] = law->viscous * referred;
    for (size_t a = 0; law->weight && a < t->n_arms; a++)
        m->weight[a * m->lossy + k] = law->weight[a] * referred;
}

bool march_model_create(march_model *m, const tacet_train *t, tacet_arena *a)
{
    *m = (march_model){.t = t, .n = t->n, .links = t->n_links};
    for (size_t e = 0; e < t->n_links; e++)
        m->lossy += t->law[e].weight != NULL;
    m->root_angle = m->n + m->links;
    m->arms = m->root_angle + 1;
    m->size = m->arms + m->lossy * t->n_arms;
    if (!reserve(m, a)) return false;
    size_t lossy = 0, plain = m->lossy;
    for (size_t i = 0; i < t->n_links; i++) {
        size_t node = t->leaf[i];
        fill_link(m, t->law[t->up[node]].weight ? lossy++ : plain++, node);
    }
    for (size_t i = 0; i < t->n_links; i++)
        m->outward[i] = m->place[t->leaf[t->n_links - 1 - i]];
    for (size_t j = 0; j < t->n; j++) {
        m->inertia[j] = t->inertia[j] * t->ratio[j] * t->ratio[j];
        m->damping[j] = t->damping[j] * t->ratio[j] * t->ratio[j];
    }
    return true;
}

// ---- torques ----------------------------------------------------------------------------------

typedef double pair __attribute__((vector_size(16)));

static pair load(const double *x)
{
    pair p;
    memcpy(&p, x, sizeof p);
    return p;
}

static void store(double *x, pair p)
{
    memcpy(x, &p, sizeof p);
}

// Arms of links k and k + 1: adds their torques, and gives the rates of their elongations.
static void pair_of_arms(const march_model *m, size_t k, const double *state, double *rate)
{
    size_t arms = m->t->n_arms, step = m->lossy;
    const double *s = state + m->arms + k, *g = m->weight + k;
    double *ds = rate + m->arms + k;
    pair turning = load(m->rate_of_twist + k), torque = load(m->torque + k);
    for (size_t a = 0; a < arms; a++, s += step, g += step, ds += step) {
        pair x = load(s);
        torque += load(g) * x;
        store(ds, turning - m->rate[a] * x);
    }
    store(m->torque + k, torque);
}

static void last_arms(const march_model *m, size_t k, const double *state, double *rate)
{
    for (size_t a = 0; a < m->t->n_arms; a++) {
        size_t at = a * m->lossy + k;
        m->torque[k] += m->weight[at] * state[m->arms + at];
        rate[m->arms + at] = m->rate_of_twist[k] - m->rate[a] * state[m->arms + at];
    }
}

void march_links(march_model *m, const double *state, double *rate)
{
    const double *v = state, *u = state + m->n;
    size_t k = 0;
    for (size_t e = 0; e < m->links; e++) {
        m->rate_of_twist[e] = v[m->child[e]] - v[m->above[e]];
        m->torque[e] = m->rest[e] * u[e] + m->viscous[e] * m->rate_of_twist[e];
    }
    for (; k + 2 <= m->lossy; k += 2)
        pair_of_arms(m, k, state, rate);
    if (k < m->lossy) last_arms(m, k, state, rate);
    memcpy(rate + m->n, m->rate_of_twist, m->links * sizeof *rate);
}

// Angle of every node, deviation from W t.
static void turn(march_model *m, const double *state)
{
    m->angle[m->t->flywheel] = state[m->root_angle];
    for (size_t i = 0; i < m->links; i++) {
        size_t k = m->outward[i];
        m->angle[m->child[k]] = m->angle[m->above[k]] + state[m->n + k];
    }
}

// Adds to m->push what drives throw i, and gives its inertia: of the deviation from the mean
// torque. Frozen: torque at W t on the mean inertia, as at constant speed.
static tacet_status push_throw(march_drive *d, size_t i, double t, double v, double *inertia)
{
    march_model *m = d->m;
    size_t j = d->node[i];
    double W = d->speed_rad_per_s, angle = W * t, speed = W, torque, varying, slope;
    if (!d->frozen) {
        angle += d->offset[j] + m->angle[j];
        speed += v;
    }
    tacet_status status = d->drive(d->who, i, 1, &angle, &torque, &varying, &slope);
    m->push[j] += torque - 0.5 * slope * speed * speed - d->mean[i];
    if (!d->frozen) *inertia += varying - m->t->added[j];
    return status;
}

int march_rate(double t, const double state[], double rate[], void *params)
{
    march_drive *d = params;
    march_model *m = d->m;
    const double *v = state;
    double *acceleration = rate, doubt = 0;
    d->evaluations++;
    march_links(m, state, rate);
    rate[m->root_angle] = v[m->t->flywheel];
    if (!d->frozen) turn(m, state);
    for (size_t j = 0; j < m->n; j++) {
        m->push[j] = -m->damping[j] * v[j];
        acceleration[j] = m->inertia[j]; // until divided by
    }
    m->push[m->t->load] -= d->load_Nm;
    for (size_t k = 0; k < m->links; k++) {
        m->push[m->above[k]] += m->torque[k];
        m->push[m->child[k]] -= m->torque[k];
    }
    for (size_t i = 0; i < d->n_throws && d->status == TACET_OK; i++)
        d->status = push_throw(d, i, t, v[d->node[i]], &acceleration[d->node[i]]);
    for (size_t j = 0; j < m->n; j++) {
        acceleration[j] = m->push[j] / acceleration[j];
        doubt += 0 * acceleration[j];
    }
    if (d->status == TACET_OK && !(doubt == 0)) d->status = TACET_NOT_FINITE;
    return d->status == TACET_OK ? GSL_SUCCESS : GSL_EBADFUNC;
}

// ---- linear model -----------------------------------------------------------------------------

// Row of the torque of link k over the states, times `by`, added to a row of the matrix.
static void add_torque(const march_model *m, size_t k, double by, double *row)
{
    row[m->n + k] += by * m->rest[k];
    row[m->child[k]] += by * m->viscous[k];
    row[m->above[k]] -= by * m->viscous[k];
    for (size_t a = 0; k < m->lossy && a < m->t->n_arms; a++)
        row[m->arms + a * m->lossy + k] += by * m->weight[a * m->lossy + k];
}

void march_matrix(const march_model *m, double *a)
{
    size_t n = m->size + 1;
    memset(a, 0, n * n * sizeof *a);
    for (size_t k = 0; k < m->links; k++) {
        size_t c = m->child[k], p = m->above[k];
        double *row = a + (m->n + k) * n;
        row[c] = 1;
        row[p] = -1;
        add_torque(m, k, -1 / m->inertia[c], a + c * n);
        add_torque(m, k, 1 / m->inertia[p], a + p * n);
    }
    for (size_t j = 0; j < m->n; j++)
        a[j * n + j] -= m->damping[j] / m->inertia[j];
    a[m->t->load * n + m->size] = -1 / m->inertia[m->t->load];
    a[m->root_angle * n + m->t->flywheel] = 1;
    for (size_t i = 0; m->lossy && i < m->t->n_arms; i++)
        for (size_t k = 0; k < m->lossy; k++) {
            size_t s = m->arms + i * m->lossy + k;
            a[s * n + m->child[k]] += 1;
            a[s * n + m->above[k]] -= 1;
            a[s * n + s] -= m->rate[i];
        }
}
