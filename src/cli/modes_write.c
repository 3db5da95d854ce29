// How tacet modes writes what it found.
#include "cli/modes.h"
#include <math.h>

#define COLUMNS_MOST 9 // of the text form: a name and eight modes

static const char *hz_text(const modes *m, size_t mode)
{
    char text[TACET_NUMBER_TEXT];
    if (m->hz[mode] < 1e-6) return "rigid";
    return cli_text(m->s->arena, "%s Hz", tacet_number_format_short(m->hz[mode], 4, text));
}

static bool meets_any(const modes *m, size_t order, size_t first, size_t last)
{
    for (size_t k = first; k < last; k++)
        if (isfinite(cli_critical_rpm(m->s, m->order[order].order, m->hz[k]))) return true;
    return false;
}

// Rows are nodes or orders, columns are modes first..last-1.
static int write_block(const cli_call *call, const modes *m, bool shapes, size_t first, size_t last)
{
    tacet_table_column column[COLUMNS_MOST] = {{.name = shapes ? "node" : "order", .text = true}};
    size_t n_columns = 1 + last - first, n_rows = shapes ? m->n : m->n_orders;
    for (size_t k = first; k < last; k++)
        column[1 + k - first] =
            (tacet_table_column){.name = hz_text(m, k), .decimals = shapes ? 3 : 0};
    cli_rows rows = cli_rows_start(m->s->arena, "modes",
                                   shapes ? "Shapes, largest element 1"
                                          : "Criticals: rpm at which an order meets a mode",
                                   column, n_columns, n_rows);
    for (size_t r = 0; r < n_rows; r++) {
        if (!shapes && !meets_any(m, r, first, last)) continue;
        if (shapes)
            cli_put_text(&rows, tacet_train_node_name(m->train, r));
        else
            cli_put_text(&rows,
                         cli_text(m->s->arena, "%s (%s)", m->order[r].order_text, m->order[r].of));
        for (size_t k = first; k < last; k++)
            cli_put(&rows, shapes ? m->shape[k * m->n + r]
                                  : cli_critical_rpm(m->s, m->order[r].order, m->hz[k]));
    }
    const tacet_table *t = cli_rows_end(&rows);
    if (!t) return cli_failed(TACET_NO_MEMORY, NULL);
    cli_write_table(call, t);
    fputc('\n', stdout);
    return CLI_DONE;
}

// Modes up to the last one that some listed order meets within the screened speeds.
static size_t n_met(const modes *m)
{
    size_t last = 1;
    for (size_t k = 1; k < m->n; k++)
        for (size_t o = 0; o < m->n_orders; o++)
            if (meets_any(m, o, k, k + 1)) last = k + 1;
    return last;
}

int modes_write_text(const cli_call *call, const modes *m)
{
    int code = CLI_DONE;
    double range[2];
    cli_screened_rpm(m->s, range);
    tacet_write_clean(stdout, cli_title(m->s));
    printf(": %zu nodes, %zu links, %.4g kg m2 at the crank\n\n", m->n, tacet_train_links(m->train),
           tacet_train_total_inertia(m->train));
    for (size_t first = 0; code == CLI_DONE && first < m->n; first += COLUMNS_MOST - 1)
        code = write_block(call, m, true, first,
                           first + COLUMNS_MOST - 1 < m->n ? first + COLUMNS_MOST - 1 : m->n);
    size_t met = n_met(m);
    for (size_t first = 1; code == CLI_DONE && first < met; first += COLUMNS_MOST - 1)
        code = write_block(call, m, false, first,
                           first + COLUMNS_MOST - 1 < met ? first + COLUMNS_MOST - 1 : met);
    printf("Criticals are listed from %g to %g rpm; '-' lies outside. An order counts when it is a "
           "line of a pattern, or a\nmultiple of the firing order.\n",
           range[0], range[1]);
    return code == CLI_DONE ? modes_write_body(call, m) : code;
}

int modes_write_csv(const cli_call *call, const modes *m)
{
    tacet_table_column *column = tacet_arena_alloc(m->s->arena, (m->n + 2) * sizeof *column);
    if (!column) return cli_failed(TACET_NO_MEMORY, NULL);
    column[0] = (tacet_table_column){.name = "mode"};
    column[1] = (tacet_table_column){.name = "hz"};
    for (size_t i = 0; i < m->n; i++)
        column[2 + i] = (tacet_table_column){.name = tacet_train_node_name(m->train, i)};
    cli_rows rows = cli_rows_start(m->s->arena, "modes", NULL, column, m->n + 2, m->n);
    for (size_t k = 0; k < m->n; k++) {
        cli_put(&rows, (double)k);
        cli_put(&rows, m->hz[k]);
        for (size_t i = 0; i < m->n; i++)
            cli_put(&rows, m->shape[k * m->n + i]);
    }
    const tacet_table *t = cli_rows_end(&rows);
    if (!t) return cli_failed(TACET_NO_MEMORY, NULL);
    cli_write_table(call, t);
    return CLI_DONE;
}

static void mode_json(tacet_json *j, const modes *m, size_t k)
{
    tacet_json_begin_object(j);
    tacet_json_put_number(j, "hz", m->hz[k]);
    tacet_json_key(j, "shape");
    tacet_json_begin_object(j);
    for (size_t i = 0; i < m->n; i++)
        tacet_json_put_number(j, tacet_train_node_name(m->train, i), m->shape[k * m->n + i]);
    tacet_json_end_object(j);
    tacet_json_key(j, "criticals");
    tacet_json_begin_array(j);
    for (size_t o = 0; o < m->n_orders; o++) {
        double rpm = cli_critical_rpm(m->s, m->order[o].order, m->hz[k]);
        if (!isfinite(rpm)) continue;
        tacet_json_begin_object(j);
        tacet_json_put_number(j, "order", m->order[o].order);
        tacet_json_put_text(j, "of", m->order[o].of);
        tacet_json_put_number(j, "speed_rpm", rpm);
        tacet_json_end_object(j);
    }
    tacet_json_end_array(j);
    tacet_json_end_object(j);
}

int modes_write_json(const modes *m)
{
    tacet_json j = tacet_json_start(stdout);
    tacet_json_head(&j, "modes", m->s->study, "ok");
    tacet_json_key(&j, "train");
    tacet_json_begin_object(&j);
    tacet_json_put_number(&j, "total_inertia_kgm2", tacet_train_total_inertia(m->train));
    tacet_json_key(&j, "modes");
    tacet_json_begin_array(&j);
    for (size_t k = 0; k < m->n; k++)
        mode_json(&j, m, k);
    tacet_json_end_array(&j);
    tacet_json_end_object(&j);
    modes_body_json(&j, m);
    return cli_end_json(&j);
}
