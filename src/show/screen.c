#include "show/screen.h"
#include <math.h>
#include <stdarg.h>
#include <string.h>

double screen_rpm(double speed_rad_per_s)
{
    return round(speed_rad_per_s / tacet_unit_factor("rpm") * 1e6) / 1e6;
}

const char *screen_title(const tacet_model *m)
{
    const char *title = tacet_model_study(m)->title;
    return title ? title : "untitled study";
}

const tacet_candidate *screen_candidate(const tacet_screen *s, size_t cell)
{
    return &s->candidates[s->cells[cell].candidate];
}

const tacet_roll *screen_roll(const tacet_screen *s, size_t cell)
{
    return screen_candidate(s, cell)->roll[s->cells[cell].placement];
}

tacet_condition screen_condition(const tacet_screen *s, size_t cell)
{
    const tacet_row *r = &s->cells[cell].row;
    return (tacet_condition){.id = r->id,
                             .speed_rad_per_s = r->speed_rad_per_s,
                             .demand_Nm = r->demand_Nm,
                             .roll = screen_roll(s, cell)};
}

bool screen_all_fire(const tacet_candidate *c)
{
    return c->fires == c->length && !strpbrk(c->word ? c->word : "", "123456789");
}

const char *screen_limited_by(const tacet_model *m, const tacet_row *r)
{
    if (r->limiting_band >= 0) return tacet_model_band(m, (size_t)r->limiting_band)->name;
    if (r->limiting_limit >= 0) return tacet_model_limit(m, (size_t)r->limiting_limit)->name;
    return "";
}

double screen_limiting_order(const tacet_row *r)
{
    if (r->limiting_band < 0) return NAN;
    double order = r->bands[r->limiting_band].level.leading_order;
    return order > 0 ? order : NAN;
}

const char *screen_quantity_name(const tacet_model *m, tacet_quantity_ref q, tacet_arena *a)
{
    char text[TACET_QUANTITY_TEXT];
    return screen_text(a, "%s", tacet_model_quantity_text(m, q, text));
}

const char *screen_why_text(tacet_why why)
{
    static const char *const text[] = {"", "unreachable", "failed", "no reference"};
    return (unsigned)why < sizeof text / sizeof *text ? text[why] : "unknown";
}

double screen_saving_percent(const tacet_row *r)
{
    return r->outcome == TACET_SOLVED ? 100 * (1 - r->fuel_to_all_fire) : NAN;
}

char *screen_text(tacet_arena *a, const char *format, ...)
{
    va_list args;
    va_start(args, format);
    int length = vsnprintf(NULL, 0, format, args);
    va_end(args);
    char *text = length < 0 ? NULL : tacet_arena_alloc(a, (size_t)length + 1);
    if (!text) return NULL;
    va_start(args, format);
    vsnprintf(text, (size_t)length + 1, format, args);
    va_end(args);
    return text;
}

void put_number(table_row *r, double value)
{
    *r->next++ = (tacet_table_cell){.number = value};
}

void put_text(table_row *r, const char *text)
{
    *r->next++ = (tacet_table_cell){.number = NAN, .text = text};
}

void put_accent(table_row *r)
{
    r->next[-1].accent = true;
}

tacet_status table_start(tacet_arena *a, const tacet_table *what, tacet_table *out,
                         table_row *first)
{
    size_t n = what->n_rows * what->n_columns;
    tacet_table_cell *cells = tacet_arena_alloc(a, (n + 1) * sizeof *cells);
    *first = (table_row){cells};
    *out = *what;
    out->cells = cells;
    if (!cells) out->n_rows = 0;
    return cells ? TACET_OK : TACET_NO_MEMORY;
}
