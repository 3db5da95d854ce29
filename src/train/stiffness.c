// Stiffness of a link from the one way in which it is stated.
//
// Plain shaft: k = pi G (D^4 - d^4) / (32 L) (Saint-Venant; any strength of materials).
// Crank throw, one of two empirical rules for the length l of a shaft of polar section
// pi D^4 / 32 that is as soft as the throw, from memory:
//   Carter      l/D^4 = (Lj + 0.8 Lw)/(Dj^4 - dj^4) + 0.75 Lp/(Dp^4 - dp^4) + 1.5 R/(Lw W^3)
//   Ker Wilson  l/D^4 = (Lj + 0.4 Dj)/(Dj^4 - dj^4) + (Lp + 0.4 Dp)/(Dp^4 - dp^4)
//                       + (R - 0.2 (Dj + Dp))/(Lw W^3)
// with journal Lj, Dj, dj, pin Lp, Dp, dp (length, outer, inner), throw R, web Lw thick and W wide;
// k = (pi G / 32) / (l/D^4). They differ by 5 to 15 %. Sources: B. C. Carter, "An empirical formula
// for crankshaft stiffness in torsion", Engineering, 1928; W. Ker Wilson, Practical Solution of
// Torsional Vibration Problems, vol. 1.
#include "train/internal.h"
#include <math.h>

// D^4 - d^4; a bore that is not stated is none.
static double fourths(double outer, double inner)
{
    double square = outer * outer, less = isnan(inner) ? 0 : inner * inner;
    return (square - less) * (square + less);
}

bool link_throw_stated(const tacet_link_def *l)
{
    const tacet_throw_def *t = &l->throw_;
    return t->formula >= 0 || !isnan(t->journal_length_m) || !isnan(t->journal_outer_m) ||
           !isnan(t->pin_length_m) || !isnan(t->pin_outer_m) || !isnan(t->throw_m) ||
           !isnan(t->web_thickness_m) || !isnan(t->web_width_m);
}

unsigned link_stiffness_ways(const tacet_link_def *l)
{
    return !isnan(l->stiffness_Nm_per_rad) + !isnan(l->stiffness_catalogue_Nm_per_rad) +
           !isnan(l->length_m) + link_throw_stated(l);
}

// l/D^4, 1/m3.
static double throw_length(const tacet_throw_def *t)
{
    double journal = fourths(t->journal_outer_m, t->journal_inner_m);
    double pin = fourths(t->pin_outer_m, t->pin_inner_m);
    double web = t->web_thickness_m * t->web_width_m * t->web_width_m * t->web_width_m;
    if (t->formula == TACET_THROW_CARTER)
        return (t->journal_length_m + 0.8 * t->web_thickness_m) / journal +
               0.75 * t->pin_length_m / pin + 1.5 * t->throw_m / web;
    return (t->journal_length_m + 0.4 * t->journal_outer_m) / journal +
           (t->pin_length_m + 0.4 * t->pin_outer_m) / pin +
           (t->throw_m - 0.2 * (t->journal_outer_m + t->pin_outer_m)) / web;
}

tacet_status tacet_link_stiffness(const tacet_link_def *l, double *out, tacet_error *e)
{
    const char *name = l->name ? l->name : "";
    if (link_stiffness_ways(l) != 1)
        return tacet_fail(e, TACET_BAD_INPUT, "link '%s': %u ways to state its stiffness; one",
                          name, link_stiffness_ways(l));
    if (link_throw_stated(l) && l->throw_.formula < 0)
        return tacet_fail(e, TACET_BAD_INPUT,
                          "link '%s': a throw without a formula; carter or ker-wilson", name);
    double k = l->stiffness_Nm_per_rad;
    if (!isnan(l->stiffness_catalogue_Nm_per_rad)) k = l->stiffness_catalogue_Nm_per_rad;
    if (!isnan(l->length_m))
        k = M_PI * l->shear_modulus_Pa * fourths(l->outer_m, l->inner_m) / (32 * l->length_m);
    if (link_throw_stated(l)) k = M_PI * l->shear_modulus_Pa / (32 * throw_length(&l->throw_));
    if (!isfinite(k) || k <= 0)
        return tacet_fail(e, TACET_BAD_INPUT,
                          "link '%s': a stiffness of %g N m/rad; finite and above 0", name, k);
    *out = k;
    return TACET_OK;
}
