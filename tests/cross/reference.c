#include "reference.h"
#include "near.h"
#include "train/internal.h"
#include <cvode/cvode.h>
#include <math.h>
#include <nvector/nvector_serial.h>
#include <stdlib.h>
#include <string.h>
#include <sunnonlinsol/sunnonlinsol_fixedpoint.h>

// Mean torque of each link by repeated balance: every node but the load passes on what it gets.
static void balance_means(reference *r, const double *mean)
{
    double *node = calloc(r->n, sizeof *node);
    bool *done = calloc(r->links, sizeof *done);
    for (size_t i = 0; i < r->n_throws; i++)
        node[r->node[i]] += mean[i];
    for (size_t pass = 0; pass < r->links; pass++)
        for (size_t e = 0; e < r->links; e++) {
            tacet_link_info l = tacet_train_link_info(r->t, e);
            size_t open[2] = {0, 0}, end[2] = {l.from, l.to};
            for (int side = 0; side < 2; side++)
                for (size_t f = 0; f < r->links; f++) {
                    tacet_link_info o = tacet_train_link_info(r->t, f);
                    open[side] += !done[f] && (o.from == end[side] || o.to == end[side]);
                }
            size_t load = tacet_train_load(r->t);
            bool from_end = open[0] == 1 && l.from != load, to_end = open[1] == 1 && l.to != load;
            if (done[e] || !(from_end || to_end)) continue;
            r->mean_torque[e] = from_end ? node[l.from] * l.gear_ratio : -node[l.to];
            node[l.from] -= r->mean_torque[e] / l.gear_ratio;
            node[l.to] += r->mean_torque[e];
            done[e] = true;
        }
    r->load_Nm = node[tacet_train_load(r->t)];
    free(node);
    free(done);
}

static void twist_statically(reference *r)
{
    bool *known = calloc(r->n, sizeof *known);
    known[tacet_train_flywheel(r->t)] = true;
    for (size_t pass = 0; pass < r->links; pass++)
        for (size_t e = 0; e < r->links; e++) {
            tacet_link_info l = tacet_train_link_info(r->t, e);
            double twist = r->mean_torque[e] / l.stiffness_Nm_per_rad;
            if (known[l.from] && !known[l.to]) {
                r->offset[l.to] = r->offset[l.from] / l.gear_ratio - twist;
                known[l.to] = true;
            } else if (known[l.to] && !known[l.from]) {
                r->offset[l.from] = (r->offset[l.to] + twist) * l.gear_ratio;
                known[l.from] = true;
            }
        }
    free(known);
}

reference *reference_new(const tacet_train *t, double speed, size_t n_throws, const size_t *node,
                         const double *mean_Nm, tacet_drive *drive, const void *who, bool frozen)
{
    reference *r = calloc(1, sizeof *r);
    assert_non_null(r);
    *r = (reference){.t = t,
                     .n = tacet_train_nodes(t),
                     .links = tacet_train_links(t),
                     .arms = t->n_arms,
                     .speed = speed,
                     .n_throws = n_throws,
                     .node = node,
                     .drive = drive,
                     .who = who,
                     .frozen = frozen};
    r->size = 2 * r->n + r->links * r->arms;
    r->offset = calloc(r->n, sizeof(double));
    r->mean_torque = calloc(r->links + 1, sizeof(double));
    r->push = calloc(r->n, sizeof(double));
    r->inertia = calloc(r->n, sizeof(double));
    balance_means(r, mean_Nm);
    if (!frozen) twist_statically(r);
    return r;
}

void reference_free(reference *r)
{
    free(r->offset);
    free(r->mean_torque);
    free(r->push);
    free(r->inertia);
    free(r);
}

double reference_link_torque(const reference *r, size_t e, const double *state)
{
    tacet_link_info l = tacet_train_link_info(r->t, e);
    const link_law *law = &r->t->law[e];
    const double *x = state, *v = state + r->n, *s = state + 2 * r->n + e * r->arms;
    double T = law->rest * (x[l.from] / l.gear_ratio - x[l.to]) +
               law->viscous * (v[l.from] / l.gear_ratio - v[l.to]);
    for (size_t a = 0; law->weight && a < r->arms; a++)
        T += law->weight[a] * s[a];
    return T;
}

void reference_rate(reference *r, double t, const double *state, double *rate)
{
    const double *x = state, *v = state + r->n;
    r->evaluations++;
    for (size_t j = 0; j < r->n; j++) {
        rate[j] = v[j];
        r->push[j] = -tacet_train_node_damping(r->t, j) * v[j];
        r->inertia[j] = tacet_train_node_inertia(r->t, j);
    }
    for (size_t e = 0; e < r->links; e++) {
        tacet_link_info l = tacet_train_link_info(r->t, e);
        const double *s = state + 2 * r->n + e * r->arms;
        double T = reference_link_torque(r, e, state) + r->mean_torque[e];
        double turning = v[l.from] / l.gear_ratio - v[l.to];
        r->push[l.to] += T;
        r->push[l.from] -= T / l.gear_ratio;
        for (size_t a = 0; a < r->arms; a++)
            rate[2 * r->n + e * r->arms + a] = turning - r->t->rate[a] * s[a];
    }
    r->push[tacet_train_load(r->t)] -= r->load_Nm;
    for (size_t i = 0; i < r->n_throws; i++) {
        size_t j = r->node[i];
        double angle = r->speed * t, speed = r->speed, torque, J, slope;
        if (!r->frozen) {
            angle += r->offset[j] + x[j];
            speed += v[j];
        }
        assert_int_equal(r->drive(r->who, i, 1, &angle, &torque, &J, &slope), TACET_OK);
        r->push[j] += torque - 0.5 * slope * speed * speed;
        if (!r->frozen) r->inertia[j] += J - r->t->added[j];
    }
    for (size_t j = 0; j < r->n; j++)
        rate[r->n + j] = r->push[j] / r->inertia[j];
}

