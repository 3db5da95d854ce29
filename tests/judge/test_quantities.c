#include "hand_train.h"
#include "near.h"
#include "tacet/judge.h"
#include <math.h>
#include <string.h>

#define LINES 8

typedef struct {
    tacet_arena *arena;
    tacet_train train;
    tacet_spectrum angle[HAND_MOST], torque[HAND_MOST], out;
    tacet_train_motion motion;
    tacet_response r;
} bench;

// A flywheel, a second node that turns backwards at half speed, one damped link and one plain one.
static void bench_init(bench *b)
{
    *b = (bench){.arena = tacet_arena_create()};
    b->train = (tacet_train){
        .n_nodes = 3,
        .n_links = 2,
        .flywheel = 1,
        .node = {{"hub", 0.1, 0, 1, true},
                 {"flywheel", 0.2, 0, 1, true},
                 {"back", 1, 0, -0.5, true}},
        .link = {{"damper", 0, 1, 3e4, 0.15, 0, 1, NAN, NAN},
                 {"crank end", 1, 2, 1e6, 0, 0, -2, 1e-5, NAN}},
    };
    for (size_t i = 0; i < HAND_MOST; i++) {
        assert_int_equal(tacet_spectrum_init(&b->angle[i], LINES, b->arena), TACET_OK);
        assert_int_equal(tacet_spectrum_init(&b->torque[i], LINES, b->arena), TACET_OK);
    }
    assert_int_equal(tacet_spectrum_init(&b->out, LINES, b->arena), TACET_OK);
    b->motion = (tacet_train_motion){b->angle, b->torque, 3, 2};
    b->r = (tacet_response){.train = &b->train,
                            .motion = &b->motion,
                            .speed_rad_per_s = 100,
                            .revolutions = 2,
                            .n_lines = LINES};
}

static void ask(bench *b, const char *text)
{
    tacet_quantity_ref q;
    tacet_error e = {.text = ""};
    if (tacet_quantity_parse(text, &b->train, NULL, &q, &e) != TACET_OK) fail_msg("%s", e.text);
    assert_false(q.what->scalar);
    b->out.line[LINES] = 99; // whatever stood there before
    b->out.mean = 77;
    assert_int_equal(q.what->spectrum(&b->r, q.target, &b->out), TACET_OK);
    assert_int_equal(b->out.revolutions, b->r.revolutions);
}

static double number(bench *b, const char *text)
{
    tacet_quantity_ref q;
    tacet_error e = {.text = ""};
    if (tacet_quantity_parse(text, &b->train, NULL, &q, &e) != TACET_OK) fail_msg("%s", e.text);
    assert_true(q.what->scalar);
    double value = NAN;
    assert_int_equal(q.what->value(&b->r, q.target, &value), TACET_OK);
    return value;
}

// Closed form: angle A cos(w t + p) gives speed A w cos(w t + p + 90 deg), acceleration
// A w^2 cos(w t + p + 180 deg). Line 6 of a 2-revolution repeat at 100 rad/s: w = 300 rad/s.
static void test_node_motion_is_the_derivative(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    b.angle[2].line[6] = 0.01 * cexp(0.3 * I);
    ask(&b, "node-angle:back");
    assert_near(cabs(b.out.line[6] - 0.01 * cexp(0.3 * I)), 0, 1e-17, 0);
    assert_near(b.out.mean, 0, 0, 0);
    assert_near(cabs(b.out.line[LINES]), 0, 0, 0);
    ask(&b, "node-speed:back");
    assert_near(cabs(b.out.line[6]), 3, 1e-14, 0);
    assert_near(carg(b.out.line[6]), 0.3 + M_PI / 2, 1e-14, 0);
    assert_near(b.out.mean, -50, 1e-13, 0); // turns against the crank
    assert_near(cabs(b.out.line[LINES]), 0, 0, 0);
    ask(&b, "node-acceleration:back");
    assert_near(cabs(b.out.line[6]), 900, 1e-11, 0);
    assert_near(carg(b.out.line[6]), 0.3 - M_PI, 1e-14, 0);
    assert_near(b.out.mean, 0, 0, 0);
    tacet_arena_destroy(b.arena);
}

// D12: rigid shaft, d(omega) = T / (J q w): T = 100 N m, J = 0.2 kg m2, order 2 at 1000 rpm:
// 2.387324 rad/s. The angle of a rigid rotor under T cos(q w t) is -T / (J (q w)^2).
static void test_node_speed_d12(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    double speed = 1000 * 2 * M_PI / 60, w = 2 * speed;
    b.r.speed_rad_per_s = speed;
    b.angle[0].line[4] = -100 / (0.2 * w * w);
    ask(&b, "node-speed:hub");
    assert_near(cabs(b.out.line[4]), 2.387324, 5e-7, 0);
    // torque leads, speed follows a quarter behind: T cos -> T/(J w) sin
    assert_near(carg(b.out.line[4]), -M_PI / 2, 1e-14, 0);
    tacet_arena_destroy(b.arena);
}

