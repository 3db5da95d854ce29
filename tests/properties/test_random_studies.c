// Laws that every study obeys, on random ones. By hand: test_random_studies FIRST_SEED COUNT.
#include "demo.h"
#include "near.h"
#include "random_study.h"
#include <stdlib.h>
#include <string.h>

typedef struct {
    plan p;
    demo d;
    tacet_roll *roll;
    tacet_condition c;
} subject;

// ---- a study as a model -------------------------------------------------------------------------

static void close_subject(subject *s)
{
    tacet_roll_destroy(s->roll);
    demo_close(&s->d);
    free(s->p.train);
}

static bool open_subject(trial *t, subject *s)
{
    trial text = {0};
    tacet_error e;
    plan_write(&s->p, &text);
    if (t->used < 100) trial_write(t, "%s# word %s\n", text.text, s->p.word);
    tacet_status status = demo_try_text(&s->d, text.text, &e);
    free(text.text);
    if (status != TACET_OK) trial_write(t, "# refused: %s\n", e.text);
    trial_true(t, "a random study is valid", status == TACET_OK);
    if (status != TACET_OK) return false;
    s->roll = demo_roll(&s->d, s->p.word);
    s->c = demo_condition(&s->d, s->roll, s->p.rpm);
    return true;
}

static tacet_row solve(trial *t, subject *s, tacet_level level)
{
    static const char *const count[3][3] = {
        {"constant speed solved", "constant speed unreachable", "constant speed failed"},
        {"ripple solved", "ripple unreachable", "ripple failed"},
        {"march solved", "march unreachable", "march failed"}};
    tacet_row row;
    tacet_status status = tacet_solve(s->d.model, &s->c, level, s->d.work, &row);
    trial_true(t, "a solve is a row", status == TACET_OK);
    if (status == TACET_OK)
        trial_count(count[level][row.outcome]);
    else
        row.outcome = TACET_FAILED;
    if (row.outcome == TACET_FAILED)
        trial_true(t, "a failure has its reason",
                   row.why == TACET_NOT_CONVERGED || row.why == TACET_NOT_FINITE);
    return row;
}

// ---- one response -------------------------------------------------------------------------------

static void check_finite(trial *t, const tacet_response *r, const tacet_row *row)
{
    double doubt = 0;
    for (size_t j = 0; j < r->motion->n_nodes; j++)
        for (size_t h = 1; h <= r->n_lines; h++)
            doubt += 0 * cabs(r->motion->angle_rad[j].line[h]);
    for (size_t e = 0; e < r->motion->n_links; e++)
        for (size_t h = 1; h <= r->n_lines; h++)
            doubt += 0 * cabs(r->motion->link_torque_Nm[e].line[h]);
    for (size_t b = 0; b < row->n_bands; b++)
        doubt += 0 * (row->bands[b].level.dispersed + row->bands[b].level.nominal);
    trial_true(t, "all that is solved is finite", doubt == 0);
}

// Pistons put in what friction, dampers and load take. Friction is a constant torque on the throws,
// in equal shares of the cylinders; reciprocating inertia stores power and takes none.
static void check_energy(trial *t, const subject *s, tacet_level level, bool march)
{
    const tacet_response *r = tacet_workspace_response(s->d.work);
    const tacet_engine *en = tacet_model_engine(s->d.model);
    tacet_spectrum torque[PLAN_CYLINDERS];
    double W = r->speed_rad_per_s, apparent = 0;
    for (size_t i = 0; i < r->n_throws; i++) {
        torque[i] = r->piston_torque_Nm[i];
        const char *node = tacet_train_node_name(r->train, r->throw_node[i]);
        for (unsigned slot = 0; slot < s->p.cylinders; slot++)
            if (strcmp(tacet_engine_node(en, slot), node) == 0)
                torque[i].mean -= r->friction_Nm / s->p.cylinders;
        for (size_t h = 1; h <= r->n_lines; h++)
            apparent += 0.5 * W / r->revolutions * (double)h * cabs(torque[i].line[h]) *
                        cabs(r->motion->angle_rad[r->throw_node[i]].line[h]);
    }
    tacet_train_power p =
        tacet_train_power_of(r->train, W, r->n_throws, r->throw_node, torque, r->motion);
    trial_below(t, march ? "power of the march" : "power of harmonic and ripple",
                fabs(p.in_W - p.dissipated_W - p.out_W) / (fabs(p.in_W) + apparent),
                march ? 1e-4 : 1e-9);
    // At constant speed torque hangs on time, and the load sees the demand; at its own angle it
    // does its work once, and what dampers take is missing at the load.
    double demand = s->c.demand_Nm * W;
    if (level == TACET_LEVEL_CONSTANT)
        trial_below(t, "constant speed: the load takes the demand", fabs(p.out_W - demand) / demand,
                    1e-4);
    else
        trial_below(t, "load and dampers take the demand",
                    fabs(p.out_W + p.dissipated_W - demand) / demand, 1e-3);
}

