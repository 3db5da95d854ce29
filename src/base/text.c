#include "text.h"
#include "tacet/base.h"
#include <locale.h>
#include <stdio.h>

// The C locale object of the C library is made once by the library itself: newlocale hands it out
// without allocating, so that no state of our own is needed. uselocale acts on this thread alone.
void text_format(char *out, size_t bytes, const char *format, va_list args)
{
    locale_t plain = newlocale(LC_ALL_MASK, "C", (locale_t)0);
    locale_t before = plain ? uselocale(plain) : (locale_t)0;
    if (vsnprintf(out, bytes, format, args) < 0 && bytes) out[0] = '\0';
    if (plain) {
        uselocale(before);
        freelocale(plain);
    }
}

char *tacet_text(char *out, size_t bytes, const char *format, ...)
{
    va_list args;
    va_start(args, format);
    text_format(out, bytes, format, args);
    va_end(args);
    return out;
}
