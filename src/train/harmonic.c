// Response to torques at constant speed, one line at a time.
//
// A tree is solved by elimination, leaves first. Node c hangs from p by a link of impedance K; Z
// and f are the dynamic stiffness and the torque of c with all that hangs from it. Then
//   Z y_c = f - t,  t = K (y_c - y_p)   gives   t = f' - Z' y_p
//   with f' = K f / (K + Z),  Z' = K Z / (K + Z),
// and p gains f' and Z'. (Impedance form: no difference of large terms at low frequency, where Z is
// small against K; eliminating the displacement instead leaves K - K^2/(K + Z).) At the flywheel
// y = f / Z; outwards again t, and y_c = y_p + t / K.
//
// All is referred to the crank (internal.h). Z = -w^2 J + i w c; no speed hold. An undamped branch
// driven exactly at its own frequency with its root held has K + Z = 0 and gives
// TACET_NOT_FINITE.
#include "train/work.h"
#include <math.h>
#include <string.h>

// ---- factors ----------------------------------------------------------------------------------

// Lines first + 1 .. first + n.
typedef struct {
    double base;
    size_t first, n;
} band;

static double frequency(band b, size_t h)
{
    return b.base * (double)(b.first + h + 1);
}

static double square(double x)
{
    return x * x;
}

// K of link e on lines 1..n, referred to the crank, into w->stiffness.
static void stiffness_lines(tacet_train_work *w, size_t e, band b)
{
    const tacet_train *t = w->t;
    const link_law *law = &t->law[e];
    double *restrict re = w->stiffness.re, *restrict im = w->stiffness.im;
    double referred = square(t->ratio[t->link[e].to]);
    if (t->constant_loss[e]) {
        double k = t->link[e].stiffness_Nm_per_rad * referred;
        for (size_t h = 0; h < b.n; h++) {
            re[h] = k;
            im[h] = k * t->link[e].loss_factor;
        }
        return;
    }
    for (size_t h = 0; h < b.n; h++) {
        re[h] = law->rest;
        im[h] = law->viscous * frequency(b, h);
    }
    for (size_t a = 0; law->weight && a < t->n_arms; a++) {
        const double *restrict arm_re = w->arm_re + a * w->stride;
        const double *restrict arm_im = w->arm_im + a * w->stride;
        double weight = law->weight[a];
        for (size_t h = 0; h < b.n; h++) {
            re[h] += weight * arm_re[h];
            im[h] += weight * arm_im[h];
        }
    }
    for (size_t h = 0; h < b.n; h++) {
        re[h] *= referred;
        im[h] *= referred;
    }
}

// i w / (r + i w) of each arm on the lines.
static void arm_lines(tacet_train_work *w, band b)
{
    for (size_t a = 0; a < w->t->n_arms; a++) {
        double *restrict re = w->arm_re + a * w->stride, *restrict im = w->arm_im + a * w->stride;
        double r = w->t->rate[a], r2 = square(r);
        for (size_t h = 0; h < b.n; h++) {
            double x = frequency(b, h), share = x / (r2 + x * x);
            re[h] = share * x;
            im[h] = share * r;
        }
    }
}

static void node_lines(tacet_train_work *w, size_t j, band b)
{
    const tacet_train *t = w->t;
    double *restrict re = w->dynamic.re + j * w->stride, *restrict im =
                                                             w->dynamic.im + j * w->stride;
    double referred = square(t->ratio[j]);
    double J = t->inertia[j] * referred, c = t->damping[j] * referred;
    for (size_t h = 0; h < b.n; h++) {
        double x = frequency(b, h);
        re[h] = -x * x * J;
        im[h] = x * c;
    }
}

// 1 / x; an undamped mode driven at its own frequency is infinite, and refused after the solve.
static inline double over(double x)
{
    return x == 0 ? (double)INFINITY : 1 / x;
}

