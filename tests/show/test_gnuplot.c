// gnuplot as a neighbour that may be missing, hang, fail or lie. Shell scripts stand in for it.
#include "samples.h"
#include "scratch.h"
#include "show/gnuplot.h"
#include <errno.h>
#include <signal.h>
#include <time.h>

// Puts a program named gnuplot into the scratch folder and makes that the whole PATH, with the
// system's own behind it when `system` is set.
static void stand_in(void **state, const char *body)
{
    char path[200];
    const char *program = scratch_path(*state, "bin/gnuplot");
    mkdir(scratch_path(*state, "bin"), 0777);
    if (body) {
        FILE *f = fopen(program, "w");
        assert_non_null(f);
        fprintf(f, "#!/bin/sh\n%s\n", body);
        fclose(f);
        chmod(program, 0755);
    }
    snprintf(path, sizeof path, "%s/bin", ((scratch *)*state)->path);
    setenv("PATH", path, 1);
}

static int restore(void **state)
{
    setenv("PATH", "/usr/local/bin:/usr/bin:/bin", 1);
    return scratch_destroy(state);
}

static double now_s(void)
{
    struct timespec t;
    clock_gettime(CLOCK_MONOTONIC, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

// Draws a map into <scratch>/out; what is said goes to e.
static tacet_status draw(void **state, double time_limit_s, tacet_error *e)
{
    tacet_folder *folder;
    tacet_draw_how how = tacet_draw_default();
    tacet_figure figure = {TACET_FIGURE_MAP, {.map = sample_map(5, 3)}};
    how.time_limit_s = time_limit_s;
    assert_int_equal(tacet_folder_open(scratch_path(*state, "out"), &folder, NULL), TACET_OK);
    tacet_status s = tacet_draw(folder, "map", &figure, &how, e);
    tacet_folder_close(folder);
    return s;
}

// Fails with the word in its message, keeps the script with its data and leaves no drawing.
static void fails(void **state, double time_limit_s, const char *word)
{
    tacet_error e = {0};
    size_t bytes;
    assert_int_equal(draw(state, time_limit_s, &e), TACET_OUTSIDE_WORLD);
    if (!strstr(e.text, word)) print_error("said: %s\n", e.text);
    assert_non_null(strstr(e.text, word));
    assert_int_equal(scratch_count(scratch_path(*state, "out")), 1);
    char *script = scratch_read(scratch_path(*state, "out/map.gnuplot"), &bytes);
    assert_non_null(script);
    assert_non_null(strstr(script, "$cells << END_OF_DATA"));
    free(script);
}

static void test_missing(void **state)
{
    stand_in(state, NULL);
    fails(state, 30, "drawings need gnuplot");
}

static void test_not_executable(void **state)
{
    stand_in(state, "true");
    chmod(scratch_path(*state, "bin/gnuplot"), 0644);
    fails(state, 30, "cannot start gnuplot");
}

// The shell's child sleeps on with the pipe open: the whole group is ended.
static void test_hanging_is_ended(void **state)
{
    stand_in(state, "/bin/sleep 60\n/bin/sleep 60");
    double before = now_s();
    fails(state, 0.2, "longer than 0.2 s");
    assert_true(now_s() - before < 5);
}

static void test_hanging_with_closed_pipe_is_ended(void **state)
{
    stand_in(state, "exec 2>&-\n/bin/sleep 60");
    double before = now_s();
    fails(state, 0.2, "longer than 0.2 s");
    assert_true(now_s() - before < 5);
}

static void test_chatter_is_a_failure(void **state)
{
    stand_in(state, "echo '</svg>'\necho 'line 7: warning: \033[31mnonsense' >&2");
    fails(state, 30, "line 7: warning:  [31mnonsense");
}

static void test_flood_of_chatter_is_a_failure(void **state)
{
    stand_in(state, "i=0\nwhile [ $i -lt 20000 ]; do echo noise >&2; i=$((i+1)); done");
    fails(state, 30, "noise");
}

static void test_silent_failure(void **state)
{
    stand_in(state, "exit 3");
    fails(state, 30, "no reason");
}

static void test_signal(void **state)
{
    stand_in(state, "kill -SEGV $$");
    fails(state, 30, "signal 11");
}

static void test_half_a_drawing(void **state)
{
    stand_in(state, "echo '<svg><path'");
    fails(state, 30, "no whole SVG");
}

static void test_empty_drawing(void **state)
{
    stand_in(state, "true");
    fails(state, 30, "no whole SVG");
}

// What it is called with, and what it can see.
static void test_call_is_narrow(void **state)
{
    size_t bytes;
    char body[1200];
    setenv("TACET_TEST_SECRET", "1", 1);
    const char *to = scratch_path(*state, "seen");
    snprintf(body, sizeof body,
             "echo \"$#:$1:$2\" >%s\n/usr/bin/env >>%s\n/bin/ls -l /proc/self/fd >>%s\n"
             "/bin/cat >>%s\necho '</svg>'",
             to, to, to, to);
    stand_in(state, body);
    tacet_error e = {0};
    assert_int_equal(draw(state, 30, &e), TACET_OK);
    char *seen = scratch_read(scratch_path(*state, "seen"), &bytes);
    assert_non_null(seen);
    assert_int_equal(strncmp(seen, "2:-d:map.gnuplot\n", 17), 0);
    assert_null(strstr(seen, "TACET_TEST_SECRET"));
    assert_non_null(strstr(seen, "LC_ALL=C.UTF-8"));
    // the drawing is its standard output and nothing else of ours is left open
    assert_null(strstr(seen, "map.svg.tmp"));
    free(seen);
    unsetenv("TACET_TEST_SECRET");
}

// No time limit given: only the script.
static void test_script_only(void **state)
{
    stand_in(state, "echo never >&2");
    tacet_error e = {0};
    assert_int_equal(draw(state, 0, &e), TACET_OK);
    assert_int_equal(scratch_count(scratch_path(*state, "out")), 1);
}

// A host that ignores its children leaves nothing to wait for.
static void test_host_reaps_children(void **state)
{
    stand_in(state, "echo '</svg>'");
    tacet_error e = {0};
    signal(SIGCHLD, SIG_IGN);
    tacet_status s = draw(state, 30, &e);
    signal(SIGCHLD, SIG_DFL);
    assert_int_equal(s, TACET_OK);
}

#define EACH(t) cmocka_unit_test_setup_teardown(t, scratch_create, restore)
int main(void)
{
    static const struct CMUnitTest tests[] = {
        EACH(test_missing),
        EACH(test_not_executable),
        EACH(test_hanging_is_ended),
        EACH(test_hanging_with_closed_pipe_is_ended),
        EACH(test_chatter_is_a_failure),
        EACH(test_flood_of_chatter_is_a_failure),
        EACH(test_silent_failure),
        EACH(test_signal),
        EACH(test_half_a_drawing),
        EACH(test_empty_drawing),
        EACH(test_call_is_narrow),
        EACH(test_script_only),
        EACH(test_host_reaps_children),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