// Gas work over a repeat is what demand and friction take; fuel's heat goes somewhere.
static void check_work(trial *t, const subject *s, const tacet_row *row)
{
    enum { SAMPLES = 16384 };
    static double angle[SAMPLES], torque[SAMPLES];
    const tacet_engine *en = tacet_model_engine(s->d.model);
    double mean = 0;
    for (int k = 0; k < SAMPLES; k++)
        angle[k] = 2 * M_PI * s->roll->revolutions * k / SAMPLES;
    for (unsigned slot = 0; slot < s->roll->cylinders; slot++) {
        tacet_engine_gas_torque(en, tacet_workspace_engine(s->d.work), slot, SAMPLES, angle,
                                torque);
        for (int k = 0; k < SAMPLES; k++)
            mean += torque[k] / SAMPLES;
    }
    const tacet_duty *d = &row->duty;
    trial_below(t, "gas work = demand + friction",
                fabs(mean - s->c.demand_Nm - d->friction_Nm) / (s->c.demand_Nm + d->friction_Nm),
                1e-3);
    trial_below(t, "gross - pumping - friction = brake",
                fabs(d->gross_W - d->pumping_W - d->friction_W - d->brake_W) / d->gross_W, 1e-6);
    trial_below(t, "fuel = brake + friction + walls + exhaust + blow-by",
                fabs(d->fuel_W - d->brake_W - d->friction_W - d->wall_heat_W - d->exhaust_W -
                     d->blow_by_W) /
                    d->fuel_W,
                1e-6);
}

// Reciprocating inertia m x'^2 of the exact slider-crank at crank angle `a` from piston top: the
// piston pin runs at e beside the crank's axis, on the side to which the crank pin moves, so with
// the pin at phi from upright x' = r sin phi + (r sin phi - e) r cos phi / sqrt(l^2 - (r sin phi -
// e)^2), and top is where crank and rod are in line, sin phi = e / (l + r).
static double inertia_of(const plan *p, double a)
{
    double r = p->stroke_mm / 2e3, l = p->rod_mm * 1e-3, e = p->offset_mm * 1e-3;
    double phi = a + asin(e / (l + r)), side = r * sin(phi) - e;
    double rise = r * sin(phi) + side * r * cos(phi) / sqrt(l * l - side * side);
    return p->mass_kg * rise * rise;
}

// At constant speed W what drives a throw is gas torque less J'/2 W^2 of its cylinders: its lines
// by quadrature against those that the solution was made from.
static void check_drive(trial *t, const subject *s)
{
    enum { SAMPLES = 8192, LINES = 12 };
    static double angle[SAMPLES], gas[SAMPLES], sum[SAMPLES];
    const tacet_response *r = tacet_workspace_response(s->d.work);
    const tacet_engine *en = tacet_model_engine(s->d.model);
    const char *node = tacet_train_node_name(r->train, r->throw_node[0]);
    double W = r->speed_rad_per_s, off = 0, largest = 0, mean_inertia = 0;
    memset(sum, 0, sizeof sum);
    for (unsigned slot = 0; slot < s->p.cylinders; slot++) {
        if (strcmp(tacet_engine_node(en, slot), node) != 0) continue;
        for (int k = 0; k < SAMPLES; k++)
            angle[k] = 2 * M_PI * s->roll->revolutions * k / SAMPLES;
        tacet_engine_gas_torque(en, tacet_workspace_engine(s->d.work), slot, SAMPLES, angle, gas);
        for (int k = 0; k < SAMPLES; k++) {
            double a = angle[k] - tacet_engine_firing_angle(en, slot), h = 1e-4;
            double slope = (inertia_of(&s->p, a + h) - inertia_of(&s->p, a - h)) / (2 * h);
            sum[k] += gas[k] - 0.5 * slope * W * W;
            mean_inertia += inertia_of(&s->p, a) / SAMPLES;
        }
    }
    for (size_t n = 1; n <= LINES; n++) {
        double complex line = 0;
        double w = W / r->revolutions * (double)n;
        for (int k = 0; k < SAMPLES; k++)
            line += 2 * sum[k] * cexp(-I * (2 * M_PI * (double)n * k / SAMPLES)) / SAMPLES;
        double complex drive =
            r->piston_torque_Nm[0].line[n] -
            mean_inertia * w * w * r->motion->angle_rad[r->throw_node[0]].line[n];
        off = fmax(off, cabs(line - drive));
        largest = fmax(largest, cabs(line));
    }
    trial_below(t, "what drives a throw at constant speed", off / largest, 2e-3);
}

