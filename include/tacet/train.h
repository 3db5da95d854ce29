// train: the torsional system: nodes, links, gear stages and branches; modes, harmonic solution,
// ripple, march and steady. Knows no engine: it takes torque spectra, or a drive callback.
//
// Angle of a node: deviation from its mean rotation W * ratio * t, rad, positive with rotation.
// Gear link: ratio = w_from / w_to, gear at `from`, shaft on the `to` side:
//   T_to = K (th_from / ratio - th_to), acting on `to`; `from` feels -T_to / ratio.
// Link torque is T_to.
#ifndef TACET_TRAIN_H
#define TACET_TRAIN_H
#include "tacet/base.h"
#include "tacet/order.h"
#pragma GCC visibility push(default)

// ---- definition
// ----------------------------------------------------------------------------------------
typedef enum { TACET_ON_POWERTRAIN, TACET_ON_OUTSIDE } tacet_node_on;
typedef struct {
    const char *name;
    double inertia_kgm2;        // at its own speed; a throw's without the reciprocating share
    double damping_Nms_per_rad; // to ground, on the fluctuation
    int on;                     // tacet_node_on: what its ground and loads react on
} tacet_node_def;

typedef enum { TACET_THROW_CARTER, TACET_THROW_KER_WILSON } tacet_throw_formula;
typedef struct { // stiffness of a crank throw by Carter's or Ker Wilson's formula
    int formula; // tacet_throw_formula; -1 and all lengths NAN: not given
    double journal_length_m, journal_outer_m, journal_inner_m, pin_length_m, pin_outer_m,
        pin_inner_m, throw_m, web_thickness_m, web_width_m;
} tacet_throw_def;

typedef enum { TACET_MEAN_GOODMAN, TACET_MEAN_GERBER, TACET_MEAN_NONE } tacet_mean_rule;
typedef struct { // shear stress against cycles, a straight line in log-log; NAN: not stated
    double amplitude_MPa, at_cycles, exponent; // fully reversed amplitude that lasts so long
    double ultimate_MPa;                       // shear strength, for the mean
    int mean_rule;                             // tacet_mean_rule
} tacet_fatigue_def;

// causal: constant-Q law, |K| grows with w^alpha, alpha = (2/pi) atan(loss factor) (Kjartansson,
// J. Geophys. Res. 84, 1979); constant: k (1 + i loss), which no system in time can have, so
// harmonic only.
typedef enum { TACET_LOSS_CAUSAL, TACET_LOSS_CONSTANT } tacet_loss_law;
typedef struct {
    const char *name, *from, *to;
    // exactly one way to state the stiffness: NAN / NULL where not used
    double stiffness_Nm_per_rad,
        stiffness_catalogue_Nm_per_rad; // of key stiffness_nm_per_deg, as catalogues state it
    double length_m; // with outer_m (and inner_m): a plain shaft, k = pi G (D^4 - d^4)/(32 L)
    double shear_modulus_Pa;
    double outer_m, inner_m; // also the section for stress; NAN: no stress
    double stress_concentration;
    tacet_fatigue_def fatigue;
    tacet_throw_def throw_; // key "throw"
    // at most one way to state the damping
    double damping_Nms_per_rad, damping_ratio, loss_factor;
    double at_hz;      // where Re K* = k for a loss factor; NAN: the link's main mode
    int loss_law;      // tacet_loss_law
    double gear_ratio; // default 1
} tacet_link_def;

typedef struct { // a tuned damper: adds a node "<name>-ring" and a link "<name>"
    const char *name, *node;
    double ring_inertia_kgm2, tuned_hz, loss_factor;
} tacet_damper_def;

typedef struct tacet_train_def {
    tacet_node_def *nodes;
    size_t n_nodes;
    tacet_link_def *links;
    size_t n_links;
    tacet_damper_def *dampers;
    size_t n_dampers;
    const char *flywheel, *load; // node names; load NULL: the flywheel
    // Not keys; set by the assembler before create:
    const double *added_inertia_kgm2; // [n_nodes of the file] mean reciprocating share, or NULL
    double lowest_hz, highest_hz;     // range of lines in which a loss factor must hold
} tacet_train_def;
const tacet_section *tacet_train_keys(void); // section "train"
tacet_train_def tacet_train_default(void);   // flywheel "flywheel", load the flywheel, nothing else
tacet_node_def tacet_node_default(void);     // without name and inertia
tacet_link_def tacet_link_default(void);     // without name, ends, stiffness
// A connected tree, known names, one stiffness, at most one damping, names unique.
void tacet_train_def_check(const tacet_train_def *d, const tacet_reporter *r);
// Stiffness of one link def from whichever way it is stated, N m/rad on the `to` side.
TACET_USE tacet_status tacet_link_stiffness(const tacet_link_def *d, double *out, tacet_error *e);

