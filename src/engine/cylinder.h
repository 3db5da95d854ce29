// One cylinder over half a working cycle. Private to engine.
//
// A working cycle is cut at its two tops. The half `up` runs from the gas-exchange top (intake,
// compression) to the firing top, the half `down` from there (expansion, exhaust) to the next
// gas-exchange top; 360 degrees each. Local angle 0..2 pi counts from the top at which a half
// starts, so that both see the same piston motion. What a half does depends on what the cylinder
// holds at its start and on its own charge alone, so a cycle table holds halves.
//
// Model: one zone of one ideal gas (gas.h). Over crank angle a, with speed w,
//   dm/da = mass in through a valve - mass out past the rings
//   dE/da = -p dV/da - wall heat / w + enthalpy in through a valve - enthalpy out past the rings
// E is internal energy plus the heat of fuel not yet burnt, fuel (1 - x(a)), x by Wiebe. Energies
// and masses are sums of accumulated terms (work, wall, rings, valve), each integrated by the same
// Runge-Kutta stages, so they balance to rounding at any step.
//
// Valves are ideal: while one is open the cylinder follows a set pressure, and the flow that this
// takes follows from the energy balance. The inlet is open from gas-exchange top for 180 degrees;
// over the first INLET_SPAN the set pressure goes from what is there to the manifold's. The exhaust
// opens at EXHAUST_OPENS; the pressure goes to the exhaust manifold's until bottom and stays there
// until gas-exchange top. Gas pushed back into the inlet port comes back first, as it went; gas
// that comes back from the exhaust has the temperature of the cylinder's.
#ifndef ENGINE_CYLINDER_H
#define ENGINE_CYLINDER_H
#include "gas.h"
#include "tacet/engine.h"

#define CYLINDER_SAMPLES  361 // pressure of a half, every degree with both ends
#define INLET_SPAN        (30 * M_PI / 180)
#define EXHAUST_OPENS     GAS_BURN_LATEST
#define EXHAUST_OPENS_DEG 140
#define EXHAUST_SPAN      (M_PI - EXHAUST_OPENS)

typedef struct { // the cylinder at an angle
    double volume_m3, slope_m3, wall_m2, log_volume;
} cylinder_place;

typedef struct { // what does not change from cycle to cycle
    gas_law gas;
    tacet_slider slider;
    double piston_m2, swept_m3, clearance_m3;
    double intake_K, exhaust_Pa, wall_K, blow_by_m2, crankcase_Pa;
    double wall_factor;    // of wall heat: 1, 0 in the loss-free limit
    unsigned steps;        // Runge-Kutta steps a degree
    cylinder_place *place; // [720 steps + 1] every half step of a revolution from top
} cylinder;
// Fills everything but `place` from a definition; then places for `steps` steps a degree.
cylinder cylinder_of(const tacet_engine_def *d);
TACET_USE tacet_status cylinder_grid(cylinder *c, unsigned steps);
// Steps a degree for running down to a speed: the rings of a cylinder that leaks much, turning
// slowly, would empty it near top within a step. One step does for up to LEAK_A_STEP of the gas at
// top (error below 2e-4 of the peak pressure); every real engine stays far below it. 0: more than
// STEPS_MOST would be needed.
#define LEAK_A_STEP 0.04
#define STEPS_MOST  24
unsigned cylinder_steps(const cylinder *c, double lowest_rad_per_s);
void cylinder_clear(cylinder *c);

typedef struct { // running condition of one cycle
    double speed_rad_per_s, manifold_Pa;
    double heat_J_per_kg; // heat of the fuel for each kg drawn in
    double burn_start_rad, burn_end_rad;
} cylinder_run;

typedef struct { // what the cylinder holds at a top
    double mass_kg, energy_J;
    double fuel_J; // heat of the fuel of the cycle in hand, burnt or not
    double inlet_Pa, inlet_K, inlet_m3, exponent; // where the last inlet shut; motored compression
    double late_Pa; // highest pressure since the last bottom, at a gas-exchange top
} cylinder_gas;
// Gas at a pressure and temperature at top.
cylinder_gas cylinder_fill(const cylinder *c, double pressure_Pa, double temperature_K);
// Internal energy and fuel not burnt, relative to as much gas flowing in from the manifold.
double cylinder_stored(const cylinder *c, const cylinder_gas *g);

typedef struct {
    bool up;   // intake and compression; else expansion and exhaust
    bool open; // its valve opens
    bool fire; // up: fuel comes in with the charge
} cylinder_rule;

typedef struct {
    double work_J[2];        // by the gas on the piston, first and second stroke of the half
    double wall_J;           // to the walls
    double valve_J;          // enthalpy out less enthalpy in through the valve, from the manifold's
    double ring_J;           // enthalpy out past the rings, from the manifold's
    double fuel_J, fresh_kg; // brought in
    double peak_Pa;          // up: from the bottom before it on; down: of its first stroke
    double pressure_Pa[CYLINDER_SAMPLES];
} cylinder_half;
// Largest of n samples, by a parabola through the largest and its neighbours.
double cylinder_peak(const double *pressure_Pa, size_t n);
// Takes the gas through a half. False: the state became impossible (not finite, no mass).
bool cylinder_run_half(const cylinder *c, const cylinder_run *r, cylinder_rule rule,
                       cylinder_gas *gas, cylinder_half *out);

#endif
