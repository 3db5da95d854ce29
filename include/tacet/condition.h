// condition: a model (assembled study, frozen), a workspace (one a thread), solve, one row.
#ifndef TACET_CONDITION_H
#define TACET_CONDITION_H
#include "tacet/base.h"
#include "tacet/engine.h"
#include "tacet/judge.h"
#include "tacet/pattern.h"
#include "tacet/study.h"
#include "tacet/train.h"
#pragma GCC visibility push(default)

typedef struct tacet_model tacet_model;         // shared, read-only
typedef struct tacet_workspace tacet_workspace; // one a thread; memo slots live here
// Assembles engine and train, modes, bands and limits; cheap. The study must outlive the model. e
// has a place in the study where one key is to blame.
TACET_USE tacet_status tacet_model_create(const tacet_study *s, tacet_model **out, tacet_error *e);
// Fills the cycle table and the all-fire reference levels, once, before any workspace is created;
// the model is frozen afterwards and may be shared by threads.
TACET_USE tacet_status tacet_model_prepare(tacet_model *m, tacet_error *e);
// From here on prepare looks at *stop between its steps; not 0: it ends with TACET_STOPPED, and the
// model is as it was created, to be destroyed. NULL: it does not look.
void tacet_model_watch(tacet_model *m, const volatile int *stop);
// A prepared model of s beside another, of whose study it is a copy with other stiffness of links
// or mounts. Cheap: engine, cycle table, line grid and all-fire reference levels are those of `of`,
// which must outlive it. Limits over all-fire are therefore those of the study as stated.
TACET_USE tacet_status tacet_model_create_beside(const tacet_model *of, const tacet_study *s,
                                                 tacet_model **out, tacet_error *e);
void tacet_model_destroy(tacet_model *m);                             // accepts NULL
const tacet_study *tacet_model_study(const tacet_model *m);           // borrowed
const tacet_engine *tacet_model_engine(const tacet_model *m);         // owned by the model
const tacet_train *tacet_model_train(const tacet_model *m);           // owned by the model
const tacet_body *tacet_model_body(const tacet_model *m);             // NULL: the study has none
size_t tacet_model_bands(const tacet_model *m);                       // how many
const tacet_band *tacet_model_band(const tacet_model *m, size_t i);   // i < tacet_model_bands
size_t tacet_model_limits(const tacet_model *m);                      // how many
const tacet_limit *tacet_model_limit(const tacet_model *m, size_t i); // i < tacet_model_limits
#define TACET_ORDER_MOST 36
// Highest order of the lines, past every band at every speed that may be asked; `limited` (may be
// NULL): the mode of interest asked for more than TACET_ORDER_MOST.
double tacet_model_highest_order(const tacet_model *m, bool *limited);
// All-fire reference level of a band at its worst screened speed; NAN: unreachable at every one.
double tacet_model_reference(const tacet_model *m, size_t band);
size_t tacet_model_lines(const tacet_model *m, unsigned revolutions); // lines of a repeat
// Names and units that may depend on the study's body.
const char *tacet_model_quantity_text(const tacet_model *m, tacet_quantity_ref q,
                                      char out[TACET_QUANTITY_TEXT]);
const char *tacet_model_limit_unit(const tacet_model *m, size_t limit); // "MPa", "1/h", ..
const char *tacet_model_quantity_unit(const tacet_model *m, tacet_quantity_ref q); // "N", ..
double tacet_model_demand(const tacet_model *m,
                          double speed_rad_per_s); // of the study at a speed, N m
size_t tacet_model_throws(const tacet_model *m);   // driven nodes
size_t tacet_model_throw_node(const tacet_model *m, size_t throw_index); // node index of one
const tacet_roll *tacet_model_all_fire(const tacet_model *m);            // every cylinder fires
// Elastic modes, Hz ascending, the rigid one first; n = number of nodes.
const double *tacet_model_mode_hz(const tacet_model *m);

// Of a prepared model, which must outlive it.
TACET_USE tacet_status tacet_workspace_create(const tacet_model *m, tacet_workspace **out);
void tacet_workspace_destroy(tacet_workspace *w); // accepts NULL

typedef struct {
    uint64_t id;
    double speed_rad_per_s, demand_Nm;
    const tacet_roll *roll;
} tacet_condition;
typedef enum { TACET_SOLVED, TACET_UNREACHABLE, TACET_FAILED } tacet_outcome;
const char *tacet_outcome_text(tacet_outcome o); // "solved", "unreachable", "failed"
typedef enum {                                   // level of detail of the motion
    TACET_LEVEL_CONSTANT,                        // harmonic at constant speed
    TACET_LEVEL_RIPPLE,                          // harmonic with speed ripple (default)
    TACET_LEVEL_STEADY                           // march + shooting
} tacet_level;

