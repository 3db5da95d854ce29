// Which orders of the mount forces tacet point shows.
#include "cli/point_body.h"
#include <math.h>
#include <string.h>

#define LEAST_SHOWN 1e-3 // of the largest force: below, a row of zeros says nothing

static double largest_on(const point_body *b, size_t line)
{
    double most = 0;
    for (size_t i = 0; i < b->n_forces; i++)
        most = fmax(most, cabs(b->force[i].line[line]));
    return most;
}

// The lines of the largest forces, the largest first.
static size_t pick_lines(const point_body *b, size_t line[POINT_ORDERS_SHOWN])
{
    size_t n = 0;
    double size[POINT_ORDERS_SHOWN];
    for (size_t h = 1; h <= b->n_lines; h++) {
        double most = largest_on(b, h);
        size_t at = n;
        while (at > 0 && size[at - 1] < most)
            at--;
        if (at == POINT_ORDERS_SHOWN || !(most > 0)) continue;
        n = n < POINT_ORDERS_SHOWN ? n + 1 : n;
        memmove(&size[at + 1], &size[at], (n - 1 - at) * sizeof *size);
        memmove(&line[at + 1], &line[at], (n - 1 - at) * sizeof *line);
        size[at] = most;
        line[at] = h;
    }
    while (n > 0 && size[n - 1] < LEAST_SHOWN * size[0])
        n--;
    return n;
}

static double largest_of(const point_body *b, const size_t *column, size_t n, size_t line)
{
    double most = 0;
    for (size_t i = 0; i < n; i++)
        most = fmax(most, cabs(b->force[column[i]].line[line]));
    return most;
}

size_t point_pick_lines(const point_body *b, const size_t *column, size_t n,
                        size_t line[POINT_ORDERS_SHOWN])
{
    size_t all = pick_lines(b, line), kept = 0;
    double least = all ? LEAST_SHOWN * largest_on(b, line[0]) : 0;
    for (size_t k = 0; k < all; k++)
        if (largest_of(b, column, n, line[k]) >= least) line[kept++] = line[k];
    return kept;
}
