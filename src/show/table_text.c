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

static const char *cell_text(const tacet_table *t, size_t row, size_t column,
                             char number[TACET_NUMBER_TEXT])
{
    const tacet_table_cell *cell = &t->cells[row * t->n_columns + column];
    if (t->columns[column].text) return cell->text ? cell->text : "-";
    return isfinite(cell->number) ? text_fixed(cell->number, t->columns[column].decimals, number)
                                  : "-";
}

static void blanks(FILE *to, size_t n)
{
    while (n--)
        fputc(' ', to);
}

// The last text column is not padded, so that lines carry no trailing blanks.
static void put(FILE *to, const char *text, size_t width, bool left, bool last)
{
    size_t used = text_columns(text);
    size_t pad = width > used ? width - used : 0;
    if (!left) blanks(to, pad);
    tacet_write_clean(to, text);
    if (left && !last) blanks(to, pad);
}

static void widths(const tacet_table *t, size_t n_columns, size_t n_rows, size_t *width)
{
    for (size_t c = 0; c < n_columns; c++) {
        width[c] = text_columns(t->columns[c].name);
        size_t unit = t->columns[c].unit ? text_columns(t->columns[c].unit) : 0;
        if (unit > width[c]) width[c] = unit;
        for (size_t r = 0; r < n_rows; r++) {
            char number[TACET_NUMBER_TEXT];
            size_t w = text_columns(cell_text(t, r, c, number));
            if (w > width[c]) width[c] = w;
        }
    }
}

static void head_line(const tacet_table *t, size_t n_columns, const size_t *width, bool units,
                      const tacet_table_style *style, FILE *to)
{
    if (style->colour) fputs(FAINT, to);
    // blanks are held back until a word follows
    size_t held = 0;
    for (size_t c = 0; c < n_columns; c++) {
        const char *word = units ? t->columns[c].unit : t->columns[c].name;
        size_t used = word ? text_columns(word) : 0, pad = width[c] - used;
        if (c) held += 2;
        if (!t->columns[c].text) held += pad;
        if (used) {
            blanks(to, held);
            tacet_write_clean(to, word);
            held = 0;
        }
        if (t->columns[c].text) held += pad;
    }
    fputs(style->colour ? PLAIN "\n" : "\n", to);
}

void write_table_text(const tacet_table *t, const tacet_table_style *style, FILE *to)
{
    size_t width[COLUMNS_MOST] = {0};
    size_t n_columns = t->n_columns < COLUMNS_MOST ? t->n_columns : COLUMNS_MOST;
    size_t n_rows = style->most_rows && style->most_rows < t->n_rows ? style->most_rows : t->n_rows;
    bool any_unit = false;
    for (size_t c = 0; c < n_columns; c++)
        any_unit |= t->columns[c].unit != NULL;
    widths(t, n_columns, n_rows, width);
    if (t->heading) {
        tacet_write_clean(to, t->heading);
        fputc('\n', to);
    }
    head_line(t, n_columns, width, false, style, to);
    if (any_unit) head_line(t, n_columns, width, true, style, to);
    for (size_t r = 0; r < n_rows; r++) {
        for (size_t c = 0; c < n_columns; c++) {
            char number[TACET_NUMBER_TEXT];
            bool accent = style->colour && t->cells[r * t->n_columns + c].accent;
            if (c) fputs("  ", to);
            if (accent) fputs(ACCENT, to);
            put(to, cell_text(t, r, c, number), width[c], t->columns[c].text, c + 1 == n_columns);
            if (accent) fputs(PLAIN, to);
        }
        fputc('\n', to);
    }
    if (n_rows < t->n_rows) fprintf(to, ".. %zu more\n", t->n_rows - n_rows);
    if (n_columns < t->n_columns)
        fprintf(to, ".. %zu more columns in the CSV form\n", t->n_columns - n_columns);
}
