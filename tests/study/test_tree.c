// The study file as a tree: limits, places, and what YAML has that a study has not.
#include "near.h"
#include "study/tree.h"
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

typedef struct {
    tacet_arena *arena;
    tacet_problems *problems;
    tacet_tree *tree;
    tacet_status status;
} reading;

static reading read_bytes(const char *bytes, size_t n)
{
    reading r = {tacet_arena_create(), tacet_problems_create(), NULL, TACET_OK};
    r.status = tree_read(bytes, n, "study.yaml", r.arena, r.problems, &r.tree);
    return r;
}

static reading read_text(const char *text)
{
    return read_bytes(text, strlen(text));
}

static void end(reading *r)
{
    tacet_problems_destroy(r->problems);
    tacet_arena_destroy(r->arena);
}

static void refuse_bytes(const char *bytes, size_t n, int line, int column, const char *part)
{
    reading r = read_bytes(bytes, n);
    assert_int_equal(r.status, TACET_BAD_INPUT);
    assert_null(r.tree);
    assert_true(tacet_problems_errors(r.problems) > 0);
    const tacet_problem *p = tacet_problems_at(r.problems, 0);
    if (!strstr(p->text, part) || p->line != line || p->column != column)
        fail_msg("%d:%d: %s; expected %d:%d .. %s ..", p->line, p->column, p->text, line, column,
                 part);
    end(&r);
}

static void refuse(const char *text, int line, int column, const char *part)
{
    refuse_bytes(text, strlen(text), line, column, part);
}

static void test_texts_keep_their_letters(void **state)
{
    (void)state;
    static const char *const texts[] = {"no",   "1e3", "12:30",      "900:1900:25", "0x10",  "~",
                                        "null", "007", "2001-01-01", "x..x",        "1_000", "+.5"};
    for (size_t i = 0; i < sizeof texts / sizeof *texts; i++) {
        char yaml[64];
        snprintf(yaml, sizeof yaml, "a: %s\nb: [%s, 1]\n", texts[i], texts[i]);
        reading r = read_text(yaml);
        assert_int_equal(r.status, TACET_OK);
        const tree_node *a = tree_find(r.tree->root, "a", NULL);
        assert_int_equal(a->kind, TREE_TEXT);
        assert_false(a->quoted);
        assert_string_equal(a->text, texts[i]);
        assert_string_equal(tree_find(r.tree->root, "b", NULL)->child[0]->text, texts[i]);
        end(&r);
    }
}

static void test_places_and_shape(void **state)
{
    (void)state;
    reading r = read_text("\xEF\xBB\xBF# a comment\n"
                          "title: \"two words\"\n"
                          "train:\n"
                          "  nodes:\n"
                          "    - {name: é, mass: 2}\n"
                          "  empty:\n");
    assert_int_equal(r.status, TACET_OK);
    tree_node *key = NULL;
    const tree_node *title = tree_find(r.tree->root, "title", &key);
    assert_int_equal(key->line, 2);
    assert_int_equal(key->column, 1);
    assert_int_equal(title->column, 8);
    assert_true(title->quoted);
    const tree_node *train = tree_find(r.tree->root, "train", NULL);
    const tree_node *node = tree_find(train, "nodes", NULL)->child[0];
    assert_int_equal(node->line, 5);
    assert_int_equal(node->column, 7);
    assert_int_equal(node->n, 2);
    assert_int_equal(tree_find(node, "mass", NULL)->column, 23); // in letters, not bytes
    const tree_node *empty = tree_find(train, "empty", NULL);
    assert_string_equal(empty->text, "");
    assert_null(tree_find(train, "flywheel", NULL));
    assert_null(tree_find(title, "x", NULL));
    end(&r);
}

static void test_aliases_share(void **state)
{
    (void)state;
    reading r = read_text("a: &node {x: 1}\nb: *node\nc: [*node, *node]\n");
    assert_int_equal(r.status, TACET_OK);
    const tree_node *b = tree_find(r.tree->root, "b", NULL);
    assert_string_equal(tree_find(b, "x", NULL)->text, "1");
    assert_int_equal(b->line, 1);
    // root, 3 keys, a list, and four times a map with a key and a value
    assert_int_equal(r.tree->root->weight, 1 + 3 + 1 + 4 * 3);
    end(&r);
}

