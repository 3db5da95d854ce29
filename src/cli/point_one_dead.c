// The references of tacet point's bands: all cylinders firing, and one cylinder dead.
#include "cli/point.h"
#include <math.h>
#include <string.h>

double point_all_fire_level(const point *p, size_t band)
{
    return p->all_fire.outcome == TACET_SOLVED ? p->all_fire.bands[band].level.dispersed : NAN;
}

static unsigned cylinder(const point *p, size_t band)
{
    return tacet_engine_number(tacet_model_engine(p->s->model), p->one_dead.slot[band]);
}

static const char *why_none(const point *p)
{
    if (p->one_dead.n_cylinders < 2) return "there is only one cylinder";
    return p->one_dead.n_solved > 0 ? "" : "the other cylinders cannot meet this demand";
}

// "3 for pump coupling and cab boom, 1 for ..", or one number when all bands say the same.
static const char *worst_ones(const point *p)
{
    const char *text = "";
    bool told[TACET_BANDS_MOST] = {false};
    for (size_t b = 0; b < p->row.n_bands; b++) {
        if (told[b]) continue;
        const char *names = "";
        size_t n = 0;
        for (size_t k = b; k < p->row.n_bands; k++) {
            if (cylinder(p, k) != cylinder(p, b)) continue;
            told[k] = true;
            names = cli_text(p->s->arena, "%s%s%s", names, n++ ? " and " : "",
                             tacet_model_band(p->s->model, k)->name);
        }
        if (n == p->row.n_bands) return cli_text(p->s->arena, "%u", cylinder(p, b));
        text =
            cli_text(p->s->arena, "%s%s%u for %s", text, *text ? ", " : "", cylinder(p, b), names);
    }
    return text;
}

void point_write_one_dead(const point *p)
{
    if (*why_none(p)) {
        printf("One cylinder dead: not known, %s\n", why_none(p));
        return;
    }
    printf("One dead: a cylinder that never fires, all others at equal charge for the same "
           "demand;\nthe worst cylinder is ");
    tacet_write_clean(stdout, worst_ones(p));
    fputc('\n', stdout);
}

void point_one_dead_json(tacet_json *j, const point *p)
{
    const char *why = why_none(p);
    tacet_json_key(j, "references"); // levels of the bands, rms
    tacet_json_begin_array(j);
    for (size_t b = 0; b < p->row.n_bands; b++) {
        double all_fire = point_all_fire_level(p, b);
        tacet_json_begin_object(j);
        tacet_json_put_text(j, "band", tacet_model_band(p->s->model, b)->name);
        tacet_json_put_number(j, "all_fire_rms", all_fire);
        tacet_json_put_text(j, "all_fire_why",
                            isfinite(all_fire) ? "" : tacet_outcome_text(p->all_fire.outcome));
        tacet_json_put_number(j, "one_dead_rms", p->one_dead.level[b]);
        tacet_json_put_number(j, "one_dead_cylinder", *why ? NAN : (double)cylinder(p, b));
        tacet_json_put_text(j, "one_dead_why", why);
        tacet_json_end_object(j);
    }
    tacet_json_end_array(j);
}
