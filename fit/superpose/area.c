/* The closed-form start: the area between neighbouring isotherms. Stage: superpose, before the joint fit.
 * Method: [GE11], with the integral of the piecewise-linear segments taken exactly, on the quantity that
 * promises the least uncertainty. Range: segments that overlap in ordinate and run steadily; others are
 * refused by name. */
#include "anelast/superpose.h"

#include "anelast/quantity.h"

#include <math.h>
#include <stdio.h>

enum { quantities = 3 };
static const char *const quantity_word[quantities] = {"loss factor", "storage modulus", "loss modulus"};
static const double most_u = 1; /* decades: a pair known no better has no slope */
/* A gap between the ranges up to this many decades of frequency is bridged, to begin with, by the slopes on
 * its two sides: a mode's loss peak is 1.14 decades wide at half height, so that E'' on either side of a
 * narrower gap holds E' inside it (Kramers and Kronig). The joint fit has the last word, and its covariance
 * says what the bridge is worth. */
static const double widest_gap = 1;
/* Decades that one point's noise moves a segment: where it is more, a gap is no gap but a plateau. */
static const double most_noise_at_gap = 0.3;

/* log10 of a quantity at a point, and its standard uncertainty. */
static double ordinate(const an_superpose_point *p, int quantity, double *u)
{
    double rs = sqrt(p->noise[0]) / p->storage_Pa, rl = sqrt(p->noise[2]) / fabs(p->loss_Pa);
    static const double log10_e = 0.4342944819032518;
    *u = log10_e * (quantity == 0 ? hypot(rs, rl) : quantity == 1 ? rs : rl);
    double value = quantity == 0 ? p->loss_Pa / p->storage_Pa : quantity == 1 ? p->storage_Pa : p->loss_Pa;
    return value > 0 ? log10(value) : NAN;
}

/* One isotherm's segment in one quantity. */
typedef struct segment {
    const an_superpose_point *point;
    size_t n;
    int quantity;
    double log10_scale; /* taken off moduli: the temperature where b_T = T/T0 */
    double sign;        /* +1: rises with frequency; -1: falls */
    double low, high;   /* range of the ordinate */
    double u;           /* rms uncertainty of the ordinate */
} segment;

static double segment_ordinate(const segment *s, size_t i, double *u)
{
    return ordinate(&s->point[i], s->quantity, u) - (s->quantity == 0 ? 0 : s->log10_scale);
}

/* Fill range, sign and uncertainty. Returns 0 where the ordinate turns by more than its noise, or is not
 * positive. */
static int survey(segment *s)
{
    double u, first = segment_ordinate(s, 0, &u), last = segment_ordinate(s, s->n - 1, &u);
    double before = first, u_before = u, sum = 0;
    if (s->n < 2 || !(first != last))
        return 0;
    s->sign = last > first ? 1 : -1;
    s->low = s->high = first;
    for (size_t i = 0; i < s->n; i++) {
        double y = segment_ordinate(s, i, &u);
        if (!isfinite(y) || s->sign * (y - before) < -3 * hypot(u, u_before))
            return 0;
        s->low = fmin(s->low, y);
        s->high = fmax(s->high, y);
        before = y;
        u_before = u;
        sum += u * u;
    }
    s->u = sqrt(sum / (double)s->n);
    return 1;
}

/* Integral of x = log10 omega over the ordinate from low to high along a segment; where noise turns the curve
 * back, the steps back count negative, as the area demands. *n: points inside the range. */
static double area_under(const segment *s, double low, double high, size_t *n)
{
    double area = 0, u;
    *n = 0;
    for (size_t i = 0; i < s->n; i++) {
        double y1 = segment_ordinate(s, i, &u), x1 = log10(s->point[i].omega_rad_s);
        *n += y1 >= low && y1 <= high;
        if (i + 1 == s->n)
            break;
        double y2 = segment_ordinate(s, i + 1, &u), x2 = log10(s->point[i + 1].omega_rad_s);
        double from = fmin(fmax(y1, low), high), to = fmin(fmax(y2, low), high);
        if (from == to)
            continue;
        double slope = (x2 - x1) / (y2 - y1);
        area += (to - from) * (x1 + slope * ((from + to) / 2 - y1));
    }
    return s->sign * area;
}

/* Decades of ordinate a decade of frequency, mean of a segment. */
static double mean_slope(const segment *s)
{
    return (s->high - s->low) / log10(s->point[s->n - 1].omega_rad_s / s->point[0].omega_rad_s);
}

/* Slope of the segment at its low (high) end of frequency; the mean where noise turns that end. */
static double end_slope(const segment *s, int at_high)
{
    double u;
    size_t i = at_high ? s->n - 2 : 0;
    double rise = segment_ordinate(s, i + 1, &u) - segment_ordinate(s, i, &u);
    double slope = s->sign * rise / log10(s->point[i + 1].omega_rad_s / s->point[i].omega_rad_s);
    return slope > 0 ? slope : mean_slope(s);
}

