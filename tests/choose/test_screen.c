// The screen as a whole, on the stand-in of standin.c.
#include "near.h"
#include "standin.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#define RPM 0.10471975511965977

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

static tacet_screen *run(const struct tacet_model *m, const tacet_watch *watch)
{
    tacet_screen *s;
    tacet_error e;
    tacet_status status = tacet_screen_run(m, watch, &s, problems, &e);
    if (status != TACET_OK) print_error("%s\n", e.text);
    assert_int_equal(status, TACET_OK);
    return s;
}

static size_t find(const tacet_screen *s, const char *name)
{
    for (size_t c = 0; c < s->n_candidates; c++)
        if (strcmp(s->candidates[c].name, name) == 0) return c;
    fail_msg("no candidate %s", name);
    return 0;
}

static void test_layout(void **state)
{
    (void)state;
    struct tacet_model m = standin(25, arena);
    tacet_screen *s = run(&m, NULL);
    static const char *const names[] = {"3/7", "1/2", "1"}; // rising
    static const char *const words[] = {"..x.x.x", ".x", "x"};
    static const size_t placements[] = {1, 2, 1};
    assert_int_equal(s->n_candidates, 3);
    assert_int_equal(s->n_speeds, 41);
    assert_int_equal(s->n_ranks, 41);
    size_t next = 0;
    for (size_t c = 0; c < 3; c++) {
        const tacet_candidate *k = &s->candidates[c];
        assert_string_equal(k->name, names[c]);
        assert_string_equal(k->word, words[c]);
        assert_int_equal(k->n_placements, placements[c]);
        assert_int_equal(k->first_cell, next);
        next += k->n_cells;
        for (size_t i = 0; i < k->n_cells; i++) {
            const tacet_cell *cell = &s->cells[k->first_cell + i];
            assert_int_equal(cell->candidate, c);
            assert_int_equal(cell->extra, i >= 41);
            if (i != 0 && i != 41)
                assert_true(cell->row.speed_rad_per_s > cell[-1].row.speed_rad_per_s);
            assert_near(cell->row.demand_Nm, 400 - cell->row.speed_rad_per_s, 1e-12, 0);
        }
    }
    assert_int_equal(s->n_cells, next);
    assert_true(s->candidates[0].n_cells > 41);
    assert_int_equal(s->n_failed, 0);
    assert_int_equal(s->n_solves, m.solves);
    assert_int_equal(s->n_referee, 4);
    assert_int_equal(m.referees, 4);
    tacet_screen_destroy(s);
}

// `x.`, which the stand-in answers 10 % louder, is the worse placement of 1/2.
static void test_worst_placement(void **state)
{
    (void)state;
    struct tacet_model m = standin(100, arena);
    tacet_screen *s = run(&m, NULL);
    const tacet_candidate *half = &s->candidates[find(s, "1/2")];
    for (size_t i = 0; i < half->n_cells; i++) {
        const tacet_cell *cell = &s->cells[half->first_cell + i];
        if (isnan(cell->row.worst_margin_db)) continue;
        assert_int_equal(half->roll[cell->placement]->pattern.tenths[0], 10);
    }
    tacet_screen_destroy(s);
}

