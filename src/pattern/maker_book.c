// Books of words, *.words: what an engineer has found before, by name.
#include "makers.h"
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define BOOK_BYTES_MOST   (1024 * 1024)
#define BOOK_WORDS_MOST   10000
#define NAME_LETTERS_MOST 256

typedef struct {
    const char *path;
    tacet_problems *problems;
    tacet_words *words;
    int *name_column; // [most words]
    bool bad, full, no_memory;
} reader;

// One line's parts; the pointers are into the text, which is the arena's own copy.
typedef struct {
    char *word, *name, *comment;
    int word_column, name_column;
} entry;

static void complain(reader *r, int line, int column, const char *text)
{
    tacet_problems_add(r->problems, false, r->path, line, column, "%s", text);
    r->bad = true;
}

static bool is_blank(char c)
{
    return c == ' ' || c == '\t';
}

static char *skip_blanks(char *at)
{
    while (is_blank(*at))
        at++;
    return at;
}

static void cut_blanks_at_end(char *text)
{
    size_t n = strlen(text);
    while (n > 0 && is_blank(text[n - 1]))
        text[--n] = '\0';
}

// Splits `text` in place into word, name and comment; parts that are not there are NULL.
static entry split(char *text)
{
    entry x = {0};
    char *hash = strchr(text, '#');
    if (hash) {
        *hash = '\0';
        x.comment = skip_blanks(hash + 1);
        cut_blanks_at_end(x.comment);
        if (!*x.comment) x.comment = NULL;
    }
    cut_blanks_at_end(text);
    char *at = skip_blanks(text);
    if (!*at) return x;
    x.word = at;
    x.word_column = (int)(at - text) + 1;
    while (*at && !is_blank(*at))
        at++;
    if (!*at) return x;
    *at = '\0';
    x.name = skip_blanks(at + 1);
    x.name_column = (int)(x.name - text) + 1;
    return x;
}

// Bytes of the UTF-8 letter that `text` begins with; 0: none (control characters other than a tab,
// stray or missing continuation bytes, overlong forms, surrogates; RFC 3629).
static size_t letter_bytes(const unsigned char *text, size_t left)
{
    unsigned char c = text[0];
    if (c < 0x80) return (c >= 0x20 && c != 0x7f) || c == '\t' ? 1 : 0;
    size_t n = c >= 0xf0 ? 4 : c >= 0xe0 ? 3 : 2;
    if (c < 0xc2 || c > 0xf4 || n > left) return 0;
    for (size_t i = 1; i < n; i++)
        if ((text[i] & 0xc0) != 0x80) return 0;
    if ((c == 0xe0 && text[1] < 0xa0) || (c == 0xed && text[1] > 0x9f)) return 0;
    if ((c == 0xf0 && text[1] < 0x90) || (c == 0xf4 && text[1] > 0x8f)) return 0;
    return n;
}

static bool check_bytes(reader *r, const char *text, size_t n, int line)
{
    const unsigned char *bytes = (const unsigned char *)text;
    for (size_t i = 0, step; i < n; i += step) {
        step = letter_bytes(bytes + i, n - i);
        if (step > 0) continue;
        char what[96];
        tacet_text(what, sizeof what, "byte 0x%02x; a book is plain UTF-8 text, one word a line",
                   bytes[i]);
        complain(r, line, (int)i + 1, what);
        return false;
    }
    return true;
}

static void check_name(reader *r, const entry *x, int line)
{
    char *colon = strchr(x->name, ':');
    if (colon)
        complain(r, line, x->name_column + (int)(colon - x->name),
                 "':' in a name; a word of a book is called up as BOOK:NAME");
    if (strlen(x->name) > NAME_LETTERS_MOST)
        complain(r, line, x->name_column, "a name of more than 256 letters");
}

