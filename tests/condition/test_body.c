// The powertrain on its mounts, from study to row: what must balance on every line, whatever the
// pattern, and what must not depend on it.
#include "demo.h"
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

// A four whose gearbox turns backwards, with bearings that drag, on three mounts of which one is
// turned; nothing symmetric about it.
static const char four[] =
    "title: four\n"
    "engine: {rotation: ROTATION, bore_mm: 96, stroke_mm: 102, rod_length_mm: 160, "
    "pin_offset_mm: 0.9, reciprocating_mass_kg: 0.9, firing_order: [1, 3, 4, 2]}\n"
    "cycle: {manifold_kpa: {highest: 180}}\n"
    "train:\n"
    "  nodes:\n"
    "    - {name: pulley, inertia_kgm2: 0.02, damping_nms_per_rad: 0.08}\n"
    "    - {name: throw1, inertia_kgm2: 0.02, damping_nms_per_rad: 0.2}\n"
    "    - {name: throw2, inertia_kgm2: 0.02}\n"
    "    - {name: throw3, inertia_kgm2: 0.02}\n"
    "    - {name: throw4, inertia_kgm2: 0.02}\n"
    "    - {name: flywheel, inertia_kgm2: 0.4}\n"
    "    - {name: counter, inertia_kgm2: 0.05, damping_nms_per_rad: 0.15}\n"
    "    - {name: output, inertia_kgm2: 0.03}\n"
    "    - {name: hub, inertia_kgm2: 0.02, on: OUTPUT}\n"
    "    - {name: load, inertia_kgm2: 4, on: OUTPUT}\n"
    "  links:\n"
    "    - {name: nose, from: pulley, to: throw1, stiffness_nm_per_rad: 2e5, loss_factor: 0.03}\n"
    "    - {name: c1, from: throw1, to: throw2, stiffness_nm_per_rad: 5e5, damping_ratio: 0.01}\n"
    "    - {name: c2, from: throw2, to: throw3, stiffness_nm_per_rad: 5e5, damping_ratio: 0.01}\n"
    "    - {name: c3, from: throw3, to: throw4, stiffness_nm_per_rad: 5e5, damping_ratio: 0.01}\n"
    "    - {name: tail, from: throw4, to: flywheel, stiffness_nm_per_rad: 8e5, damping_ratio: "
    "0.01}\n"
    "    - {name: gears, from: flywheel, to: counter, stiffness_nm_per_rad: 3e4, damping_ratio: "
    "0.02, gear_ratio: -1.6}\n"
    "    - {name: shaft, from: counter, to: output, stiffness_nm_per_rad: 2e4, damping_ratio: "
    "0.02}\n"
    "    - {name: leaves, from: output, to: hub, stiffness_nm_per_rad: 9000, damping_ratio: 0.05, "
    "gear_ratio: 1.3}\n"
    "    - {name: drive, from: hub, to: load, stiffness_nm_per_rad: 4000, damping_ratio: 0.05}\n"
    "  flywheel: flywheel\n"
    "  load: load\n"
    "body:\n"
    "  mass_kg: 240\n"
    "  inertia_kgm2: {xx: 12, yy: 22, zz: 20, xy: 0.4, xz: -1.1, yz: 0.3}\n"
    "  crank_axis_mm: [-260, 12, -80]\n"
    "  rotating_mass_kg: 0.7\n"
    "  counterweights: [{at_mm: 40, unbalance_kgmm: 20, angle_deg: 170}]\n"
    "  balance_shafts: [{at_mm: [10, 90, -60], ratio: -2, unbalance_kgmm: 6, phase_deg: 150}]\n"
    "  mounts:\n"
    "    - {name: left, at_mm: [-210, -300, -40], turned_deg: [20, -15, 35], x_n_per_mm: 120, "
    "y_n_per_mm: 90, z_n_per_mm: [[1, 200], [100, 380]], static_z_n_per_mm: 170}\n"
    "    - {name: right, at_mm: [-180, 310, -60], x_n_per_mm: 110, y_n_per_mm: 80, z_n_per_mm: "
    "230, loss_factor: [[0, 0.05], [80, 0.3]]}\n"
    "    - {name: rear, at_mm: [520, 20, -130], x_n_per_mm: 100, y_n_per_mm: 95, z_n_per_mm: 190}\n"
    "  places: [{name: o, at_mm: [0, 0, 0]}, {name: x, at_mm: [1000, 0, 0]}, {name: y, at_mm: [0, "
    "1000, 0]}]\n"
    "  points: [{name: seat}]\n"
    "  paths: [{mount: left, to: seat, resonances: [{hz: 12, damping_ratio: 0.05, gain: 1e-4}]}]\n"
    "bands:\n"
    "  - {name: seat, kind: cab, low_hz: 6, high_hz: 40, quantity: \"cab:seat\", limit_rms: 0.3}\n"
    "  - {name: left, kind: mount, low_hz: 6, high_hz: 40, quantity: \"mount-force:left:z\", "
    "limit_rms: 300}\n"
    "limits:\n"
    "  - {name: mean, quantity: \"mount-force:left:z\", statistic: mean, value: 1000}\n"
    "screen: {speeds_rpm: [1200, 2000], brake_torque_nm: 90}                              \n";

