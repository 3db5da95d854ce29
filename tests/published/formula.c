#include "formula.h"
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

// A light piston on a short throw, for little inertia torque; pressures far above zero leave room
// for the torque to push backwards.
#define BORE_M   0.080
#define STROKE_M 0.030
#define ROD_M    0.200
#define PC_KPA   600.0
#define SLOPE    1.0 // N m of tau for every kPa of manifold pressure, less 20 kPa

static void write_traces(const char *folder)
{
    char path[128];
    snprintf(path, sizeof path, "%s/fired.csv", folder);
    FILE *fired = fopen(path, "w");
    snprintf(path, sizeof path, "%s/skipped.csv", folder);
    FILE *skipped = fopen(path, "w");
    assert_non_null(fired);
    assert_non_null(skipped);
    fputs("angle_deg,pressure_kpa:manifold_kpa=20,pressure_kpa:manifold_kpa=60\n", fired);
    fputs("angle_deg,pressure_kpa\n", skipped);
    double area = M_PI / 4 * BORE_M * BORE_M, r = STROKE_M / 2;
    for (int deg = -360; deg <= 360; deg++) {
        // T = (p - pc) area x', x' = r sin a (1 + r cos a / q): sin a drops out of T / x'
        double a = deg * M_PI / 180, s = sin(a), q = sqrt(ROD_M * ROD_M - r * r * s * s);
        double per_Nm = s / (area * r * (1 + r * cos(a) / q)) / 1e3;
        fprintf(fired, "%d,%.15g,%.15g\n", deg, PC_KPA, PC_KPA + 40 * SLOPE * per_Nm);
        fprintf(skipped, "%d,%.15g\n", deg, PC_KPA);
    }
    assert_int_equal(fclose(fired), 0);
    assert_int_equal(fclose(skipped), 0);
}

static const char engine[] =
    "title: Formula\n"
    "engine: {bore_mm: 80, stroke_mm: 30, rod_length_mm: 200, reciprocating_mass_kg: 0.01,\n"
    "  firing_order: %s, dispersion: %s,\n"
    "  friction_kpa: {constant: 0, per_krpm: 0, per_krpm2: 0, per_mpa_peak: 0}%s}\n"
    "cycle: {kind: traces, traces: {fired: fired.csv, skipped: skipped.csv},\n"
    "  manifold_kpa: {lowest: 20, highest: 60}, exhaust_kpa: 600, crankcase_kpa: 600}\n"
    "train:\n%s";

void formula_open(formula *f, int cylinders, const char *dispersion, const char *rest)
{
    static const char one_pin[] =
        ",\n  cylinders: [{number: 1, node: crank}, {number: 2, node: crank}]";
    *f = (formula){.folder = "/tmp/tacet-formula-XXXXXX"};
    assert_non_null(mkdtemp(f->folder));
    write_traces(f->folder);
    char path[128];
    snprintf(path, sizeof path, "%s/study.yaml", f->folder);
    FILE *file = fopen(path, "w");
    assert_non_null(file);
    fprintf(file, engine, cylinders == 1 ? "[1]" : "[1, 2]", dispersion,
            cylinders == 1 ? ", cylinders: [{number: 1, node: crank}]" : one_pin, rest);
    assert_int_equal(fclose(file), 0);
    tacet_problems *problems = tacet_problems_create();
    (void)!tacet_study_read(path, problems, &f->study);
    for (size_t i = 0; i < tacet_problems_kept(problems); i++)
        print_error("%s\n", tacet_problems_at(problems, i)->text);
    tacet_problems_destroy(problems);
    assert_non_null(f->study);
    tacet_error e = {0};
    tacet_status status = tacet_model_create(f->study, &f->model, &e);
    if (status == TACET_OK) status = tacet_model_prepare(f->model, &e);
    if (status == TACET_OK) status = tacet_workspace_create(f->model, &f->work);
    if (status != TACET_OK) print_error("%s\n", e.text);
    assert_int_equal(status, TACET_OK);
}

void formula_close(formula *f)
{
    char path[128];
    tacet_workspace_destroy(f->work);
    tacet_model_destroy(f->model);
    tacet_study_destroy(f->study);
    const char *const names[] = {"fired.csv", "skipped.csv", "study.yaml"};
    for (size_t i = 0; i < 3; i++) {
        snprintf(path, sizeof path, "%s/%s", f->folder, names[i]);
        unlink(path);
    }
    rmdir(f->folder);
}

tacet_row formula_row(formula *f, const char *word, double rpm, double demand_Nm, tacet_level level)
{
    tacet_pattern p;
    tacet_roll *roll = NULL;
    assert_int_equal(tacet_pattern_parse(word, &p, NULL), TACET_OK);
    assert_int_equal(
        tacet_roll_create(&p, tacet_engine_cylinders(tacet_model_engine(f->model)), 4, &roll, NULL),
        TACET_OK);
    tacet_condition c = {.speed_rad_per_s = rpm * M_PI / 30, .demand_Nm = demand_Nm, .roll = roll};
    tacet_row row;
    assert_int_equal(tacet_solve(f->model, &c, level, f->work, &row), TACET_OK);
    assert_int_equal(row.outcome, TACET_SOLVED);
    tacet_roll_destroy(roll);
    return row;
}
