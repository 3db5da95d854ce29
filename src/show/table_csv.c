// CSV as RFC 4180 quotes it (lines end in LF): numbers in their shortest form that reads back
// equal, absent values as empty fields.
#include "show/text.h"
#include "show/writers.h"
#include <math.h>
#include <string.h>

static void field(FILE *to, const char *text)
{
    if (!strpbrk(text, ",\"\r\n") && text[0] != '#') {
        fputs(text, to);
        return;
    }
    fputc('"', to);
    for (; *text; text++) {
        if (*text == '"') fputc('"', to);
        fputc(*text, to);
    }
    fputc('"', to);
}

void write_table_csv(const tacet_table *t, const tacet_table_style *style, FILE *to)
{
    (void)style;
    for (size_t c = 0; c < t->n_columns; c++) {
        if (c) fputc(',', to);
        field(to, t->columns[c].name);
    }
    fputc('\n', to);
    for (size_t r = 0; r < t->n_rows; r++) {
        for (size_t c = 0; c < t->n_columns; c++) {
            const tacet_table_cell *cell = &t->cells[r * t->n_columns + c];
            char number[TACET_NUMBER_TEXT];
            if (c) fputc(',', to);
            if (t->columns[c].text && cell->text)
                field(to, cell->text);
            else if (!t->columns[c].text && isfinite(cell->number))
                fputs(tacet_number_format(cell->number, number), to);
        }
        fputc('\n', to);
    }
}
