// One condition in full: what tacet point finds and how it is written. Private to cli.
#ifndef CLI_POINT_H
#define CLI_POINT_H
#include "cli/cli.h"
#include "cli/scatter.h"

typedef struct { // lines of one quantity, of the condition and of all-fire
    tacet_quantity_ref of;
    const char *name; // "link-torque:coupling"
    bool reference;   // all-fire is known
    double mean, pp, reference_mean, reference_pp;
    size_t n;
    double *order, *amplitude, *phase_deg; // [n]; amplitude: peak
    double *reference_amplitude;           // [n]; 0: all-fire has no such order
} point_quantity;

typedef struct point_body point_body; // point_body.h
#define POINT_EXPOSURE_H 8            // hours without a break that a vibration dose is told for

typedef struct {
    const cli_call *call;
    const cli_session *s;
    const tacet_candidate *candidate;
    tacet_level level;
    size_t placement; // the worst one
    tacet_condition condition;
    tacet_row row, all_fire;
    point_quantity *quantity; // what bands and limits judge, and roll torque
    size_t n_quantities;      // 0: not solved
    tacet_one_dead one_dead;
    point_body *body; // NULL: the study has none
    bool refereed;
    tacet_status referee_status;
    tacet_agreement agreement;
    cli_scatter scatter;
} point;

// Solves every placement and keeps the worst, with the lines of every quantity beside all-fire's.
int point_solve(point *p);
// Band levels of all-fire and with one cylinder dead, beside the condition's.
double point_all_fire_level(const point *p, size_t band); // NAN: not known
void point_write_one_dead(const point *p);
void point_one_dead_json(tacet_json *j, const point *p);
int point_write_text(const point *p);
int point_write_csv(const point *p); // a line of a quantity a row
int point_write_json(const point *p, FILE *to);
// All lines as data (most 0), or the `most` largest of each quantity for reading.
const tacet_table *point_lines(const point *p, size_t most, cli_rows *rows);
int point_save(point *p, const char *path); // drawings, lines.csv, point.json into a folder
const char *point_headline(const point *p);
double point_reachable_Nm(const point *p); // nearest to an unreachable demand; NAN: not that case

#endif
