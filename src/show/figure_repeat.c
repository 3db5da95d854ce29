// Cylinder pressure and torque over one repeat: two panels over the same crank angle, a row of
// marks between them for what each opportunity does.
#include "show/canvas.h"
#include "show/text.h"
#include <math.h>
#include <string.h>

#define KEY_PX       276.0
#define STRONG_MOST  3   // heavy traces of a panel, each with its own colour and dash
#define MARK_LEAST   5.0 // px between the marks of opportunities
#define SAMPLES_MOST 6000

static const char *const colours[STRONG_MOST] = {TRACE_MAIN, "#d08a2e", FILL_DARK};

typedef struct {
    const char *block, *heading;
    const tacet_figure_trace *trace;
    size_t n;
    double top, bottom, low, high;
} panel;

static void find_range(const tacet_figure_repeat *f, panel *p, bool from_zero)
{
    double low = INFINITY, high = -INFINITY;
    for (size_t t = 0; t < p->n; t++)
        for (size_t i = 0; i < f->n_samples; i++)
            if (isfinite(p->trace[t].value[i])) {
                low = fmin(low, p->trace[t].value[i]);
                high = fmax(high, p->trace[t].value[i]);
            }
    double span = high > low ? high - low : fmax(fabs(high), 1);
    p->low = from_zero && low >= 0 ? 0 : low - 0.06 * span;
    p->high = high + 0.08 * span;
}

static void variable(canvas *c, const char *name, double value)
{
    char text[TACET_NUMBER_TEXT];
    fprintf(c->to, "%s = %s\n", name, tacet_number_format(value, text));
}

// A blank line after each trace keeps gnuplot from joining them.
static void trace_rows(canvas *c, const tacet_figure_repeat *f, const tacet_figure_trace *t)
{
    size_t every = 1 + f->n_samples / SAMPLES_MOST;
    for (size_t i = 0; i < f->n_samples; i += every) {
        canvas_number(c, f->angle_deg[i]);
        canvas_number(c, t->value[i]);
        canvas_end_row(c);
    }
    canvas_end_row(c);
}

static void blocks(canvas *c, const tacet_figure_repeat *f, const panel *p)
{
    char name[64];
    snprintf(name, sizeof name, "%s_light", p->block);
    canvas_block(c, name);
    canvas_end_row(c);
    size_t n_strong = 0, strong[STRONG_MOST];
    for (size_t t = 0; t < p->n; t++) {
        if (p->trace[t].strong && n_strong < STRONG_MOST)
            strong[n_strong++] = t;
        else
            trace_rows(c, f, &p->trace[t]);
    }
    canvas_end_block(c);
    for (size_t i = 0; i < STRONG_MOST; i++) {
        snprintf(name, sizeof name, "%s_%zu", p->block, i);
        canvas_block(c, name);
        canvas_end_row(c);
        if (i < n_strong) trace_rows(c, f, &p->trace[strong[i]]);
        canvas_end_block(c);
    }
}

// Names of the traces to the right of their panel.
static void names(canvas *c, const panel *p)
{
    double x = c->right + 20, y = p->top + 10;
    size_t n_strong = 0;
    const char *light = NULL;
    bool several = false;
    for (size_t t = 0; t < p->n; t++) {
        if (!p->trace[t].strong || n_strong == STRONG_MOST) {
            several = light != NULL;
            light = p->trace[t].name;
            continue;
        }
        const char *colour = colours[n_strong];
        canvas_line(c, x, y, x + 30, y,
                    (canvas_stroke){colour, n_strong == 2 ? 2.2 : 2.6, n_strong > 0});
        canvas_text(c, x + 40, y, (canvas_style){.size = FONT_TEXT, .most_px = KEY_PX - 70},
                    p->trace[t].name);
        n_strong++;
        y += 26;
    }
    if (!light) return;
    canvas_line(c, x, y, x + 30, y, (canvas_stroke){"#b3bec9", 1.5, false});
    canvas_text(c, x + 40, y,
                (canvas_style){.size = FONT_TEXT, .colour = INK_FAINT, .most_px = KEY_PX - 70},
                several ? "the others" : light);
}

