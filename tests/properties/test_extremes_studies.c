// Studies at the edges of what the keys allow: right against a closed form, or refused with a
// reason.
#include "chance.h"
#include "demo.h"
#include "near.h"
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

// ---- studies ------------------------------------------------------------------------------------

typedef struct {
    unsigned cylinders, strokes;
    double bore_mm, stroke_mm, rod_mm, mass_kg, inertia_kgm2, rpm, demand_Nm;
    enum { ONE_NODE, INLINE, VEE, FLAT } build;
    double stiffness;    // between nodes
    const char *cycle;   // section cycle
    const char *trapped; // and what follows it
} plant;

static const plant usual = {.cylinders = 4,
                            .strokes = 4,
                            .bore_mm = 100,
                            .stroke_mm = 110,
                            .rod_mm = 180,
                            .mass_kg = 1.1,
                            .inertia_kgm2 = 2,
                            .rpm = 1500,
                            .demand_Nm = 60,
                            .build = ONE_NODE,
                            .stiffness = 1e6,
                            .cycle = "{manifold_kpa: {lowest: 20, highest: 200}}",
                            .trapped = "residual, longest_run: 2"};

static unsigned nodes_of(const plant *p)
{
    if (p->build == ONE_NODE) return 1;
    return p->build == VEE ? (p->cylinders + 1) / 2 : p->cylinders;
}

// Bank that puts the pin of the cylinder firing in slot i where its throw wants it: one pin for
// all, for pairs in firing sequence, or one each; a flat engine's stand at 90 degrees to either
// side.
static double bank_of(const plant *p, unsigned i)
{
    double cycle = p->strokes * 180, angle = cycle * i / p->cylinders;
    double first = p->build == ONE_NODE ? 0 : cycle * (i - i % 2) / p->cylinders;
    if (p->build == INLINE) return 0;
    if (p->build == FLAT) return i % 2 ? 90 : -90;
    return remainder(first - angle, 360); // clockwise: -bank - angle is the same for all on it
}

static char *text_of(const plant *p)
{
    char *text = calloc(1, 32768), *at = text;
    unsigned n = p->cylinders, nodes = nodes_of(p);
    assert_non_null(text);
    at +=
        sprintf(at,
                "title: edge\nengine:\n  strokes: %u\n  bore_mm: %.15g\n  stroke_mm: %.15g\n"
                "  rod_length_mm: %.15g\n  compression_ratio: 11\n  reciprocating_mass_kg: %.15g\n"
                "  firing_order: [",
                p->strokes, p->bore_mm, p->stroke_mm, p->rod_mm, p->mass_kg);
    for (unsigned i = 1; i <= n; i++)
        at += sprintf(at, "%u%s", i, i < n ? ", " : "]\n  cylinders:\n");
    for (unsigned i = 0; i < n; i++)
        at += sprintf(at, "    - {number: %u, node: n%u, bank_deg: %.15g}\n", i + 1,
                      p->build == ONE_NODE ? 0
                      : p->build == VEE    ? i / 2
                                           : i,
                      bank_of(p, i));
    at += sprintf(at, "cycle: %s\nskip: {trapped: %s}\ntrain:\n  nodes:\n", p->cycle, p->trapped);
    for (unsigned i = 0; i < nodes; i++)
        at += sprintf(at, "    - {name: n%u, inertia_kgm2: %.15g}\n", i, p->inertia_kgm2 / nodes);
    if (nodes > 1) at += sprintf(at, "  links:\n");
    for (unsigned i = 1; i < nodes; i++)
        at += sprintf(at,
                      "    - {name: l%u, from: n%u, to: n%u, stiffness_nm_per_rad: %.15g, "
                      "loss_factor: 0.02}\n",
                      i, i - 1, i, p->stiffness);
    sprintf(at,
            "  flywheel: n%u\nbands: [{name: roll, kind: mount, low_hz: %.15g, high_hz: %.15g, "
            "quantity: roll-torque, limit_rms: 300}]\n"
            "screen: {speeds_rpm: [%.15g], brake_torque_nm: %.15g, densities: [1]}\n",
            nodes - 1, p->rpm / 120, p->rpm / 20, p->rpm, p->demand_Nm);
    return text;
}

