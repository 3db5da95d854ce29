// What the figures of a body share. Private to show.
#ifndef SHOW_BODY_FIGURES_H
#define SHOW_BODY_FIGURES_H
#include "show/figure_source.h"

bool body_on_mounts(const tacet_model *m);
// A second direction with at least this share is named too.
#define BODY_MODE_SECOND 0.15
// "roll", "roll with yaw": by shares of kinetic energy. NULL: no memory.
const char *body_mode_name(const double share[6], tacet_arena *a);

#endif
