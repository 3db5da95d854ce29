// Candidates: what a study asks to be screened, and what the engine may not run.
#include "internal.h"
#include <stdlib.h>
#include <string.h>

typedef struct {
    const tacet_study *study;
    const tacet_engine *engine;
    tacet_arena *arena;
    tacet_problems *problems;
    tacet_error *e;
    bool *may_skip; // [cylinders] by slot
    tacet_candidate *at;
    size_t n, room;
} builder;

static tacet_status no_memory(tacet_error *e)
{
    return tacet_fail(e, TACET_NO_MEMORY, "no memory for the candidates");
}

static unsigned gcd(unsigned a, unsigned b)
{
    return b ? gcd(b, a % b) : a;
}

// Room for one more; the rolls of a candidate stay where they are.
static tacet_candidate *next(builder *b)
{
    if (b->n == b->room) {
        size_t room = b->room ? 2 * b->room : 32;
        tacet_candidate *at = tacet_arena_alloc(b->arena, room * sizeof *at);
        if (!at) return NULL;
        if (b->n) memcpy(at, b->at, b->n * sizeof *at);
        b->at = at;
        b->room = room;
    }
    tacet_candidate *c = &b->at[b->n++];
    *c = (tacet_candidate){0};
    return c;
}

// Names the cylinder that the roll's refusal speaks of.
static tacet_status refuse(builder *b, tacet_candidate *c, const tacet_error *why)
{
    char text[sizeof why->text + 40];
    if (why->column > 0)
        tacet_text(text, sizeof text, "%s (cylinder %u)", why->text,
                   tacet_engine_number(b->engine, (unsigned)why->column - 1));
    else
        tacet_text(text, sizeof text, "%s", why->text);
    c->refused = tacet_arena_text(b->arena, text);
    return c->refused ? TACET_OK : no_memory(b->e);
}

// One placement: kept when the engine may run it, otherwise the first reason is.
static tacet_status place(builder *b, tacet_candidate *c, const tacet_pattern *p)
{
    tacet_roll *r;
    tacet_error why = {0};
    tacet_status status = tacet_roll_create(p, tacet_engine_cylinders(b->engine),
                                            tacet_engine_strokes(b->engine), &r, b->e);
    if (status != TACET_OK) return status;
    if (tacet_roll_allowed(r, b->may_skip, b->study->engine.skip.longest_run, &why)) {
        c->roll[c->n_placements++] = r;
        return TACET_OK;
    }
    tacet_roll_destroy(r);
    c->n_left_out++;
    return c->refused ? TACET_OK : refuse(b, c, &why);
}

// A candidate of the first `rotations` rotations of a word.
static tacet_status add(builder *b, const char *name, const char *comment, tacet_pattern p,
                        unsigned rotations)
{
    tacet_candidate *c = next(b);
    char text[TACET_PATTERN_LONGEST + 1];
    if (!c) return no_memory(b->e);
    tacet_pattern_reduce(&p);
    c->name = name;
    c->comment = comment;
    c->fires = tacet_pattern_fires(&p);
    c->length = p.length;
    c->density = (double)c->fires / c->length;
    c->roll = tacet_arena_alloc(b->arena, rotations * sizeof(tacet_roll *));
    if (!c->roll) return no_memory(b->e);
    for (unsigned by = 0; by < rotations; by++) {
        tacet_pattern turned;
        tacet_pattern_rotate(&p, by, &turned);
        tacet_status status = place(b, c, &turned);
        if (status != TACET_OK) return status;
    }
    if (c->n_placements > 0) {
        c->refused = NULL;
        p = c->roll[0]->pattern;
    }
    c->word = tacet_arena_text(b->arena, tacet_pattern_format(&p, text));
    return c->word ? TACET_OK : no_memory(b->e);
}

static tacet_status add_density(builder *b, unsigned fires, unsigned length)
{
    char text[32];
    if (fires == length)
        tacet_text(text, sizeof text, "1");
    else
        tacet_text(text, sizeof text, "%u/%u", fires, length);
    char *name = tacet_arena_text(b->arena, text);
    if (!name) return no_memory(b->e);
    tacet_maker_def d = tacet_maker_default();
    tacet_words made;
    d.fires = fires;
    d.length = length;
    tacet_status status = tacet_maker_find("even")->make(&d, b->arena, &made, b->e);
    if (status != TACET_OK) return status;
    return add(b, name, NULL, made.pattern[0],
               tacet_pattern_placements(made.pattern, tacet_engine_cylinders(b->engine)));
}

typedef struct {
    unsigned fires, length;
} fraction;

static int by_density(const void *a, const void *b)
{
    const fraction *x = a, *y = b;
    unsigned left = x->fires * y->length, right = y->fires * x->length;
    return (left > right) - (left < right);
}