static void open_plant(demo *d, const plant *p)
{
    char *text = text_of(p);
    demo_open_text(d, text);
    free(text);
}

static tacet_row solve(demo *d, const char *word, double rpm, double demand, tacet_level level)
{
    tacet_roll *roll = demo_roll(d, word);
    tacet_condition c = demo_condition(d, roll, rpm);
    tacet_row row;
    c.demand_Nm = demand;
    assert_int_equal(tacet_solve(d->model, &c, level, d->work, &row), TACET_OK);
    tacet_roll_destroy(roll);
    return row;
}

// What the reader, or else the model, says against a study; NULL: nothing.
static char *complaint(const char *study)
{
    tacet_problems *problems = tacet_problems_create();
    tacet_study *s = NULL;
    tacet_model *m = NULL;
    tacet_error e = {.text = ""};
    char *said = NULL;
    tacet_status status = tacet_study_read_text(study, strlen(study), "edge.yaml", problems, &s);
    for (size_t i = 0; !said && i < tacet_problems_kept(problems); i++)
        if (!tacet_problems_at(problems, i)->warning)
            said = strdup(tacet_problems_at(problems, i)->text);
    assert_true((status == TACET_OK) == (said == NULL));
    if (s && !said && tacet_model_create(s, &m, &e) != TACET_OK) said = strdup(e.text);
    if (m && !said && tacet_model_prepare(m, &e) != TACET_OK) said = strdup(e.text);
    tacet_model_destroy(m);
    tacet_study_destroy(s);
    tacet_problems_destroy(problems);
    return said;
}

static void refused(char *study, const char *why)
{
    char *said = complaint(study);
    if (!said || !strstr(said, why)) assert_string_equal(said ? said : "(accepted)", why);
    free(said);
    free(study);
}

static void refused_with(const char *what, const char *with, const char *why)
{
    plant single = usual;
    single.cylinders = 1;
    char *text = text_of(&single);
    demo_replace(text, what, with);
    refused(text, why);
}

// ---- numbers of cylinders -----------------------------------------------------------------------

static double largest_line(const tacet_spectrum *s)
{
    double largest = 0;
    for (size_t h = 1; h <= s->n_lines; h++)
        largest = fmax(largest, cabs(s->line[h]));
    return largest;
}

// Equal cylinders that fire evenly on one body cancel all but multiples of their firing frequency,
// n / 2 per revolution, and J x = -F / w^2. One word over n cylinders in which every other one
// fires has half that frequency.
static void check_on_one_node(unsigned n)
{
    demo d;
    plant p = usual;
    p.cylinders = n;
    p.inertia_kgm2 = n < 3 ? 8 : 2;
    p.demand_Nm = 15 * n;
    open_plant(&d, &p);
    for (int half = 0; half < 2; half++) {
        unsigned firings = half ? n / 2 : n; // per cycle of two revolutions
        if (half && n % 2) break;
        tacet_row row = solve(&d, half ? "x." : "x", p.rpm, p.demand_Nm, TACET_LEVEL_CONSTANT);
        assert_int_equal(row.outcome, TACET_SOLVED);
        const tacet_response *r = tacet_workspace_response(d.work);
        assert_int_equal(r->revolutions, 2);
        const tacet_spectrum *t = &r->piston_torque_Nm[0], *x = &r->motion->angle_rad[0];
        double largest = largest_line(t), turn = largest_line(x);
        for (size_t h = 1; h <= t->n_lines; h++) {
            double w = r->speed_rad_per_s / 2 * (double)h;
            if (h % firings == 0) {
                assert_near(cabs(p.inertia_kgm2 * w * w * x->line[h] + t->line[h]), 0,
                            1e-12 * largest, 0);
                continue;
            }
            assert_near(cabs(x->line[h]), 0, 1e-12 * turn, 0);
            assert_near(cabs(t->line[h]), 0, 1e-12 * largest, 0);
        }
        assert_near(t->mean, p.demand_Nm + row.duty.friction_Nm, 0, 1e-4);
    }
    demo_close(&d);
}

