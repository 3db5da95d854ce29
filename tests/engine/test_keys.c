// Field tables of the sections engine, cycle, skip, and the check of a definition.
#include "demo.h"
#include "near.h"
#include <math.h>
#include <string.h>

// Every default of the tables is the default of the C interface; every unit is known; every doc is
// written; a curve has its default inside the engine (tested there), so n = 0 here.
static void compare_defaults(const tacet_section *s, const char *base, unsigned *numbers)
{
    for (const tacet_field *f = s->fields; f->key; f++) {
        const char *member = base + f->offset;
        assert_true(f->doc && *f->doc);
        assert_true(tacet_unit_factor(f->unit) > 0);
        if (f->x_unit) assert_true(tacet_unit_factor(f->x_unit) > 0);
        if (f->kind == TACET_FIELD_SECTION) compare_defaults(f->section, member, numbers);
        if (!f->fallback) continue;
        double value;
        switch (f->kind) {
        case TACET_FIELD_NUMBER:
            if (!*f->fallback) {
                assert_true(isnan(*(const double *)(const void *)member));
                break;
            }
            assert_true(tacet_number_parse(f->fallback, &value));
            assert_near(*(const double *)(const void *)member, value * tacet_unit_factor(f->unit),
                        0, 1e-15);
            assert_true(value >= f->low && value <= f->high);
            ++*numbers;
            break;
        case TACET_FIELD_COUNT:
            assert_true(tacet_number_parse(f->fallback, &value));
            assert_int_equal(*(const unsigned *)(const void *)member, (unsigned)value);
            break;
        case TACET_FIELD_CHOICE:
            assert_string_equal(f->choices[*(const int *)(const void *)member], f->fallback);
            break;
        default:
            break;
        }
    }
}

static void test_keys_defaults(void **state)
{
    (void)state;
    tacet_engine_def d = tacet_engine_default();
    unsigned numbers = 0;
    const tacet_section *all[] = {tacet_engine_keys(), tacet_cycle_keys(), tacet_skip_keys()};
    for (size_t i = 0; i < 3; i++) {
        assert_int_equal(all[i]->size, sizeof d);
        compare_defaults(all[i], (const char *)&d, &numbers);
    }
    assert_int_equal(numbers, 14);
}

// What a study must state: bore, stroke, rod, reciprocating mass, firing order; nothing else.
static void test_keys_required(void **state)
{
    (void)state;
    static const char *const required[] = {"bore_mm", "stroke_mm", "rod_length_mm",
                                           "reciprocating_mass_kg", "firing_order"};
    const tacet_section *all[] = {tacet_engine_keys(), tacet_cycle_keys(), tacet_skip_keys()};
    size_t found = 0;
    for (size_t i = 0; i < 3; i++)
        for (const tacet_field *f = all[i]->fields; f->key; f++)
            if (!f->fallback) assert_string_equal(f->key, required[found++]);
    assert_int_equal(found, 5);
}

typedef struct {
    unsigned errors, warnings;
    char first[640];
} heard;

static void say(void *who, bool warning, const char *path, const char *text)
{
    heard *h = who;
    if (h->errors + h->warnings == 0) tacet_text(h->first, sizeof h->first, "%s: %s", path, text);
    ++*(warning ? &h->warnings : &h->errors);
}

static heard check(const tacet_engine_def *d)
{
    heard h = {0};
    tacet_reporter r = {say, &h};
    tacet_engine_def_check(d, &r);
    return h;
}

static void test_check_demos(void **state)
{
    (void)state;
    tacet_engine_def six = demo_six(), v8 = demo_v8();
    heard h = check(&six);
    assert_string_equal(h.first, "");
    h = check(&v8);
    assert_string_equal(h.first, "");
}

static void expect(const tacet_engine_def *d, bool warning, const char *text)
{
    heard h = check(d);
    assert_int_equal(h.errors, !warning);
    assert_int_equal(h.warnings, warning);
    if (strncmp(h.first, text, strlen(text)) != 0) assert_string_equal(h.first, text);
}

static void test_check_firing(void **state)
{
    (void)state;
    tacet_engine_def d = demo_six();
    unsigned twice[] = {1, 5, 3, 6, 2, 2}, far[] = {1, 5, 3, 7, 2, 4};
    d.firing_order = twice;
    expect(&d, false, "engine.firing_order: 6 cylinders, and cylinder 4 is missing");
    d.firing_order = far;
    expect(&d, false, "engine.firing_order: 6 cylinders, and cylinder 6 is missing");
    d = demo_six();
    double uneven[] = {2, 2, 2, 2, 2, 4 * M_PI - 10}, wrong[] = {2, 2, 2, 2, 2, 2};
    d.firing_intervals_rad = uneven, d.n_intervals = 6;
    assert_int_equal(check(&d).errors, 0);
    d.firing_intervals_rad = wrong;
    expect(&d, false, "engine.firing_intervals_deg: intervals add up to 687.549 degrees");
    d.n_intervals = 5;
    expect(&d, false, "engine.firing_intervals_deg: 5 intervals; one for each of 6");
    d = demo_six();
    unsigned skip[] = {2, 9};
    d.skip.cylinders = skip, d.skip.n_cylinders = 2;
    expect(&d, false, "skip.cylinders: cylinder 9 is not in");
}

