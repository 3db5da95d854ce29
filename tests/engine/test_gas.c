// Laws of the gas, of burning, wall heat, flow and friction: E1 to E17 without the cycle.
#include "demo.h"
#include "engine/gas.h"
#include "near.h"

// E1, E4: Wiebe with a = 5, m = 2 (form: Ferguson and Kirkpatrick, Internal Combustion Engines;
// values recomputed).
static void test_gas_wiebe_e1_e4(void **state)
{
    (void)state;
    static const double row[][2] = {{0.1, 0.004988},  {0.25, 0.075151}, {0.5, 0.464739},
                                    {0.75, 0.878686}, {1, 0.993262},    {0.276208, 0.1},
                                    {0.517549, 0.5},  {0.772233, 0.9}};
    for (size_t i = 0; i < sizeof row / sizeof *row; i++)
        assert_near(gas_wiebe(row[i][0], 5, 2), row[i][1], 2e-6, 0);
    double peak = pow(2.0 / (3 * 5), 1.0 / 3), h = 1e-4; // largest rate, by central difference
    assert_near(peak, 0.510873, 1e-6, 0);
    assert_near((gas_wiebe(peak + h, 5, 2) - gas_wiebe(peak - h, 5, 2)) / (2 * h), 2.009960, 1e-5,
                0);
    static const double at[][2] = {{-10, .022882}, {0, .169050},  {5, .303502},
                                   {10, .464739},  {20, .772699}, {30, .944619}};
    for (size_t i = 0; i < sizeof at / sizeof *at; i++)
        assert_near(gas_wiebe((at[i][0] + 20) / 60, 5, 2), at[i][1], 1e-6, 0);
    assert_near(gas_wiebe(-0.1, 5, 2), 0, 0, 0);
}

// E2: a = -ln(1 - x at the end); E3: 10, 50, 90 % with a = 6.908, m = 2 (recomputed).
static void test_gas_wiebe_e2_e3(void **state)
{
    (void)state;
    assert_near(gas_wiebe(1, 2.302585, 2), 0.9, 1e-7, 0);
    assert_near(gas_wiebe(1, 4.605170, 2), 0.99, 1e-7, 0);
    assert_near(gas_wiebe(1, 6.907755, 2), 0.999, 1e-7, 0);
    static const double at[][2] = {{0.247994, 0.1}, {0.464684, 0.5}, {0.693353, 0.9}};
    for (size_t i = 0; i < 3; i++)
        assert_near(gas_wiebe(at[i][0], GAS_WIEBE_A, GAS_WIEBE_M), at[i][1], 2e-6, 0);
}

// The burn law of the cycle is the Wiebe function over its end value; start and end put 50 % at the
// middle and 10 to 90 % at the duration asked, and so lie where E3 says to a part in 1000.
static void test_gas_burn_span(void **state)
{
    (void)state;
    double start, end;
    for (double y = -0.5; y < 1.5; y += 0.01)
        assert_near(gas_burnt(y), fmin(1, gas_wiebe(y, 6.908, 2) / gas_wiebe(1, 6.908, 2)), 1e-15,
                    0);
    gas_burn_span(8 * DEG, 25 * DEG, &start, &end);
    assert_near(gas_burnt((8 * DEG - start) / (end - start)), 0.5, 1e-14, 0);
    double low = 0, high = 0;
    for (double y = 0; y < 1; y += 1e-6) {
        if (gas_burnt(y) < 0.1) low = y;
        if (gas_burnt(y) < 0.9) high = y;
    }
    assert_near((high - low) * (end - start), 25 * DEG, 1e-5, 0);
    assert_near((end - start) / DEG, 25 / (0.693353 - 0.247994), 0, 3e-3);
    assert_near(start / DEG, 8 - 0.464684 * 25 / (0.693353 - 0.247994), 0, 3e-3);
}

// Internal energy is the integral of R / (gamma - 1), gamma = 1.38 - 0.08 (T - 300) / 1000; the
// inverse undoes it; slope 0 gives R dT / (gamma - 1).
static void test_gas_energy(void **state)
{
    (void)state;
    gas_law g = gas_default();
    double u = 0, h = 0.5;
    for (double T = 300; T < 3000; T += h) { // Simpson's rule
        double sum = 0;
        for (int k = 0; k < 3; k++)
            sum += (k == 1 ? 4 : 1) * 287 / (0.38 - 0.08e-3 * (T + k * h / 2 - 300));
        u += h / 6 * sum;
        assert_near(gas_u(&g, T + h), u, 1e-4, 1e-10);
        assert_near(gas_T(&g, u), T + h, 1e-6, 0);
    }
    assert_near(gas_T(&g, gas_u(&g, 250)), 250, 1e-9, 0);
    assert_near(gas_gamma(&g, 2300), 1.22, 1e-14, 0);
    assert_near(gas_h(&g, 800) - gas_u(&g, 800), 287 * 800.0, 1e-8, 0);
    g.slope_per_K = 0;
    assert_near(gas_u(&g, 1300), 287e3 / 0.38, 1e-8, 0);
    assert_near(gas_T(&g, gas_u(&g, 1300)), 1300, 1e-9, 0);
}

