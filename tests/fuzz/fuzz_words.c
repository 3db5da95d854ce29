// Words, placements, the roll and the makers. First line: a word. Second line: numbers of a maker's
// definition, parted by blanks: maker fires length density dither seed engine_cylinders longest_run
// primitive strokes, then positions of cylinders.
#include "fuzz.h"
#include "tacet/pattern.h"
#include <complex.h>

#define NUMBERS         9
#define LONGEST_SEARCH  20 // necklaces longer than this take long to list
#define MOST_POSITIONS  70
#define TOO_MANY_AT_ONE 2000

static void check_pattern(const tacet_pattern *p)
{
    REQUIRE(p->length >= 1 && p->length <= TACET_PATTERN_LONGEST);
    for (unsigned i = 0; i < TACET_PATTERN_LONGEST; i++)
        REQUIRE(p->tenths[i] <= (i < p->length ? 10 : 0));
    char text[TACET_PATTERN_LONGEST + 1];
    tacet_pattern back, turned;
    tacet_error e;
    REQUIRE(tacet_pattern_parse(tacet_pattern_format(p, text), &back, &e) == TACET_OK);
    REQUIRE(tacet_pattern_equal(p, &back));
    for (unsigned by = 0; by <= p->length; by += 1 + by / 2) {
        tacet_pattern_rotate(p, by, &turned);
        tacet_pattern_rotate(&turned, p->length - by % p->length, &turned);
        REQUIRE(tacet_pattern_equal(p, &turned));
    }
    tacet_pattern_reduce(&back);
    REQUIRE(p->length % back.length == 0);
    REQUIRE(tacet_pattern_fires(p) == tacet_pattern_fires(&back) * (p->length / back.length));
    for (unsigned i = 0; i < p->length; i++)
        REQUIRE(p->tenths[i] == back.tenths[i % back.length]);
}

// Line 0 is the sum of the tenths; the lines carry what the letters do (Parseval).
static void check_spectrum(const tacet_pattern *p)
{
    double complex line[TACET_PATTERN_LONGEST];
    double sum = 0, squares = 0, power = 0;
    tacet_pattern_spectrum(p, line);
    for (unsigned i = 0; i < p->length; i++) {
        sum += p->tenths[i] / 10.0;
        squares += p->tenths[i] / 10.0 * p->tenths[i] / 10.0;
        power += creal(line[i]) * creal(line[i]) + cimag(line[i]) * cimag(line[i]);
    }
    REQUIRE(cabs(line[0] - sum) < 1e-12);
    REQUIRE(fabs(power / p->length - squares) < 1e-10);
}

static void check_roll(const tacet_pattern *p, unsigned cylinders, unsigned strokes)
{
    tacet_roll *r = NULL;
    tacet_error e = {.text = ""};
    unsigned placements = cylinders ? tacet_pattern_placements(p, cylinders) : 1, fires = 0;
    tacet_status status = tacet_roll_create(p, cylinders, strokes, &r, &e);
    if (status != TACET_OK) {
        fuzz_refusal(status, &e);
        REQUIRE(cylinders < 1 || cylinders > 64 || (strokes != 2 && strokes != 4));
        return;
    }
    REQUIRE(placements >= 1 && cylinders % placements == 0 && p->length % placements == 0);
    REQUIRE(r->opportunities == r->cycles * cylinders);
    REQUIRE(r->opportunities % r->pattern.length == 0 && r->opportunities <= 64 * 64);
    REQUIRE(r->revolutions == r->cycles * strokes / 2);
    for (unsigned slot = 0; slot < cylinders; slot++) {
        unsigned of_slot = 0;
        for (unsigned c = 0; c < r->cycles; c++) {
            tacet_cycle cycle = tacet_roll_cycle(r, slot, c);
            REQUIRE(cycle.tenths == p->tenths[(c * cylinders + slot) % p->length]);
            REQUIRE(cycle.skips <= r->longest_run || cycle.skips == TACET_SKIPS_FOREVER);
            of_slot += cycle.tenths > 0;
        }
        REQUIRE(tacet_roll_fires_of(r, slot) == of_slot);
        fires += of_slot;
    }
    REQUIRE(fires == r->fires);
    if (!tacet_roll_allowed(r, NULL, 3, &e)) fuzz_refusal(TACET_BAD_INPUT, &e);
    tacet_roll_destroy(r);
}

