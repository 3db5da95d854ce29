// What a study must hold beyond the ranges of single keys: references between sections, demand and
// speeds, files, and common sense. Sections with errors of their own are left out.
#ifndef STUDY_CHECK_H
#define STUDY_CHECK_H
#include "fill.h"
#include "tacet/study.h"

typedef struct {
    const tacet_study *study;
    const tacet_tree *tree;
    filler *f;
    size_t n_filled; // errors that filling found: f->wrong up to here
} checker;

void check_study(checker *c);

// An error or warning about a key of the study, at its place or that of the section which lacks it.
void check_say(checker *c, bool warning, const char *path, const char *format, ...)
    TACET_PRINTF(4, 5);
// The parts of check_study, in order.
void check_rooms(checker *c);
void check_nodes(checker *c);      // of cylinders; flywheel and load are the train's own
void check_quantities(checker *c); // of bands and limits
void check_screen(checker *c);
void check_files(checker *c); // traces and books: that they can be read
void check_sense(checker *c); // unusual magnitudes

// A path of the study's folder; into the arena. NULL: no memory.
char *study_path(const tacet_study *s, const char *path, tacet_arena *a);
#endif
