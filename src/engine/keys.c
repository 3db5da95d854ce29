// Keys of the sections engine, cycle and skip of a study.
#include "tacet/engine.h"

static const char *const rotations[] = {"clockwise", "counterclockwise", NULL};
static const char *const kinds[] = {"wiebe", "traces", NULL};
static const char *const loads[] = {"charge", "fuel", NULL};
static const char *const trapped[] = {"residual", "burnt", "air", "open", NULL};

#define CYLINDER(member) .offset = offsetof(tacet_cylinder_def, member)
#define FRICTION(member) .offset = offsetof(tacet_friction_def, member)
#define ENGINE(member)   .offset = offsetof(tacet_engine_def, member)
#define CYCLE(member)    .offset = offsetof(tacet_engine_def, cycle.member)
#define SKIP(member)     .offset = offsetof(tacet_engine_def, skip.member)
// A section whose members lie side by side in the struct: offsets from the first of them.
#define WITHIN(type, first, member) .offset = (offsetof(type, member) - offsetof(type, first))
#define SPAN(type, first, last, last_type)                                                         \
    (offsetof(type, last) + sizeof(last_type) - offsetof(type, first))

static const tacet_field cylinder_fields[] = {
    {.key = "number",
     .kind = TACET_FIELD_COUNT,
     CYLINDER(number),
     .low = 1,
     .high = TACET_ENGINE_CYLINDERS_MOST,
     .doc = "cylinder number, as in the firing order"},
    {.key = "node",
     .kind = TACET_FIELD_TEXT,
     CYLINDER(node),
     .fallback = "",
     .doc = "node of the train it drives; default throw<number>"},
    {.key = "bank_deg",
     .kind = TACET_FIELD_NUMBER,
     CYLINDER(bank_rad),
     .unit = "deg",
     .fallback = "0",
     .low = -180,
     .high = 180,
     .doc = "its axis from vertical, positive against a clockwise rotation"},
    {.key = "at_mm",
     .kind = TACET_FIELD_NUMBER,
     CYLINDER(at_m),
     .unit = "mm",
     .fallback = "0",
     .low = -20000,
     .high = 20000,
     .doc = "its place along the crank from the free end"},
    {.key = "charge_factor",
     .kind = TACET_FIELD_NUMBER,
     CYLINDER(charge_factor),
     .fallback = "1",
     .low = 0.5,
     .high = 1.5,
     .doc = "its share of the common charge"},
    {0}};
static const tacet_section cylinder_section = {.name = "cylinders",
                                               .doc = "one cylinder each; those not stated stand "
                                                      "inline, cylinder k on throw<k>",
                                               .size = sizeof(tacet_cylinder_def),
                                               .fields = cylinder_fields};

static const tacet_field friction_fields[] = {
    {.key = "constant",
     .kind = TACET_FIELD_NUMBER,
     FRICTION(constant_Pa),
     .unit = "kPa",
     .fallback = "65",
     .low = 0,
     .high = 1000,
     .doc = "mean effective pressure at rest"},
    {.key = "per_krpm",
     .kind = TACET_FIELD_NUMBER,
     FRICTION(per_krpm_Pa),
     .unit = "kPa",
     .fallback = "13",
     .low = 0,
     .high = 1000,
     .doc = "more for every 1000 rpm"},
    {.key = "per_krpm2",
     .kind = TACET_FIELD_NUMBER,
     FRICTION(per_krpm2_Pa),
     .unit = "kPa",
     .fallback = "4",
     .low = 0,
     .high = 1000,
     .doc = "more for every (1000 rpm)^2"},
    {.key = "per_mpa_peak",
     .kind = TACET_FIELD_NUMBER,
     FRICTION(per_mpa_peak_Pa),
     .unit = "kPa",
     .fallback = "4",
     .low = 0,
     .high = 100,
     .doc = "more for every MPa of peak pressure, mean over all cycles"},
    {0}};
static const tacet_section friction_section = {
    .name = "friction_kpa",
    .doc = "friction mean effective pressure without pumping, which the cycle itself gives",
    .size = sizeof(tacet_friction_def),
    .fields = friction_fields};

