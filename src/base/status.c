#include "tacet/base.h"
#include "text.h"

const char *tacet_status_text(tacet_status status)
{
    static const char *const text[] = {"ok",         "bad input",     "no memory", "not converged",
                                       "not finite", "outside world", "stopped",   "harmonic only"};
    return (unsigned)status < sizeof text / sizeof *text ? text[status] : "unknown status";
}

tacet_status tacet_fail(tacet_error *e, tacet_status status, const char *format, ...)
{
    if (e) {
        va_list args;
        va_start(args, format);
        *e = (tacet_error){.status = status};
        text_format(e->text, sizeof e->text, format, args);
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
