/* anelast/handover.h: from a master to a material: the few modes that a simulation uses, with everything that
 * must go with them. Stands on superpose.h and spectrum.h; the result is material.h.
 */
#ifndef ANELAST_HANDOVER_H
#define ANELAST_HANDOVER_H

#include "anelast/master.h"
#include "anelast/material.h"
#include "anelast/procedure.h"

/* an_handover_make: the material of a master: a dense spectrum of the points on the master curve, the fewest
 * modes that follow it within the stated error, their uncertainty and covariance, the window, the law chosen,
 * the elastic scaling, the remarks of the master and its own.
 *   master           [in]
 *   procedure        [in]  modes_per_decade, mode_error, long_term, override_complex
 *   override_reason  [in]  who overrides the verdict `complex`, and why; NULL or "" where nobody does. The
 *                          procedure's
 *                          override_complex does the same, in the name of that procedure
 *   material         [out] initialised; `made` is left to the caller
 * Returns AN_OK; AN_DUBIOUS (whole, but with a flag among its own remarks); AN_E_SCIENCE for a complex
 * material that nobody overrides, with the master's numbers, or a master whose points span no window;
 * AN_E_VALUE, AN_E_NUMERIC, AN_E_MEMORY. */
an_status an_handover_make(const an_master *master, const an_procedure *procedure,
                           const char *override_reason, an_material *material, an_error *err);

#endif