// The V8's banks the other way round, or turning the other way, put the two pins of a throw 90
// degrees apart; both together agree again.
static void test_check_pins(void **state)
{
    (void)state;
    tacet_engine_def d = demo_v8();
    d.rotation = 1;
    expect(&d, false, "engine.firing_order: cylinders 4 and 3 drive throw2");
    tacet_cylinder_def mirrored[8];
    for (size_t i = 0; i < 8; i++) {
        mirrored[i] = d.cylinders[i];
        mirrored[i].bank_rad = -mirrored[i].bank_rad;
    }
    d.cylinders = mirrored;
    assert_int_equal(check(&d).errors, 0);
    mirrored[3].number = 3;
    heard h = check(&d);
    assert_true(h.errors >= 1);
    assert_string_equal(h.first, "engine.cylinders[3].number: cylinder 3 stands twice");
}

static void test_check_geometry(void **state)
{
    (void)state;
    tacet_engine_def d = demo_six();
    d.rod_length_m = 0.06;
    expect(&d, false, "engine.rod_length_mm: a rod of 60 mm");
    d = demo_six();
    d.rod_length_m = 0.5;
    expect(&d, true, "engine.rod_length_mm: the rod is 7.69 crank radii");
    d = demo_six();
    d.reciprocating_mass_kg = 27;
    expect(&d, true, "engine.reciprocating_mass_kg: 27 kg");
    d = demo_six();
    d.strokes = 3;
    expect(&d, false, "engine.strokes: 3;");
}

static void test_check_cycle(void **state)
{
    (void)state;
    tacet_engine_def d = demo_six();
    d.cycle.kind = TACET_CYCLE_TRACES;
    d.cycle.fired_trace = "fired.csv";
    expect(&d, false, "cycle.traces.skipped: kind: traces needs");
    d.cycle.skipped_trace = "skipped.csv";
    d.strokes = 2;
    assert_int_equal(check(&d).errors, 0);
    d.cycle.kind = TACET_CYCLE_WIEBE;
    expect(&d, false, "cycle.kind: wiebe; 2-stroke engines need traces");
    d = demo_six();
    double rpm[] = {0}, late[] = {60 * DEG}, slow[] = {90 * DEG}, low[] = {150e3};
    d.cycle.mid_burn_rad = (tacet_curve){rpm, late, 1};
    d.cycle.burn_10_90_rad = (tacet_curve){rpm, slow, 1};
    expect(&d, false, // a plain number has no speed
           "cycle.burn_10_90_deg: the fuel would burn from -34.03 to 168.4 degrees after top; it");
    double two[] = {900, 1900}, later[] = {8 * DEG, 60 * DEG};
    d.cycle.mid_burn_rad = (tacet_curve){two, later, 2};
    expect(&d, false,
           "cycle.burn_10_90_deg: the fuel would burn from -34.03 to 168.4 degrees after top at "
           "1900 rpm; it");
    d = demo_six();
    d.cycle.lowest_Pa = (tacet_curve){rpm, low, 1};
    expect(&d, false,
           "cycle.manifold_kpa.lowest: 150 kPa at 800 rpm; it must lie below `highest`, 130 kPa "
           "there");
    d.cycle.highest_Pa = (tacet_curve){rpm, low, 1};
    expect(&d, false, "cycle.manifold_kpa.lowest: 150 kPa; it must lie below `highest`, 150 kPa");
    d = demo_six();
    double speeds[] = {900, 1900}, rich[] = {14.6, 10}; // 44 / 10 MJ
    d.cycle.air_fuel_ratio = (tacet_curve){speeds, rich, 2};
    expect(&d, true, "cycle.fuel.air_fuel_ratio: 10 at 1900 rpm, 4.4 MJ of fuel for each kg");
    double stoichiometric = 34.3, hydrogen = 120e6; // hydrogen, from memory: no warning
    d.cycle.air_fuel_ratio = (tacet_curve){rpm, &stoichiometric, 1};
    d.cycle.lower_heating_value_J_per_kg = hydrogen;
    assert_int_equal(check(&d).warnings, 0);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_keys_defaults), cmocka_unit_test(test_keys_required),
        cmocka_unit_test(test_check_demos),   cmocka_unit_test(test_check_firing),
        cmocka_unit_test(test_check_pins),    cmocka_unit_test(test_check_geometry),
        cmocka_unit_test(test_check_cycle),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
