/* anelast/search.h: finding the excitation in a waveform by a fast Fourier transform. Stage: phase. It only
 * says where the fit may start, so awkward lengths are cut and non-uniform times interpolated.
 */
#ifndef ANELAST_SEARCH_H
#define ANELAST_SEARCH_H

#include "anelast/status.h"

/* Plans by length and the arrays they work on. One thread at a time. */
typedef struct an_search an_search;

/* an_search_new / an_search_free: NULL where there is no memory. */
an_search *an_search_new(void);
void an_search_free(an_search **search);

/* an_search_length: the greatest length with no prime factor above 5 that is not above n; 0 for n < 1. */
int an_search_length(int n);

/* an_search_peak: frequency of the greatest line of a waveform, mean and slope taken off, Hann window,
 * refined between bins.
 *   n, time_s, y [in] [n] [s], [any]
 *   frequency_Hz [out, Hz]
 *   prominence [out, 1] line over the median of the spectrum
 * Good to a tenth of a bin from 2 cycles on. Plans are made with FFTW_ESTIMATE: the same result every time.
 * Returns AN_OK, AN_E_SCIENCE (fewer than 16 samples, or nothing but a constant), AN_E_MEMORY. */
an_status an_search_peak(an_search *search, int n, const double *time_s, const double *y,
                         double *frequency_Hz, double *prominence, an_error *err);

#endif
