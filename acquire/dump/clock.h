/* clock.h: whether printed times are those of a uniform clock, and of which. */
#ifndef ANELAST_DUMP_CLOCK_H
#define ANELAST_DUMP_CLOCK_H

#include <stdbool.h>
#include <stddef.h>

/* an_clock_fit: the uniform clock start + index * interval whose times, rounded to the last digit that each
 * was printed with, are the times given. Where one exists, the clock holds all that the texts said. time [in]
 * [n] [any unit of time] tolerance [in]  [n] [the same] half a unit of each text's last digit, > 0 index [in]
 * [n] rising sample numbers, NULL: 0, 1, 2 ... start, interval [out] [the same unit]; interval > 0 where true
 * is returned Returns false where there is none, or n < 2. */
bool an_clock_fit(const double *time, const double *tolerance, const size_t *index, size_t n, double *start,
                  double *interval);

#endif
