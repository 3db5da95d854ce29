// Laws that every train obeys, on random ones. By hand: test_random_trains FIRST_SEED COUNT.
#include "near.h"
#include "random_train.h"
#include "rig.h"
#include <stdlib.h>
#include <string.h>

typedef long double complex wide;

// Every tenth train may be a large one.
static const train_wish any = {.most_nodes = 24}, large = {.most_nodes = 100};

static const train_wish *wish_of(const trial *t)
{
    return t->seed % 10 ? &any : &large;
}

// ---- one random load case -----------------------------------------------------------------------

// A rig with up to five random torques on different nodes; `c` decides all but the train.
static rig *loaded(bench_train *b, chance *c, double *speed)
{
    unsigned n = (unsigned)b->d.n_nodes, order[TRAINS_MOST], throws = n < 5 ? n : 5;
    size_t node[RIG_THROWS];
    for (unsigned i = 0; i < n; i++)
        order[i] = i;
    chance_permute(c, order, n);
    throws = 1 + chance_below(c, throws);
    for (unsigned i = 0; i < throws; i++)
        node[i] = order[i];
    rig *r = rig_new(b, throws, node, 1 + chance_below(c, 6), 40);
    *speed = chance_log(c, 30, 600);
    for (size_t i = 0; i < throws; i++) {
        r->torque[i].mean = chance_between(c, -100, 300);
        for (size_t h = 1; h <= r->lines; h++)
            r->torque[i].line[h] =
                chance_log(c, 0.1, 100) * cexp(I * chance_between(c, 0, 2 * M_PI));
    }
    return r;
}

static bool solve(trial *t, rig *r, double speed, tacet_train_motion *m)
{
    tacet_status status = tacet_train_harmonic(r->t, speed, r->n, r->node, r->torque, r->w, m);
    trial_true(t, "a random train has a harmonic solution", status == TACET_OK);
    return status == TACET_OK;
}

// ---- against a dense solution -------------------------------------------------------------------

// (K - w^2 J + i w C) x = F in the nodes' own angles, by Gauss with partial pivoting.
static void gauss(wide *a, wide *x, size_t n)
{
    for (size_t k = 0; k < n; k++) {
        size_t best = k;
        for (size_t i = k + 1; i < n; i++)
            if (cabsl(a[i * n + k]) > cabsl(a[best * n + k])) best = i;
        for (size_t j = 0; j < n && best != k; j++) {
            wide kept = a[k * n + j];
            a[k * n + j] = a[best * n + j];
            a[best * n + j] = kept;
        }
        wide kept = x[k];
        x[k] = x[best];
        x[best] = kept;
        for (size_t i = k + 1; i < n; i++) {
            wide by = a[i * n + k] / a[k * n + k];
            for (size_t j = k; j < n; j++)
                a[i * n + j] -= by * a[k * n + j];
            x[i] -= by * x[k];
        }
    }
    for (size_t k = n; k-- > 0;) {
        for (size_t j = k + 1; j < n; j++)
            x[k] -= a[k * n + j] * x[j];
        x[k] /= a[k * n + k];
    }
}

static void dense_line(const rig *r, double w, size_t h, wide *a, wide *x)
{
    size_t n = tacet_train_nodes(r->t);
    memset(a, 0, n * n * sizeof *a);
    memset(x, 0, n * sizeof *x);
    for (size_t j = 0; j < n; j++)
        a[j * n + j] = -(wide)w * w * tacet_train_node_inertia(r->t, j) +
                       I * (wide)w * tacet_train_node_damping(r->t, j);
    for (size_t e = 0; e < tacet_train_links(r->t); e++) {
        tacet_link_info l = tacet_train_link_info(r->t, e);
        wide K = tacet_train_link_impedance(r->t, e, w), g = l.gear_ratio;
        a[l.from * n + l.from] += K / (g * g);
        a[l.from * n + l.to] -= K / g;
        a[l.to * n + l.from] -= K / g;
        a[l.to * n + l.to] += K;
    }
    for (size_t i = 0; i < r->n; i++)
        x[r->node[i]] += r->torque[i].line[h];
    gauss(a, x, n);
}