/* Shift across a gap of the ordinate: from end to end, and the gap at the mean of the slopes beside it. */
static void bridge_gap(const segment *cold, const segment *warm, double gap, an_area_shift *shift)
{
    int cold_continues =
        (cold->low > warm->low) == (cold->sign > 0); /* the cold segment goes on where the warm ends */
    double x_cold = log10(cold->point[cold_continues ? 0 : cold->n - 1].omega_rad_s);
    double x_warm = log10(warm->point[cold_continues ? warm->n - 1 : 0].omega_rad_s);
    shift->gap_decades = 2 * gap / (end_slope(cold, !cold_continues) + end_slope(warm, cold_continues));
    shift->log10_a = x_cold - x_warm + (cold_continues ? -shift->gap_decades : shift->gap_decades);
    shift->u = shift->gap_decades / 2;
}

/* One quantity: what it lacks. */
static an_area_lack area_of(segment cold, segment warm, an_area_shift *shift)
{
    if (!survey(&cold) || !survey(&warm) || cold.sign != warm.sign)
        return AN_LACKS_SLOPE;
    double noise = hypot(cold.u, warm.u) / fmin(mean_slope(&cold), mean_slope(&warm));
    double low = fmax(cold.low, warm.low), high = fmin(cold.high, warm.high);
    size_t n_cold = 1, n_warm = 1;
    if (high > low) {
        double difference = area_under(&cold, low, high, &n_cold) - area_under(&warm, low, high, &n_warm);
        shift->log10_a = difference / (high - low);
    } else if (noise > most_noise_at_gap) {
        return AN_LACKS_SLOPE;
    } else {
        bridge_gap(&cold, &warm, low - high, shift);
    }
    if (shift->gap_decades > widest_gap)
        return AN_LACKS_OVERLAP;
    double n = fmax(1, 0.5 * (double)(n_cold + n_warm));
    shift->u += noise / sqrt(n); /* (2/n)^1/2 s_y / |dy/dx| */
    shift->quantity = quantity_word[cold.quantity];
    /* Nothing relaxes more slowly when it is warmer: a shift that way is a plateau's own rise, not a shift.
     */
    return shift->u <= most_u && shift->log10_a < 0 ? AN_LACKS_NOTHING : AN_LACKS_SLOPE;
}

/* Mean log10 |E*| of the warmer against the colder at equal reduced frequency. */
static double scale_between(const segment *cold, const segment *warm, double log10_a)
{
    double sum = 0;
    size_t n = 0;
    for (size_t i = 0; i < warm->n; i++) {
        double x = log10(warm->point[i].omega_rad_s) + log10_a;
        for (size_t j = 0; j + 1 < cold->n; j++) {
            double x1 = log10(cold->point[j].omega_rad_s), x2 = log10(cold->point[j + 1].omega_rad_s);
            if (x < x1 || x > x2)
                continue;
            double y1 = log10(hypot(cold->point[j].storage_Pa, cold->point[j].loss_Pa));
            double y2 = log10(hypot(cold->point[j + 1].storage_Pa, cold->point[j + 1].loss_Pa));
            sum += log10(hypot(warm->point[i].storage_Pa, warm->point[i].loss_Pa)) -
                   (y1 + (y2 - y1) * (x - x1) / (x2 - x1));
            n++;
            break;
        }
    }
    return n ? sum / (double)n : 0;
}

an_status an_area_between(const an_superpose_input *input, size_t i_cold, an_vertical vertical,
                          an_area_shift *shift, an_error *err)
{
    const an_superpose_isotherm *c = &input->isotherm[i_cold], *w = c + 1;
    segment cold = {.point = input->point + c->first_point, .n = c->n_point};
    segment warm = {.point = input->point + w->first_point, .n = w->n_point};
    if (vertical == AN_VERTICAL_DENSITY_TEMPERATURE) {
        cold.log10_scale = log10(c->temperature_K);
        warm.log10_scale = log10(w->temperature_K);
    }
    *shift = (an_area_shift){.lack = AN_LACKS_SLOPE};
    for (int quantity = 0; quantity < quantities; quantity++) {
        an_area_shift one = {0};
        cold.quantity = warm.quantity = quantity;
        one.lack = area_of(cold, warm, &one);
        int better = one.lack == AN_LACKS_NOTHING && (shift->lack != AN_LACKS_NOTHING || one.u < shift->u);
        if (better)
            *shift = one;
        else if (shift->lack != AN_LACKS_NOTHING && one.lack == AN_LACKS_OVERLAP)
            shift->lack = AN_LACKS_OVERLAP;
        if (vertical == AN_VERTICAL_FREE && quantity == 0 && shift->lack == AN_LACKS_NOTHING)
            break;
    }
    if (shift->lack != AN_LACKS_NOTHING)
        return an_fail(err, AN_E_SCIENCE, NULL,
                       "isotherms %.1f °C and %.1f °C cannot be joined: no %s in storage modulus, loss modulus "
                       "or loss factor; use smaller temperature steps or a wider range of frequencies",
                       c->temperature_K - AN_ZERO_CELSIUS_K, w->temperature_K - AN_ZERO_CELSIUS_K,
                       shift->lack == AN_LACKS_SLOPE ? "slope" : "overlap");
    shift->log10_b = scale_between(&cold, &warm, shift->log10_a);
    return AN_OK;
}
