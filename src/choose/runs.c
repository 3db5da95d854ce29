// Stretches of a screen with one recommended candidate.
#include "internal.h"
#include <math.h>

// Takes rank i into its run: the cell with the smallest margin, the first of equal ones.
static void take(const tacet_screen *s, size_t i, tacet_run *run)
{
    size_t best = s->ranks[i].best;
    run->last = i;
    if (best == SIZE_MAX) return;
    double least = run->tightest == SIZE_MAX ? NAN : s->cells[run->tightest].row.worst_margin_db;
    if (isnan(least) ? run->tightest == SIZE_MAX || !isnan(s->cells[best].row.worst_margin_db)
                     : s->cells[best].row.worst_margin_db < least)
        run->tightest = best;
}

tacet_status tacet_screen_runs(const tacet_screen *s, tacet_arena *a, tacet_run **out, size_t *n)
{
    tacet_run *run = tacet_arena_alloc(a, (s->n_ranks + 1) * sizeof *run);
    *n = 0;
    *out = run;
    if (!run) return TACET_NO_MEMORY;
    for (size_t i = 0; i < s->n_ranks; i++) {
        size_t best = s->ranks[i].best;
        size_t candidate = best == SIZE_MAX ? SIZE_MAX : s->cells[best].candidate;
        if (*n == 0 || run[*n - 1].candidate != candidate)
            run[(*n)++] = (tacet_run){i, i, candidate, SIZE_MAX};
        take(s, i, &run[*n - 1]);
    }
    return TACET_OK;
}
