#include "tacet/order.h"
#include <fftw3.h>
#include <math.h>
#include <pthread.h>
#include <stdlib.h>

#define MOST_SAMPLES ((size_t)1 << 28)

// FFTW's planner keeps state of its own and is not thread-safe; executing a plan on other arrays
// is. FFTW_ESTIMATE: measured plans differ from run to run, and with them the last bits of a sum.
static pthread_mutex_t planning = PTHREAD_MUTEX_INITIALIZER;

// A planner that gets no memory ends the process. What it takes, measured with FFTW 3.3.10 (0.3 MB
// and up to 40 bytes a sample), is seen to be there first, twice over.
#define PLAN_BYTES        ((size_t)1 << 20)
#define PLAN_SAMPLE_BYTES 80

struct tacet_transform {
    size_t n;
    fftw_plan to_lines, to_samples; // both in place
};

static fftw_complex *as_complex(double *samples)
{
    return (fftw_complex *)(void *)samples;
}

static bool may_plan(size_t n_samples)
{
    void *volatile enough = malloc(PLAN_BYTES + PLAN_SAMPLE_BYTES * n_samples);
    bool there = enough != NULL;
    free(enough);
    return there;
}

tacet_status tacet_transform_create(size_t n_samples, tacet_transform **out)
{
    if (n_samples < 4 || n_samples % 2 || n_samples > MOST_SAMPLES) return TACET_BAD_INPUT;
    tacet_transform *t = calloc(1, sizeof *t);
    if (!t) return TACET_NO_MEMORY;
    t->n = n_samples;
    double *x = tacet_transform_buffer(t);
    if (x && may_plan(n_samples)) {
        pthread_mutex_lock(&planning);
        t->to_lines = fftw_plan_dft_r2c_1d((int)n_samples, x, as_complex(x), FFTW_ESTIMATE);
        t->to_samples = fftw_plan_dft_c2r_1d((int)n_samples, as_complex(x), x, FFTW_ESTIMATE);
        pthread_mutex_unlock(&planning);
    }
    tacet_transform_release(x);
    if (!t->to_lines || !t->to_samples) {
        tacet_transform_destroy(t);
        return TACET_NO_MEMORY;
    }
    *out = t;
    return TACET_OK;
}

void tacet_transform_destroy(tacet_transform *t)
{
    if (!t) return;
    pthread_mutex_lock(&planning);
    if (t->to_lines) fftw_destroy_plan(t->to_lines);
    if (t->to_samples) fftw_destroy_plan(t->to_samples);
    pthread_mutex_unlock(&planning);
    free(t);
}

size_t tacet_transform_samples(const tacet_transform *t)
{
    return t->n;
}

double *tacet_transform_buffer(const tacet_transform *t)
{
    return fftw_malloc((t->n + 2) * sizeof(double));
}

void tacet_transform_release(double *buffer)
{
    fftw_free(buffer);
}

// x[j] = mean + sum_h Re(line[h] exp(2 pi i h j / n))  <=>  DFT[h] = n/2 line[h], DFT[0] = n mean.
void tacet_transform_lines(const tacet_transform *t, double *samples, tacet_spectrum *s)
{
    if (s->n_lines >= t->n / 2) { // outside the contract: nothing that could pass for an answer
        s->mean = NAN;
        for (size_t h = 1; h <= s->n_lines; h++)
            s->line[h] = NAN;
        return;
    }
    fftw_execute_dft_r2c(t->to_lines, samples, as_complex(samples));
    double scale = 2 / (double)t->n;
    double *line = (double *)(void *)s->line;
    s->mean = samples[0] / (double)t->n;
    line[0] = line[1] = 0;
    for (size_t i = 2; i < 2 * (s->n_lines + 1); i++)
        line[i] = scale * samples[i];
}

void tacet_transform_samples_of(const tacet_transform *t, const tacet_spectrum *s, double *samples)
{
    if (s->n_lines >= t->n / 2) {
        for (size_t j = 0; j < t->n; j++)
            samples[j] = NAN;
        return;
    }
    const double *line = (const double *)(const void *)s->line;
    size_t filled = 2 * (s->n_lines + 1);
    for (size_t i = 2; i < filled; i++)
        samples[i] = 0.5 * line[i];
    for (size_t i = filled; i < t->n + 2; i++)
        samples[i] = 0;
    samples[0] = s->mean;
    samples[1] = 0;
    fftw_execute_dft_c2r(t->to_samples, as_complex(samples), samples);
}

size_t tacet_transform_length(size_t n_lines, unsigned oversample)
{
    size_t n = 4;
    // past MOST_SAMPLES create refuses
    while (n <= MOST_SAMPLES && (n / 2 <= n_lines || n / (oversample ? oversample : 1) < n_lines))
        n *= 2;
    return n;
}
