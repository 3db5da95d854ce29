// Screens made by hand: candidates x grid speeds with rows that a test fills.
#ifndef TEST_SYNTHETIC_H
#define TEST_SYNTHETIC_H
#include "choose/internal.h"

#define RPM 0.10471975511965977 // pi / 30 rad/s

// n_extra[c] extra cells follow each candidate's grid (NULL: none). Rows start solved, clear with
// 10 dB, at 1 g/s of fuel, all-fire at 1 g/s. The last candidate is all-fire, the rest 1/2, 2/3, ..
tacet_screen *synthetic_screen(size_t n_candidates, size_t n_speeds, double first_rpm,
                               double step_rpm, const size_t *n_extra);
void synthetic_destroy(tacet_screen *s);
tacet_cell *cell_at(tacet_screen *s, size_t candidate, size_t speed);
void set_margin(tacet_cell *c, double margin_db, double reserve_db, int band); // and verdict
void set_fuel(tacet_cell *c, double to_all_fire); // all-fire burns 1 g/s
void set_outcome(tacet_cell *c, tacet_outcome outcome);
#endif
