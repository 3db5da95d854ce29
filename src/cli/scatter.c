// --scatter: which conditions, and the call of the library.
#include "cli/scatter.h"

int cli_scatter_read(const cli_call *call, const cli_session *s, cli_scatter *out)
{
    tacet_error e = {.text = ""};
    *out = (cli_scatter){.n = 0};
    if (!cli_given(call, "scatter")) return CLI_DONE;
    if (cli_given(call, "csv"))
        return cli_wrong("--scatter and --csv: its margins stand in the text and in --json");
    tacet_status status = tacet_scatter_parse(cli_value(call, "scatter"), s->model, s->arena,
                                              &out->entries, &out->n_entries, &e);
    if (status == TACET_OK) return CLI_DONE;
    out->n_entries = 0;
    return status == TACET_BAD_INPUT ? cli_wrong("--scatter: %s", e.text) : cli_failed(status, &e);
}

static int run(const cli_session *s, const volatile int *stop, const cli_scatter *c,
               cli_scattered *at)
{
    tacet_error e = {.text = ""};
    tacet_watch watch = {.stop = stop};
    tacet_scatter_ask ask = {.entries = c->entries,
                             .n_entries = c->n_entries,
                             .candidate = at->candidate,
                             .speed_rad_per_s = at->speed_rad_per_s,
                             .demand_Nm = at->demand_Nm,
                             .level = at->level};
    tacet_status status = tacet_scatter_run(s->model, &ask, &watch, s->arena, &at->margins, &e);
    if (status == TACET_STOPPED) {
        cli_say("%s; nothing was written", e.text);
        return CLI_DONE; // the signal is raised again
    }
    return status == TACET_OK ? CLI_DONE : cli_failed(status, &e);
}

int cli_scatter_point(const cli_session *s, const cli_scattered *condition, cli_scatter *out)
{
    if (out->n_entries == 0) return CLI_DONE;
    out->at = tacet_arena_alloc(s->arena, sizeof *out->at);
    if (!out->at) return cli_failed(TACET_NO_MEMORY, NULL);
    out->at[0] = *condition;
    out->n = 1;
    return run(s, NULL, out, &out->at[0]);
}

int cli_scatter_screen(const cli_session *s, const tacet_screen *screen, const volatile int *stop,
                       cli_scatter *out)
{
    tacet_run *runs;
    size_t n;
    if (out->n_entries == 0) return CLI_DONE;
    out->of_screen = true;
    if (tacet_screen_runs(screen, s->arena, &runs, &n) != TACET_OK ||
        !(out->at = tacet_arena_alloc(s->arena, (n + 1) * sizeof *out->at)))
        return cli_failed(TACET_NO_MEMORY, NULL);
    for (size_t i = 0; i < n && !*stop; i++) {
        if (runs[i].tightest == SIZE_MAX) continue;
        const tacet_row *row = &screen->cells[runs[i].tightest].row;
        cli_scattered *at = &out->at[out->n];
        *at = (cli_scattered){.candidate = &screen->candidates[runs[i].candidate],
                              .from_rpm = cli_rpm(screen->ranks[runs[i].first].speed_rad_per_s),
                              .to_rpm = cli_rpm(screen->ranks[runs[i].last].speed_rad_per_s),
                              .speed_rad_per_s = row->speed_rad_per_s,
                              .demand_Nm = row->demand_Nm,
                              .level = TACET_LEVEL_RIPPLE};
        int code = run(s, stop, out, at);
        if (code != CLI_DONE) return code;
        out->n++;
    }
    return CLI_DONE;
}