static void check_dense(trial *t, const rig *r, double speed)
{
    size_t n = tacet_train_nodes(r->t);
    wide *a = malloc(n * n * sizeof *a), *x = malloc(n * sizeof *x);
    assert_true(a && x);
    double angle = 0, torque = 0;
    for (size_t h = 1; h <= r->lines; h += 3) {
        double w = speed / r->how.revolutions * (double)h, largest = 0, off = 0;
        dense_line(r, w, h, a, x);
        for (size_t j = 0; j < n; j++) {
            largest = fmax(largest, (double)cabsl(x[j]));
            off = fmax(off, (double)cabsl(x[j] - r->m.angle_rad[j].line[h]));
        }
        angle = fmax(angle, off / largest);
        largest = off = 0;
        for (size_t e = 0; e < tacet_train_links(r->t); e++) {
            tacet_link_info l = tacet_train_link_info(r->t, e);
            wide T = tacet_train_link_impedance(r->t, e, w) * (x[l.from] / l.gear_ratio - x[l.to]);
            largest = fmax(largest, (double)cabsl(T));
            off = fmax(off, (double)cabsl(T - r->m.link_torque_Nm[e].line[h]));
        }
        if (largest > 0) torque = fmax(torque, off / largest);
    }
    trial_below(t, "angles against a dense solution", angle, 1e-9);
    trial_below(t, "link torques against a dense solution", torque, 1e-9);
    free(a);
    free(x);
}

// ---- energy and means ---------------------------------------------------------------------------

// At every node the mean torques balance; the load takes what is left, and all of the power.
static void check_means(trial *t, const rig *r)
{
    double off = 0, scale = 0, power = 0, left = 0;
    for (size_t i = 0; i < r->n; i++) {
        double ratio = tacet_train_node_ratio(r->t, r->node[i]);
        power += r->torque[i].mean * ratio;
        scale += fabs(r->torque[i].mean) * fmax(1, fabs(ratio));
    }
    for (size_t j = 0; j < tacet_train_nodes(r->t); j++) {
        double sum = 0;
        for (size_t i = 0; i < r->n; i++)
            if (r->node[i] == j) sum += r->torque[i].mean;
        for (size_t e = 0; e < tacet_train_links(r->t); e++) {
            tacet_link_info l = tacet_train_link_info(r->t, e);
            if (l.to == j) sum += r->m.link_torque_Nm[e].mean;
            if (l.from == j) sum -= r->m.link_torque_Nm[e].mean / l.gear_ratio;
        }
        double ratio = tacet_train_node_ratio(r->t, j);
        if (j == tacet_train_load(r->t)) left = sum * ratio;
        if (j != tacet_train_load(r->t)) off = fmax(off, fabs(sum * ratio));
    }
    trial_below(t, "mean torques balance at every node", off / scale, 1e-12);
    trial_below(t, "the load takes the mean power", fabs(left - power) / scale, 1e-12);
}

static void check_energy(trial *t, const rig *r, double speed)
{
    tacet_train_power p = tacet_train_power_of(r->t, speed, r->n, r->node, r->torque, &r->m);
    double scale = p.dissipated_W, base = speed / r->how.revolutions, apparent = 0;
    for (size_t i = 0; i < r->n; i++) {
        scale += fabs(r->torque[i].mean * tacet_train_node_ratio(r->t, r->node[i])) * speed;
        for (size_t h = 1; h <= r->lines; h++)
            apparent += 0.5 * base * (double)h * cabs(r->torque[i].line[h]) *
                        cabs(r->m.angle_rad[r->node[i]].line[h]);
    }
    trial_true(t, "dampers take power, never give", p.dissipated_W >= 0);
    trial_below(t, "power in = dissipated + out",
                fabs(p.in_W - p.dissipated_W - p.out_W) / (scale + apparent), 1e-10);
}

// ---- changes that change nothing ----------------------------------------------------------------

// Response at i to a torque at j and the other way round, in the nodes' own angles; relative, where
// it is not a thousand times smaller than what the two do at their own places.
static double transfers_apart(rig *r, double speed, size_t i, size_t j, tacet_train_motion *other)
{
    double worst = 0;
    tacet_spectrum *unit = &r->torque[0];
    for (size_t h = 1; h <= r->lines; h++)
        unit->line[h] = 1;
    if (tacet_train_harmonic(r->t, speed, 1, &j, unit, r->w, other) != TACET_OK) return NAN;
    if (tacet_train_harmonic(r->t, speed, 1, &i, unit, r->w, &r->m) != TACET_OK) return NAN;
    for (size_t h = 1; h <= r->lines; h++) {
        double complex here = other->angle_rad[i].line[h], there = r->m.angle_rad[j].line[h];
        double own = sqrt(cabs(r->m.angle_rad[i].line[h]) * cabs(other->angle_rad[j].line[h]));
        worst = fmax(worst, cabs(here - there) / (cabs(there) + 1e-3 * own));
    }
    return worst;
}

