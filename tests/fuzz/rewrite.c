// A study written out from the structs that it was read into, by the field tables alone: in flow
// style, texts in quotes, only keys that the file gave.
#include "fuzz.h"

#define MOST_BYTES ((size_t)1 << 18)
#define TOLERANCE  1e-13
#define APART      1e-12 // numbers of a list that lie closer together are one number in 15 digits

typedef struct {
    FILE *to;
    bool *given; // [n] by place in the table's order: did the file give it
    size_t n, most, at;
    bool near; // numbers lie too close together
} writer;

static void keep_given(void *who, const char *path, const char *value, const char *unit,
                       tacet_from from)
{
    writer *w = who;
    REQUIRE(*path && value && unit && strlen(value) < 1024);
    REQUIRE(from != TACET_FROM_DEFAULT || !strstr(value, "null"));
    if (w->n == w->most) {
        w->most = w->most ? 2 * w->most : 256;
        w->given = realloc(w->given, w->most * sizeof *w->given);
        REQUIRE(w->given);
    }
    w->given[w->n++] = from == TACET_FROM_FILE;
}

static size_t count_of(const tacet_field *field, const char *owner)
{
    return *(const size_t *)(const void *)(owner + field->count_offset);
}

// The code of the letter at *at, which is good UTF-8, and a step behind it.
static unsigned long next_letter(const unsigned char **at)
{
    const unsigned char *c = *at;
    unsigned more = c[0] < 0x80 ? 0 : c[0] < 0xe0 ? 1 : c[0] < 0xf0 ? 2 : 3;
    unsigned long code = more ? c[0] & (0x3fu >> more) : c[0];
    for (unsigned i = 1; i <= more; i++)
        code = code << 6 | (c[i] & 0x3fu);
    *at += more + 1;
    return code;
}

static void put_text(writer *w, const char *text)
{
    REQUIRE(fuzz_is_utf8(text));
    fputc('"', w->to);
    for (const unsigned char *at = (const unsigned char *)text; *at;) {
        unsigned long code = next_letter(&at);
        if (code < 0x20 || code > 0x7e || code == '"' || code == '\\')
            fprintf(w->to, "\\U%08lX", code);
        else
            fputc((int)code, w->to);
    }
    fputc('"', w->to);
}

static void put_numbers(writer *w, const double *value, size_t n, double factor)
{
    fputc('[', w->to);
    for (size_t i = 0; i < n; i++) {
        fprintf(w->to, "%s%.15g", i ? ", " : "", value[i] / factor);
        if (i && fabs(value[i] - value[i - 1]) < APART * fabs(value[i])) w->near = true;
    }
    fputc(']', w->to);
}

static void put_curve(writer *w, const tacet_curve *c, double factor)
{
    fputc('[', w->to);
    for (size_t i = 0; i < c->n; i++)
        fprintf(w->to, "%s[%.17g, %.15g]", i ? ", " : "", c->x[i], c->y[i] / factor);
    fputc(']', w->to);
}

static void put_section(writer *w, const tacet_section *s, const char *owner);

static void put_things(writer *w, const tacet_field *field, const char *owner)
{
    const char *things = *(const char *const *)(const void *)(owner + field->offset);
    size_t n = count_of(field, owner);
    fputc('[', w->to);
    for (size_t i = 0; i < n; i++) {
        if (i) fputs(",\n  ", w->to);
        put_section(w, field->section, things + i * field->section->size);
    }
    fputc(']', w->to);
}

static void put_list(writer *w, const tacet_field *field, const char *owner)
{
    const void *at = owner + field->offset;
    size_t n = count_of(field, owner);
    if (n == 0) {
        fputs(field->word ? field->word : "[]", w->to);
        return;
    }
    if (field->kind == TACET_FIELD_NUMBERS) {
        put_numbers(w, *(double *const *)at, n, tacet_unit_factor(field->unit));
        return;
    }
    fputc('[', w->to);
    for (size_t i = 0; i < n; i++) {
        if (i) fputs(", ", w->to);
        if (field->kind == TACET_FIELD_COUNTS)
            fprintf(w->to, "%u", (*(unsigned *const *)at)[i]);
        else
            put_text(w, (*(const char **const *)at)[i]);
    }
    fputc(']', w->to);
}

