#include "standin_pattern.h"
#include <complex.h>
#include <math.h>
#include <string.h>

#define PI  3.14159265358979323846
#define RPM (PI / 30)

double standin_amplitude(const tacet_roll *r, size_t h)
{
    bool all = r->fires == r->opportunities;
    return !all ? 1.0 / (double)h : h == 3 * r->revolutions ? 2 : 0;
}

// ---- model

const tacet_study *tacet_model_study(const tacet_model *m)
{
    return &m->study;
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
    (void)m;
    return 0;
}

const tacet_limit *tacet_model_limit(const tacet_model *m, size_t i)
{
    (void)m, (void)i;
    return NULL;
}

size_t tacet_model_lines(const tacet_model *m, unsigned revolutions)
{
    (void)m;
    return STANDIN_LINES_PER_REVOLUTION * revolutions;
}

double tacet_model_demand(const tacet_model *m, double speed_rad_per_s)
{
    (void)m, (void)speed_rad_per_s;
    return 300;
}

const tacet_roll *tacet_model_all_fire(const tacet_model *m)
{
    return m->all_fire;
}

const tacet_train *tacet_model_train(const tacet_model *m)
{
    (void)m;
    return NULL;
}

const tacet_engine *tacet_model_engine(const tacet_model *m)
{
    (void)m;
    return NULL;
}

// ---- train: hub - flywheel, then pumps behind a gear of ratio 2. Strain energies in J of the two
// elastic modes: shaft 1e6 (0.01)^2 = 100, coupling 1e4 (0.095 + 1)^2 = 11990; shaft 1e6 (1.6)^2,
// coupling 1e4 (-0.3 + 0.3)^2 = 0, but 900 without the ratio

size_t tacet_train_nodes(const tacet_train *t)
{
    (void)t;
    return 3;
}

const char *tacet_train_node_name(const tacet_train *t, size_t node)
{
    static const char *const name[] = {"hub", "flywheel", "pumps"};
    (void)t;
    return name[node];
}

size_t tacet_train_links(const tacet_train *t)
{
    (void)t;
    return 2;
}

const char *tacet_train_link_name(const tacet_train *t, size_t link)
{
    (void)t;
    return link ? "shaft" : "coupling";
}

tacet_link_info tacet_train_link_info(const tacet_train *t, size_t link)
{
    (void)t;
    return link
               ? (tacet_link_info){.from = 0, .to = 1, .stiffness_Nm_per_rad = 1e6, .gear_ratio = 1}
               : (tacet_link_info){
                     .from = 1, .to = 2, .stiffness_Nm_per_rad = 1e4, .gear_ratio = 2};
}

tacet_status tacet_train_modes(const tacet_train *t, double *frequency_hz, double *shape)
{
    static const double hz[] = {0, 21.5, 166};
    static const double shapes[] = {1, 1, 0.5, 0.2, 0.19, -1, 1, -0.6, -0.3};
    (void)t;
    memcpy(frequency_hz, hz, sizeof hz);
    memcpy(shape, shapes, sizeof shapes);
    return TACET_OK;
}

// ---- engine: pressure of slot k is k + 1 MPa throughout

unsigned tacet_engine_number(const tacet_engine *en, unsigned slot)
{
    static const unsigned number[] = {1, 5, 3, 6, 2, 4};
    (void)en;
    return number[slot];
}

double tacet_engine_firing_angle(const tacet_engine *en, unsigned slot)
{
    (void)en;
    return slot * 2 * PI / 3;
}

void tacet_engine_pressure(const tacet_engine *en, const tacet_engine_work *w, unsigned slot,
                           size_t n, const double *angle_rad, double *pressure_Pa)
{
    (void)en, (void)w, (void)angle_rad;
    for (size_t i = 0; i < n; i++)
        pressure_Pa[i] = (slot + 1) * 1e6;
}

// ---- condition

const char *tacet_outcome_text(tacet_outcome o)
{
    static const char *const text[] = {"solved", "unreachable", "failed"};
    return text[o];
}

