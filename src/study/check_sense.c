// Magnitudes that are unusual: said as warnings, with what is usual. Common practice, no source.
#include "check.h"
#include <math.h>
#include <string.h>

#define RPM             (2 * M_PI / 60)
#define HIGH_BMEP_PA    35e5 // above highly boosted engines in series
#define HIGH_PISTON_M_S 25.0 // mean; above engines for racing
#define THROW_LEAST     0.5  // inertia of a throw over m r^2 of the pistons that it carries
#define THROW_MOST      300.0
#define TOTAL_LEAST     3.0 // inertia of the whole train over m r^2 of all pistons
#define TOTAL_MOST      1e6

static double displacement_m3(const tacet_engine_def *e)
{
    return M_PI / 4 * e->bore_m * e->bore_m * e->stroke_m * (double)e->n_cylinders;
}

// Work of a cycle over the displacement: 2 pi T strokes/2 / V_d.
static void check_bmep(checker *c)
{
    const tacet_engine_def *e = &c->study->engine;
    const tacet_screen_def *d = &c->study->screen;
    double torque = 0, rpm = 0;
    for (size_t i = 0; i < d->n_speeds; i++) {
        double speed = d->speeds_rad_per_s[i] / RPM,
               here = tacet_curve_at(&d->brake_torque_Nm, speed);
        if (here <= torque) continue;
        torque = here;
        rpm = speed;
    }
    double bmep = 2 * M_PI * torque * e->strokes / 2 / displacement_m3(e);
    char n[TACET_NUMBER_TEXT], t[TACET_NUMBER_TEXT], bar[TACET_NUMBER_TEXT], v[TACET_NUMBER_TEXT];
    if (!(bmep > HIGH_BMEP_PA)) return;
    check_say(c, true, "screen.brake_torque_nm",
              "brake_torque_nm: %s N m at %s rpm is a brake mean effective pressure of %s bar from "
              "%s litres; above %d bar is unusual",
              tacet_number_format_short(torque, 4, t), tacet_number_format_short(rpm, 4, n),
              tacet_number_format_short(bmep / 1e5, 3, bar),
              tacet_number_format_short(displacement_m3(e) * 1e3, 3, v), (int)(HIGH_BMEP_PA / 1e5));
}

static void check_piston_speed(checker *c)
{
    const tacet_engine_def *e = &c->study->engine;
    const tacet_screen_def *d = &c->study->screen;
    double fastest = 0;
    for (size_t i = 0; i < d->n_speeds; i++)
        fastest = fmax(fastest, d->speeds_rad_per_s[i]);
    double mean = 2 * e->stroke_m * fastest / (2 * M_PI);
    char n[TACET_NUMBER_TEXT], v[TACET_NUMBER_TEXT];
    if (!(mean > HIGH_PISTON_M_S)) return;
    check_say(c, true, "screen.speeds_rpm",
              "speeds_rpm: at %s rpm the pistons move at %s m/s in the mean; above %d m/s is "
              "unusual",
              tacet_number_format_short(fastest / RPM, 5, n), tacet_number_format_short(mean, 3, v),
              (int)HIGH_PISTON_M_S);
}

// ---- inertia against that of the pistons, m r^2, which grows with the engine's size as inertia
// does
static bool drives(const tacet_engine_def *e, unsigned number, const char *node)
{
    char own[32];
    for (size_t i = 0; i < e->n_cylinder_defs; i++)
        if (e->cylinders[i].number == number && e->cylinders[i].node)
            return strcmp(e->cylinders[i].node, node) == 0;
    return strcmp(tacet_text(own, sizeof own, "throw%u", number), node) == 0;
}

static unsigned pistons_on(const tacet_engine_def *e, const char *node)
{
    unsigned n = 0;
    for (size_t i = 0; i < e->n_cylinders; i++)
        n += drives(e, e->firing_order[i], node);
    return n;
}

static void say_inertia(checker *c, const char *path, const char *what, double inertia,
                        double pistons, double least, double most)
{
    char j[TACET_NUMBER_TEXT], low[TACET_NUMBER_TEXT], high[TACET_NUMBER_TEXT];
    if (inertia >= least * pistons && inertia <= most * pistons) return;
    check_say(c, true, path, "%s %s kg m2; %s to %s kg m2 is usual with these pistons and stroke",
              what, tacet_number_format_short(inertia, 3, j),
              tacet_number_format_short(least * pistons, 2, low),
              tacet_number_format_short(most * pistons, 2, high));
}

static void check_inertia(checker *c)
{
    const tacet_engine_def *e = &c->study->engine;
    const tacet_train_def *t = &c->study->train;
    double radius = e->stroke_m / 2, piston = e->reciprocating_mass_kg * radius * radius;
    double total = 0;
    char path[64];
    for (size_t i = 0; i < t->n_nodes; i++) {
        unsigned n = pistons_on(e, t->nodes[i].name);
        total += t->nodes[i].inertia_kgm2;
        if (n == 0) continue;
        tacet_text(path, sizeof path, "train.nodes[%zu].inertia_kgm2", i);
        say_inertia(c, path, "inertia_kgm2: a throw of", t->nodes[i].inertia_kgm2, n * piston,
                    THROW_LEAST, THROW_MOST);
    }
    double all = piston * (double)e->n_cylinders;
    say_inertia(c, "train.nodes", "nodes: the whole train comes to", total + all / 2, all,
                TOTAL_LEAST, TOTAL_MOST);
}

void check_sense(checker *c)
{
    bool engine = !fill_is_wrong(c->f, "engine"), train = !fill_is_wrong(c->f, "train");
    bool speeds = !fill_is_wrong(c->f, "screen.speeds_rpm");
    if (!engine) return;
    if (speeds && !fill_is_wrong(c->f, "screen.brake_torque_nm")) check_bmep(c);
    if (speeds) check_piston_speed(c);
    if (train) check_inertia(c);
}