static void put_value(writer *w, const tacet_field *field, const char *owner)
{
    const void *at = owner + field->offset;
    double factor = tacet_unit_factor(field->unit);
    fprintf(w->to, "\"%s\": ", field->key);
    switch (field->kind) {
    case TACET_FIELD_NUMBER:
        fprintf(w->to, "%.15g", *(const double *)at / factor);
        break;
    case TACET_FIELD_CURVE:
        put_curve(w, at, factor);
        break;
    case TACET_FIELD_COUNT:
        fprintf(w->to, "%u", *(const unsigned *)at);
        break;
    case TACET_FIELD_CHOICE:
        REQUIRE(*(const int *)at >= 0);
        fputs(field->choices[*(const int *)at], w->to);
        break;
    case TACET_FIELD_TEXT:
    case TACET_FIELD_NAME:
        put_text(w, *(const char *const *)at);
        break;
    case TACET_FIELD_SECTION:
        put_section(w, field->section, at);
        break;
    case TACET_FIELD_SECTIONS:
        put_things(w, field, owner);
        break;
    default:
        put_list(w, field, owner);
    }
}

// Keys in it that the file gave: a section of none is left out, since an empty one may say more.
static bool any_given(const tacet_section *s, const bool *given, size_t *at)
{
    bool any = false;
    for (const tacet_field *field = s->fields; field->key; field++)
        if (field->kind == TACET_FIELD_SECTION)
            any = any_given(field->section, given, at) || any;
        else
            any = given[(*at)++] || any; // no section of our tables holds lists of sections below
    return any;
}

// A section that asks for keys and may be left out is absent as a whole.
static bool is_left_out(const tacet_field *field, const char *at)
{
    if (!field->fallback) return false;
    for (const tacet_field *key = field->section->fields; key->key; key++)
        if (!key->fallback && key->kind == TACET_FIELD_NUMBER)
            return isnan(*(const double *)(const void *)(at + key->offset));
    return false;
}

static bool is_given(writer *w, const tacet_field *field, const char *owner, bool root)
{
    if (field->kind != TACET_FIELD_SECTION) return w->given[w->at++];
    size_t at = w->at;
    if (root && !is_left_out(field, owner + field->offset)) return true;
    if (any_given(field->section, w->given, &at)) return true;
    w->at = at;
    return false;
}

static void put_section(writer *w, const tacet_section *s, const char *owner)
{
    bool root = s == tacet_study_keys(), first = true;
    fputc('{', w->to);
    for (const tacet_field *field = s->fields; field->key; field++) {
        if (is_given(w, field, owner, root)) {
            fputs(first ? "" : root ? ",\n" : ", ", w->to);
            put_value(w, field, owner);
            first = false;
        }
    }
    fputc('}', w->to);
}

const char *fuzz_rewrite(const tacet_study *s, tacet_arena *a)
{
    char *text = NULL;
    size_t bytes = 0;
    writer w = {.to = open_memstream(&text, &bytes)};
    REQUIRE(w.to);
    REQUIRE(tacet_study_values(s, keep_given, &w) == TACET_OK);
    put_section(&w, tacet_study_keys(), (const char *)s);
    REQUIRE(w.at == w.n);
    fclose(w.to);
    const char *out = bytes <= MOST_BYTES && !w.near ? tacet_arena_text(a, text) : NULL;
    free(text);
    free(w.given);
    return out;
}

// ---- equal values
static void same_number(double a, double b)
{
    REQUIRE(isnan(a) == isnan(b));
    REQUIRE(isnan(a) || fabs(a - b) <= TOLERANCE * fmax(fabs(a), fabs(b)));
}

