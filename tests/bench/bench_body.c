// What the powertrain on its mounts costs a condition: the forwarder with its four mounts and two
// points in the cab, against the same study with roll torque in their place. Both in one run; the
// ratio is what counts, and at most 2.
#include "../condition/demo.h"
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

#define TIMES  300
#define ROUNDS 5

static double now(void)
{
    struct timespec t;
    clock_gettime(CLOCK_MONOTONIC, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

static char *text_of(bool with_body)
{
    char *text = demo_text("forwarder.yaml");
    if (with_body) return text;
    char *from = strstr(text, "\nbody:"), *to = strstr(text, "\nbands:");
    if (!from || !to) return NULL;
    memmove(from, to, strlen(to) + 1);
    demo_replace(text, "mount-force:front-left:z", "roll-torque");
    demo_replace(text, "cab:seat", "roll-torque");
    demo_replace(text, "cab:ear", "roll-torque");
    return text;
}

// Seconds a condition, every one at a speed of its own: no answer of the body is at hand.
static double seconds(demo *d, const tacet_roll *roll)
{
    double start = now();
    for (int i = 0; i < TIMES; i++) {
        tacet_condition c = demo_condition(d, roll, 900 + 1000.0 * i / TIMES);
        tacet_row row;
        if (tacet_solve(d->model, &c, TACET_LEVEL_RIPPLE, d->work, &row) != TACET_OK) return NAN;
    }
    return (now() - start) / TIMES;
}

static void compare(demo *without, demo *with, const char *word)
{
    tacet_roll *roll = demo_roll(with, word);
    double least[2] = {INFINITY, INFINITY};
    for (int i = 0; i < ROUNDS; i++) { // in turn, the best of each: others use the machine too
        least[0] = fmin(least[0], seconds(without, roll));
        least[1] = fmin(least[1], seconds(with, roll));
    }
    printf("forwarder, %s: without body %.3f ms, with body %.3f ms, ratio %.2f\n", word,
           1e3 * least[0], 1e3 * least[1], least[1] / least[0]);
    tacet_roll_destroy(roll);
}

int main(void)
{
    demo without, with;
    char *text = text_of(false);
    if (!text) return 1;
    demo_open_text(&without, text);
    free(text);
    text = text_of(true);
    demo_open_text(&with, text);
    free(text);
    compare(&without, &with, "..x.x.x");
    compare(&without, &with, "x.");
    compare(&without, &with, "x");
    demo_close(&with);
    demo_close(&without);
    return 0;
}
