// tacet screen: the main job.
#include "cli/scatter.h"

static const char *const formats[] = {"svg", "png", "none", NULL};

static int write_out(const cli_call *call, const cli_session *s, const tacet_screen *screen,
                     const cli_scatter *scatter)
{
    tacet_table t;
    tacet_status status;
    if (cli_given(call, "json")) {
        tacet_json j = tacet_json_start(stdout);
        tacet_json_head(&j, "screen", s->study, screen->n_failed ? "some failed" : "ok");
        status = tacet_screen_json(&j, s->model, screen);
        cli_scatter_json(&j, s, scatter);
        return status == TACET_OK ? cli_end_json(&j) : cli_failed(status, NULL);
    }
    if (!cli_given(call, "csv")) {
        tacet_table_style style = {.colour = cli_colour(call)};
        status = tacet_screen_print(s->model, screen, &style, stdout);
        if (status == TACET_OK) return cli_scatter_text(call, s, scatter);
    } else {
        status = tacet_screen_table_find("levels")->build(s->model, screen, s->arena, &t);
        if (status == TACET_OK) cli_write_table(call, &t);
    }
    return status == TACET_OK ? CLI_DONE : cli_failed(status, NULL);
}

static int save(const cli_call *call, const cli_session *s, const tacet_screen *screen,
                tacet_folder *folder)
{
    tacet_error e = {.text = ""}, drawings = {.status = TACET_OK};
    tacet_draw_how how = tacet_draw_default();
    how.format = tacet_drawing_format_find(cli_value(call, "drawings"));
    bool none = !how.format;
    if (none) { // the scripts are written, nothing is drawn
        how = tacet_draw_default();
        how.time_limit_s = 0;
    }
    tacet_status status = tacet_screen_save(s->model, screen, s->work, folder, &how, &drawings, &e);
    if (status != TACET_OK) return cli_failed(status, &e);
    int code =
        drawings.status == TACET_OK || none ? CLI_DONE : cli_failed(drawings.status, &drawings);
    fflush(stdout);
    if (code == CLI_DONE && !none)
        cli_say("look first at %s/map.%s, then summary.csv; every condition is in levels.csv",
                tacet_folder_path(folder), how.format->extension);
    else
        cli_say("look first at %s/summary.txt, then summary.csv; every condition is in levels.csv",
                tacet_folder_path(folder));
    return code;
}

static int answer(const cli_call *call, const tacet_screen *screen)
{
    if (screen->n_failed > 0) {
        cli_say("%zu conditions failed; their rows say why", screen->n_failed);
        return CLI_SOME_FAILED;
    }
    for (size_t i = 0; cli_given(call, "strict") && i < screen->n_ranks; i++)
        if (screen->ranks[i].best == SIZE_MAX) return CLI_ANSWER_IS_NO;
    return CLI_DONE;
}

static int write_all(const cli_call *call, const cli_session *s, const tacet_screen *screen,
                     const cli_scatter *scatter, tacet_folder *folder)
{
    int code = write_out(call, s, screen, scatter);
    if (code == CLI_DONE && folder) code = save(call, s, screen, folder);
    if (code == CLI_DONE && folder) code = cli_scatter_save(s, scatter, folder);
    if (code == CLI_DONE || code == CLI_OUTSIDE_WORLD) code = cli_worse(code, answer(call, screen));
    return code;
}

