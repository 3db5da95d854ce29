// What arrives at the points of a study in one condition: level, shares of the paths, comfort.
#include "cli/point_body.h"
#include <math.h>

#define PATHS_SHOWN 12

static const char *const axes[] = {"x", "y", "z"};
static const char *const members[] = {"x", "y", "z", "roll", "pitch", "yaw"};

static const char *number(const point *p, double value)
{
    char text[TACET_NUMBER_TEXT];
    return cli_text(p->s->arena, "%s", tacet_number_format_short(value, 4, text));
}

static const char *hertz(const point *p, size_t line)
{
    char text[TACET_NUMBER_TEXT];
    return cli_text(p->s->arena, "%s", tacet_number_format_short(point_hz(p, line), 3, text));
}

static void put_row(cli_rows *rows, const char *mount, const char *axis, double complex value,
                    double share)
{
    cli_put_text(rows, mount);
    cli_put_text(rows, axis);
    cli_put(rows, cabs(value));
    cli_put(rows, carg(value) * 180 / M_PI);
    cli_put(rows, 100 * share);
}

static int write_paths(const point *p, const point_arrival *a)
{
    const tacet_table_column columns[] = {
        {.name = "mount", .text = true},
        {.name = "axis", .text = true},
        {.name = "amplitude", .unit = a->unit, .decimals = -1},
        {.name = "phase", .unit = "deg", .decimals = 0},
        {.name = "share", .unit = "%", .decimals = 1},
    };
    const char *heading = cli_text(
        p->s->arena, "Contributions at %s at order %s (%s Hz): share of each along the sum",
        a->name, point_order(p, a->leading), hertz(p, a->leading));
    size_t n = a->n_paths <= PATHS_SHOWN ? a->n_paths : PATHS_SHOWN - 1;
    double complex rest = a->sum;
    cli_rows rows = cli_rows_start(p->s->arena, "paths", heading, columns,
                                   sizeof columns / sizeof *columns, n + 2);
    for (size_t i = 0; i < n; i++) {
        const tacet_path_def *d = &p->body->def->paths[a->path[i].path];
        put_row(&rows, d->mount, axes[d->axis], a->path[i].value, a->path[i].share);
        rest -= a->path[i].value;
    }
    if (n < a->n_paths)
        put_row(&rows, cli_text(p->s->arena, "%zu others", a->n_paths - n), NULL, rest,
                tacet_share(rest, a->sum));
    put_row(&rows, "sum", NULL, a->sum, 1);
    const tacet_table *t = cli_rows_end(&rows);
    if (!t) return cli_failed(TACET_NO_MEMORY, NULL);
    cli_write_table(p->call, t);
    return CLI_DONE;
}

static void write_comfort(const point *p, const point_arrival *a)
{
    const tacet_comfort *c = &a->comfort;
    const tacet_point_def *d = &p->body->def->points[a - p->body->arrival];
    const char *second, *first = tacet_comfort_words(c->weighted_rms, &second);
    printf("Comfort (ISO 2631-1, this axis alone, weighted %s): %s m/s2 rms, %s%s%s;\n"
           "crest factor %s: rms %s; vibration dose %s m/s1.75 if this ran on for %d h\n",
           tacet_weighting_names[d->weighting], number(p, c->weighted_rms), first,
           second ? " to " : "", second ? second : "", number(p, c->crest_factor),
           c->rms_says_enough ? "says enough" : "alone says too little, the dose counts",
           number(p, tacet_vibration_dose(c, 3600.0 * POINT_EXPOSURE_H)), POINT_EXPOSURE_H);
}

static int write_arrival(const point *p, const point_arrival *a)
{
    fputc('\n', stdout);
    tacet_write_clean(stdout, a->name);
    printf(": %s %s rms, all orders", number(p, a->rms), a->unit);
    if (isfinite(a->all_fire_rms)) printf(" (all cylinders firing %s)", number(p, a->all_fire_rms));
    if (a->leading == 0) {
        printf("; nothing arrives\n");
        return CLI_DONE;
    }
    printf("; leading order %s at %s Hz, %s peak\n", point_order(p, a->leading),
           hertz(p, a->leading), number(p, cabs(a->sum)));
    if (a->felt)
        write_comfort(p, a);
    else if (p->body->def->points[a - p->body->arrival].sense == TACET_POINT_ACCELERATION)
        printf("Comfort: not judged, this point has no weighting wk or wd\n");
    return write_paths(p, a);
}

static void write_shaking(const point *p)
{
    static const char *const unit[] = {"N", "N m"};
    printf("\nShaking forces and moments do not depend on the pattern, only on speed; largest "
           "lines here:\n");
    for (int i = 0; i < 2; i++) {
        const point_shaking *s = &p->body->shaking[i];
        printf("%s", i ? "; " : "");
        if (s->line)
            printf("%s %s %s, order %s", members[s->member], number(p, s->peak), unit[i],
                   point_order(p, s->line));
        else
            printf("no %s", i ? "moment" : "force");
    }
    fputc('\n', stdout);
}

int point_write_people(const point *p)
{
    int code = CLI_DONE;
    if (!p->body) return code;
    write_shaking(p);
    for (size_t i = 0; i < p->body->n_arrivals && code == CLI_DONE; i++)
        code = write_arrival(p, &p->body->arrival[i]);
    return code;
}
