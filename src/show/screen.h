// What the tables, texts and figures of a screen share. Private to show.
#ifndef SHOW_SCREEN_H
#define SHOW_SCREEN_H
#include "tacet/show.h"

double screen_rpm(double speed_rad_per_s); // rounded to 1e-6 rpm: the way from rpm and back is not
                                           // exact
const char *screen_title(const tacet_model *m);
const tacet_candidate *screen_candidate(const tacet_screen *s, size_t cell);
const tacet_roll *screen_roll(const tacet_screen *s, size_t cell);
tacet_condition screen_condition(const tacet_screen *s, size_t cell);
bool screen_all_fire(const tacet_candidate *c);
// Band or limit with the smallest margin, "" for none; its leading order, NAN for a limit.
const char *screen_limited_by(const tacet_model *m, const tacet_row *r);
double screen_limiting_order(const tacet_row *r);
// "link-torque:coupling"
const char *screen_quantity_name(const tacet_model *m, tacet_quantity_ref q, tacet_arena *a);
const char *screen_why_text(tacet_why why);       // "" when there is a verdict
double screen_saving_percent(const tacet_row *r); // 100 (1 - fuel to all-fire); NAN: none known
char *screen_text(tacet_arena *a, const char *format, ...) TACET_PRINTF(2, 3); // NULL: no memory

// The tables of tacet_screen_tables.
tacet_status screen_runs_table(const tacet_model *m, const tacet_screen *s, tacet_arena *a,
                               tacet_table *out);
tacet_status screen_summary_table(const tacet_model *m, const tacet_screen *s, tacet_arena *a,
                                  tacet_table *out);
tacet_status screen_ranking_table(const tacet_model *m, const tacet_screen *s, tacet_arena *a,
                                  tacet_table *out);
tacet_status screen_no_go_table(const tacet_model *m, const tacet_screen *s, tacet_arena *a,
                                tacet_table *out);
tacet_status screen_agreement_table(const tacet_model *m, const tacet_screen *s, tacet_arena *a,
                                    tacet_table *out);
tacet_status screen_mounts_table(const tacet_model *m, const tacet_screen *s, tacet_arena *a,
                                 tacet_table *out);
tacet_status screen_levels_table(const tacet_model *m, const tacet_screen *s, tacet_arena *a,
                                 tacet_table *out);

// Cells of one row, filled one after another.
typedef struct {
    tacet_table_cell *next;
} table_row;
void put_number(table_row *r, double value);
void put_text(table_row *r, const char *text);
void put_accent(table_row *r); // marks the cell just written
// The table `what` with cells for its rows, as yet empty; NULL cells: no memory.
TACET_USE tacet_status table_start(tacet_arena *a, const tacet_table *what, tacet_table *out,
                                   table_row *first);

#endif
