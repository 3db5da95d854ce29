// judge: quantities, bands, limits, levels, order windows, verdicts.
#ifndef TACET_JUDGE_H
#define TACET_JUDGE_H
#include "tacet/base.h"
#include "tacet/body.h"
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
    const tacet_body *body;            // NULL: none
    const tacet_body_response *mounts; // of this speed and grid, as many lines or more
    bool shaken;                       // the shaking loads act as well
} tacet_response;

// What stands behind the ':' of a quantity; mounts and places with an axis: "front-left:z".
enum {
    TACET_TARGET_NONE,
    TACET_TARGET_NODE,
    TACET_TARGET_LINK,
    TACET_TARGET_MOUNT, // 3 mount + axis
    TACET_TARGET_PLACE, // 3 place + axis
    TACET_TARGET_POINT,
    TACET_TARGET_MEMBER // of a load: x, y, z, roll, pitch, yaw
};
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
// node-acceleration, irregularity, mount-force, place-acceleration, cab, shaking, damper-heat,
// peak-pressure.
const tacet_quantity *tacet_quantities(void);
const tacet_quantity *tacet_quantity_find(const char *name); // without target; NULL: none
typedef struct {
    const tacet_quantity *what;
    size_t target;
} tacet_quantity_ref;
// "link-torque:coupling" against a train and a body (may be NULL); on failure e says what is
// allowed, with a near name.
TACET_USE tacet_status tacet_quantity_parse(const char *text, const tacet_train *t,
                                            const tacet_body_def *body, tacet_quantity_ref *out,
                                            tacet_error *e);
#define TACET_QUANTITY_TEXT 192
// "link-torque:coupling" again.
const char *tacet_quantity_text(tacet_quantity_ref q, const tacet_train *t,
                                const tacet_body_def *body, char out[TACET_QUANTITY_TEXT]);
// Of cab and shaking it depends on the target.
const char *tacet_quantity_unit(tacet_quantity_ref q, const tacet_body_def *body);
// Targets of a kind (TACET_TARGET_..) and what they are called; nodes and links need the train, the
// others the body.
size_t tacet_target_count(int target, const tacet_train *t, const tacet_body_def *body);
// The name of one, i < tacet_target_count: "coupling", "left:z", ..
const char *tacet_target_text(int target, size_t i, const tacet_train *t,
                              const tacet_body_def *body, char out[TACET_QUANTITY_TEXT]);
const char *tacet_target_kind(int target); // "node", "link", "mount and axis", ..
const char *tacet_target_form(int target); // "", ":NODE", ":LINK", ":MOUNT:AXIS", ..

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
    TACET_STAT_RMS,      // of the lines, order 0 excluded
    TACET_STAT_MEAN,     // its magnitude: the sign of a torque depends on the sense of its shaft
    TACET_STAT_MAX,      // largest magnitude of the signal, mean included
    TACET_STAT_REVERSED, // of a stress: largest rainflow cycle as a fully reversed amplitude
    TACET_STAT_DAMAGE    // of a stress: Miner sum per hour
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
                                         const tacet_train *t, const tacet_body_def *body,
                                         tacet_band *out, tacet_error *e);

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
                                          const tacet_body_def *body, tacet_limit *out,
                                          tacet_error *e);
const char *tacet_limit_unit(const tacet_limit *l, const tacet_body_def *body); // damage: 1/h
bool tacet_limit_counts_cycles(const tacet_limit *l); // reversed, damage: by rainflow
typedef struct {
    tacet_spectrum *spectrum;         // holds r->n_lines lines
    const tacet_transform *transform; // oversampled >= 6
    double *buffer;                   // of the transform
    double *cycles; // TACET_RAIN_SCRATCH numbers a sample and one; NULL: no limit counts cycles
} tacet_limit_scratch;
#define TACET_RAIN_SCRATCH 5
// Statistic of the quantity against the limit; a value that is not finite: TACET_NOT_FINITE.
TACET_USE tacet_status tacet_limit_judge(const tacet_limit *l, const tacet_response *r,
                                         double reserve_db, const tacet_limit_scratch *scratch,
                                         tacet_limit_result *out);
// The result of a condition that has no response.
void tacet_limit_no_verdict(tacet_why why, tacet_limit_result *out);

// ---- people -----------------------------------------------------------------------------------
// One path's share of what arrives at its point (path: index in the body), weighted as the point.
TACET_USE tacet_status tacet_path_share(const tacet_response *r, size_t path, tacet_spectrum *out);
// What a part adds along the sum that it belongs to, Re(part conj(sum)) / |sum|^2: the shares of
// all parts come to 1, negative ones take away from it. NAN: the sum is 0.
double tacet_share(double complex part, double complex sum);

// Whole-body vibration of one axis at one point, ISO 2631-1 (from memory but for the weightings).
typedef struct {
    double weighted_rms;  // a_w of 6.1, m/s2
    double crest_factor;  // largest |a_w(t)| over a_w
    double fourth_power;  // fourth root of the mean of a_w(t)^4, m/s2: VDV = it * T^(1/4)
    bool rms_says_enough; // crest factor up to 9 and fourth power up to 1.75 a_w (6.2.1, 6.3.3)
} tacet_comfort;
// s: acceleration, already weighted; no lines: all 0.
void tacet_comfort_of(const tacet_spectrum *s, const tacet_transform *transform, double *buffer,
                      tacet_comfort *out);
double tacet_vibration_dose(const tacet_comfort *c, double time_s); // VDV, m/s^1.75
// Annex C's words for a total value in m/s2, "not uncomfortable" .. "extremely uncomfortable";
// its ranges overlap on purpose: up to two apply, `second` may be NULL or gets NULL.
const char *tacet_comfort_words(double total_m_per_s2, const char **second);
// a_v = sqrt(sum (k a_w)^2) over x, y, z; comfort of a seated person k = 1, 1, 1.
double tacet_total_value(const double k[3], const double weighted_rms[3]);

// ---- strength ----------------------------------------------------------------------------------
typedef struct {
    double range, mean, count;
} tacet_rain;
// Rainflow counting of ASTM E1049-85 5.4.4: series[n] -> cycles with range, mean and count (0.5 or
// 1) in the order in which they close; points between reversals and repeated ones do not count.
// Returns how many (fewer than n). `stack` and `out` hold n.
size_t tacet_rainflow(size_t n, const double *series, double *stack, tacet_rain *out);
// A closed repeat, samples[n] of one period: counted from its largest value on around to it again,
// so that every cycle is whole (5.4.5). `series`, `stack` and `out` hold n + 1.
size_t tacet_rainflow_repeat(size_t n, const double *samples, double *series, double *stack,
                             tacet_rain *out);
// Amplitude fully reversed that does the same: Goodman a / (1 - m / S), Gerber a / (1 - (m / S)^2);
// tension only (m <= 0: a itself), for shear the magnitude of m counts. INFINITY: m reaches S.
double tacet_reversed_amplitude(const tacet_fatigue_def *f, double amplitude, double mean);
// Miner sum of one pass, N = at_cycles (a / amplitude)^-exponent, no endurance limit.
double tacet_miner_sum(const tacet_fatigue_def *f, size_t n, const tacet_rain *cycles);

// ---- order windows -----------------------------------------------------------------------------
// Exact speeds (rad/s) at which an order lies in the band, bare or counted.
void tacet_order_window(const tacet_band *b, double order, bool counted, double *low_rad_per_s,
                        double *high_rad_per_s);

#pragma GCC visibility pop
#endif
