// Second-order sigma-delta word of the stated length; see sigma_delta.c.
#include "sigma_delta.h"

static tacet_status make(const tacet_maker_def *d, tacet_arena *a, tacet_words *out, tacet_error *e)
{
    return sigma_delta_make(2, d, a, out, e);
}

const tacet_maker tacet_maker_sigma_delta_2 = {
    "sigma-delta-2",
    "second-order modulator of any density; reads density, length, dither and seed", make};
