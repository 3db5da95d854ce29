#include "synthetic.h"
#include <math.h>
#include <stdlib.h>

static void blank_cell(tacet_cell *c, size_t candidate, double speed)
{
    *c = (tacet_cell){.candidate = candidate};
    c->row.speed_rad_per_s = speed;
    c->row.demand_Nm = 300;
    c->row.n_bands = 2;
    c->row.limiting_limit = -1;
    set_margin(c, 10, 3, 0);
    set_fuel(c, 1);
}

tacet_screen *synthetic_screen(size_t n_candidates, size_t n_speeds, double first_rpm,
                               double step_rpm, const size_t *n_extra)
{
    static const char *const names[] = {"1/2", "2/3", "3/4", "4/5", "5/6", "6/7", "7/8"};
    tacet_screen *s = calloc(1, sizeof *s);
    s->arena = tacet_arena_create();
    s->n_candidates = n_candidates;
    s->n_speeds = n_speeds;
    s->candidates = tacet_arena_alloc(s->arena, n_candidates * sizeof *s->candidates);
    s->speeds_rad_per_s = tacet_arena_alloc(s->arena, n_speeds * sizeof(double));
    for (size_t i = 0; i < n_speeds; i++)
        s->speeds_rad_per_s[i] = (first_rpm + step_rpm * (double)i) * RPM;
    for (size_t c = 0; c < n_candidates; c++) {
        bool all = c + 1 == n_candidates;
        s->candidates[c] = (tacet_candidate){.name = all ? "1" : names[c],
                                             .fires = all ? 1 : (unsigned)c + 1,
                                             .length = all ? 1 : (unsigned)c + 2,
                                             .first_cell = s->n_cells,
                                             .n_cells = n_speeds + (n_extra ? n_extra[c] : 0)};
        s->n_cells += s->candidates[c].n_cells;
    }
    s->cells = tacet_arena_alloc(s->arena, s->n_cells * sizeof *s->cells);
    for (size_t c = 0; c < n_candidates; c++)
        for (size_t i = 0; i < s->candidates[c].n_cells; i++) {
            bool extra = i >= n_speeds;
            blank_cell(cell_at(s, c, i), c, extra ? 0 : s->speeds_rad_per_s[i]);
            cell_at(s, c, i)->extra = extra;
        }
    return s;
}

void synthetic_destroy(tacet_screen *s)
{
    tacet_arena_destroy(s->arena);
    free(s);
}

tacet_cell *cell_at(tacet_screen *s, size_t candidate, size_t speed)
{
    return &s->cells[s->candidates[candidate].first_cell + speed];
}

void set_margin(tacet_cell *c, double margin_db, double reserve_db, int band)
{
    c->row.outcome = TACET_SOLVED;
    c->row.worst_margin_db = margin_db;
    c->row.limiting_band = band;
    c->row.worst = margin_db < 0            ? TACET_OVER
                   : margin_db < reserve_db ? TACET_NEAR
                                            : TACET_CLEAR; // a NAN, no line, is clear
    c->row.bands[band].margin_db = margin_db;
    c->row.bands[band].verdict = c->row.worst;
}

void set_fuel(tacet_cell *c, double to_all_fire)
{
    c->row.fuel_to_all_fire = to_all_fire;
    c->row.duty.fuel_kg_per_s = 1e-3 * to_all_fire;
}

void set_outcome(tacet_cell *c, tacet_outcome outcome)
{
    c->row.outcome = outcome;
    c->row.worst = TACET_NO_VERDICT;
    c->row.worst_margin_db = NAN;
    c->row.limiting_band = -1;
}
