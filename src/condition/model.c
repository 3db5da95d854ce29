#include "condition/internal.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>

// Lines reach this much beyond the highest mode of interest, so that its resonance is whole.
#define ORDER_MARGIN  1.15
#define ORDER_LEAST   24.0
#define ORDER_LARGEST 60.0 // that a study may state
// Speeds may be asked this far outside the screened ones.
#define SPEED_MARGIN 0.1

static void speed_range(const tacet_study *s, double range[2])
{
    range[0] = range[1] = s->screen.speeds_rad_per_s[0];
    for (size_t i = 0; i < s->screen.n_speeds; i++) {
        range[0] = fmin(range[0], s->screen.speeds_rad_per_s[i]);
        range[1] = fmax(range[1], s->screen.speeds_rad_per_s[i]);
    }
}

// Which nodes the cylinders drive, in firing sequence of first use.
static tacet_status assemble_throws(tacet_model *m, const tacet_train_def *train, tacet_error *e)
{
    unsigned n = tacet_engine_cylinders(m->engine);
    m->throw_node = tacet_arena_alloc(m->arena, n * sizeof *m->throw_node);
    m->slot_throw = tacet_arena_alloc(m->arena, n * sizeof *m->slot_throw);
    m->throw_slots = tacet_arena_alloc(m->arena, (size_t)n * n * sizeof *m->throw_slots);
    m->throw_n_slots = tacet_arena_alloc(m->arena, n * sizeof *m->throw_n_slots);
    m->throw_inertia = tacet_arena_alloc(m->arena, n * sizeof *m->throw_inertia);
    if (!m->throw_node || !m->slot_throw || !m->throw_slots || !m->throw_n_slots ||
        !m->throw_inertia)
        return tacet_fail(e, TACET_NO_MEMORY, "no memory for the model");
    for (unsigned slot = 0; slot < n; slot++) {
        const char *name = tacet_engine_node(m->engine, slot);
        size_t node = 0, t = 0;
        while (node < train->n_nodes && strcmp(train->nodes[node].name, name) != 0)
            node++;
        if (node == train->n_nodes)
            return tacet_fail(e, TACET_BAD_INPUT,
                              "cylinder %u drives node '%s'; the train has none",
                              tacet_engine_number(m->engine, slot), name);
        while (t < m->n_throws && m->throw_node[t] != node)
            t++;
        if (t == m->n_throws) m->throw_node[m->n_throws++] = node;
        m->slot_throw[slot] = (unsigned)t;
        m->throw_slots[t * n + m->throw_n_slots[t]++] = slot;
        m->throw_inertia[t] += tacet_engine_mean_inertia(m->engine);
    }
    return TACET_OK;
}

// The failure in e, as at the place of a key in the study.
static tacet_status blame(const tacet_model *m, const char *path, tacet_status status,
                          tacet_error *e)
{
    int line, column;
    if (e && tacet_study_place(m->study, path, &line, &column)) {
        e->line = line;
        e->column = column;
    }
    return status;
}

// Does a way that does not turn back at link `came` lead from a node to another? `gear` gets the
// gear link on it that is nearest to the end.
static bool leads(const tacet_train *t, size_t from, size_t came, size_t to, size_t *gear)
{
    if (from == to) return true;
    for (size_t i = 0; i < tacet_train_links(t); i++) {
        tacet_link_info l = tacet_train_link_info(t, i);
        if (i == came || (l.from != from && l.to != from)) continue;
        if (!leads(t, l.from == from ? l.to : l.from, i, to, gear)) continue;
        if (*gear == SIZE_MAX && l.gear_ratio != 1) *gear = i;
        return true;
    }
    return false;
}

