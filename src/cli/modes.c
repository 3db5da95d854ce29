// tacet modes: frequencies and shapes of the train, and where orders meet them.
#include "cli/modes.h"

static int solve(const cli_call *call, const cli_session *s)
{
    modes m = {.s = s, .train = tacet_model_train(s->model)};
    m.n = tacet_train_nodes(m.train);
    m.hz = tacet_arena_alloc(s->arena, m.n * sizeof *m.hz);
    m.shape = tacet_arena_alloc(s->arena, m.n * m.n * sizeof *m.shape);
    tacet_status status =
        m.hz && m.shape ? tacet_train_modes(m.train, m.hz, m.shape) : TACET_NO_MEMORY;
    if (status != TACET_OK) return cli_failed(status, NULL);
    int code = cli_leading_orders(s, &m.order, &m.n_orders);
    if (code != CLI_DONE) return code;
    code = modes_find_body(&m);
    if (code != CLI_DONE) return code;
    if (cli_given(call, "json")) return modes_write_json(&m);
    return cli_given(call, "csv") ? modes_write_csv(call, &m) : modes_write_text(call, &m);
}

static int run(const cli_call *call)
{
    cli_session s;
    const char *node = cli_value(call, "response");
    if (!node && cli_given(call, "frequencies"))
        return cli_wrong("--frequencies needs --response NODE; modes have their own frequencies");
    int code = cli_open(call->operand[0], CLI_ASSEMBLED, &s);
    if (code == CLI_DONE) code = node ? cli_response(call, &s, node) : solve(call, &s);
    return cli_close(&s, code);
}

static const cli_example examples[] = {
    {"tacet modes my.yaml", "frequencies, shapes, and the speeds at which orders meet them"},
    {"tacet modes my.yaml --response flywheel --csv > flywheel.csv",
     "angle of the flywheel, and torque of every link, for 1 N m there"},
    {NULL, NULL}};
static const cli_option options[] = {
    {"response", 0, "NODE", NULL, "response to 1 N m at this node instead of the modes"},
    {"frequencies", 0, "FROM:TO:STEP", NULL,
     "of the response, Hz (to a little over the highest mode, in 4000 steps)"},
    CLI_OPTION_JSON,
    CLI_OPTION_CSV,
    CLI_OPTION_NO_COLOR,
    CLI_OPTION_END};
const cli_command cli_modes_command = {
    .name = "modes",
    .operands = "STUDY",
    .doc = "modes of the train and of the body on its mounts, criticals, unit response",
    .about = "Undamped modes with the mean reciprocating inertia in the throws. Criticals are the "
             "speeds at\nwhich the leading order of a density, or a multiple of the firing order, "
             "meets a mode.\n",
    .examples = examples,
    .options = options,
    .least_operands = 1,
    .most_operands = 1,
    .run = run,
};
