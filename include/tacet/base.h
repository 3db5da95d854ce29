// base: status and errors, problems with places, arenas, numbers, curves, and the field tables that
// describe every key of a study. Includes nothing of the project.
#ifndef TACET_BASE_H
#define TACET_BASE_H
#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#define TACET_USE              __attribute__((warn_unused_result))
#define TACET_PRINTF(f, first) __attribute__((format(printf, f, first)))
#if defined(__GNUC__)
#pragma GCC visibility push(default)
#endif

// ---- status -----------------------------------------------------------------------------------
// What went wrong with a call. A result that a user may not like (unreachable, over) is no status.
typedef enum {
    TACET_OK,
    TACET_BAD_INPUT,     // the caller's data are outside what the function allows
    TACET_NO_MEMORY,     // an allocation failed; nothing was changed
    TACET_NOT_CONVERGED, // an iteration used up its passes
    TACET_NOT_FINITE,    // a computed value is NaN or infinite; it was not passed on
    TACET_OUTSIDE_WORLD, // file, folder, pipe or another program
    TACET_STOPPED,       // asked to stop
    TACET_HARMONIC_ONLY  // a law of frequency alone: no march can follow it
} tacet_status;

// Message and place of a failure; line and column count from 1, 0 = no place.
typedef struct {
    tacet_status status;
    int line, column;
    char text[256];
} tacet_error;

const char *tacet_status_text(tacet_status status); // "ok", "bad input", ..; never NULL

// Writes status and formatted text to e (may be NULL) without a place, and returns status.
tacet_status tacet_fail(tacet_error *e, tacet_status status, const char *format, ...)
    TACET_PRINTF(3, 4);

// snprintf whose numbers have a decimal point whatever the process's locale; returns `out`. All
// texts of this library that take a format go through it.
char *tacet_text(char *out, size_t bytes, const char *format, ...) TACET_PRINTF(3, 4);

// ---- arena: one study or model = one arena = one free -----------------------------------------
typedef struct tacet_arena tacet_arena;
tacet_arena *tacet_arena_create(void);                 // NULL: no memory
void tacet_arena_destroy(tacet_arena *a);              // accepts NULL
void *tacet_arena_alloc(tacet_arena *a, size_t bytes); // zeroed, 64-byte aligned; NULL: no memory
char *tacet_arena_text(tacet_arena *a, const char *text); // a copy
bool tacet_arena_was_short(const tacet_arena *a);         // has an allocation from it ever failed?

// ---- files ------------------------------------------------------------------------------------
// A whole file of at most `most` bytes ("-": standard input) into the arena, a zero byte after it.
// TACET_OUTSIDE_WORLD with a text that names the file and the reason; e has no place.
TACET_USE tacet_status tacet_file_read(const char *path, size_t most, tacet_arena *a, char **out,
                                       size_t *n, tacet_error *e);

// ---- problems: everything that is wrong with an input, gathered -------------------------------
typedef struct {
    bool warning; // false: an error, the input is refused
    int line, column;
    char *file, *text;
} tacet_problem;
typedef struct tacet_problems tacet_problems;
tacet_problems *tacet_problems_create(void);    // NULL: no memory
void tacet_problems_destroy(tacet_problems *p); // accepts NULL
// Adds one problem; keeps the first 20 errors and 20 warnings by place and counts the rest.
void tacet_problems_add(tacet_problems *p, bool warning, const char *file, int line, int column,
                        const char *format, ...) TACET_PRINTF(6, 7);
size_t tacet_problems_kept(const tacet_problems *p); // how many tacet_problems_at can show
const tacet_problem *tacet_problems_at(const tacet_problems *p,
                                       size_t i);        // by file as met, then place
size_t tacet_problems_errors(const tacet_problems *p);   // with those not kept
size_t tacet_problems_warnings(const tacet_problems *p); // with those not kept

// ---- numbers, independent of the process's locale ---------------------------------------------
// Decimal grammar [+-]digits[.digits][e[+-]digits], also .digits; no nan, inf, hex, blanks. False:
// not a finite number, and `out` is left alone.
TACET_USE bool tacet_number_parse(const char *text, double *out);
// Shortest of %.15g, %.16g, %.17g that reads back equal; "null" for a non-finite value.
#define TACET_NUMBER_TEXT 32
const char *tacet_number_format(double value, char out[TACET_NUMBER_TEXT]); // returns `out`
// For tables: `digits` significant digits without trailing zeros, digits before the point always
// whole; never exponent form between 1e-3 and 1e7. "null" for a non-finite value.
const char *tacet_number_format_short(double value, int digits, char out[TACET_NUMBER_TEXT]);

