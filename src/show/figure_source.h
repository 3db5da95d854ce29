// What the figures of one pattern share. Private to show.
#ifndef SHOW_FIGURE_SOURCE_H
#define SHOW_FIGURE_SOURCE_H
#include "show/screen.h"

tacet_status figure_no_memory(tacet_error *e);
// "3/7 ..x.x.x"; the word alone when the name says no more. NULL: no memory.
const char *figure_pattern_text(const tacet_figure_source *s);
// ".. at 1400 rpm and 300 N m brake torque"
const char *figure_at_text(const tacet_figure_source *s, const char *of, double speed_rad_per_s,
                           double demand_Nm);
// Bands of the model, marked where they judge the drawn quantity. NULL: no memory.
tacet_figure_band *figure_bands(const tacet_figure_source *s, size_t *n);
// Solves; a condition without a response is TACET_BAD_INPUT.
TACET_USE tacet_status figure_solve(const tacet_figure_source *s, const tacet_roll *roll,
                                    double speed_rad_per_s, double demand_Nm, tacet_row *row,
                                    tacet_error *e);
// As tacet_orders_of_pattern, drawn up to a frequency (INFINITY: all of it), or as far as the
// largest line needs where `largest` is set.
TACET_USE tacet_status figure_orders_below(const tacet_figure_source *s, double hz, bool largest,
                                           tacet_figure_orders *out, tacet_error *e);
// Lines under this share of the largest (-50 dB) are not drawn: they are the rounding and the
// half orders of nearly equal cylinders, too small to see.
#define FIGURE_LEAST_SHARE 3e-3
// Sets picked[i] for the `most` largest weights that are worth drawing; gives how many there are.
size_t figure_pick_largest(size_t n, const double *weight, size_t most, bool *picked);

#endif
