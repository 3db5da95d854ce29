// The model of a study in some fifteen lines, or as JSON.
#include "cli/check.h"
#include <math.h>
#include <string.h>

#define LABEL        "  %-11s"
#define MODES_SHOWN  4 // of the criticals
#define ORDERS_SHOWN 6

static const char *number(double value, int digits, char out[TACET_NUMBER_TEXT])
{
    return tacet_number_format_short(value, digits, out);
}

static const char *plural(size_t n)
{
    return n == 1 ? "" : "s";
}

static void add_revolutions(check_model *m, unsigned revolutions)
{
    size_t i = m->n_revolutions;
    for (size_t k = 0; k < m->n_revolutions; k++)
        if (m->revolutions[k] == revolutions) return;
    for (; i > 0 && m->revolutions[i - 1] > revolutions; i--)
        m->revolutions[i] = m->revolutions[i - 1];
    m->revolutions[i] = revolutions;
    m->n_revolutions++;
}

int check_gather(const cli_session *s, check_model *m)
{
    const tacet_engine *en = tacet_model_engine(s->model);
    tacet_candidate *c = NULL;
    *m = (check_model){.s = s};
    int code = cli_study_candidates(s, &c, &m->n_candidates);
    if (code != CLI_DONE) return code;
    m->revolutions = tacet_arena_alloc(s->arena, (m->n_candidates + 1) * sizeof *m->revolutions);
    for (size_t i = 0; m->revolutions && i < m->n_candidates; i++) {
        m->n_refused += c[i].refused != NULL;
        if (!c[i].refused) add_revolutions(m, c[i].roll[0]->revolutions);
    }
    tacet_candidates_destroy(c, m->n_candidates);
    if (!m->revolutions) return cli_failed(TACET_NO_MEMORY, NULL);
    m->inertia_kgm2 = tacet_train_total_inertia(tacet_model_train(s->model));
    m->reciprocating_kgm2 = tacet_engine_mean_inertia(en) * tacet_engine_cylinders(en);
    return cli_leading_orders(s, &m->order, &m->n_orders);
}

// Without the rounding of the way to rad and back.
static double firing_deg(const tacet_engine *en, unsigned slot)
{
    return round(tacet_engine_firing_angle(en, slot) / tacet_unit_factor("deg") * 1e9) / 1e9;
}

static void write_engine(const check_model *m)
{
    const tacet_engine *en = tacet_model_engine(m->s->model);
    const tacet_engine_def *d = tacet_engine_def_of(en);
    char a[TACET_NUMBER_TEXT], b[TACET_NUMBER_TEXT], c[TACET_NUMBER_TEXT], e[TACET_NUMBER_TEXT],
        f[TACET_NUMBER_TEXT];
    printf(LABEL "%u cylinder%s, %u strokes, %s L: bore %s, stroke %s, rod %s mm, ratio %s\n",
           "engine", tacet_engine_cylinders(en), plural(tacet_engine_cylinders(en)),
           tacet_engine_strokes(en), number(tacet_engine_displacement(en) * 1e3, 4, a),
           number(d->bore_m * 1e3, 5, b), number(d->stroke_m * 1e3, 5, c),
           number(d->rod_length_m * 1e3, 5, e), number(d->compression_ratio, 4, f));
    printf(LABEL, "firing");
    for (unsigned slot = 0; slot < tacet_engine_cylinders(en); slot++)
        printf("%s%u at %s", slot ? ", " : "cylinder ", tacet_engine_number(en, slot),
               number(firing_deg(en, slot), 5, a));
    printf(" deg\n");
}

static void write_train(const check_model *m)
{
    const tacet_train *t = tacet_model_train(m->s->model);
    const double *hz = tacet_model_mode_hz(m->s->model);
    char a[TACET_NUMBER_TEXT], b[TACET_NUMBER_TEXT], c[TACET_NUMBER_TEXT];
    printf(LABEL
           "%zu node%s, %zu link%s, brake torque at %s, load at %s (turns %s times the crank)\n",
           "train", tacet_train_nodes(t), plural(tacet_train_nodes(t)), tacet_train_links(t),
           plural(tacet_train_links(t)), tacet_train_node_name(t, tacet_train_flywheel(t)),
           tacet_train_node_name(t, tacet_train_load(t)),
           number(tacet_train_node_ratio(t, tacet_train_load(t)), 4, a));
    printf(LABEL "%s kg m2 at the crank; %s without the reciprocating share of %s\n", "inertia",
           number(m->inertia_kgm2, 4, a), number(m->inertia_kgm2 - m->reciprocating_kgm2, 4, b),
           number(m->reciprocating_kgm2, 4, c));
    printf(LABEL, "modes");
    for (size_t i = 1; i < tacet_train_nodes(t); i++)
        printf("%s%s", i > 1 ? ", " : "", number(hz[i], 4, a));
    printf("%s\n", tacet_train_nodes(t) > 1 ? " Hz" : "none: one node alone does not twist");
}

