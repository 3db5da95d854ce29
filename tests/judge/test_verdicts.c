// Verdicts of bands: the truth table, cell by cell, and the limit that a band resolves to.
#include "near.h"
#include "tacet/judge.h"
#include <math.h>
#include <string.h>

// A band's limit is 100 in every column that has one: as limit_rms, or 6 dB over a reference of 50
// (50 * 10^(6/20) = 99.76). The reserve is 3 dB, so clear below 70.8 (70.6), near up to the limit.
//
//   outcome      lines      limit_rms   reference   reference   missing, and   missing, and
//                           alone       given       missing     floor_rms      limit_rms 100
//   solved       none       clear       clear       clear       clear          clear
//   solved       at 60      clear       clear       none (nr)   none (nr)      none (nr)
//   solved       at 90      near        near        none (nr)   none (nr)      none (nr)
//   solved       at 120     over        over        none (nr)   none (nr)      over
//   solved       not finite none (f)    none (f)    none (f)    none (f)       none (f)
//   unreachable  -          none (u)    none (u)    none (u)    none (u)       none (u)
//   failed       -          none (f)    none (f)    none (f)    none (f)       none (f)
//   (nr) no reference, (f) failed, (u) unreachable
//
// The last column: the limit is at most limit_rms, so a level over it is over whatever the
// reference would have been; below it nothing is known.

enum { RMS_ALONE, GIVEN, MISSING, MISSING_FLOOR, MISSING_RMS, COLUMNS };
enum { NO_LINE, AT_60, AT_90, AT_120, NOT_FINITE, UNREACHABLE, FAILED, ROWS };

typedef struct {
    tacet_verdict verdict;
    tacet_why why;
} cell;
#define CLEAR                                                                                      \
    {                                                                                              \
        TACET_CLEAR, TACET_WHY_NONE                                                                \
    }
#define CLOSE                                                                                      \
    {                                                                                              \
        TACET_NEAR, TACET_WHY_NONE                                                                 \
    }
#define OVER                                                                                       \
    {                                                                                              \
        TACET_OVER, TACET_WHY_NONE                                                                 \
    }
#define NO_REF                                                                                     \
    {                                                                                              \
        TACET_NO_VERDICT, TACET_WHY_NO_REFERENCE                                                   \
    }
#define NO_PATH                                                                                    \
    {                                                                                              \
        TACET_NO_VERDICT, TACET_WHY_UNREACHABLE                                                    \
    }
#define BROKEN                                                                                     \
    {                                                                                              \
        TACET_NO_VERDICT, TACET_WHY_FAILED                                                         \
    }

static const cell table[ROWS][COLUMNS] = {
    [NO_LINE] = {CLEAR, CLEAR, CLEAR, CLEAR, CLEAR},
    [AT_60] = {CLEAR, CLEAR, NO_REF, NO_REF, NO_REF},
    [AT_90] = {CLOSE, CLOSE, NO_REF, NO_REF, NO_REF},
    [AT_120] = {OVER, OVER, NO_REF, NO_REF, OVER},
    [NOT_FINITE] = {BROKEN, BROKEN, BROKEN, BROKEN, BROKEN},
    [UNREACHABLE] = {NO_PATH, NO_PATH, NO_PATH, NO_PATH, NO_PATH},
    [FAILED] = {BROKEN, BROKEN, BROKEN, BROKEN, BROKEN},
};

static const tacet_band bands[COLUMNS] = {
    [RMS_ALONE] = {.limit_rms = 100, .over_all_fire_db = NAN, .floor_rms = NAN, .reserve_db = 3},
    [GIVEN] = {.limit_rms = NAN, .over_all_fire_db = 6, .floor_rms = 10, .reserve_db = 3},
    [MISSING] = {.limit_rms = NAN, .over_all_fire_db = 6, .floor_rms = NAN, .reserve_db = 3},
    [MISSING_FLOOR] = {.limit_rms = NAN, .over_all_fire_db = 6, .floor_rms = 1e6, .reserve_db = 3},
    [MISSING_RMS] = {.limit_rms = 100, .over_all_fire_db = 6, .floor_rms = 10, .reserve_db = 3},
};

