// show: what is found, shown: tables, JSON, the caution, the result folder and the drawings.
// Figures and tables are plain data; those who write them are const descriptors. A library of its
// own (tacet-show), not part of libtacet. It never prints by itself: every function is told where
// to.
#ifndef TACET_SHOW_H
#define TACET_SHOW_H
#include "tacet/base.h"
#include "tacet/choose.h"
#include "tacet/condition.h"
#include <stdio.h>
#pragma GCC visibility push(default)

const char *tacet_version(void); // of the program, "0.1.0"

// ---- the caution
// Screening result, not a release; who confirms it and how; what is not modelled. SHORT is one
// sentence without line breaks (JSON, table files); LONG is wrapped text of some lines.
typedef enum { TACET_CAUTION_SHORT, TACET_CAUTION_LONG } tacet_caution_form;
const char *tacet_caution(tacet_caution_form form); // never NULL

// ---- streams
// Flushes and checks a stream that was written to: TACET_OUTSIDE_WORLD with `what` (a path, or
// "standard output") and the system's reason in e when anything was lost. errno is kept, so that a
// caller can treat EPIPE apart.
TACET_USE tacet_status tacet_stream_check(FILE *to, const char *what, tacet_error *e);
// Text to a terminal or file without control bytes (each becomes a blank; bad UTF-8 a '?').
void tacet_write_clean(FILE *to, const char *text);

// ---- tables
typedef struct {
    const char *name, *unit; // name is the CSV header and JSON key; unit NULL: none
    bool text;               // cells hold text, not numbers
    int decimals;            // of numbers in the text form; -1: four significant digits
    bool data_only;          // left out of the text form
    const char *head;        // name in the text form; NULL: as `name`
} tacet_table_column;
typedef struct {
    double number;    // NAN: absent (another column of the row says why)
    const char *text; // borrowed; NULL: absent
    bool accent;      // drawn in the accent colour when colour is asked for
} tacet_table_cell;
typedef struct tacet_table {
    const char *name;    // stem of its file
    const char *heading; // line above the text form; NULL: none
    const tacet_table_column *columns;
    size_t n_columns;
    const tacet_table_cell *cells; // [n_rows * n_columns], row by row
    size_t n_rows;
} tacet_table;
typedef struct {
    bool colour;      // may use the one accent colour (text form)
    size_t most_rows; // text form: rows shown before ".. N more"; 0: all
} tacet_table_style;

typedef struct {
    const char *name, *extension, *doc;
    void (*write)(const tacet_table *t, const tacet_table_style *style, FILE *to);
} tacet_writer;
const tacet_writer *tacet_writers(void);                 // text, csv, json; ends with name == NULL
const tacet_writer *tacet_writer_find(const char *name); // NULL: none
// style NULL: no colour, all rows. Check the stream with tacet_stream_check afterwards.
void tacet_table_write(const tacet_table *t, const tacet_writer *w, const tacet_table_style *style,
                       FILE *to);

// ---- JSON, written as it comes
#define TACET_JSON_DEPTH 32
typedef struct {
    FILE *to;
    unsigned depth;
    bool wrong, keyed;                  // calls out of order; a key waits for its value
    bool array[TACET_JSON_DEPTH + 1];   // kind of each open level
    bool started[TACET_JSON_DEPTH + 1]; // holds a value already
    bool broken[TACET_JSON_DEPTH + 1];  // its last value began a line
} tacet_json;
tacet_json tacet_json_start(FILE *to);                 // nothing is written yet
void tacet_json_begin_object(tacet_json *j);           // as a value, or as the root
void tacet_json_end_object(tacet_json *j);             // of the object begun last
void tacet_json_begin_array(tacet_json *j);            // as a value
void tacet_json_end_array(tacet_json *j);              // of the array begun last
void tacet_json_key(tacet_json *j, const char *key);   // its value comes next
void tacet_json_number(tacet_json *j, double value);   // non-finite: null
void tacet_json_count(tacet_json *j, uint64_t value);  // whole, all digits
void tacet_json_text(tacet_json *j, const char *text); // NULL: null; invalid UTF-8: U+FFFD
void tacet_json_bool(tacet_json *j, bool value);       // true or false
void tacet_json_null(tacet_json *j);                   // absent; a sibling says why
// A key and its value in one call.
void tacet_json_put_number(tacet_json *j, const char *key, double value);
void tacet_json_put_count(tacet_json *j, const char *key, uint64_t value);  // whole, all digits
void tacet_json_put_text(tacet_json *j, const char *key, const char *text); // NULL: null
void tacet_json_put_bool(tacet_json *j, const char *key, bool value);       // true or false
// Ends the line. TACET_BAD_INPUT: levels left open or calls out of order; otherwise as
// tacet_stream_check.
TACET_USE tacet_status tacet_json_finish(tacet_json *j, const char *what, tacet_error *e);
// Opens the root object of a document and writes its head: "tacet", "caution", "study", "status".
// study NULL: no "study" member. The caller adds its members and ends the object.
void tacet_json_head(tacet_json *j, const char *command, const tacet_study *study,
                     const char *status);

