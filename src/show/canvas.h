// A gnuplot script under way: texts, boxes and lines at places in pixels of a 1280 x 720 drawing,
// counted from its top left corner, and the helpers that decide which labels fit. Private to show.
//
// Text of a study reaches a script only through canvas_text, which quotes it; data blocks hold
// numbers and single letters of ours.
#ifndef SHOW_CANVAS_H
#define SHOW_CANVAS_H
#include "tacet/show.h"

#define CANVAS_WIDTH    1280.0
#define CANVAS_HEIGHT   720.0
#define CANVAS_POINT_PX 6.5  // radius of gnuplot's point type 7 at size 1
#define FONT_TITLE      24.0 // px
#define FONT_TEXT       16.0
#define FONT_SMALL      14.0

#define INK            "#1f2933" // texts, outlines
#define INK_FAINT      "#5f6b7a"
#define RULE           "#c9d1d9"
#define PAPER          "#ffffff"
#define FILL_DARK      "#a3324a" // what counts: dark
#define FILL_BAND      "#f3e3c3" // a band that the drawn quantity is judged in
#define FILL_OTHER     "#eceff2" // another band
#define TRACE_MAIN     "#24507a"
#define FILL_REFERENCE "#b9cfe0"
#define RULE_REFERENCE "#7f9bb3"

#define HATCH_RISING  5 // patterns of gnuplot
#define HATCH_FALLING 4
#define HATCH_CROSSED 2

typedef enum { ANCHOR_LEFT, ANCHOR_CENTRE, ANCHOR_RIGHT } canvas_anchor;
typedef struct {
    FILE *to;
    unsigned n_labels, n_objects, n_arrows;
    double left, top, right, bottom; // of the plot, px
    double x_low, x_high, y_low, y_high;
} canvas;
typedef struct {
    canvas_anchor anchor;
    double size;
    bool bold;
    const char *colour;
    double most_px; // longer texts are cut with an ellipsis; 0: as long as they are
} canvas_style;

double canvas_text_width(const char *text, double size, bool bold); // px, DejaVu Sans
// y is the middle of the line. Nothing is written for an empty text.
void canvas_text(canvas *c, double x, double y, canvas_style style, const char *text);
typedef struct {
    const char *fill;   // NULL: none
    const char *border; // NULL: none
    double width;       // of the border, px
    int hatching;       // pattern of gnuplot in the colour of the fill; 0: solid
    bool behind;        // the plot
} canvas_paint;
void canvas_box(canvas *c, double x0, double y0, double x1, double y1, canvas_paint paint);
typedef struct {
    const char *colour;
    double width; // px
    bool dashed;
} canvas_stroke;
void canvas_line(canvas *c, double x0, double y0, double x1, double y1, canvas_stroke stroke);
void canvas_disc(canvas *c, double x, double y, double radius, const char *fill,
                 const char *border);

// Title and subtitle at the top, the short caution at the foot.
void canvas_head(canvas *c, const char *title, const char *subtitle);
// Sets the plot's place and ranges; later calls may use canvas_x and canvas_y.
void canvas_plot(canvas *c, double left, double top, double right, double bottom);
void canvas_ranges(canvas *c, double x_low, double x_high, double y_low, double y_high);
double canvas_x(const canvas *c, double x); // px of a value
double canvas_y(const canvas *c, double y);
double canvas_x_of(const canvas *c, double px); // width in x of a length in px
double canvas_y_of(const canvas *c, double px);
// The step of 1, 2 or 5 times a power of ten that gives at most `most` marks; and an axis with it.
double canvas_step(double low, double high, unsigned most);
void canvas_steps(canvas *c, char axis, double low, double high, unsigned most);
void canvas_step_at(canvas *c, char axis, double value); // one mark
void canvas_axis_names(canvas *c, const char *x, const char *y);

// A data block $name. Its first row lies far outside of every plot: gnuplot complains about blocks
// without any.
void canvas_block(canvas *c, const char *name);
void canvas_number(canvas *c, double value); // a number and a blank; non-finite: NaN
void canvas_end_row(canvas *c);
void canvas_end_block(canvas *c);

// Moves the n centres in `at` (any order) as little as needed so that they are `pitch` apart and
// within [low, high]; false when they cannot all fit (nothing moved). At most CANVAS_SPREAD_MOST.
#define CANVAS_SPREAD_MOST 64
bool canvas_spread(size_t n, double *at, double pitch, double low, double high);
// Keeps labels that do not touch: places [at - half, at + half] in order of falling weight.
// keep[n] is set. Returns how many are kept.
size_t canvas_thin(size_t n, const double *at, const double *half, const double *weight,
                   bool *keep);

// What a figure lacks to be drawn; NULL: nothing.
const char *figure_missing(const tacet_figure *f);
// One figure each: data, labels, then its template.
void figure_map_script(canvas *c, const tacet_figure_map *f);
void figure_orders_script(canvas *c, const tacet_figure_orders *f);
void figure_bars_script(canvas *c, const tacet_figure_bars *f);
void figure_repeat_script(canvas *c, const tacet_figure_repeat *f);
void figure_modes_script(canvas *c, const tacet_figure_modes *f);
void figure_paths_script(canvas *c, const tacet_figure_paths *f);

// The templates in plots/, embedded at build.
typedef struct {
    const char *name, *text;
} canvas_template;
extern const canvas_template canvas_templates[]; // ends with name == NULL
void canvas_use(canvas *c, const char *template_name);

#endif
