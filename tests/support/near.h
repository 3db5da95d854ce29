// Assertions that cmocka lacks. cmocka's own float comparison is single precision and lets NaN
// pass.
#ifndef TEST_NEAR_H
#define TEST_NEAR_H
// clang-format off
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <setjmp.h>
#include <cmocka.h>
// clang-format on

void near_check(double got, double expected, double atol, double rtol, const char *what,
                const char *file, int line);
// Fails unless |got - expected| <= atol + rtol |expected|; NaN fails.
#define assert_near(got, expected, atol, rtol)                                                     \
    near_check((got), (expected), (atol), (rtol), #got, __FILE__, __LINE__)
// Runs the group; one closing line "N passed, N failed" is printed by tests/run.sh from the exit
// codes.
#define TEST_MAIN(tests)                                                                           \
    int main(void)                                                                                 \
    {                                                                                              \
        return cmocka_run_group_tests(tests, NULL, NULL);                                          \
    }
#endif
