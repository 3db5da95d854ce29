// Keys of the section body of a study.
#include "tacet/body.h"
#include <math.h>

static const char *const senses[] = {"acceleration", "pressure", "velocity", NULL};
static const char *const axes[] = {"x", "y", "z", NULL};

#define BODY(member)      .offset = offsetof(tacet_body_def, member)
#define INERTIA(member)   .offset = offsetof(tacet_inertia_def, member)
#define MOUNT(member)     .offset = offsetof(tacet_mount_def, member)
#define WEIGHT(member)    .offset = offsetof(tacet_counterweight_def, member)
#define SHAFT(member)     .offset = offsetof(tacet_balance_shaft_def, member)
#define PLACE(member)     .offset = offsetof(tacet_place_def, member)
#define POINT(member)     .offset = offsetof(tacet_point_def, member)
#define PATH(member)      .offset = offsetof(tacet_path_def, member)
#define RESONANCE(member) .offset = offsetof(tacet_resonance_def, member)
#define THREE(type, member)                                                                        \
    .kind = TACET_FIELD_NUMBERS, .offset = offsetof(type, member##_m),                             \
    .count_offset = offsetof(type, n_##member), .unit = "mm", .low = -1e5, .high = 1e5

#define MOMENT(word, what)                                                                         \
    {                                                                                              \
        .key = #word, .kind = TACET_FIELD_NUMBER, INERTIA(word), .unit = "kg m2", .low = 1e-6,     \
        .high = 1e8, .doc = (what)                                                                 \
    }
#define PRODUCT(word, what)                                                                        \
    {                                                                                              \
        .key = #word, .kind = TACET_FIELD_NUMBER, INERTIA(word), .unit = "kg m2", .fallback = "0", \
        .low = -1e8, .high = 1e8, .doc = (what)                                                    \
    }
static const tacet_field inertia_fields[] = {
    MOMENT(xx, "about the axis along the crank"),
    MOMENT(yy, "about the axis across"),
    MOMENT(zz, "about the axis up"),
    PRODUCT(xy, "as the tensor is written: minus the integral of x y dm"),
    PRODUCT(xz, "minus the integral of x z dm"),
    PRODUCT(yz, "minus the integral of y z dm"),
    {.key = NULL}};
static const tacet_section inertia_section = {.name = "inertia_kgm2",
                                              .doc = "tensor about the centre of gravity",
                                              .size = sizeof(tacet_inertia_def),
                                              .fields = inertia_fields};

#define DYNAMIC(word, member, what)                                                                \
    {                                                                                              \
        .key = (word), .kind = TACET_FIELD_CURVE, MOUNT(member), .unit = "N/mm", .x_unit = "Hz",   \
        .low = 1e-3, .high = 1e8, .doc = (what)                                                    \
    }
#define STATIC(word, member, what)                                                                 \
    {                                                                                              \
        .key = (word), .kind = TACET_FIELD_NUMBER, MOUNT(member), .unit = "N/mm", .fallback = "",  \
        .low = 1e-3, .high = 1e8, .doc = (what)                                                    \
    }
static const tacet_field mount_fields[] = {
    {.key = "name", .kind = TACET_FIELD_NAME, MOUNT(name), .doc = "what quantities call it"},
    {.key = "at_mm", THREE(tacet_mount_def, at), .doc = "[x, y, z] from the centre of gravity"},
    {.key = "turned_deg",
     .kind = TACET_FIELD_NUMBERS,
     MOUNT(turned_rad),
     .count_offset = offsetof(tacet_mount_def, n_turned),
     .unit = "deg",
     .low = -360,
     .high = 360,
     .fallback = "",
     .doc = "its axes turned about x, then the new y, then the new z; absent: as the body's"},
    DYNAMIC("x_n_per_mm", x_N_per_m, "dynamic stiffness along its x, a number or over Hz"),
    DYNAMIC("y_n_per_mm", y_N_per_m, "along its y"),
    DYNAMIC("z_n_per_mm", z_N_per_m, "along its z"),
    STATIC("static_x_n_per_mm", static_x_N_per_m, "for weight and mean torque; absent: dynamic"),
    STATIC("static_y_n_per_mm", static_y_N_per_m, "the same along y"),
    STATIC("static_z_n_per_mm", static_z_N_per_m, "the same along z"),
    {.key = "loss_factor",
     .kind = TACET_FIELD_CURVE,
     MOUNT(loss_factor),
     .x_unit = "Hz",
     .fallback = "0.1",
     .low = 0,
     .high = 2,
     .doc = "tangent of the loss angle, a number or over Hz"},
    {.key = NULL}};
static const tacet_section mount_section = {.name = "mounts",
                                            .doc = "what the powertrain stands on",
                                            .size = sizeof(tacet_mount_def),
                                            .fields = mount_fields};

static const tacet_field weight_fields[] = {
    {.key = "at_mm",
     .kind = TACET_FIELD_NUMBER,
     WEIGHT(at_m),
     .unit = "mm",
     .low = -1e5,
     .high = 1e5,
     .doc = "along the crank from the free end, as at_mm of a cylinder"},
    {.key = "unbalance_kgmm",
     .kind = TACET_FIELD_NUMBER,
     WEIGHT(unbalance_kgm),
     .unit = "kg mm",
     .low = 0,
     .high = 1e9,
     .doc = "mass times radius"},
    {.key = "angle_deg",
     .kind = TACET_FIELD_NUMBER,
     WEIGHT(angle_rad),
     .unit = "deg",
     .low = -720,
     .high = 720,
     .doc = "from the pin of the first cylinder of the firing order, with rotation"},
    {.key = NULL}};
static const tacet_section weight_section = {.name = "counterweights",
                                             .doc = "unbalance that turns with the crank",
                                             .size = sizeof(tacet_counterweight_def),
                                             .fields = weight_fields};

static const tacet_field shaft_fields[] = {
    {.key = "at_mm",
     THREE(tacet_balance_shaft_def, at),
     .doc = "[x, y, z] of its unbalance, from the centre of gravity"},
    {.key = "ratio",
     .kind = TACET_FIELD_NUMBER,
     SHAFT(ratio),
     .low = -24,
     .high = 24,
     .doc = "speed over the crank's, negative against it; halves and whole numbers"},
    {.key = "unbalance_kgmm",
     .kind = TACET_FIELD_NUMBER,
     SHAFT(unbalance_kgm),
     .unit = "kg mm",
     .low = 0,
     .high = 1e9,
     .doc = "mass times radius"},
    {.key = "phase_deg",
     .kind = TACET_FIELD_NUMBER,
     SHAFT(phase_rad),
     .unit = "deg",
     .fallback = "0",
     .low = -720,
     .high = 720,
     .doc = "where it points when the first cylinder of the firing order is at top: from up, with "
            "the crank's rotation"},
    {.key = NULL}};
static const tacet_section shaft_section = {.name = "balance_shafts",
                                            .doc = "shafts that cancel shaking",
                                            .size = sizeof(tacet_balance_shaft_def),
                                            .fields = shaft_fields};

static const tacet_field place_fields[] = {
    {.key = "name", .kind = TACET_FIELD_NAME, PLACE(name), .doc = "what quantities call it"},
    {.key = "at_mm", THREE(tacet_place_def, at), .doc = "[x, y, z] from the centre of gravity"},
    {.key = NULL}};
static const tacet_section place_section = {.name = "places",
                                            .doc = "spots of the powertrain whose motion is judged",
                                            .size = sizeof(tacet_place_def),
                                            .fields = place_fields};

static const tacet_field point_fields[] = {
    {.key = "name", .kind = TACET_FIELD_NAME, POINT(name), .doc = "what quantities call it"},
    {.key = "sense",
     .kind = TACET_FIELD_CHOICE,
     POINT(sense),
     .fallback = "acceleration",
     .choices = senses,
     .doc = "what is felt or heard there: m/s2, Pa or m/s"},
    {.key = "weighting",
     .kind = TACET_FIELD_CHOICE,
     POINT(weighting),
     .fallback = "none",
     .choices = tacet_weighting_names,
     .doc = "wk: seat upright, wd: seat level (ISO 2631-1); a: hearing, which hides a 50 Hz boom"},
    {.key = NULL}};
static const tacet_section point_section = {.name = "points",
                                            .doc = "where people are",
                                            .size = sizeof(tacet_point_def),
                                            .fields = point_fields};

static const tacet_field resonance_fields[] = {
    {.key = "hz",
     .kind = TACET_FIELD_NUMBER,
     RESONANCE(hz),
     .unit = "Hz",
     .low = 0.01,
     .high = 20000,
     .doc = "its frequency"},
    {.key = "damping_ratio",
     .kind = TACET_FIELD_NUMBER,
     RESONANCE(damping_ratio),
     .low = 1e-4,
     .high = 10,
     .doc = "of critical"},
    {.key = "gain",
     .kind = TACET_FIELD_NUMBER,
     RESONANCE(gain),
     .fallback = "",
     .low = -1e9,
     .high = 1e9,
     .doc = "per N far below it, in the point's unit; or mass_kg"},
    {.key = "mass_kg",
     .kind = TACET_FIELD_NUMBER,
     RESONANCE(mass_kg),
     .unit = "kg",
     .fallback = "",
     .low = 1e-3,
     .high = 1e9,
     .doc = "that accelerates: 1 / mass per N far above it"},
    {.key = NULL}};
static const tacet_section resonance_section = {.name = "resonances",
                                                .doc = "what a path passes, as a sum",
                                                .size = sizeof(tacet_resonance_def),
                                                .fields = resonance_fields};

static const tacet_field path_fields[] = {
    {.key = "mount", .kind = TACET_FIELD_TEXT, PATH(mount), .doc = "whose force drives it"},
    {.key = "axis",
     .kind = TACET_FIELD_CHOICE,
     PATH(axis),
     .fallback = "z",
     .choices = axes,
     .doc = "of the mount"},
    {.key = "to", .kind = TACET_FIELD_TEXT, PATH(to), .doc = "the point where it arrives"},
    {.key = "weight",
     .kind = TACET_FIELD_NUMBER,
     PATH(weight),
     .fallback = "1",
     .low = -1e6,
     .high = 1e6,
     .doc = "factor on the whole path; inputs add with phase"},
    {.key = "resonances",
     .kind = TACET_FIELD_SECTIONS,
     PATH(resonances),
     .count_offset = offsetof(tacet_path_def, n_resonances),
     .fallback = "",
     .section = &resonance_section,
     .doc = "what it passes, as a sum of resonances; or table"},
    {.key = "table",
     .kind = TACET_FIELD_TEXT,
     PATH(table),
     .fallback = "",
     .doc = "CSV file: hz, real and imaginary part per N; passes nothing outside its rows"},
    {.key = NULL}};
static const tacet_section path_section = {.name = "paths",
                                           .doc = "from a mount's force to a point",
                                           .size = sizeof(tacet_path_def),
                                           .fields = path_fields};

#define LIST(word, member, what, how)                                                              \
    {                                                                                              \
        .key = (word), .kind = TACET_FIELD_SECTIONS, BODY(member),                                 \
        .count_offset = offsetof(tacet_body_def, n_##member), .fallback = "", .section = &(what),  \
        .doc = (how)                                                                               \
    }
static const tacet_field body_fields[] = {
    {.key = "mass_kg",
     .kind = TACET_FIELD_NUMBER,
     BODY(mass_kg),
     .unit = "kg",
     .low = 1e-3,
     .high = 1e8,
     .doc = "of all that the mounts carry"},
    {.key = "inertia_kgm2",
     .kind = TACET_FIELD_SECTION,
     BODY(inertia_kgm2),
     .section = &inertia_section,
     .doc = "tensor about the centre of gravity"},
    {.key = "crank_axis_mm",
     THREE(tacet_body_def, crank_axis),
     .fallback = "",
     .doc = "[x, y, z] of the crank's axis at at_mm 0, from the centre of gravity; absent: there"},
    {.key = "rotating_mass_kg",
     .kind = TACET_FIELD_NUMBER,
     BODY(rotating_mass_kg),
     .unit = "kg",
     .fallback = "0",
     .low = 0,
     .high = 1e6,
     .doc = "at each crank pin, one a cylinder, that no counterweight takes up"},
    LIST("counterweights", counterweights, weight_section, "unbalance that turns with the crank"),
    LIST("balance_shafts", balance_shafts, shaft_section, "shafts that cancel shaking"),
    LIST("mounts", mounts, mount_section, "what the powertrain stands on"),
    LIST("places", places, place_section, "spots of the powertrain whose motion is judged"),
    LIST("points", points, point_section, "where people are"),
    LIST("paths", paths, path_section, "from mount forces to points"),
    {.key = NULL}};

const tacet_section *tacet_body_keys(void)
{
    static const tacet_section section = {.name = "body",
                                          .doc = "the powertrain on its mounts",
                                          .size = sizeof(tacet_body_def),
                                          .fields = body_fields};
    return &section;
}

tacet_body_def tacet_body_default(void)
{
    return (tacet_body_def){.mass_kg = NAN};
}

bool tacet_body_def_given(const tacet_body_def *d)
{
    return !isnan(d->mass_kg);
}
