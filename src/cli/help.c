// Help, from the table of commands. Examples come first.
#include "cli/cli.h"
#include <string.h>

void cli_overview(FILE *to)
{
    fputs("tacet screens skip-fire patterns: which firing densities of an engine may run at which\n"
          "speed and torque, with which pattern, at what fuel, and on what evidence.\n"
          "\n"
          "  tacet example > my.yaml                            a commented study that runs\n"
          "  tacet check my.yaml                                all problems, or the model in 15 "
          "lines\n"
          "  tacet screen my.yaml                               the main job: what may run where\n"
          "  tacet point my.yaml --density 1/2 --speed 1400     one condition in full\n"
          "  tacet keys bands                                   what may stand in a study\n"
          "\n"
          "Also: modes, patterns, help. Each tells more about itself: tacet help COMMAND.\n"
          "Start with the first line, put your own numbers into my.yaml, then go down the list.\n"
          "What it says is a screening result, not a release: confirm it by measurement.\n",
          to);
}

void cli_option_head(const cli_option *o, size_t size, char *out)
{
    char letter[8] = "";
    if (o->letter) snprintf(letter, sizeof letter, "-%c, ", o->letter);
    snprintf(out, size, "%s--%s%s%s", letter, o->name, o->argument ? " " : "",
             o->argument ? o->argument : "");
}

static void write_option(const cli_option *o, int width, FILE *to)
{
    char head[80];
    cli_option_head(o, sizeof head, head);
    fprintf(to, "  %-*s %s", width, head, o->doc);
    if (o->fallback) fprintf(to, " (default %s)", o->fallback);
    fputc('\n', to);
}

void cli_help(const cli_command *c, FILE *to)
{
    static const cli_option help = {"help", 'h', NULL, NULL, "this text"};
    fprintf(to, "tacet %s: %s\n\n", c->name, c->doc);
    for (const cli_example *e = c->examples; e->line; e++)
        fprintf(to, "  %s\n      %s\n", e->line, e->what);
    fprintf(to, "\n%s\nUsage: tacet %s%s%s [options]\n", c->about, c->name, *c->operands ? " " : "",
            c->operands);
    int width = 24;
    for (const cli_option *o = c->options; o->name; o++) {
        char head[80];
        cli_option_head(o, sizeof head, head);
        if ((int)strlen(head) > width) width = (int)strlen(head);
    }
    for (const cli_option *o = c->options; o->name; o++)
        write_option(o, width, to);
    write_option(&help, width, to);
}

static int run(const cli_call *call)
{
    if (call->n_operands == 0) {
        cli_overview(stdout);
        fputs("\nAll commands:\n", stdout);
        for (size_t i = 0; cli_commands[i]; i++)
            fprintf(stdout, "  %-10s %s\n", cli_commands[i]->name, cli_commands[i]->doc);
        return CLI_DONE;
    }
    const cli_command *c = cli_command_find(call->operand[0]);
    if (!c) {
        const char *names[16];
        size_t n = 0;
        for (; cli_commands[n] && n < 16; n++)
            names[n] = cli_commands[n]->name;
        const char *near = tacet_near_name(call->operand[0], names, n);
        return near ? cli_wrong("'%s' is no command; did you mean '%s'?", call->operand[0], near)
                    : cli_wrong("'%s' is no command; 'tacet help' lists them", call->operand[0]);
    }
    cli_help(c, stdout);
    return CLI_DONE;
}

static const cli_example examples[] = {
    {"tacet help screen", "what the main job does, its options and files"},
    {"tacet help", "all commands"},
    {NULL, NULL}};
static const cli_option options[] = {CLI_OPTION_END};
const cli_command cli_help_command = {
    .name = "help",
    .operands = "[COMMAND]",
    .doc = "what a command does, with examples",
    .about = "The same as -h or --help behind a command.\n"
             "Exit codes of every command: 0 done; 1 the answer is no (only with --strict); 2 the "
             "call,\nthe study or its data are wrong; 3 some conditions failed, the rest is "
             "written; 4 files,\nfolders, pipes or other programs.\n",
    .examples = examples,
    .options = options,
    .least_operands = 0,
    .most_operands = 1,
    .run = run,
};
