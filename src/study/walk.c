#include "walk.h"
#include <math.h>
#include <string.h>

typedef struct {
    walk_visitor *visit;
    void *who;
    filler path; // only its path is used
} walker;

static void walk(walker *w, const tacet_section *s, const tree_node *node, const void *owner);

static void walk_things(walker *w, const tacet_field *field, const tree_node *node,
                        const void *owner)
{
    const char *base = owner;
    const char *things = *(void *const *)(const void *)(base + field->offset);
    size_t n = *(const size_t *)(const void *)(base + field->count_offset);
    for (size_t i = 0; i < n; i++) {
        bool read = node && node->kind == TREE_LIST && i < node->n;
        size_t length = fill_enter_item(&w->path, i);
        walk(w, field->section, read ? node->child[i] : NULL, things + i * field->section->size);
        fill_leave(&w->path, length);
    }
}

static void walk(walker *w, const tacet_section *s, const tree_node *node, const void *owner)
{
    for (const tacet_field *field = s->fields; field->key; field++) {
        const tree_node *child = section_child(s, node, field->key);
        size_t length = fill_enter(&w->path, field->key);
        if (field->kind == TACET_FIELD_SECTION) {
            walk(w, field->section, child, (const char *)owner + field->offset);
        } else {
            walk_value value = {s, field, w->path.path, child, owner};
            w->visit(w->who, &value);
            if (field->kind == TACET_FIELD_SECTIONS) walk_things(w, field, child, owner);
        }
        fill_leave(&w->path, length);
    }
}

void walk_section(const tacet_section *s, const tree_node *node, const void *from,
                  walk_visitor *visit, void *who)
{
    walker w = {.visit = visit, .who = who};
    walk(&w, s, node, from);
}

// ---- fingerprint
uint64_t fnv_bytes(uint64_t hash, const void *bytes, size_t n)
{
    const unsigned char *b = bytes;
    for (size_t i = 0; i < n; i++)
        hash = (hash ^ b[i]) * 0x100000001b3u;
    return hash;
}

static uint64_t fnv_count(uint64_t hash, uint64_t value)
{
    unsigned char bytes[8]; // the same on machines of either byte order
    for (int i = 0; i < 8; i++)
        bytes[i] = (unsigned char)(value >> (8 * i));
    return fnv_bytes(hash, bytes, sizeof bytes);
}

static uint64_t fnv_number(uint64_t hash, double value)
{
    uint64_t bits = 0;
    double plain = value == 0 ? 0 : value; // -0 is 0
    if (!isnan(value)) memcpy(&bits, &plain, sizeof bits);
    return fnv_count(hash, isnan(value) ? UINT64_MAX : bits);
}

static uint64_t fnv_numbers(uint64_t hash, const double *value, size_t n)
{
    hash = fnv_count(hash, n);
    for (size_t i = 0; i < n; i++)
        hash = fnv_number(hash, value[i]);
    return hash;
}

static uint64_t fnv_text(uint64_t hash, const char *text)
{
    hash = fnv_count(hash, text ? strlen(text) : UINT64_MAX);
    return text ? fnv_bytes(hash, text, strlen(text)) : hash;
}

static void hash_value(void *who, const walk_value *v)
{
    uint64_t *out = who, hash = fnv_text(*out, v->path);
    const char *base = v->owner;
    const void *at = base + v->field->offset;
    size_t n = 0;
    if (v->field->kind >= TACET_FIELD_NUMBERS)
        n = *(const size_t *)(const void *)(base + v->field->count_offset);
    switch (v->field->kind) {
    case TACET_FIELD_NUMBER:
        hash = fnv_number(hash, *(const double *)at);
        break;
    case TACET_FIELD_CURVE: {
        const tacet_curve *c = at;
        hash = fnv_numbers(fnv_numbers(hash, c->x, c->n), c->y, c->n);
        break;
    }
    case TACET_FIELD_COUNT:
        hash = fnv_count(hash, *(const unsigned *)at);
        break;
    case TACET_FIELD_CHOICE:
        hash = fnv_count(hash, (uint64_t)(int64_t) * (const int *)at);
        break;
    case TACET_FIELD_TEXT:
    case TACET_FIELD_NAME:
        hash = fnv_text(hash, *(const char *const *)at);
        break;
    case TACET_FIELD_NUMBERS:
        hash = fnv_numbers(hash, *(double *const *)at, n);
        break;
    case TACET_FIELD_COUNTS:
        hash = fnv_count(hash, n);
        for (size_t i = 0; i < n; i++)
            hash = fnv_count(hash, (*(unsigned *const *)at)[i]);
        break;
    case TACET_FIELD_TEXTS:
        hash = fnv_count(hash, n);
        for (size_t i = 0; i < n; i++)
            hash = fnv_text(hash, (*(const char **const *)at)[i]);
        break;
    case TACET_FIELD_SECTIONS:
        hash = fnv_count(hash, n);
        break;
    case TACET_FIELD_SECTION:
        break;
    }
    *out = hash;
}

uint64_t walk_fingerprint(const tacet_section *s, const void *from)
{
    uint64_t hash = FNV_START;
    walk_section(s, NULL, from, hash_value, &hash);
    return hash;
}
