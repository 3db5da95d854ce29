// A page of golden values: records with a head line, each with fields in groups. As text:
//   condition .x 1400 300 ripple
//     row: speed_rpm 1400 | demand_nm 300 | word .x
//     pump coupling: level_rms 81.29403112 | why -
// `-` stands for an absent number or an empty text; '#' begins a comment line.
#ifndef GOLDEN_PAGE_H
#define GOLDEN_PAGE_H
#include "tacet/base.h"
#include <stdio.h>

typedef struct {
    const char *group, *column;
    const char *text; // as written; "" when absent
    double number;    // NAN: a text, or absent
} golden_field;
typedef struct {
    const char *head;
    golden_field *field;
    size_t n, room;
} golden_record;
typedef struct {
    tacet_arena *arena;
    golden_record *record;
    size_t n, room;
} golden_page;

// Says why on standard error and ends the program with 2.
_Noreturn void golden_stop(const char *format, ...) TACET_PRINTF(1, 2);

golden_page golden_page_start(void);
void golden_page_clear(golden_page *p);
const char *golden_text(golden_page *p, const char *format, ...) TACET_PRINTF(2, 3);
// The new last record; fields are put into the last record.
void golden_begin(golden_page *p, const char *head);
void golden_put_text(golden_page *p, const char *group, const char *column, const char *text);
void golden_put_number(golden_page *p, const char *group, const char *column, double value);

void golden_read(const char *path, golden_page *out);
void golden_write(const golden_page *p, FILE *to);
const golden_record *golden_find(const golden_page *p, const char *head); // NULL: none
const golden_field *golden_find_field(const golden_record *r, const char *group,
                                      const char *column); // NULL: none
#endif
