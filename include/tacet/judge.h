// judge: quantities, bands, limits, levels, order windows, verdicts.
#ifndef TACET_JUDGE_H
#define TACET_JUDGE_H
#include "tacet/base.h"
#include "tacet/engine.h"
#include "tacet/order.h"
#include "tacet/pattern.h"
#include "tacet/train.h"
#pragma GCC visibility push(default)

// ---- what is judged ----------------------------------------------------------------------------
// One periodic response on the line grid. All borrowed.
typedef struct {
    const tacet_train *train;
    const tacet_train_motion *motion;
    // Torque of the pistons on each throw, gas and reciprocating inertia together, N m; friction
    // not in it.
    const tacet_spectrum *piston_torque_Nm;
    const size_t *throw_node;
    size_t n_throws;
    double friction_Nm;     // mean total, positive
    double speed_rad_per_s; // crank mean
    unsigned revolutions;
    size_t n_lines;
    double peak_pressure_Pa;
} tacet_response;

enum { TACET_TARGET_NONE, TACET_TARGET_NODE, TACET_TARGET_LINK };
// A quantity's numbers are in its own `unit`, the one in which a study states limits of it (stress
// and pressure: MPa).
typedef struct tacet_quantity {
    const char *name, *unit, *doc;
    int target;           // kind of target after ':'
    bool scalar;          // has no spectrum: `value` gives one number (damper-heat, peak-pressure)
    int statistic;        // the only one that a limit may use; -1: any
    bool over_mean_speed; // divided by the mean speed: at another speed, the same motion is another
    // Lines up to out->n_lines, which is at most r->n_lines; sets out->revolutions.
    tacet_status (*spectrum)(const tacet_response *r, size_t target, tacet_spectrum *out);
    tacet_status (*value)(const tacet_response *r, size_t target, double *out);
} tacet_quantity;
// Ends with name == NULL: roll-torque, link-torque, link-stress, node-angle, node-speed,
// node-acceleration, irregularity, damper-heat, peak-pressure.
const tacet_quantity *tacet_quantities(void);
const tacet_quantity *tacet_quantity_find(const char *name); // without target; NULL: none
typedef struct {
    const tacet_quantity *what;
    size_t target;
} tacet_quantity_ref;
// "link-torque:coupling" against a train; on failure e says what is allowed, with a near name.
TACET_USE tacet_status tacet_quantity_parse(const char *text, const tacet_train *t,
                                            tacet_quantity_ref *out, tacet_error *e);

// ---- definition (lists bands and limits of a study) --------------------------------------------
typedef enum {
    TACET_BAND_CAB,
    TACET_BAND_MOUNT,
    TACET_BAND_DRIVELINE,
    TACET_BAND_CRANK
} tacet_band_kind;
typedef enum { TACET_REFERENCE_WORST, TACET_REFERENCE_SAME_SPEED } tacet_reference;
typedef struct {
    const char *name;
    int kind;
    double low_hz, high_hz;
    const char *quantity;
    double limit_rms, over_all_fire_db, floor_rms; // NAN: absent
    double guard;  // fraction; NAN: by kind (5 % mount and cab, 3 % driveline, 2 % crank)
    int reference; // tacet_reference
} tacet_band_def;
typedef enum {
    TACET_STAT_PP,
    TACET_STAT_HALF_RANGE,
    TACET_STAT_RMS,  // of the lines, order 0 excluded
    TACET_STAT_MEAN, // its magnitude: the sign of a torque depends on the sense of its shaft
    TACET_STAT_MAX   // largest magnitude of the signal, mean included
} tacet_statistic;
typedef struct {
    const char *name, *quantity;
    int statistic; // tacet_statistic; -1: the quantity's only one
    double value;  // in the quantity's unit
} tacet_limit_def;
const tacet_section *tacet_band_keys(void);  // of one item of `bands`
const tacet_section *tacet_limit_keys(void); // of one item of `limits`
// Edges and limits that make sense together; `path` names the band, "bands[0]".
void tacet_band_def_check(const tacet_band_def *d, const char *path, const tacet_reporter *r);
double tacet_band_guard(const tacet_band_def *d); // resolved fraction

// ---- bands -------------------------------------------------------------------------------------
typedef enum { TACET_CLEAR, TACET_NEAR, TACET_OVER, TACET_NO_VERDICT } tacet_verdict;
typedef enum {
    TACET_WHY_NONE,
    TACET_WHY_UNREACHABLE,
    TACET_WHY_FAILED,
    TACET_WHY_NO_REFERENCE
} tacet_why;
const char *tacet_verdict_text(tacet_verdict v); // "clear", "near", "over", "none"

typedef struct tacet_band {
    const char *name;
    int kind;
    double low_hz, high_hz;                 // as stated
    double counted_low_hz, counted_high_hz; // with guard
    tacet_quantity_ref of;
    double limit_rms, over_all_fire_db, floor_rms; // NAN: absent
    int reference;
    double reserve_db;
} tacet_band;
// Resolves guard and quantity against a train. Borrows the name of d.
TACET_USE tacet_status tacet_band_create(const tacet_band_def *d, double reserve_db,
                                         const tacet_train *t, tacet_band *out, tacet_error *e);

