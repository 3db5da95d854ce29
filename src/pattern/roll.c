// The roll: what each cylinder does in each working cycle until pattern and cylinders line up
// again.
#include "gcd.h"
#include "tacet/pattern.h"
#include <stdlib.h>

#define CYLINDERS_MOST 64

static tacet_cycle *slot_cycles(const tacet_roll *r, unsigned slot)
{
    return r->cycle + (size_t)slot * r->cycles;
}

// Counts skips around the circle: the walk starts after a fire, so every run is met whole.
static void count_skips(tacet_roll *r, unsigned slot)
{
    tacet_cycle *cycle = slot_cycles(r, slot);
    unsigned start = 0;
    while (start < r->cycles && cycle[start].tenths == 0)
        start++;
    if (start == r->cycles) {
        for (unsigned c = 0; c < r->cycles; c++)
            cycle[c].skips = TACET_SKIPS_FOREVER;
        return;
    }
    unsigned run = 0;
    for (unsigned i = 1; i <= r->cycles; i++) {
        tacet_cycle *c = &cycle[(start + i) % r->cycles];
        if (c->tenths > 0) {
            c->skips = (uint8_t)run;
            run = 0;
        } else {
            c->skips = (uint8_t)++run;
            if (run > r->longest_run) r->longest_run = run;
        }
    }
}

// Longest run of skipped opportunities around the word; the whole repeat when nothing fires.
static unsigned longest_gap(const tacet_roll *r)
{
    if (r->fires == 0) return r->opportunities;
    const tacet_pattern *p = &r->pattern;
    unsigned longest = 0, run = 0;
    for (unsigned i = 0; i < 2 * p->length; i++) {
        run = p->tenths[i % p->length] ? 0 : run + 1;
        if (run > longest) longest = run;
    }
    return longest;
}

static void fill(tacet_roll *r)
{
    for (unsigned slot = 0; slot < r->cylinders; slot++) {
        tacet_cycle *cycle = slot_cycles(r, slot);
        for (unsigned c = 0; c < r->cycles; c++) {
            cycle[c].tenths = r->pattern.tenths[(c * r->cylinders + slot) % r->pattern.length];
            if (cycle[c].tenths > 0) r->fires++;
        }
        count_skips(r, slot);
    }
    r->longest_gap = longest_gap(r);
}

tacet_status tacet_roll_create(const tacet_pattern *p, unsigned cylinders, unsigned strokes,
                               tacet_roll **out, tacet_error *e)
{
    *out = NULL;
    if (p->length < 1 || p->length > TACET_PATTERN_LONGEST)
        return tacet_fail(e, TACET_BAD_INPUT, "a pattern of %u letters; 1 to %d are allowed",
                          p->length, TACET_PATTERN_LONGEST);
    if (cylinders < 1 || cylinders > CYLINDERS_MOST)
        return tacet_fail(e, TACET_BAD_INPUT, "%u cylinders; 1 to %d are allowed", cylinders,
                          CYLINDERS_MOST);
    if (strokes != 2 && strokes != 4)
        return tacet_fail(e, TACET_BAD_INPUT, "%u strokes; 2 or 4 are allowed", strokes);
    tacet_roll *r = calloc(1, sizeof *r);
    if (!r) return tacet_fail(e, TACET_NO_MEMORY, "no memory for a roll");
    r->pattern = *p;
    tacet_pattern_reduce(&r->pattern);
    r->cylinders = cylinders;
    r->strokes = strokes;
    r->cycles = r->pattern.length / gcd(r->pattern.length, cylinders);
    r->opportunities = r->cycles * cylinders;
    r->revolutions = r->cycles * strokes / 2;
    r->cycle = calloc(r->opportunities, sizeof *r->cycle);
    if (!r->cycle) {
        tacet_roll_destroy(r);
        return tacet_fail(e, TACET_NO_MEMORY, "no memory for a roll");
    }
    fill(r);
    *out = r;
    return TACET_OK;
}

void tacet_roll_destroy(tacet_roll *r)
{
    if (!r) return;
    free(r->cycle);
    free(r);
}

tacet_cycle tacet_roll_cycle(const tacet_roll *r, unsigned slot, unsigned cycle)
{
    return slot_cycles(r, slot)[cycle % r->cycles];
}

unsigned tacet_roll_fires_of(const tacet_roll *r, unsigned slot)
{
    unsigned fires = 0;
    for (unsigned c = 0; c < r->cycles; c++)
        if (slot_cycles(r, slot)[c].tenths > 0) fires++;
    return fires;
}

static unsigned longest_run_of(const tacet_roll *r, unsigned slot)
{
    unsigned longest = 0;
    for (unsigned c = 0; c < r->cycles; c++) {
        unsigned skips = slot_cycles(r, slot)[c].skips;
        if (skips != TACET_SKIPS_FOREVER && skips > longest) longest = skips;
    }
    return longest;
}

static bool refuse(tacet_error *e, unsigned slot)
{
    if (e) e->column = (int)slot + 1;
    return false;
}

bool tacet_roll_allowed(const tacet_roll *r, const bool *may_skip, unsigned longest_run,
                        tacet_error *e)
{
    if (r->fires == 0) {
        (void)tacet_fail(e, TACET_BAD_INPUT, "no cylinder fires");
        return false;
    }
    for (unsigned slot = 0; slot < r->cylinders; slot++) {
        unsigned fires = tacet_roll_fires_of(r, slot), run = longest_run_of(r, slot);
        if (may_skip && !may_skip[slot] && fires < r->cycles) {
            (void)tacet_fail(e, TACET_BAD_INPUT,
                             "it skips the cylinder at position %u of the firing sequence, which "
                             "cannot skip",
                             slot + 1);
            return refuse(e, slot);
        }
        if (longest_run && run > longest_run) {
            (void)tacet_fail(e, TACET_BAD_INPUT,
                             "it skips the cylinder at position %u of the firing sequence %u times "
                             "in a row; %u are allowed",
                             slot + 1, run, longest_run);
            return refuse(e, slot);
        }
    }
    return true;
}