// The lowest orders that meet a mode; how many do.
static size_t write_critical(const check_model *m, const char *label, double hz)
{
    size_t met = 0;
    char a[TACET_NUMBER_TEXT];
    for (size_t o = 0; o < m->n_orders; o++) {
        double rpm = cli_critical_rpm(m->s, m->order[o].order, hz);
        if (!isfinite(rpm) || ++met > ORDERS_SHOWN) continue;
        if (met == 1) printf(LABEL "%s Hz: ", label, number(hz, 4, a));
        printf("%sorder %s at %s", met > 1 ? ", " : "", m->order[o].order_text,
               number(round(rpm), 6, a));
    }
    if (met > 0) printf(" rpm%s\n", met > ORDERS_SHOWN ? ", .." : "");
    return met;
}

// Of the lowest modes that are met within the screened speeds; 'tacet modes' has them all.
static void write_criticals(const check_model *m)
{
    const double *hz = tacet_model_mode_hz(m->s->model);
    size_t n_modes = tacet_train_nodes(tacet_model_train(m->s->model)), shown = 0;
    for (size_t k = 1; k < n_modes && shown < MODES_SHOWN; k++)
        shown += write_critical(m, shown ? "" : "criticals", hz[k]) > 0;
    if (!shown) printf(LABEL "none within the screened speeds\n", "criticals");
}

static void write_lines(const check_model *m)
{
    bool limited;
    char a[TACET_NUMBER_TEXT];
    double highest = tacet_model_highest_order(m->s->model, &limited);
    printf(LABEL "orders up to %s%s; in a repeat", "lines", number(highest, 4, a),
           limited ? " (higher modes are cut)" : "");
    for (size_t i = 0; i < m->n_revolutions; i++)
        printf("%s %zu%s in %u%s", i ? "," : "", tacet_model_lines(m->s->model, m->revolutions[i]),
               i ? "" : " lines", m->revolutions[i], i ? "" : " revolutions");
    printf("\n");
}

static void write_judging(const check_model *m)
{
    char a[TACET_NUMBER_TEXT], b[TACET_NUMBER_TEXT];
    const tacet_model *model = m->s->model;
    for (size_t i = 0; i < tacet_model_bands(model); i++) {
        const tacet_band *band = tacet_model_band(model, i);
        printf(LABEL, i ? "" : "bands");
        tacet_write_clean(stdout, band->name);
        printf(" %s-%s Hz, ", number(band->low_hz, 5, a), number(band->high_hz, 5, b));
        tacet_write_clean(stdout, m->s->study->bands[i].quantity);
        printf("\n");
    }
    for (size_t i = 0; i < tacet_model_limits(model); i++) {
        const tacet_limit *limit = tacet_model_limit(model, i);
        printf(LABEL, i ? "" : "limits");
        tacet_write_clean(stdout, limit->name);
        const char *unit = tacet_model_limit_unit(model, i);
        bool plain = !unit || strcmp(unit, "1") == 0;
        printf(" %s%s", number(limit->value, 5, a), plain ? "" : " ");
        tacet_write_clean(stdout, plain ? "" : unit);
        printf("\n");
    }
}

static void write_screen(const check_model *m)
{
    double range[2];
    char a[TACET_NUMBER_TEXT], b[TACET_NUMBER_TEXT], c[TACET_NUMBER_TEXT], d[TACET_NUMBER_TEXT];
    double rpm = tacet_unit_factor("rpm");
    cli_screened_rpm(m->s, range);
    size_t patterns = m->n_candidates - m->n_refused, speeds = m->s->study->screen.n_speeds;
    number(tacet_model_demand(m->s->model, range[0] * rpm), 4, c);
    number(tacet_model_demand(m->s->model, range[1] * rpm), 4, d);
    bool level = strcmp(c, d) == 0;
    printf(LABEL "%zu pattern%s at %zu speed%s, %s-%s rpm, %s%s%s N m", "screen", patterns,
           plural(patterns), speeds, plural(speeds), number(range[0], 6, a), number(range[1], 6, b),
           c, level ? "" : " to ", level ? "" : d);
    if (m->n_refused) printf("; %zu more cannot run on this engine", m->n_refused);
    printf("\n");
}

void check_write_text(const check_model *m)
{
    tacet_write_clean(stdout, cli_study_name(m->s->study->path));
    size_t warnings = tacet_problems_warnings(m->s->problems);
    if (warnings)
        printf(": no errors, %zu warning%s. ", warnings, warnings == 1 ? "" : "s");
    else
        printf(": no problems. ");
    tacet_write_clean(stdout, cli_title(m->s));
    printf("\n");
    write_engine(m);
    write_train(m);
    write_lines(m);
    write_criticals(m);
    write_judging(m);
    write_screen(m);
}

