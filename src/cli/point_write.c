// How tacet point writes its condition as text and CSV.
#include "cli/point_body.h"
#include <math.h>
#include <string.h>

#define LINES_SHOWN 6

static const tacet_table_column band_columns[] = {
    {.name = "band", .text = true},
    {.name = "verdict", .text = true},
    {.name = "margin", .unit = "dB", .decimals = 1},
    {.name = "level", .unit = "rms", .decimals = -1},
    {.name = "limit", .unit = "rms", .decimals = -1},
    {.name = "all fire", .unit = "rms", .decimals = -1},
    {.name = "one dead", .unit = "rms", .decimals = -1},
    {.name = "unit", .text = true},
    {.name = "order", .text = true},
    {.name = "at", .unit = "Hz", .decimals = 1},
    {.name = "of", .text = true},
    {.name = "why", .text = true},
};
static const tacet_table_column limit_columns[] = {
    {.name = "limit", .text = true},
    {.name = "verdict", .text = true},
    {.name = "margin", .unit = "dB", .decimals = 1},
    {.name = "value", .decimals = -1},
    {.name = "allowed", .decimals = -1},
    {.name = "unit", .text = true},
    {.name = "of", .text = true},
};
static const tacet_table_column line_columns[] = {
    // data
    {.name = "quantity", .text = true},    {.name = "unit", .text = true},
    {.name = "order", .decimals = 3},      {.name = "frequency_hz", .decimals = 1},
    {.name = "amplitude", .decimals = -1}, {.name = "phase_deg", .decimals = 0},
    {.name = "all_fire", .decimals = -1},
};
static const tacet_table_column largest_columns[] = {
    // text, of the same width
    {.name = "quantity", .text = true},    {.name = "unit", .text = true},
    {.name = "order", .text = true},       {.name = "at", .unit = "Hz", .decimals = 1},
    {.name = "amplitude", .decimals = -1}, {.name = "phase", .unit = "deg", .decimals = 0},
    {.name = "all fire", .decimals = -1},
};
#define N(c) (sizeof(c) / sizeof *(c))

// "link-torque:coupling" of a band or limit, found among the listed quantities.
static const char *name_of(const point *p, tacet_quantity_ref q)
{
    for (size_t i = 0; i < p->n_quantities; i++)
        if (p->quantity[i].of.what == q.what && p->quantity[i].of.target == q.target)
            return p->quantity[i].name;
    return q.what->name;
}

// "9/7": a line of the repeat as an order; NULL: none.
static const char *order_text(const point *p, size_t line)
{
    char text[24];
    if (line == 0) return NULL;
    return cli_text(p->s->arena, "%s",
                    cli_fraction((unsigned)line, p->condition.roll->revolutions, text));
}

static const char *limiting(const point *p)
{
    const tacet_model *m = p->s->model;
    const tacet_row *r = &p->row;
    char hz[TACET_NUMBER_TEXT];
    if (r->limiting_limit >= 0) return tacet_model_limit(m, (size_t)r->limiting_limit)->name;
    if (r->limiting_band < 0) return "no line in any band";
    const tacet_band_level *level = &r->bands[r->limiting_band].level;
    const char *name = tacet_model_band(m, (size_t)r->limiting_band)->name;
    if (!(level->leading_order > 0)) return name;
    return cli_text(
        p->s->arena, "%s, order %s at %s Hz", name, order_text(p, level->leading_line),
        tacet_number_format_short(tacet_order_hz(level->leading_order, r->speed_rad_per_s), 3, hz));
}

const char *point_headline(const point *p)
{
    size_t n;
    const tacet_row *r = &p->row;
    char margin[TACET_NUMBER_TEXT], word[TACET_PATTERN_LONGEST + 1], rpm[TACET_NUMBER_TEXT],
        demand[TACET_NUMBER_TEXT], buffer[TACET_COLUMN_BUFFER];
    const char *what = cli_text(p->s->arena, "%s (%s) at %s rpm, %s N m", p->candidate->name,
                                tacet_pattern_format(&p->condition.roll->pattern, word),
                                tacet_number_format_short(cli_rpm(r->speed_rad_per_s), 6, rpm),
                                tacet_number_format_short(r->demand_Nm, 4, demand));
    if (r->outcome == TACET_SOLVED && isfinite(r->worst_margin_db))
        return cli_text(p->s->arena, "%s: %s, margin %s dB (%s)", what,
                        tacet_verdict_text(r->worst),
                        tacet_number_format_short(r->worst_margin_db, 3, margin), limiting(p));
    if (r->outcome == TACET_SOLVED)
        return cli_text(p->s->arena, "%s: %s, no line in any band", what,
                        tacet_verdict_text(r->worst));
    const tacet_column *c = tacet_row_columns(&n);
    const char *reach = "";
    for (size_t i = 0; i < n && r->outcome == TACET_UNREACHABLE; i++)
        if (c[i].type == TACET_COLUMN_TEXT && strcmp(c[i].name, "reach") == 0)
            reach = c[i].text(p->s->model, &p->condition, r, buffer);
    return cli_text(p->s->arena, "%s: no verdict, %s%s%s%s", what, tacet_outcome_text(r->outcome),
                    *reach ? " (" : "", reach, *reach ? ")" : "");
}

