// tacet point: one condition in full.
#include "cli/point.h"
#include <math.h>

static const char *const levels[] = {"constant", "ripple", "steady", NULL};
static const char *const formats[] = {"svg", "png", "none", NULL};

// Speed, demand and level as asked for.
static int read_condition(const cli_call *call, point *p)
{
    double rpm = 0, demand = 0;
    int level = 0, format = 0;
    if (!cli_given(call, "speed"))
        return cli_wrong("point needs --speed RPM; for example: %s",
                         call->command->examples[0].line);
    int code = cli_number(call, "speed", 1, 100000, "rpm", &rpm);
    p->condition.speed_rad_per_s = rpm * tacet_unit_factor("rpm");
    if (code == CLI_DONE && cli_given(call, "demand"))
        code = cli_number(call, "demand", -1e6, 1e6, "N m", &demand);
    else if (code == CLI_DONE)
        demand = tacet_model_demand(p->s->model, p->condition.speed_rad_per_s);
    p->condition.demand_Nm = demand;
    if (code == CLI_DONE) code = cli_choice(call, "level", levels, &level);
    if (code == CLI_DONE) code = cli_choice(call, "drawings", formats, &format);
    p->level = (tacet_level)level;
    return code;
}

static int write_out(point *p)
{
    if (cli_given(p->call, "json")) return point_write_json(p, stdout);
    return cli_given(p->call, "csv") ? point_write_csv(p) : point_write_text(p);
}

static int answer(const point *p)
{
    if (p->row.outcome == TACET_FAILED) {
        cli_say("%s could not be solved: %s", p->candidate->name, tacet_status_text(p->row.why));
        return CLI_SOME_FAILED;
    }
    bool no = cli_given(p->call, "strict") && p->row.worst != TACET_CLEAR;
    return no ? CLI_ANSWER_IS_NO : CLI_DONE;
}

static int scatter(point *p)
{
    if (p->row.outcome != TACET_SOLVED) return CLI_DONE;
    const cli_scattered condition = {.candidate = p->candidate,
                                     .speed_rad_per_s = p->condition.speed_rad_per_s,
                                     .demand_Nm = p->condition.demand_Nm,
                                     .level = p->level};
    return cli_scatter_point(p->s, &condition, &p->scatter);
}

static int solve(const cli_call *call, const cli_session *s)
{
    point p = {.call = call, .s = s};
    cli_candidate c;
    int code = read_condition(call, &p);
    if (code != CLI_DONE) return code;
    code = cli_scatter_read(call, s, &p.scatter);
    if (code != CLI_DONE) return code;
    code = cli_candidate_of(call, s, &c);
    p.candidate = c.it;
    if (code == CLI_DONE) code = point_solve(&p);
    if (code == CLI_DONE) code = scatter(&p);
    if (code == CLI_DONE && cli_given(call, "referee") && p.row.outcome == TACET_SOLVED) {
        p.refereed = true;
        p.referee_status = tacet_solve_referee(s->model, &p.condition, s->work, &p.agreement);
        if (p.referee_status == TACET_NO_MEMORY) code = cli_failed(TACET_NO_MEMORY, NULL);
    }
    if (code == CLI_DONE) code = write_out(&p);
    if (code == CLI_DONE && cli_given(call, "output"))
        code = point_save(&p, cli_value(call, "output"));
    if (code == CLI_DONE || code == CLI_OUTSIDE_WORLD) code = cli_worse(code, answer(&p));
    cli_candidate_clear(&c);
    return code;
}

static int run(const cli_call *call)
{
    cli_session s;
    int code = cli_open(call->operand[0], CLI_PREPARED, &s);
    if (code == CLI_DONE) code = solve(call, &s);
    return cli_close(&s, code);
}

static const cli_example examples[] = {
    {"tacet point my.yaml --density 1/2 --speed 1400",
     "half density at 1400 rpm, at the study's own torque there"},
    {"tacet point my.yaml --pattern x.x..x --speed 1400 --demand 80 -o half",
     "a word with its rotation, at 80 N m; drawings and CSV go into the folder half"},
    {"tacet point my.yaml --density 1/2 --speed 1400 --referee",
     "also solve by the second method, and say how well the two agree"},
    {"tacet point my.yaml --density 1/2 --speed 1400 --scatter coupling=10%",
     "also the least margins while the link coupling is up to 10 % stiffer or softer"},
    {NULL, NULL}};
static const cli_option options[] = {
    {"density", 0, "K/L", NULL, "evenly spread; the worst of its placements is shown"},
    {"pattern", 0, "PATTERN", NULL, "WORD, BOOK.words:NAME, or the name of a pattern of the study"},
    {"speed", 0, "RPM", NULL, "mean crank speed; needed"},
    {"demand", 0, "NM", NULL, "brake torque (the study's at that speed)"},
    {"level", 0, "LEVEL", "ripple", "constant speed, with speed ripple, or steady by march"},
    CLI_OPTION_SCATTER,
    {"referee", 0, NULL, NULL, "solve again by march, print how well the solvers agree"},
    {"output", 'o', "FOLDER", NULL, "write drawings, lines.csv and point.json there"},
    {"drawings", 0, "FORMAT", "svg", "svg, png or none"},
    CLI_OPTION_JSON,
    CLI_OPTION_CSV,
    CLI_OPTION_STRICT,
    CLI_OPTION_NO_COLOR,
    CLI_OPTION_END};
_Static_assert(sizeof options / sizeof *options <= CLI_OPTIONS_MOST + 1,
               "more options than a call holds");
const cli_command cli_point_command = {
    .name = "point",
    .operands = "STUDY",
    .doc = "one pattern at one speed and torque, in full",
    .about = "The verdict comes first, then charge and fuel, bands, limits, and the largest lines "
             "of every\njudged quantity beside those of the engine firing on all cylinders. Bands "
             "tell also what one\ndead cylinder would do. With a body: the mount forces by order, "
             "what reaches each point by which\npath, and comfort. With --strict the exit code is "
             "1 when the verdict is not clear as stated; a scatter does not change that.\n",
    .examples = examples,
    .options = options,
    .least_operands = 1,
    .most_operands = 1,
    .run = run,
};
