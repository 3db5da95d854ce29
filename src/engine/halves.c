#include "halves.h"

halves halves_of(int trapped, unsigned longest, bool exhaust_first)
{
    halves h = {.longest = longest,
                .open = trapped == TACET_TRAPPED_OPEN,
                .intake = trapped == TACET_TRAPPED_AIR,
                .keep = trapped == TACET_TRAPPED_BURNT,
                .charge_of_fires =
                    trapped == TACET_TRAPPED_RESIDUAL || trapped == TACET_TRAPPED_BURNT};
    h.exhaust_first = !h.open && (trapped != TACET_TRAPPED_RESIDUAL || exhaust_first);
    h.fire_next = h.keep;
    h.skip_next = h.exhaust_first;
    return h;
}

// Order: up_fire 0..K, up_skip 1..K+1, down_fire 0..K (twice), down_skip 1..K+1 (twice).
static unsigned of_kind(const halves *h)
{
    return h->longest + 1;
}

unsigned halves_count(const halves *h)
{
    return of_kind(h) * (4u + h->fire_next + h->skip_next);
}

unsigned halves_up_fire(const halves *h, unsigned skips)
{
    (void)h;
    return skips;
}

unsigned halves_up_skip(const halves *h, unsigned run)
{
    return of_kind(h) + run - 1;
}

unsigned halves_down_fire(const halves *h, unsigned skips, bool next_fires)
{
    return 2 * of_kind(h) + (h->fire_next && !next_fires ? of_kind(h) : 0) + skips;
}

unsigned halves_down_skip(const halves *h, unsigned run, bool next_fires)
{
    return (3u + h->fire_next) * of_kind(h) + (h->skip_next && next_fires ? of_kind(h) : 0) + run -
           1;
}

bool halves_is_up(const halves *h, unsigned kind)
{
    return kind < 2 * of_kind(h);
}

bool halves_is_skip(const halves *h, unsigned kind)
{
    return kind >= (3u + h->fire_next) * of_kind(h) ||
           (kind >= of_kind(h) && kind < 2 * of_kind(h));
}

bool halves_of_cycle(const halves *h, tacet_cycle cycle, bool next_fires, unsigned *up,
                     unsigned *down)
{
    unsigned run = cycle.skips;
    if (cycle.tenths == 0 && run == TACET_SKIPS_FOREVER)
        run = h->longest + 1;
    else if (run > h->longest)
        return false;
    if (cycle.tenths > 0) {
        *up = halves_up_fire(h, run);
        *down = halves_down_fire(h, run, next_fires);
    } else {
        *up = halves_up_skip(h, run);
        *down = halves_down_skip(h, run, next_fires);
    }
    return true;
}

cylinder_rule halves_rule_up_fire(void)
{
    return (cylinder_rule){.up = true, .open = true, .fire = true};
}

cylinder_rule halves_rule_up_skip(const halves *h, unsigned run)
{
    return (cylinder_rule){.up = true, .open = h->open || (h->intake && run == 1)};
}

cylinder_rule halves_rule_down_fire(const halves *h, bool next_fires)
{
    return (cylinder_rule){.open = next_fires || !h->keep};
}

cylinder_rule halves_rule_down_skip(const halves *h, bool next_fires)
{
    return (cylinder_rule){.open = h->open || (h->exhaust_first && next_fires)};
}
