// The cycle table: interpolated halves against computed ones.
#include "direct.h"
#include "near.h"
#include <stdlib.h>
#include <string.h>

// A halves_store into a table of one node.
static void keep(void *who, unsigned kind, const double number[HALF_NUMBERS],
                 const double *pressure)
{
    table *t = who;
    memcpy(table_number(t, kind, 0, 0), number, HALF_NUMBERS * sizeof *number);
    memcpy(table_pressure(t, kind, 0, 0), pressure, t->samples * sizeof *pressure);
}

static double torque_of(const tacet_engine *en, const double *p, unsigned i)
{
    return (p[i] - en->cyl.crankcase_Pa) * en->cyl.piston_m2 * en->lever_m[i];
}

// Largest rms difference of torque of any kind of half between table and computed half, relative
// to the rms of the fired half down.
static double difference(const tacet_engine *en, double speed, double charge)
{
    const table *t = &en->table;
    table one;
    assert_int_equal(table_create(&one, &t->halves, t->samples, 1, 1), TACET_OK);
    cylinder_run run = table_run(&en->def, speed, charge);
    cylinder_gas start = cylinder_fill(&en->cyl, en->cyl.exhaust_Pa, 1000), never = {0};
    assert_int_equal(halves_chain(&en->cyl, &run, &t->halves, &start, &never, keep, &one),
                     TACET_OK);
    const double *fired = table_pressure(&one, halves_down_fire(&one.halves, 0, true), 0, 0);
    table_place s = table_at_speed(t, speed), c = table_at_charge(t, charge);
    double worst = 0, scale = 0, p[CYLINDER_SAMPLES];
    for (unsigned i = 0; i < t->samples; i++)
        scale += torque_of(en, fired, i) * torque_of(en, fired, i);
    for (unsigned kind = 0; kind < t->n_kinds; kind++) {
        const double *direct = table_pressure(&one, kind, 0, 0);
        double sum = 0;
        table_waveform(t, kind, &s, &c, p);
        for (unsigned i = 0; i < t->samples; i++)
            sum += pow(torque_of(en, p, i) - torque_of(en, direct, i), 2);
        worst = fmax(worst, sqrt(sum / scale));
    }
    table_clear(&one);
    return worst;
}

// Rows between nodes are those of cycles computed there, within 0.2 % of torque rms.
static void compare_rows(tacet_engine_def d, double from, double to)
{
    engine_pair p = engine_made(&d, from, to, 2);
    const table *t = &p.engine->table;
    for (int i = 0; i < 6; i++) { // places spread over the table without regard to its nodes
        double a = fmod(0.137 + 0.618034 * i, 1), b = fmod(0.419 + 0.754878 * i, 1);
        double low = t->charge[0], high = t->charge[t->n_charges - 1];
        double charge = low + (high - low) * (0.02 + 0.96 * b);
        assert_near(difference(p.engine, (from + (to - from) * a) * RPM, charge), 0, 2e-3, 0);
    }
    engine_cleared(&p);
}

static void test_table_rows(void **state)
{
    (void)state;
    for (int trapped = TACET_TRAPPED_RESIDUAL; trapped <= TACET_TRAPPED_OPEN; trapped++) {
        bool shut = trapped == TACET_TRAPPED_RESIDUAL || trapped == TACET_TRAPPED_AIR;
        tacet_engine_def d = shut ? demo_six() : demo_v8();
        d.skip.trapped = trapped;
        compare_rows(d, shut ? 900 : 1000, shut ? 1900 : 3000);
    }
}

// The same with load by fuel, and with curves over speed that bend inside the range.
static void test_table_rows_bent(void **state)
{
    (void)state;
    double rpm[] = {1000, 1400, 1700}, mid[] = {5 * DEG, 9 * DEG, 10 * DEG};
    double ratio[] = {16, 14.5, 18};
    tacet_engine_def d = demo_six();
    d.cycle.mid_burn_rad = (tacet_curve){rpm, mid, 3};
    d.cycle.air_fuel_ratio = (tacet_curve){rpm, ratio, 3};
    compare_rows(d, 900, 1900);
    d.cycle.load_by = TACET_LOAD_FUEL;
    compare_rows(d, 900, 1900);
}

// A node is met exactly, whatever its neighbours.
static void test_table_nodes(void **state)
{
    (void)state;
    double node[] = {1, 2, 4, 5, 7, 11};
    for (size_t i = 0; i < 6; i++) {
        table_place p = table_at(node, 6, node[i]);
        for (size_t k = 0; k < p.n; k++)
            assert_near(p.weight[k], p.first + k == i, 0, 0);
    }
    table_place p = table_at(node, 6, 6.3); // cubics are reproduced
    double sum = 0;
    for (size_t k = 0; k < p.n; k++)
        sum += p.weight[k] * pow(node[p.first + k], 3);
    assert_near(sum, pow(6.3, 3), 0, 1e-13);
    p = table_at(node, 2, 1.25);
    assert_near(p.weight[0], 0.75, 1e-15, 0);
    p = table_at(node, 1, 3);
    assert_int_equal(p.n, 1);
    assert_near(p.weight[0], 1, 0, 0);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_table_nodes),
        cmocka_unit_test(test_table_rows),
        cmocka_unit_test(test_table_rows_bent),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
