// The map's colours and the key that explains them, to the right of the plot.
#include "show/figure_map.h"
#include <math.h>

#define MARGIN_LOW  (-12.0) // dB, ends of the colour scale
#define MARGIN_HIGH 12.0

typedef struct {
    double r, g, b;
} rgb;

static unsigned mix(rgb a, rgb b, double t)
{
    t = t < 0 ? 0 : t > 1 ? 1 : t;
    unsigned r = (unsigned)lround(a.r + t * (b.r - a.r));
    unsigned g = (unsigned)lround(a.g + t * (b.g - a.g));
    unsigned bl = (unsigned)lround(a.b + t * (b.b - a.b));
    return r << 16 | g << 8 | bl;
}

// In steps of 1 dB, each class with its own range of lightness.
unsigned map_colour(tacet_mark mark, double margin_db, double reserve_db)
{
    double m = isnan(margin_db) ? MARGIN_HIGH : floor(margin_db);
    switch (mark) {
    case TACET_MARK_OVER:
        return mix((rgb){0x3b, 0x0f, 0x3f}, (rgb){0xb9, 0x3a, 0x4c}, 1 - (m + 1) / MARGIN_LOW);
    case TACET_MARK_NEAR:
        return mix((rgb){0xee, 0x9b, 0x3a}, (rgb){0xf3, 0xb8, 0x5f},
                   reserve_db > 1 ? m / (reserve_db - 1) : 0);
    case TACET_MARK_CLEAR:
        return mix((rgb){0xcd, 0xe1, 0xec}, (rgb){0xf0, 0xf6, 0xfa},
                   (m - reserve_db) / (MARGIN_HIGH - reserve_db));
    default:
        return 0xe4e7eb;
    }
}

typedef struct {
    tacet_mark mark;
    double margin_db;
    const char *letter, *text;
} key_tile;

static void tile(canvas *c, double x, double y, double reserve_db, key_tile t)
{
    char colour[16];
    canvas_paint paint = {.fill = colour};
    snprintf(colour, sizeof colour, "#%06x", map_colour(t.mark, t.margin_db, reserve_db));
    if (t.mark == TACET_MARK_UNREACHABLE)
        paint = (canvas_paint){.fill = "#9aa5b1", .hatching = HATCH_RISING};
    canvas_box(c, x, y - 11, x + 26, y + 11, paint);
    canvas_style mid = {.anchor = ANCHOR_CENTRE, .size = 15};
    mid.bold = t.mark == TACET_MARK_OVER;
    mid.colour = t.mark == TACET_MARK_OVER   ? PAPER
                 : t.mark == TACET_MARK_NEAR ? "#3a2710"
                                             : INK_FAINT;
    if (t.mark == TACET_MARK_CLEAR && *t.letter)
        canvas_disc(c, x + 13, y, 2, "#6f8ea3", "#6f8ea3");
    else if (t.mark != TACET_MARK_CLEAR)
        canvas_text(c, x + 13, y, mid, t.letter);
    canvas_text(c, x + 38, y, (canvas_style){.size = FONT_TEXT, .most_px = MAP_KEY_PX - 56},
                t.text);
}

static void colour_bar(canvas *c, double x, double y, double reserve_db)
{
    double width = MAP_KEY_PX - 48, step = width / (MARGIN_HIGH - MARGIN_LOW);
    canvas_text(c, x, y, (canvas_style){.size = FONT_TEXT, .bold = true}, "Worst margin, dB");
    for (int decibel = (int)MARGIN_LOW; decibel < (int)MARGIN_HIGH; decibel++) {
        char colour[16];
        double m = decibel;
        tacet_mark mark = m < 0            ? TACET_MARK_OVER
                          : m < reserve_db ? TACET_MARK_NEAR
                                           : TACET_MARK_CLEAR;
        double at = x + 8 + (m - MARGIN_LOW) * step;
        snprintf(colour, sizeof colour, "#%06x", map_colour(mark, m, reserve_db));
        canvas_box(c, at, y + 16, at + step + 0.4, y + 32, (canvas_paint){.fill = colour});
    }
    canvas_style mid = {.anchor = ANCHOR_CENTRE, .size = FONT_SMALL};
    const double mark[] = {MARGIN_LOW, -6, 0, reserve_db, MARGIN_HIGH};
    for (size_t i = 0; i < 5; i++) {
        char number[TACET_NUMBER_TEXT];
        if (i == 3 && (reserve_db < 2 || reserve_db > 9)) continue;
        canvas_text(c, x + 8 + (mark[i] - MARGIN_LOW) * step, y + 45, mid,
                    tacet_number_format_short(mark[i], 3, number));
    }
}

