// Trains for tests, built by hand.
#ifndef TEST_TRAINS_H
#define TEST_TRAINS_H
#include "tacet/train.h"

#define TRAINS_MOST 210
typedef struct {
    tacet_train_def d; // points into the arrays below
    tacet_node_def node[TRAINS_MOST];
    tacet_link_def link[TRAINS_MOST];
    tacet_damper_def damper[4];
    double added[TRAINS_MOST];
    char name[2 * TRAINS_MOST][16];
} bench_train;

bench_train *bench_new(void); // calloc; free() it
// Adds a node, a link by node index; both return their index. Names n0, n1, .. and l0, l1, ..
size_t bench_node(bench_train *b, double inertia_kgm2);
size_t bench_link(bench_train *b, size_t from, size_t to, double stiffness_Nm_per_rad);
// n inertias in a row with n - 1 links; flywheel the last one.
bench_train *bench_chain(size_t n, const double *inertia_kgm2, const double *stiffness_Nm_per_rad);
// create() that must succeed; frees b.
tacet_train *bench_create(bench_train *b);

// Mean of m x'^2 over a revolution, kg m2, by quadrature of the exact slider-crank.
double mean_reciprocating(double mass_kg, double stroke_m, double rod_m);
// The two demo studies' trains, reciprocating share added, loss factors as stated.
bench_train *forwarder(void);
bench_train *brush_truck(void);
#endif
