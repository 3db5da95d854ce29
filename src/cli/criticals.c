// Where the orders that a study can run meet the modes of its train.
#include "cli/cli.h"
#include <math.h>

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

// At its place; an order that is there already keeps its first name.
static void add(cli_order *at, size_t *n, cli_order new)
{
    size_t i = *n;
    for (size_t k = 0; k < *n; k++)
        if (fabs(at[k].order - new.order) < 1e-9) return;
    for (; i > 0 && at[i - 1].order > new.order; i--)
        at[i] = at[i - 1];
    at[i] = new;
    (*n)++;
}

static cli_order of_fires(const cli_session *s, unsigned fires, unsigned revolutions,
                          const char *of)
{
    char text[24];
    return (cli_order){(double)fires / revolutions,
                       cli_text(s->arena, "%s", cli_fraction(fires, revolutions, text)), of};
}

static int of_candidates(const cli_session *s, cli_order **out, size_t *n, unsigned multiples)
{
    tacet_candidate *c = NULL;
    size_t n_candidates = 0;
    int code = cli_study_candidates(s, &c, &n_candidates);
    if (code != CLI_DONE) return code;
    *out = tacet_arena_alloc(s->arena, (n_candidates + multiples) * sizeof **out);
    for (size_t i = 0; *out && i < n_candidates; i++)
        if (!c[i].refused)
            add(*out, n, of_fires(s, c[i].roll[0]->fires, c[i].roll[0]->revolutions, c[i].name));
    tacet_candidates_destroy(c, n_candidates);
    return *out ? CLI_DONE : cli_failed(TACET_NO_MEMORY, NULL);
}

int cli_leading_orders(const cli_session *s, cli_order **out, size_t *n)
{
    const tacet_roll *all = tacet_model_all_fire(s->model);
    double highest = tacet_model_highest_order(s->model, NULL);
    unsigned multiples = (unsigned)(highest * all->revolutions / all->fires);
    *n = 0;
    int code = of_candidates(s, out, n, multiples);
    for (unsigned k = 1; code == CLI_DONE && k <= multiples; k++)
        add(*out, n,
            of_fires(s, k * all->fires, all->revolutions,
                     cli_text(s->arena, k == 1 ? "all-fire" : "all-fire x%u", k)));
    return code;
}
