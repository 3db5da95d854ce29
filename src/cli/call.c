// Options and operands of a command, from its row in the table of commands.
#include "cli/cli.h"
#include <getopt.h>
#include <math.h>
#include <string.h>

#define LETTERS (2 * CLI_OPTIONS_MOST + 4)
#define HELP    1000 // code of help, above every letter; options: FIRST + place in the table
#define FIRST   1001

static size_t n_options(const cli_command *c)
{
    size_t n = 0;
    while (c->options[n].name)
        n++;
    return n;
}

// Tables of getopt_long. A leading '-' makes it hand out operands in their order, wherever they
// stand; ':' tells a missing argument apart.
static void fill_tables(const cli_command *c, struct option *longs, char *letters)
{
    size_t n = n_options(c), k = 0;
    letters[k++] = '-';
    letters[k++] = ':';
    letters[k++] = 'h';
    for (size_t i = 0; i < n; i++) {
        const cli_option *o = &c->options[i];
        longs[i] = (struct option){o->name, o->argument ? required_argument : no_argument, NULL,
                                   FIRST + (int)i};
        if (!o->letter) continue;
        letters[k++] = (char)o->letter;
        if (o->argument) letters[k++] = ':';
    }
    letters[k] = '\0';
    longs[n] = (struct option){"help", no_argument, NULL, HELP};
    longs[n + 1] = (struct option){NULL, 0, NULL, 0};
}

static int unknown_option(const cli_command *c, const char *word)
{
    const char *names[CLI_OPTIONS_MOST + 1];
    size_t n = 0, length = strcspn(word, "=");
    char name[64];
    for (; c->options[n].name; n++)
        names[n] = c->options[n].name;
    names[n++] = "help";
    while (*word == '-' && length > 0)
        word++, length--;
    snprintf(name, sizeof name, "%.*s", (int)(length < 60 ? length : 60), word);
    const char *near = tacet_near_name(name, names, n);
    for (size_t i = 0; !near && length >= 2 && i < n; i++) // the beginning of a longer name
        if (strncmp(names[i], name, length) == 0) near = names[i];
    if (near)
        return cli_wrong("%s has no option '%s%s'; did you mean '--%s'?", c->name,
                         length == 1 ? "-" : "--", name, near);
    return cli_wrong("%s has no option '%s%s'; 'tacet help %s' lists them", c->name,
                     length == 1 ? "-" : "--", name, c->name);
}

static int unknown_letter(const cli_command *c, int letter)
{
    char word[3] = {'-', (char)(letter > ' ' && letter < 127 ? letter : '?'), '\0'};
    return unknown_option(c, word);
}

// getopt_long takes the beginning of a name for the name: the word given must be the whole one.
static bool whole_word(const char *name, const char *word)
{
    size_t n = strlen(name);
    return strncmp(word, "--", 2) == 0 && strncmp(word + 2, name, n) == 0 &&
           (word[2 + n] == '\0' || word[2 + n] == '=');
}

static int take_option(cli_call *out, size_t i, const char *value)
{
    const cli_option *o = &out->command->options[i];
    if (out->value[i] && strcmp(out->value[i], value ? value : "") != 0)
        return cli_wrong("--%s is given twice, as '%s' and '%s'", o->name, out->value[i], value);
    out->value[i] = value ? value : "";
    return CLI_DONE;
}

static int take_operand(cli_call *out, const char *text)
{
    const cli_command *c = out->command;
    if (out->n_operands == c->most_operands)
        return c->most_operands == 0
                   ? cli_wrong("%s takes no operand, but '%s' is given; see 'tacet help %s'",
                               c->name, text, c->name)
                   : cli_wrong("%s takes %s, but '%s' is given besides; see 'tacet help %s'",
                               c->name, c->operands, text, c->name);
    out->operand[out->n_operands++] = text;
    return CLI_DONE;
}

static int check_call(const cli_call *call)
{
    const cli_command *c = call->command;
    if (call->n_operands < c->least_operands)
        return cli_wrong("%s needs %s; for example: %s", c->name, c->operands, c->examples[0].line);
    if (c != &cli_check_command && cli_given(call, "json") && cli_given(call, "csv"))
        return cli_wrong("--json and --csv: only one of them at a time");
    return CLI_DONE;
}

