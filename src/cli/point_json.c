// How tacet point writes its condition as JSON, and its folder.
#include "cli/point_body.h"
#include <math.h>
#include <string.h>

static void put_pattern(tacet_json *j, const point *p)
{
    const tacet_roll *r = p->condition.roll;
    char word[TACET_PATTERN_LONGEST + 1], density[24];
    tacet_json_key(j, "pattern");
    tacet_json_begin_object(j);
    tacet_json_put_text(j, "name", p->candidate->name);
    tacet_json_put_text(j, "word", tacet_pattern_format(&r->pattern, word));
    tacet_json_put_text(j, "density", cli_fraction(r->fires, r->opportunities, density));
    tacet_json_put_count(j, "placements", p->candidate->n_placements);
    tacet_json_put_count(j, "placement", p->placement + 1);
    tacet_json_put_count(j, "opportunities", r->opportunities);
    tacet_json_put_count(j, "revolutions", r->revolutions);
    tacet_json_end_object(j);
}

static void put_quantities(tacet_json *j, const point *p)
{
    tacet_json_key(j, "quantities");
    tacet_json_begin_object(j);
    for (size_t k = 0; k < p->n_quantities; k++) {
        const point_quantity *q = &p->quantity[k];
        tacet_json_key(j, q->name);
        tacet_json_begin_object(j);
        tacet_json_put_text(j, "unit", tacet_model_quantity_unit(p->s->model, q->of));
        tacet_json_put_number(j, "mean", q->mean);
        tacet_json_put_number(j, "pp", q->pp);
        tacet_json_put_number(j, "all_fire_pp", q->reference ? q->reference_pp : NAN);
        tacet_json_key(j, "orders"); // [order, amplitude, phase in degrees]
        tacet_json_begin_array(j);
        for (size_t i = 0; i < q->n; i++) {
            tacet_json_begin_array(j);
            tacet_json_number(j, q->order[i]);
            tacet_json_number(j, q->amplitude[i]);
            tacet_json_number(j, q->phase_deg[i]);
            tacet_json_end_array(j);
        }
        tacet_json_end_array(j);
        tacet_json_end_object(j);
    }
    tacet_json_end_object(j);
}

int point_write_json(const point *p, FILE *to)
{
    tacet_json j = tacet_json_start(to);
    const tacet_agreement *a =
        p->refereed && p->referee_status == TACET_OK && p->agreement.settled ? &p->agreement : NULL;
    const char *why = !p->refereed ? "not asked for" : "the march did not settle";
    tacet_json_head(&j, "point", p->s->study, p->row.outcome == TACET_FAILED ? "failed" : "ok");
    put_pattern(&j, p);
    tacet_row_json(&j, p->s->model, &p->condition, &p->row, a, why);
    tacet_json_put_number(&j, "nearest_reachable_nm", point_reachable_Nm(p)); // null: see reach
    put_quantities(&j, p);
    point_body_json(&j, p);
    point_one_dead_json(&j, p);
    cli_scatter_json(&j, p->s, &p->scatter);
    return cli_end_json(&j);
}

static int write_file(tacet_folder *f, const point *p, const char *name)
{
    FILE *to;
    tacet_error e = {.text = ""};
    cli_rows rows;
    tacet_status status = tacet_folder_begin(f, name, &to, &e);
    if (status != TACET_OK) return cli_failed(status, &e);
    if (strcmp(name, "point.json") == 0) {
        int code = point_write_json(p, to);
        if (code != CLI_DONE) return code;
    } else {
        const tacet_table *t = point_lines(p, 0, &rows);
        if (!t) return cli_failed(TACET_NO_MEMORY, NULL);
        tacet_table_write(t, tacet_writer_find("csv"), NULL, to);
    }
    if (tacet_arena_was_short(p->s->arena)) return cli_failed(TACET_NO_MEMORY, NULL);
    status = tacet_folder_commit(f, &e);
    return status == TACET_OK ? CLI_DONE : cli_failed(status, &e);
}

// Drawings of what limits, or of roll torque.
static int draw(point *p, tacet_folder *f)
{
    tacet_error e = {.text = ""};
    tacet_draw_how how = tacet_draw_default();
    how.format = tacet_drawing_format_find(cli_value(p->call, "drawings"));
    if (!how.format || p->row.outcome != TACET_SOLVED) return CLI_DONE;
    tacet_figure_source source = {.model = p->s->model,
                                  .work = p->s->work,
                                  .arena = p->s->arena,
                                  .roll = p->condition.roll,
                                  .name = p->candidate->name,
                                  .of = p->quantity[0].of};
    if (p->row.limiting_band >= 0)
        source.of = tacet_model_band(p->s->model, (size_t)p->row.limiting_band)->of;
    tacet_figure_bars bars;
    tacet_figure_repeat repeat;
    tacet_status status = tacet_bars_of_condition(&source, p->condition.speed_rad_per_s,
                                                  p->condition.demand_Nm, &bars, &e);
    if (status == TACET_OK)
        status =
            tacet_draw(f, "bars", &(tacet_figure){TACET_FIGURE_BARS, {.bars = &bars}}, &how, &e);
    if (status == TACET_OK)
        status = tacet_repeat_of_condition(&source, p->condition.speed_rad_per_s,
                                           p->condition.demand_Nm, &repeat, &e);
    if (status == TACET_OK)
        status = tacet_draw(f, "repeat", &(tacet_figure){TACET_FIGURE_REPEAT, {.repeat = &repeat}},
                            &how, &e);
    return status == TACET_OK ? CLI_DONE : cli_failed(status, &e);
}

static int tidy(tacet_folder *f)
{
    tacet_error e = {.text = ""};
    tacet_status status = tacet_folder_tidy(f, &e);
    return status == TACET_OK ? CLI_DONE : cli_failed(status, &e);
}

int point_save(point *p, const char *path)
{
    tacet_folder *f;
    int code = cli_folder(path, "screen.json", &f);
    if (code != CLI_DONE) return code;
    code = write_file(f, p, "lines.csv");
    if (code == CLI_DONE) code = write_file(f, p, "point.json");
    bool data = code == CLI_DONE;
    if (data) code = draw(p, f);
    bool drawn = tacet_folder_wrote(f, "bars.svg") || tacet_folder_wrote(f, "bars.png");
    if (data) code = cli_worse(code, tidy(f)); // drawings of another condition
    tacet_folder_close(f);
    if (data)
        cli_say("look at %s/%slines.csv for every line", path,
                drawn ? "bars and repeat for the drawings, " : "");
    return code;
}
