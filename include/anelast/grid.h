/* anelast/grid.h: the grid document: points sorted into isotherms, glass-transition readings, repeats and drift, and the
 * assessment that a technician reads. Written by anelast-grid. Missing cells stay missing.
 */
#ifndef ANELAST_GRID_H
#define ANELAST_GRID_H

#include "anelast/points.h"
#include "anelast/procedure.h"

/* One temperature-frequency cell. Repeats of a cell are averaged (ln E, delta) and counted. */
typedef struct an_cell {
    int isotherm;                 /* index into an_grid.isotherm */
    int burst;                    /* of the first point it came from */
    int n_repeat;                 /* points averaged, >= 1 */
    int outlier;                  /* nonzero: marked, kept in the document, left out of fits */
    double temperature_K;         /* [K] */
    double frequency_Hz;          /* [Hz] */
    double storage_Pa, loss_Pa;   /* [Pa] */
    double noise[3];              /* [Pa2] as in an_point */
    double common[AN_SOURCE_COUNT][2]; /* [Pa] as in an_point */
    an_remark_list remarks;
} an_cell;

typedef struct an_isotherm {
    double temperature_K;     /* [K] mean of its cells */
    double u_temperature_K;   /* [K] noise part */
    double set_temperature_K; /* [K] NAN: not said */
    double drift_K;           /* [K] greatest less least of its bursts */
    double rate_K_s;          /* [K/s] of the bursts' own slopes and from burst to burst; NAN: not known */
    double u_rate_K_s;        /* [K/s] noise part */
    int steady;               /* 0: the rate is above the procedure's limit by more than its noise explains */
    int cooling;              /* nonzero: reached from above */
    int first_cell, n_cell;   /* into an_grid.cell, by rising frequency */
} an_isotherm;

typedef enum an_reading_kind { AN_READING_STORAGE_ONSET = 0, AN_READING_LOSS_PEAK, AN_READING_LOSS_FACTOR_PEAK } an_reading_kind;

/* A glass-transition reading at one frequency; after ASTM E1640 and ISO 6721-11. */
typedef struct an_reading {
    an_reading_kind kind;
    double frequency_Hz;    /* [Hz] */
    double temperature_K;   /* [K] NAN: refused */
    double u_noise_K;       /* [K] */
    double u_form_K;        /* [K] from the curve between the temperatures measured */
    double u_common_K;      /* [K] temperature bias */
    int on_ramp;            /* nonzero: from bursts on a ramp, else from isotherms */
    char reason[160];       /* why it was refused; "" where it stands */
} an_reading;

/* What the technician is told. */
typedef enum an_verdict { AN_USABLE = 0, AN_PARTIAL, AN_REPEAT } an_verdict;
enum { AN_REASONS = 8 };
typedef struct an_assessment {
    an_verdict verdict;
    int n_used, n_flagged, n_skipped; /* bursts */
    int n_reason;
    char reason[AN_REASONS][240];     /* plain words, the weightiest first; with what to do before unclamping */
    char largest_correction[240];     /* in words, with burst, rung and size */
} an_assessment;

/* Repeats within runs and replicates between runs: pooled standard deviations, NAN where nothing was repeated. They are
 * told apart from the noise: a specimen's own scatter is no scatter of its bursts. */
typedef struct an_scatter {
    int n_run;                /* points documents that went in */
    double between_modulus;   /* [1] ln|E*|, from run to run */
    double between_delta_rad; /* [rad] */
    double within_modulus;    /* [1] from repeat to repeat within a run */
    double within_delta_rad;  /* [rad] */
} an_scatter;

typedef struct an_grid {
    char id[160];
    an_made made;
    an_specimen specimen;
    an_apparatus apparatus;       /* for the temperature's common uncertainty */
    an_remark_list remarks;
    double strain_most;           /* [1] greatest strain amplitude of the bursts that have a modulus; NAN: not known */
    int n_isotherm;
    an_isotherm *isotherm;        /* [n_isotherm] heating, then cooling, each by rising temperature; owned */
    int n_cell;
    an_cell *cell;                /* [n_cell] by isotherm, then by rising frequency; owned */
    int n_ramp;
    an_cell *ramp;                /* [n_ramp] bursts on a ramp by rising temperature, isotherm -1: for readings; owned */
    an_scatter scatter;
    int n_reading;
    an_reading *reading;          /* [n_reading], owned */
    an_assessment assessment;
} an_grid;

/* an_grid_init, an_grid_clear: an empty grid; release all that it holds and make it empty. */
void an_grid_init(an_grid *grid);
void an_grid_clear(an_grid *grid);

/* an_grid_read: read and validate a grid document.
 *   path [in] file, "-" for standard input; grid [out] init'ed by the caller, who clears it, also after a refusal;
 *   sha256 [out, nullable] hex of the document's bytes.
 * Returns AN_OK, or AN_E_IO, AN_E_DOCUMENT, AN_E_VALUE, AN_E_UNIT, AN_E_LIMIT, AN_E_MEMORY. */
an_status an_grid_read(const char *path, an_grid *grid, char sha256[65], an_error *err);

/* an_grid_write: the content of a grid document whose writer was started with the root "grid". */
void an_grid_write(an_xml_writer *writer, const an_grid *grid);

/* an_assessment_write, an_assessment_read: the element <assessment>, which master documents carry on.
 *   root [in] the node that has it as a child. Returns AN_OK, AN_E_DOCUMENT or AN_E_VALUE. */
void an_assessment_write(an_xml_writer *writer, const an_assessment *assessment);
an_status an_assessment_read(const an_xml_node *root, an_assessment *assessment, an_error *err);

/* an_grid_make: one or many points documents to a grid: isotherms, cells, readings, drift check, assessment.
 *   points [in] [n_points]; procedure [in]; grid [out] init'ed by the caller.
 * Isotherms go by measured temperature: within the procedure's width of their mean, heating and cooling apart. Bursts on a
 * ramp join none of them. Outliers are marked, not removed. Several documents are replicates: one cell is the mean of the
 * runs' means in ln|E*| and delta.
 * Returns AN_OK, AN_DUBIOUS (remarks of flag or more, or only a ramp), AN_E_SCIENCE where neither isotherm nor ramp is left,
 * AN_E_MEMORY. The verdict of the assessment:
 *   repeat   a halt, or more than half of the bursts skipped or held, or nothing to grid;
 *   partial  some bursts skipped or held, or a hold on the run;
 *   usable   otherwise, flags or not. */
an_status an_grid_make(const an_points *points, int n_points, const an_procedure *procedure, an_grid *grid, an_error *err);

const char *an_reading_word(an_reading_kind kind); /* "storage onset", "loss peak", "loss factor peak" */
const char *an_verdict_word(an_verdict verdict);   /* "usable", "partial", "repeat" */

#endif
