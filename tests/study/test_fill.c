// Filling structs by field tables, on a table of the test's own that has every kind of key.
#include "comma.h"
#include "near.h"
#include "study/fill.h"
#include "study/walk.h"
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

typedef struct {
    double weight_kg;
    const char *name;
} wheel;
typedef struct {
    double depth_m;
    const char **marks;
    size_t n_marks;
} tread;
typedef struct {
    double length_m, width_m, angle_rad;
    tacet_curve pressure_Pa;
    unsigned doors;
    int colour;
    const char *title;
    double *speeds_rad_per_s;
    size_t n_speeds;
    unsigned *seats;
    size_t n_seats;
    const char **options;
    size_t n_options;
    tread tread;
    wheel *wheels;
    size_t n_wheels;
} car;

static const char *const colours[] = {"red", "green", "blue", NULL};
static const tacet_field wheel_fields[] = {
    {.key = "name", .kind = TACET_FIELD_NAME, .offset = offsetof(wheel, name)},
    {.key = "weight_g",
     .kind = TACET_FIELD_NUMBER,
     .offset = offsetof(wheel, weight_kg),
     .unit = "g",
     .fallback = "9000"},
    {0}};
static const tacet_section wheel_section = {
    .name = "wheels", .size = sizeof(wheel), .fields = wheel_fields, .shorthand = "name"};
static const tacet_field tread_fields[] = {{.key = "marks",
                                            .kind = TACET_FIELD_TEXTS,
                                            .offset = offsetof(tread, marks),
                                            .count_offset = offsetof(tread, n_marks),
                                            .fallback = ""},
                                           {.key = "depth_mm",
                                            .kind = TACET_FIELD_NUMBER,
                                            .offset = offsetof(tread, depth_m),
                                            .unit = "mm",
                                            .fallback = "7"},
                                           {0}};
static const tacet_section tread_section = {
    .name = "tread", .size = sizeof(tread), .fields = tread_fields, .shorthand = "marks"};
#define CAR(member) .offset = offsetof(car, member)
static const tacet_field car_fields[] = {
    {.key = "length_mm",
     .kind = TACET_FIELD_NUMBER,
     CAR(length_m),
     .unit = "mm",
     .low = 1000,
     .high = 9000,
     .doc = "over all"},
    {.key = "width_mm", .kind = TACET_FIELD_NUMBER, CAR(width_m), .unit = "mm", .fallback = ""},
    {.key = "angle_deg",
     .kind = TACET_FIELD_NUMBER,
     CAR(angle_rad),
     .unit = "deg",
     .fallback = "-90"},
    {.key = "pressure_kpa",
     .kind = TACET_FIELD_CURVE,
     CAR(pressure_Pa),
     .unit = "kPa",
     .x_unit = "rpm",
     .fallback = "[[0, 100], [1000, 150]]"},
    {.key = "doors", .kind = TACET_FIELD_COUNT, CAR(doors), .fallback = "4", .low = 0, .high = 6},
    {.key = "colour",
     .kind = TACET_FIELD_CHOICE,
     CAR(colour),
     .fallback = "green",
     .choices = colours},
    {.key = "title", .kind = TACET_FIELD_TEXT, CAR(title), .fallback = ""},
    {.key = "speeds_rpm",
     .kind = TACET_FIELD_NUMBERS,
     CAR(speeds_rad_per_s),
     .count_offset = offsetof(car, n_speeds),
     .unit = "rpm",
     .fallback = "60:180:60"},
    {.key = "seats",
     .kind = TACET_FIELD_COUNTS,
     CAR(seats),
     .count_offset = offsetof(car, n_seats),
     .fallback = "all",
     .word = "all"},
    {.key = "options",
     .kind = TACET_FIELD_TEXTS,
     CAR(options),
     .count_offset = offsetof(car, n_options),
     .fallback = "radio, heater"},
    {.key = "tread",
     .kind = TACET_FIELD_SECTION,
     CAR(tread),
     .fallback = "",
     .section = &tread_section},
    {.key = "wheels",
     .kind = TACET_FIELD_SECTIONS,
     CAR(wheels),
     .count_offset = offsetof(car, n_wheels),
     .fallback = "",
     .section = &wheel_section},
    {0}};
