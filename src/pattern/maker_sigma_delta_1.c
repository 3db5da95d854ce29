// First-order sigma-delta word of the stated length; see sigma_delta.c.
#include "sigma_delta.h"

static tacet_status make(const tacet_maker_def *d, tacet_arena *a, tacet_words *out, tacet_error *e)
{
    return sigma_delta_make(1, d, a, out, e);
}

const tacet_maker tacet_maker_sigma_delta_1 = {
    "sigma-delta-1", "first-order modulator of any density; reads density, length, dither and seed",
    make};
