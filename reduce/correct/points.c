/* Points in memory: words of sources and rungs, a growing list, and what follows from a point's covariances.
 * Stage: correct. */
#include "anelast/points.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const char *const SOURCES[AN_SOURCE_COUNT] = {
    [AN_SOURCE_LENGTH] = "length",
    [AN_SOURCE_WIDTH] = "width",
    [AN_SOURCE_THICKNESS] = "thickness",
    [AN_SOURCE_DIAMETER] = "diameter",
    [AN_SOURCE_HEIGHT] = "height",
    [AN_SOURCE_AREA] = "area",
    [AN_SOURCE_ADDED_LENGTH] = "added length",
    [AN_SOURCE_SHEAR_TERM] = "shear term",
    [AN_SOURCE_CONSTRAINT] = "constraint",
    [AN_SOURCE_FORCE_GAIN] = "force gain",
    [AN_SOURCE_DISPLACEMENT_GAIN] = "displacement gain",
    [AN_SOURCE_DELAY] = "channel delay",
    [AN_SOURCE_MOVING_MASS] = "moving mass",
    [AN_SOURCE_SHAFT] = "shaft",
    [AN_SOURCE_COMPLIANCE] = "frame compliance",
    [AN_SOURCE_TRANSDUCER] = "transducer",
};

static const char *const RUNGS[AN_RUNG_COUNT] = {
    [AN_RUNG_CHANNEL] = "channel",
    [AN_RUNG_PARALLEL] = "parallel",
    [AN_RUNG_SERIES] = "series",
    [AN_RUNG_END] = "end",
};

static const char *const RUNG_PHRASES[AN_RUNG_COUNT] = {
    [AN_RUNG_CHANNEL] = "channel gain and delay",
    [AN_RUNG_PARALLEL] = "mass and shaft",
    [AN_RUNG_SERIES] = "frame compliance",
    [AN_RUNG_END] = "end, shear and constraint terms",
};

const char *an_source_word(an_source source)
{
    return SOURCES[source];
}

an_source an_source_find(const char *word)
{
    int i = 0;
    while (i < AN_SOURCE_COUNT && strcmp(SOURCES[i], word) != 0)
        i++;
    return (an_source)i;
}

const char *an_rung_word(an_rung rung)
{
    return RUNGS[rung];
}

const char *an_rung_phrase(an_rung rung)
{
    return RUNG_PHRASES[rung];
}

void an_points_init(an_points *points)
{
    memset(points, 0, sizeof *points);
    an_specimen_init(&points->specimen);
    an_apparatus_init(&points->apparatus);
}

void an_points_clear(an_points *points)
{
    for (int i = 0; i < points->n_point; i++)
        an_remark_list_clear(&points->point[i].remarks);
    free(points->point);
    an_made_clear(&points->made);
    an_remark_list_clear(&points->remarks);
    an_points_init(points);
}

/* Every value not known yet. */
static an_point unknown_point(void)
{
    an_point p = {
        .start_s = NAN,
        .temperature_K = NAN,
        .u_temperature_K = NAN,
        .temperature_rate_K_s = NAN,
        .set_temperature_K = NAN,
        .frequency_Hz = NAN,
        .u_frequency_Hz = NAN,
        .set_frequency_Hz = NAN,
        .n_cycle = NAN,
        .n_cycle_dropped = NAN,
        .displacement_m = NAN,
        .force_N = NAN,
        .static_force_N = NAN,
        .strain = NAN,
        .static_strain = NAN,
        .measured_stiffness = {NAN, NAN},
        .specimen_stiffness = {NAN, NAN},
        .stiffness_compliance = NAN,
        .storage_Pa = NAN,
        .loss_Pa = NAN,
        .noise = {NAN, NAN, NAN},
        .snr_dB = NAN,
        .harmonic = {NAN, NAN},
    };
    for (int i = 0; i < AN_RUNG_COUNT; i++)
        p.rung[i][0] = p.rung[i][1] = NAN;
    return p;
}

an_point *an_points_add(an_points *points)
{
    if (points->n_point == points->capacity) {
        int capacity = points->capacity ? 2 * points->capacity : 64;
        an_point *grown = realloc(points->point, (size_t)capacity * sizeof *grown);
        if (!grown)
            return NULL;
        points->point = grown;
        points->capacity = capacity;
    }
    an_point *point = &points->point[points->n_point++];
    *point = unknown_point();
    return point;
}

void an_point_common(const an_point *point, double covariance[3])
{
    covariance[0] = covariance[1] = covariance[2] = 0;
    for (int i = 0; i < AN_SOURCE_COUNT; i++) {
        double storage = point->common[i][0], loss = point->common[i][1];
        covariance[0] += storage * storage;
        covariance[1] += storage * loss;
        covariance[2] += loss * loss;
    }
}

/* Standard uncertainty of E''/E' from a covariance: d(tan) = (dE'' - tan dE') / E'. */
static double u_ratio(double ratio, double storage, const double c[3])
{
    return sqrt(fmax(c[2] - 2 * ratio * c[1] + ratio * ratio * c[0], 0)) / fabs(storage);
}

void an_point_loss_factor(const an_point *point, double *loss_factor, double *u_noise, double *u_common)
{
    double common[3];
    an_point_common(point, common);
    *loss_factor = point->loss_Pa / point->storage_Pa;
    *u_noise = u_ratio(*loss_factor, point->storage_Pa, point->noise);
    *u_common = u_ratio(*loss_factor, point->storage_Pa, common);
}
