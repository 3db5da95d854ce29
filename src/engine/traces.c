// Measured pressure traces in place of computed cycles.
//
// A file holds whole cycles, from gas-exchange top over firing top to gas-exchange top (4-stroke
// -360 to 360 degrees; 2-stroke -180 to 180), one a column. Its header says what each one is:
//   angle_deg, pressure_kpa:manifold_kpa=60:rpm=1400:after=1:next=skip:fuel_mg=32.5, ..
#include "traces.h"
#include "internal.h"
#include <stdlib.h>
#include <string.h>

#define WIDEST_DEG  5.0  // between rows
#define ANGLE_SLACK 1e-6 // deg
#define FOREVER     1000 // run of a cylinder that never fires
#define ANY_NEXT    2
#define LEAST_KPA   0.1
#define MOST_KPA    100000.0
#define LEAST_RPM   1.0
#define MOST_RPM    100000.0
#define MOST_FUEL   10.0 // share of the most fuel
#define MOST_MG     1e9  // of fuel in a cycle
#define MOST_PLACES 4096 // loads times speeds; one column for each is the widest file

typedef struct {
    bool fired;
    double load, rpm; // NAN: any
    unsigned run;     // cycles skipped before a fire, place of a skip in its run, or FOREVER
    int next;         // 1 fires, 0 skips, -1 any
    double fuel_mg;   // NAN: not given
    double pressure_Pa[2 * CYLINDER_SAMPLES - 1]; // every degree
} trace;

typedef struct {
    const tacet_engine *en;
    tacet_arena *arena;
    const char *path; // of the file being read, as in the study
    trace *trace;
    size_t n;
    const double *rpm; // of the speed nodes
    bool any_speed;    // no trace states its speed
    tacet_error *e;
} reader;

static const char load_by_charge[] = "manifold_kpa", load_by_fuel[] = "fuel";

static const char *load_key(const reader *r)
{
    return r->en->def.cycle.load_by == TACET_LOAD_FUEL ? load_by_fuel : load_by_charge;
}

static tacet_status refuse(const reader *r, const char *header, const char *what)
{
    return tacet_fail(r->e, TACET_BAD_INPUT, "%s: column '%.80s': %s", r->path, header, what);
}

// value of "key=value" or NULL.
static const char *after_key(const char *text, const char *key)
{
    size_t n = strlen(key);
    return strncmp(text, key, n) == 0 && text[n] == '=' ? text + n + 1 : NULL;
}

static bool whole(const char *text, unsigned least, unsigned *out)
{
    double x;
    if (!tacet_number_parse(text, &x) || x != floor(x) || x < least || x > TACET_ENGINE_RUN_MOST)
        return false;
    *out = (unsigned)x;
    return true;
}

static bool between(const char *text, double low, double high, double *out)
{
    return tacet_number_parse(text, out) && *out >= low && *out <= high;
}

// One ":key=value" of a header.
static const char *read_part(const reader *r, const char *part, trace *t)
{
    const char *value;
    if ((value = after_key(part, load_key(r)))) {
        bool fuel = r->en->def.cycle.load_by == TACET_LOAD_FUEL;
        if (!between(value, 0, fuel ? MOST_FUEL : MOST_KPA, &t->load))
            return fuel ? "the load is a number from 0 to 10"
                        : "the load is a number from 0 to 100000 kPa";
        if (!fuel) t->load *= 1e3;
        return NULL;
    }
    if ((value = after_key(part, "rpm")))
        return between(value, LEAST_RPM, MOST_RPM, &t->rpm) ? NULL
                                                            : "rpm is a number from 1 to 100000";
    if ((value = after_key(part, "next"))) {
        t->next = strcmp(value, "fire") == 0 ? 1 : strcmp(value, "skip") == 0 ? 0 : -1;
        return t->next >= 0 ? NULL : "next is fire or skip";
    }
    if (t->fired && (value = after_key(part, "after")))
        return whole(value, 0, &t->run) ? NULL : "after is a whole number from 0";
    if (t->fired && (value = after_key(part, "fuel_mg")))
        return between(value, 0, MOST_MG, &t->fuel_mg) ? NULL : "fuel_mg is a number from 0 to 1e9";
    if (!t->fired && (value = after_key(part, "run"))) {
        if (strcmp(value, "forever") == 0) {
            t->run = FOREVER;
            return NULL;
        }
        return whole(value, 1, &t->run) ? NULL : "run is a whole number from 1, or forever";
    }
    if (t->fired)
        return r->en->def.cycle.load_by == TACET_LOAD_FUEL
                   ? "allowed are fuel, rpm, after, next, fuel_mg"
                   : "allowed are manifold_kpa, rpm, after, next, fuel_mg";
    return r->en->def.cycle.load_by == TACET_LOAD_FUEL ? "allowed are fuel, rpm, run, next"
                                                       : "allowed are manifold_kpa, rpm, run, next";
}

