// A study with pressure traces that were written from the model's own cycles, as a test bench would
// record them, gives the model's rows to 1e-3. The cycles come from the sequences that are
// compared: a file does not tell what the fire before a skip had come after, which alone moves a
// line by half a percent.
#include "demo.h"
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#define RPM     1200.0
#define LOADS   9
#define DEGREES 721
#define LONGEST 2 // skipped cycles in a row
#define COLUMNS ((LONGEST + 2) * 2)

static demo model;
static char folder[] = "/tmp/tacet-rows-XXXXXX";
// fired[load][after * 2 + next], skipped[load][run * 2 + next], run LONGEST + 1: forever; kPa at
// -360..360 degrees
static double fired[LOADS][COLUMNS][DEGREES], skipped[LOADS][COLUMNS][DEGREES];
static bool have_fired[LOADS][COLUMNS], have_skipped[LOADS][COLUMNS];
static double fuel_mg[LOADS][LONGEST + 1];

static double load_kpa(int i)
{
    return 40 + 12.5 * i;
}

// A word in which every cylinder goes through the same sequence of cycles.
static tacet_roll *same_for_all(const char *cycles)
{
    char word[TACET_PATTERN_LONGEST + 1] = "";
    for (; *cycles; cycles++)
        for (int slot = 0; slot < 6; slot++)
            strncat(word, cycles, 1);
    return demo_roll(&model, word);
}

// Pressure of a slot over the cycle about firing top `c` of the loaded condition.
static void record(unsigned slot, unsigned c, double *kpa)
{
    const tacet_engine *en = tacet_model_engine(model.model);
    double top = tacet_engine_firing_angle(en, slot) + 4 * M_PI * c;
    for (int k = 0; k < DEGREES; k++) {
        double deg = k == DEGREES - 1 ? 360 - 1e-6 : k - 360, angle = top + deg * M_PI / 180, p;
        tacet_engine_pressure(en, tacet_workspace_engine(model.work), slot, 1, &angle, &p);
        kpa[k] = p / 1e3;
    }
}

static void record_all(const char *cycles, int load, bool forever)
{
    tacet_roll *r = forever ? demo_roll(&model, cycles) : same_for_all(cycles);
    tacet_duty duty = {.charge_Pa = load_kpa(load) * 1e3};
    tacet_engine_work *w = (tacet_engine_work *)(uintptr_t)tacet_workspace_engine(model.work);
    assert_int_equal(
        tacet_engine_load(tacet_model_engine(model.model), r, &duty, RPM * M_PI / 30, w), TACET_OK);
    for (unsigned slot = 0; slot < (forever ? 6 : 1); slot++)
        for (unsigned c = 0; c < r->cycles; c++) {
            tacet_cycle now = tacet_roll_cycle(r, slot, c), next = tacet_roll_cycle(r, slot, c + 1);
            unsigned run = now.skips == TACET_SKIPS_FOREVER ? LONGEST + 1 : now.skips;
            unsigned column = run * 2 + (next.tenths > 0);
            assert_true(column < COLUMNS);
            record(slot, c, now.tenths ? fired[load][column] : skipped[load][column]);
            (now.tenths ? have_fired : have_skipped)[load][column] = true;
        }
    tacet_roll_destroy(r);
}

// Fuel of a fire that comes after `run` skips, at a load: of a word in which all fires do, at the
// torque that takes this load (secant).
static double fuel_of(int load, const char *cycles)
{
    const tacet_engine *en = tacet_model_engine(model.model);
    tacet_engine_work *w = (tacet_engine_work *)(uintptr_t)tacet_workspace_engine(model.work);
    tacet_roll *r = same_for_all(cycles);
    double speed = RPM * M_PI / 30, want = load_kpa(load) * 1e3, x[2] = {60, 100}, y[2];
    tacet_duty duty;
    for (int i = 0; i < 12; i++) {
        for (int k = 0; k < 2; k++) {
            assert_int_equal(tacet_engine_duty(en, r, speed, x[k], w, &duty), TACET_OK);
            assert_true(duty.reachable);
            y[k] = duty.charge_Pa - want;
        }
        if (fabs(y[1]) < 1e-3 || y[1] == y[0]) break;
        double next = x[1] - y[1] * (x[1] - x[0]) / (y[1] - y[0]);
        x[0] = x[1];
        x[1] = next;
    }
    assert_near(duty.charge_Pa, want, 1, 0);
    double fires_per_s = RPM / 120 * r->fires / r->cycles;
    tacet_roll_destroy(r);
    return duty.fuel_kg_per_s / fires_per_s * 1e6;
}

static FILE *opened(const char *name, char path[600])
{
    snprintf(path, 600, "%s/%s", folder, name);
    FILE *f = fopen(path, "w");
    assert_non_null(f);
    return f;
}

static void put_headers(FILE *f, bool fires)
{
    fputs("angle_deg", f);
    for (int load = 0; load < LOADS; load++)
        for (unsigned k = 0; k < COLUMNS; k++) {
            if (!(fires ? have_fired : have_skipped)[load][k]) continue;
            unsigned run = k / 2;
            fprintf(f, ",pressure_kpa:manifold_kpa=%g:", load_kpa(load));
            if (fires)
                fprintf(f, "after=%u:fuel_mg=%.9g", run, fuel_mg[load][run]);
            else if (run > LONGEST)
                fputs("run=forever", f);
            else
                fprintf(f, "run=%u", run);
            if (fires || run <= LONGEST) fprintf(f, ":next=%s", k % 2 ? "fire" : "skip");
        }
    fputs("\n", f);
}

