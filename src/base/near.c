#include "tacet/base.h"
#include <ctype.h>
#include <string.h>

#define LONGEST   64 // longer words are names that nobody mistypes by a letter
#define SAME_STEM 2  // what leaving out a unit or a first word counts, in edits

static char folded(char c)
{
    if (c == '-' || c == ' ') return '_';
    return (char)tolower((unsigned char)c);
}

static unsigned least(unsigned a, unsigned b)
{
    return a < b ? a : b;
}

// Edits between a and b: insert, delete, replace, swap of neighbours (Damerau's distance without
// edits inside a swap); case, '-' and '_' count alike.
static unsigned edits(const char *a, size_t n, const char *b, size_t m)
{
    unsigned row[3][LONGEST + 1];
    for (size_t j = 0; j <= m; j++)
        row[0][j] = (unsigned)j;
    for (size_t i = 1; i <= n; i++) {
        unsigned *now = row[i % 3], *up = row[(i + 2) % 3], *two_up = row[(i + 1) % 3];
        now[0] = (unsigned)i;
        for (size_t j = 1; j <= m; j++) {
            bool same = folded(a[i - 1]) == folded(b[j - 1]);
            now[j] = least(least(up[j], now[j - 1]) + 1, up[j - 1] + !same);
            bool swap = i > 1 && j > 1 && folded(a[i - 1]) == folded(b[j - 2]) &&
                        folded(a[i - 2]) == folded(b[j - 1]);
            if (swap) now[j] = least(now[j], two_up[j - 2] + 1);
        }
    }
    return row[n % 3][m];
}

static bool folded_equal(const char *a, const char *b, size_t n)
{
    for (size_t i = 0; i < n; i++)
        if (folded(a[i]) != folded(b[i])) return false;
    return true;
}

// Is `shorter` what `longer` begins or ends with, up to a '_'?
static bool same_stem(const char *shorter, size_t n, const char *longer, size_t m)
{
    if (n < 3 || m <= n) return false;
    bool begins = folded(longer[n]) == '_' && folded_equal(shorter, longer, n);
    bool ends = folded(longer[m - n - 1]) == '_' && folded_equal(shorter, longer + m - n, n);
    return begins || ends;
}

const char *tacet_near_name(const char *word, const char *const *names, size_t n)
{
    size_t length = strlen(word);
    if (length == 0 || length > LONGEST) return NULL;
    const char *best = NULL;
    unsigned best_edits = 0;
    for (size_t i = 0; i < n; i++) {
        size_t m = names[i] ? strlen(names[i]) : 0;
        if (m == 0 || m > LONGEST) continue;
        size_t longer = length > m ? length : m;
        unsigned allowed = longer < 3 ? 0 : least(1 + (unsigned)(longer - 3) / 3, 4);
        unsigned d = edits(word, length, names[i], m);
        bool stem = same_stem(word, length, names[i], m) || same_stem(names[i], m, word, length);
        if (stem && d > SAME_STEM) d = SAME_STEM;
        if ((d > allowed && !stem) || (best && d >= best_edits)) continue;
        best = names[i];
        best_edits = d;
    }
    return best;
}
