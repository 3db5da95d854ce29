// What tacet modes found and how it is written. Private to cli.
#ifndef CLI_MODES_H
#define CLI_MODES_H
#include "cli/cli.h"

typedef struct {
    const cli_session *s;
    const tacet_train *train;
    size_t n;
    double *hz, *shape; // [n], [n * n]
    cli_order *order;
    size_t n_orders;
} modes;

int modes_write_text(const cli_call *call, const modes *m);
int modes_write_csv(const cli_call *call, const modes *m); // one row a mode
int modes_write_json(const modes *m);

#endif
