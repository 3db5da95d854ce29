// The screen: every condition of grid and extra speeds, then what they say together.
#include "internal.h"
#include "rules.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>

typedef struct {
    const tacet_model *m;
    const tacet_watch *watch;
    tacet_workspace *w;
    tacet_screen *s;
    tacet_arena *scratch;
    tacet_error *e;
    size_t *order; // active candidates by length of repeat: neighbours share the workspace's memos
    size_t n_order;
    line_marks *marks;    // [n_candidates]
    samples *samples;     // [n_candidates]
    size_t of;            // conditions known to be done
    size_t probed;        // candidate of the bisection
    mount_forces *mounts; // NULL: none
    bool all_fire_apart;  // all-fire is no candidate
} screening;

static tacet_status no_memory(screening *g)
{
    return tacet_fail(g->e, TACET_NO_MEMORY, "no memory for the screen");
}

// ---- one candidate at one speed ---------------------------------------------------------------

static void say(screening *g)
{
    if (g->watch && g->watch->progress)
        g->watch->progress(g->watch->who, g->s->n_solves,
                           g->of > g->s->n_solves ? g->of : g->s->n_solves);
}

static tacet_status solve_placement(screening *g, const tacet_candidate *c, size_t placement,
                                    double speed, tacet_row *row)
{
    if (g->watch && g->watch->stop && *g->watch->stop)
        return tacet_fail(g->e, TACET_STOPPED, "stopped after %zu conditions", g->s->n_solves);
    tacet_condition condition = {.id = g->s->n_solves,
                                 .speed_rad_per_s = speed,
                                 .demand_Nm = tacet_model_demand(g->m, speed),
                                 .roll = c->roll[placement]};
    tacet_status status = tacet_solve(g->m, &condition, TACET_LEVEL_RIPPLE, g->w, row);
    if (status != TACET_OK)
        return tacet_fail(g->e, status, "solving %s: %s", c->name, tacet_status_text(status));
    g->s->n_solves++;
    if (row->outcome == TACET_FAILED) g->s->n_failed++;
    return TACET_OK;
}

static bool is_all_fire(const tacet_roll *r)
{
    return r->pattern.length == 1 && r->pattern.tenths[0] == 10;
}

static tacet_status take_mounts(screening *g, size_t candidate, size_t placement,
                                const tacet_row *row)
{
    const tacet_roll *roll = g->s->candidates[candidate].roll[placement];
    worst_line where = {.candidate = candidate,
                        .placement = placement,
                        .speed = row->speed_rad_per_s,
                        .demand = row->demand_Nm};
    if (row->outcome != TACET_SOLVED) return TACET_OK;
    return mounts_take(g->mounts, &where, is_all_fire(roll), g->w);
}

// All placements; `cell` and `marks` may be NULL.
static tacet_status solve_all(screening *g, size_t candidate, double speed, sample *seen,
                              tacet_cell *cell, line_marks *marks)
{
    const tacet_candidate *c = &g->s->candidates[candidate];
    *seen = sample_blank(speed);
    for (size_t p = 0; p < c->n_placements; p++) {
        tacet_row row = {.outcome = TACET_FAILED};
        tacet_status status = solve_placement(g, c, p, speed, &row);
        if (status != TACET_OK) return status;
        sample_take(seen, &row);
        if (cell && (p == 0 || tacet_row_worse(&row, &cell->row))) {
            cell->candidate = candidate;
            cell->row = row;
            cell->placement = p;
        }
        if (cell && take_mounts(g, candidate, p, &row) != TACET_OK) g->s->n_failed++;
        if (marks && line_marks_take(marks, g->m, &row, g->w) != TACET_OK) g->s->n_failed++;
    }
    say(g);
    return TACET_OK;
}

// ---- preparation ------------------------------------------------------------------------------

static tacet_status copy_grid(screening *g)
{
    const tacet_screen_def *d = &tacet_model_study(g->m)->screen;
    speeds grid = {0};
    for (size_t i = 0; i < d->n_speeds; i++)
        if (speeds_add(&grid, d->speeds_rad_per_s[i], g->s->arena) != TACET_OK) return no_memory(g);
    speeds_sort(&grid);
    if (grid.n == 0) return tacet_fail(g->e, TACET_BAD_INPUT, "no speed to screen");
    g->s->speeds_rad_per_s = grid.at;
    g->s->n_speeds = grid.n;
    return TACET_OK;
}