// Torque hangs on the crank's angle: no gear between a throw and the flywheel.
static tacet_status check_throws(const tacet_model *m, tacet_error *e)
{
    for (size_t t = 0; t < m->n_throws; t++) {
        double ratio = tacet_train_node_ratio(m->train, m->throw_node[t]);
        if (fabs(ratio - 1) <= 1e-12) continue;
        size_t gear = SIZE_MAX;
        char path[64];
        (void)leads(m->train, m->throw_node[t], SIZE_MAX, tacet_train_flywheel(m->train), &gear);
        tacet_text(path, sizeof path, "train.links[%zu].gear_ratio", gear);
        (void)tacet_fail(e, TACET_BAD_INPUT,
                         "cylinders drive node '%s', which turns at %.6g times the speed of the "
                         "flywheel '%s'; throws turn with it, without a gear in between",
                         tacet_train_node_name(m->train, m->throw_node[t]), ratio,
                         tacet_train_node_name(m->train, tacet_train_flywheel(m->train)));
        return blame(m, path, TACET_BAD_INPUT, e);
    }
    return TACET_OK;
}

// Lines of words as long as the densities', and all bands, lie inside the range in which loss
// factors hold.
static void choose_loss_range(const tacet_study *s, tacet_train_def *d)
{
    double range[2];
    speed_range(s, range);
    unsigned longest = s->screen.densities.longest > 8 ? s->screen.densities.longest : 8;
    double highest = fmax(TACET_ORDER_MOST, s->screen.highest_order); // NAN drops out
    d->lowest_hz = tacet_order_hz(1.0 / (2 * longest), range[0]);
    d->highest_hz = tacet_order_hz(highest, range[1]);
    for (size_t i = 0; i < s->n_bands; i++) {
        double guard = tacet_band_guard(&s->bands[i]);
        d->lowest_hz = fmin(d->lowest_hz, s->bands[i].low_hz * (1 - guard));
        d->highest_hz = fmax(d->highest_hz, s->bands[i].high_hz * (1 + guard));
    }
}

static tacet_status assemble_train(tacet_model *m, tacet_error *e)
{
    const tacet_study *s = m->study;
    tacet_train_def d = s->train;
    double *added = tacet_arena_alloc(m->arena, d.n_nodes * sizeof *added);
    if (!added) return tacet_fail(e, TACET_NO_MEMORY, "no memory for the model");
    tacet_status status = assemble_throws(m, &d, e);
    if (status != TACET_OK) return status;
    for (size_t t = 0; t < m->n_throws; t++)
        added[m->throw_node[t]] = m->throw_inertia[t];
    d.added_inertia_kgm2 = added;
    choose_loss_range(s, &d);
    status = tacet_train_create(&d, &m->train, e);
    if (status == TACET_OK) status = check_throws(m, e);
    if (status != TACET_OK) return status;
    size_t n = tacet_train_nodes(m->train);
    m->mode_hz = tacet_arena_alloc(m->arena, n * sizeof *m->mode_hz);
    double *shape = malloc(n * n * sizeof *shape);
    status = m->mode_hz && shape ? tacet_train_modes(m->train, m->mode_hz, shape) : TACET_NO_MEMORY;
    free(shape);
    return status == TACET_OK
               ? TACET_OK
               : tacet_fail(e, status, "the modes of the train: %s", tacet_status_text(status));
}

// A line that is not computed is in no level: lines reach over every band at every speed that may
// be asked. `least` gets the order that this takes.
static tacet_status cover_bands(tacet_model *m, double lowest_rad_per_s, double *least,
                                tacet_error *e)
{
    double stated = m->study->screen.highest_order, rpm = 60 * tacet_order_hz(1, lowest_rad_per_s);
    *least = 0;
    for (size_t i = 0; i < m->n_bands; i++) {
        double hz = m->bands[i].counted_high_hz;
        double order = ceil(hz / tacet_order_hz(1, lowest_rad_per_s) * (1 - 1e-12));
        m->highest_band_hz = fmax(m->highest_band_hz, hz);
        *least = fmax(*least, order);
        if (order > stated) { // false where none is stated
            (void)tacet_fail(e, TACET_BAD_INPUT,
                             "highest_order %g: at %.4g rpm that is %.4g Hz, and band '%s' is "
                             "counted up to %.4g Hz; order %g or more is needed",
                             stated, rpm, tacet_order_hz(stated, lowest_rad_per_s),
                             m->bands[i].name, hz, order);
            return blame(m, "screen.highest_order", TACET_BAD_INPUT, e);
        }
        if (order > ORDER_LARGEST) {
            char path[64];
            tacet_text(path, sizeof path, "bands[%zu].high_hz", i);
            (void)tacet_fail(e, TACET_BAD_INPUT,
                             "band '%s' is counted up to %.4g Hz, at %.4g rpm order %g; lines are "
                             "computed up to order %g, so screen higher speeds or a lower band",
                             m->bands[i].name, hz, rpm, order, ORDER_LARGEST);
            return blame(m, path, TACET_BAD_INPUT, e);
        }
    }
    return TACET_OK;
}