static const tacet_section car_section = {.name = "car", .size = sizeof(car), .fields = car_fields};

typedef struct {
    tacet_arena *arena;
    tacet_problems *problems;
    tacet_tree *tree;
    car car;
} reading;

static reading read_car(const char *text)
{
    reading r = {.arena = tacet_arena_create(), .problems = tacet_problems_create()};
    filler f = {.arena = r.arena, .problems = r.problems, .file = "car.yaml", .root = &car_section};
    memset(&r.car, 0xA5, sizeof r.car); // nothing may be left as it was
    assert_int_equal(tree_read(text, strlen(text), f.file, r.arena, r.problems, &r.tree), TACET_OK);
    fill_section(&f, &car_section, r.tree->root, (place){1, 1}, &r.car);
    assert_false(f.no_memory);
    assert_string_equal(f.path, "");
    filler_clear(&f);
    return r;
}

static void end(reading *r)
{
    tacet_problems_destroy(r->problems);
    tacet_arena_destroy(r->arena);
}

static void print(const tacet_problems *p)
{
    for (size_t i = 0; i < tacet_problems_kept(p); i++) {
        const tacet_problem *q = tacet_problems_at(p, i);
        print_error("%d:%d: %s\n", q->line, q->column, q->text);
    }
}

static reading read_good(const char *text)
{
    reading r = read_car(text);
    print(r.problems);
    assert_int_equal(tacet_problems_errors(r.problems), 0);
    return r;
}

static void test_defaults(void **state)
{
    (void)state;
    reading r = read_good("length_mm: 4000\n");
    const car *c = &r.car;
    assert_near(c->length_m, 4, 0, 1e-15);
    assert_true(isnan(c->width_m));
    assert_near(c->angle_rad, -1.57079632679489661923, 0, 1e-15);
    assert_int_equal(c->pressure_Pa.n, 2);
    assert_near(c->pressure_Pa.x[1], 1000, 0, 0); // x stays as in the file
    assert_near(c->pressure_Pa.y[1], 150e3, 0, 1e-15);
    assert_int_equal(c->doors, 4);
    assert_int_equal(c->colour, 1);
    assert_null(c->title);
    assert_int_equal(c->n_speeds, 3);
    assert_near(c->speeds_rad_per_s[2], 18.8495559215387594, 0, 1e-15); // 3 turns a second
    assert_int_equal(c->n_seats, 0);
    assert_null(c->seats);
    assert_int_equal(c->n_options, 2);
    assert_string_equal(c->options[1], "heater");
    assert_near(c->tread.depth_m, 0.007, 0, 1e-15);
    assert_int_equal(c->tread.n_marks, 0);
    assert_int_equal(c->n_wheels, 0);
    end(&r);
}

static void test_every_kind(void **state)
{
    (void)state;
    reading r = read_good("length_mm: 4.2e3\n"
                          "width_mm: '1800'\n"
                          "angle_deg: 180\n"
                          "pressure_kpa: [[1, 2], [3, 4.5]]\n"
                          "doors: 2\n"
                          "colour: blue\n"
                          "title: 12:30\n"
                          "speeds_rpm: [60, 120:240:60, 1e3]\n"
                          "seats: [1, 4]\n"
                          "options: [no, '5, 6']\n"
                          "tread: {depth_mm: 3, marks: a}\n"
                          "wheels: [{name: left, weight_g: 500}, right]\n");
    const car *c = &r.car;
    assert_near(c->length_m, 4.2, 0, 1e-15);
    assert_near(c->width_m, 1.8, 0, 1e-15);
    assert_near(c->angle_rad, 3.14159265358979323846, 0, 1e-15);
    assert_near(c->pressure_Pa.y[1], 4500, 0, 1e-15);
    assert_int_equal(c->doors, 2);
    assert_int_equal(c->colour, 2);
    assert_string_equal(c->title, "12:30");
    assert_int_equal(c->n_speeds, 5);
    assert_near(c->speeds_rad_per_s[3], 25.1327412287183459, 0, 1e-15);
    assert_near(c->speeds_rad_per_s[4], 104.719755119659775, 0, 1e-14);
    assert_int_equal(c->n_seats, 2);
    assert_int_equal(c->seats[1], 4);
    assert_int_equal(c->n_options, 2);
    assert_string_equal(c->options[0], "no");
    assert_string_equal(c->options[1], "5, 6"); // items of a list are not split
    assert_near(c->tread.depth_m, 0.003, 0, 1e-15);
    assert_string_equal(c->tread.marks[0], "a");
    assert_int_equal(c->n_wheels, 2);
    assert_near(c->wheels[0].weight_kg, 0.5, 0, 1e-15);
    assert_string_equal(c->wheels[1].name, "right"); // by its shorthand
    assert_near(c->wheels[1].weight_kg, 9, 0, 1e-15);
    end(&r);
}