// Three sevenths' order 3/7 k: amplitudes by K7; edges of ranges from two grids agree to 0.5 rpm,
// and those that are windows of order 6/7 or 9/7 are exact: 18.9 Hz leaves at 60 * 18.9 / (9/7) =
// 882 rpm, outside 900-1900, and order 6/7 at 1323 rpm.
static void test_no_go_from_two_grids(void **state)
{
    (void)state;
    struct tacet_model fine = standin(25, arena), coarse = standin(100, arena);
    fine.scale = coarse.scale = 4;
    tacet_screen *a = run(&fine, NULL), *b = run(&coarse, NULL);
    assert_int_equal(a->n_no_go, b->n_no_go);
    assert_true(a->n_no_go >= 3);
    bool seen = false;
    for (size_t i = 0; i < a->n_no_go; i++) {
        const tacet_no_go *x = &a->no_go[i], *y = &b->no_go[i];
        assert_int_equal(x->candidate, y->candidate);
        assert_int_equal(x->band, y->band);
        assert_near(x->low_rad_per_s / RPM, y->low_rad_per_s / RPM, 0.5, 0);
        assert_near(x->high_rad_per_s / RPM, y->high_rad_per_s / RPM, 0.5, 0);
        assert_int_equal(x->low_open, y->low_open);
        assert_int_equal(x->high_open, y->high_open);
        assert_true(x->worst_margin_db < 0);
        if (x->candidate == 0 && x->band == 1 && fabs(x->high_rad_per_s / RPM - 1323) < 1e-6)
            seen = true;
    }
    assert_true(seen);
    tacet_screen_destroy(a);
    tacet_screen_destroy(b);
}

static void test_same_again(void **state)
{
    (void)state;
    struct tacet_model m = standin(100, arena), n = standin(100, arena);
    tacet_screen *a = run(&m, NULL), *b = run(&n, NULL);
    assert_int_equal(a->n_cells, b->n_cells);
    for (size_t i = 0; i < a->n_cells; i++) {
        const tacet_row *x = &a->cells[i].row, *y = &b->cells[i].row;
        assert_memory_equal(&x->speed_rad_per_s, &y->speed_rad_per_s, sizeof(double));
        assert_memory_equal(&x->worst_margin_db, &y->worst_margin_db, sizeof(double));
        assert_int_equal(x->id, y->id);
    }
    assert_int_equal(a->n_solves, b->n_solves);
    tacet_screen_destroy(a);
    tacet_screen_destroy(b);
}

static bool has_cell(const tacet_screen *s, size_t candidate, double rpm, bool extra)
{
    const tacet_candidate *c = &s->candidates[candidate];
    size_t n = 0;
    bool is_extra = false;
    for (size_t i = 0; i < c->n_cells; i++) {
        const tacet_cell *cell = &s->cells[c->first_cell + i];
        if (fabs(cell->row.speed_rad_per_s / RPM - rpm) > 1e-6) continue;
        is_extra = cell->extra;
        n++;
    }
    return n == 1 && is_extra == extra;
}

// 3/7 on a six: order 6/7 leaves the roll band (18.9 Hz) at 1323 rpm and meets the mode (22 Hz) at
// 1540 rpm, order 9/7 leaves the coupling band (27.81 Hz) at 1297.8 rpm; both sides of the edges
// and the crossing are looked at, and a speed of the grid is not added again.
static void test_extra_speeds(void **state)
{
    (void)state;
    for (int on_grid = 0; on_grid < 2; on_grid++) {
        struct tacet_model m = standin(on_grid ? 20 : 100, arena);
        m.scale = 4;
        tacet_screen *s = run(&m, NULL);
        size_t c = find(s, "3/7");
        assert_true(has_cell(s, c, 1323 - 0.05, true) && has_cell(s, c, 1323 + 0.05, true));
        assert_true(has_cell(s, c, 1297.8 - 0.05, true) && has_cell(s, c, 1297.8 + 0.05, true));
        assert_true(has_cell(s, c, 1540, on_grid == 0));
        assert_false(has_cell(s, find(s, "1"), 1323 - 0.05, true));
        tacet_screen_destroy(s);
    }
}

