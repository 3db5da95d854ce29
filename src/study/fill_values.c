#include "fill.h"
#include <ctype.h>
#include <limits.h>
#include <math.h>
#include <string.h>

#define LONGEST_NAME      63
#define LONGEST_FILE_TEXT 4096

// "bore_mm is", or of one value in a list "firing_order holds", into out.
#define SUBJECT_TEXT 96
static const char *key_is(const filler *f, char out[SUBJECT_TEXT])
{
    const char *dot = strrchr(f->path, '.'), *key = dot ? dot + 1 : f->path;
    size_t letters = strcspn(key, "[");
    return tacet_text(out, SUBJECT_TEXT, "%.*s %s", letters < 80 ? (int)letters : 80, key,
                      key[letters] ? "holds" : "is");
}

static const char *key_of(const filler *f, char out[SUBJECT_TEXT])
{
    key_is(f, out);
    out[strcspn(out, " ")] = '\0';
    return out;
}

// ---- numbers
// "a number in mm, 20 to 1000 mm" into out
static const char *needed(const tacet_field *field, const char *what, char out[160])
{
    char unit[32], range[RANGE_TEXT];
    bool ranged = *range_text(field, NAN, range);
    bool united = *unit_text(field->unit, unit);
    if (ranged) return tacet_text(out, 160, "%s is needed, %s", what, range);
    return tacet_text(out, 160, "%s%s%s is needed", what, united ? " in" : "", unit);
}

// Is this a number with its unit behind it, as "100 mm", "100mm" or "5 %"?
static bool has_unit(const char *text)
{
    size_t n = strspn(text, "+-.0123456789"), blanks = strspn(text + n, " ");
    const char *rest = text + n + blanks;
    char word[TACET_NUMBER_TEXT];
    double value;
    if (n == 0 || n >= sizeof word || (!isalpha((unsigned char)*rest) && *rest != '%'))
        return false;
    if (!blanks && strcspn(rest, "0123456789") != strlen(rest)) return false; // 0x64, 1e999
    memcpy(word, text, n);
    word[n] = '\0';
    return tacet_number_parse(word, &value);
}

static void refuse_number(filler *f, const tacet_field *field, const tree_node *node,
                          const char *what)
{
    char text[SHOWN_TEXT], want[160], point[SHOWN_TEXT], unit[32], subject[SUBJECT_TEXT];
    const char *is = key_is(f, subject), *shown = shown_node(node, text);
    place at = node_place(node);
    needed(field, what, want);
    bool is_text = node->kind == TREE_TEXT;
    const char *meant = is_text ? decimal_comma(node, false, point) : NULL;
    if (node_is_nothing(node))
        fill_say(f, false, at, "%s has no value; %s", key_of(f, subject), want);
    else if (meant)
        fill_say(f, false, at, "%s %s; numbers take a decimal point: %s", is, shown, meant);
    else if (is_text && has_unit(node->text))
        fill_say(f, false, at, "%s %s; write the number alone%s%s", is, shown,
                 *unit_text(field->unit, unit) ? ", it is in" : "", unit);
    else
        fill_say(f, false, at, "%s %s; %s", is, shown, want);
}

// meant: a number that a decimal comma has split, or NULL.
static bool check_range(filler *f, const tacet_field *field, place at, double value,
                        const char *meant)
{
    char number[TACET_NUMBER_TEXT], range[RANGE_TEXT], unit[32], subject[SUBJECT_TEXT];
    if (field->low == 0 && field->high == 0) return true;
    if (value >= field->low && value <= field->high) return true;
    fill_say(f, false, at, "%s %s%s; allowed are %s%s%s", key_is(f, subject),
             tacet_number_format_short(value, 6, number), unit_text(field->unit, unit),
             range_text(field, value, range), meant ? "; numbers take a decimal point: " : "",
             meant ? meant : "");
    return false;
}

static bool read_number(filler *f, const tacet_field *field, const tree_node *node, double *out)
{
    double value;
    if (node->kind != TREE_TEXT || !tacet_number_parse(node->text, &value)) {
        refuse_number(f, field, node, "a number");
        return false;
    }
    if (!check_range(f, field, node_place(node), value, NULL)) return false;
    *out = value;
    return true;
}

