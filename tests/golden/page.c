#include "page.h"
#include <math.h>
#include <stdarg.h>
#include <stdlib.h>
#include <string.h>

#define DIGITS  10 // of a number as written: half a unit of the last is below every tolerance
#define COLUMNS 100

void golden_stop(const char *format, ...)
{
    va_list args;
    va_start(args, format);
    fputs("golden: ", stderr);
    vfprintf(stderr, format, args);
    fputc('\n', stderr);
    va_end(args);
    exit(2);
}

golden_page golden_page_start(void)
{
    golden_page p = {.arena = tacet_arena_create()};
    if (!p.arena) golden_stop("out of memory");
    return p;
}

void golden_page_clear(golden_page *p)
{
    tacet_arena_destroy(p->arena);
    *p = (golden_page){0};
}

static void *grown(golden_page *p, void *old, size_t n, size_t *room, size_t size)
{
    if (n < *room) return old;
    *room = *room ? 2 * *room : 16;
    void *new = tacet_arena_alloc(p->arena, *room * size);
    if (!new) golden_stop("out of memory");
    if (n) memcpy(new, old, n * size);
    return new;
}

const char *golden_text(golden_page *p, const char *format, ...)
{
    char text[1024];
    va_list args;
    va_start(args, format);
    int length = vsnprintf(text, sizeof text, format, args);
    va_end(args);
    const char *copy = tacet_arena_text(p->arena, text);
    if (length < 0 || length >= (int)sizeof text || !copy) golden_stop("no room for a text");
    return copy;
}

void golden_begin(golden_page *p, const char *head)
{
    p->record = grown(p, p->record, p->n, &p->room, sizeof *p->record);
    p->record[p->n++] = (golden_record){.head = golden_text(p, "%s", head)};
}

static golden_field *put(golden_page *p, const char *group, const char *column)
{
    golden_record *r = &p->record[p->n - 1];
    r->field = grown(p, r->field, r->n, &r->room, sizeof *r->field);
    r->field[r->n] = (golden_field){.group = golden_text(p, "%s", group),
                                    .column = golden_text(p, "%s", column),
                                    .text = "",
                                    .number = NAN};
    return &r->field[r->n++];
}

void golden_put_text(golden_page *p, const char *group, const char *column, const char *text)
{
    if (text && (strstr(text, " | ") || strcmp(text, "-") == 0))
        golden_stop("'%s' of %s cannot be written on a page", text, column);
    put(p, group, column)->text = golden_text(p, "%s", text ? text : "");
}

void golden_put_number(golden_page *p, const char *group, const char *column, double value)
{
    char text[TACET_NUMBER_TEXT];
    golden_field *f = put(p, group, column);
    f->number = value;
    if (isnan(value)) return;
    f->text = golden_text(p, "%s", tacet_number_format_short(value, DIGITS, text));
}

// "group: column value | column value"
static void read_fields(golden_page *p, const char *path, int number, char *line)
{
    char *colon = strstr(line, ": ");
    if (!colon || p->n == 0) golden_stop("%s:%d: neither a head nor 'group: ..'", path, number);
    *colon = 0;
    for (char *at = colon + 2, *next; at; at = next) {
        next = strstr(at, " | ");
        if (next) *next = 0, next += 3;
        char *blank = strchr(at, ' ');
        if (!blank) golden_stop("%s:%d: '%s' has no value", path, number, at);
        *blank = 0;
        bool absent = strcmp(blank + 1, "-") == 0;
        golden_field *f = put(p, line, at);
        f->text = absent ? "" : golden_text(p, "%s", blank + 1);
        if (!tacet_number_parse(f->text, &f->number)) f->number = NAN;
    }
}

void golden_read(const char *path, golden_page *out)
{
    char *text, *next;
    size_t length;
    tacet_error e = {.text = ""};
    *out = golden_page_start();
    if (tacet_file_read(path, 1 << 24, out->arena, &text, &length, &e) != TACET_OK)
        golden_stop("%s: %s", path, e.text);
    int number = 1;
    for (char *line = text; line && *line; line = next, number++) {
        next = strchr(line, '\n');
        if (next) *next++ = 0;
        if (*line == '#' || *line == 0) continue;
        if (*line == ' ')
            read_fields(out, path, number, line + strspn(line, " "));
        else if (golden_find(out, line))
            golden_stop("%s:%d: '%s' stands there twice", path, number, line);
        else
            golden_begin(out, line);
    }
}

void golden_write(const golden_page *p, FILE *to)
{
    for (size_t i = 0; i < p->n; i++) {
        const golden_record *r = &p->record[i];
        int used = 0;
        fprintf(to, "%s\n", r->head);
        for (size_t k = 0; k < r->n; k++) {
            const golden_field *f = &r->field[k];
            const char *value = *f->text ? f->text : "-";
            int more = (int)(strlen(f->column) + strlen(value)) + 4;
            bool fits = k > 0 && strcmp(f->group, f[-1].group) == 0 && used + more <= COLUMNS;
            if (fits)
                used += fprintf(to, " | %s %s", f->column, value);
            else
                used = fprintf(to, "%s  %s: %s %s", k ? "\n" : "", f->group, f->column, value);
        }
        fprintf(to, "\n");
    }
}

const golden_record *golden_find(const golden_page *p, const char *head)
{
    for (size_t i = 0; i < p->n; i++)
        if (strcmp(p->record[i].head, head) == 0) return &p->record[i];
    return NULL;
}

const golden_field *golden_find_field(const golden_record *r, const char *group, const char *column)
{
    for (size_t i = 0; i < r->n; i++)
        if (strcmp(r->field[i].column, column) == 0 && strcmp(r->field[i].group, group) == 0)
            return &r->field[i];
    return NULL;
}
