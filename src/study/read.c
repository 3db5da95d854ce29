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
    s->body = tacet_body_default();
    return s;
}

void tacet_study_destroy(tacet_study *s)
{
    if (!s) return;
    tacet_arena_destroy(s->arena);
    free(s);
}

// Letters of the path of a book in `text`, which names a book or a word of one; 0: it is a word.
static size_t book_letters(const char *text)
{
    static const char ending[] = ".words";
    const char *colon = strrchr(text, ':');
    size_t n = colon ? (size_t)(colon - text) : strlen(text), of_ending = sizeof ending - 1;
    return n > of_ending && memcmp(text + n - of_ending, ending, of_ending) == 0 ? n : 0;
}

// The bytes of files that a study names count as its values do. They were read before: only memory
// can be lacking, or somebody has taken a file away since.
static tacet_status hash_file(tacet_study *s, const char *name, size_t letters,
                              tacet_problems *problems)
{
    char *bytes, *own = tacet_arena_alloc(s->arena, letters + 1);
    if (!own) return TACET_NO_MEMORY;
    memcpy(own, name, letters);
    char *path = study_path(s, own, s->arena);
    size_t n;
    tacet_error e;
    if (!path) return TACET_NO_MEMORY;
    tacet_status status = tacet_file_read(path, TREE_MOST_BYTES, s->arena, &bytes, &n, &e);
    if (status == TACET_OUTSIDE_WORLD)
        tacet_problems_add(problems, false, s->path, 0, 0, "%s", e.text);
    if (!status) s->fingerprint = fnv_bytes(s->fingerprint, bytes, n);
    return status;
}

static tacet_status hash_files(tacet_study *s, tacet_problems *problems)
{
    const tacet_cycle_def *d = &s->engine.cycle;
    const char *traces[] = {d->fired_trace, d->skipped_trace};
    tacet_status status = TACET_OK;
    for (size_t i = 0; i < 2 && d->kind == TACET_CYCLE_TRACES && !status; i++)
        if (traces[i]) status = hash_file(s, traces[i], strlen(traces[i]), problems);
    for (size_t i = 0; i < s->body.n_paths && !status; i++) {
        const char *table = s->body.paths[i].table;
        if (table) status = hash_file(s, table, strlen(table), problems);
    }
    for (size_t i = 0; i < s->screen.n_patterns && !status; i++) {
        size_t letters = book_letters(s->screen.patterns[i]);
        if (letters) status = hash_file(s, s->screen.patterns[i], letters, problems);
    }
    return status;
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
    s->engine.folder = s->body.folder = s->folder;
    if (s->tree->root->kind == TREE_MAP) {
        checker c = {s, s->tree, &f, f.n_wrong};
        check_study(&c);
    }
    bool no_memory = f.no_memory;
    filler_clear(&f);
    if (no_memory) return TACET_NO_MEMORY;
    if (tacet_problems_errors(problems) > errors) return TACET_BAD_INPUT;
    s->fingerprint = walk_fingerprint(tacet_study_keys(), s);
    return hash_files(s, problems);
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
