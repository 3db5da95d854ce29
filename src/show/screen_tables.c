// The list of tables of a screen; a new one is a function and one line here.
#include "show/screen.h"
#include <string.h>

static const tacet_screen_table tables[] = {
    {"runs", "what runs where: stretches of speed with one recommended density", screen_runs_table},
    {"summary", "what each density or word comes to", screen_summary_table},
    {"ranking", "the best two at each speed", screen_ranking_table},
    {"no-go", "speeds at which a band's level is over its limit", screen_no_go_table},
    {"agreement", "how well the solvers agree on the worst conditions", screen_agreement_table},
    {"mounts", "worst force of each mount, axis and order over all patterns", screen_mounts_table},
    {"levels", "every condition with every column", screen_levels_table},
    {NULL, NULL, NULL}};

const tacet_screen_table *tacet_screen_tables(void)
{
    return tables;
}

const tacet_screen_table *tacet_screen_table_find(const char *name)
{
    for (const tacet_screen_table *t = tables; t->name; t++)
        if (strcmp(t->name, name) == 0) return t;
    return NULL;
}
