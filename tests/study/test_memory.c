// Memory runs out at every allocation in turn: a status, no crash, nothing lost, no wrong answer.
#include "near.h"
#include "tacet/study.h"
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

static long left = -1;  // allocations that still succeed; -1: all
static bool fail_once;  // only one fails, or all from there on
static bool has_failed; // one did
static size_t asked;    // bytes of all allocations of the arenas

static bool fails(void)
{
    if (left < 0) return false;
    if (left > 0) {
        left--;
        return false;
    }
    if (fail_once) left = -1;
    has_failed = true;
    return true;
}

void *__real_malloc(size_t bytes);
void *__wrap_malloc(size_t bytes);
void *__wrap_malloc(size_t bytes)
{
    return fails() ? NULL : __real_malloc(bytes);
}

void *__real_calloc(size_t n, size_t size);
void *__wrap_calloc(size_t n, size_t size);
void *__wrap_calloc(size_t n, size_t size)
{
    return fails() ? NULL : __real_calloc(n, size);
}

void *__real_realloc(void *p, size_t bytes);
void *__wrap_realloc(void *p, size_t bytes);
void *__wrap_realloc(void *p, size_t bytes)
{
    return fails() ? NULL : __real_realloc(p, bytes);
}

void *__real_aligned_alloc(size_t alignment, size_t bytes);
void *__wrap_aligned_alloc(size_t alignment, size_t bytes);
void *__wrap_aligned_alloc(size_t alignment, size_t bytes)
{
    asked += bytes;
    return fails() ? NULL : __real_aligned_alloc(alignment, bytes);
}

char *__real_strdup(const char *text);
char *__wrap_strdup(const char *text);
char *__wrap_strdup(const char *text)
{
    return fails() ? NULL : __real_strdup(text);
}

typedef struct {
    tacet_status status;
    uint64_t fingerprint;
    size_t errors;
    bool says_memory;
} outcome;

static outcome read_with(const char *path, long allowed, bool once)
{
    tacet_problems *p = tacet_problems_create();
    tacet_study *s = NULL;
    left = allowed;
    fail_once = once;
    has_failed = false;
    outcome o = {.status = tacet_study_read(path, p, &s)};
    left = -1;
    o.errors = tacet_problems_errors(p);
    for (size_t i = 0; i < tacet_problems_kept(p); i++)
        o.says_memory |= strstr(tacet_problems_at(p, i)->text, "no memory") != NULL;
    if (s) o.fingerprint = s->fingerprint;
    assert_int_equal(s != NULL, o.status == TACET_OK);
    tacet_study_destroy(s);
    tacet_problems_destroy(p);
    return o;
}

// Every n-th allocation failing alone: no memory, or the whole answer.
static void check_each(const char *path)
{
    outcome whole = read_with(path, -1, false);
    long n = 0;
    for (;; n++) {
        outcome o = read_with(path, n, true);
        if (!has_failed) break;
        if (o.status == TACET_NO_MEMORY || o.says_memory) continue;
        assert_int_equal(o.status, whole.status);
        assert_true(o.fingerprint == whole.fingerprint);
        if (o.errors < whole.errors)
            fail_msg("%s: %zu of %zu errors without allocation %ld", path, o.errors, whole.errors,
                     n);
    }
    assert_true(n > 50);
    for (n = 0;; n += 3) {
        outcome o = read_with(path, n, false);
        if (!has_failed) break;
        if (o.status == TACET_OK) fail_msg("%s: read although allocation %ld failed", path, n);
    }
}

static void test_good_study(void **state)
{
    (void)state;
    check_each("good/full.yaml");
}

static void test_broken_studies(void **state)
{
    (void)state;
    check_each("broken/many-at-once.yaml");
    check_each("broken/patterns-wrong.yaml");
    check_each("broken/name-twice.yaml");
}

// Twelve letters stand for 99901 values; a list of many such is refused before it is filled.
static void test_ranges_in_a_list(void **state)
{
    (void)state;
    static char text[8192] = "screen: {speeds_rpm: [";
    for (size_t i = 0; i < 500; i++)
        strcat(text, "10:1009:0.01, ");
    strcat(text, "10]}\n");
    tacet_problems *p = tacet_problems_create();
    tacet_study *s = NULL;
    bool said = false;
    asked = 0;
    assert_int_equal(tacet_study_read_text(text, strlen(text), "study.yaml", p, &s),
                     TACET_BAD_INPUT);
    for (size_t i = 0; i < tacet_problems_kept(p); i++)
        said |= strstr(tacet_problems_at(p, i)->text, "more than 100000 values") != NULL;
    tacet_problems_destroy(p);
    assert_true(said);
    if (asked > 10u << 20) fail_msg("%zu bytes for a file of %zu", asked, strlen(text));
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_good_study),
    cmocka_unit_test(test_broken_studies),
    cmocka_unit_test(test_ranges_in_a_list),
};

int main(int argc, char **argv)
{
    if (argc < 2 || chdir(argv[1]) != 0) return 1;
    return cmocka_run_group_tests(tests, NULL, NULL);
}
