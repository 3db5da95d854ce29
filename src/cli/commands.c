// The one table of commands: a new command is a new file and one line here.
#include "cli/cli.h"
#include <string.h>

const cli_command *const cli_commands[] = {
    &cli_example_command, &cli_check_command,    &cli_keys_command,
    &cli_modes_command,   &cli_patterns_command, &cli_point_command,
    &cli_screen_command,  &cli_help_command,     NULL,
};

const cli_command *cli_command_find(const char *name)
{
    for (size_t i = 0; cli_commands[i]; i++)
        if (strcmp(cli_commands[i]->name, name) == 0) return cli_commands[i];
    return NULL;
}
