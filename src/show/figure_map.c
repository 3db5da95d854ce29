// Density over speed, coloured by the worst margin. Colours run from dark (over) to pale (clear),
// so that they read in grey and for the colour-blind; the letter says the same again: capital and
// bold is over, small is near, a dot is clear.
#include "show/figure_map.h"
#include <ctype.h>
#include <math.h>
#include <string.h>

#define LETTER_PX    15.0 // least width of a cell or run of cells with a letter
#define ROW_LABEL_PX 19.0 // least distance of row labels
#define LETTERS      "ABCDEFGHIJKLMNOPQRSTUVWXYZ"

// Edge below speed i: halfway to the neighbour; the ends as wide as their neighbours.
static double edge(const tacet_figure_map *f, size_t i)
{
    const double *s = f->speed_rpm;
    size_t n = f->n_speeds;
    if (n == 1) return s[0] + (i ? 0.5 : -0.5) * (s[0] > 0 ? 0.02 * s[0] : 1);
    if (i == 0) return s[0] - (s[1] - s[0]) / 2;
    if (i == n) return s[n - 1] + (s[n - 1] - s[n - 2]) / 2;
    return (s[i - 1] + s[i]) / 2;
}

static const tacet_map_cell *cell_at(const tacet_figure_map *f, size_t row, size_t speed)
{
    return &f->cell[row * f->n_speeds + speed];
}

static void box_row(canvas *c, double x0, double x1, double y0, double y1, const unsigned *colour)
{
    canvas_number(c, (x0 + x1) / 2);
    canvas_number(c, (y0 + y1) / 2);
    canvas_number(c, x0);
    canvas_number(c, x1);
    canvas_number(c, y0);
    canvas_number(c, y1);
    if (colour) fprintf(c->to, "%u", *colour);
    canvas_end_row(c);
}

// One past the run of cells that begins at `first` and are equal as `same` says; NULL: one cell.
typedef bool same_cell(const tacet_figure_map *f, const tacet_map_cell *a, const tacet_map_cell *b);
static size_t run_end(const tacet_figure_map *f, size_t row, size_t first, same_cell *same)
{
    size_t last = first + 1;
    while (same && last < f->n_speeds && same(f, cell_at(f, row, first), cell_at(f, row, last)))
        last++;
    return last;
}

static bool same_colour(const tacet_figure_map *f, const tacet_map_cell *a, const tacet_map_cell *b)
{
    return a->mark == b->mark && map_colour(a->mark, a->margin_db, f->reserve_db) ==
                                     map_colour(b->mark, b->margin_db, f->reserve_db);
}

static bool same_mark(const tacet_figure_map *f, const tacet_map_cell *a, const tacet_map_cell *b)
{
    (void)f;
    return a->mark == b->mark;
}

static bool same_letter(const tacet_figure_map *f, const tacet_map_cell *a, const tacet_map_cell *b)
{
    (void)f;
    return a->mark == b->mark && a->limiting == b->limiting;
}

static bool same_recommended(const tacet_figure_map *f, const tacet_map_cell *a,
                             const tacet_map_cell *b)
{
    (void)f;
    return a->recommended == b->recommended;
}

static bool is_hatched(const tacet_map_cell *cell)
{
    return cell->mark == TACET_MARK_UNREACHABLE;
}

static bool is_filled(const tacet_map_cell *cell)
{
    return cell->mark != TACET_MARK_UNREACHABLE && cell->mark != TACET_MARK_BLANK;
}

static bool is_recommended(const tacet_map_cell *cell)
{
    return cell->recommended;
}

// Boxes of all runs for which `wanted` holds; inset in px from the cells' edges.
static void boxes(canvas *c, const tacet_figure_map *f, const char *block,
                  bool wanted(const tacet_map_cell *), same_cell *same, double inset_px,
                  bool coloured)
{
    double dx = canvas_x_of(c, inset_px), dy = canvas_y_of(c, inset_px);
    canvas_block(c, block);
    for (size_t row = 0; row < f->n_rows; row++)
        for (size_t i = 0, next; i < f->n_speeds; i = next) {
            const tacet_map_cell *cell = cell_at(f, row, i);
            next = run_end(f, row, i, same);
            if (!wanted(cell)) continue;
            unsigned colour = map_colour(cell->mark, cell->margin_db, f->reserve_db);
            box_row(c, edge(f, i) + dx, edge(f, next) - dx, (double)row + dy, (double)row + 1 - dy,
                    coloured ? &colour : NULL);
        }
    canvas_end_block(c);
}

