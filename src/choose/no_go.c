// No-go ranges of one band: where the level is over its limit, edges by bisection that a straight
// line helps.
//
// Between the speeds at which a line enters or leaves the band (the breaks) a level is smooth. The
// samples at hand are the grid, both sides of every break and the crossings of modes; more are
// added where the level is near the limit, so that the ranges do not depend on the grid.
#include "internal.h"
#include "rules.h"
#include <math.h>

#define GOLDEN 0.6180339887498949 // (sqrt 5 - 1) / 2

static double margin(const no_go_search *q, const sample *s)
{
    return s->margin_db[q->band];
}

static bool is_over(const no_go_search *q, const sample *s)
{
    return margin(q, s) < 0; // false: nothing known
}

// A break between two speeds or at one of them; NAN: none.
static double break_between(const no_go_search *q, double low, double high)
{
    for (size_t i = 0; i < q->breaks->n; i++)
        if (q->breaks->at[i] >= low && q->breaks->at[i] <= high) return q->breaks->at[i];
    return NAN;
}

static bool has_break(const no_go_search *q, double low, double high)
{
    return !isnan(break_between(q, low, high));
}

// Is it worth knowing what lies between two neighbouring samples?
static bool too_wide(const no_go_search *q, const sample *a, const sample *b)
{
    if (b->speed - a->speed <= STEP_SHARE * b->speed) return false;
    double ga = margin(q, a), gb = margin(q, b);
    bool near = ga < NEAR_LIMIT_DB || gb < NEAR_LIMIT_DB;
    return near && !isnan(ga) && !isnan(gb) && !has_break(q, a->speed, b->speed);
}

static tacet_status look_closer(const no_go_search *q, samples *known)
{
    for (size_t i = 0; i + 1 < known->n;) {
        const sample *a = &known->at[i], *b = &known->at[i + 1];
        if (!too_wide(q, a, b)) {
            i++;
            continue;
        }
        sample between;
        tacet_status status = q->probe(q->who, (a->speed + b->speed) / 2, &between);
        if (status == TACET_OK) status = samples_insert(known, &between, q->arena);
        if (status != TACET_OK) return status;
    }
    return TACET_OK;
}

// Does sample i turn back just before the limit, so that the limit may be passed beside it?
// Neighbours are on the same side of the limit with nothing abrupt between.
static bool may_turn(const no_go_search *q, const samples *known, size_t i)
{
    const sample *a = &known->at[i - 1], *b = &known->at[i], *c = &known->at[i + 1];
    double ga = margin(q, a), gb = margin(q, b), gc = margin(q, c), side = gb < 0 ? -1 : 1;
    if (!(fabs(gb) < TURN_DB) || !isfinite(ga) || !isfinite(gc)) return false;
    if (side * ga < side * gb || side * gc < side * gb) return false;
    return !has_break(q, a->speed, c->speed);
}

// Golden section for the smallest |margin| between the neighbours of sample i, until the limit is
// passed (that sample is inserted) or the bracket is narrow.
static tacet_status follow_turn(const no_go_search *q, samples *known, size_t i)
{
    sample low = known->at[i - 1], mid = known->at[i], high = known->at[i + 1];
    double side = margin(q, &mid) < 0 ? -1 : 1;
    while (high.speed - low.speed > TURN_RPM * RAD_PER_S_OF_RPM) {
        bool upper = high.speed - mid.speed > mid.speed - low.speed;
        sample x;
        double at = upper ? mid.speed + (1 - GOLDEN) * (high.speed - mid.speed)
                          : mid.speed - (1 - GOLDEN) * (mid.speed - low.speed);
        tacet_status status = q->probe(q->who, at, &x);
        if (status != TACET_OK) return status;
        double gx = side * margin(q, &x);
        if (gx < 0) return samples_insert(known, &x, q->arena);
        if (gx < side * margin(q, &mid)) {
            *(upper ? &low : &high) = mid;
            mid = x;
        } else {
            *(upper ? &high : &low) = x;
        }
    }
    return TACET_OK;
}

static tacet_status follow_turns(const no_go_search *q, samples *known)
{
    for (size_t i = 1; i + 1 < known->n; i++) {
        if (!may_turn(q, known, i)) continue;
        tacet_status status = follow_turn(q, known, i);
        if (status != TACET_OK) return status;
    }
    return TACET_OK;
}

// Where to look next inside a bracket: two steps in three at the straight line's zero, a little to
// one side and then to the other so that both ends close in; one in three, and where an end has no
// finite margin, the middle, which halves a bracket that holds a jump.
static double next_look(const no_go_search *q, const sample *a, const sample *b, double narrow,
                        unsigned step)
{
    double ga = margin(q, a), gb = margin(q, b);
    if (step % 3 == 2 || !isfinite(ga) || !isfinite(gb)) return (a->speed + b->speed) / 2;
    double zero = a->speed + (b->speed - a->speed) * ga / (ga - gb);
    double aside = (step % 3 == 0 ? 0.4 : -0.4) * narrow;
    if (b->speed - zero < zero - a->speed) aside = -aside;
    return fmin(fmax(zero + aside, a->speed + narrow / 4), b->speed - narrow / 4);
}

