/* anelast/startup.h: how many leading cycles of a burst have to go before the response is steady. Stage:
 * phase. */
#ifndef ANELAST_STARTUP_H
#define ANELAST_STARTUP_H

#include "anelast/sinefit.h"

/* Choices; defaults of an_startup_choice_init in brackets. */
typedef struct an_startup_choice {
    double agree_stiffness; /* [1] successive cycles agree when |K| changes by less [0.005] */
    double agree_phase;     /* [rad] and the phase by less [0.1 degree] */
    int least_cycles;       /* cycles that are always kept [3] */
    double transient_risk;  /* [1] chance of one more drop although only white noise is left [0.001] */
} an_startup_choice;

typedef struct an_startup {
    int first_sample; /* index of the first sample kept */
    double n_dropped; /* [1] cycles dropped, not whole where the burst isn't */
    double n_kept;    /* [1] cycles kept, whole where the burst has at least one */
    int settled; /* nonzero: two successive cycles agreed, and nothing above noise is left near the line */
} an_startup;

void an_startup_choice_init(an_startup_choice *choice);

/* an_startup_fit: drop leading cycles, one at least where any can be spared, until the first two left agree;
 * then until the force's residual near the line is no more than noise; and fit what is left. Cycles agree
 * within the choice's limits or within 2.5 standard uncertainties of their difference.
 *   waveform [in] whole burst; choice [in] of the fit, frequency_Hz the start; start_choice [in]
 *   startup [out]; fit [out]; residual [out] [AN_CHANNELS][n], of the samples kept, at their place in the
 *     burst, 0 before
 * Returns AN_OK (look at `settled`), or what an_sinefit_run refuses. */
an_status an_startup_fit(const an_waveform *waveform, const an_sinefit_choice *choice,
                         const an_startup_choice *start_choice, an_startup *startup, an_sinefit *fit,
                         double *residual, an_error *err);

#endif
