// The quantities on the room train's own harmonic solution: roll torque in both forms, and heat
// against the work that the throws put in.
#include "near.h"
#include "tacet/judge.h"
#include <math.h>

#define LINES       12
#define REVOLUTIONS 2
#define SPEED       110.0
#define BASE        (SPEED / REVOLUTIONS)

enum { NOSE, THROW1, THROW2, FLYWHEEL, COUNTER, OUTPUT, NODES };
enum { NOSE_SHAFT, PIN_SHAFT, CRANK_END, GEARS, OUTPUT_SHAFT, LINKS };

static const double share[NODES] = {[THROW1] = 0.03, [THROW2] = 0.04}; // mean m x'^2, kg m2
static const double friction[2] = {20, 15};                            // N m on each throw
static const double piston_mean[2] = {160, 110};

static tacet_link_def link_of(const char *name, const char *from, const char *to, double k)
{
    return (tacet_link_def){
        .name = name,
        .from = from,
        .to = to,
        .stiffness_Nm_per_rad = k,
        .stiffness_catalogue_Nm_per_rad = NAN,
        .length_m = NAN,
        .shear_modulus_Pa = 80e9,
        .outer_m = NAN,
        .inner_m = NAN,
        .stress_concentration = 1,
        .throw_ = {-1, NAN, NAN, NAN, NAN, NAN, NAN, NAN, NAN, NAN},
        .damping_Nms_per_rad = NAN,
        .damping_ratio = NAN,
        .loss_factor = NAN,
        .at_hz = NAN,
        .gear_ratio = 1,
    };
}

typedef struct {
    tacet_node_def node[NODES];
    tacet_link_def link[LINKS];
    tacet_arena *arena;
    tacet_train *train;
    tacet_train_motion motion;
    tacet_spectrum piston[2], drive[2], out;
    size_t throw_node[2];
    tacet_response r;
} bench;

// A nose, two throws, a flywheel, a countershaft that turns the other way 1.6 times slower, an
// output beyond; ground damping inside and outside, every kind of link damping.
static void bench_init(bench *b)
{
    *b = (bench){
        .node = {{"nose", 0.05, 0.9, TACET_ON_POWERTRAIN},
                 {"throw1", 0.08, 0, TACET_ON_POWERTRAIN},
                 {"throw2", 0.09, 1.7, TACET_ON_POWERTRAIN},
                 {"flywheel", 0.9, 0, TACET_ON_POWERTRAIN},
                 {"counter", 0.3, 0.4, TACET_ON_POWERTRAIN},
                 {"output", 0.7, 2.5, TACET_ON_OUTSIDE}},
        .link = {link_of("nose shaft", "nose", "throw1", 4e4),
                 link_of("pin shaft", "throw1", "throw2", 9e5),
                 link_of("crank end", "throw2", "flywheel", 8e5),
                 link_of("gears", "flywheel", "counter", 2e4),
                 link_of("output shaft", "counter", "output", 6e3)},
    };
    b->link[NOSE_SHAFT].loss_factor = 0.2;
    b->link[PIN_SHAFT].loss_factor = 0.02;
    b->link[CRANK_END].damping_Nms_per_rad = 30;
    b->link[GEARS].loss_factor = 0.05;
    b->link[GEARS].gear_ratio = -1.6;
    b->link[OUTPUT_SHAFT].damping_Nms_per_rad = 3;
}

static void spectrum_of(bench *b, tacet_spectrum *s)
{
    assert_int_equal(tacet_spectrum_init(s, LINES, b->arena), TACET_OK);
    s->revolutions = REVOLUTIONS;
}

static void create(bench *b)
{
    tacet_train_def d = tacet_train_default();
    tacet_error e = {.text = ""};
    d.nodes = b->node;
    d.n_nodes = NODES;
    d.links = b->link;
    d.n_links = LINKS;
    d.flywheel = "flywheel";
    d.load = "output";
    d.added_inertia_kgm2 = share;
    d.lowest_hz = BASE / (2 * M_PI);
    d.highest_hz = LINES * d.lowest_hz;
    if (tacet_train_create(&d, &b->train, &e) != TACET_OK) fail_msg("%s", e.text);
}

static void solve(bench *b)
{
    tacet_train_work *work;
    b->arena = tacet_arena_create();
    create(b);
    assert_int_equal(tacet_train_motion_init(&b->motion, b->train, LINES, b->arena), TACET_OK);
    assert_int_equal(tacet_train_work_create(b->train, LINES, 2, &work), TACET_OK);
    spectrum_of(b, &b->out);
    for (size_t i = 0; i < 2; i++) {
        spectrum_of(b, &b->piston[i]);
        spectrum_of(b, &b->drive[i]);
        b->throw_node[i] = tacet_train_node_find(b->train, i ? "throw2" : "throw1");
        b->drive[i].mean = piston_mean[i] - friction[i];
        for (size_t h = 1; h <= LINES; h++)
            b->drive[i].line[h] =
                (i ? 240 - 60 * I : 300 + 90 * I) / (double)h * cexp(I * (double)(h * h));
    }
    assert_int_equal(
        tacet_train_harmonic(b->train, SPEED, 2, b->throw_node, b->drive, work, &b->motion),
        TACET_OK);
    for (size_t i = 0; i < 2; i++) { // T_piston = drive + friction - <J> a''
        const tacet_spectrum *angle = &b->motion.angle_rad[b->throw_node[i]];
        b->piston[i].mean = piston_mean[i];
        for (size_t h = 1; h <= LINES; h++)
            b->piston[i].line[h] = b->drive[i].line[h] + share[i ? THROW2 : THROW1] *
                                                             (BASE * (double)h) *
                                                             (BASE * (double)h) * angle->line[h];
    }
    b->r = (tacet_response){.train = b->train,
                            .motion = &b->motion,
                            .piston_torque_Nm = b->piston,
                            .throw_node = b->throw_node,
                            .n_throws = 2,
                            .friction_Nm = friction[0] + friction[1],
                            .speed_rad_per_s = SPEED,
                            .revolutions = REVOLUTIONS,
                            .n_lines = LINES};
    tacet_train_work_destroy(work);
}

