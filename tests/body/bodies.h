// Bodies for tests: those of the demo studies (invented data) and of published cases.
#ifndef TEST_BODIES_H
#define TEST_BODIES_H
#include "tacet/body.h"

#define BODIES_MOUNTS 4
typedef struct { // owns what its definition points to
    tacet_body_def def;
    tacet_mount_def mount[BODIES_MOUNTS];
    double at[BODIES_MOUNTS][3], turned[BODIES_MOUNTS][3], stiffness[BODIES_MOUNTS][3];
    double loss, crank_axis[3];
} bench_body;

// No mounts yet; loss 0.
void bench_body_new(bench_body *b, double mass_kg, tacet_inertia_def inertia);
// Metres and N/m.
void bench_mount(bench_body *b, const char *name, const double at[3], const double stiffness[3]);
void bench_turn(bench_body *b, size_t mount, double about_x, double about_y, double about_z);
void forwarder_body(bench_body *b);
void brush_truck_body(bench_body *b);
tacet_body *body_of(const bench_body *b, const tacet_engine_def *engine); // NULL: a plain single
tacet_engine_def plain_single(void); // throw 0.05 m, rod 0.2 m, 1 kg
#endif
