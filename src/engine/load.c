// Torque and pressure of every cylinder at the speed and charge of a duty.
//
// A load takes each half that the roll uses from the table, turns pressure into torque
//   T = (p - crankcase pressure) piston area x'(angle)
// and gives every whole degree a slope; between them torque is the cubic through value and slope on
// both sides, so it is smooth to the first derivative. At a firing top T vanishes with x' and its
// slope is (p - crankcase) area x''. At a gas-exchange top the pressure of both sides is taken as
// their mean: equal but for what a table that knows only the run of skips leaves out.
#include "internal.h"
#include <string.h>

static const engine_wave *wave_of(tacet_engine_work *w, unsigned kind, double charge,
                                  const table_place *speed)
{
    for (unsigned i = 0; i < w->n_waves; i++)
        if (w->wave[i].kind == kind && w->wave[i].charge == charge) return &w->wave[i];
    const tacet_engine *en = w->engine;
    const table *t = &en->table;
    engine_wave *new = &w->wave[w->n_waves++];
    new->kind = kind;
    new->charge = charge;
    table_place at = table_at_charge(t, charge);
    table_waveform(t, kind, speed, &at, new->pressure_Pa);
    double area = en->cyl.piston_m2, below = en->cyl.crankcase_Pa;
    // a 4-stroke half up starts at piston top too; a 2-stroke one at bottom
    unsigned from = t->samples == 181 && halves_is_up(&t->halves, kind) ? 180 : 0;
    for (unsigned i = 0; i < t->samples; i++)
        new->torque_Nm[i] = (new->pressure_Pa[i] - below) * area * en->lever_m[from + i];
    return new;
}

// Torque and slope at the first or last degree of a half, which lies at a firing top or beside the
// neighbour over the gas-exchange top.
static engine_node end_node(const tacet_engine *en, const engine_piece *p, bool last)
{
    unsigned n = en->half_degrees, from;
    bool up = halves_is_up(&en->table.halves, p->wave->kind);
    double pressure = p->wave->pressure_Pa[last ? n : 0];
    if (up != last) pressure = (pressure + p->neighbour->pressure_Pa[last ? 0 : n]) / 2;
    from = (up && n == 180 ? 180 : 0) + (last ? n : 0);
    double force = (pressure - en->cyl.crankcase_Pa) * en->cyl.piston_m2;
    return (engine_node){force * en->lever_m[from], force * en->lever_slope_m[from] * M_PI / 180};
}

static void fill_nodes(const tacet_engine *en, engine_piece *p)
{
    unsigned n = en->half_degrees;
    const double *t = p->wave->torque_Nm;
    for (unsigned i = 1; i < n; i++) {
        double slope = (t[i + 1] - t[i - 1]) / 2;
        if (i > 1 && i < n - 1) slope = (8 * (t[i + 1] - t[i - 1]) - (t[i + 2] - t[i - 2])) / 12;
        p->node[i] = (engine_node){t[i], slope};
    }
    p->node[0] = end_node(en, p, false);
    p->node[n] = end_node(en, p, true);
    p->node[n + 1] = p->node[n];
}

static const engine_piece *piece_of(tacet_engine_work *w, const engine_wave *wave,
                                    const engine_wave *neighbour)
{
    for (unsigned i = 0; i < w->n_pieces; i++)
        if (w->piece[i].wave == wave && w->piece[i].neighbour == neighbour) return &w->piece[i];
    engine_piece *new = &w->piece[w->n_pieces++];
    new->wave = wave;
    new->neighbour = neighbour;
    fill_nodes(w->engine, new);
    return new;
}

// Fired cycles of the repeat, added up and divided by their tenths of a full charge.
static void fill_fired(const tacet_roll *r, tacet_engine_work *w)
{
    unsigned n = w->engine->half_degrees;
    double weight = 0;
    memset(w->fired_Nm, 0, sizeof w->fired_Nm);
    for (unsigned slot = 0; slot < r->cylinders; slot++)
        for (unsigned c = 0; c < r->cycles; c++) {
            unsigned tenths = tacet_roll_cycle(r, slot, c).tenths, all = 2 * r->cycles;
            if (tenths == 0) continue;
            const engine_piece **s = w->sequence + (size_t)slot * all;
            const engine_node *up = s[(2 * c + all - 1) % all]->node, *down = s[2 * c]->node;
            weight += tenths / 10.0;
            for (unsigned i = 0; i < n; i++) {
                w->fired_Nm[i] += up[i].torque_Nm;
                w->fired_Nm[n + i] += down[i].torque_Nm;
            }
            w->fired_Nm[2 * n] += down[n].torque_Nm;
        }
    for (unsigned i = 0; i <= 2 * n && weight > 0; i++)
        w->fired_Nm[i] /= weight;
}

tacet_status tacet_engine_load(const tacet_engine *en, const tacet_roll *r, const tacet_duty *d,
                               double speed_rad_per_s, tacet_engine_work *w)
{
    w->loaded = false;
    tacet_status status = engine_suits(en, r, speed_rad_per_s);
    if (status != TACET_OK) return status;
    double charge = engine_charge(en, d);
    if (!isfinite(charge)) return TACET_BAD_INPUT;
    table_place speed = table_at_speed(&en->table, speed_rad_per_s);
    w->n_waves = w->n_pieces = 0;
    w->cycles = r->cycles;
    for (unsigned slot = 0; slot < r->cylinders; slot++)
        for (unsigned c = 0; c < r->cycles; c++) { // the window after the firing top of cycle c
            unsigned up, down, other;
            const halves *h = &en->table.halves;
            if (!halves_of_cycle(h, r, slot, c, &other, &down) ||
                !halves_of_cycle(h, r, slot, c + 1, &up, &other))
                return TACET_BAD_INPUT;
            const engine_wave *a = wave_of(w, down, charge * engine_share(en, r, slot, c), &speed);
            const engine_wave *b =
                wave_of(w, up, charge * engine_share(en, r, slot, c + 1), &speed);
            size_t at = 2 * ((size_t)slot * r->cycles + c);
            w->sequence[at] = piece_of(w, a, b);
            w->sequence[at + 1] = piece_of(w, b, a);
        }
    fill_fired(r, w);
    for (unsigned i = 0; i < w->n_waves; i++)
        for (unsigned k = 0; k < en->table.samples; k++)
            if (!isfinite(w->wave[i].pressure_Pa[k])) return TACET_NOT_FINITE;
    w->loaded = true;
    return TACET_OK;
}