// One option as getopt_long found it; `word` is how it was written.
static int take_found(cli_call *out, int code, const struct option *longs, int place,
                      const char *word)
{
    const cli_command *c = out->command;
    if (place >= 0 && !whole_word(longs[place].name, word)) return unknown_option(c, word);
    if (code >= FIRST) return take_option(out, (size_t)(code - FIRST), optarg);
    for (size_t i = 0; c->options[i].name; i++)
        if (c->options[i].letter == code) return take_option(out, i, optarg);
    return unknown_letter(c, code);
}

static int say_refused(const cli_command *c, int code, const char *word)
{
    bool longer = strncmp(word, "--", 2) == 0;
    if (code == ':') return cli_wrong("%s needs a value; see 'tacet help %s'", word, c->name);
    if (!longer) return unknown_letter(c, optopt);
    for (size_t i = 0; c->options[i].name; i++)
        if (whole_word(c->options[i].name, word))
            return cli_wrong("--%s takes no value", c->options[i].name);
    return unknown_option(c, word);
}

int cli_call_read(const cli_command *c, int argc, char **argv, cli_call *out, bool *help)
{
    struct option longs[CLI_OPTIONS_MOST + 2];
    char letters[LETTERS];
    fill_tables(c, longs, letters);
    *out = (cli_call){.command = c};
    *help = false;
    optind = 0; // a fresh start
    opterr = 0;
    for (;;) {
        int place = -1, code = getopt_long(argc, argv, letters, longs, &place), result;
        if (code == -1) break;
        bool apart = optarg && optind > 0 && optarg == argv[optind - 1] && code != 1;
        const char *word = argv[optind - 1 - (apart ? 1 : 0)];
        if (code == 'h' || (code == HELP && whole_word("help", word))) {
            *help = true;
            return CLI_DONE;
        }
        if (code == 1)
            result = take_operand(out, optarg);
        else if (code == '?' || code == ':')
            result = say_refused(c, code, word);
        else
            result = take_found(out, code, longs, place, word);
        if (result != CLI_DONE) return result;
    }
    for (int i = optind; i < argc; i++) { // behind "--"
        int result = take_operand(out, argv[i]);
        if (result != CLI_DONE) return result;
    }
    return check_call(out);
}

static size_t place_of(const cli_call *call, const char *option)
{
    size_t i = 0;
    while (call->command->options[i].name && strcmp(call->command->options[i].name, option) != 0)
        i++;
    return i;
}

bool cli_given(const cli_call *call, const char *option)
{
    size_t i = place_of(call, option);
    return call->command->options[i].name && call->value[i];
}

const char *cli_value(const cli_call *call, const char *option)
{
    size_t i = place_of(call, option);
    if (!call->command->options[i].name) return NULL;
    return call->value[i] ? call->value[i] : call->command->options[i].fallback;
}

// Of an option that has a value always, its default at least.
static const char *text_of(const cli_call *call, const char *option)
{
    const char *text = cli_value(call, option);
    return text ? text : "";
}

int cli_number(const cli_call *call, const char *option, double low, double high, const char *unit,
               double *out)
{
    const char *text = text_of(call, option);
    double value;
    char a[TACET_NUMBER_TEXT], b[TACET_NUMBER_TEXT];
    if (tacet_number_parse(text, &value) && value >= low && value <= high) {
        *out = value;
        return CLI_DONE;
    }
    bool digits = *text >= '0' && *text <= '9' && !tacet_number_parse(text, &value);
    return cli_wrong("--%s '%s': a number from %s to %s%s%s is allowed%s", option, text,
                     tacet_number_format_short(low, 4, a), tacet_number_format_short(high, 4, b),
                     *unit ? " " : "", unit, digits ? ", digits alone without comma or unit" : "");
}

int cli_choice(const cli_call *call, const char *option, const char *const *choices, int *out)
{
    const char *text = text_of(call, option);
    char all[256] = "";
    size_t n = 0;
    for (; choices[n]; n++) {
        if (strcmp(choices[n], text) == 0) {
            *out = (int)n;
            return CLI_DONE;
        }
        size_t used = strlen(all);
        snprintf(all + used, sizeof all - used, "%s%s", n ? ", " : "", choices[n]);
    }
    const char *near = tacet_near_name(text, choices, n);
    if (near)
        return cli_wrong("--%s '%s': did you mean '%s'? Allowed: %s", option, text, near, all);
    return cli_wrong("--%s '%s'; allowed: %s", option, text, all);
}
