// pattern: fire/skip words, makers of them, and the roll (what each cylinder does in each cycle).
#ifndef TACET_PATTERN_H
#define TACET_PATTERN_H
#include "tacet/base.h"
#include <complex.h>
#pragma GCC visibility push(default)

#define TACET_PATTERN_LONGEST 64

// ---- words ------------------------------------------------------------------------------------
// Cyclic word over firing opportunities, with its rotation. 0 skips, 10 fires at full charge, 1..9
// fires at that many tenths of the charge. Letters past the length are zero.
typedef struct {
    unsigned length;
    uint8_t tenths[TACET_PATTERN_LONGEST];
} tacet_pattern;

// Word of 'x', '.', '1'..'9', 1..64 letters; anything else is refused with the position in
// e->column and leaves `out` alone. Does not reduce.
TACET_USE tacet_status tacet_pattern_parse(const char *word, tacet_pattern *out, tacet_error *e);
char *tacet_pattern_format(const tacet_pattern *p,
                           char out[TACET_PATTERN_LONGEST + 1]); // as parse reads it
void tacet_pattern_reduce(tacet_pattern *p);                     // "x.x." becomes "x."
// Letter i of `out` is letter i + by of p; out may be p.
void tacet_pattern_rotate(const tacet_pattern *p, unsigned by, tacet_pattern *out);
unsigned tacet_pattern_fires(const tacet_pattern *p); // letters that fire, at whatever charge
bool tacet_pattern_equal(const tacet_pattern *a, const tacet_pattern *b); // as written
// Rotations that load the crank of an n-cylinder engine differently: gcd(reduced length, n). They
// are the rotations by 0 .. placements - 1.
unsigned tacet_pattern_placements(const tacet_pattern *p, unsigned cylinders);
// Density "3/7", also "1"; given in lowest terms. False: not 0 <= k <= L <= 64, L >= 1.
TACET_USE bool tacet_density_parse(const char *text, unsigned *fires, unsigned *length);
// The word's own spectrum Y_m = sum_j (tenths_j/10) exp(-2 pi i m j/L) into line[0..L-1].
void tacet_pattern_spectrum(const tacet_pattern *p, double complex *line);

// ---- makers -----------------------------------------------------------------------------------
// What a maker may need; only the members that its doc names are read.
typedef struct {
    unsigned fires, length;    // density k/L; length alone: letters of the word
    double density;            // 0..1, for makers of any density
    double dither;             // 0..1 of one quantisation step, 0: none
    uint64_t seed;             // of the dither
    const unsigned *cylinders; // positions in the firing sequence, from 0, that fire
    size_t n_cylinders;
    unsigned engine_cylinders;
    unsigned longest_run; // longest run of skips in the word, around its end; 0: any
    bool primitive;       // leave out repetitions of a shorter word
    const char *path;     // of a book
} tacet_maker_def;
tacet_maker_def tacet_maker_default(void); // all-fire, undithered, seed 1

typedef struct tacet_words { // result of a maker or a book; all in the caller's arena
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
// Ends with NULL: even, sigma-delta-1, sigma-delta-2, cylinders, necklaces, book.
const tacet_maker *const *tacet_makers(void);
const tacet_maker *tacet_maker_find(const char *name); // NULL: none of that name

// A book (*.words): one word a line, then blanks and a name, then a comment after '#'. Blank lines
// and lines of comment alone are fine; names are unique in a book and hold no ':'. At most 1 MiB,
// 10000 words, 256 letters a name. Every problem goes to `problems` with its place; TACET_BAD_INPUT
// when one is an error, TACET_OUTSIDE_WORLD when the file cannot be read.
TACET_USE tacet_status tacet_book_read(const char *path, tacet_arena *a, tacet_problems *problems,
                                       tacet_words *out);
// The same from memory; `name` stands in messages.
TACET_USE tacet_status tacet_book_read_text(const char *text, size_t bytes, const char *name,
                                            tacet_arena *a, tacet_problems *problems,
                                            tacet_words *out);

// What may stand where a pattern is asked for: a word "x.x.", a book "forest.words" (all its words)
// or a word of a book "forest.words:front three". Books are relative to `folder` (NULL: the working
// folder). Problems are said of `file`, those inside a book with their own places; status as of
// tacet_book_read.
TACET_USE tacet_status tacet_words_find(const char *text, const char *folder, const char *file,
                                        tacet_arena *a, tacet_problems *problems, tacet_words *out);

// ---- roll -------------------------------------------------------------------------------------
// What one cylinder does in one working cycle. skips: for a fire, cycles skipped in a row before
// it; for a skip, its own position in the run (1 = first), TACET_SKIPS_FOREVER for a cylinder that
// never fires.
typedef struct {
    uint8_t tenths, skips;
} tacet_cycle;
#define TACET_SKIPS_FOREVER 255

// Slots are positions in the firing sequence, 0..n-1; cycle c of slot s is opportunity c n + s.
typedef struct tacet_roll {
    tacet_pattern pattern;  // reduced
    unsigned cylinders;     // 1..64
    unsigned strokes;       // 2 or 4
    unsigned opportunities; // lcm(pattern length, cylinders)
    unsigned cycles;        // per cylinder in a repeat = opportunities / cylinders
    unsigned revolutions;   // of a repeat = cycles * strokes / 2
    unsigned fires;         // in a repeat
    unsigned longest_run;   // skipped cycles in a row of one cylinder that also fires
    unsigned longest_gap;   // skipped opportunities in a row; all of them when nothing fires
    bool fault;             // a cylinder that never fires cannot: it need not be one that may skip
    tacet_cycle *cycle;     // [cylinders * cycles], slot by slot
} tacet_roll;
// Deals the letters of p, reduced, out to the cylinders. TACET_BAD_INPUT: cylinders or strokes out
// of range, or an empty word.
TACET_USE tacet_status tacet_roll_create(const tacet_pattern *p, unsigned cylinders,
                                         unsigned strokes, tacet_roll **out, tacet_error *e);
void tacet_roll_destroy(tacet_roll *r); // accepts NULL
// Cyclic: any cycle number is taken modulo the cycles of a repeat.
tacet_cycle tacet_roll_cycle(const tacet_roll *r, unsigned slot, unsigned cycle);
unsigned tacet_roll_fires_of(const tacet_roll *r, unsigned slot); // fires of a slot in a repeat
// May the cylinders run this roll: does anything fire, does no slot skip whose may_skip is false
// (NULL: all may), and is no cylinder skipped more than longest_run cycles in a row (0: any
// number)? A cylinder that never fires is no run. On false e has the reason, and the slot + 1 in
// e->column where one is to blame.
bool tacet_roll_allowed(const tacet_roll *r, const bool *may_skip, unsigned longest_run,
                        tacet_error *e);

#pragma GCC visibility pop
#endif
