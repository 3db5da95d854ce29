// How margins within a scatter are written.
#include "cli/scatter.h"
#include <math.h>
#include <string.h>

#define OF_SCREEN 4 // columns of a screen alone, first in the list

static const tacet_table_column columns[] = {
    {.name = "from_rpm", .unit = "rpm", .decimals = -1, .head = "from"},
    {.name = "to_rpm", .unit = "rpm", .decimals = -1, .head = "to"},
    {.name = "run", .text = true},
    {.name = "at_rpm", .unit = "rpm", .decimals = -1, .head = "at"},
    {.name = "of", .text = true},
    {.name = "verdict", .text = true},
    {.name = "stated_margin_db", .unit = "dB", .decimals = 1, .head = "stated"},
    {.name = "least_margin_db", .unit = "dB", .decimals = 1, .head = "least"},
    {.name = "at_factors", .text = true, .head = "where stiffness is"},
    {.name = "governs", .text = true},
    {.name = "db_per_10_percent", .unit = "dB", .decimals = 2, .head = "per +10 %"},
};
#define N_COLUMNS (sizeof columns / sizeof *columns)

static double per_10_percent(const tacet_scatter_margin *m)
{
    return m->governs == SIZE_MAX ? NAN : 0.1 * m->slope_db[m->governs];
}

static const char *name_of(const cli_session *s, const tacet_scatter_margin *m)
{
    return m->band >= 0 ? tacet_model_band(s->model, (size_t)m->band)->name
                        : tacet_model_limit(s->model, (size_t)m->limit)->name;
}

// "mounts x0.85, coupling x1.1"; "as stated".
static const char *factors(const cli_session *s, const tacet_scatter *c,
                           const tacet_scatter_margin *m)
{
    const char *text = "";
    char number[TACET_NUMBER_TEXT];
    for (size_t i = 0; i < c->n_entries; i++)
        if (m->at[i] != 1)
            text = cli_text(s->arena, "%s%s%s x%s", text, *text ? ", " : "", c->entries[i].name,
                            tacet_number_format_short(m->at[i], 3, number));
    return *text ? text : "as stated";
}

static void put_row(cli_rows *rows, const cli_session *s, const cli_scattered *at, bool screen,
                    const tacet_scatter_margin *m)
{
    const tacet_scatter *c = &at->margins;
    if (screen) {
        cli_put(rows, at->from_rpm);
        cli_put(rows, at->to_rpm);
        cli_put_text(rows, at->candidate->name);
        cli_put(rows, cli_rpm(at->speed_rad_per_s));
    }
    const char *verdict = tacet_scatter_text(c, m);
    cli_put_text(rows, name_of(s, m));
    cli_put_text(rows, verdict);
    if (strcmp(verdict, "stays clear") != 0) cli_accent(rows);
    cli_put(rows, m->stated_db); // no line: not finite, as in every table
    cli_put(rows, m->least_db);
    cli_put_text(rows, isfinite(m->least_db) ? factors(s, c, m) : "no line");
    cli_put_text(rows, m->governs == SIZE_MAX ? "none" : c->entries[m->governs].name);
    cli_put(rows, per_10_percent(m));
}

static const char *heading(const cli_session *s, const cli_scatter *c)
{
    const char *text = "Margins while stiffness scatters by";
    char number[TACET_NUMBER_TEXT];
    for (size_t i = 0; i < c->n_entries; i++)
        text = cli_text(s->arena, "%s%s %s %s %%", text, i ? "," : "", c->entries[i].name,
                        tacet_number_format_short(100 * c->entries[i].half_width, 4, number));
    return cli_text(s->arena, "%s either way", text);
}

static const tacet_table *table_of(const cli_session *s, const cli_scatter *c, cli_rows *rows)
{
    size_t skipped = c->of_screen ? 0 : OF_SCREEN, n = c->n ? c->at[0].margins.n_margins : 0;
    *rows = cli_rows_start(s->arena, "scatter", heading(s, c), columns + skipped,
                           N_COLUMNS - skipped, c->n * n);
    for (size_t i = 0; i < c->n; i++)
        for (size_t k = 0; k < n; k++)
            put_row(rows, s, &c->at[i], c->of_screen, &c->at[i].margins.margins[k]);
    return cli_rows_end(rows);
}

