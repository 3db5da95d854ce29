#include "standin.h"
#include <math.h>
#include <stdlib.h>

#define RPM 0.10471975511965977

struct tacet_model standin(double step_rpm, tacet_arena *a)
{
    static const char *densities[] = {"1/2", "3/7", "1"};
    struct tacet_model m = {.mode_hz = {0, 22, 140}, .scale = 0.3};
    tacet_screen_def *s = &m.study.screen;
    s->n_speeds = (size_t)(1000 / step_rpm) + 1;
    s->speeds_rad_per_s = tacet_arena_alloc(a, s->n_speeds * sizeof(double));
    for (size_t i = 0; i < s->n_speeds; i++)
        s->speeds_rad_per_s[i] = (900 + step_rpm * (double)i) * RPM;
    s->densities = (tacet_densities_def){.list = densities, .n_list = 3};
    s->reserve_db = 3;
    s->least_clear_rad_per_s = 150 * RPM;
    s->least_saving = 0.01;
    s->referee = 4;
    m.study.path = "standin.yaml";
    m.study.folder = "";
    m.study.engine.skip.longest_run = 12;
    m.band[0] = (tacet_band){.name = "coupling",
                             .counted_low_hz = 17 * 0.97,
                             .counted_high_hz = 27 * 1.03,
                             .limit_rms = 1};
    m.band[1] = (tacet_band){
        .name = "roll", .counted_low_hz = 11 * 0.95, .counted_high_hz = 18 * 1.05, .limit_rms = 1};
    for (int i = 0; i < 6; i++)
        m.may_skip[i] = true;
    return m;
}

// ---- engine -----------------------------------------------------------------------------------
static const struct tacet_model *of(const tacet_engine *en)
{
    return (const struct tacet_model *)(const void *)en;
}
unsigned tacet_engine_cylinders(const tacet_engine *en)
{
    (void)en;
    return 6;
}
unsigned tacet_engine_strokes(const tacet_engine *en)
{
    (void)en;
    return 4;
}
unsigned tacet_engine_number(const tacet_engine *en, unsigned slot)
{
    static const unsigned number[] = {1, 5, 3, 6, 2, 4};
    (void)en;
    return number[slot];
}
bool tacet_engine_may_skip(const tacet_engine *en, unsigned slot)
{
    return of(en)->may_skip[slot];
}

// ---- train and judge's parsing: not used ------------------------------------------------------
size_t tacet_train_nodes(const tacet_train *t)
{
    (void)t;
    return 3;
}
double tacet_band_guard(const tacet_band_def *d)
{
    return d->guard;
}
tacet_status tacet_quantity_parse(const char *text, const tacet_train *t,
                                  const tacet_body_def *body, tacet_quantity_ref *out,
                                  tacet_error *e)
{
    (void)text, (void)t, (void)body, (void)out;
    return tacet_fail(e, TACET_BAD_INPUT, "not used");
}

// ---- model ------------------------------------------------------------------------------------
const tacet_quantity *tacet_quantity_find(const char *name)
{
    (void)name;
    return NULL;
}

const tacet_study *tacet_model_study(const tacet_model *m)
{
    return &m->study;
}
const tacet_engine *tacet_model_engine(const tacet_model *m)
{
    return (const tacet_engine *)(const void *)m;
}
const tacet_train *tacet_model_train(const tacet_model *m)
{
    return (const tacet_train *)(const void *)m;
}
const tacet_roll *tacet_model_all_fire(const tacet_model *m)
{
    (void)m;
    return NULL;
}

const tacet_body *tacet_model_body(const tacet_model *m)
{
    (void)m;
    return NULL;
}

size_t tacet_body_mounts(const tacet_body *b)
{
    (void)b;
    return 0;
}

size_t tacet_model_bands(const tacet_model *m)
{
    (void)m;
    return 2;
}
const tacet_band *tacet_model_band(const tacet_model *m, size_t i)
{
    return &m->band[i];
}
size_t tacet_model_limits(const tacet_model *m)
{
    (void)m;
    return 0;
}
const tacet_limit *tacet_model_limit(const tacet_model *m, size_t i)
{
    (void)m, (void)i;
    return NULL;
}
size_t tacet_model_lines(const tacet_model *m, unsigned revolutions)
{
    (void)m;
    return 4 * (size_t)revolutions;
}
double tacet_model_demand(const tacet_model *m, double speed_rad_per_s)
{
    (void)m;
    return 400 - speed_rad_per_s;
}
const double *tacet_model_mode_hz(const tacet_model *m)
{
    return m->mode_hz;
}

// ---- workspace --------------------------------------------------------------------------------
struct tacet_workspace {
    tacet_arena *arena;
    tacet_spectrum spectrum;
};
tacet_status tacet_workspace_create(const tacet_model *m, tacet_workspace **out)
{
    (void)m;
    tacet_workspace *w = calloc(1, sizeof *w);
    if (w) w->arena = tacet_arena_create();
    if (w && w->arena && tacet_spectrum_init(&w->spectrum, 4 * 64, w->arena) == TACET_OK) {
        *out = w;
        return TACET_OK;
    }
    tacet_workspace_destroy(w);
    return TACET_NO_MEMORY;
}
void tacet_workspace_destroy(tacet_workspace *w)
{
    if (!w) return;
    tacet_arena_destroy(w->arena);
    free(w);
}
tacet_status tacet_workspace_quantity(tacet_workspace *w, tacet_quantity_ref q,
                                      const tacet_spectrum **out, tacet_peaks *peaks)
{
    (void)q, (void)peaks;
    *out = &w->spectrum;
    return TACET_OK;
}

