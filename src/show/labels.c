// Which labels fit, and where.
#include "show/canvas.h"
#include <math.h>

// Order of places by value: a plain insertion sort, n is a few dozen.
static void sort_by(size_t n, const double *value, size_t *order)
{
    for (size_t i = 0; i < n; i++) {
        size_t k = i;
        for (; k > 0 && value[order[k - 1]] > value[i]; k--)
            order[k] = order[k - 1];
        order[k] = i;
    }
}

// Groups of neighbours that would touch are centred on where they wanted to be, wishes rising.
static void centre_groups(size_t n, const double *wish, double pitch, double *place)
{
    for (size_t first = 0; first < n;) {
        size_t last = first;
        double sum = wish[first];
        for (;;) {
            double centre = sum / (double)(last - first + 1);
            double end = centre + pitch * (double)(last - first) / 2;
            if (last + 1 == n || wish[last + 1] - end >= pitch) break;
            sum += wish[++last];
        }
        double start = sum / (double)(last - first + 1) - pitch * (double)(last - first) / 2;
        for (size_t i = first; i <= last; i++)
            place[i] = start + pitch * (double)(i - first);
        first = last + 1;
    }
}

// Upwards for the pitch and the low end, downwards for the high end.
static void push_inside(size_t n, double pitch, double low, double high, double *place)
{
    double edge = low;
    for (size_t i = 0; i < n; i++) {
        if (place[i] < edge) place[i] = edge;
        edge = place[i] + pitch;
    }
    edge = high;
    for (size_t i = n; i-- > 0;) {
        if (place[i] > edge) place[i] = edge;
        edge = place[i] - pitch;
    }
}

bool canvas_spread(size_t n, double *at, double pitch, double low, double high)
{
    size_t order[CANVAS_SPREAD_MOST];
    double wish[CANVAS_SPREAD_MOST], place[CANVAS_SPREAD_MOST];
    if (n == 0) return true;
    if (n > CANVAS_SPREAD_MOST || pitch * (double)(n - 1) > high - low) return false;
    sort_by(n, at, order);
    for (size_t i = 0; i < n; i++)
        wish[i] = at[order[i]];
    centre_groups(n, wish, pitch, place);
    push_inside(n, pitch, low, high, place);
    for (size_t i = 0; i < n; i++)
        at[order[i]] = place[i];
    return true;
}

// Does label a come before b? The first of equal ones does.
static bool heavier(const double *weight, size_t a, size_t b)
{
    return weight[a] != weight[b] ? weight[a] > weight[b] : a < b;
}

size_t canvas_thin(size_t n, const double *at, const double *half, const double *weight, bool *keep)
{
    size_t kept = 0, last = n; // n: none yet
    for (size_t i = 0; i < n; i++)
        keep[i] = false;
    for (size_t round = 0; round < n; round++) {
        size_t next = n;
        for (size_t i = 0; i < n; i++)
            if ((last == n || heavier(weight, last, i)) && (next == n || heavier(weight, i, next)))
                next = i;
        if (next == n) break;
        bool fits = true;
        for (size_t i = 0; i < n && fits; i++)
            if (keep[i]) fits = fabs(at[i] - at[next]) >= half[i] + half[next];
        keep[next] = fits;
        kept += fits;
        last = next;
    }
    return kept;
}
