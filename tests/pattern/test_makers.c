// Makers but books: even words, sigma-delta modulators, fixed sets, necklaces.
#include "near.h"
#include "pattern/sigma_delta.h"
#include "tacet/pattern.h"
#include <math.h>
#include <stdlib.h>
#include <string.h>

static tacet_arena *arena;

static int set_up(void **state)
{
    (void)state;
    arena = tacet_arena_create();
    return arena ? 0 : -1;
}

static int tear_down(void **state)
{
    (void)state;
    tacet_arena_destroy(arena);
    return 0;
}

static tacet_words made(const char *maker, const tacet_maker_def *d)
{
    tacet_words w;
    tacet_error e;
    const tacet_maker *m = tacet_maker_find(maker);
    assert_non_null(m);
    assert_int_equal(m->make(d, arena, &w, &e), TACET_OK);
    return w;
}

static void refused(const char *maker, const tacet_maker_def *d, const char *part)
{
    tacet_words w;
    tacet_error e = {0};
    assert_int_equal(tacet_maker_find(maker)->make(d, arena, &w, &e), TACET_BAD_INPUT);
    assert_non_null(strstr(e.text, part));
}

static void assert_word(const tacet_pattern *p, const char *expected)
{
    char text[TACET_PATTERN_LONGEST + 1];
    assert_string_equal(tacet_pattern_format(p, text), expected);
}

static tacet_maker_def density(unsigned fires, unsigned length)
{
    tacet_maker_def d = tacet_maker_default();
    d.fires = fires;
    d.length = length;
    d.density = (double)fires / length;
    return d;
}

static unsigned gcd(unsigned a, unsigned b)
{
    return b ? gcd(b, a % b) : a;
}

static void test_list(void **state)
{
    (void)state;
    static const char *const names[] = {"even",      "sigma-delta-1", "sigma-delta-2",
                                        "cylinders", "necklaces",     "book"};
    const tacet_maker *const *m = tacet_makers();
    for (size_t i = 0; i < 6; i++)
        assert_string_equal(m[i]->name, names[i]);
    assert_null(m[6]);
    assert_null(tacet_maker_find("odd"));
}

// K5: b_n = floor((n+1)p/q) - floor(np/q), words as listed there.
static void test_even_k5(void **state)
{
    (void)state;
    static const struct {
        unsigned p, q;
        const char *word;
    } cases[] = {{2, 3, ".xx"},
                 {3, 5, ".x.xx"},
                 {3, 8, "..x..x.x"},
                 {5, 8, ".x.xx.xx"},
                 {7, 9, ".xxx.xxxx"},
                 {3, 7, "..x.x.x"},
                 {1, 1, "x"},
                 {0, 3, "..."},
                 {64, 64,
                  "xxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxx"
                  "xxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxx"}};
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        tacet_maker_def d = density(cases[i].p, cases[i].q);
        tacet_words w = made("even", &d);
        assert_int_equal(w.n, 1);
        assert_word(w.pattern, cases[i].word);
        assert_null(w.name[0]);
    }
}

// K6 (from memory, checked there by counting): gaps of an even word are only floor and ceil of q/p,
// and any two windows of one width differ by at most one fire.
static void test_even_is_balanced_k6(void **state)
{
    (void)state;
    for (unsigned q = 2; q <= 16; q++)
        for (unsigned p = 1; p < q; p++) {
            tacet_maker_def d = density(p, q);
            const tacet_pattern *w = made("even", &d).pattern;
            assert_int_equal(tacet_pattern_fires(w), p);
            for (unsigned width = 1; width < q; width++) {
                unsigned least = q, most = 0;
                for (unsigned at = 0; at < q; at++) {
                    unsigned n = 0;
                    for (unsigned i = 0; i < width; i++)
                        n += w->tenths[(at + i) % q] ? 1 : 0;
                    if (n < least) least = n;
                    if (n > most) most = n;
                }
                assert_true(most - least <= 1);
            }
        }
}

// 3/8: one gap 2, two gaps 3; 7/9: five gaps 1, two gaps 2 (K6).
static void test_even_gaps_k6(void **state)
{
    (void)state;
    static const unsigned cases[][2] = {{3, 8}, {7, 9}};
    static const unsigned expected[][4] = {{0, 0, 1, 2}, {0, 5, 2, 0}};
    for (size_t i = 0; i < 2; i++) {
        tacet_maker_def d = density(cases[i][0], cases[i][1]);
        const tacet_pattern *w = made("even", &d).pattern;
        unsigned gaps[4] = {0}, gap = 0;
        for (unsigned j = 0; j < w->length; j++) { // the word ends with a fire
            gap++;
            if (!w->tenths[j]) continue;
            gaps[gap]++;
            gap = 0;
        }
        assert_memory_equal(gaps, expected[i], sizeof gaps);
    }
}