static void test_one_to_sixteen_cylinders_on_one_node(void **state)
{
    (void)state;
    const unsigned n[] = {1, 2, 3, 4, 5, 6, 8, 11, 12, 16};
    for (int i = 0; i < 10; i++)
        check_on_one_node(n[i]);
}

// A crank so stiff that it is one body gives the one body's lines, however the cylinders stand;
// some 200 N m twist it by 2e-9 rad, 1e-5 of the largest line.
static void test_inline_vee_and_flat(void **state)
{
    (void)state;
    const unsigned n[] = {2, 6, 16};
    for (int i = 0; i < 3; i++) {
        demo one;
        plant p = usual;
        p.cylinders = n[i];
        p.demand_Nm = 15 * n[i];
        open_plant(&one, &p);
        tacet_row row = solve(&one, "x", p.rpm, p.demand_Nm, TACET_LEVEL_RIPPLE);
        assert_int_equal(row.outcome, TACET_SOLVED);
        const tacet_spectrum *x = &tacet_workspace_response(one.work)->motion->angle_rad[0];
        for (int build = INLINE; build <= FLAT; build++) {
            demo d;
            p.build = build;
            p.stiffness = 1e12;
            open_plant(&d, &p);
            row = solve(&d, "x", p.rpm, p.demand_Nm, TACET_LEVEL_RIPPLE);
            assert_int_equal(row.outcome, TACET_SOLVED);
            const tacet_response *r = tacet_workspace_response(d.work);
            assert_int_equal(r->n_throws, build == VEE ? (n[i] + 1) / 2 : n[i]);
            const tacet_spectrum *y = &r->motion->angle_rad[r->motion->n_nodes - 1];
            for (size_t h = 1; h <= x->n_lines; h++)
                assert_near(cabs(y->line[h] - x->line[h]), 0, 1e-4 * largest_line(x) + 1e-8, 0);
            demo_close(&d);
        }
        demo_close(&one);
    }
}

// ---- density 0 and 1 ----------------------------------------------------------------------------

// Nothing fires: any demand that needs fire is out of reach, 0 too; what drags it is reached, and
// needs no fuel. Everything fires, said at length, is everything fires.
static void test_density_zero_and_one(void **state)
{
    (void)state;
    demo d;
    open_plant(&d, &usual);
    for (double demand = 0; demand <= 60; demand += 60) {
        tacet_row row = solve(&d, "..", usual.rpm, demand, TACET_LEVEL_RIPPLE);
        assert_int_equal(row.outcome, TACET_UNREACHABLE);
        assert_int_equal(row.duty.reach, TACET_REACH_TOO_HIGH);
        double drag = row.duty.brake_torque_Nm;
        assert_true(drag < 0);
        row = solve(&d, "..", usual.rpm, drag, TACET_LEVEL_RIPPLE);
        assert_int_equal(row.outcome, TACET_SOLVED);
        assert_near(row.duty.fuel_kg_per_s, 0, 0, 0);
        assert_near(row.duty.brake_W, drag * usual.rpm * M_PI / 30, 0, 1e-12);
    }
    tacet_row one = solve(&d, "x", usual.rpm, 60, TACET_LEVEL_RIPPLE);
    char word[TACET_PATTERN_LONGEST + 1];
    memset(word, 'x', TACET_PATTERN_LONGEST);
    word[TACET_PATTERN_LONGEST] = '\0';
    tacet_row all = solve(&d, word, usual.rpm, 60, TACET_LEVEL_RIPPLE);
    assert_int_equal(one.outcome, TACET_SOLVED);
    assert_memory_equal(&one.bands[0].level, &all.bands[0].level, sizeof one.bands[0].level);
    refused_with("densities: [1]", "densities: [0/3]", "never fires; a density lies above 0");
    demo_close(&d);
}

// ---- long words ---------------------------------------------------------------------------------