static void put_file(const char *name, bool fires)
{
    char path[600];
    FILE *f = opened(name, path);
    put_headers(f, fires);
    for (int row = 0; row < DEGREES; row++) {
        fprintf(f, "%d", row - 360);
        for (int load = 0; load < LOADS; load++)
            for (unsigned k = 0; k < COLUMNS; k++)
                if ((fires ? have_fired : have_skipped)[load][k])
                    fprintf(f, ",%.7g", (fires ? fired : skipped)[load][k][row]);
        fputs("\n", f);
    }
    assert_int_equal(fclose(f), 0);
}

static char *six_text(void)
{
    char *text = demo_text("forwarder.yaml");
    demo_replace(text, "{trapped: residual}", "{trapped: residual, longest_run: 2}");
    demo_replace(text, "900:1900:25", "[1200]");
    return text;
}

static int write_all(void **state)
{
    (void)state;
    char *text = six_text(), path[600];
    if (!mkdtemp(folder)) return -1;
    demo_open_text(&model, text);
    for (int load = 0; load < LOADS; load++) {
        static const char *const same[] = {"x", "x.", "x.."};
        for (int run = 0; run <= LONGEST; run++)
            fuel_mg[load][run] = fuel_of(load, same[run]);
        record_all("xxx.", load, false);
        record_all("x.x.x..", load, false);
        record_all("x.", load, true);
    }
    put_file("fired.csv", true);
    put_file("skipped.csv", false);
    demo_replace(text, "cycle:\n",
                 "cycle:\n  kind: traces\n  traces: {fired: fired.csv, skipped: skipped.csv}\n");
    FILE *f = opened("study.yaml", path);
    fputs(text, f);
    free(text);
    return fclose(f);
}

static int remove_all(void **state)
{
    (void)state;
    static const char *const names[] = {"fired.csv", "skipped.csv", "study.yaml"};
    for (int i = 0; i < 3; i++) {
        char path[600];
        snprintf(path, sizeof path, "%s/%s", folder, names[i]);
        unlink(path);
    }
    demo_close(&model);
    return rmdir(folder);
}

static void compare(demo *read, const char *word, double demand)
{
    tacet_row a, b;
    tacet_roll *roll = demo_roll(&model, word);
    tacet_condition c = demo_condition(&model, roll, RPM);
    c.demand_Nm = demand;
    assert_int_equal(tacet_solve(model.model, &c, TACET_LEVEL_RIPPLE, model.work, &a), TACET_OK);
    assert_int_equal(tacet_solve(read->model, &c, TACET_LEVEL_RIPPLE, read->work, &b), TACET_OK);
    assert_int_equal(a.outcome, TACET_SOLVED);
    assert_int_equal(b.outcome, TACET_SOLVED);
    assert_near(b.duty.charge_Pa, a.duty.charge_Pa, 0, 1e-3);
    assert_near(b.duty.fuel_kg_per_s, a.duty.fuel_kg_per_s, 0, 1e-3);
    assert_near(b.fuel_to_all_fire, a.fuel_to_all_fire, 0, 1e-3);
    assert_near(b.duty.friction_W, a.duty.friction_W, 0, 1e-3);
    assert_near(b.duty.pumping_W, a.duty.pumping_W, 1e-3 * a.duty.gross_W, 0);
    assert_near(b.duty.peak_pressure_Pa, a.duty.peak_pressure_Pa, 0, 1e-3);
    for (size_t i = 0; i < a.n_bands; i++) {
        const tacet_band_level *x = &a.bands[i].level, *y = &b.bands[i].level;
        assert_near(y->dispersed, x->dispersed, 0, 1e-3);
        assert_near(y->nominal, x->nominal, 1e-3 * x->dispersed, 0);
        assert_near(y->leading_order, x->leading_order, 0, 0);
        assert_near(b.bands[i].margin_db, a.bands[i].margin_db, 0.01, 0); // 1e-3 is 0.009 dB
        assert_int_equal(b.bands[i].verdict, a.bands[i].verdict);
    }
    for (size_t i = 0; i < a.n_limits; i++)
        assert_near(b.limits[i].value, a.limits[i].value, 0, 1e-3);
    tacet_roll_destroy(roll);
}

static void test_traces_give_the_rows_of_the_model(void **state)
{
    (void)state;
    demo read;
    char path[600];
    snprintf(path, sizeof path, "%s/study.yaml", folder);
    demo_open_path(&read, path);
    assert_int_equal(tacet_model_study(read.model)->engine.cycle.kind, TACET_CYCLE_TRACES);
    compare(&read, "x", 312);
    compare(&read, "x.", 312);
    compare(&read, ".x", 230);
    compare(&read, "xx.", 312);
    compare(&read, "..x.x.x", 312);
    compare(&read, "..x.x.x", 200);
    demo_close(&read);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_traces_give_the_rows_of_the_model),
    };
    return cmocka_run_group_tests(tests, write_all, remove_all);
}