static void put_train(tacet_json *j, const check_model *m)
{
    const tacet_train *t = tacet_model_train(m->s->model);
    const double *hz = tacet_model_mode_hz(m->s->model);
    tacet_json_key(j, "train");
    tacet_json_begin_object(j);
    tacet_json_put_count(j, "nodes", tacet_train_nodes(t));
    tacet_json_put_count(j, "links", tacet_train_links(t));
    tacet_json_put_number(j, "inertia_kgm2", m->inertia_kgm2);
    tacet_json_put_number(j, "reciprocating_kgm2", m->reciprocating_kgm2);
    tacet_json_key(j, "modes_hz");
    tacet_json_begin_array(j);
    for (size_t i = 0; i < tacet_train_nodes(t); i++)
        tacet_json_number(j, hz[i]);
    tacet_json_end_array(j);
    tacet_json_end_object(j);
}

static void put_criticals(tacet_json *j, const check_model *m)
{
    const double *hz = tacet_model_mode_hz(m->s->model);
    tacet_json_key(j, "criticals");
    tacet_json_begin_array(j);
    for (size_t k = 1; k < tacet_train_nodes(tacet_model_train(m->s->model)); k++)
        for (size_t o = 0; o < m->n_orders; o++) {
            double rpm = cli_critical_rpm(m->s, m->order[o].order, hz[k]);
            if (!isfinite(rpm)) continue;
            tacet_json_begin_object(j);
            tacet_json_put_number(j, "hz", hz[k]);
            tacet_json_put_number(j, "order", m->order[o].order);
            tacet_json_put_text(j, "of", m->order[o].of);
            tacet_json_put_number(j, "speed_rpm", rpm);
            tacet_json_end_object(j);
        }
    tacet_json_end_array(j);
}

static void put_judging(tacet_json *j, const check_model *m)
{
    const tacet_model *model = m->s->model;
    tacet_json_key(j, "bands");
    tacet_json_begin_array(j);
    for (size_t i = 0; i < tacet_model_bands(model); i++) {
        const tacet_band *band = tacet_model_band(model, i);
        tacet_json_begin_object(j);
        tacet_json_put_text(j, "name", band->name);
        tacet_json_put_text(j, "quantity", m->s->study->bands[i].quantity);
        tacet_json_put_number(j, "low_hz", band->low_hz);
        tacet_json_put_number(j, "high_hz", band->high_hz);
        tacet_json_put_number(j, "counted_low_hz", band->counted_low_hz);
        tacet_json_put_number(j, "counted_high_hz", band->counted_high_hz);
        tacet_json_end_object(j);
    }
    tacet_json_end_array(j);
    tacet_json_key(j, "limits");
    tacet_json_begin_array(j);
    for (size_t i = 0; i < tacet_model_limits(model); i++) {
        const tacet_limit *limit = tacet_model_limit(model, i);
        tacet_json_begin_object(j);
        tacet_json_put_text(j, "name", limit->name);
        tacet_json_put_text(j, "quantity", m->s->study->limits[i].quantity);
        tacet_json_put_number(j, "value", limit->value);
        tacet_json_put_text(j, "unit", tacet_model_limit_unit(model, i));
        tacet_json_end_object(j);
    }
    tacet_json_end_array(j);
}

void check_put_json(tacet_json *j, const check_model *m)
{
    const tacet_engine *en = tacet_model_engine(m->s->model);
    tacet_json_key(j, "engine");
    tacet_json_begin_object(j);
    tacet_json_put_count(j, "strokes", tacet_engine_strokes(en));
    tacet_json_put_number(j, "displacement_l", tacet_engine_displacement(en) * 1e3);
    tacet_json_key(j, "firing");
    tacet_json_begin_array(j);
    for (unsigned slot = 0; slot < tacet_engine_cylinders(en); slot++) {
        tacet_json_begin_object(j);
        tacet_json_put_count(j, "cylinder", tacet_engine_number(en, slot));
        tacet_json_put_number(j, "angle_deg", firing_deg(en, slot));
        tacet_json_put_text(j, "node", tacet_engine_node(en, slot));
        tacet_json_end_object(j);
    }
    tacet_json_end_array(j);
    tacet_json_end_object(j);
    put_train(j, m);
    tacet_json_put_number(j, "highest_order", tacet_model_highest_order(m->s->model, NULL));
    tacet_json_key(j, "repeats");
    tacet_json_begin_array(j);
    for (size_t i = 0; i < m->n_revolutions; i++) {
        tacet_json_begin_object(j);
        tacet_json_put_count(j, "revolutions", m->revolutions[i]);
        tacet_json_put_count(j, "lines", tacet_model_lines(m->s->model, m->revolutions[i]));
        tacet_json_end_object(j);
    }
    tacet_json_end_array(j);
    put_criticals(j, m);
    put_judging(j, m);
    tacet_json_put_count(j, "patterns", m->n_candidates - m->n_refused);
    tacet_json_put_count(j, "speeds", m->s->study->screen.n_speeds);
}
