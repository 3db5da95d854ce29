// Reading the name of a quantity.
#include "judge/quantities.h"
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

// "a, b, c" as far as it fits, then "..".
static void list(char *out, size_t size, const char *const *names, size_t n)
{
    size_t used = 0;
    out[0] = 0;
    for (size_t i = 0; i < n; i++) {
        size_t more = strlen(names[i]) + 2;
        if (used + more + 3 > size) {
            snprintf(out + used, size - used, ", ..");
            return;
        }
        used += (size_t)snprintf(out + used, size - used, "%s%s", i ? ", " : "", names[i]);
    }
}

// What was read, what is near it, what is allowed.
static tacet_status unknown(tacet_error *e, const char *kind, const char *read,
                            const char *const *names, size_t n)
{
    char allowed[170];
    const char *near = tacet_near_name(read, names, n);
    list(allowed, sizeof allowed, names, n);
    if (near)
        return tacet_fail(e, TACET_BAD_INPUT, "unknown %s '%.40s'; did you mean '%s'?", kind, read,
                          near);
    return tacet_fail(e, TACET_BAD_INPUT, "unknown %s '%.40s'; allowed: %s", kind, read,
                      n ? allowed : "none, the study has no such thing");
}

static tacet_status unknown_quantity(const char *read, tacet_error *e)
{
    const char *names[64];
    size_t n = 0;
    for (const tacet_quantity *q = tacet_quantities(); q->name && n < 64; q++)
        names[n++] = q->name;
    return unknown(e, "quantity", read, names, n);
}

static tacet_status unknown_target(const char *read, const tacet_train *t,
                                   const tacet_body_def *body, int target, tacet_error *e)
{
    size_t n = tacet_target_count(target, t, body);
    const char **names = calloc(n + 1, sizeof *names);
    char(*texts)[TACET_QUANTITY_TEXT] = calloc(n + 1, sizeof *texts);
    tacet_status status = TACET_NO_MEMORY;
    for (size_t i = 0; names && texts && i < n; i++)
        names[i] = tacet_target_text(target, i, t, body, texts[i]);
    if (names && texts)
        status = unknown(e, tacet_target_kind(target), read, names, n);
    else
        (void)tacet_fail(e, status, "no memory");
    free(texts);
    free(names);
    return status;
}

// What a target must have for this quantity to mean something.
static tacet_status target_check(tacet_quantity_ref ref, const tacet_train *t, tacet_error *e)
{
    if (ref.what->target != TACET_TARGET_LINK) return TACET_OK;
    tacet_link_info info = tacet_train_link_info(t, ref.target);
    const char *name = tacet_train_link_name(t, ref.target);
    if (ref.what->spectrum == link_stress && !(info.section_modulus_m3 > 0))
        return tacet_fail(e, TACET_BAD_INPUT,
                          "link-stress needs the section of link '%s': state its outer_mm", name);
    if (ref.what->value == damper_heat && info.loss_factor == 0 && info.damping_Nms_per_rad == 0)
        return tacet_fail(e, TACET_BAD_INPUT, "damper-heat needs a damped link; '%s' has none",
                          name);
    return TACET_OK;
}

static tacet_status find_target(const char *read, const tacet_train *t, const tacet_body_def *body,
                                tacet_quantity_ref *ref, tacet_error *e)
{
    char name[TACET_QUANTITY_TEXT];
    int target = ref->what->target;
    size_t n = tacet_target_count(target, t, body);
    while (ref->target < n &&
           strcmp(tacet_target_text(target, ref->target, t, body, name), read) != 0)
        ref->target++;
    if (ref->target == n) return unknown_target(read, t, body, target, e);
    return target_check(*ref, t, e);
}

tacet_status tacet_quantity_parse(const char *text, const tacet_train *t,
                                  const tacet_body_def *body, tacet_quantity_ref *out,
                                  tacet_error *e)
{
    if (!text) text = "";
    const char *colon = strchr(text, ':');
    size_t length = colon ? (size_t)(colon - text) : strlen(text);
    char name[64];
    snprintf(name, sizeof name, "%.*s", (int)(length < 63 ? length : 63), text);
    tacet_quantity_ref ref = {.what = tacet_quantity_find(name)};
    if (!ref.what) return unknown_quantity(name, e);
    if (ref.what->target == TACET_TARGET_NONE) {
        if (colon)
            return tacet_fail(e, TACET_BAD_INPUT, "'%.60s': %s takes no name after it", text,
                              ref.what->name);
        *out = ref;
        return TACET_OK;
    }
    const char *kind = tacet_target_kind(ref.what->target);
    if (!colon || !colon[1])
        return tacet_fail(e, TACET_BAD_INPUT, "'%.60s' needs the name of a %s: %s:NAME", text, kind,
                          ref.what->name);
    tacet_status status = find_target(colon + 1, t, body, &ref, e);
    if (status == TACET_OK) *out = ref;
    return status;
}