// Band level from the lines, and rms of the lines against that of samples (Parseval).
static void check_levels(trial *t, const subject *s, const tacet_row *row)
{
    for (size_t b = 0; b < row->n_bands; b++) {
        const tacet_band *band = tacet_model_band(s->d.model, b);
        const tacet_spectrum *q;
        if (tacet_workspace_quantity(s->d.work, band->of, &q, NULL) != TACET_OK) continue;
        double square = 0, all = 0, mean = 0, samples = 0;
        size_t n = 8 * q->n_lines;
        for (size_t h = 1; h <= q->n_lines; h++) {
            double hz = s->p.rpm / 60 / q->revolutions * (double)h;
            double half = 0.5 * creal(q->line[h] * conj(q->line[h]));
            all += half;
            if (hz >= band->counted_low_hz * (1 - 1e-12) &&
                hz <= band->counted_high_hz * (1 + 1e-12))
                square += half;
        }
        trial_below(t, "nominal level is the rms of the lines in the band",
                    fabs(row->bands[b].level.nominal - sqrt(square)) / sqrt(all), 1e-12);
        trial_true(t, "dispersion adds",
                   row->bands[b].level.dispersed >= row->bands[b].level.nominal * (1 - 1e-12));
        if (b > 0 || n > 3000) continue; // one of them is enough
        for (size_t k = 0; k < n; k++) {
            double y = tacet_spectrum_at(q, 2 * M_PI * q->revolutions * (double)k / (double)n);
            mean += y / (double)n;
            samples += y * y / (double)n;
        }
        trial_below(t, "rms of lines = rms of samples",
                    fabs(samples - mean * mean - all) / (all + mean * mean), 1e-11);
    }
}

// ---- two responses ------------------------------------------------------------------------------

// Largest difference of speed and link torque lines and of levels; b's time begins `later` radians
// of crank angle after a's.
static double apart(const subject *a, const subject *b, const tacet_row *ra, const tacet_row *rb,
                    double later)
{
    const tacet_response *x = tacet_workspace_response(a->d.work);
    const tacet_response *y = tacet_workspace_response(b->d.work);
    double off[2] = {0, 0}, largest[2] = {0, 0};
    for (size_t i = 0; i < x->motion->n_nodes + x->motion->n_links; i++) {
        size_t e = i - x->motion->n_nodes;
        bool link = i >= x->motion->n_nodes;
        const tacet_spectrum *p = link ? &x->motion->link_torque_Nm[e] : &x->motion->angle_rad[i];
        size_t at = link ? tacet_train_link_find(y->train, tacet_train_link_name(x->train, e))
                         : tacet_train_node_find(y->train, tacet_train_node_name(x->train, i));
        const tacet_spectrum *q = link ? &y->motion->link_torque_Nm[at] : &y->motion->angle_rad[at];
        for (size_t h = 1; h <= x->n_lines; h++) {
            double weight = link ? 1 : (double)h;
            double complex turned = p->line[h] * cexp(I * (later / x->revolutions * (double)h));
            off[link] = fmax(off[link], weight * cabs(turned - q->line[h]));
            largest[link] = fmax(largest[link], weight * cabs(p->line[h]));
        }
    }
    double worst =
        largest[1] > 0 ? fmax(off[0] / largest[0], off[1] / largest[1]) : off[0] / largest[0];
    for (size_t k = 0; k < ra->n_bands; k++)
        if (ra->bands[k].level.has_line)
            worst = fmax(worst, fabs(ra->bands[k].level.dispersed - rb->bands[k].level.dispersed) /
                                    ra->bands[k].level.dispersed);
    return worst;
}

