// Pressure traces in place of computed cycles.
#include "direct.h"
#include "near.h"
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

static char folder[] = "/tmp/tacet-traces-XXXXXX";

static int make_folder(void **state)
{
    (void)state;
    return mkdtemp(folder) ? 0 : -1;
}

static int remove_folder(void **state)
{
    (void)state;
    static const char *const names[] = {"fired.csv", "skipped.csv"};
    char path[128];
    for (int i = 0; i < 2; i++) {
        snprintf(path, sizeof path, "%s/%s", folder, names[i]);
        unlink(path);
    }
    return rmdir(folder);
}

static FILE *opened(const char *name)
{
    char path[128];
    snprintf(path, sizeof path, "%s/%s", folder, name);
    FILE *f = fopen(path, "w");
    assert_non_null(f);
    return f;
}

static void write_text(const char *name, const char *text)
{
    FILE *f = opened(name);
    assert_true(fputs(text, f) >= 0);
    assert_int_equal(fclose(f), 0);
}

static tacet_engine_def with_traces(tacet_engine_def d)
{
    d.cycle.kind = TACET_CYCLE_TRACES;
    d.cycle.fired_trace = "fired.csv", d.cycle.skipped_trace = "skipped.csv";
    d.folder = folder;
    return d;
}

// ---- the model's own cycles, written and read back

typedef struct {
    unsigned up, down;
    size_t speed, charge;
} column;

static size_t header(FILE *f, const table *t, bool fired, double heating_value, column *c)
{
    const halves *h = &t->halves;
    size_t n = 0;
    fputs("# from computed cycles\nangle_deg", f);
    for (size_t s = 0; s < t->n_speeds; s++)
        for (size_t i = 0; i < t->n_charges; i++)
            for (unsigned run = fired ? 0 : 1; run <= h->longest + !fired; run++)
                for (int next = 0; next < 2; next++, n++) {
                    c[n] = (column){fired ? halves_up_fire(h, run) : halves_up_skip(h, run),
                                    fired ? halves_down_fire(h, run, next)
                                          : halves_down_skip(h, run, next),
                                    s, i};
                    fprintf(f, ",pressure_kpa:manifold_kpa=%.17g:rpm=%.17g:next=%s",
                            t->charge[i] / 1e3, t->speed_rad_per_s[s] / RPM,
                            next ? "fire" : "skip");
                    double heat = table_number(t, c[n].up, s, i)[HALF_FUEL];
                    if (fired)
                        fprintf(f, ":after=%u:fuel_mg=%.9g", run, heat / heating_value * 1e6);
                    else if (run > h->longest)
                        fputs(":run=forever", f);
                    else
                        fprintf(f, ":run=%u", run);
                }
    fputs("\n", f);
    return n;
}

static void write_table(const tacet_engine *en, bool fired)
{
    const table *t = &en->table;
    static column c[4000];
    FILE *f = opened(fired ? "fired.csv" : "skipped.csv");
    size_t n = header(f, t, fired, en->def.cycle.lower_heating_value_J_per_kg, c);
    assert_true(n < 4000);
    for (int deg = -360; deg <= 360; deg++) {
        fprintf(f, "%d", deg);
        for (size_t k = 0; k < n; k++) {
            unsigned kind = deg < 0 ? c[k].up : c[k].down;
            const double *p = table_pressure(t, kind, c[k].speed, c[k].charge);
            fprintf(f, ",%.6g", p[deg < 0 ? deg + 360 : deg] / 1e3);
        }
        fputs("\n", f);
    }
    assert_int_equal(fclose(f), 0);
}

// (`burnt` keeps two banks of halves, traces one: for it, words whose runs begin after fires in a
// row.) Rows of an engine with traces are those of the engine that wrote them, to 1e-3: duty, and
// torque to 1e-3 of its rms.
static void compare(const engine_pair *a, const engine_pair *b, const char *word, double rpm,
                    double demand)
{
    tacet_duty x = duty_of(a, word, rpm, demand), y = duty_of(b, word, rpm, demand);
    assert_true(x.reachable && y.reachable);
    assert_near(y.charge_Pa, x.charge_Pa, 0, 1e-3);
    assert_near(y.fuel_W, x.fuel_W, 0, 1e-3);
    assert_near(y.gross_W, x.gross_W, 0, 1e-3);
    assert_near(y.pumping_W, x.pumping_W, 1e-3 * x.gross_W, 0);
    assert_near(y.friction_W, x.friction_W, 0, 1e-3);
    assert_near(y.peak_pressure_Pa, x.peak_pressure_Pa, 0, 1e-3);
    assert_true(isnan(y.wall_heat_W) && isnan(y.exhaust_W) && isnan(y.blow_by_W)); // not known
    tacet_roll *r = roll_of(word, 8);
    assert_int_equal(tacet_engine_load(a->engine, r, &x, rpm * RPM, a->work), TACET_OK);
    assert_int_equal(tacet_engine_load(b->engine, r, &y, rpm * RPM, b->work), TACET_OK);
    double off = 0, all = 0, s, t;
    for (double angle = 0; angle < 2 * M_PI * r->revolutions; angle += 0.0131)
        for (unsigned slot = 0; slot < 8; slot += 3) {
            tacet_engine_gas_torque(a->engine, a->work, slot, 1, &angle, &s);
            tacet_engine_gas_torque(b->engine, b->work, slot, 1, &angle, &t);
            off += (s - t) * (s - t);
            all += s * s;
        }
    assert_near(sqrt(off / all), 0, 1e-3, 0);
    tacet_roll_destroy(r);
}

