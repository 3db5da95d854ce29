// Words from a density, a word, a book or a maker, for tacet patterns without a study.
#include "cli/patterns.h"
#include <math.h>
#include <string.h>

static int count_option(const cli_call *call, const char *option, double low, double high,
                        unsigned *out)
{
    double value;
    int code = cli_number(call, option, low, high, "(whole)", &value);
    if (code != CLI_DONE) return code;
    if (value != floor(value))
        return cli_wrong("--%s '%s': a whole number is allowed", option, cli_value(call, option));
    *out = (unsigned)value;
    return CLI_DONE;
}

// Positions in the firing sequence, counted from 1 as people do.
static int read_positions(const char *text, tacet_arena *a, tacet_maker_def *d)
{
    double *at;
    tacet_error e = {.text = ""};
    tacet_status status =
        tacet_list_parse(text, TACET_PATTERN_LONGEST, a, &at, &d->n_cylinders, &e);
    if (status != TACET_OK) return cli_failed(status, &e);
    unsigned *place = tacet_arena_alloc(a, d->n_cylinders * sizeof *place);
    if (!place) return cli_failed(TACET_NO_MEMORY, NULL);
    for (size_t i = 0; i < d->n_cylinders; i++) {
        if (!(at[i] >= 1) || at[i] > d->engine_cylinders || at[i] != floor(at[i]))
            return cli_wrong("'%s': places in the firing sequence run from 1 to %u", text,
                             d->engine_cylinders);
        place[i] = (unsigned)at[i] - 1;
    }
    d->cylinders = place;
    return CLI_DONE;
}

// An option that would change nothing is a mistake in the call.
static int refuse_idle(const cli_call *call, const char *maker, bool modulator)
{
    static const char *const of_modulators[] = {"length", "dither", "seed"};
    for (size_t i = 0; !modulator && i < 3; i++)
        if (cli_given(call, of_modulators[i]))
            return cli_wrong("--%s is for --maker sigma-delta-1 and sigma-delta-2; this is %s",
                             of_modulators[i], maker);
    if (cli_given(call, "longest-run") && strcmp(maker, "necklaces") != 0)
        return cli_wrong("--longest-run is for --maker necklaces; this is %s", maker);
    return CLI_DONE;
}

static int make(const cli_call *call, const char *text, tacet_arena *a, tacet_maker_def *d,
                tacet_words *out)
{
    const char *names[16];
    size_t n = 0;
    tacet_error e = {.text = ""};
    for (; tacet_makers()[n] && n < 15; n++)
        names[n] = tacet_makers()[n]->name;
    names[n] = NULL;
    int which, code = cli_choice(call, "maker", names, &which);
    if (code != CLI_DONE) return code;
    bool modulator = strncmp(names[which], "sigma-delta", 11) == 0;
    bool fraction = tacet_density_parse(text, &d->fires, &d->length);
    if (fraction) d->density = (double)d->fires / d->length;
    if (strcmp(names[which], "cylinders") == 0)
        code = read_positions(text, a, d);
    else if (strcmp(names[which], "book") == 0)
        d->path = text;
    else if (!fraction && !(modulator && tacet_number_parse(text, &d->density)))
        code = modulator
                   ? cli_wrong("'%s': a density k/L or a number from 0 to 1 is allowed", text)
                   : cli_wrong("'%s' is no density k/L (1 <= k <= L <= %d), no word (x fires, "
                               ". skips, 1..9 tenths of the charge) and no book (*.words)%s",
                               text, TACET_PATTERN_LONGEST,
                               tacet_number_parse(text, &d->density)
                                   ? "; a plain number needs --maker sigma-delta-1 or -2"
                                   : "");
    if (code == CLI_DONE && modulator) {
        if (!fraction && !cli_given(call, "length"))
            return cli_wrong("a density of %s needs --length LETTERS, the length of its word",
                             text);
        if (cli_given(call, "length")) code = count_option(call, "length", 1, 64, &d->length);
    }
    if (code == CLI_DONE) code = refuse_idle(call, names[which], modulator);
    if (code != CLI_DONE) return code;
    tacet_status status = tacet_makers()[which]->make(d, a, out, &e);
    return status == TACET_OK ? CLI_DONE : cli_failed(status, &e);
}

// A word or a book stands for itself, everything else is made.
static int find_words(const cli_call *call, const char *text, tacet_arena *a, tacet_maker_def *d,
                      tacet_words *out)
{
    unsigned fires, length;
    tacet_pattern word;
    bool density = tacet_density_parse(text, &fires, &length);
    bool is_word = tacet_pattern_parse(text, &word, NULL) == TACET_OK && !density;
    if (cli_given(call, "maker") || (!is_word && !strstr(text, ".words")))
        return make(call, text, a, d, out);
    tacet_problems *p = tacet_problems_create();
    if (!p) return cli_failed(TACET_NO_MEMORY, NULL);
    tacet_status status = tacet_words_find(text, NULL, "patterns", a, p, out);
    cli_say_problems(p);
    tacet_problems_destroy(p);
    return cli_exit_of(status);
}

static int make_rolls(pattern_list *l, const tacet_words *w, unsigned cylinders, unsigned strokes)
{
    tacet_error e = {.text = ""};
    for (size_t i = 0; i < w->n; i++) {
        tacet_roll *roll;
        tacet_status status = tacet_roll_create(&w->pattern[i], cylinders, strokes, &roll, &e);
        if (status != TACET_OK) return cli_failed(status, &e);
        l->entry[l->n++] =
            (pattern_entry){.name = w->name[i],
                            .roll = roll,
                            .placements = tacet_pattern_placements(&w->pattern[i], cylinders)};
    }
    return CLI_DONE;
}

int patterns_of_text(const cli_call *call, const char *text, tacet_arena *a)
{
    static const char *const strokes_allowed[] = {"4", "2", NULL};
    tacet_maker_def d = tacet_maker_default();
    tacet_words w = {.n = 0};
    unsigned seed = 1;
    int two = 0;
    int code = count_option(call, "cylinders", 1, 64, &d.engine_cylinders);
    if (code == CLI_DONE) code = cli_choice(call, "strokes", strokes_allowed, &two);
    if (code == CLI_DONE) code = count_option(call, "longest-run", 0, 64, &d.longest_run);
    if (code == CLI_DONE) code = cli_number(call, "dither", 0, 1, "of a step", &d.dither);
    if (code == CLI_DONE) code = count_option(call, "seed", 0, 4294967295.0, &seed);
    d.seed = seed;
    d.primitive = true;
    if (code == CLI_DONE) code = find_words(call, text, a, &d, &w);
    if (code != CLI_DONE) return code;
    pattern_list l = {.call = call, .arena = a};
    l.entry = tacet_arena_alloc(a, (w.n + 1) * sizeof *l.entry);
    if (!l.entry) return cli_failed(TACET_NO_MEMORY, NULL);
    code = make_rolls(&l, &w, d.engine_cylinders, two ? 2 : 4);
    if (code == CLI_DONE && l.n == 0)
        code = cli_wrong("no word of density %s has runs of at most %u skips", text, d.longest_run);
    else if (code == CLI_DONE)
        code = patterns_write(&l);
    for (size_t i = 0; i < l.n; i++)
        tacet_roll_destroy((tacet_roll *)(uintptr_t)l.entry[i].roll);
    return code;
}
