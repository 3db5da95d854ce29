// Charge for a demand, fuel and pressure traces against closed forms. The cycles are pressure
// traces whose work is a closed form of the charge, so that every number of a duty has one as well.
#include "near.h"
#include "tacet/engine.h"
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#define DEG (M_PI / 180)
#define RPM (2 * M_PI / 60)

static char folder[] = "/tmp/tacet-duty-XXXXXX";

static int make_folder(void **state)
{
    (void)state;
    return mkdtemp(folder) ? 0 : -1;
}

static int remove_folder(void **state)
{
    (void)state;
    static const char *const names[] = {"fired.csv", "skipped.csv"};
    char path[64];
    for (int i = 0; i < 2; i++) {
        snprintf(path, sizeof path, "%s/%s", folder, names[i]);
        unlink(path);
    }
    return rmdir(folder);
}

static FILE *opened(const char *name)
{
    char path[64];
    snprintf(path, sizeof path, "%s/%s", folder, name);
    FILE *f = fopen(path, "w");
    assert_non_null(f);
    return f;
}

// ---- an engine whose cycles are closed forms

// Bore 100, stroke 100, rod 170 mm, ratio 10, four cylinders 1-3-4-2.
#define BORE  0.1
#define ROD   0.17
#define RATIO 10.0
static const double area = M_PI / 4 * BORE * BORE, swept = M_PI / 4 * BORE * BORE * 0.1,
                    small = M_PI / 4 * BORE * BORE * 0.1 / (RATIO - 1), n_up = 1.35, n_down = 1.2,
                    exhaust = 120, kept = 10; // kPa
static unsigned order[] = {1, 3, 4, 2};
static double zero[] = {0}, lowest[] = {25e3}, highest[] = {900e3};

static tacet_engine_def engine(void)
{
    tacet_engine_def d = tacet_engine_default();
    d.bore_m = BORE, d.stroke_m = 0.1, d.rod_length_m = ROD, d.compression_ratio = RATIO;
    d.reciprocating_mass_kg = 1;
    d.firing_order = order, d.n_cylinders = 4;
    d.friction = (tacet_friction_def){40e3, 11e3, 3e3, 5e3};
    d.cycle.kind = TACET_CYCLE_TRACES;
    d.cycle.fired_trace = "fired.csv", d.cycle.skipped_trace = "skipped.csv";
    d.cycle.lowest_Pa = (tacet_curve){zero, lowest, 1};
    d.cycle.highest_Pa = (tacet_curve){zero, highest, 1};
    d.cycle.lower_heating_value_J_per_kg = 42e6;
    d.folder = folder;
    return d;
}

static double volume(double deg)
{
    double lam = 0.05 / ROD, s = sin(deg * DEG);
    return small + area * (0.05 * (1 - cos(deg * DEG)) + ROD * (1 - sqrt(1 - lam * lam * s * s)));
}

// Intake at the charge, compression with exponent n_up, expansion with n_down from the same
// pressure at top, exhaust at a constant pressure; kPa.
static double fired(double deg, double charge)
{
    if (deg <= -180) return charge;
    if (deg <= 0) return charge * pow(RATIO * small / volume(deg), n_up);
    if (deg < 180) return charge * pow(RATIO, n_up) * pow(small / volume(deg), n_down);
    return exhaust;
}

// Work of a fired cycle, J: a x charge - b, charge in Pa. Integrals of the polytropes.
static double work_a(void)
{
    double down = pow(RATIO, n_up) * small * (1 - pow(RATIO, 1 - n_down)) / (n_down - 1);
    double up = RATIO * small * (pow(RATIO, n_up - 1) - 1) / (n_up - 1);
    return down - up + swept;
}
static const double work_b = exhaust * 1e3 * M_PI / 4 * BORE * BORE * 0.1;

// Loads 20, 150, 400, 990 kPa, 0.3 mg of fuel for each kPa; a skipped cylinder keeps gas that is
// compressed and expands alike (no work).
static const double load[] = {20, 150, 400, 990}, fuel_mg_per_kPa = 0.3;