// Level of a spectrum inside the counted band, edges inclusive, order 0 excluded. Lines past the
// end of the spectrum are not in it: its owner chooses n_lines so that bands lie inside.
typedef struct {
    double nominal;   // rms of the lines
    double dispersed; // with both kinds of dispersion; the verdict uses this one
    bool has_line;    // dispersed > 0 and >= 1e-9 of the quantity's total rms
    // Largest line inside, cylinder dispersion included: unequal cylinders alone make the lines
    // that cancel in equal ones. 0: no line.
    double leading_order, leading_peak; // amplitude, peak
    size_t leading_line;
} tacet_band_level;
// `transfer[i]`: response of the band's quantity to unit torque on the throw of slot i, on the same
// lines; `fired[i]`: spectrum of slot i's fired torque alone on the same lines; NULL: no cylinder
// dispersion. A cylinder that differs from the others does so in each of its cycles, so it adds to
// every line of the repeat where its own fired torque has content (all-fire: the half-order comb):
//   level^2 = sum |S|^2 / 2 + cylinder_sigma^2 sum_i sum |H_i F_i|^2 / 2 + cyclic_mean_square,
// sums over the lines inside the counted band. cyclic_mean_square: from cycle-to-cycle variation
// inside the band, as tacet_cyclic_mean_square gives it, or 0.
typedef struct {
    double cylinder_sigma;
    size_t n_slots;
    const tacet_spectrum *const *transfer; // [n_slots]
    const tacet_spectrum *fired;           // [n_slots]
    double cyclic_mean_square;
} tacet_dispersion;
// Level of s at a crank speed; d NULL: no dispersion.
void tacet_band_level_of(const tacet_band *b, const tacet_spectrum *s, double speed_rad_per_s,
                         const tacet_dispersion *d, tacet_band_level *out);
// Mean square of a quantity from independent variation of fired cycles, integral over [low, high]
// Hz of
//   sum_i 2 lambda_i sigma^2 |H_i(f)|^2 |P(f)|^2 df   (Campbell's theorem, one-sided),
// f[n] rising (trapezium rule), H[i*n+k] transfer of slot i, P[k] pulse content in N m s, lambda_i
// fires/s.
double tacet_cyclic_mean_square(size_t n, const double *f_hz, size_t n_slots,
                                const double complex *H, const double complex *P,
                                const double *fires_per_s, double sigma);

typedef struct {
    tacet_band_level level;
    double limit;     // resolved rms limit; NAN when there is none to resolve
    double reference; // all-fire level used; NAN: none needed or none
    double margin_db; // NAN when no line or no verdict
    tacet_verdict verdict;
    tacet_why why; // of TACET_NO_VERDICT
} tacet_band_result;
// limit = min(limit_rms, max(floor_rms, reference * 10^(over_all_fire_db / 20))), absent terms drop
// out. all_fire_level NULL or not finite: no reference; a band without over_all_fire_db does not
// ask for one. Without a reference that is asked for, no line is still clear and a level over
// limit_rms still over; else there is no verdict. A level that is not finite has failed. Truth
// table in tests/judge/test_verdicts.c: outcome x reference x lines.
void tacet_band_judge(const tacet_band *b, const tacet_band_level *level,
                      const double *all_fire_level, tacet_band_result *out);
// The result of a condition that has no response.
void tacet_band_no_verdict(tacet_why why, tacet_band_result *out);

// ---- limits ------------------------------------------------------------------------------------
typedef struct tacet_limit {
    const char *name;
    tacet_quantity_ref of;
    int statistic;
    double value;
} tacet_limit;
typedef struct {
    double value, margin_db; // 20 log10(limit / value); NAN: value 0, which is clear
    tacet_verdict verdict;   // near inside the reserve
    tacet_why why;
} tacet_limit_result;
// Resolves quantity and statistic against a train. Borrows the name of d.
TACET_USE tacet_status tacet_limit_create(const tacet_limit_def *d, const tacet_train *t,
                                          tacet_limit *out, tacet_error *e);
// spectrum: scratch that holds r->n_lines lines; transform and buffer for peaks (oversampled >= 6).
TACET_USE tacet_status tacet_limit_judge(const tacet_limit *l, const tacet_response *r,
                                         double reserve_db, tacet_spectrum *spectrum,
                                         const tacet_transform *transform, double *buffer,
                                         tacet_limit_result *out);
// The result of a condition that has no response.
void tacet_limit_no_verdict(tacet_why why, tacet_limit_result *out);

// ---- order windows -----------------------------------------------------------------------------
// Exact speeds (rad/s) at which an order lies in the band, bare or counted.
void tacet_order_window(const tacet_band *b, double order, bool counted, double *low_rad_per_s,
                        double *high_rad_per_s);

#pragma GCC visibility pop
#endif
