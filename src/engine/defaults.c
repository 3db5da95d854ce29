// A definition with every default of the field tables (a test compares the two); what has no
// default is NAN or absent.
#include "internal.h"
#include <math.h>
#include <stdio.h>

#define DEG (M_PI / 180)

tacet_engine_def tacet_engine_default(void)
{
    return (tacet_engine_def){
        .strokes = 4,
        .bore_m = NAN,
        .stroke_m = NAN,
        .rod_length_m = NAN,
        .compression_ratio = 11,
        .reciprocating_mass_kg = NAN,
        .friction = {65e3, 13e3, 4e3, 4e3},
        .cylinder_dispersion = 0.03,
        .cyclic_dispersion = 0.02,
        .cycle = {.lower_heating_value_J_per_kg = 43e6,
                  .intake_temperature_K = 320,
                  .exhaust_Pa = 108e3,
                  .wall_temperature_K = 420,
                  .blow_by_area_m2 = 0.8e-6,
                  .crankcase_Pa = 100e3,
                  .peak_pressure_Pa = NAN},
        .skip = {.longest_run = 12},
    };
}

static double curve_or(const tacet_curve *c, double rpm, double otherwise)
{
    return c->n ? tacet_curve_at(c, rpm) : otherwise;
}

double engine_mid_burn(const tacet_cycle_def *c, double rpm)
{
    return curve_or(&c->mid_burn_rad, rpm, 8 * DEG);
}

double engine_burn_10_90(const tacet_cycle_def *c, double rpm)
{
    return curve_or(&c->burn_10_90_rad, rpm, 25 * DEG);
}

double engine_air_fuel_ratio(const tacet_cycle_def *c, double rpm)
{
    return curve_or(&c->air_fuel_ratio, rpm, 14.6);
}

double engine_lowest(const tacet_cycle_def *c, double rpm)
{
    return curve_or(&c->lowest_Pa, rpm, 25e3);
}

double engine_highest(const tacet_cycle_def *c, double rpm)
{
    return curve_or(&c->highest_Pa, rpm, 100e3);
}

tacet_cylinder_def engine_cylinder(const tacet_engine_def *d, unsigned number)
{
    for (size_t i = 0; i < d->n_cylinder_defs; i++)
        if (d->cylinders[i].number == number) return d->cylinders[i];
    return (tacet_cylinder_def){.number = number, .charge_factor = 1};
}

double engine_firing_angle(const tacet_engine_def *d, size_t slot)
{
    double cycle = M_PI * d->strokes, angle = 0;
    if (d->n_intervals == 0) return cycle * (double)slot / (double)d->n_cylinders;
    for (size_t i = 0; i < slot; i++)
        angle += d->firing_intervals_rad[i];
    return angle < cycle ? angle : angle - cycle;
}
