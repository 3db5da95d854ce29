// Inside of the room condition: the frozen model and one thread's workspace.
#ifndef CONDITION_INTERNAL_H
#define CONDITION_INTERNAL_H
#include "tacet/condition.h"

// Transform lengths are powers of two from 2^TRANSFORM_FIRST on.
#define TRANSFORM_FIRST 6
#define TRANSFORM_KINDS 14
#define PEAK_OVERSAMPLE 6
#define EVEN_CYCLES     16 // repeats of up to this many cycles have a transform of their own
#define CYCLIC_MOST     96 // intervals of a counted band, for the integral of cyclic variation

// Transfers of one band's quantity to unit torque on each throw, on a fixed frequency grid: the
// root of the mean |H|^2 about each frequency.
typedef struct {
    size_t n;          // frequencies
    double *f_hz;      // [n]
    double complex *H; // [n_throws * n]
} cyclic_grid;

struct tacet_model {
    const tacet_study *study;
    tacet_arena *arena;
    tacet_engine *engine;
    tacet_train *train;
    tacet_body *body; // NULL: none
    size_t n_throws;
    size_t *throw_node;      // [n_throws] node of the train
    unsigned *slot_throw;    // [cylinders] throw that a slot drives
    unsigned *throw_slots;   // [n_throws * cylinders] slots on a throw
    unsigned *throw_n_slots; // [n_throws]
    double *throw_inertia;   // [n_throws] mean reciprocating share, kg m2
    size_t n_bands, n_limits;
    tacet_band *bands;
    tacet_limit *limits;
    double highest_order, highest_band_hz;
    bool order_limited;
    double *mode_hz;                  // [n_nodes]
    tacet_roll *all_fire, **one_dead; // the second [cylinders]; NULL: there is one only
    unsigned most_revolutions;
    size_t most_lines;
    tacet_transform *transform[TRANSFORM_KINDS];
    // [cycles - 1] samples a multiple of the repeat's opportunities: what equal cylinders cancel
    // then cancels to rounding, aliasing included
    tacet_transform *even[EVEN_CYCLES];
    bool prepared, beside;    // beside: engine, rolls and transforms are another model's
    const volatile int *stop; // NULL: nobody may ask
    double *reference;        // [n_bands] all-fire at its worst screened speed; NAN: none
    cyclic_grid *cyclic;      // [n_bands]
    double *bend_hz;          // [n_bends] rising: where |H|^2 may have peaks and corners
    size_t n_bends;
};

typedef struct { // one-slot memo of a speed and demand
    bool valid;
    double speed, demand;
    bool reachable;
    double fuel_kg_per_s;
    bool levels_valid, levels_solved;
    double level[TACET_BANDS_MOST];
} all_fire_memo;

typedef struct { // one-slot memo of a speed and repeat length
    bool valid;
    double speed;
    unsigned revolutions;
    size_t n_lines;           // up to the highest counted band edge
    tacet_spectrum *transfer; // [n_bands * n_throws]
} transfer_memo;

struct tacet_workspace {
    const tacet_model *m;
    tacet_arena *arena;
    tacet_engine_work *engine;
    tacet_train_work *train, *train_unit; // the second keeps its factors for the transfers
    tacet_train_motion motion, unit_motion;
    tacet_spectrum *torque, *piston, *unit_piston;               // [n_throws]
    tacet_spectrum unit, quantity, *fired;                       // fired: [cylinders]
    const tacet_spectrum **slot_transfer;                        // [cylinders]
    double *samples, *angle, *torque_at, *inertia_at, *slope_at; // [longest transform (+ 2)]
    double *cycles;        // for limits that count cycles; NULL: none does
    double *order;         // [most of any grid]
    double complex *pulse; // the same
    double *twist;         // [nodes] mean angle against the flywheel's, referred to the crank
    tacet_body_response mounts, one_line; // the second for single frequencies
    double friction_Nm;                   // mean total of the loaded condition
    const tacet_roll *roll;               // of the loaded condition
    tacet_response response;
    bool has_response;
    all_fire_memo all_fire;
    transfer_memo transfers;
};

const tacet_transform *model_transform(const tacet_model *m, size_t n_lines, unsigned oversample);
// For sampling torque over a repeat of `revolutions`.
const tacet_transform *model_torque_transform(const tacet_model *m, unsigned revolutions);

// Readies the workspace's spectra for a repeat.
void workspace_shape(tacet_workspace *w, unsigned revolutions, size_t n_lines);
tacet_drive workspace_drive; // who = the workspace, loaded

// The body's answer on these lines, from memory where it is at hand; NULL in *out: no body.
tacet_status workspace_mounts(tacet_workspace *w, double speed_rad_per_s, unsigned revolutions,
                              size_t n_lines, const tacet_body_response **out);

// Motion of the loaded condition into w->motion, w->piston, w->response.
tacet_status motion_solve(tacet_workspace *w, const tacet_condition *c, tacet_level level,
                          tacet_solver_note *note);
tacet_status motion_constant(tacet_workspace *w, double speed_rad_per_s, unsigned revolutions,
                             size_t n_lines);
tacet_status motion_piston(tacet_workspace *w, double speed_rad_per_s, unsigned revolutions,
                           size_t n_lines);

// Levels with dispersion of every band for the motion in the workspace.
tacet_status levels_solve(tacet_workspace *w, const tacet_condition *c, tacet_band_level *out);
// Fills m->cyclic.
tacet_status dispersion_prepare(tacet_model *m, tacet_workspace *w, tacet_error *e);
tacet_status dispersion_transfers(tacet_workspace *w, double speed_rad_per_s, unsigned revolutions);
double dispersion_cyclic(tacet_workspace *w, size_t band, double speed_rad_per_s);
void dispersion_fired(tacet_workspace *w, size_t n_lines);

// Workspace of a model whose references are not there yet.
tacet_status workspace_build(const tacet_model *m, tacet_workspace **out);
// Duty, load, motion and levels; *reachable false leaves the rest alone.
tacet_status condition_levels(tacet_workspace *w, const tacet_condition *c, tacet_level level,
                              tacet_duty *duty, tacet_solver_note *note, tacet_band_level *levels);
#endif
