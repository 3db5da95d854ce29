// A folder of its own for each test, taken away at the end.
#ifndef SHOW_SCRATCH_H
#define SHOW_SCRATCH_H
#include "near.h"
#include <dirent.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

typedef struct {
    char path[64];
} scratch;

static inline int scratch_create(void **state)
{
    scratch *s = calloc(1, sizeof *s);
    if (!s) return -1;
    strcpy(s->path, "/tmp/tacet-test-XXXXXX");
    *state = s;
    return mkdtemp(s->path) ? 0 : -1;
}

static inline void scratch_remove_tree(const char *path)
{
    DIR *dir = opendir(path);
    for (struct dirent *d; dir && (d = readdir(dir));) {
        char inner[1024];
        if (strcmp(d->d_name, ".") == 0 || strcmp(d->d_name, "..") == 0) continue;
        snprintf(inner, sizeof inner, "%.700s/%s", path, d->d_name);
        if (unlink(inner) != 0) scratch_remove_tree(inner);
    }
    if (dir) closedir(dir);
    rmdir(path);
}

static inline int scratch_destroy(void **state)
{
    scratch *s = *state;
    scratch_remove_tree(s->path);
    free(s);
    return 0;
}

// path of a name in the scratch folder; four at a time
static inline const char *scratch_path(const scratch *s, const char *name)
{
    static char path[4][256];
    static int next;
    next = (next + 1) % 4;
    snprintf(path[next], sizeof path[next], "%s/%s", s->path, name);
    return path[next];
}

static inline void scratch_file(const char *path, const char *text)
{
    FILE *f = fopen(path, "w");
    assert_non_null(f);
    fputs(text, f);
    fclose(f);
}

static inline char *scratch_read(const char *path, size_t *bytes)
{
    FILE *f = fopen(path, "r");
    if (!f) return NULL;
    fseek(f, 0, SEEK_END);
    long size = ftell(f);
    rewind(f);
    char *text = calloc(1, (size_t)size + 1);
    assert_non_null(text);
    *bytes = fread(text, 1, (size_t)size, f);
    fclose(f);
    return text;
}

static inline bool scratch_exists(const char *path)
{
    struct stat st;
    return lstat(path, &st) == 0;
}

static inline size_t scratch_count(const char *path)
{
    size_t n = 0;
    DIR *dir = opendir(path);
    assert_non_null(dir);
    for (struct dirent *d; (d = readdir(dir));)
        n += strcmp(d->d_name, ".") != 0 && strcmp(d->d_name, "..") != 0;
    closedir(dir);
    return n;
}

#endif
