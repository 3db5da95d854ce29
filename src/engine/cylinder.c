#include "cylinder.h"
#include <stdlib.h>
#include <string.h>

// Return of the pressure to the set one while a valve is open, per rad; corrects what the
// Runge-Kutta step leaves. Half a step's worth; any value well below 2 / step gives the same.
#define FOLLOW (0.5 * 180 / M_PI)

// What the accumulated terms are, in the order of their array.
enum { WORK, WALL, RING_J, RING_KG, VALVE_J, VALVE_KG, TERMS };

typedef struct { // a half in hand
    const cylinder *c;
    const cylinder_run *r;
    double mass_kg, energy_J;               // at its start
    double fuel_J, burn_from, burn_per_rad; // local angle; 1 / duration
    double c1_speed, burn_speed_per_Pa;     // Woschni: C1 Sp, and C2 Vd Tr / (pr Vr), 0 before burn
    double motored_Pa, motored_log, exponent;         // pr, ln Vr
    double valve_from, valve_per_rad, from_Pa, to_Pa; // set pressure
    double inflow_J_per_kg;                           // enthalpy of gas drawn in
    double most_kg, most_J; // drawn in when last no gas was out in the inlet port
    double coldest,
        hottest; // J/kg, enthalpy of gas in manifold and cylinder so far: bounds of that
    double manifold_h, wall_h, woschni_bore;
    bool open, inlet;
} half_state;

static cylinder_place place_at(const cylinder *c, double angle_rad)
{
    double x, dx, ddx;
    tacet_slider_at(&c->slider, angle_rad, &x, &dx, &ddx);
    double volume = c->clearance_m3 + c->piston_m2 * x;
    return (cylinder_place){.volume_m3 = volume,
                            .slope_m3 = c->piston_m2 * dx,
                            .wall_m2 =
                                2 * c->piston_m2 + M_PI * c->slider.bore_m * volume / c->piston_m2,
                            .log_volume = log(volume)};
}

cylinder cylinder_of(const tacet_engine_def *d)
{
    double r = d->stroke_m / 2, l = d->rod_length_m, e = d->pin_offset_m;
    double travel = sqrt((l + r) * (l + r) - e * e) - sqrt((l - r) * (l - r) - e * e);
    double piston = M_PI / 4 * d->bore_m * d->bore_m;
    return (cylinder){.gas = gas_default(),
                      .slider = {r, l, e, d->bore_m, d->reciprocating_mass_kg},
                      .piston_m2 = piston,
                      .swept_m3 = piston * travel,
                      .clearance_m3 = piston * travel / (d->compression_ratio - 1),
                      .intake_K = d->cycle.intake_temperature_K,
                      .exhaust_Pa = d->cycle.exhaust_Pa,
                      .wall_K = d->cycle.wall_temperature_K,
                      .blow_by_m2 = d->cycle.blow_by_area_m2,
                      .crankcase_Pa = d->cycle.crankcase_Pa,
                      .wall_factor = 1};
}

tacet_status cylinder_grid(cylinder *c, unsigned steps)
{
    size_t n = (size_t)720 * steps + 1;
    cylinder_place *place = malloc(n * sizeof *place);
    if (!place) return TACET_NO_MEMORY;
    for (size_t i = 0; i < n; i++)
        place[i] = place_at(c, M_PI * (double)i / (360.0 * steps));
    free(c->place);
    c->place = place;
    c->steps = steps;
    return TACET_OK;
}

// Volume flow through the rings about A sqrt(R T) at 1000 K, over that of the gas at top.
unsigned cylinder_steps(const cylinder *c, double lowest_rad_per_s)
{
    double flow_m3_per_s = c->blow_by_m2 * sqrt(c->gas.R_J_per_kgK * 1000);
    double leak = flow_m3_per_s / c->clearance_m3 * (M_PI / 180) / lowest_rad_per_s;
    if (!(leak <= STEPS_MOST * LEAK_A_STEP)) return 0;
    return leak > LEAK_A_STEP ? (unsigned)ceil(leak / LEAK_A_STEP) : 1;
}

