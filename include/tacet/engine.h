// engine: geometry, the cylinder cycle, the cycle table, charge for a demand, torque, fuel.
//
// Angles: crank angle rises in the direction of rotation; angle 0 of a cylinder is its piston top
// dead centre, firing. Torque is positive in the direction of rotation.
#ifndef TACET_ENGINE_H
#define TACET_ENGINE_H
#include "tacet/base.h"
#include "tacet/order.h"
#include "tacet/pattern.h"
#pragma GCC visibility push(default)

// ---- definition (sections engine, cycle, skip of a study) -------------------------------------
#define TACET_ENGINE_CYLINDERS_MOST 32
#define TACET_ENGINE_RUN_MOST       63 // skipped cycles in a row of one cylinder

typedef struct {
    unsigned number;  // cylinder number, 1..n
    const char *node; // node of the train it drives; NULL: throw<number>
    double bank_rad;  // from vertical, positive towards +y (against a clockwise rotation)
    double at_m;      // along the crank from the free end
    // Share of the common charge. Above 1 its cylinder passes `highest` (load_by fuel: the lowest
    // air/fuel ratio) when the common charge is there.
    double charge_factor;
} tacet_cylinder_def;

typedef struct {
    double constant_Pa, per_krpm_Pa, per_krpm2_Pa; // fmep
    double per_mpa_peak_Pa;                        // per MPa of mean peak pressure over all cycles
} tacet_friction_def;

typedef enum { TACET_CYCLE_WIEBE, TACET_CYCLE_TRACES } tacet_cycle_kind;
typedef enum { TACET_LOAD_CHARGE, TACET_LOAD_FUEL } tacet_load_by;
typedef struct {
    int kind, load_by;                        // tacet_cycle_kind, tacet_load_by
    tacet_curve mid_burn_rad, burn_10_90_rad; // over speed (rpm)
    double lower_heating_value_J_per_kg;
    tacet_curve air_fuel_ratio;        // over speed; with load_by fuel: the lowest allowed
    tacet_curve lowest_Pa, highest_Pa; // manifold, over speed in rpm
    double intake_temperature_K, exhaust_Pa, wall_temperature_K, blow_by_area_m2, crankcase_Pa;
    double peak_pressure_Pa;                 // limit; NAN: none
    const char *fired_trace, *skipped_trace; // paths as in the file, relative to the study
} tacet_cycle_def;

typedef enum {
    TACET_TRAPPED_RESIDUAL,
    TACET_TRAPPED_BURNT,
    TACET_TRAPPED_AIR,
    TACET_TRAPPED_OPEN
} tacet_trapped;
typedef struct {
    int trapped;         // tacet_trapped
    unsigned *cylinders; // numbers of those that may skip; n_cylinders 0: all
    size_t n_cylinders;
    unsigned longest_run; // skipped cycles in a row of one cylinder
} tacet_skip_def;

typedef struct tacet_engine_def {
    unsigned strokes; // 4 or 2
    int rotation;     // 0 clockwise, 1 counterclockwise, seen from the free end
    double bore_m, stroke_m, rod_length_m, pin_offset_m, compression_ratio, reciprocating_mass_kg;
    unsigned *firing_order; // cylinder numbers
    size_t n_cylinders;
    double *firing_intervals_rad; // after each firing to the next, in firing sequence; n_intervals
                                  // 0: even
    size_t n_intervals;
    tacet_cylinder_def *cylinders; // those stated; the rest are inline at cylinder k on throw<k>
    size_t n_cylinder_defs;
    tacet_friction_def friction;
    double cylinder_dispersion, cyclic_dispersion; // fractions, from dispersion: {..}
    tacet_cycle_def cycle;
    tacet_skip_def skip;
    const char *folder; // traces are relative to it; NULL: the working folder
} tacet_engine_def;
// Root sections "engine", "cycle", "skip" as members of tacet_engine_def: offsets are from its
// start, so a study embeds one tacet_engine_def and points all three at it.
const tacet_section *tacet_engine_keys(void);
const tacet_section *tacet_cycle_keys(void); // section "cycle"
const tacet_section *tacet_skip_keys(void);  // section "skip"
// Required members are NAN or absent. Pointers in a definition are borrowed. A curve with n = 0
// stands for the default of its key.
tacet_engine_def tacet_engine_default(void);
// Reports what cannot be (firing order no permutation, intervals not 720 degrees, pins that
// disagree, rod shorter than the throw, ..) as errors and what is unusual as warnings.
void tacet_engine_def_check(const tacet_engine_def *d, const tacet_reporter *r);

