// Properties over seeds: every seed is one trial; what does not hold is printed with its seed and
// the trial's own text, so that anyone can replay it.
#ifndef TEST_TRIAL_H
#define TEST_TRIAL_H
#include "chance.h"
#include <stddef.h>

typedef struct {
    uint64_t seed;
    chance chance;
    char *text; // what the trial is about, as a study says it; owned by the trial
    size_t room, used;
    unsigned broken; // properties that did not hold
} trial;

#define TRIAL_PRINTF(f, first) __attribute__((format(printf, f, first)))
void trial_write(trial *t, const char *format, ...) TRIAL_PRINTF(2, 3); // adds to the text
// The property holds when value <= most; a value that is no number breaks it. The largest value of
// each property over all trials is printed at the end.
void trial_below(trial *t, const char *property, double value, double most);
void trial_true(trial *t, const char *property, bool holds);
void trial_count(const char *what); // how often something came up; printed at the end

// Runs seeds first .. first + n - 1 (or argv: FIRST COUNT) and returns the exit code.
int trial_run(int argc, char **argv, uint64_t first, unsigned n, void (*run)(trial *t));
#endif