static tacet_open opening(const no_go_search *q, const sample *beyond)
{
    if (!isnan(margin(q, beyond))) return TACET_OPEN_NOT;
    switch (beyond->why[q->band]) {
    case TACET_WHY_UNREACHABLE:
        return TACET_OPEN_UNREACHABLE;
    case TACET_WHY_NO_REFERENCE:
        return TACET_OPEN_NO_REFERENCE;
    default:
        return TACET_OPEN_FAILED;
    }
}

// The speed between two samples, one over and the other not, at which that changes: a break itself
// where it is one. `open`: whether on the other side nothing is known, and why.
static tacet_status find_edge(const no_go_search *q, sample a, sample b, double *speed,
                              tacet_open *open)
{
    // a hair wider than the step aside on both sides, so that a break is not searched for
    const double narrow = fmax(EDGE_RPM, 2 * STEP_ASIDE_RPM) * 1.001 * RAD_PER_S_OF_RPM;
    bool over = is_over(q, &a);
    for (unsigned step = 0; b.speed - a.speed > narrow; step++) {
        sample x;
        tacet_status status = q->probe(q->who, next_look(q, &a, &b, narrow, step), &x);
        if (status != TACET_OK) return status;
        *(is_over(q, &x) == over ? &a : &b) = x;
    }
    *open = opening(q, over ? &b : &a);
    *speed = break_between(q, a.speed, b.speed);
    if (isnan(*speed)) *speed = (a.speed + b.speed) / 2;
    return TACET_OK;
}

static void take_worst(const no_go_search *q, const sample *s, tacet_no_go *range)
{
    if (!(margin(q, s) < range->worst_margin_db)) return;
    range->worst_margin_db = margin(q, s);
    range->worst_speed_rad_per_s = s->speed;
    range->leading_order = s->leading_order[q->band];
}

// Range that begins before or at sample *i; on return *i is the first sample after it.
static tacet_status find_range(const no_go_search *q, const samples *known, size_t *i,
                               tacet_no_go *range)
{
    size_t first = *i, last = first;
    tacet_status status = TACET_OK;
    *range = (tacet_no_go){.candidate = q->candidate, .band = q->band, .worst_margin_db = INFINITY};
    for (; last < known->n && is_over(q, &known->at[last]); last++)
        take_worst(q, &known->at[last], range);
    range->low_rad_per_s = known->at[first].speed;
    range->high_rad_per_s = known->at[last - 1].speed;
    range->low_open = first == 0 ? TACET_OPEN_SPEEDS : TACET_OPEN_NOT;
    range->high_open = last == known->n ? TACET_OPEN_SPEEDS : TACET_OPEN_NOT;
    if (first > 0)
        status = find_edge(q, known->at[first - 1], known->at[first], &range->low_rad_per_s,
                           &range->low_open);
    if (status == TACET_OK && last < known->n)
        status = find_edge(q, known->at[last - 1], known->at[last], &range->high_rad_per_s,
                           &range->high_open);
    *i = last;
    return status;
}

// Takes `range` into the one before where they belong together.
static bool merged(no_go_list *out, size_t n_before, const tacet_no_go *range)
{
    if (out->n == n_before) return false;
    tacet_no_go *last = &out->at[out->n - 1];
    if (last->high_open || range->low_open) return false;
    if (range->low_rad_per_s - last->high_rad_per_s > GAP_RPM * RAD_PER_S_OF_RPM) return false;
    last->high_rad_per_s = range->high_rad_per_s;
    last->high_open = range->high_open;
    if (range->worst_margin_db < last->worst_margin_db) {
        last->worst_margin_db = range->worst_margin_db;
        last->worst_speed_rad_per_s = range->worst_speed_rad_per_s;
        last->leading_order = range->leading_order;
    }
    return true;
}

tacet_status no_go_find(const no_go_search *q, samples *known, no_go_list *out)
{
    size_t n_before = out->n;
    tacet_status status = look_closer(q, known);
    if (status == TACET_OK) status = follow_turns(q, known);
    for (size_t i = 0; status == TACET_OK && i < known->n;) {
        if (!is_over(q, &known->at[i])) {
            i++;
            continue;
        }
        tacet_no_go range;
        status = find_range(q, known, &i, &range);
        if (status == TACET_OK && !merged(out, n_before, &range))
            status = no_go_add(out, &range, q->arena);
    }
    return status;
}
