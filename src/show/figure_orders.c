// Order lines over speed: a ray for each order, circles whose area is the level, bands as strips
// and modes as dashed lines, named to the right of the plot.
#include "show/canvas.h"
#include <math.h>
#include <string.h>

#define KEY_PX         292.0
#define LABEL_PX       52.0 // inside the plot, right of the last speed, for the names of orders
#define ORDER_NAME_PX  20.0 // .. and where their height is taken from the ray
#define RADIUS_PX      13.0 // of the largest circle
#define RADIUS_LEAST   1.2  // a level 40 dB under the largest is 1.3 px
#define NAMES_MOST     24
#define ORDERS_LABELED 64
#define COLOUR_INSIDE  0xa3324a
#define COLOUR_OUTSIDE 0x5b8fb9
#define EDGE_BAND      "#c39a45"
#define EDGE_OTHER     "#8a97a5"
#define KEY_ROW_PX     26.0

static double level_at(const tacet_figure_orders *f, size_t order, size_t speed)
{
    return f->level_rms[order * f->n_speeds + speed];
}

static double hz_at(const tacet_figure_orders *f, size_t order, double rpm)
{
    return f->order[order] * rpm / 60;
}

// Past the highest band; without bands past the highest order at the highest speed.
static double highest_hz(const tacet_figure_orders *f)
{
    double high = 0, most = 0;
    if (f->highest_hz > 0) return f->highest_hz;
    for (size_t b = 0; b < f->n_bands; b++)
        high = fmax(high, 1.12 * f->band[b].high_hz);
    for (size_t o = 0; o < f->n_orders; o++)
        most = fmax(most, hz_at(f, o, f->speed_rpm[f->n_speeds - 1]));
    return high > 0 ? high : fmax(most, 1);
}

static double highest_level(const tacet_figure_orders *f, double most_hz)
{
    double most = 0;
    for (size_t o = 0; o < f->n_orders; o++)
        for (size_t i = 0; i < f->n_speeds; i++)
            if (hz_at(f, o, f->speed_rpm[i]) <= most_hz && level_at(f, o, i) > most)
                most = level_at(f, o, i);
    return most;
}

static double order_weight(const tacet_figure_orders *f, size_t order)
{
    double most = 0;
    for (size_t i = 0; i < f->n_speeds; i++)
        if (level_at(f, order, i) > most) most = level_at(f, order, i);
    return most;
}

// Fills of bands, those judged on top; then the outlines of all, so that what overlaps shows.
static void strips(canvas *c, const tacet_figure_orders *f)
{
    static const canvas_paint paint[] = {
        {.fill = FILL_OTHER, .behind = true},
        {.fill = FILL_BAND, .behind = true},
        {.border = EDGE_OTHER, .width = 1.2, .behind = true},
        {.border = EDGE_BAND, .width = 1.2, .behind = true},
    };
    for (int pass = 0; pass < 4; pass++)
        for (size_t b = 0; b < f->n_bands; b++) {
            const tacet_figure_band *band = &f->band[b];
            if (band->judged != (pass % 2 == 1) || band->low_hz >= c->y_high) continue;
            double y0 = canvas_y(c, fmin(band->high_hz, c->y_high));
            double y1 = canvas_y(c, fmax(band->low_hz, 0));
            canvas_box(c, c->left, y0, c->right, y1, paint[pass]);
        }
}

static void rays(canvas *c, const tacet_figure_orders *f, const bool *named)
{
    canvas_block(c, "rays");
    for (size_t o = 0; o < f->n_orders; o++) {
        double end = c->x_high - (named[o] ? canvas_x_of(c, LABEL_PX - 4) : 0);
        double x1 = fmin(end, 60 * c->y_high / f->order[o]);
        if (x1 <= c->x_low) continue;
        canvas_number(c, c->x_low);
        canvas_number(c, hz_at(f, o, c->x_low));
        canvas_number(c, x1 - c->x_low);
        canvas_number(c, hz_at(f, o, x1) - hz_at(f, o, c->x_low));
        canvas_end_row(c);
    }
    canvas_end_block(c);
}

// A mode's line ends before the names of orders where it would cross one.
static void mode_lines(canvas *c, const tacet_figure_orders *f, const bool *named)
{
    double near_name = canvas_y_of(c, 9), end = c->x_high - canvas_x_of(c, LABEL_PX);
    double name_at = c->x_high - canvas_x_of(c, ORDER_NAME_PX);
    canvas_block(c, "modes");
    for (size_t i = 0; i < f->n_modes; i++) {
        double hz = f->mode[i].hz;
        bool crosses = false;
        if (!(hz > 0 && hz < c->y_high)) continue;
        for (size_t o = 0; o < f->n_orders; o++)
            crosses |= named[o] && fabs(hz_at(f, o, name_at) - hz) < near_name;
        canvas_number(c, c->x_low);
        canvas_number(c, hz);
        canvas_number(c, (crosses ? end : c->x_high) - c->x_low);
        canvas_number(c, 0);
        canvas_end_row(c);
    }
    canvas_end_block(c);
}