// ---- geometry ----------------------------------------------------------------------------------
// Exact slider-crank with pin offset. x: piston travel from its top, m, of crank angle from piston
// top.
typedef struct {
    double crank_m, rod_m, offset_m, bore_m, mass_kg;
} tacet_slider;
// x (m), dx (m/rad), ddx (m/rad2) of angle.
void tacet_slider_at(const tacet_slider *s, double angle_rad, double *x, double *dx, double *ddx);

// ---- thing ------------------------------------------------------------------------------------
typedef struct tacet_engine tacet_engine;
typedef struct tacet_engine_work tacet_engine_work; // one a thread
// Copies d; what d points to is borrowed and must outlive the engine. TACET_BAD_INPUT with the
// first error that the check finds.
TACET_USE tacet_status tacet_engine_create(const tacet_engine_def *d, tacet_engine **out,
                                           tacet_error *e);
void tacet_engine_destroy(tacet_engine *en);                         // accepts NULL
unsigned tacet_engine_cylinders(const tacet_engine *en);             // how many, and so slots
unsigned tacet_engine_strokes(const tacet_engine *en);               // 4 or 2
double tacet_engine_displacement(const tacet_engine *en);            // m3, all cylinders
unsigned tacet_engine_number(const tacet_engine *en, unsigned slot); // cylinder number in a slot
double tacet_engine_firing_angle(const tacet_engine *en,
                                 unsigned slot);                      // rad in [0, 2 pi strokes/2)
const char *tacet_engine_node(const tacet_engine *en, unsigned slot); // train node it drives
// As stated, or its defaults: bank, place along the crank.
tacet_cylinder_def tacet_engine_cylinder(const tacet_engine *en, unsigned slot);
bool tacet_engine_may_skip(const tacet_engine *en, unsigned slot); // by `skip: cylinders`
const tacet_slider *tacet_engine_slider(const tacet_engine *en);   // common to all cylinders
double tacet_engine_mean_inertia(const tacet_engine *en); // <m x'^2> of one cylinder, kg m2
const tacet_engine_def *tacet_engine_def_of(const tacet_engine *en); // its own copy

// Fills the cycle table for skip runs up to `longest_run` (at most TACET_ENGINE_RUN_MOST) between
// two speeds, once; the engine is frozen afterwards and may be shared by threads. Nodes depend on
// the study alone, never on conditions asked. TACET_NOT_CONVERGED, TACET_NOT_FINITE: a cycle at a
// node has no possible state; traces: TACET_BAD_INPUT or TACET_OUTSIDE_WORLD with file and column.
TACET_USE tacet_status tacet_engine_prepare(tacet_engine *en, double lowest_rad_per_s,
                                            double highest_rad_per_s, unsigned longest_run,
                                            tacet_error *e);
// After prepare; TACET_BAD_INPUT before it.
TACET_USE tacet_status tacet_engine_work_create(const tacet_engine *en, tacet_engine_work **out);
void tacet_engine_work_destroy(tacet_engine_work *w); // accepts NULL