// The word of L - k fires is the word of k reversed with fires and skips exchanged (K5's formula:
// floor((q - n) p / q) = p - ceil(n p / q)).
static void test_even_complement(void **state)
{
    (void)state;
    tacet_maker_def d = density(4, 11), c = density(7, 11);
    const tacet_pattern *a = made("even", &d).pattern, *b = made("even", &c).pattern;
    for (unsigned i = 1; i < 10; i++) // the ends keep skip first, fire last
        assert_int_equal(a->tenths[i], 10 - b->tenths[i]);
    for (unsigned i = 0; i < 11; i++)
        assert_int_equal(a->tenths[i], 10 - b->tenths[10 - i]);
}

static void test_even_refused(void **state)
{
    (void)state;
    tacet_maker_def d = density(8, 7);
    refused("even", &d, "8 fires in 7");
    d = density(1, 65);
    refused("even", &d, "65 letters");
    d.length = 0;
    refused("even", &d, "0 letters");
}

// K5: the even word equals an accumulator that fires when acc + p >= q, start 0.
static void test_sigma_delta_1_is_even(void **state)
{
    (void)state;
    for (unsigned q = 1; q <= 64; q++)
        for (unsigned p = 0; p <= q; p++) {
            tacet_maker_def d = density(p, q);
            assert_true(
                tacet_pattern_equal(made("even", &d).pattern, made("sigma-delta-1", &d).pattern));
        }
}

// K8: accumulator error over a period has variance (1 - 1/q^2)/12; q = 8: rms 0.286411.
static void test_accumulator_error_k8(void **state)
{
    (void)state;
    sigma_delta m = {.order = 1, .density = 3. / 8};
    double sum = 0, squares = 0;
    for (int i = 0; i < 8; i++) {
        (void)sigma_delta_step(&m);
        sum += m.error;
        squares += m.error * m.error;
    }
    assert_near(sqrt(squares / 8 - sum * sum / 64), 0.286411, 5e-7, 0);
}

static int by_value(const void *a, const void *b)
{
    double x = *(const double *)a, y = *(const double *)b;
    return (x > y) - (x < y);
}

// K9, three-gap theorem (from memory, recomputed there): errors of an irrational density a are the
// points {i a}; their gaps on the circle take at most three lengths.
static void test_three_gaps_k9(void **state)
{
    (void)state;
    const double golden = (sqrt(5) - 1) / 2, root = sqrt(2) - 1;
    const struct {
        double a;
        size_t n, kinds;
        double gap[3];
    } cases[] = {{golden, 5, 2, {.145898, .236068}},
                 {golden, 7, 3, {.090170, .145898, .236068}},
                 {golden, 8, 2, {.090170, .145898}},
                 {root, 10, 3, {.071068, .100505, .171573}}};
    for (size_t c = 0; c < 4; c++) {
        sigma_delta m = {.order = 1, .density = cases[c].a};
        double at[11] = {0};
        for (size_t i = 1; i < cases[c].n; i++) {
            (void)sigma_delta_step(&m);
            at[i] = m.error;
        }
        qsort(at, cases[c].n, sizeof *at, by_value);
        at[cases[c].n] = 1;
        unsigned seen[3] = {0};
        for (size_t i = 0; i < cases[c].n; i++) {
            size_t k = 0;
            while (k < cases[c].kinds && fabs(at[i + 1] - at[i] - cases[c].gap[k]) > 1e-6)
                k++;
            assert_true(k < cases[c].kinds);
            seen[k]++;
        }
        for (size_t k = 0; k < cases[c].kinds; k++)
            assert_true(seen[k] > 0);
    }
}

