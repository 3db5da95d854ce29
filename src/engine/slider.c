// Exact slider-crank with pin offset.
//
// phi is the crank angle from the cylinder axis, e the pin offset, towards the side to which the
// crank pin moves after top. Height of the piston pin over the crank axis
//   s = r cos(phi) + sqrt(l^2 - b^2),  b = r sin(phi) - e
// (a triangle of crank, rod and axis). It is largest when crank and rod are in line,
//   sin(phi_top) = e / (l + r),  s_top = sqrt((l + r)^2 - e^2),
// so with angles from piston top, phi = phi_top + angle and x = s_top - s. Limits: e = 0 gives the
// common closed form; l -> infinity gives x = r (1 - cos angle).
#include "tacet/engine.h"
#include <math.h>

void tacet_slider_at(const tacet_slider *s, double angle_rad, double *x, double *dx, double *ddx)
{
    double r = s->crank_m, l = s->rod_m, e = s->offset_m;
    double phi = angle_rad + (e == 0 ? 0 : asin(e / (l + r)));
    double b = r * sin(phi) - e, db = r * cos(phi), ddb = -r * sin(phi);
    double q = sqrt(l * l - b * b);
    *x = sqrt((l + r) * (l + r) - e * e) - db - q;
    *dx = -ddb + b * db / q;
    *ddx = db + (db * db + b * ddb) / q + b * b * db * db / (q * q * q);
}
