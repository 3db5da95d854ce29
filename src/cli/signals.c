// Interruption: the first signal asks to stop, the second ends at once.
#include "cli/cli.h"
#include <signal.h>
#include <stddef.h>

// The one place where a handler can leave word: it has no other way to reach the command.
static volatile int caught;

static void end_by(int signal_number)
{
    signal(signal_number, SIG_DFL);
    raise(signal_number);
}

static void on_signal(int signal_number)
{
    if (caught)
        end_by(signal_number);
    else
        caught = signal_number;
}

static void catch_one(int signal_number)
{
    struct sigaction old, wanted = {.sa_handler = on_signal, .sa_flags = SA_RESTART};
    sigemptyset(&wanted.sa_mask);
    if (sigaction(signal_number, NULL, &old) == 0 && old.sa_handler != SIG_IGN)
        sigaction(signal_number, &wanted, NULL);
}

void cli_catch_signals(void)
{
    catch_one(SIGINT);
    catch_one(SIGTERM);
}

const volatile int *cli_stop(void)
{
    return &caught;
}

void cli_reraise(void)
{
    if (caught) end_by(caught);
}