static void check_reciprocity(trial *t, rig *r, double speed)
{
    size_t n = tacet_train_nodes(r->t);
    size_t i = chance_below(&t->chance, (unsigned)n), j = chance_below(&t->chance, (unsigned)n);
    tacet_train_motion other = rig_motion(r);
    trial_below(t, "reciprocity", transfers_apart(r, speed, i, j, &other), 1e-9);
}

static double motions_apart(const rig *a, const rig *b)
{
    double angle = lines_apart(a->m.angle_rad, b->m.angle_rad, a->m.n_nodes, 1);
    if (a->m.n_links == 0) return angle;
    return fmax(angle, lines_apart(a->m.link_torque_Nm, b->m.link_torque_Nm, a->m.n_links, 0));
}

// Inertia, stiffness, damping and torque times s: the same angles, link torques times s.
static void check_scaling(trial *t, chance train, chance load, const rig *r)
{
    double s = chance_log(&t->chance, 1e-3, 1e3), speed;
    bench_train *b = random_train(train, wish_of(t));
    for (size_t i = 0; i < b->d.n_nodes; i++) {
        b->node[i].inertia_kgm2 *= s;
        b->node[i].damping_Nms_per_rad *= s;
    }
    for (size_t i = 0; i < b->d.n_links; i++) {
        b->link[i].stiffness_Nm_per_rad *= s;
        b->link[i].damping_Nms_per_rad *= s;
    }
    for (size_t i = 0; i < b->d.n_dampers; i++)
        b->damper[i].ring_inertia_kgm2 *= s;
    rig *q = loaded(b, &load, &speed);
    for (size_t i = 0; i < q->n; i++)
        for (size_t h = 1; h <= q->lines; h++)
            q->torque[i].line[h] *= s;
    if (solve(t, q, speed, &q->m)) {
        for (size_t e = 0; e < q->m.n_links; e++)
            for (size_t h = 1; h <= q->lines; h++)
                q->m.link_torque_Nm[e].line[h] /= s;
        trial_below(t, "all times s keeps the angles", motions_apart(q, r), 1e-9);
    }
    rig_free(q);
}

// One gear turned the other way round: what lies beyond it turns backwards, and nothing else.
static void check_sense(trial *t, chance train, chance load, const rig *r)
{
    bench_train *b = random_train(train, wish_of(t));
    double speed;
    if (b->d.n_links == 0) {
        free(b);
        return;
    }
    b->link[chance_below(&t->chance, (unsigned)b->d.n_links)].gear_ratio *= -1;
    rig *q = loaded(b, &load, &speed);
    double sign[TRAINS_MOST];
    for (size_t j = 0; j < r->m.n_nodes; j++)
        sign[j] = tacet_train_node_ratio(q->t, j) * tacet_train_node_ratio(r->t, j) < 0 ? -1 : 1;
    for (size_t i = 0; i < q->n; i++)
        for (size_t h = 1; h <= q->lines; h++)
            q->torque[i].line[h] *= sign[q->node[i]];
    if (solve(t, q, speed, &q->m)) {
        for (size_t h = 1; h <= q->lines; h++) {
            for (size_t j = 0; j < q->m.n_nodes; j++)
                q->m.angle_rad[j].line[h] *= sign[j];
            for (size_t e = 0; e < q->m.n_links; e++)
                q->m.link_torque_Nm[e].line[h] *= sign[tacet_train_link_info(q->t, e).to];
        }
        trial_below(t, "a turned sense turns signs alone", motions_apart(q, r), 1e-11);
    }
    rig_free(q);
}

