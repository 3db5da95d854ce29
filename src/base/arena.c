#include "tacet/base.h"
#include <stdlib.h>
#include <string.h>

#define ALIGNMENT   64
#define BLOCK_BYTES 65536

typedef struct block {
    struct block *before;
    size_t used, size;
    unsigned char *bytes;
} block;

struct tacet_arena {
    block *last;
    bool was_short;
};

tacet_arena *tacet_arena_create(void)
{
    return calloc(1, sizeof(tacet_arena));
}

void tacet_arena_destroy(tacet_arena *a)
{
    if (!a) return;
    for (block *b = a->last; b;) {
        block *before = b->before;
        free(b->bytes);
        free(b);
        b = before;
    }
    free(a);
}

static block *block_create(size_t bytes)
{
    block *b = calloc(1, sizeof *b);
    if (!b) return NULL;
    b->size = bytes > BLOCK_BYTES ? bytes : BLOCK_BYTES;
    b->bytes = aligned_alloc(ALIGNMENT, b->size);
    if (!b->bytes) {
        free(b);
        return NULL;
    }
    return b;
}

void *tacet_arena_alloc(tacet_arena *a, size_t bytes)
{
    if (bytes > SIZE_MAX / 2) {
        a->was_short = true;
        return NULL;
    }
    bytes = (bytes + ALIGNMENT - 1) / ALIGNMENT * ALIGNMENT;
    if (bytes == 0) bytes = ALIGNMENT;
    if (!a->last || a->last->size - a->last->used < bytes) {
        block *b = block_create(bytes);
        if (!b) {
            a->was_short = true;
            return NULL;
        }
        b->before = a->last;
        a->last = b;
    }
    void *p = a->last->bytes + a->last->used;
    a->last->used += bytes;
    return memset(p, 0, bytes);
}

char *tacet_arena_text(tacet_arena *a, const char *text)
{
    size_t bytes = strlen(text) + 1;
    char *copy = tacet_arena_alloc(a, bytes);
    return copy ? memcpy(copy, text, bytes) : NULL;
}

bool tacet_arena_was_short(const tacet_arena *a)
{
    return a->was_short;
}
