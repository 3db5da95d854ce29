// Text on its way out: UTF-8, control characters, numbers with fixed decimals. Private to show.
#ifndef SHOW_TEXT_H
#define SHOW_TEXT_H
#include "tacet/base.h"

#define TEXT_INVALID 0xFFFDu // what an invalid byte reads as

// Reads one character at text (not at its end): its length in bytes and code; an invalid byte is
// one byte of TEXT_INVALID.
size_t text_next(const char *text, uint32_t *code);
// Control characters, and those that turn the direction of writing.
bool text_is_control(uint32_t code);
// Columns on a terminal, one for each character.
size_t text_columns(const char *text);
// Copies at most size - 1 bytes, whole characters, control characters as blanks and invalid bytes
// as '?'. Returns out.
char *text_clean(const char *text, size_t size, char *out);
// value with a fixed number of decimals (0..9), always with a point; never "-0". Values of 1e15 and
// more, and decimals < 0, go through tacet_number_format_short with four digits. "" if not finite.
const char *text_fixed(double value, int decimals, char out[TACET_NUMBER_TEXT]);

#endif
