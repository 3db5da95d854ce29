// The kinds of halves that a cycle table holds, and how valves work in each. Private to engine.
//
// A half is known by what this cycle does and what came before, and a half down by what the next
// cycle does, where that matters:
//   up_fire(k)          intake and compression of a fire after k skipped cycles
//   up_skip(j)          the same angles of the j-th skipped cycle in a row
//   down_fire(k, next)  expansion and exhaust of a fire after k skips; the next fires or skips
//   down_skip(j, next)
// j = longest + 1 stands for a cylinder that never fires. With `burnt`, where a skipped cylinder
// keeps all of the gas of the fire before, there is a second bank of all kinds, for runs that begin
// after a fire which itself followed a skip (`again`). The window from firing top to firing top is
// a half down and the half up after it.
#ifndef ENGINE_HALVES_H
#define ENGINE_HALVES_H
#include "cylinder.h"
#include "tacet/engine.h"
#include "tacet/pattern.h"

typedef struct {
    unsigned longest;     // run of skips
    bool fire_next;       // does a half down of a fire depend on the next cycle
    bool skip_next;       // .. of a skip
    bool open;            // valves work while skipped
    bool intake;          // the first skipped cycle takes one intake without fuel
    bool keep;            // the exhaust stays shut between a fire and a skip
    bool exhaust_first;   // it opens between a skip and a fire
    bool again;           // there is a second bank
    bool charge_of_fires; // a skipped cylinder's gas comes from the fire before, not the manifold
} halves;
// exhaust_first: overrides what `trapped` says of a cylinder that comes back, for comparison.
halves halves_of(int trapped, unsigned longest, bool exhaust_first);
unsigned halves_count(const halves *h);
unsigned halves_up_fire(const halves *h, unsigned skips);
unsigned halves_up_skip(const halves *h, unsigned run);
unsigned halves_down_fire(const halves *h, unsigned skips, bool next_fires);
unsigned halves_down_skip(const halves *h, unsigned run, bool next_fires);
bool halves_is_up(const halves *h, unsigned kind);
bool halves_is_skip(const halves *h, unsigned kind);
// First kind of the second bank, to be added to the kinds above.
unsigned halves_bank(const halves *h);
// The halves of cycle c of a slot. False: a run longer than the table's.
bool halves_of_cycle(const halves *h, const tacet_roll *r, unsigned slot, unsigned c, unsigned *up,
                     unsigned *down);

cylinder_rule halves_rule_up_fire(void);
cylinder_rule halves_rule_up_skip(const halves *h, unsigned run);
cylinder_rule halves_rule_down_fire(const halves *h, bool next_fires);
cylinder_rule halves_rule_down_skip(const halves *h, bool next_fires);

// One number each of a half, beside its pressures.
enum {
    HALF_WORK,    // J, both strokes
    HALF_PUMPING, // J, minus the work of its intake or exhaust stroke
    HALF_WALL,    // J
    HALF_VALVE,   // J, enthalpy out through valves
    HALF_RING,    // J, enthalpy out past the rings
    HALF_STORED,  // J, what the gas holds at the end over what it held at the start
    HALF_FUEL,    // J
    HALF_PEAK, // Pa, up: from the bottom before it on; down: of the cycle, to bottom after firing
    HALF_NUMBERS
};

// Fills `number` and, when not NULL, pressure [CYLINDER_SAMPLES] of one kind of half.
typedef void halves_store(void *who, unsigned kind, const double number[HALF_NUMBERS],
                          const double *pressure_Pa);
// The chain of all halves at one running condition: an engine that fires on and on, from which runs
// of 1..longest skips branch off, each followed by a fire. `start` holds a guess of the gas at
// gas-exchange top of the engine that fires on, and returns it. `never` the same for a cylinder
// that never fires; mass 0: not known, and then it is found if it depends on nothing else.
TACET_USE tacet_status halves_chain(const cylinder *c, const cylinder_run *r, const halves *h,
                                    cylinder_gas *start, cylinder_gas *never, halves_store *store,
                                    void *who);
#endif