// Nodes, links and throws in another order.
static void check_order(trial *t, chance train, chance load, const rig *r)
{
    bench_train *b = random_train(train, wish_of(t));
    unsigned n = (unsigned)b->d.n_nodes, m = (unsigned)b->d.n_links;
    unsigned to[TRAINS_MOST], link_to[TRAINS_MOST];
    double speed;
    for (unsigned i = 0; i < n; i++)
        to[i] = link_to[i] = i;
    chance_permute(&t->chance, to, n);
    chance_permute(&t->chance, link_to, m);
    bench_train *copy = random_train(train, wish_of(t)); // its names stay where they are
    for (unsigned i = 0; i < n; i++)
        b->node[to[i]] = copy->node[i];
    for (unsigned i = 0; i < m; i++)
        b->link[link_to[i]] = copy->link[i];
    rig *q = loaded(b, &load, &speed);
    for (size_t i = 0; i < q->n; i++)
        q->node[i] = to[q->node[i]];
    if (solve(t, q, speed, &q->m)) {
        double worst = 0;
        for (size_t j = 0; j < r->m.n_nodes; j++) {
            size_t at = tacet_train_node_find(q->t, tacet_train_node_name(r->t, j));
            worst = fmax(worst, lines_apart(&q->m.angle_rad[at], &r->m.angle_rad[j], 1, 1));
        }
        for (size_t e = 0; e < r->m.n_links; e++) {
            size_t at = tacet_train_link_find(q->t, tacet_train_link_name(r->t, e));
            worst =
                fmax(worst, lines_apart(&q->m.link_torque_Nm[at], &r->m.link_torque_Nm[e], 1, 0));
        }
        // rounding is magnified next to a mode without damping: 1e-9 in one train of a thousand
        trial_below(t, "the order of the file does not matter", worst, 1e-8);
    }
    rig_free(q);
    free(copy);
}

// Torques one by one add up to torques together, each with a factor of its own.
static void check_linearity(trial *t, rig *r, double speed)
{
    tacet_train_motion one = rig_motion(r), sum = rig_motion(r);
    rig added = {.m = sum, .lines = r->lines};
    for (size_t i = 0; i < r->n; i++) {
        size_t node = r->node[i];
        if (tacet_train_harmonic(r->t, speed, 1, &node, &r->torque[i], r->w, &one) != TACET_OK)
            return;
        for (size_t j = 0; j < one.n_nodes; j++) {
            sum.angle_rad[j].revolutions = one.angle_rad[j].revolutions;
            sum.angle_rad[j].n_lines = one.angle_rad[j].n_lines;
            tacet_spectrum_add(&sum.angle_rad[j], 1, &one.angle_rad[j]);
        }
        for (size_t e = 0; e < one.n_links; e++) {
            sum.link_torque_Nm[e].revolutions = one.link_torque_Nm[e].revolutions;
            sum.link_torque_Nm[e].n_lines = one.link_torque_Nm[e].n_lines;
            tacet_spectrum_add(&sum.link_torque_Nm[e], 1, &one.link_torque_Nm[e]);
        }
    }
    added.m = sum;
    trial_below(t, "torques one by one add up", motions_apart(&added, r), 1e-9);
}

// ---- modes --------------------------------------------------------------------------------------

// Shapes are orthogonal in J and in K with w^2 between the two, and the sum of all w^2 is the trace
// of J^-1 K (from memory, any text on vibration).
static void check_modes(trial *t, const rig *r)
{
    size_t n = tacet_train_nodes(r->t);
    double *hz = malloc(n * sizeof *hz), *shape = malloc(n * n * sizeof *shape);
    double trace = 0, sum = 0, off = 0, rayleigh = 0;
    assert_int_equal(tacet_train_modes(r->t, hz, shape), TACET_OK);
    for (size_t e = 0; e < tacet_train_links(r->t); e++) {
        tacet_link_info l = tacet_train_link_info(r->t, e);
        double from = tacet_train_node_inertia(r->t, l.from) * l.gear_ratio * l.gear_ratio;
        trace += l.stiffness_Nm_per_rad * (1 / from + 1 / tacet_train_node_inertia(r->t, l.to));
    }
    for (size_t a = 0; a < n; a++) {
        double w2 = 4 * M_PI * M_PI * hz[a] * hz[a];
        sum += w2;
        for (size_t b = 0; b <= a; b++) {
            const double *x = &shape[a * n], *y = &shape[b * n];
            double J = 0, Jx = 0, Jy = 0, K = 0;
            for (size_t j = 0; j < n; j++) {
                double inertia = tacet_train_node_inertia(r->t, j);
                J += inertia * x[j] * y[j];
                Jx += inertia * x[j] * x[j];
                Jy += inertia * y[j] * y[j];
            }
            for (size_t e = 0; e < tacet_train_links(r->t) && a == b; e++) {
                tacet_link_info l = tacet_train_link_info(r->t, e);
                double u = x[l.from] / l.gear_ratio - x[l.to];
                K += l.stiffness_Nm_per_rad * u * u;
            }
            if (a != b) off = fmax(off, fabs(J) / sqrt(Jx * Jy));
            if (a == b && a > 0) rayleigh = fmax(rayleigh, fabs(K / (w2 * J) - 1));
        }
    }
    trial_below(t, "modes are orthogonal", off, 1e-12);
    trial_below(t, "strain energy over kinetic energy of a mode", rayleigh, 1e-11);
    if (n > 1) trial_below(t, "sum of squared frequencies", fabs(sum / trace - 1), 1e-12);
    free(hz);
    free(shape);
}

