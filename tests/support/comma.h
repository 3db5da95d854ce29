// A process whose locale writes numbers with a decimal comma.
#ifndef TEST_COMMA_H
#define TEST_COMMA_H
#include <stdbool.h>

// Switches to a German locale, compiled on the spot if the machine has none ready. False: there is
// none to be had. comma_end returns to the C locale.
bool comma_begin(void);
void comma_end(void);
#endif
