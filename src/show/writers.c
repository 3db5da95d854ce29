#include "show/writers.h"
#include <string.h>

static const tacet_writer writers[] = {
    {"text", "txt", "aligned columns for reading", write_table_text},
    {"csv", "csv", "comma-separated, one header line, absent values empty", write_table_csv},
    {"json", "json", "columns and rows, absent values null", write_table_json},
    {NULL, NULL, NULL, NULL}};

const tacet_writer *tacet_writers(void)
{
    return writers;
}

const tacet_writer *tacet_writer_find(const char *name)
{
    for (const tacet_writer *w = writers; w->name; w++)
        if (strcmp(w->name, name) == 0) return w;
    return NULL;
}

void tacet_table_write(const tacet_table *t, const tacet_writer *w, const tacet_table_style *style,
                       FILE *to)
{
    static const tacet_table_style plain = {0};
    w->write(t, style ? style : &plain, to);
}
