// Scatter of stiffness on whole studies: closed forms, and studies with other numbers in the file.
#include "../condition/demo.h"
#include "choose/scatter.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>

// Four equal mounts at the height of the centre of gravity: roll is one degree of freedom,
// K = 4 k y^2 = 4 * 2985e3 * 0.3^2 N m, I = 6 kg m2, loss 0.1.
#define MOUNT(name, x, y)                                                                          \
    "    - {name: " name ", at_mm: [" x ", " y ", 0], x_n_per_mm: 900, y_n_per_mm: 800, "          \
    "z_n_per_mm: 2985, loss_factor: 0.1}\n"
#define BODY                                                                                       \
    "\nbody:\n  mass_kg: 200\n  inertia_kgm2: {xx: 6, yy: 14, zz: 16}\n  mounts:\n" MOUNT(         \
        "a", "-300", "300") MOUNT("b", "-300", "-300") MOUNT("c", "300", "300")                    \
        MOUNT("d", "300", "-300") "\nbands:"
#define LOSS 0.1

// The example with a body, without dispersion; bands: link-torque:coupling 20-30 Hz and
// mount-force:a:z 60-80 Hz.
static char *study_text(void)
{
    char *text = demo_text("example.yaml");
    demo_replace(text, "{cylinder_percent: 3, cyclic_percent: 2}",
                 "{cylinder_percent: 0, cyclic_percent: 0}");
    demo_replace(text, "longest_run: 12", "longest_run: 3");
    demo_replace(text, "longest: 6", "longest: 2");
    demo_replace(text, "1000:2600:50", "[1000, 1400]");
    demo_replace(text, "\nbands:", BODY);
    demo_replace(text, "low_hz: 13", "low_hz: 20");
    demo_replace(text, "high_hz: 22", "high_hz: 30");
    demo_replace(text, "low_hz: 28", "low_hz: 60");
    demo_replace(text, "high_hz: 40", "high_hz: 80");
    demo_replace(text, "quantity: roll-torque ", "quantity: \"mount-force:a:z\" ");
    demo_replace(text, "over_all_fire_db: 10 ", "limit_rms: 900 ");
    demo_replace(text, "    floor_rms: 60 ", "    # ");
    demo_replace(text, "loss_factor: 0.14", "loss_factor: 0.14, at_hz: 19");
    return text;
}

static void open(demo *d, const char *what, const char *with)
{
    char *text = study_text();
    if (what) demo_replace(text, what, with);
    demo_open_text(d, text);
    free(text);
}

typedef struct {
    tacet_arena *arena;
    tacet_scatter of;
    tacet_status status;
} found;

static found scatter(const demo *d, const char *list, const char *word, double rpm,
                     const volatile int *stop)
{
    found f = {.arena = tacet_arena_create()};
    tacet_error e = {.text = ""};
    tacet_scatter_entry *entries;
    size_t n;
    assert_int_equal(tacet_scatter_parse(list, d->model, f.arena, &entries, &n, &e), TACET_OK);
    tacet_roll *roll = demo_roll(d, word);
    tacet_candidate candidate = {.name = word, .roll = &roll, .n_placements = 1};
    tacet_condition c = demo_condition(d, roll, rpm);
    tacet_scatter_ask ask = {entries,           n,           &candidate,
                             c.speed_rad_per_s, c.demand_Nm, TACET_LEVEL_RIPPLE};
    tacet_watch watch = {.stop = stop};
    f.status = tacet_scatter_run(d->model, &ask, &watch, f.arena, &f.of, &e);
    tacet_roll_destroy(roll);
    return f;
}

static tacet_row row_of(const demo *d, const char *word, double rpm)
{
    tacet_row row;
    tacet_roll *roll = demo_roll(d, word);
    tacet_condition c = demo_condition(d, roll, rpm);
    assert_int_equal(tacet_solve(d->model, &c, TACET_LEVEL_RIPPLE, d->work, &row), TACET_OK);
    tacet_roll_destroy(roll);
    return row;
}

