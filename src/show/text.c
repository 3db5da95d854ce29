#include "show/text.h"
#include "tacet/show.h"
#include <inttypes.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

size_t text_next(const char *text, uint32_t *code)
{
    const unsigned char *s = (const unsigned char *)text;
    // bytes, smallest code and mask of the first byte; longer forms of a short code are invalid
    static const struct {
        unsigned char mask, lead;
        uint32_t least;
    } form[] = {{0x7f, 0x00, 0}, {0x1f, 0xc0, 0x80}, {0x0f, 0xe0, 0x800}, {0x07, 0xf0, 0x10000}};
    for (size_t n = 0; n < 4; n++) {
        if ((s[0] & ~form[n].mask & 0xff) != form[n].lead) continue;
        uint32_t c = s[0] & form[n].mask;
        size_t i = 1;
        for (; i <= n && (s[i] & 0xc0) == 0x80; i++)
            c = c << 6 | (s[i] & 0x3f);
        if (i <= n || c < form[n].least || c > 0x10ffff || (c >= 0xd800 && c <= 0xdfff)) break;
        *code = c;
        return n + 1;
    }
    *code = TEXT_INVALID;
    return 1;
}

bool text_is_control(uint32_t c)
{
    return c < 0x20 || (c >= 0x7f && c < 0xa0) || (c >= 0x200b && c <= 0x200f) ||
           (c >= 0x2028 && c <= 0x202e) || (c >= 0x2066 && c <= 0x2069) || c == 0xfeff;
}

size_t text_columns(const char *text)
{
    size_t n = 0;
    for (uint32_t code; *text; n++)
        text += text_next(text, &code);
    return n;
}

char *text_clean(const char *text, size_t size, char *out)
{
    size_t used = 0;
    while (*text) {
        uint32_t code;
        size_t bytes = text_next(text, &code);
        bool plain = !text_is_control(code) && !(code == TEXT_INVALID && bytes == 1);
        if (used + (plain ? bytes : 1) >= size) break;
        if (plain)
            memcpy(out + used, text, bytes);
        else
            out[used] = code == TEXT_INVALID ? '?' : ' ';
        used += plain ? bytes : 1;
        text += bytes;
    }
    out[used] = 0;
    return out;
}

void tacet_write_clean(FILE *to, const char *text)
{
    for (size_t bytes; *text; text += bytes) {
        uint32_t code;
        bytes = text_next(text, &code);
        if (text_is_control(code))
            fputc(' ', to);
        else if (code == TEXT_INVALID && bytes == 1)
            fputc('?', to);
        else
            fwrite(text, 1, bytes, to);
    }
}

const char *text_fixed(double value, int decimals, char out[TACET_NUMBER_TEXT])
{
    static const double power[] = {1, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9};
    if (!isfinite(value)) return strcpy(out, "");
    if (decimals < 0) return tacet_number_format_short(value, 4, out);
    if (decimals > 9) decimals = 9;
    double scaled = round(fabs(value) * power[decimals]);
    if (scaled >= 1e15) return tacet_number_format_short(value, 4, out);
    uint64_t whole = (uint64_t)scaled, unit = (uint64_t)power[decimals];
    const char *sign = value < 0 && whole > 0 ? "-" : "";
    if (decimals == 0)
        snprintf(out, TACET_NUMBER_TEXT, "%s%" PRIu64, sign, whole);
    else
        snprintf(out, TACET_NUMBER_TEXT, "%s%" PRIu64 ".%0*" PRIu64, sign, whole / unit, decimals,
                 whole % unit);
    return out;
}
