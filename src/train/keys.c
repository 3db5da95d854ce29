// Keys of the section train of a study.
#include "tacet/train.h"
#include <math.h>

static const char *const sides[] = {"powertrain", "outside", NULL};
static const char *const formulas[] = {"carter", "ker-wilson", NULL};
static const char *const laws[] = {"causal", "constant", NULL};

#define NODE(member)   .offset = offsetof(tacet_node_def, member)
#define THROW(member)  .offset = offsetof(tacet_throw_def, member)
#define LINK(member)   .offset = offsetof(tacet_link_def, member)
#define DAMPER(member) .offset = offsetof(tacet_damper_def, member)
#define TRAIN(member)  .offset = offsetof(tacet_train_def, member)
// From a watch's wheel to a ship's propeller; outside is a slip of unit.
#define INERTIA   .unit = "kg m2", .low = 1e-7, .high = 1e7
#define STIFFNESS .low = 1e-2, .high = 1e12
#define LENGTH_MM .unit = "mm", .low = 0.1, .high = 20000
#define BORE_MM   .unit = "mm", .low = 0, .high = 20000

static const tacet_field node_fields[] = {
    {.key = "name", .kind = TACET_FIELD_NAME, NODE(name), .doc = "what links and messages call it"},
    {.key = "inertia_kgm2",
     .kind = TACET_FIELD_NUMBER,
     NODE(inertia_kgm2),
     INERTIA,
     .doc = "at its own speed; a throw's without the reciprocating share"},
    {.key = "damping_nms_per_rad",
     .kind = TACET_FIELD_NUMBER,
     NODE(damping_Nms_per_rad),
     .unit = "N m s/rad",
     .fallback = "0",
     .low = 0,
     .high = 1e7,
     .doc = "viscous, to ground, on the fluctuation alone: friction carries the mean"},
    {.key = "on",
     .kind = TACET_FIELD_CHOICE,
     NODE(on),
     .fallback = "powertrain",
     .choices = sides,
     .doc = "what its bearings and loads react on"},
    {.key = NULL}};

static const tacet_section node_section = {
    .name = "nodes", .doc = "inertias", .size = sizeof(tacet_node_def), .fields = node_fields};

#define THROW_LENGTH(word, member, what)                                                           \
    {                                                                                              \
        .key = (word), .kind = TACET_FIELD_NUMBER, THROW(member), .fallback = "", LENGTH_MM,       \
        .doc = (what)                                                                              \
    }
#define THROW_BORE(word, member, what)                                                             \
    {                                                                                              \
        .key = (word), .kind = TACET_FIELD_NUMBER, THROW(member), .fallback = "0", BORE_MM,        \
        .doc = (what)                                                                              \
    }

static const tacet_field throw_fields[] = {
    {.key = "formula",
     .kind = TACET_FIELD_CHOICE,
     THROW(formula),
     .fallback = "",
     .choices = formulas,
     .doc = "rule for the stiffness of one throw, pin to pin; the two differ by 5 to 15 %"},
    THROW_LENGTH("journal_length_mm", journal_length_m, "main journal between two webs"),
    THROW_LENGTH("journal_outer_mm", journal_outer_m, "its diameter"),
    THROW_BORE("journal_inner_mm", journal_inner_m, "its bore"),
    THROW_LENGTH("pin_length_mm", pin_length_m, "crank pin between two webs"),
    THROW_LENGTH("pin_outer_mm", pin_outer_m, "its diameter"),
    THROW_BORE("pin_inner_mm", pin_inner_m, "its bore"),
    THROW_LENGTH("throw_mm", throw_m, "half the stroke"),
    THROW_LENGTH("web_thickness_mm", web_thickness_m, "along the crank"),
    THROW_LENGTH("web_width_mm", web_width_m, "across"),
    {.key = NULL}};

static const tacet_section throw_section = {.name = "throw",
                                            .doc = "stiffness of a crank throw from its dimensions",
                                            .size = sizeof(tacet_throw_def),
                                            .fields = throw_fields};

#define FATIGUE(member) .offset = offsetof(tacet_fatigue_def, member)
static const char *const mean_rules[] = {"goodman", "gerber", "none", NULL};
static const tacet_field fatigue_fields[] = {
    {.key = "amplitude_mpa",
     .kind = TACET_FIELD_NUMBER,
     FATIGUE(amplitude_MPa),
     .unit = NULL,
     .low = 0.1,
     .high = 1e4,
     .doc = "fully reversed shear stress, in MPa, that lasts at_cycles"},
    {.key = "at_cycles",
     .kind = TACET_FIELD_NUMBER,
     FATIGUE(at_cycles),
     .fallback = "1e6",
     .low = 1,
     .high = 1e12,
     .doc = "cycles to failure at that amplitude"},
    {.key = "exponent",
     .kind = TACET_FIELD_NUMBER,
     FATIGUE(exponent),
     .fallback = "5",
     .low = 1,
     .high = 50,
     .doc = "of the straight line in log-log: N = at_cycles (a / amplitude)^-exponent, no end"},
    {.key = "ultimate_mpa",
     .kind = TACET_FIELD_NUMBER,
     FATIGUE(ultimate_MPa),
     .low = 0.1,
     .high = 1e4,
     .doc = "ultimate shear strength in MPa, for the mean stress"},
    {.key = "mean",
     .kind = TACET_FIELD_CHOICE,
     FATIGUE(mean_rule),
     .fallback = "goodman",
     .choices = mean_rules,
     .doc = "how a mean stress counts"},
    {.key = NULL}};
