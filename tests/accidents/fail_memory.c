// Loaded before the C library, it makes allocations of the whole process fail: its own, those of
// GSL, libyaml and the C library's streams. What FFTW allocates while it plans never fails: FFTW
// ends the process then, whoever asks.
//   FAIL_COPIES=f   at the n-th call, for every n, a copy of the process is forked. The call fails
//                   in the copy, which goes on in f/n, a copy of the working folder, its open files
//                   with it; then the process goes on as if nothing had been.
//                   FAIL_FROM=n, FAIL_STEP=n: not every call, but from the n-th on every n-th.
//                   f/log gets a line for each: n, "exit" or "signal", its number.
//   FAIL_AT=n       without copies: the n-th call fails
//   FAIL_ON=1       and so does every later one
// At exit `blocks` in the working folder gets: calls; blocks never freed, without FFTW's planner,
// the buffers of standard streams and what GSL 2.7.1 itself forgets where the second allocation of
// one of its things fails. FAIL_SHOW=1 tells on standard error where blocks come from.
#include "fork_copy.h"
#include <dlfcn.h>
#include <errno.h>
#include <fcntl.h>
#include <link.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/wait.h>
#include <unistd.h>

#pragma GCC visibility push(default)
// The C library's own entrances: looking them up by dlsym would allocate.
void *__libc_malloc(size_t bytes);
void *__libc_calloc(size_t n, size_t bytes);
void *__libc_realloc(void *old, size_t bytes);
void *__libc_memalign(size_t alignment, size_t bytes);
void __libc_free(void *block);
void *memalign(size_t alignment, size_t bytes);
void *fftw_malloc(size_t bytes);

#define SLOTS_LOG2 18
#define SLOTS      ((size_t)1 << SLOTS_LOG2)
static struct {
    uintptr_t block; // 0: free, 1: was used
    const void *caller;
} live[SLOTS];

static struct {
    bool counting, failing, on;
    unsigned long at, from, step, calls;
    const char *copies;
    int log;
} state;

typedef struct {
    uintptr_t from, to;
} range; // addresses of a library
static range fftw, gsl;

static bool within(const range *r, const void *caller)
{
    return (uintptr_t)caller >= r->from && (uintptr_t)caller < r->to;
}

static size_t slot_of(const void *block)
{
    return (size_t)((uint64_t)(uintptr_t)block * 0x9e3779b97f4a7c15u >> (64 - SLOTS_LOG2));
}

static void *keep(void *block, const void *caller)
{
    if (!block || !state.counting || within(&fftw, caller)) return block;
    size_t i = slot_of(block);
    while (live[i].block > 1)
        i = (i + 1) % SLOTS;
    live[i].block = (uintptr_t)block;
    live[i].caller = caller;
    return block;
}

static void forget(const void *block)
{
    if (!block) return;
    for (size_t i = slot_of(block); live[i].block; i = (i + 1) % SLOTS)
        if (live[i].block == (uintptr_t)block) {
            live[i].block = 1;
            return;
        }
}

// True in the copy.
static bool fork_here(void)
{
    char line[80];
    int result;
    state.counting = false;
    pid_t child = fork_copy(state.copies, state.calls);
    if (child == 0) {
        state.copies = NULL;
        state.counting = state.failing = true;
        return true;
    }
    while (waitpid(child, &result, 0) < 0 && errno == EINTR)
        continue;
    int n = snprintf(line, sizeof line, "%lu %s %d\n", state.calls,
                     WIFEXITED(result) ? "exit" : "signal",
                     WIFEXITED(result) ? WEXITSTATUS(result) : WTERMSIG(result));
    if (write(state.log, line, (size_t)n) != n) fork_copy_failed("log");
    state.counting = true;
    return false;
}

static bool fails(const void *caller)
{
    if (!state.counting || within(&fftw, caller)) return false;
    state.calls++;
    bool bad = state.failing && state.on;
    bool due = state.calls >= state.from && (state.calls - state.from) % state.step == 0;
    if (state.copies && due) bad = fork_here();
    if (state.calls == state.at) bad = state.failing = true;
    if (bad) errno = ENOMEM;
    return bad;
}

#define CALLER __builtin_return_address(0)

void *malloc(size_t bytes)
{
    return fails(CALLER) ? NULL : keep(__libc_malloc(bytes), CALLER);
}