void cylinder_clear(cylinder *c)
{
    free(c->place);
    c->place = NULL;
}

cylinder_gas cylinder_fill(const cylinder *c, double pressure_Pa, double temperature_K)
{
    double mass = pressure_Pa * c->clearance_m3 / (c->gas.R_J_per_kgK * temperature_K);
    return (cylinder_gas){.mass_kg = mass, .energy_J = mass * gas_u(&c->gas, temperature_K)};
}

double cylinder_stored(const cylinder *c, const cylinder_gas *g)
{
    return g->energy_J - g->mass_kg * gas_h(&c->gas, c->intake_K);
}

static double set_pressure(const half_state *s, double angle, double *slope)
{
    double y = (angle - s->valve_from) * s->valve_per_rad;
    *slope = 0;
    if (y >= 1) return s->to_Pa;
    double over = s->from_Pa - s->to_Pa;
    *slope = -6 * over * y * (1 - y) * s->valve_per_rad;
    return s->to_Pa + over * (1 - y * y * (3 - 2 * y));
}

typedef struct {
    double mass, u, T, p, e; // e = (gamma - 1) / (gamma0 - 1)
} gas_state;

static inline gas_state state_at(const half_state *s, const cylinder_place *at, double angle,
                                 const double a[TERMS])
{
    const gas_law *g = &s->c->gas;
    gas_state z = {.mass = s->mass_kg + a[VALVE_KG] - a[RING_KG]};
    double energy = s->energy_J - a[WORK] - a[WALL] - a[RING_J] + a[VALVE_J];
    if (s->fuel_J > 0)
        energy -= s->fuel_J * (1 - gas_burnt((angle - s->burn_from) * s->burn_per_rad));
    z.u = energy / z.mass;
    if (g->slope_per_K == 0) {
        z.e = 1;
        z.T = gas_T(g, z.u);
    } else {
        z.e = exp(-g->slope_per_K * z.u / g->R_J_per_kgK);
        z.T = g->T0_K + (g->gamma0 - 1) / g->slope_per_K * (1 - z.e);
    }
    z.p = z.mass * g->R_J_per_kgK * z.T / at->volume_m3;
    return z;
}

// W per rad of crank.
static inline double wall_heat(const half_state *s, const cylinder_place *at, const gas_state *z)
{
    double w = s->c1_speed;
    if (s->burn_speed_per_Pa > 0) {
        double over = z->p - s->motored_Pa * exp(s->exponent * (s->motored_log - at->log_volume));
        if (over > 0) w += s->burn_speed_per_Pa * over;
    }
    double h = s->woschni_bore * exp(0.8 * log(z->p * w) - 0.55 * log(z->T));
    return h * at->wall_m2 * (z->T - s->c->wall_K) / s->r->speed_rad_per_s;
}

// Mass (kg per rad, out) and enthalpy (J per rad) past the rings.
static inline void rings(const half_state *s, const gas_state *z, double *kg, double *joule)
{
    const cylinder *c = s->c;
    if (c->blow_by_m2 == 0) {
        *kg = *joule = 0;
    } else if (z->p >= c->crankcase_Pa) {
        *kg = c->blow_by_m2 / s->r->speed_rad_per_s *
              gas_orifice(&c->gas, z->p, z->T, c->crankcase_Pa);
        *joule = *kg * (z->u + c->gas.R_J_per_kgK * z->T);
    } else {
        *kg = -c->blow_by_m2 / s->r->speed_rad_per_s *
              gas_orifice(&c->gas, c->crankcase_Pa, c->wall_K, z->p);
        *joule = *kg * s->wall_h;
    }
}

