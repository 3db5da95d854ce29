// Whole studies: the least and the fullest, where values come from, files, standard input.
#include "comma.h"
#include "near.h"
#include "study/fill.h"
#include "tacet/study.h"
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

static const char *good_folder; // tests/study/good

static tacet_study *read_good(const char *path)
{
    tacet_problems *p = tacet_problems_create();
    tacet_study *s = NULL;
    tacet_status status = tacet_study_read(path, p, &s);
    for (size_t i = 0; i < tacet_problems_kept(p); i++)
        print_error("%s:%d: %s\n", tacet_problems_at(p, i)->file, tacet_problems_at(p, i)->line,
                    tacet_problems_at(p, i)->text);
    assert_int_equal(tacet_problems_kept(p), 0);
    assert_int_equal(status, TACET_OK);
    tacet_problems_destroy(p);
    return s;
}

static tacet_study *read_in_folder(const char *name)
{
    char path[512];
    snprintf(path, sizeof path, "%s/%s", good_folder, name);
    return read_good(path);
}

static void test_minimal(void **state)
{
    (void)state;
    tacet_study *s = read_in_folder("minimal.yaml");
    assert_string_equal(s->folder, good_folder);
    assert_string_equal(s->engine.folder, good_folder);
    assert_null(s->title);
    assert_int_equal(s->engine.strokes, 4);
    assert_near(s->engine.bore_m, 0.1, 0, 1e-15);
    assert_int_equal(s->engine.n_cylinders, 3);
    assert_int_equal(s->engine.firing_order[1], 3);
    // sections that the file leaves out have their own defaults, in one struct with the engine
    assert_near(s->engine.cycle.exhaust_Pa, 108e3, 0, 1e-15);
    assert_near(s->engine.cycle.mid_burn_rad.y[0], 8 * 3.14159265358979323846 / 180, 0, 1e-15);
    assert_int_equal(s->engine.skip.trapped, TACET_TRAPPED_RESIDUAL);
    assert_int_equal(s->engine.skip.n_cylinders, 0);
    assert_string_equal(s->train.flywheel, "flywheel");
    assert_null(s->train.load);
    assert_true(s->train.highest_hz > s->train.lowest_hz); // no keys, from the room's default
    assert_true(isnan(s->bands[0].guard));
    assert_int_equal(s->n_limits, 0);
    assert_int_equal(s->screen.n_speeds, 13);
    assert_near(s->screen.speeds_rad_per_s[12], 209.439510239319549, 0, 1e-14);
    assert_near(tacet_curve_at(&s->screen.brake_torque_Nm, 1234), 150, 0, 0);
    assert_int_equal(s->screen.densities.longest, 7);
    assert_string_equal(s->screen.densities.lowest, "1/3");
    assert_near(s->screen.reserve_db, 3, 0, 0);
    assert_near(s->screen.least_saving, 0.01, 0, 1e-15);
    assert_near(s->screen.least_clear_rad_per_s, 15.7079632679489662, 0, 1e-14);
    assert_int_equal(s->screen.referee, 8);
    assert_true(isnan(s->screen.highest_order));
    tacet_study_destroy(s);
    tacet_study_destroy(NULL);
}

// ---- where values come from
typedef struct {
    const char *wanted; // ends of paths, as "bore_mm"
    unsigned from[4];   // how often from the file, default, computed, nothing
    char value[64];
} count;

static bool is_of(const char *path, const char *key)
{
    size_t n = strlen(path), m = strlen(key);
    return n >= m && strcmp(path + n - m, key) == 0 && (n == m || path[n - m - 1] == '.');
}

static void count_value(void *who, const char *path, const char *value, const char *unit,
                        tacet_from from)
{
    count *c = who;
    if (!is_of(path, c->wanted)) return;
    assert_non_null(unit);
    c->from[from]++;
    snprintf(c->value, sizeof c->value, "%s%s%s", value, *unit ? " " : "", unit);
}

static count values_of(const tacet_study *s, const char *key)
{
    count c = {.wanted = key};
    assert_int_equal(tacet_study_values(s, count_value, &c), TACET_OK);
    return c;
}