// Factors of the k-th leaf; adds Z' to the node that it hangs from.
static void eliminate(tacet_train_work *w, size_t k, size_t n)
{
    size_t c = w->t->leaf[k], at = k * w->stride, to = w->t->parent[c] * w->stride;
    const double *restrict kr = w->stiffness.re, *restrict ki = w->stiffness.im;
    const double *restrict zr = w->dynamic.re + c * w->stride;
    const double *restrict zi = w->dynamic.im + c * w->stride;
    double *restrict up_r = w->dynamic.re + to, *restrict up_i = w->dynamic.im + to;
    factor_memo *f = &w->factor;
    double *restrict gr = f->share.re + at, *restrict gi = f->share.im + at;
    double *restrict cr = f->carried.re + at, *restrict ci = f->carried.im + at;
    double *restrict sr = f->softness.re + at, *restrict si = f->softness.im + at;
    for (size_t h = 0; h < n; h++) {
        double dr = kr[h] + zr[h], di = ki[h] + zi[h], by = over(dr * dr + di * di);
        double g_re = (kr[h] * dr + ki[h] * di) * by, g_im = (ki[h] * dr - kr[h] * di) * by;
        double c_re = g_re * zr[h] - g_im * zi[h], c_im = g_re * zi[h] + g_im * zr[h];
        double soft = over(kr[h] * kr[h] + ki[h] * ki[h]);
        gr[h] = g_re;
        gi[h] = g_im;
        cr[h] = c_re;
        ci[h] = c_im;
        sr[h] = kr[h] * soft;
        si[h] = -ki[h] * soft;
        up_r[h] += c_re;
        up_i[h] += c_im;
    }
}

static void invert_root(tacet_train_work *w, size_t n)
{
    const double *restrict zr = w->dynamic.re + w->t->flywheel * w->stride;
    const double *restrict zi = w->dynamic.im + w->t->flywheel * w->stride;
    double *restrict re = w->factor.root.re, *restrict im = w->factor.root.im;
    for (size_t h = 0; h < n; h++) {
        double by = over(zr[h] * zr[h] + zi[h] * zi[h]);
        re[h] = zr[h] * by;
        im[h] = -zi[h] * by;
    }
}

static void make_factors(tacet_train_work *w, band b)
{
    arm_lines(w, b);
    for (size_t j = 0; j < w->t->n; j++)
        node_lines(w, j, b);
    for (size_t k = 0; k < w->t->n_links; k++) {
        stiffness_lines(w, w->t->up[w->t->leaf[k]], b);
        eliminate(w, k, b.n);
    }
    invert_root(w, b.n);
}

void harmonic_factors(tacet_train_work *w, double speed, unsigned revolutions, size_t n_lines)
{
    factor_memo *f = &w->factor;
    if (f->valid && f->speed_rad_per_s == speed && f->revolutions == revolutions &&
        n_lines <= f->n_lines)
        return; // lines are independent of one another: a part of them is the same
    make_factors(w, (band){.base = speed / revolutions, .n = n_lines});
    f->valid = true;
    f->speed_rad_per_s = speed;
    f->revolutions = revolutions;
    f->n_lines = n_lines;
}

// ---- one chunk of lines -----------------------------------------------------------------------

typedef struct {
    tacet_train_work *w;
    size_t first, n;     // lines first + 1 .. first + n
    bool driven_only;    // leave out nodes that no torque passes, and all links
    double doubt[CHUNK]; // 0 while all is finite
} chunk;

static void load(chunk *c, const tacet_spectrum *torque, size_t node)
{
    double *restrict fr = c->w->force.re + node * CHUNK, *restrict fi =
                                                             c->w->force.im + node * CHUNK;
    const double *restrict line = (const double *)(const void *)(torque->line + c->first + 1);
    double ratio = c->w->t->ratio[node];
    for (size_t h = 0; h < c->n; h++) {
        fr[h] += ratio * line[2 * h];
        fi[h] += ratio * line[2 * h + 1];
    }
}

// f of node c becomes f' and is added to its parent's.
static void forward(chunk *c, size_t k, size_t node, size_t parent)
{
    const factor_memo *f = &c->w->factor;
    size_t at = k * c->w->stride + c->first;
    const double *restrict gr = f->share.re + at, *restrict gi = f->share.im + at;
    double *restrict fr = c->w->force.re + node * CHUNK, *restrict fi =
                                                             c->w->force.im + node * CHUNK;
    double *restrict pr = c->w->force.re + parent * CHUNK;
    double *restrict pi = c->w->force.im + parent * CHUNK;
    for (size_t h = 0; h < c->n; h++) {
        double re = gr[h] * fr[h] - gi[h] * fi[h], im = gr[h] * fi[h] + gi[h] * fr[h];
        fr[h] = re;
        fi[h] = im;
        pr[h] += re;
        pi[h] += im;
    }
}