// 61 and 64 letters on four cylinders: repeats of 122 and 32 revolutions, thousands of lines.
static void test_word_length_64(void **state)
{
    (void)state;
    const unsigned length[] = {61, 63, 64};
    demo d;
    plant p = usual;
    p.inertia_kgm2 = 12;
    p.trapped = "residual, longest_run: 12";
    open_plant(&d, &p);
    chance c = {.state = 7};
    for (int i = 0; i < 3; i++) {
        char word[TACET_PATTERN_LONGEST + 1] = "";
        for (unsigned k = 0; k < length[i]; k++)
            word[k] = chance_of(&c, 0.7) ? 'x' : '.';
        tacet_row row = solve(&d, word, p.rpm, p.demand_Nm, TACET_LEVEL_CONSTANT);
        assert_int_equal(row.outcome, TACET_SOLVED);
        const tacet_response *r = tacet_workspace_response(d.work);
        assert_int_equal(r->revolutions, length[i] == 64 ? 32 : 2 * length[i]);
        for (size_t h = 1; h <= r->n_lines; h++) { // one body: J x = -F / w^2 to the lowest line
            double w = r->speed_rad_per_s / r->revolutions * (double)h;
            double complex x = r->motion->angle_rad[0].line[h], t = r->piston_torque_Nm[0].line[h];
            assert_near(cabs(p.inertia_kgm2 * w * w * x + t), 0,
                        1e-9 * largest_line(&r->piston_torque_Nm[0]), 0);
        }
        tacet_row ripple = solve(&d, word, p.rpm, p.demand_Nm, TACET_LEVEL_RIPPLE);
        assert_int_equal(ripple.outcome, TACET_SOLVED);
    }
    demo_close(&d);
}

// ---- geometry -----------------------------------------------------------------------------------

// A rod much longer than the throw makes the piston's motion a sine: x' = r sin a, and the inertia
// torque -m x' x'' W^2 = -(1/2) m r^2 W^2 sin 2a, its other lines r/l times smaller. Read from the
// slopes that the drive gives.
static void test_long_rod(void **state)
{
    (void)state;
    demo d;
    plant p = usual;
    p.stroke_mm = 40;
    p.bore_mm = 50;
    p.rod_mm = 6000;
    p.mass_kg = 0.2;
    p.demand_Nm = 4;
    open_plant(&d, &p);
    assert_int_equal(solve(&d, "x", p.rpm, 4, TACET_LEVEL_RIPPLE).outcome, TACET_SOLVED);
    const tacet_engine *en = tacet_model_engine(d.model);
    double r = 0.02, worst = 0;
    for (int k = 0; k < 360; k++) {
        double a = k * M_PI / 180, J, slope;
        tacet_engine_inertia(en, 0, 1, &a, &J, &slope);
        worst = fmax(worst, fabs(J - p.mass_kg * r * r * sin(a) * sin(a)));
        worst = fmax(worst, fabs(slope - p.mass_kg * r * r * sin(2 * a)));
    }
    assert_true(worst < 3 * (0.02 / 6) * p.mass_kg * r * r && worst > 0);
    demo_close(&d);
}

// A rod a hair longer than the throw: the piston all but stops short of the bottom and then rushes.
// x'^2 is finite everywhere, so is all that follows; a rod no longer than the throw is refused.
static void test_rod_near_the_throw(void **state)
{
    (void)state;
    demo d;
    plant p = usual;
    p.rod_mm = p.stroke_mm / 2 * 1.02;
    p.inertia_kgm2 = 20;
    open_plant(&d, &p);
    for (tacet_level level = TACET_LEVEL_CONSTANT; level <= TACET_LEVEL_RIPPLE; level++) {
        tacet_row row = solve(&d, "x.", p.rpm, p.demand_Nm, level);
        if (row.outcome == TACET_FAILED) assert_int_equal(row.why, TACET_NOT_CONVERGED);
        if (row.outcome != TACET_SOLVED) continue;
        assert_true(isfinite(row.bands[0].level.dispersed));
        assert_true(demo_roll_mismatch(&d) < 1e-9);
    }
    demo_close(&d);
    p.rod_mm = p.stroke_mm / 2;
    refused(text_of(&p), "a rod of 55 mm; longer than the crank radius");
    p.rod_mm = 50;
    refused(text_of(&p), "a rod of 50 mm; longer than the crank radius");
}

