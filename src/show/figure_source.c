#include "show/figure_source.h"
#include <math.h>
#include <string.h>

tacet_status figure_no_memory(tacet_error *e)
{
    return tacet_fail(e, TACET_NO_MEMORY, "no memory for a figure");
}

const char *figure_pattern_text(const tacet_figure_source *s)
{
    char word[TACET_PATTERN_LONGEST + 1];
    tacet_pattern_format(&s->roll->pattern, word);
    return strcmp(word, s->name) == 0 ? s->name : screen_text(s->arena, "%s %s", s->name, word);
}

tacet_figure_band *figure_bands(const tacet_figure_source *s, size_t *n)
{
    *n = tacet_model_bands(s->model);
    tacet_figure_band *out = tacet_arena_alloc(s->arena, (*n + 1) * sizeof *out);
    for (size_t i = 0; out && i < *n; i++) {
        const tacet_band *b = tacet_model_band(s->model, i);
        out[i] =
            (tacet_figure_band){.name = b->name,
                                .low_hz = b->counted_low_hz,
                                .high_hz = b->counted_high_hz,
                                .judged = b->of.what == s->of.what && b->of.target == s->of.target};
    }
    return out;
}

tacet_status figure_solve(const tacet_figure_source *s, const tacet_roll *roll,
                          double speed_rad_per_s, double demand_Nm, tacet_row *row, tacet_error *e)
{
    tacet_condition c = {.speed_rad_per_s = speed_rad_per_s, .demand_Nm = demand_Nm, .roll = roll};
    tacet_status status = tacet_solve(s->model, &c, TACET_LEVEL_RIPPLE, s->work, row);
    if (status != TACET_OK)
        return tacet_fail(e, status, "%.0f rpm: %s", screen_rpm(speed_rad_per_s),
                          tacet_status_text(status));
    if (row->outcome != TACET_SOLVED)
        return tacet_fail(e, TACET_BAD_INPUT, "nothing to draw: %.0f N m at %.0f rpm is %s",
                          demand_Nm, screen_rpm(speed_rad_per_s), tacet_outcome_text(row->outcome));
    return TACET_OK;
}

const char *figure_at_text(const tacet_figure_source *s, const char *of, double speed_rad_per_s,
                           double demand_Nm)
{
    char rpm[TACET_NUMBER_TEXT], torque[TACET_NUMBER_TEXT];
    return screen_text(s->arena, "%s at %s rpm and %s N m brake torque", of,
                       tacet_number_format_short(screen_rpm(speed_rad_per_s), 5, rpm),
                       tacet_number_format_short(demand_Nm, 4, torque));
}

size_t figure_pick_largest(size_t n, const double *weight, size_t most, bool *picked)
{
    size_t count = 0;
    double least = 0;
    for (size_t i = 0; i < n; i++) {
        least = fmax(least, FIGURE_LEAST_SHARE * weight[i]);
        picked[i] = false;
    }
    for (; count < most; count++) {
        size_t best = n;
        for (size_t i = 0; i < n; i++)
            if (!picked[i] && weight[i] > 0 && weight[i] >= least &&
                (best == n || weight[i] > weight[best]))
                best = i;
        if (best == n) break;
        picked[best] = true;
    }
    return count;
}