// A name that comes before its word is told from a word with a wrong letter.
static void complain_of_word(reader *r, const entry *x, int line, const tacet_error *e)
{
    tacet_pattern p;
    char what[2 * NAME_LETTERS_MOST];
    bool turned = x->name && tacet_pattern_parse(x->name, &p, NULL) == TACET_OK;
    if (turned)
        tacet_text(what, sizeof what, "a line is a word and then its name: %.64s %.80s", x->name,
                   x->word);
    complain(r, line, turned ? x->word_column : x->word_column + e->column - 1,
             turned ? what : e->text);
}

static void read_entry(reader *r, const entry *x, int line)
{
    tacet_pattern p;
    tacet_error e;
    bool was_bad = r->bad;
    r->bad = false;
    if (tacet_pattern_parse(x->word, &p, &e) != TACET_OK)
        complain_of_word(r, x, line, &e);
    else if (tacet_pattern_fires(&p) == 0)
        complain(r, line, x->word_column, "a word that never fires; at least one letter must");
    if (x->name) check_name(r, x, line);
    tacet_words *w = r->words;
    if (!r->bad) {
        w->pattern[w->n] = p;
        w->name[w->n] = x->name;
        w->comment[w->n] = x->comment;
        r->name_column[w->n] = x->name_column;
        w->line[w->n++] = line;
    }
    r->bad = r->bad || was_bad;
}

static void read_line(reader *r, char *text, size_t n, int line)
{
    if (n > 0 && text[n - 1] == '\r') n--;
    text[n] = '\0';
    if (!check_bytes(r, text, n, line)) return;
    entry x = split(text);
    if (!x.word || r->full) return;
    if (r->words->n == BOOK_WORDS_MOST) {
        complain(r, line, 1, "more than 10000 words in a book");
        r->full = true;
        return;
    }
    read_entry(r, &x, line);
}

// Index of a word with what it is sorted by.
typedef struct {
    const char *name;
    const tacet_pattern *pattern;
    size_t at;
} key;

static int by_place(const key *a, const key *b)
{
    return (a->at > b->at) - (a->at < b->at);
}

static int by_name(const void *a, const void *b)
{
    const key *x = a, *y = b;
    int order = strcmp(x->name, y->name);
    return order ? order : by_place(x, y);
}

static int by_word(const void *a, const void *b)
{
    const key *x = a, *y = b;
    int order = memcmp(x->pattern, y->pattern, sizeof *x->pattern);
    return order ? order : by_place(x, y);
}

static void check_names_unique(reader *r, key *keys)
{
    size_t n = 0;
    const tacet_words *w = r->words;
    for (size_t i = 0; i < w->n; i++)
        if (w->name[i]) keys[n++] = (key){.name = w->name[i], .at = i};
    qsort(keys, n, sizeof *keys, by_name);
    for (size_t i = 1; i < n; i++) {
        if (strcmp(keys[i].name, keys[i - 1].name) != 0) continue;
        char what[NAME_LETTERS_MOST + 80];
        tacet_text(what, sizeof what, "the name '%s' again; line %d has it too", keys[i].name,
                   w->line[keys[i - 1].at]);
        complain(r, w->line[keys[i].at], r->name_column[keys[i].at], what);
    }
}

// One pattern under two names is allowed, but worth a word; "x.x." and "x." are one.
static void check_words_unique(reader *r, key *keys, tacet_pattern *reduced)
{
    const tacet_words *w = r->words;
    for (size_t i = 0; i < w->n; i++) {
        reduced[i] = w->pattern[i];
        tacet_pattern_reduce(&reduced[i]);
        keys[i] = (key){.pattern = &reduced[i], .at = i};
    }
    qsort(keys, w->n, sizeof *keys, by_word);
    for (size_t i = 1; i < w->n; i++)
        if (tacet_pattern_equal(keys[i].pattern, keys[i - 1].pattern))
            tacet_problems_add(r->problems, true, r->path, w->line[keys[i].at], 1,
                               "the same pattern as in line %d", w->line[keys[i - 1].at]);
}

