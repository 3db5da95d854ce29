// Smallest margins within a scatter of stiffness, and their slopes as stated. The method stands in
// tacet/choose.h.
#include "rules.h"
#include "scatter.h"
#include <math.h>
#include <string.h>

#define GOLDEN 0.6180339887498949 // (sqrt 5 - 1) / 2

typedef struct {
    const scatter_space *q;
    scatter_least *out;
    double *factor, *margin; // of the look at hand
    double *low, *high;      // [n_entries * n_margins] range of each margin along each entry alone
    size_t n_points, n_failed;
} search;

static tacet_status start(search *s)
{
    const scatter_space *q = s->q;
    size_t n = q->n_entries, m = q->n_margins;
    s->factor = tacet_arena_alloc(q->arena, (n + 1) * sizeof(double));
    s->margin = tacet_arena_alloc(q->arena, (m + 1) * sizeof(double));
    s->low = tacet_arena_alloc(q->arena, (n * m + 1) * sizeof(double));
    s->high = tacet_arena_alloc(q->arena, (n * m + 1) * sizeof(double));
    if (!s->factor || !s->margin || !s->low || !s->high) return TACET_NO_MEMORY;
    for (size_t b = 0; b < m; b++) {
        scatter_least *l = &s->out[b];
        *l = (scatter_least){.stated_db = NAN, .least_db = NAN, .governs = SIZE_MAX};
        l->at = tacet_arena_alloc(q->arena, (n + 1) * sizeof(double));
        l->slope_db = tacet_arena_alloc(q->arena, (n + 1) * sizeof(double));
        if (!l->at || !l->slope_db) return TACET_NO_MEMORY;
        for (size_t i = 0; i < n; i++) {
            l->at[i] = 1;
            l->slope_db[i] = NAN;
        }
    }
    return TACET_OK;
}

static void as_stated(search *s)
{
    for (size_t i = 0; i < s->q->n_entries; i++)
        s->factor[i] = 1;
}

// Margins at s->factor; every verdict keeps its smallest.
static tacet_status look(search *s)
{
    const scatter_space *q = s->q;
    bool failed = false;
    tacet_status status = q->probe(q->who, s->factor, s->margin);
    if (status != TACET_OK) return status;
    for (size_t b = 0; b < q->n_margins; b++) {
        scatter_least *l = &s->out[b];
        failed |= isnan(s->margin[b]) && (s->n_points == 0 || !isnan(l->stated_db));
        if (s->n_points == 0) l->stated_db = l->least_db = s->margin[b];
        if (!(s->margin[b] < l->least_db - SCATTER_NOISE_DB)) continue;
        l->least_db = s->margin[b];
        memcpy(l->at, s->factor, q->n_entries * sizeof(double));
    }
    s->n_failed += failed && s->n_points > 0;
    s->n_points++;
    return TACET_OK;
}

static size_t looks_aside(double half_width)
{
    double n = ceil(half_width / SCATTER_STEP - 1e-9);
    return n > SCATTER_LOOKS ? (size_t)n : SCATTER_LOOKS;
}

static tacet_status look_along(search *s, size_t entry)
{
    const scatter_space *q = s->q;
    size_t n = looks_aside(q->half_width[entry]);
    double *low = s->low + entry * q->n_margins, *high = s->high + entry * q->n_margins;
    for (size_t b = 0; b < q->n_margins; b++)
        low[b] = high[b] = s->out[b].stated_db;
    for (size_t k = 0; k <= 2 * n; k++) {
        if (k == n) continue; // as stated
        as_stated(s);
        s->factor[entry] = 1 + q->half_width[entry] * ((double)k - (double)n) / (double)n;
        tacet_status status = look(s);
        if (status != TACET_OK) return status;
        for (size_t b = 0; b < q->n_margins; b++) {
            low[b] = fmin(low[b], s->margin[b]); // both pass over NAN
            high[b] = fmax(high[b], s->margin[b]);
        }
    }
    return TACET_OK;
}

static tacet_status look_at_corners(search *s)
{
    const scatter_space *q = s->q;
    if (q->n_entries < 2 || q->n_entries > SCATTER_CORNERS) return TACET_OK;
    for (unsigned corner = 0; corner < 1U << q->n_entries; corner++) {
        for (size_t i = 0; i < q->n_entries; i++)
            s->factor[i] = 1 + (corner >> i & 1 ? 1 : -1) * q->half_width[i];
        tacet_status status = look(s);
        if (status != TACET_OK) return status;
    }
    return TACET_OK;
}

// Central difference in ln(stiffness).
static tacet_status take_slope(search *s, size_t entry)
{
    const scatter_space *q = s->q;
    double step = fmin(SCATTER_SLOPE_STEP, log1p(q->half_width[entry]));
    for (int side = -1; side <= 1; side += 2) {
        as_stated(s);
        s->factor[entry] = exp(side * step);
        tacet_status status = look(s);
        if (status != TACET_OK) return status;
        for (size_t b = 0; b < q->n_margins; b++) {
            double *slope = &s->out[b].slope_db[entry];
            *slope = side < 0 ? s->margin[b] : (s->margin[b] - *slope) / (2 * step);
            if (side > 0 && !isfinite(*slope)) *slope = NAN;
        }
    }
    return TACET_OK;
}