// Flow through the valve that makes the pressure follow the set one. With pV = mRT and dE as above,
//   dm_v (h_v - u + cv T) = cv d(pV)/R + p dV + dQ + dm_b (h_b - u + cv T),
// m_v in through the valve, m_b out past the rings.
static inline void valve(const half_state *s, const cylinder_place *at, double angle,
                         const gas_state *z, const double *rate, double *kg, double *joule)
{
    const gas_law *g = &s->c->gas;
    double cv = g->R_J_per_kgK / ((g->gamma0 - 1) * z->e), slope;
    double set = set_pressure(s, angle, &slope);
    slope += FOLLOW * (set - z->p);
    double need = cv / g->R_J_per_kgK * (z->p * at->slope_m3 + at->volume_m3 * slope) + rate[WORK] +
                  rate[WALL] + rate[RING_J] + rate[RING_KG] * (cv * z->T - z->u);
    double h = z->u + g->R_J_per_kgK * z->T;
    if (need > 0 && s->inlet) h = s->inflow_J_per_kg;
    *kg = need / (h - z->u + cv * z->T);
    *joule = *kg * h;
}

static inline gas_state rates(const half_state *s, const cylinder_place *at, double angle,
                              const double a[TERMS], double rate[TERMS])
{
    gas_state z = state_at(s, at, angle, a);
    rate[WORK] = z.p * at->slope_m3;
    rate[WALL] = s->c->wall_factor == 0 ? 0 : s->c->wall_factor * wall_heat(s, at, &z);
    rings(s, &z, &rate[RING_KG], &rate[RING_J]);
    rate[VALVE_KG] = rate[VALVE_J] = 0;
    if (s->open) valve(s, at, angle, &z, rate, &rate[VALVE_KG], &rate[VALVE_J]);
    return z;
}

// One Runge-Kutta step of fourth order over places at[0..2]; returns the state at its start.
static gas_state step(const half_state *s, const cylinder_place at[3], double angle, double h,
                      const double a[TERMS], double end[TERMS])
{
    double k1[TERMS], k2[TERMS], k3[TERMS], k4[TERMS], b[TERMS];
    gas_state z = rates(s, &at[0], angle, a, k1);
    for (int i = 0; i < TERMS; i++)
        b[i] = a[i] + h / 2 * k1[i];
    rates(s, &at[1], angle + h / 2, b, k2);
    for (int i = 0; i < TERMS; i++)
        b[i] = a[i] + h / 2 * k2[i];
    rates(s, &at[1], angle + h / 2, b, k3);
    for (int i = 0; i < TERMS; i++)
        b[i] = a[i] + h * k3[i];
    rates(s, &at[2], angle + h, b, k4);
    for (int i = 0; i < TERMS; i++)
        end[i] = a[i] + h / 6 * (k1[i] + 2 * (k2[i] + k3[i]) + k4[i]);
    return z;
}

static void part_step(const half_state *s, double angle, double h, const double a[TERMS],
                      double end[TERMS])
{
    cylinder_place at[3];
    for (int i = 0; i < 3; i++)
        at[i] = place_at(s->c, angle + h / 2 * i);
    step(s, at, angle, h, a, end);
}

// A step while gas is out in the inlet port: it comes back first, with the enthalpy it took; the
// step is cut where the last of it is back (regula falsi on the part of the step). Where the flow
// turned within a step, what is left outside may be next to nothing, and its enthalpy over its mass
// anything: gas out there is no colder and no hotter than gas has been.
static gas_state port_step(half_state *s, const cylinder_place at[3], double angle, double h,
                           const double a[TERMS], double end[TERMS])
{
    double out = a[VALVE_KG] - s->most_kg, low = 0, high = 1, middle[TERMS];
    s->inflow_J_per_kg = fmin(fmax((a[VALVE_J] - s->most_J) / out, s->coldest), s->hottest);
    gas_state z = step(s, at, angle, h, a, end);
    double over = end[VALVE_KG] - s->most_kg, rest = over;
    if (over < 0) return z;
    for (int i = 0; i < 12 && fabs(rest) > 1e-15 * s->mass_kg; i++) {
        double part = low - out * (high - low) / (over - out);
        part_step(s, angle, part * h, a, middle);
        rest = middle[VALVE_KG] - s->most_kg;
        if (rest < 0)
            low = part, out = rest;
        else
            high = part, over = rest;
    }
    double part = rest < 0 ? low : high;
    part_step(s, angle, part * h, a, middle);
    s->inflow_J_per_kg = s->manifold_h;
    part_step(s, angle + part * h, (1 - part) * h, middle, end);
    return z;
}