static const tacet_section fatigue_section = {.name = "fatigue",
                                              .doc = "shear stress against cycles of a shaft",
                                              .size = sizeof(tacet_fatigue_def),
                                              .fields = fatigue_fields};

static const tacet_field link_fields[] = {
    {.key = "name",
     .kind = TACET_FIELD_NAME,
     LINK(name),
     .doc = "what quantities and messages call it"},
    {.key = "from",
     .kind = TACET_FIELD_TEXT,
     LINK(from),
     .doc = "node; a gear stage's gear is here"},
    {.key = "to", .kind = TACET_FIELD_TEXT, LINK(to), .doc = "node; a gear stage's shaft is here"},
    {.key = "stiffness_nm_per_rad",
     .kind = TACET_FIELD_NUMBER,
     LINK(stiffness_Nm_per_rad),
     .unit = "N m/rad",
     .fallback = "",
     STIFFNESS,
     .doc = "torsional stiffness on the `to` side; or one of the next, length_mm, throw"},
    {.key = "stiffness_nm_per_deg",
     .kind = TACET_FIELD_NUMBER,
     LINK(stiffness_catalogue_Nm_per_rad),
     .unit = "N m/deg",
     .fallback = "",
     STIFFNESS,
     .doc = "the same in catalogue units"},
    {.key = "length_mm",
     .kind = TACET_FIELD_NUMBER,
     LINK(length_m),
     .fallback = "",
     LENGTH_MM,
     .doc = "a plain shaft of this length, outer_mm and inner_mm"},
    {.key = "shear_modulus_gpa",
     .kind = TACET_FIELD_NUMBER,
     LINK(shear_modulus_Pa),
     .unit = "GPa",
     .fallback = "80",
     .low = 1,
     .high = 300,
     .doc = "of shaft or throw; steel 79 to 82: E / (2 (1 + 0.29)) with E = 205 to 210 GPa"},
    {.key = "outer_mm",
     .kind = TACET_FIELD_NUMBER,
     LINK(outer_m),
     .fallback = "",
     LENGTH_MM,
     .doc = "outer diameter, for stress and for a plain shaft's stiffness"},
    {.key = "inner_mm",
     .kind = TACET_FIELD_NUMBER,
     LINK(inner_m),
     .fallback = "0",
     BORE_MM,
     .doc = "bore"},
    {.key = "stress_concentration",
     .kind = TACET_FIELD_NUMBER,
     LINK(stress_concentration),
     .fallback = "1",
     .low = 1,
     .high = 20,
     .doc = "at fillet or oil hole, on the nominal shear stress"},
    {.key = "fatigue",
     .kind = TACET_FIELD_SECTION,
     LINK(fatigue),
     .fallback = "",
     .section = &fatigue_section,
     .doc = "for limits on the damage of its link-stress"},
    {.key = "throw",
     .kind = TACET_FIELD_SECTION,
     LINK(throw_),
     .fallback = "",
     .section = &throw_section,
     .doc = "a crank throw by its dimensions"},
    {.key = "damping_nms_per_rad",
     .kind = TACET_FIELD_NUMBER,
     LINK(damping_Nms_per_rad),
     .unit = "N m s/rad",
     .fallback = "",
     .low = 0,
     .high = 1e7,
     .doc = "viscous, on the twist; or one of the next two"},
    {.key = "damping_ratio",
     .kind = TACET_FIELD_NUMBER,
     LINK(damping_ratio),
     .fallback = "",
     .low = 0,
     .high = 2,
     .doc = "of critical: viscous c = 2 ratio k / w, w of the mode with most energy in this link"},
    {.key = "loss_factor",
     .kind = TACET_FIELD_NUMBER,
     LINK(loss_factor),
     .fallback = "",
     .low = 0,
     .high = 2,
     .doc = "Im K / Re K, the same at all frequencies"},
    {.key = "at_hz",
     .kind = TACET_FIELD_NUMBER,
     LINK(at_hz),
     .unit = "Hz",
     .fallback = "",
     .low = 1e-3,
     .high = 1e5,
     .doc = "where the stiffness with a loss factor is the stated one; default the mode with most "
            "energy in this link"},
    {.key = "loss_law",
     .kind = TACET_FIELD_CHOICE,
     LINK(loss_law),
     .fallback = "causal",
     .choices = laws,
     .doc = "causal: stiffness grows slowly with frequency, as it must; constant: k (1 + i loss), "
            "at constant speed only"},
    {.key = "gear_ratio",
     .kind = TACET_FIELD_NUMBER,
     LINK(gear_ratio),
     .fallback = "1",
     .low = -1000,
     .high = 1000,
     .doc = "speed of `from` over speed of `to`; negative: they turn against one another"},
    {.key = NULL}};

