// The caution that goes with every result, in one place, and the program's version beside it.
#include "tacet/show.h"

const char *tacet_version(void)
{
    return TACET_VERSION;
}

const char *tacet_caution(tacet_caution_form form)
{
    if (form == TACET_CAUTION_SHORT)
        return "A screening result, not a release: confirm by measurement on the real engine, by a "
               "qualified engineer, under the codes and class rules that apply. Not modelled: "
               "crankshaft bending, bearings, manifold dynamics, a powertrain that bends; mounts "
               "and "
               "paths count as far as the study gives them.";
    return "Caution: this is a screening result, not a release.\n"
           "Confirm it by measurement on the real engine, by a qualified engineer, under the "
           "codes\n"
           "and class rules that apply. Not modelled: crankshaft bending, bearings, manifold\n"
           "dynamics (gas exchange is at constant manifold pressures), a powertrain that bends;\n"
           "mounts and paths to people count as far as the study gives them. Stresses are of\n"
           "torsion only.\n";
}