static void test_traces_of_the_model(void **state)
{
    (void)state;
    static const int trapped[] = {TACET_TRAPPED_RESIDUAL, TACET_TRAPPED_BURNT};
    for (int i = 0; i < 2; i++) {
        tacet_engine_def d = demo_v8(), own;
        d.skip.trapped = trapped[i];
        engine_pair model = engine_made(&d, 1400, 1800, 2);
        write_table(model.engine, true);
        write_table(model.engine, false);
        own = with_traces(d);
        engine_pair read = engine_made(&own, 1400, 1800, 2);
        compare(&model, &read, "x", 1500, 100);
        compare(&model, &read, "xx.", 1530, 130);
        compare(&model, &read, i ? "xxxx." : "..x.x.x", 1777, 60);
        compare(&model, &read, "x.", 1600, 100);
        engine_cleared(&model);
        engine_cleared(&read);
    }
}

// ---- two strokes, few columns

// Pressure of a made-up 2-stroke cycle: polytropic, higher by `rise` after top, kPa.
static double two_stroke(double deg, double load, double rise)
{
    double shut = fabs(deg) < 120 ? (1 + cos(deg * DEG * 1.5)) / 2 : 0;
    return load + load * 30 * shut * shut + (deg > 0 ? rise * sin(M_PI * fmin(deg / 120, 1)) : 0);
}

static void write_two_stroke(const char *name, const char *head, const double *load,
                             const double *rise, int step)
{
    FILE *f = opened(name);
    fprintf(f, "%s\n", head);
    for (int deg = -180; deg <= 180; deg += step) {
        fprintf(f, "%d", deg);
        for (int i = 0; i < 2; i++)
            fprintf(f, ",%.9g", two_stroke(deg, load[i], rise[i]));
        fputs("\n", f);
    }
    assert_int_equal(fclose(f), 0);
}

