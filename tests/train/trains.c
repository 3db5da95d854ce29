#include "trains.h"
#include "near.h"
#include <math.h>
#include <stdio.h>
#include <stdlib.h>

bench_train *bench_new(void)
{
    bench_train *b = calloc(1, sizeof *b);
    assert_non_null(b);
    b->d = tacet_train_default();
    b->d.nodes = b->node;
    b->d.links = b->link;
    b->d.dampers = b->damper;
    b->d.added_inertia_kgm2 = b->added;
    return b;
}

size_t bench_node(bench_train *b, double inertia_kgm2)
{
    size_t i = b->d.n_nodes++;
    assert_true(i < TRAINS_MOST);
    snprintf(b->name[i], sizeof b->name[i], "n%zu", i);
    b->node[i] = tacet_node_default();
    b->node[i].name = b->d.flywheel = b->name[i];
    b->node[i].inertia_kgm2 = inertia_kgm2;
    return i;
}

size_t bench_link(bench_train *b, size_t from, size_t to, double stiffness_Nm_per_rad)
{
    size_t i = b->d.n_links++;
    assert_true(i < TRAINS_MOST);
    char *name = b->name[TRAINS_MOST + i];
    snprintf(name, sizeof b->name[0], "l%zu", i);
    b->link[i] = tacet_link_default();
    b->link[i].name = name;
    b->link[i].from = b->node[from].name;
    b->link[i].to = b->node[to].name;
    b->link[i].stiffness_Nm_per_rad = stiffness_Nm_per_rad;
    return i;
}

bench_train *bench_chain(size_t n, const double *inertia_kgm2, const double *stiffness_Nm_per_rad)
{
    bench_train *b = bench_new();
    for (size_t i = 0; i < n; i++)
        bench_node(b, inertia_kgm2[i]);
    for (size_t i = 0; i + 1 < n; i++)
        bench_link(b, i, i + 1, stiffness_Nm_per_rad[i]);
    return b;
}

tacet_train *bench_create(bench_train *b)
{
    tacet_train *t = NULL;
    tacet_error e = {.text = ""};
    if (tacet_train_create(&b->d, &t, &e) != TACET_OK) fail_msg("%s", e.text);
    free(b);
    return t;
}

// Equal steps over a whole period: exact to rounding for a smooth periodic function.
double mean_reciprocating(double mass_kg, double stroke_m, double rod_m)
{
    double r = stroke_m / 2, sum = 0;
    int n = 720;
    for (int i = 0; i < n; i++) {
        double a = 2 * M_PI * i / n, s = r * sin(a);
        double v = s + s * r * cos(a) / sqrt(rod_m * rod_m - s * s);
        sum += mass_kg * v * v;
    }
    return sum / n;
}

bench_train *forwarder(void)
{
    static const double inertia[] = {0.110, 0.032, 0.058, 0.058, 0.058, 0.058,
                                     0.058, 0.058, 1.05,  0.12,  0.30};
    static const double stiffness[] = {1.15e5, 1.9e6,  1.55e6, 1.55e6, 1.55e6,
                                       1.55e6, 1.55e6, 2.2e6,  6.5e3,  9.0e4};
    static const double loss[] = {0.18, 0.01, 0.01, 0.01, 0.01, 0.01, 0.01, 0.01, 0.15, 0.02};
    bench_train *b = bench_chain(11, inertia, stiffness);
    for (int i = 0; i < 10; i++)
        b->link[i].loss_factor = loss[i];
    for (int i = 2; i < 8; i++)
        b->added[i] = mean_reciprocating(2.7, 0.130, 0.215);
    b->d.flywheel = b->node[8].name;
    b->d.load = b->node[10].name;
    b->d.lowest_hz = 0.5;
    b->d.highest_hz = 1200;
    return b;
}

bench_train *brush_truck(void)
{
    static const double inertia[] = {0.014, 0.006, 0.031, 0.031, 0.031, 0.031,
                                     0.155, 0.035, 0.030, 0.022, 9.6,   363.2};
    static const double stiffness[] = {5.2e4, 4.6e5, 5.2e5, 5.2e5, 5.2e5, 7.5e5,
                                       860,   1.4e4, 1.1e4, 1.7e4, 5.6e4};
    static const double loss[] = {0.16, 0.01, 0.01, 0.01, 0.01, 0.01, NAN, 0.02, 0.02, 0.02, 0.12};
    bench_train *b = bench_chain(12, inertia, stiffness);
    for (int i = 0; i < 11; i++)
        b->link[i].loss_factor = loss[i];
    b->link[6].damping_Nms_per_rad = 1.2;
    b->link[9].gear_ratio = 3.73;
    for (int i = 2; i < 6; i++)
        b->added[i] = 2 * mean_reciprocating(0.62, 0.092, 0.155);
    for (int i = 9; i < 12; i++)
        b->node[i].on = TACET_ON_OUTSIDE;
    b->d.flywheel = b->node[6].name;
    b->d.load = b->node[11].name;
    b->d.lowest_hz = 0.5;
    b->d.highest_hz = 2000;
    return b;
}
