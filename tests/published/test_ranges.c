// No-go ranges, order windows and margins of one degree of freedom, in closed form.
//
// One cylinder with T = tau sin^2 a fires always on crank J1; spring and viscous damper lead to J2.
// At brake torque D its only line is order 2 with amplitude D, and the link torque is
//   D J2 / (J1 + J2) TR,  TR^2 = (1 + (2 z r)^2) / ((1 - r^2)^2 + (2 z r)^2),  r = 2 W / w_n
// (any text on mechanical vibration: transmissibility; as relative motion of two inertias with
// J1 J2 / (J1 + J2) and z = c / (2 sqrt(k J))). The inertias are heavy: the crank's angle swings by
// 1e-5, so that the ripple moves nothing here.
#include "formula.h"
#include <complex.h>
#include <math.h>
#include <stdio.h>

#define J1     400.0
#define J2     600.0
#define DEMAND 12.0
#define HZ     30.0 // of the mode
#define ZETA   0.08
#define LIMIT  15.0 // rms
#define WINDOW 4.0  // rms, of the band that order 2 crosses

static double stiffness(void)
{
    double J = J1 * J2 / (J1 + J2), w = 2 * M_PI * HZ;
    return w * w * J;
}

static double damping(void)
{
    return 2 * ZETA * stiffness() / (2 * M_PI * HZ);
}

// rms link torque of order 2 at a speed
static double level_at(double rpm)
{
    double r = 2 * rpm / 60 / HZ, b = 2 * ZETA * r;
    double square = (1 + b * b) / ((1 - r * r) * (1 - r * r) + b * b);
    return DEMAND * J2 / (J1 + J2) * sqrt(square / 2);
}

// Both speeds at which the level is `rms`: 1 + 4 z^2 R = m ((1 - R)^2 + 4 z^2 R) with R = r^2 and
// m = (rms / (D J2 / (J1 + J2)))^2 * 2, a quadratic in R.
static void edges(double rms, double rpm[2])
{
    double full = DEMAND * J2 / (J1 + J2), m = 2 * rms * rms / (full * full), z = 4 * ZETA * ZETA;
    double b = m * (z - 2) - z, c = m - 1, root = sqrt(b * b - 4 * m * c);
    rpm[0] = 30 * HZ * sqrt((-b - root) / (2 * m));
    rpm[1] = 30 * HZ * sqrt((-b + root) / (2 * m));
}

static void open_one_degree(formula *f, const char *speeds)
{
    char rest[2400];
    snprintf(rest, sizeof rest,
             "  nodes: [{name: crank, inertia_kgm2: %g}, {name: load, inertia_kgm2: %g}]\n"
             "  links: [{name: shaft, from: crank, to: load, stiffness_nm_per_rad: %.17g,\n"
             "    damping_nms_per_rad: %.17g, outer_mm: 50, stress_concentration: 2}]\n"
             "  flywheel: crank\n  load: load\n"
             "bands:\n"
             "  - {name: resonance, kind: crank, low_hz: 10, high_hz: 60, "
             "quantity: 'link-torque:shaft', limit_rms: %g}\n"
             "  - {name: window, kind: mount, low_hz: 24, high_hz: 25, "
             "quantity: 'link-torque:shaft', limit_rms: %g}\n"
             "  - {name: quiet, kind: cab, low_hz: 24, high_hz: 36, "
             "quantity: 'link-torque:shaft', limit_rms: 1000}\n"
             "limits:\n"
             "  - {name: heat, quantity: 'damper-heat:shaft', value: 1}\n"
             "  - {name: stress, quantity: 'link-stress:shaft', statistic: half_range, value: 1}\n"
             "  - {name: mean stress, quantity: 'link-stress:shaft', statistic: mean, value: 1}\n"
             "  - {name: irregular, quantity: irregularity, value: 1}\n"
             "  - {name: speed, quantity: 'node-speed:crank', statistic: rms, value: 1}\n"
             "  - {name: swing, quantity: 'node-angle:load', statistic: pp, value: 1}\n"
             "  - {name: shake, quantity: 'node-acceleration:crank', statistic: max, value: 1}\n"
             "  - {name: roll, quantity: roll-torque, statistic: half_range, value: 1}\n"
             "screen: {speeds_rpm: %s, brake_torque_nm: %g, densities: [1], highest_order: 12, "
             "referee: 0}\n",
             J1, J2, stiffness(), damping(), LIMIT, WINDOW, speeds, DEMAND);
    formula_open(f, 1, "{cylinder_percent: 0, cyclic_percent: 0}", rest);
}