#define TACET_BANDS_MOST  16
#define TACET_LIMITS_MOST 16
typedef struct {
    uint64_t id;
    double speed_rad_per_s, demand_Nm;
    tacet_outcome outcome;
    tacet_status why; // of TACET_FAILED
    tacet_duty duty;
    double fuel_to_all_fire; // ratio; NAN: no reference (all-fire unreachable)
    tacet_solver_note solver;
    tacet_verdict worst;               // over bands and limits
    double worst_margin_db;            // NAN: no line anywhere or no verdict
    int limiting_band, limiting_limit; // index, -1: none
    size_t n_bands, n_limits;
    tacet_band_result bands[TACET_BANDS_MOST];
    tacet_limit_result limits[TACET_LIMITS_MOST];
} tacet_row;

// Of two rows of one candidate, the one that decides: out of reach, then failed, then over, then
// without verdict, then the smaller margin (no line anywhere: better than any).
bool tacet_row_worse(const tacet_row *a, const tacet_row *b);

// A pure function of (model, condition, level); the workspace only lends memory. A condition that
// cannot be reached or solved is a row with that outcome and TACET_OK.
TACET_USE tacet_status tacet_solve(const tacet_model *m, const tacet_condition *c,
                                   tacet_level level, tacet_workspace *w, tacet_row *out);
// ---- one cylinder dead: a reference beside all-fire
// Every cylinder fires but one, which never does; all others at equal charge, for the same demand.
// The dead one's valves do what `skip: trapped` says. Whether it may skip does not matter.
const tacet_roll *tacet_model_one_dead(const tacet_model *m, unsigned slot); // NULL: one cylinder
typedef struct {
    unsigned n_cylinders, n_solved;  // with how many of them dead a level is known
    double level[TACET_BANDS_MOST];  // of each band with its worst cylinder dead; NAN: none known
    unsigned slot[TACET_BANDS_MOST]; // that cylinder, by place in the firing order
} tacet_one_dead;
// Speed and demand of c; its roll does not matter. The workspace holds no response afterwards.
TACET_USE tacet_status tacet_solve_one_dead(const tacet_model *m, const tacet_condition *c,
                                            tacet_level level, tacet_workspace *w,
                                            tacet_one_dead *out);

// ---- what a workspace still holds of its last solved condition
// Its response, until the next solve; NULL: none.
const tacet_response *tacet_workspace_response(const tacet_workspace *w);
// Gas torque and pressure of the last solved condition (engine_work loaded for it).
const tacet_engine_work *tacet_workspace_engine(const tacet_workspace *w);
// Spectrum of any quantity of the last solved condition into workspace memory; peaks on request.
TACET_USE tacet_status tacet_workspace_quantity(tacet_workspace *w, tacet_quantity_ref q,
                                                const tacet_spectrum **out, tacet_peaks *peaks);
// The same of one path's share.
TACET_USE tacet_status tacet_workspace_path(tacet_workspace *w, size_t path,
                                            const tacet_spectrum **out);
// Comfort at a point of acceleration.
TACET_USE tacet_status tacet_workspace_comfort(tacet_workspace *w, size_t point,
                                               tacet_comfort *out);

// How well the solvers agree on a condition: same_model = largest difference of link torque and
// node speed lines, steady with frozen inertia and torque at W t against constant-speed harmonic,
// relative to the largest line; full_model_db = largest difference of band levels, and of lines of
// link torques and of the bands' quantities within 40 dB of their largest, ripple harmonic against
// the full march, dB.
typedef struct {
    bool settled; // both marches settled
    double same_model, full_model_db;
    unsigned repeats, evaluations; // of the full march
    double closure;
} tacet_agreement;
// Solves one condition three ways and compares; a march that does not settle is told in `settled`.
TACET_USE tacet_status tacet_solve_referee(const tacet_model *m, const tacet_condition *c,
                                           tacet_workspace *w, tacet_agreement *out);

// ---- the one column table: CSV, JSON and table all come from it
// -----------------------------------------
#define TACET_COLUMN_BUFFER (TACET_PATTERN_LONGEST + 1)
typedef enum { TACET_COLUMN_NUMBER, TACET_COLUMN_TEXT, TACET_COLUMN_COUNT } tacet_column_type;
typedef struct {
    const char *name, *unit, *doc;
    tacet_column_type type;
    // number: NAN = absent. text: static, model-owned, or written to `buffer`.
    double (*number)(const tacet_model *m, const tacet_condition *c, const tacet_row *r);
    const char *(*text)(const tacet_model *m, const tacet_condition *c, const tacet_row *r,
                        char buffer[TACET_COLUMN_BUFFER]);
} tacet_column;
const tacet_column *tacet_row_columns(size_t *n); // of every row, bands apart
// Columns of one band or limit: level_rms, nominal_rms, limit_rms, margin_db, leading_order,
// leading_peak, verdict, why.
typedef struct {
    const char *name, *unit, *doc;
    tacet_column_type type;
    double (*number)(const tacet_band_result *b);
    const char *(*text)(const tacet_band_result *b);
} tacet_band_column;
const tacet_band_column *tacet_band_columns(size_t *n); // of every band of a row

#pragma GCC visibility pop
#endif