// Second order by hand from v = u + 2 e1 - e2, fires at v >= 1/2, u = 3/4:
// v .75 x e -.25 | .25 . .25 | 1.5 x .5 | 1.5 x .5 | 1.25 x .25 | .75 x -.25 | 0 . 0 | 1 x 0 |
// .75 x -.25 | .. repeats
static void test_sigma_delta_2_by_hand(void **state)
{
    (void)state;
    tacet_maker_def d = density(3, 4);
    d.length = 16;
    assert_word(made("sigma-delta-2", &d).pattern, "x.xxxx.xx.xxxx.x");
    d.density = 0;
    d.length = 5;
    assert_word(made("sigma-delta-2", &d).pattern, ".....");
    d.density = 1;
    assert_word(made("sigma-delta-2", &d).pattern, "xxxxx");
}

// What the error feedback means: the running sum of (u - y) of the first order and the double
// running sum of the second stay bounded. Bounds: 1, and (5 - |s|)^2 / (8 (1 - |s|)) / 2 with
// s = 2 u - 1 on a scale of -1..1 (Hein, Ibraham & Zakhor 1992, from memory).
static void test_sigma_delta_sums_bounded(void **state)
{
    (void)state;
    static const double densities[] = {0.1, 0.237, 0.38196601125, 0.5, 0.71, 0.9};
    for (size_t i = 0; i < 6; i++) {
        double u = densities[i], s = fabs(2 * u - 1);
        double bound = (5 - s) * (5 - s) / (16 * (1 - s));
        sigma_delta one = {.order = 1, .density = u}, two = {.order = 2, .density = u};
        double sum = 0, sum2 = 0, double_sum = 0;
        for (int n = 0; n < 20000; n++) {
            sum += u - (sigma_delta_step(&one) ? 1 : 0);
            sum2 += u - (sigma_delta_step(&two) ? 1 : 0);
            double_sum += sum2;
            assert_true(sum > -1e-9 && sum < 1);
            assert_true(fabs(double_sum) <= bound);
        }
    }
}

// Mean square of the lines 1..n/64 of `n` fires of a dithered modulator of the golden density,
// less the density, through a Hann window (mean square 3/8), without which the ends of the stretch
// leak more than the second order leaves.
// error_ms: mean square of the quantisation error about its mean.
static double low_noise(int order, size_t n, double *error_ms)
{
    sigma_delta m = {.order = order, .density = (sqrt(5) - 1) / 2, .dither = 1, .seed = 7};
    double *y = calloc(n, sizeof *y), power = 0, mean = 0, square = 0;
    assert_non_null(y);
    for (size_t i = 0; i < n; i++) {
        y[i] = ((sigma_delta_step(&m) ? 1 : 0) - m.density) * (1 - cos(8 * atan(1) * i / n)) / 2;
        mean += m.error / (double)n;
        square += m.error * m.error / (double)n;
    }
    *error_ms = square - mean * mean;
    for (size_t h = 1; h <= n / 64; h++) {
        double re = 0, im = 0;
        for (size_t i = 0; i < n; i++) {
            double angle = 8 * atan(1) * (double)(h * i % n) / (double)n;
            re += y[i] * cos(angle);
            im += y[i] * sin(angle);
        }
        power += 2 * (re * re + im * im) / ((double)n * (double)n) / 0.375;
    }
    free(y);
    return power;
}

// Noise inside 1/32 of the half rate (oversampling R = 32): pi^2/3 R^-3 and pi^4/5 R^-5 times the
// error's variance, were it white (Candy & Temes 1992, from memory): within a factor of 4. The
// wrong order is off by a factor of 170.
static void test_sigma_delta_shapes_noise(void **state)
{
    (void)state;
    const double pi = 4 * atan(1);
    double variance;
    double one = low_noise(1, 4096, &variance);
    double expected = variance * pi * pi / 3 * pow(32, -3);
    assert_true(one < 4 * expected && one > expected / 4);
    double two = low_noise(2, 4096, &variance);
    expected = variance * pow(pi, 4) / 5 * pow(32, -5);
    assert_true(two < 4 * expected && two > expected / 4);
}

// First words of SplitMix64 from seed 1234567 (the widely printed check values, from memory,
// recomputed in integer arithmetic apart from this program).
static void test_dither_words(void **state)
{
    (void)state;
    static const uint64_t expected[] = {
        UINT64_C(6457827717110365317), UINT64_C(3203168211198807973), UINT64_C(9817491932198370423),
        UINT64_C(4593380528125082431), UINT64_C(16408922859458223821)};
    for (uint64_t i = 0; i < 5; i++)
        assert_true(dither_word(1234567, i) == expected[i]);
}