static double rpm_of(double rad_per_s)
{
    return rad_per_s * 30 / M_PI;
}

static const tacet_no_go *range_of(const tacet_screen *s, size_t band)
{
    const tacet_no_go *found = NULL;
    for (size_t i = 0; i < s->n_no_go; i++) {
        if (s->no_go[i].band != band) continue;
        assert_null(found); // one range
        found = &s->no_go[i];
    }
    return found;
}

static tacet_screen *screen_of(const formula *f)
{
    tacet_screen *s = NULL;
    tacet_problems *problems = tacet_problems_create();
    assert_int_equal(tacet_screen_run(f->model, NULL, &s, problems, NULL), TACET_OK);
    tacet_problems_destroy(problems);
    return s;
}

static void check_ranges(const char *speeds)
{
    formula f;
    open_one_degree(&f, speeds);
    tacet_screen *s = screen_of(&f);
    double rpm[2];
    edges(LIMIT, rpm);
    assert_near(level_at(rpm[0]), LIMIT, 0, 1e-12); // the quadratic is right
    assert_near(level_at(rpm[1]), LIMIT, 0, 1e-12);
    const tacet_no_go *r = range_of(s, 0);
    assert_non_null(r);
    assert_false(r->low_open || r->high_open);
    assert_near(rpm_of(r->low_rad_per_s), rpm[0], 0.5, 0);
    assert_near(rpm_of(r->high_rad_per_s), rpm[1], 0.5, 0);
    assert_near(r->leading_order, 2, 0, 0);
    // the worst margin is that of its own speed, and within 0.1 dB of the resonance's
    double at = rpm_of(r->worst_speed_rad_per_s), peak = level_at(30 * HZ * sqrt(1 - ZETA * ZETA));
    assert_near(r->worst_margin_db, 20 * log10(LIMIT / level_at(at)), 1e-3, 0);
    assert_near(r->worst_margin_db, 20 * log10(LIMIT / peak), 0.1, 0);
    tacet_screen_destroy(s);
    formula_close(&f);
}

static void test_no_go_of_one_degree(void **state)
{
    (void)state;
    check_ranges("600:1300:50");
}

// The same from a grid that steps over the range: edges belong to the band, not to the grid.
static void test_no_go_between_grid_speeds(void **state)
{
    (void)state;
    check_ranges("500:1500:500");
}

// Where the level is over the limit at every speed of the window, the range is the window:
// rpm = 60 f / order at the counted edges, 24 Hz less and 25 Hz more 5 %.
static void test_no_go_of_an_order_window(void **state)
{
    (void)state;
    formula f;
    open_one_degree(&f, "600:1300:50");
    tacet_screen *s = screen_of(&f);
    assert_true(level_at(30 * 22.8) > WINDOW);
    const tacet_no_go *r = range_of(s, 1);
    assert_non_null(r);
    assert_near(rpm_of(r->low_rad_per_s), 30 * 24 * 0.95, 0.5, 0);
    assert_near(rpm_of(r->high_rad_per_s), 30 * 25 * 1.05, 0.5, 0);
    assert_null(range_of(s, 2));
    tacet_screen_destroy(s);
    formula_close(&f);
}

