// Studies whose gas torque is a formula: T = tau sin^2 a of every fired cycle, a from its firing
// top, by pressure traces; a skipped cycle has none. The mean over a cycle is tau / 2, the lines of
// an engine that fires always are one, order 2: -tau/2 cos 2a a cylinder. Neither friction nor a
// mass that matters.
#ifndef TEST_FORMULA_H
#define TEST_FORMULA_H
#include "near.h"
#include "tacet/choose.h"
#include "tacet/condition.h"

typedef struct {
    char folder[64];
    tacet_study *study;
    tacet_model *model;
    tacet_workspace *work;
} formula;

// Engine of n cylinders (1, or 2 on one pin) and what follows `train:` to the end of the file.
void formula_open(formula *f, int cylinders, const char *dispersion, const char *rest);
void formula_close(formula *f);
// Row of a word at a speed, by the level of detail.
tacet_row formula_row(formula *f, const char *word, double rpm, double demand_Nm,
                      tacet_level level);
#endif
