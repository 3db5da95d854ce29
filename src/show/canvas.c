#include "show/canvas.h"
#include "show/text.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>

// gnuplot takes the family of a label up to its first comma; "" is the terminal's own list.
#define BOLD_FAMILY "sans-serif Bold"
#define TEXT_MOST   512
#define OUTSIDE     "-1e9 -1e9 -1e9 -1e9 -1e9 -1e9 0"
// Advance widths of DejaVu Sans in 1/1000 of the size, ' ' to '~' (from the font's hmtx table);
// other letters count as WIDTH_OTHER, and ideographs, which come from another font, as a full em.
#define WIDTH_OTHER      690
#define WIDTH_BOLD_EXTRA 1.13 // bold letters against regular ones, widest common ratio
static const unsigned short width[95] = {
    318, 401, 460, 838, 637, 951, 780, 275, 391, 391, 500, 838, 318, 361,  318, 337, 637, 637, 637,
    637, 637, 637, 637, 637, 637, 637, 337, 337, 838, 838, 838, 531, 1000, 685, 687, 699, 771, 632,
    576, 775, 752, 295, 295, 656, 558, 863, 749, 788, 604, 788, 695, 635,  611, 732, 685, 989, 686,
    611, 686, 391, 337, 391, 838, 500, 500, 613, 635, 550, 635, 616, 353,  635, 634, 278, 278, 580,
    278, 975, 634, 612, 635, 635, 412, 521, 393, 634, 592, 818, 592, 592,  525, 637, 337, 637, 838};

static double letter_width(uint32_t code, double size, bool bold)
{
    double w = code >= 0x1100                   ? 1000
               : code >= ' ' && code - ' ' < 95 ? width[code - ' ']
                                                : WIDTH_OTHER;
    return w / 1000 * size * (bold ? WIDTH_BOLD_EXTRA : 1);
}

double canvas_text_width(const char *text, double size, bool bold)
{
    double sum = 0;
    for (uint32_t code; *text;) {
        text += text_next(text, &code);
        sum += letter_width(code, size, bold);
    }
    return sum;
}

// Copies text without control characters, cut with an ellipsis when it is wider than most_px.
static void fit(const char *text, canvas_style style, char out[TEXT_MOST])
{
    text_clean(text, TEXT_MOST - 4, out);
    bool cut = strlen(text) >= TEXT_MOST - 4;
    if (!cut &&
        (style.most_px <= 0 || canvas_text_width(out, style.size, style.bold) <= style.most_px))
        return;
    double room = (style.most_px > 0 ? style.most_px : CANVAS_WIDTH) - 0.8 * style.size;
    size_t used = 0;
    for (uint32_t code; out[used];) {
        size_t bytes = text_next(out + used, &code);
        room -= letter_width(code, style.size, style.bold);
        if (room < 0) break;
        used += bytes;
    }
    while (used > 0 && out[used - 1] == ' ')
        used--;
    memcpy(out + used, "\xe2\x80\xa6", 4); // an ellipsis
}

// A single-quoted gnuplot string: nothing in it is read but the doubled quote.
static void quoted(FILE *to, const char *text)
{
    fputc('\'', to);
    for (; *text; text++) {
        if (*text == '\'') fputc('\'', to);
        fputc(*text, to);
    }
    fputc('\'', to);
}

static void screen_place(canvas *c, double x, double y)
{
    char a[TACET_NUMBER_TEXT], b[TACET_NUMBER_TEXT];
    fprintf(c->to, "screen %s, screen %s", text_fixed(x / CANVAS_WIDTH, 6, a),
            text_fixed(1 - y / CANVAS_HEIGHT, 6, b));
}

void canvas_text(canvas *c, double x, double y, canvas_style style, const char *text)
{
    static const char *const anchor[] = {"left", "center", "right"};
    char cut[TEXT_MOST], size[TACET_NUMBER_TEXT];
    fit(text, style, cut);
    if (!*cut) return;
    fprintf(c->to, "set label %u ", ++c->n_labels);
    quoted(c->to, cut);
    fputs(" at ", c->to);
    screen_place(c, x, y);
    fprintf(c->to, " %s front noenhanced font '%s,%s' textcolor rgb '%s'\n", anchor[style.anchor],
            style.bold ? BOLD_FAMILY : "", text_fixed(style.size, 0, size),
            style.colour ? style.colour : INK);
}

void canvas_box(canvas *c, double x0, double y0, double x1, double y1, canvas_paint p)
{
    char w[TACET_NUMBER_TEXT];
    fprintf(c->to, "set object %u rectangle from ", ++c->n_objects);
    screen_place(c, x0, y1);
    fputs(" to ", c->to);
    screen_place(c, x1, y0);
    fprintf(c->to, " %s", p.behind ? "behind" : "front");
    if (p.fill && p.hatching)
        fprintf(c->to, " fillcolor rgb '%s' fillstyle pattern %d", p.fill, p.hatching);
    else if (p.fill)
        fprintf(c->to, " fillcolor rgb '%s' fillstyle solid", p.fill);
    else
        fputs(" fillstyle empty", c->to);
    if (p.border)
        fprintf(c->to, " border linecolor rgb '%s' linewidth %s\n", p.border,
                text_fixed(p.width, 1, w));
    else
        fputs(" noborder\n", c->to);
}