static void test_what_a_study_has_not(void **state)
{
    (void)state;
    refuse("a: !!str 3\n", 1, 4, "a tag (tag:yaml.org,2002:str)");
    refuse("a: !x [1]\n", 1, 4, "a tag (!x)");
    refuse("a: ! {b: 1}\n", 1, 4, "a tag (!)");
    refuse("b: &b {c: 1}\na:\n  <<: *b\n", 3, 3, "'<<' has no meaning here");
    refuse("a: 1\n---\nb: 2\n", 2, 1, "a second document");
    refuse("a: 1\n...\nb: 2\n", 3, 1, "only one study");
    refuse("? [1, 2]\n: 3\n", 1, 3, "a key must be a plain word");
    refuse("{a: 1}: 2\n", 1, 1, "a key must be a plain word");
    refuse("a: &x b\n*x : 3\n", 1, 4, "used as a key by an alias");
    reading r = read_text("\"<<\": 1\n"); // in quotes it is a key as any other
    assert_int_equal(r.status, TACET_OK);
    end(&r);
}

static void test_anchors(void **state)
{
    (void)state;
    refuse("a: &x [1, *x]\n", 1, 11, "alias *x lies inside what it stands for");
    refuse("a: &x {b: {c: *x}}\n", 1, 15, "alias *x lies inside");
    refuse("a: *x\n", 1, 4, "alias *x has no anchor before it");
    refuse("a: &x 1\nb: &x 2\n", 2, 4, "anchor &x a second time; the first is at line 1");
    for (int n = TREE_MOST_ANCHORS; n <= TREE_MOST_ANCHORS + 1; n++) {
        char *text = malloc((size_t)n * 16 + 8), *at = text;
        at += sprintf(at, "[");
        for (int i = 0; i < n; i++)
            at += sprintf(at, "&a%d 1,\n", i);
        at += sprintf(at, "1]\n");
        if (n == TREE_MOST_ANCHORS) {
            reading r = read_text(text);
            assert_int_equal(r.status, TACET_OK);
            end(&r);
        } else {
            refuse(text, TREE_MOST_ANCHORS + 1, 1, "more than 1024 anchors");
        }
        free(text);
    }
}

// Ten lists, each ten times the one before: 10^10 values if they were written out.
static void test_billion_laughs(void **state)
{
    (void)state;
    char text[2000], *at = text;
    at += sprintf(at, "a0: &a0 [x, x, x, x, x, x, x, x, x, x]\n");
    for (int i = 1; i < 10; i++) {
        at += sprintf(at, "a%d: &a%d [", i, i);
        for (int j = 0; j < 10; j++)
            at += sprintf(at, "%s*a%d", j ? ", " : "", i - 1);
        at += sprintf(at, "]\n");
    }
    // a4 holds 10^5 values, a5 would pass 10^6
    refuse(text, 5, 5, "more than 1000000 values, aliases written out");
}

static char *nested(int depth)
{
    char *text = malloc(2 * (size_t)depth + 1);
    memset(text, '[', (size_t)depth);
    memset(text + depth, ']', (size_t)depth);
    text[2 * depth] = '\0';
    return text;
}

static void test_depth(void **state)
{
    (void)state;
    char *text = nested(TREE_MOST_DEPTH);
    reading r = read_text(text);
    assert_int_equal(r.status, TACET_OK);
    end(&r);
    free(text);
    text = nested(100000);
    clock_t start = clock();
    refuse(text, 1, TREE_MOST_DEPTH + 1, "more than 64 deep");
    assert_true((double)(clock() - start) / CLOCKS_PER_SEC < 1);
    free(text);
}

static void test_too_many_values(void **state)
{
    (void)state;
    char *text = malloc(2 * TREE_MOST_NODES + 3);
    for (size_t n = TREE_MOST_NODES - 1; n <= TREE_MOST_NODES; n++) { // the list counts too
        text[0] = '[';
        for (size_t i = 0; i < n; i++)
            memcpy(text + 1 + 2 * i, "1,", 2);
        strcpy(text + 2 * n + 1, "]");
        if (n < TREE_MOST_NODES) {
            reading r = read_text(text);
            assert_int_equal(r.status, TACET_OK);
            assert_int_equal(r.tree->root->weight, TREE_MOST_NODES);
            end(&r);
        } else {
            refuse(text, 1, 2 * TREE_MOST_NODES, "more than 1000000 values");
        }
    }
    free(text);
}

static void test_too_many_bytes(void **state)
{
    (void)state;
    size_t n = TREE_MOST_BYTES + 1;
    char *text = malloc(n);
    memset(text, '\n', n);
    refuse_bytes(text, n, 0, 0, "larger than 64 MiB");
    memcpy(text, "a: 1", 4);
    reading r = read_bytes(text, 100000);
    assert_int_equal(r.status, TACET_OK);
    end(&r);
    free(text);
}

