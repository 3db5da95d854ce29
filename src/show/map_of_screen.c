// The map of density over speed from a screen.
#include "show/screen.h"
#include <math.h>
#include <stdlib.h>

typedef struct {
    const tacet_model *m;
    const tacet_screen *s;
    tacet_arena *a;
    size_t row_of[TACET_FIGURE_ROWS_MOST]; // candidate of each row
    size_t n_rows;
} source;

// Candidates that were screened, density rising from the bottom, in the study's order where equal.
static void pick_rows(source *src)
{
    for (size_t c = 0; c < src->s->n_candidates; c++) {
        const tacet_candidate *candidate = &src->s->candidates[c];
        if (candidate->refused || candidate->n_cells < src->s->n_speeds) continue;
        if (src->n_rows == TACET_FIGURE_ROWS_MOST) break;
        size_t at = src->n_rows++;
        for (; at > 0 && src->s->candidates[src->row_of[at - 1]].density > candidate->density; at--)
            src->row_of[at] = src->row_of[at - 1];
        src->row_of[at] = c;
    }
}

static tacet_mark mark_of(const tacet_row *r)
{
    if (r->outcome == TACET_UNREACHABLE) return TACET_MARK_UNREACHABLE;
    if (r->outcome == TACET_FAILED) return TACET_MARK_FAILED;
    switch (r->worst) {
    case TACET_CLEAR:
        return TACET_MARK_CLEAR;
    case TACET_NEAR:
        return TACET_MARK_NEAR;
    case TACET_OVER:
        return TACET_MARK_OVER;
    default:
        return TACET_MARK_NO_REFERENCE;
    }
}

static void fill_cells(const source *src, tacet_map_cell *cell)
{
    const tacet_screen *s = src->s;
    for (size_t row = 0; row < src->n_rows; row++)
        for (size_t i = 0; i < s->n_speeds; i++) {
            size_t at = s->candidates[src->row_of[row]].first_cell + i;
            const tacet_row *r = &s->cells[at].row;
            int limiting = r->limiting_band;
            if (limiting < 0 && r->limiting_limit >= 0)
                limiting = (int)tacet_model_bands(src->m) + r->limiting_limit;
            cell[row * s->n_speeds + i] =
                (tacet_map_cell){.mark = mark_of(r),
                                 .margin_db = r->worst_margin_db,
                                 .limiting = limiting,
                                 .recommended = i < s->n_ranks && s->ranks[i].best == at};
        }
}

static size_t fill_ranges(const source *src, tacet_map_range *range)
{
    size_t n = 0;
    for (size_t i = 0; i < src->s->n_no_go; i++) {
        const tacet_no_go *g = &src->s->no_go[i];
        for (size_t row = 0; row < src->n_rows; row++)
            if (src->row_of[row] == g->candidate)
                range[n++] = (tacet_map_range){row, screen_rpm(g->low_rad_per_s),
                                               screen_rpm(g->high_rad_per_s)};
    }
    return n;
}

static const char **limiting_names(const source *src, size_t *n)
{
    size_t n_bands = tacet_model_bands(src->m);
    *n = n_bands + tacet_model_limits(src->m);
    const char **name = tacet_arena_alloc(src->a, (*n + 1) * sizeof *name);
    for (size_t i = 0; name && i < *n; i++)
        name[i] = i < n_bands ? tacet_model_band(src->m, i)->name
                              : tacet_model_limit(src->m, i - n_bands)->name;
    return name;
}

static const char *subtitle(const source *src)
{
    const tacet_screen *s = src->s;
    char torque[2][TACET_NUMBER_TEXT], speed[2][TACET_NUMBER_TEXT];
    if (s->n_ranks == 0) return "Worst margin over all bands and limits";
    for (int k = 0; k < 2; k++) {
        const tacet_rank *rank = &s->ranks[k ? s->n_ranks - 1 : 0];
        tacet_number_format_short(rank->demand_Nm, 4, torque[k]);
        tacet_number_format_short(screen_rpm(rank->speed_rad_per_s), 5, speed[k]);
    }
    return screen_text(src->a,
                       "Worst margin over all bands and limits; brake torque %s N m at %s rpm to "
                       "%s N m at %s rpm",
                       torque[0], speed[0], torque[1], speed[1]);
}

tacet_status tacet_map_of_screen(const tacet_model *m, const tacet_screen *s, tacet_arena *a,
                                 tacet_figure_map *out)
{
    source src = {.m = m, .s = s, .a = a};
    size_t n_limiting;
    pick_rows(&src);
    double *rpm = tacet_arena_alloc(a, (s->n_speeds + 1) * sizeof *rpm);
    const char **row = tacet_arena_alloc(a, (src.n_rows + 1) * sizeof *row);
    tacet_map_cell *cell = tacet_arena_alloc(a, (src.n_rows * s->n_speeds + 1) * sizeof *cell);
    tacet_map_range *range = tacet_arena_alloc(a, (s->n_no_go + 1) * sizeof *range);
    const char **limiting = limiting_names(&src, &n_limiting);
    const char *below = subtitle(&src);
    if (!rpm || !row || !cell || !range || !limiting || !below) return TACET_NO_MEMORY;
    for (size_t i = 0; i < s->n_speeds; i++)
        rpm[i] = screen_rpm(s->speeds_rad_per_s[i]);
    for (size_t i = 0; i < src.n_rows; i++)
        row[i] = s->candidates[src.row_of[i]].name;
    fill_cells(&src, cell);
    *out = (tacet_figure_map){.title = screen_title(m),
                              .subtitle = below,
                              .speed_rpm = rpm,
                              .n_speeds = s->n_speeds,
                              .row = row,
                              .n_rows = src.n_rows,
                              .cell = cell,
                              .limiting = limiting,
                              .n_limiting = n_limiting,
                              .reserve_db = tacet_model_study(m)->screen.reserve_db,
                              .range = range,
                              .n_ranges = fill_ranges(&src, range)};
    return TACET_OK;
}
