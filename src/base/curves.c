#include "tacet/base.h"
#include <math.h>

double tacet_curve_at(const tacet_curve *c, double x)
{
    if (c->n == 0 || isnan(x)) return NAN;
    if (x <= c->x[0]) return c->y[0];
    size_t low = 0, high = c->n - 1;
    if (x >= c->x[high]) return c->y[high];
    while (high - low > 1) {
        size_t middle = low + (high - low) / 2;
        if (c->x[middle] <= x)
            low = middle;
        else
            high = middle;
    }
    double share = (x - c->x[low]) / (c->x[high] - c->x[low]);
    return c->y[low] + share * (c->y[high] - c->y[low]);
}
