// The tables of a screen, as plain data.
#include "show/screen.h"
#include <math.h>
#include <string.h>

#define N_COLUMNS(c) (sizeof(c) / sizeof *(c))

static double speed_of_rank(const tacet_screen *s, size_t rank)
{
    return screen_rpm(s->ranks[rank].speed_rad_per_s);
}

// ---- runs

static const tacet_table_column runs_columns[] = {
    {"from_rpm", "rpm", false, -1, false, "from"},
    {"to_rpm", "rpm", false, -1, false, "to"},
    {"run", NULL, true, 0, false, NULL},
    {"word", NULL, true, 0, false, NULL},
    {"saving_percent", "%", false, 1, false, "saves"},
    {"least_margin_db", "dB", false, 1, false, "margin"},
    {"limited_by", NULL, true, 0, false, "limited by"},
    {"at_order", NULL, false, -1, false, "order"},
};

// Mean saving of a run, %; NAN: none known.
static double mean_saving(const tacet_screen *s, const tacet_run *run)
{
    double sum = 0;
    size_t n = 0;
    for (size_t i = run->first; i <= run->last; i++) {
        double saved = screen_saving_percent(&s->cells[s->ranks[i].best].row);
        if (isfinite(saved)) sum += saved, n++;
    }
    return n ? sum / (double)n : NAN;
}

tacet_status screen_runs_table(const tacet_model *m, const tacet_screen *s, tacet_arena *a,
                               tacet_table *out)
{
    tacet_run *run;
    size_t n;
    table_row row;
    tacet_status status = tacet_screen_runs(s, a, &run, &n);
    if (status != TACET_OK) return status;
    status = table_start(a,
                         &(tacet_table){.name = "runs",
                                        .heading = "What runs where",
                                        .columns = runs_columns,
                                        .n_columns = N_COLUMNS(runs_columns),
                                        .n_rows = n},
                         out, &row);
    if (status != TACET_OK) return status;
    for (size_t i = 0; i < n; i++) {
        put_number(&row, speed_of_rank(s, run[i].first));
        put_number(&row, speed_of_rank(s, run[i].last));
        if (run[i].candidate == SIZE_MAX) {
            put_text(&row, "none is clear");
            for (size_t c = 3; c < N_COLUMNS(runs_columns); c++)
                put_text(&row, NULL);
            continue;
        }
        const tacet_row *r = &s->cells[run[i].tightest].row;
        put_text(&row, s->candidates[run[i].candidate].name);
        put_accent(&row);
        put_text(&row, s->candidates[run[i].candidate].word);
        put_number(&row, mean_saving(s, &run[i]));
        put_number(&row, r->worst_margin_db);
        put_text(&row, screen_limited_by(m, r));
        put_number(&row, screen_limiting_order(r));
    }
    return TACET_OK;
}

// ---- summary

static const tacet_table_column summary_columns[] = {
    {"candidate", NULL, true, 0, false, NULL},
    {"word", NULL, true, 0, false, NULL},
    {"density", NULL, false, -1, true, NULL},
    {"placements", NULL, false, 0, true, NULL},
    {"placements_left_out", NULL, false, 0, true, NULL},
    {"clear", NULL, false, 0, false, NULL},
    {"near", NULL, false, 0, false, NULL},
    {"over", NULL, false, 0, false, NULL},
    {"unreachable", NULL, false, 0, false, "out of reach"},
    {"no_verdict", NULL, false, 0, true, "no verdict"},
    {"best_at", NULL, false, 0, true, NULL},
    {"clear_from_rpm", "rpm", false, -1, false, "from"},
    {"clear_to_rpm", "rpm", false, -1, false, "to"},
    {"clear_rpm", "rpm", false, -1, true, NULL},
    {"saving_percent", "%", false, 1, false, "saves"},
    {"limited_by", NULL, true, 0, false, "limited by"},
    {"limiting_order", NULL, false, -1, false, "order"},
    {"recommended", NULL, true, 0, true, NULL},
    {"note", NULL, true, 0, false, NULL},
};