static bool whole(double value)
{
    return value >= 0 && value <= UINT_MAX && value == floor(value);
}

static void fill_count(filler *f, const tacet_field *field, const tree_node *node, unsigned *out)
{
    double value;
    if (node->kind != TREE_TEXT || !tacet_number_parse(node->text, &value) || !whole(value))
        refuse_number(f, field, node, "a whole number");
    else if (check_range(f, field, node_place(node), value, NULL))
        *out = (unsigned)value;
}

// ---- curves
static bool read_point(filler *f, const tacet_field *field, const tree_node *node, double *x,
                       double *y)
{
    char text[SHOWN_TEXT], x_unit[32], y_unit[32], subject[SUBJECT_TEXT], point[SHOWN_TEXT];
    const char *key = key_of(f, subject);
    place at = node_place(node);
    unit_text(field->x_unit, x_unit);
    unit_text(field->unit, y_unit);
    if (node->kind != TREE_LIST) {
        fill_say(f, false, at, "a point of %s is %s; it is a pair [x%s, y%s]", key,
                 shown_node(node, text), x_unit, y_unit);
        return false;
    }
    if (node->n != 2) {
        const char *meant = decimal_comma(node, node->n > 2, point);
        fill_say(f, false, at, "a point of %s holds %zu numbers; it is a pair [x%s, y%s]%s%s", key,
                 node->n, x_unit, y_unit, meant ? "; numbers take a decimal point: " : "",
                 meant ? meant : "");
        return false;
    }
    tacet_field of_x = {.key = field->key, .kind = TACET_FIELD_NUMBER, .unit = field->x_unit};
    return read_number(f, &of_x, node->child[0], x) && read_number(f, field, node->child[1], y);
}

static bool check_rising(filler *f, const tree_node *point, const double *x, size_t i)
{
    char now[TACET_NUMBER_TEXT], before[TACET_NUMBER_TEXT], subject[SUBJECT_TEXT];
    if (i == 0 || x[i] > x[i - 1]) return true;
    fill_say(f, false, node_place(point), "a point of %s at %s after one at %s; points rise in x",
             key_of(f, subject), tacet_number_format_short(x[i], 6, now),
             tacet_number_format_short(x[i - 1], 6, before));
    return false;
}

static bool read_points(filler *f, const tacet_field *field, const tree_node *node, tacet_curve *c)
{
    bool good = true;
    for (size_t i = 0; i < c->n; i++) {
        size_t length = fill_enter_item(f, i);
        bool read = read_point(f, field, node->child[i], &c->x[i], &c->y[i]);
        good = read && good && check_rising(f, node->child[i], c->x, i);
        fill_leave(f, length);
    }
    return good;
}

// Not a curve at all?
static bool refuse_curve(filler *f, const tacet_field *field, const tree_node *node)
{
    char x_unit[32], y_unit[32], subject[SUBJECT_TEXT];
    if (node->kind == TREE_MAP || node_is_nothing(node)) {
        refuse_number(f, field, node, "a number, or a curve [[x, y], ..],");
    } else if (node->kind == TREE_LIST && (node->n == 0 || node->n > FILL_MOST_THINGS)) {
        fill_say(f, false, node_place(node), "%s a curve of %zu points; 1 to %d are allowed",
                 key_is(f, subject), node->n, FILL_MOST_THINGS);
    } else if (node->kind == TREE_LIST && node->child[0]->kind == TREE_TEXT) {
        fill_say(f, false, node_place(node),
                 "%s a list of numbers; one number, or a curve of pairs [[x%s, y%s], ..] is needed",
                 key_is(f, subject), unit_text(field->x_unit, x_unit),
                 unit_text(field->unit, y_unit));
    } else {
        return false;
    }
    return true;
}

static void fill_curve(filler *f, const tacet_field *field, const tree_node *node, tacet_curve *out)
{
    double factor = tacet_unit_factor(field->unit);
    if (refuse_curve(f, field, node)) return;
    size_t n = node->kind == TREE_LIST ? node->n : 1;
    tacet_curve c = {tacet_arena_alloc(f->arena, n * sizeof *c.x),
                     tacet_arena_alloc(f->arena, n * sizeof *c.y), n};
    if (!c.x || !c.y) {
        f->no_memory = true;
        return;
    }
    bool list = node->kind == TREE_LIST;
    if (!(list ? read_points(f, field, node, &c) : read_number(f, field, node, &c.y[0]))) return;
    for (size_t i = 0; i < n; i++)
        c.y[i] *= factor;
    *out = c;
}

