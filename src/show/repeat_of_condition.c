// Pressure of every cylinder and torque over one repeat of a condition.
#include "show/figure_source.h"
#include <math.h>

#define SAMPLES_LEAST 720
#define SAMPLES_MOST  4320
#define PI            3.14159265358979323846

static tacet_figure_trace *pressures_of(const tacet_figure_source *s, const double *angle_rad,
                                        size_t n)
{
    const tacet_engine *en = tacet_model_engine(s->model);
    unsigned slots = s->roll->cylinders;
    tacet_figure_trace *trace = tacet_arena_alloc(s->arena, slots * sizeof *trace);
    size_t mixed = SIZE_MAX, never = SIZE_MAX, fires = SIZE_MAX;
    for (unsigned k = 0; trace && k < slots; k++) {
        double *p = tacet_arena_alloc(s->arena, n * sizeof *p);
        const char *name = screen_text(s->arena, "cylinder %u", tacet_engine_number(en, k));
        if (!p || !name) return NULL;
        tacet_engine_pressure(en, tacet_workspace_engine(s->work), k, n, angle_rad, p);
        for (size_t i = 0; i < n; i++)
            p[i] /= 1e6;
        trace[k] = (tacet_figure_trace){.name = name, .value = p};
        unsigned count = tacet_roll_fires_of(s->roll, k);
        if (count > 0 && count < s->roll->cycles && mixed == SIZE_MAX) mixed = k;
        if (count == 0 && never == SIZE_MAX) never = k;
        if (count == s->roll->cycles && fires == SIZE_MAX) fires = k;
    }
    // heavy: one that fires and skips; failing that, one that fires and one that never does
    for (size_t k = 0; trace && k < slots; k++)
        trace[k].strong = mixed != SIZE_MAX ? k == mixed : k == fires || k == never;
    return trace;
}

// Gas and inertia torque of all throws together, and the drawn shaft.
static tacet_status torques_of(const tacet_figure_source *s, const double *angle_rad, size_t n,
                               tacet_figure_trace trace[2])
{
    const tacet_response *r = tacet_workspace_response(s->work);
    const tacet_spectrum *x;
    double *shaft = tacet_arena_alloc(s->arena, n * sizeof *shaft);
    double *pistons = tacet_arena_alloc(s->arena, n * sizeof *pistons);
    tacet_spectrum sum;
    if (!shaft || !pistons || !r) return TACET_NO_MEMORY;
    tacet_status status = tacet_spectrum_init(&sum, r->n_lines, s->arena);
    if (status != TACET_OK) return status;
    sum.revolutions = r->revolutions;
    for (size_t k = 0; k < r->n_throws; k++)
        tacet_spectrum_add(&sum, 1, &r->piston_torque_Nm[k]);
    status = tacet_workspace_quantity(s->work, s->of, &x, NULL);
    if (status != TACET_OK) return status;
    for (size_t i = 0; i < n; i++) {
        pistons[i] = tacet_spectrum_at(&sum, angle_rad[i]);
        shaft[i] = tacet_spectrum_at(x, angle_rad[i]);
    }
    trace[0] = (tacet_figure_trace){"all pistons", pistons, false};
    trace[1] = (tacet_figure_trace){screen_quantity_name(s->model, s->of, s->arena), shaft, true};
    return trace[1].name ? TACET_OK : TACET_NO_MEMORY;
}

static tacet_figure_event *events_of(const tacet_figure_source *s)
{
    const tacet_engine *en = tacet_model_engine(s->model);
    const tacet_roll *r = s->roll;
    tacet_figure_event *event = tacet_arena_alloc(s->arena, r->opportunities * sizeof *event);
    for (unsigned i = 0; event && i < r->opportunities; i++) {
        unsigned slot = i % r->cylinders, cycle = i / r->cylinders;
        event[i].angle_deg =
            tacet_engine_firing_angle(en, slot) * 180 / PI + 180.0 * r->strokes * cycle;
        event[i].tenths = tacet_roll_cycle(r, slot, cycle).tenths;
    }
    return event;
}

tacet_status tacet_repeat_of_condition(const tacet_figure_source *s, double speed_rad_per_s,
                                       double demand_Nm, tacet_figure_repeat *out, tacet_error *e)
{
    tacet_row row;
    tacet_status status = figure_solve(s, s->roll, speed_rad_per_s, demand_Nm, &row, e);
    if (status != TACET_OK) return status;
    size_t n = 120u * s->roll->revolutions;
    n = (n < SAMPLES_LEAST ? SAMPLES_LEAST : n > SAMPLES_MOST ? SAMPLES_MOST : n) + 1;
    double *angle = tacet_arena_alloc(s->arena, n * sizeof *angle);
    double *degrees = tacet_arena_alloc(s->arena, n * sizeof *degrees);
    tacet_figure_trace *torque = tacet_arena_alloc(s->arena, 2 * sizeof *torque);
    if (!angle || !degrees || !torque) return figure_no_memory(e);
    for (size_t i = 0; i < n; i++) {
        degrees[i] = 360.0 * s->roll->revolutions * (double)i / (double)(n - 1);
        angle[i] = degrees[i] * PI / 180;
    }
    tacet_figure_trace *pressure = pressures_of(s, angle, n);
    tacet_figure_event *event = events_of(s);
    const char *pattern = figure_pattern_text(s);
    const char *at = pattern ? figure_at_text(s, pattern, speed_rad_per_s, demand_Nm) : NULL;
    if (!pressure || !event || !at) return figure_no_memory(e);
    status = torques_of(s, angle, n, torque);
    if (status != TACET_OK) return tacet_fail(e, status, "torque: %s", tacet_status_text(status));
    *out = (tacet_figure_repeat){.title = screen_title(s->model),
                                 .subtitle = at,
                                 .angle_deg = degrees,
                                 .n_samples = n,
                                 .pressure_MPa = pressure,
                                 .n_pressure = s->roll->cylinders,
                                 .torque_Nm = torque,
                                 .n_torque = 2,
                                 .event = event,
                                 .n_events = s->roll->opportunities};
    return TACET_OK;
}
