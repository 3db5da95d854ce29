// Stiffness of shafts and crank throws from dimensions.
#include "near.h"
#include "tacet/train.h"
#include "trains.h"
#include <math.h>

static double stiffness(tacet_link_def l)
{
    double k = 0;
    tacet_error e;
    assert_int_equal(tacet_link_stiffness(&l, &k, &e), TACET_OK);
    return k;
}

// k = pi G (D^4 - d^4)/(32 L): closed form, arithmetic recomputed elsewhere.
static void test_plain_shaft(void **state)
{
    (void)state;
    tacet_link_def l = tacet_link_default();
    assert_near(l.shear_modulus_Pa, 80e9, 0, 0);
    l.outer_m = 0.050;
    l.length_m = 0.500;
    assert_near(stiffness(l), 98174.7704, 0, 1e-9);
    l.outer_m = 0.060;
    l.inner_m = 0.030;
    l.length_m = 0.400;
    assert_near(stiffness(l), 238564.692, 0, 1e-9);
    l.inner_m = NAN; // not stated: none
    assert_near(stiffness(l), 238564.692 * 16 / 15, 0, 1e-9);
}

// Formulas of Carter and of Ker Wilson from memory; these two sets were computed apart from this
// program. No published worked number was found.
static void test_crank_throw(void **state)
{
    (void)state;
    const tacet_throw_def a = {.journal_length_m = .030,
                               .journal_outer_m = .060,
                               .pin_length_m = .028,
                               .pin_outer_m = .050,
                               .throw_m = .045,
                               .web_thickness_m = .020,
                               .web_width_m = .085};
    const tacet_throw_def b = {.journal_length_m = .100,
                               .journal_outer_m = .200,
                               .pin_length_m = .110,
                               .pin_outer_m = .190,
                               .pin_inner_m = .050,
                               .throw_m = .150,
                               .web_thickness_m = .060,
                               .web_width_m = .280};
    const double carter[] = {6.331300e5, 2.402288e7}, wilson[] = {5.724790e5, 2.528835e7};
    for (int i = 0; i < 2; i++) {
        tacet_link_def l = tacet_link_default();
        l.throw_ = i ? b : a;
        l.throw_.formula = TACET_THROW_CARTER;
        assert_near(stiffness(l), carter[i], 0, 1e-6);
        l.throw_.formula = TACET_THROW_KER_WILSON;
        assert_near(stiffness(l), wilson[i], 0, 1e-6);
    }
}

static void test_as_stated(void **state)
{
    (void)state;
    tacet_link_def l = tacet_link_default();
    l.stiffness_Nm_per_rad = 1234;
    assert_near(stiffness(l), 1234, 0, 0);
    l.stiffness_catalogue_Nm_per_rad = 5678; // the field table has made it N m/rad
    double k = -1;
    tacet_error e;
    assert_int_equal(tacet_link_stiffness(&l, &k, &e), TACET_BAD_INPUT);
    l.stiffness_Nm_per_rad = NAN;
    assert_near(stiffness(l), 5678, 0, 0);
    l.stiffness_catalogue_Nm_per_rad = -1;
    assert_int_equal(tacet_link_stiffness(&l, &k, &e), TACET_BAD_INPUT);
    l.stiffness_catalogue_Nm_per_rad = NAN;
    assert_int_equal(tacet_link_stiffness(&l, &k, &e), TACET_BAD_INPUT);
    assert_near(k, -1, 0, 0);
}

// Polar section modulus pi (D^4 - d^4)/(16 D): D = 50 mm, and 60/30 mm (closed form).
static void test_section_modulus(void **state)
{
    (void)state;
    const double J[] = {1, 1, 1, 1}, k[] = {1e5, 1e5, 1e5};
    bench_train *b = bench_chain(4, J, k);
    b->link[0].outer_m = 0.050;
    b->link[1].outer_m = 0.060;
    b->link[1].inner_m = 0.030;
    b->link[1].stress_concentration = 1.8;
    tacet_train *t = bench_create(b);
    assert_near(tacet_train_link_info(t, 0).section_modulus_m3, 24543.6926e-9, 0, 1e-8);
    assert_near(tacet_train_link_info(t, 1).section_modulus_m3, 39760.7820e-9, 0, 1e-8);
    assert_near(tacet_train_link_info(t, 0).stress_concentration, 1, 0, 0);
    assert_near(tacet_train_link_info(t, 1).stress_concentration, 1.8, 0, 0);
    assert_true(isnan(tacet_train_link_info(t, 2).section_modulus_m3));
    assert_true(isnan(tacet_train_link_info(t, 2).stress_concentration));
    tacet_train_destroy(t);
}

static const struct CMUnitTest tests[] = {
    cmocka_unit_test(test_plain_shaft),
    cmocka_unit_test(test_crank_throw),
    cmocka_unit_test(test_as_stated),
    cmocka_unit_test(test_section_modulus),
};
TEST_MAIN(tests)