// What cannot be reached names the nearest torque that can.
static void check_edge(demo *d, const plant *p, bool reached)
{
    for (int i = 0; i < 2; i++) {
        const char *word = i ? "xx." : "x";
        tacet_row row = solve(d, word, p->rpm, p->demand_Nm, TACET_LEVEL_RIPPLE);
        print_message("  %s, reach %d, %s\n", tacet_outcome_text(row.outcome), row.duty.reach,
                      row.solver.method ? row.solver.method : "-");
        if (row.outcome == TACET_SOLVED) assert_true(isfinite(row.bands[0].level.dispersed));
        if (row.outcome == TACET_FAILED) assert_int_equal(row.why, TACET_NOT_CONVERGED);
        if (reached) assert_int_equal(row.outcome, TACET_SOLVED);
        if (row.outcome != TACET_UNREACHABLE) continue;
        double nearest = row.duty.brake_torque_Nm;
        row = solve(d, word, p->rpm, nearest - 1e-9 * fabs(nearest), TACET_LEVEL_CONSTANT);
        assert_int_equal(row.outcome, TACET_SOLVED);
    }
}

// The smallest and the largest cylinders, from 10 to 20000 rpm, as the keys allow.
static void test_sizes_and_speeds(void **state)
{
    (void)state;
    const plant edge[] = {
        {.bore_mm = 20,
         .stroke_mm = 20,
         .rod_mm = 40,
         .mass_kg = 0.01,
         .inertia_kgm2 = 2e-3,
         .rpm = 20000,
         .demand_Nm = 0.3},
        {.bore_mm = 20,
         .stroke_mm = 20,
         .rod_mm = 40,
         .mass_kg = 0.01,
         .inertia_kgm2 = 2,
         .rpm = 300,
         .demand_Nm = 0.2},
        {.bore_mm = 1000,
         .stroke_mm = 4000,
         .rod_mm = 6000,
         .mass_kg = 9000,
         .inertia_kgm2 = 1e6,
         .rpm = 60,
         .demand_Nm = 8e5},
        {.bore_mm = 1000,
         .stroke_mm = 4000,
         .rod_mm = 6000,
         .mass_kg = 9000,
         .inertia_kgm2 = 1e7,
         .rpm = 10,
         .demand_Nm = 5e5},
    };
    for (int i = 0; i < 4; i++) {
        demo d;
        plant p = edge[i];
        tacet_error e;
        p.cylinders = p.strokes = 4;
        p.cycle = usual.cycle;
        p.trapped = usual.trapped;
        char *text = text_of(&p);
        tacet_status status = demo_try_text(&d, text, &e);
        print_message("%g mm at %g rpm: %s %s\n", p.bore_mm, p.rpm, tacet_status_text(status),
                      status == TACET_OK ? "" : e.text);
        free(text);
        if (status == TACET_OK) check_edge(&d, &p, i == 1 || i == 2);
        if (status != TACET_OK) assert_true(strlen(e.text) > 20);
        demo_close(&d);
    }
    refused_with("speeds_rpm: [1500]", "speeds_rpm: [1]", "10");
    refused_with("speeds_rpm: [1500]", "speeds_rpm: [20001]", "20000");
}

// ---- what is refused ----------------------------------------------------------------------------

static void test_refusals(void **state)
{
    (void)state;
    refused_with("inertia_kgm2: 2", "inertia_kgm2: 0", "1e-7");
    refused_with("bore_mm: 100", "bore_mm: 19", "20");
    refused_with("bore_mm: 100", "bore_mm: 1001", "1000");
    refused_with("strokes: 4", "strokes: 2",
                 "2-stroke engines need traces: their gas exchange is not computed");
    refused_with("strokes: 4", "strokes: 3", "4 and 2 are allowed");
    plant p = usual;
    p.cylinders = 33;
    refused(text_of(&p), "32");
    p = usual;
    p.cylinders = 2;
    p.build = INLINE;
    p.stiffness = 2e12;
    refused(text_of(&p), "allowed are 0.01 to 1e12 N m/rad");
    p.stiffness = 1e-3;
    refused(text_of(&p), "0.01");
    p.build = ONE_NODE; // one pin, and a bank that does not bring the second one to it
    char *text = text_of(&p);
    demo_replace(text, "bank_deg: -0}", "bank_deg: 7}");
    refused(text, "put their pins 7 degrees apart");
}

