#include "show/canvas.h"
#include <math.h>

static bool any_number(const double *value, size_t n)
{
    for (size_t i = 0; i < n; i++)
        if (isfinite(value[i])) return true;
    return false;
}

static bool rising(const double *value, size_t n)
{
    for (size_t i = 0; i < n; i++)
        if (!isfinite(value[i]) || (i > 0 && !(value[i] > value[i - 1]))) return false;
    return true;
}

static const char *map_missing(const tacet_figure_map *f)
{
    if (f->n_speeds == 0 || f->n_rows == 0) return "no speeds or no densities";
    if (!rising(f->speed_rpm, f->n_speeds)) return "speeds do not rise";
    if (f->n_rows > TACET_FIGURE_ROWS_MOST) return "too many densities for one drawing";
    for (size_t i = 0; i < f->n_rows * f->n_speeds; i++)
        if (f->cell[i].mark != TACET_MARK_BLANK) return NULL;
    return "no condition was computed";
}

static const char *orders_missing(const tacet_figure_orders *f)
{
    if (f->n_speeds == 0 || f->n_orders == 0) return "no speeds or no orders";
    if (f->n_orders > TACET_FIGURE_ORDERS_MOST) return "too many orders for one drawing";
    if (!rising(f->speed_rpm, f->n_speeds)) return "speeds do not rise";
    return any_number(f->level_rms, f->n_orders * f->n_speeds) ? NULL : "no level is a number";
}

static const char *bars_missing(const tacet_figure_bars *f)
{
    if (!rising(f->order, f->n_orders)) return "orders do not rise";
    return any_number(f->peak, f->n_orders) || any_number(f->reference_peak, f->n_orders)
               ? NULL
               : "no order has an amplitude";
}

static bool any_trace(const tacet_figure_trace *t, size_t n, size_t n_samples)
{
    for (size_t i = 0; i < n; i++)
        if (any_number(t[i].value, n_samples)) return true;
    return false;
}

static const char *repeat_missing(const tacet_figure_repeat *f)
{
    if (f->n_samples < 2 || !rising(f->angle_deg, f->n_samples)) return "no samples that rise";
    if (!any_trace(f->pressure_MPa, f->n_pressure, f->n_samples)) return "no pressure is a number";
    return any_trace(f->torque_Nm, f->n_torque, f->n_samples) ? NULL : "no torque is a number";
}

static const char *modes_missing(const tacet_figure_modes *f)
{
    if (!any_number(f->modes->hz, 6) || !(f->modes->hz[5] > 0)) return "nothing holds the body";
    for (size_t i = 0; i < 6; i++)
        if (!isfinite(f->modes->hz[i]) || !any_number(f->modes->share[i], 6))
            return "a mode is not known";
    return NULL;
}

static const char *paths_missing(const tacet_figure_paths *f)
{
    if (f->n_points > TACET_FIGURE_POINTS_MOST) return "too many points for one drawing";
    for (size_t i = 0; i < f->n_points; i++)
        for (size_t k = 0; k < f->point[i].n_sums; k++)
            if (any_number(f->point[i].sum[k].share, f->point[i].n_paths)) return NULL;
    return "nothing arrives at any point";
}

const char *figure_missing(const tacet_figure *f)
{
    switch (f->kind) {
    case TACET_FIGURE_MAP:
        return map_missing(f->map);
    case TACET_FIGURE_ORDERS:
        return orders_missing(f->orders);
    case TACET_FIGURE_BARS:
        return bars_missing(f->bars);
    case TACET_FIGURE_REPEAT:
        return repeat_missing(f->repeat);
    case TACET_FIGURE_MODES:
        return modes_missing(f->modes);
    case TACET_FIGURE_PATHS:
        return paths_missing(f->paths);
    }
    return "unknown kind of figure";
}
