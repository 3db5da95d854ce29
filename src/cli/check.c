// tacet check: all that is wrong with a study, or its model in some fifteen lines.
#include "cli/check.h"

#define VALUES_MOST 4096

static const tacet_table_column columns[] = {
    {.name = "key", .text = true},
    {.name = "value", .text = true},
    {.name = "unit", .text = true},
    {.name = "from", .text = true},
};

typedef struct {
    tacet_arena *arena;
    cli_rows rows;
} values;

static void tell(void *who, const char *path, const char *value, const char *unit, tacet_from from)
{
    static const char *const text[] = {"given", "default", "computed", "absent"};
    values *v = who;
    cli_put_text(&v->rows, cli_text(v->arena, "%s", path));
    cli_put_text(&v->rows, cli_text(v->arena, "%s", value ? value : ""));
    cli_put_text(&v->rows, unit ? unit : "");
    cli_put_text(&v->rows, text[from]);
}

// NULL: no memory, said.
static const tacet_table *list_values(const cli_session *s, values *v)
{
    *v = (values){.arena = s->arena};
    v->rows = cli_rows_start(s->arena, "values", NULL, columns, 4, VALUES_MOST);
    tacet_status status = tacet_study_values(s->study, tell, v);
    const tacet_table *t = status == TACET_OK ? cli_rows_end(&v->rows) : NULL;
    if (!t) (void)cli_failed(status == TACET_OK ? TACET_NO_MEMORY : status, NULL);
    return t;
}

static void put_problems(tacet_json *j, const tacet_problems *p)
{
    tacet_json_key(j, "problems");
    tacet_json_begin_array(j);
    for (size_t i = 0; i < tacet_problems_kept(p); i++) {
        const tacet_problem *one = tacet_problems_at(p, i);
        tacet_json_begin_object(j);
        tacet_json_put_text(j, "kind", one->warning ? "warning" : "error");
        tacet_json_put_text(j, "file", one->file);
        tacet_json_put_count(j, "line", (uint64_t)(one->line > 0 ? one->line : 0));
        tacet_json_put_count(j, "column", (uint64_t)(one->column > 0 ? one->column : 0));
        tacet_json_put_text(j, "text", one->text);
        tacet_json_end_object(j);
    }
    tacet_json_end_array(j);
}

static void put_values(tacet_json *j, const tacet_table *t)
{
    tacet_json_key(j, "values");
    tacet_json_begin_array(j);
    for (size_t r = 0; r < t->n_rows; r++) {
        tacet_json_begin_object(j);
        for (size_t c = 0; c < t->n_columns; c++)
            tacet_json_put_text(j, t->columns[c].name, t->cells[r * t->n_columns + c].text);
        tacet_json_end_object(j);
    }
    tacet_json_end_array(j);
}

// Also of a study that does not hold: then with its problems alone.
static int write_json(const cli_call *call, const cli_session *s, const check_model *m)
{
    values v;
    const tacet_table *t = NULL;
    if (m && cli_given(call, "values") && !(t = list_values(s, &v)))
        return cli_exit_of(TACET_NO_MEMORY);
    tacet_json j = tacet_json_start(stdout);
    tacet_json_head(&j, "check", s->study, m ? "ok" : "bad input");
    put_problems(&j, s->problems);
    if (m) check_put_json(&j, m);
    if (t) put_values(&j, t);
    return cli_end_json(&j);
}

static int write_out(const cli_call *call, const cli_session *s, const check_model *m)
{
    values v;
    if (cli_given(call, "json")) return write_json(call, s, m);
    bool csv = cli_given(call, "csv");
    if (csv && !cli_given(call, "values")) return cli_wrong("--csv needs --values");
    if (!csv) check_write_text(m);
    if (!cli_given(call, "values")) return CLI_DONE;
    const tacet_table *t = list_values(s, &v);
    if (!t) return cli_exit_of(TACET_NO_MEMORY);
    if (!csv) fputc('\n', stdout);
    cli_write_table(call, t);
    return CLI_DONE;
}

static int run(const cli_call *call)
{
    cli_session s;
    check_model m;
    int code = cli_open(call->operand[0], CLI_ASSEMBLED, &s);
    if (code == CLI_WRONG && s.problems && cli_given(call, "json"))
        (void)write_json(call, &s, NULL);
    if (code == CLI_DONE) code = check_gather(&s, &m);
    if (code == CLI_DONE) code = write_out(call, &s, &m);
    if (code == CLI_DONE && cli_given(call, "strict") && tacet_problems_warnings(s.problems) > 0)
        code = CLI_ANSWER_IS_NO;
    return cli_close(&s, code);
}

static const cli_example examples[] = {
    {"tacet check my.yaml", "everything that is wrong, or the model in some fifteen lines"},
    {"tacet check my.yaml --values", "besides, every key: given, default or computed"},
    {NULL, NULL}};
static const cli_option options[] = {
    {"values", 0, NULL, NULL, "list every key with its value and where that came from"},
    CLI_OPTION_JSON,
    {"csv", 0, NULL, NULL, "with --values: write them as CSV"},
    {"strict", 0, NULL, NULL, "end with exit code 1 when there are warnings"},
    CLI_OPTION_NO_COLOR,
    CLI_OPTION_END};
const cli_command cli_check_command = {
    .name = "check",
    .operands = "STUDY",
    .doc = "what is wrong with a study, or its model in some fifteen lines",
    .about = "All problems in one go, each with its place in the file. A study that holds is "
             "summed up: firing\nangles, inertia with and without the reciprocating share, modes, "
             "lines of each repeat, and the\nspeeds at which leading orders meet modes.\n",
    .examples = examples,
    .options = options,
    .least_operands = 1,
    .most_operands = 1,
    .run = run,
};
