// Where the orders that a study can run meet the modes of its train.
#include "cli/cli.h"
#include <math.h>
#include <string.h>

double cli_rpm(double speed_rad_per_s)
{
    return round(speed_rad_per_s / tacet_unit_factor("rpm") * 1e6) / 1e6;
}

void cli_screened_rpm(const cli_session *s, double range[2])
{
    const tacet_screen_def *d = &s->study->screen;
    range[0] = INFINITY;
    range[1] = 0;
    for (size_t i = 0; i < d->n_speeds; i++) {
        range[0] = fmin(range[0], cli_rpm(d->speeds_rad_per_s[i]));
        range[1] = fmax(range[1], cli_rpm(d->speeds_rad_per_s[i]));
    }
}

double cli_critical_rpm(const cli_session *s, double order, double hz)
{
    double range[2], rpm = cli_rpm(tacet_order_speed(order, hz));
    cli_screened_rpm(s, range);
    return hz > 0 && rpm >= range[0] && rpm <= range[1] ? rpm : NAN;
}

#define LINE_SHARE 0.1 // of the word's mean: lines of a word below this are no critical's reason
#define NAMES_MOST 40  // letters of the patterns named beside an order

typedef struct {
    const cli_session *s;
    cli_order *at;
    size_t n, most;
} orders;

// At its place; an order that is there already also gets the new name.
static void add(orders *o, unsigned above, unsigned below, const char *of)
{
    double order = (double)above / below;
    char text[24];
    size_t i = o->n;
    for (size_t k = 0; k < o->n; k++)
        if (fabs(o->at[k].order - order) < 1e-9) {
            const char *old = o->at[k].of;
            size_t length = strlen(old);
            if (length + strlen(of) < NAMES_MOST)
                o->at[k].of = cli_text(o->s->arena, "%s, %s", old, of);
            else if (length < 2 || strcmp(old + length - 2, "..") != 0)
                o->at[k].of = cli_text(o->s->arena, "%s, ..", old);
            return;
        }
    if (o->n == o->most) return;
    for (; i > 0 && o->at[i - 1].order > order; i--)
        o->at[i] = o->at[i - 1];
    o->at[i] =
        (cli_order){order, cli_text(o->s->arena, "%s", cli_fraction(above, below, text)), of};
    o->n++;
}

// Lines of a word below the firing order; line m is m periods in length opportunities.
static void add_lines(orders *o, const tacet_candidate *c)
{
    const tacet_roll *r = c->roll[0];
    double complex line[TACET_PATTERN_LONGEST];
    tacet_pattern_spectrum(&r->pattern, line);
    for (unsigned m = 1; m < r->pattern.length; m++)
        if (cabs(line[m]) >= LINE_SHARE * cabs(line[0]))
            add(o, 2 * m * r->cylinders, r->strokes * r->pattern.length, c->name);
}

int cli_leading_orders(const cli_session *s, cli_order **out, size_t *n)
{
    const tacet_roll *all = tacet_model_all_fire(s->model);
    double highest = tacet_model_highest_order(s->model, NULL);
    unsigned multiples = (unsigned)(highest * all->revolutions / all->fires);
    tacet_candidate *c = NULL;
    size_t n_candidates = 0;
    int code = cli_study_candidates(s, &c, &n_candidates);
    if (code != CLI_DONE) return code;
    orders o = {.s = s, .most = multiples};
    for (size_t i = 0; i < n_candidates; i++)
        o.most += c[i].length;
    o.at = tacet_arena_alloc(s->arena, (o.most + 1) * sizeof *o.at);
    for (unsigned k = 1; o.at && k <= multiples; k++)
        add(&o, k * all->fires, all->revolutions,
            k == 1 ? "all fire" : cli_text(s->arena, "all fire x%u", k));
    for (size_t i = 0; o.at && i < n_candidates; i++)
        if (!c[i].refused) add_lines(&o, &c[i]);
    tacet_candidates_destroy(c, n_candidates);
    *out = o.at;
    *n = o.n;
    return o.at ? CLI_DONE : cli_failed(TACET_NO_MEMORY, NULL);
}