// The mode of interest is the highest one that order 24 reaches at the highest screened speed;
// lines go a little beyond it at the lowest speed, but not past TACET_ORDER_MOST, where the torque
// of a fired cycle has faded (common practice, no source), except for bands.
static tacet_status choose_highest_order(tacet_model *m, tacet_error *e)
{
    const tacet_screen_def *screen = &m->study->screen;
    double range[2], hz = 0, bands;
    speed_range(m->study, range);
    tacet_status status = cover_bands(m, (1 - SPEED_MARGIN) * range[0], &bands, e);
    for (size_t i = 0; i < tacet_train_nodes(m->train); i++)
        if (m->mode_hz[i] < tacet_order_hz(ORDER_LEAST, range[1])) hz = fmax(hz, m->mode_hz[i]);
    double wanted = fmax(ORDER_MARGIN * hz / tacet_order_hz(1, range[0]), bands);
    double order = fmin(fmax(ceil(wanted), ORDER_LEAST), TACET_ORDER_MOST);
    m->highest_order = isnan(screen->highest_order) ? fmax(order, bands) : screen->highest_order;
    m->order_limited = isnan(screen->highest_order) && wanted > m->highest_order;
    return status;
}

static tacet_status assemble_judgement(tacet_model *m, tacet_error *e)
{
    const tacet_study *s = m->study;
    if (s->n_bands > TACET_BANDS_MOST || s->n_limits > TACET_LIMITS_MOST)
        return tacet_fail(e, TACET_BAD_INPUT, "%zu bands and %zu limits; at most %d and %d",
                          s->n_bands, s->n_limits, TACET_BANDS_MOST, TACET_LIMITS_MOST);
    m->bands = tacet_arena_alloc(m->arena, (s->n_bands + 1) * sizeof *m->bands);
    m->limits = tacet_arena_alloc(m->arena, (s->n_limits + 1) * sizeof *m->limits);
    m->reference = tacet_arena_alloc(m->arena, (s->n_bands + 1) * sizeof *m->reference);
    m->cyclic = tacet_arena_alloc(m->arena, (s->n_bands + 1) * sizeof *m->cyclic);
    if (!m->bands || !m->limits || !m->reference || !m->cyclic)
        return tacet_fail(e, TACET_NO_MEMORY, "no memory for the model");
    for (size_t i = 0; i < s->n_bands; i++) {
        tacet_status status = tacet_band_create(&s->bands[i], s->screen.reserve_db, m->train,
                                                &s->body, &m->bands[i], e);
        if (status != TACET_OK) return status;
    }
    for (size_t i = 0; i < s->n_limits; i++) {
        tacet_status status =
            tacet_limit_create(&s->limits[i], m->train, &s->body, &m->limits[i], e);
        if (status != TACET_OK) return status;
    }
    m->n_bands = s->n_bands;
    m->n_limits = s->n_limits;
    return TACET_OK;
}

// Transforms of repeats of 1, 2, .. cycles, as many as the study's longest word may make.
static tacet_status assemble_even_transforms(tacet_model *m, unsigned cylinders, unsigned strokes)
{
    unsigned most = m->study->screen.densities.longest;
    if (most > EVEN_CYCLES) most = EVEN_CYCLES;
    for (unsigned cycles = 1; cycles <= most; cycles++) {
        size_t opportunities = (size_t)cycles * cylinders, times = 2;
        size_t wanted = PEAK_OVERSAMPLE * tacet_model_lines(m, cycles * strokes / 2);
        while (times * opportunities < wanted && times * 3 / 2 * opportunities < wanted)
            times *= 2;
        if (times * opportunities < wanted) times = times * 3 / 2;
        tacet_status status = tacet_transform_create(times * opportunities, &m->even[cycles - 1]);
        if (status != TACET_OK) return status;
    }
    return TACET_OK;
}

