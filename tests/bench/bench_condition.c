// One full condition of a screen (duty, ripple, every quantity, judging with dispersion) on both
// demo studies, by parts, and against the march of the same condition in the same run. Ratios are
// what counts.
#include "../condition/demo.h"
#include <math.h>
#include <stdio.h>
#include <time.h>

static double now(void)
{
    struct timespec t;
    clock_gettime(CLOCK_MONOTONIC, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

// Seconds of one solve, over speeds as a screen visits them.
static double seconds(demo *d, const tacet_roll *roll, double from_rpm, double to_rpm,
                      tacet_level level, int times)
{
    double start = now();
    for (int i = 0; i < times; i++) {
        tacet_condition c = demo_condition(d, roll, from_rpm + (to_rpm - from_rpm) * i / times);
        tacet_row row;
        if (tacet_solve(d->model, &c, level, d->work, &row) != TACET_OK) return NAN;
    }
    return (now() - start) / times;
}

static void run(const char *study, const char *word, double from_rpm, double to_rpm)
{
    demo d;
    double start = now();
    demo_open(&d, study);
    double opened = now() - start;
    tacet_roll *roll = demo_roll(&d, word);
    (void)seconds(&d, roll, from_rpm, to_rpm, TACET_LEVEL_RIPPLE, 20);
    double constant = seconds(&d, roll, from_rpm, to_rpm, TACET_LEVEL_CONSTANT, 400);
    double ripple = seconds(&d, roll, from_rpm, to_rpm, TACET_LEVEL_RIPPLE, 400);
    double steady = seconds(&d, roll, from_rpm, to_rpm, TACET_LEVEL_STEADY, 4);
    printf("%s, %s, %u revolutions, %zu lines: model in %.2f s\n", study, word, roll->revolutions,
           tacet_model_lines(d.model, roll->revolutions), opened);
    printf("  condition at constant speed %.3f ms, with ripple %.3f ms, by march %.1f ms\n",
           1e3 * constant, 1e3 * ripple, 1e3 * steady);
    printf("  march / ripple %.0f, ripple / constant %.2f\n", steady / ripple, ripple / constant);
    tacet_roll_destroy(roll);
    demo_close(&d);
}

int main(void)
{
    run("forwarder.yaml", "..x.x.x", 900, 1900);
    run("forwarder.yaml", "x.", 900, 1900);
    run("brush-truck.yaml", "x.x.x.x..", 1000, 3000);
    return 0;
}