// 0: clockwise, the load outside; 1: counterclockwise, the load housed. Opened once, only read.
static demo of_four[2];

static int open_both(void **state)
{
    static const char *const rotation[] = {"clockwise", "counterclockwise"}, *const output[] = {
                                                                                 "outside",
                                                                                 "powertrain"};
    (void)state;
    for (int i = 0; i < 2; i++) {
        char *text = calloc(1, 8192);
        strcpy(text, four);
        demo_replace(text, "ROTATION", rotation[i]);
        demo_replace(text, "OUTPUT", output[i]);
        demo_replace(text, "OUTPUT", output[i]);
        demo_open_text(&of_four[i], text);
        free(text);
    }
    return 0;
}

static int close_both(void **state)
{
    (void)state;
    for (int i = 0; i < 2; i++)
        demo_close(&of_four[i]);
    return 0;
}

static tacet_row solve(demo *d, const char *word, double rpm, tacet_level level)
{
    tacet_row row;
    tacet_roll *roll = demo_roll(d, word);
    tacet_condition c = demo_condition(d, roll, rpm);
    assert_int_equal(tacet_solve(d->model, &c, level, d->work, &row), TACET_OK);
    assert_int_equal(row.outcome, TACET_SOLVED);
    tacet_roll_destroy(roll);
    return row;
}

static const tacet_spectrum *quantity(demo *d, const char *name)
{
    tacet_error e;
    tacet_quantity_ref of;
    const tacet_spectrum *s;
    assert_int_equal(tacet_quantity_parse(name, tacet_model_train(d->model),
                                          tacet_body_def_of(tacet_model_body(d->model)), &of, &e),
                     TACET_OK);
    assert_int_equal(tacet_workspace_quantity(d->work, of, &s, NULL), TACET_OK);
    return s;
}

// ---- roll torque --------------------------------------------------------------------------------

// What pushes the housing is what all that moves in it loses of momentum.
static void test_roll_torque_of_a_backward_gearbox(void **state)
{
    (void)state;
    for (int i = 0; i < 2; i++) {
        (void)solve(&of_four[i], "x.x", 1300, TACET_LEVEL_RIPPLE);
        assert_near(demo_roll_mismatch(&of_four[i]), 0, 1e-9, 0);
        (void)solve(&of_four[i], "xx.", 1700, TACET_LEVEL_CONSTANT);
        assert_near(demo_roll_mismatch(&of_four[i]), 0, 1e-9, 0);
    }
}

static tacet_status four_harmonics(const void *who, size_t throw_index, size_t n,
                                   const double *angle_rad, double *torque_Nm, double *inertia_kgm2,
                                   double *slope_kgm2_per_rad)
{
    const demo *d = who;
    double phase = 1.3 * (double)throw_index,
           own = tacet_engine_mean_inertia(tacet_model_engine(d->model));
    for (size_t k = 0; k < n; k++) {
        double a = angle_rad[k];
        torque_Nm[k] = 25 + 60 * cos(0.5 * a + phase) + 90 * cos(2 * a - phase) + 30 * sin(3 * a);
        inertia_kgm2[k] = own;
        slope_kgm2_per_rad[k] = 0;
    }
    return TACET_OK;
}

