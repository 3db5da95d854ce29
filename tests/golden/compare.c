#include "compare.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>

// ---- tolerances

static bool take_amount(char **rest, const char *kind, double *out)
{
    size_t length = strlen(kind);
    if (strncmp(*rest, kind, length) != 0 || (*rest)[length] != ' ') return false;
    char *at = *rest + length + strspn(*rest + length, " ");
    char *end = at + strcspn(at, " ");
    char number[32] = "";
    if (end - at < (int)sizeof number) memcpy(number, at, (size_t)(end - at));
    if (!tacet_number_parse(number, out) || !(*out > 0)) golden_stop("tolerance '%s'", *rest);
    *rest = end + strspn(end, " ");
    return true;
}

static golden_tolerance read_line(golden_page *p, char *line, const char *place)
{
    char *rest = line + strcspn(line, " ");
    if (*rest) *rest++ = 0;
    rest += strspn(rest, " ");
    golden_tolerance t = {.column = golden_text(p, "%s", line), .worst_at = ""};
    if (strncmp(rest, "exact", 5) == 0) {
        t.exact = true;
        rest += 5;
    } else
        while (take_amount(&rest, "absolute", &t.absolute) ||
               take_amount(&rest, "relative", &t.relative))
            ;
    bool any = t.exact || t.absolute > 0 || t.relative > 0;
    if (!any || !rest[strspn(rest, " ")])
        golden_stop("%s: '%s' lacks exact, absolute A or relative R, or its reason", place, line);
    return t;
}

static golden_tolerance *find(const golden_tolerances *t, const char *column)
{
    for (size_t i = 0; i < t->n; i++)
        if (strcmp(t->line[i].column, column) == 0) return &t->line[i];
    return NULL;
}

void golden_tolerances_read(const char *path, golden_tolerances *out)
{
    char *text, *next;
    size_t length, lines = 1;
    tacet_error e = {.text = ""};
    *out = (golden_tolerances){.page = golden_page_start()};
    if (tacet_file_read(path, 1 << 20, out->page.arena, &text, &length, &e) != TACET_OK)
        golden_stop("%s: %s", path, e.text);
    for (const char *c = text; *c; c++)
        lines += *c == '\n';
    out->line = tacet_arena_alloc(out->page.arena, lines * sizeof *out->line);
    if (!out->line) golden_stop("out of memory");
    for (char *line = text; line && *line; line = next) {
        next = strchr(line, '\n');
        if (next) *next++ = 0;
        if (*line == '#' || *line == 0) continue;
        golden_tolerance t = read_line(&out->page, line, path);
        if (find(out, t.column)) golden_stop("%s: '%s' stands there twice", path, t.column);
        out->line[out->n++] = t;
    }
}

// ---- pages

typedef struct {
    const char *name;
    golden_tolerances *tolerances;
    FILE *to;
    size_t differences;
} comparison;

static void differs(comparison *c, const golden_record *r, const golden_field *f)
{
    c->differences++;
    fprintf(c->to, "%s: %s: ", c->name, r->head);
    if (f) fprintf(c->to, "%s.%s: ", f->group, f->column);
}

static void compare_numbers(comparison *c, const golden_record *r, const golden_field *golden,
                            const golden_field *now, golden_tolerance *t)
{
    double off = fabs(now->number - golden->number);
    double allowed = t->absolute + t->relative * fabs(golden->number);
    if (off / allowed > t->worst) {
        t->worst = off / allowed;
        t->off = off;
        t->worst_at = golden_text(&c->tolerances->page, "%s: %s: %s", c->name, r->head, now->group);
    }
    if (off <= allowed) return;
    differs(c, r, now);
    fprintf(c->to, "golden %s, now %s: off by %.3g, allowed %.3g (absolute %g, relative %g)\n",
            golden->text, now->text, off, allowed, t->absolute, t->relative);
}

static void compare_fields(comparison *c, const golden_record *r, const golden_field *golden,
                           const golden_field *now)
{
    golden_tolerance *t = find(c->tolerances, now->column);
    if (!t) {
        differs(c, r, now);
        fprintf(c->to, "no tolerance: give %s a line in tests/golden/tolerance\n", now->column);
        return;
    }
    t->used = true;
    bool numbers = !isnan(now->number) && !isnan(golden->number);
    if (numbers && !t->exact)
        compare_numbers(c, r, golden, now, t);
    else if (strcmp(golden->text, now->text) != 0) {
        differs(c, r, now);
        fprintf(c->to, "golden '%s', now '%s': must be the same\n", golden->text, now->text);
    }
}

static void compare_records(comparison *c, const golden_record *golden, const golden_record *now)
{
    for (size_t i = 0; i < now->n; i++) {
        const golden_field *f = &now->field[i];
        const golden_field *old = golden_find_field(golden, f->group, f->column);
        if (old) {
            compare_fields(c, now, old, f);
            continue;
        }
        differs(c, now, f);
        fprintf(c->to, "no golden value: run sh tests/golden/refresh.sh\n");
    }
    for (size_t i = 0; i < golden->n; i++) {
        const golden_field *f = &golden->field[i];
        if (golden_find_field(now, f->group, f->column)) continue;
        differs(c, golden, f);
        fprintf(c->to, "golden '%s', now there is no such column\n", f->text);
    }
    for (size_t i = 0; i < now->n; i++) {
        const golden_field *f = &now->field[i];
        if (golden_find_field(now, f->group, f->column) == f) continue;
        differs(c, now, f);
        fprintf(c->to, "two columns have this name\n");
    }
}

size_t golden_compare(const char *name, const golden_page *golden, const golden_page *now,
                      golden_tolerances *t, FILE *to)
{
    comparison c = {name, t, to, 0};
    for (size_t i = 0; i < now->n; i++) {
        const golden_record *old = golden_find(golden, now->record[i].head);
        if (old) {
            compare_records(&c, old, &now->record[i]);
            continue;
        }
        differs(&c, &now->record[i], NULL);
        fprintf(to, "new; there is no golden record of it\n");
    }
    for (size_t i = 0; i < golden->n; i++) {
        if (golden_find(now, golden->record[i].head)) continue;
        differs(&c, &golden->record[i], NULL);
        fprintf(to, "golden only; now there is no such record\n");
    }
    return c.differences;
}
