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

// Starts gnuplot; 0 or an errno.
static int start(int folder_fd, const char *script, int out_fd, int error_fd, pid_t *child)
{
    char store[8192];
    const char *environment[8];
    const char *arguments[] = {"gnuplot", "-d", script, NULL};
    posix_spawn_file_actions_t files;
    posix_spawnattr_t how;
    sigset_t none, normal;
    small_environment(environment, 8, store, sizeof store);
    sigemptyset(&none);
    sigemptyset(&normal);
    sigaddset(&normal, SIGPIPE);
    sigaddset(&normal, SIGINT);
    sigaddset(&normal, SIGTERM);

    int bad = posix_spawn_file_actions_init(&files);
    if (bad) return bad;
    bad = posix_spawnattr_init(&how);
    if (bad) {
        posix_spawn_file_actions_destroy(&files);
        return bad;
    }
    if (!bad) bad = posix_spawn_file_actions_addopen(&files, 0, "/dev/null", O_RDONLY, 0);
    if (!bad) bad = posix_spawn_file_actions_adddup2(&files, out_fd, 1);
    if (!bad) bad = posix_spawn_file_actions_adddup2(&files, error_fd, 2);
    if (!bad) bad = posix_spawn_file_actions_addfchdir_np(&files, folder_fd);
    if (!bad)
        bad = posix_spawnattr_setflags(&how, POSIX_SPAWN_SETPGROUP | POSIX_SPAWN_SETSIGMASK |
                                                 POSIX_SPAWN_SETSIGDEF);
    if (!bad) bad = posix_spawnattr_setpgroup(&how, 0);
    if (!bad) bad = posix_spawnattr_setsigmask(&how, &none);
    if (!bad) bad = posix_spawnattr_setsigdefault(&how, &normal);
    if (!bad)
        bad = posix_spawnp(child, "gnuplot", &files, &how, (char *const *)(uintptr_t)arguments,
                           (char *const *)(uintptr_t)environment);
    posix_spawnattr_destroy(&how);
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
            *result = -1;
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

tacet_status gnuplot_run(int folder_fd, const char *script, int out_fd, double time_limit_s,
                         tacet_error *e)
{
    int ends[2];
    pid_t child;
    char said[SAID_MOST] = "";
    double end_s = now_s() + time_limit_s;
    if (pipe2(ends, O_CLOEXEC) != 0)
        return tacet_fail(e, TACET_OUTSIDE_WORLD, "cannot start gnuplot: %s", strerror(errno));
    int bad = start(folder_fd, script, out_fd, ends[1], &child);
    close(ends[1]);
    if (bad) {
        close(ends[0]);
        return bad == ENOENT
                   ? tacet_fail(e, TACET_OUTSIDE_WORLD,
                                "drawings need gnuplot, which is not installed")
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
    return tacet_fail(e, TACET_OUTSIDE_WORLD, "gnuplot took longer than %.0f s and was ended",
                      time_limit_s);
}