// One mark an opportunity: filled fires (a smaller disc for a part of the charge), hollow skips.
static void marks(canvas *c, const tacet_figure_repeat *f, double y)
{
    double spacing = (c->right - c->left) / (double)(f->n_events ? f->n_events : 1);
    if (f->n_events == 0 || spacing < MARK_LEAST) return;
    double radius = fmin(5, 0.36 * spacing);
    for (size_t i = 0; i < f->n_events; i++) {
        const tacet_figure_event *event = &f->event[i];
        double x = canvas_x(c, event->angle_deg);
        if (x < c->left - 0.5 || x > c->right + 0.5) continue;
        double share = sqrt(event->tenths / 10.0);
        canvas_disc(c, x, y, radius, PAPER, INK_FAINT);
        if (event->tenths) canvas_disc(c, x, y, radius * share, INK, INK);
    }
    canvas_disc(c, c->right + 26, y, 5, INK, INK);
    canvas_text(c, c->right + 38, y, (canvas_style){.size = FONT_SMALL}, "fires");
    canvas_disc(c, c->right + 96, y, 5, PAPER, INK_FAINT);
    canvas_text(c, c->right + 108, y, (canvas_style){.size = FONT_SMALL}, "skips");
}

// Multiples of 360 or 720 degrees and so on, so that revolutions show.
static double angle_step(double span_deg)
{
    static const double step[] = {30, 60, 90, 120, 180, 360, 720, 1440, 3600, 7200};
    for (size_t i = 0; i < sizeof step / sizeof *step; i++)
        if (span_deg / step[i] <= 15) return step[i];
    return canvas_step(0, span_deg, 12);
}

void figure_repeat_script(canvas *c, const tacet_figure_repeat *f)
{
    char number[TACET_NUMBER_TEXT];
    double first = f->angle_deg[0], last = f->angle_deg[f->n_samples - 1];
    panel upper = {
        "pressure", "cylinder pressure, MPa", f->pressure_MPa, f->n_pressure, 118, 338, 0, 1};
    panel lower = {"torque", "torque, N m", f->torque_Nm, f->n_torque, 418, CANVAS_HEIGHT - 100, 0,
                   1};
    find_range(f, &upper, true);
    find_range(f, &lower, false);
    canvas_head(c, f->title, f->subtitle);
    canvas_plot(c, 96, upper.top, CANVAS_WIDTH - KEY_PX, lower.bottom);
    canvas_ranges(c, first, last, 0, 1);
    fprintf(c->to, "set xtics %s\n", text_fixed(angle_step(last - first), 3, number));
    const panel *both[] = {&upper, &lower};
    for (int i = 0; i < 2; i++) {
        const char *which = i ? "lower" : "upper";
        char name[32];
        const panel *p = both[i];
        const struct {
            const char *tail;
            double value;
        } v[] = {{"top", 1 - p->top / CANVAS_HEIGHT},
                 {"bottom", 1 - p->bottom / CANVAS_HEIGHT},
                 {"low", p->low},
                 {"high", p->high},
                 {"step", canvas_step(p->low, p->high, 7)}};
        for (size_t k = 0; k < 5; k++) {
            snprintf(name, sizeof name, "%s_%s", which, v[k].tail);
            variable(c, name, v[k].value);
        }
        canvas_text(c, 24, p->top - 20, (canvas_style){.size = FONT_TEXT}, p->heading);
        names(c, p);
        blocks(c, f, p);
    }
    marks(c, f, (upper.bottom + lower.top) / 2 - 14);
    canvas_axis_names(c, "crank angle, deg", NULL);
    canvas_use(c, "repeat");
}
