/* Distance of isotherms in the plane of phase angle over |E*|/b_T: free of time, so free of horizontal
 * shifts. Stage: superpose. Method: [VP98] as a number: every point against every other isotherm that
 * brackets its |E*|, square to the chord over ln |E*|, and beside it what the noise of the three points
 * makes. Range: brackets no wider than 0.4 in ln |E*|, so that the chord stays close to the curve. */
#include "anelast/superpose.h"

#include <math.h>

static const double ln10 = 2.302585092994046;
static const double widest_bracket = 0.4;
/* A bracket narrower than this many standard uncertainties of |E*| gives no slope: on a plateau order is
 * chance. */
static const double least_bracket = 5;

typedef struct place {
    double x, y;       /* ln |E*|/b, phase angle [rad] */
    double xx, xy, yy; /* their covariance */
} place;

static place place_of(const an_superpose_point *p, double log10_b)
{
    double m2 = p->storage_Pa * p->storage_Pa + p->loss_Pa * p->loss_Pa;
    double c = p->storage_Pa / m2,
           s = p->loss_Pa / m2; /* d ln|E*| = c dE' + s dE'', d delta = -s dE' + c dE'' */
    const double *v = p->noise;
    return (place){.x = 0.5 * log(m2) - ln10 * log10_b,
                   .y = atan2(p->loss_Pa, p->storage_Pa),
                   .xx = c * c * v[0] + 2 * c * s * v[1] + s * s * v[2],
                   .xy = -c * s * v[0] + (c * c - s * s) * v[1] + c * s * v[2],
                   .yy = s * s * v[0] - 2 * c * s * v[1] + c * c * v[2]};
}

/* Variance of y - slope x of one place. */
static double variance_across(const place *p, double slope)
{
    return p->yy - 2 * slope * p->xy + slope * slope * p->xx;
}

/* One point against one isotherm: squared distance and its noise. Returns 0 where no bracket serves. */
static int compare(const place *at, const an_superpose_input *input, size_t i_isotherm, double log10_b,
                   double square[2])
{
    const an_superpose_isotherm *isotherm = &input->isotherm[i_isotherm];
    for (size_t i = 0; i + 1 < isotherm->n_point; i++) {
        place low = place_of(&input->point[isotherm->first_point + i], log10_b);
        place high = place_of(&input->point[isotherm->first_point + i + 1], log10_b);
        double width = high.x - low.x;
        double noise = sqrt(low.xx + high.xx + at->xx);
        if (!(width > least_bracket * noise && width <= widest_bracket) || at->x < low.x || at->x > high.x)
            continue;
        double part = (at->x - low.x) / width, slope = (high.y - low.y) / width;
        double distance = at->y - (low.y + slope * (at->x - low.x));
        double across = 1 + slope * slope; /* the distance square to the chord */
        square[0] = distance * distance / across;
        square[1] = (variance_across(at, slope) + (1 - part) * (1 - part) * variance_across(&low, slope) +
                     part * part * variance_across(&high, slope)) /
                    across;
        return 1;
    }
    return 0;
}

void an_separation(const an_superpose_input *input, const double *log10_bT, double *rms_rad,
                   double *noise_rad, size_t *n_pair)
{
    double sum[2] = {0, 0};
    size_t n = 0;
    for (size_t k = 0; k < input->n_isotherm; k++)
        for (size_t i = 0; i < input->isotherm[k].n_point; i++) {
            place at = place_of(&input->point[input->isotherm[k].first_point + i], log10_bT[k]);
            for (size_t j = 0; j < input->n_isotherm; j++) {
                double square[2];
                if (j == k || !compare(&at, input, j, log10_bT[j], square))
                    continue;
                sum[0] += square[0];
                sum[1] += square[1];
                n++;
            }
        }
    *rms_rad = n ? sqrt(sum[0] / (double)n) : 0;
    *noise_rad = n ? sqrt(sum[1] / (double)n) : 0;
    *n_pair = n;
}
