// A good and small study goes on to a model: engine, train, modes, bands, limits, lines.
#include "fuzz.h"
#include "tacet/condition.h"

#define MOST_NODES  40
#define MOST_SPEEDS 200

static const char name[] = FUZZ_FILES "/study.yaml";

static void check_lines(const tacet_model *m)
{
    double order = tacet_model_highest_order(m, NULL);
    REQUIRE(order >= 1 && order <= 60);
    REQUIRE(tacet_model_lines(m, 2) >= (size_t)(2 * order));
    REQUIRE(tacet_model_throws(m) >= 1);
    const tacet_study *s = tacet_model_study(m);
    for (size_t i = 0; i < s->screen.n_speeds; i++)
        REQUIRE(isfinite(tacet_model_demand(m, s->screen.speeds_rad_per_s[i])));
}

static void check_judged(const tacet_model *m)
{
    for (size_t i = 0; i < tacet_model_bands(m); i++) {
        const tacet_band *b = tacet_model_band(m, i);
        REQUIRE(b->counted_low_hz > 0 && b->counted_low_hz <= b->low_hz);
        REQUIRE(b->counted_high_hz >= b->high_hz && isfinite(b->counted_high_hz));
        REQUIRE(isfinite(b->limit_rms) || isfinite(b->over_all_fire_db));
    }
    for (size_t i = 0; i < tacet_model_limits(m); i++)
        REQUIRE(tacet_model_limit(m, i)->value > 0 && isfinite(tacet_model_limit(m, i)->value));
}

// Modes rise from the rigid one, and their stiffness and inertia are numbers.
static void check_train(const tacet_model *m)
{
    const tacet_train *t = tacet_model_train(m);
    const double *hz = tacet_model_mode_hz(m);
    for (size_t i = 0; i < tacet_train_nodes(t); i++) {
        REQUIRE(isfinite(hz[i]) && hz[i] >= 0 && (i == 0 || hz[i] >= hz[i - 1]));
        REQUIRE(tacet_train_node_inertia(t, i) > 0 && isfinite(tacet_train_node_inertia(t, i)));
        REQUIRE(isfinite(tacet_train_node_ratio(t, i)) && tacet_train_node_ratio(t, i) != 0);
    }
    for (size_t i = 0; i < tacet_train_links(t); i++) {
        tacet_link_info info = tacet_train_link_info(t, i);
        double complex k = tacet_train_link_impedance(t, i, 300);
        REQUIRE(info.stiffness_Nm_per_rad > 0 && isfinite(info.stiffness_Nm_per_rad));
        REQUIRE(isfinite(creal(k)) && isfinite(cimag(k)) && cimag(k) >= 0);
        REQUIRE(isfinite(info.damping_Nms_per_rad) && isfinite(info.loss_factor));
    }
    REQUIRE(isfinite(tacet_train_total_inertia(t)));
}

static void check_engine(const tacet_engine *en)
{
    REQUIRE(isfinite(tacet_engine_displacement(en)) && tacet_engine_displacement(en) > 0);
    REQUIRE(isfinite(tacet_engine_mean_inertia(en)) && tacet_engine_mean_inertia(en) >= 0);
    for (unsigned slot = 0; slot < tacet_engine_cylinders(en); slot++) {
        double x, dx, ddx, angle = tacet_engine_firing_angle(en, slot);
        REQUIRE(angle >= 0 && angle < M_PI * tacet_engine_strokes(en));
        tacet_slider_at(tacet_engine_slider(en), 1.0 + slot, &x, &dx, &ddx);
        REQUIRE(isfinite(x) && isfinite(dx) && isfinite(ddx));
    }
}

static void check_model(const tacet_study *s)
{
    tacet_model *m = NULL;
    tacet_error e = {.text = ""};
    tacet_status status = tacet_model_create(s, &m, &e);
    if (status != TACET_OK) {
        fuzz_refusal(status, &e);
        REQUIRE(!m);
        return;
    }
    check_engine(tacet_model_engine(m));
    check_train(m);
    check_judged(m);
    check_lines(m);
    tacet_model_destroy(m);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    tacet_study *s = NULL;
    tacet_problems *p = tacet_problems_create();
    REQUIRE(p);
    tacet_status status = tacet_study_read_text((const char *)data, size, name, p, &s);
    if (status == TACET_OK && s->train.n_nodes <= MOST_NODES && s->screen.n_speeds <= MOST_SPEEDS)
        check_model(s);
    tacet_study_destroy(s);
    tacet_problems_destroy(p);
    return 0;
}
