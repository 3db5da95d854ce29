// Private to the room engine.
#ifndef ENGINE_INTERNAL_H
#define ENGINE_INTERNAL_H
#include "gas.h"
#include "tacet/engine.h"

// Value of a curve of the study at a speed; a curve without points stands for its default.
double engine_mid_burn(const tacet_cycle_def *c, double rpm);
double engine_burn_10_90(const tacet_cycle_def *c, double rpm);
double engine_air_fuel_ratio(const tacet_cycle_def *c, double rpm);
double engine_lowest(const tacet_cycle_def *c, double rpm);
double engine_highest(const tacet_cycle_def *c, double rpm);

// Cylinder definition of a cylinder number: the stated one or the default.
tacet_cylinder_def engine_cylinder(const tacet_engine_def *d, unsigned number);
// Crank angle at which the cylinder in a slot fires, rad in [0, pi strokes).
double engine_firing_angle(const tacet_engine_def *d, size_t slot);

#endif