#define DISPERSION(member) WITHIN(tacet_engine_def, cylinder_dispersion, member)
static const tacet_field dispersion_fields[] = {
    {.key = "cylinder_percent",
     .kind = TACET_FIELD_NUMBER,
     DISPERSION(cylinder_dispersion),
     .unit = "%",
     .fallback = "3",
     .low = 0,
     .high = 50,
     .doc = "standard deviation of fired torque from cylinder to cylinder"},
    {.key = "cyclic_percent",
     .kind = TACET_FIELD_NUMBER,
     DISPERSION(cyclic_dispersion),
     .unit = "%",
     .fallback = "2",
     .low = 0,
     .high = 50,
     .doc = "standard deviation of fired torque from cycle to cycle"},
    {0}};
static const tacet_section dispersion_section = {
    .name = "dispersion",
    .doc = "how far fired cylinders differ",
    .size = SPAN(tacet_engine_def, cylinder_dispersion, cyclic_dispersion, double),
    .fields = dispersion_fields};

static const tacet_field engine_fields[] = {
    {.key = "strokes",
     .kind = TACET_FIELD_COUNT,
     ENGINE(strokes),
     .fallback = "4",
     .low = 2,
     .high = 4,
     .doc = "strokes of a working cycle, 4 or 2"},
    {.key = "rotation",
     .kind = TACET_FIELD_CHOICE,
     ENGINE(rotation),
     .fallback = "clockwise",
     .choices = rotations,
     .doc = "seen from the free end"},
    {.key = "bore_mm",
     .kind = TACET_FIELD_NUMBER,
     ENGINE(bore_m),
     .unit = "mm",
     .low = 20,
     .high = 1000,
     .doc = "bore"},
    {.key = "stroke_mm",
     .kind = TACET_FIELD_NUMBER,
     ENGINE(stroke_m),
     .unit = "mm",
     .low = 20,
     .high = 4000,
     .doc = "twice the crank radius"},
    {.key = "rod_length_mm",
     .kind = TACET_FIELD_NUMBER,
     ENGINE(rod_length_m),
     .unit = "mm",
     .low = 20,
     .high = 6000,
     .doc = "connecting rod, centre to centre"},
    {.key = "pin_offset_mm",
     .kind = TACET_FIELD_NUMBER,
     ENGINE(pin_offset_m),
     .unit = "mm",
     .fallback = "0",
     .low = -200,
     .high = 200,
     .doc = "piston pin off the plane of the crank axis, positive to the side to which the crank "
            "pin moves after top"},
    {.key = "compression_ratio",
     .kind = TACET_FIELD_NUMBER,
     ENGINE(compression_ratio),
     .fallback = "11",
     .low = 4,
     .high = 30,
     .doc = "largest over smallest volume"},
    {.key = "reciprocating_mass_kg",
     .kind = TACET_FIELD_NUMBER,
     ENGINE(reciprocating_mass_kg),
     .unit = "kg",
     .low = 0.01,
     .high = 10000,
     .doc = "piston, pin, rings and the small-end share of the rod, of one cylinder"},
    {.key = "firing_order",
     .kind = TACET_FIELD_COUNTS,
     ENGINE(firing_order),
     .count_offset = offsetof(tacet_engine_def, n_cylinders),
     .low = 1,
     .high = TACET_ENGINE_CYLINDERS_MOST,
     .doc = "cylinder numbers in firing sequence; also says how many cylinders there are"},
    {.key = "firing_intervals_deg",
     .kind = TACET_FIELD_NUMBERS,
     ENGINE(firing_intervals_rad),
     .count_offset = offsetof(tacet_engine_def, n_intervals),
     .unit = "deg",
     .fallback = "",
     .low = 0,
     .high = 720,
     .doc = "crank angle from each firing to the next, in firing sequence; default: even"},
    {.key = "cylinders",
     .kind = TACET_FIELD_SECTIONS,
     ENGINE(cylinders),
     .count_offset = offsetof(tacet_engine_def, n_cylinder_defs),
     .fallback = "",
     .section = &cylinder_section,
     .doc = "banks, places and nodes of cylinders"},
    {.key = "friction_kpa",
     .kind = TACET_FIELD_SECTION,
     ENGINE(friction),
     .fallback = "",
     .section = &friction_section,
     .doc = "friction"},
    {.key = "dispersion",
     .kind = TACET_FIELD_SECTION,
     ENGINE(cylinder_dispersion),
     .fallback = "",
     .section = &dispersion_section,
     .doc = "differences between fired cycles"},
    {0}};