static void test_bytes_that_are_no_text(void **state)
{
    (void)state;
    refuse("a: \xFF\n", 1, 4, "no UTF-8 text from here (byte 0xFF)");
    refuse("# \xC3\xA9t\xC3\xA9\nab: \xC3\xA9\xC3(\n", 2, 6, "no UTF-8 text from here");
    refuse("\xEF\xBB\xBF"
           "a: b\nc: \x80\n",
           2, 4, "byte 0x80");
    refuse("a: \xED\xA0\x80\n", 1, 4, "no UTF-8 text"); // half of a surrogate pair
    refuse("a: \xC0\xAF\n", 1, 4, "no UTF-8 text");     // longer than need be
    refuse("a: \x01\n", 1, 4, "a control character");
    refuse_bytes("a: 1\0b\n", 7, 1, 5, "a control character");
    refuse("a: \"x\\0y\"\n", 1, 4, "a zero byte inside a text");
    refuse_bytes("\xFF\xFE"
                 "a\0:\0",
                 6, 1, 1, "UTF-16");
}

static void test_repeated_keys(void **state)
{
    (void)state;
    reading r = read_text("b: 1\na: 1\nc: {x: 1, y: 2, x: 3}\na: 2\nb: 3\na: 4\n");
    assert_int_equal(r.status, TACET_BAD_INPUT);
    static const struct {
        int line, column;
        const char *text;
    } expected[] = {{3, 17, "'x' a second time; the first is at line 3"},
                    {4, 1, "'a' a second time; the first is at line 2"},
                    {5, 1, "'b' a second time; the first is at line 1"},
                    {6, 1, "'a' a second time; the first is at line 2"}};
    assert_int_equal(tacet_problems_kept(r.problems), 4);
    for (size_t i = 0; i < 4; i++) {
        const tacet_problem *p = tacet_problems_at(r.problems, i);
        assert_string_equal(p->text, expected[i].text);
        assert_int_equal(p->line, expected[i].line);
        assert_int_equal(p->column, expected[i].column);
    }
    end(&r);
}

// Found by a sort: a quadratic search would take minutes.
static void test_many_keys(void **state)
{
    (void)state;
    enum { N = 300000 };
    char *text = malloc(N * 16), *at = text;
    for (int i = 0; i < N; i++)
        at += sprintf(at, "k%d: 1\n", (int)((long long)i * 7919 % N));
    strcpy(at, "k77: 1\n");
    clock_t start = clock();
    refuse(text, N + 1, 1, "'k77' a second time");
    assert_true((double)(clock() - start) / CLOCKS_PER_SEC < 10);
    free(text);
}

static void test_faults_of_writing(void **state)
{
    (void)state;
    refuse("a: 1\n\tb: 2\n", 2, 1, "indent with blanks");
    refuse("a: [1, 2\nb: 3\n", 2, 2, "needs ',' or ']' here (of what begins at line 1)");
    refuse("a: {b: 1, c\n", 2, 1, "needs ',' or '}' here");
    refuse("a: \"x\n", 2, 1, "ends inside a quoted text");
    refuse("a: x: y\n", 1, 5, "a text with ': ' inside needs quotes");
    refuse("a:\n  b: 1\n c: 2\n", 3, 2, "keys of one section start in one column");
    refuse("a:\n  - 1\n  b: 2\n", 3, 3, "begins with '- ' was expected");
    refuse("a: - 1\n", 1, 4, "a list begins on the line after its key");
    refuse("a: @x\n", 1, 4, "put quotes around a text that begins with @");
    refuse("a: \"C:\\q\"\n", 1, 7, "use single quotes");
    refuse("a 1\nb: 2\n", 2, 2, "':'");
}

static void test_nothing(void **state)
{
    (void)state;
    static const char *const texts[] = {"", "\n\n", "# words\n", "---\n", "\xEF\xBB\xBF"};
    for (size_t i = 0; i < sizeof texts / sizeof *texts; i++) {
        reading r = read_text(texts[i]);
        assert_int_equal(r.status, TACET_OK);
        assert_true(!r.tree->root || !*r.tree->root->text);
        end(&r);
    }
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_texts_keep_their_letters),
    cmocka_unit_test(test_places_and_shape),
    cmocka_unit_test(test_aliases_share),
    cmocka_unit_test(test_what_a_study_has_not),
    cmocka_unit_test(test_anchors),
    cmocka_unit_test(test_billion_laughs),
    cmocka_unit_test(test_depth),
    cmocka_unit_test(test_too_many_values),
    cmocka_unit_test(test_too_many_bytes),
    cmocka_unit_test(test_bytes_that_are_no_text),
    cmocka_unit_test(test_repeated_keys),
    cmocka_unit_test(test_many_keys),
    cmocka_unit_test(test_faults_of_writing),
    cmocka_unit_test(test_nothing),
};
TEST_MAIN(tests)
