// study: the study file -> definitions of the rooms above, with places.
#ifndef TACET_STUDY_H
#define TACET_STUDY_H
#include "tacet/base.h"
#include "tacet/body.h"
#include "tacet/engine.h"
#include "tacet/judge.h"
#include "tacet/train.h"
#pragma GCC visibility push(default)

typedef struct { // a list "1/2, 2/3" given, or all from lowest to 1 with words up to longest
    const char **list;
    size_t n_list;
    unsigned longest;
    const char *lowest;
} tacet_densities_def;
typedef struct {
    double *speeds_rad_per_s;
    size_t n_speeds;
    tacet_curve brake_torque_Nm; // over rpm
    tacet_densities_def densities;
    const char **patterns; // words, or paths of books
    size_t n_patterns;
    double highest_order;         // NAN: from the highest mode of interest
    double reserve_db;            // 3
    double least_clear_rad_per_s; // a density clear over less is not recommended (150 rpm)
    double least_saving; // fraction: saving less than this more than the next clear one (0.01)
    unsigned referee;    // worst conditions re-solved by march + steady (8)
} tacet_screen_def;

typedef struct tacet_study { // open, immutable after reading
    const char *title, *path, *folder;
    tacet_engine_def engine;
    tacet_train_def train;
    tacet_body_def body; // mass NAN: none
    tacet_band_def *bands;
    size_t n_bands;
    tacet_limit_def *limits;
    size_t n_limits;
    tacet_screen_def screen;
    uint64_t fingerprint; // of every resolved value, not of the text
    tacet_arena *arena;
    const struct tacet_tree *tree; // as read, with places
} tacet_study;

// Reads path ("-": standard input). Every problem goes to `problems`; TACET_BAD_INPUT when one is
// an error.
TACET_USE tacet_status tacet_study_read(const char *path, tacet_problems *problems,
                                        tacet_study **out);
// The same from memory; `name` stands in messages.
TACET_USE tacet_status tacet_study_read_text(const char *text, size_t bytes, const char *name,
                                             tacet_problems *problems, tacet_study **out);
void tacet_study_destroy(tacet_study *s);    // accepts NULL
const tacet_section *tacet_study_keys(void); // the root of the one table
// Place in the file of a key, "screen.highest_order", or of the nearest that holds it. False: the
// study was not read from a text.
bool tacet_study_place(const tacet_study *s, const char *path, int *line, int *column);

// Every key with its value and where that came from, in table order, for `check`.
typedef enum {
    TACET_FROM_FILE,
    TACET_FROM_DEFAULT,
    TACET_FROM_COMPUTED,
    TACET_FROM_NOTHING
} tacet_from;
// Calls `tell` once a key; its texts hold until it returns.
TACET_USE tacet_status tacet_study_values(const tacet_study *s,
                                          void (*tell)(void *who, const char *path,
                                                       const char *value, const char *unit,
                                                       tacet_from from),
                                          void *who);

#pragma GCC visibility pop
#endif
