// Running gnuplot. Private to show.
#ifndef SHOW_GNUPLOT_H
#define SHOW_GNUPLOT_H
#include "tacet/base.h"

// Runs `gnuplot -d script` in the directory `folder_fd` with its standard output going to `out_fd`:
// no shell, standard input from /dev/null, a small environment, its own process group, killed after
// time_limit_s. script is a fixed name of ours. Any text on standard error is a failure.
TACET_USE tacet_status gnuplot_run(int folder_fd, const char *script, int out_fd,
                                   double time_limit_s, tacet_error *e);

#endif
