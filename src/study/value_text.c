// Values as the file could hold them.
#include "walk.h"
#include <math.h>
#include <stdio.h>
#include <string.h>

#define DIGITS     12 // hides what converting to SI and back leaves in the last places
#define LONG_RANGE 4  // equal steps from this many values on are written from:to:step

typedef struct {
    char *out;
    size_t used, bytes;
    bool full;
} writer;

static void put(writer *w, const char *text)
{
    size_t n = strlen(text);
    if (w->full) return;
    if (w->used + n + 4 > w->bytes) {
        strcpy(w->out + w->used, " ..");
        w->full = true;
        return;
    }
    memcpy(w->out + w->used, text, n + 1);
    w->used += n;
}

static void put_number(writer *w, double value)
{
    char text[TACET_NUMBER_TEXT];
    put(w, isnan(value) ? "" : tacet_number_format_short(value, DIGITS, text));
}

static bool equal_steps(const double *value, size_t n)
{
    double step = (value[n - 1] - value[0]) / (double)(n - 1);
    for (size_t i = 0; i < n; i++)
        if (fabs(value[i] - value[0] - step * (double)i) > 1e-9 * fabs(step)) return false;
    return step != 0;
}

static void put_numbers(writer *w, const double *value, size_t n, double factor)
{
    if (n >= LONG_RANGE && equal_steps(value, n)) {
        put_number(w, value[0] / factor);
        put(w, ":");
        put_number(w, value[n - 1] / factor);
        put(w, ":");
        put_number(w, (value[n - 1] - value[0]) / (double)(n - 1) / factor);
        return;
    }
    put(w, "[");
    for (size_t i = 0; i < n && !w->full; i++) {
        if (i) put(w, ", ");
        put_number(w, value[i] / factor);
    }
    put(w, "]");
}

static void put_curve(writer *w, const tacet_curve *c, double factor)
{
    if (c->n == 1 && c->x[0] == 0) {
        put_number(w, c->y[0] / factor);
        return;
    }
    put(w, "[");
    for (size_t i = 0; i < c->n && !w->full; i++) {
        put(w, i ? ", [" : "[");
        put_number(w, c->x[i]);
        put(w, ", ");
        put_number(w, c->y[i] / factor);
        put(w, "]");
    }
    put(w, "]");
}

static void put_list(writer *w, const tacet_field *field, const void *at, size_t n)
{
    char text[24];
    put(w, "[");
    for (size_t i = 0; i < n && !w->full; i++) {
        if (i) put(w, ", ");
        if (field->kind == TACET_FIELD_COUNTS) {
            snprintf(text, sizeof text, "%u", (*(unsigned *const *)at)[i]);
            put(w, text);
        } else {
            put(w, (*(const char **const *)at)[i]);
        }
    }
    put(w, "]");
}

static size_t count_of(const tacet_field *field, const char *base)
{
    return *(const size_t *)(const void *)(base + field->count_offset);
}

void value_text(const tacet_field *field, const void *owner, char *out, size_t bytes)
{
    writer w = {out, 0, bytes, false};
    const char *base = owner;
    const void *at = base + field->offset;
    double factor = tacet_unit_factor(field->unit);
    char text[48];
    out[0] = '\0';
    switch (field->kind) {
    case TACET_FIELD_NUMBER:
        put_number(&w, *(const double *)at / factor);
        break;
    case TACET_FIELD_CURVE:
        if (((const tacet_curve *)at)->n) put_curve(&w, at, factor);
        break;
    case TACET_FIELD_COUNT:
        snprintf(text, sizeof text, "%u", *(const unsigned *)at);
        put(&w, text);
        break;
    case TACET_FIELD_CHOICE:
        if (*(const int *)at >= 0) put(&w, field->choices[*(const int *)at]);
        break;
    case TACET_FIELD_TEXT:
    case TACET_FIELD_NAME:
        if (*(const char *const *)at) put(&w, *(const char *const *)at);
        break;
    case TACET_FIELD_NUMBERS:
        if (count_of(field, base))
            put_numbers(&w, *(double *const *)at, count_of(field, base), factor);
        else if (field->word)
            put(&w, field->word);
        break;
    case TACET_FIELD_COUNTS:
    case TACET_FIELD_TEXTS:
        if (count_of(field, base))
            put_list(&w, field, at, count_of(field, base));
        else if (field->word)
            put(&w, field->word);
        break;
    case TACET_FIELD_SECTIONS:
        if (!count_of(field, base)) break;
        snprintf(text, sizeof text, "%zu", count_of(field, base));
        put(&w, text);
        break;
    case TACET_FIELD_SECTION:
        break;
    }
}