static bool inside_judged(const tacet_figure_orders *f, double hz)
{
    for (size_t b = 0; b < f->n_bands; b++)
        if (f->band[b].judged && hz >= f->band[b].low_hz && hz <= f->band[b].high_hz) return true;
    return false;
}

static void circle(canvas *c, double x, double y, double radius_px, unsigned colour)
{
    canvas_number(c, x);
    canvas_number(c, y);
    canvas_number(c, radius_px / CANVAS_POINT_PX);
    fprintf(c->to, "%u", colour);
    canvas_end_row(c);
}

// Circles that count lie above the others; each has a white rim, so that neighbours part.
static void circles(canvas *c, const tacet_figure_orders *f, double most)
{
    canvas_block(c, "circles");
    for (int counts = 0; counts < 2; counts++)
        for (size_t o = 0; o < f->n_orders; o++)
            for (size_t i = 0; i < f->n_speeds; i++) {
                double hz = hz_at(f, o, f->speed_rpm[i]), level = level_at(f, o, i);
                double radius = level > 0 && most > 0 ? RADIUS_PX * sqrt(level / most) : 0;
                if (hz > c->y_high || radius < RADIUS_LEAST ||
                    inside_judged(f, hz) != (counts == 1))
                    continue;
                circle(c, f->speed_rpm[i], hz, radius + 1, 0xffffff);
                circle(c, f->speed_rpm[i], hz, radius, counts ? COLOUR_INSIDE : COLOUR_OUTSIDE);
            }
    canvas_end_block(c);
}

// Names of orders, at the right end inside the plot or above it where the ray leaves at the top.
// Sets named[] for those with a name at the right end.
static void order_names(canvas *c, const tacet_figure_orders *f, bool *named)
{
    double at[2][ORDERS_LABELED], half[2][ORDERS_LABELED], weight[2][ORDERS_LABELED];
    size_t which[2][ORDERS_LABELED], n[2] = {0, 0};
    char text[TACET_NUMBER_TEXT];
    for (size_t o = 0; o < f->n_orders; o++) {
        named[o] = false;
        double end_hz = hz_at(f, o, c->x_high);
        bool top = end_hz > c->y_high;
        double x = canvas_x(c, 60 * c->y_high / f->order[o]);
        if (n[top] == ORDERS_LABELED || (top && x < c->left + 60)) continue;
        tacet_number_format_short(f->order[o], 3, text);
        which[top][n[top]] = o;
        at[top][n[top]] =
            top ? x : canvas_y(c, hz_at(f, o, c->x_high - canvas_x_of(c, ORDER_NAME_PX)));
        half[top][n[top]] = top ? canvas_text_width(text, FONT_SMALL, false) / 2 + 5 : 8.5;
        weight[top][n[top]++] = order_weight(f, o);
    }
    for (int top = 0; top < 2; top++) {
        bool keep[ORDERS_LABELED];
        canvas_thin(n[top], at[top], half[top], weight[top], keep);
        for (size_t i = 0; i < n[top]; i++) {
            if (!keep[i]) continue;
            tacet_number_format_short(f->order[which[top][i]], 3, text);
            canvas_style style = {.anchor = top ? ANCHOR_CENTRE : ANCHOR_LEFT, .size = FONT_SMALL};
            if (top)
                canvas_text(c, at[1][i], c->top - 11, style, text);
            else
                canvas_text(c, c->right - LABEL_PX + 2, at[0][i], style, text);
            named[which[top][i]] = !top;
        }
    }
}

// Names of bands and modes in one column, moved apart where they would touch.
static void names(canvas *c, const tacet_figure_orders *f, double high_px)
{
    double at[NAMES_MOST] = {0}, wish[NAMES_MOST] = {0};
    const char *name[NAMES_MOST] = {NULL};
    char store[NAMES_MOST][96];
    bool is_mode[NAMES_MOST] = {false};
    size_t n = 0;
    for (size_t b = 0; b < f->n_bands && n < NAMES_MOST; b++) {
        if (f->band[b].low_hz >= c->y_high) continue;
        double middle = (fmax(f->band[b].low_hz, 0) + fmin(f->band[b].high_hz, c->y_high)) / 2;
        name[n] = f->band[b].name;
        is_mode[n] = false;
        wish[n++] = canvas_y(c, middle);
    }
    for (size_t i = 0; i < f->n_modes && n < NAMES_MOST; i++) {
        char hz[TACET_NUMBER_TEXT];
        if (!(f->mode[i].hz > 0 && f->mode[i].hz < c->y_high)) continue;
        snprintf(store[n], sizeof store[n], "%s Hz mode, %.64s",
                 tacet_number_format_short(f->mode[i].hz, 3, hz), f->mode[i].name);
        name[n] = store[n];
        is_mode[n] = true;
        wish[n++] = canvas_y(c, f->mode[i].hz);
    }
    do
        memcpy(at, wish, n * sizeof *at);
    while (!canvas_spread(n, at, 22, high_px, c->bottom) && n--); // the last modes drop out first
    for (size_t i = 0; i < n; i++) {
        canvas_line(c, c->right + 3, wish[i], c->right + 24, at[i],
                    (canvas_stroke){is_mode[i] ? INK : INK_FAINT, 1, is_mode[i]});
        canvas_text(
            c, c->right + 30, at[i],
            (canvas_style){.size = is_mode[i] ? FONT_SMALL : FONT_TEXT, .most_px = KEY_PX - 46},
            name[i]);
    }
}

