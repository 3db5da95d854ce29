// What paths bring to points: a panel for each point, a row for each path, a column for all lines
// of the band and for its largest orders. Bars to the right add to the sum, to the left they take
// away from it.
#include "show/canvas.h"
#include "show/text.h"
#include <math.h>
#include <string.h>

#define TOP_PX       122.0
#define BOTTOM_PX    686.0
#define GAP_PX       26.0
#define HEAD_PX      78.0 // of a panel, above its rows
#define ROW_MOST     40.0
#define ROW_LEAST    15.0
#define NAME_PX      210.0
#define COLUMN_PX    178.0 // the least that a column needs
#define COLUMN_MOST  330.0
#define COLUMNS_MOST 8
#define NUMBER_PX    66.0 // beside a bar

typedef struct {
    double x0, y0, x1;
    double row_px, first_x, column_px;
    size_t n_rows, n_columns;
    size_t column[COLUMNS_MOST]; // sums that are shown
    double low, high;            // of shares
} panel;

// Height of the tallest panel, up to an even share of the drawing.
static double panel_height(const tacet_figure_paths *f, size_t down)
{
    double most = 0;
    for (size_t i = 0; i < f->n_points; i++)
        most = fmax(most, HEAD_PX + ROW_MOST * (double)f->point[i].n_paths);
    return fmin(most, (BOTTOM_PX - TOP_PX - GAP_PX * (double)(down - 1)) / (double)down);
}

static void find_range(const tacet_figure_point *point, panel *p)
{
    p->low = p->high = 0;
    for (size_t k = 0; k < p->n_columns; k++)
        for (size_t r = 0; r < p->n_rows; r++)
            if (isfinite(point->sum[p->column[k]].share[r])) {
                p->low = fmin(p->low, point->sum[p->column[k]].share[r]);
                p->high = fmax(p->high, point->sum[p->column[k]].share[r]);
            }
    if (!(p->high > p->low)) p->high = 1;
}

// The first sum and the largest of the others, in the order given.
static void pick_columns(const tacet_figure_point *point, size_t fit, panel *p)
{
    size_t n = point->n_sums < fit ? point->n_sums : fit;
    p->n_columns = 0;
    if (n > COLUMNS_MOST) n = COLUMNS_MOST;
    for (size_t k = 0; k < point->n_sums; k++) {
        size_t larger = 0;
        for (size_t i = 1; i < point->n_sums; i++)
            larger += point->sum[i].level_rms > point->sum[k].level_rms ||
                      (point->sum[i].level_rms >= point->sum[k].level_rms && i < k);
        if (k == 0 || larger + 1 < n) p->column[p->n_columns++] = k;
    }
}

static void lay_out(const tacet_figure_paths *f, size_t i, panel *p)
{
    const tacet_figure_point *point = &f->point[i];
    size_t across = f->n_points > 2 ? 2 : 1, down = (f->n_points + across - 1) / across;
    double width = (CANVAS_WIDTH - 48 - GAP_PX * (double)(across - 1)) / (double)across;
    double height = panel_height(f, down), names = fmin(NAME_PX, 0.3 * width);
    p->x0 = 24 + (width + GAP_PX) * (double)(i % across);
    size_t row = i / across;
    p->y0 = TOP_PX + (height + GAP_PX) * (double)row;
    p->x1 = p->x0 + width;
    p->first_x = p->x0 + names;
    size_t fit = (size_t)((width - names) / COLUMN_PX);
    pick_columns(point, fit, p);
    p->column_px = fmin((width - names) / (double)(p->n_columns ? p->n_columns : 1), COLUMN_MOST);
    p->row_px = (height - HEAD_PX) / (double)(point->n_paths ? point->n_paths : 1);
    p->row_px = fmin(fmax(p->row_px, ROW_LEAST), ROW_MOST);
    p->n_rows = (size_t)fmin((height - HEAD_PX) / p->row_px + 1e-6, (double)point->n_paths);
    find_range(point, p);
}

// Numbers stand beside bars, also beside those that reach furthest.
static double share_x(const panel *p, size_t column, double share)
{
    double left = p->first_x + p->column_px * (double)column + 8;
    double room = p->column_px - 16 - NUMBER_PX - (p->low < 0 ? NUMBER_PX : 0);
    return left + (p->low < 0 ? NUMBER_PX : 0) + (share - p->low) / (p->high - p->low) * room;
}

static double row_y(const panel *p, size_t row)
{
    return p->y0 + HEAD_PX + p->row_px * ((double)row + 0.5);
}

// Rows of a block: `adds` those to the right, else those to the left.
static void bars(canvas *c, const tacet_figure_paths *f, const panel *panels, bool adds)
{
    canvas_block(c, adds ? "adds" : "takes");
    for (size_t i = 0; i < f->n_points; i++)
        for (size_t k = 0; k < panels[i].n_columns; k++)
            for (size_t r = 0; r < panels[i].n_rows; r++) {
                const panel *p = &panels[i];
                double share = f->point[i].sum[p->column[k]].share[r], half = 0.36 * p->row_px;
                double x0 = share_x(p, k, fmin(share, 0)), x1 = share_x(p, k, fmax(share, 0));
                double y = CANVAS_HEIGHT - row_y(p, r);
                if (!isfinite(share) || share == 0 || (share > 0) != adds) continue;
                const double row[] = {(x0 + x1) / 2, y, x0, x1, y - half, y + half};
                for (size_t j = 0; j < 6; j++)
                    canvas_number(c, row[j]);
                canvas_end_row(c);
            }
    canvas_end_block(c);
}

