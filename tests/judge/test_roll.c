// Roll torque, form (A) against form (B), on trains whose motion is solved here with dense complex
// elimination.
#include "hand_train.h"
#include "near.h"
#include "tacet/judge.h"
#include <math.h>

#define LINES       6
#define REVOLUTIONS 2
#define SPEED       120.0 // rad/s

enum { NOSE, THROW1, THROW2, FLYWHEEL, COUNTER, OUTPUT, NODES };
enum { NOSE_SHAFT, PIN_SHAFT, CRANK_END, GEARS, OUTPUT_SHAFT, LINKS };

// A nose, two throws, a flywheel, a countershaft that turns the other way 1.6 times slower
// (ratio = w_from / w_to = -1.6), an output beyond.
static tacet_train train_of(void)
{
    return (tacet_train){
        .n_nodes = NODES,
        .n_links = LINKS,
        .flywheel = FLYWHEEL,
        .load = OUTPUT,
        .node = {[NOSE] = {"nose", 0.05, 0.9, 1, true},
                 [THROW1] = {"throw1", 0.08, 0, 1, true},
                 [THROW2] = {"throw2", 0.09, 1.7, 1, true},
                 [FLYWHEEL] = {"flywheel", 0.9, 0, 1, true},
                 [COUNTER] = {"counter", 0.3, 0.4, -1 / 1.6, true},
                 [OUTPUT] = {"output", 0.7, 2.5, -1 / 1.6, false}},
        .link = {[NOSE_SHAFT] = {"nose shaft", NOSE, THROW1, 4e4, 0.2, 0, 1, 0, 0},
                 [PIN_SHAFT] = {"pin shaft", THROW1, THROW2, 9e5, 0.02, 0, 1, 0, 0},
                 [CRANK_END] = {"crank end", THROW2, FLYWHEEL, 8e5, 0, 30, 1, 0, 0},
                 [GEARS] = {"gears", FLYWHEEL, COUNTER, 2e4, 0.05, 0, -1.6, 0, 0},
                 [OUTPUT_SHAFT] = {"output shaft", COUNTER, OUTPUT, 6e3, 0, 3, 1, 0, 0}},
    };
}

static const double share[NODES] = {[THROW1] = 0.03, [THROW2] = 0.04}; // mean m x'^2, kg m2
static const double friction = 35;                                     // N m, both throws together
static const double piston_mean[2] = {160, 110};                       // N m

// Effective torque on a throw's mean inertia.
static double complex drive(size_t throw_index, size_t h)
{
    return (throw_index ? 240 - 60 * I : 300 + 90 * I) / (double)h * cexp(I * (double)(h * h));
}

// x := A^-1 x by elimination with row exchange.
static void eliminate(size_t n, double complex a[NODES][NODES], double complex *x)
{
    for (size_t c = 0; c < n; c++) {
        size_t best = c;
        for (size_t r = c + 1; r < n; r++)
            if (cabs(a[r][c]) > cabs(a[best][c])) best = r;
        for (size_t k = 0; k < n; k++) {
            double complex keep = a[c][k];
            a[c][k] = a[best][k];
            a[best][k] = keep;
        }
        double complex keep = x[c];
        x[c] = x[best];
        x[best] = keep;
        for (size_t r = c + 1; r < n; r++) {
            double complex f = a[r][c] / a[c][c];
            for (size_t k = c; k < n; k++)
                a[r][k] -= f * a[c][k];
            x[r] -= f * x[c];
        }
    }
    for (size_t c = n; c-- > 0;) {
        for (size_t k = c + 1; k < n; k++)
            x[c] -= a[c][k] * x[k];
        x[c] /= a[c][c];
    }
}

typedef struct {
    tacet_arena *arena;
    tacet_train train;
    tacet_spectrum angle[NODES], torque[LINKS], piston[2], out;
    tacet_train_motion motion;
    size_t throw_node[2];
    tacet_response r;
} bench;

static void spectra_init(tacet_arena *a, tacet_spectrum *s, size_t n)
{
    for (size_t i = 0; i < n; i++) {
        assert_int_equal(tacet_spectrum_init(&s[i], LINES, a), TACET_OK);
        s[i].revolutions = REVOLUTIONS;
    }
}

