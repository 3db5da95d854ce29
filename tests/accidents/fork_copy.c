#include "fork_copy.h"
#include <dirent.h>
#include <errno.h>
#include <fcntl.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#define PATH_BYTES 4096
#define SLOWEST_S  60

void fork_copy_failed(const char *what)
{
    dprintf(2, "copy of the process: %s: %s\n", what, strerror(errno));
    _exit(99);
}

static void join(char *out, const char *folder, const char *name)
{
    if (snprintf(out, PATH_BYTES, "%s/%s", folder, name) >= PATH_BYTES) {
        errno = ENAMETOOLONG;
        fork_copy_failed(name);
    }
}

static void copy_file(const char *from, const char *to, mode_t mode)
{
    char bytes[65536];
    ssize_t n;
    int in = open(from, O_RDONLY | O_CLOEXEC);
    int out = open(to, O_WRONLY | O_CREAT | O_EXCL | O_CLOEXEC, mode & 0777);
    if (in < 0 || out < 0) fork_copy_failed(from);
    while ((n = read(in, bytes, sizeof bytes)) > 0)
        if (write(out, bytes, (size_t)n) != n) fork_copy_failed(to);
    if (n < 0) fork_copy_failed(from);
    close(in);
    close(out);
}

// Files and folders; anything else is left out.
static void copy_folder(const char *from, const char *to)
{
    DIR *dir = opendir(from);
    if (!dir || mkdir(to, 0777) != 0) fork_copy_failed(to);
    for (struct dirent *entry; (entry = readdir(dir));) {
        char source[PATH_BYTES], target[PATH_BYTES];
        struct stat st;
        if (strcmp(entry->d_name, ".") == 0 || strcmp(entry->d_name, "..") == 0) continue;
        join(source, from, entry->d_name);
        join(target, to, entry->d_name);
        if (lstat(source, &st) != 0) fork_copy_failed(source);
        if (S_ISDIR(st.st_mode)) copy_folder(source, target);
        if (S_ISREG(st.st_mode)) copy_file(source, target, st.st_mode);
    }
    closedir(dir);
}

static void reopen(int fd, const char *old_folder, const char *new_folder)
{
    char link[64], path[PATH_BYTES], moved[PATH_BYTES];
    struct stat st, same;
    snprintf(link, sizeof link, "/proc/self/fd/%d", fd);
    ssize_t n = readlink(link, path, sizeof path - 1);
    if (n < 0 || fstat(fd, &st) != 0 || !(S_ISREG(st.st_mode) || S_ISDIR(st.st_mode))) return;
    path[n] = '\0';
    if (stat(path, &same) != 0 || same.st_ino != st.st_ino) return; // it has no name any more
    size_t old = strlen(old_folder);
    bool inside = strncmp(path, old_folder, old) == 0 && (path[old] == '/' || path[old] == '\0');
    if (inside && snprintf(moved, sizeof moved, "%s%s", new_folder, path + old) >= PATH_BYTES)
        fork_copy_failed(path);
    int flags = fcntl(fd, F_GETFL) & ~(O_CREAT | O_EXCL | O_TRUNC | O_NOFOLLOW);
    int close_on_exec = fcntl(fd, F_GETFD) & FD_CLOEXEC;
    off_t at = S_ISREG(st.st_mode) ? lseek(fd, 0, SEEK_CUR) : 0;
    int new = open(inside ? moved : path, flags);
    if (new < 0 || (at > 0 && lseek(new, at, SEEK_SET) != at) ||
        dup3(new, fd, close_on_exec ? O_CLOEXEC : 0) != fd)
        fork_copy_failed(path);
    close(new);
}

pid_t fork_copy(const char *copies, unsigned long n)
{
    char old_folder[PATH_BYTES], new_folder[PATH_BYTES], name[32];
    pid_t child = fork();
    if (child < 0) fork_copy_failed("fork");
    if (child > 0) return child;
    alarm(SLOWEST_S);
    snprintf(name, sizeof name, "%lu", n);
    join(new_folder, copies, name);
    if (!getcwd(old_folder, sizeof old_folder)) fork_copy_failed("working folder");
    copy_folder(old_folder, new_folder);
    for (int fd = 0; fd < 64; fd++)
        if (fcntl(fd, F_GETFD) >= 0) reopen(fd, old_folder, new_folder);
    if (chdir(new_folder) != 0) fork_copy_failed(new_folder);
    return 0;
}