// E6: Diesel cycle, ratio 18, cut-off 2, gamma 1.4: 0.631578 (closed form), walked through with u,
// h and T of the gas law at slope 0.
static void test_gas_diesel_e6(void **state)
{
    (void)state;
    gas_law g = {.R_J_per_kgK = 287, .gamma0 = 1.4, .slope_per_K = 0, .T0_K = 300};
    double T1 = 300, T2 = T1 * pow(18, 0.4), T3 = 2 * T2, T4 = T3 * pow(2.0 / 18, 0.4);
    double in = gas_h(&g, T3) - gas_h(&g, T2), out = gas_u(&g, T4) - gas_u(&g, T1);
    assert_near(1 - out / in, 0.631578, 1e-6, 0);
}

// E17: Woschni (Heywood eq. 12.51, from memory): h = 925.4808 W/(m2 K) and w = 51.15 m/s.
static void test_gas_woschni_e17(void **state)
{
    (void)state;
    assert_near(gas_woschni(0.1, 5000e3, 1500, 20), 925.4808, 1e-3, 0);
    double w =
        gas_woschni_speed(GAS_WOSCHNI_SHUT, 10, GAS_WOSCHNI_BURN, 5e-4, 350, 150e3, 4e-4, 3000e3);
    assert_near(w, 51.15, 1e-9, 0);
    assert_near(gas_woschni_speed(GAS_WOSCHNI_OPEN, 10, 0, 5e-4, 350, 150e3, 4e-4, 3000e3), 61.8,
                1e-12, 0);
    assert_near(
        gas_woschni_speed(GAS_WOSCHNI_SHUT, 10, GAS_WOSCHNI_BURN, 5e-4, 350, 150e3, 4e-4, -3e5),
        22.8, 1e-12, 0);
}

// Orifice: below the critical ratio the flow depends on the upstream side alone, with the critical
// flow of an ideal gas (sonic throat: rho a at T 2/(gamma+1), closed form); above it, it is the
// isentropic velocity times density (closed form); it vanishes with the difference, and value and
// slope are continuous where the laminar part joins.
static void test_gas_orifice(void **state)
{
    (void)state;
    gas_law g = {.R_J_per_kgK = 287, .gamma0 = 1.4, .slope_per_K = 0, .T0_K = 300};
    double T = 400, p = 2e5, throat = T * 2 / 2.4;
    double density = p / (287 * T) * pow(2 / 2.4, 1 / 0.4);
    double sonic = density * sqrt(1.4 * 287 * throat);
    assert_near(gas_orifice(&g, p, T, 1e5), sonic, 0, 1e-12);
    assert_near(gas_orifice(&g, p, T, 1e3), sonic, 0, 1e-12);
    double critical = pow(2 / 2.4, 3.5);
    assert_near(gas_orifice(&g, p, T, p * critical * 1.000001), sonic, 0, 1e-8);
    double ratio = 0.8, end = T * pow(ratio, 0.4 / 1.4);
    double flow = ratio * p / (287 * end) * sqrt(2 * 1004.5 * (T - end));
    assert_near(gas_orifice(&g, p, T, ratio * p), flow, 0, 1e-12);
    assert_near(gas_orifice(&g, p, T, p), 0, 1e-12, 0);
    double join = p * (1 - GAS_ORIFICE_REST), h = 1e-3 * p, f[5];
    for (int i = 0; i < 5; i++)
        f[i] = gas_orifice(&g, p, T, join + (i - 2) * h);
    assert_near(f[3] - f[2], f[2] - f[1], 0, 0.05);
    double near = gas_orifice(&g, p, T, p * (1 - 1e-4)),
           nearer = gas_orifice(&g, p, T, p * (1 - 5e-5));
    assert_near(near / nearer, 2, 0, 2e-3);
}

// E8: bmep 10 bar, 2.0 l, 4-stroke: 159.15494 N m and 50.000 kW at 3000 rpm (closed form). E9:
// H. N. Gupta, Fundamentals of Internal Combustion Engines, ex. 16.3: 4 cylinders 90 x 100 mm,
// 120 N m: 5.93 bar.
static void test_gas_mep_e8_e9(void **state)
{
    (void)state;
    double torque = gas_mep_torque(10e5, 2e-3, 4);
    assert_near(torque, 159.15494, 1e-5, 0);
    assert_near(torque * 3000 * RPM, 50e3, 1e-6, 0);
    assert_near(gas_mep_torque(10e5, 2e-3, 2), 2 * torque, 1e-9, 0);
    double volume = 4 * M_PI / 4 * 0.09 * 0.09 * 0.1;
    assert_near(gas_torque_mep(120, volume, 4), 5.925926e5, 0, 1e-7);
    assert_near(gas_torque_mep(120, volume, 4), 5.93e5, 500, 0);
}

