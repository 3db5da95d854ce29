// Evenly spread k fires in L opportunities: the lower mechanical word
//   b_n = floor((n + 1) k / L) - floor(n k / L),  n = 0..L-1
// (M. Lothaire, Algebraic Combinatorics on Words, ch. 2). Conventions: it starts with a skip unless
// k = L, ends with a fire unless k = 0, and of all its rotations it is the first in the order
// '.' < 'x'. The word of L - k fires is this one reversed with 'x' and '.' exchanged. A density
// that is not in lowest terms gives the reduced word repeated.
#include "makers.h"

static tacet_status make(const tacet_maker_def *d, tacet_arena *a, tacet_words *out, tacet_error *e)
{
    tacet_status status = check_length(d->length, e);
    if (status != TACET_OK) return status;
    if (d->fires > d->length)
        return tacet_fail(e, TACET_BAD_INPUT, "%u fires in %u opportunities; at most %u", d->fires,
                          d->length, d->length);
    status = words_init(out, 1, a, e);
    if (status != TACET_OK) return status;
    tacet_pattern *p = out->pattern;
    p->length = d->length;
    for (unsigned n = 0; n < d->length; n++)
        if ((n + 1) * d->fires / d->length > n * d->fires / d->length) p->tenths[n] = 10;
    return TACET_OK;
}

const tacet_maker tacet_maker_even = {
    "even", "density k/L spread as evenly as can be; reads fires and length", make};
