// How tacet patterns writes words: repeat, runs, orders, the word's own spectrum.
#include "cli/patterns.h"
#include <math.h>

static const tacet_table_column columns[] = {
    {.name = "pattern", .text = true},
    {.name = "word", .text = true},
    {.name = "density", .text = true, .data_only = true},
    {.name = "placements"},
    {.name = "opportunities"},
    {.name = "revolutions"},
    {.name = "fires", .text = true},
    {.name = "skip_run"},
    {.name = "leading_order", .text = true},
    {.name = "lowest_order", .text = true},
    {.name = "repeat_order", .text = true, .data_only = true},
};
static const tacet_table_column line_columns[] = {
    {.name = "line"},
    {.name = "order", .text = true},
    {.name = "order_value", .decimals = 4, .data_only = true},
    {.name = "amplitude", .decimals = 4},
    {.name = "phase_deg", .decimals = 1},
};
#define N(c) (sizeof(c) / sizeof *(c))

static const char *fraction(tacet_arena *a, unsigned above, unsigned below)
{
    char text[24];
    return cli_text(a, "%s", cli_fraction(above, below, text));
}

// Fires of each slot in a repeat, "3 each" when all alike.
static const char *fires_text(tacet_arena *a, const tacet_roll *r)
{
    const char *text = "";
    bool alike = true;
    for (unsigned s = 0; s < r->cylinders; s++) {
        unsigned fires = tacet_roll_fires_of(r, s);
        alike = alike && fires == tacet_roll_fires_of(r, 0);
        text = cli_text(a, "%s%s%u", text, s ? " " : "", fires);
    }
    return alike ? cli_text(a, "%u each", tacet_roll_fires_of(r, 0)) : text;
}

static void put_entry(cli_rows *rows, tacet_arena *a, const pattern_entry *e)
{
    char word[TACET_PATTERN_LONGEST + 1];
    const tacet_roll *r = e->roll;
    const tacet_pattern *p = &r->pattern;
    tacet_pattern_format(p, word);
    const char *density = fraction(a, tacet_pattern_fires(p), p->length);
    cli_put_text(rows, e->name ? e->name : density);
    cli_put_text(rows, cli_text(a, "%s", word));
    cli_put_text(rows, density);
    cli_put(rows, (double)e->placements);
    cli_put(rows, r->opportunities);
    cli_put(rows, r->revolutions);
    cli_put_text(rows, fires_text(a, r));
    cli_put(rows, r->longest_run);
    cli_put_text(rows, fraction(a, r->fires, r->revolutions));
    // line 1 of the word, which is p->length opportunities long
    cli_put_text(rows, fraction(a, 2 * r->cylinders, r->strokes * p->length));
    cli_put_text(rows, fraction(a, 1, r->revolutions));
}

static const tacet_table *spectrum(const pattern_list *l, cli_rows *rows)
{
    const tacet_roll *r = l->entry[0].roll;
    double complex line[TACET_PATTERN_LONGEST];
    tacet_pattern_spectrum(&r->pattern, line);
    *rows = cli_rows_start(l->arena, "spectrum",
                           "Own spectrum of the word, relative to its mean (1: as large)",
                           line_columns, N(line_columns), TACET_PATTERN_LONGEST);
    for (unsigned m = 1; m < r->pattern.length; m++) {
        double above = 2.0 * m * r->cylinders, below = (double)r->strokes * r->pattern.length;
        cli_put(rows, m);
        cli_put_text(rows,
                     fraction(l->arena, 2 * m * r->cylinders, r->strokes * r->pattern.length));
        cli_put(rows, above / below);
        cli_put(rows, cabs(line[m]) / cabs(line[0]));
        cli_put(rows, carg(line[m]) * 180 / M_PI);
    }
    return cli_rows_end(rows);
}

static void entry_json(tacet_json *j, const pattern_entry *e)
{
    char word[TACET_PATTERN_LONGEST + 1], density[24];
    const tacet_roll *r = e->roll;
    double complex line[TACET_PATTERN_LONGEST];
    tacet_pattern_spectrum(&r->pattern, line);
    tacet_json_begin_object(j);
    tacet_json_put_text(j, "name", e->name);
    tacet_json_put_text(j, "word", tacet_pattern_format(&r->pattern, word));
    tacet_json_put_text(j, "density",
                        cli_fraction(tacet_pattern_fires(&r->pattern), r->pattern.length, density));
    tacet_json_put_count(j, "placements", e->placements);
    tacet_json_put_count(j, "opportunities", r->opportunities);
    tacet_json_put_count(j, "revolutions", r->revolutions);
    tacet_json_key(j, "fires_per_cylinder");
    tacet_json_begin_array(j);
    for (unsigned s = 0; s < r->cylinders; s++)
        tacet_json_count(j, tacet_roll_fires_of(r, s));
    tacet_json_end_array(j);
    tacet_json_put_count(j, "longest_skip_run", r->longest_run);
    tacet_json_put_number(j, "leading_order", (double)r->fires / r->revolutions);
    tacet_json_put_number(j, "repeat_order", 1.0 / r->revolutions);
    tacet_json_key(j, "spectrum"); // [order, amplitude relative to the mean, phase in degrees]
    tacet_json_begin_array(j);
    for (unsigned m = 1; m < r->pattern.length; m++) {
        tacet_json_begin_array(j);
        tacet_json_number(j, 2.0 * m * r->cylinders / (r->strokes * (double)r->pattern.length));
        tacet_json_number(j, cabs(line[m]) / cabs(line[0]));
        tacet_json_number(j, carg(line[m]) * 180 / M_PI);
        tacet_json_end_array(j);
    }
    tacet_json_end_array(j);
    tacet_json_end_object(j);
}

static int write_json(const pattern_list *l)
{
    tacet_json j = tacet_json_start(stdout);
    tacet_json_head(&j, "patterns", l->study, "ok");
    tacet_json_key(&j, "patterns");
    tacet_json_begin_array(&j);
    for (size_t i = 0; i < l->n; i++)
        entry_json(&j, &l->entry[i]);
    tacet_json_end_array(&j);
    return cli_end_json(&j);
}

int patterns_write(const pattern_list *l)
{
    if (cli_given(l->call, "json")) return write_json(l);
    cli_rows rows = cli_rows_start(l->arena, "patterns", NULL, columns, N(columns), l->n), lines;
    for (size_t i = 0; i < l->n; i++)
        put_entry(&rows, l->arena, &l->entry[i]);
    const tacet_table *t = cli_rows_end(&rows);
    if (!t) return cli_failed(TACET_NO_MEMORY, NULL);
    cli_write_table(l->call, t);
    if (cli_given(l->call, "csv")) return CLI_DONE;
    if (l->n == 1 && l->entry[0].roll->pattern.length > 1) {
        t = spectrum(l, &lines);
        if (!t) return cli_failed(TACET_NO_MEMORY, NULL);
        fputc('\n', stdout);
        cli_write_table(l->call, t);
    }
    fputs(
        "\nA repeat is so many opportunities and revolutions long; fires: of each cylinder in it, "
        "in "
        "firing\nsequence; skip_run: cycles that one cylinder is skipped in a row. Orders are per "
        "revolution:\nleading = fires per revolution; lowest of roll torque, where cylinders are "
        "equal.\n",
        stdout);
    return CLI_DONE;
}
