// The study file: text, tree, filled study, checks; and back to text.
#include "fuzz.h"

// Traces and books that a study names are looked for beside this.
static const char name[] = FUZZ_FILES "/study.yaml";

static void check_again(const tacet_study *s)
{
    tacet_study *again = NULL;
    tacet_problems *p = tacet_problems_create();
    tacet_arena *a = tacet_arena_create();
    REQUIRE(p && a);
    const char *text = fuzz_rewrite(s, a);
    if (text) {
        tacet_status status = tacet_study_read_text(text, strlen(text), name, p, &again);
        if (status != TACET_OK) fprintf(stderr, "%s\n%s\n", text, tacet_problems_at(p, 0)->text);
        REQUIRE(status == TACET_OK);
        fuzz_same(s, again);
        tacet_study_destroy(again);
    }
    tacet_arena_destroy(a);
    tacet_problems_destroy(p);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    tacet_study *s = NULL;
    tacet_problems *p = tacet_problems_create();
    REQUIRE(p);
    const char *text = (const char *)data;
    tacet_status status = tacet_study_read_text(text, size, name, p, &s);
    fuzz_problems(status, p, name, text, size);
    for (size_t i = 0; i < tacet_problems_kept(p); i++)
        REQUIRE(fuzz_is_utf8(tacet_problems_at(p, i)->text));
    if (status == TACET_OK) {
        fuzz_finite(s);
        check_again(s);
    }
    tacet_study_destroy(s);
    tacet_problems_destroy(p);
    return 0;
}
