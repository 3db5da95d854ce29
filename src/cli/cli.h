// cli: what the commands share. Private to cli.
#ifndef CLI_CLI_H
#define CLI_CLI_H
#include "tacet/show.h"
#include <stdio.h>

// ---- exit codes
// A larger one wins where several apply. After a signal the process ends by that signal.
enum {
    CLI_DONE,
    CLI_ANSWER_IS_NO, // only with --strict
    CLI_WRONG,        // the call, the study or its data
    CLI_SOME_FAILED,  // some conditions failed, the rest is written
    CLI_OUTSIDE_WORLD // files, folders, pipes, other programs, memory
};
int cli_worse(int a, int b);
int cli_exit_of(tacet_status status);

// ---- the one table of commands
typedef struct {
    const char *name;
    int letter;           // 0: none
    const char *argument; // what it takes, as help calls it; NULL: a switch
    const char *fallback; // what it is when not given; NULL: nothing
    const char *doc;
} cli_option;
#define CLI_OPTIONS_MOST 16

typedef struct {
    const char *line, *what;
} cli_example;

typedef struct cli_call cli_call;
typedef struct {
    const char *name;
    const char *operands;        // as help writes them; "": none
    const char *doc;             // one line
    const char *about;           // some lines, each ended by '\n'
    const cli_example *examples; // ends with line == NULL
    const cli_option *options;   // ends with name == NULL; --help comes by itself
    size_t least_operands, most_operands;
    int (*run)(const cli_call *call); // returns an exit code
} cli_command;
extern const cli_command *const cli_commands[]; // ends with NULL
const cli_command *cli_command_find(const char *name);

// Options that many commands share.
#define CLI_OPTION_JSON                                                                            \
    {                                                                                              \
        "json", 0, NULL, NULL, "write JSON to standard output"                                     \
    }
#define CLI_OPTION_CSV                                                                             \
    {                                                                                              \
        "csv", 0, NULL, NULL, "write CSV to standard output"                                       \
    }
#define CLI_OPTION_STRICT                                                                          \
    {                                                                                              \
        "strict", 0, NULL, NULL, "end with exit code 1 when the answer is no"                      \
    }
#define CLI_OPTION_NO_COLOR                                                                        \
    {                                                                                              \
        "no-color", 0, NULL, NULL, "no colour on a terminal; so do NO_COLOR and TERM=dumb"         \
    }
#define CLI_OPTION_END                                                                             \
    {                                                                                              \
        NULL, 0, NULL, NULL, NULL                                                                  \
    }

// ---- a call
#define CLI_OPERANDS_MOST 2
struct cli_call {
    const cli_command *command;
    const char *value[CLI_OPTIONS_MOST]; // by option; NULL: not given, a switch: ""
    const char *operand[CLI_OPERANDS_MOST];
    size_t n_operands;
};
// Reads the words after the command's name. CLI_DONE, or CLI_WRONG with a message written.
// *help: help was asked for, nothing else was checked.
int cli_call_read(const cli_command *c, int argc, char **argv, cli_call *out, bool *help);
bool cli_given(const cli_call *call, const char *option);
const char *cli_value(const cli_call *call, const char *option); // or its fallback
// The value as a number of `unit` within [low, high]. CLI_WRONG with a message otherwise.
int cli_number(const cli_call *call, const char *option, double low, double high, const char *unit,
               double *out);
// The place of the value among choices (ends with NULL). CLI_WRONG with a message otherwise.
int cli_choice(const cli_call *call, const char *option, const char *const *choices, int *out);

// ---- help
void cli_help(const cli_command *c, FILE *to);
void cli_overview(FILE *to);
void cli_option_head(const cli_option *o, size_t size, char *out); // "-o, --output FOLDER"

// ---- words on standard error
void cli_say(const char *format, ...) TACET_PRINTF(1, 2); // "tacet: ..\n"
int cli_wrong(const char *format, ...) TACET_PRINTF(1, 2);
// Says e's text (or the status' own) and returns the exit code of status.
int cli_failed(tacet_status status, const tacet_error *e);
void cli_say_problems(const tacet_problems *p);

// ---- data on standard output
bool cli_colour(const cli_call *call);
void cli_write_table(const cli_call *call, const tacet_table *t); // text, or CSV with --csv
int cli_end_json(tacet_json *j); // ends the root object and the document
// "9/7" of a quotient of whole numbers in lowest terms, "3" when whole.
const char *cli_fraction(unsigned above, unsigned below, char out[24]);