// ---- texts
static bool read_text(filler *f, const tree_node *node, const char **out)
{
    char text[SHOWN_TEXT], subject[SUBJECT_TEXT];
    if (node_is_nothing(node)) {
        fill_say(f, false, node_place(node), "%s has no value; a text is needed",
                 key_of(f, subject));
        return false;
    }
    if (node->kind != TREE_TEXT) {
        fill_say(f, false, node_place(node), "%s %s; a text is needed", key_is(f, subject),
                 shown_node(node, text));
        return false;
    }
    if (strlen(node->text) > LONGEST_FILE_TEXT) {
        fill_say(f, false, node_place(node), "%s longer than %d bytes", key_is(f, subject),
                 LONGEST_FILE_TEXT);
        return false;
    }
    *out = node->text;
    return true;
}

// Why a name cannot be one, or NULL.
static const char *name_fault(const char *name)
{
    size_t n = strlen(name);
    if (n == 0) return "a name is needed";
    if (n > LONGEST_NAME) return "a name has at most 63 bytes";
    if (strchr(name, ':')) return "a name holds no ':', which parts a quantity from its target";
    if (isspace((unsigned char)name[0]) || isspace((unsigned char)name[n - 1]))
        return "a name has no blanks at its ends";
    for (const char *c = name; *c; c++)
        if ((unsigned char)*c < 0x20 || *c == 0x7F) return "a name holds no control characters";
    return NULL;
}

static void fill_name(filler *f, const tree_node *node, const char **out)
{
    const char *name = NULL;
    char text[SHOWN_TEXT], subject[SUBJECT_TEXT];
    if (!read_text(f, node, &name)) return;
    const char *fault = name_fault(name);
    if (fault)
        fill_say(f, false, node_place(node), "%s %s; %s", key_is(f, subject),
                 shown_text(name, text), fault);
    else
        *out = name;
}

static void fill_choice(filler *f, const tacet_field *field, const tree_node *node, int *out)
{
    char text[SHOWN_TEXT], list[240], subject[SUBJECT_TEXT];
    size_t n = 0;
    for (; field->choices[n]; n++) {
        if (node->kind != TREE_TEXT || strcmp(field->choices[n], node->text) != 0) continue;
        *out = (int)n;
        return;
    }
    const char *near =
        node->kind == TREE_TEXT ? tacet_near_name(node->text, field->choices, n) : NULL;
    bool nothing = node_is_nothing(node);
    fill_say(f, false, node_place(node), "%s %s; allowed are %s%s%s%s",
             nothing ? key_of(f, subject) : key_is(f, subject),
             nothing ? "has no value" : shown_node(node, text),
             joined(field->choices, n, list, sizeof list), near ? "; did you mean " : "",
             near ? near : "", near ? "?" : "");
}

// ---- lists
typedef struct {
    double *value;
    size_t n;
} part;

// ", or the word all", or ""
static const char *or_word(const tacet_field *field, char out[64])
{
    out[0] = '\0';
    return field->word ? tacet_text(out, 64, ", or the word %.40s", field->word) : out;
}

// Numbers of one text in the list grammar; the place is that of the fault inside the text.
static bool read_part(filler *f, const tacet_field *field, const tree_node *node, part *out)
{
    tacet_error e;
    char text[SHOWN_TEXT], word[64], subject[SUBJECT_TEXT];
    if (node->kind != TREE_TEXT || node_is_nothing(node)) {
        fill_say(f, false, node_place(node), "%s %s; numbers, or from:to:step, are needed%s",
                 key_is(f, subject), shown_node(node, text), or_word(field, word));
        return false;
    }
    tacet_status status =
        tacet_list_parse(node->text, FILL_MOST_VALUES, f->arena, &out->value, &out->n, &e);
    if (status == TACET_NO_MEMORY) f->no_memory = true;
    if (status != TACET_BAD_INPUT) return status == TACET_OK;
    place at = node_place(node);
    if (!node->quoted) at.column += e.column > 0 ? e.column - 1 : 0;
    fill_say(f, false, at, "%s %s: %s%s", key_is(f, subject), shown_text(node->text, text), e.text,
             or_word(field, word));
    return false;
}

