// Random valid studies: engine, crank-train, one speed, two bands, a word.
#ifndef TEST_RANDOM_STUDY_H
#define TEST_RANDOM_STUDY_H
#include "tacet/pattern.h"
#include "trains.h"
#include "trial.h"

#define PLAN_CYLINDERS 16
typedef struct {
    unsigned cylinders;
    unsigned order[PLAN_CYLINDERS];    // cylinder numbers in firing sequence
    double interval[PLAN_CYLINDERS];   // degrees from slot i to the next
    unsigned node[PLAN_CYLINDERS + 1]; // by cylinder number
    double bank[PLAN_CYLINDERS + 1];   // degrees, by cylinder number
    double factor[PLAN_CYLINDERS + 1]; // charge factor, by cylinder number
    bool even, counterclockwise;
    double bore_mm, stroke_mm, rod_mm, offset_mm, mass_kg, compression;
    double mid_burn_deg, burn_deg, highest_kpa;
    const char *trapped;
    bool by_fuel;
    unsigned longest_run;
    double rpm, demand_Nm;
    bench_train *train;                 // its first nodes are the throws
    const char *first_link, *last_link; // by name, whatever their order
    char word[TACET_PATTERN_LONGEST + 1];
} plan;

void random_plan(chance c, plan *p); // free p->train; the same chance gives the same plan
// The study's text into `out`, a trial of its own; free out->text.
void plan_write(const plan *p, trial *out);
#endif
