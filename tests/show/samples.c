#include "samples.h"
#include <math.h>
#include <stdio.h>
#include <string.h>

#define PI          3.14159265358979323846
#define SPEEDS      240
#define ROWS        64
#define LINES       48
#define SAMPLES     2016
#define CYLINDERS   6
#define REVOLUTIONS 14

static const char *const limits[] = {
    "pump coupling",
    "powertrain roll on the mounts, front left, vertical, at low idle",
    "cab boom",
    "crank stress",
    "b\xc3\xa4ng `touch hit4` 'quoted' \"twice\" <b>",
};
#define N_LIMITS (sizeof limits / sizeof *limits)

// Orders k/14 of a word of seven on a six; margins against five made-up resonances.
static double margin_at(double density, double rpm, int *limiting)
{
    static const double hz[N_LIMITS] = {21.9, 14.5, 52, 166, 5.5};
    double worst = 99;
    for (size_t b = 0; b < N_LIMITS; b++) {
        double f = density * 3 * rpm / 60 * (b == 3 ? 3 : 1), away = fabs(log(f / hz[b])) / 0.16;
        double margin = -11 + 14 * away - 3 * density;
        if (margin < worst) worst = margin, *limiting = (int)b;
    }
    return fmin(worst, 19);
}

static void fill_row(size_t row, double density, const double *rpm, size_t n_speeds,
                     tacet_map_cell *cell)
{
    for (size_t i = 0; i < n_speeds; i++) {
        tacet_map_cell *c = &cell[row * n_speeds + i];
        c->margin_db = margin_at(density, rpm[i], &c->limiting);
        if (density > 0.99) c->margin_db = fmax(c->margin_db, 7);
        c->mark = c->margin_db < 0   ? TACET_MARK_OVER
                  : c->margin_db < 3 ? TACET_MARK_NEAR
                                     : TACET_MARK_CLEAR;
        c->recommended = false;
        if (rpm[i] < 2300 * (0.9 - density)) c->mark = TACET_MARK_UNREACHABLE;
    }
}

static void recommend(size_t n_rows, size_t n_speeds, tacet_map_cell *cell)
{
    for (size_t i = 0; i < n_speeds; i++)
        for (size_t row = 0; row < n_rows; row++)
            if (cell[row * n_speeds + i].mark == TACET_MARK_CLEAR) {
                cell[row * n_speeds + i].recommended = true;
                break;
            }
}

const tacet_figure_map *sample_map(size_t n_speeds, size_t n_rows)
{
    static double rpm[SPEEDS];
    static char name[ROWS][64];
    static const char *row_name[ROWS];
    static tacet_map_cell cell[ROWS * SPEEDS];
    static tacet_map_range range[ROWS];
    static tacet_figure_map f;
    for (size_t i = 0; i < n_speeds; i++)
        rpm[i] = 900 + 1000.0 * (double)i / (double)(n_speeds > 1 ? n_speeds - 1 : 1);
    for (size_t row = 0; row < n_rows; row++) {
        unsigned k = 14 + (unsigned)(28 * row / (n_rows > 1 ? n_rows - 1 : 1));
        if (row % 8 == 5)
            snprintf(name[row], sizeof name[row], "opposed pairs no. %zu of the book", row);
        else
            snprintf(name[row], sizeof name[row], "%u/42", k);
        row_name[row] = name[row];
        fill_row(row, k / 42.0, rpm, n_speeds, cell);
        double at = 60 * 21.9 / (3 * k / 42.0);
        range[row] = (tacet_map_range){row, at / 1.12, at * 1.12};
    }
    recommend(n_rows, n_speeds, cell);
    cell[3 * n_speeds / 2 % (n_rows * n_speeds)].mark = TACET_MARK_FAILED;
    f = (tacet_figure_map){.title = SAMPLE_TITLE,
                           .subtitle =
                               "Worst margin of each density; brake torque 330 N m at 900 to "
                               "270 N m at 1900 rpm",
                           .speed_rpm = rpm,
                           .n_speeds = n_speeds,
                           .row = row_name,
                           .n_rows = n_rows,
                           .cell = cell,
                           .limiting = limits,
                           .n_limiting = N_LIMITS,
                           .reserve_db = 3,
                           .range = range,
                           .n_ranges = n_rows};
    return &f;
}

