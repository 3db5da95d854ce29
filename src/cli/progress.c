// Progress on a terminal: one line on standard error that is written over.
#include "cli/cli.h"
#include <stdlib.h>
#include <string.h>
#include <time.h>
#include <unistd.h>

#define SHORTEST_STEP_S 0.1

static double now_s(void)
{
    struct timespec t;
    clock_gettime(CLOCK_MONOTONIC, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

cli_progress cli_progress_start(void)
{
    const char *term = getenv("TERM");
    return (cli_progress){.on = isatty(STDERR_FILENO) && term && strcmp(term, "dumb") != 0};
}

void cli_progress_step(void *who, size_t done, size_t of)
{
    cli_progress *p = who;
    if (!p->on) return;
    double now = now_s();
    if (p->shown && now - p->last_s < SHORTEST_STEP_S) return;
    p->shown = true;
    p->last_s = now;
    fprintf(stderr, "\r  %zu of %zu conditions", done, of);
    fflush(stderr);
}

void cli_progress_end(cli_progress *p)
{
    if (p->shown) fputs("\r\033[K", stderr);
    fflush(stderr);
    p->shown = false;
}