// Order 1 is in no spectrum of 3/7, but unequal cylinders have it: it leaves the coupling band at
// 60 * 27.81 = 1668.6 rpm and counts where they add more than 3 % of the limit, or where all-fire
// at the same speed is the reference. Where they add more than 30 %, order 15/14 counts as well; it
// leaves at 60 * 27.81 * 14/15 = 1557.36 rpm.
static void test_extra_speeds_of_unequal_cylinders(void **state)
{
    (void)state;
    static const struct {
        double uneven;
        int reference;
        bool comb, all;
    } cases[] = {{0, TACET_REFERENCE_WORST, false, false},
                 {0.029, TACET_REFERENCE_WORST, false, false},
                 {0.031, TACET_REFERENCE_WORST, true, false},
                 {0.31, TACET_REFERENCE_WORST, true, true},
                 {0, TACET_REFERENCE_SAME_SPEED, true, false}};
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        struct tacet_model m = standin(100, arena);
        m.uneven = cases[i].uneven;
        m.band[0].reference = cases[i].reference;
        tacet_screen *s = run(&m, NULL);
        size_t c = find(s, "3/7");
        assert_int_equal(has_cell(s, c, 1668.6 + 0.05, true), cases[i].comb);
        assert_int_equal(has_cell(s, c, 1557.36 + 0.05, true), cases[i].all);
        tacet_screen_destroy(s);
    }
}

// A band so narrow that order 15/14 passes it between two grid speeds (1511.8 to 1513.6 rpm): what
// unequal cylinders add there is looked at.
static void test_extra_speeds_of_a_narrow_band(void **state)
{
    (void)state;
    for (int uneven = 0; uneven < 2; uneven++) {
        struct tacet_model m = standin(100, arena);
        m.band[1].counted_low_hz = 1511.8 * 15 / 14 / 60;
        m.band[1].counted_high_hz = 1513.6 * 15 / 14 / 60;
        m.study.engine.cylinder_dispersion = uneven ? 0.03 : 0;
        tacet_screen *s = run(&m, NULL);
        assert_int_equal(has_cell(s, find(s, "3/7"), 1511.8 + 0.05, true), uneven);
        tacet_screen_destroy(s);
    }
}

static void test_unreachable(void **state)
{
    (void)state;
    struct tacet_model m = standin(100, arena);
    m.least_density = 0.45;
    tacet_screen *s = run(&m, NULL);
    size_t c = find(s, "3/7");
    assert_int_equal(s->notes[c].n_unreachable, s->n_speeds);
    assert_false(s->notes[c].recommended);
    for (size_t i = 0; i < s->n_no_go; i++)
        assert_int_not_equal(s->no_go[i].candidate, c);
    tacet_screen_destroy(s);
}

// A failed condition is counted and told; the rest goes on.
static void test_failed_conditions(void **state)
{
    (void)state;
    struct tacet_model m = standin(100, arena);
    m.fails_at_rpm = 1400;
    tacet_screen *s = run(&m, NULL);
    assert_int_equal(s->n_failed, 4); // 3/7, 1/2 twice, 1
    for (size_t c = 0; c < 3; c++) {
        const tacet_cell *cell = &s->cells[s->candidates[c].first_cell + 5];
        assert_int_equal(cell->row.outcome, TACET_FAILED);
        assert_int_equal(s->notes[c].n_none, 1);
    }
    assert_true(s->ranks[5].best == SIZE_MAX);
    assert_true(s->ranks[10].best != SIZE_MAX);
    tacet_screen_destroy(s);
}

static void test_refused_are_kept(void **state)
{
    (void)state;
    struct tacet_model m = standin(100, arena);
    m.may_skip[4] = false; // cylinder 2
    tacet_screen *s = run(&m, NULL);
    const tacet_candidate *sevenths = &s->candidates[find(s, "3/7")];
    assert_non_null(strstr(sevenths->refused, "cylinder 2"));
    assert_int_equal(sevenths->n_cells, 0);
    assert_string_equal(s->notes[find(s, "3/7")].why_not, sevenths->refused);
    const tacet_candidate *half = &s->candidates[find(s, "1/2")]; // `.x` would skip it
    assert_null(half->refused);
    assert_int_equal(half->n_placements, 1);
    assert_int_equal(half->n_left_out, 1);
    assert_string_equal(half->word, "x.");
    assert_int_equal(s->ranks[0].n_ranked, 2);
    tacet_screen_destroy(s);
}