static void write_closed_forms(void)
{
    FILE *f = opened("fired.csv"), *s = opened("skipped.csv");
    fputs("angle_deg", f);
    for (int i = 0; i < 4; i++)
        fprintf(f, ",pressure_kpa:manifold_kpa=%.17g:fuel_mg=%.17g", load[i],
                fuel_mg_per_kPa * load[i]);
    fputs("\n", f);
    fputs("angle_deg,pressure_kpa\n", s);
    for (int deg = -360; deg <= 360; deg++) {
        fprintf(f, "%d", deg);
        for (int i = 0; i < 4; i++)
            fprintf(f, ",%.17g", fired(deg, load[i]));
        fprintf(f, "\n");
        fprintf(s, "%d,%.17g\n", deg, kept * pow(RATIO * small / volume(deg), n_up));
    }
    assert_int_equal(fclose(f), 0);
    assert_int_equal(fclose(s), 0);
}

typedef struct {
    tacet_engine *engine;
    tacet_engine_work *work;
    tacet_roll *roll;
    tacet_duty duty;
} bench;

static void make(bench *b, const tacet_engine_def *d)
{
    tacet_error e = {0};
    *b = (bench){0};
    if (tacet_engine_create(d, &b->engine, &e) != TACET_OK ||
        tacet_engine_prepare(b->engine, 900 * RPM, 3000 * RPM, 12, &e) != TACET_OK ||
        tacet_engine_work_create(b->engine, &b->work) != TACET_OK)
        fail_msg("engine: %s", e.text);
}

static void ask(bench *b, const char *word, double rpm, double demand)
{
    tacet_pattern p;
    tacet_roll_destroy(b->roll);
    assert_int_equal(tacet_pattern_parse(word, &p, NULL), TACET_OK);
    assert_int_equal(tacet_roll_create(&p, 4, 4, &b->roll, NULL), TACET_OK);
    assert_int_equal(tacet_engine_duty(b->engine, b->roll, rpm * RPM, demand, b->work, &b->duty),
                     TACET_OK);
}

static void clear(bench *b)
{
    tacet_roll_destroy(b->roll);
    tacet_engine_work_destroy(b->work);
    tacet_engine_destroy(b->engine);
}

// ---- charge for a demand

typedef struct {
    double charge_kPa, friction_Nm, fuel_kg_per_s, pumping_W, gross_W, peak_Pa;
} closed;

// Opportunity i is that of slot i mod 4 and does what letter i mod L says. Work of the repeat is
// sum over fires of a share charge - b; peaks are share charge r^n, of a skip kept r^n; friction
// torque is fmep V/(4 pi) (mean effective pressure, Heywood, from memory). All is linear in the
// charge, so that of a demand follows by one division.
static closed closed_form(const char *word, const double factor[5], double rpm, double demand)
{
    size_t length = strlen(word), fires = 0;
    double share = 0, most = 0, events = 4.0 * (double)length, volume4 = 4 * swept;
    for (size_t i = 0; i < 4 * length; i++) {
        char c = word[i % length];
        double own = c == '.' ? 0 : (c == 'x' ? 1 : (c - '0') / 10.0) * factor[order[i % 4]];
        share += own;
        fires += own > 0;
        most = fmax(most, own);
    }
    double top = pow(RATIO, n_up), krpm = rpm / 1000, angle = 4 * M_PI * (double)length;
    double per_charge = work_a() * share / angle; // N m per Pa; without friction of peaks
    double constant = work_b * (double)fires / angle;
    double f0 = (40e3 + 11e3 * krpm + 3e3 * krpm * krpm +
                 5e3 * 1e-6 * kept * 1e3 * top * (events - (double)fires) / events) *
                volume4 / (4 * M_PI);
    double f1 = 5e3 * 1e-6 * top * share / events * volume4 / (4 * M_PI);
    double charge = (demand + f0 + constant) / (per_charge - f1), w = rpm * RPM;
    double pump = (exhaust * 1e3 * (double)fires - charge * share) * swept / angle;
    return (closed){.charge_kPa = charge / 1e3,
                    .friction_Nm = f0 + f1 * charge,
                    .fuel_kg_per_s = fuel_mg_per_kPa * 1e-6 * charge / 1e3 * share / angle * w,
                    .pumping_W = pump * w,
                    .gross_W = (demand + f0 + f1 * charge + pump) * w,
                    .peak_Pa =
                        fmax(most * charge * top, fires < 4 * length ? kept * 1e3 * top : 0)};
}

