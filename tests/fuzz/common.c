#include "fuzz.h"
#include <gsl/gsl_errno.h>
#include <sys/mman.h>
#include <unistd.h>

int LLVMFuzzerInitialize(int *argc, char ***argv)
{
    (void)argc;
    (void)argv;
    gsl_set_error_handler_off(); // as a host of the library does
    return 0;
}

void fuzz_broken(const char *file, int line, const char *promise)
{
    fprintf(stderr, "%s:%d: broken promise: %s\n", file, line, promise);
    abort();
}

char *fuzz_text(const uint8_t *data, size_t size)
{
    char *text = malloc(size + 1);
    REQUIRE(text);
    if (size) memcpy(text, data, size);
    text[size] = '\0';
    return text;
}

// Bytes of the letter at `c` (RFC 3629), 0: none. The zero byte ends every text before it is asked.
static size_t letter_bytes(const unsigned char *c)
{
    static const struct {
        unsigned char low, high, second_low, second_high, more;
    } kinds[] = {
        {0x00, 0x7f, 0, 0, 0},       {0xc2, 0xdf, 0x80, 0xbf, 1}, {0xe0, 0xe0, 0xa0, 0xbf, 2},
        {0xe1, 0xec, 0x80, 0xbf, 2}, {0xed, 0xed, 0x80, 0x9f, 2}, {0xee, 0xef, 0x80, 0xbf, 2},
        {0xf0, 0xf0, 0x90, 0xbf, 3}, {0xf1, 0xf3, 0x80, 0xbf, 3}, {0xf4, 0xf4, 0x80, 0x8f, 3}};
    for (size_t i = 0; i < sizeof kinds / sizeof *kinds; i++) {
        if (c[0] < kinds[i].low || c[0] > kinds[i].high) continue;
        if (kinds[i].more && (c[1] < kinds[i].second_low || c[1] > kinds[i].second_high)) return 0;
        for (size_t k = 2; k <= kinds[i].more; k++)
            if (c[k] < 0x80 || c[k] > 0xbf) return 0;
        return kinds[i].more + 1u;
    }
    return 0;
}

bool fuzz_is_utf8(const char *text)
{
    const unsigned char *c = (const unsigned char *)text;
    while (*c) {
        size_t n = letter_bytes(c);
        if (n == 0) return false;
        c += n;
    }
    return true;
}

static void require_words(const char *text)
{
    REQUIRE(*text);
    REQUIRE(strlen(text) >= 3);
}

void fuzz_refusal(tacet_status status, const tacet_error *e)
{
    REQUIRE(status == TACET_BAD_INPUT);
    REQUIRE(e->status == status);
    REQUIRE(memchr(e->text, '\0', sizeof e->text));
    require_words(e->text);
}

// Behind the end of the line at `at`; NULL: the last one. YAML ends lines at a lone CR, U+0085,
// U+2028 and U+2029, too.
static const char *next_line(const char *at, const char *end, bool yaml)
{
    for (; at < end; at++) {
        size_t left = (size_t)(end - at);
        if (*at == '\n') return at + 1;
        if (!yaml) continue;
        if (*at == '\r') return at + (left > 1 && at[1] == '\n' ? 2 : 1);
        if (left >= 2 && memcmp(at, "\xc2\x85", 2) == 0) return at + 2;
        if (left < 3) continue;
        if (memcmp(at, "\xe2\x80\xa8", 3) == 0 || memcmp(at, "\xe2\x80\xa9", 3) == 0) return at + 3;
    }
    return NULL;
}

static bool is_place(int line, int column, const char *text, size_t bytes, bool yaml)
{
    const char *at = text, *end = text + bytes;
    for (int i = 1; i < line; i++) {
        const char *next = next_line(at, end, yaml);
        if (!next) return i + 1 == line && column == 1;
        at = next;
    }
    const char *next = next_line(at, end, yaml);
    size_t letters = (size_t)((next ? next : end) - at);
    return line >= 1 && column >= 1 && (size_t)column <= letters + 1 + (next == NULL);
}

// Is there such a place in the text? One past its end is where something is missing.
static void require_place(int line, int column, const char *words, const char *text, size_t bytes)
{
    bool inside =
        is_place(line, column, text, bytes, false) || is_place(line, column, text, bytes, true);
    if (!inside) fprintf(stderr, "%d:%d: %s\n", line, column, words);
    REQUIRE(inside);
}

void fuzz_refusal_in(tacet_status status, const tacet_error *e, const char *text, size_t bytes)
{
    fuzz_refusal(status, e);
    require_place(e->line, e->column, e->text, text, bytes);
}

void fuzz_problems(tacet_status status, const tacet_problems *p, const char *name, const char *text,
                   size_t bytes)
{
    size_t errors = tacet_problems_errors(p), kept = tacet_problems_kept(p);
    REQUIRE(status == TACET_OK || status == TACET_BAD_INPUT);
    REQUIRE((errors > 0) == (status == TACET_BAD_INPUT));
    REQUIRE(kept >= (errors > 0) + (size_t)(tacet_problems_warnings(p) > 0));
    REQUIRE(kept <= 40);
    for (size_t i = 0; i < kept; i++) {
        const tacet_problem *one = tacet_problems_at(p, i);
        require_words(one->text);
        REQUIRE(one->file && *one->file);
        if (strcmp(one->file, name) != 0) continue;
        if (one->line == 0) continue; // of the whole file
        require_place(one->line, one->column, one->text, text, bytes);
    }
}

fuzz_file fuzz_file_create(const void *bytes, size_t size)
{
    fuzz_file f = {.fd = memfd_create("fuzz", 0)};
    REQUIRE(f.fd >= 0);
    const char *at = bytes;
    for (size_t left = size; left > 0;) {
        ssize_t n = write(f.fd, at, left);
        REQUIRE(n > 0);
        at += n;
        left -= (size_t)n;
    }
    snprintf(f.path, sizeof f.path, "/proc/self/fd/%d", f.fd);
    return f;
}

void fuzz_file_remove(fuzz_file *f)
{
    close(f->fd);
}
