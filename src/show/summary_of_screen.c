// The first lines of a screen: what runs where, what it saves, what limits.
#include "show/screen.h"
#include "show/text.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>

#define RUNS_SHOWN   8 // stretches named in the first line
#define LINES_MOST   12
#define LIMITS_SHOWN 4

typedef struct {
    const tacet_model *m;
    const tacet_screen *s;
    tacet_arena *a;
    const char **line;
    size_t n;
    bool failed; // no memory
} summary;

// Text that grows in the arena; a piece that finds no memory marks the summary as failed.
static void add(summary *y, const char **text, const char *piece)
{
    *text = *text ? screen_text(y->a, "%s%s", *text, piece) : piece;
    if (!*text || !piece) {
        *text = "";
        y->failed = true;
    }
}

static void say(summary *y, const char *text)
{
    if (!text) y->failed = true;
    if (text && y->n < LINES_MOST) y->line[y->n++] = text;
}

static const char *rpm_text(summary *y, double speed_rad_per_s)
{
    char number[TACET_NUMBER_TEXT];
    return screen_text(y->a, "%s",
                       tacet_number_format_short(screen_rpm(speed_rad_per_s), 5, number));
}

static const char *span_text(summary *y, size_t first, size_t last)
{
    const char *from = rpm_text(y, y->s->ranks[first].speed_rad_per_s);
    const char *to = rpm_text(y, y->s->ranks[last].speed_rad_per_s);
    if (!from || !to) return NULL;
    return first == last ? screen_text(y->a, "%s rpm", from)
                         : screen_text(y->a, "%s-%s rpm", from, to);
}

static const char *candidate_text(summary *y, size_t candidate)
{
    if (candidate == SIZE_MAX) return "nothing clear";
    const tacet_candidate *c = &y->s->candidates[candidate];
    return screen_all_fire(c) ? "all cylinders" : c->name;
}

// "Run all cylinders at 900-1075 rpm, 1/2 at 1100-1900 rpm."
static void what_runs(summary *y, const tacet_run *run, size_t n)
{
    const char *text = "Run";
    size_t shown = n <= RUNS_SHOWN + 1 ? n : RUNS_SHOWN; // "1 more" takes no less room
    for (size_t i = 0; i < shown; i++) {
        const char *span = span_text(y, run[i].first, run[i].last);
        add(y, &text,
            screen_text(y->a, "%s %s at %s", i ? "," : "", candidate_text(y, run[i].candidate),
                        span ? span : ""));
    }
    if (n > shown) add(y, &text, screen_text(y->a, ", and %zu stretches more", n - shown));
    add(y, &text, ".");
    say(y, text);
}

// Over the grid speeds, each counted once; all-fire counts as no saving.
static void what_saves(summary *y)
{
    double sum = 0, most = -INFINITY;
    size_t known = 0, at = 0, skipping = 0;
    char mean[TACET_NUMBER_TEXT], best[TACET_NUMBER_TEXT];
    for (size_t i = 0; i < y->s->n_ranks; i++) {
        size_t cell = y->s->ranks[i].best;
        if (cell == SIZE_MAX) continue;
        double saving = screen_saving_percent(&y->s->cells[cell].row);
        if (!isfinite(saving)) continue;
        sum += saving;
        known++;
        skipping += !screen_all_fire(screen_candidate(y->s, cell));
        if (saving > most) most = saving, at = i;
    }
    if (skipping == 0) {
        say(y, "Saves nothing: no skip pattern is recommended at any speed.");
        return;
    }
    const char *where = rpm_text(y, y->s->ranks[at].speed_rad_per_s);
    say(y, screen_text(y->a,
                       "Saves %s %% of the fuel against all cylinders firing at equal torque, mean "
                       "of %zu speeds; most at %s rpm, %s %%.",
                       text_fixed(sum / (double)known, 1, mean), known, where ? where : "",
                       text_fixed(most, 1, best)));
}

// How often each band or limit is the limiting one where a pattern is near or over.
static size_t count_limits(const summary *y, size_t *count)
{
    size_t n_bands = tacet_model_bands(y->m), n = 0;
    for (size_t i = 0; i < y->s->n_cells; i++) {
        const tacet_cell *cell = &y->s->cells[i];
        const tacet_row *r = &cell->row;
        if (cell->extra || (r->worst != TACET_NEAR && r->worst != TACET_OVER)) continue;
        if (r->limiting_band >= 0)
            count[r->limiting_band]++;
        else if (r->limiting_limit >= 0)
            count[n_bands + (size_t)r->limiting_limit]++;
        n++;
    }
    return n;
}

