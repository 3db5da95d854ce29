// Words against counting formulas, closed forms of their spectra, and FFTW.
#include "near.h"
#include "tacet/pattern.h"
#include <fftw3.h>
#include <math.h>

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

static unsigned gcd(unsigned a, unsigned b)
{
    return b ? gcd(b, a % b) : a;
}

static double choose(unsigned n, unsigned k)
{
    double c = 1;
    if (k > n) return 0;
    for (unsigned i = 1; i <= k; i++)
        c = c * (n - k + i) / i;
    return round(c);
}

static unsigned totient(unsigned n)
{
    unsigned sum = 0;
    for (unsigned i = 1; i <= n; i++)
        sum += gcd(i, n) == 1;
    return sum;
}

static int moebius(unsigned n)
{
    int sign = 1;
    for (unsigned p = 2; p <= n; p++) {
        if (n % p) continue;
        n /= p;
        if (n % p == 0) return 0;
        sign = -sign;
    }
    return sign;
}

static tacet_words necklaces(unsigned fires, unsigned length, unsigned longest_run, bool primitive)
{
    tacet_words w = {0};
    tacet_error e;
    tacet_maker_def d = tacet_maker_default();
    d.fires = fires, d.length = length, d.longest_run = longest_run, d.primitive = primitive;
    assert_int_equal(tacet_maker_find("necklaces")->make(&d, arena, &w, &e), TACET_OK);
    return w;
}

// ---- counts

// Necklaces of n beads with k ones: Burnside's lemma gives (1/n) sum over d | gcd(n,k) of phi(d)
// C(n/d, k/d) (OEIS A047996); primitive ones (1/n) sum of mu(d) C(n/d, k/d) (Moreau's formula).
// Every density up to 14 letters.
static void test_counts_burnside(void **state)
{
    (void)state;
    for (unsigned n = 1; n <= 14; n++)
        for (unsigned k = 0; k <= n; k++) {
            double all = 0, primitive = 0;
            for (unsigned d = 1; d <= n; d++) {
                if (n % d || k % d) continue;
                all += totient(d) * choose(n / d, k / d) / n;
                primitive += moebius(d) * choose(n / d, k / d) / n;
            }
            assert_near((double)necklaces(k, n, 0, false).n, all, 1e-9, 0);
            assert_near((double)necklaces(k, n, 0, true).n, primitive, 1e-9, 0);
        }
    assert_int_equal(necklaces(8, 16, 0, false).n, 810); // OEIS A047996
    assert_int_equal(necklaces(2, 64, 0, false).n, 32);  // distances d and 64 - d are alike
}

// Compositions of n into k parts of 1..most: inclusion and exclusion over parts that are larger.
static double compositions(unsigned n, unsigned k, unsigned most)
{
    double sum = 0;
    for (unsigned j = 0; j <= k && n >= j * most + k; j++)
        sum += (j % 2 ? -1 : 1) * choose(k, j) * choose(n - j * most - 1, k - 1);
    return sum;
}

// Words with no run of more than r skips: a necklace with k fires is a cyclic composition of n into
// the k distances between fires, each at most r + 1. Burnside's lemma again, over the group of k
// turns: (1/k) sum over d | gcd(n,k) of phi(d) compositions(n/d, k/d, r+1). Derived here.
static void test_counts_longest_run(void **state)
{
    (void)state;
    unsigned some = 0;
    for (unsigned n = 1; n <= 14; n++)
        for (unsigned k = 1; k <= n; k++)
            for (unsigned run = 1; run <= 5; run++) {
                double count = 0;
                for (unsigned d = 1; d <= k; d++)
                    if (n % d == 0 && k % d == 0)
                        count += totient(d) * compositions(n / d, k / d, run + 1) / k;
                assert_near((double)necklaces(k, n, run, false).n, count, 1e-9, 0);
                some += count > 0 && count < (double)necklaces(k, n, 0, false).n;
            }
    assert_true(some > 50);
}

// ---- rolls

