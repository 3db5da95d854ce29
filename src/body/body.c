// The body assembled from its definition.
#include "internal.h"
#include <stdlib.h>

static void mass_assemble(tacet_body *b)
{
    const tacet_inertia_def *i = &b->def->inertia_kgm2;
    const double turn[3][3] = {{i->xx, i->xy, i->xz}, {i->xy, i->yy, i->yz}, {i->xz, i->yz, i->zz}};
    for (int k = 0; k < 3; k++) {
        b->mass[7 * k] = b->def->mass_kg;
        for (int j = 0; j < 3; j++)
            b->mass[6 * (3 + k) + 3 + j] = turn[k][j];
    }
}

static bool reserve(tacet_body *b)
{
    const tacet_body_def *d = b->def;
    b->mount = tacet_arena_alloc(b->arena, (d->n_mounts + 1) * sizeof *b->mount);
    b->path_mount = tacet_arena_alloc(b->arena, (d->n_paths + 1) * sizeof *b->path_mount);
    b->path_point = tacet_arena_alloc(b->arena, (d->n_paths + 1) * sizeof *b->path_point);
    b->table = tacet_arena_alloc(b->arena, (d->n_paths + 1) * sizeof *b->table);
    return b->mount && b->path_mount && b->path_point && b->table;
}

typedef struct {
    tacet_error *e;
    bool wrong;
} first_error;

static void take_error(void *who, bool warning, const char *path, const char *text)
{
    first_error *f = who;
    if (warning || f->wrong) return;
    f->wrong = true;
    (void)tacet_fail(f->e, TACET_BAD_INPUT, "%s: %s", path, text);
}

tacet_status tacet_body_create(const tacet_body_def *d, const tacet_engine *en, tacet_body **out,
                               tacet_error *e)
{
    first_error first = {.e = e};
    tacet_body_def_check(d, &(tacet_reporter){take_error, &first});
    if (first.wrong) return TACET_BAD_INPUT;
    tacet_body *b = calloc(1, sizeof *b);
    tacet_status status = TACET_NO_MEMORY;
    if (!b || !(b->arena = tacet_arena_create())) {
        (void)tacet_fail(e, status, "no memory for the body");
        goto failed;
    }
    b->def = d;
    b->direction = tacet_engine_def_of(en)->rotation == 0 ? 1 : -1;
    if (!reserve(b)) {
        (void)tacet_fail(e, status, "no memory for the body");
        goto failed;
    }
    mass_assemble(b);
    mount_assemble(b);
    shaking_assemble(b, en);
    status = paths_assemble(b, e);
    if (status != TACET_OK) goto failed;
    *out = b;
    return TACET_OK;
failed:
    tacet_body_destroy(b);
    return status;
}

void tacet_body_destroy(tacet_body *b)
{
    if (!b) return;
    tacet_arena_destroy(b->arena);
    free(b);
}

size_t tacet_body_mounts(const tacet_body *b)
{
    return b->def->n_mounts;
}

size_t tacet_body_points(const tacet_body *b)
{
    return b->def->n_points;
}

size_t tacet_body_places(const tacet_body *b)
{
    return b->def->n_places;
}

size_t tacet_body_paths(const tacet_body *b)
{
    return b->def->n_paths;
}

const char *tacet_body_mount_name(const tacet_body *b, size_t mount)
{
    return b->def->mounts[mount].name;
}

const char *tacet_body_point_name(const tacet_body *b, size_t point)
{
    return b->def->points[point].name;
}

const char *tacet_body_place_name(const tacet_body *b, size_t place)
{
    return b->def->places[place].name;
}

const tacet_body_def *tacet_body_def_of(const tacet_body *b)
{
    return b->def;
}

void tacet_body_mass(const tacet_body *b, double m[36])
{
    for (int i = 0; i < 36; i++)
        m[i] = b->mass[i];
}
