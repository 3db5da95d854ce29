// Keys of the study itself and of its section screen; the other sections are tables of their rooms.
#include "keys.h"
#include <pthread.h>

#define DENSITIES(member) .offset = offsetof(tacet_densities_def, member)
#define SCREEN(member)    .offset = offsetof(tacet_screen_def, member)
#define STUDY(member)     .offset = offsetof(tacet_study, member)

static const tacet_field density_fields[] = {
    {.key = "list",
     .kind = TACET_FIELD_TEXTS,
     DENSITIES(list),
     .count_offset = offsetof(tacet_densities_def, n_list),
     .fallback = "",
     .doc = "densities one by one, as [1/2, 2/3, 1]; in place of longest and lowest"},
    {.key = "longest",
     .kind = TACET_FIELD_COUNT,
     DENSITIES(longest),
     .fallback = "7",
     .low = 1,
     .high = TACET_PATTERN_LONGEST,
     .doc = "all densities k/L with words of at most so many opportunities"},
    {.key = "lowest",
     .kind = TACET_FIELD_TEXT,
     DENSITIES(lowest),
     .fallback = "1/3",
     .doc = ".. from this one up to 1"},
    {0}};
static const tacet_section density_section = {.name = "densities",
                                              .doc = "which shares of the firings to screen",
                                              .size = sizeof(tacet_densities_def),
                                              .fields = density_fields,
                                              .shorthand = "list"};

static const tacet_field screen_fields[] = {
    {.key = "speeds_rpm",
     .kind = TACET_FIELD_NUMBERS,
     SCREEN(speeds_rad_per_s),
     .count_offset = offsetof(tacet_screen_def, n_speeds),
     .unit = "rpm",
     .low = 10,
     .high = 20000,
     .doc = "mean crank speeds, rising; from:to:step or a list"},
    {.key = "brake_torque_nm",
     .kind = TACET_FIELD_CURVE,
     SCREEN(brake_torque_Nm),
     .unit = "N m",
     .x_unit = "rpm",
     .low = 0,
     .high = 2e7,
     .doc = "demand at the flywheel flange, one number or a curve over speed"},
    {.key = "densities",
     .kind = TACET_FIELD_SECTION,
     SCREEN(densities),
     .fallback = "",
     .section = &density_section,
     .doc = "a list, or all down to a lowest one"},
    {.key = "patterns",
     .kind = TACET_FIELD_TEXTS,
     SCREEN(patterns),
     .count_offset = offsetof(tacet_screen_def, n_patterns),
     .fallback = "",
     .doc = "words as x.x..x, books (*.words) or words of a book as own.words:NAME, besides the "
            "densities"},
    {.key = "highest_order",
     .kind = TACET_FIELD_NUMBER,
     SCREEN(highest_order),
     .fallback = "",
     .low = 1,
     .high = 60,
     .doc = "of the lines computed; when absent, from the highest mode of interest"},
    {.key = "reserve_db",
     .kind = TACET_FIELD_NUMBER,
     SCREEN(reserve_db),
     .unit = "dB",
     .fallback = "3",
     .low = 0,
     .high = 40,
     .doc = "margin from which a verdict is clear; near below it"},
    {.key = "least_clear_rpm",
     .kind = TACET_FIELD_NUMBER,
     SCREEN(least_clear_rad_per_s),
     .unit = "rpm",
     .fallback = "150",
     .low = 0,
     .high = 20000,
     .doc = "a density that is clear over less than this is not recommended"},
    {.key = "least_saving_percent",
     .kind = TACET_FIELD_NUMBER,
     SCREEN(least_saving),
     .unit = "%",
     .fallback = "1",
     .low = 0,
     .high = 100,
     .doc = "a density that saves less fuel than this over the next clear one is not recommended"},
    {.key = "referee",
     .kind = TACET_FIELD_COUNT,
     SCREEN(referee),
     .fallback = "8",
     .low = 0,
     .high = 1000,
     .doc = "how many of the worst conditions are solved again by march and steady"},
    {0}};

const tacet_section *study_screen_keys(void)
{
    static const tacet_section section = {.name = "screen",
                                          .doc = "speeds, demand and patterns to screen",
                                          .size = sizeof(tacet_screen_def),
                                          .fields = screen_fields};
    return &section;
}

// The sections of other rooms come from calls, which no constant table may hold: the root table is
// put together once and read ever after.
static tacet_field root_fields[16];
static const tacet_section root = {
    .name = "study", .doc = "a study", .size = sizeof(tacet_study), .fields = root_fields};
static pthread_once_t root_made = PTHREAD_ONCE_INIT;

static void make_root(void)
{
    // engine, cycle and skip are members of one struct
    const tacet_field fields[] = {
        {.key = "title",
         .kind = TACET_FIELD_TEXT,
         STUDY(title),
         .fallback = "",
         .doc = "what drawings and tables are headed with"},
        {.key = "engine",
         .kind = TACET_FIELD_SECTION,
         STUDY(engine),
         .section = tacet_engine_keys(),
         .doc = tacet_engine_keys()->doc},
        {.key = "cycle",
         .kind = TACET_FIELD_SECTION,
         STUDY(engine),
         .fallback = "",
         .section = tacet_cycle_keys(),
         .doc = tacet_cycle_keys()->doc},
        {.key = "skip",
         .kind = TACET_FIELD_SECTION,
         STUDY(engine),
         .fallback = "",
         .section = tacet_skip_keys(),
         .doc = tacet_skip_keys()->doc},
        {.key = "train",
         .kind = TACET_FIELD_SECTION,
         STUDY(train),
         .section = tacet_train_keys(),
         .doc = tacet_train_keys()->doc},
        {.key = "body",
         .kind = TACET_FIELD_SECTION,
         STUDY(body),
         .fallback = "",
         .section = tacet_body_keys(),
         .doc = tacet_body_keys()->doc},
        {.key = "bands",
         .kind = TACET_FIELD_SECTIONS,
         STUDY(bands),
         .count_offset = offsetof(tacet_study, n_bands),
         .section = tacet_band_keys(),
         .doc = tacet_band_keys()->doc},
        {.key = "limits",
         .kind = TACET_FIELD_SECTIONS,
         STUDY(limits),
         .count_offset = offsetof(tacet_study, n_limits),
         .fallback = "",
         .section = tacet_limit_keys(),
         .doc = tacet_limit_keys()->doc},
        {.key = "screen",
         .kind = TACET_FIELD_SECTION,
         STUDY(screen),
         .section = study_screen_keys(),
         .doc = study_screen_keys()->doc},
    };
    _Static_assert(sizeof fields < sizeof root_fields, "an empty row ends the table");
    for (size_t i = 0; i < sizeof fields / sizeof *fields; i++)
        root_fields[i] = fields[i];
}

const tacet_section *tacet_study_keys(void)
{
    (void)pthread_once(&root_made, make_root);
    return &root;
}