static void clear(bench *b)
{
    tacet_train_destroy(b->train);
    tacet_arena_destroy(b->arena);
}

// Form (B): -d/dt of the housed nodes' momentum (inertias of the file: the reciprocating share is
// the pistons'), less `sign` times the torque of the link that leaves; mean likewise.
static void check_forms(bench *b, const char *leaving, double sign)
{
    const tacet_quantity *q = tacet_quantity_find("roll-torque");
    assert_int_equal(q->spectrum(&b->r, 0, &b->out), TACET_OK);
    const tacet_spectrum *gone = NULL;
    if (leaving) gone = &b->motion.link_torque_Nm[tacet_train_link_find(b->train, leaving)];
    for (size_t h = 1; h <= LINES; h++) {
        double w = BASE * (double)h;
        double complex expected = gone ? -sign * gone->line[h] : 0;
        for (size_t j = 0; j < NODES; j++)
            if (b->node[j].on == TACET_ON_POWERTRAIN)
                expected +=
                    w * w * b->node[j].inertia_kgm2 *
                    b->motion.angle_rad[tacet_train_node_find(b->train, b->node[j].name)].line[h];
        assert_true(cabs(expected) > 1);
        assert_near(cabs(b->out.line[h] - expected), 0, 1e-9 * cabs(expected), 0);
    }
    assert_near(b->out.mean, gone ? -sign * gone->mean : 0, 1e-9, 0);
}

// Mean torque past the throws 235 N m: 160 + 110 less 35.
static void test_roll_torque_output_shaft_leaves(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    solve(&b);
    check_forms(&b, "output shaft", 1);
    assert_near(b.out.mean, 1.6 * 235, 1e-9, 0);
    clear(&b);
}

static void test_roll_torque_gear_stage_leaves(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    b.node[COUNTER].on = TACET_ON_OUTSIDE;
    solve(&b);
    check_forms(&b, "gears", -1 / 1.6);
    assert_near(b.out.mean, -235, 1e-9, 0);
    clear(&b);
}

static void test_roll_torque_nothing_leaves(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    b.node[OUTPUT].on = TACET_ON_POWERTRAIN;
    solve(&b);
    check_forms(&b, NULL, 0);
    assert_near(b.out.mean, 0, 1e-9, 0);
    clear(&b);
}

// Power of the throws' fluctuating torques = heat of all links and of the damping to ground. Mean
// power is another matter: it goes to the load.
static void test_heat_is_the_work_put_in(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    solve(&b);
    double in = 0, heat = 0, links = 0;
    for (size_t i = 0; i < 2; i++)
        for (size_t h = 1; h <= LINES; h++)
            in += 0.5 *
                  creal(b.drive[i].line[h] *
                        conj(I * BASE * (double)h * b.motion.angle_rad[b.throw_node[i]].line[h]));
    for (size_t l = 0; l < LINKS; l++) {
        double watts;
        assert_int_equal(tacet_quantity_find("damper-heat")
                             ->value(&b.r, tacet_train_link_find(b.train, b.link[l].name), &watts),
                         TACET_OK);
        assert_true(watts > 0);
        links += watts;
    }
    for (size_t j = 0; j < NODES; j++) {
        size_t node = tacet_train_node_find(b.train, b.node[j].name);
        for (size_t h = 1; h <= LINES; h++) {
            double speed = BASE * (double)h * cabs(b.motion.angle_rad[node].line[h]);
            heat += 0.5 * b.node[j].damping_Nms_per_rad * speed * speed;
        }
    }
    assert_true(links > 0.1 * in);
    assert_near(heat + links, in, 0, 1e-9);
    clear(&b);
}

// R9 by way of the study's words: a solid link 200 mm thick has 6.366198 MPa under 10 kN m.
static void test_link_stress_from_the_shaft(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    b.link[PIN_SHAFT].outer_m = 0.2;
    b.link[PIN_SHAFT].inner_m = 0;
    b.link[PIN_SHAFT].stress_concentration = 1.5;
    solve(&b);
    tacet_quantity_ref q;
    tacet_error e = {.text = ""};
    if (tacet_quantity_parse("link-stress:pin shaft", b.train, NULL, &q, &e) != TACET_OK)
        fail_msg("%s", e.text);
    b.motion.link_torque_Nm[q.target].mean = 10e3;
    assert_int_equal(q.what->spectrum(&b.r, q.target, &b.out), TACET_OK);
    assert_near(b.out.mean, 1.5 * 6.366198, 1e-6, 0);
    assert_int_equal(tacet_quantity_parse("link-stress:crank end", b.train, NULL, &q, NULL),
                     TACET_BAD_INPUT); // no section stated
    clear(&b);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_roll_torque_output_shaft_leaves),
        cmocka_unit_test(test_roll_torque_gear_stage_leaves),
        cmocka_unit_test(test_roll_torque_nothing_leaves),
        cmocka_unit_test(test_heat_is_the_work_put_in),
        cmocka_unit_test(test_link_stress_from_the_shaft),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