static bool occurs(const tacet_figure_map *f, tacet_mark mark)
{
    for (size_t i = 0; i < f->n_rows * f->n_speeds; i++)
        if (f->cell[i].mark == mark) return true;
    return false;
}

static double key_of_marks(canvas *c, const tacet_figure_map *f, double x, double y)
{
    char near[80], number[TACET_NUMBER_TEXT];
    const double pitch = 30;
    snprintf(near, sizeof near, "near: under %s dB left",
             tacet_number_format_short(f->reserve_db, 3, number));
    tile(c, x, y, f->reserve_db, (key_tile){TACET_MARK_OVER, -3, "A", "over a limit"});
    if (f->reserve_db > 0)
        tile(c, x, y += pitch, f->reserve_db, (key_tile){TACET_MARK_NEAR, 1, "a", near});
    tile(c, x, y += pitch, f->reserve_db,
         (key_tile){TACET_MARK_CLEAR, 6, map_has_room(c, f) ? "." : "", "clear"});
    if (occurs(f, TACET_MARK_UNREACHABLE))
        tile(c, x, y += pitch, f->reserve_db,
             (key_tile){TACET_MARK_UNREACHABLE, 0, "", "torque not reachable"});
    if (occurs(f, TACET_MARK_FAILED))
        tile(c, x, y += pitch, f->reserve_db, (key_tile){TACET_MARK_FAILED, 0, "!", "not solved"});
    if (occurs(f, TACET_MARK_NO_REFERENCE))
        tile(c, x, y += pitch, f->reserve_db,
             (key_tile){TACET_MARK_NO_REFERENCE, 0, "?", "no all-fire reference"});
    y += pitch;
    canvas_box(c, x + 1, y - 10, x + 25, y + 10, (canvas_paint){.border = "#0b1f33", .width = 2.6});
    canvas_text(c, x + 38, y, (canvas_style){.size = FONT_TEXT}, "recommended there");
    if (f->n_ranges) {
        y += pitch;
        canvas_box(c, x, y - 1.5, x + 26, y + 1.5, (canvas_paint){.fill = INK});
        canvas_text(c, x + 38, y, (canvas_style){.size = FONT_TEXT}, "no-go range, exact");
    }
    return y;
}

static void key_of_letters(canvas *c, const tacet_figure_map *f, const char *letter, double x,
                           double y)
{
    double room = CANVAS_HEIGHT - 40 - (y + 26);
    size_t n = 0, shown = 0;
    for (size_t l = 0; l < f->n_limiting && l < MAP_LIMITING_MOST; l++)
        n += letter[l] != 0;
    if (n == 0) return;
    double pitch = fmax(19, fmin(26, room / (double)n));
    canvas_text(c, x, y, (canvas_style){.size = FONT_TEXT, .bold = true}, "What limits");
    y += 4;
    for (size_t l = 0; l < f->n_limiting && l < MAP_LIMITING_MOST; l++) {
        char text[2] = {letter[l], 0};
        if (!letter[l]) continue;
        if ((double)(shown + 2) * pitch > room && shown + 1 < n) {
            canvas_text(c, x + 38, y + pitch, (canvas_style){.size = FONT_TEXT},
                        "and others: see the tables");
            return;
        }
        shown++;
        y += pitch;
        canvas_text(c, x + 13, y, (canvas_style){.anchor = ANCHOR_CENTRE, .size = 15, .bold = true},
                    text);
        canvas_text(c, x + 38, y, (canvas_style){.size = FONT_TEXT, .most_px = MAP_KEY_PX - 56},
                    f->limiting[l]);
    }
}

void map_key(canvas *c, const tacet_figure_map *f, const char *letter, double x)
{
    colour_bar(c, x, 104, f->reserve_db);
    double y = key_of_marks(c, f, x, 186);
    key_of_letters(c, f, letter, x, y + 40);
}