static char letter_of(const tacet_map_cell *cell, const char *letter)
{
    bool known = cell->limiting >= 0 && cell->limiting < MAP_LIMITING_MOST;
    char l = MAP_LETTER_OTHERS;
    if (known) l = letter[cell->limiting];
    switch (cell->mark) {
    case TACET_MARK_OVER:
        return l;
    case TACET_MARK_NEAR:
        return (char)tolower(l);
    case TACET_MARK_FAILED:
        return '!';
    case TACET_MARK_NO_REFERENCE:
        return '?';
    default:
        return 0;
    }
}

// Do the rows that a letter in `row` covers show the same there?
static bool same_around(const tacet_figure_map *f, size_t row, size_t speed, size_t rows)
{
    size_t reach = rows / 2;
    if (row < reach || row + reach >= f->n_rows) return false;
    for (size_t r = row - reach; r <= row + reach; r++)
        if (!same_letter(f, cell_at(f, r, speed), cell_at(f, row, speed))) return false;
    return true;
}

static double px_between(const canvas *c, const tacet_figure_map *f, size_t from, size_t to)
{
    return canvas_x(c, edge(f, to)) - canvas_x(c, edge(f, from));
}

bool map_has_room(const canvas *c, const tacet_figure_map *f)
{
    for (size_t i = 0; i < f->n_speeds; i++)
        if (px_between(c, f, i, i + 1) < LETTER_PX) return false;
    return c->bottom - c->top >= LETTER_PX * (double)f->n_rows;
}

// Letters of the cells with these marks: in every cell that is large enough, otherwise one in the
// middle of each run, and only where the rows that it covers agree.
static void letters(canvas *c, const tacet_figure_map *f, const char *block, const char *letter,
                    tacet_mark from, tacet_mark to)
{
    size_t rows = (size_t)ceil(LETTER_PX * (double)f->n_rows / (c->bottom - c->top));
    rows += rows % 2 == 0; // covered by a letter, an odd number
    canvas_block(c, block);
    for (size_t row = rows / 2; row < f->n_rows; row += rows)
        for (size_t i = 0, next; i < f->n_speeds; i = next) {
            const tacet_map_cell *cell = cell_at(f, row, i);
            next =
                px_between(c, f, i, i + 1) >= LETTER_PX ? i + 1 : run_end(f, row, i, same_letter);
            if (cell->mark < from || cell->mark > to || px_between(c, f, i, next) < LETTER_PX ||
                !same_around(f, row, (i + next - 1) / 2, rows))
                continue;
            canvas_number(c, (edge(f, i) + edge(f, next)) / 2);
            canvas_number(c, (double)row + 0.5);
            fputc(letter_of(cell, letter), c->to);
            canvas_end_row(c);
        }
    canvas_end_block(c);
}

static void dots(canvas *c, const tacet_figure_map *f)
{
    canvas_block(c, "clear");
    size_t n = map_has_room(c, f) ? f->n_rows * f->n_speeds : 0;
    for (size_t i = 0; i < n; i++) {
        size_t row = i / f->n_speeds, speed = i % f->n_speeds;
        if (f->cell[i].mark != TACET_MARK_CLEAR) continue;
        canvas_number(c, (edge(f, speed) + edge(f, speed + 1)) / 2);
        canvas_number(c, (double)row + 0.5);
        canvas_end_row(c);
    }
    canvas_end_block(c);
}

static void no_go(canvas *c, const tacet_figure_map *f)
{
    double low = edge(f, 0), high = edge(f, f->n_speeds);
    double thick = fmin(canvas_y_of(c, 3), 1.0 / 6);
    canvas_block(c, "ranges");
    for (size_t i = 0; i < f->n_ranges; i++) {
        const tacet_map_range *r = &f->range[i];
        double x0 = fmax(r->low_rpm, low), x1 = fmin(r->high_rpm, high);
        if (r->row < f->n_rows && x1 > x0)
            box_row(c, x0, x1, (double)r->row, (double)r->row + thick, NULL);
    }
    canvas_end_block(c);
}

