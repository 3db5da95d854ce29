#include "near.h"
#include <math.h>

void near_check(double got, double expected, double atol, double rtol, const char *what,
                const char *file, int line)
{
    double allowed = atol + rtol * fabs(expected);
    if (fabs(got - expected) <= allowed) return;
    print_error("%s = %.17g, expected %.17g within %.3g (difference %.3g)\n", what, got, expected,
                allowed, got - expected);
    _fail(file, line);
}
