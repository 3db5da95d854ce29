// Which conditions the full march re-solves: where a wrong margin would matter most.
#include "internal.h"
#include <math.h>
#include <stdlib.h>

typedef struct {
    double margin_db;
    size_t round; // 0: the worst of its candidate, 1: the second worst, ..
    size_t cell;
} pick;

static int by_margin(const void *a, const void *b)
{
    const pick *x = a, *y = b;
    if (x->margin_db != y->margin_db) return x->margin_db < y->margin_db ? -1 : 1;
    return (x->cell > y->cell) - (x->cell < y->cell);
}

static int by_round(const void *a, const void *b)
{
    const pick *x = a, *y = b;
    if (x->round != y->round) return x->round < y->round ? -1 : 1;
    return by_margin(a, b);
}

// Solved grid cells of one candidate, worst first; no line at all comes last.
static size_t solved_of(const tacet_screen *s, const tacet_candidate *c, pick *out)
{
    size_t n = 0;
    for (size_t i = 0; !c->refused && i < s->n_speeds; i++) {
        size_t cell = c->first_cell + i;
        const tacet_row *row = &s->cells[cell].row;
        if (row->outcome != TACET_SOLVED) continue;
        double margin_db = isnan(row->worst_margin_db) ? INFINITY : row->worst_margin_db;
        out[n++] = (pick){.margin_db = margin_db, .cell = cell};
    }
    if (n) qsort(out, n, sizeof *out, by_margin);
    for (size_t i = 0; i < n; i++)
        out[i].round = i;
    return n;
}

tacet_status referee_pick(const tacet_screen *s, size_t most, tacet_arena *a, size_t **cells,
                          size_t *n, tacet_arena *scratch)
{
    pick *all = tacet_arena_alloc(scratch, s->n_candidates * s->n_speeds * sizeof *all);
    if (!all) return TACET_NO_MEMORY;
    size_t found = 0;
    for (size_t c = 0; c < s->n_candidates; c++)
        found += solved_of(s, &s->candidates[c], all + found);
    if (found) qsort(all, found, sizeof *all, by_round);
    if (found > most) found = most;
    if (found) qsort(all, found, sizeof *all, by_margin);
    *cells = tacet_arena_alloc(a, found * sizeof **cells);
    if (!*cells) return TACET_NO_MEMORY;
    for (size_t i = 0; i < found; i++)
        (*cells)[i] = all[i].cell;
    *n = found;
    return TACET_OK;
}
