#include "bodies.h"
#include "near.h"
#include <math.h>
#include <string.h>

// Definitions hold pointers to data that are only read.
#define LEND(type, array) ((type *)(uintptr_t)(array))
static const double zero;

static tacet_curve number(const double *y)
{
    return (tacet_curve){LEND(double, &zero), LEND(double, y), 1};
}

void bench_body_new(bench_body *b, double mass_kg, tacet_inertia_def inertia)
{
    memset(b, 0, sizeof *b);
    b->def = tacet_body_default();
    b->def.mass_kg = mass_kg;
    b->def.inertia_kgm2 = inertia;
    b->def.mounts = b->mount;
    b->def.crank_axis_m = b->crank_axis;
    b->def.n_crank_axis = 3;
}

void bench_mount(bench_body *b, const char *name, const double at[3], const double stiffness[3])
{
    size_t i = b->def.n_mounts++;
    memcpy(b->at[i], at, sizeof b->at[i]);
    memcpy(b->stiffness[i], stiffness, sizeof b->stiffness[i]);
    b->mount[i] = (tacet_mount_def){.name = name,
                                    .at_m = b->at[i],
                                    .n_at = 3,
                                    .x_N_per_m = number(&b->stiffness[i][0]),
                                    .y_N_per_m = number(&b->stiffness[i][1]),
                                    .z_N_per_m = number(&b->stiffness[i][2]),
                                    .static_x_N_per_m = NAN,
                                    .static_y_N_per_m = NAN,
                                    .static_z_N_per_m = NAN,
                                    .loss_factor = number(&b->loss)};
}

void bench_turn(bench_body *b, size_t mount, double x, double y, double z)
{
    const double turned[3] = {x, y, z};
    memcpy(b->turned[mount], turned, sizeof turned);
    b->mount[mount].turned_rad = b->turned[mount];
    b->mount[mount].n_turned = 3;
}

void forwarder_body(bench_body *b)
{
    bench_body_new(b, 860, (tacet_inertia_def){46, 150, 132, 0, 0, 0});
    b->loss = 0.12;
    const double front[3] = {320e3, 220e3, 540e3}, rear[3] = {360e3, 260e3, 660e3};
    bench_mount(b, "front-left", (double[]){-0.420, -0.360, -0.220}, front);
    bench_mount(b, "front-right", (double[]){-0.420, 0.360, -0.220}, front);
    bench_mount(b, "rear-left", (double[]){0.520, -0.400, -0.120}, rear);
    bench_mount(b, "rear-right", (double[]){0.520, 0.400, -0.120}, rear);
}

void brush_truck_body(bench_body *b)
{
    bench_body_new(b, 285, (tacet_inertia_def){14, 27, 24, 0, -1.2, 0});
    b->loss = 0.10;
    const double front[3] = {100e3, 80e3, 230e3}, rear[3] = {110e3, 90e3, 190e3};
    bench_mount(b, "left", (double[]){-0.200, -0.290, -0.050}, front);
    bench_mount(b, "right", (double[]){-0.200, 0.290, -0.050}, front);
    bench_mount(b, "rear", (double[]){0.550, 0, -0.140}, rear);
}

tacet_engine_def plain_single(void)
{
    static const unsigned order[] = {1};
    tacet_engine_def d = tacet_engine_default();
    d.bore_m = 0.1, d.stroke_m = 0.1, d.rod_length_m = 0.2;
    d.compression_ratio = 10, d.reciprocating_mass_kg = 1;
    d.firing_order = LEND(unsigned, order), d.n_cylinders = 1;
    return d;
}

tacet_body *body_of(const bench_body *b, const tacet_engine_def *engine)
{
    tacet_engine_def d = engine ? *engine : plain_single();
    tacet_engine *en = NULL;
    tacet_body *body = NULL;
    tacet_error e;
    if (tacet_engine_create(&d, &en, &e) != TACET_OK ||
        tacet_body_create(&b->def, en, &body, &e) != TACET_OK)
        fail_msg("%s", e.text);
    tacet_engine_destroy(en);
    return body;
}