#define NO_VERDICT 9 // its place among the columns

static const char *limiting_name(const tacet_model *m, const tacet_candidate_note *note)
{
    if (note->limiting_limit >= 0) return tacet_model_limit(m, (size_t)note->limiting_limit)->name;
    return note->limiting_band >= 0 ? tacet_model_band(m, (size_t)note->limiting_band)->name : "";
}

static void summary_row(const tacet_model *m, const tacet_candidate *c,
                        const tacet_candidate_note *note, table_row *row)
{
    bool screened = !c->refused;
    const double counts[] = {(double)note->n_clear, (double)note->n_near,
                             (double)note->n_over,  (double)note->n_unreachable,
                             (double)note->n_none,  (double)note->n_best};
    put_text(row, c->name);
    if (note->recommended) put_accent(row);
    put_text(row, c->word);
    put_number(row, c->density);
    put_number(row, (double)c->n_placements);
    put_number(row, (double)c->n_left_out);
    for (size_t i = 0; i < N_COLUMNS(counts); i++)
        put_number(row, screened ? counts[i] : NAN);
    bool any = screened && note->n_clear > 0;
    put_number(row, any ? screen_rpm(note->clear_from_rad_per_s) : NAN);
    put_number(row, any ? screen_rpm(note->clear_to_rad_per_s) : NAN);
    put_number(row, screened ? screen_rpm(note->clear_rad_per_s) : NAN);
    put_number(row, screened ? 100 * note->saving : NAN);
    put_text(row, screened ? limiting_name(m, note) : "");
    put_number(row, screened && note->limiting_order > 0 ? note->limiting_order : NAN);
    put_text(row, note->recommended ? "yes" : "no");
    put_text(row, !screened ? c->refused : note->recommended ? "recommended" : note->why_not);
    if (note->recommended) put_accent(row);
}

tacet_status screen_summary_table(const tacet_model *m, const tacet_screen *s, tacet_arena *a,
                                  tacet_table *out)
{
    table_row row;
    size_t n = N_COLUMNS(summary_columns), none = 0;
    tacet_table_column *columns = tacet_arena_alloc(a, sizeof summary_columns);
    if (!columns) return TACET_NO_MEMORY;
    memcpy(columns, summary_columns, sizeof summary_columns);
    for (size_t i = 0; i < s->n_candidates; i++)
        none += !s->candidates[s->notes[i].candidate].refused && s->notes[i].n_none > 0;
    columns[NO_VERDICT].data_only = none == 0; // a column of zeros says nothing to a reader
    tacet_status status = table_start(
        a,
        &(tacet_table){
            .name = "summary",
            .heading = "Candidates, by number of grid speeds; from, to: its widest clear stretch",
            .columns = columns,
            .n_columns = n,
            .n_rows = s->n_candidates},
        out, &row);
    for (size_t i = 0; status == TACET_OK && i < s->n_candidates; i++)
        summary_row(m, &s->candidates[s->notes[i].candidate], &s->notes[i], &row);
    return status;
}

// ---- ranking

static const tacet_table_column ranking_columns[] = {
    {"speed_rpm", "rpm", false, -1, false, "speed"},
    {"demand_nm", "N m", false, -1, false, "torque"},
    {"status", NULL, true, 0, false, NULL},
    {"run", NULL, true, 0, false, NULL},
    {"word", NULL, true, 0, false, NULL},
    {"verdict", NULL, true, 0, true, NULL},
    {"margin_db", "dB", false, 1, false, "margin"},
    {"limited_by", NULL, true, 0, false, "limited by"},
    {"at_order", NULL, false, -1, false, "order"},
    {"fuel_kg_per_h", "kg/h", false, -1, false, "fuel"},
    {"saving_percent", "%", false, 1, false, "saves"},
    {"next", NULL, true, 0, false, NULL},
    {"next_verdict", NULL, true, 0, false, "is"},
    {"next_margin_db", "dB", false, 1, false, "margin"},
    {"next_saving_percent", "%", false, 1, false, "saves"},
};

