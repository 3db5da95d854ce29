// Laws of the gas in a cylinder: state, burning, wall heat, flow past the rings. Private to engine.
#ifndef ENGINE_GAS_H
#define ENGINE_GAS_H
#include <math.h>
#include <stdbool.h>

// ---- state ------------------------------------------------------------------------------------
// One ideal gas for charge, burnt gas and what leaks, with a ratio of specific heats that falls
// linearly with temperature: gamma = 1.38 - 0.08 (T - 300 K) / 1000 K (Gatowski et al., SAE 841359,
// from memory). Internal energy follows in closed form, u = integral of R / (gamma - 1) dT:
//   u = -(R / s) ln(1 - s (T - T0) / (gamma0 - 1)),   s = slope per K, u(T0) = 0,
// and inverts to gamma - 1 = (gamma0 - 1) exp(-s u / R). s -> 0: u = R (T - T0) / (gamma0 - 1).
typedef struct {
    double R_J_per_kgK, gamma0, slope_per_K, T0_K;
} gas_law;
gas_law gas_default(void);

static inline double gas_gamma(const gas_law *g, double T_K)
{
    return g->gamma0 - g->slope_per_K * (T_K - g->T0_K);
}

static inline double gas_u(const gas_law *g, double T_K) // J/kg
{
    double dT = T_K - g->T0_K, a = g->gamma0 - 1;
    if (g->slope_per_K == 0) return g->R_J_per_kgK * dT / a;
    return -g->R_J_per_kgK / g->slope_per_K * log1p(-g->slope_per_K * dT / a);
}

static inline double gas_T(const gas_law *g, double u_J_per_kg) // K
{
    double a = g->gamma0 - 1;
    if (g->slope_per_K == 0) return g->T0_K + u_J_per_kg * a / g->R_J_per_kgK;
    return g->T0_K - a / g->slope_per_K * expm1(-g->slope_per_K * u_J_per_kg / g->R_J_per_kgK);
}

static inline double gas_h(const gas_law *g, double T_K) // J/kg
{
    return gas_u(g, T_K) + g->R_J_per_kgK * T_K;
}

// ---- burning ----------------------------------------------------------------------------------
// Wiebe: burnt share 1 - exp(-a y^(m+1)) of the burn duration y in 0..1.
double gas_wiebe(double y, double a, double m);
// The burn law of this program: a = 6.908 (99.9 % at y = 1), m = 2, divided by its value at y = 1
// so that all fuel burns.
#define GAS_WIEBE_A 6.908
#define GAS_WIEBE_M 2.0
double gas_burnt(double y); // 0 below y = 0, 1 above y = 1
// Start and end of the burn (rad after top) of its middle and its 10-90 % duration.
void gas_burn_span(double mid_rad, double from_10_to_90_rad, double *start_rad, double *end_rad);
// The burn must start after the inlet has shut and end before the exhaust opens.
#define GAS_BURN_EARLIEST (150 * M_PI / 180) // before top
#define GAS_BURN_LATEST   (140 * M_PI / 180) // after top

// ---- wall heat --------------------------------------------------------------------------------
// Woschni's heat transfer coefficient, W/(m2 K), with the exponent -0.55 of temperature (Heywood,
// Internal Combustion Engine Fundamentals, eq. 12.51, from memory; other prints have -0.53):
//   h = 3.26 B^-0.2 p^0.8 T^-0.55 w^0.8, p in kPa
//   w = C1 Sp + C2 Vd Tr / (pr Vr) (p - pm)
double gas_woschni(double bore_m, double pressure_Pa, double T_K, double w_m_per_s);
#define GAS_WOSCHNI_OPEN 6.18    // C1 while a valve is open
#define GAS_WOSCHNI_SHUT 2.28    // C1 otherwise
#define GAS_WOSCHNI_BURN 3.24e-3 // C2 from the start of the burn, m/(s K)
// Per K of (p - pm)/pr: C2 Vd Tr / Vr.
double gas_woschni_speed(double c1, double piston_speed, double c2, double swept_m3,
                         double reference_K, double reference_Pa, double reference_m3,
                         double over_motored_Pa);
double gas_piston_speed(double stroke_m, double speed_rad_per_s); // mean, 2 S N

// ---- flow through an orifice ------------------------------------------------------------------
// Mass flow per effective area, kg/(s m2), from upstream (p, T) to a lower pressure: isentropic
// nozzle, choked below the critical ratio. Within GAS_ORIFICE_REST of equal pressures the root law,
// which has no finite slope at rest, gives way to a parabola through rest that joins it with value
// and slope: slow flow past rings is laminar, and a table interpolates it well.
#define GAS_ORIFICE_REST 0.05
double gas_orifice(const gas_law *g, double up_Pa, double up_K, double down_Pa);

// ---- mean effective pressure ------------------------------------------------------------------
// Torque that does the work mep * volume once a working cycle, and the other way.
double gas_mep_torque(double mep_Pa, double volume_m3, unsigned strokes);
double gas_torque_mep(double torque_Nm, double volume_m3, unsigned strokes);
double gas_fmep(double constant_Pa, double per_krpm_Pa, double per_krpm2_Pa, double per_mpa_peak_Pa,
                double speed_rad_per_s, double mean_peak_Pa);

#endif
