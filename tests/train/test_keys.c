// Keys of the section train, and what a definition may not say.
#include "near.h"
#include "tacet/train.h"
#include "trains.h"
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static const tacet_field *field(const tacet_section *s, const char *key)
{
    for (const tacet_field *f = s->fields; f->key; f++)
        if (strcmp(f->key, key) == 0) return f;
    fail_msg("no key %s", key);
    return NULL;
}

static void check_words(const tacet_section *s, const char *words)
{
    char all[1024] = "";
    for (const tacet_field *f = s->fields; f->key; f++) {
        assert_non_null(f->doc);
        assert_true(f->offset < s->size);
        assert_true(tacet_unit_factor(f->unit) != 0);
        snprintf(all + strlen(all), sizeof all - strlen(all), "%s ", f->key);
    }
    assert_string_equal(all, words);
}

// Users script against these words.
static void test_words(void **state)
{
    (void)state;
    const tacet_section *train = tacet_train_keys();
    assert_string_equal(train->name, "train");
    check_words(train, "nodes links dampers flywheel load ");
    check_words(field(train, "nodes")->section, "name inertia_kgm2 damping_nms_per_rad on ");
    check_words(field(train, "links")->section,
                "name from to stiffness_nm_per_rad stiffness_nm_per_deg length_mm "
                "shear_modulus_gpa outer_mm inner_mm stress_concentration fatigue throw "
                "damping_nms_per_rad damping_ratio loss_factor at_hz loss_law gear_ratio ");
    check_words(field(field(train, "links")->section, "throw")->section,
                "formula journal_length_mm journal_outer_mm journal_inner_mm pin_length_mm "
                "pin_outer_mm pin_inner_mm throw_mm web_thickness_mm web_width_mm ");
    check_words(field(train, "dampers")->section,
                "name node ring_inertia_kgm2 tuned_hz loss_factor ");
}

// What the table fills in for a key that is not stated is what the default struct holds.
static void check_defaults(const tacet_section *s, const void *filled)
{
    for (const tacet_field *f = s->fields; f->key; f++) {
        const char *at = (const char *)filled + f->offset;
        double expected = NAN, got;
        if (f->kind == TACET_FIELD_SECTION) check_defaults(f->section, at);
        if (f->kind == TACET_FIELD_CHOICE && f->fallback) {
            int choice = -1, word;
            for (int i = 0; f->choices[i]; i++)
                if (strcmp(f->choices[i], f->fallback) == 0) choice = i;
            memcpy(&word, at, sizeof word);
            assert_int_equal(word, choice);
        }
        if (f->kind != TACET_FIELD_NUMBER || !f->fallback) continue;
        if (*f->fallback) assert_true(tacet_number_parse(f->fallback, &expected));
        memcpy(&got, at, sizeof got);
        if (isnan(expected))
            assert_true(isnan(got));
        else
            assert_near(got, expected * tacet_unit_factor(f->unit), 0, 1e-15);
    }
}

static void test_defaults(void **state)
{
    (void)state;
    tacet_node_def node = tacet_node_default();
    tacet_link_def link = tacet_link_default();
    check_defaults(field(tacet_train_keys(), "nodes")->section, &node);
    check_defaults(field(tacet_train_keys(), "links")->section, &link);
    assert_string_equal(tacet_train_default().flywheel,
                        field(tacet_train_keys(), "flywheel")->fallback);
    const tacet_section *links = field(tacet_train_keys(), "links")->section;
    assert_string_equal(field(links, "loss_law")->choices[TACET_LOSS_CONSTANT], "constant");
    const tacet_section *throws = field(links, "throw")->section;
    assert_string_equal(field(throws, "formula")->choices[TACET_THROW_CARTER], "carter");
    assert_string_equal(field(throws, "formula")->choices[TACET_THROW_KER_WILSON], "ker-wilson");
    const tacet_section *nodes = field(tacet_train_keys(), "nodes")->section;
    assert_string_equal(field(nodes, "on")->choices[TACET_ON_OUTSIDE], "outside");
}