static void test_longest_run(void **state)
{
    (void)state;
    struct tacet_model m = standin(100, arena);
    m.study.engine.skip.longest_run = 1;
    tacet_screen *s = run(&m, NULL);
    assert_non_null(strstr(s->candidates[find(s, "3/7")].refused, "2 times in a row; 1"));
    assert_null(s->candidates[find(s, "1/2")].refused); // never fires: no run
    tacet_screen_destroy(s);
}

// Every k/L in lowest terms from 1/3 to 1, L <= 5, rising; then words and books in their order.
static void test_candidates_of_all_kinds(void **state)
{
    (void)state;
    struct tacet_model m = standin(100, arena);
    char path[] = "/tmp/tacet-screen-XXXXXX.words";
    int fd = mkstemps(path, 6);
    assert_true(fd >= 0);
    assert_int_equal(write(fd, "x..x.. pairs # two\n.x\n", 22), 22);
    close(fd);
    const char *patterns[] = {"xxx.", path};
    m.study.screen.densities = (tacet_densities_def){.longest = 5, .lowest = "1/3"};
    m.study.screen.patterns = patterns;
    m.study.screen.n_patterns = 2;
    tacet_screen *s = run(&m, NULL);
    unlink(path);
    static const char *const names[] = {"1/3", "2/5", "1/2",  "3/5",   "2/3", "3/4",
                                        "4/5", "1",   "xxx.", "pairs", ".x"};
    assert_int_equal(s->n_candidates, 11);
    for (size_t c = 0; c < 11; c++)
        assert_string_equal(s->candidates[c].name, names[c]);
    assert_int_equal(s->candidates[0].n_placements, 3);
    assert_int_equal(s->candidates[8].n_placements, 1); // its own rotation as written
    assert_string_equal(s->candidates[9].word, "x..");
    assert_string_equal(s->candidates[9].comment, "two");
    assert_near(s->candidates[9].density, 1. / 3, 1e-15, 0);
    tacet_screen_destroy(s);
}

static void refused_study(struct tacet_model *m, tacet_status expected, const char *part)
{
    tacet_screen *s = (tacet_screen *)m;
    tacet_error e = {0};
    assert_int_equal(tacet_screen_run(m, NULL, &s, problems, &e), expected);
    assert_null(s);
    if (!strstr(e.text, part)) fail_msg("'%s' lacks '%s'", e.text, part);
}

static void test_bad_candidates(void **state)
{
    (void)state;
    struct tacet_model m = standin(100, arena);
    const char *list[] = {"1/2", "8/7"}, *zero[] = {"0/3"};
    m.study.screen.densities = (tacet_densities_def){.list = list, .n_list = 2};
    refused_study(&m, TACET_BAD_INPUT, "'8/7'; a density is k/L");
    m.study.screen.densities.list = zero;
    m.study.screen.densities.n_list = 1;
    refused_study(&m, TACET_BAD_INPUT, "'0/3'");
    m.study.screen.densities = (tacet_densities_def){.longest = 65, .lowest = "1/3"};
    refused_study(&m, TACET_BAD_INPUT, "65 letters");
    m.study.screen.densities = (tacet_densities_def){.longest = 5, .lowest = "low"};
    refused_study(&m, TACET_BAD_INPUT, "'low'");
    m = standin(100, arena);
    const char *patterns[] = {"no/such.words", "x,x"};
    m.study.screen.patterns = patterns;
    m.study.screen.n_patterns = 2;
    refused_study(&m, TACET_OUTSIDE_WORLD, "screen.patterns");
    assert_int_equal(tacet_problems_errors(problems), 2); // both in one go
    m.study.screen.n_patterns = 0;
    m.study.screen.n_speeds = 0;
    refused_study(&m, TACET_BAD_INPUT, "no speed");
}

typedef struct {
    size_t calls, last_done, last_of, stop_at;
    int stop;
} witness;

