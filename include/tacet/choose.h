// choose: what rows together say: the screen's conditions, no-go ranges, ranking, recommendation.
#ifndef TACET_CHOOSE_H
#define TACET_CHOOSE_H
#include "tacet/base.h"
#include "tacet/condition.h"
#pragma GCC visibility push(default)

// ---- candidates -------------------------------------------------------------------------------
// One density, evenly spread, with all its placements that the engine may run; or one word of the
// study or of a book with its rotation as written.
typedef struct {
    const char *name;    // "3/7", or the word, or the name in the book
    const char *word;    // of its first placement, reduced
    const char *comment; // of the book; NULL: none
    unsigned fires, length;
    double density;
    const char *refused; // not NULL: not screened, and why
    tacet_roll **roll;   // [n_placements], as given by rotation; 0 of them when refused
    size_t n_placements;
    size_t n_left_out;          // placements that the engine may not run
    size_t first_cell, n_cells; // its cells in a screen
} tacet_candidate;

// Candidates of a study: densities rising, then `patterns:` in the order given. Problems of books
// go to `problems` with their places. Everything but the rolls is in the arena.
TACET_USE tacet_status tacet_candidates_create(const tacet_study *s, const tacet_engine *en,
                                               tacet_arena *a, tacet_problems *problems,
                                               tacet_candidate **out, size_t *n, tacet_error *e);
void tacet_candidates_destroy(tacet_candidate *c, size_t n); // the rolls; accepts NULL

// ---- result of a screen -----------------------------------------------------------------------
// Speeds at which the dispersed level of a band is over its limit, worst placement, at the study's
// demand. Edges to 0.5 rpm or better. Open: the range may run on, into where nothing is known.
typedef enum {
    TACET_OPEN_NOT,         // an edge
    TACET_OPEN_SPEEDS,      // the end of the screened speeds
    TACET_OPEN_UNREACHABLE, // the candidate cannot reach the demand there
    TACET_OPEN_FAILED,      // there it could not be solved
    TACET_OPEN_NO_REFERENCE // there all-fire gives no reference
} tacet_open;
typedef struct {
    size_t candidate, band;
    double low_rad_per_s, high_rad_per_s;
    tacet_open low_open, high_open;
    double worst_margin_db, worst_speed_rad_per_s, leading_order; // at the worst speed met
} tacet_no_go;

typedef struct {
    size_t candidate;
    tacet_row row;    // of the worst placement: unreachable before failed before no verdict before
                      // the smallest worst margin
    size_t placement; // which
    bool extra;       // at a speed added besides the grid
} tacet_cell;

// One grid speed. Candidates best first: solved, then no scalar limit over, then clear by fuel,
// then the rest by verdict (near, over, none) and margin; unreachable and failed last.
typedef struct {
    double speed_rad_per_s, demand_Nm;
    size_t *ranked; // [n_ranked] indices into `cells`
    size_t n_ranked;
    size_t best; // cell index of the recommended candidate; SIZE_MAX: none is clear
} tacet_rank;

// What a candidate comes to. Counts are of grid speeds.
typedef struct {
    size_t candidate;
    bool recommended;    // best at one grid speed or more
    const char *why_not; // "" when recommended
    size_t n_best;
    size_t n_clear, n_near, n_over, n_none, n_unreachable; // n_none: failed, or no reference
    double clear_rad_per_s; // speed span: sum of the steps between neighbouring clear cells
    double clear_from_rad_per_s, clear_to_rad_per_s; // the widest clear stretch; NAN: clear nowhere
    double saving;         // mean of 1 - fuel to all-fire where clear; NAN: none known
    int limiting_band;     // limits most often where it is not clear; -1: none, or a limit does
    int limiting_limit;    // scalar limit that does so oftener than any band; -1: none
    double limiting_order; // leading order of that band at its worst margin
} tacet_candidate_note;

typedef struct {
    size_t cell;
    tacet_status status; // TACET_OK: `a` holds
    tacet_agreement a;
} tacet_referee;

// The worst force of a mount along one of its own axes on one order, over all cells and all their
// placements, and the same of all-fire alone at the screened speeds.
typedef struct {
    size_t mount;
    int axis;                   // 0 x, 1 y, 2 z
    unsigned line, revolutions; // order in lowest terms; line 0: static, at the mean torque
    double peak_N;
    size_t candidate, placement;
    double speed_rad_per_s, demand_Nm;
    double all_fire_N;               // 0: it has no such order; NAN: it reaches the demand nowhere
    double all_fire_speed_rad_per_s; // NAN where it has none
} tacet_mount_worst;