void reference_start(const reference *r, const tacet_train_motion *m, double *state)
{
    double base = r->speed / m->angle_rad[0].revolutions;
    memset(state, 0, r->size * sizeof *state);
    for (size_t h = 1; h <= m->angle_rad[0].n_lines; h++) {
        double w = base * (double)h;
        for (size_t j = 0; j < r->n; j++) {
            state[j] += creal(m->angle_rad[j].line[h]);
            state[r->n + j] += creal(I * w * m->angle_rad[j].line[h]);
        }
        for (size_t e = 0; e < r->links; e++) {
            tacet_link_info l = tacet_train_link_info(r->t, e);
            double complex u =
                m->angle_rad[l.from].line[h] / l.gear_ratio - m->angle_rad[l.to].line[h];
            for (size_t a = 0; a < r->arms; a++)
                state[2 * r->n + e * r->arms + a] += creal(u * I * w / (r->t->rate[a] + I * w));
        }
    }
}

void reference_lines(const reference *r, const double *states, size_t n, unsigned revolutions,
                     tacet_train_motion *out)
{
    tacet_transform *t = NULL;
    assert_int_equal(tacet_transform_create(n, &t), TACET_OK);
    double *x = tacet_transform_buffer(t);
    for (size_t j = 0; j < r->n; j++) {
        for (size_t k = 0; k < n; k++)
            x[k] = states[k * r->size + r->n + j];
        tacet_transform_lines(t, x, &out->angle_rad[j]);
        for (size_t h = 1; h <= out->angle_rad[j].n_lines; h++)
            out->angle_rad[j].line[h] *= revolutions / (I * r->speed * (double)h);
        out->angle_rad[j].revolutions = revolutions;
    }
    for (size_t e = 0; e < r->links; e++) {
        for (size_t k = 0; k < n; k++)
            x[k] = reference_link_torque(r, e, states + k * r->size);
        tacet_transform_lines(t, x, &out->link_torque_Nm[e]);
        out->link_torque_Nm[e].revolutions = revolutions;
        out->link_torque_Nm[e].mean += r->mean_torque[e];
    }
    tacet_transform_release(x);
    tacet_transform_destroy(t);
}

static int cvode_rate(realtype t, N_Vector y, N_Vector ydot, void *data)
{
    reference_rate(data, t, N_VGetArrayPointer(y), N_VGetArrayPointer(ydot));
    return 0;
}

size_t reference_cvode(reference *r, double *state, double period_s, unsigned repeats,
                       double tolerance, size_t n, double *states)
{
    SUNContext context;
    assert_int_equal(SUNContext_Create(NULL, &context), 0);
    N_Vector y = N_VMake_Serial((sunindextype)r->size, state, context);
    N_Vector absolute = N_VNew_Serial((sunindextype)r->size, context);
    for (size_t i = 0; i < r->size; i++)
        N_VGetArrayPointer(absolute)[i] = tolerance * (i >= r->n && i < 2 * r->n ? 1 : 1e-4);
    void *memory = CVodeCreate(CV_ADAMS, context);
    SUNNonlinearSolver solver = SUNNonlinSol_FixedPoint(y, 0, context);
    assert_int_equal(CVodeInit(memory, cvode_rate, 0, y), CV_SUCCESS);
    assert_int_equal(CVodeSVtolerances(memory, tolerance, absolute), CV_SUCCESS);
    assert_int_equal(CVodeSetUserData(memory, r), CV_SUCCESS);
    assert_int_equal(CVodeSetNonlinearSolver(memory, solver), CV_SUCCESS);
    assert_int_equal(CVodeSetMaxNumSteps(memory, 100000000), CV_SUCCESS);
    r->evaluations = 0;
    for (unsigned repeat = 0; repeat < repeats; repeat++)
        for (size_t k = 0; k < n; k++) {
            if (repeat + 1 == repeats) memcpy(states + k * r->size, state, r->size * sizeof *state);
            double t, next = period_s * (repeat + (double)(k + 1) / (double)n);
            assert_int_equal(CVode(memory, next, y, &t, CV_NORMAL), CV_SUCCESS);
        }
    CVodeFree(&memory);
    SUNNonlinSolFree(solver);
    N_VDestroy(y);
    N_VDestroy(absolute);
    SUNContext_Free(&context);
    return r->evaluations;
}
