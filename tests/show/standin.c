#include "standin.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>

#define RPM 0.10471975511965977

static const tacet_quantity torque = {.name = "roll-torque", .unit = "N m"};
static const tacet_quantity stress = {.name = "link-stress", .unit = "MPa"};

const tacet_model *standin_model(void)
{
    static struct tacet_model m;
    m = (struct tacet_model){.study = {.title = "A stand-in, \"quoted\"",
                                       .fingerprint = 0x1234,
                                       .screen = {.reserve_db = 3, .n_speeds = 5}},
                             .band = {{.name = "pump coupling", .of = {&torque, 0}},
                                      {.name = "boom", .of = {&torque, 0}}},
                             .limit = {{.name = "crank stress", .of = {&stress, 0}, .value = 40}}};
    return &m;
}

const tacet_study *tacet_model_study(const tacet_model *m)
{
    return &m->study;
}

const tacet_body *tacet_model_body(const tacet_model *m)
{
    (void)m;
    return NULL;
}

size_t tacet_model_bands(const tacet_model *m)
{
    return sizeof m->band / sizeof *m->band;
}

const tacet_band *tacet_model_band(const tacet_model *m, size_t i)
{
    return &m->band[i];
}

size_t tacet_model_limits(const tacet_model *m)
{
    return sizeof m->limit / sizeof *m->limit;
}

const tacet_limit *tacet_model_limit(const tacet_model *m, size_t i)
{
    return &m->limit[i];
}

const tacet_train *tacet_model_train(const tacet_model *m)
{
    (void)m;
    return NULL;
}

size_t tacet_train_nodes(const tacet_train *t)
{
    (void)t;
    return 0; // parsing is not used
}
size_t tacet_train_links(const tacet_train *t)
{
    (void)t;
    return 0;
}
const char *tacet_train_node_name(const tacet_train *t, size_t node)
{
    (void)t, (void)node;
    return "node";
}

const char *tacet_train_link_name(const tacet_train *t, size_t link)
{
    (void)t, (void)link;
    return "link";
}

const char *tacet_outcome_text(tacet_outcome o)
{
    static const char *const text[] = {"solved", "unreachable", "failed"};
    return text[o];
}

const char *tacet_verdict_text(tacet_verdict v)
{
    static const char *const text[] = {"clear", "near", "over", "none"};
    return text[v];
}

// ---- a few columns

static double speed_rpm(const tacet_model *m, const tacet_condition *c, const tacet_row *r)
{
    (void)m, (void)c;
    return round(r->speed_rad_per_s / RPM);
}

static const char *word(const tacet_model *m, const tacet_condition *c, const tacet_row *r,
                        char buffer[TACET_COLUMN_BUFFER])
{
    (void)m, (void)r;
    return tacet_pattern_format(&c->roll->pattern, buffer);
}

static const char *outcome(const tacet_model *m, const tacet_condition *c, const tacet_row *r,
                           char buffer[TACET_COLUMN_BUFFER])
{
    (void)m, (void)c, (void)buffer;
    return tacet_outcome_text(r->outcome);
}

static double fuel_vs_all_fire(const tacet_model *m, const tacet_condition *c, const tacet_row *r)
{
    (void)m, (void)c;
    return r->fuel_to_all_fire;
}

static const char *method(const tacet_model *m, const tacet_condition *c, const tacet_row *r,
                          char buffer[TACET_COLUMN_BUFFER])
{
    (void)m, (void)c, (void)buffer;
    return r->solver.method;
}

const tacet_column *tacet_row_columns(size_t *n)
{
    static const tacet_column columns[] = {
        {"speed_rpm", "rpm", "", TACET_COLUMN_NUMBER, speed_rpm, NULL},
        {"word", NULL, "", TACET_COLUMN_TEXT, NULL, word},
        {"outcome", NULL, "", TACET_COLUMN_TEXT, NULL, outcome},
        {"fuel_vs_all_fire", NULL, "", TACET_COLUMN_NUMBER, fuel_vs_all_fire, NULL},
        {"method", NULL, "", TACET_COLUMN_TEXT, NULL, method},
    };
    *n = sizeof columns / sizeof *columns;
    return columns;
}

static double margin_db(const tacet_band_result *b)
{
    return b->margin_db;
}

