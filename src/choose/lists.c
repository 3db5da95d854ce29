// The room's growing lists. They live in an arena: an outgrown block stays until the arena goes.
#include "internal.h"
#include "rules.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>

// Room for one more of `size` bytes; NULL: no memory.
static void *grown(void *at, size_t n, size_t *room, size_t size, tacet_arena *a)
{
    if (n < *room) return at;
    size_t more = *room ? 2 * *room : 32;
    void *larger = tacet_arena_alloc(a, more * size);
    if (!larger) return NULL;
    if (n) memcpy(larger, at, n * size);
    *room = more;
    return larger;
}

tacet_status speeds_add(speeds *s, double speed, tacet_arena *a)
{
    double *at = grown(s->at, s->n, &s->room, sizeof *at, a);
    if (!at) return TACET_NO_MEMORY;
    s->at = at;
    s->at[s->n++] = speed;
    return TACET_OK;
}

static int by_number(const void *a, const void *b)
{
    double x = *(const double *)a, y = *(const double *)b;
    return (x > y) - (x < y);
}

void speeds_sort(speeds *s)
{
    if (s->n == 0) return;
    qsort(s->at, s->n, sizeof *s->at, by_number);
    size_t n = 1;
    for (size_t i = 1; i < s->n; i++)
        if (s->at[i] > s->at[n - 1] * (1 + SAME_SPEED)) s->at[n++] = s->at[i];
    s->n = n;
}

tacet_status samples_add(samples *s, const sample *x, tacet_arena *a)
{
    sample *at = grown(s->at, s->n, &s->room, sizeof *at, a);
    if (!at) return TACET_NO_MEMORY;
    s->at = at;
    s->at[s->n++] = *x;
    return TACET_OK;
}

tacet_status samples_insert(samples *s, const sample *x, tacet_arena *a)
{
    tacet_status status = samples_add(s, x, a);
    if (status != TACET_OK) return status;
    size_t i = s->n - 1;
    for (; i > 0 && s->at[i - 1].speed > x->speed; i--)
        s->at[i] = s->at[i - 1];
    s->at[i] = *x;
    return TACET_OK;
}

static int by_speed(const void *a, const void *b)
{
    const sample *x = a, *y = b;
    return (x->speed > y->speed) - (x->speed < y->speed);
}

void samples_sort(samples *s)
{
    if (s->n) qsort(s->at, s->n, sizeof *s->at, by_speed);
}

sample sample_blank(double speed)
{
    sample s = {.speed = speed};
    for (size_t b = 0; b < TACET_BANDS_MOST; b++)
        s.margin_db[b] = NAN;
    return s;
}

void sample_take(sample *s, const tacet_row *row)
{
    for (size_t b = 0; b < row->n_bands; b++) {
        const tacet_band_result *band = &row->bands[b];
        if (band->verdict == TACET_NO_VERDICT) {
            s->why[b] = band->why;
            continue;
        }
        double margin_db = isnan(band->margin_db) ? INFINITY : band->margin_db;
        if (margin_db >= s->margin_db[b]) continue; // false for a NAN: nothing known yet
        s->margin_db[b] = margin_db;
        s->leading_order[b] = band->level.leading_order;
    }
}

tacet_status no_go_add(no_go_list *l, const tacet_no_go *x, tacet_arena *a)
{
    tacet_no_go *at = grown(l->at, l->n, &l->room, sizeof *at, a);
    if (!at) return TACET_NO_MEMORY;
    l->at = at;
    l->at[l->n++] = *x;
    return TACET_OK;
}