static void test_dither_changes_the_word(void **state)
{
    (void)state;
    tacet_maker_def d = density(3, 7);
    d.length = 64;
    tacet_pattern bare = *made("sigma-delta-1", &d).pattern;
    d.dither = 0.5;
    d.seed = 1;
    tacet_pattern one = *made("sigma-delta-1", &d).pattern;
    tacet_pattern again = *made("sigma-delta-1", &d).pattern;
    d.seed = 2;
    tacet_pattern two = *made("sigma-delta-1", &d).pattern;
    assert_false(tacet_pattern_equal(&bare, &one));
    assert_false(tacet_pattern_equal(&one, &two));
    assert_true(tacet_pattern_equal(&one, &again));
    // dither decides when, not how often: 64 * 3/7 = 27.4
    assert_in_range(tacet_pattern_fires(&one), 26, 29);
}

static void test_sigma_delta_refused(void **state)
{
    (void)state;
    tacet_maker_def d = density(1, 2);
    d.density = NAN;
    refused("sigma-delta-1", &d, "density nan");
    d.density = 1.01;
    refused("sigma-delta-2", &d, "density 1.01");
    d.density = 0.5;
    d.dither = -1;
    refused("sigma-delta-2", &d, "dither -1");
    d.dither = 0;
    d.length = 65;
    refused("sigma-delta-1", &d, "65 letters");
}

static void test_cylinders(void **state)
{
    (void)state;
    static const unsigned set[] = {4, 0, 2}, twice[] = {1, 1}, outside[] = {6};
    tacet_maker_def d = tacet_maker_default();
    d.engine_cylinders = 6;
    d.cylinders = set;
    d.n_cylinders = 3;
    assert_word(made("cylinders", &d).pattern, "x.x.x.");
    d.cylinders = twice;
    d.n_cylinders = 2;
    refused("cylinders", &d, "position 1 twice");
    d.cylinders = outside;
    d.n_cylinders = 1;
    refused("cylinders", &d, "position 6 of the firing sequence");
    d.engine_cylinders = 0;
    refused("cylinders", &d, "0 letters");
}

// K1 (OEIS A047996): necklaces of n beads with k ones, k = 0..n. K4: primitive ones (Moebius sum).
static void test_necklace_counts_k1_k4(void **state)
{
    (void)state;
    static const struct {
        unsigned n;
        bool primitive;
        unsigned count[11];
    } cases[] = {{4, false, {1, 1, 2, 1, 1}},
                 {6, false, {1, 1, 3, 4, 3, 1, 1}},
                 {8, false, {1, 1, 4, 7, 10, 7, 4, 1, 1}},
                 {9, false, {1, 1, 4, 10, 14, 14, 10, 4, 1, 1}},
                 {10, false, {1, 1, 5, 12, 22, 26, 22, 12, 5, 1, 1}},
                 {6, true, {0, 1, 2, 3, 2, 1, 0}},
                 {8, true, {0, 1, 3, 7, 8, 7, 3, 1, 0}},
                 {10, true, {0, 1, 4, 12, 20, 25, 20, 12, 4, 1, 0}}};
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++)
        for (unsigned k = 0; k <= cases[i].n; k++) {
            tacet_maker_def d = density(k, cases[i].n);
            d.primitive = cases[i].primitive;
            assert_int_equal(made("necklaces", &d).n, cases[i].count[k]);
        }
    tacet_maker_def d = density(8, 16);
    assert_int_equal(made("necklaces", &d).n, 810);
}

// K2 (A000031) all binary necklaces, K3 (A001037) primitive ones, n = 1..12 (from memory,
// recomputed there).
static void test_necklace_totals_k2_k3(void **state)
{
    (void)state;
    static const unsigned all[] = {2, 3, 4, 6, 8, 14, 20, 36, 60, 108, 188, 352},
                          primitive[] = {2, 1, 2, 3, 6, 9, 18, 30, 56, 99, 186, 335};
    for (unsigned n = 1; n <= 12; n++) {
        unsigned total[2] = {0, 0};
        for (unsigned k = 0; k <= n; k++)
            for (int i = 0; i < 2; i++) {
                tacet_maker_def d = density(k, n);
                d.primitive = i == 1;
                total[i] += (unsigned)made("necklaces", &d).n;
            }
        assert_int_equal(total[0], all[n - 1]);
        assert_int_equal(total[1], primitive[n - 1]);
    }
}

