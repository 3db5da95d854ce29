#include "random_train.h"
#include <stdio.h>
#include <string.h>

static void damp(chance *c, const train_wish *wish, tacet_link_def *l)
{
    unsigned kind = chance_below(c, wish->damped ? 4 : 5);
    double loss = chance_log(c, 1e-3, 1);
    if (kind == 0) l->damping_ratio = chance_log(c, 1e-3, 0.3);
    if (kind == 1) // of a critical damping of the link on a middling inertia
        l->damping_Nms_per_rad =
            chance_log(c, 1e-3, 0.3) * sqrt(l->stiffness_Nm_per_rad * chance_log(c, 0.01, 1));
    if (kind == 2 || kind == 3) l->loss_factor = loss;
    if (kind == 3 && !wish->marched) l->loss_law = TACET_LOSS_CONSTANT;
    if (kind == 3 && wish->marched) l->at_hz = chance_log(c, 1, 1000);
}

static void add_link(chance *c, const train_wish *wish, bench_train *b, size_t node)
{
    size_t other = chance_of(c, 0.6) ? node - 1 : chance_below(c, (unsigned)node);
    double soft = wish->marched ? 1e3 : 1e2, hard = wish->marched ? 1e6 : 1e8;
    bool turned = chance_of(c, 0.5);
    size_t i =
        bench_link(b, turned ? node : other, turned ? other : node, chance_log(c, soft, hard));
    damp(c, wish, &b->link[i]);
    if (chance_of(c, 0.25))
        b->link[i].gear_ratio = chance_log(c, 0.2, 5) * (chance_of(c, 0.5) ? -1 : 1);
}

static void add_damper(chance *c, bench_train *b)
{
    static const char *const names[] = {"ring0", "ring1"};
    size_t i = b->d.n_dampers++, on = chance_below(c, (unsigned)b->d.n_nodes);
    b->damper[i] = (tacet_damper_def){.name = names[i],
                                      .node = b->node[on].name,
                                      .ring_inertia_kgm2 = chance_log(c, 0.01, 0.3),
                                      .tuned_hz = chance_between(c, 20, 300),
                                      .loss_factor = chance_between(c, 0.02, 0.3)};
}

bench_train *random_train(chance c, const train_wish *wish)
{
    bench_train *b = bench_new();
    unsigned n = 1 + chance_below(&c, wish->most_nodes);
    for (unsigned i = 0; i < n; i++) {
        bench_node(b, chance_log(&c, wish->marched ? 0.02 : 1e-3, wish->marched ? 2 : 50));
        if (chance_of(&c, 0.2)) b->node[i].damping_Nms_per_rad = chance_log(&c, 1e-3, 10);
        if (chance_of(&c, 0.3)) b->node[i].on = TACET_ON_OUTSIDE;
        if (i > 0) add_link(&c, wish, b, i);
    }
    for (unsigned k = chance_below(&c, 3); k > 0; k--)
        add_damper(&c, b);
    b->d.flywheel = b->node[chance_below(&c, n)].name;
    b->d.load = chance_of(&c, 0.2) ? NULL : b->node[chance_below(&c, n)].name;
    b->d.lowest_hz = 0.5;
    b->d.highest_hz = 4000;
    return b;
}

static void write_number(trial *t, const char *key, double value)
{
    if (!isnan(value)) trial_write(t, ", %s: %.17g", key, value);
}

static void write_link(trial *t, const tacet_link_def *l)
{
    trial_write(t, "    - {name: %s, from: %s, to: %s", l->name, l->from, l->to);
    write_number(t, "stiffness_nm_per_rad", l->stiffness_Nm_per_rad);
    write_number(t, "damping_nms_per_rad", l->damping_Nms_per_rad);
    write_number(t, "damping_ratio", l->damping_ratio);
    write_number(t, "loss_factor", l->loss_factor);
    write_number(t, "at_hz", l->at_hz);
    if (l->loss_law == TACET_LOSS_CONSTANT) trial_write(t, ", loss_law: constant");
    if (l->gear_ratio != 1) write_number(t, "gear_ratio", l->gear_ratio);
    trial_write(t, "}\n");
}

void random_train_write(trial *t, const bench_train *b)
{
    trial_write(t, "train:\n  nodes:\n");
    for (size_t i = 0; i < b->d.n_nodes; i++) {
        const tacet_node_def *node = &b->node[i];
        trial_write(t, "    - {name: %s, inertia_kgm2: %.17g, damping_nms_per_rad: %.17g%s}\n",
                    node->name, node->inertia_kgm2, node->damping_Nms_per_rad,
                    node->on == TACET_ON_OUTSIDE ? ", on: outside" : "");
    }
    if (b->d.n_links) trial_write(t, "  links:\n");
    for (size_t i = 0; i < b->d.n_links; i++)
        write_link(t, &b->link[i]);
    if (b->d.n_dampers) trial_write(t, "  dampers:\n");
    for (size_t i = 0; i < b->d.n_dampers; i++)
        trial_write(t,
                    "    - {name: %s, node: %s, ring_inertia_kgm2: %.17g, tuned_hz: %.17g, "
                    "loss_factor: %.17g}\n",
                    b->damper[i].name, b->damper[i].node, b->damper[i].ring_inertia_kgm2,
                    b->damper[i].tuned_hz, b->damper[i].loss_factor);
    trial_write(t, "  flywheel: %s\n", b->d.flywheel);
    if (b->d.load) trial_write(t, "  load: %s\n", b->d.load);
}
