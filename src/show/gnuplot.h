// Running gnuplot. Private to show.
#ifndef SHOW_GNUPLOT_H
#define SHOW_GNUPLOT_H
#include "tacet/base.h"

// One run: `gnuplot -d script`, no shell, standard input from /dev/null, a small environment, its
// own process group, killed after time_limit_s.
typedef struct {
    int folder_fd;      // directory it runs in; -1: ours
    const char *script; // a fixed name of ours in that directory; NULL: read from script_fd
    int script_fd;
    int out_fd; // its standard output
    double time_limit_s;
} gnuplot_job;
// Any text on standard error is a failure.
TACET_USE tacet_status gnuplot_run(const gnuplot_job *job, tacet_error *e);

#endif
