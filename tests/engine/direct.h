// Cycles run one after another without any table, until the repeat settles; and small helpers.
#ifndef TEST_ENGINE_DIRECT_H
#define TEST_ENGINE_DIRECT_H
#include "demo.h"
#include "engine/internal.h"

// Halves of the cylinder in `slot` over a repeat: [2 cycles], up and down of each cycle; freed by
// the caller. What a settled repeat takes and gives, J:
typedef struct {
    cylinder_half *half;
    double fuel_J, work_J, wall_J, valve_J, ring_J;
    double unsettled; // largest relative change of mass and energy over the last repeat
} direct_run;
direct_run direct_repeat(const cylinder *c, const halves *h, const tacet_engine_def *d,
                         const tacet_roll *r, unsigned slot, double speed_rad_per_s, double charge);

tacet_roll *roll_of(const char *word, unsigned cylinders); // fails the test on a bad word
typedef struct {
    tacet_engine *engine;
    tacet_engine_work *work;
} engine_pair;
// Prepared between two speeds (rpm); fails the test when it cannot be.
engine_pair engine_made(const tacet_engine_def *d, double from_rpm, double to_rpm,
                        unsigned longest_run);
void engine_cleared(engine_pair *p);
tacet_duty duty_of(const engine_pair *p, const char *word, double rpm, double demand_Nm);
#endif