// E10: Gupta ex. 16.5: single 150 x 160 mm, 500 rpm; indicator diagram of 450 mm2 over 50 mm at
// 0.8333 bar/mm; brake 400 N on 2.2 m: IMEP 7.4997 bar, IP 8.835 kW, BP 7.333 kW, 83 %.
// E11: ex. 16.6: V8 80 x 100 mm, 4500 rpm, 40 kg x 9.81 on 0.55 m: 101.7 kW, 6.744 bar.
// E12: ex. 16.7: six 100 x 110 mm, 2500 rpm, W N / 20000 with 540 N: 67.5 kW, 6.250 bar.
static void test_gas_mep_e10_e12(void **state)
{
    (void)state;
    double imep = 450.0 / 50 * 0.8333e5, one = M_PI / 4 * 0.15 * 0.15 * 0.16, w = 500 * RPM;
    double ip = gas_mep_torque(imep, one, 4) * w, bp = 400 * 2.2 / (2 * M_PI) * w;
    assert_near(imep, 7.4997e5, 1, 0);
    assert_near(ip, 8835, 1, 0);
    assert_near(bp, 7333, 1, 0);
    assert_near(bp / ip, 0.83, 2e-3, 0);
    double v8 = 8 * M_PI / 4 * 0.08 * 0.08 * 0.1, torque = 40 * 9.81 * 0.55;
    assert_near(torque * 4500 * RPM, 101.7e3, 50, 0);
    assert_near(gas_torque_mep(torque, v8, 4), 6.744e5, 100, 0);
    double six = 6 * M_PI / 4 * 0.1 * 0.1 * 0.11, power = 540 * 2500 / 20000.0 * 1e3;
    assert_near(power, 67.5e3, 1e-6, 0);
    assert_near(power / (2500 * RPM), 257.831, 1e-3, 0);
    assert_near(gas_torque_mep(power / (2500 * RPM), six, 4), 6.250e5, 100, 0);
}

// E13: Gupta ex. 16.2, a gas engine that skips: 175 x 320 mm, 510 rpm, 55 fires a minute of 255
// cycles at gross 6.5 less pumping 0.4 bar, 200 dead cycles at 0.65 bar, no brake load: indicated
// 4.303851 kW, dead cycles 1.667662 kW, so friction 2.636189 kW; firing always 19.954218 kW, brake
// 17.32 kW, mechanical efficiency 86.79 %.
static void test_gas_mep_e13(void **state)
{
    (void)state;
    double volume = M_PI / 4 * 0.175 * 0.175 * 0.32, w = 510 * RPM;
    double fired = gas_mep_torque(6.1e5, volume, 4) * w * 55 / 255;
    double dead = gas_mep_torque(0.65e5, volume, 4) * w * 200 / 255;
    double all = gas_mep_torque(6.1e5, volume, 4) * w, friction = fired - dead;
    assert_near(fired, 4303.851, 1e-3, 0);
    assert_near(dead, 1667.662, 1e-3, 0);
    assert_near(friction, 2636.189, 1e-3, 0);
    assert_near(all, 19954.218, 1e-3, 0);
    assert_near(all - friction, 17320, 5, 0);
    assert_near((all - friction) / all, 0.8679, 1e-4, 0);
}

// E14: mean piston speed 2 S N: 86 mm at 6000 rpm: 17.2 m/s.
// E15: fmep 0.97 + 0.15 n + 0.05 n^2 bar (Heywood ch. 13 after Barnes-Moss, from memory): 1.17,
// 1.47, 1.87, 3.67 bar at 1, 2, 3, 6 krpm.
// E16: Chen and Flynn (SAE 650733, from memory): 0.137 + pmax/200 + 0.162 Sp bar: 80 bar and
// 10 m/s: 2.157 bar; a stroke of 100 mm turns at 3000 rpm then.
static void test_gas_friction_e14_e16(void **state)
{
    (void)state;
    assert_near(gas_piston_speed(0.086, 6000 * RPM), 17.2, 1e-12, 0);
    static const double row[][2] = {{1, 1.17}, {2, 1.47}, {3, 1.87}, {6, 3.67}};
    for (size_t i = 0; i < 4; i++)
        assert_near(gas_fmep(97e3, 15e3, 5e3, 0, row[i][0] * 1000 * RPM, 8e6), row[i][1] * 1e5,
                    1e-6, 0);
    assert_near(gas_piston_speed(0.1, 3000 * RPM), 10, 1e-12, 0);
    double per_krpm = 0.162e5 * gas_piston_speed(0.1, 1000 * RPM);
    assert_near(gas_fmep(0.137e5, per_krpm, 0, 1e6 / 200, 3000 * RPM, 80e5), 2.157e5, 1e-6, 0);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_gas_wiebe_e1_e4),      cmocka_unit_test(test_gas_wiebe_e2_e3),
        cmocka_unit_test(test_gas_burn_span),        cmocka_unit_test(test_gas_energy),
        cmocka_unit_test(test_gas_diesel_e6),        cmocka_unit_test(test_gas_woschni_e17),
        cmocka_unit_test(test_gas_orifice),          cmocka_unit_test(test_gas_mep_e8_e9),
        cmocka_unit_test(test_gas_mep_e10_e12),      cmocka_unit_test(test_gas_mep_e13),
        cmocka_unit_test(test_gas_friction_e14_e16),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
