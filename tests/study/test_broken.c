// Broken studies and books as files. Each says at its top what is to be reported of it, line by
// line:
//   # expect: LINE:COLUMN: error: TEXT          of the file itself
//   # expect: FILE:LINE:COLUMN: warning: TEXT   of a file that it names
// Nothing more and nothing less may be reported. A file with errors is refused, one with warnings
// alone is read.
#include "near.h"
#include "tacet/pattern.h"
#include "tacet/study.h"
#include <dirent.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#define MOST_FILES 400
#define MARK       "# expect: "

static bool ends(const char *name, const char *end)
{
    size_t n = strlen(name), m = strlen(end);
    return n > m && strcmp(name + n - m, end) == 0;
}

// The lines behind the mark, one a line.
static char *expected_of(const char *name)
{
    tacet_arena *a = tacet_arena_create();
    char *bytes, *out, *to;
    size_t n;
    assert_int_equal(tacet_file_read(name, 1 << 20, a, &bytes, &n, NULL), TACET_OK);
    to = out = calloc(n + 1, 1);
    for (char *line = bytes; strncmp(line, MARK, strlen(MARK)) == 0;) {
        char *end = line + strcspn(line, "\n");
        size_t letters = (size_t)(end - line) - strlen(MARK) + 1;
        memcpy(to, line + strlen(MARK), letters);
        to += letters;
        line = end + 1;
    }
    tacet_arena_destroy(a);
    return out;
}

static void print_problems(const tacet_problems *p, const char *name, FILE *to)
{
    for (size_t i = 0; i < tacet_problems_kept(p); i++) {
        const tacet_problem *q = tacet_problems_at(p, i);
        if (strcmp(q->file, name) != 0) fprintf(to, "%s:", q->file);
        fprintf(to, "%d:%d: %s: %s\n", q->line, q->column, q->warning ? "warning" : "error",
                q->text);
    }
}

static tacet_status read_file(const char *name, tacet_problems *problems)
{
    if (ends(name, ".words")) {
        tacet_words words;
        tacet_arena *a = tacet_arena_create();
        tacet_status status = tacet_book_read(name, a, problems, &words);
        tacet_arena_destroy(a);
        return status;
    }
    tacet_study *study = NULL;
    tacet_status status = tacet_study_read(name, problems, &study);
    assert_int_equal(study != NULL, status == TACET_OK);
    tacet_study_destroy(study);
    return status;
}

static void test_file(void **state)
{
    const char *name = *state;
    char *expected = expected_of(name), *got = NULL;
    size_t n = 0;
    tacet_problems *problems = tacet_problems_create();
    tacet_status status = read_file(name, problems);
    FILE *to = open_memstream(&got, &n);
    print_problems(problems, name, to);
    fclose(to);
    bool errors = tacet_problems_errors(problems) > 0;
    tacet_problems_destroy(problems);
    if (strcmp(expected, got) != 0)
        fail_msg("%s\n-- expected\n%s-- reported\n%s", name, expected, got);
    free(expected);
    free(got);
    assert_int_equal(status, errors ? TACET_BAD_INPUT : TACET_OK);
}

static int by_name(const void *a, const void *b)
{
    return strcmp(((const struct CMUnitTest *)a)->name, ((const struct CMUnitTest *)b)->name);
}

int main(int argc, char **argv)
{
    static struct CMUnitTest tests[MOST_FILES];
    size_t n = 0;
    DIR *folder = argc > 1 && chdir(argv[1]) == 0 ? opendir(".") : NULL;
    if (!folder) return 1;
    for (struct dirent *entry; (entry = readdir(folder)) && n < MOST_FILES;) {
        if (!ends(entry->d_name, ".yaml") && !ends(entry->d_name, ".words")) continue;
        char *name = strdup(entry->d_name);
        tests[n++] =
            (struct CMUnitTest){.name = name, .test_func = test_file, .initial_state = name};
    }
    closedir(folder);
    qsort(tests, n, sizeof *tests, by_name);
    if (n < 100) return 1; // the files are not there
    int failed = _cmocka_run_group_tests("broken", tests, n, NULL, NULL);
    for (size_t i = 0; i < n; i++)
        free(tests[i].initial_state);
    return failed;
}
