// Modes of the body: stacked bars of kinetic energy side by side, and below them the frequency axis
// with bands as strips; a line leads from each bar to its frequency, however close they lie.
#include "show/canvas.h"
#include "show/text.h"
#include <math.h>

#define KEY_PX      276.0
#define HALF_BAR    0.36 // of a mode's place
#define LABEL_LEAST 19.0 // px of a share that can be named inside its bar
#define AXIS_TOP    530.0
#define AXIS_Y      596.0
#define BANDS_NAMED 8
#define EDGE_STRIP  "#c39a45"

typedef struct {
    const char *block, *name, *fill;
    int hatching;
} direction;
static const direction directions[6] = {{"x", "x, along the crank", "#dbe7f1", 0},
                                        {"y", "y, across", "#8fb3d1", 0},
                                        {"z", "z, up", TRACE_MAIN, 0},
                                        {"roll", "roll, about x", FILL_DARK, HATCH_RISING},
                                        {"pitch", "pitch, about y", "#8a5a12", HATCH_FALLING},
                                        {"yaw", "yaw, about z", "#3f4a56", HATCH_CROSSED}};

// Where a share begins on the stack, %; negative ones hang below zero.
static double stack_at(const tacet_figure_modes *f, size_t mode, size_t member)
{
    double at = 0;
    for (size_t k = 0; k < member; k++)
        if ((f->modes->share[mode][k] < 0) == (f->modes->share[mode][member] < 0))
            at += 100 * f->modes->share[mode][k];
    return at;
}

static double lowest(const tacet_figure_modes *f)
{
    double low = 0;
    for (size_t i = 0; i < 6; i++)
        for (size_t k = 0; k < 6; k++)
            low = fmin(low, stack_at(f, i, k) + 100 * f->modes->share[i][k]);
    return low;
}

static double highest(const tacet_figure_modes *f)
{
    double high = 100;
    for (size_t i = 0; i < 6; i++)
        for (size_t k = 0; k < 6; k++)
            high = fmax(high, stack_at(f, i, k) + 100 * f->modes->share[i][k]);
    return high;
}

static void bars(canvas *c, const tacet_figure_modes *f)
{
    for (size_t k = 0; k < 6; k++) {
        canvas_block(c, directions[k].block);
        for (size_t i = 0; i < 6; i++) {
            double share = 100 * f->modes->share[i][k], from = stack_at(f, i, k);
            double x = (double)i;
            if (!(fabs(share) > 0.05)) continue;
            const double row[] = {x,
                                  from + share / 2,
                                  x - HALF_BAR,
                                  x + HALF_BAR,
                                  fmin(from, from + share),
                                  fmax(from, from + share)};
            for (size_t j = 0; j < 6; j++)
                canvas_number(c, row[j]);
            canvas_end_row(c);
        }
        canvas_end_block(c);
    }
}

// Name and share inside each part that is high enough, on a plate so that hatching does not
// disturb.
static void share_marks(canvas *c, const tacet_figure_modes *f)
{
    char number[TACET_NUMBER_TEXT], text[64];
    for (size_t i = 0; i < 6; i++)
        for (size_t k = 0; k < 6; k++) {
            double share = 100 * f->modes->share[i][k];
            double y = canvas_y(c, stack_at(f, i, k) + share / 2), x = canvas_x(c, (double)i);
            if (fabs(share) * (c->bottom - c->top) / (c->y_high - c->y_low) < LABEL_LEAST) continue;
            snprintf(text, sizeof text, "%s %s %%", directions[k].block,
                     text_fixed(share, 1, number));
            double half = canvas_text_width(text, FONT_SMALL, false) / 2 + 4;
            canvas_box(c, x - half, y - 8.5, x + half, y + 8.5, (canvas_paint){.fill = PAPER});
            canvas_text(c, x, y, (canvas_style){.anchor = ANCHOR_CENTRE, .size = FONT_SMALL}, text);
        }
}

// Frequency and loss factor under each bar.
static void mode_marks(canvas *c, const tacet_figure_modes *f)
{
    char number[TACET_NUMBER_TEXT], text[64];
    canvas_style bold = {.anchor = ANCHOR_CENTRE, .size = FONT_TEXT, .bold = true};
    canvas_style faint = {.anchor = ANCHOR_CENTRE, .size = FONT_SMALL, .colour = INK_FAINT};
    for (size_t i = 0; i < 6; i++) {
        double x = canvas_x(c, (double)i);
        snprintf(text, sizeof text, "%s Hz", text_fixed(f->modes->hz[i], 2, number));
        canvas_text(c, x, c->bottom + 16, bold, text);
        if (!isfinite(f->modes->loss[i])) continue;
        snprintf(text, sizeof text, "loss factor %s",
                 tacet_number_format_short(f->modes->loss[i], 2, number));
        canvas_text(c, x, c->bottom + 36, faint, text);
    }
}

