// tacet example: the commented study, embedded at build.
#include "cli/cli.h"

extern const char cli_example_study[];

static int run(const cli_call *call)
{
    (void)call;
    fputs(cli_example_study, stdout);
    return CLI_DONE;
}

static const cli_example examples[] = {
    {"tacet example > my.yaml", "a study to start from, every line explained"},
    {"tacet example | tacet screen -", "see at once what a screen says"},
    {NULL, NULL}};
static const cli_option options[] = {CLI_OPTION_END};
const cli_command cli_example_command = {
    .name = "example",
    .operands = "",
    .doc = "write a commented study that runs",
    .about = "Writes a study of an invented straight six to standard output. It runs as it is: "
             "put your own\nnumbers in, line by line, and let 'tacet check' say what is wrong.\n",
    .examples = examples,
    .options = options,
    .run = run,
};
