// The one column table of a row: CSV, JSON and tables all come from it.
#include "condition/internal.h"
#include <math.h>

#define ROW      const tacet_model *m, const tacet_condition *c, const tacet_row *r
#define TEXT_ROW ROW, char *buffer
#define USE      (void)m, (void)c, (void)r

static double reached(const tacet_row *r, double value)
{
    return r->outcome == TACET_UNREACHABLE || r->outcome == TACET_FAILED ? NAN : value;
}

static double speed_rpm(ROW)
{
    USE;
    // the way from rpm and back is not exact
    return round(60e6 * tacet_order_hz(1, r->speed_rad_per_s)) / 1e6;
}

static double demand_nm(ROW)
{
    USE;
    return r->demand_Nm;
}

static const char *word(TEXT_ROW)
{
    USE;
    return tacet_pattern_format(&c->roll->pattern, buffer);
}

static double density(ROW)
{
    USE;
    return (double)c->roll->fires / c->roll->opportunities;
}

static double revolutions(ROW)
{
    USE;
    return c->roll->revolutions;
}

static const char *outcome(TEXT_ROW)
{
    USE, (void)buffer;
    return tacet_outcome_text(r->outcome);
}

static const char *reach(TEXT_ROW)
{
    static const char *const text[] = {"ok",
                                       "too high",
                                       "too low",
                                       "peak pressure",
                                       "speed",
                                       "skip too long",
                                       "cylinder may not skip"};
    USE, (void)buffer;
    return (unsigned)r->duty.reach < sizeof text / sizeof *text ? text[r->duty.reach] : "unknown";
}

static const char *verdict(TEXT_ROW)
{
    USE, (void)buffer;
    return tacet_verdict_text(r->worst);
}

static double worst_margin_db(ROW)
{
    USE;
    return r->worst_margin_db;
}

static const char *limited_by(TEXT_ROW)
{
    USE, (void)buffer;
    if (r->limiting_band >= 0) return m->bands[r->limiting_band].name;
    if (r->limiting_limit >= 0) return m->limits[r->limiting_limit].name;
    return "";
}

#define DUTY(name, expression)                                                                     \
    static double name(ROW)                                                                        \
    {                                                                                              \
        USE;                                                                                       \
        return reached(r, expression);                                                             \
    }
DUTY(charge_kpa, r->duty.charge_Pa / 1e3)
DUTY(charge_ratio, r->duty.charge_ratio)
DUTY(fuel_kg_per_h, r->duty.fuel_kg_per_s * 3600)
DUTY(fuel_vs_all_fire, r->fuel_to_all_fire)
DUTY(brake_kw, r->duty.brake_W / 1e3)
DUTY(pumping_kw, r->duty.pumping_W / 1e3)
DUTY(friction_kw, r->duty.friction_W / 1e3)
DUTY(wall_heat_kw, r->duty.wall_heat_W / 1e3)
DUTY(exhaust_kw, r->duty.exhaust_W / 1e3)
DUTY(peak_pressure_mpa, r->duty.peak_pressure_Pa / 1e6)

static const char *method(TEXT_ROW)
{
    USE, (void)buffer;
    return r->solver.method;
}

static double passes(ROW)
{
    USE;
    return r->solver.repeats;
}

static double evaluations(ROW)
{
    USE;
    return r->solver.evaluations;
}

#define NUMBER(name, unit, doc)                                                                    \
    {                                                                                              \
#name, unit, doc, TACET_COLUMN_NUMBER, name, NULL                                          \
    }
#define COUNT(name, unit, doc)                                                                     \
    {                                                                                              \
#name, unit, doc, TACET_COLUMN_COUNT, name, NULL                                           \
    }
#define TEXT(name, doc)                                                                            \
    {                                                                                              \
#name, NULL, doc, TACET_COLUMN_TEXT, NULL, name                                            \
    }
