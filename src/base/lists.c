#include "tacet/base.h"
#include <math.h>
#include <string.h>

// A range reaches `to` when it comes this near to it, in steps: rounding of decimal steps such as
// 0.1 must not lose the last value.
#define STEP_SLACK 1e-6

typedef struct {
    const char *text;
    size_t most;
    double *value; // [most] or fewer: NULL while counting
    size_t n;
    tacet_error *e;
} list;

static tacet_status refuse(const list *l, const char *at, const char *what)
{
    tacet_fail(l->e, TACET_BAD_INPUT, "%s", what);
    if (l->e) l->e->column = (int)(at - l->text) + 1;
    return TACET_BAD_INPUT;
}

static bool blank(char c)
{
    return c == ' ' || c == '\t';
}

// A number from `from` up to `end`, blanks around it passed over.
static bool number_between(const char *from, const char *end, double *out)
{
    char word[TACET_NUMBER_TEXT * 2];
    while (from < end && blank(*from))
        from++;
    while (end > from && blank(end[-1]))
        end--;
    size_t n = (size_t)(end - from);
    if (n == 0 || n >= sizeof word) return false;
    memcpy(word, from, n);
    word[n] = '\0';
    return tacet_number_parse(word, out);
}

static tacet_status put(list *l, const char *at, double value)
{
    if (l->n == l->most) {
        char text[120];
        tacet_text(text, sizeof text, "more than %zu values in this list", l->most);
        return refuse(l, at, text);
    }
    if (l->value) l->value[l->n] = value;
    l->n++;
    return TACET_OK;
}

static tacet_status put_range(list *l, const char *at, const double r[3])
{
    double from = r[0], to = r[1], step = r[2], steps = step == 0 ? NAN : (to - from) / step;
    if (!(isfinite(steps) && steps >= 0))
        return refuse(l, at,
                      "this range never ends; the step of from:to:step leads from the "
                      "first value to the second");
    size_t count = steps < (double)l->most ? (size_t)floor(steps + STEP_SLACK) + 1 : l->most + 1;
    for (size_t i = 0; i < count; i++) {
        bool last = (double)i > steps - STEP_SLACK; // the same slack as in the count
        tacet_status status = put(l, at, last ? to : from + (double)i * step);
        if (status) return status;
    }
    return TACET_OK;
}

// One item between commas.
static tacet_status item(list *l, const char *from, const char *end)
{
    double part[3];
    size_t n = 0;
    const char *at = from;
    while (from < end && blank(*at) && at < end)
        at++;
    for (const char *start = from;; n++) {
        const char *colon = memchr(start, ':', (size_t)(end - start));
        if (n == 3) return refuse(l, start, "more than from:to:step");
        if (!number_between(start, colon ? colon : end, &part[n])) {
            while (start < end && blank(*start))
                start++;
            return refuse(l, start,
                          "not a number; allowed are numbers as 1.5, and from:to:step, "
                          "between commas");
        }
        if (!colon) break;
        start = colon + 1;
    }
    if (n == 1) return refuse(l, at, "from:to without a step; a range is from:to:step");
    return n == 0 ? put(l, at, part[0]) : put_range(l, at, part);
}

static tacet_status walk(list *l)
{
    l->n = 0;
    for (const char *from = l->text;;) {
        const char *comma = strchr(from, ','), *end = comma ? comma : from + strlen(from);
        tacet_status status = item(l, from, end);
        if (status || !comma) return status;
        from = comma + 1;
    }
}

tacet_status tacet_list_parse(const char *text, size_t most, tacet_arena *a, double **out,
                              size_t *n, tacet_error *e)
{
    list l = {.text = text, .most = most, .e = e};
    tacet_status status = walk(&l);
    if (status) return status;
    l.value = tacet_arena_alloc(a, l.n * sizeof *l.value);
    if (!l.value) return tacet_fail(e, TACET_NO_MEMORY, "no memory for a list");
    status = walk(&l);
    *out = l.value;
    *n = l.n;
    return status;
}