// Lines of the word at orders m n / (2 L), larger by 10 % where the first letter fires.
static void respond(const tacet_model *m, const tacet_condition *c, tacet_workspace *w)
{
    const tacet_roll *r = c->roll;
    double complex line[TACET_PATTERN_LONGEST];
    tacet_pattern_spectrum(&r->pattern, line);
    w->spectrum.revolutions = r->revolutions;
    w->spectrum.n_lines = tacet_model_lines(m, r->revolutions);
    tacet_spectrum_zero(&w->spectrum);
    for (size_t k = 1;; k++) {
        size_t h = k * r->revolutions * r->cylinders / 2 / r->pattern.length;
        if (h > w->spectrum.n_lines) break;
        double f = (double)h / r->revolutions * c->speed_rad_per_s / (120 * RPM / 2);
        double ratio = f / m->mode_hz[1];
        double gain = m->scale / hypot(1 - ratio * ratio, 0.15);
        if (r->pattern.tenths[0]) gain *= 1.1;
        w->spectrum.line[h] = sqrt(2) * gain * line[k % r->pattern.length] / r->pattern.length;
    }
}

static void judge(const tacet_model *m, double speed, const tacet_spectrum *s, tacet_row *row)
{
    row->n_bands = 2;
    row->worst_margin_db = INFINITY;
    row->limiting_limit = -1;
    for (int b = 0; b < 2; b++) {
        tacet_band_result *result = &row->bands[b];
        double ms = 0, largest = 0;
        for (size_t h = 1; h <= s->n_lines; h++) {
            double f = (double)h / s->revolutions * speed / (60 * RPM), a = cabs(s->line[h]);
            if (f < m->band[b].counted_low_hz || f > m->band[b].counted_high_hz) continue;
            ms += a * a / 2;
            if (a <= largest) continue;
            largest = a;
            result->level.leading_order = (double)h / s->revolutions;
            result->level.leading_line = h;
        }
        result->limit = 1;
        result->level.nominal = sqrt(ms);
        result->level.leading_peak = largest;
        ms += m->uneven * m->uneven;
        result->level.dispersed = sqrt(ms);
        result->margin_db = ms > 1e-18 ? -10 * log10(ms) : NAN;
        result->verdict = result->margin_db < 0   ? TACET_OVER
                          : result->margin_db < 3 ? TACET_NEAR
                                                  : TACET_CLEAR;
        if (row->worst < result->verdict) row->worst = result->verdict;
        if (!(result->margin_db < row->worst_margin_db)) continue;
        row->worst_margin_db = result->margin_db;
        row->limiting_band = b;
    }
    if (isinf(row->worst_margin_db)) row->worst_margin_db = NAN;
}

static void no_verdict(tacet_row *row, tacet_outcome outcome)
{
    row->outcome = outcome;
    row->worst = TACET_NO_VERDICT;
    row->worst_margin_db = NAN;
    row->n_bands = 2;
    for (int b = 0; b < 2; b++)
        row->bands[b] = (tacet_band_result){.verdict = TACET_NO_VERDICT, .margin_db = NAN};
}

tacet_status tacet_solve(const tacet_model *m, const tacet_condition *c, tacet_level level,
                         tacet_workspace *w, tacet_row *out)
{
    (void)level;
    struct tacet_model *counted = (struct tacet_model *)(uintptr_t)m;
    if (++counted->solves == m->fails_after) return TACET_NO_MEMORY;
    double density = (double)c->roll->fires / c->roll->opportunities;
    *out = (tacet_row){.id = c->id,
                       .speed_rad_per_s = c->speed_rad_per_s,
                       .demand_Nm = c->demand_Nm,
                       .limiting_band = -1,
                       .limiting_limit = -1};
    out->fuel_to_all_fire = 0.8 + 0.2 * density;
    out->duty.fuel_kg_per_s = 1e-3 * out->fuel_to_all_fire;
    if (density < m->least_density)
        no_verdict(out, TACET_UNREACHABLE);
    else if (fabs(c->speed_rad_per_s / RPM - m->fails_at_rpm) < 1)
        no_verdict(out, TACET_FAILED);
    else {
        respond(m, c, w);
        judge(m, c->speed_rad_per_s, &w->spectrum, out);
    }
    return TACET_OK;
}

tacet_status tacet_solve_referee(const tacet_model *m, const tacet_condition *c, tacet_workspace *w,
                                 tacet_agreement *out)
{
    (void)c, (void)w;
    ((struct tacet_model *)(uintptr_t)m)->referees++;
    *out = (tacet_agreement){.settled = true, .same_model = 1e-9};
    return TACET_OK;
}
