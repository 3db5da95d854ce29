// Quantities of the gas.
#include "judge/quantities.h"

tacet_status peak_pressure(const tacet_response *r, size_t none, double *out)
{
    (void)none;
    *out = r->peak_pressure_Pa * MPA_PER_PA;
    return TACET_OK;
}