// Order 3 of all cylinders firing is the one line inside: at 1400 rpm 70 Hz, and w^2 I / K = 1.080.
// The mount's force goes as T of test_scatter_search.c, whatever the roll torque is; so does the
// resonance, which lies inside, and the slope.
static void test_mounts_in_closed_form(void **state)
{
    (void)state;
    demo d;
    open(&d, NULL, NULL);
    double w = 2 * M_PI * 70, c = w * w * 6 / (4 * 2985e3 * 0.3 * 0.3), off = 1 - c;
    double stated = 10 * log10((1 + LOSS * LOSS) / (off * off + LOSS * LOSS));
    double peak = 10 * log10((1 + LOSS * LOSS) / (LOSS * LOSS));
    assert_near(c, 1.08, 1e-3, 0);
    tacet_row row = row_of(&d, "x", 1400);
    found f = scatter(&d, "mounts=15%", "x", 1400, NULL);
    assert_int_equal(f.status, TACET_OK);
    const tacet_scatter_margin *m = &f.of.margins[1];
    assert_int_equal(f.of.n_margins, 3);
    assert_int_equal(m->band, 1);
    assert_near(m->stated_db, row.bands[1].margin_db, 1e-9, 0);
    assert_near(m->least_db - m->stated_db, stated - peak, 0.1, 0);
    assert_near(m->at[0], c, 0.02, 0);
    assert_near(m->slope_db[0], 20 / log(10) * c * off / (off * off + LOSS * LOSS), 0, 0.01);
    assert_int_equal(m->governs, 0);
    // no mount in a link torque or a stress
    assert_int_equal(f.of.margins[0].governs, SIZE_MAX);
    assert_near(f.of.margins[0].least_db, f.of.margins[0].stated_db, 0, 0);
    assert_int_equal(f.of.margins[2].limit, 0);
    assert_near(f.of.margins[2].stated_db, row.limits[0].margin_db, 1e-9, 0);
    assert_int_equal(f.of.n_failed, 0);
    tacet_arena_destroy(f.arena);
    demo_close(&d);
}

// The chain rule: what all mounts do together is the sum of what each does.
static void test_single_mounts_add_up(void **state)
{
    (void)state;
    demo d;
    open(&d, NULL, NULL);
    found all = scatter(&d, "mounts=1%", "x", 1400, NULL);
    found each = scatter(&d, "a=1%, b=1%, c=1%, d=1%", "x", 1400, NULL);
    double sum = 0;
    for (int i = 0; i < 4; i++) {
        assert_int_equal(each.of.entries[i].mount, i);
        sum += each.of.margins[1].slope_db[i];
    }
    assert_near(sum, all.of.margins[1].slope_db[0], 0, 0.01);
    assert_true(fabs(sum) > 10); // dB: 1 dB for 10 %
    tacet_arena_destroy(all.arena);
    tacet_arena_destroy(each.arena);
    demo_close(&d);
}

// A link against the study with that stiffness in its file, solved from scratch; the limit stays
// the stated study's. Above the coupling's mode (19 Hz against 25) a stiffer one is worse.
static void test_link_as_a_study_of_its_own(void **state)
{
    (void)state;
    static const char *const limit[] = {"limit_rms: 45 ",
                                        "over_all_fire_db: 20\n    floor_rms: 0.001 "};
    for (int k = 0; k < 2; k++) {
        demo d, stiff;
        char *text = study_text();
        demo_replace(text, "limit_rms: 45 ", limit[k]);
        demo_open_text(&d, text);
        demo_replace(text, "stiffness_nm_per_rad: 900,", "stiffness_nm_per_rad: 990,");
        demo_open_text(&stiff, text);
        free(text);
        tacet_row row = row_of(&d, ".x", 1000), other = row_of(&stiff, ".x", 1000);
        found f = scatter(&d, "coupling=10%", ".x", 1000, NULL);
        const tacet_scatter_margin *m = &f.of.margins[0];
        double expected = 20 * log10(row.bands[0].limit / other.bands[0].level.dispersed);
        assert_near(m->stated_db, row.bands[0].margin_db, 1e-9, 0);
        assert_near(m->at[0], 1.1, 1e-12, 0);
        assert_near(m->least_db, expected, 1e-4, 0);
        assert_true(m->least_db < m->stated_db - 1 && m->slope_db[0] < 0);
        if (k == 1) // all-fire of the stiffer one is another limit
            assert_true(fabs(other.bands[0].margin_db - expected) > 0.1);
        tacet_arena_destroy(f.arena);
        demo_close(&d);
        demo_close(&stiff);
    }
}

