#include "demo.h"
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