static void store(const chunk *c, const double *restrict re, const double *restrict im, double by,
                  tacet_spectrum *out)
{
    double *restrict line = (double *)(void *)(out->line + c->first + 1);
    for (size_t h = 0; h < c->n; h++) {
        line[2 * h] = by * re[h];
        line[2 * h + 1] = by * im[h];
    }
}

static void turn_root(chunk *c, tacet_train_motion *out)
{
    size_t root = c->w->t->flywheel;
    const double *restrict rr = c->w->factor.root.re + c->first;
    const double *restrict ri = c->w->factor.root.im + c->first;
    const double *restrict fr = c->w->force.re + root * CHUNK, *restrict fi =
                                                                   c->w->force.im + root * CHUNK;
    double *restrict yr = c->w->angle.re + root * CHUNK, *restrict yi =
                                                             c->w->angle.im + root * CHUNK;
    for (size_t h = 0; h < c->n; h++) {
        yr[h] = rr[h] * fr[h] - ri[h] * fi[h];
        yi[h] = rr[h] * fi[h] + ri[h] * fr[h];
        c->doubt[h] = 0 * (yr[h] + yi[h]);
    }
    store(c, yr, yi, 1, &out->angle_rad[root]);
}

// t and y of the k-th leaf from f' (in force, which becomes t) and its parent's y.
static void backward(chunk *c, size_t k, size_t node, size_t parent)
{
    const factor_memo *f = &c->w->factor;
    size_t at = k * c->w->stride + c->first;
    const double *restrict cr = f->carried.re + at, *restrict ci = f->carried.im + at;
    const double *restrict sr = f->softness.re + at, *restrict si = f->softness.im + at;
    const double *restrict pr = c->w->angle.re + parent * CHUNK;
    const double *restrict pi = c->w->angle.im + parent * CHUNK;
    double *restrict tr = c->w->force.re + node * CHUNK, *restrict ti =
                                                             c->w->force.im + node * CHUNK;
    double *restrict yr = c->w->angle.re + node * CHUNK, *restrict yi =
                                                             c->w->angle.im + node * CHUNK;
    double *restrict doubt = c->doubt;
    for (size_t h = 0; h < c->n; h++) {
        double re = tr[h] - (cr[h] * pr[h] - ci[h] * pi[h]);
        double im = ti[h] - (cr[h] * pi[h] + ci[h] * pr[h]);
        tr[h] = re;
        ti[h] = im;
        yr[h] = pr[h] + (sr[h] * re - si[h] * im);
        yi[h] = pi[h] + (sr[h] * im + si[h] * re);
        doubt[h] += 0 * (re + im + yr[h] + yi[h]);
    }
}

static bool solve_chunk(chunk *c, size_t n_throws, const size_t *throw_node,
                        const tacet_spectrum *torque, tacet_train_motion *out)
{
    tacet_train_work *w = c->w;
    const tacet_train *t = w->t;
    memset(w->force.re, 0, t->n * CHUNK * sizeof(double));
    memset(w->force.im, 0, t->n * CHUNK * sizeof(double));
    for (size_t i = 0; i < n_throws; i++)
        load(c, &torque[i], throw_node[i]);
    for (size_t k = 0; k < t->n_links; k++)
        if (w->driven[t->leaf[k]]) forward(c, k, t->leaf[k], t->parent[t->leaf[k]]);
    turn_root(c, out);
    for (size_t k = t->n_links; k-- > 0;) {
        size_t node = t->leaf[k], link = t->up[node];
        if (c->driven_only && !w->driven[node]) continue; // nor does any node beyond it
        backward(c, k, node, t->parent[node]);
        const double *tr = w->force.re + node * CHUNK, *ti = w->force.im + node * CHUNK;
        store(c, w->angle.re + node * CHUNK, w->angle.im + node * CHUNK, t->ratio[node],
              &out->angle_rad[node]);
        if (c->driven_only) continue;
        store(c, tr, ti, t->sign[node] / t->ratio[t->link[link].to], &out->link_torque_Nm[link]);
    }
    double doubt = 0;
    for (size_t h = 0; h < c->n; h++)
        doubt += c->doubt[h];
    return doubt == 0;
}

// ---- the whole --------------------------------------------------------------------------------