// The same of a motion that was marched: torques of known lines on every throw at W t.
static void test_roll_torque_of_a_march(void **state)
{
    (void)state;
    demo *d = &of_four[0];
    const tacet_train *t = tacet_model_train(d->model);
    const double W = 150, own = tacet_engine_mean_inertia(tacet_model_engine(d->model));
    size_t node[4], lines = 40, n = tacet_model_throws(d->model);
    assert_int_equal(n, 4);
    for (size_t i = 0; i < n; i++)
        node[i] = tacet_model_throw_node(d->model, i);
    tacet_periodic how = tacet_periodic_default();
    how.revolutions = 2, how.n_lines = lines, how.frozen = true, how.tolerance = 1e-11;
    how.most_passes = 60;
    tacet_arena *a = tacet_arena_create();
    tacet_train_motion motion;
    tacet_train_work *work;
    tacet_solver_note note;
    assert_int_equal(tacet_train_motion_init(&motion, t, lines, a), TACET_OK);
    assert_int_equal(tacet_train_work_create(t, 400, n, &work), TACET_OK);
    assert_int_equal(
        tacet_train_steady(t, W, n, node, four_harmonics, d, &how, work, &motion, &note), TACET_OK);
    tacet_spectrum piston[4], roll;
    for (size_t i = 0; i < n; i++) {
        double phase = 1.3 * (double)i;
        assert_int_equal(tacet_spectrum_init(&piston[i], lines, a), TACET_OK);
        piston[i].mean = 25, piston[i].revolutions = 2;
        piston[i].line[1] = 60 * cexp(I * phase);
        piston[i].line[4] = 90 * cexp(-I * phase);
        piston[i].line[6] = -30 * I;
        for (size_t h = 1; h <= lines; h++)
            piston[i].line[h] +=
                own * W * W / 4 * (double)(h * h) * motion.angle_rad[node[i]].line[h];
    }
    assert_int_equal(tacet_spectrum_init(&roll, lines, a), TACET_OK);
    const tacet_response r = {.train = t,
                              .motion = &motion,
                              .piston_torque_Nm = piston,
                              .throw_node = node,
                              .n_throws = n,
                              .speed_rad_per_s = W,
                              .revolutions = 2,
                              .n_lines = lines};
    assert_int_equal(tacet_quantity_find("roll-torque")->spectrum(&r, 0, &roll), TACET_OK);
    assert_near(demo_roll_mismatch_of(d, &r, &roll), 0, 1e-9, 0);
    tacet_train_work_destroy(work);
    tacet_arena_destroy(a);
}

// What leaves is carried by the mounts, at rest with the static stiffness; a housed load carries
// itself.
static void test_mean_roll_is_what_leaves(void **state)
{
    (void)state;
    demo *d = &of_four[0];
    (void)solve(d, "x.x", 1300, TACET_LEVEL_RIPPLE);
    double leaves = quantity(d, "link-torque:leaves")->mean / 1.3;
    assert_true(leaves < -40); // against the crank: 90 N m through -1.6
    assert_near(quantity(d, "roll-torque")->mean, -leaves, 0, 1e-9);
    tacet_six q, unit = {0, 0, 0, 1, 0, 0};
    assert_int_equal(tacet_body_static(tacet_model_body(d->model), unit, q), TACET_OK);
    double force = 230e3 * (q[2] + q[3] * 0.310 - q[4] * -0.180); // right, not turned
    assert_near(quantity(d, "mount-force:right:z")->mean, -leaves * force, 0, 1e-9);
    d = &of_four[1];
    (void)solve(d, "x.x", 1300, TACET_LEVEL_RIPPLE);
    assert_near(quantity(d, "roll-torque")->mean, 0, 1e-7, 0);
    assert_near(quantity(d, "mount-force:left:z")->mean, 0, 1e-6, 0);
}

// ---- the whole powertrain -----------------------------------------------------------------------

// Axes of the mount `left` of the study, Rx Ry Rz column by column.
static void left_axes(double axis[3][3])
{
    double a = 20 * M_PI / 180, b = -15 * M_PI / 180, c = 35 * M_PI / 180;
    for (int i = 0; i < 3; i++) {
        double v[3] = {i == 0, i == 1, i == 2};
        double z[3] = {cos(c) * v[0] - sin(c) * v[1], sin(c) * v[0] + cos(c) * v[1], v[2]};
        double y[3] = {cos(b) * z[0] + sin(b) * z[2], z[1], -sin(b) * z[0] + cos(b) * z[2]};
        axis[i][0] = y[0];
        axis[i][1] = cos(a) * y[1] - sin(a) * y[2];
        axis[i][2] = sin(a) * y[1] + cos(a) * y[2];
    }
}

