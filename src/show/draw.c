// From a figure to a file: the script is written and kept, gnuplot draws it, the drawing is checked
// before it gets its name.
#include "show/canvas.h"
#include "show/folder.h"
#include "show/gnuplot.h"
#include <math.h>
#include <string.h>

#define PROBE_MOST   4096 // bytes of a 240 x 160 picture of one letter
#define TIME_LIMIT_S 30.0 // a drawing takes 0.1 s; past this something hangs

// Ends with `tail`?
static bool ends_with(FILE *f, const char *tail, size_t length)
{
    char end[32];
    return fseek(f, -(long)length, SEEK_END) == 0 && fread(end, 1, length, f) == length &&
           memcmp(end, tail, length) == 0;
}

static tacet_status check_svg(FILE *f, tacet_error *e)
{
    if (!ends_with(f, "</svg>\n", 7) && !ends_with(f, "</svg>\n\n", 8))
        return tacet_fail(e, TACET_OUTSIDE_WORLD, "gnuplot wrote no whole SVG drawing");
    return TACET_OK;
}

// Without fonts pngcairo draws no text and says nothing: the same small picture with and without a
// letter tells.
static tacet_status probe(bool letter, char picture[PROBE_MOST], size_t *bytes, tacet_error *e)
{
    FILE *script = tmpfile(), *out = tmpfile();
    tacet_status s = TACET_OUTSIDE_WORLD;
    if (!script || !out) {
        s = tacet_fail(e, s, "cannot make a temporary file for a drawing");
    } else {
        fprintf(script,
                "set terminal pngcairo size 240,160 font 'sans-serif,16'\n"
                "unset border\nunset tics\nunset key\n%splot [0:1] [0:1] 2\n",
                letter ? "set label 'M' at screen 0.3,0.5\n" : "");
        fflush(script);
        rewind(script);
        s = gnuplot_run(&(gnuplot_job){.folder_fd = -1,
                                       .script_fd = fileno(script),
                                       .out_fd = fileno(out),
                                       .time_limit_s = TIME_LIMIT_S},
                        e);
        rewind(out);
        *bytes = s == TACET_OK ? fread(picture, 1, PROBE_MOST, out) : 0;
    }
    if (script) fclose(script);
    if (out) fclose(out);
    return s;
}

static tacet_status check_png(FILE *f, tacet_error *e)
{
    char picture[2][PROBE_MOST];
    size_t bytes[2] = {0, 0};
    if (!ends_with(f, "\0\0\0\0IEND\xae\x42\x60\x82", 12))
        return tacet_fail(e, TACET_OUTSIDE_WORLD, "gnuplot wrote no whole PNG drawing");
    for (int k = 0; k < 2; k++) {
        tacet_status s = probe(k, picture[k], &bytes[k], e);
        if (s != TACET_OK) return s;
    }
    if (bytes[0] == 0 || (bytes[0] == bytes[1] && memcmp(picture[0], picture[1], bytes[0]) == 0))
        return tacet_fail(e, TACET_OUTSIDE_WORLD,
                          "PNG drawings need a font (such as fonts-dejavu-core); SVG does not");
    return TACET_OK;
}

// Fonts of pngcairo are in points at 96 to the inch, those of svg in pixels: 0.75 makes them equal.
// Points of size 1 have a radius of 6.5 px in svg (CANVAS_POINT_PX) and, measured, 3.02 in
// pngcairo.
static const tacet_drawing_format formats[] = {
    {"svg", "svg", "sharp at every size",
     "svg size 1280,720 fixed background rgb 'white' noenhanced "
     "font 'DejaVu Sans, Verdana, sans-serif,16'",
     check_svg},
    {"png", "png", "1280 x 720 pixels, for slides",
     "pngcairo size 1280,720 background rgb 'white' noenhanced fontscale 0.75 pointscale 2.15 "
     "font 'DejaVu Sans, Verdana, sans-serif,16'",
     check_png},
    {NULL, NULL, NULL, NULL, NULL}};

const tacet_drawing_format *tacet_drawing_formats(void)
{
    return formats;
}

const tacet_drawing_format *tacet_drawing_format_find(const char *name)
{
    for (const tacet_drawing_format *f = formats; f->name; f++)
        if (strcmp(f->name, name) == 0) return f;
    return NULL;
}

tacet_draw_how tacet_draw_default(void)
{
    return (tacet_draw_how){.format = formats, .time_limit_s = TIME_LIMIT_S};
}

tacet_status tacet_figure_script(const tacet_figure *f, const tacet_drawing_format *format,
                                 FILE *to, tacet_error *e)
{
    canvas c = {.to = to};
    const char *missing = figure_missing(f);
    if (missing) return tacet_fail(e, TACET_NOT_FINITE, "nothing to draw: %s", missing);
    fprintf(to, "set terminal %s\n", format->terminal);
    canvas_use(&c, "common");
    switch (f->kind) {
    case TACET_FIGURE_MAP:
        figure_map_script(&c, f->map);
        break;
    case TACET_FIGURE_ORDERS:
        figure_orders_script(&c, f->orders);
        break;
    case TACET_FIGURE_BARS:
        figure_bars_script(&c, f->bars);
        break;
    case TACET_FIGURE_REPEAT:
        figure_repeat_script(&c, f->repeat);
        break;
    case TACET_FIGURE_MODES:
        figure_modes_script(&c, f->modes);
        break;
    case TACET_FIGURE_PATHS:
        figure_paths_script(&c, f->paths);
        break;
    }
    return TACET_OK;
}

tacet_status tacet_draw(tacet_folder *folder, const char *stem, const tacet_figure *f,
                        const tacet_draw_how *how, tacet_error *e)
{
    char script[64], drawing[64];
    FILE *to;
    snprintf(script, sizeof script, "%s.gnuplot", stem);
    snprintf(drawing, sizeof drawing, "%s.%s", stem, how->format->extension);
    tacet_status s = tacet_folder_begin(folder, script, &to, e);
    if (s != TACET_OK) return s;
    s = tacet_figure_script(f, how->format, to, e);
    if (s != TACET_OK) {
        tacet_folder_abort(folder);
        return s;
    }
    s = tacet_folder_commit(folder, e);
    if (s != TACET_OK || !(how->time_limit_s > 0)) return s;
    s = tacet_folder_begin(folder, drawing, &to, e);
    if (s != TACET_OK) return s;
    s = gnuplot_run(&(gnuplot_job){.folder_fd = folder_fd(folder),
                                   .script = script,
                                   .out_fd = fileno(to),
                                   .time_limit_s = how->time_limit_s},
                    e);
    if (s == TACET_OK) s = how->format->check(to, e);
    if (s == TACET_OK) return tacet_folder_commit(folder, e);
    int reason = stream_reason(to); // gnuplot says nothing of a full disk
    if (reason)
        (void)tacet_fail(e, s, "cannot write %s/%s: %s", tacet_folder_path(folder), drawing,
                         strerror(reason));
    tacet_folder_abort(folder);
    return s;
}