static int write_bands(const point *p)
{
    size_t n;
    const tacet_band_column *c = tacet_band_columns(&n);
    const char *(*why)(const tacet_band_result *) = c[n - 1].text;
    cli_rows rows = cli_rows_start(p->s->arena, "bands", "Bands", band_columns, N(band_columns),
                                   p->row.n_bands);
    for (size_t i = 0; i < p->row.n_bands; i++) {
        const tacet_band *band = tacet_model_band(p->s->model, i);
        const tacet_band_result *b = &p->row.bands[i];
        double order = b->level.leading_order > 0 ? b->level.leading_order : NAN;
        cli_put_text(&rows, band->name);
        cli_put_text(&rows, tacet_verdict_text(b->verdict));
        if (b->verdict != TACET_CLEAR) cli_accent(&rows);
        cli_put(&rows, b->margin_db);
        cli_put(&rows, b->level.dispersed);
        cli_put(&rows, b->limit);
        cli_put(&rows, point_all_fire_level(p, i));
        cli_put(&rows, p->one_dead.level[i]);
        cli_put_text(&rows, tacet_model_quantity_unit(p->s->model, band->of));
        cli_put_text(&rows, isfinite(order) ? order_text(p, b->level.leading_line) : NULL);
        cli_put(&rows, isfinite(order) ? tacet_order_hz(order, p->row.speed_rad_per_s) : NAN);
        cli_put_text(&rows, name_of(p, band->of));
        cli_put_text(&rows, why ? why(b) : "");
    }
    const tacet_table *t = cli_rows_end(&rows);
    if (!t) return cli_failed(TACET_NO_MEMORY, NULL);
    if (t->n_rows == 0) return CLI_DONE;
    cli_write_table(p->call, t);
    point_write_one_dead(p);
    return CLI_DONE;
}

static int write_limits(const point *p)
{
    cli_rows rows = cli_rows_start(p->s->arena, "limits", "Limits", limit_columns, N(limit_columns),
                                   p->row.n_limits);
    for (size_t i = 0; i < p->row.n_limits; i++) {
        const tacet_limit *limit = tacet_model_limit(p->s->model, i);
        const tacet_limit_result *l = &p->row.limits[i];
        cli_put_text(&rows, limit->name);
        cli_put_text(&rows, tacet_verdict_text(l->verdict));
        if (l->verdict != TACET_CLEAR) cli_accent(&rows);
        cli_put(&rows, l->margin_db);
        cli_put(&rows, l->value);
        cli_put(&rows, limit->value);
        cli_put_text(&rows, tacet_model_limit_unit(p->s->model, i));
        cli_put_text(&rows, name_of(p, limit->of));
    }
    const tacet_table *t = cli_rows_end(&rows);
    if (!t) return cli_failed(TACET_NO_MEMORY, NULL);
    if (t->n_rows > 0) {
        fputc('\n', stdout);
        cli_write_table(p->call, t);
    }
    return CLI_DONE;
}

// Is line i among the `most` largest of its quantity?
static bool is_shown(const point_quantity *q, size_t i, size_t most)
{
    size_t larger = 0;
    for (size_t k = 0; most > 0 && k < q->n; k++)
        larger +=
            q->amplitude[k] > q->amplitude[i] || (q->amplitude[k] == q->amplitude[i] && k < i);
    return most == 0 || larger < most;
}

const tacet_table *point_lines(const point *p, size_t most, cli_rows *rows)
{
    size_t n = 0;
    for (size_t k = 0; k < p->n_quantities; k++)
        n += most ? most : p->quantity[k].n;
    *rows =
        cli_rows_start(p->s->arena, "lines",
                       most ? "Largest lines (peak), and all cylinders firing beside them" : NULL,
                       most ? largest_columns : line_columns, N(line_columns), n);
    for (size_t k = 0; k < p->n_quantities; k++) {
        const point_quantity *q = &p->quantity[k];
        for (size_t i = 0; i < q->n; i++) {
            if (!is_shown(q, i, most)) continue;
            cli_put_text(rows, q->name);
            cli_put_text(rows, tacet_model_quantity_unit(p->s->model, q->of));
            if (most)
                cli_put_text(rows, order_text(p, i + 1));
            else
                cli_put(rows, q->order[i]);
            cli_put(rows, tacet_order_hz(q->order[i], p->row.speed_rad_per_s));
            cli_put(rows, q->amplitude[i]);
            cli_put(rows, q->phase_deg[i]);
            cli_put(rows, q->reference ? q->reference_amplitude[i] : NAN);
        }
    }
    return cli_rows_end(rows);
}