// ---- the two solvers ----------------------------------------------------------------------------

// Nodes that turn with the flywheel, up to four: torque may hang on their angle.
static size_t pick_throws(trial *t, const rig *r, size_t *node)
{
    size_t n = 0;
    for (size_t j = 0; j < tacet_train_nodes(r->t) && n < 4; j++)
        if (tacet_train_node_ratio(r->t, j) == 1 && chance_of(&t->chance, 0.6)) node[n++] = j;
    if (n == 0) node[n++] = tacet_train_flywheel(r->t);
    return n;
}

static void check_march(trial *t)
{
    static const train_wish marched = {.most_nodes = 7, .marched = true};
    chance train = t->chance;
    bench_train *b = random_train(train, &marched);
    double speed;
    trial_write(t, "# and, for the march:\n");
    random_train_write(t, b);
    rig *r = loaded(b, &t->chance, &speed);
    speed = fmin(fmax(speed, 60), 300);
    r->n = pick_throws(t, r, r->node);
    rig *q = rig_new(random_train(train, &marched), r->n, r->node, r->how.revolutions, r->lines);
    for (size_t i = 0; i < q->n; i++)
        for (size_t h = 1; h <= q->lines; h++)
            q->torque[i].line[h] = 100.0 / (double)(h + 5) * cexp(I * (double)(h * (i + 2)));
    trial_write(t, "# %.17g rad/s, %u revolutions\n", speed, q->how.revolutions);
    rig_tabulate(q);
    q->how.frozen = true;
    q->how.tolerance = 1e-7; // where a stiff link far above all lines is marched, 1e-9 is not had
    tacet_train_motion harmonic = rig_motion(q);
    if (solve(t, q, speed, &harmonic)) {
        rig both = {.m = harmonic};
        tacet_status status = rig_steady(q, speed * 30 / M_PI, rig_drive, q, &q->m);
        trial_true(t, "a random train settles", status == TACET_OK);
        if (status == TACET_OK)
            trial_below(t, "march and shooting against harmonic", motions_apart(q, &both), 1e-6);
    }
    rig_free(q);
    rig_free(r);
}

// ---- the whole ----------------------------------------------------------------------------------

static void run(trial *t)
{
    chance train = t->chance, load = {.state = t->seed ^ 0x5bd1e995u}, kept = load;
    bench_train *b = random_train(train, wish_of(t));
    double speed;
    random_train_write(t, b);
    rig *r = loaded(b, &load, &speed);
    t->chance = load;
    trial_write(t, "# %.17g rad/s, %u revolutions\n", speed, r->how.revolutions);
    if (solve(t, r, speed, &r->m)) {
        check_dense(t, r, speed);
        check_means(t, r);
        check_energy(t, r, speed);
        check_modes(t, r);
        check_scaling(t, train, kept, r);
        check_sense(t, train, kept, r);
        check_order(t, train, kept, r);
        check_linearity(t, r, speed);
        check_reciprocity(t, r, speed);
    }
    rig_free(r);
    if (t->seed % 4 == 0) check_march(t);
}

int main(int argc, char **argv)
{
    return trial_run(argc, argv, 1, 60, run);
}
