// Order bars of one quantity, a pattern beside all-fire. One place on the axis for each order that
// is shown, in rising order, so that bands are stretches of neighbours.
#include "show/canvas.h"
#include <math.h>
#include <string.h>

#define ORDERS_MOST 24
#define BANDS_MOST  24
#define BAR         0.38 // width of a bar, of its order's place

static double value_of(double v)
{
    return isfinite(v) ? v : 0;
}

static size_t shown(const tacet_figure_bars *f)
{
    return f->n_orders < ORDERS_MOST ? f->n_orders : ORDERS_MOST;
}

static double highest(const tacet_figure_bars *f)
{
    double most = 0;
    for (size_t i = 0; i < shown(f); i++)
        most = fmax(most, fmax(value_of(f->peak[i]), value_of(f->reference_peak[i])));
    return most > 0 ? most : 1;
}

static void bars(canvas *c, const char *block, size_t n, const double *value, double from,
                 double to)
{
    canvas_block(c, block);
    for (size_t i = 0; i < n; i++) {
        double v = value_of(value[i]), x = (double)i;
        if (!(v > 0)) continue;
        canvas_number(c, x + (from + to) / 2);
        canvas_number(c, v / 2);
        canvas_number(c, x + from);
        canvas_number(c, x + to);
        canvas_number(c, 0);
        canvas_number(c, v);
        canvas_end_row(c);
    }
    canvas_end_block(c);
}

// Order under every place, its frequency below, both thinned to what fits.
static void order_marks(canvas *c, const tacet_figure_bars *f)
{
    double at[ORDERS_MOST] = {0}, half[ORDERS_MOST] = {0}, weight[ORDERS_MOST] = {0};
    bool keep[ORDERS_MOST];
    char order[TACET_NUMBER_TEXT], hz[TACET_NUMBER_TEXT];
    size_t n = shown(f);
    canvas_style bold = {.anchor = ANCHOR_CENTRE, .size = FONT_SMALL, .bold = true};
    canvas_style faint = {.anchor = ANCHOR_CENTRE, .size = FONT_SMALL, .colour = INK_FAINT};
    for (size_t i = 0; i < n; i++) {
        tacet_number_format_short(f->order[i], 3, order);
        tacet_number_format_short(f->order[i] * f->speed_rpm / 60, 3, hz);
        at[i] = canvas_x(c, (double)i);
        half[i] = 4 + fmax(canvas_text_width(order, FONT_SMALL, true),
                           canvas_text_width(hz, FONT_SMALL, false)) /
                          2;
        weight[i] = fmax(value_of(f->peak[i]), value_of(f->reference_peak[i]));
    }
    canvas_thin(n, at, half, weight, keep);
    for (size_t i = 0; i < n; i++) {
        if (!keep[i]) continue;
        canvas_text(c, at[i], c->bottom + 16, bold,
                    tacet_number_format_short(f->order[i], 3, order));
        canvas_text(c, at[i], c->bottom + 35, faint,
                    tacet_number_format_short(f->order[i] * f->speed_rpm / 60, 3, hz));
    }
    canvas_style right = {.anchor = ANCHOR_RIGHT, .size = FONT_SMALL};
    canvas_text(c, c->left - 12, c->bottom + 16, right, "order");
    canvas_text(c, c->left - 12, c->bottom + 35, right, "Hz");
}

static double bar_value(const tacet_figure_bars *f, size_t i)
{
    size_t n = shown(f);
    return value_of(i < n ? f->peak[i] : f->reference_peak[i - n]);
}

static double bar_middle(const canvas *c, const tacet_figure_bars *f, size_t i)
{
    size_t n = shown(f);
    return canvas_x(c, (double)(i % n) + (i < n ? -BAR / 2 : BAR / 2));
}

// Would a label at x above bar i lie on a taller bar?
static bool on_a_bar(const canvas *c, const tacet_figure_bars *f, size_t i, double x, double half)
{
    double half_bar = BAR / 2 * (canvas_x(c, 1) - canvas_x(c, 0));
    for (size_t k = 0; k < 2 * shown(f); k++)
        if (k != i && bar_value(f, k) > bar_value(f, i) &&
            fabs(bar_middle(c, f, k) - x) < half + half_bar)
            return true;
    return false;
}