// ---- thing
// ------------------------------------------------------------------------------------------------
typedef struct tacet_train tacet_train;
typedef struct tacet_train_work tacet_train_work; // one a thread, sized once
// Assembles nodes, links and dampers; d may go afterwards. TACET_BAD_INPUT: what the check finds.
TACET_USE tacet_status tacet_train_create(const tacet_train_def *d, tacet_train **out,
                                          tacet_error *e);
void tacet_train_destroy(tacet_train *t);       // accepts NULL
size_t tacet_train_nodes(const tacet_train *t); // with damper rings, in file order, rings last
size_t tacet_train_links(const tacet_train *t); // with those of dampers, which come last
const char *tacet_train_node_name(const tacet_train *t, size_t node); // owned by the train
const char *tacet_train_link_name(const tacet_train *t, size_t link); // owned by the train
size_t tacet_train_node_find(const tacet_train *t, const char *name); // SIZE_MAX: none
size_t tacet_train_link_find(const tacet_train *t, const char *name); // SIZE_MAX: none
size_t tacet_train_flywheel(const tacet_train *t);                    // node index
size_t tacet_train_load(const tacet_train *t);                        // node index
double tacet_train_node_ratio(const tacet_train *t,
                              size_t node); // mean speed / crank mean speed, signed
double tacet_train_node_inertia(const tacet_train *t, size_t node); // with the added share
double tacet_train_node_damping(const tacet_train *t, size_t node); // to ground, N m s/rad
bool tacet_train_node_housed(const tacet_train *t, size_t node);    // on the powertrain?
double tacet_train_total_inertia(const tacet_train *t);             // referred to the crank
typedef struct {
    size_t from, to;
    double stiffness_Nm_per_rad, gear_ratio;
    double section_modulus_m3, stress_concentration; // NAN: none stated
    tacet_fatigue_def fatigue;
    double loss_factor, damping_Nms_per_rad; // resolved; the other is 0
    double main_mode_hz;
} tacet_link_info;
tacet_link_info tacet_train_link_info(const tacet_train *t,
                                      size_t link); // link < tacet_train_links
// Complex stiffness of a link at w rad/s, as both solvers use it (N m/rad, on the `to` side).
double complex tacet_train_link_impedance(const tacet_train *t, size_t link, double w_rad_per_s);

// Undamped modes, ascending, rigid one (0 Hz) included. frequency_hz[n], shape[mode * n + node]
// scaled to largest |element| 1 and positive there.
TACET_USE tacet_status tacet_train_modes(const tacet_train *t, double *frequency_hz, double *shape);

// ---- solutions --------------------------------------------------------------------------------
// All work on memory that is made once (tacet_train_work) and write spectra of a motion, of which n
// lines must have room; revolutions and n_lines of its spectra are set. After a status other than
// TACET_OK the motion holds nothing of use. The same call gives the same bits, whatever the memory
// was used for before.
typedef struct {
    tacet_spectrum *angle_rad;      // [n_nodes], means 0
    tacet_spectrum *link_torque_Nm; // [n_links], means: the carried torque
    size_t n_nodes, n_links;
} tacet_train_motion;
// Points m at arena memory for n_lines lines of every node and link.
TACET_USE tacet_status tacet_train_motion_init(tacet_train_motion *m, const tacet_train *t,
                                               size_t n_lines, tacet_arena *a);

// most_lines: largest n_lines of any call, and 24 times the most revolutions of a repeat that
// steady is asked for. n_throws: most throws of any call.
TACET_USE tacet_status tacet_train_work_create(const tacet_train *t, size_t most_lines,
                                               size_t n_throws, tacet_train_work **out);
void tacet_train_work_destroy(tacet_train_work *w); // accepts NULL

