// Words: what a user writes, and what can be said of a word without an engine.
#include "gcd.h"
#include "tacet/pattern.h"
#include <math.h>
#include <string.h>

static int tenths_of_letter(char letter)
{
    if (letter == '.') return 0;
    if (letter == 'x') return 10;
    if (letter >= '1' && letter <= '9') return letter - '0';
    return -1;
}

static tacet_status refuse(tacet_error *e, size_t position, const char *what)
{
    tacet_status status = tacet_fail(
        e, TACET_BAD_INPUT,
        "%s; a pattern is 1 to %d letters of 'x' (fires), '.' (skips), '1'..'9' (tenths of charge)",
        what, TACET_PATTERN_LONGEST);
    if (e) e->column = (int)position + 1;
    return status;
}

static tacet_status refuse_letter(tacet_error *e, size_t position, const char *word)
{
    unsigned char letter = (unsigned char)word[position];
    char what[48];
    if (letter > 0x20 && letter < 0x7f)
        tacet_text(what, sizeof what, "letter '%c'", letter);
    else
        tacet_text(what, sizeof what, "byte 0x%02x", letter);
    size_t used = strlen(what);
    tacet_text(what + used, sizeof what - used, " at position %zu", position + 1);
    return refuse(e, position, what);
}

tacet_status tacet_pattern_parse(const char *word, tacet_pattern *out, tacet_error *e)
{
    tacet_pattern p = {0};
    for (size_t i = 0; word[i]; i++) {
        if (i == TACET_PATTERN_LONGEST) return refuse(e, i, "a pattern of more than 64 letters");
        int tenths = tenths_of_letter(word[i]);
        if (tenths < 0) return refuse_letter(e, i, word);
        p.tenths[p.length++] = (uint8_t)tenths;
    }
    if (p.length == 0) return refuse(e, 0, "an empty pattern");
    *out = p;
    return TACET_OK;
}

char *tacet_pattern_format(const tacet_pattern *p, char out[TACET_PATTERN_LONGEST + 1])
{
    for (unsigned i = 0; i < p->length; i++) {
        unsigned t = p->tenths[i];
        out[i] = (char)(t == 0 ? '.' : t == 10 ? 'x' : '0' + (int)t);
    }
    out[p->length] = '\0';
    return out;
}

// Smallest d that divides the length such that the word is a repetition of its first d letters.
static unsigned primitive_length(const tacet_pattern *p)
{
    for (unsigned d = 1; d < p->length; d++)
        if (p->length % d == 0 && memcmp(p->tenths, p->tenths + d, p->length - d) == 0) return d;
    return p->length;
}

void tacet_pattern_reduce(tacet_pattern *p)
{
    unsigned length = primitive_length(p);
    memset(p->tenths + length, 0, TACET_PATTERN_LONGEST - length);
    p->length = length;
}

void tacet_pattern_rotate(const tacet_pattern *p, unsigned by, tacet_pattern *out)
{
    tacet_pattern rotated = {.length = p->length};
    for (unsigned i = 0; i < p->length; i++)
        rotated.tenths[i] = p->tenths[(i + by % p->length) % p->length];
    *out = rotated;
}

unsigned tacet_pattern_fires(const tacet_pattern *p)
{
    unsigned fires = 0;
    for (unsigned i = 0; i < p->length; i++)
        if (p->tenths[i] > 0) fires++;
    return fires;
}

bool tacet_pattern_equal(const tacet_pattern *a, const tacet_pattern *b)
{
    return a->length == b->length && memcmp(a->tenths, b->tenths, a->length) == 0;
}

// Turning a word by L letters changes nothing and turning it by n opportunities only moves the
// start of time by one working cycle, so rotations that differ by a multiple of gcd(L, n) load the
// crank alike.
unsigned tacet_pattern_placements(const tacet_pattern *p, unsigned cylinders)
{
    return gcd(primitive_length(p), cylinders);
}

// Reads digits at *text, at most 9999; false when there is none.
static bool digits_parse(const char **text, unsigned *out)
{
    unsigned value = 0, n = 0;
    for (; **text >= '0' && **text <= '9'; (*text)++, n++) {
        if (n == 4) return false;
        value = value * 10 + (unsigned)(**text - '0');
    }
    *out = value;
    return n > 0;
}

bool tacet_density_parse(const char *text, unsigned *fires, unsigned *length)
{
    unsigned k, l = 1;
    if (!digits_parse(&text, &k)) return false;
    if (*text == '/') {
        text++;
        if (!digits_parse(&text, &l)) return false;
    }
    if (*text || l == 0 || k > l || l > TACET_PATTERN_LONGEST) return false;
    unsigned g = gcd(k, l);
    *fires = k / g;
    *length = l / g;
    return true;
}

// The angle is reduced in integers first, so that a term's exact quarter turns stay exact.
void tacet_pattern_spectrum(const tacet_pattern *p, double complex *line)
{
    const double turn = 8 * atan(1);
    unsigned n = p->length;
    for (unsigned m = 0; m < n; m++) {
        line[m] = 0;
        for (unsigned j = 0; j < n; j++) {
            double angle = turn * (double)(m * j % n) / n;
            line[m] += p->tenths[j] / 10.0 * (cos(angle) - I * sin(angle));
        }
    }
}
