// What a row says of itself.
#include "tacet/condition.h"
#include <math.h>

static int decides(const tacet_row *row)
{
    if (row->outcome == TACET_UNREACHABLE) return 4;
    if (row->outcome == TACET_FAILED) return 3;
    if (row->worst == TACET_OVER) return 2; // whatever else has no verdict
    return row->worst == TACET_NO_VERDICT ? 1 : 0;
}

bool tacet_row_worse(const tacet_row *a, const tacet_row *b)
{
    if (decides(a) != decides(b)) return decides(a) > decides(b);
    if (isnan(b->worst_margin_db)) return !isnan(a->worst_margin_db);
    return a->worst_margin_db < b->worst_margin_db;
}

const char *tacet_outcome_text(tacet_outcome o)
{
    static const char *const text[] = {"solved", "unreachable", "failed"};
    return (unsigned)o < sizeof text / sizeof *text ? text[o] : "unknown";
}