// A 2-stroke fires every revolution: torque is pressure times lever over 360 degrees, its mean is
// the work of the loop over 2 pi, mep to torque takes 2 pi.
static void test_traces_two_stroke(void **state)
{
    (void)state;
    static const double load[] = {100, 200}, rise[] = {1000, 2000}, none[] = {0, 0};
    write_two_stroke("fired.csv",
                     "angle_deg,pressure_kpa:manifold_kpa=100,pressure_kpa:manifold_kpa=200", load,
                     rise, 3);
    write_two_stroke("skipped.csv",
                     "angle_deg,pressure_kpa:manifold_kpa=100,pressure_kpa:manifold_kpa=200", load,
                     none, 3);
    tacet_engine_def d = with_traces(demo_six());
    double low_y = 90e3, high_y = 250e3, zero = 0;
    d.strokes = 2;
    d.cycle.lowest_Pa = (tacet_curve){&zero, &low_y, 1};
    d.cycle.highest_Pa = (tacet_curve){&zero, &high_y, 1};
    d.friction = (tacet_friction_def){50e3, 0, 0, 0};
    engine_pair p = engine_made(&d, 500, 1000, 3);
    tacet_pattern word;
    tacet_roll *r;
    assert_int_equal(tacet_pattern_parse("xx.x", &word, NULL), TACET_OK);
    assert_int_equal(tacet_roll_create(&word, 6, 2, &r, NULL), TACET_OK);
    tacet_duty q;
    assert_int_equal(tacet_engine_duty(p.engine, r, 700 * RPM, 1e9, p.work, &q), TACET_OK);
    assert_int_equal(q.reach, TACET_REACH_TOO_HIGH);
    assert_near(q.charge_Pa, 200e3, 0, 1e-12); // the highest load traced
    assert_int_equal(tacet_engine_load(p.engine, r, &q, 700 * RPM, p.work), TACET_OK);
    double area = M_PI / 4 * 0.108 * 0.108, work = 0, x, dx, ddx;
    for (double deg = -179.95; deg < 180; deg += 0.1) {
        tacet_slider_at(tacet_engine_slider(p.engine), deg * DEG, &x, &dx, &ddx);
        work += two_stroke(deg, 200, 2000) * 1e3 * area * dx * 0.1 * DEG;
    }
    double volume = 6 * area * 0.130;
    assert_near(q.friction_Nm, 50e3 * volume / (2 * M_PI), 0, 1e-12);
    assert_near(q.brake_torque_Nm + q.friction_Nm, 6 * 0.75 * work / (2 * M_PI), 0, 1e-3);
    assert_near(q.pumping_W, 0, 0, 0);
    unsigned fires = 0;
    for (unsigned c = 0; c < r->cycles; c++) // window after each firing top
        for (double deg = 0; deg < 360; deg += 31) {
            bool expansion = deg < 180;
            tacet_cycle now = tacet_roll_cycle(r, 4, expansion ? c : c + 1);
            double angle = tacet_engine_firing_angle(p.engine, 4) + 2 * M_PI * c + deg * DEG, t;
            double kpa = two_stroke(expansion ? deg : deg - 360, 200, now.tenths ? 2000 : 0);
            tacet_slider_at(tacet_engine_slider(p.engine), deg * DEG, &x, &dx, &ddx);
            tacet_engine_gas_torque(p.engine, p.work, 4, 1, &angle, &t);
            assert_near(t, (kpa * 1e3 - 100e3) * area * dx, 1, 2e-3);
            double both = 0, inertia = 0, slope = 0;
            tacet_engine_drive(p.engine, p.work, 4, 1, &angle, &both, &inertia, &slope);
            assert_near(both, t, 1e-9, 0);
            assert_near(inertia, 2.7 * dx * dx, 1e-15, 1e-9);
            assert_near(slope, 2 * 2.7 * dx * ddx, 1e-12, 1e-9);
            fires += deg == 31 && now.tenths > 0;
        }
    assert_int_equal(fires, tacet_roll_fires_of(r, 4));
    tacet_roll_destroy(r);
    engine_cleared(&p);
}

// ---- refusals

static void refused(const char *fired, const char *skipped, const char *text)
{
    tacet_engine_def d = with_traces(demo_six());
    tacet_engine *en = NULL;
    tacet_error e = {0};
    if (fired) write_text("fired.csv", fired);
    if (skipped) write_text("skipped.csv", skipped);
    assert_int_equal(tacet_engine_create(&d, &en, NULL), TACET_OK);
    assert_int_not_equal(tacet_engine_prepare(en, 100, 200, 2, &e), TACET_OK);
    if (!strstr(e.text, text)) assert_string_equal(e.text, text);
    tacet_engine_destroy(en);
}

// A file of n columns of constant pressure, 5 degrees apart.
static char *made(const char *head, int n, double kpa)
{
    static char text[2][20000];
    static int turn;
    char *out = text[turn ^= 1], *at = out;
    at += snprintf(at, 1000, "%s\n", head);
    for (int deg = -360; deg <= 360; deg += 5) {
        at += snprintf(at, 20, "%d", deg);
        for (int i = 0; i < n; i++)
            at += snprintf(at, 40, ",%g", kpa);
        at += snprintf(at, 20, "\n");
    }
    return out;
}

// Each column of its own load at any speed, or of its own speed: every load is there at every
// speed.
static void test_traces_too_many_places(void **state)
{
    (void)state;
    static char head[8000] = "angle_deg", keep[20000];
    char *at = head + strlen(head);
    for (int i = 1; i <= 65; i++)
        at += sprintf(at, ",pressure_kpa:manifold_kpa=%d", i);
    for (int i = 1; i <= 65; i++)
        at += sprintf(at, ",pressure_kpa:manifold_kpa=1:rpm=%d", 100 * i);
    memcpy(keep, made("angle_deg,pressure_kpa", 1, 200), sizeof keep);
    FILE *f = opened("fired.csv");
    fprintf(f, "%s\n", head);
    for (int deg = -360; deg <= 360; deg += 5) {
        fprintf(f, "%d", deg);
        for (int i = 0; i < 130; i++)
            fputs(",9", f);
        fputc('\n', f);
    }
    assert_int_equal(fclose(f), 0);
    refused(NULL, keep, "fired.csv: 65 loads at 65 speeds; at most 4096");
}

