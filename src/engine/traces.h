// Measured pressure traces in place of computed cycles. Private to engine.
#ifndef ENGINE_TRACES_H
#define ENGINE_TRACES_H
#include "tacet/engine.h"
// Fills the engine's cycle table from the files of the study: its nodes are the loads and speeds
// of the fired traces, one speed node when no speed is stated.
TACET_USE tacet_status traces_table(tacet_engine *en, unsigned longest_run, tacet_error *e);
#endif
