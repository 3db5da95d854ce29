// What reaches mounts and people, as JSON; empty lists without a body or a solved condition.
#include "cli/point_body.h"
#include <math.h>

static const char *const axes[] = {"x", "y", "z"};

static double degrees(double complex z)
{
    return carg(z) * 180 / M_PI;
}

static void force_json(tacet_json *j, const point_body *b, const point_force *f)
{
    tacet_json_begin_object(j);
    tacet_json_put_text(j, "mount", b->def->mounts[f->mount].name);
    tacet_json_put_text(j, "axis", axes[f->axis]);
    tacet_json_put_text(j, "unit", "N");
    tacet_json_put_number(j, "mean", f->static_N);
    tacet_json_put_number(j, "rms", f->rms_N);
    tacet_json_put_number(j, "pp", f->pp_N);
    tacet_json_key(j, "orders"); // [order, amplitude, phase in degrees]
    tacet_json_begin_array(j);
    for (size_t h = 1; h <= b->n_lines; h++) {
        tacet_json_begin_array(j);
        tacet_json_number(j, (double)h / b->revolutions);
        tacet_json_number(j, cabs(f->line[h]));
        tacet_json_number(j, degrees(f->line[h]));
        tacet_json_end_array(j);
    }
    tacet_json_end_array(j);
    tacet_json_end_object(j);
}

static void path_json(tacet_json *j, const point_body *b, const point_path *path)
{
    const tacet_path_def *d = &b->def->paths[path->path];
    tacet_json_begin_object(j);
    tacet_json_put_text(j, "mount", d->mount);
    tacet_json_put_text(j, "axis", axes[d->axis]);
    tacet_json_put_number(j, "amplitude", cabs(path->value));
    tacet_json_put_number(j, "phase_deg", degrees(path->value));
    tacet_json_put_number(j, "share", path->share);
    tacet_json_end_object(j);
}

static void arrival_json(tacet_json *j, const point_body *b, const point_arrival *a)
{
    bool any = a->leading > 0;
    tacet_json_begin_object(j);
    tacet_json_put_text(j, "point", a->name);
    tacet_json_put_text(j, "unit", a->unit);
    tacet_json_put_number(j, "rms", a->rms);
    tacet_json_put_number(j, "all_fire_rms", a->all_fire_rms);
    tacet_json_put_text(j, "all_fire_why",
                        isfinite(a->all_fire_rms) ? "" : "all cylinders firing cannot reach it");
    tacet_json_put_number(j, "leading_order", any ? (double)a->leading / b->revolutions : NAN);
    tacet_json_put_number(j, "leading_peak", any ? cabs(a->sum) : NAN);
    tacet_json_put_number(j, "phase_deg", any ? degrees(a->sum) : NAN);
    tacet_json_put_text(j, "why", any ? "" : "nothing arrives");
    tacet_json_key(j, "paths"); // to the leading order, the largest share first
    tacet_json_begin_array(j);
    for (size_t i = 0; i < a->n_paths; i++)
        path_json(j, b, &a->path[i]);
    tacet_json_end_array(j);
    tacet_json_end_object(j);
}

static void comfort_json(tacet_json *j, const point_body *b, size_t i)
{
    const point_arrival *a = &b->arrival[i];
    const char *second, *first = tacet_comfort_words(a->comfort.weighted_rms, &second);
    tacet_json_begin_object(j);
    tacet_json_put_text(j, "point", a->name);
    tacet_json_put_text(j, "weighting", tacet_weighting_names[b->def->points[i].weighting]);
    tacet_json_put_number(j, "weighted_rms", a->comfort.weighted_rms);
    tacet_json_key(j, "words");
    tacet_json_begin_array(j);
    tacet_json_text(j, first);
    if (second) tacet_json_text(j, second);
    tacet_json_end_array(j);
    tacet_json_put_number(j, "crest_factor", a->comfort.crest_factor);
    tacet_json_put_bool(j, "rms_says_enough", a->comfort.rms_says_enough);
    tacet_json_put_number(j, "exposure_h", POINT_EXPOSURE_H);
    tacet_json_put_number(j, "vibration_dose",
                          tacet_vibration_dose(&a->comfort, 3600.0 * POINT_EXPOSURE_H));
    tacet_json_end_object(j);
}

void point_body_json(tacet_json *j, const point *p)
{
    const point_body *b = p->row.outcome == TACET_SOLVED ? p->body : NULL;
    tacet_json_key(j, "mounts");
    tacet_json_begin_array(j);
    for (size_t i = 0; b && i < b->n_forces; i++)
        force_json(j, b, &b->force[i]);
    tacet_json_end_array(j);
    tacet_json_key(j, "points");
    tacet_json_begin_array(j);
    for (size_t i = 0; b && i < b->n_arrivals; i++)
        arrival_json(j, b, &b->arrival[i]);
    tacet_json_end_array(j);
    tacet_json_key(j, "comfort"); // of points of acceleration weighted wk or wd
    tacet_json_begin_array(j);
    for (size_t i = 0; b && i < b->n_arrivals; i++)
        if (b->arrival[i].felt) comfort_json(j, b, i);
    tacet_json_end_array(j);
}
