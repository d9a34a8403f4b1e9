/* anelast/reduction.h: a burst of a run to a point: waveforms to stiffness, stiffness to modulus, with
 * quality and uncertainty; and what only the whole run can tell. Stage: phase and correct together, as
 * anelast-phase does it.
 */
#ifndef ANELAST_REDUCTION_H
#define ANELAST_REDUCTION_H

#include "anelast/points.h"
#include "anelast/procedure.h"
#include "anelast/run.h"

/* Workspace: transform plans and arrays that grow to the largest burst; the thresholds in force. One thread
 * at a time. */
typedef struct an_reducer an_reducer;

/* an_reducer_new: a workspace for a procedure. NULL where there is no memory. an_reducer_free: *reducer
 * becomes NULL. */
an_reducer *an_reducer_new(const an_procedure *procedure);
void an_reducer_free(an_reducer **reducer);

/* an_reducer_begin: take over the head of a run: specimen, apparatus and remarks into points; default
 * uncertainties where none were given; the calibration's validity.
 *   run [in] its head; points [in, out] init'ed by the caller
 * Returns AN_OK, AN_E_VALUE (a geometry without its dimensions), AN_E_MEMORY. */
an_status an_reducer_begin(an_reducer *reducer, const an_run *run, an_points *points, an_error *err);

/* an_burst_reduce: one burst to one point. A burst that cannot be reduced is a point in state skipped, with
 * the remark that says why, not a refusal.
 *   specimen, apparatus [in] those of points after an_reducer_begin
 *   burst [in]; point [in, out] init'ed (an_points_add)
 * Returns AN_OK, or AN_E_MEMORY. */
an_status an_burst_reduce(an_reducer *reducer, const an_specimen *specimen, const an_apparatus *apparatus,
                          const an_burst *burst, an_point *point, an_error *err);

/* an_points_judge: what only all points together tell: an inverted channel, swapped columns, a wrong unit, a
 * frozen temperature channel, no burst left.
 * Returns AN_OK, AN_DUBIOUS (remarks were added), or AN_E_SCIENCE: no result, with the reason. */
an_status an_points_judge(an_points *points, const an_procedure *procedure, an_error *err);

/* an_points_make: a whole run document to points: what anelast-phase does. Streams burst by burst; memory is
 * bounded by the largest burst and the points. Holds and pulls give no point, and a remark that counts them.
 *   path [in] run document, "-" for standard input
 *   procedure [in]; by [in] name of the program, for the record
 *   points [in, out] init'ed by the caller, who clears it also after a refusal
 * Returns AN_OK, AN_DUBIOUS, or what reading, an_reducer_begin or an_points_judge refuse. */
an_status an_points_make(const char *path, const an_procedure *procedure, const char *by, an_points *points,
                         an_error *err);

#endif
