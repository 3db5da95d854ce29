// Speeds, demand, densities and patterns of the screen; files that a study names.
#include "check.h"
#include <math.h>
#include <string.h>

#define RPM        (2 * M_PI / 60)
#define MOST_BANDS 16 // and limits: what one row of results holds
#define SLACK      1e-9
#define MOST_KEPT  20 // problems of a kind that are kept with their texts

static void check_counts(checker *c)
{
    const tacet_study *s = c->study;
    if (s->n_bands > MOST_BANDS)
        check_say(c, false, "bands", "bands: there are %zu; at most %d are allowed", s->n_bands,
                  MOST_BANDS);
    if (s->n_limits > MOST_BANDS)
        check_say(c, false, "limits", "limits: there are %zu; at most %d are allowed", s->n_limits,
                  MOST_BANDS);
}

static void check_speeds(checker *c)
{
    const tacet_screen_def *d = &c->study->screen;
    char now[TACET_NUMBER_TEXT], before[TACET_NUMBER_TEXT];
    for (size_t i = 1; i < d->n_speeds; i++) {
        if (d->speeds_rad_per_s[i] > d->speeds_rad_per_s[i - 1]) continue;
        check_say(c, false, "screen.speeds_rpm", "speeds_rpm: %s rpm after %s rpm; speeds rise",
                  tacet_number_format_short(d->speeds_rad_per_s[i] / RPM, 6, now),
                  tacet_number_format_short(d->speeds_rad_per_s[i - 1] / RPM, 6, before));
        return;
    }
}

static bool plain_number(const tacet_curve *curve)
{
    return curve->n == 0 || (curve->n == 1 && curve->x[0] == 0);
}

// Does the curve reach over all screened speeds? `outside` gets the first speed that it leaves out.
static bool covers(const tacet_curve *curve, const tacet_screen_def *d, double *outside)
{
    if (plain_number(curve)) return true;
    for (size_t i = 0; i < d->n_speeds; i++) {
        *outside = d->speeds_rad_per_s[i] / RPM;
        double slack = SLACK * *outside;
        if (*outside < curve->x[0] - slack || *outside > curve->x[curve->n - 1] + slack)
            return false;
    }
    return true;
}

static void check_demand(checker *c)
{
    const tacet_screen_def *d = &c->study->screen;
    const tacet_curve *curve = &d->brake_torque_Nm;
    char at[TACET_NUMBER_TEXT], low[TACET_NUMBER_TEXT], high[TACET_NUMBER_TEXT];
    double outside;
    if (covers(curve, d, &outside)) return;
    check_say(c, false, "screen.brake_torque_nm",
              "brake_torque_nm: the curve runs from %s to %s rpm and says nothing at %s rpm, which "
              "is screened; give it points that reach over all speeds",
              tacet_number_format_short(curve->x[0], 6, low),
              tacet_number_format_short(curve->x[curve->n - 1], 6, high),
              tacet_number_format_short(outside, 6, at));
}

// Curves of engine and cycle over speed are held constant outside their points: said, not refused.
static void check_curves_of(checker *c, const tacet_section *s, const char *path, const void *from)
{
    char here[FILL_LONGEST_PATH], at[TACET_NUMBER_TEXT];
    for (const tacet_field *field = s->fields; field->key; field++) {
        const void *value = (const char *)from + field->offset;
        tacet_text(here, sizeof here, "%s.%s", path, field->key);
        if (field->kind == TACET_FIELD_SECTION) check_curves_of(c, field->section, here, value);
        if (field->kind != TACET_FIELD_CURVE || !field->x_unit) continue;
        double outside;
        if (strcmp(field->x_unit, "rpm") != 0 || covers(value, &c->study->screen, &outside))
            continue;
        const tacet_curve *curve = value;
        double end = outside < curve->x[0] ? curve->x[0] : curve->x[curve->n - 1];
        char last[TACET_NUMBER_TEXT];
        check_say(c, true, here,
                  "%s: the curve ends at %s rpm; at %s rpm, which is screened, the value of its "
                  "end is taken",
                  field->key, tacet_number_format_short(end, 6, last),
                  tacet_number_format_short(outside, 6, at));
    }
}

// ---- densities and patterns
static void check_density(checker *c, const char *path, const char *key, const char *text)
{
    unsigned fires, length;
    char shown[SHOWN_TEXT];
    if (!text) return;
    shown_text(text, shown);
    if (!tacet_density_parse(text, &fires, &length))
        check_say(c, false, path,
                  "%s: %s is no density; allowed are fires/opportunities as 2/3, at most %d "
                  "opportunities, and 1",
                  key, shown, TACET_PATTERN_LONGEST);
    else if (fires == 0)
        check_say(c, false, path, "%s: %s never fires; a density lies above 0", key, shown);
}