// Up to past the last mode and the bands' ends.
static double axis_hz(const tacet_figure_modes *f)
{
    double most = 1.15 * f->modes->hz[5];
    for (size_t b = 0; b < f->n_bands; b++)
        most = fmax(most, 1.05 * f->band[b].high_hz);
    return most;
}

static double axis_x(const canvas *c, double hz, double most_hz)
{
    return c->left + hz / most_hz * (c->right - c->left);
}

static void strips(canvas *c, const tacet_figure_modes *f, double most_hz)
{
    for (int outline = 0; outline < 2; outline++)
        for (size_t b = 0; b < f->n_bands; b++)
            canvas_box(c, axis_x(c, fmax(f->band[b].low_hz, 0), most_hz), AXIS_TOP,
                       axis_x(c, f->band[b].high_hz, most_hz), AXIS_Y,
                       (canvas_paint){.fill = outline ? NULL : FILL_BAND,
                                      .border = outline ? EDGE_STRIP : NULL,
                                      .width = 1.2,
                                      .behind = true});
}

static void frequency_axis(canvas *c, const tacet_figure_modes *f, double most_hz)
{
    char number[TACET_NUMBER_TEXT];
    canvas_stroke rule = {INK_FAINT, 1, false}, lead = {INK, 1.2, false};
    double step = canvas_step(0, most_hz, 14);
    canvas_line(c, c->left, AXIS_Y, c->right, AXIS_Y, rule);
    for (size_t i = 0; step * (double)i <= most_hz * (1 + 1e-9); i++) {
        double hz = step * (double)i, x = axis_x(c, hz, most_hz);
        canvas_line(c, x, AXIS_Y, x, AXIS_Y + 5, rule);
        canvas_text(c, x, AXIS_Y + 16, (canvas_style){.anchor = ANCHOR_CENTRE, .size = FONT_SMALL},
                    tacet_number_format_short(hz, 4, number));
    }
    canvas_text(c, (c->left + c->right) / 2, AXIS_Y + 42,
                (canvas_style){.anchor = ANCHOR_CENTRE, .size = FONT_TEXT}, "frequency, Hz");
    for (size_t i = 0; i < 6; i++) {
        double bar = canvas_x(c, (double)i), at = axis_x(c, f->modes->hz[i], most_hz);
        canvas_line(c, bar, c->bottom + 50, at, AXIS_TOP - 6, lead);
        canvas_line(c, at, AXIS_TOP - 6, at, AXIS_Y, lead);
        canvas_disc(c, at, AXIS_Y, 3.5, INK, INK);
    }
}

static void key(canvas *c, const tacet_figure_modes *f)
{
    char text[200], low[TACET_NUMBER_TEXT], high[TACET_NUMBER_TEXT];
    double x = c->right + 30, y = c->top + 10;
    for (size_t k = 6; k-- > 0;) {
        const direction *d = &directions[k];
        canvas_box(c, x, y - 9, x + 30, y + 9,
                   (canvas_paint){.fill = d->fill,
                                  .hatching = d->hatching,
                                  .border = d->hatching ? d->fill : TRACE_MAIN,
                                  .width = 1});
        canvas_text(c, x + 40, y, (canvas_style){.size = FONT_TEXT}, d->name);
        y += 28;
    }
    y = fmin(AXIS_TOP - 24, 660 - 40 * fmin((double)f->n_bands, BANDS_NAMED));
    for (size_t b = 0; b < f->n_bands && b < BANDS_NAMED; b++) {
        const tacet_figure_band *band = &f->band[b];
        canvas_box(c, x, y - 8, x + 24, y + 8,
                   (canvas_paint){.fill = FILL_BAND, .border = EDGE_STRIP, .width = 1.2});
        canvas_text(c, x + 34, y, (canvas_style){.size = FONT_SMALL, .most_px = KEY_PX - 70},
                    band->name);
        snprintf(text, sizeof text, "counted %s to %s Hz",
                 tacet_number_format_short(band->low_hz, 4, low),
                 tacet_number_format_short(band->high_hz, 4, high));
        canvas_text(c, x + 34, y + 19, (canvas_style){.size = FONT_SMALL, .colour = INK_FAINT},
                    text);
        y += 40;
    }
}

void figure_modes_script(canvas *c, const tacet_figure_modes *f)
{
    double low = lowest(f), high = highest(f), most_hz = axis_hz(f);
    canvas_head(c, f->title, f->subtitle);
    canvas_plot(c, 96, 128, CANVAS_WIDTH - KEY_PX, 424);
    canvas_ranges(c, -0.5, 5.5, low < -0.05 ? 1.1 * low : 0, 1.02 * high);
    canvas_steps(c, 'y', 0, 100, 5);
    canvas_axis_names(c, NULL, "share of kinetic energy");
    strips(c, f, most_hz);
    bars(c, f);
    share_marks(c, f);
    mode_marks(c, f);
    frequency_axis(c, f, most_hz);
    key(c, f);
    canvas_use(c, "modes");
}