// ---- check --------------------------------------------------------------------------------------

typedef struct {
    char text[2000];
    int errors, warnings;
} said;

static void hear(void *who, bool warning, const char *path, const char *text)
{
    said *s = who;
    size_t used = strlen(s->text);
    snprintf(s->text + used, sizeof s->text - used, "%s: %s\n", path, text);
    warning ? s->warnings++ : s->errors++;
}

static bench_train *good(void)
{
    const double J[] = {0.1, 0.2, 0.3}, k[] = {1e5, 2e5};
    bench_train *b = bench_chain(3, J, k);
    b->node[2].name = "flywheel";
    b->link[1].to = b->d.flywheel = "flywheel";
    return b;
}

// One thing wrong: exactly one error that holds `expected`, and create refuses with the same text.
static void check_says(bench_train *b, const char *expected)
{
    said s = {.text = ""};
    tacet_train_def_check(&b->d, &(tacet_reporter){hear, &s});
    if (s.errors != 1 || !strstr(s.text, expected)) fail_msg("%d: %s", s.errors, s.text);
    tacet_train *t = NULL;
    tacet_error e = {.text = ""};
    assert_int_equal(tacet_train_create(&b->d, &t, &e), TACET_BAD_INPUT);
    assert_null(t);
    assert_non_null(strstr(e.text, expected));
    free(b);
}

static void test_nothing_wrong(void **state)
{
    (void)state;
    bench_train *all[] = {good(), forwarder(), brush_truck()};
    for (int i = 0; i < 3; i++) {
        said s = {.text = ""};
        tacet_train_def_check(&all[i]->d, &(tacet_reporter){hear, &s});
        assert_string_equal(s.text, "");
        free(all[i]);
    }
}

static void test_names(void **state)
{
    (void)state;
    bench_train *b = good();
    b->link[1].to = "flywhel";
    b->d.flywheel = "flywheel";
    said s = {.text = ""};
    tacet_train_def_check(&b->d, &(tacet_reporter){hear, &s});
    assert_non_null(strstr(s.text, "train.links[1].to: 'flywhel' is no node of the train; near is "
                                   "'flywheel'"));
    free(b);
    b = good();
    b->d.load = "moon";
    check_says(b, "train.load: 'moon' is no node of the train");
    b = good();
    b->node[1].name = "n0";
    b->link[0].to = b->link[1].from = "n0";
    s = (said){.text = ""};
    tacet_train_def_check(&b->d, &(tacet_reporter){hear, &s});
    assert_non_null(strstr(s.text, "train.nodes[1].name: a node 'n0' is there already"));
    free(b);
    b = good();
    b->link[1].name = "l0";
    check_says(b, "train.links[1].name: a link 'l0' is there already");
    b = good();
    b->d.n_nodes = 0;
    check_says(b, "train.nodes: none");
}

static void test_tree(void **state)
{
    (void)state;
    bench_train *b = good();
    bench_link(b, 2, 0, 1e4);
    check_says(b, "train.links[2].to: closes a loop; a train is a tree");
    b = good();
    b->d.n_links = 1;
    check_says(b, "train.nodes[0].name: no links lead from 'n0' to the flywheel 'flywheel'");
    b = good();
    bench_link(b, 1, 1, 1e4);
    check_says(b, "train.links[2].to: the node that `from` names");
}

