// A stand-in for the model and a screen written down by hand, so that every word and number of its
// tables is known beforehand. See standin.c for the numbers.
#ifndef SHOW_STANDIN_H
#define SHOW_STANDIN_H
#include "tacet/show.h"

struct tacet_model {
    tacet_study study;
    tacet_band band[2];
    tacet_limit limit[1];
};
const tacet_model *standin_model(void);
// Five speeds, 900 to 1000 rpm by 25; candidates 1/2 (two placements), 1, a word of a book and one
// that was refused.
tacet_screen *standin_screen(void);
void standin_release(tacet_screen *s);

#endif
