// Ranking of the candidates at each grid speed.
#include "internal.h"
#include <math.h>
#include <stdlib.h>

bool cell_is_clear(const tacet_cell *c)
{
    return c->row.outcome == TACET_SOLVED && c->row.worst == TACET_CLEAR;
}

static bool a_limit_is_over(const tacet_row *row)
{
    for (size_t i = 0; i < row->n_limits; i++)
        if (row->limits[i].verdict == TACET_OVER) return true;
    return false;
}

// What two cells of one speed are compared by, in this order, small before large.
typedef struct {
    int outcome;     // solved, unreachable, failed
    bool limit_over; // a scalar limit
    int verdict;     // clear, near, over, none
    double cost;     // clear: fuel; else the margin that lacks
    size_t cell;     // in the order of the candidates
} key;

static key key_of(const tacet_cell *c, size_t cell)
{
    key k = {.outcome = (int)c->row.outcome, .cell = cell};
    if (c->row.outcome != TACET_SOLVED) return k;
    k.limit_over = a_limit_is_over(&c->row);
    k.verdict = (int)c->row.worst;
    k.cost = c->row.worst == TACET_CLEAR ? c->row.duty.fuel_kg_per_s : -c->row.worst_margin_db;
    if (isnan(k.cost)) k.cost = INFINITY;
    return k;
}

static int by_rank(const void *a, const void *b)
{
    const key *x = a, *y = b;
    if (x->outcome != y->outcome) return x->outcome < y->outcome ? -1 : 1;
    if (x->limit_over != y->limit_over) return x->limit_over < y->limit_over ? -1 : 1;
    if (x->verdict != y->verdict) return x->verdict < y->verdict ? -1 : 1;
    if (x->cost != y->cost) return x->cost < y->cost ? -1 : 1;
    return (x->cell > y->cell) - (x->cell < y->cell);
}

static tacet_status rank_speed(tacet_screen *s, size_t speed, key *keys)
{
    tacet_rank *rank = &s->ranks[speed];
    *rank = (tacet_rank){.speed_rad_per_s = s->speeds_rad_per_s[speed], .best = SIZE_MAX};
    for (size_t c = 0; c < s->n_candidates; c++) {
        if (s->candidates[c].refused) continue;
        size_t cell = s->candidates[c].first_cell + speed;
        rank->demand_Nm = s->cells[cell].row.demand_Nm;
        keys[rank->n_ranked++] = key_of(&s->cells[cell], cell);
    }
    if (rank->n_ranked) qsort(keys, rank->n_ranked, sizeof *keys, by_rank);
    rank->ranked = tacet_arena_alloc(s->arena, rank->n_ranked * sizeof *rank->ranked);
    if (!rank->ranked) return TACET_NO_MEMORY;
    for (size_t i = 0; i < rank->n_ranked; i++)
        rank->ranked[i] = keys[i].cell;
    return TACET_OK;
}

tacet_status ranks_make(tacet_screen *s, tacet_arena *scratch)
{
    key *keys = tacet_arena_alloc(scratch, s->n_candidates * sizeof *keys);
    s->ranks = tacet_arena_alloc(s->arena, s->n_speeds * sizeof *s->ranks);
    if (!keys || !s->ranks) return TACET_NO_MEMORY;
    s->n_ranks = s->n_speeds;
    tacet_status status = TACET_OK;
    for (size_t i = 0; status == TACET_OK && i < s->n_speeds; i++)
        status = rank_speed(s, i, keys);
    return status;
}
