// What those who save a screen share. Private to show.
#ifndef SHOW_SAVE_H
#define SHOW_SAVE_H
#include "show/screen.h"

typedef struct {
    const tacet_model *m;
    const tacet_screen *s;
    tacet_folder *folder;
    tacet_arena *a;
} save_job;
typedef struct {
    const tacet_draw_how *how;
    tacet_error first; // reason of the first drawing that failed
} save_drawing;

// The first failure is kept; after it only the scripts are written, since what ails gnuplot once
// (missing, hanging) ails it again.
void save_draw(const save_job *b, save_drawing *d, const char *stem, const tacet_figure *f);
void save_note_failure(save_drawing *d, tacet_status status, const tacet_error *e);
// The drawings of a body on mounts, of the pattern in a cell (SIZE_MAX: nothing was solved).
void save_body_drawings(const save_job *b, tacet_workspace *w, save_drawing *d, size_t cell);

#endif