static const tacet_figure_band bands[] = {
    {"powertrain roll, front left mount, vertical", 10.45, 18.9, false},
    {"pump coupling", 16.5, 27.8, true},
    {"cab suspension", 2.85, 8.4, false},
    {"cab boom", 39.9, 65.1, false},
};
static const tacet_figure_mode modes[] = {
    {"coupling", 21.86}, {"engine on mounts", 22.9}, {"damper", 135.6}, {"crank", 250.6}};

const tacet_figure_orders *sample_orders(void)
{
    static double rpm[41], order[LINES], level[LINES * 41];
    static tacet_figure_orders f;
    for (size_t i = 0; i < 41; i++)
        rpm[i] = 900 + 25.0 * (double)i;
    for (size_t h = 0; h < LINES; h++) {
        order[h] = 3.0 * (double)(h + 1) / REVOLUTIONS;
        for (size_t i = 0; i < 41; i++) {
            double r = order[h] * rpm[i] / 60 / 21.86;
            double drive = 400 * fabs(cos(1.3 * (double)(h + 1))) / (1 + 0.1 * (double)(h * h));
            level[h * 41 + i] = i < 2 ? NAN : drive / hypot(1 - r * r, 0.15);
        }
    }
    f = (tacet_figure_orders){.title = SAMPLE_TITLE,
                              .subtitle =
                                  "Pattern 3/7 ..x.x.x, 330 N m at 900 to 270 N m at 1900 rpm",
                              .quantity = "link-torque:coupling",
                              .unit = "N m",
                              .speed_rpm = rpm,
                              .n_speeds = 41,
                              .order = order,
                              .n_orders = LINES,
                              .level_rms = level,
                              .band = bands,
                              .n_bands = sizeof bands / sizeof *bands,
                              .mode = modes,
                              .n_modes = sizeof modes / sizeof *modes};
    return &f;
}

const tacet_figure_bars *sample_bars(void)
{
    static double order[20], peak[20], reference[20];
    static tacet_figure_bars f;
    for (size_t i = 0; i < 20; i++) {
        order[i] = 3.0 * (double)(i + 1) / 7;
        peak[i] = 380 * fabs(cos(1.3 * (double)(i + 1))) / (1 + 0.02 * (double)(i * i));
        reference[i] = i % 7 == 6 ? 310.0 / (1 + 0.02 * (double)(i * i)) : 0;
    }
    f = (tacet_figure_bars){.title = SAMPLE_TITLE,
                            .subtitle = "At 1400 rpm and 300 N m",
                            .quantity = "link-torque:coupling",
                            .unit = "N m",
                            .name = "3/7 ..x.x.x",
                            .reference_name = "all cylinders firing",
                            .speed_rpm = 1400,
                            .order = order,
                            .peak = peak,
                            .reference_peak = reference,
                            .n_orders = 20,
                            .n_lines = 336,
                            .band = bands,
                            .n_bands = sizeof bands / sizeof *bands};
    return &f;
}

// A bell at the firing angle of every cycle, high when fired.
static double pressure(double angle, int cylinder)
{
    double p = 0.1;
    for (int c = 0; c < REVOLUTIONS / 2; c++) {
        int opportunity = c * CYLINDERS + cylinder;
        double at = 120.0 * opportunity + 8, away = (angle - at) / 32;
        bool fired = opportunity * 3 % 7 < 3;
        if (away < -10) away += 5040 / 32.0;
        p += (fired ? 9.0 : 0.9) * exp(-away * away);
    }
    return p;
}