static void same_text(const char *a, const char *b)
{
    REQUIRE((a == NULL) == (b == NULL));
    REQUIRE(!a || strcmp(a, b) == 0);
}

static void same_section(const tacet_section *s, const char *a, const char *b);

static void same_list(const tacet_field *field, const char *a, const char *b)
{
    size_t n = count_of(field, a), size = field->section ? field->section->size : 0;
    REQUIRE(n == count_of(field, b));
    const void *x = a + field->offset, *y = b + field->offset;
    for (size_t i = 0; i < n; i++) {
        if (field->kind == TACET_FIELD_NUMBERS)
            same_number((*(double *const *)x)[i], (*(double *const *)y)[i]);
        else if (field->kind == TACET_FIELD_COUNTS)
            REQUIRE((*(unsigned *const *)x)[i] == (*(unsigned *const *)y)[i]);
        else if (field->kind == TACET_FIELD_TEXTS)
            same_text((*(const char **const *)x)[i], (*(const char **const *)y)[i]);
        else
            same_section(field->section, *(const char *const *)x + i * size,
                         *(const char *const *)y + i * size);
    }
}

static void same_curve(const tacet_curve *a, const tacet_curve *b)
{
    REQUIRE(a->n == b->n);
    for (size_t i = 0; i < a->n; i++) {
        same_number(a->x[i], b->x[i]);
        same_number(a->y[i], b->y[i]);
    }
}

static void same_section(const tacet_section *s, const char *a, const char *b)
{
    for (const tacet_field *field = s->fields; field->key; field++) {
        const void *x = a + field->offset, *y = b + field->offset;
        switch (field->kind) {
        case TACET_FIELD_NUMBER:
            same_number(*(const double *)x, *(const double *)y);
            break;
        case TACET_FIELD_CURVE:
            same_curve(x, y);
            break;
        case TACET_FIELD_COUNT:
            REQUIRE(*(const unsigned *)x == *(const unsigned *)y);
            break;
        case TACET_FIELD_CHOICE:
            REQUIRE(*(const int *)x == *(const int *)y);
            break;
        case TACET_FIELD_TEXT:
        case TACET_FIELD_NAME:
            same_text(*(const char *const *)x, *(const char *const *)y);
            break;
        case TACET_FIELD_SECTION:
            same_section(field->section, x, y);
            break;
        default:
            same_list(field, a, b);
        }
    }
}

void fuzz_same(const tacet_study *a, const tacet_study *b)
{
    same_section(tacet_study_keys(), (const char *)a, (const char *)b);
}

// ---- finite values
static void finite_section(const tacet_section *s, const char *owner)
{
    for (const tacet_field *field = s->fields; field->key; field++) {
        const void *at = owner + field->offset;
        const char *const *things = at;
        const tacet_curve *c = at;
        switch (field->kind) {
        case TACET_FIELD_NUMBER:
            REQUIRE(isfinite(*(const double *)at) || (field->fallback && !*field->fallback));
            REQUIRE(!isinf(*(const double *)at));
            break;
        case TACET_FIELD_CURVE:
            REQUIRE(c->n || (field->fallback && !*field->fallback));
            for (size_t i = 0; i < c->n; i++)
                REQUIRE(isfinite(c->x[i]) && isfinite(c->y[i]) && (!i || c->x[i] > c->x[i - 1]));
            break;
        case TACET_FIELD_NUMBERS:
            for (size_t i = 0; i < count_of(field, owner); i++)
                REQUIRE(isfinite((*(double *const *)at)[i]));
            break;
        case TACET_FIELD_SECTION:
            if (!is_left_out(field, at)) finite_section(field->section, at);
            break;
        case TACET_FIELD_SECTIONS:
            for (size_t i = 0; i < count_of(field, owner); i++)
                finite_section(field->section, *things + i * field->section->size);
            break;
        default:
            break;
        }
    }
}

void fuzz_finite(const tacet_study *s)
{
    finite_section(tacet_study_keys(), (const char *)s);
}
