#include "check.h"
#include "keys.h"
#include "walk.h"
#include <stdlib.h>
#include <string.h>

static tacet_study *create(const char *path)
{
    tacet_study *s = calloc(1, sizeof *s);
    if (!s) return NULL;
    s->arena = tacet_arena_create();
    const char *slash = strrchr(path, '/');
    size_t letters = slash ? (size_t)(slash - path) : 1;
    if (slash == path) letters = 1;
    char *folder = s->arena ? tacet_arena_alloc(s->arena, letters + 1) : NULL;
    s->path = s->arena ? tacet_arena_text(s->arena, path) : NULL;
    if (!folder || !s->path) {
        tacet_study_destroy(s);
        return NULL;
    }
    memcpy(folder, slash ? path : ".", letters);
    s->folder = folder;
    s->engine = tacet_engine_default();
    s->train = tacet_train_default();
    return s;
}

void tacet_study_destroy(tacet_study *s)
{
    if (!s) return;
    tacet_arena_destroy(s->arena);
    free(s);
}

// The bytes of files that a study names count as its values do.
static uint64_t hash_file(const tacet_study *s, uint64_t hash, const char *name)
{
    char *bytes, *path = name ? study_path(s, name, s->arena) : NULL;
    size_t n;
    if (!path || tacet_file_read(path, TREE_MOST_BYTES, s->arena, &bytes, &n, NULL)) return hash;
    return fnv_bytes(hash, bytes, n);
}

static uint64_t hash_files(const tacet_study *s, uint64_t hash)
{
    const tacet_cycle_def *d = &s->engine.cycle;
    if (d->kind == TACET_CYCLE_TRACES) {
        hash = hash_file(s, hash, d->fired_trace);
        hash = hash_file(s, hash, d->skipped_trace);
    }
    for (size_t i = 0; i < s->screen.n_patterns; i++) {
        const char *text = s->screen.patterns[i], *end = strstr(text, ".words");
        size_t letters = end ? (size_t)(end - text) + strlen(".words") : 0;
        char *book = end ? tacet_arena_alloc(s->arena, letters + 1) : NULL;
        if (!book) continue;
        memcpy(book, text, letters);
        hash = hash_file(s, hash, book);
    }
    return hash;
}

static tacet_status read_tree(tacet_study *s, const char *bytes, size_t n, const char *file,
                              tacet_problems *problems)
{
    tacet_tree *tree = NULL;
    tacet_status status = tree_read(bytes, n, file, s->arena, problems, &tree);
    if (status) return status;
    if (node_is_nothing(tree->root)) {
        tacet_problems_add(problems, false, file, 0, 0,
                           "the file holds no study; `tacet example` prints one to start from");
        return TACET_BAD_INPUT;
    }
    s->tree = tree;
    return TACET_OK;
}

static tacet_status read_study(tacet_study *s, const char *bytes, size_t n, const char *file,
                               tacet_problems *problems)
{
    tacet_status status = read_tree(s, bytes, n, file, problems);
    if (status) return status;
    filler f = {.arena = s->arena, .problems = problems, .file = file, .root = tacet_study_keys()};
    size_t errors = tacet_problems_errors(problems);
    fill_section(&f, f.root, s->tree->root, (place){1, 1}, s);
    s->engine.folder = s->folder;
    if (s->tree->root->kind == TREE_MAP) {
        checker c = {s, s->tree, &f, f.n_wrong};
        check_study(&c);
    }
    bool no_memory = f.no_memory;
    filler_clear(&f);
    if (no_memory) return TACET_NO_MEMORY;
    if (tacet_problems_errors(problems) > errors) return TACET_BAD_INPUT;
    s->fingerprint = hash_files(s, walk_fingerprint(tacet_study_keys(), s));
    return TACET_OK;
}

tacet_status tacet_study_read_text(const char *text, size_t bytes, const char *name,
                                   tacet_problems *problems, tacet_study **out)
{
    tacet_study *s = create(name);
    if (!s) return TACET_NO_MEMORY;
    tacet_status status = read_study(s, text, bytes, s->path, problems);
    if (status)
        tacet_study_destroy(s);
    else
        *out = s;
    return status;
}

tacet_status tacet_study_read(const char *path, tacet_problems *problems, tacet_study **out)
{
    bool standard = strcmp(path, "-") == 0;
    tacet_study *s = create(standard ? "standard input" : path);
    if (!s) return TACET_NO_MEMORY;
    char *bytes;
    size_t n;
    tacet_error e;
    tacet_status status = tacet_file_read(path, TREE_MOST_BYTES, s->arena, &bytes, &n, &e);
    if (status == TACET_OUTSIDE_WORLD)
        tacet_problems_add(problems, false, s->path, 0, 0, "%s", e.text);
    if (!status) status = read_study(s, bytes, n, s->path, problems);
    if (status)
        tacet_study_destroy(s);
    else
        *out = s;
    return status;
}
