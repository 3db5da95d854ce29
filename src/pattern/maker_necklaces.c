// All necklaces of k fires in L opportunities: one word of each class of rotations, the first in
// the order '.' < 'x', in that order. The recursion over prenecklaces of F. Ruskey, C. Savage & T.
// Wang, J. Algorithms 13 (1992) 414 (F. Ruskey & J. Sawada, SIAM J. Comput. 29 (1999) 671, for
// fixed density), cut where the fires cannot come out at k. Counts: (1/L) sum over d | gcd(L, k) of
// phi(d) C(L/d, k/d).
#include "makers.h"
#include <string.h>

// A list longer than this helps nobody and fills memory; a search that visits more prefixes than
// this takes seconds.
#define WORDS_MOST  100000
#define VISITS_MOST 20000000

typedef struct {
    const tacet_maker_def *def;
    tacet_pattern *pattern; // NULL: only count
    size_t n, visits;
    uint8_t letter[TACET_PATTERN_LONGEST + 1]; // from 1; letter[0] = 0
} search;

static bool too_many(const search *s)
{
    return s->n > WORDS_MOST || s->visits > VISITS_MOST;
}

// Skips before the first fire are the longest run of a prenecklace, so at least every (run + 1)-th
// letter that is left must fire.
static bool can_end(const search *s, unsigned at, unsigned fires, unsigned first_run)
{
    unsigned left = s->def->length - at, k = s->def->fires;
    if (fires > k || fires + left < k) return false;
    if (fires == 0) return true;
    return fires + left / (first_run + 1) <= k;
}

static void emit(search *s)
{
    if (s->pattern) {
        tacet_pattern *p = &s->pattern[s->n];
        p->length = s->def->length;
        for (unsigned i = 0; i < p->length; i++)
            p->tenths[i] = s->letter[i + 1] ? 10 : 0;
    }
    s->n++;
}

// Letters 1..t-1 are a prenecklace whose longest Lyndon prefix has p letters.
static void extend(search *s, unsigned t, unsigned p, unsigned fires, unsigned first_run)
{
    const tacet_maker_def *d = s->def;
    s->visits++;
    if (too_many(s) || !can_end(s, t - 1, fires, first_run)) return;
    if (d->longest_run && first_run > d->longest_run) return;
    if (t > d->length) {
        if (d->length % p == 0 && (!d->primitive || p == d->length)) emit(s);
        return;
    }
    for (unsigned letter = s->letter[t - p]; letter <= 1; letter++) {
        s->letter[t] = (uint8_t)letter;
        bool leading = fires == 0 && letter == 0;
        extend(s, t + 1, letter == s->letter[t - p] ? p : t, fires + letter,
               first_run + (leading ? 1 : 0));
    }
}

static tacet_status make(const tacet_maker_def *d, tacet_arena *a, tacet_words *out, tacet_error *e)
{
    tacet_status status = check_length(d->length, e);
    if (status != TACET_OK) return status;
    if (d->fires > d->length)
        return tacet_fail(e, TACET_BAD_INPUT, "%u fires in %u opportunities; at most %u", d->fires,
                          d->length, d->length);
    search s = {.def = d};
    extend(&s, 1, 1, 0, 0);
    if (too_many(&s))
        return tacet_fail(e, TACET_BAD_INPUT,
                          "more than %d necklaces of %u fires in %u opportunities; take a shorter "
                          "word or a shorter longest run of skips",
                          WORDS_MOST, d->fires, d->length);
    status = words_init(out, s.n, a, e);
    if (status != TACET_OK) return status;
    s = (search){.def = d, .pattern = out->pattern};
    extend(&s, 1, 1, 0, 0);
    return TACET_OK;
}

const tacet_maker tacet_maker_necklaces = {
    "necklaces",
    "all words of a density, one of each class of rotations; reads fires, length, primitive and "
    "longest_run",
    make};