// One part with its range checked.
static bool check_part(filler *f, const tacet_field *field, const tree_node *node,
                       const char *meant, part *out)
{
    if (!read_part(f, field, node, out)) return false;
    for (size_t i = 0; i < out->n; i++)
        if (!check_range(f, field, node_place(node), out->value[i], meant)) return false;
    return true;
}

// All parts of a list, in order.
static bool read_parts(filler *f, const tacet_field *field, const tree_node *node, double **value,
                       size_t *n)
{
    bool list = node->kind == TREE_LIST, good = true;
    size_t n_parts = list ? node->n : 1, total = 0;
    char point[SHOWN_TEXT], subject[SUBJECT_TEXT];
    const char *meant = list ? decimal_comma(node, false, point) : NULL;
    part *parts = tacet_arena_alloc(f->arena, n_parts * sizeof *parts);
    // no more is read than may be kept: each part of some bytes may stand for many values
    for (size_t i = 0; parts && i < n_parts && total <= FILL_MOST_VALUES; i++) {
        size_t length = list ? fill_enter_item(f, i) : strlen(f->path);
        good = check_part(f, field, list ? node->child[i] : node, meant, &parts[i]) && good;
        fill_leave(f, length);
        total += parts[i].n;
    }
    if (parts && good && total > FILL_MOST_VALUES) {
        fill_say(f, false, node_place(node), "%s a list of more than %d values", key_is(f, subject),
                 FILL_MOST_VALUES);
        good = false;
    }
    *value = parts && good ? tacet_arena_alloc(f->arena, total * sizeof **value) : NULL;
    if (!parts || (good && !*value)) f->no_memory = true;
    *n = 0;
    for (size_t i = 0; *value && i < n_parts; i++)
        for (size_t j = 0; j < parts[i].n; j++)
            (*value)[(*n)++] = parts[i].value[j];
    return *value != NULL;
}

static bool is_word(const tacet_field *field, const tree_node *node)
{
    return field->word && node->kind == TREE_TEXT && strcmp(field->word, node->text) == 0;
}

static bool refuse_empty(filler *f, const tacet_field *field, const tree_node *node)
{
    char word[64], subject[SUBJECT_TEXT];
    if (node->kind != TREE_LIST || node->n > 0) return false;
    fill_say(f, false, node_place(node), "%s an empty list; %s%s", key_is(f, subject),
             field->fallback ? "leave the key out" : "it needs one item at least",
             or_word(field, word));
    return true;
}

static void fill_numbers(filler *f, const tacet_field *field, const tree_node *node, double **out,
                         size_t *count)
{
    double *value = NULL, factor = tacet_unit_factor(field->unit);
    size_t n = 0;
    if (is_word(field, node) || refuse_empty(f, field, node)) return;
    if (!read_parts(f, field, node, &value, &n)) return;
    for (size_t i = 0; i < n; i++)
        value[i] *= factor;
    *out = value;
    *count = n;
}

static void fill_counts(filler *f, const tacet_field *field, const tree_node *node, unsigned **out,
                        size_t *count)
{
    double *value = NULL;
    size_t n = 0;
    char text[TACET_NUMBER_TEXT], subject[SUBJECT_TEXT];
    if (is_word(field, node) || refuse_empty(f, field, node)) return;
    if (!read_parts(f, field, node, &value, &n)) return;
    unsigned *counts = tacet_arena_alloc(f->arena, n * sizeof *counts);
    if (!counts) {
        f->no_memory = true;
        return;
    }
    for (size_t i = 0; i < n; i++) {
        if (!whole(value[i])) {
            const tree_node *at = node->kind == TREE_LIST && i < node->n ? node->child[i] : node;
            fill_say(f, false, node_place(at), "%s holds %s; whole numbers are needed",
                     key_of(f, subject), tacet_number_format_short(value[i], 6, text));
            return;
        }
        counts[i] = (unsigned)value[i];
    }
    *out = counts;
    *count = n;
}

