// The powertrain on its mounts: rigid-body modes, static deflection, torque-roll axis.
#include "cli/modes.h"
#include <math.h>

static const char *const members[] = {"x", "y", "z", "roll", "pitch", "yaw"};
#define GRAVITY_M_PER_S2 9.80665

int modes_find_body(modes *m)
{
    const tacet_body *b = tacet_model_body(m->s->model);
    if (!b) return CLI_DONE;
    tacet_status status = tacet_body_modes_of(b, &m->body);
    if (status != TACET_OK) return cli_failed(status, NULL);
    m->has_body = true;
    double range[2];
    cli_screened_rpm(m->s, range);
    const double weight[6] = {0, 0, -tacet_body_def_of(b)->mass_kg * GRAVITY_M_PER_S2, 0, 0, 0};
    // with the crank's rotation, as the roll torque counts
    double about_x = tacet_engine_def_of(tacet_model_engine(m->s->model))->rotation == 0 ? 1 : -1;
    const double turn[6] = {0, 0, 0, about_x, 0, 0};
    m->held = tacet_body_static(b, weight, m->sag) == TACET_OK &&
              tacet_body_static(b, turn, m->turn) == TACET_OK;
    tacet_body_torque_roll_axis(b, m->roll_axis);
    return CLI_DONE;
}

static const char *criticals(const modes *m, double hz)
{
    const char *text = "";
    size_t n = 0;
    for (size_t o = 0; o < m->n_orders && n < 4; o++) {
        double rpm = cli_critical_rpm(m->s, m->order[o].order, hz);
        if (!isfinite(rpm)) continue;
        text = cli_text(m->s->arena, "%s%s%s at %.0f", text, n ? ", " : "", m->order[o].order_text,
                        rpm);
        n++;
    }
    return n ? text : NULL;
}

static int write_table(const cli_call *call, const modes *m)
{
    static const tacet_table_column columns[] = {
        {.name = "mode", .unit = "Hz", .decimals = -1},
        {.name = "loss", .decimals = -1},
        {.name = "x", .unit = "%", .decimals = 1},
        {.name = "y", .unit = "%", .decimals = 1},
        {.name = "z", .unit = "%", .decimals = 1},
        {.name = "roll", .unit = "%", .decimals = 1},
        {.name = "pitch", .unit = "%", .decimals = 1},
        {.name = "yaw", .unit = "%", .decimals = 1},
        {.name = "lowest orders that meet it, rpm", .text = true},
    };
    cli_rows rows =
        cli_rows_start(m->s->arena, "body", "Body on its mounts: share of the kinetic energy",
                       columns, sizeof columns / sizeof *columns, 6);
    for (int k = 0; k < 6; k++) {
        cli_put(&rows, m->body.hz[k]);
        cli_put(&rows, m->body.loss[k]);
        for (int i = 0; i < 6; i++)
            cli_put(&rows, 100 * m->body.share[k][i]);
        cli_put_text(&rows, criticals(m, m->body.hz[k]));
    }
    const tacet_table *t = cli_rows_end(&rows);
    if (!t) return cli_failed(TACET_NO_MEMORY, NULL);
    cli_write_table(call, t);
    return CLI_DONE;
}

int modes_write_body(const cli_call *call, const modes *m)
{
    if (!m->has_body) return CLI_DONE;
    fputc('\n', stdout);
    int code = write_table(call, m);
    if (!m->body.settled)
        printf(
            "A mount's stiffness over frequency keeps a mode from settling: its frequency is the "
            "last one tried.\n");
    printf("Torque-roll axis (%.4f, %.4f, %.4f), from the inertia alone.\n", m->roll_axis[0],
           m->roll_axis[1], m->roll_axis[2]);
    if (m->held)
        printf("Weight lowers the centre of gravity by %.3g mm; a mean torque of 100 N m about the "
               "crank turns the body by %.3g deg.\n",
               -1e3 * m->sag[2], 100 * fabs(m->turn[3]) * 180 / M_PI);
    else
        printf("The mounts do not hold the body: it has no static deflection.\n");
    return code;
}

static void six_json(tacet_json *j, const char *name, const double value[6], double factor)
{
    tacet_json_key(j, name);
    tacet_json_begin_object(j);
    for (int i = 0; i < 6; i++)
        tacet_json_put_number(j, members[i], factor * value[i]);
    tacet_json_end_object(j);
}

static void mode_json(tacet_json *j, const modes *m, int k)
{
    tacet_json_begin_object(j);
    tacet_json_put_number(j, "hz", m->body.hz[k]);
    tacet_json_put_number(j, "loss_factor", m->body.loss[k]);
    six_json(j, "shape", m->body.shape[k], 1);
    six_json(j, "energy_share", m->body.share[k], 1);
    tacet_json_end_object(j);
}

void modes_body_json(tacet_json *j, const modes *m)
{
    if (!m->has_body) return;
    tacet_json_key(j, "body");
    tacet_json_begin_object(j);
    tacet_json_put_bool(j, "settled", m->body.settled);
    tacet_json_key(j, "modes");
    tacet_json_begin_array(j);
    for (int k = 0; k < 6; k++)
        mode_json(j, m, k);
    tacet_json_end_array(j);
    tacet_json_put_bool(j, "held", m->held);
    six_json(j, "under_weight", m->sag, m->held ? 1 : NAN);
    six_json(j, "per_nm_about_crank", m->turn, m->held ? 1 : NAN);
    tacet_json_key(j, "torque_roll_axis");
    tacet_json_begin_array(j);
    for (int i = 0; i < 3; i++)
        tacet_json_number(j, m->roll_axis[i]);
    tacet_json_end_array(j);
    tacet_json_end_object(j);
}