// A step with the inlet open.
static gas_state inlet_step(half_state *s, const cylinder_place at[3], double angle, double h,
                            const double a[TERMS], double end[TERMS])
{
    bool out = a[VALVE_KG] < s->most_kg;
    gas_state z = out ? port_step(s, at, angle, h, a, end) : step(s, at, angle, h, a, end);
    double enthalpy = z.u + s->c->gas.R_J_per_kgK * z.T;
    s->coldest = fmin(s->coldest, enthalpy);
    s->hottest = fmax(s->hottest, enthalpy);
    if (end[VALVE_KG] >= s->most_kg) {
        s->most_kg = end[VALVE_KG];
        s->most_J = end[VALVE_J];
        s->inflow_J_per_kg = s->manifold_h;
    }
    return z;
}

static void open_valve(half_state *s, double angle, double from_Pa, double to_Pa, double span)
{
    s->open = true;
    s->valve_from = angle;
    s->valve_per_rad = 1 / span;
    s->from_Pa = from_Pa;
    s->to_Pa = to_Pa;
    s->c1_speed = GAS_WOSCHNI_OPEN / GAS_WOSCHNI_SHUT * s->c1_speed;
    s->burn_speed_per_Pa = 0;
}

static void shut_valve(half_state *s)
{
    if (s->open) s->c1_speed *= GAS_WOSCHNI_SHUT / GAS_WOSCHNI_OPEN;
    s->open = false;
}

static void start_burn(half_state *s, const cylinder_gas *g)
{
    s->burn_speed_per_Pa =
        GAS_WOSCHNI_BURN * s->c->swept_m3 * g->inlet_K / (g->inlet_Pa * g->inlet_m3);
    s->motored_Pa = g->inlet_Pa;
    s->motored_log = log(g->inlet_m3);
    s->exponent = g->exponent;
}

static half_state begin(const cylinder *c, const cylinder_run *r, cylinder_rule rule,
                        const cylinder_gas *g)
{
    double top = rule.up ? 2 * M_PI : 0;
    double sp = gas_piston_speed(2 * c->slider.crank_m, r->speed_rad_per_s);
    half_state s = {.c = c,
                    .r = r,
                    .mass_kg = g->mass_kg,
                    .energy_J = g->energy_J,
                    .fuel_J = rule.up ? 0 : g->fuel_J,
                    .burn_from = top + r->burn_start_rad,
                    .burn_per_rad = 1 / (r->burn_end_rad - r->burn_start_rad),
                    .c1_speed = GAS_WOSCHNI_SHUT * sp,
                    .manifold_h = gas_h(&c->gas, c->intake_K),
                    .wall_h = gas_h(&c->gas, c->wall_K),
                    .woschni_bore = 3.26 * pow(c->slider.bore_m, -0.2) * pow(1e-3, 0.8),
                    .inlet = rule.up};
    s.inflow_J_per_kg = s.coldest = s.hottest = s.manifold_h;
    if (s.fuel_J > 0) start_burn(&s, g);
    return s;
}

// The inlet has shut: fuel of a fire is in, and the motored line starts here.
static void inlet_shut(half_state *s, cylinder_rule rule, const cylinder_place *at,
                       const double a[TERMS], double angle, cylinder_gas *g, cylinder_half *out)
{
    shut_valve(s);
    gas_state z = state_at(s, at, angle, a);
    g->inlet_Pa = z.p, g->inlet_K = z.T, g->inlet_m3 = at->volume_m3;
    out->fresh_kg = a[VALVE_KG];
    if (!rule.fire || !(a[VALVE_KG] > 0)) return;
    out->fuel_J = g->fuel_J = s->r->heat_J_per_kg * a[VALVE_KG];
    s->fuel_J = g->fuel_J;
    s->energy_J += g->fuel_J;
}

