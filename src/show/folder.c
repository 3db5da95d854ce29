// The result folder: the only place where files are written. A file is written as <name>.tmp and
// renamed when it is whole, so that an interrupted run leaves whole files only.
#include "show/folder.h"
#include <dirent.h>
#include <errno.h>
#include <fcntl.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#define DRAWING(stem) stem ".svg", stem ".png", stem ".gnuplot"
static const char *const names[] = {
    "summary.txt",     "runs.csv",      "screen.json",     "summary.csv",    "ranking.csv",
    "no-go.csv",       "agreement.csv", "levels.csv",      "mounts.csv",     DRAWING("map"),
    DRAWING("orders"), DRAWING("bars"), DRAWING("repeat"), DRAWING("modes"), DRAWING("forces"),
    DRAWING("paths"),  "lines.csv",     "point.json",      "scatter.csv",    NULL};
#define N_NAMES (sizeof names / sizeof *names - 1)

struct tacet_folder {
    char *path;
    bool made; // by this run
    int fd;
    FILE *open;  // the file being written, or NULL
    size_t name; // its index
    bool wrote[N_NAMES];
};

const char *const *tacet_folder_names(void)
{
    return names;
}

const char *tacet_folder_path(const tacet_folder *f)
{
    return f->path;
}

int folder_fd(const tacet_folder *f)
{
    return f->fd;
}

// Index of a name that a run may write, N_NAMES: none. tail: what stands behind it.
static size_t name_index(const char *name, const char *tail)
{
    size_t tail_length = strlen(tail), length = strlen(name);
    if (length < tail_length || strcmp(name + length - tail_length, tail) != 0) return N_NAMES;
    for (size_t i = 0; i < N_NAMES; i++)
        if (strlen(names[i]) == length - tail_length &&
            strncmp(names[i], name, length - tail_length) == 0)
            return i;
    return N_NAMES;
}

static tacet_status outside(tacet_error *e, const char *doing, const char *path, const char *name,
                            int reason)
{
    return tacet_fail(e, TACET_OUTSIDE_WORLD, "cannot %s %s%s%s: %s", doing, path, name ? "/" : "",
                      name ? name : "", strerror(reason));
}

static bool is_ours(int fd, const char *name)
{
    struct stat st;
    if (name_index(name, "") == N_NAMES && name_index(name, ".tmp") == N_NAMES) return false;
    return fstatat(fd, name, &st, AT_SYMLINK_NOFOLLOW) == 0 && S_ISREG(st.st_mode);
}

static tacet_status refuse_foreign(const tacet_folder *f, tacet_error *e)
{
    int fd = openat(f->fd, ".", O_RDONLY | O_DIRECTORY | O_CLOEXEC);
    DIR *dir = fd < 0 ? NULL : fdopendir(fd);
    if (!dir) {
        int reason = errno;
        if (fd >= 0) close(fd);
        return outside(e, "read folder", f->path, NULL, reason);
    }
    tacet_status s = TACET_OK;
    for (struct dirent *entry; s == TACET_OK && (entry = readdir(dir));) {
        const char *name = entry->d_name;
        if (strcmp(name, ".") == 0 || strcmp(name, "..") == 0 || is_ours(f->fd, name)) continue;
        s = tacet_fail(
            e, TACET_BAD_INPUT,
            "folder %.100s holds '%.60s', which is no result file; give an empty or a new "
            "folder",
            f->path, name);
    }
    closedir(dir);
    return s;
}