int point_write_csv(const point *p)
{
    cli_rows rows;
    const tacet_table *t = point_lines(p, 0, &rows);
    if (!t) return cli_failed(TACET_NO_MEMORY, NULL);
    cli_write_table(p->call, t);
    return CLI_DONE;
}

static void write_duty(const point *p)
{
    const tacet_duty *d = &p->row.duty;
    const tacet_roll *r = p->condition.roll;
    double heat = d->fuel_W > 0 ? d->fuel_W / 100 : NAN;
    tacet_write_clean(stdout, cli_title(p->s));
    printf("; placement %zu of %zu; a repeat is %u opportunities, %u revolutions\n",
           p->placement + 1, p->candidate->n_placements, r->opportunities, r->revolutions);
    printf("Charge %.1f kPa, %.0f %% of the way from lowest to highest; peak pressure %.2f MPa%s\n",
           d->charge_Pa / 1e3, 100 * d->charge_ratio, d->peak_pressure_Pa / 1e6,
           d->peak_in_skip ? " in a skipped cycle" : "");
    printf("Fuel %.3f kg/h", d->fuel_kg_per_s * 3600);
    if (isfinite(p->row.fuel_to_all_fire))
        printf(", %.1f %% %s than all cylinders firing", fabs(100 * (1 - p->row.fuel_to_all_fire)),
               p->row.fuel_to_all_fire <= 1 ? "less" : "more");
    else
        printf(", all cylinders firing cannot meet this demand");
    printf("\nOf the fuel's heat: brake %.1f %%, friction %.1f %%, walls %.1f %%, exhaust %.1f %%, "
           "blow-by %.1f %% (pumping, %.1f %%, leaves with the exhaust)\n\n",
           d->brake_W / heat, d->friction_W / heat, d->wall_heat_W / heat, d->exhaust_W / heat,
           d->blow_by_W / heat, d->pumping_W / heat);
}

static void write_solver(const point *p)
{
    const tacet_solver_note *n = &p->row.solver;
    printf("\nSolved by %s: %u passes, closure %.1e, last change %.1e\n", n->method, n->repeats,
           n->closure, n->difference);
    if (!p->refereed) return;
    if (p->referee_status != TACET_OK)
        printf("No second opinion: the march failed (%s)\n", tacet_status_text(p->referee_status));
    else if (!p->agreement.settled && isnan(p->agreement.same_model))
        printf("No second opinion: the march at constant speed did not settle\n");
    else if (!p->agreement.settled)
        printf(
            "Half a second opinion: same model %.1e; the full march did not settle in %u repeats "
            "(closure %.1e)\n",
            p->agreement.same_model, p->agreement.repeats, p->agreement.closure);
    else
        printf("Agreement: same model %.1e, fast path against the full march %.4f dB "
               "(%u repeats, closure %.1e)\n",
               p->agreement.same_model, p->agreement.full_model_db, p->agreement.repeats,
               p->agreement.closure);
}

double point_reachable_Nm(const point *p)
{
    const tacet_duty *d = &p->row.duty;
    bool known = d->reach == TACET_REACH_TOO_HIGH || d->reach == TACET_REACH_TOO_LOW ||
                 d->reach == TACET_REACH_PEAK_PRESSURE;
    return p->row.outcome == TACET_UNREACHABLE && known ? d->brake_torque_Nm : NAN;
}

// What the pattern can carry there, and what the study screens.
static void write_reachable(const point *p)
{
    double nearest = point_reachable_Nm(p), rpm[2];
    char a[TACET_NUMBER_TEXT];
    cli_screened_rpm(p->s, rpm);
    if (isfinite(nearest))
        printf("The %s it can carry there is %s N m\n",
               p->row.duty.reach == TACET_REACH_TOO_LOW ? "least" : "most",
               tacet_number_format_short(nearest, 4, a));
    else if (p->row.duty.reach == TACET_REACH_SPEED)
        printf("The study is for %g to %g rpm\n", rpm[0], rpm[1]);
}

int point_write_text(const point *p)
{
    cli_rows rows;
    tacet_write_clean(stdout, point_headline(p));
    fputc('\n', stdout);
    if (p->row.outcome != TACET_SOLVED) {
        write_reachable(p);
        return CLI_DONE;
    }
    write_duty(p);
    int code = write_bands(p);
    if (code == CLI_DONE) code = write_limits(p);
    if (code == CLI_DONE) code = point_write_mounts(p);
    if (code == CLI_DONE) code = point_write_people(p);
    const tacet_table *t = point_lines(p, LINES_SHOWN, &rows);
    if (!t) return cli_failed(TACET_NO_MEMORY, NULL);
    fputc('\n', stdout);
    cli_write_table(p->call, t);
    write_solver(p);
    if (code == CLI_DONE) code = cli_scatter_text(p->call, p->s, &p->scatter);
    fprintf(stdout, "\n%s", tacet_caution(TACET_CAUTION_LONG));
    return code;
}