static const tacet_column columns[] = {
    NUMBER(speed_rpm, "rpm", "mean crank speed"),
    NUMBER(demand_nm, "N m", "brake torque asked for at the flywheel"),
    TEXT(word, "pattern with its rotation: x fires, . skips, 1..9 tenths of the charge"),
    NUMBER(density, NULL, "fires per opportunity"),
    COUNT(revolutions, NULL, "crank revolutions in a repeat"),
    TEXT(outcome, "solved, unreachable or failed"),
    TEXT(reach, "which limit the charge for the demand meets"),
    TEXT(verdict, "worst over all bands and limits"),
    NUMBER(worst_margin_db, "dB",
           "smallest margin over all bands and limits; empty: no line anywhere"),
    TEXT(limited_by, "band or limit with the smallest margin"),
    NUMBER(charge_kpa, "kPa", "manifold pressure of a fire at full charge"),
    NUMBER(charge_ratio, NULL, "place between the lowest and the highest charge"),
    NUMBER(fuel_kg_per_h, "kg/h", "fuel"),
    NUMBER(fuel_vs_all_fire, NULL, "fuel relative to all cylinders firing at the same demand"),
    NUMBER(brake_kw, "kW", "brake power"),
    NUMBER(pumping_kw, "kW", "work lost in gas exchange"),
    NUMBER(friction_kw, "kW", "friction"),
    NUMBER(wall_heat_kw, "kW", "heat to the walls"),
    NUMBER(exhaust_kw, "kW", "enthalpy rise of the exhaust"),
    NUMBER(peak_pressure_mpa, "MPa", "highest cylinder pressure of any cycle"),
    TEXT(method, "how the motion was solved: constant, ripple or steady"),
    COUNT(passes, NULL, "passes of the ripple iteration, or repeats marched"),
    COUNT(evaluations, NULL, "torque samples, or right-hand sides of the march"),
};

const tacet_column *tacet_row_columns(size_t *n)
{
    *n = sizeof columns / sizeof *columns;
    return columns;
}

static double level_rms(const tacet_band_result *b)
{
    return b->level.dispersed;
}

static double nominal_rms(const tacet_band_result *b)
{
    return b->level.nominal;
}

static double limit_rms(const tacet_band_result *b)
{
    return b->limit;
}

static double margin_db(const tacet_band_result *b)
{
    return b->margin_db;
}

static double leading_order(const tacet_band_result *b)
{
    return b->level.leading_order > 0 ? b->level.leading_order : NAN;
}

static double leading_peak(const tacet_band_result *b)
{
    return b->level.leading_order > 0 ? b->level.leading_peak : NAN;
}

static const char *band_verdict(const tacet_band_result *b)
{
    return tacet_verdict_text(b->verdict);
}

static const char *band_why(const tacet_band_result *b)
{
    static const char *const text[] = {"", "unreachable", "failed", "no reference"};
    if (b->verdict != TACET_NO_VERDICT && !b->level.has_line) return "no line";
    return (unsigned)b->why < sizeof text / sizeof *text ? text[b->why] : "unknown";
}

static const tacet_band_column band_columns[] = {
    NUMBER(level_rms, NULL, "rms of the lines in the counted band, with dispersion"),
    NUMBER(nominal_rms, NULL, "the same of equal cylinders and cycles"),
    NUMBER(limit_rms, NULL, "what the level is held against"),
    NUMBER(margin_db, "dB", "20 log10(limit / level)"),
    NUMBER(leading_order, NULL, "order of the largest line in the band"),
    NUMBER(leading_peak, NULL, "its amplitude, peak"),
    {"verdict", NULL, "clear, near, over or none", TACET_COLUMN_TEXT, NULL, band_verdict},
    {"why", NULL, "why there is no verdict or no margin", TACET_COLUMN_TEXT, NULL, band_why},
};

const tacet_band_column *tacet_band_columns(size_t *n)
{
    *n = sizeof band_columns / sizeof *band_columns;
    return band_columns;
}
