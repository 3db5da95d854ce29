#include "tacet/base.h"
#include <errno.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define FIRST_BYTES 65536
#define MIB         ((size_t)1 << 20)

static tacet_status cannot(const char *path, int reason, tacet_error *e)
{
    char buffer[128];
    if (reason == ENOMEM) return tacet_fail(e, TACET_NO_MEMORY, "no memory to read %s", path);
    const char *why = reason == EISDIR   ? "it is a folder"
                      : reason == ENOENT ? "there is no such file"
                      : reason == EACCES ? "reading it is not permitted"
                                         : strerror_r(reason, buffer, sizeof buffer);
    return tacet_fail(e, TACET_OUTSIDE_WORLD, "cannot read %s: %s", path, why);
}

// Reads to the end or to one byte past `most`; the buffer is the caller's to free.
static tacet_status read_all(FILE *from, const char *path, size_t most, char **out, size_t *n,
                             tacet_error *e)
{
    size_t size = FIRST_BYTES, used = 0;
    char *bytes = malloc(size);
    if (!bytes) return tacet_fail(e, TACET_NO_MEMORY, "no memory to read %s", path);
    while (used <= most) {
        if (used == size) {
            char *larger = realloc(bytes, size * 2);
            if (!larger) {
                free(bytes);
                return tacet_fail(e, TACET_NO_MEMORY, "no memory to read %s", path);
            }
            bytes = larger;
            size *= 2;
        }
        errno = 0;
        size_t got = fread(bytes + used, 1, size - used, from);
        used += got;
        if (ferror(from)) {
            int reason = errno;
            free(bytes);
            return cannot(path, reason, e);
        }
        if (got == 0) break;
    }
    *out = bytes;
    *n = used;
    return TACET_OK;
}

tacet_status tacet_file_read(const char *path, size_t most, tacet_arena *a, char **out, size_t *n,
                             tacet_error *e)
{
    bool standard = strcmp(path, "-") == 0;
    const char *name = standard ? "standard input" : path;
    FILE *from = standard ? stdin : fopen(path, "rb");
    if (!from) return cannot(name, errno, e);
    char *bytes = NULL;
    size_t used = 0;
    tacet_status status = read_all(from, name, most, &bytes, &used, e);
    if (!standard) fclose(from);
    if (status || !bytes) return status;
    if (used > most) {
        bool whole = most >= MIB && most % MIB == 0;
        status = tacet_fail(e, TACET_OUTSIDE_WORLD,
                            "cannot read %s: it holds more than the %zu %s allowed", name,
                            whole ? most / MIB : most, whole ? "MiB" : "bytes");
    } else {
        char *kept = tacet_arena_alloc(a, used + 1);
        if (kept) {
            memcpy(kept, bytes, used);
            *out = kept;
            *n = used;
        } else {
            status = tacet_fail(e, TACET_NO_MEMORY, "no memory to read %s", name);
        }
    }
    free(bytes);
    return status;
}