static void check_densities(checker *c)
{
    const tacet_densities_def *d = &c->study->screen.densities;
    char path[64];
    bool list = !fill_is_wrong(c->f, "screen.densities.list");
    for (size_t i = 0; list && i < d->n_list; i++) {
        tacet_text(path, sizeof path, "screen.densities.list[%zu]", i);
        check_density(c, path, "densities", d->list[i]);
    }
    if (!fill_is_wrong(c->f, "screen.densities.lowest"))
        check_density(c, "screen.densities.lowest", "lowest", d->lowest);
}

// Says of the pattern's place what was found of the pattern itself; faults inside a book keep
// theirs.
static void pass_on(checker *c, const char *path, const tacet_problems *found)
{
    size_t kept = tacet_problems_kept(found);
    size_t told = tacet_problems_errors(found) + tacet_problems_warnings(found);
    if (kept < told && kept < MOST_KEPT) c->f->no_memory = true; // their texts were lost
    for (size_t i = 0; i < kept; i++) {
        const tacet_problem *p = tacet_problems_at(found, i);
        if (p->line == 0) {
            check_say(c, p->warning, path, "patterns: %s", p->text);
            continue;
        }
        tacet_problems_add(c->f->problems, p->warning, p->file, p->line, p->column, "%s", p->text);
        if (!p->warning) fill_mark(c->f, path);
    }
}

static void check_patterns(checker *c)
{
    const tacet_screen_def *d = &c->study->screen;
    char path[64];
    if (fill_is_wrong(c->f, "screen.patterns")) return;
    for (size_t i = 0; i < d->n_patterns; i++) {
        tacet_words words;
        tacet_problems *found = tacet_problems_create();
        if (!found) {
            c->f->no_memory = true;
            return;
        }
        tacet_text(path, sizeof path, "screen.patterns[%zu]", i);
        const char *folder = c->study->folder;
        if (strcmp(folder, ".") == 0) folder = NULL;
        tacet_status status =
            tacet_words_find(d->patterns[i], folder, c->f->file, c->f->arena, found, &words);
        if (status == TACET_NO_MEMORY) c->f->no_memory = true;
        pass_on(c, path, found);
        tacet_problems_destroy(found);
    }
}

void check_screen(checker *c)
{
    const tacet_study *s = c->study;
    check_counts(c);
    check_densities(c);
    if (fill_is_wrong(c->f, "screen.speeds_rpm")) return;
    check_speeds(c);
    if (!fill_is_wrong(c->f, "screen.brake_torque_nm")) check_demand(c);
    if (!fill_is_wrong(c->f, "cycle")) check_curves_of(c, tacet_cycle_keys(), "cycle", &s->engine);
}

// ---- files
static void check_csv(checker *c, const char *path, const char *key, const char *name)
{
    tacet_error e;
    tacet_csv csv;
    if (!name || fill_is_wrong(c->f, path)) return;
    char *full = study_path(c->study, name, c->f->arena);
    tacet_status status = full ? tacet_csv_read(full, c->f->arena, &csv, &e) : TACET_NO_MEMORY;
    if (status == TACET_NO_MEMORY) c->f->no_memory = true;
    if (status == TACET_OUTSIDE_WORLD) check_say(c, false, path, "%s: %s", key, e.text);
    if (status != TACET_BAD_INPUT) return;
    tacet_problems_add(c->f->problems, false, full, e.line, e.column, "%s", e.text);
    fill_mark(c->f, path);
}

void check_files(checker *c)
{
    const tacet_cycle_def *d = &c->study->engine.cycle;
    const tacet_body_def *body = &c->study->body;
    char path[64];
    check_patterns(c);
    for (size_t i = 0; i < body->n_paths && !fill_is_wrong(c->f, "body"); i++)
        check_csv(c, tacet_text(path, sizeof path, "body.paths[%zu].table", i), "table",
                  body->paths[i].table);
    if (fill_is_wrong(c->f, "cycle.kind") || d->kind != TACET_CYCLE_TRACES) return;
    check_csv(c, "cycle.traces.fired", "fired", d->fired_trace);
    check_csv(c, "cycle.traces.skipped", "skipped", d->skipped_trace);
}