static void test_stiffness_and_damping(void **state)
{
    (void)state;
    bench_train *b = good();
    b->link[0].stiffness_Nm_per_rad = NAN;
    check_says(b, "train.links[0].name: no stiffness");
    b = good();
    b->link[0].stiffness_catalogue_Nm_per_rad = 1e5;
    check_says(b, "train.links[0].name: more than one stiffness");
    b = good();
    b->link[0].stiffness_Nm_per_rad = NAN;
    b->link[0].length_m = 0.3;
    check_says(b, "train.links[0].length_mm: a plain shaft needs outer_mm too");
    b = good();
    b->link[0].outer_m = 0.05;
    b->link[0].inner_m = 0.05;
    check_says(b, "train.links[0].inner_mm: not below outer_mm");
    b = good();
    b->link[1].loss_factor = 0.1;
    b->link[1].damping_ratio = 0.1;
    check_says(b, "train.links[1].name: more than one damping");
    b = good();
    b->link[1].stiffness_Nm_per_rad = 0;
    check_says(b, "a stiffness of 0 N m/rad; finite and above 0");
    b = good();
    b->link[1].gear_ratio = 0;
    check_says(b, "train.links[1].gear_ratio: 0");
    b = good();
    b->node[1].inertia_kgm2 = 0;
    check_says(b, "train.nodes[1].inertia_kgm2: finite and above 0");
    b = good();
    b->node[1].damping_Nms_per_rad = NAN;
    check_says(b, "train.nodes[1].damping_nms_per_rad: finite and not below 0");
    b = good();
    b->d.lowest_hz = 0;
    tacet_train *t = NULL;
    tacet_error e;
    assert_int_equal(tacet_train_create(&b->d, &t, &e), TACET_BAD_INPUT);
    free(b);
}

static void test_throw(void **state)
{
    (void)state;
    bench_train *b = good();
    b->link[0].stiffness_Nm_per_rad = NAN;
    b->link[0].throw_ =
        (tacet_throw_def){TACET_THROW_CARTER, .03, .06, 0, .028, .05, 0, .045, .02, .085};
    bench_train *partial = good();
    partial->link[0] = b->link[0];
    partial->link[0].from = partial->node[0].name;
    partial->link[0].to = partial->node[1].name;
    partial->link[0].throw_.web_width_m = NAN;
    check_says(partial, "train.links[0].throw.web_width_mm: missing");
    tacet_train *t = bench_create(b);
    assert_near(tacet_train_link_info(t, 0).stiffness_Nm_per_rad, 6.331300e5, 0, 1e-6);
    tacet_train_destroy(t);
}

// A damper adds the node <name>-ring and the link <name>, k = J (2 pi f)^2.
static void test_damper(void **state)
{
    (void)state;
    bench_train *b = good();
    b->damper[0] = (tacet_damper_def){"damper", "n0", 0.02, 150, 0.2};
    b->d.n_dampers = 1;
    b->node[0].on = TACET_ON_OUTSIDE;
    tacet_train *t = bench_create(b);
    assert_int_equal(tacet_train_nodes(t), 4);
    assert_int_equal(tacet_train_links(t), 3);
    size_t ring = tacet_train_node_find(t, "damper-ring"),
           link = tacet_train_link_find(t, "damper");
    assert_int_equal(ring, 3);
    assert_int_equal(link, 2);
    tacet_link_info info = tacet_train_link_info(t, link);
    assert_near(info.stiffness_Nm_per_rad, 0.02 * pow(2 * M_PI * 150, 2), 0, 1e-14);
    assert_near(creal(tacet_train_link_impedance(t, link, 2 * M_PI * 150)),
                info.stiffness_Nm_per_rad, 0, 1e-12);
    assert_near(info.loss_factor, 0.2, 0, 0);
    assert_near(tacet_train_node_inertia(t, ring), 0.02, 0, 0);
    assert_false(tacet_train_node_housed(t, ring));
    assert_true(tacet_train_node_housed(t, 1));
    assert_int_equal(tacet_train_node_find(t, "none"), SIZE_MAX);
    tacet_train_destroy(t);
    b = good();
    b->damper[0] = (tacet_damper_def){"damper", "hub", 0.02, 150, 0.2};
    b->d.n_dampers = 1;
    check_says(b, "train.dampers[0].node: 'hub' is no node of the train");
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_words),         cmocka_unit_test(test_defaults),
    cmocka_unit_test(test_nothing_wrong), cmocka_unit_test(test_names),
    cmocka_unit_test(test_tree),          cmocka_unit_test(test_stiffness_and_damping),
    cmocka_unit_test(test_throw),         cmocka_unit_test(test_damper),
};
TEST_MAIN(tests)
