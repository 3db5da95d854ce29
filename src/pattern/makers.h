// What the makers share. Each maker is one file with one const descriptor, listed in makers.c.
#ifndef PATTERN_MAKERS_H
#define PATTERN_MAKERS_H
#include "tacet/pattern.h"

extern const tacet_maker tacet_maker_even, tacet_maker_sigma_delta_1, tacet_maker_sigma_delta_2,
    tacet_maker_cylinders, tacet_maker_necklaces, tacet_maker_book;

// Room for n unnamed words in the arena; their patterns are zero and to be filled.
TACET_USE tacet_status words_init(tacet_words *w, size_t n, tacet_arena *a, tacet_error *e);

// Refuses a word length outside 1..TACET_PATTERN_LONGEST.
TACET_USE tacet_status check_length(unsigned length, tacet_error *e);
#endif
