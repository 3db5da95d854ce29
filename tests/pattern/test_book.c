// Books, and what may stand where a pattern is asked for.
#include "near.h"
#include "tacet/pattern.h"
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

static tacet_arena *arena;
static tacet_problems *problems;

static int set_up(void **state)
{
    (void)state;
    arena = tacet_arena_create();
    problems = tacet_problems_create();
    return arena && problems ? 0 : -1;
}

static int tear_down(void **state)
{
    (void)state;
    tacet_problems_destroy(problems);
    tacet_arena_destroy(arena);
    return 0;
}

static tacet_status read_text(const char *text, tacet_words *w)
{
    return tacet_book_read_text(text, strlen(text), "own.words", arena, problems, w);
}

static void assert_word(const tacet_pattern *p, const char *expected)
{
    char text[TACET_PATTERN_LONGEST + 1];
    assert_string_equal(tacet_pattern_format(p, text), expected);
}

static void assert_problem(size_t i, bool warning, int line, int column, const char *part)
{
    assert_true(i < tacet_problems_kept(problems));
    const tacet_problem *p = tacet_problems_at(problems, i);
    assert_int_equal(p->warning, warning);
    assert_string_equal(p->file, "own.words");
    assert_int_equal(p->line, line);
    assert_int_equal(p->column, column);
    if (!strstr(p->text, part)) fail_msg("'%s' lacks '%s'", p->text, part);
}

static void test_book(void **state)
{
    (void)state;
    tacet_words w;
    assert_int_equal(read_text("\xef\xbb\xbf# a book\r\n"
                               "\n"
                               "x.x.   front three \t # half\r\n"
                               "\t..x.x.x\n"
                               "x5#soft\n"
                               "  \n"
                               "xx. p\xc3\xa4rchen",
                               &w),
                     TACET_OK);
    assert_int_equal(tacet_problems_kept(problems), 0);
    assert_int_equal(w.n, 4);
    assert_word(&w.pattern[0], "x.x.");
    assert_string_equal(w.name[0], "front three");
    assert_string_equal(w.comment[0], "half");
    assert_int_equal(w.line[0], 3);
    assert_word(&w.pattern[1], "..x.x.x");
    assert_null(w.name[1]);
    assert_null(w.comment[1]);
    assert_word(&w.pattern[2], "x5");
    assert_string_equal(w.comment[2], "soft");
    assert_string_equal(w.name[3], "p\xc3\xa4rchen");
    assert_int_equal(w.line[3], 7);
}

static void test_book_all_problems(void **state)
{
    (void)state;
    tacet_words w;
    assert_int_equal(read_text("x.0 one\n"     // 1
                               "  .. never\n"  // 2
                               "x. a:b\n"      // 3
                               "xx. same\n"    // 4
                               "x..x.. same\n" // 5
                               "x.. other\n"   // 6
                               "x\x01. odd\n", // 7
                               &w),
                     TACET_BAD_INPUT);
    assert_int_equal(tacet_problems_kept(problems), 6);
    assert_problem(0, false, 1, 3, "letter '0' at position 3");
    assert_problem(1, false, 2, 3, "never fires");
    assert_problem(2, false, 3, 5, "':' in a name");
    assert_problem(3, false, 5, 8, "the name 'same' again; line 4");
    assert_problem(4, true, 6, 1, "the same pattern as in line 5");
    assert_problem(5, false, 7, 2, "byte 0x01");
}

static void test_book_name_before_word(void **state)
{
    (void)state;
    tacet_words w;
    assert_int_equal(read_text("x. one\n  half ..x\nhalf full\n", &w), TACET_BAD_INPUT);
    assert_int_equal(tacet_problems_kept(problems), 2);
    assert_problem(0, false, 2, 3, "a line is a word and then its name: ..x half");
    assert_problem(1, false, 3, 1, "letter 'h' at position 1");
}

static void test_book_same_word_is_a_warning(void **state)
{
    (void)state;
    tacet_words w;
    assert_int_equal(read_text("x.x.\nx.\n.x\n", &w), TACET_OK);
    assert_int_equal(w.n, 3);
    assert_int_equal(tacet_problems_warnings(problems), 1);
    assert_problem(0, true, 2, 1, "the same pattern as in line 1");
}

