// What tacet check says of a study that holds. Private to cli.
#ifndef CLI_CHECK_H
#define CLI_CHECK_H
#include "cli/cli.h"

typedef struct {
    const cli_session *s;
    double inertia_kgm2, reciprocating_kgm2; // of the whole train at the crank, with the second
    cli_order *order;
    size_t n_orders;
    unsigned *revolutions; // distinct repeats of the candidates, rising
    size_t n_revolutions, n_candidates, n_refused;
} check_model;
int check_gather(const cli_session *s, check_model *m);
void check_write_text(const check_model *m);
void check_put_json(tacet_json *j, const check_model *m); // members of an open object

#endif
