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
    bool has_body, held; // held: the mounts keep it from moving away
    tacet_body_modes body;
    double sag[6], turn[6], roll_axis[3]; // under its weight; under 1 N m about the crank
} modes;

int modes_find_body(modes *m); // where the study has one
int modes_write_body(const cli_call *call, const modes *m);
void modes_body_json(tacet_json *j, const modes *m);
int modes_write_text(const cli_call *call, const modes *m);
int modes_write_csv(const cli_call *call, const modes *m); // one row a mode
int modes_write_json(const modes *m);

#endif