// Levels, margins and verdicts at single speeds, by all three levels of detail: 1e-5 is what the
// ripple of 400 kg m2 and cubics through pressures of every degree leave; steady closes to 1e-5.
static void test_level_of_one_degree(void **state)
{
    (void)state;
    static const struct {
        tacet_level level;
        double rtol;
    } how[] = {
        {TACET_LEVEL_CONSTANT, 2e-5}, {TACET_LEVEL_RIPPLE, 2e-5}, {TACET_LEVEL_STEADY, 1e-4}};
    formula f;
    open_one_degree(&f, "600:1300:50");
    for (size_t i = 0; i < 3; i++)
        for (double rpm = 650; rpm < 1300; rpm += 210) {
            tacet_row row = formula_row(&f, "x", rpm, DEMAND, how[i].level);
            double level = level_at(rpm), margin = 20 * log10(LIMIT / level);
            assert_near(row.bands[0].level.nominal, level, 0, how[i].rtol);
            assert_near(row.bands[0].level.dispersed, level, 0, how[i].rtol);
            assert_near(row.bands[0].level.leading_peak, level * sqrt(2), 0, how[i].rtol);
            assert_near(row.bands[0].level.leading_order, 2, 0, 0);
            assert_near(row.bands[0].margin_db, margin, 10 * how[i].rtol, 0);
            assert_int_equal(row.bands[0].verdict, margin < 0   ? TACET_OVER
                                                   : margin < 3 ? TACET_NEAR
                                                                : TACET_CLEAR);
            bool inside = 2 * rpm / 60 >= 24 * 0.95 && 2 * rpm / 60 <= 25 * 1.05;
            assert_int_equal(row.bands[1].level.has_line, inside);
        }
    formula_close(&f);
}

// Every scalar limit at once. Twist X = D J2 / (J1 + J2) / k / (1 - r^2 + 2 i z r); the crank's
// angle is the rigid one, -D / ((J1 + J2) w^2), and J2 / (J1 + J2) of the twist, the load's the
// rigid one less J1 / (J1 + J2) of it (any text: relative motion of two inertias). Heat of a
// viscous link 1/2 c w^2 X^2; stress K_t T / W_t with W_t = pi D^3 / 16 = 24543.6926 mm3 at 50 mm
// (from memory). The load is housed: roll torque is what the momentum of both loses, D.
static void test_limits_of_one_degree(void **state)
{
    (void)state;
    formula f;
    open_one_degree(&f, "600:1300:50");
    for (double rpm = 620; rpm < 1300; rpm += 170) {
        double w = 2 * rpm * M_PI / 30, r = 2 * rpm / 60 / HZ, share = J2 / (J1 + J2);
        double complex twist = DEMAND * share / stiffness() / (1 - r * r + 2 * I * ZETA * r);
        double complex rigid = -DEMAND / ((J1 + J2) * w * w);
        double crank = cabs(rigid + share * twist), load = cabs(rigid - (1 - share) * twist);
        double torque = cabs(twist) * cabs(stiffness() + I * w * damping());
        double per_Nm = 2 * 1e3 / 24543.6926; // MPa
        const double expected[] = {0.5 * damping() * w * w * cabs(twist) * cabs(twist),
                                   torque * per_Nm,
                                   DEMAND * per_Nm,
                                   2 * w * crank / (rpm * M_PI / 30),
                                   w * crank / sqrt(2),
                                   2 * load,
                                   w * w * crank,
                                   DEMAND};
        tacet_row row = formula_row(&f, "x", rpm, DEMAND, TACET_LEVEL_RIPPLE);
        assert_int_equal(row.n_limits, 8);
        for (size_t i = 0; i < 8; i++)
            assert_near(row.limits[i].value, expected[i], 0, 1e-3);
    }
    formula_close(&f);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_no_go_of_one_degree),
        cmocka_unit_test(test_no_go_between_grid_speeds),
        cmocka_unit_test(test_no_go_of_an_order_window),
        cmocka_unit_test(test_level_of_one_degree),
        cmocka_unit_test(test_limits_of_one_degree),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
