// A fixed set of cylinders fires, the rest never does: one letter a cylinder in firing sequence.
#include "makers.h"

static tacet_status refuse(unsigned position, const char *what, unsigned cylinders, tacet_error *e)
{
    return tacet_fail(e, TACET_BAD_INPUT, "position %u %s; each of 0 to %u once is allowed",
                      position, what, cylinders - 1);
}

static tacet_status make(const tacet_maker_def *d, tacet_arena *a, tacet_words *out, tacet_error *e)
{
    tacet_status status = check_length(d->engine_cylinders, e);
    if (status == TACET_OK) status = words_init(out, 1, a, e);
    if (status != TACET_OK) return status;
    tacet_pattern *p = out->pattern;
    p->length = d->engine_cylinders;
    for (size_t i = 0; i < d->n_cylinders; i++) {
        unsigned position = d->cylinders[i];
        if (position >= p->length) return refuse(position, "of the firing sequence", p->length, e);
        if (p->tenths[position]) return refuse(position, "twice", p->length, e);
        p->tenths[position] = 10;
    }
    return TACET_OK;
}

const tacet_maker tacet_maker_cylinders = {
    "cylinders", "a fixed set of cylinders fires; reads cylinders and engine_cylinders", make};
