#include "gas.h"

gas_law gas_default(void)
{
    return (gas_law){.R_J_per_kgK = 287, .gamma0 = 1.38, .slope_per_K = 0.08e-3, .T0_K = 300};
}

double gas_wiebe(double y, double a, double m)
{
    return y <= 0 ? 0 : -expm1(-a * pow(y, m + 1));
}

double gas_burnt(double y)
{
    if (y <= 0) return 0;
    if (y >= 1) return 1;
    return expm1(-GAS_WIEBE_A * y * y * y) / expm1(-GAS_WIEBE_A);
}

// y at which a share has burnt.
static double burnt_at(double share)
{
    return cbrt(-log1p(share * expm1(-GAS_WIEBE_A)) / GAS_WIEBE_A);
}

void gas_burn_span(double mid_rad, double from_10_to_90_rad, double *start_rad, double *end_rad)
{
    double duration = from_10_to_90_rad / (burnt_at(0.9) - burnt_at(0.1));
    *start_rad = mid_rad - burnt_at(0.5) * duration;
    *end_rad = *start_rad + duration;
}

double gas_woschni(double bore_m, double pressure_Pa, double T_K, double w_m_per_s)
{
    double log_wet = log(pressure_Pa * 1e-3 * w_m_per_s);
    return 3.26 * pow(bore_m, -0.2) * exp(0.8 * log_wet - 0.55 * log(T_K));
}

double gas_woschni_speed(double c1, double piston_speed, double c2, double swept_m3,
                         double reference_K, double reference_Pa, double reference_m3,
                         double over_motored_Pa)
{
    double over = over_motored_Pa > 0 ? over_motored_Pa : 0;
    return c1 * piston_speed + c2 * swept_m3 * reference_K / (reference_Pa * reference_m3) * over;
}

double gas_piston_speed(double stroke_m, double speed_rad_per_s)
{
    return stroke_m * speed_rad_per_s / M_PI;
}

// Isentropic nozzle, subsonic: ratio = down over up, not below the critical one. Flow function and
// its slope over the ratio.
static double subsonic(double gamma, double ratio, double *slope)
{
    double power = pow(ratio, 1 / gamma), over = gamma / (gamma - 1);
    double flow = sqrt(2 * over * power * (power - ratio));
    *slope = over * power * (2 * power / ratio - (gamma + 1)) / (gamma * flow);
    return flow;
}

// Parabola through rest, with the value and slope of the nozzle at its other end.
static double near_rest(double gamma, double ratio)
{
    double x = 1 - ratio, end = GAS_ORIFICE_REST, slope;
    double flow = subsonic(gamma, 1 - end, &slope);
    double a = 2 * flow / end + slope, b = -(slope * end + flow) / (end * end);
    return x * (a + b * x);
}

double gas_orifice(const gas_law *g, double up_Pa, double up_K, double down_Pa)
{
    double gamma = gas_gamma(g, up_K), ratio = down_Pa / up_Pa, flow, slope;
    double log_half = log(2 / (gamma + 1)), over = 1 / (gamma - 1);
    if (ratio <= exp(gamma * over * log_half))
        flow = sqrt(gamma) * exp(0.5 * (gamma + 1) * over * log_half);
    else if (ratio <= 1 - GAS_ORIFICE_REST)
        flow = subsonic(gamma, ratio, &slope);
    else
        flow = near_rest(gamma, ratio);
    return flow * up_Pa / sqrt(g->R_J_per_kgK * up_K);
}

double gas_mep_torque(double mep_Pa, double volume_m3, unsigned strokes)
{
    return mep_Pa * volume_m3 / (M_PI * strokes);
}

double gas_torque_mep(double torque_Nm, double volume_m3, unsigned strokes)
{
    return torque_Nm * M_PI * strokes / volume_m3;
}

double gas_fmep(double constant_Pa, double per_krpm_Pa, double per_krpm2_Pa, double per_mpa_peak_Pa,
                double speed_rad_per_s, double mean_peak_Pa)
{
    double krpm = speed_rad_per_s * 60 / (2 * M_PI) * 1e-3;
    return constant_Pa + per_krpm_Pa * krpm + per_krpm2_Pa * krpm * krpm +
           per_mpa_peak_Pa * mean_peak_Pa * 1e-6;
}
