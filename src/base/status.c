#include "tacet/base.h"
#include "text.h"
#include <string.h>

const char *tacet_status_text(tacet_status status)
{
    static const char *const text[] = {"ok",         "bad input",     "no memory", "not converged",
                                       "not finite", "outside world", "stopped",   "harmonic only"};
    return (unsigned)status < sizeof text / sizeof *text ? text[status] : "unknown status";
}

#define LONGEST 8192 // bytes of a message with the longest of paths in it
#define GAP     " .. "

// A text that is too long loses its middle: a reason stands at the end.
static void keep_ends(char *out, size_t bytes, const char *text)
{
    size_t length = strlen(text), head = (bytes - sizeof GAP) / 2, tail = bytes - sizeof GAP - head;
    if (length < bytes) {
        memcpy(out, text, length + 1);
        return;
    }
    memcpy(out, text, head);
    memcpy(out + head, GAP, sizeof GAP - 1);
    memcpy(out + head + sizeof GAP - 1, text + length - tail, tail + 1);
}

tacet_status tacet_fail(tacet_error *e, tacet_status status, const char *format, ...)
{
    if (e) {
        va_list args;
        va_start(args, format);
        char text[LONGEST];
        text_format(text, sizeof text, format, args);
        *e = (tacet_error){.status = status};
        keep_ends(e->text, sizeof e->text, text);
        va_end(args);
    }
    return status;
}

void tacet_report(const tacet_reporter *r, bool warning, const char *path, const char *format, ...)
{
    char text[512];
    va_list args;
    va_start(args, format);
    text_format(text, sizeof text, format, args);
    va_end(args);
    r->say(r->who, warning, path, text);
}