static tacet_roll *roll_of(const tacet_pattern *p, unsigned cylinders)
{
    tacet_roll *r;
    assert_int_equal(tacet_roll_create(p, cylinders, 4, &r, NULL), TACET_OK);
    return r;
}

// What a cylinder does over time, from the roll of a and, `by` cycles later, of b.
static bool alike(const tacet_roll *a, const tacet_roll *b, unsigned by)
{
    for (unsigned slot = 0; slot < a->cylinders; slot++)
        for (unsigned c = 0; c < a->cycles; c++)
            if (tacet_roll_cycle(a, slot, c).tenths != tacet_roll_cycle(b, slot, c + by).tenths)
                return false;
    return true;
}

// Rotations that load the crank differently, counted: rolls are alike when some number of whole
// working cycles makes one the other.
static unsigned placements_counted(const tacet_pattern *p, unsigned cylinders)
{
    tacet_roll *seen[TACET_PATTERN_LONGEST];
    unsigned n = 0;
    for (unsigned by = 0; by < p->length; by++) {
        tacet_pattern turned;
        tacet_pattern_rotate(p, by, &turned);
        tacet_roll *r = roll_of(&turned, cylinders);
        bool known = false;
        for (unsigned i = 0; i < n && !known; i++)
            for (unsigned c = 0; c < r->cycles && !known; c++)
                known = alike(seen[i], r, c);
        if (known)
            tacet_roll_destroy(r);
        else
            seen[n++] = r;
    }
    for (unsigned i = 0; i < n; i++)
        tacet_roll_destroy(seen[i]);
    return n;
}

// Placements are gcd(L, n) of the reduced word (closed form), against the count over all rotations;
// the repeat is lcm(L, n) opportunities. All necklaces of up to 8 letters, engines of 1 to 8.
static void test_placements_counted(void **state)
{
    (void)state;
    for (unsigned n = 1; n <= 8; n++)
        for (unsigned k = 0; k <= n; k++) {
            tacet_words w = necklaces(k, n, 0, false);
            for (size_t i = 0; i < w.n; i++)
                for (unsigned cylinders = 1; cylinders <= 8; cylinders++) {
                    tacet_pattern p = w.pattern[i], reduced = p;
                    tacet_pattern_reduce(&reduced);
                    unsigned g = gcd(reduced.length, cylinders);
                    tacet_roll *r = roll_of(&p, cylinders);
                    assert_int_equal(tacet_pattern_placements(&p, cylinders), g);
                    assert_int_equal(placements_counted(&p, cylinders), g);
                    assert_int_equal(r->opportunities, reduced.length * cylinders / g);
                    assert_int_equal(r->revolutions, 2 * reduced.length / g);
                    assert_int_equal(r->fires * p.length, k * r->opportunities);
                    tacet_roll_destroy(r);
                }
        }
}

// One fire in L opportunities on n cylinders, g = gcd(L, n): opportunity c n + s meets the fire
// where it is 0 modulo L, so only slots that are multiples of g fire, each once in L/g cycles
// (closed form): L/g - 1 skips in a row, L - 1 opportunities in a row.
static void test_single_fire_runs(void **state)
{
    (void)state;
    for (unsigned length = 1; length <= 64; length++)
        for (unsigned cylinders = 1; cylinders <= 12; cylinders++) {
            tacet_pattern p = {.length = length, .tenths = {10}};
            unsigned g = gcd(length, cylinders);
            tacet_roll *r = roll_of(&p, cylinders);
            assert_int_equal(r->longest_run, length / g - 1);
            assert_int_equal(r->longest_gap, length - 1);
            assert_int_equal(r->cycles, length / g);
            for (unsigned slot = 0; slot < cylinders; slot++) {
                bool fires = slot % g == 0;
                assert_int_equal(tacet_roll_fires_of(r, slot), fires);
                for (unsigned c = 0; c < r->cycles; c++) {
                    tacet_cycle at = tacet_roll_cycle(r, slot, c);
                    assert_int_equal(at.tenths, (c * cylinders + slot) % length ? 0 : 10);
                    if (!fires) assert_int_equal(at.skips, TACET_SKIPS_FOREVER);
                    if (at.tenths) assert_int_equal(at.skips, length / g - 1);
                }
            }
            tacet_roll_destroy(r);
        }
}

