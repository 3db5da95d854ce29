// What of a condition reaches mounts and people, for tacet point. Private to cli.
#ifndef CLI_POINT_BODY_H
#define CLI_POINT_BODY_H
#include "cli/point.h"
#include <complex.h>

typedef struct { // force of a mount along one of its axes
    size_t mount;
    int axis;
    double static_N, rms_N, pp_N, largest_N; // rms and largest: of the lines
    double complex *line;                    // [n_lines + 1]
} point_force;
typedef struct { // a path's share of its point's leading line
    size_t path;
    double complex value;
    double share; // of 1
} point_path;
typedef struct { // what arrives at a point
    const char *name, *unit;
    double rms, all_fire_rms; // of all lines; NAN: all-fire is not known
    size_t leading;           // line; 0: nothing arrives
    double complex sum;       // of that line
    point_path *path;         // [n_paths] the largest share first
    size_t n_paths;
    bool felt; // an acceleration with weighting wk or wd: comfort holds
    tacet_comfort comfort;
} point_arrival;
typedef struct {         // the largest line of the forces, or of the moments
    size_t member, line; // line 0: balanced
    double peak;
} point_shaking;
struct point_body {
    const tacet_body_def *def;
    unsigned revolutions;
    size_t n_lines, n_forces, n_arrivals; // no lines: not solved
    point_force *force;                   // [n_forces] by mount, then axis
    point_arrival *arrival;               // [n_arrivals]
    point_shaking shaking[2];             // force, moment
};

const char *point_order(const point *p, size_t line); // "9/7": a line of the repeat; line 0: "0"
double point_hz(const point *p, size_t line);

int point_body_start(point *p);     // nothing without a body
void point_body_all_fire(point *p); // all-fire is the condition last solved
int point_body_take(point *p);      // the condition itself is
#define POINT_ORDERS_SHOWN 10
// The lines of the largest forces of all mounts, the largest first, that are something in these
// columns (indices of forces).
size_t point_pick_lines(const point_body *b, const size_t *column, size_t n,
                        size_t line[POINT_ORDERS_SHOWN]);
int point_write_mounts(const point *p);
int point_write_people(const point *p);
void point_body_json(tacet_json *j, const point *p);

#endif
