// body: the powertrain as a rigid body on its mounts; shaking forces; paths from mounts to people.
//
// Axes: x along the crank from the free end to the flywheel, z up, y = z cross x; origin: centre of
// gravity of the powertrain. A crank that turns clockwise, seen from the free end, turns about +x.
// A displacement q, and a load F that does work on it, have six members:
//   x, y, z (m; N) and the turns roll, pitch, yaw about x, y, z (rad; N m), small.
// A point at p moves by q[0..2] + q[3..5] cross p. Lines as in order.h; per line
//   (K*(w) - w^2 M) q = F,   K* = sum over mounts of G^T R diag(k (1 + i loss)) R^T G,
// with R the mount's axes and G the motion of its point. Order 0 uses the static stiffness.
#ifndef TACET_BODY_H
#define TACET_BODY_H
#include "tacet/base.h"
#include "tacet/engine.h"
#include "tacet/order.h"
#pragma GCC visibility push(default)

// ---- definition (section body of a study) -----------------------------------------------------
#define TACET_BODY_MOUNTS_MOST 16
#define TACET_BODY_POINTS_MOST 16
#define TACET_BODY_PATHS_MOST  256

// Tensor as written: xy = -integral of x y dm, so that a weight at +x +y makes xy negative.
typedef struct {
    double xx, yy, zz, xy, xz, yz; // kg m2, about the centre of gravity
} tacet_inertia_def;
typedef struct {
    const char *name;
    double *at_m; // [3] from the centre of gravity
    size_t n_at;
    double *turned_rad; // [3] of the mount's axes about x, then the new y, then the new z; n_turned
    size_t n_turned;    // 0: parallel to the body's
    tacet_curve x_N_per_m, y_N_per_m, z_N_per_m;                 // dynamic, over Hz
    double static_x_N_per_m, static_y_N_per_m, static_z_N_per_m; // NAN: dynamic at the lowest Hz
    tacet_curve loss_factor; // tangent of the loss angle, over Hz
} tacet_mount_def;
typedef struct { // what turns with the crank besides throws: unbalance at one place
    double at_m, unbalance_kgm, angle_rad; // along the crank from the free end; from the pin of the
                                           // first cylinder of the firing order, with rotation
} tacet_counterweight_def;
typedef struct {
    double *at_m; // [3] from the centre of gravity
    size_t n_at;
    double ratio;         // speed over the crank's, negative against it; multiples of 1/2
    double unbalance_kgm; // mass times radius
    double phase_rad; // where the unbalance points when the first cylinder of the firing order is
                      // at top: from up, with the crank's rotation
} tacet_balance_shaft_def;
typedef enum { TACET_POINT_ACCELERATION, TACET_POINT_PRESSURE, TACET_POINT_VELOCITY } tacet_sense;
typedef struct { // where people are
    const char *name;
    int sense;     // tacet_sense: unit of what arrives, m/s2, Pa or m/s
    int weighting; // tacet_weighting of order.h
} tacet_point_def;
typedef struct { // one resonance of a path: per N, r = f / hz
    double hz, damping_ratio;
    // gain: gain / (1 - r^2 + 2 i zeta r); mass: -r^2 / mass of the same, an acceleration per
    // force.
    double gain, mass_kg; // exactly one; the other NAN
} tacet_resonance_def;
typedef struct {
    const char *mount; // NULL with `on`
    int axis;          // of the mount: 0 x, 1 y, 2 z
    const char *to;    // point
    double weight;     // on the whole path; 1
    tacet_resonance_def *resonances;
    size_t n_resonances;
    const char *table; // CSV file hz, real, imaginary; in place of resonances
} tacet_path_def;
typedef struct { // a place on the powertrain whose motion is of interest
    const char *name;
    double *at_m; // [3]
    size_t n_at;
} tacet_place_def;
typedef struct tacet_body_def {
    double mass_kg; // NAN: no body
    tacet_inertia_def inertia_kgm2;
    double *crank_axis_m; // [3] crank axis at the free end (at_mm 0), from the centre of gravity
    size_t n_crank_axis;
    double rotating_mass_kg; // at each crank pin (pin, big-end share of the rod), one a cylinder
    tacet_counterweight_def *counterweights;
    size_t n_counterweights;
    tacet_balance_shaft_def *balance_shafts;
    size_t n_balance_shafts;
    tacet_mount_def *mounts;
    size_t n_mounts;
    tacet_place_def *places;
    size_t n_places;
    tacet_point_def *points;
    size_t n_points;
    tacet_path_def *paths;
    size_t n_paths;
    const char *folder; // tables are relative to it; NULL: the working folder
} tacet_body_def;
const tacet_section *tacet_body_keys(void);         // section `body` of a study
tacet_body_def tacet_body_default(void);            // no body
bool tacet_body_def_given(const tacet_body_def *d); // false: the study has none
// An inertia that no body can have, lists that are not three long, unknown mounts and points,
// stiffness that is not positive, a path without resonance or table or with both, ..
void tacet_body_def_check(const tacet_body_def *d, const tacet_reporter *r);

// ---- thing ------------------------------------------------------------------------------------
typedef struct tacet_body tacet_body; // frozen, shared
// Borrows d and what it points to; reads the tables. en: geometry, firing angles, rotation.
TACET_USE tacet_status tacet_body_create(const tacet_body_def *d, const tacet_engine *en,
                                         tacet_body **out, tacet_error *e);