// Every key of the section is in the file, one thing of a list at least.
static void check_all_read(const tacet_study *s, const tacet_section *section)
{
    for (const tacet_field *field = section->fields; field->key; field++) {
        if (field->section) check_all_read(s, field->section);
        if (field->kind == TACET_FIELD_SECTION) continue;
        count c = values_of(s, field->key);
        if (c.from[TACET_FROM_FILE] == 0) fail_msg("full.yaml lacks %s", field->key);
    }
}

static void test_full_has_every_key(void **state)
{
    (void)state;
    tacet_study *s = read_in_folder("full.yaml");
    check_all_read(s, tacet_study_keys());
    // in SI, converted by hand
    assert_near(s->engine.friction.per_mpa_peak_Pa, 5000, 0, 1e-15);
    assert_near(s->engine.cyclic_dispersion, 0.015, 0, 1e-15);
    assert_near(s->engine.cycle.blow_by_area_m2, 0.5e-6, 0, 1e-15);
    assert_near(s->engine.cycle.lower_heating_value_J_per_kg, 42.5e6, 0, 1e-15);
    assert_near(s->train.links[2].stiffness_catalogue_Nm_per_rad, 1145.91559026164642, 0, 1e-14);
    assert_near(s->train.links[0].throw_.web_width_m, 0.09, 0, 1e-15);
    assert_near(s->train.links[1].shear_modulus_Pa, 79e9, 0, 1e-15);
    assert_near(s->bands[0].guard, 0.04, 0, 1e-15);
    assert_int_equal(s->bands[1].reference, TACET_REFERENCE_SAME_SPEED);
    assert_int_equal(s->engine.rotation, 1);
    assert_int_equal(s->screen.n_speeds, 11);
    assert_int_equal(s->screen.n_patterns, 3);
    assert_string_equal(s->screen.patterns[2], "own.words:front pair");
    tacet_study_destroy(s);
}

static void check_value(const tacet_study *s, const char *key, tacet_from from, const char *text)
{
    count c = values_of(s, key);
    if (c.from[from] == 0) fail_msg("%s is not from there, but %s", key, c.value);
    assert_string_equal(c.value, text);
}

static void test_where_values_come_from(void **state)
{
    (void)state;
    tacet_study *s = read_in_folder("minimal.yaml");
    check_value(s, "bore_mm", TACET_FROM_FILE, "100 mm");
    check_value(s, "firing_order", TACET_FROM_FILE, "[1, 3, 2]");
    check_value(s, "speeds_rpm", TACET_FROM_FILE, "800:2000:100 rpm");
    check_value(s, "exhaust_kpa", TACET_FROM_DEFAULT, "108 kPa");
    check_value(s, "skip.cylinders", TACET_FROM_DEFAULT, "all");
    check_value(s, "firing_intervals_deg", TACET_FROM_COMPUTED, "even, 240 each deg");
    check_value(s, "engine.cylinders", TACET_FROM_COMPUTED, "inline, cylinder k on throw<k>");
    check_value(s, "guard_percent", TACET_FROM_COMPUTED, "5 %");
    check_value(s, "load", TACET_FROM_COMPUTED, "flywheel");
    check_value(s, "peak_pressure_mpa", TACET_FROM_NOTHING, " MPa");
    check_value(s, "title", TACET_FROM_NOTHING, "");
    tacet_study_destroy(s);
    s = read_in_folder("node-of-cylinder.yaml");
    check_value(s, "node", TACET_FROM_COMPUTED, "throw1");
    tacet_study_destroy(s);
}

// ---- files
static char folder[] = "/tmp/tacet-read-XXXXXX";

static const char *write_file(const char *name, const char *text)
{
    static char path[64];
    snprintf(path, sizeof path, "%s/%s", folder, name);
    FILE *f = fopen(path, "wb");
    assert_non_null(f);
    fputs(text, f);
    assert_int_equal(fclose(f), 0);
    return path;
}

static char *minimal_with(const char *more)
{
    static char text[4096];
    char path[512];
    tacet_arena *a = tacet_arena_create();
    char *bytes;
    size_t n;
    snprintf(path, sizeof path, "%s/minimal.yaml", good_folder);
    assert_int_equal(tacet_file_read(path, 2048, a, &bytes, &n, NULL), TACET_OK);
    snprintf(text, sizeof text, "%s%s", bytes, more);
    tacet_arena_destroy(a);
    return text;
}