static tacet_status bad_density(builder *b, const char *key, const char *text)
{
    return tacet_fail(b->e, TACET_BAD_INPUT,
                      "%s: '%s'; a density is k/L with 1 <= k <= L <= %d, or 1", key, text,
                      TACET_PATTERN_LONGEST);
}

static tacet_status listed_densities(builder *b, fraction *out, size_t *n)
{
    const tacet_densities_def *d = &b->study->screen.densities;
    for (size_t i = 0; i < d->n_list; i++) {
        if (!tacet_density_parse(d->list[i], &out[i].fires, &out[i].length) || !out[i].fires)
            return bad_density(b, "screen.densities", d->list[i]);
    }
    *n = d->n_list;
    return TACET_OK;
}

// Every k/L in lowest terms from the lowest to 1.
static tacet_status all_densities(builder *b, fraction *out, size_t *n)
{
    const tacet_densities_def *d = &b->study->screen.densities;
    unsigned fires, length;
    if (!d->lowest || !tacet_density_parse(d->lowest, &fires, &length))
        return bad_density(b, "screen.densities.lowest", d->lowest ? d->lowest : "");
    for (unsigned l = 1; l <= d->longest; l++)
        for (unsigned k = 1; k <= l; k++)
            if (gcd(k, l) == 1 && k * length >= fires * l) out[(*n)++] = (fraction){k, l};
    return TACET_OK;
}

static tacet_status add_densities(builder *b)
{
    const tacet_densities_def *d = &b->study->screen.densities;
    if (d->n_list == 0 && (d->longest < 1 || d->longest > TACET_PATTERN_LONGEST))
        return tacet_fail(b->e, TACET_BAD_INPUT,
                          "screen.densities.longest: %u letters; 1 to %d are allowed", d->longest,
                          TACET_PATTERN_LONGEST);
    size_t most = d->n_list ? d->n_list : (size_t)d->longest * (d->longest + 1) / 2, n = 0;
    fraction *f = tacet_arena_alloc(b->arena, most * sizeof *f);
    if (!f) return no_memory(b->e);
    tacet_status status = d->n_list ? listed_densities(b, f, &n) : all_densities(b, f, &n);
    if (n) qsort(f, n, sizeof *f, by_density);
    for (size_t i = 0; status == TACET_OK && i < n; i++)
        if (i == 0 || by_density(&f[i - 1], &f[i]) != 0)
            status = add_density(b, f[i].fires, f[i].length);
    return status;
}

static tacet_status add_words(builder *b, const char *text)
{
    tacet_words w;
    tacet_status status =
        tacet_words_find(text, b->study->folder, b->study->path, b->arena, b->problems, &w);
    if (status == TACET_NO_MEMORY) return no_memory(b->e);
    if (status != TACET_OK)
        return tacet_fail(b->e, status, "screen.patterns: '%s' cannot be used", text);
    for (size_t i = 0; i < w.n && status == TACET_OK; i++) {
        char word[TACET_PATTERN_LONGEST + 1];
        const char *name = w.name[i];
        if (!name) name = tacet_arena_text(b->arena, tacet_pattern_format(&w.pattern[i], word));
        status = name ? add(b, name, w.comment[i], w.pattern[i], 1) : no_memory(b->e);
    }
    return status;
}

static tacet_status fill(builder *b)
{
    unsigned n = tacet_engine_cylinders(b->engine);
    b->may_skip = tacet_arena_alloc(b->arena, n * sizeof *b->may_skip);
    if (!b->may_skip) return no_memory(b->e);
    for (unsigned slot = 0; slot < n; slot++)
        b->may_skip[slot] = tacet_engine_may_skip(b->engine, slot);
    tacet_status status = add_densities(b);
    if (status != TACET_OK) return status;
    for (size_t i = 0; i < b->study->screen.n_patterns; i++) { // all problems in one go
        tacet_status of_this = add_words(b, b->study->screen.patterns[i]);
        if (of_this == TACET_NO_MEMORY) return of_this;
        if (status == TACET_OK) status = of_this;
    }
    return status;
}

tacet_status tacet_candidates_create(const tacet_study *s, const tacet_engine *en, tacet_arena *a,
                                     tacet_problems *problems, tacet_candidate **out, size_t *n,
                                     tacet_error *e)
{
    builder b = {.study = s, .engine = en, .arena = a, .problems = problems, .e = e};
    tacet_status status = fill(&b);
    if (status == TACET_OK) {
        *out = b.at;
        *n = b.n;
        return TACET_OK;
    }
    tacet_candidates_destroy(b.at, b.n);
    *out = NULL;
    *n = 0;
    return status;
}

void tacet_candidates_destroy(tacet_candidate *c, size_t n)
{
    for (size_t i = 0; c && i < n; i++)
        for (size_t k = 0; k < c[i].n_placements; k++)
            tacet_roll_destroy(c[i].roll[k]);
}