void tacet_body_destroy(tacet_body *b);        // accepts NULL
size_t tacet_body_mounts(const tacet_body *b); // how many
size_t tacet_body_points(const tacet_body *b); // how many
size_t tacet_body_places(const tacet_body *b); // how many
size_t tacet_body_paths(const tacet_body *b);  // how many
// Names as in the study.
const char *tacet_body_mount_name(const tacet_body *b, size_t mount); // mount < tacet_body_mounts
const char *tacet_body_point_name(const tacet_body *b, size_t point); // point < tacet_body_points
const char *tacet_body_place_name(const tacet_body *b, size_t place); // place < tacet_body_places
const tacet_body_def *tacet_body_def_of(const tacet_body *b);         // what it was created from

typedef double tacet_six[6];
typedef double complex tacet_six_complex[6];
void tacet_body_mass(const tacet_body *b, double m[36]); // row by row, symmetric
// Complex stiffness at a frequency; loss 0 at f = 0, where the static stiffness stands.
void tacet_body_stiffness(const tacet_body *b, double f_hz, double complex k[36]);

// ---- free and static --------------------------------------------------------------------------
typedef struct {
    double hz[6];       // ascending
    double shape[6][6]; // shape[mode][member]; largest |element| 1 in units of the radius of
                        // gyration for turns, positive there
    double share[6][6]; // kinetic energy of a member: v_i (M v)_i / v^T M v; rows sum to 1, single
                        // ones may be slightly negative with products of inertia
    double loss[6];     // modal loss factor: v^T Im K v / v^T Re K v
    bool settled;       // false: a mode's own stiffness did not settle in the passes allowed
} tacet_body_modes;
// Undamped, stiffness of each mode taken at its own frequency by iteration. No mounts: six zeros.
TACET_USE tacet_status tacet_body_modes_of(const tacet_body *b, tacet_body_modes *out);
// Frequencies, rising, at which an answer of the body may have a peak or a corner: its modes,
// resonances of its paths, rows of their tables and of its mounts' curves. Memory of the arena.
TACET_USE tacet_status tacet_body_bends(const tacet_body *b, tacet_arena *a, double **out_hz,
                                        size_t *n);
// q = K_static^-1 load; TACET_BAD_INPUT: the mounts do not hold the body.
TACET_USE tacet_status tacet_body_static(const tacet_body *b, const tacet_six load, tacet_six q);
// Axis about which a free body starts to turn under a torque about the crank: I^-1 e_x, unit
// length, x positive (Jeong & Singh, J. Sound Vib. 234, 2000).
void tacet_body_torque_roll_axis(const tacet_body *b, double axis[3]);

// ---- forced -----------------------------------------------------------------------------------
// Load of reciprocating and rotating masses at constant speed about the centre of gravity, over
// W^2 (kg m; kg m2), on twice the order: halves[k] is order k / 2, k = 1 .. TACET_SHAKING_HALVES.
// Exact from the slider-crank. It does not depend on the pattern.
const tacet_six_complex *tacet_body_shaking(const tacet_body *b);
#define TACET_SHAKING_HALVES 48

// Motion per line of a repeat; memory of the caller, made once.
typedef struct {
    double speed_rad_per_s;
    unsigned revolutions;
    size_t n_lines;
    tacet_six_complex *roll;   // [n_lines + 1] q of 1 N m of roll torque (in the crank's sense)
    tacet_six_complex *shaken; // [n_lines + 1] q of the shaking loads at this speed
    tacet_six roll_static;     // order 0 of the first; NAN: the mounts do not hold the body
} tacet_body_response;
// Reserves n_lines up to most_lines.
TACET_USE tacet_status tacet_body_response_init(tacet_body_response *r, size_t most_lines,
                                                tacet_arena *a);
// TACET_NOT_FINITE: an undamped mode is driven exactly at its own frequency.
TACET_USE tacet_status tacet_body_respond(const tacet_body *b, double speed_rad_per_s,
                                          unsigned revolutions, size_t n_lines,
                                          tacet_body_response *out);
// q of any load at one frequency.
TACET_USE tacet_status tacet_body_solve(const tacet_body *b, double w_rad_per_s,
                                        const tacet_six_complex load, tacet_six_complex q);
// Force of a mount on the frame in the mount's own axis (0..2), N; at w = 0 static.
double complex tacet_body_mount_force(const tacet_body *b, size_t mount, int axis,
                                      double w_rad_per_s, const tacet_six_complex q);
// Displacement of a place along a body axis, m.
double complex tacet_body_place_motion(const tacet_body *b, size_t place, int axis,
                                       const tacet_six_complex q);
// What arrives at a point: sum over its paths of weight H(w) mount force, weighting included.
double complex tacet_body_point_response(const tacet_body *b, size_t point, double w_rad_per_s,
                                         const tacet_six_complex q);
// The share of one path of it; a path's mount, axis and point are in the def.
double complex tacet_body_path_response(const tacet_body *b, size_t path, double w_rad_per_s,
                                        const tacet_six_complex q);

#pragma GCC visibility pop
#endif
