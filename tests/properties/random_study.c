#include "random_study.h"
#include "random_train.h"
#include <stdlib.h>
#include <string.h>

#define DEG (M_PI / 180)

// ---- engine -------------------------------------------------------------------------------------

static void draw_geometry(chance *c, plan *p)
{
    p->bore_mm = chance_log(c, 50, 250);
    p->stroke_mm = p->bore_mm * chance_between(c, 0.8, 1.6);
    p->rod_mm = p->stroke_mm / 2 * chance_between(c, 2.6, 5);
    p->offset_mm = chance_of(c, 0.3) ? p->bore_mm * chance_between(c, -0.04, 0.04) : 0;
    p->mass_kg = chance_between(c, 500, 1800) * pow(p->bore_mm * 1e-3, 3);
    p->compression = chance_between(c, 8.5, 16);
    p->mid_burn_deg = chance_between(c, 4, 16);
    p->burn_deg = chance_between(c, 12, 40);
    p->highest_kpa = chance_between(c, 90, 220);
    p->by_fuel = chance_of(c, 0.25);
    p->trapped = (const char *[]){"residual", "burnt", "air", "open"}[chance_below(c, 4)];
    p->counterclockwise = chance_of(c, 0.5);
    p->rpm = fmin(fmax(chance_between(c, 3, 12) * 30e3 / p->stroke_mm, 200), 6000);
}

static void draw_firing(chance *c, plan *p)
{
    unsigned n = p->cylinders = 1 + chance_below(c, 12);
    double sum = 0;
    for (unsigned i = 0; i < n; i++) {
        p->order[i] = i + 1;
        p->factor[i + 1] = chance_of(c, 0.1) ? chance_between(c, 0.9, 1) : 1;
    }
    chance_permute(c, p->order, n);
    p->even = n == 1 || chance_of(c, 0.6);
    for (unsigned i = 0; i < n; i++)
        sum += p->interval[i] = p->even ? 1 : chance_between(c, 0.5, 2);
    for (unsigned i = 0; i < n; i++)
        p->interval[i] = p->even ? 720.0 / n : round(720 * p->interval[i] / sum * 10) / 10;
    double rest = 720;
    for (unsigned i = 0; i + 1 < n; i++)
        rest -= p->interval[i];
    if (!p->even) p->interval[n - 1] = rest;
}

// Cylinders alone on their throws, in pairs, or all on one; banks as their common pin asks for.
static unsigned draw_throws(chance *c, plan *p)
{
    unsigned n = p->cylinders, on = (unsigned[]){1, 1, 2, n}[chance_below(c, 4)];
    double pin[PLAN_CYLINDERS], angle = 0;
    for (unsigned i = 0; i < (n + on - 1) / on; i++)
        pin[i] = NAN;
    for (unsigned slot = 0; slot < n; slot++) {
        unsigned number = p->order[slot], node = (number - 1) / on;
        p->node[number] = node;
        if (isnan(pin[node])) pin[node] = -angle; // this one stands upright
        double bank = p->counterclockwise ? pin[node] + angle : -(pin[node] + angle);
        p->bank[number] = remainder(bank, 360);
        angle += p->interval[slot];
    }
    return (n + on - 1) / on;
}

static void draw_word(chance *c, plan *p)
{
    unsigned length = 1 + chance_below(c, 9);
    tacet_pattern pattern;
    tacet_roll *roll = NULL;
    p->longest_run = 99;
    while (p->longest_run > 6) {
        for (unsigned i = 0; i < length; i++)
            p->word[i] = chance_of(c, 0.6)   ? 'x'
                         : chance_of(c, 0.9) ? '.'
                                             : (char)('6' + (int)chance_below(c, 4));
        p->word[chance_below(c, length)] = 'x';
        p->word[length] = '\0';
        if (tacet_pattern_parse(p->word, &pattern, NULL) != TACET_OK ||
            tacet_roll_create(&pattern, p->cylinders, 4, &roll, NULL) != TACET_OK)
            abort();
        p->longest_run = roll->longest_run > 1 ? roll->longest_run : 1;
        tacet_roll_destroy(roll);
    }
}

// ---- train --------------------------------------------------------------------------------------

static size_t link_of(chance *c, bench_train *b, size_t from, size_t to, double stiffness)
{
    size_t i =
        chance_of(c, 0.5) ? bench_link(b, from, to, stiffness) : bench_link(b, to, from, stiffness);
    unsigned kind = chance_below(c, 3);
    if (kind == 0) b->link[i].damping_ratio = chance_log(c, 0.003, 0.05);
    if (kind > 0) b->link[i].loss_factor = chance_log(c, 0.005, 0.2);
    return i;
}

// A shaft that puts `inertia` behind `node` with a mode near `hz`, perhaps through a gear.
static size_t add_behind(chance *c, bench_train *b, size_t node, double inertia, double hz)
{
    double ratio = 1;
    if (chance_of(c, 0.4)) ratio = chance_log(c, 0.4, 3) * (chance_of(c, 0.3) ? -1 : 1);
    size_t end = bench_node(b, inertia / (ratio * ratio));
    size_t i = link_of(c, b, node, end, inertia / (ratio * ratio) * pow(2 * M_PI * hz, 2));
    bool from = b->link[i].from == b->node[end].name;
    if (ratio != 1) b->link[i].gear_ratio = from ? ratio : 1 / ratio;
    if (chance_of(c, 0.3)) b->node[end].damping_Nms_per_rad = 0.02 * inertia * hz;
    if (chance_of(c, 0.7)) b->node[end].on = TACET_ON_OUTSIDE;
    return end;
}

