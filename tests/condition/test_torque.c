// What drives a throw at constant speed: gas torque less friction, and the torque of the
// reciprocating mass.
#include "demo.h"
#include <math.h>

static demo six;

static int open_six(void **state)
{
    (void)state;
    demo_open(&six, "forwarder.yaml");
    return 0;
}

static int close_six(void **state)
{
    (void)state;
    demo_close(&six);
    return 0;
}

#define SAMPLES (2 * 7200) // of two revolutions

// Lines 1..n of the gas torque of one cylinder over a repeat of two revolutions.
static void gas_lines(const tacet_roll *roll, double speed, double demand, unsigned slot, size_t n,
                      double complex *line)
{
    const tacet_engine *en = tacet_model_engine(six.model);
    static double angle[SAMPLES], torque[SAMPLES];
    tacet_engine_work *w;
    tacet_duty duty;
    assert_int_equal(tacet_engine_work_create(en, &w), TACET_OK);
    assert_int_equal(tacet_engine_duty(en, roll, speed, demand, w, &duty), TACET_OK);
    assert_int_equal(tacet_engine_load(en, roll, &duty, speed, w), TACET_OK);
    for (int k = 0; k < SAMPLES; k++)
        angle[k] = 4 * M_PI * k / SAMPLES;
    tacet_engine_gas_torque(en, w, slot, SAMPLES, angle, torque);
    for (size_t h = 1; h <= n; h++) {
        line[h] = 0;
        for (int k = 0; k < SAMPLES; k++)
            line[h] += 2.0 / SAMPLES * torque[k] * cexp(-I * (double)h * angle[k] / 2);
    }
    tacet_engine_work_destroy(w);
}

// Torque of a reciprocating mass m at constant speed W over m r^2 W^2: sum of C_k sin(k a) after
// piston top (slider-crank without offset, L = r / l; leading terms from memory, as in any text on
// engine balance):
//   C1 = L/4 + L^3/16 + .., C2 = -1/2 - L^4/32 - .., C3 = -3/4 L - 9/32 L^3 - ..,
//   C4 = -L^2/4 - L^4/8 - ..
// What drives a throw is that, its gas torque, and nothing else but a mean.
static void test_inertia_torque_at_constant_speed_s3(void **state)
{
    (void)state;
    tacet_roll *roll = demo_roll(&six, "x");
    tacet_condition c = demo_condition(&six, roll, 1900);
    tacet_row row;
    assert_int_equal(tacet_solve(six.model, &c, TACET_LEVEL_CONSTANT, six.work, &row), TACET_OK);
    const tacet_response *r = tacet_workspace_response(six.work);
    const tacet_engine *en = tacet_model_engine(six.model);
    const tacet_slider *s = tacet_engine_slider(en);
    double W = c.speed_rad_per_s, unit = s->mass_kg * s->crank_m * s->crank_m * W * W;
    double L = s->crank_m / s->rod_m, L2 = L * L;
    const double C[] = {0, L / 4 + L * L2 / 16, -0.5 - L2 * L2 / 32, -0.75 * L - 9 * L * L2 / 32,
                        -L2 / 4 - L2 * L2 / 8};
    assert_int_equal(roll->revolutions, 2);
    assert_true(s->offset_m == 0 && unit > 100);
    for (unsigned slot = 0; slot < 6; slot++) { // each drives a throw of its own
        double complex gas[9];
        double top = tacet_engine_firing_angle(en, slot);
        gas_lines(roll, W, c.demand_Nm, slot, 8, gas);
        for (unsigned k = 1; k <= 4; k++) {
            unsigned h = 2 * k;
            const tacet_spectrum *angle = &r->motion->angle_rad[r->throw_node[slot]];
            double complex driving =
                r->piston_torque_Nm[slot].line[h] -
                tacet_engine_mean_inertia(en) * (k * W) * (k * W) * angle->line[h];
            double complex inertia = -I * C[k] * cexp(-I * k * top); // sin k(a - top)
            // 2e-3: what the series leaves out, and lines of gas torque that fold back
            assert_near(cabs((driving - gas[h]) / unit - inertia), 0, 2e-3, 0);
        }
    }
    tacet_roll_destroy(roll);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_inertia_torque_at_constant_speed_s3),
    };
    return cmocka_run_group_tests(tests, open_six, close_six);
}
