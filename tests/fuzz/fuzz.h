// What the fuzz targets share. Each target is one file fuzz_<target>.c with one function that takes
// any bytes and ends the process where a promise of the library is broken.
#ifndef FUZZ_FUZZ_H
#define FUZZ_FUZZ_H
#include "tacet/study.h"
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

// The names that libFuzzer calls: once before all inputs (in common.c), and with every input.
int LLVMFuzzerInitialize(int *argc, char ***argv);
int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

// Ends the process with file, line and the promise unless `condition` holds.
#define REQUIRE(condition)                                                                         \
    do {                                                                                           \
        if (!(condition)) fuzz_broken(__FILE__, __LINE__, #condition);                             \
    } while (0)
_Noreturn void fuzz_broken(const char *file, int line, const char *promise);

char *fuzz_text(const uint8_t *data, size_t size); // a copy that ends with a zero byte; to be freed

// A refusal: the caller's fault, with a text that a terminal can show.
void fuzz_refusal(tacet_status status, const tacet_error *e);
// .. with a place inside `text`.
void fuzz_refusal_in(tacet_status status, const tacet_error *e, const char *text, size_t bytes);
// Problems of a reading of `text`, of which messages call `name`: TACET_OK without errors, or
// TACET_BAD_INPUT with errors, each with a text and, when of `name`, a place inside `text`.
void fuzz_problems(tacet_status status, const tacet_problems *p, const char *name, const char *text,
                   size_t bytes);
bool fuzz_is_utf8(const char *text);

// A file in memory; its path is good while it is open. Ends the process when there is none.
typedef struct {
    int fd;
    char path[40];
} fuzz_file;
fuzz_file fuzz_file_create(const void *bytes, size_t size);
void fuzz_file_remove(fuzz_file *f);

// ---- a study written out again from what was read
// The study as text in the arena, key by key from the field tables, numbers in 15 digits; NULL: it
// is too large, or its numbers lie closer together than that.
const char *fuzz_rewrite(const tacet_study *s, tacet_arena *a);
// Requires equal values, numbers to 1e-13.
void fuzz_same(const tacet_study *a, const tacet_study *b);
// Requires every number to be finite, or absent where its key allows it.
void fuzz_finite(const tacet_study *s);
#endif
