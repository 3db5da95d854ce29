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
void demo_open_path(demo *d, const char *path);  // a study from a file anywhere
// A study from memory that must read well; what create or prepare says of it.
tacet_status demo_try_text(demo *d, const char *text, tacet_error *e);
char *demo_text(const char *study_name); // the file's text; free it
// Puts `with` in place of the first `what`, which must be there; the text has room for it.
void demo_replace(char *text, const char *what, const char *with);
void demo_close(demo *d);
// Roll torque of the workspace's response as judged against -d/dt of what the housed bodies hold of
// momentum, less the torque that leaves: largest difference of a line over the largest line.
double demo_roll_mismatch(const demo *d);
double demo_roll_mismatch_of(const demo *d, const tacet_response *r, const tacet_spectrum *roll);
tacet_roll *demo_roll(const demo *d, const char *word);
tacet_condition demo_condition(const demo *d, const tacet_roll *roll, double speed_rpm);
#endif