// The level used is the dispersed one: the nominal is far below it.
static tacet_band_level level_of(int row)
{
    static const double dispersed[ROWS] = {
        [NO_LINE] = 1e-12, [AT_60] = 60, [AT_90] = 90, [AT_120] = 120, [NOT_FINITE] = NAN};
    return (tacet_band_level){
        .nominal = 1e-3 * dispersed[row], .dispersed = dispersed[row], .has_line = row != NO_LINE};
}

static void judge_cell(int row, int column, tacet_band_result *r)
{
    double reference = 50;
    tacet_band_level level = level_of(row);
    memset(r, 0xff, sizeof *r);
    if (row == UNREACHABLE)
        tacet_band_no_verdict(TACET_WHY_UNREACHABLE, r);
    else if (row == FAILED)
        tacet_band_no_verdict(TACET_WHY_FAILED, r);
    else
        tacet_band_judge(&bands[column], &level, column == GIVEN ? &reference : NULL, r);
}

static void test_truth_table(void **state)
{
    (void)state;
    for (int row = 0; row < ROWS; row++)
        for (int column = 0; column < COLUMNS; column++) {
            tacet_band_result r;
            judge_cell(row, column, &r);
            const cell *c = &table[row][column];
            if (r.verdict != c->verdict || r.why != c->why)
                fail_msg("row %d column %d: %s, why %d", row, column, tacet_verdict_text(r.verdict),
                         r.why);
            bool number = c->verdict != TACET_NO_VERDICT && row != NO_LINE;
            assert_int_equal(isfinite(r.margin_db), number);
            if (!number) continue;
            double limit = column == GIVEN ? 50 * pow(10, 0.3) : 100;
            assert_near(r.limit, limit, 0, 1e-14);
            assert_near(r.margin_db, 20 * log10(limit / level_of(row).dispersed), 1e-12, 0);
        }
}

// A reference that is not a number is no reference; one that is not asked for changes nothing.
static void test_reference_not_finite_or_not_asked(void **state)
{
    (void)state;
    tacet_band_level level = level_of(AT_90);
    tacet_band_result r;
    double bad[] = {NAN, INFINITY}, tiny = 1e-6;
    for (int i = 0; i < 2; i++) {
        tacet_band_judge(&bands[GIVEN], &level, &bad[i], &r);
        assert_int_equal(r.verdict, TACET_NO_VERDICT);
        assert_int_equal(r.why, TACET_WHY_NO_REFERENCE);
        assert_true(isnan(r.limit) && isnan(r.reference));
    }
    tacet_band_judge(&bands[RMS_ALONE], &level, &tiny, &r);
    assert_int_equal(r.verdict, TACET_NEAR);
    assert_true(isnan(r.reference));
}

// The reference's own level has the margin that the study states, to the last bit.
static void test_margin_of_the_reference(void **state)
{
    (void)state;
    tacet_band b = {.limit_rms = NAN, .over_all_fire_db = 6, .floor_rms = 1e-9, .reserve_db = 3};
    for (int i = 1; i <= 1000; i++) {
        double reference = 0.37 * i;
        tacet_band_level level = {.nominal = 1, .dispersed = reference, .has_line = true};
        tacet_band_result r;
        tacet_band_judge(&b, &level, &reference, &r);
        assert_true(r.margin_db == 6);
    }
}

static double limit_of(double limit_rms, double db, double floor, double reference)
{
    tacet_band b = {
        .limit_rms = limit_rms, .over_all_fire_db = db, .floor_rms = floor, .reserve_db = 3};
    tacet_band_level level = {.nominal = 1, .dispersed = 1, .has_line = true};
    tacet_band_result r;
    tacet_band_judge(&b, &level, &reference, &r);
    return r.limit;
}

