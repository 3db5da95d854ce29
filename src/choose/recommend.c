// Which candidate is recommended at each speed, and why the others are not.
//
// A candidate that is clear over too short a span is not worth calibrating. At each speed the clear
// ones that are left are gone through from the thirstiest: one is kept when it saves enough more
// than the last that was kept, and the last kept is the best. So a chain of small savings is not
// thrown away as a whole. Firing on all cylinders needs no reason.
#include "internal.h"
#include "rules.h"
#include <math.h>
#include <string.h>

#define TEXT_BYTES 512

// What became of a candidate over the speeds.
typedef struct {
    bool too_short;
    size_t n_kept;
    double
        best_gain; // largest saving over the last kept at speeds where it was not kept; NAN: none
    size_t gain_over;   // and over which candidate
    size_t bettered_by; // best candidate at a speed where this one was kept; SIZE_MAX: none
} fate;

static bool is_all_fire(const tacet_candidate *c)
{
    return c->fires == c->length;
}

// Fuel that `a` saves against `b`, as a share of all-fire's (of b's where that is not known).
static double gain(const tacet_cell *a, const tacet_cell *b)
{
    double all_fire = b->row.duty.fuel_kg_per_s / b->row.fuel_to_all_fire;
    if (!isfinite(all_fire) || all_fire <= 0) all_fire = b->row.duty.fuel_kg_per_s;
    return (b->row.duty.fuel_kg_per_s - a->row.duty.fuel_kg_per_s) / all_fire;
}

static void note_small_gain(fate *f, double saved, size_t over)
{
    if (!isnan(f->best_gain) && saved <= f->best_gain) return;
    f->best_gain = saved;
    f->gain_over = over;
}

static void recommend_at(tacet_screen *s, tacet_rank *rank, const note_rules *rules, fate *fates)
{
    size_t kept = SIZE_MAX;
    for (size_t i = rank->n_ranked; i-- > 0;) { // the clear ones lead, least fuel first
        const tacet_cell *cell = &s->cells[rank->ranked[i]];
        fate *f = &fates[cell->candidate];
        if (!cell_is_clear(cell) || f->too_short) continue;
        if (kept != SIZE_MAX) {
            double saved = gain(cell, &s->cells[kept]);
            if (saved < rules->least_saving) {
                note_small_gain(f, saved, s->cells[kept].candidate);
                continue;
            }
        }
        kept = rank->ranked[i];
        f->n_kept++;
    }
    rank->best = kept;
    if (kept == SIZE_MAX) return;
    s->notes[s->cells[kept].candidate].n_best++;
    for (size_t i = 0; i < rank->n_ranked; i++) {
        const tacet_cell *cell = &s->cells[rank->ranked[i]];
        if (cell_is_clear(cell) && rank->ranked[i] != kept)
            fates[cell->candidate].bettered_by = s->cells[kept].candidate;
    }
}

// A copy in the arena; what was cut off ends with a whole letter.
static const char *kept(tacet_arena *a, char text[TEXT_BYTES])
{
    size_t n = strlen(text);
    if (n + 1 == TEXT_BYTES) {
        while (n > 0 && ((unsigned char)text[n - 1] & 0xc0) == 0x80)
            n--;
        if (n > 0 && (unsigned char)text[n - 1] >= 0xc0) n--;
        text[n] = '\0';
    }
    return tacet_arena_text(a, text);
}

static double rpm(double rad_per_s)
{
    return rad_per_s / RAD_PER_S_OF_RPM;
}

// The solved grid cell with the largest margin; NULL: none has one.
static const tacet_cell *least_bad(const tacet_screen *s, const tacet_candidate *c)
{
    const tacet_cell *best = NULL;
    for (size_t i = 0; i < s->n_speeds; i++) {
        const tacet_cell *cell = &s->cells[c->first_cell + i];
        if (cell->row.outcome != TACET_SOLVED || isnan(cell->row.worst_margin_db)) continue;
        if (!best || cell->row.worst_margin_db > best->row.worst_margin_db) best = cell;
    }
    return best;
}

