// Invented figures of realistic size for the tests of drawings. Everything is static or lives until
// the next call of the same function.
#ifndef SHOW_SAMPLES_H
#define SHOW_SAMPLES_H
#include "tacet/show.h"

// Quotes, backquotes, markup, letters beyond ASCII, a line break, gnuplot's own marks.
#define SAMPLE_TITLE                                                                               \
    "Sechszylinder \"K\xc3\xb6nig\" <script>alert('x')</script> `touch hit1` $(touch hit2) "       \
    "@foo %d {x}_y^2\nsystem('touch hit3')"

const tacet_figure_map *sample_map(size_t n_speeds, size_t n_rows);
const tacet_figure_orders *sample_orders(void);
const tacet_figure_bars *sample_bars(void);
const tacet_figure_repeat *sample_repeat(void);
const tacet_figure_modes *sample_modes(void);
const tacet_figure_paths *sample_paths(size_t n_points, size_t n_paths); // up to 6 and 8

#endif