static tacet_status put_in_order(screening *g)
{
    tacet_screen *s = g->s;
    g->order = tacet_arena_alloc(g->scratch, s->n_candidates * sizeof *g->order);
    g->marks = tacet_arena_alloc(g->scratch, s->n_candidates * sizeof *g->marks);
    g->samples = tacet_arena_alloc(g->scratch, s->n_candidates * sizeof *g->samples);
    if (!g->order || !g->marks || !g->samples) return no_memory(g);
    if (mounts_create(&g->mounts, g->m, g->scratch) != TACET_OK) return no_memory(g);
    g->all_fire_apart = true;
    for (size_t c = 0; c < s->n_candidates; c++) {
        if (s->candidates[c].refused) continue;
        for (size_t p = 0; p < s->candidates[c].n_placements; p++)
            if (is_all_fire(s->candidates[c].roll[p])) g->all_fire_apart = false;
        const tacet_roll *roll = s->candidates[c].roll[0];
        if (line_marks_init(&g->marks[c], g->m, roll, g->scratch) != TACET_OK) return no_memory(g);
        size_t i = g->n_order++;
        for (; i > 0; i--) { // stable insertion
            if (s->candidates[g->order[i - 1]].roll[0]->revolutions <= roll->revolutions) break;
            g->order[i] = g->order[i - 1];
        }
        g->order[i] = c;
        g->of += s->n_speeds * s->candidates[c].n_placements;
    }
    return TACET_OK;
}

// ---- grid and extra speeds --------------------------------------------------------------------

// Mount forces of all-fire at a grid speed, where no candidate brings them.
static tacet_status solve_all_fire(screening *g, double speed)
{
    tacet_row row;
    worst_line where = {
        .candidate = SIZE_MAX, .speed = speed, .demand = tacet_model_demand(g->m, speed)};
    tacet_condition c = {
        .speed_rad_per_s = speed, .demand_Nm = where.demand, .roll = tacet_model_all_fire(g->m)};
    if (!g->mounts || !g->all_fire_apart) return TACET_OK;
    tacet_status status = tacet_solve(g->m, &c, TACET_LEVEL_RIPPLE, g->w, &row);
    if (status != TACET_OK) return no_memory(g);
    if (row.outcome != TACET_SOLVED) return TACET_OK; // nothing to stand beside
    return mounts_take(g->mounts, &where, true, g->w) == TACET_NO_MEMORY ? no_memory(g) : TACET_OK;
}

// The grid's cells stand apart until the number of extra ones is known.
static tacet_status solve_grid(screening *g, tacet_cell *cells)
{
    tacet_screen *s = g->s;
    for (size_t i = 0; i < s->n_speeds; i++) {
        tacet_status apart = solve_all_fire(g, s->speeds_rad_per_s[i]);
        if (apart != TACET_OK) return apart;
        for (size_t k = 0; k < g->n_order; k++) {
            size_t c = g->order[k];
            sample seen;
            tacet_status status = solve_all(g, c, s->speeds_rad_per_s[i], &seen,
                                            &cells[c * s->n_speeds + i], &g->marks[c]);
            if (status != TACET_OK) return status;
            if (samples_add(&g->samples[c], &seen, g->scratch) != TACET_OK) return no_memory(g);
        }
    }
    return TACET_OK;
}

// An extra speed of one candidate and the cell that it fills.
typedef struct {
    double speed;
    size_t rank, candidate, cell; // rank: place in g->order
} job;

static int by_speed_and_rank(const void *a, const void *b)
{
    const job *x = a, *y = b;
    if (x->speed != y->speed) return x->speed < y->speed ? -1 : 1;
    return (x->rank > y->rank) - (x->rank < y->rank);
}