static int screen_study(const cli_call *call, const cli_session *s, cli_scatter *scatter,
                        tacet_folder *folder)
{
    tacet_error e = {.text = ""};
    tacet_screen *screen = NULL;
    tacet_problems *problems = tacet_problems_create();
    if (!problems) return cli_failed(TACET_NO_MEMORY, NULL);
    cli_progress progress = cli_progress_start();
    tacet_watch watch = {cli_progress_step, &progress, cli_stop()};
    tacet_status status = tacet_screen_run(s->model, &watch, &screen, problems, &e);
    cli_progress_end(&progress);
    cli_say_problems(problems);
    bool said = tacet_problems_errors(problems) > 0;
    tacet_problems_destroy(problems);
    if (status == TACET_STOPPED) {
        cli_say("%s; nothing was written", e.text);
        return CLI_DONE; // the signal is raised again
    }
    if (status != TACET_OK) return said ? cli_exit_of(status) : cli_failed(status, &e);
    int code = cli_scatter_screen(s, screen, cli_stop(), scatter);
    if (code == CLI_DONE && !*cli_stop()) code = write_all(call, s, screen, scatter, folder);
    tacet_screen_destroy(screen);
    return code;
}

static int run(const cli_call *call)
{
    cli_session s;
    char path[4096];
    int format;
    cli_scatter scatter = {.n = 0};
    tacet_folder *folder = NULL;
    int code = cli_choice(call, "drawings", formats, &format);
    if (code != CLI_DONE) return code;
    cli_folder_name(call, "screen", sizeof path, path);
    code = cli_open(call->operand[0], CLI_READ, &s);
    cli_catch_signals(); // a study that does not come may be waited for no longer
    if (code == CLI_DONE && cli_given(call, "scatter")) {
        code = cli_deepen(&s, CLI_ASSEMBLED);
        if (code == CLI_DONE) code = cli_scatter_read(call, &s, &scatter);
    }
    if (code == CLI_DONE && *path) code = cli_folder(path, "point.json", &folder);
    if (code == CLI_DONE) {
        double rpm[2];
        cli_screened_rpm(&s, rpm);
        cli_say("screening %s: %zu speeds from %g to %g rpm", cli_title(&s),
                s.study->screen.n_speeds, rpm[0], rpm[1]);
        code = cli_deepen(&s, CLI_PREPARED);
    }
    if (code == CLI_DONE) code = screen_study(call, &s, &scatter, folder);
    tacet_folder_close(folder);
    return cli_close(&s, code);
}

static const cli_example examples[] = {
    {"tacet screen my.yaml", "what may run where; tables and drawings go into ./my-screen/"},
    {"tacet screen my.yaml -o friday --drawings png", "the same into the folder friday, as PNG"},
    {"tacet screen my.yaml --json > my.json", "everything as JSON, no files"},
    {NULL, NULL}};
static const cli_option options[] = {
    {"output", 'o', "FOLDER", NULL,
     "where results go (./STUDY-screen; with --json or --csv nowhere)"},
    {"drawings", 0, "FORMAT", "svg", "svg, png or none"},
    {"json", 0, NULL, NULL, "write everything as JSON to standard output"},
    {"csv", 0, NULL, NULL, "write every condition as CSV to standard output"},
    CLI_OPTION_SCATTER,
    CLI_OPTION_STRICT,
    CLI_OPTION_NO_COLOR,
    CLI_OPTION_END};
const cli_command cli_screen_command = {
    .name = "screen",
    .operands = "STUDY",
    .doc = "the main job: which densities may run where, and what that rests on",
    .about = "Solves every density and pattern of the study at every speed, finds the exact speeds "
             "at which\nlevels go over their limits, ranks what is clear by fuel, and solves the "
             "worst conditions again\nby a second method. The folder gets map, orders, bars and "
             "repeat (drawings), summary.txt,\nruns.csv, summary.csv, ranking.csv, no-go.csv, "
             "agreement.csv, levels.csv and screen.json;\nof a study with a body on mounts also "
             "modes, forces and paths (drawings) and mounts.csv, the\nworst force of each mount, "
             "axis and order of all patterns;\nwith --scatter also scatter.csv. With --strict the "
             "exit code is 1 when some speed has "
             "no clear pattern as stated;\na scatter does not change that.\n",
    .examples = examples,
    .options = options,
    .least_operands = 1,
    .most_operands = 1,
    .run = run,
};
