// Forces of mounts and shares of paths of the condition of tacet point, from the workspace.
#include "cli/point_body.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>

const char *point_order(const point *p, size_t line)
{
    char text[24];
    return cli_text(p->s->arena, "%s", cli_fraction((unsigned)line, p->body->revolutions, text));
}

double point_hz(const point *p, size_t line)
{
    return tacet_order_hz((double)line / p->body->revolutions, p->row.speed_rad_per_s);
}

static bool is_felt(const tacet_point_def *d)
{
    return d->sense == TACET_POINT_ACCELERATION &&
           (d->weighting == TACET_WEIGHTING_VERTICAL || d->weighting == TACET_WEIGHTING_HORIZONTAL);
}

int point_body_start(point *p)
{
    tacet_arena *a = p->s->arena;
    const tacet_body *body = tacet_model_body(p->s->model);
    if (!body) return CLI_DONE;
    p->body = tacet_arena_alloc(a, sizeof *p->body);
    if (!p->body) return cli_failed(TACET_NO_MEMORY, NULL);
    *p->body = (point_body){.def = tacet_body_def_of(body),
                            .n_forces = 3 * tacet_body_mounts(body),
                            .n_arrivals = tacet_body_points(body)};
    p->body->force = tacet_arena_alloc(a, (p->body->n_forces + 1) * sizeof *p->body->force);
    p->body->arrival = tacet_arena_alloc(a, (p->body->n_arrivals + 1) * sizeof *p->body->arrival);
    if (!p->body->force || !p->body->arrival) return cli_failed(TACET_NO_MEMORY, NULL);
    for (size_t i = 0; i < p->body->n_arrivals; i++) {
        tacet_quantity_ref cab = {tacet_quantity_find("cab"), i};
        p->body->arrival[i] = (point_arrival){.name = tacet_body_point_name(body, i),
                                              .unit = tacet_model_quantity_unit(p->s->model, cab),
                                              .all_fire_rms = NAN,
                                              .felt = is_felt(&p->body->def->points[i])};
    }
    return CLI_DONE;
}

static tacet_status quantity(const point *p, const char *name, size_t target,
                             const tacet_spectrum **out, tacet_peaks *peaks)
{
    tacet_quantity_ref q = {tacet_quantity_find(name), target};
    return tacet_workspace_quantity(p->s->work, q, out, peaks);
}

void point_body_all_fire(point *p)
{
    const tacet_spectrum *s;
    for (size_t i = 0; p->body && i < p->body->n_arrivals; i++)
        if (quantity(p, "cab", i, &s, NULL) == TACET_OK)
            p->body->arrival[i].all_fire_rms = tacet_spectrum_rms(s, 1, s->n_lines);
}

// First of the largest lines; 0: there is none.
static size_t leading_line(const tacet_spectrum *s)
{
    size_t best = 0;
    for (size_t h = 1; h <= s->n_lines; h++)
        if (cabs(s->line[h]) > (best ? cabs(s->line[best]) : 0)) best = h;
    return best;
}

static tacet_status take_force(point *p, size_t target)
{
    const tacet_spectrum *s;
    tacet_peaks peaks;
    point_force *f = &p->body->force[target];
    tacet_status status = quantity(p, "mount-force", target, &s, &peaks);
    if (status != TACET_OK) return status;
    *f = (point_force){.mount = target / 3,
                       .axis = (int)(target % 3),
                       .static_N = s->mean,
                       .rms_N = tacet_spectrum_rms(s, 1, s->n_lines),
                       .pp_N = peaks.max - peaks.min,
                       .largest_N = cabs(s->line[leading_line(s)])};
    if (leading_line(s) == 0) f->largest_N = 0;
    f->line = tacet_arena_alloc(p->s->arena, (s->n_lines + 1) * sizeof *f->line);
    if (!f->line) return TACET_NO_MEMORY;
    memcpy(f->line, s->line, (s->n_lines + 1) * sizeof *f->line);
    p->body->n_lines = s->n_lines;
    p->body->revolutions = s->revolutions;
    return TACET_OK;
}

static int by_share(const void *a, const void *b)
{
    double x = fabs(((const point_path *)a)->share), y = fabs(((const point_path *)b)->share);
    return (x < y) - (x > y);
}

static tacet_status take_paths(point *p, point_arrival *a)
{
    const tacet_body_def *d = p->body->def;
    a->path = tacet_arena_alloc(p->s->arena, (d->n_paths + 1) * sizeof *a->path);
    if (!a->path) return TACET_NO_MEMORY;
    for (size_t i = 0; i < d->n_paths && a->leading; i++) {
        const tacet_spectrum *s;
        if (strcmp(d->paths[i].to, a->name) != 0) continue;
        tacet_status status = tacet_workspace_path(p->s->work, i, &s);
        if (status != TACET_OK) return status;
        double complex value = s->line[a->leading];
        a->path[a->n_paths++] = (point_path){i, value, tacet_share(value, a->sum)};
    }
    qsort(a->path, a->n_paths, sizeof *a->path, by_share);
    return TACET_OK;
}

static tacet_status take_arrival(point *p, size_t i)
{
    const tacet_spectrum *s;
    point_arrival *a = &p->body->arrival[i];
    tacet_status status = quantity(p, "cab", i, &s, NULL);
    if (status != TACET_OK) return status;
    a->rms = tacet_spectrum_rms(s, 1, s->n_lines);
    a->leading = leading_line(s);
    a->sum = a->leading ? s->line[a->leading] : 0;
    if (a->felt) status = tacet_workspace_comfort(p->s->work, i, &a->comfort);
    return status == TACET_OK ? take_paths(p, a) : status;
}

static tacet_status take_shaking(point *p, size_t member)
{
    const tacet_spectrum *s;
    point_shaking *most = &p->body->shaking[member / 3];
    tacet_status status = quantity(p, "shaking", member, &s, NULL);
    size_t h = status == TACET_OK ? leading_line(s) : 0;
    if (h && cabs(s->line[h]) > most->peak) *most = (point_shaking){member, h, cabs(s->line[h])};
    return status;
}

int point_body_take(point *p)
{
    tacet_status status = TACET_OK;
    if (!p->body) return CLI_DONE;
    for (size_t i = 0; i < p->body->n_forces && status == TACET_OK; i++)
        status = take_force(p, i);
    for (size_t i = 0; i < p->body->n_arrivals && status == TACET_OK; i++)
        status = take_arrival(p, i);
    for (size_t i = 0; i < 6 && status == TACET_OK; i++)
        status = take_shaking(p, i);
    return status == TACET_OK ? CLI_DONE : cli_failed(status, NULL);
}
