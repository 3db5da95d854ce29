// Words on standard error, and what an exit code stands for.
#include "cli/cli.h"
#include <stdarg.h>
#include <string.h>

int cli_worse(int a, int b)
{
    return a > b ? a : b;
}

int cli_exit_of(tacet_status status)
{
    switch (status) {
    case TACET_OK:
    case TACET_STOPPED: // the signal is raised again
        return CLI_DONE;
    case TACET_BAD_INPUT:
        return CLI_WRONG;
    case TACET_NOT_CONVERGED:
    case TACET_NOT_FINITE:
    case TACET_HARMONIC_ONLY:
        return CLI_SOME_FAILED;
    case TACET_NO_MEMORY:
    case TACET_OUTSIDE_WORLD:
        break;
    }
    return CLI_OUTSIDE_WORLD;
}

static void say(const char *format, va_list args)
{
    char text[1024];
    vsnprintf(text, sizeof text, format, args);
    fputs("tacet: ", stderr);
    tacet_write_clean(stderr, text);
    fputc('\n', stderr);
}

void cli_say(const char *format, ...)
{
    va_list args;
    va_start(args, format);
    say(format, args);
    va_end(args);
}

int cli_wrong(const char *format, ...)
{
    va_list args;
    va_start(args, format);
    say(format, args);
    va_end(args);
    return CLI_WRONG;
}

int cli_failed(tacet_status status, const tacet_error *e)
{
    cli_say("%s", e && *e->text ? e->text : tacet_status_text(status));
    return cli_exit_of(status);
}

void cli_say_problems(const tacet_problems *p)
{
    size_t kept[2] = {0, 0};
    for (size_t i = 0; i < tacet_problems_kept(p); i++) {
        const tacet_problem *one = tacet_problems_at(p, i);
        kept[one->warning]++;
        tacet_write_clean(stderr, one->file);
        if (one->line > 0) fprintf(stderr, ":%d", one->line);
        if (one->line > 0 && one->column > 0) fprintf(stderr, ":%d", one->column);
        fprintf(stderr, ": %s: ", one->warning ? "warning" : "error");
        tacet_write_clean(stderr, one->text);
        fputc('\n', stderr);
    }
    if (tacet_problems_errors(p) > kept[false])
        cli_say("%zu more errors", tacet_problems_errors(p) - kept[false]);
    if (tacet_problems_warnings(p) > kept[true])
        cli_say("%zu more warnings", tacet_problems_warnings(p) - kept[true]);
}