static void why_never_clear(const tacet_screen *s, const tacet_candidate *c,
                            const tacet_candidate_note *note, const note_rules *rules, char *text)
{
    const tacet_cell *cell = least_bad(s, c);
    if (!cell) {
        tacet_text(text, TEXT_BYTES,
                   note->n_unreachable == s->n_speeds
                       ? "cannot carry the torque at any screened speed"
                       : "no verdict at any screened speed");
        return;
    }
    int band = cell->row.limiting_band, limit = cell->row.limiting_limit;
    const char *limiting = band >= 0    ? rules->band_name[band]
                           : limit >= 0 ? rules->limit_name[limit]
                                        : "no band";
    tacet_text(text, TEXT_BYTES,
               "clear at no screened speed: at best %.2f dB at %.0f rpm (%s); %g dB are asked",
               cell->row.worst_margin_db, rpm(cell->row.speed_rad_per_s), limiting,
               rules->reserve_db);
}

static void why_not_best(const tacet_screen *s, const note_rules *rules, const fate *f, char *text)
{
    const char *over = s->candidates[f->gain_over].name;
    if (f->n_kept > 0)
        tacet_text(text, TEXT_BYTES, "wherever it is clear, another saves more; %s for one",
                   s->candidates[f->bettered_by].name);
    else if (f->best_gain <= 0)
        tacet_text(text, TEXT_BYTES, "saves nothing against %s, which is clear as well", over);
    else
        tacet_text(text, TEXT_BYTES,
                   "saves at most %.2f %% more than %s, the next clear one; %g %% are asked",
                   100 * f->best_gain, over, 100 * rules->least_saving);
}

static void why_not(const tacet_screen *s, const tacet_candidate_note *note,
                    const note_rules *rules, const fate *f, char *text)
{
    const tacet_candidate *c = &s->candidates[note->candidate];
    if (c->refused)
        tacet_text(text, TEXT_BYTES, "%s", c->refused);
    else if (note->n_clear == 0)
        why_never_clear(s, c, note, rules, text);
    else if (f->too_short)
        tacet_text(text, TEXT_BYTES, "clear over %.0f rpm only; at least %.0f are asked",
                   rpm(note->clear_rad_per_s), rpm(rules->least_clear_rad_per_s));
    else
        why_not_best(s, rules, f, text);
}

tacet_status recommend(tacet_screen *s, const note_rules *rules, tacet_arena *scratch)
{
    fate *fates = tacet_arena_alloc(scratch, s->n_candidates * sizeof *fates);
    if (!fates) return TACET_NO_MEMORY;
    double screened = s->speeds_rad_per_s[s->n_speeds - 1] - s->speeds_rad_per_s[0];
    for (size_t c = 0; c < s->n_candidates; c++) {
        fates[c] = (fate){.best_gain = NAN, .bettered_by = SIZE_MAX};
        // a screen narrower than the span that is asked cannot ask it
        fates[c].too_short = !is_all_fire(&s->candidates[c]) &&
                             screened >= rules->least_clear_rad_per_s &&
                             s->notes[c].clear_rad_per_s < rules->least_clear_rad_per_s;
    }
    for (size_t i = 0; i < s->n_ranks; i++)
        recommend_at(s, &s->ranks[i], rules, fates);
    for (size_t c = 0; c < s->n_candidates; c++) {
        tacet_candidate_note *note = &s->notes[c];
        note->recommended = note->n_best > 0;
        if (note->recommended) continue;
        char text[TEXT_BYTES];
        why_not(s, note, rules, &fates[c], text);
        note->why_not = kept(s->arena, text);
        if (!note->why_not) return TACET_NO_MEMORY;
    }
    return TACET_OK;
}
