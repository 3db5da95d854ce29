// Inside of the room choose.
#ifndef CHOOSE_INTERNAL_H
#define CHOOSE_INTERNAL_H
#include "rules.h"
#include "tacet/choose.h"

// ---- lists that grow, in an arena -------------------------------------------------------------
typedef struct {
    double *at;
    size_t n, room;
} speeds;
TACET_USE tacet_status speeds_add(speeds *s, double speed, tacet_arena *a);
void speeds_sort(speeds *s); // rising, each once (positive speeds)

// What one speed says of one candidate: per band the margin of the worst placement, dB; INFINITY:
// no line, NAN: nothing known, and why.
typedef struct {
    double speed;
    double margin_db[TACET_BANDS_MOST], leading_order[TACET_BANDS_MOST];
    tacet_why why[TACET_BANDS_MOST];
} sample;
typedef struct {
    sample *at;
    size_t n, room;
} samples;
TACET_USE tacet_status samples_add(samples *s, const sample *x, tacet_arena *a);
// At its place in a list that rises with speed.
TACET_USE tacet_status samples_insert(samples *s, const sample *x, tacet_arena *a);
void samples_sort(samples *s);
sample sample_blank(double speed);
void sample_take(sample *s, const tacet_row *row); // keeps the worse of what it has and the row's

typedef struct {
    tacet_no_go *at;
    size_t n, room;
} no_go_list;
TACET_USE tacet_status no_go_add(no_go_list *l, const tacet_no_go *x, tacet_arena *a);

// ---- significant lines (lines.c) --------------------------------------------------------------
typedef struct {
    unsigned revolutions, cycles;
    size_t n_lines;
    bool *of_band;  // [n_bands * (n_lines + 1)]
    bool *of_limit; // [n_limits * (n_lines + 1)]
} line_marks;
TACET_USE tacet_status line_marks_init(line_marks *k, const tacet_model *m, const tacet_roll *r,
                                       tacet_arena *a);
// Marks what the last solved condition of the workspace shows.
TACET_USE tacet_status line_marks_take(line_marks *k, const tacet_model *m, const tacet_row *row,
                                       tacet_workspace *w);
// Marks the lines that pass a band wholly between two grid speeds, if cylinders are unequal: what
// those add there has not been seen.
void line_marks_unseen(line_marks *k, const tacet_model *m, const double *grid, size_t n_grid);
void mark_lines(const tacet_spectrum *s, double least_peak, bool *mark);
// Lines of a repeat, those that count, and the speeds (rad/s) between which they are looked at.
typedef struct {
    unsigned revolutions;
    size_t n_lines;
    const bool *mark; // [n_lines + 1]
    double range[2];
} marked_lines;
// Speeds at which a marked line enters or leaves the counted band.
TACET_USE tacet_status lines_enter_and_leave(const marked_lines *l, const tacet_band *b,
                                             speeds *out, tacet_arena *a);
// Speeds at which a marked line has one of the frequencies inside low_hz..high_hz.
TACET_USE tacet_status lines_cross(const marked_lines *l, const double *hz, size_t n_hz,
                                   double low_hz, double high_hz, speeds *out, tacet_arena *a);
// Every speed worth a look besides the grid's, rising, none of them on the grid.
TACET_USE tacet_status extra_speeds(const line_marks *k, const tacet_model *m, const double *grid,
                                    size_t n_grid, speeds *out, tacet_arena *a);

// ---- no-go ranges (no_go.c) -------------------------------------------------------------------
typedef struct {
    size_t candidate, band;
    const speeds *breaks; // where the level may jump, rising
    tacet_status (*probe)(void *who, double speed, sample *out);
    void *who;
    tacet_arena *arena;
} no_go_search;
// Ranges over the limit among `known` (rising; gets the speeds probed), appended to `out`.
TACET_USE tacet_status no_go_find(const no_go_search *q, samples *known, no_go_list *out);

// ---- ranking and notes (rank.c, notes.c, recommend.c) -----------------------------------------
typedef struct {
    double least_clear_rad_per_s, least_saving, reserve_db;
    const char *const *band_name, *const *limit_name; // [n_bands], [n_limits]
    size_t n_bands;
} note_rules;
// From candidates, cells and grid; demand of each grid speed from its cells.
TACET_USE tacet_status ranks_make(tacet_screen *s, tacet_arena *scratch);
// Counts, spans, savings, what limits.
TACET_USE tacet_status notes_make(tacet_screen *s, tacet_arena *scratch);
// The best of each rank, and who is not recommended and why; after the two above.
TACET_USE tacet_status recommend(tacet_screen *s, const note_rules *rules, tacet_arena *scratch);
bool cell_is_clear(const tacet_cell *c);

// ---- worst mount forces (mounts.c) ------------------------------------------------------------
typedef struct { // a force and where it is met
    unsigned line, revolutions;
    double square; // N2
    size_t candidate, placement;
    double speed, demand;
} worst_line;
typedef struct {                      // of one mount and axis
    worst_line at[MOUNT_ORDERS_MOST]; // [n] each order once, the worst first
    size_t n;
    worst_line at_rest; // static; square < 0: none yet
} worst_list;
void worst_take(worst_list *l, const worst_line *x);
typedef struct mount_forces mount_forces;
// *out NULL: there are no mounts, and the others do nothing.
TACET_USE tacet_status mounts_create(mount_forces **out, const tacet_model *m, tacet_arena *a);
// The last solved condition of the workspace, met at candidate, placement, speed and demand of
// `where`; candidate SIZE_MAX: all-fire, not a candidate itself.
TACET_USE tacet_status mounts_take(mount_forces *f, const worst_line *where, bool all_fire,
                                   tacet_workspace *w);
TACET_USE tacet_status mounts_finish(const mount_forces *f, tacet_screen *s);

// ---- referee (referee.c) ----------------------------------------------------------------------
// The `most` worst solved grid cells, spread over the candidates, smallest margin first.
TACET_USE tacet_status referee_pick(const tacet_screen *s, size_t most, tacet_arena *a,
                                    size_t **cells, size_t *n, tacet_arena *scratch);
#endif
