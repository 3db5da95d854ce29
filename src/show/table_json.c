#include "show/writers.h"

void write_rows_json(tacet_json *j, const tacet_table *t)
{
    tacet_json_begin_array(j);
    for (size_t r = 0; r < t->n_rows; r++) {
        tacet_json_begin_object(j);
        for (size_t c = 0; c < t->n_columns; c++) {
            const tacet_table_cell *cell = &t->cells[r * t->n_columns + c];
            if (t->columns[c].text)
                tacet_json_put_text(j, t->columns[c].name, cell->text);
            else
                tacet_json_put_number(j, t->columns[c].name, cell->number);
        }
        tacet_json_end_object(j);
    }
    tacet_json_end_array(j);
}

void write_table_json(const tacet_table *t, const tacet_table_style *style, FILE *to)
{
    (void)style;
    tacet_json j = tacet_json_start(to);
    tacet_json_begin_object(&j);
    tacet_json_put_text(&j, "name", t->name);
    tacet_json_key(&j, "columns");
    tacet_json_begin_array(&j);
    for (size_t c = 0; c < t->n_columns; c++) {
        tacet_json_begin_object(&j);
        tacet_json_put_text(&j, "name", t->columns[c].name);
        tacet_json_put_text(&j, "unit", t->columns[c].unit);
        tacet_json_end_object(&j);
    }
    tacet_json_end_array(&j);
    tacet_json_key(&j, "rows");
    write_rows_json(&j, t);
    tacet_json_end_object(&j);
    fputc('\n', to);
}