static void ranked_cell(const tacet_model *m, const tacet_screen *s, size_t cell, table_row *row)
{
    const tacet_row *r = &s->cells[cell].row;
    put_text(row, screen_candidate(s, cell)->name);
    put_text(row, screen_candidate(s, cell)->word);
    put_text(row, tacet_verdict_text(r->worst));
    put_number(row, r->worst_margin_db);
    put_text(row, screen_limited_by(m, r));
    put_number(row, screen_limiting_order(r));
    put_number(row, r->outcome == TACET_SOLVED ? r->duty.fuel_kg_per_s * 3600 : NAN);
    put_number(row, screen_saving_percent(r));
}

// First of the ranking other than `best`; SIZE_MAX: none.
static size_t next_best(const tacet_rank *rank, size_t best)
{
    for (size_t i = 0; i < rank->n_ranked; i++)
        if (rank->ranked[i] != best) return rank->ranked[i];
    return SIZE_MAX;
}

// The recommended candidate, or the first of the ranking with a status that says so.
static void ranking_row(const tacet_model *m, const tacet_screen *s, const tacet_rank *rank,
                        table_row *row)
{
    bool clear = rank->best != SIZE_MAX;
    size_t first = clear ? rank->best : rank->n_ranked ? rank->ranked[0] : SIZE_MAX;
    size_t next = next_best(rank, first);
    put_number(row, screen_rpm(rank->speed_rad_per_s));
    put_number(row, rank->demand_Nm);
    put_text(row, clear ? "recommended" : first == SIZE_MAX ? "nothing to run" : "none is clear");
    if (first == SIZE_MAX)
        for (size_t c = 3; c < 11; c++)
            put_text(row, NULL);
    else
        ranked_cell(m, s, first, row);
    if (next == SIZE_MAX) {
        for (size_t c = 11; c < N_COLUMNS(ranking_columns); c++)
            put_text(row, NULL);
        return;
    }
    const tacet_row *r = &s->cells[next].row;
    put_text(row, screen_candidate(s, next)->name);
    put_text(row, r->outcome == TACET_SOLVED ? tacet_verdict_text(r->worst)
                                             : tacet_outcome_text(r->outcome));
    put_number(row, r->worst_margin_db);
    put_number(row, screen_saving_percent(r));
}

tacet_status screen_ranking_table(const tacet_model *m, const tacet_screen *s, tacet_arena *a,
                                  tacet_table *out)
{
    table_row row;
    tacet_status status = table_start(a,
                                      &(tacet_table){.name = "ranking",
                                                     .heading = "Ranking at each speed",
                                                     .columns = ranking_columns,
                                                     .n_columns = N_COLUMNS(ranking_columns),
                                                     .n_rows = s->n_ranks},
                                      out, &row);
    for (size_t i = 0; status == TACET_OK && i < s->n_ranks; i++)
        ranking_row(m, s, &s->ranks[i], &row);
    return status;
}

// ---- no-go ranges

static const tacet_table_column no_go_columns[] = {
    {"candidate", NULL, true, 0, false, NULL},
    {"band", NULL, true, 0, false, NULL},
    {"from_rpm", "rpm", false, 1, false, "from"},
    {"to_rpm", "rpm", false, 1, false, "to"},
    {"open", NULL, true, 0, false, NULL},
    {"beyond", NULL, true, 0, false, NULL},
    {"worst_margin_db", "dB", false, 1, false, "worst"},
    {"at_rpm", "rpm", false, 0, false, "at"},
    {"leading_order", NULL, false, -1, false, "order"},
};

