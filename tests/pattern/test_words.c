// Words: reading, reducing, turning, placements, density, spectrum.
#include "near.h"
#include "tacet/pattern.h"
#include <math.h>
#include <string.h>

static tacet_pattern word(const char *text)
{
    tacet_pattern p;
    tacet_error e;
    assert_int_equal(tacet_pattern_parse(text, &p, &e), TACET_OK);
    return p;
}

static void assert_word(const tacet_pattern *p, const char *expected)
{
    char text[TACET_PATTERN_LONGEST + 1];
    assert_string_equal(tacet_pattern_format(p, text), expected);
}

static void test_parse_letters(void **state)
{
    (void)state;
    tacet_pattern p = word("x.19");
    assert_int_equal(p.length, 4);
    assert_int_equal(p.tenths[0], 10);
    assert_int_equal(p.tenths[1], 0);
    assert_int_equal(p.tenths[2], 1);
    assert_int_equal(p.tenths[3], 9);
    assert_word(&p, "x.19");
    assert_int_equal(tacet_pattern_fires(&p), 3);
}

static void refused(const char *text, int column, const char *part)
{
    tacet_pattern p = {.length = 7};
    tacet_error e = {0};
    assert_int_equal(tacet_pattern_parse(text, &p, &e), TACET_BAD_INPUT);
    assert_int_equal(e.column, column);
    assert_non_null(strstr(e.text, part));
    assert_int_equal(p.length, 7);
    assert_int_equal(tacet_pattern_parse(text, &p, NULL), TACET_BAD_INPUT);
}

static void test_parse_refused(void **state)
{
    (void)state;
    char longest[TACET_PATTERN_LONGEST + 2];
    memset(longest, 'x', sizeof longest - 1);
    longest[sizeof longest - 1] = '\0';
    refused("", 1, "empty");
    refused("x.0x", 3, "letter '0' at position 3");
    refused("X.", 1, "letter 'X'");
    refused("x. x", 3, "byte 0x20");
    refused("x\xc3\xa9", 2, "byte 0xc3");
    refused(longest, 65, "more than 64");
    longest[64] = '\0';
    tacet_pattern p = word(longest);
    assert_int_equal(p.length, 64);
    assert_word(&p, longest);
}

static void test_reduce(void **state)
{
    (void)state;
    static const char *const cases[][2] = {{"x.x.", "x."},      {"x.x", "x.x"}, {"xxxx", "x"},
                                           {"x..x..", "x.."},   {"...", "."},   {"x.5x.5", "x.5"},
                                           {"x.5x.4", "x.5x.4"}};
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        tacet_pattern p = word(cases[i][0]), expected = word(cases[i][1]);
        tacet_pattern_reduce(&p);
        assert_word(&p, cases[i][1]);
        assert_memory_equal(&p, &expected, sizeof p);
    }
}

static void test_rotate(void **state)
{
    (void)state;
    tacet_pattern p = word("x.35"), q;
    tacet_pattern_rotate(&p, 1, &q);
    assert_word(&q, ".35x");
    tacet_pattern_rotate(&p, 6, &q);
    assert_word(&q, "35x.");
    tacet_pattern_rotate(&q, 4294967294u, &q); // 2 modulo 4
    assert_word(&q, "x.35");
    tacet_pattern_rotate(&p, 0, &p);
    assert_word(&p, "x.35");
}

static void test_equal(void **state)
{
    (void)state;
    tacet_pattern a = word("x."), b = word(".x"), c = word("x.x."), d = word("x.");
    assert_true(tacet_pattern_equal(&a, &d));
    assert_false(tacet_pattern_equal(&a, &b));
    assert_false(tacet_pattern_equal(&a, &c));
}

// Closed form: gcd(L, n) of the reduced word. `x.` on a six loads cylinders 1, 3, 2 and `.x`
// cylinders 5, 6, 4: two placements.
static void test_placements(void **state)
{
    (void)state;
    static const struct {
        const char *word;
        unsigned cylinders, placements;
    } cases[] = {{"x.", 6, 2},       {".x", 6, 2},   {"x.x.", 6, 2},   {"..x.x.x", 6, 1},
                 {"x..", 6, 3},      {"x...", 6, 2}, {".xx.xx", 6, 3}, {"x.", 8, 2},
                 {"x...x..x", 8, 8}, {"x", 6, 1},    {"x.", 5, 1}};
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        tacet_pattern p = word(cases[i].word);
        assert_int_equal(tacet_pattern_placements(&p, cases[i].cylinders), cases[i].placements);
    }
}

static void test_density(void **state)
{
    (void)state;
    unsigned k = 9, l = 9;
    assert_true(tacet_density_parse("3/7", &k, &l));
    assert_int_equal(k, 3);
    assert_int_equal(l, 7);
    assert_true(tacet_density_parse("4/8", &k, &l));
    assert_int_equal(k, 1);
    assert_int_equal(l, 2);
    assert_true(tacet_density_parse("1", &k, &l));
    assert_int_equal(k * 10 + l, 11);
    assert_true(tacet_density_parse("0", &k, &l));
    assert_int_equal(k * 10 + l, 1);
    assert_true(tacet_density_parse("64/64", &k, &l));
    static const char *const bad[] = {
        "",     "2",    "8/7",  "3/",  "/7",  "3/7x", "1.5",  "-1/2",
        " 1/2", "1/2 ", "1/65", "3/0", "0/0", "1//2", "+1/2", "4294967297/4294967297"};
    for (size_t i = 0; i < sizeof bad / sizeof *bad; i++)
        assert_false(tacet_density_parse(bad[i], &k, &l));
}