static uint64_t fingerprint_of(const char *path)
{
    tacet_study *s = read_good(path);
    uint64_t hash = s->fingerprint;
    tacet_study_destroy(s);
    return hash;
}

static void test_fingerprint_counts_books(void **state)
{
    (void)state;
    write_file("own.words", "x.  half\n");
    const char *path = write_file("study.yaml", minimal_with("  patterns: own.words\n"));
    char study[64];
    strcpy(study, path);
    uint64_t before = fingerprint_of(study);
    assert_true(before == fingerprint_of(study));
    write_file("own.words", "xx.  two thirds\n");
    assert_true(before != fingerprint_of(study));
    write_file("study.yaml", minimal_with("  patterns: [own.words]  # the same\n"));
    write_file("own.words", "x.  half\n");
    assert_true(before == fingerprint_of(study));
}

// A folder may be named as a book is, and a book so twice over.
static void test_book_in_a_folder_of_its_name(void **state)
{
    (void)state;
    char inside[64];
    snprintf(inside, sizeof inside, "%s/all.words", folder);
    assert_int_equal(mkdir(inside, 0700), 0);
    write_file("all.words/own.words.words", "x.  half\n");
    char study[64];
    strcpy(study,
           write_file("study.yaml", minimal_with("  patterns: [x., all.words/own.words.words, "
                                                 "'all.words/own.words.words:half']\n")));
    uint64_t before = fingerprint_of(study);
    write_file("all.words/own.words.words", "x.  half\nx..  third\n");
    assert_true(before != fingerprint_of(study));
    snprintf(inside, sizeof inside, "%s/all.words/own.words.words", folder);
    assert_int_equal(unlink(inside), 0);
    *strrchr(inside, '/') = '\0';
    assert_int_equal(rmdir(inside), 0);
}

static void refuse(const char *path, tacet_status status, int line, const char *text)
{
    tacet_problems *p = tacet_problems_create();
    tacet_study *s = NULL;
    assert_int_equal(tacet_study_read(path, p, &s), status);
    assert_null(s);
    assert_int_equal(tacet_problems_kept(p), 1);
    assert_string_equal(tacet_problems_at(p, 0)->text, text);
    assert_int_equal(tacet_problems_at(p, 0)->line, line);
    assert_string_equal(tacet_problems_at(p, 0)->file, path);
    tacet_problems_destroy(p);
}

static void test_files_that_are_none(void **state)
{
    (void)state;
    char text[128];
    refuse("/no/such/study.yaml", TACET_OUTSIDE_WORLD, 0,
           "cannot read /no/such/study.yaml: there is no such file");
    snprintf(text, sizeof text, "cannot read %s: it is a folder", folder);
    refuse(folder, TACET_OUTSIDE_WORLD, 0, text);
    refuse(write_file("empty.yaml", ""), TACET_BAD_INPUT, 0,
           "the file holds no study; `tacet example` prints one to start from");
}

static void test_standard_input(void **state)
{
    (void)state;
    write_file("own.words", "x.  half\n");
    const char *path = write_file("study.yaml", minimal_with("  patterns: own.words\n"));
    assert_non_null(freopen(path, "rb", stdin));
    char before[512];
    assert_non_null(getcwd(before, sizeof before));
    assert_int_equal(chdir(folder), 0); // books are then relative to the working folder
    tacet_study *s = read_good("-");
    assert_string_equal(s->path, "standard input");
    assert_string_equal(s->folder, ".");
    tacet_study_destroy(s);
    s = read_good("study.yaml");
    assert_string_equal(s->folder, ".");
    tacet_study_destroy(s);
    assert_int_equal(chdir(before), 0);
}

