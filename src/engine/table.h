// The cycle table: every half over charge x speed, with local interpolation. Private to engine.
//
// Charge is the manifold pressure (load by charge) or the share of the most fuel (load by fuel).
// Nodes depend on the study alone. Between them each number and each pressure is the product of two
// cubics through the four nearest nodes (fewer where there are fewer), so that a value depends on
// nothing but speed and charge. Curves of the study over speed bend at their points; nodes lie on
// these bends, and a cubic never reaches over one.
#ifndef ENGINE_TABLE_H
#define ENGINE_TABLE_H
#include "halves.h"

#define TABLE_CHARGES 10 // accuracy against direct cycles: tests/engine/test_table.c
#define TABLE_SPEEDS  6  // intervals of speed over the whole range
#define TABLE_BETWEEN 2  // .. at least between two bends
#define TABLE_BENDS   16
#define TABLE_ORDER   4 // nodes of an interpolation

typedef struct {
    halves halves;
    unsigned samples; // of a half, every degree with both ends
    size_t n_kinds, n_speeds, n_charges;
    double *speed_rad_per_s, *charge;
    size_t bend[TABLE_BENDS + 2], n_bends; // nodes at which curves bend, with the first and last
    double *number;                        // [kind][speed][charge][HALF_NUMBERS]
    double *pressure_Pa;                   // [kind][speed][charge][samples]
} table;
TACET_USE tacet_status table_create(table *t, const halves *h, unsigned samples, size_t n_speeds,
                                    size_t n_charges);
void table_clear(table *t);
double *table_number(const table *t, size_t kind, size_t speed, size_t charge);
double *table_pressure(const table *t, size_t kind, size_t speed, size_t charge);

typedef struct {
    size_t first, n;
    double weight[TABLE_ORDER];
} table_place;
table_place table_at(const double *node, size_t n, double x);
table_place table_at_speed(const table *t, double speed_rad_per_s);
table_place table_at_charge(const table *t, double charge);
// Pressures of a kind of half at a speed and charge.
void table_waveform(const table *t, size_t kind, const table_place *speed,
                    const table_place *charge, double *pressure_Pa);
void table_numbers(const table *t, size_t kind, const table_place *speed, size_t charge,
                   double number[HALF_NUMBERS]);

// n nodes from `low` to `high`, equally spaced in their logarithm when `low` > 0.
void table_nodes(double *node, size_t n, double low, double high);
// The running condition of a charge at a speed.
cylinder_run table_run(const tacet_engine_def *d, double speed_rad_per_s, double charge);
// Fills a table by computed cycles; its nodes are set.
TACET_USE tacet_status table_compute(table *t, const cylinder *c, const tacet_engine_def *d,
                                     tacet_error *e);
#endif
