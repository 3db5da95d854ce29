// What a user may write where a pattern is asked for: a word, a book, or a word of a book by name.
#include "makers.h"
#include <string.h>

static tacet_status refuse(tacet_problems *problems, const char *file, const char *text,
                           const tacet_error *why)
{
    tacet_problems_add(problems, false, file, 0, 0,
                       "'%s' is no pattern (%s), no book (*.words) and no BOOK.words:NAME", text,
                       why->text);
    return TACET_BAD_INPUT;
}

static bool is_book(const char *path, size_t letters)
{
    static const char end[] = ".words";
    size_t n = sizeof end - 1;
    return letters > n && memcmp(path + letters - n, end, n) == 0;
}

static tacet_status read_book(const char *path, size_t letters, const char *folder, tacet_arena *a,
                              tacet_problems *problems, tacet_words *out)
{
    size_t room = strlen(folder) + letters + 2;
    char *full = tacet_arena_alloc(a, room);
    if (!full) return TACET_NO_MEMORY;
    bool inside = *folder && path[0] != '/';
    tacet_text(full, room, "%s%s%.*s", inside ? folder : "", inside ? "/" : "", (int)letters, path);
    return tacet_book_read(full, a, problems, out);
}

static tacet_status no_such_name(const char *file, const char *name, const tacet_words *book,
                                 tacet_arena *a, tacet_problems *problems)
{
    const char **names = tacet_arena_alloc(a, (book->n + 1) * sizeof *names);
    if (!names) return TACET_NO_MEMORY;
    size_t n = 0;
    for (size_t i = 0; i < book->n; i++)
        if (book->name[i]) names[n++] = book->name[i];
    const char *near = tacet_near_name(name, names, n);
    if (near)
        tacet_problems_add(problems, false, file, 0, 0,
                           "no word named '%s' in that book; '%s' is near", name, near);
    else
        tacet_problems_add(problems, false, file, 0, 0,
                           "no word named '%s' in that book; it has %zu named words", name, n);
    return TACET_BAD_INPUT;
}

// Leaves only the word of that name.
static tacet_status pick(tacet_words *w, const char *file, const char *name, tacet_arena *a,
                         tacet_problems *problems)
{
    for (size_t i = 0; i < w->n; i++) {
        if (!w->name[i] || strcmp(w->name[i], name) != 0) continue;
        *w = (tacet_words){w->pattern + i, w->name + i, w->comment + i, w->line + i, 1};
        return TACET_OK;
    }
    return no_such_name(file, name, w, a, problems);
}

tacet_status tacet_words_find(const char *text, const char *folder, const char *file,
                              tacet_arena *a, tacet_problems *problems, tacet_words *out)
{
    tacet_pattern word;
    tacet_error why;
    *out = (tacet_words){0};
    if (!folder) folder = "";
    if (tacet_pattern_parse(text, &word, &why) == TACET_OK) {
        tacet_status status = words_init(out, 1, a, NULL);
        if (status == TACET_OK) out->pattern[0] = word;
        return status;
    }
    const char *colon = strrchr(text, ':');
    size_t letters = colon ? (size_t)(colon - text) : strlen(text);
    if (!is_book(text, letters)) return refuse(problems, file, text, &why);
    tacet_status status = read_book(text, letters, folder, a, problems, out);
    if (status != TACET_OK || !colon) return status;
    return pick(out, file, colon + 1, a, problems);
}
