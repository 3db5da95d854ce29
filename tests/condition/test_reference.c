// What over_all_fire_db is held against: the level of all-fire, solved here once more by itself.
#include "demo.h"
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define BOOM 3 // place of the band 'cab boom' in the forwarder's study

// The forwarder at three speeds; 'cab boom' may be 6 dB over all-fire, with hardly a floor.
static void open(demo *d, const char *reference)
{
    char *text = demo_text("forwarder.yaml"), with[128];
    snprintf(with, sizeof with, "over_all_fire_db: 6, floor_rms: 1e-6%s", reference);
    demo_replace(text, "limit_rms: 0.130", with);
    demo_replace(text, "900:1900:25", "[900, 1400, 1900]");
    demo_open_text(d, text);
    free(text);
}

static tacet_row row_of(const demo *d, const tacet_roll *roll, double rpm, double demand_Nm)
{
    tacet_condition c = demo_condition(d, roll, rpm);
    tacet_row row;
    if (demand_Nm > 0) c.demand_Nm = demand_Nm;
    assert_int_equal(tacet_solve(d->model, &c, TACET_LEVEL_RIPPLE, d->work, &row), TACET_OK);
    assert_int_equal(row.outcome, TACET_SOLVED);
    return row;
}

static void test_reference_worst_screened_speed(void **state)
{
    (void)state;
    demo d;
    open(&d, "");
    double worst = 0;
    for (double rpm = 900; rpm <= 1900; rpm += 500)
        worst = fmax(worst,
                     row_of(&d, tacet_model_all_fire(d.model), rpm, 0).bands[BOOM].level.dispersed);
    assert_true(worst > 0.01); // Pa
    assert_near(tacet_model_reference(d.model, BOOM), worst, 0, 1e-9);
    tacet_roll *half = demo_roll(&d, ".x");
    tacet_row row = row_of(&d, half, 1400, 200);
    assert_near(row.bands[BOOM].limit, worst * pow(10, 6 / 20.0), 0, 1e-9);
    tacet_roll_destroy(half);
    demo_close(&d);
}

// The reference follows speed and demand of the condition, also from one condition to the next.
static void test_reference_same_speed(void **state)
{
    (void)state;
    static const double at[][2] = {{1400, 200}, {1400, 320}, {1137.5, 320}, {1400, 200}};
    demo d;
    open(&d, ", reference: same-speed");
    tacet_roll *half = demo_roll(&d, ".x");
    double limit[4];
    for (size_t i = 0; i < 4; i++) {
        tacet_row row = row_of(&d, half, at[i][0], at[i][1]);
        tacet_row all = row_of(&d, tacet_model_all_fire(d.model), at[i][0], at[i][1]);
        limit[i] = row.bands[BOOM].limit;
        assert_near(limit[i], all.bands[BOOM].level.dispersed * pow(10, 6 / 20.0), 0, 1e-9);
        assert_near(all.bands[BOOM].margin_db, 6, 1e-9, 0);
        assert_near(row.bands[BOOM].margin_db,
                    20 * log10(limit[i] / row.bands[BOOM].level.dispersed), 1e-9, 0);
    }
    assert_true(fabs(limit[1] / limit[0] - 1) > 0.01);
    assert_true(fabs(limit[2] / limit[1] - 1) > 0.01);
    assert_true(limit[3] == limit[0]);
    tacet_roll_destroy(half);
    demo_close(&d);
}

// Nothing to refer to where all-fire cannot carry the torque as lightly: no verdict, with its why.
static void test_reference_unreachable(void **state)
{
    (void)state;
    demo d;
    open(&d, ", reference: same-speed");
    tacet_roll *half = demo_roll(&d, ".x");
    tacet_row all = {0}, row = row_of(&d, half, 1400, 25);
    tacet_condition c = demo_condition(&d, tacet_model_all_fire(d.model), 1400);
    c.demand_Nm = 25;
    assert_int_equal(tacet_solve(d.model, &c, TACET_LEVEL_RIPPLE, d.work, &all), TACET_OK);
    assert_int_equal(all.outcome, TACET_UNREACHABLE);
    assert_true(row.bands[BOOM].level.dispersed > 1e-6);
    assert_int_equal(row.bands[BOOM].verdict, TACET_NO_VERDICT);
    assert_int_equal(row.bands[BOOM].why, TACET_WHY_NO_REFERENCE);
    assert_true(isnan(row.bands[BOOM].limit) && isnan(row.fuel_to_all_fire));
    tacet_roll_destroy(half);
    demo_close(&d);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_reference_worst_screened_speed),
        cmocka_unit_test(test_reference_same_speed),
        cmocka_unit_test(test_reference_unreachable),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