tacet_status tacet_solve(const tacet_model *m, const tacet_condition *c, tacet_level level,
                         tacet_workspace *w, tacet_row *out)
{
    const tacet_roll *r = c->roll;
    size_t n = tacet_model_lines(m, r->revolutions);
    (void)level;
    *out = (tacet_row){.outcome = TACET_SOLVED};
    bool all = r->fires == r->opportunities;
    if (c->speed_rad_per_s < 950 * RPM || (all && !m->all_fire_reachable))
        out->outcome = TACET_UNREACHABLE;
    tacet_spectrum *each[] = {&w->spectrum, &w->pistons[0], &w->pistons[1]};
    for (int k = 0; k < 3; k++) {
        tacet_status status = tacet_spectrum_init(each[k], n, w->arena);
        if (status != TACET_OK) return status;
        each[k]->revolutions = r->revolutions;
        each[k]->mean = 50;
        for (size_t h = 1; h <= n; h++)
            each[k]->line[h] = standin_amplitude(r, h) * cexp(I * m->phase_rad);
    }
    w->response = (tacet_response){
        .piston_torque_Nm = w->pistons, .n_throws = 2, .revolutions = r->revolutions, .n_lines = n};
    return TACET_OK;
}

const tacet_response *tacet_workspace_response(const tacet_workspace *w)
{
    return &w->response;
}

const tacet_engine_work *tacet_workspace_engine(const tacet_workspace *w)
{
    (void)w;
    return NULL;
}

tacet_status tacet_workspace_quantity(tacet_workspace *w, tacet_quantity_ref q,
                                      const tacet_spectrum **out, tacet_peaks *peaks)
{
    (void)q, (void)peaks;
    *out = &w->spectrum;
    return TACET_OK;
}

// ---- body

#define PATH(point, mount_name, along)                                                             \
    {                                                                                              \
        .mount = mount_name, .axis = along, .to = point                                            \
    }
static tacet_point_def points[] = {{.name = "seat"}, {.name = "ear"}, {.name = "knee"}};
static tacet_path_def paths[] = {
    PATH("knee", "left", 0),  PATH("ear", "left", 2),   PATH("knee", "left", 1),
    PATH("ear", "right", 1),  PATH("knee", "left", 2),  PATH("knee", "right", 0),
    PATH("knee", "right", 1), PATH("knee", "right", 2), PATH("knee", "left", 0),
    PATH("knee", "left", 1),  PATH("knee", "left", 2)};
static const tacet_body_def body = {
    .points = points, .n_points = 3, .paths = paths, .n_paths = sizeof paths / sizeof *paths};

const tacet_body *tacet_model_body(const tacet_model *m)
{
    return m->no_body ? NULL : (const tacet_body *)&body;
}

size_t tacet_body_mounts(const tacet_body *b)
{
    (void)b;
    return 2;
}

size_t tacet_body_points(const tacet_body *b)
{
    (void)b;
    return 3;
}

const tacet_body_def *tacet_body_def_of(const tacet_body *b)
{
    (void)b;
    return &body;
}

const char *tacet_body_point_name(const tacet_body *b, size_t point)
{
    (void)b;
    return points[point].name;
}

tacet_status tacet_body_modes_of(const tacet_body *b, tacet_body_modes *out)
{
    (void)b;
    *out = (tacet_body_modes){.hz = {5, 6, 7, 8, 9, 10},
                              .share = {{1, 0, 0, 0, 0, 0},
                                        {0, 1, 0, 0, 0, 0},
                                        {0.1, 0, 0.9, 0, 0, 0},
                                        {0, 0, 0, 0.8, 0, 0.2},
                                        {0, 0, 0.2, 0, 0.8, 0},
                                        {0, 0.1, 0, -0.1, 0, 1}},
                              .settled = true};
    return TACET_OK;
}

const tacet_quantity *tacet_quantity_find(const char *name)
{
    static const tacet_quantity cab = {.name = "cab", .unit = "m/s2"};
    return strcmp(name, "cab") == 0 ? &cab : NULL;
}

tacet_status tacet_workspace_path(tacet_workspace *w, size_t path, const tacet_spectrum **out)
{
    tacet_status status = tacet_spectrum_init(&w->share, w->spectrum.n_lines, w->arena);
    if (status != TACET_OK) return status;
    double before = 0; // how many paths to the knee come before this one
    for (size_t i = 0; i < path; i++)
        before += strcmp(paths[i].to, "knee") == 0;
    bool ear = strcmp(paths[path].to, "ear") == 0, first = path == 1;
    w->share.revolutions = w->spectrum.revolutions;
    for (size_t h = 1; h <= w->spectrum.n_lines; h++) {
        double complex of_first = h % 2 ? 1.5 + 0.4 * I : 0.25;
        w->share.line[h] = w->spectrum.line[h] * (!ear    ? before / 36
                                                  : first ? of_first
                                                          : 1 - of_first);
    }
    *out = &w->share;
    return TACET_OK;
}