// ---- result folder: the only place where files are written
typedef struct tacet_folder tacet_folder;
// Creates the folder (one level) if it is missing. TACET_BAD_INPUT when it holds anything that no
// run writes; TACET_OUTSIDE_WORLD when it cannot be made, read or written.
TACET_USE tacet_status tacet_folder_open(const char *path, tacet_folder **out, tacet_error *e);
const char *tacet_folder_path(const tacet_folder *f); // as opened
const char *const *tacet_folder_names(void); // every name that a run may write; ends with NULL
// One file at a time, written as <name>.tmp and given its name by commit. The stream belongs to the
// folder. Commit reports every write error with the path and leaves an older file as it was.
TACET_USE tacet_status tacet_folder_begin(tacet_folder *f, const char *name, FILE **out,
                                          tacet_error *e);
// Closes it, checks that all is written, and gives it its name.
TACET_USE tacet_status tacet_folder_commit(tacet_folder *f, tacet_error *e);
void tacet_folder_abort(tacet_folder *f); // removes the .tmp; nothing open: nothing
bool tacet_folder_wrote(const tacet_folder *f, const char *name); // by this run
// Removes files of an earlier run that this one did not write, so that a folder never mixes two.
TACET_USE tacet_status tacet_folder_tidy(tacet_folder *f, tacet_error *e);
void tacet_folder_close(tacet_folder *f); // accepts NULL; aborts an open file; a folder that it
                                          // made and that holds nothing goes

// ---- figures: plain data, all borrowed
typedef enum { // of a cell of the map
    TACET_MARK_CLEAR,
    TACET_MARK_NEAR,
    TACET_MARK_OVER,
    TACET_MARK_UNREACHABLE,
    TACET_MARK_FAILED,
    TACET_MARK_NO_REFERENCE,
    TACET_MARK_BLANK // not computed
} tacet_mark;
typedef struct {
    tacet_mark mark;
    double margin_db; // NAN: no line anywhere (clear)
    int limiting;     // index into `limiting`, -1: none
    bool recommended; // at this speed
} tacet_map_cell;
typedef struct {
    size_t row;
    double low_rpm, high_rpm;
} tacet_map_range;
#define TACET_FIGURE_ROWS_MOST 256
typedef struct { // 1: density over speed, worst margin
    const char *title, *subtitle;
    const double *speed_rpm; // [n_speeds] strictly rising
    size_t n_speeds;
    const char *const *row;      // [n_rows] names of densities, bottom first
    size_t n_rows;               // up to TACET_FIGURE_ROWS_MOST
    const tacet_map_cell *cell;  // [n_rows * n_speeds]
    const char *const *limiting; // [n_limiting] names of bands, then limits
    size_t n_limiting;
    double reserve_db;
    const tacet_map_range *range; // [n_ranges] no-go ranges with exact edges
    size_t n_ranges;
} tacet_figure_map;

typedef struct {
    const char *name;
    double low_hz, high_hz; // counted
    bool judged;            // on the quantity that is drawn
} tacet_figure_band;
typedef struct {
    const char *name;
    double hz;
} tacet_figure_mode;
#define TACET_FIGURE_ORDERS_MOST 256
typedef struct { // 2: order lines over speed
    const char *title, *subtitle;
    const char *quantity, *unit;
    const double *speed_rpm; // [n_speeds] strictly rising
    size_t n_speeds;
    const double *order;     // [n_orders]
    size_t n_orders;         // up to TACET_FIGURE_ORDERS_MOST
    const double *level_rms; // [n_orders * n_speeds]; NAN: not reachable at that speed
    double highest_hz;       // end of the axis; 0: past the highest band
    const tacet_figure_band *band;
    size_t n_bands;
    const tacet_figure_mode *mode;
    size_t n_modes;
} tacet_figure_orders;