void canvas_line(canvas *c, double x0, double y0, double x1, double y1, canvas_stroke stroke)
{
    char w[TACET_NUMBER_TEXT];
    fprintf(c->to, "set arrow %u from ", ++c->n_arrows);
    screen_place(c, x0, y0);
    fputs(" to ", c->to);
    screen_place(c, x1, y1);
    fprintf(c->to, " nohead front linecolor rgb '%s' linewidth %s%s\n", stroke.colour,
            text_fixed(stroke.width, 1, w), stroke.dashed ? " dashtype (6, 4)" : "");
}

void canvas_disc(canvas *c, double x, double y, double radius, const char *fill, const char *border)
{
    char r[TACET_NUMBER_TEXT];
    fprintf(c->to, "set object %u circle at ", ++c->n_objects);
    screen_place(c, x, y);
    fprintf(c->to,
            " size screen %s front fillcolor rgb '%s' fillstyle solid border linecolor rgb '%s'\n",
            text_fixed(radius / CANVAS_WIDTH, 6, r), fill, border);
}

void canvas_head(canvas *c, const char *title, const char *subtitle)
{
    double room = CANVAS_WIDTH - 48;
    canvas_text(c, 24, 30, (canvas_style){.size = FONT_TITLE, .bold = true, .most_px = room},
                title);
    canvas_text(c, 24, 62, (canvas_style){.size = FONT_TEXT, .colour = INK_FAINT, .most_px = room},
                subtitle);
    canvas_text(c, 24, CANVAS_HEIGHT - 16, (canvas_style){.size = FONT_SMALL, .colour = INK_FAINT},
                "A screening result, not a release: confirm by measurement on the real engine.");
}

void canvas_plot(canvas *c, double left, double top, double right, double bottom)
{
    static const char *const name[] = {"l", "r", "t", "b"};
    const double at[] = {left / CANVAS_WIDTH, right / CANVAS_WIDTH, 1 - top / CANVAS_HEIGHT,
                         1 - bottom / CANVAS_HEIGHT};
    char text[TACET_NUMBER_TEXT];
    for (int i = 0; i < 4; i++)
        fprintf(c->to, "set %smargin at screen %s\n", name[i], text_fixed(at[i], 6, text));
    c->left = left, c->top = top, c->right = right, c->bottom = bottom;
}

void canvas_ranges(canvas *c, double x_low, double x_high, double y_low, double y_high)
{
    char low[TACET_NUMBER_TEXT], high[TACET_NUMBER_TEXT];
    fprintf(c->to, "set xrange [%s:%s]\n", tacet_number_format(x_low, low),
            tacet_number_format(x_high, high));
    fprintf(c->to, "set yrange [%s:%s]\n", tacet_number_format(y_low, low),
            tacet_number_format(y_high, high));
    c->x_low = x_low, c->x_high = x_high, c->y_low = y_low, c->y_high = y_high;
}

double canvas_x(const canvas *c, double x)
{
    return c->left + (x - c->x_low) / (c->x_high - c->x_low) * (c->right - c->left);
}

double canvas_y(const canvas *c, double y)
{
    return c->bottom - (y - c->y_low) / (c->y_high - c->y_low) * (c->bottom - c->top);
}

double canvas_x_of(const canvas *c, double px)
{
    return px * (c->x_high - c->x_low) / (c->right - c->left);
}

double canvas_y_of(const canvas *c, double px)
{
    return px * (c->y_high - c->y_low) / (c->bottom - c->top);
}

double canvas_step(double low, double high, unsigned most)
{
    static const double digit[] = {1, 2, 5, 10};
    double least = (high - low) / most, unit = pow(10, floor(log10(least)));
    size_t i = 0;
    while (i < 3 && digit[i] * unit < least * (1 - 1e-9))
        i++;
    return digit[i] * unit;
}

void canvas_steps(canvas *c, char axis, double low, double high, unsigned most)
{
    char text[TACET_NUMBER_TEXT];
    fprintf(c->to, "set %ctics %s\n", axis,
            tacet_number_format_short(canvas_step(low, high, most), 6, text));
}

void canvas_step_at(canvas *c, char axis, double value)
{
    char text[TACET_NUMBER_TEXT];
    fprintf(c->to, "set %ctics (%s)\n", axis, tacet_number_format_short(value, 6, text));
}

void canvas_axis_names(canvas *c, const char *x, const char *y)
{
    canvas_style style = {
        .anchor = ANCHOR_CENTRE, .size = FONT_TEXT, .most_px = c->right - c->left};
    if (x) canvas_text(c, (c->left + c->right) / 2, c->bottom + 54, style, x);
    style.anchor = ANCHOR_LEFT;
    if (y) canvas_text(c, 24, c->top - 18, style, y);
}

void canvas_number(canvas *c, double value)
{
    char text[TACET_NUMBER_TEXT];
    fprintf(c->to, "%s ", isfinite(value) ? tacet_number_format_short(value, 7, text) : "NaN");
}

void canvas_block(canvas *c, const char *name)
{
    fprintf(c->to, "$%s << END_OF_DATA\n" OUTSIDE "\n", name);
}

void canvas_end_row(canvas *c)
{
    fputc('\n', c->to);
}

void canvas_end_block(canvas *c)
{
    fputs("END_OF_DATA\n", c->to);
}

void canvas_use(canvas *c, const char *name)
{
    for (const canvas_template *t = canvas_templates; t->name; t++)
        if (strcmp(t->name, name) == 0) fputs(t->text, c->to);
}
