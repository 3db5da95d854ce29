#include "demo.h"
#include <math.h>

// Definitions hold pointers to data that the engine only reads.
#define LEND(type, array) ((type *)(uintptr_t)(array))

static tacet_curve number(const double *y)
{
    static const double zero = 0;
    return (tacet_curve){LEND(double, &zero), LEND(double, y), 1};
}

tacet_engine_def demo_six(void)
{
    static const unsigned order[] = {1, 5, 3, 6, 2, 4};
    static const double rpm[] = {800, 1300, 1900}, highest[] = {130e3, 185e3, 185e3};
    static const double lowest = 25e3, ratio = 15.6, mid = 8 * DEG, burn = 25 * DEG;
    tacet_engine_def d = tacet_engine_default();
    d.bore_m = 0.108, d.stroke_m = 0.130, d.rod_length_m = 0.215;
    d.compression_ratio = 12.5, d.reciprocating_mass_kg = 2.7;
    d.firing_order = LEND(unsigned, order), d.n_cylinders = 6;
    d.cycle.mid_burn_rad = number(&mid), d.cycle.burn_10_90_rad = number(&burn);
    d.cycle.lower_heating_value_J_per_kg = 44e6, d.cycle.air_fuel_ratio = number(&ratio);
    d.cycle.lowest_Pa = number(&lowest);
    d.cycle.highest_Pa = (tacet_curve){LEND(double, rpm), LEND(double, highest), 3};
    d.cycle.exhaust_Pa = 112e3, d.cycle.wall_temperature_K = 430;
    d.cycle.peak_pressure_Pa = 16e6;
    return d;
}

tacet_engine_def demo_v8(void)
{
    static const unsigned order[] = {1, 8, 4, 3, 6, 5, 7, 2};
    static const tacet_cylinder_def cylinders[] = {
        {1, "throw1", -45 * DEG, 0, 1},    {2, "throw1", 45 * DEG, 0.022, 1},
        {3, "throw2", -45 * DEG, 0.11, 1}, {4, "throw2", 45 * DEG, 0.132, 1},
        {5, "throw3", -45 * DEG, 0.22, 1}, {6, "throw3", 45 * DEG, 0.242, 1},
        {7, "throw4", -45 * DEG, 0.33, 1}, {8, "throw4", 45 * DEG, 0.352, 1}};
    static const double highest = 96e3;
    tacet_engine_def d = tacet_engine_default();
    d.bore_m = 0.100, d.stroke_m = 0.092, d.rod_length_m = 0.155;
    d.compression_ratio = 10.8, d.reciprocating_mass_kg = 0.62;
    d.firing_order = LEND(unsigned, order), d.n_cylinders = 8;
    d.cylinders = LEND(tacet_cylinder_def, cylinders), d.n_cylinder_defs = 8;
    d.friction = (tacet_friction_def){65e3, 12e3, 4e3, 4e3};
    d.cycle.highest_Pa = number(&highest);
    d.cycle.exhaust_Pa = 112e3;
    return d;
}