// A word of one letter a cylinder that leaves one out: its repeat is one cycle.
static tacet_status assemble_one_dead(tacet_model *m, unsigned n, unsigned strokes, tacet_error *e)
{
    if (n < 2) return TACET_OK;
    m->one_dead = tacet_arena_alloc(m->arena, n * sizeof(tacet_roll *));
    if (!m->one_dead) return tacet_fail(e, TACET_NO_MEMORY, "no memory for the model");
    memset(m->one_dead, 0, n * sizeof(tacet_roll *));
    for (unsigned slot = 0; slot < n; slot++) {
        tacet_pattern p = {.length = n};
        for (unsigned k = 0; k < n; k++)
            p.tenths[k] = k == slot ? 0 : 10;
        tacet_status status = tacet_roll_create(&p, n, strokes, &m->one_dead[slot], e);
        if (status != TACET_OK) return status;
        m->one_dead[slot]->fault = true;
    }
    return TACET_OK;
}

static tacet_status assemble_lines(tacet_model *m, tacet_error *e)
{
    unsigned n = tacet_engine_cylinders(m->engine), strokes = tacet_engine_strokes(m->engine);
    tacet_pattern fire = {.length = 1, .tenths = {10}};
    tacet_status status = tacet_roll_create(&fire, n, strokes, &m->all_fire, e);
    if (status != TACET_OK) return status;
    status = assemble_one_dead(m, n, strokes, e);
    if (status == TACET_OK) status = choose_highest_order(m, e);
    if (status != TACET_OK) return status;
    m->most_revolutions = TACET_PATTERN_LONGEST * strokes / 2;
    m->most_lines = tacet_model_lines(m, m->most_revolutions);
    size_t most = tacet_transform_length(m->most_lines, PEAK_OVERSAMPLE);
    for (size_t i = 0; i < TRANSFORM_KINDS && (size_t)1 << (TRANSFORM_FIRST + i) <= most; i++) {
        status = tacet_transform_create((size_t)1 << (TRANSFORM_FIRST + i), &m->transform[i]);
        if (status != TACET_OK) return tacet_fail(e, status, "no memory for the transforms");
    }
    status = assemble_even_transforms(m, n, strokes);
    if (status != TACET_OK) return tacet_fail(e, status, "no memory for the transforms");
    if (model_transform(m, m->most_lines, PEAK_OVERSAMPLE)) return TACET_OK;
    status = tacet_fail(e, TACET_BAD_INPUT, "highest order %g; at most %d lines in a repeat",
                        m->highest_order, 1 << (TRANSFORM_FIRST + TRANSFORM_KINDS - 4));
    return blame(m, "screen.highest_order", status, e);
}

tacet_status tacet_model_create(const tacet_study *s, tacet_model **out, tacet_error *e)
{
    tacet_model *m = calloc(1, sizeof *m);
    tacet_status status = TACET_NO_MEMORY;
    if (!m || !(m->arena = tacet_arena_create())) {
        (void)tacet_fail(e, TACET_NO_MEMORY, "no memory for the model");
        goto failed;
    }
    m->study = s;
    status = tacet_engine_create(&s->engine, &m->engine, e);
    if (status == TACET_OK) status = assemble_train(m, e);
    if (status == TACET_OK && tacet_body_def_given(&s->body))
        status = tacet_body_create(&s->body, m->engine, &m->body, e);
    if (status == TACET_OK) status = assemble_judgement(m, e);
    if (status == TACET_OK) status = assemble_lines(m, e);
    if (status != TACET_OK) goto failed;
    *out = m;
    return TACET_OK;
failed:
    tacet_model_destroy(m);
    return status;
}

void tacet_model_watch(tacet_model *m, const volatile int *stop)
{
    m->stop = stop;
}

static bool stopped(const tacet_model *m)
{
    return m->stop && *m->stop;
}

static tacet_status asked_to_stop(tacet_error *e)
{
    return tacet_fail(e, TACET_STOPPED, "stopped while the model was prepared");
}

