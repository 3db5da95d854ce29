#include "near.h"
#include "tacet/base.h"
#include <string.h>

static void test_sorted_by_place(void **state)
{
    (void)state;
    tacet_problems *p = tacet_problems_create();
    tacet_problems_add(p, false, "a.yaml", 7, 2, "third");
    tacet_problems_add(p, true, "a.yaml", 3, 9, "second %d", 2);
    tacet_problems_add(p, false, "b.words", 1, 1, "last");
    tacet_problems_add(p, false, "a.yaml", 3, 1, "first");
    tacet_problems_add(p, false, "a.yaml", 7, 2, "fourth");
    static const char *const order[] = {"first", "second 2", "third", "fourth", "last"};
    assert_int_equal(tacet_problems_kept(p), 5);
    for (size_t i = 0; i < 5; i++)
        assert_string_equal(tacet_problems_at(p, i)->text, order[i]);
    assert_true(tacet_problems_at(p, 1)->warning);
    assert_int_equal(tacet_problems_at(p, 1)->line, 3);
    assert_int_equal(tacet_problems_at(p, 1)->column, 9);
    assert_null(tacet_problems_at(p, 5));
    assert_int_equal(tacet_problems_errors(p), 4);
    assert_int_equal(tacet_problems_warnings(p), 1);
    tacet_problems_destroy(p);
    tacet_problems_destroy(NULL);
}

static void test_first_twenty_of_a_kind(void **state)
{
    (void)state;
    tacet_problems *p = tacet_problems_create();
    for (int line = 100; line > 0; line--) {
        tacet_problems_add(p, false, "a", line, 1, "error");
        tacet_problems_add(p, true, "a", line, 1, "warning");
    }
    assert_int_equal(tacet_problems_kept(p), 40);
    assert_int_equal(tacet_problems_errors(p), 100);
    assert_int_equal(tacet_problems_warnings(p), 100);
    for (size_t i = 0; i < 40; i++)
        assert_int_equal(tacet_problems_at(p, i)->line, i / 2 + 1);
    tacet_problems_destroy(p);
}

static void test_status_texts(void **state)
{
    (void)state;
    assert_string_equal(tacet_status_text(TACET_OK), "ok");
    assert_string_equal(tacet_status_text(TACET_STOPPED), "stopped");
    assert_string_equal(tacet_status_text(TACET_HARMONIC_ONLY), "harmonic only");
    assert_string_equal(tacet_status_text((tacet_status)99), "unknown status");
    tacet_error e;
    char long_text[600];
    memset(long_text, 'x', sizeof long_text);
    long_text[599] = '\0';
    assert_int_equal(tacet_fail(&e, TACET_NO_MEMORY, "%s", long_text), TACET_NO_MEMORY);
    assert_int_equal(strlen(e.text), sizeof e.text - 1);
    assert_int_equal(e.line, 0);
    assert_int_equal(tacet_fail(NULL, TACET_STOPPED, "x"), TACET_STOPPED);
}

static void keep(void *who, bool warning, const char *path, const char *text)
{
    assert_true(warning);
    assert_string_equal(path, "train.links[3].from");
    assert_string_equal(text, "1.5 of 2");
    ++*(int *)who;
}

static void test_report(void **state)
{
    (void)state;
    int calls = 0;
    tacet_report(&(tacet_reporter){keep, &calls}, true, "train.links[3].from", "%g of %d", 1.5, 2);
    assert_int_equal(calls, 1);
}

static void test_arena(void **state)
{
    (void)state;
    tacet_arena *a = tacet_arena_create();
    for (size_t bytes = 0; bytes < 200000; bytes = bytes * 2 + 1) {
        unsigned char *p = tacet_arena_alloc(a, bytes);
        assert_non_null(p);
        assert_int_equal((uintptr_t)p % 64, 0);
        for (size_t i = 0; i < bytes; i++)
            assert_int_equal(p[i], 0);
        memset(p, 0xff, bytes);
    }
    assert_null(tacet_arena_alloc(a, SIZE_MAX));
    assert_string_equal(tacet_arena_text(a, "throw1"), "throw1");
    tacet_arena_destroy(a);
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_sorted_by_place), cmocka_unit_test(test_first_twenty_of_a_kind),
    cmocka_unit_test(test_status_texts),    cmocka_unit_test(test_report),
    cmocka_unit_test(test_arena),
};
TEST_MAIN(tests)