static void test_shorter_ways(void **state)
{
    (void)state;
    reading r = read_good("length_mm: 4000\n"
                          "pressure_kpa: 120\n"
                          "speeds_rpm: 60:120:30, 200\n"
                          "seats: 3\n"
                          "options: a, b ,c\n"
                          "tread: [x, y]\n"
                          "wheels:\n");
    const car *c = &r.car;
    assert_int_equal(c->pressure_Pa.n, 1);
    assert_near(c->pressure_Pa.x[0], 0, 0, 0);
    assert_near(c->pressure_Pa.y[0], 120e3, 0, 1e-15);
    assert_int_equal(c->n_speeds, 4);
    assert_int_equal(c->n_seats, 1);
    assert_int_equal(c->n_options, 3);
    assert_string_equal(c->options[1], "b");
    assert_int_equal(c->tread.n_marks, 2);
    assert_string_equal(c->tread.marks[1], "y");
    assert_near(c->tread.depth_m, 0.007, 0, 1e-15);
    assert_int_equal(c->n_wheels, 0);
    end(&r);
}

// Faults leave the value absent, and everything after them is still read and reported.
static void test_faults_in_one_go(void **state)
{
    (void)state;
    reading r = read_car("lenght_mm: 4000\n"
                         "width_mm: wide\n"
                         "pressure_kpa: [[1, 2], [1, 3]]\n"
                         "doors: 7\n"
                         "colour: gren\n"
                         "seats: [1, 2.5]\n"
                         "tread: {depth: 3}\n"
                         "wheels: [{weight_g: 5}, {name: a}, {name: a}]\n");
    static const struct {
        int line, column;
        const char *text;
    } expected[] = {
        {1, 1, "'lenght_mm' is no key of the study; did you mean length_mm?"},
        {2, 11, "width_mm is 'wide'; a number in mm is needed"},
        {3, 24, "a point of pressure_kpa at 1 after one at 1; points rise in x"},
        {4, 8, "doors is 7; allowed are 0 to 6"},
        {5, 9, "colour is 'gren'; allowed are red, green, blue; did you mean green?"},
        {6, 12, "seats holds 2.5; whole numbers are needed"},
        {7, 9, "'depth' is no key of tread; did you mean depth_mm?"},
        {8, 10, "item 1 of wheels: name is missing: "},
        {8, 43, "name 'a' a second time; the first is at line 8"},
    };
    size_t n = sizeof expected / sizeof *expected;
    if (tacet_problems_kept(r.problems) != n) print(r.problems);
    assert_int_equal(tacet_problems_kept(r.problems), n);
    for (size_t i = 0; i < n; i++) {
        const tacet_problem *p = tacet_problems_at(r.problems, i);
        assert_string_equal(p->text, expected[i].text);
        assert_int_equal(p->line, expected[i].line);
        assert_int_equal(p->column, expected[i].column);
    }
    assert_true(isnan(r.car.length_m) && isnan(r.car.width_m));
    assert_int_equal(r.car.pressure_Pa.n, 0);
    assert_int_equal(r.car.colour, -1);
    assert_int_equal(r.car.n_seats, 0);
    assert_int_equal(r.car.n_wheels, 3);
    assert_null(r.car.wheels[0].name);
    end(&r);
}

static uint64_t fingerprint(const char *text)
{
    reading r = read_good(text);
    uint64_t hash = walk_fingerprint(&car_section, &r.car);
    end(&r);
    return hash;
}