static void add_force(const double at[3], const double complex f[3], double complex load[6])
{
    for (int i = 0; i < 3; i++) {
        int j = (i + 1) % 3, k = (i + 2) % 3;
        load[i] += f[i];
        load[3 + i] += at[j] * f[k] - at[k] * f[j];
    }
}

#define LINES 120

// Line by line what a quantity holds.
static size_t take(demo *d, const char *kind, const char *name, const char *axis,
                   double complex out[LINES + 1])
{
    char text[80];
    snprintf(text, sizeof text, "%s%s%s", kind, name, axis);
    const tacet_spectrum *s = quantity(d, text);
    size_t n = s->n_lines < LINES ? s->n_lines : LINES;
    for (size_t h = 1; h <= n; h++)
        out[h] = s->line[h];
    return n;
}

static const char *const axes[] = {":x", ":y", ":z"};
static double complex force_of[3][3][LINES + 1], moved[3][3][LINES + 1], shaken[6][LINES + 1];
static double complex rolled[LINES + 1];

static size_t take_all(demo *d)
{
    static const char *const mounts[] = {"left", "right", "rear"},
                             *const places[] = {"o", "x", "y"}, *const members[] = {"x",     "y",
                                                                                    "z",     "roll",
                                                                                    "pitch", "yaw"};
    for (int m = 0; m < 3; m++)
        for (int i = 0; i < 3; i++) {
            (void)take(d, "mount-force:", mounts[m], axes[i], force_of[m][i]);
            (void)take(d, "place-acceleration:", places[m], axes[i], moved[m][i]);
        }
    for (int i = 0; i < 6; i++)
        (void)take(d, "shaking:", members[i], "", shaken[i]);
    return take(d, "roll-torque", "", "", rolled);
}