const tacet_figure_repeat *sample_repeat(void)
{
    static double angle[SAMPLES], p[CYLINDERS][SAMPLES], gas[SAMPLES], coupling[SAMPLES];
    static char name[CYLINDERS][32];
    static tacet_figure_trace pressures[CYLINDERS], torques[2];
    static tacet_figure_event event[7 * CYLINDERS];
    static tacet_figure_repeat f;
    for (int i = 0; i < SAMPLES; i++) {
        angle[i] = 360.0 * REVOLUTIONS * i / (SAMPLES - 1);
        gas[i] = 0;
        for (int c = 0; c < CYLINDERS; c++) {
            p[c][i] = pressure(angle[i], c);
            gas[i] += 140 * (p[c][i] - 0.1) * sin(PI / 180 * (angle[i] - 120 * c)) + 40;
        }
        coupling[i] =
            300 + 160 * sin(PI / 180 * angle[i] * 9 / 14) + 60 * cos(PI / 180 * angle[i] * 18 / 14);
    }
    for (int c = 0; c < CYLINDERS; c++) {
        snprintf(name[c], sizeof name[c], "cylinder %d", c + 1);
        pressures[c] = (tacet_figure_trace){name[c], p[c], c == 0 || c == 3};
    }
    torques[0] = (tacet_figure_trace){"gas torque of the crank", gas, false};
    torques[1] = (tacet_figure_trace){"pump coupling behind the flywheel", coupling, true};
    for (unsigned i = 0; i < 7 * CYLINDERS; i++)
        event[i] = (tacet_figure_event){120.0 * i, i * 3 % 7 < 3 ? 10 : 0};
    f = (tacet_figure_repeat){.title = SAMPLE_TITLE,
                              .subtitle = "Pattern 3/7 ..x.x.x at 1400 rpm and 300 N m",
                              .angle_deg = angle,
                              .n_samples = SAMPLES,
                              .pressure_MPa = pressures,
                              .n_pressure = CYLINDERS,
                              .torque_Nm = torques,
                              .n_torque = 2,
                              .event = event,
                              .n_events = 7 * CYLINDERS};
    return &f;
}

static const tacet_figure_band mount_bands[] = {
    {"powertrain roll, front left mount, vertical, at low idle", 10.45, 18.9, true},
    {"b\xc3\xa4ng `touch hit4` 'quoted'", 17, 24, true},
};

// Two modes 0.05 Hz apart, negative shares in one, even shares in another.
const tacet_figure_modes *sample_modes(void)
{
    static const tacet_body_modes of_body = {.hz = {0, 5.96, 8.04, 8.09, 10.49, 14.54},
                                             .share = {{0, 0.973, 0, 0.015, 0, 0.012},
                                                       {0.91, 0, 0.02, 0, 0.07, 0},
                                                       {0.05, 0, 0.84, 0, 0.11, 0},
                                                       {0, 0.04, 0, -0.03, 0, 0.99},
                                                       {0.16, 0.17, 0.17, 0.17, 0.17, 0.16},
                                                       {0, 0.02, 0, 1.08, 0, -0.10}},
                                             .loss = {0, 0.12, 0.1234, 0.12, 0.08, NAN},
                                             .settled = true};
    static const tacet_figure_modes f = {.title = SAMPLE_TITLE,
                                         .subtitle = "Modes of the powertrain on its mounts",
                                         .modes = &of_body,
                                         .band = mount_bands,
                                         .n_bands = sizeof mount_bands / sizeof *mount_bands};
    return &f;
}

const tacet_figure_paths *sample_paths(size_t n_points, size_t n_paths)
{
    static const char *const path[] = {
        "front-left z", "front-right z", "rear-left z",
        "rear-right z", "front-left y",  "b\xc3\xa4ng `touch hit4` 'quoted' <b> at the front",
        "torque rod x", "9 other paths"};
    static const char *const point[] = {
        "ear",   "seat",  "driver's seat, left rail, front, vertical, `touch hit4`",
        "wheel", "pedal", "floor"};
    static double share[5][8];
    static tacet_figure_sum sum[5];
    static tacet_figure_point points[TACET_FIGURE_POINTS_MOST];
    static tacet_figure_paths f;
    for (size_t k = 0; k < 5; k++) {
        double total = 0;
        for (size_t i = 0; i < n_paths; i++) {
            share[k][i] = cos(1.7 * (double)i + 0.6 * (double)k) + 0.3;
            total += share[k][i];
        }
        for (size_t i = 0; i < n_paths; i++)
            share[k][i] /= total;
        double order = k ? 0.5 + (double)k / 14 : NAN;
        sum[k] =
            (tacet_figure_sum){order, order * 1400 / 60, 0.0123456 / (double)(k + 1), share[k]};
    }
    for (size_t i = 0; i < n_points; i++)
        points[i] = (tacet_figure_point){.name = point[i],
                                         .at = "at 1000 rpm and 107.5 N m: margin -5.0 dB in "
                                               "powertrain roll (0.177 of 0.1 m/s2 rms)",
                                         .all = "all of powertrain roll, front left",
                                         .unit = "m/s2",
                                         .path = path,
                                         .n_paths = n_paths,
                                         .sum = sum,
                                         .n_sums = 5};
    f = (tacet_figure_paths){.title = SAMPLE_TITLE,
                             .subtitle = "What each path from the mounts brings to people",
                             .point = points,
                             .n_points = n_points};
    return &f;
}
