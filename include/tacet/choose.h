// choose: what rows together say: the screen's conditions, no-go ranges, ranking, recommendation.
#ifndef TACET_CHOOSE_H
#define TACET_CHOOSE_H
#include "tacet/base.h"
#include "tacet/condition.h"
#pragma GCC visibility push(default)

// A candidate of a screen: one density with all its placements, or one word of a book or of the
// study.
typedef struct {
    const char *name; // "3/7", or the word's or book entry's name
    const char *word; // of its first placement
    unsigned fires, length;
    double density;
    const char *refused; // not NULL: not screened, and why
    tacet_roll **roll;   // [n_placements]
    size_t n_placements;
} tacet_candidate;

typedef struct {            // levels of one limiting band over speed
    size_t candidate, band; // band: index; no-go ranges are of bands
    double low_rad_per_s,
        high_rad_per_s;       // edges by bisection to 0.5 rpm; the screen's ends where cut off
    bool low_open, high_open; // runs past the end of the screened speeds
    double worst_margin_db, worst_speed_rad_per_s, leading_order;
} tacet_no_go;

typedef struct {
    size_t candidate;
    tacet_row row;    // of the worst placement
    size_t placement; // which
    bool extra;       // speed added besides the grid
} tacet_cell;

typedef struct { // per (speed, demand), candidates best first
    double speed_rad_per_s, demand_Nm;
    size_t *ranked; // indices into `cells`
    size_t n_ranked;
    size_t best; // cell index of the recommended candidate; SIZE_MAX: none is clear
} tacet_rank;

typedef struct { // what a candidate comes to
    size_t candidate;
    bool recommended;
    char why_not[160];                                     // when not
    size_t n_clear, n_near, n_over, n_none, n_unreachable; // of grid speeds
    double clear_rpm;                                      // rad/s: total span of speed where clear
    double clear_from_rad_per_s, clear_to_rad_per_s;       // of the widest clear stretch
    double saving;     // mean fuel saving against all-fire where clear; NAN: none
    int limiting_band; // most often, -1
    double limiting_order;
} tacet_candidate_note;

typedef struct tacet_screen {
    tacet_candidate *candidates;
    size_t n_candidates;
    double *speeds_rad_per_s;
    size_t n_speeds; // grid of the study
    tacet_cell *cells;
    size_t n_cells; // candidate-major, grid first, then extra speeds
    tacet_no_go *no_go;
    size_t n_no_go;
    tacet_rank *ranks;
    size_t n_ranks;              // one a grid speed
    tacet_candidate_note *notes; // [n_candidates]
    struct {
        size_t cell;
        tacet_agreement a;
    } * referee;
    size_t n_referee;
    size_t n_failed, n_solves;
} tacet_screen;

typedef struct {
    void (*progress)(void *who, size_t done, size_t of);
    void *who;
    const volatile int *stop; // may be NULL
} tacet_watch;
TACET_USE tacet_status tacet_screen_run(const tacet_model *m, const tacet_watch *watch,
                                        tacet_screen **out, tacet_problems *problems,
                                        tacet_error *e);
void tacet_screen_destroy(tacet_screen *s);

#pragma GCC visibility pop
#endif