static tacet_status read_header(const reader *r, const char *header, trace *t)
{
    char *text = tacet_arena_text(r->arena, header), *rest = NULL;
    if (!text) return tacet_fail(r->e, TACET_NO_MEMORY, "no memory for traces");
    char *part = strtok_r(text, ":", &rest);
    if (!part || strcmp(part, "pressure_kpa") != 0)
        return refuse(r, header, "every column after the first is pressure_kpa");
    while ((part = strtok_r(NULL, ":", &rest))) {
        const char *wrong = read_part(r, part, t);
        if (wrong) return refuse(r, header, wrong);
    }
    if (t->fired && isnan(t->load)) return refuse(r, header, "a fired cycle needs its load");
    return TACET_OK;
}

static tacet_status check_angles(const reader *r, const tacet_csv *csv, double *angle)
{
    if (strcmp(csv->header[0], "angle_deg") != 0)
        return refuse(r, csv->header[0], "the first column is angle_deg");
    double half = r->en->half_degrees, last = csv->value[(csv->rows - 1) * csv->columns];
    if (fabs(csv->value[0] + half) > ANGLE_SLACK || fabs(last - half) > ANGLE_SLACK)
        return tacet_fail(r->e, TACET_BAD_INPUT,
                          "%s: angles from %.6g to %.6g; a cycle from %g to %g is needed", r->path,
                          csv->value[0], last, -half, half);
    for (size_t i = 0; i < csv->rows; i++) {
        angle[i] = csv->value[i * csv->columns];
        double step = i ? angle[i] - angle[i - 1] : 1;
        if (!(step > 0 && step <= WIDEST_DEG))
            return tacet_fail(r->e, TACET_BAD_INPUT,
                              "%s: from %.6g to %.6g degrees; steps above 0 up to %g are allowed",
                              r->path, angle[i ? i - 1 : 0], angle[i], WIDEST_DEG);
    }
    return TACET_OK;
}

// Pressure at every degree, by the cubic through the four nearest rows.
static tacet_status resample(const reader *r, const tacet_csv *csv, const double *angle,
                             size_t column, trace *t)
{
    unsigned half = r->en->half_degrees;
    for (unsigned i = 0; i <= 2 * half; i++) {
        table_place at = table_at(angle, csv->rows, (double)i - half);
        double p = 0;
        for (size_t k = 0; k < at.n; k++)
            p += at.weight[k] * csv->value[(at.first + k) * csv->columns + column];
        if (!(p >= LEAST_KPA && p <= MOST_KPA))
            return tacet_fail(r->e, TACET_BAD_INPUT,
                              "%s: column '%.80s': %.6g kPa at %d degrees; absolute pressure from "
                              "%g to %g kPa is allowed",
                              r->path, csv->header[column], p, (int)i - (int)half, LEAST_KPA,
                              MOST_KPA);
        t->pressure_Pa[i] = p * 1e3;
    }
    return TACET_OK;
}

static tacet_status make_room(reader *r, size_t more)
{
    trace *all = tacet_arena_alloc(r->arena, (r->n + more) * sizeof *all);
    if (!all) return tacet_fail(r->e, TACET_NO_MEMORY, "no memory for traces");
    if (r->n) memcpy(all, r->trace, r->n * sizeof *all);
    r->trace = all;
    return TACET_OK;
}

static tacet_status read_file(reader *r, const char *path, bool fired)
{
    const char *folder = r->en->def.folder;
    char full[4096];
    bool absolute = path[0] == '/' || !folder || !*folder;
    tacet_text(full, sizeof full, "%s%s%s", absolute ? "" : folder, absolute ? "" : "/", path);
    r->path = path;
    tacet_csv csv;
    tacet_error own = {0};
    tacet_status status = tacet_csv_read(full, r->arena, &csv, &own);
    if (status != TACET_OK) {
        if (own.line)
            return tacet_fail(r->e, status, "%s:%d:%d: %s", path, own.line, own.column, own.text);
        return tacet_fail(r->e, status, "%s", own.text);
    }
    double *angle = tacet_arena_alloc(r->arena, csv.rows * sizeof *angle);
    if (!angle) return tacet_fail(r->e, TACET_NO_MEMORY, "no memory for traces");
    status = check_angles(r, &csv, angle);
    if (status == TACET_OK) status = make_room(r, csv.columns);
    if (!r->trace) return status;
    for (size_t i = 1; i < csv.columns && status == TACET_OK; i++) {
        trace *t = &r->trace[r->n++];
        *t = (trace){
            .fired = fired, .load = NAN, .rpm = NAN, .run = !fired, .next = -1, .fuel_mg = NAN};
        status = read_header(r, csv.header[i], t);
        if (status == TACET_OK) status = resample(r, &csv, angle, i, t);
    }
    return status;
}

