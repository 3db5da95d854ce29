// Every key with its value and where that came from.
#include "keys.h"
#include "walk.h"
#include <math.h>
#include <string.h>

#define VALUE_TEXT 1024

typedef struct {
    const tacet_study *study;
    void (*tell)(void *who, const char *path, const char *value, const char *unit, tacet_from from);
    void *who;
} teller;

// What stands for a key that was left out and has no default of its own; "" when nothing does.
static void computed(const tacet_study *s, const walk_value *v, char out[VALUE_TEXT])
{
    const char *key = v->field->key;
    char number[TACET_NUMBER_TEXT];
    if (v->section == tacet_band_keys() && strcmp(key, "guard_percent") == 0) {
        double guard = tacet_band_guard(v->owner);
        tacet_text(out, VALUE_TEXT, "%s", tacet_number_format_short(100 * guard, 3, number));
    } else if (v->section == tacet_engine_keys() && strcmp(key, "firing_intervals_deg") == 0) {
        double even = 180.0 * s->engine.strokes / (double)s->engine.n_cylinders;
        tacet_text(out, VALUE_TEXT, "even, %s each", tacet_number_format_short(even, 6, number));
    } else if (v->section == tacet_engine_keys() && strcmp(key, "cylinders") == 0) {
        tacet_text(out, VALUE_TEXT, "inline, cylinder k on throw<k>");
    } else if (v->field->kind == TACET_FIELD_TEXT && strcmp(v->path, "train.load") == 0) {
        tacet_text(out, VALUE_TEXT, "%s", s->train.flywheel ? s->train.flywheel : "");
    } else if (strncmp(v->path, "engine.cylinders[", 17) == 0 && strcmp(key, "node") == 0) {
        const tacet_cylinder_def *d = v->owner;
        tacet_text(out, VALUE_TEXT, "throw%u", d->number);
    } else if (v->section == study_screen_keys() && strcmp(key, "highest_order") == 0) {
        tacet_text(out, VALUE_TEXT, "from the highest mode of interest");
    }
}

static void tell_value(void *who, const walk_value *v)
{
    const teller *t = who;
    char text[VALUE_TEXT];
    tacet_from from = TACET_FROM_FILE;
    value_text(v->field, v->owner, text, sizeof text);
    if (node_is_nothing(v->node) && (!v->node || v->field->kind == TACET_FIELD_SECTIONS)) {
        from = v->field->fallback && *v->field->fallback ? TACET_FROM_DEFAULT : TACET_FROM_NOTHING;
        if (from == TACET_FROM_NOTHING) {
            text[0] = '\0';
            computed(t->study, v, text);
            if (*text) from = TACET_FROM_COMPUTED;
        }
    }
    t->tell(t->who, v->path, text, v->field->unit ? v->field->unit : "", from);
}

tacet_status tacet_study_values(const tacet_study *s,
                                void (*tell)(void *who, const char *path, const char *value,
                                             const char *unit, tacet_from from),
                                void *who)
{
    teller t = {s, tell, who};
    walk_section(tacet_study_keys(), s->tree->root, s, tell_value, &t);
    return TACET_OK;
}