// What depends on no stiffness, and what the limits hang on, is the other model's.
static void borrow(tacet_model *m, const tacet_model *from)
{
    m->all_fire = from->all_fire;
    m->one_dead = from->one_dead;
    m->highest_order = from->highest_order;
    m->highest_band_hz = from->highest_band_hz;
    m->order_limited = from->order_limited;
    m->most_revolutions = from->most_revolutions;
    m->most_lines = from->most_lines;
    memcpy(m->transform, from->transform, sizeof m->transform);
    memcpy(m->even, from->even, sizeof m->even);
    for (size_t b = 0; b < m->n_bands; b++)
        m->reference[b] = from->reference[b];
}

tacet_status tacet_model_create_beside(const tacet_model *of, const tacet_study *s,
                                       tacet_model **out, tacet_error *e)
{
    if (!of->prepared || s->n_bands != of->n_bands || s->n_limits != of->n_limits)
        return tacet_fail(e, TACET_BAD_INPUT, "only beside a prepared model of the same bands");
    tacet_model *m = calloc(1, sizeof *m);
    tacet_workspace *w = NULL;
    tacet_status status = TACET_NO_MEMORY;
    if (!m || !(m->arena = tacet_arena_create())) {
        (void)tacet_fail(e, TACET_NO_MEMORY, "no memory for the model");
        goto failed;
    }
    m->study = s;
    m->beside = true;
    m->engine = of->engine;
    status = assemble_train(m, e);
    if (status == TACET_OK && tacet_body_def_given(&s->body))
        status = tacet_body_create(&s->body, m->engine, &m->body, e);
    if (status == TACET_OK) status = assemble_judgement(m, e);
    if (status != TACET_OK) goto failed;
    borrow(m, of);
    status = workspace_build(m, &w);
    if (status != TACET_OK) (void)tacet_fail(e, status, "no memory for the model");
    if (status == TACET_OK) status = dispersion_prepare(m, w, e);
    tacet_workspace_destroy(w);
    if (status != TACET_OK) goto failed;
    m->prepared = true;
    *out = m;
    return TACET_OK;
failed:
    tacet_model_destroy(m);
    return status;
}

// All-fire levels at the study's demand at every screened speed; the worst of each band is its
// reference.
static tacet_status prepare_references(tacet_model *m, tacet_workspace *w, tacet_error *e)
{
    const tacet_screen_def *screen = &m->study->screen;
    for (size_t b = 0; b < m->n_bands; b++)
        m->reference[b] = NAN;
    for (size_t i = 0; i < screen->n_speeds; i++) {
        double speed = screen->speeds_rad_per_s[i];
        tacet_condition c = {.speed_rad_per_s = speed, .roll = m->all_fire};
        c.demand_Nm = tacet_model_demand(m, speed);
        if (stopped(m)) return asked_to_stop(e);
        tacet_duty duty;
        tacet_solver_note note;
        tacet_band_level level[TACET_BANDS_MOST];
        tacet_status status = condition_levels(w, &c, TACET_LEVEL_RIPPLE, &duty, &note, level);
        if (status == TACET_NO_MEMORY) return tacet_fail(e, status, "no memory for a condition");
        if (status != TACET_OK || !duty.reachable) continue; // no reference from this speed
        for (size_t b = 0; b < m->n_bands; b++)
            m->reference[b] = fmax(m->reference[b], level[b].dispersed); // fmax passes over NAN
    }
    return TACET_OK;
}

tacet_status tacet_model_prepare(tacet_model *m, tacet_error *e)
{
    double range[2];
    speed_range(m->study, range);
    tacet_status status =
        tacet_engine_prepare(m->engine, (1 - SPEED_MARGIN) * range[0],
                             (1 + SPEED_MARGIN) * range[1], m->study->engine.skip.longest_run, e);
    if (status != TACET_OK) return status;
    if (stopped(m)) return asked_to_stop(e);
    tacet_workspace *w = NULL;
    status = workspace_build(m, &w);
    if (status != TACET_OK)
        return tacet_fail(e, status, "preparing the model: %s", tacet_status_text(status));
    status = dispersion_prepare(m, w, e);
    if (status == TACET_OK) status = prepare_references(m, w, e);
    if (status == TACET_OK && stopped(m)) status = asked_to_stop(e);
    tacet_workspace_destroy(w);
    m->prepared = status == TACET_OK;
    return status;
}

