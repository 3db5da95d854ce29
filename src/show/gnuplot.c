#include "show/gnuplot.h"
#include "show/text.h"
#include <errno.h>
#include <fcntl.h>
#include <poll.h>
#include <signal.h>
#include <spawn.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/wait.h>
#include <time.h>
#include <unistd.h>

#define SAID_MOST 4096 // bytes of standard error that are kept

static double now_s(void)
{
    struct timespec t;
    clock_gettime(CLOCK_MONOTONIC, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

// Entries of the environment that gnuplot and the font library need, and nothing else.
static size_t small_environment(const char **entry, size_t most, char *store, size_t size)
{
    static const char *const kept[] = {"PATH", "HOME", "TMPDIR", "XDG_CACHE_HOME"};
    size_t n = 0, used = 0;
    entry[n++] = "LC_ALL=C.UTF-8";
    for (size_t i = 0; i < sizeof kept / sizeof *kept && n + 1 < most; i++) {
        const char *value = getenv(kept[i]);
        if (!value) continue;
        int length = snprintf(store + used, size - used, "%s=%s", kept[i], value);
        if (length < 0 || (size_t)length >= size - used) continue;
        entry[n++] = store + used;
        used += (size_t)length + 1;
    }
    entry[n] = NULL;
    return n;
}

// Descriptors 0 to 3 of the child are set one by one; copies from HIGH_FD on are never in the way.
#define HIGH_FD   10
#define SCRIPT_FD 3
typedef struct {
    int out, error, folder, script; // -1: none
} descriptors;

static int high_copy(int fd)
{
    return fd < 0 ? -1 : fcntl(fd, F_DUPFD_CLOEXEC, HIGH_FD);
}

static void close_copies(descriptors d)
{
    const int fd[] = {d.out, d.error, d.folder, d.script};
    for (size_t i = 0; i < sizeof fd / sizeof *fd; i++)
        if (fd[i] >= 0) close(fd[i]);
}

static int set_files(posix_spawn_file_actions_t *files, descriptors d)
{
    int bad = posix_spawn_file_actions_addopen(files, 0, "/dev/null", O_RDONLY, 0);
    if (!bad) bad = posix_spawn_file_actions_adddup2(files, d.out, 1);
    if (!bad) bad = posix_spawn_file_actions_adddup2(files, d.error, 2);
    if (!bad && d.script >= 0) bad = posix_spawn_file_actions_adddup2(files, d.script, SCRIPT_FD);
    if (!bad && d.folder >= 0) bad = posix_spawn_file_actions_addfchdir_np(files, d.folder);
    return bad;
}

static int set_how(posix_spawnattr_t *how)
{
    sigset_t none, normal;
    sigemptyset(&none);
    sigemptyset(&normal);
    sigaddset(&normal, SIGPIPE);
    sigaddset(&normal, SIGINT);
    sigaddset(&normal, SIGTERM);
    int bad = posix_spawnattr_setflags(how, POSIX_SPAWN_SETPGROUP | POSIX_SPAWN_SETSIGMASK |
                                                POSIX_SPAWN_SETSIGDEF);
    if (!bad) bad = posix_spawnattr_setpgroup(how, 0);
    if (!bad) bad = posix_spawnattr_setsigmask(how, &none);
    if (!bad) bad = posix_spawnattr_setsigdefault(how, &normal);
    return bad;
}

// Starts gnuplot; 0 or an errno.
static int start(const char *script, descriptors d, pid_t *child)
{
    char store[8192];
    const char *environment[8];
    const char *arguments[] = {"gnuplot", "-d", script, NULL};
    posix_spawn_file_actions_t files;
    posix_spawnattr_t how;
    small_environment(environment, 8, store, sizeof store);
    int bad = posix_spawn_file_actions_init(&files);
    if (bad) return bad;
    bad = posix_spawnattr_init(&how);
    if (!bad) {
        bad = set_files(&files, d);
        if (!bad) bad = set_how(&how);
        if (!bad)
            bad = posix_spawnp(child, "gnuplot", &files, &how, (char *const *)(uintptr_t)arguments,
                               (char *const *)(uintptr_t)environment);
        posix_spawnattr_destroy(&how);
    }
    posix_spawn_file_actions_destroy(&files);
    return bad;
}

// Reads what the child says until it closes the pipe; false: the time is up.
static bool listen_until(int fd, double end_s, char *said, size_t size)
{
    size_t used = 0;
    for (;;) {
        char spill[512];
        double left_s = end_s - now_s();
        struct pollfd wait = {.fd = fd, .events = POLLIN};
        if (left_s <= 0) break;
        int ready = poll(&wait, 1, (int)(left_s * 1e3) + 1);
        if (ready < 0 && errno != EINTR) break;
        if (ready <= 0) continue;
        bool full = used + 1 >= size;
        ssize_t n = full ? read(fd, spill, sizeof spill) : read(fd, said + used, size - 1 - used);
        if (n < 0 && errno == EINTR) continue;
        if (n <= 0) {
            said[used] = 0;
            return true;
        }
        if (!full) used += (size_t)n;
    }
    said[used] = 0;
    return false;
}

// Waits for the child's end; false: the time is up.
static bool wait_until(pid_t child, double end_s, int *result)
{
    for (;;) {
        pid_t p = waitpid(child, result, WNOHANG);
        if (p == child) return true;
        if (p < 0 && errno != EINTR) {
            *result = 0; // the host reaps children itself; what gnuplot said and wrote decides
            return true;
        }
        if (now_s() >= end_s) return false;
        nanosleep(&(struct timespec){.tv_nsec = 2000000}, NULL);
    }
}

// The first line that says something, without control characters.
static const char *first_words(const char *said, char *out, size_t size)
{
    while (*said == '\n' || *said == ' ' || *said == '\t' || *said == '^')
        said++;
    size_t length = strcspn(said, "\n");
    char line[SAID_MOST];
    snprintf(line, sizeof line, "%.*s", (int)length, said);
    return text_clean(line, size, out);
}

static tacet_status verdict(int result, const char *said, tacet_error *e)
{
    char words[160];
    first_words(said, words, sizeof words);
    if (WIFSIGNALED(result))
        return tacet_fail(e, TACET_OUTSIDE_WORLD, "gnuplot was ended by signal %d",
                          WTERMSIG(result));
    if (*words || result != 0)
        return tacet_fail(e, TACET_OUTSIDE_WORLD, "gnuplot failed: %s",
                          *words ? words : "it gave no reason");
    return TACET_OK;
}

tacet_status gnuplot_run(const gnuplot_job *job, tacet_error *e)
{
    int ends[2];
    pid_t child;
    char said[SAID_MOST] = "";
    double end_s = now_s() + job->time_limit_s;
    if (pipe2(ends, O_CLOEXEC) != 0)
        return tacet_fail(e, TACET_OUTSIDE_WORLD, "cannot start gnuplot: %s", strerror(errno));
    descriptors d = {high_copy(job->out_fd), high_copy(ends[1]), high_copy(job->folder_fd),
                     job->script ? -1 : high_copy(job->script_fd)};
    close(ends[1]);
    int bad = d.out < 0 || d.error < 0 ? EMFILE
                                       : start(job->script ? job->script : "/dev/fd/3", d, &child);
    close_copies(d);
    if (bad) {
        close(ends[0]);
        return bad == ENOENT
                   ? tacet_fail(
                         e, TACET_OUTSIDE_WORLD,
                         "drawings need gnuplot, which is not installed; install it, or ask for "
                         "no drawings")
                   : tacet_fail(e, TACET_OUTSIDE_WORLD, "cannot start gnuplot: %s", strerror(bad));
    }
    int result = 0;
    bool done = listen_until(ends[0], end_s, said, sizeof said);
    done = done && wait_until(child, end_s, &result);
    close(ends[0]);
    if (done) return verdict(result, said, e);
    kill(-child, SIGKILL);
    while (waitpid(child, &result, 0) < 0 && errno == EINTR)
        continue;
    return tacet_fail(e, TACET_OUTSIDE_WORLD, "gnuplot took longer than %g s and was ended",
                      job->time_limit_s);
}