void *calloc(size_t n, size_t bytes)
{
    return fails(CALLER) ? NULL : keep(__libc_calloc(n, bytes), CALLER);
}

static void *resize(void *old, size_t bytes, const void *caller)
{
    if (fails(caller)) return NULL;
    void *block = __libc_realloc(old, bytes);
    if (block) forget(old);
    return keep(block, caller);
}

void *realloc(void *old, size_t bytes)
{
    return resize(old, bytes, CALLER);
}

void *reallocarray(void *old, size_t n, size_t bytes)
{
    size_t all;
    return __builtin_mul_overflow(n, bytes, &all) ? NULL : resize(old, all, CALLER);
}

void *memalign(size_t alignment, size_t bytes)
{
    return fails(CALLER) ? NULL : keep(__libc_memalign(alignment, bytes), CALLER);
}

void *aligned_alloc(size_t alignment, size_t bytes)
{
    return fails(CALLER) ? NULL : keep(__libc_memalign(alignment, bytes), CALLER);
}

int posix_memalign(void **out, size_t alignment, size_t bytes)
{
    void *block = fails(CALLER) ? NULL : keep(__libc_memalign(alignment, bytes), CALLER);
    if (!block) return ENOMEM;
    *out = block;
    return 0;
}

// Arrays that FFTW makes for its callers: there it says when it has none.
void *fftw_malloc(size_t bytes)
{
    return fails(CALLER) ? NULL : keep(__libc_memalign(64, bytes), CALLER);
}

void free(void *block)
{
    forget(block);
    __libc_free(block);
}

static int look_at_library(struct dl_phdr_info *info, size_t size, void *who)
{
    range *r = strstr(info->dlpi_name, "/libfftw3")  ? &fftw
               : strstr(info->dlpi_name, "/libgsl.") ? &gsl
                                                     : NULL;
    (void)size;
    (void)who;
    for (int i = 0; r && i < info->dlpi_phnum; i++) {
        const ElfW(Phdr) *p = &info->dlpi_phdr[i];
        if (p->p_type != PT_LOAD || !(p->p_flags & PF_X)) continue;
        r->from = info->dlpi_addr + p->p_vaddr;
        r->to = r->from + p->p_memsz;
    }
    return 0;
}

static unsigned long number(const char *variable, unsigned long fallback)
{
    const char *text = getenv(variable);
    return text ? strtoul(text, NULL, 10) : fallback;
}

__attribute__((constructor)) static void start(void)
{
    dl_iterate_phdr(look_at_library, NULL);
    state.at = number("FAIL_AT", 0);
    state.from = number("FAIL_FROM", 1);
    state.step = number("FAIL_STEP", 1);
    state.on = getenv("FAIL_ON") != NULL;
    state.copies = getenv("FAIL_COPIES");
    if (state.copies) {
        char name[4096];
        snprintf(name, sizeof name, "%s/log", state.copies);
        state.log = open(name, O_WRONLY | O_CREAT | O_APPEND | O_CLOEXEC, 0666);
        if (state.log < 0) fork_copy_failed(name);
    }
    state.counting = true;
}

static bool of_a_stream(const void *caller)
{
    Dl_info at;
    return dladdr(caller, &at) && at.dli_sname && strcmp(at.dli_sname, "_IO_file_doallocate") == 0;
}

__attribute__((destructor)) static void end(void)
{
    char text[80];
    unsigned long left = 0;
    state.counting = false;
    for (size_t i = 0; i < SLOTS; i++) {
        Dl_info at = {0};
        if (live[i].block <= 1 || of_a_stream(live[i].caller)) continue;
        if (state.failing && within(&gsl, live[i].caller)) continue;
        left++;
        if (!getenv("FAIL_SHOW") || !dladdr(live[i].caller, &at)) continue;
        dprintf(2, "live: %s %#tx %s\n", at.dli_fname,
                (const char *)live[i].caller - (const char *)at.dli_fbase,
                at.dli_sname ? at.dli_sname : "");
    }
    int n = snprintf(text, sizeof text, "%lu %lu\n", state.calls, left);
    int fd = open("blocks", O_WRONLY | O_CREAT | O_TRUNC, 0666);
    if (fd < 0 || write(fd, text, (size_t)n) != n) fork_copy_failed("blocks");
    close(fd);
}
