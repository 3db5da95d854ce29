// tacet modes --response NODE: angle of a node, and torque of every link, for 1 N m at that node.
#include "cli/cli.h"
#include <math.h>
#include <string.h>

#define LEAST_HZ     1e-6 // below, squares of it leave the range of numbers
#define MOST_HZ      1e6
#define POINTS       4000
#define POINTS_MOST  20000
#define BEYOND_MODES 1.2

typedef struct {
    const cli_session *s;
    const tacet_train *train;
    size_t node, n_links;
    double from_hz, step_hz;
    size_t n;                  // frequencies
    tacet_train_motion motion; // line k at frequency k - 1
} response;

// FROM:TO:STEP as in every list of numbers; default up to beyond the modes.
static int read_frequencies(const cli_call *call, response *r)
{
    const double *mode = tacet_model_mode_hz(r->s->model);
    const char *text = cli_value(call, "frequencies");
    double v[3];
    if (!text) {
        r->from_hz = r->step_hz = BEYOND_MODES * mode[tacet_train_nodes(r->train) - 1] / POINTS;
        r->n = POINTS;
        return r->step_hz > 0 ? CLI_DONE : cli_wrong("the train has no elastic mode");
    }
    char copy[100], *part = copy;
    snprintf(copy, sizeof copy, "%s", text);
    for (size_t i = 0; i < 3; i++) {
        char *end = strchr(part, ':');
        bool ends = i == 2 ? !end : end != NULL;
        if (end) *end = '\0';
        if (!ends || !tacet_number_parse(part, &v[i]) || !(v[i] >= LEAST_HZ && v[i] <= MOST_HZ))
            return cli_wrong("--frequencies '%s': FROM:TO:STEP in Hz, each from 1e-6 to 1e6", text);
        if (end) part = end + 1;
    }
    double steps = (v[1] - v[0]) / v[2];
    if (!(steps >= 0) || steps > POINTS_MOST)
        return cli_wrong("--frequencies '%s': TO at or above FROM, and at most %d steps up to TO",
                         text, POINTS_MOST);
    r->from_hz = v[0];
    r->step_hz = v[2];
    r->n = (size_t)floor(steps + 1e-9) + 1;
    return CLI_DONE;
}

static double frequency(const response *r, size_t line)
{
    return r->from_hz + (double)(line - 1) * r->step_hz;
}

// 1 N m on the one line of a repeat of one revolution, whose speed puts it at each frequency in
// turn.
static tacet_status solve(response *r)
{
    tacet_spectrum unit;
    tacet_train_motion one;
    tacet_train_work *w = NULL;
    tacet_status status = tacet_spectrum_init(&unit, 1, r->s->arena);
    if (status == TACET_OK) status = tacet_train_motion_init(&one, r->train, 1, r->s->arena);
    if (status == TACET_OK)
        status = tacet_train_motion_init(&r->motion, r->train, r->n, r->s->arena);
    if (status == TACET_OK) status = tacet_train_work_create(r->train, 1, 1, &w);
    unit.revolutions = 1;
    if (status == TACET_OK) unit.line[1] = 1;
    for (size_t k = 1; k <= r->n && status == TACET_OK; k++) {
        status = tacet_train_harmonic(r->train, tacet_order_speed(1, frequency(r, k)), 1, &r->node,
                                      &unit, w, &one);
        if (status != TACET_OK) break;
        r->motion.angle_rad[r->node].line[k] = one.angle_rad[r->node].line[1];
        for (size_t i = 0; i < r->n_links; i++)
            r->motion.link_torque_Nm[i].line[k] = one.link_torque_Nm[i].line[1];
    }
    tacet_train_work_destroy(w);
    return status;
}

static double angle(const response *r, size_t line)
{
    return cabs(r->motion.angle_rad[r->node].line[line]);
}

static bool is_peak(const response *r, size_t line)
{
    return line > 1 && line < r->n && angle(r, line) > angle(r, line - 1) &&
           angle(r, line) >= angle(r, line + 1);
}