// A text in place of a list holds its items between commas.
static size_t split(const char *text, tacet_arena *a, const char **out)
{
    size_t n = 0;
    for (const char *from = text; from;) {
        const char *comma = strchr(from, ','), *end = comma ? comma : from + strlen(from);
        const char *next = comma ? comma + 1 : NULL;
        while (from < end && isspace((unsigned char)*from))
            from++;
        while (end > from && isspace((unsigned char)end[-1]))
            end--;
        char *copy = out ? tacet_arena_alloc(a, (size_t)(end - from) + 1) : NULL;
        if (copy) memcpy(copy, from, (size_t)(end - from));
        if (out) out[n] = copy ? copy : "";
        n++;
        from = next;
    }
    return n;
}

static void fill_texts(filler *f, const tacet_field *field, const tree_node *node,
                       const char ***out, size_t *count)
{
    bool list = node->kind == TREE_LIST, good = true;
    const char *whole_text = NULL;
    if (is_word(field, node) || refuse_empty(f, field, node)) return;
    if (!list && !read_text(f, node, &whole_text)) return;
    size_t n = list ? node->n : split(whole_text, f->arena, NULL);
    const char **texts = tacet_arena_alloc(f->arena, n * sizeof *texts);
    if (!texts) {
        f->no_memory = true;
        return;
    }
    if (!list) split(whole_text, f->arena, texts);
    for (size_t i = 0; list && i < n; i++) {
        size_t length = fill_enter_item(f, i);
        good = read_text(f, node->child[i], &texts[i]) && good;
        fill_leave(f, length);
    }
    if (!good) return;
    *out = texts;
    *count = n;
}

static void fill_sections(filler *f, const tacet_field *field, const tree_node *node, void **out,
                          size_t *count)
{
    const tacet_section *s = field->section;
    char text[SHOWN_TEXT], subject[SUBJECT_TEXT];
    if (node->kind != TREE_LIST) {
        fill_say(f, false, node_place(node), "%s %s; a list is needed, each item behind '- '",
                 key_is(f, subject), shown_node(node, text));
        return;
    }
    if (node->n == 0 && field->fallback) return;
    if (refuse_empty(f, field, node)) return;
    if (node->n > FILL_MOST_THINGS) {
        fill_say(f, false, node_place(node), "%s a list of %zu items; at most %d are allowed",
                 key_is(f, subject), node->n, FILL_MOST_THINGS);
        return;
    }
    char *things = tacet_arena_alloc(f->arena, node->n * s->size);
    if (!things) {
        f->no_memory = true;
        return;
    }
    for (size_t i = 0; i < node->n; i++) {
        const tree_node *item = node->child[i];
        size_t length = fill_enter_item(f, i);
        fill_section(f, s, item, node_place(item), things + i * s->size);
        fill_leave(f, length);
    }
    fill_check_names(f, s, node, things, node->n);
    *out = things;
    *count = node->n;
}

void fill_value(filler *f, const tacet_field *field, const tree_node *node, void *into)
{
    void *at = (char *)into + field->offset;
    size_t *count = (size_t *)(void *)((char *)into + field->count_offset);
    switch (field->kind) {
    case TACET_FIELD_NUMBER:
        if (read_number(f, field, node, at)) *(double *)at *= tacet_unit_factor(field->unit);
        break;
    case TACET_FIELD_CURVE:
        fill_curve(f, field, node, at);
        break;
    case TACET_FIELD_COUNT:
        fill_count(f, field, node, at);
        break;
    case TACET_FIELD_CHOICE:
        fill_choice(f, field, node, at);
        break;
    case TACET_FIELD_TEXT:
        (void)read_text(f, node, at);
        break;
    case TACET_FIELD_NAME:
        fill_name(f, node, at);
        break;
    case TACET_FIELD_NUMBERS:
        fill_numbers(f, field, node, at, count);
        break;
    case TACET_FIELD_COUNTS:
        fill_counts(f, field, node, at, count);
        break;
    case TACET_FIELD_TEXTS:
        fill_texts(f, field, node, at, count);
        break;
    case TACET_FIELD_SECTIONS:
        fill_sections(f, field, node, at, count);
        break;
    case TACET_FIELD_SECTION:
        fill_section(f, field->section, node, node_place(node), at);
    }
}
