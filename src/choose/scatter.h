// Scatter of stiffness: the search, apart from the models it looks at. Private to choose.
#ifndef CHOOSE_SCATTER_H
#define CHOOSE_SCATTER_H
#include "tacet/choose.h"

// Margins over factors of stiffness.
typedef struct {
    size_t n_entries, n_margins;
    const double *half_width; // [n_entries] greater than 0, less than 1
    // margin_db[n_margins] at factor[n_entries]; INFINITY: no line, NAN: not known. Any status but
    // TACET_OK ends the search.
    tacet_status (*probe)(void *who, const double *factor, double *margin_db);
    void *who;
    tacet_arena *arena;
} scatter_space;
typedef struct {
    double stated_db, least_db; // NAN both: not known as stated
    double *at, *slope_db;      // [n_entries]
    size_t governs;
} scatter_least;
// out[n_margins] gets its lists from the arena. n_failed: points at which a margin that is known as
// stated is not known.
TACET_USE tacet_status scatter_search(const scatter_space *q, scatter_least *out, size_t *n_points,
                                      size_t *n_failed);

// A copy of the study with scattered stiffness: `out` borrows from both and from the arena.
TACET_USE tacet_status scatter_study(const tacet_model *m, const tacet_scatter_entry *entries,
                                     size_t n, const double *factor, tacet_arena *a,
                                     tacet_study *out);
#endif