// limit = min(limit_rms, max(floor, ref * 10^(dB/20))), absent terms drop out. 20 dB is a factor of
// 10, so by hand:
static void test_limit_resolves(void **state)
{
    (void)state;
    assert_near(limit_of(NAN, 20, 1, 5), 50, 0, 1e-15);   // reference
    assert_near(limit_of(NAN, 20, 80, 5), 80, 0, 0);      // floor above it
    assert_near(limit_of(30, 20, 80, 5), 30, 0, 0);       // limit_rms below both
    assert_near(limit_of(60, 20, 1, 5), 50, 0, 1e-15);    // limit_rms above
    assert_near(limit_of(NAN, 20, NAN, 5), 50, 0, 1e-15); // no floor
    assert_near(limit_of(70, NAN, NAN, 5), 70, 0, 0);     // limit_rms alone
    assert_near(limit_of(NAN, -20, 0.1, 5), 0.5, 0, 1e-15);
    assert_near(limit_of(NAN, 20, 7, 0), 7, 0, 0); // a silent reference: the floor
}

// clear: margin >= reserve; near: 0 to reserve; over: negative. At the level of the limit itself
// the margin is 0, near.
static void test_edges_of_the_verdict(void **state)
{
    (void)state;
    tacet_band b = bands[RMS_ALONE];
    b.reserve_db = 20; // exact: a factor of 10
    struct {
        double level;
        tacet_verdict verdict;
    } edge[] = {{100.0000001, TACET_OVER}, {100, TACET_NEAR}, {99.9999999, TACET_NEAR},
                {10.0000001, TACET_NEAR},  {10, TACET_CLEAR}, {9.9999999, TACET_CLEAR}};
    for (size_t i = 0; i < sizeof edge / sizeof *edge; i++) {
        tacet_band_level level = {.dispersed = edge[i].level, .has_line = true};
        tacet_band_result r;
        tacet_band_judge(&b, &level, NULL, &r);
        if (r.verdict != edge[i].verdict) fail_msg("level %.10g", edge[i].level);
    }
    b.reserve_db = 0; // no reserve: the limit itself is clear
    tacet_band_level level = {.dispersed = 100, .has_line = true};
    tacet_band_result r;
    tacet_band_judge(&b, &level, NULL, &r);
    assert_int_equal(r.verdict, TACET_CLEAR);
}

static void test_result_keeps_its_level(void **state)
{
    (void)state;
    tacet_band_level level = {.nominal = 40,
                              .dispersed = 50,
                              .has_line = true,
                              .leading_order = 1.5,
                              .leading_peak = 44,
                              .leading_line = 21};
    tacet_band_result r;
    tacet_band_judge(&bands[RMS_ALONE], &level, NULL, &r);
    assert_memory_equal(&r.level, &level, sizeof level);
    tacet_band_no_verdict(TACET_WHY_UNREACHABLE, &r);
    assert_true(isnan(r.level.dispersed) && isnan(r.limit) && isnan(r.reference));
    assert_near(r.level.leading_order, 0, 0, 0);
}

static void test_texts(void **state)
{
    (void)state;
    assert_string_equal(tacet_verdict_text(TACET_CLEAR), "clear");
    assert_string_equal(tacet_verdict_text(TACET_NEAR), "near");
    assert_string_equal(tacet_verdict_text(TACET_OVER), "over");
    assert_string_equal(tacet_verdict_text(TACET_NO_VERDICT), "none");
    assert_non_null(tacet_verdict_text((tacet_verdict)99));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_truth_table),
        cmocka_unit_test(test_reference_not_finite_or_not_asked),
        cmocka_unit_test(test_margin_of_the_reference),
        cmocka_unit_test(test_limit_resolves),
        cmocka_unit_test(test_edges_of_the_verdict),
        cmocka_unit_test(test_result_keeps_its_level),
        cmocka_unit_test(test_texts),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
