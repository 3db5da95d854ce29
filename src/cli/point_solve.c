// Solving the condition of tacet point.
#include "cli/point_body.h"
#include <math.h>

static const char *quantity_name(const point *p, tacet_quantity_ref q)
{
    char text[TACET_QUANTITY_TEXT];
    return cli_text(p->s->arena, "%s", tacet_model_quantity_text(p->s->model, q, text));
}

static void add_quantity(point *p, tacet_quantity_ref q)
{
    if (q.what->scalar) return;
    for (size_t i = 0; i < p->n_quantities; i++)
        if (p->quantity[i].of.what == q.what && p->quantity[i].of.target == q.target) return;
    p->quantity[p->n_quantities++] = (point_quantity){.of = q, .name = quantity_name(p, q)};
}

static int list_quantities(point *p)
{
    const tacet_model *m = p->s->model;
    size_t n_bands = tacet_model_bands(m), n_limits = tacet_model_limits(m);
    p->quantity = tacet_arena_alloc(p->s->arena, (n_bands + n_limits + 1) * sizeof *p->quantity);
    if (!p->quantity) return cli_failed(TACET_NO_MEMORY, NULL);
    add_quantity(p, (tacet_quantity_ref){.what = tacet_quantity_find("roll-torque")});
    for (size_t i = 0; i < n_bands; i++)
        add_quantity(p, tacet_model_band(m, i)->of);
    for (size_t i = 0; i < n_limits; i++)
        add_quantity(p, tacet_model_limit(m, i)->of);
    return CLI_DONE;
}

static int solve_one(point *p, const tacet_roll *roll, tacet_row *row)
{
    tacet_condition c = p->condition;
    c.roll = roll;
    tacet_status status = tacet_solve(p->s->model, &c, p->level, p->s->work, row);
    return status == TACET_OK ? CLI_DONE : cli_failed(status, NULL);
}

// The last one solved is the worst, so that the workspace holds its response.
static int solve_worst(point *p)
{
    const tacet_candidate *c = p->candidate;
    size_t solved = 0;
    for (size_t i = 0; i < c->n_placements; i++) {
        tacet_row row;
        int code = solve_one(p, c->roll[i], &row);
        if (code != CLI_DONE) return code;
        solved = i;
        if (i > 0 && !tacet_row_worse(&row, &p->row)) continue;
        p->row = row;
        p->placement = i;
    }
    p->condition.roll = c->roll[p->placement];
    return solved == p->placement ? CLI_DONE : solve_one(p, p->condition.roll, &p->row);
}

// All-fire on its own lines: half orders of a four-stroke engine.
typedef struct {
    unsigned revolutions;
    size_t n;
    double *amplitude; // [n + 1]
} reference;

static int take_reference(point *p, reference *kept)
{
    for (size_t i = 0; i < p->n_quantities; i++) {
        point_quantity *q = &p->quantity[i];
        const tacet_spectrum *s;
        tacet_peaks peaks;
        if (tacet_workspace_quantity(p->s->work, q->of, &s, &peaks) != TACET_OK) continue;
        reference *r = &kept[i];
        *r = (reference){s->revolutions, s->n_lines, NULL};
        r->amplitude = tacet_arena_alloc(p->s->arena, (s->n_lines + 1) * sizeof *r->amplitude);
        if (!r->amplitude) return cli_failed(TACET_NO_MEMORY, NULL);
        for (size_t h = 1; h <= s->n_lines; h++)
            r->amplitude[h] = cabs(s->line[h]);
        q->reference = true;
        q->reference_mean = s->mean;
        q->reference_pp = peaks.max - peaks.min;
    }
    return CLI_DONE;
}

static double reference_at(const reference *r, unsigned revolutions, size_t h)
{
    size_t line = h * r->revolutions / revolutions;
    bool same = line * revolutions == h * r->revolutions;
    return r->amplitude && same && line <= r->n ? r->amplitude[line] : 0;
}

static int take_lines(point *p, const reference *kept)
{
    for (size_t i = 0; i < p->n_quantities; i++) {
        point_quantity *q = &p->quantity[i];
        const tacet_spectrum *s;
        tacet_peaks peaks;
        tacet_status status = tacet_workspace_quantity(p->s->work, q->of, &s, &peaks);
        if (status != TACET_OK) return cli_failed(status, NULL);
        double *at = tacet_arena_alloc(p->s->arena, 4 * (s->n_lines + 1) * sizeof *at);
        if (!at) return cli_failed(TACET_NO_MEMORY, NULL);
        q->n = s->n_lines;
        q->mean = s->mean;
        q->pp = peaks.max - peaks.min;
        q->order = at;
        q->amplitude = at + q->n;
        q->phase_deg = at + 2 * q->n;
        q->reference_amplitude = at + 3 * q->n;
        for (size_t h = 1; h <= q->n; h++) {
            q->order[h - 1] = (double)h / s->revolutions;
            q->amplitude[h - 1] = cabs(s->line[h]);
            q->phase_deg[h - 1] = carg(s->line[h]) * 180 / M_PI;
            q->reference_amplitude[h - 1] = reference_at(&kept[i], s->revolutions, h);
        }
    }
    return CLI_DONE;
}

static int solve_one_dead(point *p)
{
    tacet_status status =
        tacet_solve_one_dead(p->s->model, &p->condition, p->level, p->s->work, &p->one_dead);
    return status == TACET_OK ? CLI_DONE : cli_failed(status, NULL);
}

int point_solve(point *p)
{
    int code = list_quantities(p);
    if (code == CLI_DONE) code = point_body_start(p);
    if (code != CLI_DONE) return code;
    reference *kept = tacet_arena_alloc(p->s->arena, (p->n_quantities + 1) * sizeof *kept);
    if (!kept) return cli_failed(TACET_NO_MEMORY, NULL);
    code = solve_one(p, tacet_model_all_fire(p->s->model), &p->all_fire);
    if (code == CLI_DONE && p->all_fire.outcome == TACET_SOLVED) {
        code = take_reference(p, kept);
        point_body_all_fire(p);
    }
    if (code == CLI_DONE) code = solve_one_dead(p);
    if (code == CLI_DONE) code = solve_worst(p);
    if (code != CLI_DONE) return code;
    if (p->row.outcome == TACET_SOLVED) {
        code = take_lines(p, kept);
        return code == CLI_DONE ? point_body_take(p) : code;
    }
    p->n_quantities = 0;
    return CLI_DONE;
}
