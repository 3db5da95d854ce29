// Two pages held against each other, column by column.
#ifndef GOLDEN_COMPARE_H
#define GOLDEN_COMPARE_H
#include "page.h"

// One line of the file of tolerances: `column exact why` or `column [absolute A] [relative R] why`.
typedef struct {
    const char *column;
    bool exact;
    double absolute, relative;
    bool used;         // by a column of some page
    double worst, off; // largest share of the allowance that was met, and that difference
    const char *worst_at;
} golden_tolerance;
typedef struct {
    golden_page page; // holds the texts
    golden_tolerance *line;
    size_t n;
} golden_tolerances;
void golden_tolerances_read(const char *path, golden_tolerances *out);

// Prints each difference: page, record, field, golden, now, what is allowed. Returns how many.
size_t golden_compare(const char *name, const golden_page *golden, const golden_page *now,
                      golden_tolerances *t, FILE *to);
#endif
