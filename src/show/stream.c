#include "tacet/show.h"
#include <errno.h>
#include <string.h>
#include <unistd.h>

// The reason of a failure that lies back is lost. One more byte, where others are missing anyway,
// meets it again.
static int reason_again(FILE *to)
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
    if (!reason) reason = reason_again(to);
    tacet_status s = tacet_fail(e, TACET_OUTSIDE_WORLD, "cannot write %s: %s", what,
                                reason ? strerror(reason) : "an earlier write failed");
    errno = reason;
    return s;
}