#define FUEL(member) WITHIN(tacet_cycle_def, lower_heating_value_J_per_kg, member)
static const tacet_field fuel_fields[] = {
    {.key = "lower_heating_value_mj_per_kg",
     .kind = TACET_FIELD_NUMBER,
     FUEL(lower_heating_value_J_per_kg),
     .unit = "MJ/kg",
     .fallback = "43",
     .low = 1,
     .high = 130,
     .doc = "heat of the fuel"},
    {.key = "air_fuel_ratio",
     .kind = TACET_FIELD_CURVE,
     FUEL(air_fuel_ratio),
     .x_unit = "rpm",
     .fallback = "14.6",
     .low = 1,
     .high = 200,
     .doc = "mass of air to fuel; with load_by: fuel the lowest allowed"},
    {0}};
static const tacet_section fuel_section = {
    .name = "fuel",
    .doc = "fuel and mixture",
    .size = SPAN(tacet_cycle_def, lower_heating_value_J_per_kg, air_fuel_ratio, tacet_curve),
    .fields = fuel_fields};

#define MANIFOLD(member) WITHIN(tacet_cycle_def, lowest_Pa, member)
static const tacet_field manifold_fields[] = {
    {.key = "lowest",
     .kind = TACET_FIELD_CURVE,
     MANIFOLD(lowest_Pa),
     .unit = "kPa",
     .x_unit = "rpm",
     .fallback = "25",
     .low = 5,
     .high = 1000,
     .doc = "lowest pressure at which a cylinder may still fire; not used with load_by: fuel"},
    {.key = "highest",
     .kind = TACET_FIELD_CURVE,
     MANIFOLD(highest_Pa),
     .unit = "kPa",
     .x_unit = "rpm",
     .fallback = "100",
     .low = 5,
     .high = 1000,
     .doc = "highest pressure that can be had; with load_by: fuel the one at every load"},
    {0}};
static const tacet_section manifold_section = {
    .name = "manifold_kpa",
    .doc = "intake manifold pressure, absolute",
    .size = SPAN(tacet_cycle_def, lowest_Pa, highest_Pa, tacet_curve),
    .fields = manifold_fields};

#define TRACES(member) WITHIN(tacet_cycle_def, fired_trace, member)
static const tacet_field trace_fields[] = {
    {.key = "fired",
     .kind = TACET_FIELD_TEXT,
     TRACES(fired_trace),
     .fallback = "",
     .doc =
         "CSV of fired cycles. angle_deg from the gas-exchange top before firing (-360; 2-stroke "
         "-180) to the one after (360; 180), then columns pressure_kpa:manifold_kpa=60 (with "
         "load_by: fuel pressure_kpa:fuel=0.6, the share of the most fuel) and, as needed, "
         ":rpm=1400, :after=K (cycles skipped before it; 0), :next=fire or :next=skip, "
         ":fuel_mg=32.5 (fuel of the cycle)"},
    {.key = "skipped",
     .kind = TACET_FIELD_TEXT,
     TRACES(skipped_trace),
     .fallback = "",
     .doc = "CSV of skipped cycles, the same with :run=J (place in the run of skips, 1 first; "
            "forever: of a cylinder that never fires) in place of :after and :fuel_mg; the last "
            "place given stands for all later ones. What the fire before a run of skips came after "
            "cannot be said: a run follows the fire of :after=0, so give the traces of the runs "
            "that count most"},
    {0}};
static const tacet_section trace_section = {
    .name = "traces",
    .doc = "measured cylinder pressure in place of the computed cycle",
    .size = SPAN(tacet_cycle_def, fired_trace, skipped_trace, const char *),
    .fields = trace_fields};

