/* anelast/material.h: the material document: what a simulation may use, and where it may. Written by
 * anelast-prony, read by everything that predicts. It stands in the ground floor of fit.
 */
#ifndef ANELAST_MATERIAL_H
#define ANELAST_MATERIAL_H

#include "anelast/law.h"
#include "anelast/maxwell.h"
#include "anelast/provenance.h"
#include "anelast/remark.h"
#include "anelast/specimen.h"

typedef struct an_material {
    char id[160];
    an_made made;
    an_specimen specimen; /* name, lot, geometry kind it was measured in */
    an_remark_list remarks;
    int is_shear;                   /* nonzero: moduli are G, else E */
    double reference_temperature_K; /* [K] T0, of the times */
    an_maxwell modes;         /* handed-over spectrum: times [s] rising, moduli [Pa], equilibrium [Pa] */
    double *u_modulus_Pa;     /* [n_mode] noise part, owned; NULL: not known */
    double u_long_term_Pa;    /* [Pa] noise part; NAN: not known */
    double *covariance_Pa2;   /* [n_mode + 1][n_mode + 1] Pa2, noise part: modes, then long-term; owned; NULL:
                                        not known */
    int *trusted;             /* [n_mode] nonzero inside the window, owned */
    double instantaneous_Pa;  /* [Pa] long-term plus all modes: in-window value */
    double long_term_Pa;      /* [Pa] equilibrium; 0 for a liquid */
    char end_state[16];       /* "solid", "liquid", "undetermined" */
    double fit_error;         /* [1] rms relative error of the spectrum against the data */
    double fit_error_worst;   /* [1] */
    double u_common_relative; /* [1] common part: a scale on all moduli */
    double u_temperature_bias_K;    /* [K] common to all temperatures; times the slope it adds to log10 a_T */
    double window_time_s[2];        /* [s] trusted times at T0 */
    double window_temperature_K[2]; /* [K] measured temperatures */
    double strain_limit;            /* [1] greatest strain amplitude measured; NAN: not known */
    an_law law;                     /* log base 10 */
    char vertical[32];              /* "none", "density-temperature", "free" */
    int n_scaling;
    double *scaling_temperature_K; /* [n_scaling] [K], owned */
    double *scaling_log10_bT;      /* [n_scaling] [1], owned */
    char simplicity[16];           /* the master's verdict */
    char override_reason[240];     /* who overrode `complex`, and why; "" where nobody had to */
} an_material;

/* an_material_init: nothing known: no modes, no law, NAN where a number may be missing.
 * an_material_clear: release what it owns; it may be used again as after init. */
void an_material_init(an_material *material);
void an_material_clear(an_material *material);

/* an_material_read: a material document, whole and checked.
 *   path     [in]  file; "-" or NULL: standard input
 *   material [out] initialised
 *   sha256   [out] hex of its bytes; NULL allowed
 * Returns AN_OK; AN_E_IO, AN_E_DOCUMENT, AN_E_LIMIT; AN_E_UNIT; AN_E_VALUE with all that an_material_check
 * names; AN_E_MEMORY. */
an_status an_material_read(const char *path, an_material *material, char sha256[65], an_error *err);

/* an_material_write: the content of a document whose root the writer has just opened. */
void an_material_write(an_xml_writer *writer, const an_material *material);

/* an_material_check: weights non-negative, times positive and rising, long-term modulus non-negative, sum of
 * weights < 1 for a solid, instantaneous modulus equal to long-term modulus plus modes within 1e-6, law in
 * order; every fault is named, not only the first. Returns AN_OK or AN_E_VALUE. */
an_status an_material_check(const an_material *material, an_error *err);

/* an_material_caution: what whoever uses these numbers must mind, made from the material itself.
 *   i_caution [in]  from 0
 *   text      [out] one sentence
 * Returns 1, or 0 past the last one. */
enum { AN_CAUTION_SIZE = 320 };
int an_material_caution(const an_material *material, int i_caution, char text[AN_CAUTION_SIZE]);

#endif