// What lies past the open ends.
static const char *beyond(const tacet_no_go *g, tacet_arena *a)
{
    static const char *const what[] = {[TACET_OPEN_NOT] = "",
                                       [TACET_OPEN_SPEEDS] = "not screened",
                                       [TACET_OPEN_UNREACHABLE] = "out of reach",
                                       [TACET_OPEN_FAILED] = "not solved",
                                       [TACET_OPEN_NO_REFERENCE] = "no reference"};
    const char *low = what[g->low_open], *high = what[g->high_open];
    if (!g->low_open || !g->high_open || g->low_open == g->high_open)
        return g->low_open ? low : high;
    return screen_text(a, "%s, %s", low, high);
}

tacet_status screen_no_go_table(const tacet_model *m, const tacet_screen *s, tacet_arena *a,
                                tacet_table *out)
{
    static const char *const open[] = {"", "below", "above", "both ends"};
    table_row row;
    tacet_status status =
        table_start(a,
                    &(tacet_table){.name = "no-go",
                                   .heading = "No-go ranges (open: it may run on beyond)",
                                   .columns = no_go_columns,
                                   .n_columns = N_COLUMNS(no_go_columns),
                                   .n_rows = s->n_no_go},
                    out, &row);
    for (size_t i = 0; status == TACET_OK && i < s->n_no_go; i++) {
        const tacet_no_go *g = &s->no_go[i];
        put_text(&row, s->candidates[g->candidate].name);
        put_text(&row, tacet_model_band(m, g->band)->name);
        put_number(&row, screen_rpm(g->low_rad_per_s));
        put_number(&row, screen_rpm(g->high_rad_per_s));
        put_text(&row, open[(g->low_open ? 1 : 0) + (g->high_open ? 2 : 0)]);
        put_text(&row, beyond(g, a));
        put_number(&row, g->worst_margin_db);
        put_number(&row, screen_rpm(g->worst_speed_rad_per_s));
        put_number(&row, g->leading_order > 0 ? g->leading_order : NAN);
    }
    return status;
}

// ---- agreement of the solvers

static const tacet_table_column agreement_columns[] = {
    {"candidate", NULL, true, 0, false, NULL},
    {"word", NULL, true, 0, false, NULL},
    {"speed_rpm", "rpm", false, -1, false, "speed"},
    {"margin_db", "dB", false, 1, false, "margin"},
    {"same_model", NULL, false, -1, false, "same model"},
    {"full_model_db", "dB", false, 3, false, "full model"},
    {"repeats", NULL, false, 0, false, NULL},
    {"evaluations", NULL, false, 0, false, NULL},
    {"closure", NULL, false, -1, true, NULL},
    {"status", NULL, true, 0, false, NULL},
};

tacet_status screen_agreement_table(const tacet_model *m, const tacet_screen *s, tacet_arena *a,
                                    tacet_table *out)
{
    (void)m;
    table_row row;
    tacet_status status =
        table_start(a,
                    &(tacet_table){.name = "agreement",
                                   .heading = "Agreement of the solvers on the worst conditions",
                                   .columns = agreement_columns,
                                   .n_columns = N_COLUMNS(agreement_columns),
                                   .n_rows = s->n_referee},
                    out, &row);
    for (size_t i = 0; status == TACET_OK && i < s->n_referee; i++) {
        const tacet_referee *f = &s->referee[i];
        char word[TACET_PATTERN_LONGEST + 1];
        bool ok = f->status == TACET_OK;
        put_text(&row, screen_candidate(s, f->cell)->name);
        put_text(&row, tacet_arena_text(
                           a, tacet_pattern_format(&screen_roll(s, f->cell)->pattern, word)));
        put_number(&row, screen_rpm(s->cells[f->cell].row.speed_rad_per_s));
        put_number(&row, s->cells[f->cell].row.worst_margin_db);
        put_number(&row, ok ? f->a.same_model : NAN);
        put_number(&row, ok ? f->a.full_model_db : NAN);
        put_number(&row, ok ? (double)f->a.repeats : NAN);
        put_number(&row, ok ? (double)f->a.evaluations : NAN);
        put_number(&row, ok ? f->a.closure : NAN);
        put_text(&row, !ok            ? tacet_status_text(f->status)
                       : f->a.settled ? "settled"
                                      : "not settled");
    }
    return status;
}