static int rising(const void *a, const void *b)
{
    double x = *(const double *)a, y = *(const double *)b;
    return (x > y) - (x < y);
}

// The different values of a member over the fired traces, rising; NAN left out.
static size_t different(const reader *r, size_t offset, double *out)
{
    size_t n = 0;
    for (size_t i = 0; i < r->n; i++) {
        double x = *(const double *)(const void *)((const char *)&r->trace[i] + offset);
        bool seen = isnan(x) || !r->trace[i].fired;
        for (size_t j = 0; j < n; j++)
            seen = seen || out[j] == x;
        if (!seen) out[n++] = x;
    }
    qsort(out, n, sizeof *out, rising);
    return n;
}

// The trace that stands for a cycle: of the given load and speed, the longest run not above the
// one asked, and of those the one that says what comes next before one that does not. ANY_NEXT:
// whatever comes next, which the half up does not know yet.
static const trace *find(const reader *r, bool fired, double load, double rpm, unsigned run,
                         int next)
{
    const trace *best = NULL;
    for (size_t i = 0; i < r->n; i++) {
        const trace *t = &r->trace[i];
        if (t->fired != fired || t->run > run) continue;
        if (!isnan(t->load) && t->load != load) continue;
        if (!isnan(t->rpm) && t->rpm != rpm) continue;
        if (t->next >= 0 && t->next != next && next != ANY_NEXT) continue;
        if (!best || t->run > best->run || (t->run == best->run && t->next > best->next)) best = t;
    }
    return best;
}

// Simpson's rule of p dV over whole degrees from..to (an even number) of a trace.
static double work(const tacet_engine *en, const double *p, int from, int to)
{
    double sum = 0;
    for (int i = from; i <= to; i++) {
        int degree = (i + 360) % 360;
        double f = p[i + (int)en->half_degrees] * en->lever_m[degree] * en->cyl.piston_m2;
        sum += f * (i == from || i == to ? 1 : (i - from) % 2 ? 4 : 2);
    }
    return sum * (M_PI / 180) / 3;
}

// Heat of the fuel of a fired trace: as stated, or of a cylinder full of gas from the manifold.
static double heat_of(const tacet_engine *en, const trace *t, double load, double speed)
{
    const tacet_cycle_def *c = &en->def.cycle;
    if (!t->fired) return 0;
    if (!isnan(t->fuel_mg)) return t->fuel_mg * 1e-6 * c->lower_heating_value_J_per_kg;
    cylinder_run run = table_run(&en->def, speed, load);
    return run.heat_J_per_kg * run.manifold_Pa * en->cyl.swept_m3 /
           (en->cyl.gas.R_J_per_kgK * c->intake_temperature_K);
}

// before: the trace of the cycle before, whose last stroke may hold the peak that this one opens
// with.
static void put(tacet_engine *en, const trace *t, const trace *before, unsigned kind, size_t speed,
                size_t charge)
{
    table *to = &en->table;
    int half = (int)en->half_degrees;
    bool up = halves_is_up(&to->halves, kind);
    double *x = table_number(to, kind, speed, charge);
    memcpy(table_pressure(to, kind, speed, charge), t->pressure_Pa + (up ? 0 : half),
           to->samples * sizeof(double));
    x[HALF_WORK] = up ? work(en, t->pressure_Pa, -half, 0) : work(en, t->pressure_Pa, 0, half);
    x[HALF_PUMPING] = 0;
    if (half == 360)
        x[HALF_PUMPING] =
            up ? -work(en, t->pressure_Pa, -360, -180) : -work(en, t->pressure_Pa, 180, 360);
    x[HALF_WALL] = x[HALF_VALVE] = x[HALF_RING] = x[HALF_STORED] = NAN;
    x[HALF_FUEL] = up ? heat_of(en, t, to->charge[charge], to->speed_rad_per_s[speed]) : 0;
    double late = cylinder_peak(before->pressure_Pa + half + 180, (size_t)half - 180 + 1);
    x[HALF_PEAK] = fmax(late, cylinder_peak(t->pressure_Pa, (size_t)(up ? half : half + 180) + 1));
}

static tacet_status missing(const reader *r, bool of_fire, double load, double rpm, unsigned run,
                            int next)
{
    bool fuel = r->en->def.cycle.load_by == TACET_LOAD_FUEL;
    char at[64] = "";
    if (isfinite(rpm)) tacet_text(at, sizeof at, ":rpm=%.6g", rpm);
    // with after=0 and a skip next it may be wanted as what goes before that skip
    return tacet_fail(
        r->e, TACET_BAD_INPUT, "%s: no column for pressure_kpa:%s=%.6g%s:%s=%u:next=%s%s",
        of_fire ? r->en->def.cycle.fired_trace : r->en->def.cycle.skipped_trace, load_key(r),
        fuel ? load : load / 1e3, at, of_fire ? "after" : "run", run, next ? "fire" : "skip",
        run == 0 && !next ? ", which also stands before every run of skips, whatever "
                            "that fire came after"
                          : " or a shorter run");
}

