#include "demo.h"
#include <complex.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static void show(const tacet_problems *problems)
{
    for (size_t i = 0; i < tacet_problems_kept(problems); i++) {
        const tacet_problem *p = tacet_problems_at(problems, i);
        print_error("%s:%d:%d: %s\n", p->file, p->line, p->column, p->text);
    }
}

static tacet_status assemble(demo *d, tacet_problems *problems, tacet_error *e)
{
    show(problems);
    assert_non_null(d->study);
    tacet_problems_destroy(problems);
    tacet_status status = tacet_model_create(d->study, &d->model, e);
    if (status == TACET_OK) status = tacet_model_prepare(d->model, e);
    if (status == TACET_OK) status = tacet_workspace_create(d->model, &d->work);
    return status;
}

static void assemble_well(demo *d, tacet_problems *problems)
{
    tacet_error e = {0};
    tacet_status status = assemble(d, problems, &e);
    if (status != TACET_OK) print_error("%s\n", e.text);
    assert_int_equal(status, TACET_OK);
}

void demo_open(demo *d, const char *study_name)
{
    char path[512];
    snprintf(path, sizeof path, "%s/patterns/%s", TEST_ROOT, study_name);
    demo_open_path(d, path);
}

void demo_open_path(demo *d, const char *path)
{
    *d = (demo){0};
    tacet_problems *problems = tacet_problems_create();
    (void)!tacet_study_read(path, problems, &d->study);
    assemble_well(d, problems);
}

void demo_open_text(demo *d, const char *text)
{
    *d = (demo){0};
    tacet_problems *problems = tacet_problems_create();
    (void)!tacet_study_read_text(text, strlen(text), "text.yaml", problems, &d->study);
    assemble_well(d, problems);
}

tacet_status demo_try_text(demo *d, const char *text, tacet_error *e)
{
    *d = (demo){0};
    *e = (tacet_error){0};
    tacet_problems *problems = tacet_problems_create();
    (void)!tacet_study_read_text(text, strlen(text), "text.yaml", problems, &d->study);
    return assemble(d, problems, e);
}

void demo_replace(char *text, const char *what, const char *with)
{
    char *at = strstr(text, what);
    if (!at) fail_msg("no '%s' in the study", what);
    size_t from = strlen(what), to = strlen(with);
    memmove(at + to, at + from, strlen(at + from) + 1);
    memcpy(at, with, to);
}

char *demo_text(const char *study_name)
{
    char path[512];
    snprintf(path, sizeof path, "%s/patterns/%s", TEST_ROOT, study_name);
    FILE *f = fopen(path, "rb");
    assert_non_null(f);
    char *text = calloc(1, 65536);
    assert_true(fread(text, 1, 65535, f) > 0);
    fclose(f);
    return text;
}

void demo_close(demo *d)
{
    tacet_workspace_destroy(d->work);
    tacet_model_destroy(d->model);
    tacet_study_destroy(d->study);
}

// Own inertia of a node: the reciprocating share is in the piston torque.
static double own_inertia(const demo *d, size_t node)
{
    const tacet_engine *en = tacet_model_engine(d->model);
    const tacet_train *t = tacet_model_train(d->model);
    double inertia = tacet_train_node_inertia(t, node);
    for (unsigned slot = 0; slot < tacet_engine_cylinders(en); slot++)
        if (strcmp(tacet_engine_node(en, slot), tacet_train_node_name(t, node)) == 0)
            inertia -= tacet_engine_mean_inertia(en);
    return inertia;
}

static double complex from_momentum(const demo *d, const tacet_response *r, size_t h)
{
    const tacet_train *t = r->train;
    double w = r->speed_rad_per_s / r->revolutions * (double)h;
    double complex sum = 0;
    for (size_t j = 0; j < tacet_train_nodes(t); j++)
        if (tacet_train_node_housed(t, j))
            sum += own_inertia(d, j) * w * w * r->motion->angle_rad[j].line[h];
    for (size_t l = 0; l < tacet_train_links(t); l++) {
        tacet_link_info info = tacet_train_link_info(t, l);
        bool from = tacet_train_node_housed(t, info.from), to = tacet_train_node_housed(t, info.to);
        double complex torque = r->motion->link_torque_Nm[l].line[h];
        if (from && !to) sum -= torque / info.gear_ratio;
        if (to && !from) sum += torque;
    }
    return sum;
}

double demo_roll_mismatch_of(const demo *d, const tacet_response *r, const tacet_spectrum *roll)
{
    double largest = 0, off = 0;
    for (size_t h = 1; h <= roll->n_lines; h++) {
        largest = fmax(largest, cabs(roll->line[h]));
        off = fmax(off, cabs(roll->line[h] - from_momentum(d, r, h)));
    }
    assert_true(largest > 10);
    return off / largest;
}

double demo_roll_mismatch(const demo *d)
{
    const tacet_spectrum *roll;
    tacet_quantity_ref of = {.what = tacet_quantity_find("roll-torque")};
    assert_int_equal(tacet_workspace_quantity(d->work, of, &roll, NULL), TACET_OK);
    return demo_roll_mismatch_of(d, tacet_workspace_response(d->work), roll);
}

tacet_roll *demo_roll(const demo *d, const char *word)
{
    tacet_pattern p;
    tacet_roll *roll = NULL;
    tacet_error e;
    const tacet_engine *en = tacet_model_engine(d->model);
    assert_int_equal(tacet_pattern_parse(word, &p, &e), TACET_OK);
    assert_int_equal(
        tacet_roll_create(&p, tacet_engine_cylinders(en), tacet_engine_strokes(en), &roll, &e),
        TACET_OK);
    return roll;
}

tacet_condition demo_condition(const demo *d, const tacet_roll *roll, double speed_rpm)
{
    double speed = speed_rpm * 2 * M_PI / 60;
    return (tacet_condition){
        .speed_rad_per_s = speed, .demand_Nm = tacet_model_demand(d->model, speed), .roll = roll};
}
