#include "tacet/base.h"
#include <math.h>
#include <string.h>

static const struct {
    const char *unit;
    double factor;
} units[] = {
    {"1", 1},
    {"%", 0.01},
    {"dB", 1},
    // lengths, areas, angles
    {"m", 1},
    {"mm", 1e-3},
    {"um", 1e-6},
    {"m2", 1},
    {"mm2", 1e-6},
    {"m3", 1},
    {"l", 1e-3},
    {"rad", 1},
    {"deg", M_PI / 180},
    // time, frequency, speed
    {"s", 1},
    {"ms", 1e-3},
    {"Hz", 1},
    {"rad/s", 1},
    {"rad/s2", 1},
    {"rpm", 2 * M_PI / 60},
    {"m/s", 1},
    {"m/s2", 1},
    // mass and inertia
    {"kg", 1},
    {"g", 1e-3},
    {"kg m2", 1},
    {"kg m", 1},
    {"kg mm", 1e-3},
    {"kg/m3", 1},
    // force, torque, stiffness, damping
    {"N", 1},
    {"kN", 1e3},
    {"N m", 1},
    {"kN m", 1e3},
    {"N m/rad", 1},
    {"N m/deg", 180 / M_PI},
    {"N m s/rad", 1},
    {"N/m", 1},
    {"N/mm", 1e3},
    // pressure and stress
    {"Pa", 1},
    {"kPa", 1e3},
    {"bar", 1e5},
    {"MPa", 1e6},
    {"GPa", 1e9},
    {"Pa/N", 1},
    // heat, power, temperature
    {"K", 1},
    {"J", 1},
    {"J/kg", 1},
    {"kJ/kg", 1e3},
    {"MJ/kg", 1e6},
    {"W", 1},
    {"kW", 1e3},
    {"kg/s", 1},
    {"kg/h", 1 / 3600.0},
};

double tacet_unit_factor(const char *unit)
{
    if (!unit || !*unit) return 1;
    for (size_t i = 0; i < sizeof units / sizeof *units; i++)
        if (strcmp(units[i].unit, unit) == 0) return units[i].factor;
    return 0;
}
