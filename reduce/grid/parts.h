/* parts.h: what the files of reduce/grid share, and nobody else needs: bursts on their way to isotherms, and
 * series over temperature on their way to glass-transition readings.
 */
#ifndef ANELAST_GRID_PARTS_H
#define ANELAST_GRID_PARTS_H

#include "anelast/grid.h"
#include "anelast/procedure.h"

/* One burst that has a modulus, on its way to an isotherm. */
typedef struct an_member {
    const an_point *point; /* in its points document */
    int i_run;             /* which points document */
    double middle_s; /* [s] middle of the burst since its run's start; NAN: times do not follow one another */
    double u_rate_K_s; /* [K/s] noise part of the burst's own rate; NAN: no rate */
    int isotherm;      /* index after gathering; -1: on a ramp */
} an_member;

/* Bursts that follow one another at one temperature. */
typedef struct an_plateau {
    int i_run;
    int first, n_member;  /* into an_gathering.member */
    double temperature_K; /* [K] mean */
    double rate_K_s;      /* [K/s] from the bursts' own slopes and from burst to burst */
    double u_rate_K_s;    /* [K/s] noise part */
    int cooling;          /* nonzero: reached from above */
    int ramp;             /* nonzero: the temperature was passing through */
    int isotherm;         /* index after gathering; -1: ramp */
} an_plateau;

/* All bursts sorted in. */
typedef struct an_gathering {
    int n_member;
    an_member *member; /* [n_member] by run, then in time; owned */
    int n_plateau;
    an_plateau *plateau; /* [n_plateau] in the same order; owned */
    int n_isotherm;      /* isotherms by rising temperature, heating before cooling */
} an_gathering;

/* Which common sources are one and the same in all runs. */
typedef struct an_sharing {
    int specimens_differ, benches_differ;
    an_geometry_kind kind;
} an_sharing;

/* How cells are made. */
typedef struct an_cell_rules {
    double width_K;     /* [K] greatest distance of a burst from its isotherm's mean */
    double rate_K_s;    /* [K/s] greatest rate of a steady plateau */
    double drift_limit; /* [1] greatest relative difference of the first and the last repeat */
    int n_run;          /* points documents */
    an_sharing sharing;
} an_cell_rules;

/* an_gathering_make: sort the bursts of all documents into plateaus, ramps and isotherms.
 *   points [in] [rules->n_run]; rules [in]; gathering [out] clear with an_gathering_clear
 * Returns AN_OK or AN_E_MEMORY. */
an_status an_gathering_make(const an_points *points, const an_cell_rules *rules, an_gathering *gathering,
                            an_error *err);
void an_gathering_clear(an_gathering *gathering);

/* an_plateau_moving: nonzero where a plateau's rate lies above the limit by more than its noise explains. */
int an_plateau_moving(const an_plateau *plateau, double rate_K_s);

/* an_cells_make: isotherms, cells and ramp of a grid from what was gathered; repeats averaged and compared,
 * scatter. Returns AN_OK or AN_E_MEMORY. */
an_status an_cells_make(const an_gathering *gathering, const an_cell_rules *rules, an_grid *grid,
                        an_error *err);

/* an_returns_check: a run that ends where it was before is compared with itself; a remark of the grid where
 * it changed. Returns AN_OK or AN_E_MEMORY. */
an_status an_returns_check(const an_gathering *gathering, const an_cell_rules *rules, an_grid *grid,
                           an_error *err);

/* an_outliers_mark: mark the cells that do not lie on the smooth curve of their isotherm, with a remark each.
 * Returns AN_OK or AN_E_MEMORY. */
an_status an_outliers_mark(an_grid *grid, an_error *err);

/* an_readings_make: glass-transition readings at every frequency of isotherms and ramp.
 *   u_bias_K [in, K] common uncertainty of the temperature. Returns AN_OK or AN_E_MEMORY. */
an_status an_readings_make(double u_bias_K, an_grid *grid, an_error *err);

/* an_assess: the assessment, from points and finished grid. */
void an_assess(const an_points *points, int n_points, an_grid *grid);

/* One quantity over temperature at one frequency. */
typedef struct an_series {
    int n;
    double *temperature_K; /* [n] [K] rising; owned by the caller */
    double *value;         /* [n] what is read: log10 of a modulus, or of the loss factor */
    double *u;             /* [n] its noise part */
} an_series;

/* an_glass_peak / an_glass_onset: read the temperature of the greatest value, or of the storage onset.
 *   series [in]; reading [in, out] temperature and its uncertainties, or the reason of a refusal, are filled
 * in. */
void an_glass_peak(const an_series *series, an_reading *reading);
void an_glass_onset(const an_series *series, an_reading *reading);

#endif