// ---- duty: what it takes to meet a demand -----------------------------------------------------
typedef enum {
    TACET_REACH_OK,
    TACET_REACH_TOO_HIGH,      // more than the highest charge (or the peak limit) gives
    TACET_REACH_TOO_LOW,       // less than the lowest charge gives; with tenths: of the least fire
    TACET_REACH_PEAK_PRESSURE, // the charge would do, but a cycle would pass the peak limit
    TACET_REACH_SPEED,         // outside the speeds prepared
    TACET_REACH_RUN,           // a cylinder skips longer in a row than prepared
    TACET_REACH_CYLINDER       // a cylinder skips that may not
} tacet_reach;
typedef struct {
    bool reachable;
    tacet_reach reach;      // which limit
    double charge_Pa;       // manifold pressure of a full-charge fire (load_by fuel: of the air)
    double charge_ratio;    // place between lowest (0) and highest (1) charge
    double brake_torque_Nm; // mean over the repeat; the demand, or the nearest reachable when not
    double friction_Nm;     // mean friction torque, positive
    double fuel_kg_per_s, fuel_W; // fuel mass flow and its heat
    // gross - pumping - friction = brake; fuel = brake + friction + walls + exhaust + blow-by.
    double gross_W, pumping_W; // of compression and expansion; minus that of exhaust and intake
    double friction_W, brake_W;
    double wall_heat_W;          // the last three: NAN with traces, which do not tell
    double exhaust_W, blow_by_W; // enthalpy over that of gas from the manifold
    double peak_pressure_Pa;     // highest of any cycle in the repeat
    bool peak_in_skip;           // .. and it is of a skipped cycle
} tacet_duty;
// Finds the charge at which the mean over the repeat of all gas torques less friction is the
// demand. Unreachable is a result (TACET_OK with reachable false), never clamped in silence: the
// members then tell of the nearest reachable torque; speed, run and cylinder: NAN. TACET_BAD_INPUT:
// the roll is of another engine, or speed or demand are not finite. A pure function of (en, r,
// speed, demand).
// A cylinder remembers its run of skips, not what fires before it burnt: whole rolls stay within 1
// % rms of cycles run one after another. Unlike tenths with load_by fuel on an engine throttled to
// half its exhaust pressure, 1.5 % (five tenths) to 3.5 % (one tenth), fuel within twice that.
TACET_USE tacet_status tacet_engine_duty(const tacet_engine *en, const tacet_roll *r,
                                         double speed_rad_per_s, double demand_Nm,
                                         tacet_engine_work *w, tacet_duty *out);

// ---- torque -----------------------------------------------------------------------------------
// After a duty: collapses the table to this speed and charge for the windows the roll uses.
// TACET_BAD_INPUT: no charge was found, or the roll is of another engine.
TACET_USE tacet_status tacet_engine_load(const tacet_engine *en, const tacet_roll *r,
                                         const tacet_duty *d, double speed_rad_per_s,
                                         tacet_engine_work *w);
// Gas torque of the cylinder in `slot` at n crank angles (rad from the start of the repeat, any
// value, taken modulo the repeat), of the last load: (p - crankcase pressure) area x'. Smooth (C1)
// in angle. N m. NAN: no load, or the angle is not finite or beyond 1.7e7 rad (1e9 degrees).
void tacet_engine_gas_torque(const tacet_engine *en, const tacet_engine_work *w, unsigned slot,
                             size_t n, const double *angle_rad, double *torque_Nm);
// Cylinder pressure at n crank angles, Pa absolute.
void tacet_engine_pressure(const tacet_engine *en, const tacet_engine_work *w, unsigned slot,
                           size_t n, const double *angle_rad, double *pressure_Pa);
// Reciprocating inertia about the crank J = m x'^2 (kg m2) and dJ/dangle (kg m2/rad) at n crank
// angles.
void tacet_engine_inertia(const tacet_engine *en, unsigned slot, size_t n, const double *angle_rad,
                          double *inertia_kgm2, double *slope_kgm2_per_rad);
// Adds all three at once: gas torque, inertia and slope of the cylinder in `slot` to what the
// arrays hold (faster than one after another).
void tacet_engine_drive(const tacet_engine *en, const tacet_engine_work *w, unsigned slot, size_t n,
                        const double *angle_rad, double *torque_Nm, double *inertia_kgm2,
                        double *slope_kgm2_per_rad);
// Complex content of a fired cycle's gas torque of the last load at n orders: integral of T(a)
// exp(-i order a) da, N m rad, from one gas-exchange top to the next, a = 0 at its firing top. Of
// the fires of the repeat together, each weighted by its tenths of the full charge: summed over
// fires x tenths / 10 it is their whole torque. For dispersion.
void tacet_engine_fired_pulse(const tacet_engine *en, const tacet_engine_work *w, size_t n,
                              const double *order, double complex *pulse);

#pragma GCC visibility pop
#endif