static void see(void *who, size_t done, size_t of)
{
    witness *w = who;
    assert_true(done <= of && done >= w->last_done && of >= w->last_of);
    if (w->calls++ == 0) assert_int_equal(done, 0);
    w->last_done = done;
    w->last_of = of;
    if (w->stop_at && done >= w->stop_at) w->stop = 1;
}

static void test_progress(void **state)
{
    (void)state;
    struct tacet_model m = standin(100, arena);
    witness w = {0};
    tacet_watch watch = {.progress = see, .who = &w};
    tacet_screen *s = run(&m, &watch);
    assert_int_equal(w.last_done, s->n_solves);
    assert_true(w.calls > 30);
    tacet_screen_destroy(s);
}

static void test_stop(void **state)
{
    (void)state;
    struct tacet_model m = standin(100, arena);
    size_t all = 0;
    for (size_t at = 1; all == 0 || at < all; at += 7) {
        witness w = {.stop_at = at};
        tacet_watch watch = {.progress = see, .who = &w, .stop = &w.stop};
        tacet_screen *s;
        tacet_error e;
        m.solves = 0;
        tacet_status status = tacet_screen_run(&m, &watch, &s, problems, &e);
        assert_int_equal(status, TACET_STOPPED);
        assert_null(s);
        assert_true(m.solves >= at && m.solves <= at + 1);
        if (all) continue;
        m.solves = 0;
        s = run(&m, NULL);
        all = s->n_solves;
        tacet_screen_destroy(s);
    }
}

static void test_solve_out_of_memory(void **state)
{
    (void)state;
    struct tacet_model m = standin(100, arena);
    m.fails_after = 20;
    refused_study(&m, TACET_NO_MEMORY, "no memory");
}

// ---- the n-th allocation fails ----------------------------------------------------------------
static size_t allocations_left = SIZE_MAX;

void *__real_calloc(size_t n, size_t size);
void *__wrap_calloc(size_t n, size_t size);
void *__wrap_calloc(size_t n, size_t size)
{
    if (allocations_left == 0) return NULL;
    if (allocations_left != SIZE_MAX) allocations_left--;
    return __real_calloc(n, size);
}

void *__real_aligned_alloc(size_t alignment, size_t size);
void *__wrap_aligned_alloc(size_t alignment, size_t size);
void *__wrap_aligned_alloc(size_t alignment, size_t size)
{
    if (allocations_left == 0) return NULL;
    if (allocations_left != SIZE_MAX) allocations_left--;
    return __real_aligned_alloc(alignment, size);
}

static void test_every_allocation_fails_once(void **state)
{
    (void)state;
    struct tacet_model m = standin(100, arena);
    size_t n = 0;
    for (;; n++) {
        tacet_screen *s;
        tacet_error e;
        allocations_left = n;
        tacet_status status = tacet_screen_run(&m, NULL, &s, problems, &e);
        bool used_up = allocations_left == 0;
        allocations_left = SIZE_MAX;
        if (status == TACET_OK) {
            assert_false(used_up && n == 0);
            tacet_screen_destroy(s);
            break;
        }
        assert_int_equal(status, TACET_NO_MEMORY);
        assert_null(s);
        assert_non_null(strstr(e.text, "memory"));
    }
    assert_true(n > 10);
}

#define TEST(name) cmocka_unit_test_setup_teardown(name, set_up, tear_down)
int main(void)
{
    const struct CMUnitTest tests[] = {
        TEST(test_layout),
        TEST(test_worst_placement),
        TEST(test_no_go_from_two_grids),
        TEST(test_same_again),
        TEST(test_extra_speeds),
        TEST(test_extra_speeds_of_unequal_cylinders),
        TEST(test_extra_speeds_of_a_narrow_band),
        TEST(test_unreachable),
        TEST(test_failed_conditions),
        TEST(test_refused_are_kept),
        TEST(test_longest_run),
        TEST(test_candidates_of_all_kinds),
        TEST(test_bad_candidates),
        TEST(test_progress),
        TEST(test_stop),
        TEST(test_solve_out_of_memory),
        TEST(test_every_allocation_fails_once),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
