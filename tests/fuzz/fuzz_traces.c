// Pressure traces: CSV files, and the cycle table that is read from them. The input is the file of
// fired cycles, then that of skipped ones after a line "----"; without one only the CSV is read.
#include "fuzz.h"
#include "tacet/engine.h"

#define RPM (2 * M_PI / 60)

static const char parting[] = "\n----\n";

// Written in quotes, so that blanks at the ends stay.
static void check_again(const tacet_csv *csv, tacet_arena *a)
{
    char *text = NULL;
    size_t bytes = 0;
    FILE *to = open_memstream(&text, &bytes);
    REQUIRE(to);
    for (size_t i = 0; i < csv->columns; i++)
        fprintf(to, "%s\"%s\"", i ? "," : "", csv->header[i]);
    for (size_t i = 0; i < csv->rows * csv->columns; i++)
        fprintf(to, "%s%.17g", i % csv->columns ? "," : "\n", csv->value[i]);
    fclose(to);
    fuzz_file f = fuzz_file_create(text, bytes);
    tacet_csv again = {0};
    tacet_error e = {.text = ""};
    REQUIRE(tacet_csv_read(f.path, a, &again, &e) == TACET_OK);
    REQUIRE(again.rows == csv->rows && again.columns == csv->columns);
    for (size_t i = 0; i < csv->columns; i++)
        REQUIRE(strcmp(csv->header[i], again.header[i]) == 0);
    REQUIRE(memcmp(csv->value, again.value, csv->rows * csv->columns * sizeof(double)) == 0);
    fuzz_file_remove(&f);
    free(text);
}

static bool check_csv(const char *path, const char *text, size_t bytes, tacet_arena *a)
{
    tacet_csv csv = {0};
    tacet_error e = {.text = ""};
    tacet_status status = tacet_csv_read(path, a, &csv, &e);
    if (status != TACET_OK) {
        fuzz_refusal_in(status, &e, text, bytes);
        return false;
    }
    REQUIRE(csv.rows >= 1 && csv.columns >= 1 && csv.columns <= 4096);
    for (size_t i = 0; i < csv.rows * csv.columns; i++)
        REQUIRE(isfinite(csv.value[i]));
    check_again(&csv, a);
    return true;
}

static tacet_engine_def engine_def(const char *fired, const char *skipped, bool by_fuel)
{
    static unsigned order[] = {1, 2};
    tacet_engine_def d = tacet_engine_default();
    d.bore_m = 0.1;
    d.stroke_m = 0.12;
    d.rod_length_m = 0.2;
    d.compression_ratio = 12;
    d.reciprocating_mass_kg = 2;
    d.firing_order = order;
    d.n_cylinders = 2;
    d.cycle.kind = TACET_CYCLE_TRACES;
    d.cycle.load_by = by_fuel ? TACET_LOAD_FUEL : TACET_LOAD_CHARGE;
    d.cycle.fired_trace = fired;
    d.cycle.skipped_trace = skipped;
    return d;
}

static void check_duty(const tacet_engine *en, const char *word, double rpm, double demand_Nm)
{
    tacet_engine_work *w = NULL;
    tacet_roll *r = NULL;
    tacet_pattern p;
    tacet_duty duty;
    double angle[] = {0, 0.3, 6.1, 12.5}, torque[4], pressure[4];
    REQUIRE(tacet_engine_work_create(en, &w) == TACET_OK);
    REQUIRE(tacet_pattern_parse(word, &p, NULL) == TACET_OK);
    REQUIRE(tacet_roll_create(&p, 2, 4, &r, NULL) == TACET_OK);
    REQUIRE(tacet_engine_duty(en, r, rpm * RPM, demand_Nm, w, &duty) == TACET_OK);
    if (duty.reachable) {
        REQUIRE(fabs(duty.brake_torque_Nm - demand_Nm) <= 1e-6 * (1 + fabs(demand_Nm)));
        REQUIRE(isfinite(duty.charge_Pa) && isfinite(duty.friction_Nm));
        REQUIRE(isfinite(duty.fuel_kg_per_s) && isfinite(duty.gross_W));
        REQUIRE(isfinite(duty.peak_pressure_Pa) && duty.peak_pressure_Pa > 0);
        REQUIRE(tacet_engine_load(en, r, &duty, rpm * RPM, w) == TACET_OK);
        tacet_engine_gas_torque(en, w, 1, 4, angle, torque);
        tacet_engine_pressure(en, w, 1, 4, angle, pressure);
        for (int i = 0; i < 4; i++)
            REQUIRE(isfinite(torque[i]) && isfinite(pressure[i]));
    }
    tacet_roll_destroy(r);
    tacet_engine_work_destroy(w);
}

static void check_engine(const char *fired, const char *skipped, bool by_fuel)
{
    tacet_engine *en = NULL;
    tacet_error e = {.text = ""};
    tacet_engine_def d = engine_def(fired, skipped, by_fuel);
    REQUIRE(tacet_engine_create(&d, &en, &e) == TACET_OK);
    tacet_status status = tacet_engine_prepare(en, 700 * RPM, 2100 * RPM, 1, &e);
    if (status == TACET_OK) {
        check_duty(en, "x", 1400, 50);
        check_duty(en, "x.x", 1000, 20);
    } else {
        fuzz_refusal(status, &e);
    }
    tacet_engine_destroy(en);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    tacet_arena *a = tacet_arena_create();
    REQUIRE(a);
    const char *text = (const char *)data;
    const char *cut = size ? memmem(text, size, parting, sizeof parting - 1) : NULL;
    size_t first = cut ? (size_t)(cut - text) : size;
    fuzz_file fired = fuzz_file_create(text, first);
    bool good = check_csv(fired.path, text, first, a);
    if (cut) {
        const char *second = cut + sizeof parting - 1;
        size_t rest = size - (size_t)(second - text);
        fuzz_file skipped = fuzz_file_create(second, rest);
        if (check_csv(skipped.path, second, rest, a) && good)
            check_engine(fired.path, skipped.path, memmem(text, first, ":fuel=", 6) != NULL);
        fuzz_file_remove(&skipped);
    }
    fuzz_file_remove(&fired);
    tacet_arena_destroy(a);
    return 0;
}
