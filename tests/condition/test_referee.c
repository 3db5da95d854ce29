// The two solvers against each other on the demo studies' lowest speeds, and the order of a study's
// lists.
#include "demo.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>

static void agree(const char *study, const char *word, double rpm)
{
    demo d;
    tacet_agreement a;
    demo_open(&d, study);
    tacet_roll *roll = demo_roll(&d, word);
    tacet_condition c = demo_condition(&d, roll, rpm);
    assert_int_equal(tacet_solve_referee(d.model, &c, d.work, &a), TACET_OK);
    print_message("%s %s %g rpm: same_model %.2g, full_model %.3g dB, %u repeats, %u evaluations\n",
                  study, word, rpm, a.same_model, a.full_model_db, a.repeats, a.evaluations);
    assert_true(a.settled);
    assert_true(a.same_model <= 1e-6); // rounding and closure of the march
    assert_true(a.full_model_db <= 0.1);
    tacet_roll_destroy(roll);
    demo_close(&d);
}

static void test_solvers_agree_on_the_six(void **state)
{
    (void)state;
    agree("forwarder.yaml", "..x.x.x", 900);
    agree("forwarder.yaml", "x.", 900);
}

static void test_solvers_agree_on_the_eight(void **state)
{
    (void)state;
    agree("brush-truck.yaml", "..x.x.x", 1000);
    agree("brush-truck.yaml", "x.x.x.x..", 1000);
}

// Of the march the piston torque is computed anew, at the throws' angles with their static twist:
// as exact as the closure of the march, 1e-5.
static void march_momentum(const char *study, const char *word, double rpm)
{
    demo d;
    tacet_row row;
    demo_open(&d, study);
    tacet_roll *roll = demo_roll(&d, word);
    tacet_condition c = demo_condition(&d, roll, rpm);
    assert_int_equal(tacet_solve(d.model, &c, TACET_LEVEL_STEADY, d.work, &row), TACET_OK);
    assert_string_equal(row.solver.method, "steady");
    assert_near(demo_roll_mismatch(&d), 0, 5e-5, 0);
    tacet_roll_destroy(roll);
    demo_close(&d);
}

static void test_roll_torque_of_the_march(void **state)
{
    (void)state;
    march_momentum("forwarder.yaml", "..x.x.x", 900);
    march_momentum("brush-truck.yaml", "..x.x.x", 1000);
}

// Reverses the order of the lines between `from` and `to` that begin with "    - ".
static void reverse_list(char *text, const char *from, const char *to)
{
    char *begin = strstr(text, from), *line[64];
    assert_non_null(begin);
    char *end = strstr(begin, to);
    assert_non_null(end);
    size_t bytes = (size_t)(end - begin), n = 0, at = 0;
    char *block = strndup(begin, bytes), *copy = calloc(1, bytes + 1);
    for (char *p = block; p && *p; p = strchr(p, '\n') ? strchr(p, '\n') + 1 : NULL)
        line[n++] = p;
    size_t head = (size_t)(strchr(block, '\n') - block) + 1;
    memcpy(copy, block, head);
    at = head;
    for (size_t i = n; i-- > 1;) {
        size_t length = (size_t)(strchr(line[i], '\n') - line[i]) + 1;
        memcpy(copy + at, line[i], length);
        at += length;
    }
    assert_int_equal(at, bytes);
    memcpy(begin, copy, bytes);
    free(block);
    free(copy);
}

static void test_order_of_nodes_and_links_does_not_matter(void **state)
{
    (void)state;
    demo d, r;
    char *text = demo_text("forwarder.yaml");
    demo_open_text(&d, text);
    reverse_list(text, "  nodes:\n", "  links:\n");
    reverse_list(text, "  links:\n", "  flywheel:");
    demo_open_text(&r, text);
    tacet_roll *roll = demo_roll(&d, "..x.x.x");
    tacet_condition c = demo_condition(&d, roll, 1100);
    tacet_row a, b;
    assert_int_equal(tacet_solve(d.model, &c, TACET_LEVEL_RIPPLE, d.work, &a), TACET_OK);
    assert_int_equal(tacet_solve(r.model, &c, TACET_LEVEL_RIPPLE, r.work, &b), TACET_OK);
    assert_int_equal(a.outcome, TACET_SOLVED);
    for (size_t i = 0; i < a.n_bands; i++)
        assert_near(a.bands[i].level.dispersed, b.bands[i].level.dispersed, 0, 1e-8);
    for (size_t i = 0; i < a.n_limits; i++)
        assert_near(a.limits[i].value, b.limits[i].value, 0, 1e-6);
    free(text);
    tacet_roll_destroy(roll);
    demo_close(&d);
    demo_close(&r);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_solvers_agree_on_the_six),
        cmocka_unit_test(test_solvers_agree_on_the_eight),
        cmocka_unit_test(test_roll_torque_of_the_march),
        cmocka_unit_test(test_order_of_nodes_and_links_does_not_matter),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