// Lays the cells out by candidate and lists the jobs of the extra ones.
static tacet_status lay_out(screening *g, const tacet_cell *grid_cells, const speeds *extra,
                            job **jobs, size_t *n_jobs)
{
    tacet_screen *s = g->s;
    size_t n_extra = 0;
    for (size_t k = 0; k < g->n_order; k++)
        n_extra += extra[g->order[k]].n;
    s->cells = tacet_arena_alloc(s->arena, (g->n_order * s->n_speeds + n_extra) * sizeof *s->cells);
    *jobs = tacet_arena_alloc(g->scratch, n_extra * sizeof **jobs);
    if (!s->cells || !*jobs) return no_memory(g);
    for (size_t c = 0; c < s->n_candidates; c++) {
        tacet_candidate *candidate = &s->candidates[c];
        candidate->first_cell = s->n_cells;
        if (candidate->refused) continue;
        candidate->n_cells = s->n_speeds + extra[c].n;
        memcpy(&s->cells[s->n_cells], &grid_cells[c * s->n_speeds], s->n_speeds * sizeof *s->cells);
        s->n_cells += candidate->n_cells;
    }
    for (size_t k = 0; k < g->n_order; k++) {
        size_t c = g->order[k], first = s->candidates[c].first_cell + s->n_speeds;
        for (size_t i = 0; i < extra[c].n; i++)
            (*jobs)[(*n_jobs)++] = (job){extra[c].at[i], k, c, first + i};
        g->of += extra[c].n * s->candidates[c].n_placements;
    }
    if (*n_jobs) qsort(*jobs, *n_jobs, sizeof **jobs, by_speed_and_rank);
    return TACET_OK;
}

static tacet_status solve_extra(screening *g, const tacet_cell *grid_cells)
{
    tacet_screen *s = g->s;
    job *jobs = NULL;
    size_t n_jobs = 0;
    speeds *extra = tacet_arena_alloc(g->scratch, s->n_candidates * sizeof *extra);
    if (!extra) return no_memory(g);
    for (size_t k = 0; k < g->n_order; k++) {
        size_t c = g->order[k];
        line_marks_unseen(&g->marks[c], g->m, s->speeds_rad_per_s, s->n_speeds);
        if (extra_speeds(&g->marks[c], g->m, s->speeds_rad_per_s, s->n_speeds, &extra[c],
                         g->scratch) != TACET_OK)
            return no_memory(g);
    }
    tacet_status status = lay_out(g, grid_cells, extra, &jobs, &n_jobs);
    for (size_t i = 0; status == TACET_OK && i < n_jobs; i++) {
        sample seen;
        s->cells[jobs[i].cell].extra = true;
        status =
            solve_all(g, jobs[i].candidate, jobs[i].speed, &seen, &s->cells[jobs[i].cell], NULL);
        if (status == TACET_OK &&
            samples_add(&g->samples[jobs[i].candidate], &seen, g->scratch) != TACET_OK)
            status = no_memory(g);
    }
    return status;
}

// ---- what they say together -------------------------------------------------------------------

static tacet_status probe(void *who, double speed, sample *out)
{
    screening *g = who;
    return solve_all(g, g->probed, speed, out, NULL, NULL);
}

static tacet_status find_no_go_of(screening *g, size_t c, no_go_list *found)
{
    const tacet_screen *s = g->s;
    const line_marks *k = &g->marks[c];
    marked_lines lines = {.revolutions = k->revolutions,
                          .n_lines = k->n_lines,
                          .range = {s->speeds_rad_per_s[0], s->speeds_rad_per_s[s->n_speeds - 1]}};
    g->probed = c;
    samples_sort(&g->samples[c]);
    for (size_t b = 0; b < tacet_model_bands(g->m); b++) {
        speeds breaks = {0};
        lines.mark = k->of_band + b * (k->n_lines + 1);
        tacet_status status =
            lines_enter_and_leave(&lines, tacet_model_band(g->m, b), &breaks, g->scratch);
        if (status != TACET_OK) return no_memory(g);
        speeds_sort(&breaks);
        no_go_search q = {.candidate = c,
                          .band = b,
                          .breaks = &breaks,
                          .probe = probe,
                          .who = g,
                          .arena = g->scratch};
        status = no_go_find(&q, &g->samples[c], found);
        if (status == TACET_NO_MEMORY) return no_memory(g);
        if (status != TACET_OK) return status;
    }
    return TACET_OK;
}

static tacet_status find_no_go(screening *g)
{
    no_go_list found = {0};
    for (size_t c = 0; c < g->s->n_candidates; c++) {
        if (g->s->candidates[c].refused) continue;
        tacet_status status = find_no_go_of(g, c, &found);
        if (status != TACET_OK) return status;
    }
    g->s->no_go = tacet_arena_alloc(g->s->arena, found.n * sizeof *found.at);
    if (!g->s->no_go) return no_memory(g);
    if (found.n) memcpy(g->s->no_go, found.at, found.n * sizeof *found.at);
    g->s->n_no_go = found.n;
    return TACET_OK;
}

