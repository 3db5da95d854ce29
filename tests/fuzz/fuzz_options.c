// The command line: words of a call, option values, patterns and densities as asked for. Each line
// of the input is one word, the first one the command.
#include "cli/cli.h"
#include "fuzz.h"

#define MOST_WORDS       24
#define LONGEST_SEARCH   20
#define MOST_FREQUENCIES 500

static cli_session study; // read once, assembled

typedef struct {
    FILE *before_out, *before_err, *out, *err;
    char *data, *words; // what was written to standard output and standard error
    size_t n_data, n_words;
} capture;

static void capture_begin(capture *c)
{
    *c = (capture){.before_out = stdout, .before_err = stderr};
    c->out = open_memstream(&c->data, &c->n_data);
    c->err = open_memstream(&c->words, &c->n_words);
    REQUIRE(c->out && c->err);
    stdout = c->out;
    stderr = c->err;
}

static void capture_end(capture *c)
{
    stdout = c->before_out;
    stderr = c->before_err;
    fclose(c->out);
    fclose(c->err);
}

static void capture_clear(capture *c)
{
    free(c->data);
    free(c->words);
}

static void open_study(void)
{
    static const char path[] = FUZZ_FILES "/../../../patterns/example.yaml";
    REQUIRE(cli_open(path, CLI_ASSEMBLED, &study) == CLI_DONE);
}

// What a number that was taken may be.
static int numbers(const cli_call *call)
{
    static const struct {
        const char *option;
        double low, high;
    } of[] = {{"speed", 1, 1e5}, {"demand", -1e6, 1e6}};
    for (size_t i = 0; i < 2; i++) {
        double value = NAN;
        if (!cli_given(call, of[i].option)) continue;
        int code = cli_number(call, of[i].option, of[i].low, of[i].high, "rpm", &value);
        REQUIRE(code == CLI_DONE || (code == CLI_WRONG && isnan(value)));
        if (code != CLI_DONE) return code;
        REQUIRE(value >= of[i].low && value <= of[i].high);
    }
    return CLI_DONE;
}

static int candidate(const cli_call *call, const cli_session *s)
{
    static const char *const levels[] = {"constant", "ripple", "steady", NULL};
    int level = -1;
    cli_candidate c;
    int code = cli_candidate_of(call, s, &c);
    if (code == CLI_DONE) {
        REQUIRE(c.it && c.it->n_placements >= 1 && c.it->roll[0]->fires >= 1);
        REQUIRE(c.it->density > 0 && c.it->density <= 1);
    }
    cli_candidate_clear(&c);
    if (code == CLI_DONE) code = numbers(call);
    if (code == CLI_DONE) code = cli_choice(call, "level", levels, &level);
    REQUIRE(code != CLI_DONE || (level >= 0 && level <= 2));
    return code;
}

// Necklaces of long words and responses at many frequencies take long; they are bounded, but not
// worth the time of a fuzzer.
static bool is_slow(const cli_call *call)
{
    unsigned fires, length = 0;
    if (call->command == &cli_modes_command) {
        const char *text = cli_value(call, "frequencies");
        double v[3] = {0, 0, 1};
        if (text && sscanf(text, "%lf:%lf:%lf", &v[0], &v[1], &v[2]) < 3) return false;
        return !text || !(v[1] <= MOST_FREQUENCIES * v[2]);
    }
    const char *maker = cli_value(call, "maker");
    return maker && strcmp(maker, "necklaces") == 0 && call->n_operands &&
           tacet_density_parse(call->operand[0], &fires, &length) && length > LONGEST_SEARCH;
}

// As far as the command goes without reading a study or writing a file.
static int go_on(const cli_call *call)
{
    const cli_command *c = call->command;
    cli_session s = study;
    if (is_slow(call)) return CLI_DONE;
    s.arena = tacet_arena_create();
    REQUIRE(s.arena);
    int code = CLI_DONE;
    if (c == &cli_keys_command || c == &cli_help_command)
        code = c->run(call);
    else if (c == &cli_patterns_command && cli_given(call, "cylinders"))
        code = c->run(call);
    else if (c == &cli_point_command)
        code = candidate(call, &s);
    else if (c == &cli_modes_command && cli_value(call, "response"))
        code = cli_response(call, &s, cli_value(call, "response"));
    tacet_arena_destroy(s.arena);
    return code;
}

static void require_clean(const char *words)
{
    for (const char *at = words; *at; at++)
        REQUIRE(*at == '\n' || ((unsigned char)*at >= 0x20 && *at != 0x7f));
}

static void check_output(const capture *c, int code, bool help, bool silent)
{
    static const char *const never[] = {": nan", ": -nan", ": inf", ": -inf", ",nan", ",-nan"};
    REQUIRE(code == CLI_DONE || code == CLI_WRONG || code == CLI_OUTSIDE_WORLD);
    require_clean(c->words);
    if (code != CLI_DONE) {
        REQUIRE(c->n_words > 8 && c->words[c->n_words - 1] == '\n');
    }
    REQUIRE(code != CLI_DONE || help || silent || c->n_data > 0);
    for (size_t i = 0; i < sizeof never / sizeof *never; i++)
        REQUIRE(!strstr(c->data, never[i]));
}

static void check_call(const cli_command *command, int n, char **word)
{
    capture c;
    cli_call call;
    bool help = false, ran = false;
    char *copy[MOST_WORDS + 1] = {NULL};
    memcpy(copy, word, (size_t)n * sizeof *copy); // getopt_long may put them in another order
    capture_begin(&c);
    int code = cli_call_read(command, n, copy, &call, &help);
    bool read = code == CLI_DONE && !help;
    if (read) {
        code = go_on(&call);
        ran = command == &cli_keys_command || command == &cli_help_command;
    }
    capture_end(&c);
    REQUIRE(!read || (call.n_operands >= command->least_operands &&
                      call.n_operands <= command->most_operands));
    check_output(&c, code, help, !ran);
    // of a NULL pointer, unless a word of the call reads so
    bool said = false;
    for (int i = 0; i < n; i++)
        said = said || strstr(word[i], "null");
    REQUIRE(said || !strstr(c.words, "(null)"));
    capture_clear(&c);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    char *text = fuzz_text(data, size), *rest = text, *word[MOST_WORDS + 1] = {NULL};
    int n = 0;
    if (!study.model) open_study();
    while (n < MOST_WORDS && (word[n] = strsep(&rest, "\n")))
        n++;
    const cli_command *command = cli_command_find(word[0]);
    if (command) check_call(command, n, word);
    free(text);
    return 0;
}