static void test_book_empty(void **state)
{
    (void)state;
    tacet_words w;
    assert_int_equal(read_text("# nothing\n", &w), TACET_BAD_INPUT);
    assert_problem(0, false, 0, 0, "no word in this book");
    assert_int_equal(read_text("", &w), TACET_BAD_INPUT);
}

static void test_book_limits(void **state)
{
    (void)state;
    tacet_words w;
    size_t bytes = 1024 * 1024 + 1;
    char *text = malloc(bytes);
    assert_non_null(text);
    memset(text, ' ', bytes);
    assert_int_equal(tacet_book_read_text(text, bytes, "own.words", arena, problems, &w),
                     TACET_BAD_INPUT);
    assert_problem(0, false, 0, 0, "more than 1 MiB");
    for (size_t i = 0; i < bytes; i++)
        text[i] = i % 2 ? '\n' : 'x';
    assert_int_equal(tacet_book_read_text(text, 20002, "own.words", arena, problems, &w),
                     TACET_BAD_INPUT);
    bool said = false;
    for (size_t i = 0; i < tacet_problems_kept(problems); i++)
        said |= strstr(tacet_problems_at(problems, i)->text, "more than 10000 words") != NULL;
    assert_true(said);
    memset(text, 'n', 300);
    memcpy(text, "x. ", 3);
    text[300] = '\0';
    assert_int_equal(read_text(text, &w), TACET_BAD_INPUT);
    free(text);
}

static void test_book_zero_byte(void **state)
{
    (void)state;
    tacet_words w;
    assert_int_equal(tacet_book_read_text("x.\n.x\0x\n", 8, "own.words", arena, problems, &w),
                     TACET_BAD_INPUT);
    assert_problem(0, false, 2, 3, "byte 0x00");
}

// RFC 3629: overlong forms, surrogates, stray and cut-off sequences are no letters.
static void test_book_bad_utf8(void **state)
{
    (void)state;
    static const char *const bad[] = {"\xc0\xaf",         "\xe0\x9f\xbf", "\xed\xa0\x80", "\x80",
                                      "\xf4\x90\x80\x80", "\xe2\x82",     "\xff",         "\xc3("};
    for (size_t i = 0; i < sizeof bad / sizeof *bad; i++) {
        char text[16];
        tacet_words w;
        snprintf(text, sizeof text, "x. %s\n", bad[i]);
        assert_int_equal(read_text(text, &w), TACET_BAD_INPUT);
    }
    tacet_words w;
    assert_int_equal(read_text("x. \xe2\x82\xac\xf0\x9f\x9a\x9c\n", &w), TACET_OK);
}

static tacet_words book_of_the_demos(void)
{
    tacet_words w;
    assert_int_equal(tacet_book_read(FOREST_BOOK, arena, problems, &w), TACET_OK);
    return w;
}

// What the comments of patterns/forest.words say, against the roll of a six that fires 1-5-3-6-2-4.
static void test_forest_book(void **state)
{
    (void)state;
    static const unsigned number[] = {1, 5, 3, 6, 2, 4};
    static const struct {
        const char *name;
        unsigned silent; // bit per cylinder number that never fires
        double lowest_order;
    } said[] = {{"front three", 1 << 4 | 1 << 5 | 1 << 6, 1.5},
                {"rear three", 1 << 1 | 1 << 2 | 1 << 3, 1.5},
                {"outer pair rests", 1 << 1 | 1 << 6, 1},
                {"inner pair rests", 1 << 3 | 1 << 4, 1},
                {"inner pair alone", 1 << 1 | 1 << 2 | 1 << 5 | 1 << 6, 1},
                {"even three sevenths", 0, 3. / 7},
                {"even five sevenths", 0, 3. / 7},
                {"lumped sevenths", 0, 3. / 7},
                {"even three fifths", 0, 3. / 5},
                {"rear at half", 0, 1.5}};
    tacet_words w = book_of_the_demos();
    assert_int_equal(tacet_problems_kept(problems), 0);
    assert_int_equal(w.n, sizeof said / sizeof *said);
    for (size_t i = 0; i < w.n; i++) {
        assert_string_equal(w.name[i], said[i].name);
        tacet_roll *r;
        assert_int_equal(tacet_roll_create(&w.pattern[i], 6, 4, &r, NULL), TACET_OK);
        unsigned silent = 0;
        for (unsigned s = 0; s < 6; s++)
            if (tacet_roll_fires_of(r, s) == 0) silent |= 1u << number[s];
        assert_int_equal(silent, said[i].silent);
        assert_near(6. / (2 * r->pattern.length), said[i].lowest_order, 1e-12, 0);
        tacet_roll_destroy(r);
    }
}

