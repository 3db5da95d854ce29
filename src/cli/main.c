// Picks the command. This is the one place that touches the process as a whole: GSL's error
// handler, signals, standard streams.
#include "cli/cli.h"
#include <errno.h>
#include <fcntl.h>
#include <gsl/gsl_errno.h>
#include <poll.h>
#include <signal.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

// A closed standard stream must not become the next file that is opened: it is filled with
// something that fails on use.
static void fill_closed_streams(void)
{
    for (int fd = 0; fd <= 2; fd++)
        if (fcntl(fd, F_GETFD) == -1 && errno == EBADF &&
            open("/dev/null", fd == 0 ? O_WRONLY : O_RDONLY) != fd)
            _exit(CLI_OUTSIDE_WORLD);
}

static int no_command(const char *word)
{
    const char *names[16];
    size_t n = 0;
    for (; cli_commands[n] && n < 16; n++)
        names[n] = cli_commands[n]->name;
    if (*word == '-')
        return cli_wrong("'%s' stands before any command; write: tacet COMMAND .. %s", word, word);
    const char *near = tacet_near_name(word, names, n);
    if (near) return cli_wrong("'%s' is no command; did you mean '%s'?", word, near);
    if (access(word, R_OK) == 0)
        return cli_wrong("'%s' is a file; say what to do with it, for example: tacet screen %s",
                         word, word);
    return cli_wrong("'%s' is no command; 'tacet help' lists them", word);
}

static int run(int argc, char **argv)
{
    const char *word = argc > 1 ? argv[1] : NULL;
    if (!word || strcmp(word, "--help") == 0 || strcmp(word, "-h") == 0) {
        cli_overview(stdout);
        return CLI_DONE;
    }
    if (strcmp(word, "--version") == 0) {
        fprintf(stdout, "tacet %s\n", tacet_version());
        return CLI_DONE;
    }
    const cli_command *c = cli_command_find(word);
    if (!c) return no_command(word);
    cli_call call;
    bool help;
    int code = cli_call_read(c, argc - 1, argv + 1, &call, &help);
    if (help) cli_help(c, stdout);
    return help || code != CLI_DONE ? code : c->run(&call);
}

// An earlier write may have met the closed pipe: then its reason is lost.
static bool reader_gone(void)
{
    struct pollfd out = {.fd = 1, .events = POLLOUT};
    return poll(&out, 1, 0) == 1 && (out.revents & POLLERR);
}

// What was written must have arrived. A reader that has seen enough (a closed pipe) is no error.
static int close_output(int code)
{
    tacet_error e = {.text = ""};
    errno = 0;
    tacet_status status = tacet_stream_check(stdout, "standard output", &e);
    int reason = errno;
    if (status == TACET_OK && fclose(stdout) != 0) {
        reason = errno;
        status = tacet_fail(&e, TACET_OUTSIDE_WORLD, "cannot write standard output: %s",
                            strerror(reason));
    }
    if (status == TACET_OK || reason == EPIPE || reader_gone()) return code;
    return cli_worse(code, cli_failed(status, &e));
}

int main(int argc, char **argv)
{
    fill_closed_streams();
    setvbuf(stderr, NULL, _IOLBF, BUFSIZ); // a line at a time: other programs may write there too
    signal(SIGPIPE, SIG_IGN); // writing tells, and results under -o are written all the same
    signal(SIGXFSZ, SIG_IGN); // a file that may not grow is an error of the write
    gsl_set_error_handler_off();
    int code = close_output(run(argc, argv));
    cli_reraise();
    return code;
}