static void column_head(canvas *c, const panel *p, const tacet_figure_point *point, size_t k)
{
    const tacet_figure_sum *sum = &point->sum[p->column[k]];
    char text[160], order[TACET_NUMBER_TEXT], hz[TACET_NUMBER_TEXT], level[TACET_NUMBER_TEXT];
    double x = p->first_x + p->column_px * (double)k + 8;
    canvas_style style = {.size = FONT_SMALL, .bold = true, .most_px = p->column_px - 12};
    if (isfinite(sum->order))
        snprintf(text, sizeof text, "order %s, %s Hz",
                 tacet_number_format_short(sum->order, 3, order),
                 tacet_number_format_short(sum->hz, 3, hz));
    else
        snprintf(text, sizeof text, "%.100s", point->all);
    canvas_text(c, x, p->y0 + 44, style, text);
    style.bold = false;
    snprintf(text, sizeof text, "%s %s rms", tacet_number_format_short(sum->level_rms, 3, level),
             point->unit);
    canvas_text(c, x, p->y0 + 62, style, text);
}

static void column(canvas *c, const panel *p, const tacet_figure_point *point, size_t k)
{
    char text[64], number[TACET_NUMBER_TEXT];
    double zero = share_x(p, k, 0), end = p->y0 + HEAD_PX + p->row_px * (double)p->n_rows;
    column_head(c, p, point, k);
    canvas_line(c, zero, p->y0 + HEAD_PX, zero, end, (canvas_stroke){INK, 1, false});
    for (size_t r = 0; r < p->n_rows; r++) {
        double share = point->sum[p->column[k]].share[r];
        if (!isfinite(share)) continue;
        const char *digits = text_fixed(100 * share, fabs(share) < 9.995 ? 1 : 0, number);
        snprintf(text, sizeof text, "%s%s %%", *digits == '-' || share == 0 ? "" : "+", digits);
        bool left = share < 0;
        canvas_text(c, share_x(p, k, share) + (left ? -5 : 5), row_y(p, r),
                    (canvas_style){.anchor = left ? ANCHOR_RIGHT : ANCHOR_LEFT, .size = FONT_SMALL},
                    text);
    }
}

static void draw_panel(canvas *c, const panel *p, const tacet_figure_point *point)
{
    double name_px = canvas_text_width(point->name, FONT_TEXT, true);
    double most = 0.4 * (p->x1 - p->x0);
    canvas_line(c, p->x0, p->y0, p->x1, p->y0, (canvas_stroke){RULE, 1, false});
    canvas_text(c, p->x0, p->y0 + 19,
                (canvas_style){.size = FONT_TEXT, .bold = true, .most_px = most}, point->name);
    canvas_text(
        c, p->x0 + fmin(name_px, most) + 16, p->y0 + 19,
        (canvas_style){.size = FONT_TEXT, .most_px = p->x1 - p->x0 - fmin(name_px, most) - 16},
        point->at);
    for (size_t r = 0; r < p->n_rows; r++)
        canvas_text(c, p->first_x - 12, row_y(p, r),
                    (canvas_style){.anchor = ANCHOR_RIGHT,
                                   .size = FONT_SMALL,
                                   .most_px = p->first_x - p->x0 - 12},
                    point->path[r]);
    for (size_t k = 0; k < p->n_columns; k++)
        column(c, p, point, k);
}

static void key(canvas *c)
{
    double y = 94;
    canvas_style style = {.size = FONT_TEXT};
    canvas_text(c, 24, y, style, "share of the sum of all paths:");
    double x = 24 + canvas_text_width("share of the sum of all paths:", FONT_TEXT, false) + 24;
    canvas_box(c, x, y - 8, x + 26, y + 8, (canvas_paint){.fill = TRACE_MAIN});
    canvas_text(c, x + 36, y, style, "adds to it");
    x += 36 + canvas_text_width("adds to it", FONT_TEXT, false) + 30;
    canvas_box(c, x, y - 8, x + 26, y + 8,
               (canvas_paint){
                   .fill = FILL_DARK, .hatching = HATCH_RISING, .border = FILL_DARK, .width = 1});
    canvas_text(c, x + 36, y, style, "takes away from it");
    canvas_text(c, CANVAS_WIDTH - 24, y, (canvas_style){.anchor = ANCHOR_RIGHT, .size = FONT_SMALL},
                "rms over the columns: without dispersion; in brackets: with it, and the limit");
}

void figure_paths_script(canvas *c, const tacet_figure_paths *f)
{
    panel panels[TACET_FIGURE_POINTS_MOST];
    canvas_head(c, f->title, f->subtitle);
    canvas_plot(c, 0, 0, CANVAS_WIDTH, CANVAS_HEIGHT);
    canvas_ranges(c, 0, CANVAS_WIDTH, 0, CANVAS_HEIGHT);
    key(c);
    for (size_t i = 0; i < f->n_points; i++) {
        lay_out(f, i, &panels[i]);
        draw_panel(c, &panels[i], &f->point[i]);
    }
    bars(c, f, panels, true);
    bars(c, f, panels, false);
    canvas_use(c, "paths");
}