// A later cycle of the same pattern: the word turned by as many letters as there are cylinders.
static void check_turned_word(trial *t, subject *s, const tacet_row *row)
{
    subject other = *s;
    tacet_pattern turned;
    tacet_row second;
    if (tacet_workspace_create(s->d.model, &other.d.work) != TACET_OK) abort();
    tacet_pattern_rotate(&s->roll->pattern, s->roll->cylinders, &turned);
    if (tacet_roll_create(&turned, s->roll->cylinders, 4, &other.roll, NULL) != TACET_OK) abort();
    other.c.roll = other.roll;
    second = solve(t, &other, TACET_LEVEL_CONSTANT);
    trial_true(t, "a turned word can be reached as well", second.outcome == row->outcome);
    if (second.outcome == TACET_SOLVED)
        trial_below(t, "a later cycle of the same pattern",
                    apart(s, &other, row, &second, 4 * M_PI), 1e-9);
    tacet_roll_destroy(other.roll);
    tacet_workspace_destroy(other.d.work);
}

// ---- the same engine told otherwise -------------------------------------------------------------

static void renumber(chance *c, plan *p)
{
    unsigned to[PLAN_CYLINDERS + 1], n = p->cylinders;
    plan old = *p;
    bench_train *b = p->train;
    for (unsigned i = 0; i < n; i++)
        to[i] = i + 1;
    chance_permute(c, to, n);
    for (unsigned i = 0; i < n; i++)
        p->order[i] = to[old.order[i] - 1];
    for (unsigned k = 1; k <= n; k++) {
        p->node[to[k - 1]] = old.node[k];
        p->bank[to[k - 1]] = old.bank[k];
        p->factor[to[k - 1]] = old.factor[k];
    }
    for (size_t i = b->d.n_links; i > 1; i--) {
        unsigned k = chance_below(c, (unsigned)i);
        tacet_link_def kept = b->link[k];
        b->link[k] = b->link[i - 1];
        b->link[i - 1] = kept;
    }
    for (size_t i = b->d.n_nodes; i > 1; i--) {
        unsigned k = chance_below(c, (unsigned)i);
        tacet_node_def kept = b->node[k];
        b->node[k] = b->node[i - 1];
        b->node[i - 1] = kept;
        for (unsigned cylinder = 1; cylinder <= n; cylinder++)
            if (p->node[cylinder] == k)
                p->node[cylinder] = (unsigned)i - 1;
            else if (p->node[cylinder] == i - 1)
                p->node[cylinder] = k;
    }
}

static void turn_sense(plan *p)
{
    p->counterclockwise = !p->counterclockwise;
    for (unsigned k = 1; k <= p->cylinders; k++)
        p->bank[k] = -p->bank[k];
}

// The second firing comes first. Returns how much later that is, rad.
static double begin_later(plan *p)
{
    plan old = *p;
    unsigned n = p->cylinders, length = (unsigned)strlen(p->word);
    for (unsigned i = 0; i < n; i++) {
        p->order[i] = old.order[(i + 1) % n];
        p->interval[i] = old.interval[(i + 1) % n];
    }
    for (unsigned i = 0; i < length; i++)
        p->word[i] = old.word[(i + 1) % length];
    return old.interval[0] * M_PI / 180;
}

static void check_told_otherwise(trial *t, subject *s, const tacet_row *row)
{
    static const char *const what[] = {"cylinders renumbered, nodes and links in another order",
                                       "the other sense of rotation", "the second firing first",
                                       "the second firing first, uneven intervals"};
    const double most[] = {1e-9, 0, 1e-9, 1e-3};
    chance again = {.state = t->seed};
    subject other = {0};
    double later = 0;
    unsigned kind = (unsigned)t->seed % 3;
    random_plan(again, &other.p);
    if (kind == 0) renumber(&t->chance, &other.p);
    if (kind == 1) turn_sense(&other.p);
    if (kind == 2) later = begin_later(&other.p);
    if (kind == 2 && !s->p.even) kind = 3;
    if (open_subject(t, &other)) {
        tacet_row second = solve(t, &other, TACET_LEVEL_CONSTANT);
        trial_true(t, "told otherwise it can be reached as well", second.outcome == row->outcome);
        if (second.outcome == TACET_SOLVED)
            trial_below(t, what[kind], apart(s, &other, row, &second, later), most[kind]);
    }
    close_subject(&other);
}