static unsigned bits_of(const tacet_pattern *p)
{
    unsigned bits = 0;
    for (unsigned i = 0; i < p->length; i++)
        bits = bits << 1 | (p->tenths[i] ? 1 : 0);
    return bits;
}

// Against a search over every word of 11 letters with 5 fires: those that no rotation precedes.
static void test_necklaces_against_all_words(void **state)
{
    (void)state;
    const unsigned n = 11, k = 5;
    tacet_maker_def d = density(k, n);
    tacet_words w = made("necklaces", &d);
    size_t found = 0;
    for (unsigned bits = 0; bits < 1u << n; bits++) {
        if ((unsigned)__builtin_popcount(bits) != k) continue;
        bool least = true;
        for (unsigned r = 1, turned = bits; r < n && least; r++) {
            turned = (turned << 1 | turned >> (n - 1)) & ((1u << n) - 1);
            least = turned >= bits;
        }
        if (!least) continue;
        assert_true(found < w.n);
        assert_int_equal(bits_of(&w.pattern[found++]), bits);
    }
    assert_int_equal(found, w.n);
}

static void test_necklaces_longest_run(void **state)
{
    (void)state;
    tacet_maker_def d = density(4, 12);
    tacet_words any = made("necklaces", &d);
    d.longest_run = 3;
    tacet_words some = made("necklaces", &d);
    size_t allowed = 0;
    for (size_t i = 0; i < any.n; i++) {
        tacet_roll *r;
        assert_int_equal(tacet_roll_create(&any.pattern[i], 1, 4, &r, NULL), TACET_OK);
        if (r->longest_gap <= 3) {
            assert_true(allowed < some.n);
            assert_true(tacet_pattern_equal(&any.pattern[i], &some.pattern[allowed]));
            allowed++;
        }
        tacet_roll_destroy(r);
    }
    assert_true(allowed > 0 && allowed < any.n);
    assert_int_equal(allowed, some.n);
}

// The even word is among its necklaces: it is the first of its rotations.
static void test_even_is_a_necklace(void **state)
{
    (void)state;
    for (unsigned q = 1; q <= 12; q++)
        for (unsigned p = 1; p <= q; p++) {
            if (gcd(p, q) != 1) continue;
            tacet_maker_def d = density(p, q);
            const tacet_pattern *even = made("even", &d).pattern;
            tacet_words w = made("necklaces", &d);
            unsigned found = 0;
            for (size_t i = 0; i < w.n; i++)
                found += tacet_pattern_equal(even, &w.pattern[i]);
            assert_int_equal(found, 1);
        }
}

static void test_necklaces_limits(void **state)
{
    (void)state;
    tacet_maker_def d = density(2, 64); // 64 2-sets: 63 distances, d and 64 - d alike: 32
    assert_int_equal(made("necklaces", &d).n, 32);
    d.fires = 63;
    assert_int_equal(made("necklaces", &d).n, 1);
    d.fires = 0;
    assert_int_equal(made("necklaces", &d).n, 1);
    d.fires = 32;
    refused("necklaces", &d, "more than 100000 necklaces of 32 fires in 64");
    d.fires = 65;
    refused("necklaces", &d, "65 fires in 64");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_list),
        cmocka_unit_test(test_even_k5),
        cmocka_unit_test(test_even_is_balanced_k6),
        cmocka_unit_test(test_even_gaps_k6),
        cmocka_unit_test(test_even_complement),
        cmocka_unit_test(test_even_refused),
        cmocka_unit_test(test_sigma_delta_1_is_even),
        cmocka_unit_test(test_accumulator_error_k8),
        cmocka_unit_test(test_three_gaps_k9),
        cmocka_unit_test(test_sigma_delta_2_by_hand),
        cmocka_unit_test(test_sigma_delta_sums_bounded),
        cmocka_unit_test(test_sigma_delta_shapes_noise),
        cmocka_unit_test(test_dither_words),
        cmocka_unit_test(test_dither_changes_the_word),
        cmocka_unit_test(test_sigma_delta_refused),
        cmocka_unit_test(test_cylinders),
        cmocka_unit_test(test_necklace_counts_k1_k4),
        cmocka_unit_test(test_necklace_totals_k2_k3),
        cmocka_unit_test(test_necklaces_against_all_words),
        cmocka_unit_test(test_necklaces_longest_run),
        cmocka_unit_test(test_even_is_a_necklace),
        cmocka_unit_test(test_necklaces_limits),
    };
    return cmocka_run_group_tests(tests, set_up, tear_down);
}