typedef struct tacet_screen {
    tacet_arena *arena;
    tacet_candidate *candidates;
    size_t n_candidates;
    double *speeds_rad_per_s; // grid of the study, rising
    size_t n_speeds;
    tacet_cell *cells; // by candidate; of each the grid first, then its extra speeds, each rising
    size_t n_cells;
    tacet_no_go *no_go; // by candidate, band, speed
    size_t n_no_go;
    tacet_rank *ranks; // [n_ranks], one a grid speed
    size_t n_ranks;
    tacet_candidate_note *notes; // [n_candidates]
    tacet_mount_worst *mounts;   // by mount and axis, the largest first, static last; no body: none
    size_t n_mounts;             // of each mount and axis up to 64 orders that are something
    tacet_referee *referee;      // smallest margin first
    size_t n_referee;
    size_t n_failed, n_solves; // conditions, those of the bisection among them
} tacet_screen;

typedef struct {
    // Conditions done and known so far to be done; `of` grows when speeds are added. May be NULL.
    void (*progress)(void *who, size_t done, size_t of);
    void *who;
    const volatile int *stop; // may be NULL; not 0: stop with TACET_STOPPED
} tacet_watch;
// The model must be prepared. watch may be NULL. Conditions that fail are counted and the rest goes
// on; *out is NULL on any other status than TACET_OK.
TACET_USE tacet_status tacet_screen_run(const tacet_model *m, const tacet_watch *watch,
                                        tacet_screen **out, tacet_problems *problems,
                                        tacet_error *e);
void tacet_screen_destroy(tacet_screen *s); // accepts NULL

// A stretch of neighbouring grid speeds with the same recommended candidate, or with none.
typedef struct {
    size_t first, last; // ranks
    size_t candidate;   // SIZE_MAX: none is clear
    size_t tightest;    // cell with the smallest margin; SIZE_MAX: none is clear
} tacet_run;
// In rising speed, into the arena.
TACET_USE tacet_status tacet_screen_runs(const tacet_screen *s, tacet_arena *a, tacet_run **out,
                                         size_t *n);

// ---- scatter of stiffness ----------------------------------------------------------------------
// A rubber mount or coupling is as stiff as its drawing within some share only. The smallest margin
// of each verdict within that, and d(margin)/d(stiffness) as the study states it.
//
// Entry i multiplies a stiffness by a factor f_i in [1 - s_i, 1 + s_i]:
//   a link   its real stiffness; loss factor (at the same frequency) or N m s/rad stay, so the
//            complex stiffness of a link with a loss factor is f times itself. A tuned damper is
//            tuned by the root of f, and its loss factor holds there;
//   a mount  all three axes, dynamic and static; the loss factor stays;
//   "mounts" all mounts together, besides what an entry says of one of them.
// Limits are those of the study as stated, those over all-fire too; so are engine and demand. The
// margin of a band or limit is that of its worst placement.
//
// Looked at: every stiffness as stated; each entry alone, at its ends and in steps of 5 % of the
// stiffness or less; all corners, when entries are four or fewer. From the smallest margin of each
// verdict, golden section along each entry that moves it, the one that governs first, until 0.1 dB
// is left. So a resonance inside the range is found unless it is narrower than the steps: below a
// loss factor of some 0.05 the margin in its middle may be missed.
// Limit case: as all s_i go to 0 the smallest margin goes to the one as stated, and the difference
// to s_i |d(margin)/d(ln stiffness)| of a single entry.
typedef struct {
    const char *name;
    double half_width;  // s, 0.01 to 0.5
    size_t link, mount; // SIZE_MAX: not one; both: all mounts
} tacet_scatter_entry;
// "mounts=15%, coupling=10%" against a model; e says what is allowed, with a near name.
TACET_USE tacet_status tacet_scatter_parse(const char *text, const tacet_model *m, tacet_arena *a,
                                           tacet_scatter_entry **out, size_t *n, tacet_error *e);

typedef struct {
    int band, limit;             // index; the other is -1
    double stated_db, least_db;  // margin; INFINITY: no line; NAN: no verdict as stated
    tacet_verdict stated, least; // what they come to
    const double *at;            // [n_entries] factors at the smallest margin
    const double *slope_db;      // [n_entries] d(margin)/d(ln stiffness) as stated; NAN: unknown
    size_t governs;              // entry with the largest |slope|; SIZE_MAX: none moves it
} tacet_scatter_margin;
typedef struct {
    const tacet_scatter_entry *entries;
    size_t n_entries;
    tacet_scatter_margin *margins; // bands, then limits
    size_t n_margins;
    size_t n_points, n_failed; // of the scatter; failed: some verdict is not known there
} tacet_scatter;
typedef struct {
    const tacet_scatter_entry *entries;
    size_t n_entries;
    const tacet_candidate *candidate; // all its placements
    double speed_rad_per_s, demand_Nm;
    tacet_level level;
} tacet_scatter_ask;
// The model must be prepared; watch may be NULL. The same call gives the same bits.
TACET_USE tacet_status tacet_scatter_run(const tacet_model *m, const tacet_scatter_ask *ask,
                                         const tacet_watch *watch, tacet_arena *a,
                                         tacet_scatter *out, tacet_error *e);
// "stays clear", "may become near", "may become over", "is near", "is over", "not known".
const char *tacet_scatter_text(const tacet_scatter *s, const tacet_scatter_margin *m);

#pragma GCC visibility pop
#endif
