// The result folder: what is refused, and that no failure leaves half a file or takes an older one.
#include "scratch.h"
#include "tacet/show.h"
#include <errno.h>
#include <fcntl.h>
#include <signal.h>
#include <sys/resource.h>

static tacet_folder *opened(const char *path)
{
    tacet_folder *f = NULL;
    tacet_error e = {0};
    if (tacet_folder_open(path, &f, &e) != TACET_OK) print_error("%s\n", e.text);
    assert_non_null(f);
    return f;
}

static void write_file(tacet_folder *f, const char *name, const char *text)
{
    FILE *to;
    assert_int_equal(tacet_folder_begin(f, name, &to, NULL), TACET_OK);
    fputs(text, to);
    assert_int_equal(tacet_folder_commit(f, NULL), TACET_OK);
}

static void test_creates_and_writes(void **state)
{
    const char *path = scratch_path(*state, "new");
    tacet_folder *f = opened(path);
    FILE *to;
    size_t bytes;
    assert_int_equal(tacet_folder_begin(f, "levels.csv", &to, NULL), TACET_OK);
    fputs("a\n", to);
    // nothing under the final name before commit
    assert_false(scratch_exists(scratch_path(*state, "new/levels.csv")));
    assert_true(scratch_exists(scratch_path(*state, "new/levels.csv.tmp")));
    assert_false(tacet_folder_wrote(f, "levels.csv"));
    assert_int_equal(tacet_folder_commit(f, NULL), TACET_OK);
    assert_true(tacet_folder_wrote(f, "levels.csv"));
    assert_int_equal(scratch_count(path), 1);
    char *text = scratch_read(scratch_path(*state, "new/levels.csv"), &bytes);
    assert_string_equal(text, "a\n");
    free(text);
    tacet_folder_close(f);
}

static void test_second_run_replaces(void **state)
{
    const char *path = scratch_path(*state, "new");
    size_t bytes;
    for (int run = 0; run < 2; run++) {
        tacet_folder *f = opened(path);
        write_file(f, "summary.csv", run ? "second" : "first");
        tacet_folder_close(f);
    }
    char *text = scratch_read(scratch_path(*state, "new/summary.csv"), &bytes);
    assert_string_equal(text, "second");
    free(text);
}

static void refused(const char *path, tacet_status expected, const char *word)
{
    tacet_folder *f;
    tacet_error e = {0};
    assert_int_equal(tacet_folder_open(path, &f, &e), expected);
    assert_null(f);
    if (!strstr(e.text, word)) print_error("%s\n", e.text);
    assert_non_null(strstr(e.text, word));
}

static void test_refuses_foreign_files(void **state)
{
    scratch_file(scratch_path(*state, "summary.csv"), "ours");
    scratch_file(scratch_path(*state, "thesis.doc"), "not ours");
    refused(((scratch *)*state)->path, TACET_BAD_INPUT, "thesis.doc");
    assert_true(scratch_exists(scratch_path(*state, "summary.csv")));
}

static void test_refuses_a_folder_with_our_name(void **state)
{
    mkdir(scratch_path(*state, "map.svg"), 0777);
    refused(((scratch *)*state)->path, TACET_BAD_INPUT, "map.svg");
}

static void test_refuses_what_is_no_folder(void **state)
{
    scratch_file(scratch_path(*state, "plain"), "");
    refused(scratch_path(*state, "plain"), TACET_OUTSIDE_WORLD, "plain");
    refused(scratch_path(*state, "plain/inner"), TACET_OUTSIDE_WORLD, "plain/inner");
    refused(scratch_path(*state, "missing/inner"), TACET_OUTSIDE_WORLD, strerror(ENOENT));
    refused("", TACET_BAD_INPUT, "empty");
}

static void test_refuses_unwritable(void **state)
{
    if (geteuid() == 0) skip(); // root may write anywhere
    mkdir(scratch_path(*state, "shut"), 0555);
    refused(scratch_path(*state, "shut"), TACET_OUTSIDE_WORLD, strerror(EACCES));
    refused(scratch_path(*state, "shut/inner"), TACET_OUTSIDE_WORLD, strerror(EACCES));
}