// Newton and Euler of the whole: forces of the mounts on the frame, inertia of the body, roll
// torque (what the crank-train loses of momentum, held to that above) and shaking. About x also at
// the crank's axis, where the shaking forces have no arm.
static void balances(demo *d, double direction)
{
    static const double at[3][3] = {
        {-.210, -.300, -.040}, {-.180, .310, -.060}, {.520, .020, -.130}};
    static const double mass[3][3] = {{12, .4, -1.1}, {.4, 22, .3}, {-1.1, .3, 20}};
    double axis[3][3][3] = {
        {{0}}, {{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}, {{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}};
    double largest = 0, worst = 0;
    left_axes(axis[0]);
    size_t n = take_all(d);
    for (size_t h = 1; h <= n; h++) {
        double complex left[6] = {0}, right[6], turn[3];
        for (int m = 0; m < 3; m++) {
            double complex f[3] = {0};
            for (int i = 0; i < 3; i++)
                for (int k = 0; k < 3; k++)
                    f[k] += force_of[m][i][h] * axis[m][i][k];
            add_force(at[m], f, left);
        }
        turn[0] = moved[2][2][h] - moved[0][2][h]; // of y: z rises with roll
        turn[1] = -(moved[1][2][h] - moved[0][2][h]);
        turn[2] = moved[1][1][h] - moved[0][1][h];
        for (int i = 0; i < 3; i++) {
            right[i] = shaken[i][h] - 240 * moved[0][i][h];
            right[3 + i] = shaken[3 + i][h] + (i == 0 ? direction * rolled[h] : 0);
            for (int k = 0; k < 3; k++)
                right[3 + i] -= mass[i][k] * turn[k];
        }
        for (int i = 0; i < 6; i++) {
            largest = fmax(largest, cabs(left[i]));
            worst = fmax(worst, cabs(left[i] - right[i]));
        }
        double complex about = left[3] - (0.012 * left[2] - -0.080 * left[1]);
        double complex there = right[3] - (0.012 * right[2] - -0.080 * right[1]);
        worst = fmax(worst, cabs(about - there));
    }
    assert_true(largest > 30);
    assert_near(worst / largest, 0, 1e-10, 0);
}

static void test_mounts_carry_roll_shaking_and_inertia(void **state)
{
    (void)state;
    demo *d = &of_four[0];
    (void)solve(d, "x.x.x", 1300, TACET_LEVEL_RIPPLE);
    balances(d, 1);
    (void)solve(d, "x", 1900, TACET_LEVEL_RIPPLE);
    balances(d, 1);
    d = &of_four[1];
    (void)solve(d, "x.x.x", 1300, TACET_LEVEL_RIPPLE);
    balances(d, -1);
}

// Shaking belongs to speed and masses: the same bits for every word.
static void test_shaking_knows_no_pattern(void **state)
{
    (void)state;
    static const char *const words[] = {"x", "x.x", "..x.x"};
    demo *d = &of_four[0];
    double complex order[3][25];
    for (int i = 0; i < 3; i++) {
        (void)solve(d, words[i], 1500, TACET_LEVEL_RIPPLE);
        const tacet_spectrum *s = quantity(d, "shaking:pitch");
        for (size_t k = 1; k <= 24; k++)
            order[i][k] = s->line[k * s->revolutions];
        for (size_t h = 1; h <= s->n_lines; h++)
            assert_true(h % s->revolutions == 0 || s->line[h] == 0);
    }
    assert_true(cabs(order[0][1]) > 1 && cabs(order[0][2]) > 1);
    for (size_t k = 1; k <= 24; k++)
        assert_true(order[1][k] == order[0][k] && order[2][k] == order[0][k]);
}

static void test_same_bits_in_any_order_and_with_a_fresh_workspace(void **state)
{
    (void)state;
    static const struct {
        const char *word;
        double rpm;
    } at[] = {{"x", 1200}, {"x.x", 1200}, {"x.x", 2000},
              {"x", 2000}, {".x", 1200},  {"x.x.x", 1530}};
    enum { N = sizeof at / sizeof *at };
    demo *d = &of_four[0];
    tacet_row first[N], again, fresh;
    for (int i = 0; i < N; i++)
        first[i] = solve(d, at[i].word, at[i].rpm, TACET_LEVEL_RIPPLE);
    for (int i = 0; i < N; i++) {
        int j = (i * 5 + 3) % N;
        again = solve(d, at[j].word, at[j].rpm, TACET_LEVEL_RIPPLE);
        demo own = *d;
        assert_int_equal(tacet_workspace_create(d->model, &own.work), TACET_OK);
        fresh = solve(&own, at[j].word, at[j].rpm, TACET_LEVEL_RIPPLE);
        tacet_workspace_destroy(own.work);
        for (size_t b = 0; b < again.n_bands; b++) {
            assert_true(again.bands[b].level.dispersed == first[j].bands[b].level.dispersed);
            assert_true(fresh.bands[b].level.dispersed == first[j].bands[b].level.dispersed);
        }
        assert_true(again.limits[0].value == first[j].limits[0].value);
        assert_true(fresh.limits[0].value == first[j].limits[0].value);
    }
}

// ---- cycles that differ, and sharp answers of body and paths ------------------------------------

static const char one[] =
    "title: one\n"
    "engine: {bore_mm: 108, stroke_mm: 130, rod_length_mm: 215, compression_ratio: 12.5, "
    "reciprocating_mass_kg: 2.7, firing_order: [1],\n"
    "  dispersion: {cylinder_percent: 0, cyclic_percent: 2}}\n"
    "cycle: {manifold_kpa: {lowest: 25, highest: 185}}\n"
    "skip: {longest_run: 1}\n"
    "train:\n"
    "  nodes: [{name: throw1, inertia_kgm2: 3}, {name: flywheel, inertia_kgm2: 2}]\n"
    "  links: [{name: shaft, from: throw1, to: flywheel, stiffness_nm_per_rad: 2e5, damping_ratio: "
    "0.02}]\n"
    "  flywheel: flywheel\n"
    "body:\n"
    "  mass_kg: 200\n"
    "  inertia_kgm2: {xx: 8, yy: 14, zz: 16}\n"
    "  mounts:\n"
    "    - {name: a, at_mm: [-350, -250, -50], x_n_per_mm: 100, y_n_per_mm: 90, z_n_per_mm: 110, "
    "loss_factor: 0.01}\n"
    "    - {name: b, at_mm: [-350, 250, -50], x_n_per_mm: 100, y_n_per_mm: 90, z_n_per_mm: 110, "
    "loss_factor: 0.01}\n"
    "    - {name: c, at_mm: [350, -250, -50], x_n_per_mm: 97, y_n_per_mm: 93, z_n_per_mm: 113, "
    "loss_factor: 0.01}\n"
    "    - {name: d, at_mm: [350, 250, -50], x_n_per_mm: 97, y_n_per_mm: 93, z_n_per_mm: 113, "
    "loss_factor: 0.01}\n"
    "  points: [{name: seat}]\n"
    "  paths: [PATHS]\n"
    "bands: [{name: seat, kind: cab, low_hz: 4, high_hz: 24, quantity: \"cab:seat\", limit_rms: "
    "50}]\n"
    "screen: {speeds_rpm: [900], brake_torque_nm: 40}\n";

static char *one_text(const char *paths)
{
    char *text = calloc(1, 8192);
    strcpy(text, one);
    demo_replace(text, "PATHS", paths);
    return text;
}

#define STEP 2e-3 // Hz

// Trapezia of 2 mHz under |H P|^2 from the counted edges, 3.8 to 25.2 Hz.
static double dense(demo *d, double rpm)
{
    const tacet_train *t = tacet_model_train(d->model);
    tacet_arena *a = tacet_arena_create();
    tacet_spectrum unit, piston, out;
    tacet_train_motion motion;
    tacet_train_work *work;
    tacet_body_response mounts;
    size_t n = 12650, node = tacet_model_throw_node(d->model, 0);
    double speed = 2 * M_PI * STEP, own = tacet_engine_mean_inertia(tacet_model_engine(d->model));
    assert_int_equal(tacet_spectrum_init(&unit, n, a), TACET_OK);
    assert_int_equal(tacet_spectrum_init(&piston, n, a), TACET_OK);
    assert_int_equal(tacet_spectrum_init(&out, n, a), TACET_OK);
    assert_int_equal(tacet_train_motion_init(&motion, t, n, a), TACET_OK);
    assert_int_equal(tacet_train_work_create(t, n, 1, &work), TACET_OK);
    assert_int_equal(tacet_body_response_init(&mounts, n, a), TACET_OK);
    for (size_t h = 1; h <= n; h++)
        unit.line[h] = 1;
    assert_int_equal(tacet_train_harmonic(t, speed, 1, &node, &unit, work, &motion), TACET_OK);
    for (size_t h = 1; h <= n; h++)
        piston.line[h] = 1 + own * speed * speed * (double)(h * h) * motion.angle_rad[node].line[h];
    assert_int_equal(tacet_body_respond(tacet_model_body(d->model), speed, 1, n, &mounts),
                     TACET_OK);
    const tacet_response r = {.train = t,
                              .motion = &motion,
                              .piston_torque_Nm = &piston,
                              .throw_node = &node,
                              .n_throws = 1,
                              .speed_rad_per_s = speed,
                              .revolutions = 1,
                              .n_lines = n,
                              .body = tacet_model_body(d->model),
                              .mounts = &mounts};
    assert_int_equal(tacet_quantity_find("cab")->spectrum(&r, 0, &out), TACET_OK);
    double *order = calloc(n + 1, sizeof *order), sum = 0, W = rpm * M_PI / 30;
    double complex *pulse = calloc(n + 1, sizeof *pulse);
    for (size_t h = 0; h <= n; h++)
        order[h] = (double)h * STEP / (rpm / 60);
    tacet_engine_fired_pulse(tacet_model_engine(d->model), tacet_workspace_engine(d->work), n + 1,
                             order, pulse);
    for (size_t h = 1900; h <= 12600; h++) {
        double both = cabs(out.line[h]) * cabs(pulse[h]) / W;
        sum += both * both * STEP * (h == 1900 || h == 12600 ? 0.5 : 1);
    }
    free(order);
    free(pulse);
    tacet_train_work_destroy(work);
    tacet_arena_destroy(a);
    return 2 * rpm / 120 * 0.02 * 0.02 * sum;
}

static void against_dense(const char *paths)
{
    demo d;
    char *text = one_text(paths);
    demo_open_text(&d, text);
    tacet_row row = solve(&d, "x", 900, TACET_LEVEL_RIPPLE);
    const tacet_band_level *l = &row.bands[0].level;
    double got = l->dispersed * l->dispersed - l->nominal * l->nominal, expected = dense(&d, 900);
    assert_true(expected > 0);
    assert_near(got, expected, 0, 3e-3); // 1e-3 of |H|^2, and a straight |P|^2 between frequencies
    free(text);
    demo_close(&d);
}

// Modes of a body with a loss factor of 0.01, a path that rings for a hundred periods, and one
// that does so beside much larger ones: none is stepped over.
static void test_sharp_body_and_paths_are_integrated(void **state)
{
    (void)state;
    against_dense("{mount: a, to: seat, resonances: [{hz: 30, damping_ratio: 0.3, gain: 1e-3}]}");
    against_dense("{mount: b, to: seat, resonances: [{hz: 17.123, damping_ratio: 0.002, gain: "
                  "1e-5}, {hz: 200, damping_ratio: 0.5, gain: 1e-3}]}");
}

// A table passes nothing outside its rows: a step, at which nothing is without bound.
static void test_a_table_may_end_in_a_band(void **state)
{
    (void)state;
    char path[] = "/tmp/tacet-body-XXXXXX", paths[128];
    int file = mkstemp(path);
    assert_true(file >= 0);
    FILE *f = fdopen(file, "w");
    assert_non_null(f);
    fputs("hz,real,imaginary\n5,1e-3,0\n9.2,2e-3,1e-3\n9.3,0,0\n13.73,0,0\n13.85,0.1,0\n"
          "13.97,0,0\n14.9,0,0\n20.013,1e-3,-5e-4\n",
          f);
    fclose(f);
    snprintf(paths, sizeof paths, "{mount: a, to: seat, table: %s}", path);
    against_dense(paths);
    remove(path);
}

// Paths that cancel but for rounding: no curve to follow, no endless search, no line.
static void test_paths_that_cancel(void **state)
{
    (void)state;
    demo d;
    char *text = one_text(
        "{mount: a, to: seat, resonances: &r [{hz: 7, damping_ratio: 0.1, gain: 1e-3}]}, "
        "{mount: c, to: seat, weight: 0.61, resonances: *r}, {mount: b, to: seat, resonances: *r}, "
        "{mount: d, to: seat, weight: 0.61, resonances: *r}");
    demo_open_text(&d, text);
    tacet_row row = solve(&d, "x", 900, TACET_LEVEL_RIPPLE);
    const tacet_band_level *l = &row.bands[0].level; // a single shakes along z
    assert_true(l->nominal > 1e-3);
    assert_near(l->dispersed / l->nominal, 1, 1e-12, 0);
    free(text);
    demo_close(&d);
}

// Mounts without loss have answers without bound, and zeros between them which are harmless.
static void test_undamped_mounts(void **state)
{
    (void)state;
    demo d;
    tacet_error e;
    char *text =
        one_text("{mount: a, to: seat, resonances: [{hz: 30, damping_ratio: 0.3, gain: 1e-3}]}");
    for (int i = 0; i < 4; i++)
        demo_replace(text, "loss_factor: 0.01", "loss_factor: 0");
    assert_int_equal(demo_try_text(&d, text, &e), TACET_BAD_INPUT);
    assert_non_null(strstr(e.text, "band 'seat' holds an undamped mode at"));
    assert_non_null(strstr(e.text, "mounts damping"));
    demo_close(&d);
    demo_replace(text, "low_hz: 4, high_hz: 24", "low_hz: 26, high_hz: 90"); // above all modes
    assert_int_equal(demo_try_text(&d, text, &e), TACET_OK);
    demo_close(&d);
    free(text);
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_roll_torque_of_a_backward_gearbox),
    cmocka_unit_test(test_roll_torque_of_a_march),
    cmocka_unit_test(test_mean_roll_is_what_leaves),
    cmocka_unit_test(test_mounts_carry_roll_shaking_and_inertia),
    cmocka_unit_test(test_shaking_knows_no_pattern),
    cmocka_unit_test(test_same_bits_in_any_order_and_with_a_fresh_workspace),
    cmocka_unit_test(test_sharp_body_and_paths_are_integrated),
    cmocka_unit_test(test_a_table_may_end_in_a_band),
    cmocka_unit_test(test_paths_that_cancel),
    cmocka_unit_test(test_undamped_mounts),
};

int main(void)
{
    return cmocka_run_group_tests(tests, open_both, close_both);
}