// What a model beside another borrows.
static void destroy_own(tacet_model *m)
{
    for (size_t i = 0; i < TRANSFORM_KINDS; i++)
        tacet_transform_destroy(m->transform[i]);
    for (size_t i = 0; i < EVEN_CYCLES; i++)
        tacet_transform_destroy(m->even[i]);
    tacet_roll_destroy(m->all_fire);
    for (unsigned slot = 0; m->one_dead && slot < tacet_engine_cylinders(m->engine); slot++)
        tacet_roll_destroy(m->one_dead[slot]);
    tacet_engine_destroy(m->engine);
}

void tacet_model_destroy(tacet_model *m)
{
    if (!m) return;
    if (!m->beside) destroy_own(m);
    tacet_body_destroy(m->body);
    tacet_train_destroy(m->train);
    tacet_arena_destroy(m->arena);
    free(m);
}

const tacet_transform *model_transform(const tacet_model *m, size_t n_lines, unsigned oversample)
{
    size_t n = tacet_transform_length(n_lines, oversample), i = 0;
    while (i < TRANSFORM_KINDS && (size_t)1 << (TRANSFORM_FIRST + i) < n)
        i++;
    return i < TRANSFORM_KINDS ? m->transform[i] : NULL;
}

const tacet_transform *model_torque_transform(const tacet_model *m, unsigned revolutions)
{
    unsigned cycles = revolutions * 2 / tacet_engine_strokes(m->engine);
    if (cycles >= 1 && cycles <= EVEN_CYCLES && m->even[cycles - 1]) return m->even[cycles - 1];
    return model_transform(m, tacet_model_lines(m, revolutions), PEAK_OVERSAMPLE);
}

const tacet_study *tacet_model_study(const tacet_model *m)
{
    return m->study;
}

const tacet_body *tacet_model_body(const tacet_model *m)
{
    return m->body;
}

const tacet_engine *tacet_model_engine(const tacet_model *m)
{
    return m->engine;
}

const tacet_train *tacet_model_train(const tacet_model *m)
{
    return m->train;
}

size_t tacet_model_bands(const tacet_model *m)
{
    return m->n_bands;
}

const tacet_band *tacet_model_band(const tacet_model *m, size_t i)
{
    return &m->bands[i];
}

size_t tacet_model_limits(const tacet_model *m)
{
    return m->n_limits;
}

const tacet_limit *tacet_model_limit(const tacet_model *m, size_t i)
{
    return &m->limits[i];
}

double tacet_model_highest_order(const tacet_model *m, bool *limited)
{
    if (limited) *limited = m->order_limited;
    return m->highest_order;
}

double tacet_model_reference(const tacet_model *m, size_t band)
{
    return m->prepared ? m->reference[band] : NAN;
}

double tacet_model_demand(const tacet_model *m, double speed_rad_per_s)
{
    // the way from rpm and back is not exact
    double rpm = round(60e6 * tacet_order_hz(1, speed_rad_per_s)) / 1e6;
    return tacet_curve_at(&m->study->screen.brake_torque_Nm, rpm);
}

size_t tacet_model_lines(const tacet_model *m, unsigned revolutions)
{
    return (size_t)ceil(m->highest_order * revolutions);
}

size_t tacet_model_throws(const tacet_model *m)
{
    return m->n_throws;
}

size_t tacet_model_throw_node(const tacet_model *m, size_t throw_index)
{
    return m->throw_node[throw_index];
}

const tacet_roll *tacet_model_all_fire(const tacet_model *m)
{
    return m->all_fire;
}

const double *tacet_model_mode_hz(const tacet_model *m)
{
    return m->mode_hz;
}

const tacet_roll *tacet_model_one_dead(const tacet_model *m, unsigned slot)
{
    return m->one_dead && slot < tacet_engine_cylinders(m->engine) ? m->one_dead[slot] : NULL;
}
