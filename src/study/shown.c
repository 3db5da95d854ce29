#include "fill.h"
#include <ctype.h>
#include <string.h>

const char *shown_text(const char *text, char out[SHOWN_TEXT])
{
    size_t n = 0, most = SHOWN_TEXT - 6;
    out[n++] = '\'';
    for (; *text && n < most; text++)
        out[n++] = (char)((unsigned char)*text < 0x20 || *text == 0x7F ? ' ' : *text);
    if (*text) {
        while (n > 1 && ((unsigned char)out[n - 1] & 0xC0) == 0x80) // no half of a letter
            n--;
        if (n > 1 && (unsigned char)out[n - 1] >= 0xC0) n--;
        out[n++] = '.';
        out[n++] = '.';
    }
    out[n++] = '\'';
    out[n] = '\0';
    return out;
}

const char *shown_node(const tree_node *node, char out[SHOWN_TEXT])
{
    if (node_is_nothing(node)) return strcpy(out, "nothing");
    if (node->kind == TREE_LIST) return strcpy(out, "a list");
    if (node->kind == TREE_MAP) return strcpy(out, "a map of keys");
    return shown_text(node->text, out);
}

const char *unit_text(const char *unit, char out[32])
{
    if (!unit || !*unit || strcmp(unit, "1") == 0) return strcpy(out, "");
    return tacet_text(out, 32, " %s", unit);
}

#define NO_END 1e12 // ranges that reach so far have no end to speak of, but to who is past it

const char *range_text(const tacet_field *field, double value, char out[RANGE_TEXT])
{
    char low[TACET_NUMBER_TEXT], high[TACET_NUMBER_TEXT], unit[32];
    unit_text(field->unit, unit);
    if (field->low == 0 && field->high == 0) return strcpy(out, "");
    tacet_number_format_short(field->low, 6, low);
    tacet_number_format_short(field->high, 6, high);
    if (field->high >= NO_END && !(value > field->high))
        return tacet_text(out, RANGE_TEXT, "%s%s or more", low, unit);
    return tacet_text(out, RANGE_TEXT, "%s to %s%s", low, high, unit);
}

const char *joined(const char *const *names, size_t n, char *out, size_t bytes)
{
    size_t used = 0;
    out[0] = '\0';
    for (size_t i = 0; i < n; i++) {
        size_t needed = strlen(names[i]) + 2;
        if (used + needed + 5 > bytes) {
            strcpy(out + used, ", ..");
            break;
        }
        tacet_text(out + used, bytes - used, "%s%s", i ? ", " : "", names[i]);
        used = strlen(out);
    }
    return out;
}

static bool all_digits(const char *text, size_t n)
{
    for (size_t i = 0; i < n; i++)
        if (!isdigit((unsigned char)text[i])) return false;
    return n > 0;
}

// "1,5" inside a text: digits on both sides of a comma.
static const char *comma_in_text(const char *text, char out[SHOWN_TEXT])
{
    for (const char *comma = strchr(text, ','); comma; comma = strchr(comma + 1, ',')) {
        const char *from = comma, *end = comma + 1;
        while (from > text && isdigit((unsigned char)from[-1]))
            from--;
        while (isdigit((unsigned char)*end))
            end++;
        if (from == comma || end == comma + 1 || end - from > 30) continue;
        return tacet_text(out, SHOWN_TEXT, "%.*s.%.*s", (int)(comma - from), from,
                          (int)(end - comma - 1), comma + 1);
    }
    return NULL;
}

// Do two neighbours stand on both sides of a comma without a blank, as in "1,5"?
static bool tight(const tree_node *a, const tree_node *b)
{
    return a->line == b->line && b->column == a->column + (int)strlen(a->text) + 1;
}

const char *decimal_comma(const tree_node *node, bool too_many, char out[SHOWN_TEXT])
{
    if (!node || node->kind == TREE_MAP) return NULL;
    if (node->kind == TREE_TEXT) return comma_in_text(node->text, out);
    const tree_node *whole = NULL, *part = NULL;
    bool loose = too_many;
    for (size_t i = 0; i + 1 < node->n; i++) {
        const tree_node *a = node->child[i], *b = node->child[i + 1];
        if (a->kind != TREE_TEXT || b->kind != TREE_TEXT || a->quoted || b->quoted) return NULL;
        if (!tight(a, b)) loose = true;
        size_t n = strlen(a->text), sign = n > 0 && (*a->text == '-' || *a->text == '+');
        bool digits = n < 30 && all_digits(a->text + sign, n - sign) &&
                      all_digits(b->text, strlen(b->text)) && strlen(b->text) < 30;
        if (whole || !tight(a, b) || !digits) continue;
        whole = a;
        part = b;
    }
    return whole && loose ? tacet_text(out, SHOWN_TEXT, "%s.%s", whole->text, part->text) : NULL;
}

const char *decimal_comma_in_map(const tree_node *map, size_t key, char out[SHOWN_TEXT])
{
    if (key == 0) return NULL;
    const tree_node *whole = map->child[key - 1], *part = map->key[key];
    if (whole->kind != TREE_TEXT || whole->quoted || part->quoted || !tight(whole, part))
        return NULL;
    size_t n = strlen(whole->text), sign = n > 0 && (*whole->text == '-' || *whole->text == '+');
    if (n + strlen(part->text) > 40 || !all_digits(whole->text + sign, n - sign) ||
        !all_digits(part->text, strlen(part->text)))
        return NULL;
    return tacet_text(out, SHOWN_TEXT, "%s.%s", whole->text, part->text);
}
