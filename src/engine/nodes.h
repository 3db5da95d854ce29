// Where the computed cycle table has its nodes. Private to engine.
#ifndef ENGINE_NODES_H
#define ENGINE_NODES_H
#include "tacet/engine.h"
// Chooses the nodes from the study and fills the engine's table by computed cycles.
TACET_USE tacet_status nodes_compute(tacet_engine *en, double lowest_rad_per_s,
                                     double highest_rad_per_s, unsigned longest_run,
                                     tacet_error *e);
#endif