static void test_same_bits(void **state)
{
    (void)state;
    demo d;
    open(&d, NULL, NULL);
    found f[2];
    for (int i = 0; i < 2; i++)
        f[i] = scatter(&d, "mounts=10%,coupling=5%", "x", 1400, NULL);
    for (size_t b = 0; b < 3; b++) {
        const tacet_scatter_margin *x = &f[0].of.margins[b], *y = &f[1].of.margins[b];
        assert_memory_equal(&x->least_db, &y->least_db, sizeof(double));
        assert_memory_equal(x->at, y->at, 2 * sizeof(double));
        assert_memory_equal(x->slope_db, y->slope_db, 2 * sizeof(double));
    }
    tacet_arena_destroy(f[0].arena);
    tacet_arena_destroy(f[1].arena);
    demo_close(&d);
}

static void test_out_of_reach_and_stopped(void **state)
{
    (void)state;
    demo d;
    open(&d, "[[1000, 50], [2600, 80]]", "500");
    found f = scatter(&d, "mounts=10%", ".x", 1400, NULL);
    assert_int_equal(f.status, TACET_OK);
    assert_int_equal(f.of.n_points, 1);
    for (size_t b = 0; b < 3; b++) {
        assert_true(isnan(f.of.margins[b].stated_db) && isnan(f.of.margins[b].least_db));
        assert_string_equal(tacet_scatter_text(&f.of, &f.of.margins[b]), "not known");
    }
    tacet_arena_destroy(f.arena);
    const volatile int stop = 1;
    f = scatter(&d, "mounts=10%", ".x", 1400, &stop);
    assert_int_equal(f.status, TACET_STOPPED);
    tacet_arena_destroy(f.arena);
    demo_close(&d);
}

// Only what is named changes, and its damping does not.
static void test_copy_of_a_study(void **state)
{
    (void)state;
    demo d;
    demo_open(&d, "brush-truck.yaml");
    tacet_arena *a = tacet_arena_create();
    tacet_scatter_entry *entries;
    size_t n;
    tacet_error e;
    tacet_study s;
    const double factor[] = {1.2, 0.9, 1.1, 0.7};
    assert_int_equal(tacet_scatter_parse("lockup-damper=30%,halfshafts=30%,mounts=30%,rear=30%",
                                         d.model, a, &entries, &n, &e),
                     TACET_OK);
    assert_int_equal(n, 4);
    assert_int_equal(scatter_study(d.model, entries, n, factor, a, &s), TACET_OK);
    const tacet_train *t = tacet_model_train(d.model);
    for (size_t i = 0; i < s.train.n_links; i++) {
        const tacet_link_def *l = &s.train.links[i], *was = &d.study->train.links[i];
        tacet_link_info info = tacet_train_link_info(t, i);
        double f = strcmp(l->name, "lockup-damper") == 0 ? 1.2
                   : strcmp(l->name, "halfshafts") == 0  ? 0.9
                                                         : 1;
        assert_near(l->stiffness_Nm_per_rad, f * info.stiffness_Nm_per_rad, 0, 1e-15);
        if (!isnan(was->loss_factor)) assert_near(l->loss_factor, was->loss_factor, 0, 0);
        if (!isnan(was->damping_Nms_per_rad))
            assert_near(l->damping_Nms_per_rad, was->damping_Nms_per_rad, 0, 0);
    }
    for (size_t k = 0; k < 3; k++) { // left, right, rear: all of them, and rear besides
        const tacet_mount_def *m = &s.body.mounts[k], *was = &d.study->body.mounts[k];
        double f = k == 2 ? 1.1 * 0.7 : 1.1;
        assert_near(m->z_N_per_m.y[0], f * was->z_N_per_m.y[0], 0, 1e-15);
        assert_near(m->x_N_per_m.y[0], f * was->x_N_per_m.y[0], 0, 1e-15);
        assert_near(m->loss_factor.y[0], was->loss_factor.y[0], 0, 0);
    }
    assert_int_equal(s.n_bands, d.study->n_bands);
    tacet_arena_destroy(a);
    demo_close(&d);
}