// ---- scales of stiffness ------------------------------------------------------------------------

// The example's train a million times softer or stiffer: every solver says something definite.
static void test_soft_and_stiff(void **state)
{
    (void)state;
    for (int i = 0; i < 2; i++) {
        demo d;
        plant p = usual;
        tacet_agreement a;
        p.build = INLINE;
        p.inertia_kgm2 = i ? 2 : 40;
        p.stiffness = i ? 1e12 : 1;
        open_plant(&d, &p);
        tacet_row row = solve(&d, "xx.", p.rpm, p.demand_Nm, TACET_LEVEL_RIPPLE);
        print_message("stiffness %g: %s by %s\n", p.stiffness, tacet_outcome_text(row.outcome),
                      row.solver.method);
        if (row.outcome == TACET_SOLVED) assert_true(demo_roll_mismatch(&d) < 1e-9);
        if (row.outcome == TACET_FAILED) assert_int_equal(row.why, TACET_NOT_CONVERGED);
        if (i == 0) {
            tacet_roll *roll = demo_roll(&d, "xx.");
            tacet_condition c = demo_condition(&d, roll, p.rpm);
            tacet_status status = tacet_solve_referee(d.model, &c, d.work, &a);
            print_message("  referee: %s, %g\n", tacet_status_text(status), a.same_model);
            if (status == TACET_OK && !isnan(a.same_model)) assert_true(a.same_model < 1e-6);
            tacet_roll_destroy(roll);
        }
        demo_close(&d);
    }
}

// ---- cycles that could not be computed
// -----------------------------------------------------------

// Ordinary engines, of which the first once had gas of an impossible enthalpy in the inlet port,
// and the second a cycle of a cylinder that never fires with a jump of 3e-6 where port flow turns.
static void test_ordinary_engines_have_a_cycle(void **state)
{
    (void)state;
    plant p = usual;
    p.cylinders = 5;
    p.bore_mm = 163.29150926545148;
    p.stroke_mm = 145.86865551953241;
    p.rod_mm = 253.2754819646654;
    p.mass_kg = 7.6;
    p.rpm = 2375.23924;
    p.demand_Nm = 128;
    demo d;
    char *text = text_of(&p);
    demo_replace(text, "compression_ratio: 11", "compression_ratio: 12.076275985555913");
    demo_replace(text, "stroke_mm: 145", "pin_offset_mm: 3.7105830322360216\n  stroke_mm: 145");
    demo_replace(text, "{manifold_kpa: {lowest: 20, highest: 200}}",
                 "{mid_burn_deg: 10.835528624750285, burn_10_90_deg: 18.957572825471424, "
                 "manifold_kpa: {lowest: 20, highest: 158.26388967411722}}");
    demo_open_text(&d, text);
    assert_int_equal(solve(&d, "x", p.rpm, p.demand_Nm, TACET_LEVEL_CONSTANT).outcome,
                     TACET_SOLVED);
    demo_close(&d);
    free(text);
}

// ---- 2-stroke -----------------------------------------------------------------------------------

static char folder[] = "/tmp/tacet-edges-XXXXXX";

// Compression and expansion of 1.35, a share of heat at top: enough to be a cycle.
static double trace_kpa(double deg, double manifold, bool fired)
{
    double a = deg * M_PI / 180, x = (1 - cos(a)) / 2 + 0.15 * sin(a) * sin(a), v = 0.1 + x;
    double p = manifold * pow(1.1 / v, 1.35);
    if (fired && deg > 0) p *= 1 + 1.2 * fmin(deg / 20, 1) * fmax(0, 1 - fmax(0, deg - 100) / 80);
    return p;
}

