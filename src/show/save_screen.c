// A finished screen into its folder: data first, drawings last.
#include "show/folder.h"
#include "show/save.h"
#include <math.h>
#include <string.h>

static tacet_status save_table(const save_job *b, const tacet_screen_table *table, tacet_error *e)
{
    char name[64];
    tacet_table t;
    FILE *to;
    snprintf(name, sizeof name, "%s.csv", table->name);
    tacet_status status = table->build(b->m, b->s, b->a, &t);
    if (status != TACET_OK) return tacet_fail(e, status, "%s: no memory", name);
    status = tacet_folder_begin(b->folder, name, &to, e);
    if (status != TACET_OK) return status;
    tacet_table_write(&t, tacet_writer_find("csv"), NULL, to);
    return tacet_folder_commit(b->folder, e);
}

static tacet_status save_text(const save_job *b, tacet_error *e)
{
    static const tacet_table_style plain = {0};
    FILE *to;
    tacet_status status = tacet_folder_begin(b->folder, "summary.txt", &to, e);
    if (status != TACET_OK) return status;
    status = tacet_screen_print(b->m, b->s, &plain, to);
    if (status == TACET_OK) return tacet_folder_commit(b->folder, e);
    tacet_folder_abort(b->folder);
    return tacet_fail(e, status, "summary.txt: %s", tacet_status_text(status));
}

static tacet_status save_json(const save_job *b, tacet_error *e)
{
    FILE *to;
    char path[300];
    tacet_text(path, sizeof path, "%.200s/screen.json", tacet_folder_path(b->folder));
    tacet_status status = tacet_folder_begin(b->folder, "screen.json", &to, e);
    if (status != TACET_OK) return status;
    tacet_json j = tacet_json_start(to);
    tacet_json_head(&j, "screen", tacet_model_study(b->m), b->s->n_failed ? "some failed" : "ok");
    status = tacet_screen_json(&j, b->m, b->s);
    tacet_json_end_object(&j);
    if (status == TACET_OK) status = tacet_json_finish(&j, path, e);
    if (status == TACET_OK) return tacet_folder_commit(b->folder, e);
    tacet_folder_abort(b->folder);
    return status == TACET_NO_MEMORY ? tacet_fail(e, status, "screen.json: no memory") : status;
}

// ---- what the drawings show

typedef struct {
    size_t cell; // SIZE_MAX: nothing was solved
    tacet_quantity_ref of, shaft;
    bool has_of, has_shaft;
} choice;

// How well a cell serves as an example: a skip pattern where it is recommended, then any solved
// skip pattern, then any solved condition.
static int example_rank(const save_job *b, size_t cell)
{
    if (b->s->cells[cell].row.outcome != TACET_SOLVED) return 0;
    if (screen_all_fire(screen_candidate(b->s, cell))) return 1;
    for (size_t i = 0; i < b->s->n_ranks; i++)
        if (b->s->ranks[i].best == cell) return 3;
    return 2;
}

// Of equal rank: the candidate that is recommended at most speeds, and of its cells the one with
// the least margin that is not over.
static bool better_example(const save_job *b, size_t cell, size_t than)
{
    const tacet_cell *a = &b->s->cells[cell], *best = &b->s->cells[than];
    int rank = example_rank(b, cell), best_rank = example_rank(b, than);
    if (rank != best_rank) return rank > best_rank;
    size_t n = b->s->notes[a->candidate].n_best, best_n = b->s->notes[best->candidate].n_best;
    if (n != best_n) return n > best_n;
    bool over = a->row.worst == TACET_OVER, best_over = best->row.worst == TACET_OVER;
    if (over != best_over) return !over;
    return over ? a->row.worst_margin_db > best->row.worst_margin_db
                : a->row.worst_margin_db < best->row.worst_margin_db;
}

static size_t pick_cell(const save_job *b)
{
    size_t best = SIZE_MAX;
    for (size_t i = 0; i < b->s->n_cells; i++)
        if (!b->s->cells[i].extra && example_rank(b, i) > 0 &&
            (best == SIZE_MAX || better_example(b, i, best)))
            best = i;
    return best;
}

// Of the bands whose quantity has a spectrum: one with a line inside before one without (there the
// spread of cylinders and cycles alone counts), then the smallest margin. SIZE_MAX: no band.
static size_t pick_band(const save_job *b, const tacet_row *r)
{
    size_t best = SIZE_MAX;
    for (size_t i = 0; i < r->n_bands; i++) {
        const tacet_band_result *x = &r->bands[i];
        if (!tacet_model_band(b->m, i)->of.what->spectrum || !isfinite(x->margin_db)) continue;
        if (best != SIZE_MAX) {
            const tacet_band_result *y = &r->bands[best];
            bool line = x->level.leading_order > 0, best_line = y->level.leading_order > 0;
            if (line != best_line ? best_line : x->margin_db >= y->margin_db) continue;
        }
        best = i;
    }
    return best;
}

