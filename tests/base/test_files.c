#include "near.h"
#include "tacet/base.h"
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

static char folder[] = "/tmp/tacet-files-XXXXXX";

static const char *write_file(const char *bytes, size_t n)
{
    static char path[64];
    snprintf(path, sizeof path, "%s/data.csv", folder);
    FILE *f = fopen(path, "wb");
    assert_non_null(f);
    assert_int_equal(fwrite(bytes, 1, n, f), n);
    assert_int_equal(fclose(f), 0);
    return path;
}

static void test_file_whole(void **state)
{
    (void)state;
    static char bytes[200001];
    memset(bytes, 'a', sizeof bytes);
    bytes[1000] = '\0';
    const char *path = write_file(bytes, sizeof bytes);
    tacet_arena *a = tacet_arena_create();
    char *out = NULL;
    size_t n = 0;
    tacet_error e;
    assert_int_equal(tacet_file_read(path, sizeof bytes, a, &out, &n, &e), TACET_OK);
    assert_int_equal(n, sizeof bytes);
    assert_memory_equal(out, bytes, n);
    assert_int_equal(out[n], 0);
    assert_int_equal(tacet_file_read(path, sizeof bytes - 1, a, &out, &n, &e), TACET_OUTSIDE_WORLD);
    assert_non_null(strstr(e.text, "more than the 200000 bytes allowed"));
    static char large[(1 << 20) + 1];
    memset(large, 'a', sizeof large);
    path = write_file(large, sizeof large);
    assert_int_equal(tacet_file_read(path, 1 << 20, a, &out, &n, &e), TACET_OUTSIDE_WORLD);
    assert_non_null(strstr(e.text, "more than the 1 MiB allowed"));
    tacet_arena_destroy(a);
}

static void test_file_not_there(void **state)
{
    (void)state;
    tacet_arena *a = tacet_arena_create();
    char *out;
    size_t n;
    tacet_error e;
    assert_int_equal(tacet_file_read("/no/such/file", 10, a, &out, &n, &e), TACET_OUTSIDE_WORLD);
    assert_string_equal(e.text, "cannot read /no/such/file: there is no such file");
    assert_int_equal(tacet_file_read(folder, 10, a, &out, &n, &e), TACET_OUTSIDE_WORLD);
    assert_non_null(strstr(e.text, "it is a folder"));
    tacet_arena_destroy(a);
}

static tacet_status read_csv(const char *text, tacet_arena *a, tacet_csv *out, tacet_error *e)
{
    return tacet_csv_read(write_file(text, strlen(text)), a, out, e);
}

static void test_csv_good(void **state)
{
    (void)state;
    tacet_arena *a = tacet_arena_create();
    tacet_csv c;
    tacet_error e;
    assert_int_equal(
        read_csv("\xEF\xBB\xBF# measured\r\n\r\nangle_deg, \"p 1\" ,p2\r\n0, 1.5,-2\r\n"
                 "# half way\r\n 0.5 ,1e3,0",
                 a, &c, &e),
        TACET_OK);
    assert_int_equal(c.rows, 2);
    assert_int_equal(c.columns, 3);
    assert_string_equal(c.header[0], "angle_deg");
    assert_string_equal(c.header[1], "p 1");
    assert_string_equal(c.header[2], "p2");
    static const double expected[] = {0, 1.5, -2, 0.5, 1000, 0};
    for (size_t i = 0; i < 6; i++)
        assert_near(c.value[i], expected[i], 0, 0);
    tacet_arena_destroy(a);
}

static void test_csv_bad(void **state)
{
    (void)state;
    static const struct {
        const char *text, *part;
        int line, column;
    } bad[] = {
        {"", "empty", 1, 1},
        {"# only words\n", "empty", 1, 1},
        {"a,b\n", "no rows", 1, 1},
        {"a;b\n1;2\n", "';' between columns", 1, 2},
        {"1,2\n3,4\n", "'1' where the header line is expected", 1, 1},
        {"a,,b\n", "without a name", 1, 3},
        {"a,b\n1,2\n1,2,3\n", "3 cells; the header line has 2", 3, 1},
        {"a,b\n1,x\n", "'x' in column b is not a number", 2, 3},
        {"a,b\n\n1,nan\n", "'nan' in column b", 3, 3},
        {"a,b\n,1\n", "'' in column a", 2, 1},
    };
    for (size_t i = 0; i < sizeof bad / sizeof *bad; i++) {
        tacet_arena *a = tacet_arena_create();
        tacet_csv c = {0};
        tacet_error e;
        assert_int_equal(read_csv(bad[i].text, a, &c, &e), TACET_BAD_INPUT);
        if (!strstr(e.text, bad[i].part)) fail_msg("'%s': %s", bad[i].text, e.text);
        assert_int_equal(e.line, bad[i].line);
        assert_int_equal(e.column, bad[i].column);
        assert_null(c.value);
        tacet_arena_destroy(a);
    }
    tacet_arena *a = tacet_arena_create();
    tacet_csv c;
    tacet_error e;
    assert_int_equal(tacet_csv_read(write_file("a\n1\0\n", 5), a, &c, &e), TACET_BAD_INPUT);
    assert_non_null(strstr(e.text, "zero byte"));
    assert_int_equal(e.line, 2);
    assert_int_equal(e.column, 2);
    tacet_arena_destroy(a);
}

static int make_folder(void **state)
{
    (void)state;
    return mkdtemp(folder) ? 0 : -1;
}

static int remove_folder(void **state)
{
    (void)state;
    char path[64];
    snprintf(path, sizeof path, "%s/data.csv", folder);
    return unlink(path) || rmdir(folder);
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_file_whole),
    cmocka_unit_test(test_file_not_there),
    cmocka_unit_test(test_csv_good),
    cmocka_unit_test(test_csv_bad),
};

int main(void)
{
    return cmocka_run_group_tests(tests, make_folder, remove_folder);
}