static void test_fingerprint_is_of_values(void **state)
{
    (void)state;
    uint64_t plain = fingerprint("length_mm: 4000\n");
    // written otherwise, the same values
    assert_true(plain == fingerprint("# words\nangle_deg: -90.0\nlength_mm: 4e3\n"));
    assert_true(plain == fingerprint("{colour: green, length_mm: '4000', seats: all}\n"));
    assert_true(plain == fingerprint("length_mm: 4000\nspeeds_rpm: [60, 120, 180]\n"));
    assert_true(plain == fingerprint("length_mm: 4000\ntread: {depth_mm: 7}\nwheels: []\n"));
    // another value each
    static const char *const others[] = {
        "length_mm: 4000.0000001\n",
        "length_mm: 4000\nwidth_mm: 0\n",
        "length_mm: 4000\nangle_deg: 90\n",
        "length_mm: 4000\npressure_kpa: [[0, 100], [1001, 150]]\n",
        "length_mm: 4000\npressure_kpa: [[0, 100], [1000, 151]]\n",
        "length_mm: 4000\ndoors: 5\n",
        "length_mm: 4000\ncolour: red\n",
        "length_mm: 4000\ntitle: x\n",
        "length_mm: 4000\nspeeds_rpm: [60, 120]\n",
        "length_mm: 4000\nseats: 1\n",
        "length_mm: 4000\noptions: radio\n",
        "length_mm: 4000\noptions: [radioheater]\n",
        "length_mm: 4000\ntread: a\n",
        "length_mm: 4000\nwheels: [a]\n",
        "length_mm: 4000\nwheels: [b]\n",
        "length_mm: 4000\nwheels: [{name: a, weight_g: 1}]\n",
    };
    size_t n = sizeof others / sizeof *others;
    uint64_t seen[sizeof others / sizeof *others];
    for (size_t i = 0; i < n; i++) {
        seen[i] = fingerprint(others[i]);
        assert_true(seen[i] != plain);
        for (size_t j = 0; j < i; j++)
            assert_true(seen[i] != seen[j]);
    }
    // FNV-1a test vectors of its authors (Fowler, Noll, Vo), from memory
    assert_true(fnv_bytes(FNV_START, "", 0) == 0xcbf29ce484222325u);
    assert_true(fnv_bytes(FNV_START, "a", 1) == 0xaf63dc4c8601ec8cu);
    assert_true(fnv_bytes(FNV_START, "foobar", 6) == 0x85944171f73967e8u);
}

typedef struct {
    char text[2000];
} collected;

static void collect(void *who, const walk_value *v)
{
    collected *c = who;
    char value[80];
    size_t used = strlen(c->text);
    value_text(v->field, v->owner, value, sizeof value);
    snprintf(c->text + used, sizeof c->text - used, "%s=%s%s\n", v->path, value,
             v->node ? " (read)" : "");
}

static void test_values_read_as_written(void **state)
{
    (void)state;
    reading r = read_good("length_mm: 4000\n"
                          "width_mm: 1700.1\n"
                          "speeds_rpm: 900:1900:25\n"
                          "tread: [x]\n"
                          "wheels: [{name: a, weight_g: 123.4}]\n");
    collected c = {""};
    walk_section(&car_section, r.tree->root, &r.car, collect, &c);
    assert_string_equal(c.text, "length_mm=4000 (read)\n"
                                "width_mm=1700.1 (read)\n"
                                "angle_deg=-90\n"
                                "pressure_kpa=[[0, 100], [1000, 150]]\n"
                                "doors=4\n"
                                "colour=green\n"
                                "title=\n"
                                "speeds_rpm=900:1900:25 (read)\n"
                                "seats=all\n"
                                "options=[radio, heater]\n"
                                "tread.marks=[x] (read)\n"
                                "tread.depth_mm=7\n"
                                "wheels=1 (read)\n"
                                "wheels[0].name=a (read)\n"
                                "wheels[0].weight_g=123.4 (read)\n");
    char little[12];
    value_text(&car_fields[3], &r.car, little, sizeof little);
    assert_string_equal(little, "[[0, 100 .."); // cut, not overrun
    end(&r);
}

