// What a call means by --density or --pattern: a candidate as a screen of the study would make it.
#include "cli/cli.h"
#include <string.h>

static int create(const cli_session *s, const tacet_study *asked, tacet_candidate **out, size_t *n)
{
    tacet_error e = {.text = ""};
    tacet_problems *p = tacet_problems_create();
    if (!p) return cli_failed(TACET_NO_MEMORY, NULL);
    tacet_status status =
        tacet_candidates_create(asked, tacet_model_engine(s->model), s->arena, p, out, n, &e);
    cli_say_problems(p);
    bool said = tacet_problems_errors(p) > 0;
    tacet_problems_destroy(p);
    if (status == TACET_OK) return CLI_DONE;
    return said ? cli_exit_of(status) : cli_failed(status, &e);
}

int cli_study_candidates(const cli_session *s, tacet_candidate **out, size_t *n)
{
    return create(s, s->study, out, n);
}

// The study's own screen, but for one density and the word or book that is asked for.
static int create_one(const cli_session *s, const char *density, const char *pattern,
                      cli_candidate *out)
{
    tacet_study asked = *s->study;
    asked.screen.densities.list = &density;
    asked.screen.densities.n_list = 1;
    asked.screen.patterns = &pattern;
    asked.screen.n_patterns = pattern ? 1 : 0;
    asked.folder = NULL; // a book on the command line is relative to the working folder
    asked.path = "--pattern";
    return create(s, &asked, &out->all, &out->n);
}

static int not_found(const char *name, const cli_candidate *c)
{
    const char *names[256];
    size_t n = 0;
    for (size_t i = 0; c->all && i < c->n && n < 256; i++)
        names[n++] = c->all[i].name;
    const char *near = tacet_near_name(name, names, n);
    if (near) return cli_wrong("--pattern '%s': did you mean '%s'?", name, near);
    return cli_wrong("--pattern '%s' is no word (x fires, . skips, 1..9 tenths of the charge), no "
                     "BOOK.words:NAME and no name of a pattern of the study",
                     name);
}

static int of_pattern(const cli_session *s, const char *text, cli_candidate *out)
{
    tacet_pattern word;
    int code;
    if (tacet_pattern_parse(text, &word, NULL) == TACET_OK || strstr(text, ".words:")) {
        code = create_one(s, "1", text, out); // all-fire first, then what is asked for
        out->it = code == CLI_DONE && out->n == 2 ? &out->all[1] : NULL;
    } else {
        code = cli_study_candidates(s, &out->all, &out->n);
        for (size_t i = 0; code == CLI_DONE && i < out->n; i++)
            if (strcmp(out->all[i].name, text) == 0) out->it = &out->all[i];
    }
    return code != CLI_DONE || out->it ? code : not_found(text, out);
}

int cli_candidate_of(const cli_call *call, const cli_session *s, cli_candidate *out)
{
    const char *density = cli_value(call, "density"), *pattern = cli_value(call, "pattern");
    unsigned fires, length;
    *out = (cli_candidate){.it = NULL};
    if (density && pattern) return cli_wrong("--density and --pattern: only one of them");
    if (!density && !pattern)
        return cli_wrong("%s needs --density K/L or --pattern WORD; for example: %s",
                         call->command->name, call->command->examples[0].line);
    int code = CLI_DONE;
    if (pattern)
        code = of_pattern(s, pattern, out);
    else if (!tacet_density_parse(density, &fires, &length) || fires == 0)
        code = cli_wrong("--density '%s': k/L with 1 <= k <= L <= %d is allowed, or 1", density,
                         TACET_PATTERN_LONGEST);
    else if ((code = create_one(s, density, NULL, out)) == CLI_DONE)
        out->it = &out->all[0];
    if (code != CLI_DONE || !out->it) return code;
    if (out->it->refused)
        return cli_wrong("%s cannot run on this engine: %s", out->it->name, out->it->refused);
    return CLI_DONE;
}

void cli_candidate_clear(cli_candidate *c)
{
    tacet_candidates_destroy(c->all, c->n);
    *c = (cli_candidate){.it = NULL};
}