static void compare(bench *b, const char *word, const double factor[5], double rpm, double demand)
{
    closed c = closed_form(word, factor, rpm, demand);
    ask(b, word, rpm, demand);
    const tacet_duty *d = &b->duty;
    assert_true(d->reachable);
    // Simpson's rule over whole degrees, and the parabola through the peak, leave some 1e-7
    assert_near(d->charge_Pa, c.charge_kPa * 1e3, 0, 2e-6);
    assert_near(d->charge_ratio, (c.charge_kPa - 25) / 875, 2e-6, 0);
    assert_near(d->friction_Nm, c.friction_Nm, 0, 2e-6);
    assert_near(d->fuel_kg_per_s, c.fuel_kg_per_s, 0, 2e-6);
    assert_near(d->fuel_W, c.fuel_kg_per_s * 42e6, 0, 2e-6);
    assert_near(d->pumping_W, c.pumping_W, 2e-6 * c.gross_W, 0);
    assert_near(d->gross_W, c.gross_W, 0, 2e-6);
    assert_near(d->peak_pressure_Pa, c.peak_Pa, 0, 1e-5);
}

static const char *const words[] = {"x", "x.", ".x", "..x.x", "xx.", "x8", "x..7.", "xxx.xx9"};

static void test_charge_closed_form(void **state)
{
    (void)state;
    static const double even[] = {0, 1, 1, 1, 1};
    write_closed_forms();
    tacet_engine_def d = engine();
    bench b;
    make(&b, &d);
    for (size_t i = 0; i < sizeof words / sizeof *words; i++)
        for (double rpm = 950; rpm < 3000; rpm += 700)
            for (double demand = 5; demand < 60; demand += 18)
                compare(&b, words[i], even, rpm, demand);
    clear(&b);
}

// Cylinder 4 takes 1.15 of the common charge, cylinder 2 0.9 of it.
static void test_charge_factor_closed_form(void **state)
{
    (void)state;
    static const double factor[] = {0, 1, 0.9, 1, 1.15};
    static tacet_cylinder_def own[] = {{.number = 4, .charge_factor = 1.15},
                                       {.number = 2, .charge_factor = 0.9}};
    write_closed_forms();
    tacet_engine_def d = engine();
    d.cylinders = own, d.n_cylinder_defs = 2;
    bench b;
    make(&b, &d);
    for (size_t i = 0; i < sizeof words / sizeof *words; i++)
        compare(&b, words[i], factor, 1700, 40);
    clear(&b);
}

// ---- fuel

// With cycles of work a p - b and fuel in proportion to p, fuel at density d against all-fire at
// the same demand is (T + F + d b')/(T + F + b'), b' = 4 b/(4 pi), where friction is the same
// (per_mpa_peak 0): what is saved is pumping alone. Closed form.
static void test_fuel_against_all_fire(void **state)
{
    (void)state;
    static const struct {
        const char *word;
        double density;
    } row[] = {{"x.", 1. / 2}, {"..x.x", 2. / 5}, {"xx.", 2. / 3}, {"xxx.", 3. / 4}};
    write_closed_forms();
    tacet_engine_def d = engine();
    d.friction = (tacet_friction_def){70e3, 0, 0, 0};
    double friction = 70e3 * 4 * swept / (4 * M_PI), b0 = 4 * work_b / (4 * M_PI);
    bench b;
    make(&b, &d);
    for (double demand = 10; demand < 80; demand += 22)
        for (size_t i = 0; i < 4; i++) {
            ask(&b, "x", 1500, demand);
            double all = b.duty.fuel_kg_per_s;
            ask(&b, row[i].word, 1500, demand);
            double work = demand + friction;
            assert_true(b.duty.reachable);
            assert_near(b.duty.fuel_kg_per_s / all, (work + row[i].density * b0) / (work + b0), 0,
                        2e-6);
            assert_true(b.duty.fuel_kg_per_s < 0.97 * all);
        }
    clear(&b);
}

