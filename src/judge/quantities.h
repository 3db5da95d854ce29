// Functions of the quantity table, by family. Of this room only.
#ifndef JUDGE_QUANTITIES_H
#define JUDGE_QUANTITIES_H
#include "tacet/judge.h"

#define MPA_PER_PA 1e-6

// Zeroes out and puts it on the response's grid; lines to fill: 1..result.
size_t quantity_begin(const tacet_response *r, tacet_spectrum *out);
// rad/s of line 1.
double quantity_base(const tacet_response *r);

// roll.c
tacet_status roll_torque(const tacet_response *r, size_t none, tacet_spectrum *out);
// motion.c
tacet_status node_angle(const tacet_response *r, size_t node, tacet_spectrum *out);
tacet_status node_speed(const tacet_response *r, size_t node, tacet_spectrum *out);
tacet_status node_acceleration(const tacet_response *r, size_t node, tacet_spectrum *out);
tacet_status irregularity(const tacet_response *r, size_t none, tacet_spectrum *out);
// shafts.c
tacet_status link_torque(const tacet_response *r, size_t link, tacet_spectrum *out);
tacet_status link_stress(const tacet_response *r, size_t link, tacet_spectrum *out);
tacet_status damper_heat(const tacet_response *r, size_t link, double *out);
// mounts.c
tacet_status mount_force(const tacet_response *r, size_t target, tacet_spectrum *out);
tacet_status place_acceleration(const tacet_response *r, size_t target, tacet_spectrum *out);
tacet_status cab(const tacet_response *r, size_t point, tacet_spectrum *out);
tacet_status shaking(const tacet_response *r, size_t member, tacet_spectrum *out);
// gas.c
tacet_status peak_pressure(const tacet_response *r, size_t none, double *out);

#endif
