// Builds the man page and the README's table of commands from the tables of commands, keys and
// quantities; run at build.
// usage: tacet-man page|commands
#include "cli/cli.h"
#include "cli/keys.h"
#include <string.h>

// ---- man page ---------------------------------------------------------------------------------

// Text of a line that roff takes as it stands.
static void roff(const char *text)
{
    if (*text == '.' || *text == '\'') fputs("\\&", stdout);
    for (; *text; text++) {
        if (*text == '\\')
            fputs("\\e", stdout);
        else if (*text == '-')
            fputs("\\-", stdout);
        else
            putchar(*text);
    }
}

static void page_options(const cli_command *c)
{
    for (const cli_option *o = c->options; o->name; o++) {
        char head[80];
        cli_option_head(o, sizeof head, head);
        printf(".TP\n.B ");
        roff(head);
        putchar('\n');
        roff(o->doc);
        if (o->fallback) {
            printf(" (default ");
            roff(o->fallback);
            putchar(')');
        }
        putchar('\n');
    }
}

static void page_command(const cli_command *c)
{
    printf(".SS tacet %s", c->name);
    if (*c->operands) {
        putchar(' ');
        roff(c->operands);
    }
    printf("\n");
    roff(c->about);
    page_options(c);
    for (const cli_example *e = c->examples; e->line; e++) {
        printf(".PP\n.nf\n    ");
        roff(e->line);
        printf("\n.fi\n");
        roff(e->what);
        printf("\n");
    }
}

static void page_key(void *who, const cli_key *k)
{
    (void)who;
    bool section = strncmp(k->kind, "section", 7) == 0;
    if (!strchr(k->path, '.') && section) printf(".SS %s\n", k->path);
    if (section) return;
    printf(".TP\n.B ");
    roff(k->path);
    printf("\n");
    roff(k->doc);
    if (*k->range || k->unit) printf("; ");
    roff(k->range);
    if (k->unit) {
        printf(*k->range ? " " : "in ");
        roff(k->unit);
    }
    printf(strcmp(k->fallback, "required") == 0 ? "; " : "; default ");
    roff(*k->fallback ? k->fallback : "none");
    printf("\n");
}

static void page(void)
{
    printf(".TH TACET 1 \"\" \"tacet %s\" \"User commands\"\n", tacet_version());
    printf(".SH NAME\ntacet \\- screen skip\\-fire patterns on a crank\\-train\n");
    printf(".SH SYNOPSIS\n.B tacet\n.I COMMAND\n[\\fIoperands and options, in any order\\fR]\n");
    printf(".SH DESCRIPTION\n.nf\n");
    cli_overview(stdout);
    printf(".fi\n.PP\nA study that is called\n.B \\-\nis read from standard input. Data go to "
           "standard "
           "output, words to standard error; files are\nwritten only into a result folder. Options "
           "must be written out in full.\n");
    printf(".SH COMMANDS\n");
    for (size_t i = 0; cli_commands[i]; i++)
        page_command(cli_commands[i]);
    printf(
        ".SH KEYS OF A STUDY\nA study is a YAML file. The same list comes from\n.BR \"tacet keys\" "
        ".\n");
    cli_keys_walk(tacet_study_keys(), page_key, NULL);
    printf(".SH QUANTITIES\nWhat a band or a limit may judge.\n");
    for (const tacet_quantity *q = tacet_quantities(); q->name; q++) {
        printf(".TP\n.B ");
        roff(q->name);
        roff(tacet_target_form(q->target));
        printf("\n");
        roff(q->doc);
        if (q->unit && strcmp(q->unit, "1") != 0) {
            printf(", in ");
            roff(q->unit);
        }
        printf("\n");
    }
    printf(
        ".SH EXIT STATUS\n.TP\n0\ndone\n.TP\n1\nthe answer is no (only with \\-\\-strict)\n"
        ".TP\n2\nthe call, the study or its data are wrong\n.TP\n3\nsome conditions failed, the "
        "rest is written\n.TP\n4\nfiles, folders, pipes, other programs or memory\n.PP\n"
        "Interrupted, it finishes what it writes and ends by the signal; a second one ends it at "
        "once.\n");
    printf(".SH ENVIRONMENT\n.TP\n.B NO_COLOR\nwhen not empty: no colour\n.TP\n.B TERM\n"
           "when dumb or empty: no colour, no progress\n");
    printf(".SH CAUTION\n");
    roff(tacet_caution(TACET_CAUTION_SHORT));
    printf("\n");
}

// ---- README -----------------------------------------------------------------------------------

static void cell(const char *text)
{
    for (; *text; text++) {
        if (*text == '|') putchar('\\');
        putchar(*text);
    }
}

static void markdown_commands(void)
{
    printf("| command | what it does |\n|---|---|\n");
    for (size_t i = 0; cli_commands[i]; i++) {
        printf("| `tacet %s%s", cli_commands[i]->name, *cli_commands[i]->operands ? " " : "");
        cell(cli_commands[i]->operands);
        printf("` | ");
        cell(cli_commands[i]->doc);
        printf(" |\n");
    }
}

int main(int argc, char **argv)
{
    const char *what = argc == 2 ? argv[1] : "";
    if (strcmp(what, "page") == 0) {
        page();
    } else if (strcmp(what, "commands") == 0) {
        markdown_commands();
    } else {
        return cli_wrong("usage: tacet-man page|commands");
    }
    tacet_error e = {.text = ""};
    tacet_status status = tacet_stream_check(stdout, "standard output", &e);
    return status == TACET_OK ? CLI_DONE : cli_failed(status, &e);
}
