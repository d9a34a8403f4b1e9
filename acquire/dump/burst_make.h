/* burst_make.h: the rows that were collected become one burst. */
#ifndef ANELAST_DUMP_BURST_MAKE_H
#define ANELAST_DUMP_BURST_MAKE_H

#include "acquire/dump/rows.h"

/* an_channel_si: the i-th sample of a channel [SI unit of its role], without the layout's gain. */
double an_channel_si(const an_channel_in *in, size_t i);

/* an_channel_tolerance: half a unit of the last digit that a time was printed with; a few ulps for times that
 * never were texts. time_s [in, s] the time itself Returns [s]. */
double an_channel_tolerance(const an_channel_in *in, size_t i, double time_s);

/* an_burst_make: number the burst that ends now, and make it of the rows. Where no row has all its values the
 * burst stays without signals: rows->n_missing == rows->n tells. burst [out] init'ed by the caller Returns
 * AN_OK, AN_E_FORMAT (nothing gives time) or AN_E_MEMORY. */
an_status an_burst_make(an_rows *rows, an_burst *burst, an_error *err);

#endif