static void test_writes_known_names_only(void **state)
{
    tacet_folder *f = opened(((scratch *)*state)->path);
    FILE *to;
    static const char *const bad[] = {"other.csv", "../map.svg", "/etc/map.svg", "map.svg.tmp", ""};
    for (size_t i = 0; i < sizeof bad / sizeof *bad; i++) {
        assert_int_equal(tacet_folder_begin(f, bad[i], &to, NULL), TACET_BAD_INPUT);
        assert_null(to);
    }
    assert_int_equal(tacet_folder_begin(f, "map.svg", &to, NULL), TACET_OK);
    assert_int_equal(tacet_folder_begin(f, "bars.svg", &to, NULL),
                     TACET_BAD_INPUT); // one at a time
    tacet_folder_close(f);             // aborts
    assert_int_equal(scratch_count(((scratch *)*state)->path), 0);
}

// A link planted under the temporary name is replaced, not followed.
static void test_follows_no_link(void **state)
{
    size_t bytes;
    scratch_file(scratch_path(*state, "victim"), "precious");
    mkdir(scratch_path(*state, "out"), 0777);
    tacet_folder *f = opened(scratch_path(*state, "out"));
    assert_int_equal(symlink("../victim", scratch_path(*state, "out/map.svg.tmp")), 0);
    write_file(f, "map.svg", "drawing");
    tacet_folder_close(f);
    char *text = scratch_read(scratch_path(*state, "victim"), &bytes);
    assert_string_equal(text, "precious");
    free(text);
}

// The file system's limit on the size of a file stands in for a full disk.
static void test_full_disk_keeps_the_older_file(void **state)
{
    tacet_folder *f = opened(((scratch *)*state)->path);
    struct rlimit before, small;
    tacet_error e;
    FILE *to;
    size_t bytes;
    write_file(f, "levels.csv", "older");
    getrlimit(RLIMIT_FSIZE, &before);
    small = before;
    small.rlim_cur = 4096;
    signal(SIGXFSZ, SIG_IGN);
    assert_int_equal(setrlimit(RLIMIT_FSIZE, &small), 0);
    assert_int_equal(tacet_folder_begin(f, "levels.csv", &to, NULL), TACET_OK);
    for (int i = 0; i < 20000; i++)
        fputs("0123456789\n", to);
    tacet_status s = tacet_folder_commit(f, &e);
    setrlimit(RLIMIT_FSIZE, &before);
    assert_int_equal(s, TACET_OUTSIDE_WORLD);
    assert_non_null(strstr(e.text, scratch_path(*state, "levels.csv")));
    assert_non_null(strstr(e.text, strerror(EFBIG)));
    assert_int_equal(scratch_count(((scratch *)*state)->path), 1); // no .tmp left
    char *text = scratch_read(scratch_path(*state, "levels.csv"), &bytes);
    assert_string_equal(text, "older");
    free(text);
    tacet_folder_close(f);
}

static void test_tidy_takes_older_results(void **state)
{
    scratch_file(scratch_path(*state, "map.png"), "of an earlier run");
    scratch_file(scratch_path(*state, "orders.svg.tmp"), "of a killed run");
    tacet_folder *f = opened(((scratch *)*state)->path);
    write_file(f, "map.svg", "new");
    assert_int_equal(tacet_folder_tidy(f, NULL), TACET_OK);
    assert_true(scratch_exists(scratch_path(*state, "map.svg")));
    assert_int_equal(scratch_count(((scratch *)*state)->path), 1);
    tacet_folder_close(f);
}

#define EACH(t) cmocka_unit_test_setup_teardown(t, scratch_create, scratch_destroy)
int main(void)
{
    static const struct CMUnitTest tests[] = {
        EACH(test_creates_and_writes),
        EACH(test_second_run_replaces),
        EACH(test_refuses_foreign_files),
        EACH(test_refuses_a_folder_with_our_name),
        EACH(test_refuses_what_is_no_folder),
        EACH(test_refuses_unwritable),
        EACH(test_writes_known_names_only),
        EACH(test_follows_no_link),
        EACH(test_full_disk_keeps_the_older_file),
        EACH(test_tidy_takes_older_results),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
