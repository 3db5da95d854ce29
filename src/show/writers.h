// The writers of tables; a new one is a new file and one line in writers.c.
#ifndef SHOW_WRITERS_H
#define SHOW_WRITERS_H
#include "tacet/show.h"

void write_table_text(const tacet_table *t, const tacet_table_style *style, FILE *to);
void write_table_csv(const tacet_table *t, const tacet_table_style *style, FILE *to);
void write_table_json(const tacet_table *t, const tacet_table_style *style, FILE *to);
// The rows as an array of objects, keyed by column names.
void write_rows_json(tacet_json *j, const tacet_table *t);

#endif