// E22: T = 5000 + 1500 sin 3 theta on I = 1000 kg m2 at 300 rpm, constant load: coefficient of
// fluctuation of speed 0.10132 % (Khurmi and Gupta, Theory of Machines, example 16.13, first part).
static void test_irregularity_e22(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    double speed = 300 * 2 * M_PI / 60, w = 3 * speed;
    b.r.speed_rad_per_s = speed;
    b.angle[1].line[6] = -(-I * 1500) / (1000 * w * w); // sin: phase -90 degrees
    ask(&b, "irregularity");
    assert_near(b.out.mean, 1, 0, 0);
    assert_near(2 * cabs(b.out.line[6]), 0.0010132, 5e-8, 0); // highest less lowest of one line
    tacet_arena_destroy(b.arena);
}

static void test_link_torque_with_mean(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    b.torque[1].mean = -42;
    b.torque[1].line[3] = 5 - I;
    ask(&b, "link-torque:crank end");
    assert_near(b.out.mean, -42, 0, 0);
    assert_near(cabs(b.out.line[3] - (5 - I)), 0, 0, 0);
    assert_near(cabs(b.out.line[LINES]), 0, 0, 0);
    tacet_arena_destroy(b.arena);
}

// R9: W_t = pi D^3 / 16; 10 kN m on 200 mm: 6.366198 MPa; with a concentration of 1.8 that many
// times more, mean and lines alike.
static void test_link_stress_r9(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    b.train.link[1].section_modulus_m3 = M_PI * 0.2 * 0.2 * 0.2 / 16;
    b.torque[1].mean = 10e3;
    b.torque[1].line[2] = 10e3 * I;
    ask(&b, "link-stress:crank end");
    assert_string_equal(tacet_quantity_find("link-stress")->unit, "MPa");
    assert_near(b.out.mean, 6.366198, 5e-7, 0);
    b.train.link[1].stress_concentration = 1.8;
    ask(&b, "link-stress:crank end");
    assert_near(b.out.mean, 1.8 * 6.366198, 1e-6, 0);
    assert_near(cimag(b.out.line[2]), 1.8 * 6.366198, 1e-6, 0);
    tacet_arena_destroy(b.arena);
}

// D11: viscous, c = 2 N m s/rad, X = 0.01 rad, 200 Hz: 157.9137 W; hysteretic, k = 3e4 N m/rad,
// eta = 0.15, X = 0.005 rad, 150 Hz: pi k eta X^2 f = 53.0144 W.
static void test_damper_heat_d11(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    b.r.revolutions = 1;
    b.r.speed_rad_per_s = 2 * M_PI * 50; // lines of 50 Hz
    b.train.link[0].loss_factor = 0;
    b.train.link[0].damping_Nms_per_rad = 2;
    b.angle[0].line[4] = 0.006; // twist 0.01: both ends move
    b.angle[1].line[4] = -0.008 * I;
    assert_near(number(&b, "damper-heat:damper"), 157.9137, 5e-5, 0);
    b.train.link[0].damping_Nms_per_rad = 0;
    b.train.link[0].loss_factor = 0.15;
    tacet_spectrum_zero(&b.angle[0]);
    tacet_spectrum_zero(&b.angle[1]);
    b.angle[1].line[3] = 0.005;
    assert_near(number(&b, "damper-heat:damper"), 53.0144, 5e-5, 0);
    tacet_arena_destroy(b.arena);
}

// Lines add up; common motion of both ends heats nothing; behind a gear of ratio -2 the twist is
// from / -2 - to.
static void test_damper_heat_sums_lines_and_takes_the_twist(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    b.r.revolutions = 1;
    b.train.link[1].damping_Nms_per_rad = 3;
    b.angle[1].line[2] = 0.02;
    b.angle[2].line[2] = -0.01;
    b.torque[1].mean = 1000; // a steady twist heats nothing
    assert_near(number(&b, "damper-heat:crank end"), 0, 1e-15, 0);
    b.angle[2].line[2] = 0.01;  // twist 0.02 at 200 rad/s
    b.angle[2].line[8] = 0.001; // and 0.001 at 800 rad/s
    double expected = 0.5 * 3 * (200.0 * 200 * 0.02 * 0.02 + 800.0 * 800 * 0.001 * 0.001);
    assert_near(number(&b, "damper-heat:crank end"), expected, 0, 1e-13);
    tacet_arena_destroy(b.arena);
}

static void test_peak_pressure_in_mpa(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    b.r.peak_pressure_Pa = 16.5e6;
    assert_near(number(&b, "peak-pressure"), 16.5, 1e-14, 0);
    tacet_arena_destroy(b.arena);
}