static void burn_begins(half_state *s, const cylinder_place *at, const double a[TERMS],
                        double angle, cylinder_gas *g)
{
    gas_state z = state_at(s, at, angle, a);
    g->exponent = log(z.p / g->inlet_Pa) / (log(g->inlet_m3) - at->log_volume);
    start_burn(s, g);
}

double cylinder_peak(const double *p, size_t n)
{
    size_t k = 0;
    for (size_t i = 1; i < n; i++)
        if (p[i] > p[k]) k = i;
    if (k == 0 || k == n - 1) return p[k];
    double slope = (p[k + 1] - p[k - 1]) / 2, bend = p[k + 1] - 2 * p[k] + p[k - 1];
    return bend < 0 ? p[k] - slope * slope / (2 * bend) : p[k];
}

static bool finish(const half_state *s, const double a[TERMS], const cylinder_place *at,
                   double angle, cylinder_gas *g, cylinder_half *out)
{
    gas_state z = state_at(s, at, angle, a);
    out->pressure_Pa[CYLINDER_SAMPLES - 1] = z.p;
    out->work_J[1] = a[WORK] - out->work_J[0];
    out->wall_J = a[WALL];
    out->valve_J = a[VALVE_KG] * s->manifold_h - a[VALVE_J];
    out->ring_J = a[RING_J] - a[RING_KG] * s->manifold_h;
    unsigned bottom = CYLINDER_SAMPLES / 2;
    if (s->inlet) {
        out->peak_Pa = fmax(g->late_Pa, cylinder_peak(out->pressure_Pa, CYLINDER_SAMPLES));
        g->late_Pa = 0;
    } else {
        out->peak_Pa = cylinder_peak(out->pressure_Pa, bottom + 1);
        g->late_Pa = cylinder_peak(out->pressure_Pa + bottom, bottom + 1);
    }
    g->mass_kg = z.mass;
    g->energy_J = s->energy_J - a[WORK] - a[WALL] - a[RING_J] + a[VALVE_J];
    if (!s->inlet) g->fuel_J = 0;
    return isfinite(z.p) && z.p > 0 && z.mass > 0 && isfinite(out->peak_Pa);
}

bool cylinder_run_half(const cylinder *c, const cylinder_run *r, cylinder_rule rule,
                       cylinder_gas *gas, cylinder_half *out)
{
    unsigned steps = c->steps, n = 360 * steps, bottom = n / 2,
             valve_at = rule.up ? 0 : 140 * steps;
    double h = M_PI / (180.0 * steps), a[TERMS] = {0}, end[TERMS];
    half_state s = begin(c, r, rule, gas);
    out->fuel_J = out->fresh_kg = 0;
    for (unsigned i = 0; i < n; i++) {
        double angle = i * h;
        const cylinder_place *at = c->place + 2 * (size_t)i;
        if (rule.open && i == valve_at)
            open_valve(&s, angle, state_at(&s, at, angle, a).p,
                       rule.up ? r->manifold_Pa : c->exhaust_Pa,
                       rule.up ? INLET_SPAN : EXHAUST_SPAN);
        if (rule.up && i == bottom) inlet_shut(&s, rule, at, a, angle, gas, out);
        if (rule.up && s.fuel_J > 0 && s.burn_speed_per_Pa == 0 && angle >= s.burn_from)
            burn_begins(&s, at, a, angle, gas);
        gas_state z = s.open && s.inlet ? inlet_step(&s, at, angle, h, a, end)
                                        : step(&s, at, angle, h, a, end);
        if (i % steps == 0) out->pressure_Pa[i / steps] = z.p;
        memcpy(a, end, sizeof a);
        if (i + 1 == bottom) out->work_J[0] = a[WORK];
    }
    if (rule.up && s.fuel_J > 0 && s.burn_speed_per_Pa == 0) // it burns from top on or later
        burn_begins(&s, c->place + 2 * (size_t)n, a, n * h, gas);
    return finish(&s, a, c->place + 2 * (size_t)n, n * h, gas, out);
}
