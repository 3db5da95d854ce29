// The list of makers: a new maker is a new file and one line here.
#include "makers.h"
#include <string.h>

tacet_maker_def tacet_maker_default(void)
{
    return (tacet_maker_def){.fires = 1, .length = 1, .density = 1, .seed = 1};
}

const tacet_maker *const *tacet_makers(void)
{
    static const tacet_maker *const makers[] = {
        &tacet_maker_even,
        &tacet_maker_sigma_delta_1,
        &tacet_maker_sigma_delta_2,
        &tacet_maker_cylinders,
        &tacet_maker_necklaces,
        &tacet_maker_book,
        NULL,
    };
    return makers;
}

const tacet_maker *tacet_maker_find(const char *name)
{
    for (const tacet_maker *const *m = tacet_makers(); *m; m++)
        if (strcmp((*m)->name, name) == 0) return *m;
    return NULL;
}

tacet_status words_init(tacet_words *w, size_t n, tacet_arena *a, tacet_error *e)
{
    tacet_words made = {.n = n};
    made.pattern = tacet_arena_alloc(a, n * sizeof *made.pattern);
    made.name = tacet_arena_alloc(a, n * sizeof *made.name);
    made.comment = tacet_arena_alloc(a, n * sizeof *made.comment);
    made.line = tacet_arena_alloc(a, n * sizeof *made.line);
    if (!made.pattern || !made.name || !made.comment || !made.line)
        return tacet_fail(e, TACET_NO_MEMORY, "no memory for %zu patterns", n);
    *w = made;
    return TACET_OK;
}

tacet_status check_length(unsigned length, tacet_error *e)
{
    if (length >= 1 && length <= TACET_PATTERN_LONGEST) return TACET_OK;
    return tacet_fail(e, TACET_BAD_INPUT, "a pattern of %u letters; 1 to %d are allowed", length,
                      TACET_PATTERN_LONGEST);
}
