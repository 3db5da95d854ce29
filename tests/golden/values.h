// What the program gives for a study, as pages.
#ifndef GOLDEN_VALUES_H
#define GOLDEN_VALUES_H
#include "page.h"
#include "tacet/show.h"

typedef struct {
    tacet_study *study;
    tacet_model *model;
    tacet_workspace *work;
} golden_study;
golden_study golden_study_open(const char *path);
void golden_study_close(golden_study *s);

// The model's own figures, and a record of every column for each head `condition WORD RPM NM LEVEL`
// of `wanted`, in its order.
void golden_rows(const golden_study *s, const golden_page *wanted, golden_page *out);
// The whole screen: effort, runs, ranking, no-go ranges, candidates, agreement of the solvers.
void golden_screen(const golden_study *s, golden_page *out);
#endif
