// Data on standard output: tables, JSON, colour.
#include "cli/cli.h"
#include <math.h>
#include <stdarg.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

bool cli_colour(const cli_call *call)
{
    const char *none = getenv("NO_COLOR"), *term = getenv("TERM");
    if (cli_given(call, "no-color") || (none && *none)) return false;
    return isatty(STDOUT_FILENO) && term && *term && strcmp(term, "dumb") != 0;
}

void cli_write_table(const cli_call *call, const tacet_table *t)
{
    tacet_table_style style = {.colour = cli_colour(call)};
    const tacet_writer *w = tacet_writer_find(cli_given(call, "csv") ? "csv" : "text");
    tacet_table_write(t, w, &style, stdout);
}

int cli_end_json(tacet_json *j)
{
    tacet_error e = {.text = ""};
    tacet_json_end_object(j);
    tacet_status status = tacet_json_finish(j, "standard output", &e);
    // a stream that failed is told once, at the end
    return status == TACET_BAD_INPUT ? cli_failed(status, &e) : CLI_DONE;
}

static unsigned common_divisor(unsigned a, unsigned b)
{
    while (b) {
        unsigned rest = a % b;
        a = b;
        b = rest;
    }
    return a;
}

const char *cli_fraction(unsigned above, unsigned below, char out[24])
{
    unsigned d = common_divisor(above, below);
    if (d == 0) d = 1;
    if (below / d == 1)
        snprintf(out, 24, "%u", above / d);
    else
        snprintf(out, 24, "%u/%u", above / d, below / d);
    return out;
}

cli_rows cli_rows_start(tacet_arena *a, const char *name, const char *heading,
                        const tacet_table_column *columns, size_t n_columns, size_t most_rows)
{
    cli_rows r = {.arena = a, .most = most_rows * n_columns};
    r.cells = tacet_arena_alloc(a, (r.most + 1) * sizeof *r.cells);
    r.wrong = !r.cells;
    r.table = (tacet_table){.name = name,
                            .heading = heading,
                            .columns = columns,
                            .n_columns = n_columns,
                            .cells = r.cells};
    return r;
}

static void put_cell(cli_rows *r, double number, const char *text)
{
    if (r->wrong || r->n == r->most) {
        r->wrong = true;
        return;
    }
    r->cells[r->n++] = (tacet_table_cell){.number = number, .text = text};
}

void cli_put(cli_rows *r, double number)
{
    put_cell(r, number, NULL);
}

void cli_put_text(cli_rows *r, const char *text)
{
    put_cell(r, NAN, text);
}

void cli_accent(cli_rows *r)
{
    if (!r->wrong && r->n > 0) r->cells[r->n - 1].accent = true;
}

const tacet_table *cli_rows_end(cli_rows *r)
{
    if (r->wrong || tacet_arena_was_short(r->arena) || r->n % r->table.n_columns != 0) return NULL;
    r->table.n_rows = r->n / r->table.n_columns;
    return &r->table;
}

const char *cli_text(tacet_arena *a, const char *format, ...)
{
    va_list args;
    va_start(args, format);
    int length = vsnprintf(NULL, 0, format, args);
    va_end(args);
    char *text = length < 0 ? NULL : tacet_arena_alloc(a, (size_t)length + 1);
    if (!text) return "";
    va_start(args, format);
    vsnprintf(text, (size_t)length + 1, format, args);
    va_end(args);
    return text;
}

int cli_arena_end(tacet_arena *a, int code)
{
    bool unsaid = a && tacet_arena_was_short(a) && (code == CLI_DONE || code == CLI_ANSWER_IS_NO);
    tacet_arena_destroy(a);
    return unsaid ? cli_failed(TACET_NO_MEMORY, NULL) : code;
}
