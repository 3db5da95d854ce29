// A study at work: read, assembled, prepared.
#include "cli/cli.h"
#include <string.h>
#include <unistd.h>

const char *cli_study_name(const char *path)
{
    return strcmp(path, "-") == 0 ? "standard input" : path;
}

const char *cli_title(const cli_session *s)
{
    return s->study->title && *s->study->title ? s->study->title : "untitled study";
}

static int read_study(const char *path, cli_session *s)
{
    tacet_status status = tacet_study_read(path, s->problems, &s->study);
    cli_say_problems(s->problems);
    if (status == TACET_OK) return CLI_DONE;
    size_t n = tacet_problems_errors(s->problems);
    if (n == 0 || status == TACET_NO_MEMORY) return cli_failed(status, NULL);
    if (status == TACET_BAD_INPUT)
        cli_say("%s: %zu error%s, nothing was done", cli_study_name(path), n, n == 1 ? "" : "s");
    return cli_exit_of(status);
}

// What the model refuses at a place in the study, as what the reader refuses there.
static int refused(const char *path, const tacet_error *e)
{
    tacet_problems *one = tacet_problems_create();
    if (!one) return cli_failed(TACET_NO_MEMORY, NULL);
    tacet_problems_add(one, false, path, e->line, e->column, "%s", e->text);
    cli_say_problems(one);
    tacet_problems_destroy(one);
    cli_say("%s: 1 error, nothing was done", path);
    return cli_exit_of(e->status);
}

int cli_deepen(cli_session *s, cli_depth depth)
{
    tacet_error e = {.text = ""};
    tacet_status status = TACET_OK;
    if (depth >= CLI_ASSEMBLED && !s->model) status = tacet_model_create(s->study, &s->model, &e);
    if (status == TACET_OK && depth == CLI_PREPARED) {
        tacet_model_watch(s->model, cli_stop());
        status = tacet_model_prepare(s->model, &e);
        if (status == TACET_OK) status = tacet_workspace_create(s->model, &s->work);
    }
    if (status == TACET_STOPPED) { // the signal is raised again
        cli_say("%s; nothing was written", e.text);
        return CLI_OUTSIDE_WORLD;
    }
    if (status != TACET_OK && e.line > 0) return refused(cli_study_name(s->study->path), &e);
    return status == TACET_OK ? CLI_DONE : cli_failed(status, &e);
}

int cli_open(const char *path, cli_depth depth, cli_session *s)
{
    *s = (cli_session){.problems = tacet_problems_create(), .arena = tacet_arena_create()};
    if (!s->problems || !s->arena) return cli_failed(TACET_NO_MEMORY, NULL);
    int code = read_study(path, s);
    return code == CLI_DONE ? cli_deepen(s, depth) : code;
}

int cli_close(cli_session *s, int code)
{
    tacet_workspace_destroy(s->work);
    tacet_model_destroy(s->model);
    tacet_study_destroy(s->study);
    tacet_problems_destroy(s->problems);
    return cli_arena_end(s->arena, code);
}

int cli_folder(const char *path, const char *foreign, tacet_folder **out)
{
    char name[4200];
    tacet_error e = {.text = ""};
    snprintf(name, sizeof name, "%s/%s", path, foreign);
    if (access(name, F_OK) == 0)
        return cli_wrong("folder %s holds the results of another command (%s); give an empty or a "
                         "new folder",
                         path, foreign);
    tacet_status status = tacet_folder_open(path, out, &e);
    return status == TACET_OK ? CLI_DONE : cli_failed(status, &e);
}

void cli_folder_name(const cli_call *call, const char *what, size_t size, char *out)
{
    const char *study = call->operand[0], *slash = strrchr(study, '/');
    *out = '\0';
    if (cli_given(call, "output")) {
        snprintf(out, size, "%s", cli_value(call, "output"));
    } else if (!cli_given(call, "json") && !cli_given(call, "csv")) {
        const char *name = strcmp(study, "-") == 0 ? "study" : slash ? slash + 1 : study;
        const char *dot = strrchr(name, '.');
        int n = dot && dot > name ? (int)(dot - name) : (int)strlen(name);
        snprintf(out, size, "%.*s-%s", n, name, what);
    }
}
