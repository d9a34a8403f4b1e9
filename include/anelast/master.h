/* anelast/master.h: the master document: shift factors with covariance, whether the material superposes at
 * all, the shift law, the master curve and the spectrum of the joint fit. Written by anelast-shift. The
 * numerics are superpose.h.
 *
 * E*(omega, T) = b_T E*(omega a_T, T0); a_T < 1 above T0.
 */
#ifndef ANELAST_MASTER_H
#define ANELAST_MASTER_H

#include "anelast/grid.h"
#include "anelast/law_fit.h"
#include "anelast/maxwell.h"
#include "anelast/spectrum.h"
#include "anelast/superpose.h"

typedef struct an_shift {
    double temperature_K;                        /* [K] */
    double u_temperature_K;                      /* [K] noise part */
    double log10_aT, log10_bT;                   /* [1] */
    double u_log10_aT, u_log10_bT;               /* [1] total, standard */
    double u_noise_log10_aT, u_noise_log10_bT;   /* [1] */
    double u_common_log10_aT, u_common_log10_bT; /* [1] */
    int determined; /* 0: the data barely determine log10_aT (u above the procedure's limit) */
} an_shift;

/* One cell on the master curve. */
typedef struct an_master_point {
    int isotherm, burst;
    double temperature_K, frequency_Hz; /* [K], [Hz] */
    double reduced_omega;               /* [rad/s] omega a_T */
    double storage_Pa, loss_Pa;         /* [Pa] divided by b_T */
    double u_storage_Pa, u_loss_Pa;     /* [Pa] noise part */
    double noise[3];                    /* [Pa2] noise covariance, divided by b_T^2 */
    double common[AN_SOURCE_COUNT][2];  /* [Pa] divided by b_T */
    double residual[2];                 /* [1] (measured - fitted) / u, storage and loss */
    int outlier;                        /* left out of the fit */
} an_master_point;

typedef struct an_master {
    char id[160];
    an_made made;
    an_specimen specimen;
    an_remark_list remarks;
    an_assessment assessment;       /* as the grid had it */
    double strain_most;             /* [1] as the grid had it; NAN: not known */
    double u_temperature_bias_K;    /* [K] common to all temperatures, standard; 0: none stated */
    double reference_temperature_K; /* [K] T0, one of the isotherms' or the user's */
    an_vertical vertical;
    int n_shift;
    an_shift *shift;    /* [n_shift] by rising temperature, owned */
    double *covariance; /* [2 n_shift][2 n_shift] noise part, log10 a_T then log10 b_T, owned */
    int n_point;
    an_master_point *point; /* [n_point], owned */
    an_simplicity simplicity;
    char simplicity_reason[320]; /* with the numbers */
    double chi_square;           /* [1] of the joint fit against the noise */
    int degrees_of_freedom;
    double reduced_chi_square; /* [1] */
    double separation_rad;     /* [rad] rms separation of isotherms in delta at equal |E*| */
    int n_trial;
    an_law_trial trial[AN_LAW_TRIALS];
    an_maxwell spectrum; /* of the joint fit, at T0 */
    an_end_state end_state;
    double window_s[2]; /* [s] trusted relaxation times, at T0 */
} an_master;

void an_master_init(an_master *master);
void an_master_clear(an_master *master);
an_status an_master_read(const char *path, an_master *master, char sha256[65], an_error *err);
void an_master_write(an_xml_writer *writer, const an_master *master);

/* an_master_make: a grid to a master. procedure: vertical, reference_temperature, law, limits.
 * Returns AN_OK, AN_DUBIOUS (doubtful or complex, all the same whole), AN_E_SCIENCE naming the isotherms that
 * cannot be joined. */
an_status an_master_make(const an_grid *grid, const an_procedure *procedure, an_master *master,
                         an_error *err);

#endif
