#include "tacet/base.h"
#include "text.h"
#include <stdint.h>
#include <string.h>

#define MOST_BYTES   ((size_t)64 << 20)
#define MOST_COLUMNS 4096

typedef struct {
    const char *path;
    char *at;
    int line;
    tacet_error *e;
} reader;

static TACET_PRINTF(3, 4) tacet_status
    refuse(const reader *r, size_t column, const char *format, ...)
{
    char text[256];
    va_list args;
    va_start(args, format);
    text_format(text, sizeof text, format, args);
    va_end(args);
    tacet_fail(r->e, TACET_BAD_INPUT, "%s", text);
    if (r->e) {
        r->e->line = r->line;
        r->e->column = (int)column + 1;
    }
    return TACET_BAD_INPUT;
}

// Next line that is neither empty nor a comment, its end cut off; NULL at the end of the file.
static char *next_line(reader *r)
{
    while (*r->at) {
        char *line = r->at, *end = line + strcspn(line, "\n");
        r->at = *end ? end + 1 : end;
        if (end > line && end[-1] == '\r') end[-1] = '\0';
        *end = '\0';
        r->line++;
        size_t blanks = strspn(line, " \t");
        if (line[blanks] && line[blanks] != '#') return line;
    }
    return NULL;
}

static char *trimmed(char *cell)
{
    cell += strspn(cell, " \t");
    char *end = cell + strlen(cell);
    while (end > cell && (end[-1] == ' ' || end[-1] == '\t'))
        *--end = '\0';
    if (end - cell >= 2 && *cell == '"' && end[-1] == '"') {
        end[-1] = '\0';
        cell++;
    }
    return cell;
}

static size_t count_cells(const char *line)
{
    size_t n = 1;
    for (; *line; line++)
        n += *line == ',';
    return n;
}

// No more rows than lines, nor than digits and commas fit.
static size_t most_rows(const char *text, size_t columns)
{
    size_t n = 1;
    const char *at = text;
    for (; *at; at++)
        n += *at == '\n';
    size_t fit = (size_t)(at - text) / (2 * columns - 1) + 1;
    return n < fit ? n : fit;
}

// Cuts a line at its commas.
static char *next_cell(char **rest)
{
    char *cell = *rest, *comma = strchr(cell, ',');
    if (comma) *comma = '\0';
    *rest = comma ? comma + 1 : cell + strlen(cell);
    return cell;
}

static tacet_status read_header(reader *r, tacet_arena *a, tacet_csv *out)
{
    char *line = next_line(r);
    if (!line) {
        if (r->line == 0) r->line = 1; // a file of no bytes: its place is its beginning
        return refuse(r, 0, "the file is empty; it needs a header line and rows of numbers");
    }
    if (!strchr(line, ',') && strchr(line, ';'))
        return refuse(r, strcspn(line, ";"),
                      "';' between columns; put ',' between them and write "
                      "numbers with a point");
    out->columns = count_cells(line);
    if (out->columns > MOST_COLUMNS)
        return refuse(r, 0, "%zu columns; at most %d are allowed", out->columns, MOST_COLUMNS);
    out->header = tacet_arena_alloc(a, out->columns * sizeof *out->header);
    if (!out->header) return tacet_fail(r->e, TACET_NO_MEMORY, "no memory to read %s", r->path);
    char *rest = line;
    for (size_t i = 0; i < out->columns; i++) {
        char *cell = next_cell(&rest);
        size_t column = (size_t)(cell - line);
        cell = trimmed(cell);
        double value;
        if (!*cell) return refuse(r, column, "a column without a name in the header line");
        if (tacet_number_parse(cell, &value))
            return refuse(r, column,
                          "'%.40s' where the header line is expected; the first line "
                          "names the columns",
                          cell);
        out->header[i] = cell;
    }
    return TACET_OK;
}

static tacet_status read_row(const reader *r, char *line, tacet_csv *out)
{
    size_t cells = count_cells(line);
    if (cells != out->columns)
        return refuse(r, 0, "%zu cells; the header line has %zu (numbers have a decimal point)",
                      cells, out->columns);
    char *rest = line;
    double *value = out->value + out->rows * out->columns;
    for (size_t i = 0; i < cells; i++) {
        char *cell = next_cell(&rest);
        size_t column = (size_t)(cell - line);
        cell = trimmed(cell);
        if (!tacet_number_parse(cell, &value[i]))
            return refuse(r, column, "'%.40s' in column %s is not a number", cell, out->header[i]);
    }
    out->rows++;
    return TACET_OK;
}

static tacet_status refuse_zero_byte(reader *r, const char *text)
{
    const char *line = text;
    r->line = 1;
    for (const char *end; (end = strchr(line, '\n')); line = end + 1)
        r->line++;
    return refuse(r, strlen(line), "a zero byte; this is no text file");
}

tacet_status tacet_csv_read(const char *path, tacet_arena *a, tacet_csv *out, tacet_error *e)
{
    char *text;
    size_t n;
    tacet_status status = tacet_file_read(path, MOST_BYTES, a, &text, &n, e);
    if (status) return status;
    reader r = {.path = path, .at = text, .e = e};
    if (strlen(text) != n) return refuse_zero_byte(&r, text);
    if (strncmp(text, "\xEF\xBB\xBF", 3) == 0) r.at += 3;
    tacet_csv csv = {0};
    status = read_header(&r, a, &csv);
    if (status) return status;
    csv.value = tacet_arena_alloc(a, most_rows(r.at, csv.columns) * csv.columns * sizeof(double));
    if (!csv.value) return tacet_fail(e, TACET_NO_MEMORY, "no memory to read %s", path);
    for (char *line; (line = next_line(&r));) {
        status = read_row(&r, line, &csv);
        if (status) return status;
    }
    if (csv.rows == 0) return refuse(&r, 0, "no rows of numbers under the header line");
    *out = csv;
    return TACET_OK;
}