// A whole number from any text, for definitions that a caller may get wrong.
static unsigned whole(double value)
{
    return value >= 0 && value < 4294967296.0 ? (unsigned)value : 4294967295u;
}

static void check_made(const tacet_maker *m, const tacet_maker_def *d, tacet_arena *a)
{
    tacet_words words = {0};
    tacet_error e = {.text = ""};
    bool exact = strcmp(m->name, "even") == 0 || strcmp(m->name, "necklaces") == 0;
    if (strcmp(m->name, "necklaces") == 0 && d->length > LONGEST_SEARCH && d->length <= 64) return;
    tacet_status status = m->make(d, a, &words, &e);
    if (status != TACET_OK) {
        if (strcmp(m->name, "book") == 0 && status == TACET_OUTSIDE_WORLD) return;
        fuzz_refusal(status, &e);
        return;
    }
    for (size_t i = 0; i < words.n; i += i < TOO_MANY_AT_ONE ? 1 : 97) {
        check_pattern(&words.pattern[i]);
        if (exact) REQUIRE(tacet_pattern_fires(&words.pattern[i]) == d->fires);
        if (strcmp(m->name, "cylinders") != 0) REQUIRE(words.pattern[i].length == d->length);
    }
}

// Makers are told apart by number so that every one is met.
static void check_maker(const double v[NUMBERS + 1], const unsigned *position, size_t n,
                        tacet_arena *a)
{
    tacet_maker_def d = tacet_maker_default();
    size_t makers = 0;
    while (tacet_makers()[makers])
        makers++;
    const tacet_maker *m = tacet_makers()[whole(v[0]) % makers];
    REQUIRE(tacet_maker_find(m->name) == m && *m->doc);
    d.fires = whole(v[1]);
    d.length = whole(v[2]);
    d.density = v[3];
    d.dither = v[4];
    d.seed = whole(v[5]);
    d.engine_cylinders = whole(v[6]);
    d.longest_run = whole(v[7]);
    d.primitive = v[8] > 0;
    d.cylinders = position;
    d.n_cylinders = n;
    d.path = n % 2 ? "/nonexistent/none.words" : NULL;
    check_made(m, &d, a);
}

static void check_numbers(char *line, const tacet_pattern *p, tacet_arena *a)
{
    double v[NUMBERS + 1] = {0, 3, 7, 0.4, 0, 1, 6, 0, 1, 4};
    unsigned position[MOST_POSITIONS];
    size_t n = 0;
    char *rest = line;
    for (char *word; (word = strsep(&rest, " ")); n++) {
        double value = strtod(word, NULL); // takes nan and inf, which callers may pass
        if (n <= NUMBERS)
            v[n] = value;
        else if (n - NUMBERS - 1 < MOST_POSITIONS)
            position[n - NUMBERS - 1] = whole(value);
        else
            break;
    }
    check_maker(v, position, n > NUMBERS + 1 ? n - NUMBERS - 1 : 0, a);
    if (!p) return;
    check_roll(p, whole(v[6]), whole(v[9]));
    check_roll(p, whole(v[6]) % 64 + 1, whole(v[9]) % 2 ? 2 : 4);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    char *text = fuzz_text(data, size), *rest = text, *word = strsep(&rest, "\n");
    tacet_arena *a = tacet_arena_create();
    tacet_pattern p = {0};
    tacet_error e = {.text = ""};
    REQUIRE(a);
    tacet_status status = tacet_pattern_parse(word, &p, &e);
    if (status == TACET_OK) {
        check_pattern(&p);
        check_spectrum(&p);
    } else {
        fuzz_refusal(status, &e);
        REQUIRE(e.column >= 1 && (size_t)e.column <= strlen(word) + 1 && p.length == 0);
    }
    char none[] = "";
    check_numbers(rest ? rest : none, status == TACET_OK ? &p : NULL, a);
    tacet_arena_destroy(a);
    free(text);
    return 0;
}