// Cells of a table, row by row; its memory is in the arena. `wrong`: no memory, or too many cells.
typedef struct {
    tacet_arena *arena;
    tacet_table table;
    tacet_table_cell *cells;
    size_t n, most;
    bool wrong;
} cli_rows;
cli_rows cli_rows_start(tacet_arena *a, const char *name, const char *heading,
                        const tacet_table_column *columns, size_t n_columns, size_t most_rows);
void cli_put(cli_rows *r, double number);
void cli_put_text(cli_rows *r, const char *text);
void cli_accent(cli_rows *r); // marks the cell just put
// The finished table; NULL: wrong.
const tacet_table *cli_rows_end(cli_rows *r);
// Text in the arena; "" when there is no memory, which cli_arena_end then says.
const char *cli_text(tacet_arena *a, const char *format, ...) TACET_PRINTF(2, 3);
// Destroys the arena. The code, or that of a lack of memory if one went unsaid.
int cli_arena_end(tacet_arena *a, int code);

// ---- a study at work
typedef enum { CLI_READ, CLI_ASSEMBLED, CLI_PREPARED } cli_depth;
typedef struct {
    tacet_problems *problems;
    tacet_study *study;
    tacet_model *model;    // from CLI_ASSEMBLED on
    tacet_workspace *work; // from CLI_PREPARED on
    tacet_arena *arena;    // for what the command makes
} cli_session;
// Reads a study ("-": standard input), says its problems and goes on to the depth wanted.
// CLI_DONE, or another exit code with the reason said; cli_close either way,
// whose result is the command's: the code, or that of a lack of memory.
int cli_open(const char *path, cli_depth depth, cli_session *s);
int cli_deepen(cli_session *s, cli_depth depth); // from CLI_READ on
int cli_close(cli_session *s, int code);
const char *cli_title(const cli_session *s);
const char *cli_study_name(const char *path); // "-" reads as "standard input"

// What a screen of the study would try; problems are said. To be freed by tacet_candidates_destroy.
int cli_study_candidates(const cli_session *s, tacet_candidate **out, size_t *n);
// What a call means by --density or --pattern.
typedef struct {
    tacet_candidate *all;
    size_t n;
    const tacet_candidate *it; // among them
} cli_candidate;
// --density K/L (all placements of the even word), or --pattern WORD|BOOK.words:NAME, or the name
// of one of the study's own patterns.
int cli_candidate_of(const cli_call *call, const cli_session *s, cli_candidate *out);
void cli_candidate_clear(cli_candidate *c);

// ---- criticals
// An order that matters to a study: a line of one or more of its words, or a multiple of the firing
// order.
typedef struct {
    double order;
    const char *order_text, *of; // "9/7", "3/7, 4/7"
} cli_order;
// Rising, each once, in the session's arena. CLI_DONE or another exit code.
int cli_leading_orders(const cli_session *s, cli_order **out, size_t *n);
// rpm at which an order meets a frequency; NAN outside the screened speeds.
double cli_critical_rpm(const cli_session *s, double order, double hz);
double cli_rpm(double speed_rad_per_s); // without the rounding of the way there and back
void cli_screened_rpm(const cli_session *s, double range[2]);

// tacet modes --response NODE.
int cli_response(const cli_call *call, const cli_session *s, const char *node);

// Where results go: --output, or ./STUDY-<what>, or "" (nowhere) with --json or --csv.
void cli_folder_name(const cli_call *call, const char *what, size_t size, char *out);
// Opens a result folder, unless it holds the file `foreign` of another command's results.
int cli_folder(const char *path, const char *foreign, tacet_folder **out);

// ---- progress: nothing unless standard error is a terminal
typedef struct {
    bool on, shown;
    double last_s;
} cli_progress;
cli_progress cli_progress_start(void);
void cli_progress_step(void *who, size_t done, size_t of);
void cli_progress_end(cli_progress *p); // clears the line

// ---- signals
// From here on the first SIGINT or SIGTERM only sets what cli_stop points at; the second ends the
// process.
void cli_catch_signals(void);
const volatile int *cli_stop(void);
void cli_reraise(void); // ends the process by the signal that was caught, if there was one

// ---- the commands
extern const cli_command cli_example_command, cli_check_command, cli_keys_command,
    cli_modes_command, cli_patterns_command, cli_point_command, cli_screen_command,
    cli_help_command;

#endif