// One line: (-w^2 J + i w C + K) angle = drive, each link's element from its free body:
// T_to = K (from / ratio - to) on `to`, -T_to / ratio on `from`.
static void solve_line(bench *b, size_t h)
{
    const tacet_train *t = &b->train;
    double w = SPEED / REVOLUTIONS * (double)h;
    double complex a[NODES][NODES] = {0}, x[NODES] = {0};
    for (size_t j = 0; j < NODES; j++)
        a[j][j] =
            -w * w * (t->node[j].inertia_kgm2 + share[j]) + I * w * t->node[j].damping_Nms_per_rad;
    for (size_t l = 0; l < LINKS; l++) {
        size_t from = t->link[l].from, to = t->link[l].to;
        double complex k = tacet_train_link_impedance(t, l, w);
        double g = 1 / t->link[l].gear_ratio;
        a[to][to] += k;
        a[to][from] -= k * g;
        a[from][from] += k * g * g;
        a[from][to] -= k * g;
    }
    for (size_t i = 0; i < 2; i++)
        x[b->throw_node[i]] = drive(i, h);
    eliminate(NODES, a, x);
    for (size_t j = 0; j < NODES; j++)
        b->angle[j].line[h] = x[j];
    for (size_t l = 0; l < LINKS; l++)
        b->torque[l].line[h] = tacet_train_link_impedance(t, l, w) *
                               (x[t->link[l].from] / t->link[l].gear_ratio - x[t->link[l].to]);
    // T_piston = drive - <J> a''
    for (size_t i = 0; i < 2; i++)
        b->piston[i].line[h] = drive(i, h) + share[b->throw_node[i]] * w * w * x[b->throw_node[i]];
}

static void bench_solve(bench *b, tacet_train train)
{
    *b = (bench){.arena = tacet_arena_create(), .train = train, .throw_node = {THROW1, THROW2}};
    spectra_init(b->arena, b->angle, NODES);
    spectra_init(b->arena, b->torque, LINKS);
    spectra_init(b->arena, b->piston, 2);
    spectra_init(b->arena, &b->out, 1);
    for (size_t h = 1; h <= LINES; h++)
        solve_line(b, h);
    b->motion = (tacet_train_motion){b->angle, b->torque, NODES, LINKS};
    b->piston[0].mean = piston_mean[0];
    b->piston[1].mean = piston_mean[1];
    b->r = (tacet_response){.train = &b->train,
                            .motion = &b->motion,
                            .piston_torque_Nm = b->piston,
                            .throw_node = b->throw_node,
                            .n_throws = 2,
                            .friction_Nm = friction,
                            .speed_rad_per_s = SPEED,
                            .revolutions = REVOLUTIONS,
                            .n_lines = LINES};
}

static void roll(bench *b)
{
    const tacet_quantity *q = tacet_quantity_find("roll-torque");
    assert_int_equal(q->spectrum(&b->r, 0, &b->out), TACET_OK);
    assert_int_equal(b->out.revolutions, REVOLUTIONS);
}

// Form (B): - d/dt of the housed nodes' momentum, less the torque of shafts that leave. `leaving`:
// the link between a housed node and one outside, LINKS for none; sign of its torque on what
// leaves.
static double complex form_b(const bench *b, size_t h, size_t leaving, double sign)
{
    double w = SPEED / REVOLUTIONS * (double)h;
    double complex sum = 0;
    for (size_t j = 0; j < NODES; j++)
        if (b->train.node[j].housed)
            sum += w * w * b->train.node[j].inertia_kgm2 * b->angle[j].line[h];
    return leaving < LINKS ? sum - sign * b->torque[leaving].line[h] : sum;
}

static void check_forms(bench *b, size_t leaving, double sign)
{
    roll(b);
    for (size_t h = 1; h <= LINES; h++) {
        double complex expected = form_b(b, h, leaving, sign);
        assert_true(cabs(expected) > 1); // N m, of some 300: the sum is no accident of zeros
        assert_near(cabs(b->out.line[h] - expected), 0, 1e-9 * cabs(expected), 0);
    }
}

// Mean link torques that carry what the pistons give, half the friction on each throw: 142.5 N m
// past throw 1, 235 past throw 2; the gears turn 235 into -376 on the countershaft.
static void set_means(bench *b)
{
    b->torque[PIN_SHAFT].mean = 142.5;
    b->torque[CRANK_END].mean = 235;
    b->torque[GEARS].mean = -376;
    b->torque[OUTPUT_SHAFT].mean = -376;
}

static void test_output_shaft_leaves(void **state)
{
    (void)state;
    bench b;
    bench_solve(&b, train_of());
    set_means(&b);
    check_forms(&b, OUTPUT_SHAFT, 1);
    assert_near(b.out.mean, 376, 1e-12, 0); // minus the -376 N m that leave
    tacet_arena_destroy(b.arena);
}

// The shaft's ends stated the other way round: its torque then acts on what stays.
static void test_output_shaft_stated_from_outside(void **state)
{
    (void)state;
    bench b;
    tacet_train t = train_of();
    t.link[OUTPUT_SHAFT].from = OUTPUT;
    t.link[OUTPUT_SHAFT].to = COUNTER;
    bench_solve(&b, t);
    set_means(&b);
    b.torque[OUTPUT_SHAFT].mean = 376;
    check_forms(&b, OUTPUT_SHAFT, -1);
    assert_near(b.out.mean, 376, 1e-12, 0);
    tacet_arena_destroy(b.arena);
}