#define TWO "angle_deg,pressure_kpa:manifold_kpa=30,pressure_kpa:manifold_kpa=90"
static void test_traces_refused(void **state)
{
    (void)state;
    char *good = made(TWO, 2, 200);
    static char keep[20000];
    memcpy(keep, good, sizeof keep);
    refused(keep, "angle_deg,pressure_kpa\n-360,1\n", "skipped.csv: angles from -360 to -360");
    refused(made(TWO, 2, 0), keep, "0 kPa at -360 degrees");
    refused(made("angle,pressure_kpa:manifold_kpa=30", 1, 1), keep,
            "the first column is angle_deg");
    refused(made("angle_deg,p_bar:manifold_kpa=30", 1, 1), keep, "is pressure_kpa");
    refused(made("angle_deg,pressure_kpa", 1, 200), keep, "a fired cycle needs its load");
    refused(made("angle_deg,pressure_kpa:manifold_kpa=30", 1, 200), keep,
            "at 1 load; two are needed");
    refused(made("angle_deg,pressure_kpa:manifold_kpa=30:run=2", 1, 200), keep, "allowed are");
    refused(made("angle_deg,pressure_kpa:manifold_kpa=30:next=maybe", 1, 200), keep,
            "next is fire or skip");
    // numbers that overflow when they are turned into SI units or interpolated
    refused(made("angle_deg,pressure_kpa:manifold_kpa=1e306", 1, 200), keep, "0 to 100000 kPa");
    refused(made("angle_deg,pressure_kpa:manifold_kpa=9:rpm=1e300", 1, 200), keep, "1 to 100000");
    refused(made("angle_deg,pressure_kpa:manifold_kpa=9:rpm=0", 1, 200), keep, "1 to 100000");
    refused(made("angle_deg,pressure_kpa:manifold_kpa=9:fuel_mg=1e308", 1, 200), keep, "0 to 1e9");
    refused(keep, made("angle_deg,pressure_kpa:run=2", 1, 200),
            "no column for pressure_kpa:manifold_kpa=30:run=1:next=fire");
    refused(keep, made("angle_deg,pressure_kpa:run=0", 1, 200), "a whole number from 1");
    refused("angle_deg,pressure_kpa:manifold_kpa=30\n-360,1\n0,1\n360,1\n", keep,
            "from -360 to 0 degrees; steps above 0 up to 5");
    refused("angle_deg,pressure_kpa:manifold_kpa=30\n-360,1\n-355,x\n", keep, "fired.csv:3:");
    char path[128];
    snprintf(path, sizeof path, "%s/fired.csv", folder);
    unlink(path);
    refused(NULL, keep, "fired.csv");
}

// Plain columns are enough: one trace stands for all speeds, runs and what comes next.
static void test_traces_plain(void **state)
{
    (void)state;
    write_text("fired.csv", made(TWO, 2, 300));
    write_text("skipped.csv", made("angle_deg,pressure_kpa", 1, 90));
    tacet_engine_def d = with_traces(demo_six());
    engine_pair p = engine_made(&d, 900, 1900, 5);
    tacet_duty q = duty_of(&p, "..x.x.x", 1000, 1e6); // a loop without area does no work
    assert_near(q.brake_torque_Nm + q.friction_Nm, 0, 1e-9, 0);
    assert_near(q.charge_Pa, 90e3, 0, 1e-12);
    // fuel not stated: of a cylinder full of mixture at manifold pressure and temperature
    double mass = 90e3 * M_PI / 4 * 0.108 * 0.108 * 0.130 / (287 * 320) / 16.6;
    double fires_per_s = 6 * 3 / 7.0 * 1000 / 120;
    assert_near(q.fuel_kg_per_s, mass * fires_per_s, 0, 1e-9);
    double angle = 1, pressure;
    tacet_roll *r = roll_of("..x.x.x", 6);
    assert_int_equal(tacet_engine_load(p.engine, r, &q, 1000 * RPM, p.work), TACET_OK);
    tacet_engine_pressure(p.engine, p.work, 0, 1, &angle, &pressure);
    assert_true(fabs(pressure - 300e3) < 1e-6 || fabs(pressure - 90e3) < 1e-6);
    tacet_roll_destroy(r);
    engine_cleared(&p);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_traces_of_the_model),    cmocka_unit_test(test_traces_two_stroke),
        cmocka_unit_test(test_traces_refused),         cmocka_unit_test(test_traces_plain),
        cmocka_unit_test(test_traces_too_many_places),
    };
    return cmocka_run_group_tests(tests, make_folder, remove_folder);
}
