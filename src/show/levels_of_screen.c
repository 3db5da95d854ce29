// Every condition of a screen with every column: the row's, then each band's and each limit's.
#include "show/screen.h"
#include <math.h>
#include <string.h>

static const tacet_table_column own[] = {
    {"candidate", NULL, true, 0, false, NULL},
    {"placement", NULL, false, 0, false, NULL}, // from 1
    {"extra_speed", NULL, true, 0, false, NULL},
};
// Columns of a limit; a band's come from tacet_band_columns.
static const tacet_table_column of_limit[] = {
    {"value", NULL, false, -1, false, NULL},
    {"margin_db", NULL, false, 1, false, NULL},
    {"verdict", NULL, true, 0, false, NULL},
    {"why", NULL, true, 0, false, NULL},
};
#define N_OWN      (sizeof own / sizeof *own)
#define N_OF_LIMIT (sizeof of_limit / sizeof *of_limit)

// "pump coupling.level_rms": the band's name, a dot, the column.
static tacet_table_column member(tacet_arena *a, const char *thing, const char *name,
                                 const char *unit, bool text)
{
    return (tacet_table_column){
        .name = screen_text(a, "%s.%s", thing, name), .unit = unit, .text = text, .decimals = -1};
}

static tacet_table_column *levels_columns(const tacet_model *m, tacet_arena *a, size_t *n)
{
    size_t n_row, n_band, used = 0;
    const tacet_column *row = tacet_row_columns(&n_row);
    const tacet_band_column *band = tacet_band_columns(&n_band);
    size_t n_bands = tacet_model_bands(m), n_limits = tacet_model_limits(m);
    *n = N_OWN + n_row + n_band * n_bands + N_OF_LIMIT * n_limits;
    tacet_table_column *c = tacet_arena_alloc(a, *n * sizeof *c);
    if (!c) return NULL;
    for (size_t i = 0; i < N_OWN; i++)
        c[used++] = own[i];
    for (size_t i = 0; i < n_row; i++)
        c[used++] = (tacet_table_column){.name = row[i].name,
                                         .unit = row[i].unit,
                                         .text = row[i].type == TACET_COLUMN_TEXT,
                                         .decimals = -1};
    for (size_t b = 0; b < n_bands; b++)
        for (size_t i = 0; i < n_band; i++)
            c[used++] = member(a, tacet_model_band(m, b)->name, band[i].name, band[i].unit,
                               band[i].type == TACET_COLUMN_TEXT);
    for (size_t l = 0; l < n_limits; l++)
        for (size_t i = 0; i < N_OF_LIMIT; i++)
            c[used++] = member(a, tacet_model_limit(m, l)->name, of_limit[i].name, of_limit[i].unit,
                               of_limit[i].text);
    for (size_t i = 0; i < *n; i++)
        if (!c[i].name) return NULL;
    return c;
}

static bool put_row_columns(const tacet_model *m, const tacet_condition *condition,
                            const tacet_row *r, tacet_arena *a, table_row *row)
{
    size_t n;
    const tacet_column *column = tacet_row_columns(&n);
    for (size_t i = 0; i < n; i++) {
        char buffer[TACET_COLUMN_BUFFER] = "";
        if (column[i].type != TACET_COLUMN_TEXT) {
            put_number(row, column[i].number(m, condition, r));
            continue;
        }
        const char *text = column[i].text(m, condition, r, buffer);
        if (text == buffer && !(text = tacet_arena_text(a, buffer))) return false;
        put_text(row, text);
    }
    return true;
}

static void put_band(const tacet_row *r, size_t b, table_row *row)
{
    size_t n;
    const tacet_band_column *column = tacet_band_columns(&n);
    for (size_t i = 0; i < n; i++) {
        if (b >= r->n_bands)
            put_text(row, NULL);
        else if (column[i].type == TACET_COLUMN_TEXT)
            put_text(row, column[i].text(&r->bands[b]));
        else
            put_number(row, column[i].number(&r->bands[b]));
    }
}

static void put_limit(const tacet_row *r, size_t l, table_row *row)
{
    if (l >= r->n_limits) {
        for (size_t i = 0; i < N_OF_LIMIT; i++)
            put_text(row, NULL);
        return;
    }
    const tacet_limit_result *limit = &r->limits[l];
    bool known = limit->verdict != TACET_NO_VERDICT;
    put_number(row, known ? limit->value : NAN);
    put_number(row, known ? limit->margin_db : NAN);
    put_text(row, tacet_verdict_text(limit->verdict));
    put_text(row, known ? "" : screen_why_text(limit->why));
}

tacet_status screen_levels_table(const tacet_model *m, const tacet_screen *s, tacet_arena *a,
                                 tacet_table *out)
{
    size_t n_columns;
    table_row row;
    tacet_table_column *columns = levels_columns(m, a, &n_columns);
    if (!columns) return TACET_NO_MEMORY;
    tacet_status status = table_start(a,
                                      &(tacet_table){.name = "levels",
                                                     .heading = "Conditions",
                                                     .columns = columns,
                                                     .n_columns = n_columns,
                                                     .n_rows = s->n_cells},
                                      out, &row);
    for (size_t i = 0; status == TACET_OK && i < s->n_cells; i++) {
        const tacet_cell *cell = &s->cells[i];
        tacet_condition condition = screen_condition(s, i);
        put_text(&row, screen_candidate(s, i)->name);
        put_number(&row, (double)cell->placement + 1);
        put_text(&row, cell->extra ? "yes" : "no");
        if (!put_row_columns(m, &condition, &cell->row, a, &row)) return TACET_NO_MEMORY;
        for (size_t b = 0; b < tacet_model_bands(m); b++)
            put_band(&cell->row, b, &row);
        for (size_t l = 0; l < tacet_model_limits(m); l++)
            put_limit(&cell->row, l, &row);
    }
    return status;
}