// List grammar "a", "a, b, c", "from:to:step", mixed by commas; at most `most` values into the
// arena. A range ends at the last step that does not pass `to`. e->column: place in the text.
TACET_USE tacet_status tacet_list_parse(const char *text, size_t most, tacet_arena *a, double **out,
                                        size_t *n, tacet_error *e);

// Name nearest to `word` among n names, NULL if none is near enough to be meant: few edits apart,
// or the same but for a unit ("bore" for "bore_mm"). NULL entries are passed over.
const char *tacet_near_name(const char *word, const char *const *names, size_t n);

// ---- curves -----------------------------------------------------------------------------------
// y over x, x strictly rising, n >= 1; a plain number in the file is a curve of one point (x = 0).
// x stays in the file's unit (rpm), y is SI.
typedef struct {
    double *x, *y; // owned by the study's arena
    size_t n;
} tacet_curve;
double tacet_curve_at(const tacet_curve *c, double x); // linear; held constant outside; n 0: NAN

// ---- units ------------------------------------------------------------------------------------
// Factor that turns a number in `unit` ("mm", "kPa", "rpm", "deg", ..) into SI; NULL or "": 1;
// 0: unknown unit.
double tacet_unit_factor(const char *unit);

// ---- field tables -----------------------------------------------------------------------------
// One row per key of a study section; drives reading, units, defaults, ranges, messages,
// `tacet keys`, man page and README tables. Struct members hold SI; the file holds `unit`.
typedef enum {
    TACET_FIELD_NUMBER, // double
    TACET_FIELD_CURVE,  // tacet_curve; number or [[x, y], ..]; `x_unit` names the abscissa
    TACET_FIELD_COUNT,  // unsigned, whole number
    TACET_FIELD_CHOICE, // int, index into `choices`
    TACET_FIELD_TEXT,   // const char *
    TACET_FIELD_NAME,   // const char *, name of this thing; unique in its list; no ':' or blanks at
                        // ends
    TACET_FIELD_NUMBERS, // double * at offset, size_t at count_offset; list or "from:to:step"
    TACET_FIELD_COUNTS,  // unsigned * at offset, size_t at count_offset
    TACET_FIELD_TEXTS,   // const char ** at offset, size_t at count_offset
    TACET_FIELD_SECTION, // a struct at offset
    TACET_FIELD_SECTIONS // array of structs: void * at offset, size_t at count_offset
} tacet_field_kind;

typedef struct tacet_field tacet_field;
typedef struct tacet_section {
    const char *name, *doc;
    size_t size;               // of the struct that a section fills
    const tacet_field *fields; // ends with key == NULL
    const char *shorthand;     // key that a list or a scalar in place of the map means, or NULL
} tacet_section;

struct tacet_field {
    const char *key;
    tacet_field_kind kind;
    size_t offset, count_offset;
    const char *unit, *x_unit; // as in the file; NULL: a pure number
    // Text as the file could hold it; NULL: required; "": may be absent (number: NAN, curve: n = 0,
    // choice: -1, text: NULL, list: count 0, section: its own defaults).
    const char *fallback;
    double low, high; // allowed range in the file's unit, both ends allowed; 0, 0: any finite
    const char *const *choices; // ends with NULL
    const char *word;           // a word allowed in place of a list, meaning an empty one ("all")
    const tacet_section *section;
    const char *doc;
};

// How a room reports what is wrong with the meaning of a filled struct. `path` names the key from
// the study's root: "train.links[3].from". The reader finds its place in the file.
typedef struct tacet_reporter {
    void (*say)(void *who, bool warning, const char *path, const char *text);
    void *who;
} tacet_reporter;
// Formats the text and says it to r.
void tacet_report(const tacet_reporter *r, bool warning, const char *path, const char *format, ...)
    TACET_PRINTF(4, 5);

// ---- CSV --------------------------------------------------------------------------------------
// Numbers between commas under one header line; '#' comment lines and empty lines skipped; every
// row as wide as the header; at least one row. e has line and column.
typedef struct {
    size_t rows, columns;
    char **header; // [columns]
    double *value; // [rows * columns], row by row
} tacet_csv;
// Reads a file of at most 64 MiB; everything of `out` is in the arena.
TACET_USE tacet_status tacet_csv_read(const char *path, tacet_arena *a, tacet_csv *out,
                                      tacet_error *e);

#if defined(__GNUC__)
#pragma GCC visibility pop
#endif
#endif
