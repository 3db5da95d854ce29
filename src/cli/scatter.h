// --scatter of tacet point and tacet screen. Private to cli.
#ifndef CLI_SCATTER_H
#define CLI_SCATTER_H
#include "cli/cli.h"

#define CLI_OPTION_SCATTER                                                                         \
    {                                                                                              \
        "scatter", 0, "LIST", NULL,                                                                \
            "least margins when stiffness scatters, as in mounts=15%,coupling=10%"                 \
    }

typedef struct { // one condition and what its margins come to
    const tacet_candidate *candidate;
    double from_rpm, to_rpm; // of the stretch of a screen
    double speed_rad_per_s, demand_Nm;
    tacet_level level;
    tacet_scatter margins;
} cli_scattered;
typedef struct {
    tacet_scatter_entry *entries;
    size_t n_entries; // 0: not asked for
    bool of_screen;
    cli_scattered *at;
    size_t n;
} cli_scatter;

// Reads --scatter; not given: an empty list.
int cli_scatter_read(const cli_call *call, const cli_session *s, cli_scatter *out);
// The condition of a point, `margins` apart; nothing when not asked for.
int cli_scatter_point(const cli_session *s, const cli_scattered *condition, cli_scatter *out);
// Each stretch of a screen at its tightest speed; ends early, with CLI_DONE, once *stop is not 0.
int cli_scatter_screen(const cli_session *s, const tacet_screen *screen, const volatile int *stop,
                       cli_scatter *out);
// Text after an empty line, or the member "scatter" of an open object; nothing when not asked for.
int cli_scatter_text(const cli_call *call, const cli_session *s, const cli_scatter *c);
void cli_scatter_json(tacet_json *j, const cli_session *s, const cli_scatter *c);
// scatter.csv into the folder of a screen; nothing when not asked for.
int cli_scatter_save(const cli_session *s, const cli_scatter *c, tacet_folder *folder);

#endif