static const tacet_field cycle_fields[] = {
    {.key = "kind",
     .kind = TACET_FIELD_CHOICE,
     CYCLE(kind),
     .fallback = "wiebe",
     .choices = kinds,
     .doc = "computed from a burn law, or measured traces"},
    {.key = "load_by",
     .kind = TACET_FIELD_CHOICE,
     CYCLE(load_by),
     .fallback = "charge",
     .choices = loads,
     .doc = "torque is set by the charge (throttle, boost) or by the fuel"},
    {.key = "mid_burn_deg",
     .kind = TACET_FIELD_CURVE,
     CYCLE(mid_burn_rad),
     .unit = "deg",
     .x_unit = "rpm",
     .fallback = "8",
     .low = -30,
     .high = 60,
     .doc = "crank angle after top at which half of the fuel has burnt"},
    {.key = "burn_10_90_deg",
     .kind = TACET_FIELD_CURVE,
     CYCLE(burn_10_90_rad),
     .unit = "deg",
     .x_unit = "rpm",
     .fallback = "25",
     .low = 2,
     .high = 90,
     .doc = "crank angle from 10 % to 90 % burnt"},
    {.key = "fuel",
     .kind = TACET_FIELD_SECTION,
     CYCLE(lower_heating_value_J_per_kg),
     .fallback = "",
     .section = &fuel_section,
     .doc = "fuel"},
    {.key = "manifold_kpa",
     .kind = TACET_FIELD_SECTION,
     CYCLE(lowest_Pa),
     .fallback = "",
     .section = &manifold_section,
     .doc = "manifold pressure"},
    {.key = "intake_temperature_k",
     .kind = TACET_FIELD_NUMBER,
     CYCLE(intake_temperature_K),
     .unit = "K",
     .fallback = "320",
     .low = 220,
     .high = 500,
     .doc = "gas in the intake manifold"},
    {.key = "exhaust_kpa",
     .kind = TACET_FIELD_NUMBER,
     CYCLE(exhaust_Pa),
     .unit = "kPa",
     .fallback = "108",
     .low = 20,
     .high = 1000,
     .doc = "exhaust manifold, absolute"},
    {.key = "wall_temperature_k",
     .kind = TACET_FIELD_NUMBER,
     CYCLE(wall_temperature_K),
     .unit = "K",
     .fallback = "420",
     .low = 220,
     .high = 900,
     .doc = "mean of head, piston and liner"},
    {.key = "blow_by_area_mm2",
     .kind = TACET_FIELD_NUMBER,
     CYCLE(blow_by_area_m2),
     .unit = "mm2",
     .fallback = "0.8",
     .low = 0,
     .high = 100,
     .doc = "effective flow area past the rings of one cylinder"},
    {.key = "crankcase_kpa",
     .kind = TACET_FIELD_NUMBER,
     CYCLE(crankcase_Pa),
     .unit = "kPa",
     .fallback = "100",
     .low = 20,
     .high = 1000,
     .doc = "below the pistons, absolute"},
    {.key = "peak_pressure_mpa",
     .kind = TACET_FIELD_NUMBER,
     CYCLE(peak_pressure_Pa),
     .unit = "MPa",
     .fallback = "",
     .low = 0.5,
     .high = 60,
     .doc = "highest cylinder pressure allowed in any cycle; absent: no limit"},
    {.key = "traces",
     .kind = TACET_FIELD_SECTION,
     CYCLE(fired_trace),
     .fallback = "",
     .section = &trace_section,
     .doc = "files for kind: traces"},
    {0}};

static const tacet_field skip_fields[] = {
    {.key = "trapped",
     .kind = TACET_FIELD_CHOICE,
     SKIP(trapped),
     .fallback = "residual",
     .choices = trapped,
     .doc =
         "what a skipped cylinder holds: residual (shut after its exhaust stroke; intake first on "
         "return), burnt (exhaust stays shut; exhaust first), air (shut after one more intake; "
         "exhaust first), open (valves go on, no fuel)"},
    {.key = "cylinders",
     .kind = TACET_FIELD_COUNTS,
     SKIP(cylinders),
     .count_offset = offsetof(tacet_engine_def, skip.n_cylinders),
     .fallback = "all",
     .low = 1,
     .high = TACET_ENGINE_CYLINDERS_MOST,
     .word = "all",
     .doc = "numbers of the cylinders that may skip"},
    {.key = "longest_run",
     .kind = TACET_FIELD_COUNT,
     SKIP(longest_run),
     .fallback = "12",
     .low = 1,
     .high = TACET_ENGINE_RUN_MOST,
     .doc = "most cycles that a cylinder which fires at all may skip in a row"},
    {0}};

const tacet_section *tacet_engine_keys(void)
{
    static const tacet_section section = {.name = "engine",
                                          .doc = "cylinders, geometry, firing, friction",
                                          .size = sizeof(tacet_engine_def),
                                          .fields = engine_fields};
    return &section;
}

const tacet_section *tacet_cycle_keys(void)
{
    static const tacet_section section = {.name = "cycle",
                                          .doc = "what happens in a cylinder",
                                          .size = sizeof(tacet_engine_def),
                                          .fields = cycle_fields};
    return &section;
}

const tacet_section *tacet_skip_keys(void)
{
    static const tacet_section section = {.name = "skip",
                                          .doc = "how cylinders skip",
                                          .size = sizeof(tacet_engine_def),
                                          .fields = skip_fields};
    return &section;
}
