// Roll torque: the torque about the crank's axis, positive with its rotation, that the moving parts
// put on the housing (all that is `on: powertrain`).
//
// Free bodies, all torques about the crank's axis and positive with the crank's rotation; a node
// that turns the other way has a negative ratio, and its angle and torques count in the same sense.
//
//   piston   The rod puts T_piston on the crank (gas and reciprocating inertia, actual a' and a'').
//            Rod and piston push back through liner and head: -T_piston on the housing. The main
//            bearings' forces pass through the axis.
//   friction Takes T_f from the crank and drags the housing along: +T_f. Its mean alone is known
//            here; the pistons' mean holds it, so it cancels out of mean M.
//   ground   C (a' - W ratio) is taken from the node and put on the housing: +C a'_fluctuation.
//   gears    The massless stage takes T_in = T_to / ratio from `from` and gives T_out = T_to to
//            `to`. What is missing for its balance comes from its bearings: the housing feels
//            T_in - T_out. With both nodes on the powertrain; else the torque leaves.
//   load     Takes T_load from its node; housed, it puts T_load on the housing. Order 0 only: the
//            load torque is constant.
//
// (A)  M = - sum T_piston + T_f + sum C a' + sum (T_in - T_out) + T_load
//
// Adding up the housed nodes' equations J a'' = T_piston - T_f - C a' - T_load + link torques gives
//
// (B)  M = - d/dt (sum J a') - sum of torques in shafts that leave
//
// (the reciprocating part sits in T_piston's own inertia; a piston whose line passes through the
// axis has no angular momentum about it). Shafts between housed nodes cancel. Mean M = -(torque
// that leaves), 0 when the load is housed. (A) = (B) is tested on a train solved by other means.
// With a pin offset e a piston also puts -m x'' e on the housing: a shaking moment, the same for
// every pattern, and not part of this quantity.
#include "judge/quantities.h"

static void add_ground(const tacet_response *r, size_t n, tacet_spectrum *out)
{
    double base = quantity_base(r);
    for (size_t node = 0; node < tacet_train_nodes(r->train); node++) {
        double damping = tacet_train_node_damping(r->train, node);
        if (damping == 0 || !tacet_train_node_housed(r->train, node)) continue;
        const double complex *angle = r->motion->angle_rad[node].line;
        for (size_t h = 1; h <= n; h++)
            out->line[h] += I * (damping * base * (double)h) * angle[h];
    }
}

static void add_gears(const tacet_response *r, size_t n, tacet_spectrum *out)
{
    for (size_t link = 0; link < tacet_train_links(r->train); link++) {
        tacet_link_info info = tacet_train_link_info(r->train, link);
        if (!tacet_train_node_housed(r->train, info.from) ||
            !tacet_train_node_housed(r->train, info.to))
            continue;
        double share = 1 / info.gear_ratio - 1; // T_in - T_out over T_to
        if (share == 0) continue;
        const tacet_spectrum *torque = &r->motion->link_torque_Nm[link];
        out->mean += share * torque->mean;
        for (size_t h = 1; h <= n; h++)
            out->line[h] += share * torque->line[h];
    }
}

// Mean torque that the load takes, from the balance of mean powers: mean fluctuation powers belong
// to the dampers, and the mean torques alone balance over the rigidly turning train.
static double load_torque(const tacet_response *r)
{
    double sum = -r->friction_Nm;
    for (size_t i = 0; i < r->n_throws; i++)
        sum += r->piston_torque_Nm[i].mean * tacet_train_node_ratio(r->train, r->throw_node[i]);
    return sum / tacet_train_node_ratio(r->train, tacet_train_load(r->train));
}

tacet_status roll_torque(const tacet_response *r, size_t none, tacet_spectrum *out)
{
    (void)none;
    size_t n = quantity_begin(r, out);
    out->mean = r->friction_Nm;
    for (size_t i = 0; i < r->n_throws; i++) {
        const tacet_spectrum *piston = &r->piston_torque_Nm[i];
        out->mean -= piston->mean;
        for (size_t h = 1; h <= n; h++)
            out->line[h] -= piston->line[h];
    }
    add_ground(r, n, out);
    add_gears(r, n, out);
    if (tacet_train_node_housed(r->train, tacet_train_load(r->train))) out->mean += load_torque(r);
    return TACET_OK;
}
