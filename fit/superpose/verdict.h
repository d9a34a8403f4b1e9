/* fit/superpose/verdict.h: chi-square with the model floor, and the verdict on superposition. Not installed.
 */
#ifndef ANELAST_FIT_VERDICT_H
#define ANELAST_FIT_VERDICT_H

#include "fit/superpose/joint.h"

/* Fill residuals, reduced_with_floor, misfit, separation, simplicity and reason of a result whose shifts,
 * spectrum, chi_square and degrees of freedom stand. */
void an_verdict_fill(const an_joint *joint, const an_superpose_options *options, an_superposition *result);

#endif