static void write_trace(const char *name, bool fired)
{
    char path[300];
    snprintf(path, sizeof path, "%s/%s", folder, name);
    FILE *f = fopen(path, "w");
    assert_non_null(f);
    fputs("angle_deg", f);
    for (int load = 50; load <= 200; load += 50) {
        fprintf(f, ",pressure_kpa:manifold_kpa=%d", load);
        if (!fired) fputs(":run=1", f);
    }
    fputs("\n", f);
    for (int deg = -180; deg <= 180; deg++) {
        fprintf(f, "%d", deg);
        for (int load = 50; load <= 200; load += 50)
            fprintf(f, ",%.9g", trace_kpa(deg, load, fired));
        fputs("\n", f);
    }
    assert_int_equal(fclose(f), 0);
}

// Brake work from the trace by quadrature of (p - 100 kPa) A x' over a turn; a demand of just that
// less friction must find the charge of the trace. One turn a cycle: three cylinders fire three
// times a turn, and no half orders are there.
static void test_two_stroke_from_traces(void **state)
{
    (void)state;
    demo d;
    char path[300], cycle[300];
    plant p = usual;
    assert_non_null(mkdtemp(folder));
    write_trace("fired.csv", true);
    write_trace("skipped.csv", false);
    snprintf(
        cycle, sizeof cycle,
        "{kind: traces, manifold_kpa: {lowest: 50, highest: 200}, traces: {fired: %s/fired.csv, "
        "skipped: %s/skipped.csv}}",
        folder, folder);
    p.strokes = 2;
    p.cylinders = 3;
    p.cycle = cycle;
    double work = 0, r = p.stroke_mm / 2e3, l = p.rod_mm / 1e3, area = M_PI / 4 * 0.1 * 0.1;
    for (int k = -1800; k < 1800; k++) {
        double deg = k / 10.0 + 0.05, a = deg * M_PI / 180, s = r * sin(a);
        double dx = s + s * r * cos(a) / sqrt(l * l - s * s);
        work += (trace_kpa(deg, 100, true) - 100) * 1e3 * area * dx * M_PI / 1800;
    }
    open_plant(&d, &p);
    tacet_row row = solve(&d, "x", p.rpm, 10, TACET_LEVEL_CONSTANT);
    double demand = 3 * work / (2 * M_PI) - row.duty.friction_Nm;
    for (int i = 0; i < 3; i++) { // friction depends a little on the peaks
        row = solve(&d, "x", p.rpm, demand, TACET_LEVEL_CONSTANT);
        demand = 3 * work / (2 * M_PI) - row.duty.friction_Nm;
    }
    assert_int_equal(row.outcome, TACET_SOLVED);
    assert_near(row.duty.charge_Pa, 100e3, 0, 2e-3);
    const tacet_response *x = tacet_workspace_response(d.work);
    assert_int_equal(x->revolutions, 1);
    for (size_t h = 1; h <= x->n_lines; h++)
        if (h % 3)
            assert_near(cabs(x->piston_torque_Nm[0].line[h]), 0,
                        1e-12 * largest_line(&x->piston_torque_Nm[0]), 0);
    row = solve(&d, "x.", p.rpm, 30, TACET_LEVEL_RIPPLE);
    assert_int_equal(row.outcome, TACET_SOLVED);
    assert_int_equal(tacet_workspace_response(d.work)->revolutions, 2);
    demo_close(&d);
    snprintf(path, sizeof path, "%s/fired.csv", folder);
    unlink(path);
    snprintf(path, sizeof path, "%s/skipped.csv", folder);
    unlink(path);
    rmdir(folder);
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_one_to_sixteen_cylinders_on_one_node),
    cmocka_unit_test(test_inline_vee_and_flat),
    cmocka_unit_test(test_density_zero_and_one),
    cmocka_unit_test(test_word_length_64),
    cmocka_unit_test(test_long_rod),
    cmocka_unit_test(test_rod_near_the_throw),
    cmocka_unit_test(test_sizes_and_speeds),
    cmocka_unit_test(test_refusals),
    cmocka_unit_test(test_soft_and_stiff),
    cmocka_unit_test(test_ordinary_engines_have_a_cycle),
    cmocka_unit_test(test_two_stroke_from_traces),
};
TEST_MAIN(tests)