// ---- spectra

// A block of k fires at letter `from` of L: Y_m = exp(-i pi m (2 from + k - 1)/L) sin(pi m k/L) /
// sin(pi m/L) (geometric series); blocks and tenths add up.
static double complex block(unsigned length, unsigned from, unsigned fires, unsigned m)
{
    if (m == 0) return fires;
    return cexp(-I * M_PI * m * (2. * from + fires - 1) / length) * sin(M_PI * m * fires / length) /
           sin(M_PI * m / length);
}

static void test_spectrum_geometric_series(void **state)
{
    (void)state;
    for (unsigned length = 2; length <= 64; length += length < 12 ? 1 : 13)
        for (unsigned first = 0; first < length; first++)
            for (unsigned second = 0; first + second < length; second += 2) {
                tacet_pattern p = {.length = length};
                double complex line[TACET_PATTERN_LONGEST];
                for (unsigned j = 0; j < length; j++)
                    p.tenths[j] = j < first ? 10 : j < length - second ? 0 : 7;
                tacet_pattern_spectrum(&p, line);
                for (unsigned m = 0; m < length; m++)
                    assert_near(cabs(line[m] - block(length, 0, first, m) -
                                     0.7 * block(length, length - second, second, m)),
                                0, 1e-12, 0);
            }
}

static unsigned next(uint64_t *seed, unsigned below)
{
    *seed = *seed * 6364136223846793005u + 1442695040888963407u;
    return (unsigned)(*seed >> 40) % below;
}

// Any word with tenths against FFTW's forward transform, at every length.
static void test_spectrum_fftw(void **state)
{
    (void)state;
    fftw_complex x[TACET_PATTERN_LONGEST], y[TACET_PATTERN_LONGEST];
    uint64_t seed = 1;
    for (unsigned length = 1; length <= 64; length++) {
        fftw_plan plan = fftw_plan_dft_1d((int)length, x, y, FFTW_FORWARD, FFTW_ESTIMATE);
        assert_non_null(plan);
        for (int k = 0; k < 10; k++) {
            tacet_pattern p = {.length = length};
            double complex line[TACET_PATTERN_LONGEST];
            for (unsigned j = 0; j < length; j++) {
                p.tenths[j] = (uint8_t)next(&seed, 11);
                x[j] = p.tenths[j] / 10.0;
            }
            fftw_execute(plan);
            tacet_pattern_spectrum(&p, line);
            for (unsigned m = 0; m < length; m++)
                assert_near(cabs(line[m] - y[m]), 0, 1e-12, 0);
        }
        fftw_destroy_plan(plan);
    }
}

// Parseval: sum of |Y_m|^2 is L times the sum of squares; of a word of k full fires L k.
static void test_spectrum_parseval(void **state)
{
    (void)state;
    for (unsigned n = 1; n <= 12; n++)
        for (unsigned k = 0; k <= n; k++) {
            tacet_words w = necklaces(k, n, 0, false);
            for (size_t i = 0; i < w.n; i++) {
                double complex line[TACET_PATTERN_LONGEST];
                double sum = 0;
                tacet_pattern_spectrum(&w.pattern[i], line);
                for (unsigned m = 0; m < n; m++)
                    sum += creal(line[m]) * creal(line[m]) + cimag(line[m]) * cimag(line[m]);
                assert_near(sum, (double)n * k, 1e-11, 1e-12);
                assert_near(creal(line[0]), k, 1e-14, 0);
            }
        }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_counts_burnside),           cmocka_unit_test(test_counts_longest_run),
        cmocka_unit_test(test_placements_counted),        cmocka_unit_test(test_single_fire_runs),
        cmocka_unit_test(test_spectrum_geometric_series), cmocka_unit_test(test_spectrum_fftw),
        cmocka_unit_test(test_spectrum_parseval),
    };
    return cmocka_run_group_tests(tests, set_up, tear_down);
}
