#include "table.h"
#include "internal.h"
#include <stdlib.h>
#include <string.h>

tacet_status table_create(table *t, const halves *h, unsigned samples, size_t n_speeds,
                          size_t n_charges)
{
    size_t nodes = halves_count(h) * n_speeds * n_charges;
    *t = (table){.halves = *h,
                 .samples = samples,
                 .n_kinds = halves_count(h),
                 .n_speeds = n_speeds,
                 .n_charges = n_charges,
                 .speed_rad_per_s = calloc(n_speeds, sizeof(double)),
                 .charge = calloc(n_charges, sizeof(double)),
                 .number = calloc(nodes, HALF_NUMBERS * sizeof(double)),
                 .pressure_Pa = calloc(nodes, samples * sizeof(double))};
    if (t->speed_rad_per_s && t->charge && t->number && t->pressure_Pa) return TACET_OK;
    table_clear(t);
    return TACET_NO_MEMORY;
}

void table_clear(table *t)
{
    free(t->speed_rad_per_s);
    free(t->charge);
    free(t->number);
    free(t->pressure_Pa);
    *t = (table){0};
}

static size_t node_of(const table *t, size_t kind, size_t speed, size_t charge)
{
    return (kind * t->n_speeds + speed) * t->n_charges + charge;
}

double *table_number(const table *t, size_t kind, size_t speed, size_t charge)
{
    return t->number + node_of(t, kind, speed, charge) * HALF_NUMBERS;
}

double *table_pressure(const table *t, size_t kind, size_t speed, size_t charge)
{
    return t->pressure_Pa + node_of(t, kind, speed, charge) * t->samples;
}

// Lagrange's polynomial through the nodes nearest to x.
table_place table_at(const double *node, size_t n, double x)
{
    table_place p = {.n = n < TABLE_ORDER ? n : TABLE_ORDER};
    size_t above = 0;
    while (above < n && node[above] <= x)
        above++;
    size_t half = p.n / 2, most = n - p.n;
    p.first = above > half ? above - half : 0;
    if (p.first > most) p.first = most;
    for (size_t i = 0; i < p.n; i++) {
        p.weight[i] = 1;
        for (size_t j = 0; j < p.n; j++)
            if (j != i)
                p.weight[i] *= (x - node[p.first + j]) / (node[p.first + i] - node[p.first + j]);
    }
    return p;
}

table_place table_at_speed(const table *t, double speed)
{
    size_t k = 0;
    while (k + 2 < t->n_bends && speed >= t->speed_rad_per_s[t->bend[k + 1]])
        k++;
    if (t->n_bends < 2) return table_at(t->speed_rad_per_s, t->n_speeds, speed);
    size_t first = t->bend[k];
    table_place p = table_at(t->speed_rad_per_s + first, t->bend[k + 1] - first + 1, speed);
    p.first += first;
    return p;
}

table_place table_at_charge(const table *t, double charge)
{
    return table_at(t->charge, t->n_charges, charge);
}

void table_waveform(const table *t, size_t kind, const table_place *speed,
                    const table_place *charge, double *pressure_Pa)
{
    unsigned n = t->samples;
    memset(pressure_Pa, 0, n * sizeof *pressure_Pa);
    for (size_t s = 0; s < speed->n; s++)
        for (size_t c = 0; c < charge->n; c++) {
            double weight = speed->weight[s] * charge->weight[c];
            const double *p = table_pressure(t, kind, speed->first + s, charge->first + c);
            for (unsigned i = 0; i < n; i++)
                pressure_Pa[i] += weight * p[i];
        }
}

void table_numbers(const table *t, size_t kind, const table_place *speed, size_t charge,
                   double number[HALF_NUMBERS])
{
    memset(number, 0, HALF_NUMBERS * sizeof *number);
    for (size_t s = 0; s < speed->n; s++) {
        const double *x = table_number(t, kind, speed->first + s, charge);
        for (size_t i = 0; i < HALF_NUMBERS; i++)
            number[i] += speed->weight[s] * x[i];
    }
}

void table_nodes(double *node, size_t n, double low, double high)
{
    for (size_t i = 0; i < n; i++) {
        double part = n > 1 ? (double)i / (double)(n - 1) : 0;
        node[i] = low > 0 ? low * pow(high / low, part) : low + (high - low) * part;
    }
    node[n - 1] = high;
}

cylinder_run table_run(const tacet_engine_def *d, double speed_rad_per_s, double charge)
{
    const tacet_cycle_def *c = &d->cycle;
    double rpm = speed_rad_per_s * 60 / (2 * M_PI), ratio = engine_air_fuel_ratio(c, rpm);
    cylinder_run r = {.speed_rad_per_s = speed_rad_per_s};
    gas_burn_span(engine_mid_burn(c, rpm), engine_burn_10_90(c, rpm), &r.burn_start_rad,
                  &r.burn_end_rad);
    if (c->load_by == TACET_LOAD_CHARGE) { // the cylinder draws in mixture
        r.manifold_Pa = charge;
        r.heat_J_per_kg = c->lower_heating_value_J_per_kg / (1 + ratio);
    } else { // it draws in air; the mass of fuel is neglected beside it
        r.manifold_Pa = engine_highest(c, rpm);
        r.heat_J_per_kg = c->lower_heating_value_J_per_kg / ratio * charge;
    }
    return r;
}

typedef struct {
    table *t;
    size_t speed, charge;
    bool finite;
} destination;

static void store(void *who, unsigned kind, const double number[HALF_NUMBERS],
                  const double *pressure_Pa)
{
    destination *to = who;
    memcpy(table_number(to->t, kind, to->speed, to->charge), number, HALF_NUMBERS * sizeof *number);
    memcpy(table_pressure(to->t, kind, to->speed, to->charge), pressure_Pa,
           to->t->samples * sizeof *pressure_Pa);
    for (size_t i = 0; i < HALF_NUMBERS; i++)
        to->finite = to->finite && isfinite(number[i]);
}

tacet_status table_compute(table *t, const cylinder *c, const tacet_engine_def *d, tacet_error *e)
{
    for (size_t s = 0; s < t->n_speeds; s++) {
        cylinder_gas start = cylinder_fill(c, c->exhaust_Pa, 1000), never = {0};
        for (size_t i = 0; i < t->n_charges; i++) {
            cylinder_run r = table_run(d, t->speed_rad_per_s[s], t->charge[i]);
            destination to = {t, s, i, true};
            tacet_status status = halves_chain(c, &r, &t->halves, &start, &never, store, &to);
            if (status == TACET_OK && !to.finite) status = TACET_NOT_FINITE;
            if (status == TACET_OK) continue;
            return tacet_fail(e, status,
                              "the cylinder cycle at %.6g rpm and %.6g kPa in the manifold: %s",
                              r.speed_rad_per_s * 60 / (2 * M_PI), r.manifold_Pa / 1e3,
                              status == TACET_NOT_CONVERGED ? "it does not settle"
                                                            : "no possible state of the gas");
        }
    }
    return TACET_OK;
}
