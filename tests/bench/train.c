// How long the ways to the periodic steady state take, on a reference train: twelve inertias, a six
// with the pattern 3/7, 14 revolutions, 336 orders, invented gas pulses; damping once viscous, once
// by loss factors, whose arms make four times as many states. CVODE (Adams) marches the same
// right-hand sides until they have settled. Prints ratios; run by `meson test --benchmark`.
#include "near.h"
#include "rig.h"
#include "train/march.h"
#include <cvode/cvode.h>
#include <math.h>
#include <nvector/nvector_serial.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sunnonlinsol/sunnonlinsol_fixedpoint.h>
#include <time.h>

#define RPM       900
#define LINES     336
#define TURNS     14
#define SAMPLES   8192
#define SETTLED   1e-6 // change of a speed over a repeat, over the largest
#define MOST      60   // repeats
#define TOLERANCE 1e-9 // of CVODE, which finds lines about as well as march and shooting do: 3e-8

static const size_t throws[] = {2, 3, 4, 5, 6, 7};

static double now(void)
{
    struct timespec t;
    clock_gettime(CLOCK_PROCESS_CPUTIME_ID, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

// The forwarder with a fan on a belt, and so much damping at the pumps that the mean speed settles
// in a second, as a soft speed hold would let it.
static bench_train *twelve(bool viscous)
{
    bench_train *b = forwarder();
    const char *flywheel = b->d.flywheel;
    size_t fan = bench_node(b, 0.08), belt = bench_link(b, fan, 1, 900);
    b->link[belt].gear_ratio = 1.4;
    b->link[belt].loss_factor = 0.1;
    b->d.flywheel = flywheel;
    b->node[10].damping_Nms_per_rad = 2;
    for (size_t e = 0; viscous && e < b->d.n_links; e++) {
        b->link[e].damping_ratio = b->link[e].loss_factor / 2;
        b->link[e].loss_factor = NAN;
    }
    return b;
}

// ---- CVODE --------------------------------------------------------------------------------------

typedef struct {
    march_model model;
    march_drive drive;
    double offset[16], mean[6], *state, *before;
    SUNContext context;
    N_Vector y, absolute;
    void *memory;
    SUNNonlinearSolver solver;
} marcher;

static int rate(realtype t, N_Vector y, N_Vector ydot, void *drive)
{
    return march_rate(t, N_VGetArrayPointer(y), N_VGetArrayPointer(ydot), drive) ? -1 : 0;
}

static void require(bool fine)
{
    if (fine) return;
    fprintf(stderr, "bench_train: out of memory, or CVODE failed\n");
    exit(1);
}

// From rest, about the mean torques in r->torque.
static marcher *marcher_new(rig *r, tacet_drive *drive, const void *who, bool is_frozen)
{
    marcher *m = calloc(1, sizeof *m);
    require(m && march_model_create(&m->model, r->t, r->arena));
    for (int i = 0; i < 6; i++)
        m->mean[i] = r->torque[i].mean;
    m->drive = (march_drive){.m = &m->model,
                             .n_throws = 6,
                             .node = throws,
                             .drive = drive,
                             .who = who,
                             .frozen = is_frozen,
                             .speed_rad_per_s = RPM * 2 * M_PI / 60,
                             .offset = m->offset,
                             .mean = m->mean};
    size_t n = m->model.size;
    m->state = calloc(n, sizeof *m->state);
    m->before = calloc(n, sizeof *m->before);
    require(SUNContext_Create(NULL, &m->context) == 0);
    m->y = N_VMake_Serial((sunindextype)n, m->state, m->context);
    m->absolute = N_VNew_Serial((sunindextype)n, m->context);
    for (size_t i = 0; i < n; i++) // speeds of 1 rad/s, twists of 1e-4 rad
        N_VGetArrayPointer(m->absolute)[i] = TOLERANCE * (i < m->model.n ? 1 : 1e-4);
    m->memory = CVodeCreate(CV_ADAMS, m->context);
    m->solver = SUNNonlinSol_FixedPoint(m->y, 0, m->context);
    require(CVodeInit(m->memory, rate, 0, m->y) == CV_SUCCESS);
    require(CVodeSVtolerances(m->memory, TOLERANCE, m->absolute) == CV_SUCCESS);
    require(CVodeSetUserData(m->memory, &m->drive) == CV_SUCCESS);
    require(CVodeSetNonlinearSolver(m->memory, m->solver) == CV_SUCCESS);
    require(CVodeSetMaxNumSteps(m->memory, 100000000) == CV_SUCCESS);
    return m;
}

static void marcher_free(marcher *m)
{
    CVodeFree(&m->memory);
    SUNNonlinSolFree(m->solver);
    N_VDestroy(m->y);
    N_VDestroy(m->absolute);
    SUNContext_Free(&m->context);
    free(m->state);
    free(m->before);
    free(m);
}

// Largest change of a speed over a repeat, relative.
static double change(const marcher *m)
{
    double moved = 0, largest = 0;
    for (size_t j = 0; j < m->model.n; j++) {
        moved = fmax(moved, fabs(m->state[j] - m->before[j]));
        largest = fmax(largest, fabs(m->state[j]));
    }
    return moved / largest;
}

// Marches and samples one more repeat; largest difference of speed lines from those in r->m.
static double lines_of_repeat(rig *r, marcher *m, double from_s)
{
    double period = 2 * M_PI * TURNS / m->drive.speed_rad_per_s, t, apart = 0, largest = 0;
    size_t n = m->model.n;
    double *sample = malloc(n * SAMPLES * sizeof *sample);
    tacet_transform *transform = NULL;
    require(sample && tacet_transform_create(SAMPLES, &transform) == TACET_OK);
    double *x = tacet_transform_buffer(transform);
    for (size_t k = 0; k < SAMPLES; k++) {
        for (size_t j = 0; j < n; j++)
            sample[j * SAMPLES + k] = m->state[j];
        double next = from_s + period * (double)(k + 1) / SAMPLES;
        require(CVode(m->memory, next, m->y, &t, CV_NORMAL) == CV_SUCCESS);
    }
    for (size_t j = 0; j < n; j++) {
        tacet_spectrum s;
        require(x && tacet_spectrum_init(&s, LINES, r->arena) == TACET_OK);
        memcpy(x, sample + j * SAMPLES, SAMPLES * sizeof *x);
        tacet_transform_lines(transform, x, &s);
        for (size_t h = 1; h <= LINES; h++) { // the march's speeds are referred to the crank
            double complex v = I * (double)h / TURNS * m->drive.speed_rad_per_s *
                               r->m.angle_rad[j].line[h] / tacet_train_node_ratio(r->t, j);
            apart = fmax(apart, cabs(v - s.line[h]));
            largest = fmax(largest, cabs(v));
        }
    }
    free(sample);
    tacet_transform_release(x);
    tacet_transform_destroy(transform);
    return apart / largest;
}

// Seconds until settled, or for *repeats repeats if that is not 0; then it holds how many it took.
static double march_by_cvode(rig *r, tacet_drive *drive, const void *who, bool is_frozen,
                             unsigned *most)
{
    marcher *m = marcher_new(r, drive, who, is_frozen);
    double period = 2 * M_PI * TURNS / m->drive.speed_rad_per_s, start = now(), moved = INFINITY, t;
    unsigned repeats = 0;
    while (*most ? repeats < *most : moved > SETTLED && repeats < MOST) {
        memcpy(m->before, m->state, m->model.size * sizeof *m->state);
        repeats++;
        require(CVode(m->memory, repeats * period, m->y, &t, CV_NORMAL) == CV_SUCCESS);
        moved = change(m);
    }
    double took = now() - start;
    double apart = is_frozen ? lines_of_repeat(r, m, repeats * period) : NAN;
    printf("  CVODE until settled              %9.3f s    %u repeats, %u right-hand sides%s\n",
           took, repeats, m->drive.evaluations, repeats == MOST ? ", NOT SETTLED" : "");
    if (is_frozen) printf("    lines of speed: %.1e of the largest from the harmonic's\n", apart);
    *most = repeats;
    marcher_free(m);
    return took;
}

// ---- ours ---------------------------------------------------------------------------------------

typedef tacet_status way(rig *r, const pulses *p, tacet_train_motion *m);

static tacet_status steady(rig *r, const pulses *p, tacet_train_motion *m)
{
    return rig_steady(r, RPM, pulses_drive, p, m);
}

static tacet_status frozen(rig *r, const pulses *p, tacet_train_motion *m)
{
    r->how.frozen = true;
    tacet_status status = rig_steady(r, RPM, pulses_drive, p, m);
    r->how.frozen = false;
    return status;
}

static tacet_status ripple(rig *r, const pulses *p, tacet_train_motion *m)
{
    r->how.tolerance = 1e-4;
    tacet_status status = rig_ripple(r, RPM, pulses_drive, p, m);
    r->how.tolerance = 0;
    return status;
}

static tacet_status harmonic(rig *r, const pulses *p, tacet_train_motion *m)
{
    (void)p;
    return rig_harmonic(r, RPM, m);
}

// Best of some runs.
static double best(way *solve, rig *r, const pulses *p, tacet_train_motion *m, int runs)
{
    double took = INFINITY;
    for (int i = 0; i < runs; i++) {
        double start = now();
        if (solve(r, p, m) != TACET_OK) exit(1);
        took = fmin(took, now() - start);
    }
    return took;
}

static void steady_line(const rig *r, double took, double cvode)
{
    printf("  march and shooting               %9.3f ms   %u repeats, %u right-hand sides: "
           "%.0f times faster\n",
           1e3 * took, r->note.repeats, r->note.evaluations, cvode / took);
}

// Torque at the throws' own angles, varying inertia. Where the mean speed settles is not exactly
// RPM, so that a march never quite repeats itself: it is given as many repeats as at constant
// speed.
static void full_model(rig *r, const pulses *p, unsigned repeats)
{
    tacet_train_motion by_march = rig_motion(r);
    printf(" torque follows the throws' angles\n");
    if (rig_ripple(r, RPM, pulses_drive, p, &r->m) != TACET_OK) exit(1); // means of torque
    double cvode = march_by_cvode(r, pulses_drive, p, false, &repeats);
    double took = best(steady, r, p, &by_march, 5);
    steady_line(r, took, cvode);
    took = best(ripple, r, p, &r->m, 50);
    printf("  harmonic with ripple, 1e-4       %9.1f us   %u passes, %u samples of torque: "
           "%.0f times faster\n",
           1e6 * took, r->note.repeats, r->note.evaluations, cvode / took);
    printf("    lines of link torque within 40 dB of the largest: %.4f dB from the march\n",
           lines_apart_db(r->m.link_torque_Nm, by_march.link_torque_Nm, r->m.n_links, 40));
}

// Torque at constant speed, mean inertia; repeats that CVODE needed.
static unsigned constant_speed(rig *r, const pulses *p)
{
    tacet_train_motion by_march = rig_motion(r);
    unsigned repeats = 0;
    printf(" torque at constant speed\n");
    require(rig_harmonic(r, RPM, &r->m) == TACET_OK);
    double cvode = march_by_cvode(r, pulses_drive, p, true, &repeats);
    double took = best(frozen, r, p, &by_march, 5);
    steady_line(r, took, cvode);
    took = best(harmonic, r, p, &r->m, 500);
    printf("  harmonic                         %9.1f us   %.0f times faster\n", 1e6 * took,
           cvode / took);
    printf("    lines of link torque: %.1e of the largest from the march\n",
           lines_apart(by_march.link_torque_Nm, r->m.link_torque_Nm, r->m.n_links, 0));
    return repeats;
}

// Torque of the throws at constant speed, and its means, in r->torque.
static void sample_torque(rig *r, const pulses *p)
{
    tacet_transform *t = NULL;
    require(tacet_transform_create(SAMPLES, &t) == TACET_OK);
    double *T = tacet_transform_buffer(t), *angle = malloc(3 * SAMPLES * sizeof *angle);
    double W = RPM * 2 * M_PI / 60, *J = angle + SAMPLES, *slope = J + SAMPLES;
    require(T && angle);
    for (size_t k = 0; k < SAMPLES; k++)
        angle[k] = 2 * M_PI * TURNS * (double)k / SAMPLES;
    for (size_t i = 0; i < 6; i++) {
        require(pulses_drive(p, i, SAMPLES, angle, T, J, slope) == TACET_OK);
        for (size_t k = 0; k < SAMPLES; k++)
            T[k] -= 0.5 * slope[k] * W * W;
        tacet_transform_lines(t, T, &r->torque[i]);
    }
    free(angle);
    tacet_transform_release(T);
    tacet_transform_destroy(t);
}

int main(void)
{
    pulses p;
    pulses_six(&p, "..x.x.x", 2050);
    for (int viscous = 1; viscous >= 0; viscous--) {
        rig *r = rig_new(twelve(viscous), 6, throws, TURNS, LINES);
        printf("%s\n", viscous ? "viscous damping" : "loss factors");
        sample_torque(r, &p);
        unsigned repeats = constant_speed(r, &p);
        full_model(r, &p, repeats);
        rig_free(r);
    }
    return 0;
}