// Torque of a shaft: of the first band on one, otherwise of the first link behind the flywheel.
static bool pick_shaft(const save_job *b, tacet_quantity_ref *shaft)
{
    const tacet_train *t = tacet_model_train(b->m);
    for (size_t i = 0; i < tacet_model_bands(b->m); i++) {
        *shaft = tacet_model_band(b->m, i)->of;
        if (strcmp(shaft->what->name, "link-torque") == 0) return true;
    }
    for (size_t i = 0; i < tacet_train_links(t); i++) {
        char name[160];
        if (tacet_train_link_info(t, i).from != tacet_train_flywheel(t)) continue;
        snprintf(name, sizeof name, "link-torque:%s", tacet_train_link_name(t, i));
        if (tacet_quantity_parse(name, t, NULL, shaft, NULL) == TACET_OK) return true;
    }
    return false;
}

static choice choose(const save_job *b)
{
    choice c = {.cell = pick_cell(b)};
    if (c.cell == SIZE_MAX) return c;
    c.has_shaft = pick_shaft(b, &c.shaft);
    size_t band = pick_band(b, &b->s->cells[c.cell].row);
    c.of = band == SIZE_MAX ? c.shaft : tacet_model_band(b->m, band)->of;
    c.has_of = band != SIZE_MAX || c.has_shaft;
    return c;
}

// ---- drawings

void save_draw(const save_job *b, save_drawing *d, const char *stem, const tacet_figure *f)
{
    tacet_error e = {.status = TACET_OK};
    tacet_draw_how how = *d->how;
    if (d->first.status == TACET_OUTSIDE_WORLD) how.time_limit_s = 0;
    if (tacet_draw(b->folder, stem, f, &how, &e) != TACET_OK && d->first.status == TACET_OK)
        d->first = e;
}

void save_note_failure(save_drawing *d, tacet_status status, const tacet_error *e)
{
    if (status != TACET_OK && d->first.status == TACET_OK) {
        d->first = *e;
        d->first.status = status;
    }
}

static void draw_pattern(const save_job *b, tacet_workspace *w, save_drawing *d, choice c)
{
    tacet_figure_orders orders;
    tacet_figure_bars bars;
    tacet_figure_repeat repeat;
    tacet_error e = {.status = TACET_OK};
    if (c.cell == SIZE_MAX) return;
    double speed = b->s->cells[c.cell].row.speed_rad_per_s;
    double demand = b->s->cells[c.cell].row.demand_Nm;
    tacet_figure_source src = {.model = b->m,
                               .work = w,
                               .arena = b->a,
                               .roll = screen_roll(b->s, c.cell),
                               .name = screen_candidate(b->s, c.cell)->name,
                               .of = c.of};
    if (c.has_of) {
        tacet_status status = tacet_orders_of_pattern(&src, &orders, &e);
        save_note_failure(d, status, &e);
        if (status == TACET_OK)
            save_draw(b, d, "orders", &(tacet_figure){TACET_FIGURE_ORDERS, {.orders = &orders}});
        status = tacet_bars_of_condition(&src, speed, demand, &bars, &e);
        save_note_failure(d, status, &e);
        if (status == TACET_OK)
            save_draw(b, d, "bars", &(tacet_figure){TACET_FIGURE_BARS, {.bars = &bars}});
    }
    if (!c.has_shaft) return;
    src.of = c.shaft;
    tacet_status status = tacet_repeat_of_condition(&src, speed, demand, &repeat, &e);
    save_note_failure(d, status, &e);
    if (status == TACET_OK)
        save_draw(b, d, "repeat", &(tacet_figure){TACET_FIGURE_REPEAT, {.repeat = &repeat}});
}

// The shortest first: a full disk takes the answer last.
static tacet_status save_data(const save_job *b, tacet_error *e)
{
    tacet_status status = save_text(b, e);
    for (const tacet_screen_table *t = tacet_screen_tables(); status == TACET_OK && t->name; t++)
        if (tacet_model_body(b->m) || strcmp(t->name, "mounts") != 0) status = save_table(b, t, e);
    return status == TACET_OK ? save_json(b, e) : status;
}

tacet_status tacet_screen_save(const tacet_model *m, const tacet_screen *s, tacet_workspace *w,
                               tacet_folder *folder, const tacet_draw_how *how,
                               tacet_error *drawings, tacet_error *e)
{
    save_drawing d = {.how = how};
    tacet_figure_map map;
    save_job b = {m, s, folder, tacet_arena_create()};
    if (!b.a) return tacet_fail(e, TACET_NO_MEMORY, "no memory to write the results");
    tacet_status status = save_data(&b, e);
    if (status == TACET_OK) {
        tacet_status drawn = tacet_map_of_screen(m, s, b.a, &map);
        save_note_failure(&d, drawn, &(tacet_error){.text = "no memory for the map"});
        if (drawn == TACET_OK)
            save_draw(&b, &d, "map", &(tacet_figure){TACET_FIGURE_MAP, {.map = &map}});
        choice c = choose(&b);
        draw_pattern(&b, w, &d, c);
        save_body_drawings(&b, w, &d, c.cell);
        status = tacet_folder_tidy(folder, e);
    }
    if (drawings) *drawings = d.first;
    tacet_arena_destroy(b.a);
    return status;
}