static tacet_status judge_together(screening *g)
{
    const tacet_screen_def *d = &tacet_model_study(g->m)->screen;
    const char *names[TACET_BANDS_MOST], *limits[TACET_LIMITS_MOST];
    note_rules rules = {.least_clear_rad_per_s = d->least_clear_rad_per_s,
                        .least_saving = d->least_saving,
                        .reserve_db = d->reserve_db,
                        .band_name = names,
                        .limit_name = limits,
                        .n_bands = tacet_model_bands(g->m)};
    for (size_t b = 0; b < rules.n_bands; b++)
        names[b] = tacet_model_band(g->m, b)->name;
    for (size_t i = 0; i < tacet_model_limits(g->m); i++)
        limits[i] = tacet_model_limit(g->m, i)->name;
    tacet_status status = ranks_make(g->s, g->scratch);
    if (status == TACET_OK) status = notes_make(g->s, g->scratch);
    if (status == TACET_OK) status = recommend(g->s, &rules, g->scratch);
    return status == TACET_OK ? TACET_OK : no_memory(g);
}

static tacet_status ask_referee(screening *g)
{
    tacet_screen *s = g->s;
    size_t *cells = NULL, most = tacet_model_study(g->m)->screen.referee;
    if (referee_pick(s, most, g->scratch, &cells, &s->n_referee, g->scratch) != TACET_OK)
        return no_memory(g);
    s->referee = tacet_arena_alloc(s->arena, s->n_referee * sizeof *s->referee);
    if (!s->referee) return no_memory(g);
    for (size_t i = 0; i < s->n_referee; i++) {
        if (g->watch && g->watch->stop && *g->watch->stop)
            return tacet_fail(g->e, TACET_STOPPED, "stopped before the last check");
        const tacet_cell *cell = &s->cells[cells[i]];
        tacet_condition c = {.id = cell->row.id,
                             .speed_rad_per_s = cell->row.speed_rad_per_s,
                             .demand_Nm = cell->row.demand_Nm,
                             .roll = s->candidates[cell->candidate].roll[cell->placement]};
        s->referee[i].cell = cells[i];
        s->referee[i].status = tacet_solve_referee(g->m, &c, g->w, &s->referee[i].a);
        if (s->referee[i].status == TACET_NO_MEMORY) return no_memory(g);
        say(g);
    }
    return TACET_OK;
}

static tacet_status run(screening *g, tacet_problems *problems)
{
    tacet_screen *s = g->s;
    tacet_status status = copy_grid(g);
    if (status == TACET_OK)
        status =
            tacet_candidates_create(tacet_model_study(g->m), tacet_model_engine(g->m), s->arena,
                                    problems, &s->candidates, &s->n_candidates, g->e);
    if (status == TACET_OK && tacet_workspace_create(g->m, &g->w) != TACET_OK)
        status = no_memory(g);
    if (status == TACET_OK) status = put_in_order(g);
    if (status != TACET_OK) return status;
    say(g);
    tacet_cell *grid_cells =
        tacet_arena_alloc(g->scratch, s->n_candidates * s->n_speeds * sizeof *grid_cells);
    if (!grid_cells) return no_memory(g);
    status = solve_grid(g, grid_cells);
    if (status == TACET_OK) status = solve_extra(g, grid_cells);
    if (status == TACET_OK && mounts_finish(g->mounts, s) != TACET_OK) status = no_memory(g);
    if (status == TACET_OK) status = find_no_go(g);
    if (status == TACET_OK) status = judge_together(g);
    if (status == TACET_OK) status = ask_referee(g);
    return status;
}

tacet_status tacet_screen_run(const tacet_model *m, const tacet_watch *watch, tacet_screen **out,
                              tacet_problems *problems, tacet_error *e)
{
    *out = NULL;
    screening g = {.m = m, .watch = watch, .e = e};
    g.scratch = tacet_arena_create();
    g.s = calloc(1, sizeof *g.s);
    if (g.s) g.s->arena = tacet_arena_create();
    tacet_status status = g.scratch && g.s && g.s->arena ? run(&g, problems) : no_memory(&g);
    tacet_workspace_destroy(g.w);
    tacet_arena_destroy(g.scratch);
    if (status == TACET_OK)
        *out = g.s;
    else
        tacet_screen_destroy(g.s);
    return status;
}

void tacet_screen_destroy(tacet_screen *s)
{
    if (!s) return;
    tacet_candidates_destroy(s->candidates, s->n_candidates);
    tacet_arena_destroy(s->arena);
    free(s);
}
