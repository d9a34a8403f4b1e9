/* anelast/superpose.h: time-temperature superposition: all shifts and one spectrum from all isotherms
 * together.
 *
 * E*(omega, T) = b_T E*(omega a_T, T0), a_T = tau(T)/tau(T0) < 1 above T0. The start is the closed-form area
 * between neighbouring isotherms [GE11]; the result is a weighted least-squares fit of E' and E'' with log10
 * a_T (and log10 b_T) of every isotherm outside and one non-negative Maxwell spectrum inside (variable
 * projection [GP73], derivative of [KA75]). It is causal, uses both moduli, and yields the covariance of the
 * shifts with the spectrum integrated out. Nothing here knows of documents. SI throughout; logarithms of
 * shifts are to base 10.
 */
#ifndef ANELAST_SUPERPOSE_H
#define ANELAST_SUPERPOSE_H

#include "anelast/maxwell.h"
#include "anelast/smooth.h"

/* Does one shift per temperature bring all isotherms together? */
typedef enum an_simplicity { AN_SIMPLE = 0, AN_DOUBTFUL, AN_COMPLEX } an_simplicity;

/* The law of b_T: 1; T/T0 (rubber elasticity, the density taken as constant); one free factor an isotherm. */
typedef enum an_vertical {
    AN_VERTICAL_NONE = 0,
    AN_VERTICAL_DENSITY_TEMPERATURE,
    AN_VERTICAL_FREE
} an_vertical;

typedef struct an_superpose_point {
    double omega_rad_s;         /* rad/s, > 0 */
    double storage_Pa, loss_Pa; /* Pa, storage > 0 */
    double noise[3];            /* Pa2: var E', cov(E', E''), var E''; positive definite */
} an_superpose_point;

typedef struct an_superpose_isotherm {
    double temperature_K; /* K, measured */
    size_t first_point;   /* its points stand together in the list */
    size_t n_point;       /* >= 1; by rising frequency */
} an_superpose_isotherm;

typedef struct an_superpose_input {
    size_t n_isotherm;                     /* >= 2 */
    const an_superpose_isotherm *isotherm; /* [n_isotherm] by rising temperature */
    size_t n_point;
    const an_superpose_point *point; /* [n_point] */
    size_t n_source;                 /* common sources of uncertainty; 0 allowed */
    const double *common;   /* [n_point][n_source][2] Pa: change of E', E'' for one standard uncertainty; NULL
                               where n_source is 0 */
    double u_temperature_K; /* K, common bias of the temperature, standard; 0: none */
} an_superpose_input;

typedef struct an_superpose_options {
    double reference_temperature_K; /* K; the isotherm nearest to it becomes T0. NAN: chosen by overlap near
                                       the middle */
    int vertical_chosen; /* nonzero: the law of b_T by an information criterion [SCH78]; `vertical` is ignored
                          */
    an_vertical vertical;
    an_strength_rule rule;   /* of the spectrum's regularisation */
    int equilibrium;         /* nonzero: an equilibrium modulus belongs to the spectrum */
    double modes_per_decade; /* first grid; it is doubled while that pays, up to the next */
    double most_modes_per_decade;
    double extend_decades; /* grid beyond the data on either side, decades */
    double model_floor; /* relative to |E*|: what no test of the trade can tell from an exact model; for the
                           verdict only */
    double doubtful_chi_square, complex_chi_square; /* reduced, with the floor: above these */
    double doubtful_rad, complex_rad;               /* rad, separation in the phase angle: above these */
    double determined_u; /* u(log10 a_T), noise part, up to which a shift counts as determined */
} an_superpose_options;

