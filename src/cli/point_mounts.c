// Forces of mounts of one condition as a table: orders down, mounts and their axes across.
#include "cli/point_body.h"
#include <math.h>
#include <string.h>

#define WIDTH 110 // characters of a line

static const char *const axes[] = {"x", "y", "z"};

// Forces whose column comes first: the one with the largest line.
static void put_in_order(const point_body *b, size_t n, size_t *column)
{
    for (size_t i = 1; i < n; i++)
        for (size_t k = i; k > 0; k--) {
            // equal but for rounding: as in the file
            if (b->force[column[k - 1]].largest_N >= b->force[column[k]].largest_N * (1 - 1e-9))
                break;
            size_t swapped = column[k];
            column[k] = column[k - 1];
            column[k - 1] = swapped;
        }
}

static const char *mount_name(const point_body *b, size_t force)
{
    return b->def->mounts[b->force[force].mount].name;
}

static size_t width_of(const point_body *b, size_t force)
{
    size_t name = strlen(mount_name(b, force));
    return 2 + (name > 8 ? name : 8);
}

// Four digits of the largest number that is shown.
static int decimals_for(const point_body *b)
{
    double most = 0;
    for (size_t i = 0; i < b->n_forces; i++) {
        most = fmax(most, b->force[i].largest_N);
        most = fmax(most, fabs(b->force[i].static_N)); // fmax passes over NAN
    }
    double decimals = most > 0 ? 3 - floor(log10(most)) : 0;
    return decimals < 0 ? 0 : decimals > 6 ? 6 : (int)decimals;
}

static int write_block(const point *p, const char *heading, const size_t *column, size_t n)
{
    const point_body *b = p->body;
    size_t line[POINT_ORDERS_SHOWN], n_lines = point_pick_lines(b, column, n, line);
    tacet_table_column *head = tacet_arena_alloc(p->s->arena, (n + 2) * sizeof *head);
    if (!head) return cli_failed(TACET_NO_MEMORY, NULL);
    head[0] = (tacet_table_column){.name = "order", .text = true};
    head[1] = (tacet_table_column){.name = "at", .unit = "Hz", .decimals = 1};
    for (size_t i = 0; i < n; i++)
        head[2 + i] = (tacet_table_column){.name = mount_name(b, column[i]),
                                           .unit = axes[b->force[column[i]].axis],
                                           .decimals = decimals_for(b)};
    cli_rows rows = cli_rows_start(p->s->arena, "mounts", heading, head, n + 2, n_lines + 1);
    for (size_t k = 0; k < n_lines; k++) {
        cli_put_text(&rows, point_order(p, line[k]));
        cli_put(&rows, point_hz(p, line[k]));
        for (size_t i = 0; i < n; i++)
            cli_put(&rows, cabs(b->force[column[i]].line[line[k]]));
    }
    cli_put_text(&rows, "0");
    cli_put(&rows, NAN);
    for (size_t i = 0; i < n; i++)
        cli_put(&rows, b->force[column[i]].static_N);
    const tacet_table *t = cli_rows_end(&rows);
    if (!t) return cli_failed(TACET_NO_MEMORY, NULL);
    fputc('\n', stdout);
    cli_write_table(p->call, t);
    return CLI_DONE;
}

// As many columns to a block as fit on a line.
static int write_blocks(const point *p, const char *heading, const size_t *column, size_t n)
{
    int code = CLI_DONE;
    for (size_t first = 0, end = 0; first < n && code == CLI_DONE; first = end) {
        size_t width = 14;
        while (end < n && (end == first || width + width_of(p->body, column[end]) <= WIDTH))
            width += width_of(p->body, column[end++]);
        code = write_block(p, first ? NULL : heading, column + first, end - first);
    }
    return code;
}

int point_write_mounts(const point *p)
{
    const point_body *b = p->body;
    const char *heading = "Mount forces, N peak, by order, along the mounts' own axes (order 0: "
                          "static, at the mean torque)";
    size_t column[3 * TACET_BODY_MOUNTS_MOST], n = b ? b->n_forces : 0, width = 14;
    int code = CLI_DONE;
    if (n == 0) return CLI_DONE;
    for (size_t i = 0; i < n; i++) {
        column[i] = i;
        width += width_of(b, i);
    }
    put_in_order(b, n, column);
    if (width <= WIDTH) return write_blocks(p, heading, column, n);
    bool written[3] = {false, false, false};
    for (size_t k = 0; k < n && code == CLI_DONE; k++) { // axes by their largest force
        size_t of_axis[TACET_BODY_MOUNTS_MOST], n_of = 0;
        int axis = b->force[column[k]].axis;
        if (written[axis]) continue;
        for (size_t i = (size_t)axis; i < n; i += 3)
            of_axis[n_of++] = i;
        code =
            write_blocks(p, written[0] || written[1] || written[2] ? NULL : heading, of_axis, n_of);
        written[axis] = true;
    }
    return code;
}