// ---- solvers ------------------------------------------------------------------------------------

// The same bits from a workspace that has solved something else before.
static void check_bits(trial *t, subject *s, const tacet_row *row)
{
    subject other = *s;
    tacet_row between, again;
    if (tacet_workspace_create(s->d.model, &other.d.work) != TACET_OK) abort();
    other.c.roll = tacet_model_all_fire(s->d.model);
    other.c.speed_rad_per_s *= 1.03;
    (void)!tacet_solve(s->d.model, &other.c, TACET_LEVEL_RIPPLE, other.d.work, &between);
    other.c = s->c;
    again = solve(t, &other, TACET_LEVEL_RIPPLE);
    bool same = again.outcome == row->outcome;
    for (size_t b = 0; same && row->outcome == TACET_SOLVED && b < row->n_bands; b++)
        same = memcmp(&again.bands[b].level.dispersed, &row->bands[b].level.dispersed,
                      sizeof(double)) == 0;
    trial_true(t, "the same bits whatever came before", same);
    if (same && row->outcome == TACET_SOLVED)
        trial_below(t, "the same lines whatever came before", apart(s, &other, row, &again, 0), 0);
    tacet_workspace_destroy(other.d.work);
}

static void check_referee(trial *t, subject *s)
{
    tacet_agreement a;
    tacet_status status = tacet_solve_referee(s->d.model, &s->c, s->d.work, &a);
    trial_true(t, "the referee has its say",
               status == TACET_OK || status == TACET_NOT_CONVERGED || status == TACET_NOT_FINITE);
    trial_count(status != TACET_OK ? "referee failed"
                : a.settled        ? "referee settled"
                                   : "referee not settled");
    if (status != TACET_OK || !a.settled) return;
    trial_below(t, "same model: march against harmonic", a.same_model, 1e-6);
    trial_count(isnan(a.full_model_db)  ? "full model: no ripple to compare"
                : a.full_model_db < 0.1 ? "full model within 0.1 dB"
                : a.full_model_db < 1   ? "full model within 1 dB"
                                        : "full model off by 1 dB and more");
}

// ---- the whole ----------------------------------------------------------------------------------

static void run(trial *t)
{
    subject s = {0};
    random_plan(t->chance, &s.p);
    t->chance.state ^= 0x2545f4914f6cdd1du;
    if (open_subject(t, &s)) {
        tacet_row row = solve(t, &s, TACET_LEVEL_CONSTANT);
        if (row.outcome == TACET_SOLVED) {
            const tacet_response *r = tacet_workspace_response(s.d.work);
            check_finite(t, r, &row);
            check_energy(t, &s, TACET_LEVEL_CONSTANT, false);
            check_work(t, &s, &row);
            check_drive(t, &s);
            check_levels(t, &s, &row);
            trial_below(t, "roll torque is loss of momentum", demo_roll_mismatch(&s.d), 1e-9);
            check_turned_word(t, &s, &row);
            check_told_otherwise(t, &s, &row);
        }
        row = solve(t, &s, TACET_LEVEL_RIPPLE);
        if (row.outcome == TACET_SOLVED) {
            bool march = strcmp(row.solver.method, "steady") == 0;
            trial_count(march ? "ripple handed over to the march" : "ripple itself");
            check_finite(t, tacet_workspace_response(s.d.work), &row);
            check_energy(t, &s, TACET_LEVEL_RIPPLE, march);
            if (!march) check_bits(t, &s, &row);
        }
        if (row.outcome == TACET_SOLVED && t->seed % 4 == 0) check_referee(t, &s);
    }
    close_subject(&s);
}

int main(int argc, char **argv)
{
    return trial_run(argc, argv, 1, 32, run);
}
