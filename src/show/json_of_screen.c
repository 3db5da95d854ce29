// JSON of a condition and of a screen. A null has a member beside it that says why: outcome and
// reach, verdict and why, or <name>_why.
#include "show/screen.h"
#include "show/writers.h"
#include <math.h>
#include <string.h>

// Columns of the row that stand in an object of their own; all others stand at the top.
static const char *const duty_names[] = {
    "charge_kpa",  "charge_ratio", "fuel_kg_per_h", "fuel_vs_all_fire",  "brake_kw", "pumping_kw",
    "friction_kw", "wall_heat_kw", "exhaust_kw",    "peak_pressure_mpa", NULL};
static const char *const solver_names[] = {"method", "passes", "evaluations", NULL};

static bool is_one_of(const char *name, const char *const *list)
{
    for (; *list; list++)
        if (strcmp(*list, name) == 0) return true;
    return false;
}

typedef struct {
    const tacet_model *m;
    const tacet_condition *c;
    const tacet_row *r;
} source;

static void put_column(tacet_json *j, source s, const tacet_column *column)
{
    char buffer[TACET_COLUMN_BUFFER] = "";
    if (column->type == TACET_COLUMN_TEXT)
        tacet_json_put_text(j, column->name, column->text(s.m, s.c, s.r, buffer));
    else
        tacet_json_put_number(j, column->name, column->number(s.m, s.c, s.r));
}

// Columns of one list, or with `list` NULL those of neither.
static void put_columns(tacet_json *j, source s, const char *const *list)
{
    size_t n;
    const tacet_column *column = tacet_row_columns(&n);
    for (size_t i = 0; i < n; i++) {
        bool elsewhere =
            is_one_of(column[i].name, duty_names) || is_one_of(column[i].name, solver_names);
        if (list ? is_one_of(column[i].name, list) : !elsewhere) put_column(j, s, &column[i]);
    }
}

static void put_bands(tacet_json *j, source s)
{
    size_t n;
    const tacet_band_column *column = tacet_band_columns(&n);
    tacet_json_key(j, "bands");
    tacet_json_begin_array(j);
    for (size_t b = 0; b < s.r->n_bands; b++) {
        tacet_json_begin_object(j);
        tacet_json_put_text(j, "name", tacet_model_band(s.m, b)->name);
        tacet_json_put_text(j, "unit",
                            tacet_model_quantity_unit(s.m, tacet_model_band(s.m, b)->of));
        for (size_t i = 0; i < n; i++) {
            if (column[i].type == TACET_COLUMN_TEXT)
                tacet_json_put_text(j, column[i].name, column[i].text(&s.r->bands[b]));
            else
                tacet_json_put_number(j, column[i].name, column[i].number(&s.r->bands[b]));
        }
        tacet_json_end_object(j);
    }
    tacet_json_end_array(j);
}

static void put_limits(tacet_json *j, source s)
{
    tacet_json_key(j, "limits");
    tacet_json_begin_array(j);
    for (size_t l = 0; l < s.r->n_limits; l++) {
        const tacet_limit_result *result = &s.r->limits[l];
        const tacet_limit *limit = tacet_model_limit(s.m, l);
        bool known = result->verdict != TACET_NO_VERDICT;
        tacet_json_begin_object(j);
        tacet_json_put_text(j, "name", limit->name);
        tacet_json_put_text(j, "unit", tacet_model_limit_unit(s.m, l));
        tacet_json_put_number(j, "limit", limit->value);
        tacet_json_put_number(j, "value", known ? result->value : NAN);
        tacet_json_put_number(j, "margin_db", known ? result->margin_db : NAN);
        tacet_json_put_text(j, "verdict", tacet_verdict_text(result->verdict));
        tacet_json_put_text(j, "why", known ? "" : screen_why_text(result->why));
        tacet_json_end_object(j);
    }
    tacet_json_end_array(j);
}

static void put_agreement(tacet_json *j, const tacet_agreement *a, const char *why_none)
{
    tacet_json_put_number(j, "same_model", a ? a->same_model : NAN);
    tacet_json_put_number(j, "full_model_db", a ? a->full_model_db : NAN);
    tacet_json_put_text(j, "agreement_why", a ? "" : why_none);
}

void tacet_row_json(tacet_json *j, const tacet_model *m, const tacet_condition *c,
                    const tacet_row *r, const tacet_agreement *agreement, const char *why_none)
{
    source s = {m, c, r};
    put_columns(j, s, NULL);
    tacet_json_key(j, "duty");
    tacet_json_begin_object(j);
    put_columns(j, s, duty_names);
    if (!isfinite(r->fuel_to_all_fire))
        tacet_json_put_text(j, "fuel_vs_all_fire_why",
                            r->outcome == TACET_SOLVED ? "all cylinders firing cannot reach it"
                                                       : tacet_outcome_text(r->outcome));
    tacet_json_end_object(j);
    tacet_json_key(j, "solver");
    tacet_json_begin_object(j);
    put_columns(j, s, solver_names);
    if (agreement || why_none) put_agreement(j, agreement, why_none);
    tacet_json_end_object(j);
    put_bands(j, s);
    put_limits(j, s);
}

static void put_conditions(tacet_json *j, const tacet_model *m, const tacet_screen *s)
{
    tacet_json_key(j, "conditions");
    tacet_json_begin_array(j);
    for (size_t i = 0; i < s->n_cells; i++) {
        tacet_condition c = screen_condition(s, i);
        tacet_json_begin_object(j);
        tacet_json_put_text(j, "candidate", screen_candidate(s, i)->name);
        tacet_json_put_count(j, "placement", s->cells[i].placement + 1);
        tacet_json_put_bool(j, "extra_speed", s->cells[i].extra);
        tacet_row_json(j, m, &c, &s->cells[i].row, NULL, NULL);
        tacet_json_end_object(j);
    }
    tacet_json_end_array(j);
}

tacet_status tacet_screen_json(tacet_json *j, const tacet_model *m, const tacet_screen *s)
{
    static const struct {
        const char *key, *table;
    } parts[] = {{"runs", "runs"},   {"candidates", "summary"},  {"ranking", "ranking"},
                 {"no_go", "no-go"}, {"agreement", "agreement"}, {"mounts", "mounts"}};
    const char *const *lines;
    size_t n;
    tacet_arena *a = tacet_arena_create();
    if (!a) return TACET_NO_MEMORY;
    tacet_status status = tacet_screen_summary(m, s, a, &lines, &n);
    if (status == TACET_OK) {
        tacet_json_key(j, "summary");
        tacet_json_begin_array(j);
        for (size_t i = 0; i < n; i++)
            tacet_json_text(j, lines[i]);
        tacet_json_end_array(j);
        tacet_json_put_count(j, "solves", s->n_solves);
        tacet_json_put_count(j, "failed", s->n_failed);
    }
    for (size_t i = 0; status == TACET_OK && i < sizeof parts / sizeof *parts; i++) {
        tacet_table t;
        status = tacet_screen_table_find(parts[i].table)->build(m, s, a, &t);
        if (status != TACET_OK) break;
        tacet_json_key(j, parts[i].key);
        write_rows_json(j, &t);
    }
    if (status == TACET_OK) put_conditions(j, m, s);
    tacet_arena_destroy(a);
    return status;
}
