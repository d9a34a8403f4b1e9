/* anelast/quality.h: what the record of a burst itself tells of its worth, in numbers; the thresholds are the
 * procedure's and stand with whoever judges them (anelast/reduction.h). Stage: phase.
 */
#ifndef ANELAST_QUALITY_H
#define ANELAST_QUALITY_H

#include "anelast/sinefit.h"

/* Clipping, found before the fit so that clipped samples can stay out of it. */
typedef struct an_clipping {
    int n_end[AN_CHANNELS]; /* samples at an end of the converter's range, or in a flat top */
    int n_run[AN_CHANNELS]; /* longest run of them */
    double end[AN_CHANNELS][2]; /* [unit of y] where the channel stops, below and above; NAN: nothing clipped there */
} an_clipping;

/* How evenly the samples stand in time. */
typedef struct an_timing {
    double interval_s; /* [s] of the straight line through the times */
    double jitter;     /* [1] rms deviation from that line over the interval */
    double worst;      /* [1] greatest deviation over the interval */
    int n_backward;    /* steps back, or none forward */
    int n_gap;         /* steps longer than 1.5 intervals */
} an_timing;

typedef struct an_quality {
    double snr_dB[AN_CHANNELS]; /* [dB] power of the first harmonic over the noise level */
    double steps[AN_CHANNELS]; /* [1] amplitude over one step of the converter; INFINITY where the step is not
                                  known */
    int n_frozen[AN_CHANNELS]; /* longest run of one value where the fit moves on by far more than noise */
    int n_repeated;            /* samples that repeat an earlier block, both channels bit for bit */
    double mains_Hz;           /* [Hz] strongest mains line in the force; 0: none significant */
    double mains_ratio;        /* [1] its amplitude over the force's */
    double harmonic[2]; /* [1] I2/I1, I3/I1 of the force, the drive's share taken off; 0 where not fitted */
    double u_harmonic;  /* [1] of each of them, noise */
    int n_cycle, n_cycle_reversed; /* whole cycles, and those in which the force lost the sign of its mean */
} an_quality;

/* an_clip_find: find clipped samples.
 *   waveform [in] whole burst; frequency_Hz [in, Hz]
 *   range [in, nullable] [AN_CHANNELS][2] least and greatest value the converter can give [unit of y], NAN:
 *     not known
 *   use [in, out] [n] set to 0 at samples at an end of the range and in flat tops: 3 or more equal extreme
 *     samples, and more than twice as many as rounding makes at the top of a sine of that amplitude */
void an_clip_find(const an_waveform *waveform, double frequency_Hz, const double (*range)[2],
                  unsigned char *use, an_clipping *clipping);

/* an_clip_guard: leave out, too, the samples that stood so near an end that their noise alone decided whether they
 * reached it: those whose fitted value lies beyond the end, or within 4 standard deviations of the residual before
 * it. Which samples stay is then decided by the fit and not by their noise, and the next fit has no bias from the
 * choice.
 *   waveform [in] whole burst; first [in] first sample kept; clipping [in]
 *   deviation [in] [AN_CHANNELS] of the residual [unit of y]; residual [in] [AN_CHANNELS][n]; use [in, out] [n]
 * Returns the number of samples newly left out. */
int an_clip_guard(const an_waveform *waveform, int first, const an_clipping *clipping,
                  const double deviation[AN_CHANNELS], const double *residual, unsigned char *use);

/* an_timing_assess: look at the times [n], n >= 2 [s]. */
void an_timing_assess(int n, const double *time_s, an_timing *timing);

/* an_time_straighten: where all times stand within `resolution_s` of a straight line, they are a uniform
 * clock whose readings were rounded; put the line in their place.  time_s [in, out] [n] [s]. Returns nonzero
 * where it did. */
int an_time_straighten(int n, double *time_s, double resolution_s);

/* an_quality_assess: everything that needs the fit.
 *   waveform [in] whole burst; first [in] first sample kept; fit, residual [in] of an_startup_fit
 *   drive_stiffness [in] [2] [N/m] stiffness expected at 2 and 3 times the frequency: what the drive's own
 *     harmonics explain
 * Returns AN_OK or AN_E_MEMORY. */
an_status an_quality_assess(const an_waveform *waveform, int first, const an_sinefit *fit,
                            const double *residual, const double complex drive_stiffness[2],
                            an_quality *quality, an_error *err);

#endif
