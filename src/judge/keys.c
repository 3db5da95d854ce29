// Keys of the lists bands and limits of a study.
#include "tacet/judge.h"
#include <math.h>
#include <stdio.h>

static const char *const kinds[] = {"cab", "mount", "driveline", "crank", NULL};
static const char *const references[] = {"worst-speed", "same-speed", NULL};
static const char *const statistics[] = {"pp",  "half_range", "rms",    "mean",
                                         "max", "reversed",   "damage", NULL};

// Of a band's edges, by kind: how far the modes of what answers are known beforehand. Crank modes
// come from drawings, mounts and cabs from catalogue stiffness. Common practice, no source.
static const double guard_by_kind[] = {
    [TACET_BAND_CAB] = 0.05,
    [TACET_BAND_MOUNT] = 0.05,
    [TACET_BAND_DRIVELINE] = 0.03,
    [TACET_BAND_CRANK] = 0.02,
};

#define BAND(member)  .offset = offsetof(tacet_band_def, member)
#define LIMIT(member) .offset = offsetof(tacet_limit_def, member)
#define ANY_LOW       1e-9 // a level that is no limit at all would be zero
#define ANY_HIGH      1e12

static const tacet_field band_fields[] = {
    {.key = "name",
     .kind = TACET_FIELD_NAME,
     BAND(name),
     .doc = "what messages and tables call it"},
    {.key = "kind",
     .kind = TACET_FIELD_CHOICE,
     BAND(kind),
     .choices = kinds,
     .doc = "what answers there; sets the guard"},
    {.key = "low_hz",
     .kind = TACET_FIELD_NUMBER,
     BAND(low_hz),
     .unit = "Hz",
     .low = 0.01,
     .high = 20000,
     .doc = "lower edge"},
    {.key = "high_hz",
     .kind = TACET_FIELD_NUMBER,
     BAND(high_hz),
     .unit = "Hz",
     .low = 0.01,
     .high = 20000,
     .doc = "upper edge"},
    {.key = "quantity",
     .kind = TACET_FIELD_TEXT,
     BAND(quantity),
     .doc = "what is kept quiet: roll-torque, link-torque:LINK, node-speed:NODE, .."},
    {.key = "limit_rms",
     .kind = TACET_FIELD_NUMBER,
     BAND(limit_rms),
     .fallback = "",
     .low = ANY_LOW,
     .high = ANY_HIGH,
     .doc = "highest rms of all lines in the band, in the quantity's unit"},
    {.key = "over_all_fire_db",
     .kind = TACET_FIELD_NUMBER,
     BAND(over_all_fire_db),
     .unit = "dB",
     .fallback = "",
     .low = -60,
     .high = 60,
     .doc = "how far the level may lie over that of the same engine firing on all cylinders; with "
            "floor_rms"},
    {.key = "floor_rms",
     .kind = TACET_FIELD_NUMBER,
     BAND(floor_rms),
     .fallback = "",
     .low = ANY_LOW,
     .high = ANY_HIGH,
     .doc = "rms that is quiet enough whatever all-fire does, in the quantity's unit"},
    {.key = "guard_percent",
     .kind = TACET_FIELD_NUMBER,
     BAND(guard),
     .unit = "%",
     .fallback = "",
     .low = 0,
     .high = 50,
     .doc = "widens the band at both edges; by kind when absent: cab and mount 5, driveline 3, "
            "crank 2"},
    {.key = "reference",
     .kind = TACET_FIELD_CHOICE,
     BAND(reference),
     .fallback = "worst-speed",
     .choices = references,
     .doc = "all-fire level that over_all_fire_db starts from: at its worst screened speed, or at "
            "the same speed"},
    {.key = NULL},
};

static const tacet_field limit_fields[] = {
    {.key = "name",
     .kind = TACET_FIELD_NAME,
     LIMIT(name),
     .doc = "what messages and tables call it"},
    {.key = "quantity",
     .kind = TACET_FIELD_TEXT,
     LIMIT(quantity),
     .doc = "what is limited: link-stress:LINK, damper-heat:LINK, irregularity, peak-pressure, .."},
    {.key = "statistic",
     .kind = TACET_FIELD_CHOICE,
     LIMIT(statistic),
     .fallback = "",
     .choices = statistics,
     .doc =
         "of the signal over a repeat: pp and half_range from its extremes, rms without the "
         "mean, mean and max as magnitudes; of a link-stress also reversed, its largest cycle as a "
         "fully reversed amplitude, and damage, Miner's sum per hour; may be left out where a "
         "quantity has only one"},
    {.key = "value",
     .kind = TACET_FIELD_NUMBER,
     LIMIT(value),
     .low = ANY_LOW,
     .high = ANY_HIGH,
     .doc = "the limit, in the quantity's unit"},
    {.key = NULL},
};

const tacet_section *tacet_band_keys(void)
{
    static const tacet_section section = {
        .name = "bands",
        .doc = "frequency ranges to keep quiet",
        .size = sizeof(tacet_band_def),
        .fields = band_fields,
    };
    return &section;
}

const tacet_section *tacet_limit_keys(void)
{
    static const tacet_section section = {
        .name = "limits",
        .doc = "single numbers that a condition must stay below",
        .size = sizeof(tacet_limit_def),
        .fields = limit_fields,
    };
    return &section;
}

double tacet_band_guard(const tacet_band_def *d)
{
    if (!isnan(d->guard)) return d->guard;
    size_t n = sizeof guard_by_kind / sizeof *guard_by_kind;
    return d->kind >= 0 && (size_t)d->kind < n ? guard_by_kind[d->kind] : 0;
}

static void say(const tacet_reporter *r, bool warning, const char *path, const char *key,
                const char *text)
{
    char whole[256];
    snprintf(whole, sizeof whole, "%s.%s", path, key);
    tacet_report(r, warning, whole, "%s", text);
}

void tacet_band_def_check(const tacet_band_def *d, const char *path, const tacet_reporter *r)
{
    char text[160];
    if (!(d->low_hz < d->high_hz)) {
        snprintf(text, sizeof text,
                 "%g Hz is not above low_hz, %g Hz; a band runs from low to high", d->high_hz,
                 d->low_hz);
        say(r, false, path, "high_hz", text);
    }
    bool relative = !isnan(d->over_all_fire_db), floor = !isnan(d->floor_rms);
    if (relative && !floor)
        say(r, false, path, "over_all_fire_db",
            "needs floor_rms beside it: all-fire may be so quiet here that no pattern could pass");
    if (floor && !relative)
        say(r, true, path, "floor_rms", "does nothing without over_all_fire_db");
    if (isnan(d->limit_rms) && !relative)
        say(r, false, path, "limit_rms",
            "a band needs limit_rms, or over_all_fire_db with floor_rms, or both");
}