// Mean torques flow to the load node, which takes their sum: what a link carries is all that is
// applied beyond it.
static void carry_means(tacet_train_work *w, size_t n_throws, const size_t *throw_node,
                        const tacet_spectrum *torque, tacet_train_motion *out)
{
    const tacet_train *t = w->t;
    double sum = 0;
    memset(w->mean, 0, t->n * sizeof *w->mean);
    for (size_t i = 0; i < n_throws; i++) {
        double referred = torque[i].mean * t->ratio[throw_node[i]];
        w->mean[throw_node[i]] += referred;
        sum += referred;
    }
    w->mean[t->load] -= sum;
    for (size_t k = 0; k < t->n_links; k++) {
        size_t node = t->leaf[k], link = t->up[node];
        w->mean[t->parent[node]] += w->mean[node];
        out->link_torque_Nm[link].mean = w->mean[node] * t->sign[node] / t->ratio[t->link[link].to];
    }
    for (size_t j = 0; j < t->n; j++)
        out->angle_rad[j].mean = 0;
}

static void mark_driven(tacet_train_work *w, size_t n_throws, const size_t *throw_node)
{
    const tacet_train *t = w->t;
    memset(w->driven, 0, t->n * sizeof *w->driven);
    for (size_t i = 0; i < n_throws; i++)
        w->driven[throw_node[i]] = true;
    for (size_t k = 0; k < t->n_links; k++)
        if (w->driven[t->leaf[k]]) w->driven[t->parent[t->leaf[k]]] = true;
}

static tacet_status check(const tacet_train_work *w, double speed, size_t n_throws,
                          const size_t *throw_node, const tacet_spectrum *torque)
{
    if (!(speed > 0) || !isfinite(speed) || n_throws == 0) return TACET_BAD_INPUT;
    if (torque[0].n_lines > w->most_lines || torque[0].revolutions == 0) return TACET_BAD_INPUT;
    for (size_t i = 0; i < n_throws; i++)
        if (throw_node[i] >= w->t->n || torque[i].n_lines != torque[0].n_lines ||
            torque[i].revolutions != torque[0].revolutions)
            return TACET_BAD_INPUT;
    for (size_t i = 0; i < n_throws; i++)
        if (!isfinite(torque[i].mean)) return TACET_NOT_FINITE; // lines show in the result
    return TACET_OK;
}

// All lines by the factors at hand.
static tacet_status solve_lines(tacet_train_work *w, size_t n_throws, const size_t *throw_node,
                                const tacet_spectrum *torque, bool driven_only,
                                tacet_train_motion *out)
{
    bool finite = true;
    size_t n = torque[0].n_lines;
    mark_driven(w, n_throws, throw_node);
    spectra_shape(out->angle_rad, w->t->n, torque[0].revolutions, n);
    spectra_shape(out->link_torque_Nm, w->t->n_links, torque[0].revolutions, n);
    carry_means(w, n_throws, throw_node, torque, out);
    for (size_t first = 0; first < n; first += CHUNK) {
        chunk c = {.w = w, .first = first, .driven_only = driven_only};
        c.n = n - first < CHUNK ? n - first : CHUNK;
        finite = solve_chunk(&c, n_throws, throw_node, torque, out) && finite;
    }
    return finite ? TACET_OK : TACET_NOT_FINITE;
}

tacet_status harmonic_solve(tacet_train_work *w, double speed, size_t n_throws,
                            const size_t *throw_node, const tacet_spectrum *torque,
                            bool driven_only, tacet_train_motion *out)
{
    tacet_status status = check(w, speed, n_throws, throw_node, torque);
    if (status != TACET_OK) return status;
    harmonic_factors(w, speed, torque[0].revolutions, torque[0].n_lines);
    return solve_lines(w, n_throws, throw_node, torque, driven_only, out);
}

tacet_status harmonic_solve_beyond(tacet_train_work *w, double speed, size_t first, size_t n_throws,
                                   const size_t *throw_node, const tacet_spectrum *torque,
                                   tacet_train_motion *out)
{
    tacet_status status = check(w, speed, n_throws, throw_node, torque);
    if (status != TACET_OK) return status;
    w->factor.valid = false;
    make_factors(w, (band){.base = speed / torque[0].revolutions, first, torque[0].n_lines});
    return solve_lines(w, n_throws, throw_node, torque, false, out);
}

tacet_status tacet_train_harmonic(const tacet_train *t, double speed, size_t n_throws,
                                  const size_t *throw_node, const tacet_spectrum *torque,
                                  tacet_train_work *w, tacet_train_motion *out)
{
    if (w->t != t) return TACET_BAD_INPUT;
    return harmonic_solve(w, speed, n_throws, throw_node, torque, false, out);
}
