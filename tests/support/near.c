#include "near.h"
#include <math.h>
#include <stdlib.h>

// TEST_ONLY=test_name in the environment runs that test of a program alone ('*' and '?' allowed).
__attribute__((constructor)) static void choose_tests(void)
{
    cmocka_set_test_filter(getenv("TEST_ONLY"));
}

void near_check(double got, double expected, double atol, double rtol, const char *what,
                const char *file, int line)
{
    double allowed = atol + rtol * fabs(expected);
    if (fabs(got - expected) <= allowed) return;
    print_error("%s = %.17g, expected %.17g within %.3g (difference %.3g)\n", what, got, expected,
                allowed, got - expected);
    _fail(file, line);
}