typedef struct { // 3: order bars against all-fire
    const char *title, *subtitle;
    const char *quantity, *unit;
    const char *name, *reference_name; // of the two fills
    double speed_rpm;
    const double *order, *peak, *reference_peak; // [n_orders] rising; NAN: none
    size_t n_orders, n_lines;                    // shown, and of the whole spectrum
    const tacet_figure_band *band;
    size_t n_bands;
} tacet_figure_bars;

typedef struct {
    const char *name;
    const double *value; // [n_samples]
    bool strong;         // drawn heavy and labelled; others are thin and grey
} tacet_figure_trace;
typedef struct {
    double angle_deg;
    unsigned tenths; // 0: skipped; 10: fired at full charge
} tacet_figure_event;
typedef struct { // 4: pressure and torque over the repeat
    const char *title, *subtitle;
    const double *angle_deg; // [n_samples] rising
    size_t n_samples;
    const tacet_figure_trace *pressure_MPa;
    size_t n_pressure;
    const tacet_figure_trace *torque_Nm;
    size_t n_torque;
    const tacet_figure_event *event; // one an opportunity
    size_t n_events;
} tacet_figure_repeat;

typedef struct { // 5: kinetic energy of the modes of the body on its mounts
    const char *title, *subtitle;
    const tacet_body_modes *modes;
    const tacet_figure_band *band; // under the modes, over frequency
    size_t n_bands;
} tacet_figure_modes;

// A path's share of the sum is the part of its contribution that lies along the sum: it adds when
// positive, takes away when negative; all of them together are 1.
typedef struct {
    double order, hz;    // NAN: all lines of `heading`
    double level_rms;    // of the sum
    const double *share; // [n_paths]
} tacet_figure_sum;
typedef struct {
    const char *name, *at; // of the point; condition and margin
    const char *all;       // what the sum without order is of: "band cab boom"
    const char *unit;
    const char *const *path; // [n_paths]
    size_t n_paths;
    const tacet_figure_sum *sum;
    size_t n_sums;
} tacet_figure_point;
#define TACET_FIGURE_POINTS_MOST 6
typedef struct { // 6: what each path brings to the points
    const char *title, *subtitle;
    const tacet_figure_point *point;
    size_t n_points; // up to TACET_FIGURE_POINTS_MOST
} tacet_figure_paths;

typedef enum {
    TACET_FIGURE_MAP,
    TACET_FIGURE_ORDERS,
    TACET_FIGURE_BARS,
    TACET_FIGURE_REPEAT,
    TACET_FIGURE_MODES,
    TACET_FIGURE_PATHS
} tacet_figure_kind;
typedef struct {
    tacet_figure_kind kind;
    union {
        const tacet_figure_map *map;
        const tacet_figure_orders *orders;
        const tacet_figure_bars *bars;
        const tacet_figure_repeat *repeat;
        const tacet_figure_modes *modes;
        const tacet_figure_paths *paths;
    };
} tacet_figure;

typedef struct {
    const char *name, *extension, *doc;
    const char *terminal;                                 // of gnuplot
    tacet_status (*check)(FILE *drawing, tacet_error *e); // is the file whole, with its labels?
} tacet_drawing_format;
const tacet_drawing_format *tacet_drawing_formats(void); // svg, png; ends with name == NULL
const tacet_drawing_format *tacet_drawing_format_find(const char *name); // NULL: none

typedef struct {
    const tacet_drawing_format *format; // svg
    double time_limit_s;                // 30, then gnuplot is killed; 0: only the script is written
} tacet_draw_how;
tacet_draw_how tacet_draw_default(void); // SVG, 30 s
// The gnuplot script of a figure with its data, whole in itself: `gnuplot script > drawing`.
// TACET_NOT_FINITE: nothing to draw; e says what is missing.
TACET_USE tacet_status tacet_figure_script(const tacet_figure *f,
                                           const tacet_drawing_format *format, FILE *to,
                                           tacet_error *e);
// Writes <stem>.gnuplot and <stem>.<extension> into the folder. stem is one of tacet_folder_names
// ("map", "orders", "bars", "repeat", "modes", "forces", "paths"), never a user's text. Without
// gnuplot the script, which holds the data, is kept and e says "drawings need gnuplot"
// (TACET_OUTSIDE_WORLD).
TACET_USE tacet_status tacet_draw(tacet_folder *folder, const char *stem, const tacet_figure *f,
                                  const tacet_draw_how *how, tacet_error *e);