// The countershaft stands outside: what leaves is the torque into the gears.
static void test_gear_stage_leaves(void **state)
{
    (void)state;
    bench b;
    tacet_train t = train_of();
    t.node[COUNTER].housed = false;
    bench_solve(&b, t);
    set_means(&b);
    check_forms(&b, GEARS, -1 / 1.6);
    assert_near(b.out.mean, -235, 1e-12, 0);
    tacet_arena_destroy(b.arena);
}

// Everything housed, the load too: nothing leaves, mean 0, and the fluctuation is that of momentum.
static void test_nothing_leaves(void **state)
{
    (void)state;
    bench b;
    tacet_train t = train_of();
    t.node[OUTPUT].housed = true;
    bench_solve(&b, t);
    set_means(&b);
    check_forms(&b, LINKS, 0);
    assert_near(b.out.mean, 0, 1e-12, 0);
    tacet_arena_destroy(b.arena);
}

// The load on the flywheel, all on one housing, gears and output idling along.
static void test_load_at_the_flywheel(void **state)
{
    (void)state;
    bench b;
    tacet_train t = train_of();
    t.load = FLYWHEEL;
    t.node[OUTPUT].housed = true;
    bench_solve(&b, t);
    b.torque[PIN_SHAFT].mean = 142.5;
    b.torque[CRANK_END].mean = 235;
    check_forms(&b, LINKS, 0);
    assert_near(b.out.mean, 0, 1e-12, 0);
    tacet_arena_destroy(b.arena);
}

// Limit case: one throw and nothing else. Gas that pushes the crank forward kicks the housing back
// by as much.
static void test_one_throw_kicks_back(void **state)
{
    (void)state;
    bench b;
    tacet_train t = {
        .n_nodes = 2, .n_links = 0, .node = {{"load", 1, 0, 1, false}, {"throw", 0.5, 0, 1, true}}};
    bench_solve(&b, train_of());
    b.train = t;
    b.r.n_throws = 1;
    b.r.friction_Nm = 0;
    tacet_spectrum_zero(&b.piston[0]);
    b.piston[0].line[3] = 200 * cexp(0.4 * I);
    b.piston[0].mean = 50;
    roll(&b);
    assert_near(cabs(b.out.line[3] + 200 * cexp(0.4 * I)), 0, 1e-12, 0);
    assert_near(b.out.mean, -50, 1e-12, 0);
    tacet_arena_destroy(b.arena);
}

// Limit case: two equal rotors geared one against the other. Their momenta cancel, and so does the
// roll torque, whatever the pistons do.
static void test_counter_rotation_cancels(void **state)
{
    (void)state;
    bench b;
    tacet_train t = train_of();
    for (size_t j = 0; j < NODES; j++) {
        t.node[j].inertia_kgm2 = j == FLYWHEEL || j == COUNTER ? 2 : 1e-9;
        t.node[j].damping_Nms_per_rad = 0;
        t.node[j].housed = true;
    }
    for (size_t l = 0; l < LINKS; l++)
        t.link[l].stiffness_Nm_per_rad = 1e11;
    t.link[GEARS].gear_ratio = -1;
    bench_solve(&b, t);
    roll(&b);
    for (size_t h = 1; h <= LINES; h++) {
        double pistons = cabs(b.piston[0].line[h] + b.piston[1].line[h]);
        assert_true(pistons > 10);
        assert_near(cabs(b.out.line[h]) / pistons, 0, 1e-5, 0); // links are stiff, not rigid
    }
    tacet_arena_destroy(b.arena);
}

// Damping to ground counts where it stands: taken off at an outside node nothing changes, at a
// housed node by its own torque.
static void test_ground_damping_reacts_on_the_housing(void **state)
{
    (void)state;
    bench b;
    bench_solve(&b, train_of());
    roll(&b);
    double complex with = b.out.line[2];
    b.train.node[OUTPUT].damping_Nms_per_rad = 0;
    roll(&b);
    assert_near(cabs(b.out.line[2] - with), 0, 0, 0);
    b.train.node[THROW2].damping_Nms_per_rad = 0;
    roll(&b);
    double complex taken = I * SPEED * 1.7 * b.angle[THROW2].line[2]; // line 2 of 2 revs: order 1
    assert_true(cabs(taken) > 0.01);
    assert_near(cabs(b.out.line[2] + taken - with), 0, 1e-12, 0);
    tacet_arena_destroy(b.arena);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_output_shaft_leaves),
        cmocka_unit_test(test_output_shaft_stated_from_outside),
        cmocka_unit_test(test_gear_stage_leaves),
        cmocka_unit_test(test_nothing_leaves),
        cmocka_unit_test(test_load_at_the_flywheel),
        cmocka_unit_test(test_one_throw_kicks_back),
        cmocka_unit_test(test_counter_rotation_cancels),
        cmocka_unit_test(test_ground_damping_reacts_on_the_housing),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
