// tacet keys: every key of a study, from the field tables.
#include "cli/keys.h"
#include "cli/cli.h"
#include <string.h>

#define KEYS_MOST 512

static const tacet_table_column columns[] = {
    {.name = "key", .text = true},
    {.name = "unit", .text = true},
    {.name = "default", .text = true},
    {.name = "range", .text = true},
    {.name = "kind", .text = true, .data_only = true},
    {.name = "meaning", .text = true},
};
static const tacet_table_column quantity_columns[] = {
    {.name = "quantity", .text = true},
    {.name = "unit", .text = true},
    {.name = "meaning", .text = true},
};
#define N(c) (sizeof(c) / sizeof *(c))

typedef struct {
    const char *section; // "": all
    tacet_arena *arena;
    cli_rows rows;
    const char *names[KEYS_MOST]; // of sections, for near names
    size_t n_names;
} listing;

// Is the key the section itself or inside it? Brackets need not be written.
static bool inside(const char *path, const char *section)
{
    while (*section) {
        if (*path != *section && strncmp(path, "[]", 2) == 0) path += 2;
        if (*path++ != *section++) return false;
    }
    return *path == '\0' || *path == '.' || *path == '[';
}

static void tell(void *who, const cli_key *k)
{
    listing *l = who;
    if (strncmp(k->kind, "section", 7) == 0 && l->n_names < KEYS_MOST) {
        char *name = tacet_arena_text(l->arena, k->path), *end = name ? strstr(name, "[]") : NULL;
        if (end && end[2] == '\0') *end = '\0';
        if (name) l->names[l->n_names++] = name;
    }
    if (*l->section && !inside(k->path, l->section)) return;
    cli_put_text(&l->rows, cli_text(l->arena, "%s", k->path));
    cli_put_text(&l->rows, k->unit ? k->unit : "");
    cli_put_text(&l->rows, cli_text(l->arena, "%s", k->fallback));
    cli_put_text(&l->rows, cli_text(l->arena, "%s", k->range));
    cli_put_text(&l->rows, k->kind);
    cli_put_text(&l->rows, k->doc);
}

static const tacet_table *quantities(tacet_arena *a, cli_rows *rows)
{
    const tacet_quantity *q = tacet_quantities();
    *rows = cli_rows_start(a, "quantities", "What a band or a limit may judge", quantity_columns,
                           N(quantity_columns), 32);
    for (; q->name; q++) {
        cli_put_text(rows, cli_text(a, "%s%s", q->name, tacet_target_form(q->target)));
        cli_put_text(rows, q->unit ? q->unit : "");
        cli_put_text(rows, q->doc);
    }
    return cli_rows_end(rows);
}

static void write_json(const tacet_table *keys, const tacet_table *judged)
{
    tacet_json j = tacet_json_start(stdout);
    tacet_json_head(&j, "keys", NULL, "ok");
    const tacet_table *tables[] = {keys, judged};
    for (size_t t = 0; t < 2; t++) {
        tacet_json_key(&j, tables[t]->name);
        tacet_json_begin_array(&j);
        for (size_t r = 0; r < tables[t]->n_rows; r++) {
            tacet_json_begin_object(&j);
            for (size_t c = 0; c < tables[t]->n_columns; c++)
                tacet_json_put_text(&j, tables[t]->columns[c].name,
                                    tables[t]->cells[r * tables[t]->n_columns + c].text);
            tacet_json_end_object(&j);
        }
        tacet_json_end_array(&j);
    }
    (void)cli_end_json(&j);
}

static int no_section(const listing *l)
{
    const char *near = tacet_near_name(l->section, l->names, l->n_names);
    char all[400] = "";
    for (size_t i = 0; i < l->n_names; i++)
        if (!strchr(l->names[i], '.')) {
            size_t used = strlen(all);
            snprintf(all + used, sizeof all - used, "%s%s", used ? ", " : "", l->names[i]);
        }
    return near ? cli_wrong("no section or key '%s'; did you mean '%s'?", l->section, near)
                : cli_wrong("no section or key '%s'; sections are %s", l->section, all);
}

static int list(const cli_call *call, tacet_arena *a)
{
    listing l = {.section = call->n_operands ? call->operand[0] : "", .arena = a};
    l.rows = cli_rows_start(a, "keys", NULL, columns, N(columns), KEYS_MOST);
    cli_keys_walk(tacet_study_keys(), tell, &l);
    cli_rows rows;
    const tacet_table *keys = cli_rows_end(&l.rows), *judged = quantities(a, &rows);
    if (!keys || !judged) return cli_failed(TACET_NO_MEMORY, NULL);
    if (keys->n_rows == 0) return no_section(&l);
    if (cli_given(call, "json")) {
        write_json(keys, judged);
        return CLI_DONE;
    }
    cli_write_table(call, keys);
    bool judging = !*l.section || inside("bands", l.section) || inside("limits", l.section);
    if (!judging || cli_given(call, "csv")) return CLI_DONE;
    fputc('\n', stdout);
    cli_write_table(call, judged);
    return CLI_DONE;
}

static int run(const cli_call *call)
{
    tacet_arena *a = tacet_arena_create();
    int code = a ? list(call, a) : cli_failed(TACET_NO_MEMORY, NULL);
    return cli_arena_end(a, code);
}

static const cli_example examples[] = {
    {"tacet keys train.links", "the keys of one section"},
    {"tacet keys bands", "the keys of bands, and the quantities that can be judged"},
    {"tacet keys", "every key"},
    {NULL, NULL}};
static const cli_option options[] = {CLI_OPTION_JSON, CLI_OPTION_CSV, CLI_OPTION_NO_COLOR,
                                     CLI_OPTION_END};
const cli_command cli_keys_command = {
    .name = "keys",
    .operands = "[SECTION]",
    .doc = "every key of a study: unit, default, range, meaning",
    .about = "Lists the keys from the same table that reads a study. 'required' must be given, "
             "'none' may be\nabsent. A curve is a number or a list of points [[x, y], ..]; [] "
             "stands for a list of sections.\n",
    .examples = examples,
    .options = options,
    .most_operands = 1,
    .run = run,
};