/* The result. */
typedef struct an_superposition {
    size_t n_isotherm;
    size_t i_reference;             /* isotherm of T0 */
    double reference_temperature_K; /* K, its measured temperature */
    an_vertical vertical;
    double *log10_aT, *log10_bT; /* [n_isotherm] owned */
    double *noise_covariance;  /* [2 n_isotherm x 2 n_isotherm] log10 a_T then log10 b_T, noise part, owned */
    double *common_covariance; /* same shape: common sources and temperature bias, owned */
    int *determined;           /* [n_isotherm] owned */
    double inflation;          /* factor on the noise covariance: reduced chi-square where above 1, else 1 */
    an_maxwell spectrum;       /* at T0; Pa, s */
    double modes_per_decade;   /* of the grid kept */
    double strength;           /* of the regularisation */
    double used;               /* effective parameters of the spectrum */
    double chi_square, degrees_of_freedom, reduced_chi_square; /* against the noise */
    double reduced_with_floor; /* the same with the model floor added to the noise */
    double misfit;             /* rms of what the noise does not explain, relative to |E*| */
    double
        separation_rad; /* rad, rms distance of isotherms in phase angle at equal |E*|/b_T, noise taken off */
    double separation_noise_rad; /* rad, rms distance that noise alone makes */
    size_t n_separation;         /* pairs compared */
    an_simplicity simplicity;
    char reason[320]; /* of the verdict, with the numbers */
    size_t n_point;
    double *residual;      /* [n_point][2] (measured - fitted)/u of E' and E'', owned */
    double omega_range[2]; /* rad/s, least and greatest reduced frequency that the data cover */
} an_superposition;

/* an_superpose_defaults: what measurement and trade suggest; sources beside each value in superpose.c. */
void an_superpose_defaults(an_superpose_options *options);

void an_superposition_init(an_superposition *result);
void an_superposition_clear(an_superposition *result);

/* an_superpose: the whole of it.
 *   input    [in]
 *   options  [in]  NULL: the defaults
 *   result   [out] init'ed by the caller, who clears it
 * Returns AN_OK; AN_DUBIOUS (doubtful or complex, all the same whole); AN_E_VALUE (a point out of its range);
 * AN_E_SCIENCE naming the isotherms that cannot be joined; AN_E_NUMERIC; AN_E_MEMORY. */
an_status an_superpose(const an_superpose_input *input, const an_superpose_options *options,
                       an_superposition *result, an_error *err);

/* an_modulus_is_sure: whether a point knows the modulus within the 1 % that the trade asks: only such points
 * widen the window. storage_Pa, loss_Pa [in] Pa noise_Pa2           [in] [3] Pa^2, variances and covariance:
 * (E', E'), (E', E''), (E'', E'') Returns 1 or 0. */
int an_modulus_is_sure(double storage_Pa, double loss_Pa, const double noise_Pa2[3]);

/* What a pair of neighbours lacks for its area. */
typedef enum an_area_lack { AN_LACKS_NOTHING = 0, AN_LACKS_OVERLAP, AN_LACKS_SLOPE } an_area_lack;

/* One pair of neighbours joined by the area between them. */
typedef struct an_area_shift {
    an_area_lack lack;    /* why the pair was refused */
    double log10_a;       /* log10 a of the warmer against the colder, <= 0 as a rule */
    double u;             /* its random uncertainty, (2/n)^1/2 s_y / |dy/dx| */
    double log10_b;       /* log10 b of the warmer against the colder, from |E*| after shifting */
    double gap_decades;   /* of frequency, between ranges that do not meet; 0: they overlap */
    const char *quantity; /* what it was read from: "loss factor", "storage modulus" or "loss modulus" */
} an_area_shift;

/* an_area_between: the closed form [GE11, adopted by ISO 18437-6:2017]: the area between two segments over
 * their common range of ordinate, log10 a = int (x1 - x2) dy / int dy with x = log10 omega, piecewise linear
 * and exact; of the quantities that rise or fall steadily in both isotherms the one with the least
 * uncertainty. i_cold    [in] isotherm; the other is i_cold + 1 vertical  [in] free: the loss factor comes
 * first, since b_T cancels in it Returns AN_OK; AN_E_SCIENCE naming both temperatures and what is missing,
 * overlap or slope. */
an_status an_area_between(const an_superpose_input *input, size_t i_cold, an_vertical vertical,
                          an_area_shift *shift, an_error *err);

/* an_separation: distance of isotherms in the plane of phase angle over |E*|/b_T [VP98].
 *   log10_bT  [in]  [n_isotherm]
 *   rms_rad, noise_rad [out] rad; n_pair [out] number compared */
void an_separation(const an_superpose_input *input, const double *log10_bT, double *rms_rad,
                   double *noise_rad, size_t *n_pair);

const char *an_simplicity_word(an_simplicity simplicity); /* "simple", "doubtful", "complex" */
const char *an_vertical_word(an_vertical vertical);       /* "none", "density-temperature", "free" */

#endif
