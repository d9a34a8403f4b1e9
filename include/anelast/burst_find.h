/* anelast/burst_find.h: where one burst ends and the next begins in a continuous record, from its times and
 * displacements alone, sample by sample: a gap, another sampling interval, times that begin anew, or another
 * frequency or amplitude of the displacement at the same interval.
 */
#ifndef ANELAST_BURST_FIND_H
#define ANELAST_BURST_FIND_H

#include <stdbool.h>
#include <stddef.h>

/* Swings that are remembered: two before, two behind, and one that a change of burst may have cut. */
enum { AN_SWINGS_KEPT = 5 };

/* One swing of the displacement, from an extreme to the next. */
typedef struct an_swing {
    double duration; /* [s] */
    double height;   /* [as the displacement] */
    size_t begin;    /* sample of the burst where it begins */
} an_swing;

/* The state of a search; zeros are the beginning. */
typedef struct an_burst_finder {
    size_t n;                        /* samples of the burst so far */
    double time;                     /* [s] of the newest sample */
    double interval;                 /* [s] usual interval of the burst; 0: not known yet */
    int n_odd;                       /* newest intervals in a row that are not the usual one */
    double odd[3];                   /* [s] the newest of them, the latest last */
    double before[2];                /* [as the displacement] the newest two values, the latest last */
    double roughness;                /* [the same] mean magnitude of the second differences */
    int direction;                   /* of the swing that goes on: 1 up, -1 down, 0 not known */
    double from, to;                 /* [as the displacement] its beginning, and how far it came */
    double from_time, to_time;       /* [s] when */
    size_t from_i, to_i;             /* samples of the burst */
    an_swing swings[AN_SWINGS_KEPT]; /* the newest, the latest last */
    int n_swings;                    /* of the burst */
} an_burst_finder;

/* an_burst_finder_reset: the next sample is the first of a burst. */
void an_burst_finder_reset(an_burst_finder *finder);

/* an_burst_finder_add: look at the next sample.
 *   time         [in] [s]
 *   resolution   [in] [s] unit of the last digit of the times; 0 where they are exact
 *   displacement [in] any unit
 * Returns how many of the newest samples, this one included, belong to a new burst; 0: none. After a boundary
 * the finder is to be reset and the samples of the new burst added again. */
size_t an_burst_finder_add(an_burst_finder *finder, double time, double resolution, double displacement);

#endif
