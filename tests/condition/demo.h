// A study of patterns/ as a model, for tests.
#ifndef TEST_DEMO_H
#define TEST_DEMO_H
#include "near.h"
#include "tacet/condition.h"

typedef struct {
    tacet_study *study;
    tacet_model *model;
    tacet_workspace *work;
} demo;
void demo_open(demo *d, const char *study_name); // a file of patterns/; fails the test on a problem
void demo_open_text(demo *d, const char *text);  // a study from memory
char *demo_text(const char *study_name);         // the file's text; free it
void demo_close(demo *d);
tacet_roll *demo_roll(const demo *d, const char *word);
tacet_condition demo_condition(const demo *d, const tacet_roll *roll, double speed_rpm);
#endif