// K7 (derived): even word of p in q, gcd 1, s = p^-1 mod q:
// |Y_m| = |sin(pi m/q) / sin(pi m s/q)|, Y_0 = p; values for 3/8, 3/5, 7/9 as listed there.
static void test_spectrum_k7(void **state)
{
    (void)state;
    static const struct {
        const char *word;
        double line[9];
    } cases[] = {{"..x..x.x", {3, .41421, 1, 2.41421, 1, 2.41421, 1, .41421}},
                 {".x.xx", {3, .61803, 1.61803, 1.61803, .61803}},
                 {".xxx.xxxx", {7, .3473, 1.87939, 1, 1.53209, 1.53209, 1, 1.87939, .3473}}};
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        tacet_pattern p = word(cases[i].word);
        double complex line[TACET_PATTERN_LONGEST];
        tacet_pattern_spectrum(&p, line);
        for (unsigned m = 0; m < p.length; m++)
            assert_near(cabs(line[m]), cases[i].line[m], 6e-6, 0);
    }
}

// Sign of the phase: one fire at letter 1 of 4 is exp(-2 pi i m / 4) = 1, -i, -1, i (shift
// theorem).
static void test_spectrum_phase(void **state)
{
    (void)state;
    tacet_pattern p = word(".5..");
    double complex line[4];
    tacet_pattern_spectrum(&p, line);
    static const double re[] = {.5, 0, -.5, 0}, im[] = {0, -.5, 0, .5};
    for (int m = 0; m < 4; m++) {
        assert_near(creal(line[m]), re[m], 1e-15, 0);
        assert_near(cimag(line[m]), im[m], 1e-15, 0);
    }
}

static double pulse_content(double order)
{
    if (fabs(order - 1) < 1e-9) return acos(0); // pi/2
    return 2 * fabs(cos(order * acos(0))) / fabs(1 - order * order);
}

// K10, K11 (our own benchmark, recomputed two ways there): half-sine pulse of unit height over 180
// degrees per fire; amplitude at order q = k n/(2L) is (2 n / (4 pi L)) |P_k| S(q); order 0 half.
static void test_pulse_orders_k11(void **state)
{
    (void)state;
    static const struct {
        const char *word;
        unsigned cylinders, k;
        double order, amplitude;
    } cases[] = {{"x", 4, 0, 0, .636620},         {"x", 4, 1, 2, .424413},
                 {"x", 4, 2, 4, .084883},         {"x", 4, 3, 6, .036378},
                 {"x.", 4, 0, 0, .318310},        {"x.", 4, 1, 1, .5},
                 {"x.", 4, 2, 2, .212207},        {"x.", 4, 3, 3, 0},
                 {"x.", 4, 4, 4, .042441},        {"xx.", 4, 0, 0, .424413},
                 {"xx.", 4, 1, 2. / 3, .381972},  {"xx.", 4, 2, 4. / 3, .272837},
                 {"xx.", 4, 3, 2, .282942},       {"xx.", 4, 4, 8. / 3, .034725},
                 {"xx.", 4, 5, 10. / 3, .020987}, {"xx.", 4, 6, 4, .056588},
                 {"x..", 4, 0, 0, .212207},       {"x..", 4, 1, 2. / 3, .381972},
                 {"x..", 4, 2, 4. / 3, .272837},  {"x..", 4, 3, 2, .141471},
                 {"xxx.", 8, 0, 0, .954930},      {"xxx.", 8, 1, 1, .5},
                 {"xxx.", 8, 2, 2, .212207},      {"xxx.", 8, 3, 3, 0},
                 {"xxx.", 8, 4, 4, .127324},      {"xxx.", 8, 6, 6, .018189},
                 {"xxx.", 8, 8, 8, .030315}};
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        tacet_pattern p = word(cases[i].word);
        double complex line[TACET_PATTERN_LONGEST];
        tacet_pattern_spectrum(&p, line);
        double order = (double)cases[i].k * cases[i].cylinders / (2. * p.length);
        assert_near(order, cases[i].order, 1e-12, 0);
        double scale = (cases[i].k ? 2. : 1.) * cases[i].cylinders / (4 * 2 * acos(0) * p.length);
        assert_near(scale * cabs(line[cases[i].k % p.length]) * pulse_content(order),
                    cases[i].amplitude, 2e-6, 0);
    }
}

// K12: a pattern and its complement have the same lines but for order 0 of the word's spectrum.
static void test_complement_k12(void **state)
{
    (void)state;
    static const char *const words[][2] = {{"xx.", "..x"}, {"x.xx..x", ".x..xx."}};
    for (size_t i = 0; i < 2; i++) {
        tacet_pattern a = word(words[i][0]), b = word(words[i][1]);
        double complex la[TACET_PATTERN_LONGEST], lb[TACET_PATTERN_LONGEST];
        tacet_pattern_spectrum(&a, la);
        tacet_pattern_spectrum(&b, lb);
        assert_near(creal(la[0] + lb[0]), a.length, 1e-12, 0);
        for (unsigned m = 1; m < a.length; m++) {
            assert_true(cabs(la[m]) > 0.1);
            assert_near(cabs(la[m] + lb[m]), 0, 1e-12, 0);
        }
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_parse_letters),  cmocka_unit_test(test_parse_refused),
        cmocka_unit_test(test_reduce),         cmocka_unit_test(test_rotate),
        cmocka_unit_test(test_equal),          cmocka_unit_test(test_placements),
        cmocka_unit_test(test_density),        cmocka_unit_test(test_spectrum_k7),
        cmocka_unit_test(test_spectrum_phase), cmocka_unit_test(test_pulse_orders_k11),
        cmocka_unit_test(test_complement_k12),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