// ---- of a screen: tables
// Each builds into the arena; the table borrows from it, the model and the screen.
typedef struct {
    const char *name, *doc;
    tacet_status (*build)(const tacet_model *m, const tacet_screen *s, tacet_arena *a,
                          tacet_table *out);
} tacet_screen_table;
// runs (stretches of speed), summary (one row a candidate), ranking (one row a speed), no-go,
// agreement, mounts (worst forces; no body: no rows), levels (one row a condition, every column);
// ends with name == NULL.
const tacet_screen_table *tacet_screen_tables(void);
const tacet_screen_table *tacet_screen_table_find(const char *name); // NULL: none
// First lines: what runs where, what it saves, what limits. lines[n], in the arena.
TACET_USE tacet_status tacet_screen_summary(const tacet_model *m, const tacet_screen *s,
                                            tacet_arena *a, const char *const **lines, size_t *n);
// The whole text of a screen in reading order: summary lines, runs, candidates, no-go ranges,
// agreement of the solvers, caution.
TACET_USE tacet_status tacet_screen_print(const tacet_model *m, const tacet_screen *s,
                                          const tacet_table_style *style, FILE *to);
// Members "summary", "candidates", "ranking", "no_go", "agreement", "mounts", "conditions" into an
// open object.
TACET_USE tacet_status tacet_screen_json(tacet_json *j, const tacet_model *m,
                                         const tacet_screen *s);
// Members of one condition into an open object: "speed_rpm", "demand_nm", "outcome", "duty",
// "solver", "verdict", "bands", "limits".
// With how well the solvers agree on it, or why that is not known; both NULL: the members are left
// out.
void tacet_row_json(tacet_json *j, const tacet_model *m, const tacet_condition *c,
                    const tacet_row *r, const tacet_agreement *agreement, const char *why_none);

// ---- of a screen: figures
TACET_USE tacet_status tacet_map_of_screen(const tacet_model *m, const tacet_screen *s,
                                           tacet_arena *a, tacet_figure_map *out);
// The other three solve again with the workspace. `name` is the pattern's ("3/7").
typedef struct {
    const tacet_model *model;
    tacet_workspace *work;
    tacet_arena *arena;
    const tacet_roll *roll;
    const char *name;
    tacet_quantity_ref of; // with a spectrum
} tacet_figure_source;
// Levels of the pattern's orders over the screened speeds, at the study's demand.
TACET_USE tacet_status tacet_orders_of_pattern(const tacet_figure_source *s,
                                               tacet_figure_orders *out, tacet_error *e);
// Order bars at one speed and demand, against all-fire where that reaches the demand.
TACET_USE tacet_status tacet_bars_of_condition(const tacet_figure_source *s, double speed_rad_per_s,
                                               double demand_Nm, tacet_figure_bars *out,
                                               tacet_error *e);
// Pressure and torque over the repeat at one speed and demand.
TACET_USE tacet_status tacet_repeat_of_condition(const tacet_figure_source *s,
                                                 double speed_rad_per_s, double demand_Nm,
                                                 tacet_figure_repeat *out, tacet_error *e);
// The next three are of a study with a body on mounts.
// Kinetic energy of the rigid-body modes over the bands of kind mount.
TACET_USE tacet_status tacet_modes_of_body(const tacet_model *m, tacet_arena *a,
                                           tacet_figure_modes *out, tacet_error *e);
// As tacet_orders_of_pattern, of a mount's force: with rigid-body modes and the bands that mounts
// reach (kinds mount and cab).
TACET_USE tacet_status tacet_forces_of_pattern(const tacet_figure_source *s,
                                               tacet_figure_orders *out, tacet_error *e);
typedef struct {
    size_t point;
    size_t band; // judged on the point; SIZE_MAX: none
    const tacet_roll *roll;
    double speed_rad_per_s, demand_Nm;
} tacet_point_condition;
// What the paths bring to points, each at a condition of its own; `of` and `roll` of the source are
// not used.
TACET_USE tacet_status tacet_paths_of_points(const tacet_figure_source *s,
                                             const tacet_point_condition *at, size_t n_points,
                                             tacet_figure_paths *out, tacet_error *e);

// Writes a finished screen into the folder: every table as CSV, screen.json, summary.txt, the four
// drawings of what the screen recommends (or of what comes nearest), with a body three more. Data
// first, drawings last;
// `drawings` (may be NULL) gets the reason when the drawings failed though the data are written,
// status TACET_OK in it otherwise.
TACET_USE tacet_status tacet_screen_save(const tacet_model *m, const tacet_screen *s,
                                         tacet_workspace *w, tacet_folder *folder,
                                         const tacet_draw_how *how, tacet_error *drawings,
                                         tacet_error *e);

#pragma GCC visibility pop
#endif
