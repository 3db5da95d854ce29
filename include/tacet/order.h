// order: spectra on the exact line grid of a repeat, Fourier transforms between lines and samples,
// peaks.
//
// A repeat lasts `revolutions` crank revolutions; line h is harmonic h of it, order = h /
// revolutions. Signal(t) = mean + sum_h Re(line[h] exp(i h w0 t)), w0 = mean speed / revolutions.
// Amplitudes are peak; a cosine with phase p has line = A exp(i p).
#ifndef TACET_ORDER_H
#define TACET_ORDER_H
#include "tacet/base.h"
#include <complex.h>
#pragma GCC visibility push(default)

typedef struct {
    unsigned revolutions;
    size_t n_lines; // lines 1..n_lines
    double mean;
    double complex
        *line; // [n_lines + 1]; line[0] is unused and zero, so that line[h] is harmonic h
} tacet_spectrum;

// Points s at arena memory for n_lines lines, all zero, of one revolution. Never inside a solve.
TACET_USE tacet_status tacet_spectrum_init(tacet_spectrum *s, size_t n_lines, tacet_arena *a);
void tacet_spectrum_zero(tacet_spectrum *s); // mean and lines; revolutions and n_lines stay
// s += factor x on the lines that both have, which are of equal revolutions; the mean takes
// creal(factor).
void tacet_spectrum_add(tacet_spectrum *s, double complex factor, const tacet_spectrum *x);
double tacet_spectrum_rms(const tacet_spectrum *s, size_t first,
                          size_t last);                      // lines first..last, 0 excluded
double tacet_order_hz(double order, double speed_rad_per_s); // f = order * N / 60
double tacet_order_speed(double order, double hz);           // rad/s at which the order lies at hz

// Transforms of one length; plans are made here, once. Any thread may create, destroy and use one,
// many may use the same one on buffers of their own.
typedef struct tacet_transform tacet_transform;
TACET_USE tacet_status tacet_transform_create(size_t n_samples,
                                              tacet_transform **out); // even, 4 .. 2^28
void tacet_transform_destroy(tacet_transform *t);                     // accepts NULL
size_t tacet_transform_samples(const tacet_transform *t);             // its length
// Buffers from these two functions have the alignment the plans need.
double *tacet_transform_buffer(const tacet_transform *t); // n_samples + 2 doubles; NULL: no memory
void tacet_transform_release(double *buffer);             // accepts NULL
// samples[n] (equally spaced over the repeat, first at angle 0) -> s (lines up to s->n_lines <
// n/2). `samples` is overwritten. n_lines >= n/2 gives NAN, here and below: no length could tell
// such lines apart.
void tacet_transform_lines(const tacet_transform *t, double *samples, tacet_spectrum *s);
// s -> samples[n] in `samples`.
void tacet_transform_samples_of(const tacet_transform *t, const tacet_spectrum *s, double *samples);
// The smallest power of two that holds `oversample` samples per period of the highest line.
size_t tacet_transform_length(size_t n_lines, unsigned oversample);

// Largest and smallest value of the signal, found on samples of an oversampled transform (>= 6) and
// refined on the exact lines by Newton's method at every candidate; relative error < 1e-5 of (max -
// min). A line that is not finite gives NAN. Angle of each in rad of crank rotation from the start
// of the repeat.
typedef struct {
    double max, min, max_angle_rad, min_angle_rad;
} tacet_peaks;
// buffer: of t, overwritten.
void tacet_spectrum_peaks(const tacet_spectrum *s, const tacet_transform *t, double *buffer,
                          tacet_peaks *out);
double tacet_spectrum_at(const tacet_spectrum *s, double angle_rad); // value at a crank angle

// ---- weightings -------------------------------------------------------------------------------
// How people feel or hear a frequency, as a factor on a line.
typedef enum {
    TACET_WEIGHTING_NONE,
    TACET_WEIGHTING_VERTICAL,   // Wk of ISO 2631-1: seat, along the spine
    TACET_WEIGHTING_HORIZONTAL, // Wd of ISO 2631-1: seat, across it
    TACET_WEIGHTING_HEARING     // A of IEC 61672-1; hides a boom of 50 Hz by 30 dB
} tacet_weighting;
extern const char *const tacet_weighting_names[]; // "none", "wk", "wd", "a"; ends with NULL
// Wk, Wd: their analogue filters with phase (ISO 2631-1:1997 annex A; parameters as quoted in
// public code); A: its magnitude, no phase (IEC 61672-1, from memory), 1 at 1000 Hz. f >= 0.
double complex tacet_weighting_at(int weighting, double f_hz);

#pragma GCC visibility pop
#endif