// The limits of a duty are those of the closed form: the demand of the highest charge is met, one
// part in 1e4 more is not, and then the nearest is told; the same below.
static void test_limits_closed_form(void **state)
{
    (void)state;
    write_closed_forms();
    tacet_engine_def d = engine();
    d.friction = (tacet_friction_def){70e3, 0, 0, 0};
    double friction = 70e3 * 4 * swept / (4 * M_PI);
    double most = 4 * (work_a() * 900e3 - work_b) * 0.6 / (4 * M_PI) - friction;
    double least = 4 * (work_a() * 25e3 - work_b) * 0.6 / (4 * M_PI) - friction;
    bench b;
    make(&b, &d);
    ask(&b, "x.x.x", 1500, most * (1 - 1e-5));
    assert_true(b.duty.reachable);
    ask(&b, "x.x.x", 1500, most * (1 + 1e-4));
    assert_true(!b.duty.reachable && b.duty.reach == TACET_REACH_TOO_HIGH);
    assert_near(b.duty.brake_torque_Nm, most, 0, 1e-5);
    ask(&b, "x.x.x", 1500, least + 1e-3);
    assert_true(b.duty.reachable);
    ask(&b, "x.x.x", 1500, least - 0.01);
    assert_true(!b.duty.reachable && b.duty.reach == TACET_REACH_TOO_LOW);
    assert_near(b.duty.brake_torque_Nm, least, 1e-3, 0);
    clear(&b);
}

// ---- pressure traces

// A pressure that is a cubic in angle, load and speed alike: four columns and rows fix it, so that
// interpolation must give it back everywhere (uniqueness of the interpolating polynomial).
static double cubic(double deg, double kPa, double rpm)
{
    double a = deg / 360, l = kPa / 100, s = rpm / 1000;
    return 300 + 40 * a - 60 * a * a + 30 * a * a * a + l * (50 + 20 * a) +
           l * l * (9 - 4 * a * a) + 2 * l * l * l + s * (7 + a * a * a) + 5 * s * s * l -
           0.8 * s * s * s * (1 + a);
}

static void write_cubic(void)
{
    static const double speed[] = {800, 1300, 2200, 3100, 3600};
    FILE *f = opened("fired.csv"), *s = opened("skipped.csv");
    fputs("angle_deg", f);
    for (int k = 0; k < 5; k++)
        for (int i = 0; i < 4; i++)
            fprintf(f, ",pressure_kpa:manifold_kpa=%.17g:rpm=%g", load[i], speed[k]);
    fputs("\n", f);
    fputs("angle_deg,pressure_kpa\n-360,80\n", s);
    for (int deg = -360; deg <= 360; deg += 5) {
        fprintf(f, "%d", deg);
        for (int k = 0; k < 5; k++)
            for (int i = 0; i < 4; i++)
                fprintf(f, ",%.17g", cubic(deg, load[i], speed[k]));
        fprintf(f, "\n");
        if (deg > -360) fprintf(s, "%d,80\n", deg);
    }
    assert_int_equal(fclose(f), 0);
    assert_int_equal(fclose(s), 0);
}

static void test_traces_cubic(void **state)
{
    (void)state;
    write_cubic();
    tacet_engine_def d = engine();
    bench b;
    make(&b, &d);
    for (double rpm = 905; rpm < 3000; rpm += 333)
        for (double kPa = 51; kPa < 250; kPa += 37) {
            ask(&b, "x.xx", rpm, 10); // slots 0, 2, 3 always fire, slot 1 never
            tacet_duty given = b.duty;
            given.charge_Pa = kPa * 1e3;
            assert_int_equal(tacet_engine_load(b.engine, b.roll, &given, rpm * RPM, b.work),
                             TACET_OK);
            for (unsigned slot = 0; slot < 4; slot++) {
                double top = 180.0 * slot, p;
                for (double deg = -359.7; deg < 360; deg += 41.3) {
                    double angle = (deg + top) * DEG;
                    tacet_engine_pressure(b.engine, b.work, slot, 1, &angle, &p);
                    double expected = slot == 1 ? 80 : cubic(deg, kPa, rpm);
                    assert_near(p, expected * 1e3, 0, 1e-10);
                }
            }
        }
    clear(&b);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_charge_closed_form),
        cmocka_unit_test(test_charge_factor_closed_form),
        cmocka_unit_test(test_fuel_against_all_fire),
        cmocka_unit_test(test_limits_closed_form),
        cmocka_unit_test(test_traces_cubic),
    };
    return cmocka_run_group_tests(tests, make_folder, remove_folder);
}
