// Value and derivatives of a spectrum's signal at one place. Of this room only.
#ifndef ORDER_JET_H
#define ORDER_JET_H
#include "tacet/order.h"

typedef struct {
    double value, slope, curvature; // over the phase x of line 1, x = angle / revolutions
} jet;

// At phase x, summed over all lines.
jet jet_at(const tacet_spectrum *s, double x);

#endif
