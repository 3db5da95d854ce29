// tacet patterns: words, their repeat, runs and orders, of a density or of a study's candidates.
#include "cli/patterns.h"
#include <string.h>

static int of_study(const cli_call *call, const cli_session *s)
{
    tacet_candidate *c = NULL;
    size_t n = 0;
    int code = cli_study_candidates(s, &c, &n);
    if (code != CLI_DONE) return code;
    pattern_list l = {.call = call, .arena = s->arena, .study = s->study};
    l.entry = tacet_arena_alloc(s->arena, (n + 1) * sizeof *l.entry);
    code = l.entry ? CLI_DONE : cli_failed(TACET_NO_MEMORY, NULL);
    for (size_t i = 0; l.entry && i < n; i++) {
        if (c[i].refused)
            cli_say("%s (%s) cannot run on this engine: %s", c[i].name, c[i].word, c[i].refused);
        else
            l.entry[l.n++] = (pattern_entry){
                .name = c[i].name, .roll = c[i].roll[0], .placements = c[i].n_placements};
    }
    if (code == CLI_DONE) code = patterns_write(&l);
    tacet_candidates_destroy(c, n);
    return code;
}

// A density or a word: it needs to be told of how many cylinders.
static bool is_pattern(const char *text)
{
    unsigned fires, length;
    tacet_pattern word;
    const char *end = strstr(text, ".words");
    return tacet_density_parse(text, &fires, &length) ||
           tacet_pattern_parse(text, &word, NULL) == TACET_OK ||
           (end && (end[6] == '\0' || end[6] == ':'));
}

static int run(const cli_call *call)
{
    const char *text = call->operand[0];
    if (cli_given(call, "cylinders")) {
        tacet_arena *a = tacet_arena_create();
        int code = a ? patterns_of_text(call, text, a) : cli_failed(TACET_NO_MEMORY, NULL);
        return cli_arena_end(a, code);
    }
    if (is_pattern(text) || cli_given(call, "maker"))
        return cli_wrong("patterns of '%s' need --cylinders N, the engine's number of cylinders",
                         text);
    cli_session s;
    int code = cli_open(text, CLI_ASSEMBLED, &s);
    if (code == CLI_DONE) code = of_study(call, &s);
    return cli_close(&s, code);
}

static const cli_example examples[] = {
    {"tacet patterns 3/7 --cylinders 6", "the evenly spread word of a density, and its spectrum"},
    {"tacet patterns my.yaml", "everything a screen of this study would try"},
    {"tacet patterns 3/8 --cylinders 6 --maker necklaces", "all words of a density"},
    {"tacet patterns 0.43 --cylinders 6 --maker sigma-delta-2 --length 42",
     "a modulator's word of any density"},
    {"tacet patterns 1,3,5 --cylinders 6 --maker cylinders",
     "the first, third and fifth in the firing sequence fire"},
    {NULL, NULL}};
static const cli_option options[] = {
    {"cylinders", 0, "N", NULL, "of the engine; with a density, a word or a book"},
    {"strokes", 0, "4|2", "4", "of the engine"},
    {"maker", 0, "NAME", "even",
     "even, sigma-delta-1, sigma-delta-2, cylinders, necklaces or book"},
    {"length", 0, "LETTERS", NULL, "of a modulator's word (for K/L: L)"},
    {"dither", 0, "SHARE", "0", "of a modulator, share of one step, from 0 to 1"},
    {"seed", 0, "NUMBER", "1", "of the dither"},
    {"longest-run", 0, "N", "0", "skips in a row that a necklace may have, 0: any number"},
    CLI_OPTION_JSON,
    CLI_OPTION_CSV,
    CLI_OPTION_NO_COLOR,
    CLI_OPTION_END};
const cli_command cli_patterns_command = {
    .name = "patterns",
    .operands = "DENSITY|WORD|BOOK|STUDY",
    .doc = "words of a density or a study: placements, repeat, runs, spectrum",
    .about = "In a word x fires, . skips and 1..9 fires at that many tenths of the charge. "
             "Placements are the\nrotations that load the crank differently. The repeat is the "
             "stretch after which pattern and\ncylinders line up again. A book is a text file "
             "named *.words: on each line a word, blanks, a\nname, and after # a comment.\n",
    .examples = examples,
    .options = options,
    .least_operands = 1,
    .most_operands = 1,
    .run = run,
};
