// What each candidate comes to over the speeds: counts, spans, saving, what limits it.
#include "internal.h"
#include <math.h>
#include <stdlib.h>

static void count(const tacet_screen *s, const tacet_candidate *c, tacet_candidate_note *note)
{
    for (size_t i = 0; i < s->n_speeds; i++) {
        const tacet_row *row = &s->cells[c->first_cell + i].row;
        if (row->outcome == TACET_UNREACHABLE)
            note->n_unreachable++;
        else if (row->outcome == TACET_FAILED || row->worst == TACET_NO_VERDICT)
            note->n_none++;
        else if (row->worst == TACET_CLEAR)
            note->n_clear++;
        else if (row->worst == TACET_NEAR)
            note->n_near++;
        else
            note->n_over++;
    }
}

// Mean saving over the clear grid speeds that have an all-fire reference.
static double mean_saving(const tacet_screen *s, const tacet_candidate *c)
{
    double sum = 0;
    size_t n = 0;
    for (size_t i = 0; i < s->n_speeds; i++) {
        const tacet_cell *cell = &s->cells[c->first_cell + i];
        if (!cell_is_clear(cell) || isnan(cell->row.fuel_to_all_fire)) continue;
        sum += 1 - cell->row.fuel_to_all_fire;
        n++;
    }
    return n ? sum / (double)n : NAN;
}

// Index of the first of the largest counts, -1 when all are 0.
static int most_often(const size_t *times, size_t n)
{
    int found = -1;
    for (size_t i = 0; i < n; i++)
        if (times[i] > (found < 0 ? 0 : times[found])) found = (int)i;
    return found;
}

// Leading order of a band at the candidate's worst grid speed in it.
static double order_at_worst(const tacet_screen *s, const tacet_candidate *c, int band)
{
    double worst = INFINITY, order = 0;
    for (size_t i = 0; i < s->n_speeds; i++) {
        const tacet_row *row = &s->cells[c->first_cell + i].row;
        if (row->outcome != TACET_SOLVED || !(row->bands[band].margin_db < worst)) continue;
        worst = row->bands[band].margin_db;
        order = row->bands[band].level.leading_order;
    }
    return order;
}

// The band or limit with the smallest margin at most of the speeds where the candidate is not
// clear.
static void what_limits(const tacet_screen *s, const tacet_candidate *c, tacet_candidate_note *note)
{
    size_t by_band[TACET_BANDS_MOST] = {0}, by_limit[TACET_LIMITS_MOST] = {0};
    for (size_t i = 0; i < s->n_speeds; i++) {
        const tacet_cell *cell = &s->cells[c->first_cell + i];
        if (cell->row.outcome != TACET_SOLVED || cell_is_clear(cell)) continue;
        if (cell->row.limiting_band >= 0)
            by_band[cell->row.limiting_band]++;
        else if (cell->row.limiting_limit >= 0)
            by_limit[cell->row.limiting_limit]++;
    }
    int band = most_often(by_band, TACET_BANDS_MOST),
        limit = most_often(by_limit, TACET_LIMITS_MOST);
    if (limit >= 0 && (band < 0 || by_limit[limit] > by_band[band]))
        note->limiting_limit = limit;
    else if (band >= 0) {
        note->limiting_band = band;
        note->limiting_order = order_at_worst(s, c, band);
    }
}

static int by_speed(const void *a, const void *b)
{
    const tacet_cell *x = *(const tacet_cell *const *)a, *y = *(const tacet_cell *const *)b;
    double u = x->row.speed_rad_per_s, v = y->row.speed_rad_per_s;
    return (u > v) - (u < v);
}

// Spans between neighbouring clear speeds, grid and extra ones; a clear speed alone spans nothing.
static void spans(const tacet_screen *s, const tacet_candidate *c, const tacet_cell **sorted,
                  tacet_candidate_note *note)
{
    double from = NAN, widest = -1;
    for (size_t i = 0; i < c->n_cells; i++)
        sorted[i] = &s->cells[c->first_cell + i];
    if (c->n_cells) qsort(sorted, c->n_cells, sizeof *sorted, by_speed);
    for (size_t i = 0; i < c->n_cells; i++) {
        double speed = sorted[i]->row.speed_rad_per_s;
        if (!cell_is_clear(sorted[i])) {
            from = NAN;
            continue;
        }
        if (isnan(from))
            from = speed;
        else
            note->clear_rad_per_s += speed - sorted[i - 1]->row.speed_rad_per_s;
        if (speed - from <= widest) continue;
        widest = speed - from;
        note->clear_from_rad_per_s = from;
        note->clear_to_rad_per_s = speed;
    }
}

tacet_status notes_make(tacet_screen *s, tacet_arena *scratch)
{
    size_t most = 0;
    for (size_t c = 0; c < s->n_candidates; c++)
        if (s->candidates[c].n_cells > most) most = s->candidates[c].n_cells;
    const tacet_cell **sorted = tacet_arena_alloc(scratch, most * sizeof(tacet_cell *));
    s->notes = tacet_arena_alloc(s->arena, s->n_candidates * sizeof *s->notes);
    if (!sorted || !s->notes) return TACET_NO_MEMORY;
    for (size_t c = 0; c < s->n_candidates; c++) {
        tacet_candidate_note *note = &s->notes[c];
        *note = (tacet_candidate_note){.candidate = c,
                                       .why_not = "",
                                       .saving = NAN,
                                       .limiting_band = -1,
                                       .limiting_limit = -1,
                                       .clear_from_rad_per_s = NAN,
                                       .clear_to_rad_per_s = NAN};
        if (s->candidates[c].refused) continue;
        count(s, &s->candidates[c], note);
        spans(s, &s->candidates[c], sorted, note);
        what_limits(s, &s->candidates[c], note);
        note->saving = mean_saving(s, &s->candidates[c]);
    }
    return TACET_OK;
}