int cli_scatter_text(const cli_call *call, const cli_session *s, const cli_scatter *c)
{
    cli_rows rows;
    size_t points = 0, failed = 0;
    if (c->n_entries == 0) return CLI_DONE;
    const tacet_table *t = table_of(s, c, &rows);
    if (!t) return cli_failed(TACET_NO_MEMORY, NULL);
    fputc('\n', stdout);
    if (t->n_rows > 0)
        cli_write_table(call, t);
    else
        printf("%s: none\n", t->heading);
    for (size_t i = 0; i < c->n; i++) {
        points += c->at[i].margins.n_points;
        failed += c->at[i].margins.n_failed;
    }
    printf("Looked at %zu points", points);
    if (failed > 0) printf("; at %zu of them a margin is not known", failed);
    printf(". Limits are those of the study as stated.\n");
    return CLI_DONE;
}

int cli_scatter_save(const cli_session *s, const cli_scatter *c, tacet_folder *folder)
{
    FILE *to;
    cli_rows rows;
    tacet_error e = {.text = ""};
    if (c->n_entries == 0) return CLI_DONE;
    const tacet_table *t = table_of(s, c, &rows);
    if (!t) return cli_failed(TACET_NO_MEMORY, NULL);
    tacet_status status = tacet_folder_begin(folder, "scatter.csv", &to, &e);
    if (status != TACET_OK) return cli_failed(status, &e);
    tacet_table_write(t, tacet_writer_find("csv"), NULL, to);
    status = tacet_folder_commit(folder, &e);
    return status == TACET_OK ? CLI_DONE : cli_failed(status, &e);
}

static void put_entries(tacet_json *j, const tacet_scatter *c, const tacet_scatter_margin *m)
{
    tacet_json_key(j, "stiffness");
    tacet_json_begin_array(j);
    for (size_t i = 0; i < c->n_entries; i++) {
        tacet_json_begin_object(j);
        tacet_json_put_text(j, "of", c->entries[i].name);
        tacet_json_put_number(j, "either_way_percent", 100 * c->entries[i].half_width);
        tacet_json_put_number(j, "factor_at_least", m->at[i]);
        tacet_json_put_number(j, "db_per_10_percent", 0.1 * m->slope_db[i]);
        tacet_json_end_object(j);
    }
    tacet_json_end_array(j);
}

static void put_margin(tacet_json *j, const cli_session *s, const cli_scattered *at, bool screen,
                       const tacet_scatter_margin *m)
{
    const tacet_scatter *c = &at->margins;
    tacet_json_begin_object(j);
    if (screen) {
        tacet_json_put_number(j, "from_rpm", at->from_rpm);
        tacet_json_put_number(j, "to_rpm", at->to_rpm);
        tacet_json_put_text(j, "run", at->candidate->name);
        tacet_json_put_number(j, "at_rpm", cli_rpm(at->speed_rad_per_s));
    }
    tacet_json_put_text(j, "of", name_of(s, m));
    tacet_json_put_text(j, "verdict", tacet_scatter_text(c, m));
    tacet_json_put_number(j, "stated_margin_db", m->stated_db);
    tacet_json_put_number(j, "least_margin_db", m->least_db);
    tacet_json_put_text(j, "margin_why",
                        isnan(m->stated_db)   ? "no verdict"
                        : isinf(m->least_db)  ? "no line"
                        : isinf(m->stated_db) ? "no line as stated"
                                              : "");
    tacet_json_put_text(j, "governs",
                        m->governs == SIZE_MAX ? "none" : c->entries[m->governs].name);
    tacet_json_put_number(j, "db_per_10_percent", per_10_percent(m));
    put_entries(j, c, m);
    tacet_json_put_count(j, "points", c->n_points);
    tacet_json_put_count(j, "points_not_known", c->n_failed);
    tacet_json_end_object(j);
}

void cli_scatter_json(tacet_json *j, const cli_session *s, const cli_scatter *c)
{
    if (c->n_entries == 0) return;
    tacet_json_key(j, "scatter");
    tacet_json_begin_array(j);
    for (size_t i = 0; i < c->n; i++)
        for (size_t k = 0; k < c->at[i].margins.n_margins; k++)
            put_margin(j, s, &c->at[i], c->of_screen, &c->at[i].margins.margins[k]);
    tacet_json_end_array(j);
}