static void draw_train(chance *c, plan *p, unsigned throws, double work_J)
{
    bench_train *b = p->train = bench_new();
    double r = p->stroke_mm / 2e3, W = p->rpm * 2 * M_PI / 60;
    double piston = p->mass_kg * r * r * p->cylinders / throws;
    double wheel = work_J / (chance_log(c, 0.01, 0.06) * W * W);
    for (unsigned i = 0; i < throws; i++) {
        bench_node(b, piston * chance_between(c, 0.8, 3));
        double k = 2 * piston * pow(throws * 2 * M_PI * chance_between(c, 80, 250), 2);
        if (i > 0) link_of(c, b, i - 1, i, k);
    }
    for (unsigned i = 0; i < throws; i++)
        if (chance_of(c, 0.1)) // a branch off the crank
            add_behind(c, b, i, piston * 0.3, chance_between(c, 60, 400));
    size_t fly = bench_node(b, wheel);
    link_of(c, b, throws - 1, fly, piston * pow(throws * 2 * M_PI * chance_between(c, 80, 250), 2));
    size_t end = fly;
    for (unsigned i = chance_below(c, 4); i > 0; i--)
        end = add_behind(c, b, chance_of(c, 0.8) ? end : fly, wheel * chance_log(c, 0.1, 3),
                         chance_log(c, 4, 60));
    b->d.flywheel = b->node[fly].name;
    b->d.load = b->node[end].name;
    p->first_link = b->link[0].name;
    p->last_link = b->link[b->d.n_links - 1].name;
    if (chance_of(c, 0.4)) {
        b->damper[b->d.n_dampers++] =
            (tacet_damper_def){.name = "rubber",
                               .node = b->node[0].name,
                               .ring_inertia_kgm2 = piston * chance_between(c, 0.5, 2),
                               .tuned_hz = chance_between(c, 80, 300),
                               .loss_factor = chance_between(c, 0.05, 0.25)};
    }
}

void random_plan(chance c, plan *p)
{
    memset(p, 0, sizeof *p);
    draw_geometry(&c, p);
    draw_firing(&c, p);
    unsigned throws = draw_throws(&c, p);
    draw_word(&c, p);
    double litres = M_PI / 4 * pow(p->bore_mm * 1e-3, 2) * p->stroke_mm * p->cylinders; // dm3
    p->demand_Nm = chance_between(&c, 50, 600) * litres / (4 * M_PI);
    draw_train(&c, p, throws, fmax(p->demand_Nm * 4 * M_PI, 200 * litres));
}

// ---- text ---------------------------------------------------------------------------------------

static void write_engine(const plan *p, trial *t)
{
    trial_write(t,
                "engine:\n  strokes: 4\n  rotation: %s\n  bore_mm: %.17g\n  stroke_mm: %.17g\n"
                "  rod_length_mm: %.17g\n  pin_offset_mm: %.17g\n  compression_ratio: %.17g\n"
                "  reciprocating_mass_kg: %.17g\n  firing_order: [",
                p->counterclockwise ? "counterclockwise" : "clockwise", p->bore_mm, p->stroke_mm,
                p->rod_mm, p->offset_mm, p->compression, p->mass_kg);
    for (unsigned i = 0; i < p->cylinders; i++)
        trial_write(t, "%s%u", i ? ", " : "", p->order[i]);
    trial_write(t, "]\n");
    if (!p->even) trial_write(t, "  firing_intervals_deg: [");
    for (unsigned i = 0; i < p->cylinders && !p->even; i++)
        trial_write(t, "%s%.17g", i ? ", " : "", p->interval[i]);
    trial_write(t, "%s  cylinders:\n", p->even ? "" : "]\n");
    for (unsigned k = 1; k <= p->cylinders; k++)
        trial_write(t, "    - {number: %u, node: %s, bank_deg: %.17g, charge_factor: %.17g}\n", k,
                    p->train->node[p->node[k]].name, p->bank[k], p->factor[k]);
}

void plan_write(const plan *p, trial *t)
{
    trial_write(t, "title: random\n");
    write_engine(p, t);
    trial_write(t,
                "cycle:\n  load_by: %s\n  mid_burn_deg: %.17g\n  burn_10_90_deg: %.17g\n"
                "  fuel: {air_fuel_ratio: %s}\n  manifold_kpa: {lowest: 20, highest: %.17g}\n"
                "skip: {trapped: %s, longest_run: %u}\n",
                p->by_fuel ? "fuel" : "charge", p->mid_burn_deg, p->burn_deg,
                p->by_fuel ? "18" : "14.6", p->highest_kpa, p->trapped, p->longest_run);
    random_train_write(t, p->train);
    double f = p->rpm / 60;
    trial_write(t,
                "bands:\n  - {name: low, kind: mount, low_hz: %.17g, high_hz: %.17g, "
                "quantity: roll-torque, limit_rms: 100}\n",
                0.4 * f, 2.2 * f);
    trial_write(t,
                "  - {name: high, kind: crank, low_hz: %.17g, high_hz: %.17g, quantity: "
                "\"link-torque:%s\", limit_rms: 100}\n",
                2 * f, 7 * f, p->first_link);
    trial_write(t,
                "limits:\n  - {name: swing, quantity: irregularity, value: 0.1}\n"
                "  - {name: twist, quantity: \"link-torque:%s\", statistic: half_range, "
                "value: 1000}\n",
                p->last_link);
    trial_write(t,
                "screen: {speeds_rpm: [%.17g], brake_torque_nm: %.17g, densities: {longest: 9, "
                "lowest: 1/1}}\n",
                p->rpm, p->demand_Nm);
}