static void test_text(void **state)
{
    (void)state;
    tacet_problems *p = tacet_problems_create();
    tacet_study *s = NULL;
    const char *text = minimal_with("");
    assert_int_equal(tacet_study_read_text(text, strlen(text), "/a.yaml", p, &s), TACET_OK);
    assert_string_equal(s->folder, "/");
    tacet_study_destroy(s);
    s = NULL;
    assert_int_equal(tacet_study_read_text("a: [", 4, "typed", p, &s), TACET_BAD_INPUT);
    assert_null(s);
    assert_string_equal(tacet_problems_at(p, 0)->file, "typed");
    tacet_problems_destroy(p);
}

static void test_comma_locale(void **state)
{
    (void)state;
    tacet_study *s = read_in_folder("full.yaml");
    uint64_t plain = s->fingerprint;
    tacet_study_destroy(s);
    if (!comma_begin()) skip();
    s = read_in_folder("full.yaml");
    assert_true(s->fingerprint == plain);
    check_value(s, "charge_factor", TACET_FROM_FILE, "1");
    check_value(s, "pin_offset_mm", TACET_FROM_FILE, "0.8 mm");
    tacet_study_destroy(s);
    comma_end();
}

// ---- the tables themselves
static void check_field(const tacet_section *s, const tacet_field *f)
{
    if (tacet_unit_factor(f->unit) == 0) fail_msg("%s.%s: unit %s", s->name, f->key, f->unit);
    if (!f->doc || !*f->doc) fail_msg("%s.%s says nothing of itself", s->name, f->key);
    assert_true(f->low <= f->high);
    assert_true(f->offset < s->size || s->size == 0);
    assert_int_equal(strspn(f->key, "abcdefghijklmnopqrstuvwxyz0123456789_"), strlen(f->key));
    for (const tacet_field *g = s->fields; g != f; g++)
        assert_string_not_equal(g->key, f->key);
    assert_int_equal(f->section != NULL,
                     f->kind == TACET_FIELD_SECTION || f->kind == TACET_FIELD_SECTIONS);
    assert_int_equal(f->choices != NULL, f->kind == TACET_FIELD_CHOICE);
}

// Defaults are inside their own ranges: an empty section has no faults but what is missing.
static void check_section(const tacet_section *s)
{
    assert_true(s->doc && *s->doc);
    for (const tacet_field *f = s->fields; f->key; f++) {
        check_field(s, f);
        if (f->section) check_section(f->section);
    }
    filler f = {.arena = tacet_arena_create(), .problems = tacet_problems_create(), .file = ""};
    void *into = tacet_arena_alloc(f.arena, s->size);
    fill_section(&f, s, NULL, (place){1, 1}, into);
    for (size_t i = 0; i < tacet_problems_kept(f.problems); i++)
        if (!strstr(tacet_problems_at(f.problems, i)->text, " is missing: "))
            fail_msg("%s: %s", s->name, tacet_problems_at(f.problems, i)->text);
    filler_clear(&f);
    tacet_problems_destroy(f.problems);
    tacet_arena_destroy(f.arena);
}

static void test_tables(void **state)
{
    (void)state;
    check_section(tacet_study_keys());
    assert_ptr_equal(tacet_study_keys(), tacet_study_keys());
}

static int make_folder(void **state)
{
    (void)state;
    return mkdtemp(folder) ? 0 : -1;
}

static int remove_folder(void **state)
{
    (void)state;
    static const char *const names[] = {"own.words", "study.yaml", "empty.yaml"};
    for (size_t i = 0; i < 3; i++) {
        char path[64];
        snprintf(path, sizeof path, "%s/%s", folder, names[i]);
        (void)unlink(path);
    }
    return rmdir(folder);
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_minimal),
    cmocka_unit_test(test_full_has_every_key),
    cmocka_unit_test(test_where_values_come_from),
    cmocka_unit_test(test_fingerprint_counts_books),
    cmocka_unit_test(test_book_in_a_folder_of_its_name),
    cmocka_unit_test(test_files_that_are_none),
    cmocka_unit_test(test_standard_input),
    cmocka_unit_test(test_text),
    cmocka_unit_test(test_comma_locale),
    cmocka_unit_test(test_tables),
};

int main(int argc, char **argv)
{
    if (argc < 2) return 1;
    good_folder = argv[1];
    return cmocka_run_group_tests(tests, make_folder, remove_folder);
}
