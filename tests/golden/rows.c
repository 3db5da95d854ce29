// Rows of single conditions, through the table that holds every column.
#include "values.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>

static void put_cell(golden_page *out, const tacet_table *t, size_t row, size_t column)
{
    const tacet_table_column *c = &t->columns[column];
    const tacet_table_cell *cell = &t->cells[row * t->n_columns + column];
    const char *dot = strrchr(c->name, '.');
    const char *group = dot ? golden_text(out, "%.*s", (int)(dot - c->name), c->name) : "row";
    const char *name = dot ? dot + 1 : c->name;
    if (c->text)
        golden_put_text(out, group, name, cell->text);
    else
        golden_put_number(out, group, name, cell->number);
}

typedef struct {
    tacet_candidate *candidate; // one a condition
    tacet_cell *cell;
    tacet_roll **roll;
    size_t n;
} conditions;

static tacet_level level_of(const char *text)
{
    static const char *const names[] = {"constant", "ripple", "steady"};
    for (int i = 0; i < 3; i++)
        if (strcmp(names[i], text) == 0) return (tacet_level)i;
    golden_stop("'%s' is no level: constant, ripple or steady", text);
}

static void solve(const golden_study *s, const char *head, conditions *c, golden_page *out)
{
    char word[TACET_PATTERN_LONGEST + 1], level[16];
    double rpm, demand_Nm;
    tacet_pattern pattern;
    tacet_error e = {.text = ""};
    const tacet_engine *en = tacet_model_engine(s->model);
    if (sscanf(head, "condition %255s %lf %lf %15s", word, &rpm, &demand_Nm, level) != 4)
        golden_stop("'%s' is not: condition WORD RPM NM LEVEL", head);
    tacet_roll **roll = &c->roll[c->n];
    tacet_status status = tacet_pattern_parse(word, &pattern, &e);
    if (status == TACET_OK)
        status = tacet_roll_create(&pattern, tacet_engine_cylinders(en), tacet_engine_strokes(en),
                                   roll, &e);
    if (status != TACET_OK) golden_stop("%s: %s", head, e.text);
    c->candidate[c->n] =
        (tacet_candidate){.name = golden_text(out, "%s", head), .roll = roll, .n_placements = 1};
    c->cell[c->n].candidate = c->n;
    tacet_condition condition = {
        .speed_rad_per_s = rpm * tacet_unit_factor("rpm"), .demand_Nm = demand_Nm, .roll = *roll};
    if (tacet_solve(s->model, &condition, level_of(level), s->work, &c->cell[c->n].row) != TACET_OK)
        golden_stop("%s: the call failed", head);
    c->n++;
}

static void put_model(const golden_study *s, golden_page *out)
{
    bool limited;
    golden_begin(out, "model");
    golden_put_number(out, "lines", "highest_order", tacet_model_highest_order(s->model, &limited));
    golden_put_text(out, "lines", "limited", limited ? "yes" : "no");
    for (size_t i = 1; i < tacet_train_nodes(tacet_model_train(s->model)); i++)
        golden_put_number(out, golden_text(out, "mode %zu", i), "hz",
                          tacet_model_mode_hz(s->model)[i]);
    for (size_t i = 0; i < tacet_model_bands(s->model); i++)
        golden_put_number(out, tacet_model_band(s->model, i)->name, "reference_rms",
                          tacet_model_reference(s->model, i));
}

void golden_rows(const golden_study *s, const golden_page *wanted, golden_page *out)
{
    size_t most = wanted->n + 1;
    conditions c = {.candidate = tacet_arena_alloc(out->arena, most * sizeof *c.candidate),
                    .cell = tacet_arena_alloc(out->arena, most * sizeof *c.cell),
                    .roll = tacet_arena_alloc(out->arena, most * sizeof *c.roll)};
    if (!c.candidate || !c.cell || !c.roll) golden_stop("out of memory");
    put_model(s, out);
    for (size_t i = 0; i < wanted->n; i++)
        if (strcmp(wanted->record[i].head, "model") != 0) solve(s, wanted->record[i].head, &c, out);
    tacet_screen as_screen = {.arena = out->arena,
                              .candidates = c.candidate,
                              .n_candidates = c.n,
                              .cells = c.cell,
                              .n_cells = c.n};
    tacet_table t;
    if (tacet_screen_table_find("levels")->build(s->model, &as_screen, out->arena, &t) != TACET_OK)
        golden_stop("no table of columns");
    for (size_t i = 0; i < c.n; i++) {
        golden_begin(out, c.candidate[i].name);
        for (size_t k = 0; k < t.n_columns; k++)
            if (strcmp(t.columns[k].name, "candidate") != 0 &&
                strcmp(t.columns[k].name, "placement") != 0 &&
                strcmp(t.columns[k].name, "extra_speed") != 0) // of a screen
                put_cell(out, &t, i, k);
        tacet_roll_destroy(c.roll[i]);
    }
}
