// Whole screens, through the tables that are shown.
#include "values.h"
#include <math.h>
#include <string.h>

// Tables and the columns that name a row; rows of one name are counted.
static const struct {
    const char *table, *by[2];
} tables[] = {
    {"runs", {"from_rpm", NULL}},       {"ranking", {"speed_rpm", NULL}},
    {"no-go", {"candidate", "band"}},   {"summary", {"candidate", NULL}},
    {"agreement", {"candidate", NULL}},
};

static const char *name_of(const tacet_table *t, size_t row, const char *column, golden_page *out)
{
    for (size_t c = 0; column && c < t->n_columns; c++) {
        if (strcmp(t->columns[c].name, column) != 0) continue;
        const tacet_table_cell *cell = &t->cells[row * t->n_columns + c];
        return t->columns[c].text ? golden_text(out, " %s", cell->text)
                                  : golden_text(out, " %g", cell->number);
    }
    if (column) golden_stop("table %s has no column %s", t->name, column);
    return "";
}

static void put_row(const tacet_table *t, size_t row, golden_page *out)
{
    for (size_t c = 0; c < t->n_columns; c++) {
        const tacet_table_cell *cell = &t->cells[row * t->n_columns + c];
        if (t->columns[c].text)
            golden_put_text(out, t->name, t->columns[c].name, cell->text);
        else
            golden_put_number(out, t->name, t->columns[c].name, cell->number);
    }
}

static void put_table(const tacet_table *t, const char *const by[2], golden_page *out)
{
    for (size_t i = 0; i < t->n_rows; i++) {
        const char *name = golden_text(out, "%s%s%s", t->name, name_of(t, i, by[0], out),
                                       name_of(t, i, by[1], out));
        const char *head = name;
        for (int k = 2; golden_find(out, head); k++)
            head = golden_text(out, "%s, %d", name, k);
        golden_begin(out, head);
        put_row(t, i, out);
    }
}

static tacet_screen *run(const golden_study *s)
{
    tacet_error e = {.text = ""};
    tacet_screen *screen = NULL;
    tacet_problems *problems = tacet_problems_create();
    if (!problems || tacet_screen_run(s->model, NULL, &screen, problems, &e) != TACET_OK)
        golden_stop("the screen failed: %s", e.text);
    tacet_problems_destroy(problems);
    return screen;
}

void golden_screen(const golden_study *s, golden_page *out)
{
    tacet_screen *screen = run(s);
    golden_begin(out, "screen");
    golden_put_number(out, "effort", "conditions", (double)screen->n_cells);
    golden_put_number(out, "effort", "solves", (double)screen->n_solves);
    golden_put_number(out, "effort", "failed", (double)screen->n_failed);
    for (size_t i = 0; i < sizeof tables / sizeof *tables; i++) {
        tacet_table t;
        const tacet_screen_table *table = tacet_screen_table_find(tables[i].table);
        if (!table || table->build(s->model, screen, out->arena, &t) != TACET_OK)
            golden_stop("no table %s", tables[i].table);
        put_table(&t, tables[i].by, out);
    }
    tacet_screen_destroy(screen);
}