static const tacet_section link_section = {.name = "links",
                                           .doc = "shafts, couplings, gear stages; a tree",
                                           .size = sizeof(tacet_link_def),
                                           .fields = link_fields};

static const tacet_field damper_fields[] = {
    {.key = "name",
     .kind = TACET_FIELD_NAME,
     DAMPER(name),
     .doc = "of the link that it adds; its ring is the node <name>-ring"},
    {.key = "node", .kind = TACET_FIELD_TEXT, DAMPER(node), .doc = "node that carries it"},
    {.key = "ring_inertia_kgm2",
     .kind = TACET_FIELD_NUMBER,
     DAMPER(ring_inertia_kgm2),
     INERTIA,
     .doc = "of its ring"},
    {.key = "tuned_hz",
     .kind = TACET_FIELD_NUMBER,
     DAMPER(tuned_hz),
     .unit = "Hz",
     .low = 0.1,
     .high = 10000,
     .doc = "frequency of the ring on its rubber with the node held"},
    {.key = "loss_factor",
     .kind = TACET_FIELD_NUMBER,
     DAMPER(loss_factor),
     .fallback = "0.15",
     .low = 0,
     .high = 2,
     .doc = "of the rubber; usual 0.15 to 0.25"},
    {.key = NULL}};

static const tacet_section damper_section = {.name = "dampers",
                                             .doc = "tuned rubber dampers by catalogue values",
                                             .size = sizeof(tacet_damper_def),
                                             .fields = damper_fields};

static const tacet_field train_fields[] = {
    {.key = "nodes",
     .kind = TACET_FIELD_SECTIONS,
     TRAIN(nodes),
     .count_offset = offsetof(tacet_train_def, n_nodes),
     .section = &node_section,
     .doc = "inertias"},
    {.key = "links",
     .kind = TACET_FIELD_SECTIONS,
     TRAIN(links),
     .count_offset = offsetof(tacet_train_def, n_links),
     .section = &link_section,
     .fallback = "",
     .doc = "what ties them, a tree"},
    {.key = "dampers",
     .kind = TACET_FIELD_SECTIONS,
     TRAIN(dampers),
     .count_offset = offsetof(tacet_train_def, n_dampers),
     .section = &damper_section,
     .fallback = "",
     .doc = "tuned dampers by catalogue values"},
    {.key = "flywheel",
     .kind = TACET_FIELD_TEXT,
     TRAIN(flywheel),
     .fallback = "flywheel",
     .doc = "node whose speed is the crank's: irregularity and brake torque stand there"},
    {.key = "load",
     .kind = TACET_FIELD_TEXT,
     TRAIN(load),
     .fallback = "",
     .doc = "node that takes the mean torque; default the flywheel"},
    {.key = NULL}};

const tacet_section *tacet_train_keys(void)
{
    static const tacet_section section = {.name = "train",
                                          .doc = "the torsional system",
                                          .size = sizeof(tacet_train_def),
                                          .fields = train_fields};
    return &section;
}

tacet_train_def tacet_train_default(void)
{
    return (tacet_train_def){.flywheel = "flywheel", .lowest_hz = 0.5, .highest_hz = 2000};
}

tacet_node_def tacet_node_default(void)
{
    return (tacet_node_def){.on = TACET_ON_POWERTRAIN};
}

tacet_link_def tacet_link_default(void)
{
    return (tacet_link_def){
        .stiffness_Nm_per_rad = NAN,
        .stiffness_catalogue_Nm_per_rad = NAN,
        .length_m = NAN,
        .shear_modulus_Pa = 80e9,
        .outer_m = NAN,
        .inner_m = 0,
        .stress_concentration = 1,
        .fatigue = {.amplitude_MPa = NAN, .at_cycles = 1e6, .exponent = 5, .ultimate_MPa = NAN},
        .throw_ = {.formula = -1,
                   .journal_length_m = NAN,
                   .journal_outer_m = NAN,
                   .pin_length_m = NAN,
                   .pin_outer_m = NAN,
                   .throw_m = NAN,
                   .web_thickness_m = NAN,
                   .web_width_m = NAN},
        .damping_Nms_per_rad = NAN,
        .damping_ratio = NAN,
        .loss_factor = NAN,
        .at_hz = NAN,
        .loss_law = TACET_LOSS_CAUSAL,
        .gear_ratio = 1,
    };
}