static const char *verdict(const tacet_band_result *b)
{
    return tacet_verdict_text(b->verdict);
}

const tacet_band_column *tacet_band_columns(size_t *n)
{
    static const tacet_band_column columns[] = {
        {"margin_db", "dB", "", TACET_COLUMN_NUMBER, margin_db, NULL},
        {"verdict", NULL, "", TACET_COLUMN_TEXT, NULL, verdict},
    };
    *n = sizeof columns / sizeof *columns;
    return columns;
}

// ---- the screen

// Margins of the pump coupling in dB and fuel ratios at the five speeds. NAN margin: unreachable.
static const double margin[3][5] = {{-6.25, 1.5, 4, 5, 6},   // 1/2
                                    {9, 9, 9, 9, 9},         // 1
                                    {NAN, NAN, -2, 2, 3.5}}; // the book's word
static const double fuel[3][5] = {
    {0.9, 0.91, 0.9375, 0.875, 0.90625}, {1, 1, 1, 1, 1}, {NAN, NAN, 0.8, 0.85, 0.96}};

static tacet_row row_of(size_t candidate, size_t i)
{
    double m = margin[candidate][i];
    tacet_row r = {.speed_rad_per_s = (900 + 25.0 * (double)i) * RPM,
                   .demand_Nm = 330 - 2 * (double)i,
                   .fuel_to_all_fire = fuel[candidate][i],
                   .solver = {.method = "ripple"},
                   .worst_margin_db = m,
                   .limiting_band = 0,
                   .limiting_limit = -1,
                   .n_bands = 2,
                   .n_limits = 1};
    r.worst = m < 0 ? TACET_OVER : m < 3 ? TACET_NEAR : TACET_CLEAR;
    r.bands[0] = (tacet_band_result){
        .level = {.leading_order = 1.5}, .limit = 230, .margin_db = m, .verdict = r.worst};
    r.bands[1] = (tacet_band_result){.limit = 10, .margin_db = NAN, .verdict = TACET_CLEAR};
    r.limits[0] = (tacet_limit_result){.value = 20, .margin_db = 6.0206, .verdict = TACET_CLEAR};
    r.duty.fuel_kg_per_s = 10 * r.fuel_to_all_fire / 3600;
    if (!isnan(m)) return r;
    r.outcome = TACET_UNREACHABLE;
    r.worst = r.bands[0].verdict = r.limits[0].verdict = TACET_NO_VERDICT;
    r.limits[0].why = TACET_WHY_UNREACHABLE;
    r.limiting_band = -1;
    return r;
}

static tacet_roll *roll_of(const char *text)
{
    tacet_pattern p;
    tacet_roll *roll = NULL;
    if (tacet_pattern_parse(text, &p, NULL) != TACET_OK) return NULL;
    if (tacet_roll_create(&p, 6, 4, &roll, NULL) != TACET_OK) return NULL;
    return roll;
}

static size_t ranked[5][3] = {{5, 0, 10}, {6, 1, 11}, {2, 7, 12}, {3, 8, 13}, {4, 14, 9}};

static tacet_roll *rolls[4];
static tacet_candidate candidates[] = {{.name = "1/2",
                                        .word = ".x",
                                        .fires = 1,
                                        .length = 2,
                                        .density = 0.5,
                                        .roll = rolls,
                                        .n_placements = 2,
                                        .first_cell = 0,
                                        .n_cells = 5},
                                       {.name = "1",
                                        .word = "x",
                                        .fires = 1,
                                        .length = 1,
                                        .density = 1,
                                        .roll = rolls + 2,
                                        .n_placements = 1,
                                        .first_cell = 5,
                                        .n_cells = 5},
                                       {.name = "outer, \"pair\"",
                                        .word = "x..",
                                        .fires = 1,
                                        .length = 3,
                                        .density = 1.0 / 3,
                                        .roll = rolls + 3,
                                        .n_placements = 1,
                                        .first_cell = 10,
                                        .n_cells = 5},
                                       {.name = "1/40",
                                        .word = "x.",
                                        .fires = 1,
                                        .length = 40,
                                        .density = 0.025,
                                        .refused = "a skip run of 39 cycles"}};
