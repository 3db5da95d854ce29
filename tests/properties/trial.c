#include "trial.h"
#include <signal.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define PROPERTIES_MOST 96

// One process runs one list of trials, one after another.
static struct {
    const char *name;
    double worst, most;
    uint64_t seed; // of the worst
    unsigned times, broken;
} tally[PROPERTIES_MOST];

static size_t row_of(const char *name)
{
    for (size_t i = 0; i < PROPERTIES_MOST; i++) {
        if (!tally[i].name) tally[i].name = name;
        if (strcmp(tally[i].name, name) == 0) return i;
    }
    fprintf(stderr, "more than %d properties\n", PROPERTIES_MOST);
    abort();
}

void trial_write(trial *t, const char *format, ...)
{
    va_list args;
    if (t->room - t->used < 4096) {
        t->room = 2 * t->room + 8192;
        t->text = realloc(t->text, t->room);
        if (!t->text) abort();
    }
    va_start(args, format);
    t->used += (size_t)vsnprintf(t->text + t->used, t->room - t->used, format, args);
    va_end(args);
    if (t->used >= t->room) abort();
}

void trial_below(trial *t, const char *property, double value, double most)
{
    size_t i = row_of(property);
    bool holds = value <= most;
    if (!holds) {
        t->broken++;
        tally[i].broken++;
        printf("seed %llu: %s = %.6g; at most %.3g\n", (unsigned long long)t->seed, property, value,
               most);
    }
    if (tally[i].times++ == 0 || !(value <= tally[i].worst)) {
        tally[i].worst = value;
        tally[i].seed = t->seed;
    }
    tally[i].most = most;
}

void trial_true(trial *t, const char *property, bool holds)
{
    trial_below(t, property, holds ? 0 : 1, 0);
}

void trial_count(const char *what)
{
    size_t i = row_of(what);
    tally[i].times++;
    tally[i].most = NAN;
}

static const trial *unfinished;
static volatile sig_atomic_t stopped;

static void stop(int signal) // after the trial in hand
{
    (void)signal;
    stopped = 1;
}

static void print_unfinished(void) // an assertion outside the properties ended the program
{
    if (unfinished)
        printf("---- ended in seed %llu\n%s----\n", (unsigned long long)unfinished->seed,
               unfinished->text);
}

static void print_tally(void)
{
    for (size_t i = 0; i < PROPERTIES_MOST && tally[i].name; i++) {
        printf("%6u x %-52s", tally[i].times, tally[i].name);
        if (!isnan(tally[i].most))
            printf(" worst %.3g (seed %llu), at most %.3g, broken %u", tally[i].worst,
                   (unsigned long long)tally[i].seed, tally[i].most, tally[i].broken);
        puts("");
    }
}

int trial_run(int argc, char **argv, uint64_t first, unsigned n, void (*run)(trial *t))
{
    unsigned broken = 0, done = 0;
    if (argc > 1) first = strtoull(argv[1], NULL, 10);
    if (argc > 1) n = argc > 2 ? (unsigned)strtoul(argv[2], NULL, 10) : 1;
    if (atexit(print_unfinished)) return 2;
    setvbuf(stdout, NULL, _IOLBF, 0);
    signal(SIGINT, stop);
    signal(SIGTERM, stop);
    for (; done < n && !stopped; done++) {
        trial t = {.seed = first + done, .chance = {.state = first + done}};
        trial_write(&t, "# seed %llu\n", (unsigned long long)t.seed);
        unfinished = &t;
        run(&t);
        unfinished = NULL;
        if (t.broken) {
            printf("---- what seed %llu is about\n%s----\n", (unsigned long long)t.seed, t.text);
            broken++;
        }
        free(t.text);
    }
    print_tally();
    printf("%u trials, %u broken\n", done, broken);
    return broken || done < n ? 1 : 0;
}