static bool any_recommended(const tacet_figure_map *f, size_t row)
{
    for (size_t i = 0; i < f->n_speeds; i++)
        if (cell_at(f, row, i)->recommended) return true;
    return false;
}

// Names of rows; where not all fit, those with a recommendation come first, then every k-th.
static void row_labels(canvas *c, const tacet_figure_map *f)
{
    double at[TACET_FIGURE_ROWS_MOST], half[TACET_FIGURE_ROWS_MOST], weight[TACET_FIGURE_ROWS_MOST];
    bool keep[TACET_FIGURE_ROWS_MOST];
    size_t every = (size_t)ceil(ROW_LABEL_PX * (double)f->n_rows / (c->bottom - c->top));
    for (size_t row = 0; row < f->n_rows; row++) {
        at[row] = canvas_y(c, (double)row + 0.5);
        half[row] = ROW_LABEL_PX / 2;
        weight[row] = (any_recommended(f, row) ? 2 : 0) + (row % every == 0 ? 1 : 0);
    }
    canvas_thin(f->n_rows, at, half, weight, keep);
    for (size_t row = 0; row < f->n_rows; row++) {
        canvas_style style = {.anchor = ANCHOR_RIGHT,
                              .size = FONT_TEXT,
                              .bold = any_recommended(f, row),
                              .most_px = c->left - 34};
        if (keep[row]) canvas_text(c, c->left - 10, at[row], style, f->row[row]);
    }
}

// Letters for what limits anywhere, in the order of bands, then limits; their list in the key.
static void assign_letters(const tacet_figure_map *f, char *letter)
{
    size_t used = 0;
    for (size_t l = 0; l < f->n_limiting && l < MAP_LIMITING_MOST; l++) {
        bool limits = false;
        for (size_t i = 0; i < f->n_rows * f->n_speeds && !limits; i++)
            limits = f->cell[i].limiting == (int)l &&
                     (f->cell[i].mark == TACET_MARK_OVER || f->cell[i].mark == TACET_MARK_NEAR);
        letter[l] = MAP_LETTER_OTHERS;
        if (!limits)
            letter[l] = 0;
        else if (used < sizeof LETTERS - 1)
            letter[l] = LETTERS[used++];
    }
}

static double left_margin(const tacet_figure_map *f)
{
    double widest = 40;
    for (size_t row = 0; row < f->n_rows; row++)
        widest = fmax(widest, canvas_text_width(f->row[row], FONT_TEXT, true));
    return 34 + fmin(widest, 200);
}

void figure_map_script(canvas *c, const tacet_figure_map *f)
{
    char letter[MAP_LIMITING_MOST] = {0};
    double left = left_margin(f), right = CANVAS_WIDTH - MAP_KEY_PX - 16;
    double cell_px = (right - left) / (double)f->n_speeds;
    assign_letters(f, letter);
    canvas_head(c, f->title, f->subtitle);
    canvas_plot(c, left, 116, right, CANVAS_HEIGHT - 100);
    canvas_ranges(c, edge(f, 0), edge(f, f->n_speeds), 0, (double)f->n_rows);
    if (f->n_speeds > 1)
        canvas_steps(c, 'x', c->x_low, c->x_high, 11);
    else
        canvas_step_at(c, 'x', f->speed_rpm[0]);
    canvas_axis_names(c, "engine speed, rpm", "density");
    double gap = cell_px >= 10 ? 0.7 : cell_px >= 5 ? 0.35 : -0.2;
    boxes(c, f, "cells", is_filled, cell_px >= 5 ? NULL : same_colour, gap, true);
    boxes(c, f, "hatched", is_hatched, same_mark, gap, false);
    boxes(c, f, "outline", is_recommended, same_recommended, 1.2, false);
    letters(c, f, "over", letter, TACET_MARK_OVER, TACET_MARK_OVER);
    letters(c, f, "near", letter, TACET_MARK_NEAR, TACET_MARK_NEAR);
    letters(c, f, "other", letter, TACET_MARK_FAILED, TACET_MARK_NO_REFERENCE);
    dots(c, f);
    no_go(c, f);
    row_labels(c, f);
    map_key(c, f, letter, right + 30);
    canvas_use(c, "map");
}
