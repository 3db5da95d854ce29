// Text tables: a heading, one line of names (units after them), then rows; numbers to the right,
// text to the left, two blanks between. No rules. One accent colour, only when asked for.
#include "show/text.h"
#include "show/writers.h"
#include <math.h>
#include <string.h>

#define COLUMNS_MOST 64
#define ACCENT       "\033[36m"
#define FAINT        "\033[2m"
#define PLAIN        "\033[0m"

// What is shown of a table: which columns, how wide, how many rows.
typedef struct {
    const tacet_table *t;
    FILE *to;
    bool colour;
    size_t n, column[COLUMNS_MOST], width[COLUMNS_MOST];
    size_t n_rows;
} view;

static const char *cell_text(const view *v, size_t row, size_t i, char number[TACET_NUMBER_TEXT])
{
    const tacet_table_column *column = &v->t->columns[v->column[i]];
    const tacet_table_cell *cell = &v->t->cells[row * v->t->n_columns + v->column[i]];
    if (column->text) return cell->text ? cell->text : "-";
    return isfinite(cell->number) ? text_fixed(cell->number, column->decimals, number) : "-";
}

static const char *head_of(const tacet_table_column *column)
{
    return column->head ? column->head : column->name;
}

static void measure(view *v)
{
    for (size_t i = 0; i < v->n; i++) {
        const tacet_table_column *column = &v->t->columns[v->column[i]];
        size_t unit = column->unit ? text_columns(column->unit) : 0;
        v->width[i] = text_columns(head_of(column));
        if (unit > v->width[i]) v->width[i] = unit;
        for (size_t r = 0; r < v->n_rows; r++) {
            char number[TACET_NUMBER_TEXT];
            size_t w = text_columns(cell_text(v, r, i, number));
            if (w > v->width[i]) v->width[i] = w;
        }
    }
}

static void blanks(FILE *to, size_t n)
{
    while (n--)
        fputc(' ', to);
}

// Writes one line of texts; blanks wait until something follows, so that no line ends in blanks.
static void line(const view *v, const char *const *text, const bool *accent)
{
    size_t held = 0;
    for (size_t i = 0; i < v->n; i++) {
        size_t used = text_columns(text[i]), pad = v->width[i] > used ? v->width[i] - used : 0;
        bool left = v->t->columns[v->column[i]].text, lit = accent && accent[i];
        held += (i ? 2 : 0) + (left ? 0 : pad);
        if (used) {
            blanks(v->to, held);
            held = 0;
            if (lit) fputs(ACCENT, v->to);
            tacet_write_clean(v->to, text[i]);
            if (lit) fputs(PLAIN, v->to);
        }
        held += left ? pad : 0;
    }
}

static void head(const view *v)
{
    const char *name[COLUMNS_MOST], *unit[COLUMNS_MOST];
    bool any_unit = false;
    for (size_t i = 0; i < v->n; i++) {
        const tacet_table_column *column = &v->t->columns[v->column[i]];
        name[i] = head_of(column);
        unit[i] = column->unit ? column->unit : "";
        any_unit |= column->unit != NULL;
    }
    for (int k = 0; k < (any_unit ? 2 : 1); k++) {
        if (v->colour) fputs(FAINT, v->to);
        line(v, k ? unit : name, NULL);
        fputs(v->colour ? PLAIN "\n" : "\n", v->to);
    }
}

void write_table_text(const tacet_table *t, const tacet_table_style *style, FILE *to)
{
    view v = {.t = t, .to = to, .colour = style->colour};
    size_t left_out = 0;
    for (size_t c = 0; c < t->n_columns; c++) {
        if (t->columns[c].data_only) continue;
        if (v.n < COLUMNS_MOST)
            v.column[v.n++] = c;
        else
            left_out++;
    }
    v.n_rows = style->most_rows && style->most_rows < t->n_rows ? style->most_rows : t->n_rows;
    measure(&v);
    if (t->heading) {
        tacet_write_clean(to, t->heading);
        fputc('\n', to);
    }
    head(&v);
    for (size_t r = 0; r < v.n_rows; r++) {
        char number[COLUMNS_MOST][TACET_NUMBER_TEXT];
        const char *text[COLUMNS_MOST];
        bool accent[COLUMNS_MOST];
        for (size_t i = 0; i < v.n; i++) {
            text[i] = cell_text(&v, r, i, number[i]);
            accent[i] = v.colour && t->cells[r * t->n_columns + v.column[i]].accent;
        }
        line(&v, text, accent);
        fputc('\n', to);
    }
    if (v.n_rows < t->n_rows) fprintf(to, ".. %zu more\n", t->n_rows - v.n_rows);
    if (left_out) fprintf(to, ".. %zu more columns in the CSV form\n", left_out);
}