static tacet_no_go no_go[] = {{.candidate = 0,
                               .band = 0,
                               .low_rad_per_s = 900 * RPM,
                               .high_rad_per_s = 918.25 * RPM,
                               .low_open = TACET_OPEN_SPEEDS,
                               .worst_margin_db = -6.25,
                               .worst_speed_rad_per_s = 900 * RPM,
                               .leading_order = 1.5},
                              {.candidate = 2,
                               .band = 0,
                               .low_rad_per_s = 940 * RPM,
                               .high_rad_per_s = 960 * RPM,
                               .low_open = TACET_OPEN_UNREACHABLE,
                               .high_open = TACET_OPEN_FAILED,
                               .worst_margin_db = -2,
                               .worst_speed_rad_per_s = 950 * RPM,
                               .leading_order = 1}};
static tacet_candidate_note notes[] = {{.candidate = 0,
                                        .recommended = true,
                                        .n_best = 3,
                                        .n_clear = 3,
                                        .n_near = 1,
                                        .n_over = 1,
                                        .clear_rad_per_s = 50 * RPM,
                                        .clear_from_rad_per_s = 950 * RPM,
                                        .clear_to_rad_per_s = 1000 * RPM,
                                        .saving = 0.0833,
                                        .limiting_band = 0,
                                        .limiting_limit = -1,
                                        .limiting_order = 1.5},
                                       {.candidate = 1,
                                        .recommended = true,
                                        .n_best = 1,
                                        .n_clear = 5,
                                        .clear_rad_per_s = 100 * RPM,
                                        .clear_from_rad_per_s = 900 * RPM,
                                        .clear_to_rad_per_s = 1000 * RPM,
                                        .saving = 0,
                                        .limiting_band = -1},
                                       {.candidate = 2,
                                        .why_not = "clear over 0 rpm, under 150",
                                        .n_clear = 1,
                                        .n_near = 1,
                                        .n_over = 1,
                                        .n_unreachable = 2,
                                        .clear_from_rad_per_s = 1000 * RPM,
                                        .clear_to_rad_per_s = 1000 * RPM,
                                        .saving = 0.04,
                                        .limiting_band = 0,
                                        .limiting_limit = -1,
                                        .limiting_order = 1},
                                       {.candidate = 3, .limiting_band = -1, .saving = NAN}};
static tacet_referee referee[] = {{.cell = 0,
                                   .status = TACET_OK,
                                   .a = {.settled = true,
                                         .same_model = 2e-9,
                                         .full_model_db = 0.0421,
                                         .repeats = 2,
                                         .evaluations = 200000,
                                         .closure = 1e-10}},
                                  {.cell = 3, .status = TACET_NOT_CONVERGED}};
static double speeds[5];
static tacet_cell cells[15];
static tacet_rank ranks[5];

tacet_screen *standin_screen(void)
{
    static tacet_screen s;
    static const char *const words[] = {".x", "x.", "x", "x..x.."};
    for (int i = 0; i < 4; i++)
        rolls[i] = roll_of(words[i]);
    for (size_t i = 0; i < 15; i++)
        cells[i] =
            (tacet_cell){.candidate = i / 5, .row = row_of(i / 5, i % 5), .placement = i == 3};
    for (size_t i = 0; i < 5; i++) {
        speeds[i] = cells[i].row.speed_rad_per_s;
        ranks[i] = (tacet_rank){.speed_rad_per_s = speeds[i],
                                .demand_Nm = cells[i].row.demand_Nm,
                                .ranked = ranked[i],
                                .n_ranked = 3,
                                .best = i == 1 ? SIZE_MAX : ranked[i][0]};
    }
    s = (tacet_screen){.candidates = candidates,
                       .n_candidates = 4,
                       .speeds_rad_per_s = speeds,
                       .n_speeds = 5,
                       .cells = cells,
                       .n_cells = 15,
                       .no_go = no_go,
                       .n_no_go = 2,
                       .ranks = ranks,
                       .n_ranks = 5,
                       .notes = notes,
                       .referee = referee,
                       .n_referee = 2,
                       .n_failed = 0,
                       .n_solves = 21};
    return &s;
}

void standin_release(tacet_screen *s)
{
    for (int i = 0; i < 4; i++)
        tacet_roll_destroy(s->candidates[0].roll[i]);
}