// What the shown ones leave: how many more limit, and how often.
static void add_rest(summary *y, const char **text, const size_t *count, size_t n_all)
{
    size_t more = 0, times = 0;
    for (size_t i = 0; i < n_all; i++) {
        more += count[i] > 0;
        times += count[i];
    }
    if (more) add(y, text, screen_text(y->a, ", %zu more (%zu)", more, times));
}

static void what_limits(summary *y)
{
    size_t n_bands = tacet_model_bands(y->m), n_all = n_bands + tacet_model_limits(y->m);
    size_t *count = tacet_arena_alloc(y->a, (n_all + 1) * sizeof *count);
    if (!count) {
        y->failed = true;
        return;
    }
    size_t n = count_limits(y, count);
    if (n == 0) {
        say(y, "Limits: nothing that was solved is near or over a limit.");
        return;
    }
    const char *text = "Limits:";
    for (size_t k = 0; k < LIMITS_SHOWN; k++) {
        size_t best = 0;
        for (size_t i = 1; i < n_all; i++)
            if (count[i] > count[best]) best = i;
        if (count[best] == 0) break;
        const char *name = best < n_bands ? tacet_model_band(y->m, best)->name
                                          : tacet_model_limit(y->m, best - n_bands)->name;
        add(y, &text, screen_text(y->a, "%s %s (%zu)", k ? "," : "", name, count[best]));
        count[best] = 0;
    }
    add_rest(y, &text, count, n_all);
    add(y, &text,
        n == 1 ? " of the one condition that is near or over."
               : screen_text(y->a, " of the %zu conditions that are near or over.", n));
    say(y, text);
}

static void what_lacks(summary *y)
{
    size_t refused = 0, uncovered = 0, unsettled = 0;
    for (size_t i = 0; i < y->s->n_candidates; i++)
        refused += y->s->candidates[i].refused != NULL;
    for (size_t i = 0; i < y->s->n_ranks; i++)
        uncovered += y->s->ranks[i].best == SIZE_MAX;
    for (size_t i = 0; i < y->s->n_referee; i++)
        unsettled += y->s->referee[i].status != TACET_OK || !y->s->referee[i].a.settled;
    if (uncovered)
        say(y, screen_text(y->a, "At %zu of %zu speeds nothing is clear, all cylinders included.",
                           uncovered, y->s->n_ranks));
    if (y->s->n_failed)
        say(y, screen_text(y->a, "%zu condition%s could not be solved; levels.csv says why.",
                           y->s->n_failed, y->s->n_failed == 1 ? "" : "s"));
    if (unsettled)
        say(y, screen_text(y->a, "%zu of %zu checks by the second solver did not settle.",
                           unsettled, y->s->n_referee));
    if (refused)
        say(y, screen_text(y->a, "%zu of %zu candidates were not screened; the table says why.",
                           refused, y->s->n_candidates));
}

// The largest disagreement of the solvers, so that it stands beside the result.
static void what_agrees(summary *y)
{
    double same = 0, full = 0;
    size_t n = 0;
    char a[TACET_NUMBER_TEXT], b[TACET_NUMBER_TEXT];
    for (size_t i = 0; i < y->s->n_referee; i++) {
        const tacet_referee *f = &y->s->referee[i];
        if (f->status != TACET_OK || !f->a.settled) continue;
        same = fmax(same, f->a.same_model);
        full = fmax(full, f->a.full_model_db);
        n++;
    }
    if (n == 0) return;
    snprintf(a, sizeof a, "%.0e", same);
    say(y,
        screen_text(y->a,
                    "Solvers agree on the %zu worst condition%s: same model within %s, fast path "
                    "against the full march within %s dB.",
                    n, n == 1 ? "" : "s", a, text_fixed(full, 3, b)));
}

tacet_status tacet_screen_summary(const tacet_model *m, const tacet_screen *s, tacet_arena *a,
                                  const char *const **lines, size_t *n)
{
    summary y = {.m = m, .s = s, .a = a};
    tacet_run *run;
    size_t n_runs;
    *n = 0;
    y.line = tacet_arena_alloc(a, LINES_MOST * sizeof *y.line);
    if (!y.line) return TACET_NO_MEMORY;
    tacet_status status = tacet_screen_runs(s, a, &run, &n_runs);
    if (status != TACET_OK) return status;
    what_runs(&y, run, n_runs);
    what_saves(&y);
    what_limits(&y);
    what_lacks(&y);
    what_agrees(&y);
    if (y.failed) return TACET_NO_MEMORY;
    *lines = y.line;
    *n = y.n;
    return TACET_OK;
}
