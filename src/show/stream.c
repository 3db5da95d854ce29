#include "show/folder.h"
#include <errno.h>
#include <string.h>
#include <unistd.h>

int stream_reason(FILE *to)
{
    int fd = fileno(to);
    return fd >= 0 && write(fd, "\n", 1) < 0 ? errno : 0;
}

tacet_status tacet_stream_check(FILE *to, const char *what, tacet_error *e)
{
    errno = 0;
    int flushed = fflush(to);
    int reason = errno;
    if (flushed == 0 && !ferror(to)) return TACET_OK;
    if (!reason) reason = stream_reason(to);
    tacet_status s = tacet_fail(e, TACET_OUTSIDE_WORLD, "cannot write %s: %s", what,
                                reason ? strerror(reason) : "an earlier write failed");
    errno = reason;
    return s;
}