static void test_book_missing(void **state)
{
    (void)state;
    tacet_words w;
    assert_int_equal(tacet_book_read("no/such.words", arena, problems, &w), TACET_OUTSIDE_WORLD);
    assert_non_null(strstr(tacet_problems_at(problems, 0)->text, "there is no such file"));
    assert_int_equal(tacet_book_read("/", arena, problems, &w), TACET_OUTSIDE_WORLD);
}

static char path[] = "/tmp/tacet-book-XXXXXX.words";

static void write_book(const char *text)
{
    memcpy(path, "/tmp/tacet-book-XXXXXX.words", sizeof path);
    int fd = mkstemps(path, 6);
    assert_true(fd >= 0);
    assert_int_equal(write(fd, text, strlen(text)), (ssize_t)strlen(text));
    close(fd);
}

static void test_maker_book(void **state)
{
    (void)state;
    tacet_words w;
    tacet_error e;
    tacet_maker_def d = tacet_maker_default();
    write_book("x. front\n.y rear\n");
    d.path = path;
    const tacet_maker *book = tacet_maker_find("book");
    assert_int_equal(book->make(&d, arena, &w, &e), TACET_BAD_INPUT);
    assert_int_equal(e.line, 2);
    assert_int_equal(e.column, 2);
    assert_non_null(strstr(e.text, "letter 'y'"));
    unlink(path);
    assert_int_equal(book->make(&d, arena, &w, &e), TACET_OUTSIDE_WORLD);
    d.path = NULL;
    assert_int_equal(book->make(&d, arena, &w, &e), TACET_BAD_INPUT);
}

static tacet_status find(const char *text, const char *folder, tacet_words *w)
{
    return tacet_words_find(text, folder, "own.words", arena, problems, w);
}

static void test_find(void **state)
{
    (void)state;
    tacet_words w;
    char text[sizeof path + 32];
    assert_int_equal(find("x.x.", NULL, &w), TACET_OK);
    assert_int_equal(w.n, 1);
    assert_word(&w.pattern[0], "x.x.");
    assert_null(w.name[0]);
    write_book("x. front three\n.x rear three\n");
    assert_int_equal(find(path, "elsewhere", &w), TACET_OK); // absolute
    assert_int_equal(w.n, 2);
    assert_int_equal(find(path + 5, "/tmp", &w), TACET_OK);
    assert_int_equal(w.n, 2);
    snprintf(text, sizeof text, "%s:rear three", path);
    assert_int_equal(find(text, NULL, &w), TACET_OK);
    assert_int_equal(w.n, 1);
    assert_word(&w.pattern[0], ".x");
    assert_string_equal(w.name[0], "rear three");
    assert_int_equal(w.line[0], 2);
    assert_int_equal(tacet_problems_kept(problems), 0);
    snprintf(text, sizeof text, "%s:rear thre", path);
    assert_int_equal(find(text, NULL, &w), TACET_BAD_INPUT);
    unlink(path);
    assert_problem(0, false, 0, 0, "'rear three' is near");
}

static void test_find_refused(void **state)
{
    (void)state;
    tacet_words w;
    assert_int_equal(find("x,", NULL, &w), TACET_BAD_INPUT);
    assert_problem(0, false, 0, 0, "'x,' is no pattern (letter ',' at position 2");
    assert_int_equal(find("book.txt:x", NULL, &w), TACET_BAD_INPUT);
    assert_int_equal(find(".words", NULL, &w), TACET_BAD_INPUT);
    assert_int_equal(find("", NULL, &w), TACET_BAD_INPUT);
    assert_int_equal(find("no/such.words", NULL, &w), TACET_OUTSIDE_WORLD);
}

#define TEST(name) cmocka_unit_test_setup_teardown(name, set_up, tear_down)
int main(void)
{
    const struct CMUnitTest tests[] = {
        TEST(test_book),
        TEST(test_book_all_problems),

        TEST(test_book_name_before_word),
        TEST(test_book_same_word_is_a_warning),
        TEST(test_book_empty),
        TEST(test_book_limits),
        TEST(test_book_zero_byte),
        TEST(test_book_bad_utf8),
        TEST(test_forest_book),
        TEST(test_book_missing),
        TEST(test_maker_book),
        TEST(test_find),
        TEST(test_find_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