tacet_status tacet_folder_open(const char *path, tacet_folder **out, tacet_error *e)
{
    *out = NULL;
    if (!*path) return tacet_fail(e, TACET_BAD_INPUT, "the name of the result folder is empty");
    tacet_folder *f = calloc(1, sizeof *f);
    if (f) f->fd = -1;
    if (f) f->path = strdup(path);
    if (!f || !f->path) {
        tacet_folder_close(f);
        return tacet_fail(e, TACET_NO_MEMORY, "no memory");
    }
    tacet_status s = TACET_OK;
    f->made = mkdir(path, 0777) == 0;
    if (!f->made && errno != EEXIST) s = outside(e, "make folder", path, NULL, errno);
    if (s == TACET_OK) {
        f->fd = open(path, O_RDONLY | O_DIRECTORY | O_CLOEXEC);
        if (f->fd < 0) s = outside(e, "open folder", path, NULL, errno);
    }
    if (s == TACET_OK && faccessat(f->fd, ".", W_OK | X_OK, AT_EACCESS) != 0)
        s = outside(e, "write into folder", path, NULL, errno);
    if (s == TACET_OK) s = refuse_foreign(f, e);
    if (s != TACET_OK) {
        tacet_folder_close(f);
        return s;
    }
    *out = f;
    return TACET_OK;
}

static const char *temporary(size_t name, char out[64])
{
    snprintf(out, 64, "%s.tmp", names[name]);
    return out;
}

tacet_status tacet_folder_begin(tacet_folder *f, const char *name, FILE **out, tacet_error *e)
{
    char tmp[64];
    *out = NULL;
    size_t i = name_index(name, "");
    if (f->open || i == N_NAMES)
        return tacet_fail(e, TACET_BAD_INPUT,
                          f->open ? "%.60s: another file of the folder is still open"
                                  : "%.60s is no name of a result file",
                          name);
    temporary(i, tmp);
    if (unlinkat(f->fd, tmp, 0) != 0 && errno != ENOENT)
        return outside(e, "replace", f->path, tmp, errno);
    int fd = openat(f->fd, tmp, O_RDWR | O_CREAT | O_EXCL | O_CLOEXEC | O_NOFOLLOW, 0666);
    f->open = fd < 0 ? NULL : fdopen(fd, "w+");
    if (!f->open) {
        int reason = errno;
        if (fd >= 0) close(fd);
        if (fd >= 0) unlinkat(f->fd, tmp, 0);
        return outside(e, "write", f->path, tmp, reason);
    }
    f->name = i;
    *out = f->open;
    return TACET_OK;
}

void tacet_folder_abort(tacet_folder *f)
{
    char tmp[64];
    if (!f->open) return;
    fclose(f->open);
    f->open = NULL;
    unlinkat(f->fd, temporary(f->name, tmp), 0);
}

tacet_status tacet_folder_commit(tacet_folder *f, tacet_error *e)
{
    char tmp[64];
    if (!f->open) return tacet_fail(e, TACET_BAD_INPUT, "no file of the folder is open");
    temporary(f->name, tmp);
    bool bad = tacet_stream_check(f->open, tmp, NULL) != TACET_OK || fsync(fileno(f->open)) != 0;
    int reason = errno;
    if (fclose(f->open) != 0 && !bad) {
        bad = true;
        reason = errno;
    }
    f->open = NULL;
    if (!bad && renameat(f->fd, tmp, f->fd, names[f->name]) == 0) {
        f->wrote[f->name] = true;
        return TACET_OK;
    }
    if (!bad) reason = errno;
    unlinkat(f->fd, tmp, 0);
    return outside(e, "write", f->path, names[f->name], reason ? reason : EIO);
}

bool tacet_folder_wrote(const tacet_folder *f, const char *name)
{
    size_t i = name_index(name, "");
    return i < N_NAMES && f->wrote[i];
}

tacet_status tacet_folder_tidy(tacet_folder *f, tacet_error *e)
{
    for (size_t i = 0; i < N_NAMES; i++) {
        char tmp[64];
        if (!f->wrote[i] && unlinkat(f->fd, names[i], 0) != 0 && errno != ENOENT)
            return outside(e, "remove", f->path, names[i], errno);
        if (unlinkat(f->fd, temporary(i, tmp), 0) != 0 && errno != ENOENT)
            return outside(e, "remove", f->path, tmp, errno);
    }
    return TACET_OK;
}

void tacet_folder_close(tacet_folder *f)
{
    if (!f) return;
    tacet_folder_abort(f);
    if (f->fd >= 0) close(f->fd);
    if (f->made) rmdir(f->path); // only goes when nothing was written
    free(f->path);
    free(f);
}