static void test_places_of_paths(void **state)
{
    (void)state;
    reading r = read_good("length_mm: 4000\n"
                          "tread: [x, y]\n"
                          "wheels:\n"
                          "  - name: a\n"
                          "    weight_g: 5\n"
                          "  - b\n");
    static const struct {
        const char *path;
        int line, column;
        bool whole;
    } known[] = {
        {"", 1, 1, true},
        {"length_mm", 1, 12, true},
        {"colour", 1, 1, false},
        {"tread", 2, 8, true},
        {"tread.marks[1]", 2, 12, true},
        {"tread.marks[2]", 2, 8, false},
        {"wheels", 3, 1, true},
        {"wheels[0]", 4, 5, true},
        {"wheels[0].weight_g", 5, 15, true},
        {"wheels[0].colour", 4, 5, false},
        {"wheels[1].name", 6, 5, true},
        {"wheels[7].name", 3, 1, false},
    };
    for (size_t i = 0; i < sizeof known / sizeof *known; i++) {
        bool whole;
        const tree_node *node;
        place at = place_of_path(r.tree, known[i].path, &whole, &node);
        if (at.line != known[i].line || at.column != known[i].column || whole != known[i].whole)
            fail_msg("%s: %d:%d", known[i].path, at.line, at.column);
    }
    end(&r);
}

static void test_comma_locale(void **state)
{
    (void)state;
    if (!comma_begin()) skip();
    reading r = read_good("length_mm: 4000.5\npressure_kpa: 1.5\n");
    assert_near(r.car.length_m, 4.0005, 0, 1e-15);
    end(&r);
    r = read_car("length_mm: 0.5\nwidth_mm: 1,5\n");
    assert_string_equal(tacet_problems_at(r.problems, 0)->text,
                        "length_mm is 0.5 mm; allowed are 1000 to 9000 mm");
    assert_string_equal(tacet_problems_at(r.problems, 1)->text,
                        "width_mm is '1,5'; numbers take a decimal point: 1.5");
    end(&r);
    comma_end();
}

// 100,000 unknown keys: all counted, and quickly.
static void test_many_unknown_keys(void **state)
{
    (void)state;
    enum { N = 100000 };
    static char text[N * 16];
    char *at = text;
    for (int i = 0; i < N; i++)
        at += sprintf(at, "key%d: 1\n", i);
    reading r = read_car(text);
    assert_int_equal(tacet_problems_errors(r.problems), N + 1); // length_mm is missing
    assert_int_equal(tacet_problems_kept(r.problems), 20);
    end(&r);
}

// A text of n copies of `item` behind the rest of a car.
static char *repeated(const char *key, const char *item, size_t n)
{
    char *text = malloc(64 + n * (strlen(item) + 2)), *at = text;
    at += sprintf(at, "length_mm: 4000\n%s: [", key);
    for (size_t i = 0; i < n; i++)
        at += sprintf(at, "%s%s", i ? ", " : "", item);
    strcpy(at, "]\n");
    return text;
}

static void refuse_long(const char *key, const char *item, size_t n, const char *part)
{
    char *text = repeated(key, item, n);
    reading r = read_car(text);
    assert_int_equal(tacet_problems_errors(r.problems), 1);
    if (!strstr(tacet_problems_at(r.problems, 0)->text, part))
        fail_msg("%s", tacet_problems_at(r.problems, 0)->text);
    end(&r);
    free(text);
}

static void test_long_lists(void **state)
{
    (void)state;
    refuse_long("speeds_rpm", "1:50001:1", 2, "speeds_rpm is a list of more than 100000 values");
    refuse_long("pressure_kpa", "[1, 2]", FILL_MOST_THINGS + 1,
                "pressure_kpa is a curve of 10001 points; 1 to 10000 are allowed");
    refuse_long("wheels", "{}", FILL_MOST_THINGS + 1,
                "wheels is a list of 10001 items; at most 10000 are allowed");
    char *text = repeated("speeds_rpm", "1:50000:1", 2);
    reading r = read_good(text);
    assert_int_equal(r.car.n_speeds, FILL_MOST_VALUES);
    end(&r);
    free(text);
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_long_lists),
    cmocka_unit_test(test_defaults),
    cmocka_unit_test(test_every_kind),
    cmocka_unit_test(test_shorter_ways),
    cmocka_unit_test(test_faults_in_one_go),
    cmocka_unit_test(test_fingerprint_is_of_values),
    cmocka_unit_test(test_values_read_as_written),
    cmocka_unit_test(test_places_of_paths),
    cmocka_unit_test(test_comma_locale),
    cmocka_unit_test(test_many_unknown_keys),
};
TEST_MAIN(tests)
