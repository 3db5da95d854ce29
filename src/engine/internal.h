// Private to the room engine.
#ifndef ENGINE_INTERNAL_H
#define ENGINE_INTERNAL_H
#include "cylinder.h"
#include "gas.h"
#include "table.h"
#include "tacet/engine.h"

// ---- definition
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

// ---- engine
typedef struct {
    unsigned number;
    double firing_rad, charge_factor;
    bool may_skip;
    char node[64];
} engine_slot;

struct tacet_engine {
    tacet_engine_def def; // a copy; what it points to is borrowed
    cylinder cyl;
    engine_slot slot[TACET_ENGINE_CYLINDERS_MOST];
    unsigned n_slots, n_factors; // n_factors: different charge factors
    double displacement_m3, mean_inertia_kgm2;
    double lever_m[361], lever_slope_m[361]; // x' and x'' (m/rad, m/rad2) at whole degrees from top
    double inertia[361][6]; // J within a degree after top, powers of the part of it
    bool exhaust_first;    // of a cylinder that comes back, whatever `trapped` says; for comparison
    unsigned half_degrees; // of a half: 360 (4-stroke), 180
    bool prepared;
    table table;
    double lowest_rad_per_s, highest_rad_per_s; // of the speeds prepared
};

// Fills lever, inertia, displacement from slider and slots.
void engine_geometry(tacet_engine *en);

// ---- work
typedef struct { // halves of the same charge relative to the common one
    double share;
    unsigned n_used;
    unsigned *used;  // [table kinds], kinds in the order met
    unsigned *count; // [table kinds]
} engine_group;

typedef struct { // a half at the speed and charge of the load
    unsigned kind;
    double charge;
    double pressure_Pa[CYLINDER_SAMPLES], torque_Nm[CYLINDER_SAMPLES];
} engine_wave;

typedef struct { // torque at a whole degree and its slope, per degree
    double torque_Nm, slope_Nm_per_deg;
} engine_node;

typedef struct { // a half beside its neighbour over the gas-exchange top
    const engine_wave *wave, *neighbour;
    engine_node node[CYLINDER_SAMPLES + 1]; // the last only ever counts times 0
} engine_piece;

struct tacet_engine_work {
    const tacet_engine *engine;
    // numbers of every kind over charge at one speed
    double memo_speed;
    bool memo_valid;
    double *memo; // [kind][charge][HALF_NUMBERS]
    // halves of the roll in hand, counted by charge
    engine_group *group;
    unsigned n_groups, most_groups;
    unsigned *kinds_memory;
    double *sum; // [group][charge][HALF_NUMBERS], over the repeat
    // the load
    bool loaded;
    engine_wave *wave;
    engine_piece *piece;
    unsigned n_waves, n_pieces, most_waves, most_pieces;
    const engine_piece **sequence; // [slot][2 cycles], first a half down
    unsigned sequence_most, cycles;
    double fired_Nm[2 * CYLINDER_SAMPLES - 1]; // fired cycle per full charge, from gas-exchange top
};

// Counts the halves of a roll by kind and charge. TACET_REACH_RUN: a run is too long for the table;
// TACET_REACH_CYLINDER: one skips that may not.
tacet_reach engine_gather(const tacet_engine *en, const tacet_roll *r, tacet_engine_work *w);
// Charge of a cycle relative to the common one. cycle: of the fire, or of a skip in `slot`.
double engine_share(const tacet_engine *en, const tacet_roll *r, unsigned slot, unsigned cycle);
// Charge (node unit of the table) that a duty found.
double engine_charge(const tacet_engine *en, const tacet_duty *d);
TACET_USE tacet_status engine_suits(const tacet_engine *en, const tacet_roll *r,
                                    double speed_rad_per_s);

#endif
