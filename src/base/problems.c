#include "tacet/base.h"
#include "text.h"
#include <stdlib.h>
#include <string.h>

#define KEPT_OF_A_KIND 20
#define KEPT           (2 * KEPT_OF_A_KIND)
#define LONGEST_TEXT   1024

typedef struct {
    tacet_problem what;
    size_t file_rank; // files count in the order in which they are met
} entry;

struct tacet_problems {
    entry kept[KEPT + 1];
    size_t n;
    size_t counted[2]; // [warning]
    char *files[KEPT]; // distinct names; later ones share the last rank
    size_t n_files;
};

tacet_problems *tacet_problems_create(void)
{
    return calloc(1, sizeof(tacet_problems));
}

static void clear(tacet_problem *what)
{
    free(what->file);
    free(what->text);
}

void tacet_problems_destroy(tacet_problems *p)
{
    if (!p) return;
    for (size_t i = 0; i < p->n; i++)
        clear(&p->kept[i].what);
    for (size_t i = 0; i < p->n_files; i++)
        free(p->files[i]);
    free(p);
}

static size_t rank_of(tacet_problems *p, const char *file)
{
    for (size_t i = 0; i < p->n_files; i++)
        if (strcmp(p->files[i], file) == 0) return i;
    if (p->n_files == KEPT) return KEPT;
    p->files[p->n_files] = strdup(file);
    return p->files[p->n_files] ? p->n_files++ : KEPT;
}

static bool after(const entry *a, const entry *b)
{
    if (a->file_rank != b->file_rank) return a->file_rank > b->file_rank;
    if (a->what.line != b->what.line) return a->what.line > b->what.line;
    return a->what.column > b->what.column;
}

static void insert(tacet_problems *p, entry new)
{
    size_t at = p->n;
    for (; at > 0 && after(&p->kept[at - 1], &new); at--)
        p->kept[at] = p->kept[at - 1];
    p->kept[at] = new;
    p->n++;
}

// Of one kind at most KEPT_OF_A_KIND stay: the last by place goes.
static void drop_surplus(tacet_problems *p, bool warning)
{
    size_t of_kind = 0, last = 0;
    for (size_t i = 0; i < p->n; i++) {
        if (p->kept[i].what.warning != warning) continue;
        of_kind++;
        last = i;
    }
    if (of_kind <= KEPT_OF_A_KIND) return;
    clear(&p->kept[last].what);
    memmove(&p->kept[last], &p->kept[last + 1], (p->n - last - 1) * sizeof *p->kept);
    p->n--;
}

void tacet_problems_add(tacet_problems *p, bool warning, const char *file, int line, int column,
                        const char *format, ...)
{
    char text[LONGEST_TEXT];
    va_list args;
    va_start(args, format);
    text_format(text, sizeof text, format, args);
    va_end(args);
    p->counted[warning]++;
    if (!file) file = "";
    entry new = {.what = {.warning = warning,
                          .line = line,
                          .column = column,
                          .file = strdup(file),
                          .text = strdup(text)},
                 .file_rank = rank_of(p, file)};
    if (!new.what.file || !new.what.text) {
        clear(&new.what);
        return;
    }
    insert(p, new);
    drop_surplus(p, warning);
}

size_t tacet_problems_kept(const tacet_problems *p)
{
    return p->n;
}

const tacet_problem *tacet_problems_at(const tacet_problems *p, size_t i)
{
    return i < p->n ? &p->kept[i].what : NULL;
}

size_t tacet_problems_errors(const tacet_problems *p)
{
    return p->counted[false];
}

size_t tacet_problems_warnings(const tacet_problems *p)
{
    return p->counted[true];
}