// A cycle that fires or skips as the `run`-th, with the cycle before it: the table's chain.
static tacet_status put_cycle(reader *r, tacet_engine *en, bool fires, unsigned run, size_t s,
                              size_t c)
{
    const halves *h = &en->table.halves;
    double load = en->table.charge[c], rpm = r->any_speed ? NAN : r->rpm[s];
    bool forever = run > h->longest;
    unsigned asked = forever ? FOREVER : run, previous = forever || fires ? asked : run - 1;
    bool after_fire = fires ? run == 0 : run == 1 && !forever;
    const trace *before = after_fire ? find(r, true, load, rpm, 0, fires)
                                     : find(r, false, load, rpm, previous, fires);
    const trace *first = find(r, fires, load, rpm, asked, ANY_NEXT);
    if (first && before)
        put(en, first, before, fires ? halves_up_fire(h, run) : halves_up_skip(h, run), s, c);
    for (int next = 0; next < 2; next++) {
        const trace *t = find(r, fires, load, rpm, asked, next);
        if (!t) return missing(r, fires, load, rpm, run, next);
        if (!before) return missing(r, after_fire, load, rpm, after_fire ? 0 : previous, fires);
        put(en, t, before, fires ? halves_down_fire(h, run, next) : halves_down_skip(h, run, next),
            s, c);
    }
    return TACET_OK;
}

static tacet_status put_all(reader *r, tacet_engine *en, size_t s, size_t c)
{
    unsigned longest = en->table.halves.longest;
    tacet_status status = TACET_OK;
    for (unsigned run = 0; run <= longest && status == TACET_OK; run++)
        status = put_cycle(r, en, true, run, s, c);
    for (unsigned run = 1; run <= longest + 1 && status == TACET_OK; run++)
        status = put_cycle(r, en, false, run, s, c);
    return status;
}

static tacet_status fill(reader *r, tacet_engine *en, unsigned longest)
{
    double *load = tacet_arena_alloc(r->arena, r->n * sizeof *load);
    double *rpm = tacet_arena_alloc(r->arena, r->n * sizeof *rpm);
    if (!load || !rpm) return tacet_fail(r->e, TACET_NO_MEMORY, "no memory for traces");
    size_t loads = different(r, offsetof(trace, load), load);
    size_t speeds = different(r, offsetof(trace, rpm), rpm);
    if (loads < 2)
        return tacet_fail(r->e, TACET_BAD_INPUT, "%s: fired cycles at %zu load; two are needed",
                          en->def.cycle.fired_trace, loads);
    if (loads * (speeds ? speeds : 1) > MOST_PLACES)
        return tacet_fail(r->e, TACET_BAD_INPUT,
                          "%s: %zu loads at %zu speeds; at most %d of both together, loads times "
                          "speeds, are allowed",
                          en->def.cycle.fired_trace, loads, speeds, MOST_PLACES);
    halves h = halves_of(en->def.skip.trapped, longest, false);
    h.fire_next = h.skip_next = true;
    h.again = false;
    tacet_status status =
        table_create(&en->table, &h, en->half_degrees + 1, speeds ? speeds : 1, loads);
    if (status != TACET_OK) return tacet_fail(r->e, status, "no memory for the cycle table");
    r->rpm = rpm;
    r->any_speed = speeds == 0;
    memcpy(en->table.charge, load, loads * sizeof *load);
    for (size_t s = 0; s < speeds; s++)
        en->table.speed_rad_per_s[s] = rpm[s] * 2 * M_PI / 60;
    for (size_t s = 0; s < en->table.n_speeds; s++)
        for (size_t c = 0; c < loads; c++) {
            status = put_all(r, en, s, c);
            if (status != TACET_OK) return status;
        }
    return TACET_OK;
}

tacet_status traces_table(tacet_engine *en, unsigned longest_run, tacet_error *e)
{
    reader r = {.en = en, .arena = tacet_arena_create(), .e = e};
    if (!r.arena) return tacet_fail(e, TACET_NO_MEMORY, "no memory for traces");
    tacet_status status = read_file(&r, en->def.cycle.fired_trace, true);
    if (status == TACET_OK) status = read_file(&r, en->def.cycle.skipped_trace, false);
    if (status == TACET_OK) status = fill(&r, en, longest_run);
    tacet_arena_destroy(r.arena);
    return status;
}