static void test_refused_lists(void **state)
{
    (void)state;
    static const struct {
        const char *list, *says;
    } wrong[] = {
        {"mount=15%", "did you mean 'mounts'?"},
        {"couplings=15%", "did you mean 'coupling'?"},
        {"gearwheel=15%", "allowed: mounts, a, b, c, d"},
        {"mounts=15", "a share from 1% to 50%"},
        {"mounts=0.5%", "a share from 1% to 50%"},
        {"mounts=51%", "a share from 1% to 50%"},
        {"mounts=nan%", "a share from 1% to 50%"},
        {"mounts=%", "a share from 1% to 50%"},
        {"mounts=-5%", "a share from 1% to 50%"},
        {"mounts", "NAME=PERCENT%"},
        {"", "NAME=PERCENT%"},
        {"mounts=5%,", "NAME=PERCENT%"},
        {"mounts=5%,coupling=5%,mounts=6%", "'mounts' is given twice"},
        {"=5%", "no mount and no link is called ''"},
    };
    demo d;
    open(&d, NULL, NULL);
    tacet_arena *a = tacet_arena_create();
    for (size_t i = 0; i < sizeof wrong / sizeof *wrong; i++) {
        tacet_scatter_entry *entries;
        size_t n;
        tacet_error e = {.text = ""};
        assert_int_equal(tacet_scatter_parse(wrong[i].list, d.model, a, &entries, &n, &e),
                         TACET_BAD_INPUT);
        if (!strstr(e.text, wrong[i].says)) fail_msg("%s: %s", wrong[i].list, e.text);
    }
    tacet_arena_destroy(a);
    demo_close(&d);
}

static void test_words(void **state)
{
    (void)state;
    static const struct {
        tacet_verdict stated, least;
        size_t failed;
        const char *text;
    } is[] = {
        {TACET_CLEAR, TACET_CLEAR, 0, "stays clear"},
        {TACET_CLEAR, TACET_NEAR, 0, "may become near"},
        {TACET_CLEAR, TACET_OVER, 0, "may become over"},
        {TACET_NEAR, TACET_NEAR, 0, "is near"},
        {TACET_NEAR, TACET_OVER, 2, "may become over"},
        {TACET_OVER, TACET_OVER, 2, "is over"},
        {TACET_CLEAR, TACET_CLEAR, 1, "not known"},
        {TACET_NO_VERDICT, TACET_NO_VERDICT, 0, "not known"},
    };
    for (size_t i = 0; i < sizeof is / sizeof *is; i++) {
        tacet_scatter s = {.n_failed = is[i].failed};
        tacet_scatter_margin m = {.stated = is[i].stated, .least = is[i].least};
        assert_string_equal(tacet_scatter_text(&s, &m), is[i].text);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_mounts_in_closed_form),
        cmocka_unit_test(test_single_mounts_add_up),
        cmocka_unit_test(test_link_as_a_study_of_its_own),
        cmocka_unit_test(test_same_bits),
        cmocka_unit_test(test_out_of_reach_and_stopped),
        cmocka_unit_test(test_copy_of_a_study),
        cmocka_unit_test(test_refused_lists),
        cmocka_unit_test(test_words),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