// The largest of 1, 2, 5 times a power of ten not above value.
static double round_below(double value)
{
    double unit = pow(10, floor(log10(value)));
    return value >= 5 * unit ? 5 * unit : value >= 2 * unit ? 2 * unit : unit;
}

static bool has_bands(const tacet_figure_orders *f, bool judged)
{
    for (size_t b = 0; b < f->n_bands; b++)
        if (f->band[b].judged == judged) return true;
    return false;
}

static void key_strip(canvas *c, double x, double y, const char *fill, const char *border)
{
    canvas_box(c, x, y - 8, x + 24, y + 8,
               (canvas_paint){.fill = fill, .border = border, .width = 1.2});
}

// Returns where it ends.
static double key(canvas *c, const tacet_figure_orders *f, double most, double y)
{
    char text[160];
    double x = c->right + 30;
    canvas_style style = {.size = FONT_SMALL, .most_px = KEY_PX - 46};
    canvas_text(c, x, y, (canvas_style){.size = FONT_SMALL, .bold = true, .most_px = KEY_PX - 46},
                f->quantity);
    snprintf(text, sizeof text, "%s rms, shown by area", f->unit);
    canvas_text(c, x, y + 22, style, text);
    double value = most > 0 ? round_below(most) : 0, at = x;
    for (int i = 0; i < 3 && value > 0; i++) {
        char number[TACET_NUMBER_TEXT];
        double radius = RADIUS_PX * sqrt(value / most);
        tacet_number_format_short(value, 3, number);
        canvas_disc(c, at + radius, y + 50, radius, "#5b8fb9", PAPER);
        canvas_text(c, at + 2 * radius + 5, y + 50, style, number);
        at += 2 * radius + canvas_text_width(number, FONT_SMALL, false) + 22;
        value /= 4;
    }
    y += 78;
    if (has_bands(f, true)) {
        key_strip(c, x, y, FILL_BAND, EDGE_BAND);
        canvas_text(c, x + 34, y, style, "band judged on it");
        canvas_disc(c, x + 12, y += KEY_ROW_PX, 7, FILL_DARK, PAPER);
        canvas_text(c, x + 34, y, style, "inside such a band");
        y += KEY_ROW_PX;
    }
    if (!has_bands(f, false)) return y;
    key_strip(c, x, y, FILL_OTHER, EDGE_OTHER);
    canvas_text(c, x + 34, y, style, "other band");
    return y + KEY_ROW_PX;
}

void figure_orders_script(canvas *c, const tacet_figure_orders *f)
{
    bool named[TACET_FIGURE_ORDERS_MOST];
    double first = f->speed_rpm[0], last = f->speed_rpm[f->n_speeds - 1];
    double most_hz = highest_hz(f), most = highest_level(f, most_hz);
    double left = 78, right = CANVAS_WIDTH - KEY_PX, plot_px = right - left;
    double span = last > first ? last - first : fmax(0.02 * last, 1);
    double before = span * 18 / (plot_px - 18 - LABEL_PX - 16);
    double behind = span * (LABEL_PX + 16) / (plot_px - 18 - LABEL_PX - 16);
    canvas_head(c, f->title, f->subtitle);
    canvas_plot(c, left, 128, right, CANVAS_HEIGHT - 100);
    canvas_ranges(c, first - before, last + behind, 0, most_hz);
    canvas_steps(c, 'x', c->x_low, c->x_high, 11);
    canvas_steps(c, 'y', 0, most_hz, 9);
    canvas_axis_names(c, "engine speed, rpm", NULL);
    canvas_text(c, 24, c->top - 34, (canvas_style){.size = FONT_TEXT}, "frequency, Hz");
    canvas_text(c, c->right, c->top - 34,
                (canvas_style){.anchor = ANCHOR_RIGHT, .size = FONT_SMALL},
                "numbers at the rays: order");
    strips(c, f);
    order_names(c, f, named);
    rays(c, f, named);
    mode_lines(c, f, named);
    circles(c, f, most);
    names(c, f, key(c, f, most, c->top - 34) + 8);
    canvas_use(c, "orders");
}
