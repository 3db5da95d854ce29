// Worst mount forces of all patterns, all-fire beside them.
#include "show/screen.h"
#include <math.h>

static const tacet_table_column columns[] = {
    {"mount", NULL, true, 0, false, NULL},
    {"axis", NULL, true, 0, false, NULL},
    {"order", NULL, false, -1, false, NULL},
    {"peak_n", "N", false, 1, false, "peak"},
    {"candidate", NULL, true, 0, false, NULL},
    {"word", NULL, true, 0, false, NULL},
    {"speed_rpm", "rpm", false, -1, false, "speed"},
    {"demand_nm", "N m", false, -1, false, "torque"},
    {"frequency_hz", "Hz", false, 1, false, "at"},
    {"all_fire_peak_n", "N", false, 1, false, "all fire"},
    {"all_fire_speed_rpm", "rpm", false, -1, false, "at"},
    {"all_fire_why", NULL, true, 0, false, NULL},
};
#define N (sizeof columns / sizeof *columns)

static const char *why(const tacet_mount_worst *w)
{
    if (isnan(w->all_fire_N)) return "all cylinders firing cannot reach the demand";
    return isnan(w->all_fire_speed_rad_per_s) ? "no such order" : "";
}

static void put_worst(const tacet_model *m, const tacet_screen *s, const tacet_mount_worst *w,
                      tacet_arena *a, table_row *row)
{
    static const char *const axes[] = {"x", "y", "z"};
    const tacet_candidate *c = &s->candidates[w->candidate];
    char word[TACET_PATTERN_LONGEST + 1];
    double order = (double)w->line / w->revolutions;
    put_text(row, tacet_body_mount_name(tacet_model_body(m), w->mount));
    put_text(row, axes[w->axis]);
    put_number(row, order);
    put_number(row, w->peak_N);
    put_text(row, c->name);
    put_text(row, tacet_arena_text(a, tacet_pattern_format(&c->roll[w->placement]->pattern, word)));
    put_number(row, screen_rpm(w->speed_rad_per_s));
    put_number(row, w->demand_Nm);
    put_number(row, tacet_order_hz(order, w->speed_rad_per_s));
    put_number(row, w->all_fire_N);
    put_number(row, isfinite(w->all_fire_speed_rad_per_s) ? screen_rpm(w->all_fire_speed_rad_per_s)
                                                          : NAN);
    put_text(row, why(w));
}

tacet_status screen_mounts_table(const tacet_model *m, const tacet_screen *s, tacet_arena *a,
                                 tacet_table *out)
{
    table_row row;
    tacet_status status =
        table_start(a,
                    &(tacet_table){.name = "mounts",
                                   .heading = "Worst mount forces of all patterns",
                                   .columns = columns,
                                   .n_columns = N,
                                   .n_rows = s->n_mounts},
                    out, &row);
    for (size_t i = 0; status == TACET_OK && i < s->n_mounts; i++)
        put_worst(m, s, &s->mounts[i], a, &row);
    return status;
}