static void choose_governing(search *s)
{
    for (size_t b = 0; b < s->q->n_margins; b++) {
        scatter_least *l = &s->out[b];
        double largest = SCATTER_NOISE_DB / SCATTER_SLOPE_STEP;
        for (size_t i = 0; i < s->q->n_entries; i++)
            if (fabs(l->slope_db[i]) > largest) { // false for NAN
                largest = fabs(l->slope_db[i]);
                l->governs = i;
            }
    }
}

// Golden section of margin b along one entry about its smallest so far.
static tacet_status follow(search *s, size_t b, size_t entry)
{
    const scatter_space *q = s->q;
    double width = q->half_width[entry], step = width / (double)looks_aside(width);
    double mid = s->out[b].at[entry], least = s->out[b].least_db;
    double end[2] = {fmax(mid - step, 1 - width), fmin(mid + step, 1 + width)};
    double at_end[2] = {end[0] < mid ? NAN : least, end[1] > mid ? NAN : least};
    double point[SCATTER_ENTRIES_MOST];
    memcpy(point, s->out[b].at, q->n_entries * sizeof *point);
    for (int k = 0; k < SCATTER_SECTIONS; k++) {
        if (fabs(at_end[0] - least) < SCATTER_DB / 2 && fabs(at_end[1] - least) < SCATTER_DB / 2)
            break;
        int side = end[1] - mid > mid - end[0];
        double x = mid + (1 - GOLDEN) * (end[side] - mid);
        memcpy(s->factor, point, q->n_entries * sizeof *point);
        s->factor[entry] = x;
        tacet_status status = look(s);
        if (status != TACET_OK) return status;
        if (s->margin[b] < least) {
            end[!side] = mid;
            at_end[!side] = least;
            mid = x;
            least = s->margin[b];
        } else {
            end[side] = x;
            at_end[side] = s->margin[b];
        }
    }
    return TACET_OK;
}

static bool moves(const search *s, size_t b, size_t entry)
{
    size_t i = entry * s->q->n_margins + b;
    return s->high[i] - s->low[i] >= SCATTER_DB; // false where nothing is known, or no line
}

// Along the governing entry first, then the others, as long as that gains.
static tacet_status refine(search *s, size_t b)
{
    scatter_least *l = &s->out[b];
    for (int round = 0; round < SCATTER_ROUNDS; round++) {
        double before = l->least_db;
        for (size_t k = 0; k <= s->q->n_entries; k++) {
            size_t entry = k == 0 ? l->governs : k - 1;
            if (entry == SIZE_MAX || (k > 0 && entry == l->governs) || !moves(s, b, entry))
                continue;
            tacet_status status = follow(s, b, entry);
            if (status != TACET_OK) return status;
        }
        if (!(l->least_db < before - SCATTER_DB)) break;
    }
    return TACET_OK;
}

// What does not move a margin at all stands as stated, in whatever corner it was looked at.
static void drop_idle(search *s)
{
    for (size_t b = 0; b < s->q->n_margins; b++)
        for (size_t i = 0; i < s->q->n_entries; i++) {
            size_t k = i * s->q->n_margins + b;
            if (s->high[k] - s->low[k] <= SCATTER_NOISE_DB) s->out[b].at[i] = 1;
        }
}

static tacet_status search_all(search *s)
{
    size_t n = s->q->n_entries;
    tacet_status status = TACET_OK;
    for (size_t i = 0; i < n && status == TACET_OK; i++)
        status = look_along(s, i);
    if (status == TACET_OK) status = look_at_corners(s);
    for (size_t i = 0; i < n && status == TACET_OK; i++)
        status = take_slope(s, i);
    if (status != TACET_OK) return status;
    choose_governing(s);
    for (size_t b = 0; b < s->q->n_margins && status == TACET_OK; b++)
        status = refine(s, b);
    drop_idle(s);
    return status;
}

static bool nothing_known(const search *s)
{
    for (size_t b = 0; b < s->q->n_margins; b++)
        if (!isnan(s->out[b].stated_db)) return false;
    return true;
}

tacet_status scatter_search(const scatter_space *q, scatter_least *out, size_t *n_points,
                            size_t *n_failed)
{
    if (q->n_entries > SCATTER_ENTRIES_MOST) return TACET_BAD_INPUT;
    search s = {.q = q, .out = out};
    tacet_status status = start(&s);
    if (status != TACET_OK) return status;
    as_stated(&s);
    status = look(&s);
    if (status == TACET_OK && !nothing_known(&s)) status = search_all(&s);
    *n_points = s.n_points;
    *n_failed = s.n_failed;
    return status;
}
