// Visits every value of a filled struct in table order.
#ifndef STUDY_WALK_H
#define STUDY_WALK_H
#include "fill.h"

typedef struct {
    const tacet_section *section;
    const tacet_field *field;
    const char *path;
    const tree_node *node; // as read; NULL: not in the file, or no file given
    const void *owner;     // struct of `section`
} walk_value;
typedef void walk_visitor(void *who, const walk_value *value);

// Lists of sections are visited as a whole first, then thing by thing; sections only by what they
// hold. `node` may be NULL.
void walk_section(const tacet_section *s, const tree_node *node, const void *from,
                  walk_visitor *visit, void *who);

// FNV-1a, 64 bits, over key paths and values: equal for equal values, however they were written.
#define FNV_START 0xcbf29ce484222325u
uint64_t fnv_bytes(uint64_t hash, const void *bytes, size_t n);
uint64_t walk_fingerprint(const tacet_section *s, const void *from);

// A value as the file could hold it, in the file's unit; cut with ".." where `out` is full.
void value_text(const tacet_field *field, const void *owner, char *out, size_t bytes);
#endif