// A spectrum shorter than the response takes the first lines; nothing is written past its end.
static void test_short_output(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    for (size_t h = 1; h <= LINES; h++)
        b.angle[0].line[h] = (double)h;
    b.out.n_lines = 3;
    b.out.line[4] = 7;
    tacet_quantity_ref q;
    assert_int_equal(tacet_quantity_parse("node-angle:hub", &b.train, NULL, &q, NULL), TACET_OK);
    assert_int_equal(q.what->spectrum(&b.r, q.target, &b.out), TACET_OK);
    assert_near(creal(b.out.line[3]), 3, 0, 0);
    assert_near(creal(b.out.line[4]), 7, 0, 0);
    tacet_arena_destroy(b.arena);
}

// ---- names --------------------------------------------------------------------------------------

static void test_every_row_is_whole(void **state)
{
    (void)state;
    const char *const names[] = {
        "roll-torque",       "link-torque",  "link-stress",  "node-angle",         "node-speed",
        "node-acceleration", "irregularity", "mount-force",  "place-acceleration", "cab",
        "shaking",           "damper-heat",  "peak-pressure"};
    size_t n = 0;
    for (const tacet_quantity *q = tacet_quantities(); q->name; q++, n++) {
        assert_true(q->unit && q->unit[0] && q->doc && q->doc[0]);
        assert_null(strchr(q->name, ':'));
        assert_true(q->scalar ? q->value && !q->spectrum : q->spectrum && !q->value);
        assert_true(!q->scalar || q->statistic >= 0);
        assert_ptr_equal(tacet_quantity_find(q->name), q);
    }
    assert_int_equal(n, sizeof names / sizeof *names);
    for (size_t i = 0; i < n; i++)
        assert_non_null(tacet_quantity_find(names[i]));
    assert_null(tacet_quantity_find("roll"));
}

static void refused(bench *b, const char *text, const char *part)
{
    tacet_quantity_ref q = {.target = 42};
    tacet_error e = {.text = ""};
    assert_int_equal(tacet_quantity_parse(text, &b->train, NULL, &q, &e), TACET_BAD_INPUT);
    if (!strstr(e.text, part)) fail_msg("'%s' does not say '%s'", e.text, part);
    assert_int_equal(q.target, 42); // untouched
    assert_int_equal(tacet_quantity_parse(text, &b->train, NULL, &q, NULL), TACET_BAD_INPUT);
}

static void test_parse_refuses_and_says_what_is_allowed(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    refused(&b, "link-torqe:damper", "unknown quantity 'link-torqe'; did you mean 'link-torque'?");
    refused(&b, "", "allowed: roll-torque, link-torque, link-stress");
    refused(&b, NULL, "allowed: roll-torque");
    refused(&b, "zzzzzz", "node-acceleration, irregularity");
    refused(&b, "link-torque", "'link-torque' needs the name of a link: link-torque:NAME");
    refused(&b, "node-speed:", "needs the name of a node");
    refused(&b, "roll-torque:hub", "roll-torque takes no name");
    refused(&b, "peak-pressure:", "takes no name");
    refused(&b, "link-torque:dampr", "unknown link 'dampr'; did you mean 'damper'?");
    refused(&b, "link-torque:hub", "unknown link 'hub'; allowed: damper, crank end");
    refused(&b, "node-angle:damper", "allowed: hub, flywheel, back");
    refused(&b, "link-stress:damper", "link 'damper': state its outer_mm");
    refused(&b, "damper-heat:crank end", "damped link; 'crank end' has none");
    char longer[400];
    memset(longer, 'q', sizeof longer - 1);
    longer[399] = 0;
    refused(&b, longer, "unknown quantity 'qqqqqqqq");
    tacet_arena_destroy(b.arena);
}

static void test_parse_finds_the_target(void **state)
{
    (void)state;
    bench b;
    bench_init(&b);
    tacet_quantity_ref q;
    assert_int_equal(tacet_quantity_parse("link-stress:crank end", &b.train, NULL, &q, NULL),
                     TACET_OK);
    assert_string_equal(q.what->name, "link-stress");
    assert_int_equal(q.target, 1);
    assert_int_equal(tacet_quantity_parse("node-acceleration:back", &b.train, NULL, &q, NULL),
                     TACET_OK);
    assert_string_equal(q.what->name, "node-acceleration");
    assert_int_equal(q.target, 2);
    tacet_arena_destroy(b.arena);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_node_motion_is_the_derivative),
        cmocka_unit_test(test_node_speed_d12),
        cmocka_unit_test(test_irregularity_e22),
        cmocka_unit_test(test_link_torque_with_mean),
        cmocka_unit_test(test_link_stress_r9),
        cmocka_unit_test(test_damper_heat_d11),
        cmocka_unit_test(test_damper_heat_sums_lines_and_takes_the_twist),
        cmocka_unit_test(test_peak_pressure_in_mpa),
        cmocka_unit_test(test_short_output),
        cmocka_unit_test(test_every_row_is_whole),
        cmocka_unit_test(test_parse_refuses_and_says_what_is_allowed),
        cmocka_unit_test(test_parse_finds_the_target),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