static tacet_table_column *columns(const response *r, size_t *n)
{
    *n = 3 + r->n_links;
    tacet_table_column *c = tacet_arena_alloc(r->s->arena, *n * sizeof *c);
    if (!c) return NULL;
    c[0] = (tacet_table_column){.name = "frequency_hz", .decimals = -1};
    c[1] = (tacet_table_column){.name = "angle_rad_per_nm", .decimals = -1};
    c[2] = (tacet_table_column){.name = "phase_deg", .decimals = 1};
    for (size_t i = 0; i < r->n_links; i++)
        c[3 + i] = (tacet_table_column){
            .name = cli_text(r->s->arena, "%s_nm_per_nm", tacet_train_link_name(r->train, i)),
            .decimals = -1,
            .data_only = true};
    return c;
}

static const tacet_table *make_table(const response *r, bool peaks_only, cli_rows *rows)
{
    size_t n_columns;
    const tacet_table_column *c = columns(r, &n_columns);
    if (!c) return NULL;
    *rows = cli_rows_start(r->s->arena, "response", NULL, c, n_columns, r->n);
    for (size_t h = 1; h <= r->n; h++) {
        if (peaks_only && !is_peak(r, h)) continue;
        cli_put(rows, frequency(r, h));
        cli_put(rows, angle(r, h));
        cli_put(rows, carg(r->motion.angle_rad[r->node].line[h]) * 180 / M_PI);
        for (size_t i = 0; i < r->n_links; i++)
            cli_put(rows, cabs(r->motion.link_torque_Nm[i].line[h]));
    }
    return cli_rows_end(rows);
}

static int write_json(const response *r, const tacet_table *t)
{
    tacet_json j = tacet_json_start(stdout);
    tacet_json_head(&j, "modes", r->s->study, "ok");
    tacet_json_put_text(&j, "node", tacet_train_node_name(r->train, r->node));
    tacet_json_key(&j, "response");
    tacet_json_begin_object(&j);
    for (size_t c = 0; c < t->n_columns; c++) {
        tacet_json_key(&j, t->columns[c].name);
        tacet_json_begin_array(&j);
        for (size_t k = 0; k < t->n_rows; k++)
            tacet_json_number(&j, t->cells[k * t->n_columns + c].number);
        tacet_json_end_array(&j);
    }
    tacet_json_end_object(&j);
    return cli_end_json(&j);
}

static int no_node(const response *r, const char *node)
{
    const char *names[256];
    size_t n = 0;
    for (; n < tacet_train_nodes(r->train) && n < 256; n++)
        names[n] = tacet_train_node_name(r->train, n);
    const char *near = tacet_near_name(node, names, n);
    return near ? cli_wrong("--response '%s': no such node; did you mean '%s'?", node, near)
                : cli_wrong("--response '%s': no such node; 'tacet modes %s' lists them", node,
                            cli_study_name(r->s->study->path));
}

int cli_response(const cli_call *call, const cli_session *s, const char *node)
{
    response r = {.s = s, .train = tacet_model_train(s->model)};
    r.node = tacet_train_node_find(r.train, node);
    r.n_links = tacet_train_links(r.train);
    if (r.node == SIZE_MAX) return no_node(&r, node);
    int code = read_frequencies(call, &r);
    if (code != CLI_DONE) return code;
    tacet_status status = solve(&r);
    if (status != TACET_OK) return cli_failed(status, NULL);
    bool json = cli_given(call, "json"), csv = cli_given(call, "csv");
    cli_rows rows;
    const tacet_table *t = make_table(&r, !json && !csv, &rows);
    if (!t) return cli_failed(TACET_NO_MEMORY, NULL);
    if (json) return write_json(&r, t);
    if (!csv) {
        tacet_write_clean(stdout, cli_title(s));
        printf(": peaks of the angle of ");
        tacet_write_clean(stdout, node);
        printf(" for 1 N m there, %.4g to %.4g Hz in steps of %.3g Hz\n", r.from_hz,
               frequency(&r, r.n), r.step_hz);
    }
    cli_write_table(call, t);
    if (!csv) printf("--csv writes every frequency, and the torque of every link.\n");
    return CLI_DONE;
}
