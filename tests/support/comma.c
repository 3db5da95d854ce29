#include "comma.h"
#include <locale.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

static char folder[] = "/tmp/tacet-locale-XXXXXX";
static bool made;

static bool compile(void)
{
    char command[160];
    if (!mkdtemp(folder)) return false;
    made = true;
    snprintf(command, sizeof command, "localedef -i de_DE -f UTF-8 %s/de_DE.UTF-8 >/dev/null 2>&1",
             folder);
    return system(command) == 0 && setenv("LOCPATH", folder, 1) == 0 &&
           setlocale(LC_ALL, "de_DE.UTF-8");
}

bool comma_begin(void)
{
    char text[8];
    if (!setlocale(LC_ALL, "de_DE.UTF-8") && !compile()) {
        comma_end();
        return false;
    }
    snprintf(text, sizeof text, "%.1f", 1.5);
    return strcmp(text, "1,5") == 0;
}

void comma_end(void)
{
    char command[80];
    setlocale(LC_ALL, "C");
    if (!made) return;
    made = false;
    snprintf(command, sizeof command, "rm -r %s", folder);
    if (system(command) != 0) fprintf(stderr, "%s stays\n", folder);
    memcpy(folder + sizeof folder - 7, "XXXXXX", 6);
}