// Values above the leading bars, as many as fit beside one another and beside taller bars: over the
// middle of the bar, or moved outwards.
static void value_marks(canvas *c, const tacet_figure_bars *f)
{
    double at[2 * ORDERS_MOST] = {0}, half[2 * ORDERS_MOST] = {0}, weight[2 * ORDERS_MOST] = {0};
    bool keep[2 * ORDERS_MOST], free_of_bars[2 * ORDERS_MOST];
    char text[TACET_NUMBER_TEXT];
    size_t n = shown(f);
    for (size_t i = 0; i < 2 * n; i++) {
        weight[i] = bar_value(f, i);
        tacet_number_format_short(weight[i], 3, text);
        half[i] = canvas_text_width(text, FONT_SMALL, i < n) / 2 + 1;
        at[i] = bar_middle(c, f, i);
        free_of_bars[i] = !on_a_bar(c, f, i, at[i], half[i]);
        if (free_of_bars[i]) continue;
        at[i] = canvas_x(c, (double)(i % n)) + (i < n ? -half[i] : half[i]);
        free_of_bars[i] = !on_a_bar(c, f, i, at[i], half[i]);
    }
    canvas_thin(2 * n, at, half, weight, keep);
    for (size_t i = 0; i < 2 * n; i++) {
        if (!keep[i] || !free_of_bars[i] || weight[i] < highest(f) / 30) continue;
        canvas_style style = {.anchor = ANCHOR_CENTRE, .size = FONT_SMALL, .bold = i < n};
        style.colour = i < n ? TRACE_MAIN : INK_FAINT;
        canvas_text(c, at[i], canvas_y(c, weight[i]) - 11, style,
                    tacet_number_format_short(weight[i], 3, text));
    }
}

// Bands as strips behind the orders that lie in them; names above the plot, in rows so that they
// never meet, as many as fit.
static void bands(canvas *c, const tacet_figure_bars *f)
{
    double row_end[3] = {0, 0, 0};
    size_t n = shown(f);
    for (size_t b = 0; b < f->n_bands && b < BANDS_MOST; b++) {
        const tacet_figure_band *band = &f->band[b];
        size_t first = n, last = 0;
        for (size_t i = 0; i < n; i++) {
            double hz = f->order[i] * f->speed_rpm / 60;
            if (hz < band->low_hz || hz > band->high_hz) continue;
            if (first == n) first = i;
            last = i;
        }
        if (first == n) continue;
        double x0 = canvas_x(c, (double)first - 0.5), x1 = canvas_x(c, (double)last + 0.5);
        double width = canvas_text_width(band->name, FONT_SMALL, band->judged) + 14;
        double start = fmin(x0, c->right - fmin(width, 300));
        int row = 0;
        while (row < 3 && row_end[row] > start)
            row++;
        canvas_box(c, x0 + 1.5, c->top, x1 - 1.5, c->bottom,
                   (canvas_paint){.fill = band->judged ? FILL_BAND : FILL_OTHER, .behind = true});
        if (row == 3) continue;
        row_end[row] = start + fmin(width, 300);
        double y = c->top - 14 - 20 * row;
        canvas_line(c, x0 + 1.5, c->top - 3, x1 - 1.5, c->top - 3,
                    (canvas_stroke){INK_FAINT, 1.5, false});
        canvas_text(c, start + 2, y,
                    (canvas_style){.size = FONT_SMALL, .bold = band->judged, .most_px = 290},
                    band->name);
    }
}

static void key(canvas *c, const tacet_figure_bars *f)
{
    char text[200], number[TACET_NUMBER_TEXT];
    double x = 24, y = 96;
    snprintf(text, sizeof text, "%s, %s, amplitude of each order", f->quantity, f->unit);
    canvas_text(c, x, y, (canvas_style){.size = FONT_TEXT, .most_px = 480}, text);
    x = 24 + fmin(480, canvas_text_width(text, FONT_TEXT, false)) + 40;
    canvas_box(c, x, y - 8, x + 22, y + 8, (canvas_paint){.fill = TRACE_MAIN});
    canvas_text(c, x + 32, y, (canvas_style){.size = FONT_TEXT, .bold = true, .most_px = 240},
                f->name);
    x += 32 + fmin(240, canvas_text_width(f->name, FONT_TEXT, true)) + 36;
    canvas_box(c, x, y - 8, x + 22, y + 8,
               (canvas_paint){.fill = FILL_REFERENCE, .border = RULE_REFERENCE, .width = 1});
    canvas_text(c, x + 32, y, (canvas_style){.size = FONT_TEXT, .most_px = 220}, f->reference_name);
    if (f->n_lines <= shown(f)) return;
    snprintf(text, sizeof text, "the %zu largest of %zu lines, at %s rpm", shown(f), f->n_lines,
             tacet_number_format_short(f->speed_rpm, 5, number));
    canvas_text(c, (c->left + c->right) / 2, c->bottom + 62,
                (canvas_style){.anchor = ANCHOR_CENTRE, .size = FONT_SMALL}, text);
}

void figure_bars_script(canvas *c, const tacet_figure_bars *f)
{
    size_t n = shown(f);
    canvas_head(c, f->title, f->subtitle);
    canvas_plot(c, 96, 190, CANVAS_WIDTH - 32, CANVAS_HEIGHT - 118);
    canvas_ranges(c, -0.6, (double)n - 0.4, 0, 1.12 * highest(f));
    canvas_steps(c, 'y', 0, c->y_high, 8);
    bands(c, f);
    bars(c, "pattern", n, f->peak, -BAR, 0);
    bars(c, "reference", n, f->reference_peak, 0, BAR);
    order_marks(c, f);
    value_marks(c, f);
    key(c, f);
    canvas_use(c, "bars");
}
