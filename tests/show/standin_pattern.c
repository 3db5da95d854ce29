#include "standin_pattern.h"
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
            each[k]->line[h] = standin_amplitude(r, h);
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
