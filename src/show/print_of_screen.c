// The text of a screen in reading order.
#include "show/screen.h"

#define LINE_MOST 96 // columns of a summary line before it goes on below

// Writes text in lines of at most LINE_MOST columns, those after the first set in.
static void write_wrapped(FILE *to, const char *text)
{
    size_t column = 0;
    while (*text) {
        size_t word = 0;
        while (text[word] && text[word] != ' ')
            word++;
        if (column > 0 && column + 1 + word > LINE_MOST) {
            fputs("\n   ", to);
            column = 3;
        }
        if (column > 0) {
            fputc(' ', to);
            column++;
        }
        char piece[256];
        snprintf(piece, sizeof piece, "%.*s", (int)(word < 255 ? word : 255), text);
        tacet_write_clean(to, piece);
        column += word;
        text += word;
        while (*text == ' ')
            text++;
    }
    fputc('\n', to);
}

tacet_status tacet_screen_print(const tacet_model *m, const tacet_screen *s,
                                const tacet_table_style *style, FILE *to)
{
    static const char *const names[] = {"runs", "summary", "no-go", "agreement"};
    const char *const *lines;
    size_t n;
    tacet_arena *a = tacet_arena_create();
    if (!a) return TACET_NO_MEMORY;
    tacet_status status = tacet_screen_summary(m, s, a, &lines, &n);
    if (status == TACET_OK) {
        tacet_write_clean(to, screen_title(m));
        fputc('\n', to);
        for (size_t i = 0; i < n; i++)
            write_wrapped(to, lines[i]);
    }
    for (size_t i = 0; status == TACET_OK && i < sizeof names / sizeof *names; i++) {
        tacet_table t;
        status = tacet_screen_table_find(names[i])->build(m, s, a, &t);
        if (status != TACET_OK) break;
        fputc('\n', to);
        if (t.n_rows > 0)
            tacet_table_write(&t, tacet_writer_find("text"), style, to);
        else
            fprintf(to, "%s: none\n", t.heading);
    }
    if (status == TACET_OK) fprintf(to, "\n%s", tacet_caution(TACET_CAUTION_LONG));
    tacet_arena_destroy(a);
    return status;
}