// Response to torques on the throws (nodes throw_node[n_throws]), constant speed: one line at a
// time, tree elimination in the impedance form. torque[i].revolutions and n_lines give the grid;
// speed the base frequency. Means: link torques that carry the mean torques to the load node, which
// balances. No speed hold: the rigid mode is -w^2 J. TACET_NOT_FINITE: a torque is, or an undamped
// branch is driven exactly at its own frequency.
TACET_USE tacet_status tacet_train_harmonic(const tacet_train *t, double speed_rad_per_s,
                                            size_t n_throws, const size_t *throw_node,
                                            const tacet_spectrum *torque, tacet_train_work *w,
                                            tacet_train_motion *out);

// Torque on throw `i` at n throw angles (rad from the start of the repeat): applied torque that
// depends on angle alone (gas less friction), and the varying reciprocating inertia (kg m2, the
// whole m x'^2, not its deviation) with slope. The equation of a throw is
//   (J0 + J(a)) a'' + J'(a)/2 a'^2 = T(a) + link and damping torques,
// where J0 is the node's inertia in the file.
typedef tacet_status tacet_drive(const void *who, size_t throw_index, size_t n,
                                 const double *angle_rad, double *torque_Nm, double *inertia_kgm2,
                                 double *slope_kgm2_per_rad);

typedef struct {
    const char *method; // "constant", "ripple", "steady"
    double closure;     // end defect of the repeat, relative to the motion; 0 for harmonic
    double difference;  // ripple: what the last pass changed; steady: the last correction; relative
    unsigned repeats, evaluations; // repeats marched, right-hand sides; ripple: passes, samples
} tacet_solver_note;

// How a periodic solution is to be found.
typedef struct {
    unsigned revolutions; // of the repeat
    size_t n_lines;       // of the result
    bool frozen;          // steady: torque at W t and mean inertia instead of the throw's own angle
    double tolerance;     // relative: closure (steady; 0: 1e-6), error left over (ripple; 0: 1e-6)
    unsigned most_passes; // on all samples (ripple), repeats (steady); 8
} tacet_periodic;
tacet_periodic tacet_periodic_default(void); // 2 revolutions, 48 lines, 8 passes, tolerance 1e-6

// Harmonic with the throws' own angles: iterates F = T(W t + d) - J'/2 a'^2 - (J - <J>) a'', d with
// the static twist of the mean torques against the flywheel, whose mean angle is W t. Also gives
// the effective torque spectrum on the left-hand mean inertia (`torque`, may be NULL) of each
// throw. Throws turn with the crank, one drive a node. TACET_NOT_CONVERGED: not contracting; steady
// decides.
TACET_USE tacet_status tacet_train_ripple(const tacet_train *t, double speed_rad_per_s,
                                          size_t n_throws, const size_t *throw_node,
                                          tacet_drive *drive, const void *who,
                                          const tacet_periodic *how, tacet_train_work *w,
                                          tacet_train_motion *out, tacet_spectrum *torque,
                                          tacet_solver_note *note);
// Periodic steady state of the full equations by march (GSL odeiv2) and shooting. `frozen`: torque
// less J'/2 W^2 at W t, mean inertia: what harmonic solves at constant speed.
// TACET_HARMONIC_ONLY: a link has loss_law constant. TACET_NOT_CONVERGED: not settled;
// note->closure says how near. TACET_BAD_INPUT also for more revolutions than the memory is made
// for.
TACET_USE tacet_status tacet_train_steady(const tacet_train *t, double speed_rad_per_s,
                                          size_t n_throws, const size_t *throw_node,
                                          tacet_drive *drive, const void *who,
                                          const tacet_periodic *how, tacet_train_work *w,
                                          tacet_train_motion *out, tacet_solver_note *note);
// Mean powers of a solution, W: what the throws put in, what dampers take, what leaves at the load.
// `torque` is what drives the throws on the train's own inertia: that of harmonic, or what ripple
// gives. in = dissipated + out.
typedef struct {
    double in_W, dissipated_W, out_W;
} tacet_train_power;
// The motion is of the same lines as `torque`.
tacet_train_power tacet_train_power_of(const tacet_train *t, double speed_rad_per_s,
                                       size_t n_throws, const size_t *throw_node,
                                       const tacet_spectrum *torque,
                                       const tacet_train_motion *motion);

#pragma GCC visibility pop
#endif
