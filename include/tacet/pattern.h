// pattern: fire/skip words, makers of them, and the roll (what each cylinder does in each cycle).
#ifndef TACET_PATTERN_H
#define TACET_PATTERN_H
#include "tacet/base.h"
#include <complex.h>
#pragma GCC visibility push(default)

#define TACET_PATTERN_LONGEST 64

// Cyclic word over firing opportunities, with its rotation. 0 skips, 10 fires at full charge, 1..9
// fires at that many tenths of the charge.
typedef struct {
    unsigned length;
    uint8_t tenths[TACET_PATTERN_LONGEST];
} tacet_pattern;

// Word of 'x', '.', '1'..'9', 1..64 letters; anything else is refused with the position in
// e->column.
TACET_USE tacet_status tacet_pattern_parse(const char *word, tacet_pattern *out, tacet_error *e);
char *tacet_pattern_format(const tacet_pattern *p, char out[TACET_PATTERN_LONGEST + 1]);
void tacet_pattern_reduce(tacet_pattern *p); // "x.x." becomes "x."
void tacet_pattern_rotate(const tacet_pattern *p, unsigned by,
                          tacet_pattern *out); // letter i = p's i+by
unsigned tacet_pattern_fires(const tacet_pattern *p);
bool tacet_pattern_equal(const tacet_pattern *a, const tacet_pattern *b);
// Number of placements: rotations that load the crank of an n-cylinder engine differently: gcd(L,
// n).
unsigned tacet_pattern_placements(const tacet_pattern *p, unsigned cylinders);
// Density k/L "3/7", also "1"; reduced. False: not 0 <= k <= L <= 64.
TACET_USE bool tacet_density_parse(const char *text, unsigned *fires, unsigned *length);
// Largest line of the word's own spectrum etc.: Y_m = sum_j (tenths/10) exp(-2 pi i m j / L), m =
// 0..L-1.
void tacet_pattern_spectrum(const tacet_pattern *p, double complex *line);

// ---- makers
// ------------------------------------------------------------------------------------------ What a
// maker may need; only the members its doc names are read.
typedef struct {
    unsigned fires, length; // density k/L
    double density;         // for makers of any density
    double dither;          // 0..1 of one quantisation step, 0: none
    uint64_t seed;
    const unsigned *cylinders; // opportunity positions (0-based in firing sequence) that fire
    size_t n_cylinders;
    unsigned engine_cylinders;
    unsigned longest_run; // longest run of skips allowed in the word, 0: any
    const char *path;     // of a book
} tacet_maker_def;
tacet_maker_def tacet_maker_default(void);

typedef struct tacet_words { // result of a maker or a book
    tacet_pattern *pattern;
    const char **name, **comment; // [n]; NULL entries where there is none
    int *line;                    // [n] line in the book, 0 otherwise
    size_t n;
} tacet_words;

typedef struct {
    const char *name, *doc;
    tacet_status (*make)(const tacet_maker_def *d, tacet_arena *a, tacet_words *out,
                         tacet_error *e);
} tacet_maker;
// Ends with name == NULL: even, sigma-delta-1, sigma-delta-2, cylinders, necklaces, book.
const tacet_maker *tacet_makers(void);
const tacet_maker *tacet_maker_find(const char *name);
// Reads a book (*.words: one word a line, a name, a comment after '#'); all problems with places.
TACET_USE tacet_status tacet_book_read(const char *path, tacet_arena *a, tacet_problems *problems,
                                       tacet_words *out);

// ---- roll
// -------------------------------------------------------------------------------------------- What
// one cylinder does in one working cycle. skips: for a fire, cycles skipped in a row before it; for
// a skip, its own position in the run (1 = first), TACET_SKIPS_FOREVER for a cylinder that never
// fires.
typedef struct {
    uint8_t tenths, skips;
} tacet_cycle;
#define TACET_SKIPS_FOREVER 255

// Slots are positions in the firing sequence, 0..n-1; cycle c of slot s is opportunity c n + s.
typedef struct tacet_roll {
    tacet_pattern pattern; // reduced
    unsigned cylinders, strokes;
    unsigned opportunities; // lcm(pattern length, cylinders)
    unsigned cycles;        // per cylinder in a repeat = opportunities / cylinders
    unsigned revolutions;   // of a repeat = cycles * strokes / 2
    unsigned fires;         // in a repeat
    unsigned longest_run;   // skipped cycles in a row of one cylinder that also fires
    unsigned longest_gap;   // skipped opportunities in a row
    tacet_cycle *cycle;     // [cylinders * cycles], slot by slot
} tacet_roll;
// The cycle a step away is cyclic: c may be any value, taken modulo cycles.
TACET_USE tacet_status tacet_roll_create(const tacet_pattern *p, unsigned cylinders,
                                         unsigned strokes, tacet_roll **out, tacet_error *e);
void tacet_roll_destroy(tacet_roll *r); // accepts NULL
tacet_cycle tacet_roll_cycle(const tacet_roll *r, unsigned slot, unsigned cycle);
unsigned tacet_roll_fires_of(const tacet_roll *r, unsigned slot);
// May these cylinders (bit per slot set: may skip) run this roll, and is no cylinder skipped longer
// in a row than longest_run? A cylinder that never fires is no run. Reason in e on false.
bool tacet_roll_allowed(const tacet_roll *r, const bool *may_skip, unsigned longest_run,
                        tacet_error *e);

#pragma GCC visibility pop
#endif
