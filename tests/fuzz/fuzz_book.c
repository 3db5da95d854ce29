// Books of words.
#include "fuzz.h"
#include "tacet/pattern.h"

static const char name[] = "fuzz.words";

static bool same_text(const char *a, const char *b)
{
    return a == b || (a && b && strcmp(a, b) == 0);
}

static void check_entry(const tacet_words *w, size_t i)
{
    char text[TACET_PATTERN_LONGEST + 1];
    tacet_pattern back;
    REQUIRE(w->pattern[i].length >= 1 && tacet_pattern_fires(&w->pattern[i]) >= 1);
    tacet_pattern_format(&w->pattern[i], text);
    REQUIRE(tacet_pattern_parse(text, &back, NULL) == TACET_OK);
    REQUIRE(tacet_pattern_equal(&w->pattern[i], &back));
    REQUIRE(w->line[i] >= 1 && (i == 0 || w->line[i] > w->line[i - 1]));
    if (!w->name[i]) return;
    REQUIRE(*w->name[i] && fuzz_is_utf8(w->name[i]) && !strchr(w->name[i], ':'));
}

// The book written out from what was read; to be freed.
static char *rewrite(const tacet_words *w, size_t *bytes)
{
    char *out = NULL;
    FILE *to = open_memstream(&out, bytes);
    REQUIRE(to);
    for (size_t i = 0; i < w->n; i++) {
        char text[TACET_PATTERN_LONGEST + 1];
        fputs(tacet_pattern_format(&w->pattern[i], text), to);
        if (w->name[i]) fprintf(to, "  %s", w->name[i]);
        if (w->comment[i]) fprintf(to, "  # %s", w->comment[i]);
        fputc('\n', to);
    }
    fclose(to);
    return out;
}

static void check_again(const tacet_words *w, tacet_arena *a)
{
    size_t bytes;
    char *text = rewrite(w, &bytes);
    tacet_words again;
    tacet_problems *p = tacet_problems_create();
    REQUIRE(p);
    // 1 MiB is the most of a book, and blanks may be fewer in the first writing
    if (bytes <= 1 << 20) {
        REQUIRE(tacet_book_read_text(text, bytes, name, a, p, &again) == TACET_OK);
        REQUIRE(again.n == w->n);
        for (size_t i = 0; i < w->n; i++) {
            REQUIRE(tacet_pattern_equal(&again.pattern[i], &w->pattern[i]));
            REQUIRE(same_text(again.name[i], w->name[i]));
            REQUIRE(same_text(again.comment[i], w->comment[i]));
        }
    }
    tacet_problems_destroy(p);
    free(text);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    tacet_arena *a = tacet_arena_create();
    tacet_problems *p = tacet_problems_create();
    tacet_words words;
    REQUIRE(a && p);
    const char *text = (const char *)data;
    tacet_status status = tacet_book_read_text(text, size, name, a, p, &words);
    fuzz_problems(status, p, name, text, size);
    for (size_t i = 0; i < tacet_problems_kept(p); i++)
        REQUIRE(fuzz_is_utf8(tacet_problems_at(p, i)->text));
    if (status == TACET_OK) {
        REQUIRE(words.n >= 1 && words.n <= 10000);
        for (size_t i = 0; i < words.n; i++)
            check_entry(&words, i);
        check_again(&words, a);
    }
    tacet_problems_destroy(p);
    tacet_arena_destroy(a);
    return 0;
}
