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
    h.again = h.keep;
    return h;
}

// Order: up_fire 0..K, up_skip 1..K+1, down_fire 0..K (twice), down_skip 1..K+1 (twice).
static unsigned of_kind(const halves *h)
{
    return h->longest + 1;
}

unsigned halves_bank(const halves *h)
{
    return of_kind(h) * (4u + h->fire_next + h->skip_next);
}

unsigned halves_count(const halves *h)
{
    return halves_bank(h) * (1u + h->again);
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
    return kind % halves_bank(h) < 2 * of_kind(h);
}

bool halves_is_skip(const halves *h, unsigned kind)
{
    unsigned of_bank = kind % halves_bank(h) / of_kind(h);
    return of_bank == 1 || of_bank >= 3u + h->fire_next;
}

// Does the run of skips of cycle c, or before it, begin after a fire that itself followed a skip?
static bool began_again(const tacet_roll *r, unsigned slot, unsigned c)
{
    tacet_cycle here = tacet_roll_cycle(r, slot, c);
    unsigned back = here.skips + (here.tenths > 0); // to the fire before the run
    return tacet_roll_cycle(r, slot, c + 2 * r->cycles - back).skips > 0;
}

bool halves_of_cycle(const halves *h, const tacet_roll *r, unsigned slot, unsigned c, unsigned *up,
                     unsigned *down)
{
    tacet_cycle cycle = tacet_roll_cycle(r, slot, c);
    bool next_fires = tacet_roll_cycle(r, slot, c + 1).tenths > 0;
    bool forever = cycle.tenths == 0 && cycle.skips == TACET_SKIPS_FOREVER;
    unsigned run = forever ? h->longest + 1 : cycle.skips;
    if (!forever && run > h->longest) return false;
    if (cycle.tenths > 0) {
        *up = halves_up_fire(h, run);
        *down = halves_down_fire(h, run, next_fires);
    } else {
        *up = halves_up_skip(h, run);
        *down = halves_down_skip(h, run, next_fires);
    }
    if (h->again && !forever && run > 0 && began_again(r, slot, c)) {
        *up += halves_bank(h);
        *down += halves_bank(h);
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