static void check_unique(reader *r)
{
    if (r->words->n == 0) return;
    key *keys = calloc(r->words->n, sizeof *keys);
    tacet_pattern *reduced = calloc(r->words->n, sizeof *reduced);
    if (keys && reduced) {
        check_names_unique(r, keys);
        check_words_unique(r, keys, reduced);
    } else {
        r->no_memory = true;
    }
    free(keys);
    free(reduced);
}

static size_t count_lines(const char *text, size_t bytes)
{
    size_t n = 1;
    for (size_t i = 0; i < bytes; i++)
        if (text[i] == '\n') n++;
    return n;
}

static void read_lines(reader *r, char *text, size_t bytes)
{
    int line = 1;
    for (char *at = text, *end = text + bytes; at < end; line++) {
        char *next = memchr(at, '\n', (size_t)(end - at));
        if (!next) next = end;
        read_line(r, at, (size_t)(next - at), line);
        at = next + 1;
    }
}

tacet_status tacet_book_read_text(const char *text, size_t bytes, const char *name, tacet_arena *a,
                                  tacet_problems *problems, tacet_words *out)
{
    *out = (tacet_words){0};
    reader r = {.path = name, .problems = problems, .words = out};
    if (bytes > BOOK_BYTES_MOST) {
        complain(&r, 0, 0, "a book of more than 1 MiB");
        return TACET_BAD_INPUT;
    }
    if (bytes >= 3 && memcmp(text, "\xef\xbb\xbf", 3) == 0) {
        text += 3;
        bytes -= 3;
    }
    char *copy = tacet_arena_alloc(a, bytes + 1);
    if (!copy) return TACET_NO_MEMORY;
    if (bytes) memcpy(copy, text, bytes);
    size_t lines = count_lines(copy, bytes),
           most = lines < BOOK_WORDS_MOST ? lines : BOOK_WORDS_MOST;
    tacet_status status = words_init(out, most, a, NULL);
    if (status != TACET_OK) return status;
    r.name_column = tacet_arena_alloc(a, most * sizeof *r.name_column);
    if (!r.name_column) return TACET_NO_MEMORY;
    out->n = 0;
    read_lines(&r, copy, bytes);
    check_unique(&r);
    if (r.no_memory) return TACET_NO_MEMORY;
    if (!r.bad && out->n == 0) complain(&r, 0, 0, "no word in this book");
    return r.bad ? TACET_BAD_INPUT : TACET_OK;
}

tacet_status tacet_book_read(const char *path, tacet_arena *a, tacet_problems *problems,
                             tacet_words *out)
{
    char *text;
    size_t bytes;
    tacet_error e;
    *out = (tacet_words){0};
    tacet_status status = tacet_file_read(path, BOOK_BYTES_MOST, a, &text, &bytes, &e);
    if (status == TACET_OK) return tacet_book_read_text(text, bytes, path, a, problems, out);
    if (status == TACET_OUTSIDE_WORLD)
        tacet_problems_add(problems, false, path, 0, 0, "%s", e.text);
    return status;
}

static tacet_status first_error(const tacet_problems *problems, tacet_status status, tacet_error *e)
{
    for (size_t i = 0; i < tacet_problems_kept(problems); i++) {
        const tacet_problem *p = tacet_problems_at(problems, i);
        if (p->warning) continue;
        (void)tacet_fail(e, status, "%s: %s", p->file, p->text);
        if (e) {
            e->line = p->line;
            e->column = p->column;
        }
        return status;
    }
    return tacet_fail(e, status, "%s", tacet_status_text(status));
}

static tacet_status make(const tacet_maker_def *d, tacet_arena *a, tacet_words *out, tacet_error *e)
{
    if (!d->path) return tacet_fail(e, TACET_BAD_INPUT, "no path of a book");
    tacet_problems *problems = tacet_problems_create();
    if (!problems) return tacet_fail(e, TACET_NO_MEMORY, "no memory for a book");
    tacet_status status = tacet_book_read(d->path, a, problems, out);
    if (status != TACET_OK) (void)first_error(problems, status, e);
    tacet_problems_destroy(problems);
    return status;
}

const tacet_maker tacet_maker_book = {"book", "the words of a book; reads path", make};
